"""Reading a job file: from what was typed to a job as understood, or to a refusal that names every finding.

The file is TOML. Defaults are filled in first, then each key is judged by its model, then values that follow from
others are derived, and at last the rules between keys are heard, all of them, on whatever was understood.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from fabricate.job_block_rules import BLOCK_RULES
from fabricate.job_derive import derived, filled_in
from fabricate.job_facts import Data, Facts, UnknownFactError
from fabricate.job_feature_rules import FEATURE_RULES
from fabricate.job_findings import Finding, finding_of, key_of
from fabricate.job_hole_rules import HOLE_RULES
from fabricate.job_keys import Job
from fabricate.job_questions import questions
from fabricate.job_rules import RULES, Rule
from fabricate.job_text import job_hash, job_text
from fabricate.job_turning_rules import TURNING_RULES
from fabricate.measures import Units
from profiles.errors import JobError

__all__ = ["Job", "job_hash", "job_text", "parse_job", "questions", "read_job"]

_LARGEST_FILE = 1_000_000
_MOST_FINDINGS = 40
_PLACE = re.compile(r"\(at line (\d+), column (\d+)\)")
_BARE_POINT = re.compile(r"=\s*[+-]?(\.\d|\d+\.\s*(#|$))")
_COMMA_IN_NUMBER = re.compile(r"=\s*[+-]?\d+,\d+\s*(#.*)?$")
# A key that follows from others is not missing when one of those was typed: what is wrong is said of that one.
_STANDS_FOR = {
    "reflector.focal_length": ("reflector.depth",),
    "sheet.thickness": ("sheet.gauge", "sheet.gauge_system"),
}


def read_job(path: Path) -> Job:
    """Read a job file.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    Job
        The job as understood.

    Raises
    ------
    JobError
        If the file cannot be read or what it says cannot be made; names every finding.
    """
    return parse_job(_file_text(path), name=str(path))


def _file_text(path: Path) -> str:
    if path.is_dir():
        raise JobError(f"{path}: is a folder; allowed: a job file; do: name the file in it")
    try:
        with path.open("rb") as stream:
            content = stream.read(_LARGEST_FILE + 1)
    except FileNotFoundError as error:
        action = "check the name; `dishwright new` writes a starter job"
        raise JobError(f"{path}: no such file; allowed: a job file; do: {action}") from error
    except OSError as error:
        raise JobError(
            f"{path}: cannot be read: {error.strerror}; allowed: a readable job file; do: check it"
        ) from error
    if len(content) > _LARGEST_FILE:
        raise JobError(
            f"{path}: is over {_LARGEST_FILE} bytes long; allowed: at most {_LARGEST_FILE}; "
            "do: check that it is a job file"
        )
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content[: error.start].count(b"\n") + 1
        raise JobError(
            f"{path}: line {line} is not UTF-8 (byte 0x{content[error.start]:02x}); allowed: a text file in UTF-8; "
            "do: save it again as UTF-8"
        ) from error


def parse_job(text: str, *, name: str) -> Job:
    """Understand the text of a job file.

    Parameters
    ----------
    text : str
        TOML.
    name : str
        Name of the file, for messages.

    Returns
    -------
    Job
        The job as understood.

    Raises
    ------
    JobError
        If the text is not TOML or what it says cannot be made; names every finding, one in a line.
    """
    job, findings = _understood(_toml(text, name))
    if job is None or findings:
        raise JobError(_report(findings, name))
    return job


def _report(findings: Iterable[Finding], name: str) -> str:
    lines = list(dict.fromkeys(f"{name}: {finding}" for finding in findings))
    if len(lines) <= _MOST_FINDINGS:
        return "\n".join(lines)
    more = f"{name}: more findings follow; allowed: none; do: correct these first"
    return "\n".join((*lines[:_MOST_FINDINGS], more))


def _toml(text: str, name: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise JobError(f"{name}: {_syntax(text, str(error))}") from error
    except (ValueError, RecursionError) as error:
        # A number of thousands of digits, or arrays nested by the hundred.
        raise JobError(f"{name}: is not a job file: {error}; allowed: TOML; do: check the file") from error


def _syntax(text: str, message: str) -> str:
    place = _PLACE.search(message)
    reason = _PLACE.sub("", message).replace("(at end of document)", "at the end of the file").strip()
    if place is None:
        return f"not TOML: {reason}; allowed: TOML; do: complete the last line"
    line = int(place[1])
    where = f"line {line}, column {place[2]}: not TOML: {reason}"
    typed = text.splitlines()[line - 1] if line <= len(text.splitlines()) else ""
    if _COMMA_IN_NUMBER.search(typed):
        return f"{where}: {typed.strip()}; allowed: numbers with a decimal point; do: a point is the decimal mark"
    if _BARE_POINT.search(typed):
        return (
            f"{where}: {typed.strip()}; allowed: a digit on both sides of the point; do: write 0.5 for .5, 5.0 for 5."
        )
    return f"{where}: {typed.strip()[:80]}; allowed: TOML, key = value; do: correct the line"


def _units(data: Data) -> Units:
    return "inch" if data.get("units") == "inch" else "mm"


def _validated(filled: Data, units: Units) -> tuple[Job | None, list[Any]]:
    try:
        return Job.model_validate(filled, context={"units": units}), []
    except ValidationError as error:
        return None, list(error.errors(include_url=False))


def _understood(typed: Data) -> tuple[Job | None, list[Finding]]:
    units = _units(typed)
    filled = filled_in(Job, typed, units)
    job, errors = _validated(filled, units)
    facts = _facts(filled, typed, errors, units)
    values, findings = derived(facts)
    if values:
        filled = _with_values(filled, values)
        job, errors = _validated(filled, units)
        facts = _facts(filled, typed, errors, units)
    own = _first_of_each(error for error in errors if not _follows(error, facts))
    # Twice as many as are shown, as some say the same: a large file that is no job has tens of thousands.
    translated = [finding_of(error, units) for error in own[: 2 * _MOST_FINDINGS]]
    rules = (
        *RULES,
        *(TURNING_RULES if "turning" in typed else ()),
        *(BLOCK_RULES if "follow_block" in typed else ()),
        *FEATURE_RULES,
        *HOLE_RULES,
    )
    return job, [*translated, *findings, *(finding for rule in rules for finding in _heard(rule, facts))]


def _facts(filled: Data, typed: Data, errors: Iterable[Mapping[str, Any]], units: Units) -> Facts:
    return Facts(filled, typed, frozenset(key_of(error["loc"]) for error in errors), units)


def _first_of_each(errors: Iterable[Mapping[str, Any]]) -> list[Mapping[str, Any]]:
    """Return one error for each value: a value that may be of two types is refused by both."""
    first: dict[tuple[int | str, ...], Mapping[str, Any]] = {}
    for error in errors:
        first.setdefault((key_of(error["loc"]), *(part for part in error["loc"] if isinstance(part, int))), error)
    return list(first.values())


def _follows(error: Mapping[str, Any], facts: Facts) -> bool:
    sources = _STANDS_FOR.get(".".join(str(part) for part in error["loc"]), ())
    return error["type"] == "missing" and any(facts.was_typed(source) for source in sources)


def _with_values(filled: Data, values: Mapping[str, Any]) -> dict[str, Any]:
    result = dict(filled)
    for key, value in values.items():
        *path, name = key.split(".")
        table = result
        for part in path:
            table[part] = dict(table[part])
            table = table[part]
        table[name] = value
    return result


def _heard(rule: Rule, facts: Facts) -> list[Finding]:
    findings: list[Finding] = []
    try:
        findings.extend(rule(facts))
    except UnknownFactError:
        # What the rule asks for was refused already; its own findings up to there stand.
        return findings
    return findings
