"""The job file as text: canonical TOML with every default written out, and its hash."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterator
from typing import Any

from fabricate.forming_keys import Springback
from fabricate.job_keys import Job
from fabricate.job_table import Table
from fabricate.springback import LAWS as SPRINGBACK_LAWS


def toml_value(value: Any) -> str:
    """Return a value as TOML writes it, numbers with every digit that they need.

    Parameters
    ----------
    value : object
        A text, a switch, a number, or an array of these.

    Returns
    -------
    str
        TOML.

    Examples
    --------
    >>> toml_value((("a", 1.5), True))
    '[["a", 1.5], true]'
    """
    if isinstance(value, str):
        return json.dumps(value, ensure_ascii=False)
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, list | tuple):
        return f"[{', '.join(toml_value(item) for item in value)}]"
    return repr(value)


def job_text(job: Job) -> str:
    """Return the job as canonical TOML: every default written out, keys in one order, numbers by their shortest digits.

    Parameters
    ----------
    job : Job
        The job.

    Returns
    -------
    str
        Text that `fabricate.job.parse_job` reads back as the same job.
    """
    return "\n".join(_lines(job, "")).lstrip("\n") + "\n"


def _lines(table: Table, path: str) -> Iterator[str]:
    values = {name: getattr(table, name) for name in type(table).model_fields}
    stated = {name: value for name, value in values.items() if value is not None and _is_used(table, name)}
    leaves = [f"{name} = {toml_value(value)}" for name, value in stated.items() if not isinstance(value, Table)]
    if path and (leaves or not any(isinstance(value, Table) for value in stated.values())):
        yield from ("", f"[{path}]")
    yield from leaves
    for name, value in stated.items():
        if isinstance(value, Table):
            yield from _lines(value, f"{path}.{name}".lstrip("."))


def _is_used(table: Table, name: str) -> bool:
    """Whether a key says anything: an option of springback's means nothing to another law."""
    if not isinstance(table, Springback) or all(name not in row.options for row in SPRINGBACK_LAWS.values()):
        return True
    row = SPRINGBACK_LAWS[table.law]
    return name in (*row.one_of, *row.options)


def job_hash(text: str) -> str:
    """Return the hash that ties files to a job.

    Parameters
    ----------
    text : str
        The job file.

    Returns
    -------
    str
        SHA-256 of its UTF-8 bytes, 64 hexadecimal digits.
    """
    return hashlib.sha256(text.encode("utf-8")).hexdigest()
