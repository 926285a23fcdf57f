"""A starter job from what was typed: each given value is checked by the reader before anything is written."""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Iterable, Mapping
from typing import Any

from fabricate.job import parse_job
from fabricate.materials import has_material, nearest_names
from fabricate.starter import JobValue, starter_gaps, starter_text
from profiles.errors import JobError

NAME = "new job"
_BARE_POINT = re.compile(r"[+-]?(\.\d+|\d+\.)")


def settings(typed: Iterable[str]) -> dict[str, JobValue]:
    """Return values by dotted key from texts such as ``forming.springback.law=none``.

    Parameters
    ----------
    typed : iterable of str
        ``KEY=VALUE``; a value that is no text, switch, number or array of these in TOML is taken for a text.

    Returns
    -------
    dict
        Value by dotted key.

    Raises
    ------
    JobError
        If there is no ``=`` or no key.

    Examples
    --------
    >>> settings(["turning.spindle_limit=500", "forming.springback.law=none"])
    {'turning.spindle_limit': 500, 'forming.springback.law': 'none'}
    """
    found: dict[str, JobValue] = {}
    for text in typed:
        key, equals, value = text.partition("=")
        if not equals or not key.strip():
            raise JobError(
                f'--set: value is "{text}"; allowed: KEY=VALUE, such as forming.springback.law=none; do: '
                "write the key of the job file, =, and its value"
            )
        found[key.strip()] = _value(value.strip())
    return found


def _value(text: str) -> Any:
    try:
        value = tomllib.loads(f"value = {text}")["value"]
    except (ValueError, RecursionError):
        return float(text) if _BARE_POINT.fullmatch(text) else text
    return value if _is_job_value(value) else text


def _is_job_value(value: object) -> bool:
    """Whether a value is one that a job file holds: dates and tables are none."""
    if isinstance(value, list):
        return all(_is_job_value(item) for item in value)
    return isinstance(value, str | bool | int | float)


def typed_number(text: str) -> JobValue:
    """Return a number as it was typed, or the text itself, for the job's reader to refuse.

    Parameters
    ----------
    text : str
        What was typed.

    Returns
    -------
    float or str
        A point without a digit beside it is no matter here.

    Examples
    --------
    >>> typed_number(".5"), typed_number("1/8")
    (0.5, '1/8')
    """
    value = _value(text.strip())
    return float(value) if isinstance(value, int) and not isinstance(value, bool) else value


def unknown_sheet(given: Mapping[str, JobValue]) -> str:
    """Return a remark on a sheet that the table lacks and whose properties are not given, or an empty text.

    Parameters
    ----------
    given : mapping
        Value by dotted key.

    Returns
    -------
    str
        With the names that come near.
    """
    name = given.get("sheet.material")
    if name is None or has_material(str(name), "sheet") or any(key.startswith("sheet.properties.") for key in given):
        return ""
    near = ", ".join(nearest_names(str(name), "sheet"))
    hint = f"; near: {near}" if near else ""
    return f'sheet.material "{name}" is not in the table, so its properties are asked for{hint}'


def new_job(given: Mapping[str, JobValue], *, with_turning: bool) -> tuple[str, tuple[str, ...]]:
    """Return a starter job and the keys that it still leaves to be stated.

    Parameters
    ----------
    given : mapping
        Value by dotted key.
    with_turning : bool
        Lay out the table for a turning program.

    Returns
    -------
    text : str
        The commented job file.
    gaps : tuple of str
        Dotted keys.

    Raises
    ------
    JobError
        If a given key or value is not allowed.
    """
    for key, value in given.items():
        _check_printable(key, value)
    tables = ("turning",) if with_turning else ()
    text, gaps = starter_text(given, tables=tables), starter_gaps(given, tables=tables)
    try:
        parse_job(text, name=NAME)
    except JobError as error:
        # A starter job has gaps: only what is said of the values that were given counts.
        said = [line for line in str(error).splitlines() if line.split(": ")[1] in given]
        if said:
            raise JobError("\n".join(said)) from error
    return text, gaps


def _check_printable(key: str, value: JobValue) -> None:
    if isinstance(value, str) and not value.isprintable():
        raise JobError(
            f"{NAME}: {key}: value is {json.dumps(value)}; allowed: one line of printable characters; do: correct it"
        )
    if isinstance(value, list):
        for item in value:
            _check_printable(key, item)
