"""What is wrong with a job file, in words: each finding names the key, its value, what is allowed and what to do.

The errors of the models are translated here, so that a reader never sees the vocabulary of the library.
"""

from __future__ import annotations

import json
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache
from typing import Any, get_args

from fabricate.job_keys import Job
from fabricate.job_table import Table, measure_of
from fabricate.measures import Units

Place = tuple[int | str, ...]

_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+")
_NUMBER = re.compile(r"[+-]?\d+(\.\d+)?([eE][+-]?\d+)?")

_ADVICE = {
    "units": "state the unit of every length here",
    "reflector.focal_length": "state focal_length, or depth in its place",
    "reflector.reflecting_face": "say which face is the mirror",
    "sheet.thickness": "state thickness, or gauge with gauge_system",
    "forming.contact_face": "say which face of the sheet lies on the mould",
    "forming.springback.law": 'state it; law = "none" says that there is none',
    "forming.thinning.law": 'state it; law = "none" says that there is none',
    "turning.spindle_limit": "state it: no turning program is written without a spindle limit",
    "turning.spindle_limit_untrued": "state it: stock that does not run true yet needs its own limit",
}
_LOOK_UP = "look the word up in the manual of this lathe's control; no default is safe"


@dataclass(frozen=True)
class Finding:
    """One thing wrong with one key.

    Parameters
    ----------
    key : str
        Dotted key.
    problem : str
        What is wrong, with the value.
    allowed : str
        What is allowed.
    action : str
        What to do.
    """

    key: str
    problem: str
    allowed: str
    action: str

    def __str__(self) -> str:
        return f"{self.key}: {self.problem}; allowed: {self.allowed}; do: {self.action}"


def shown(value: Any, *, unit: str = "") -> str:
    """Return a value as it stands in the file, shortened.

    Parameters
    ----------
    value : object
        As read from TOML.
    unit : str
        Unit to write behind a number.

    Returns
    -------
    str
        The value in words.
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, int | float):
        return f"{str(value)[:40]} {unit}".rstrip()
    if isinstance(value, list | tuple):
        text = f"[{', '.join(shown(item) for item in value)}]"
    else:
        text = json.dumps(value, ensure_ascii=False) if isinstance(value, str) else str(value)
    return text if len(text) <= 60 else f"{text[:56]} …"


@cache
def _table_at(path: tuple[str, ...]) -> type[Table] | None:
    table: type[Table] = Job
    for name in path:
        inner = inner_table(table, name) if name in table.model_fields else None
        if inner is None:
            return None
        table = inner
    return table


@cache
def inner_table(table: type[Table], name: str) -> type[Table] | None:
    """Return the model of a table inside a table.

    Parameters
    ----------
    table : type of Table
        The outer model.
    name : str
        A key of it.

    Returns
    -------
    type of Table or None
        None where the key holds a value.
    """
    annotation = table.model_fields[name].annotation
    members = (annotation, *get_args(annotation))
    return next((member for member in members if isinstance(member, type) and issubclass(member, Table)), None)


@cache
def all_keys() -> tuple[str, ...]:
    """Return every key of the job file, dotted, tables left out.

    Returns
    -------
    tuple of str
        In the order of the file.
    """
    return tuple(_keys_of(Job, ""))


def _keys_of(table: type[Table], prefix: str) -> Iterator[str]:
    for name in table.model_fields:
        inner = inner_table(table, name)
        if inner is None:
            yield prefix + name
        else:
            yield from _keys_of(inner, f"{prefix}{name}.")


def allowed_values(key: str, units: Units) -> str:
    """Return what is allowed for a key, in words.

    Parameters
    ----------
    key : str
        Dotted key of the job.
    units : {"mm", "inch"}
        Units of the job.

    Returns
    -------
    str
        Words, bounds with their unit, or the kind of value.
    """
    *path, name = key.split(".")
    table = _table_at(tuple(path))
    if table is None or name not in table.model_fields:
        return "the keys of the job file"
    measure = measure_of(table, name)
    if measure is not None:
        return measure.allowed(units)
    return _kind_of_value(table, name)


def _kind_of_value(table: type[Table], name: str) -> str:
    annotation = table.model_fields[name].annotation
    words = [word for part in (annotation, *get_args(annotation)) for word in get_args(part) or (part,)]
    texts = [f'"{word}"' for word in dict.fromkeys(words) if isinstance(word, str)]
    if texts:
        return ", ".join(texts)
    inner = inner_table(table, name)
    if inner is not None:
        return f"a table with the keys {', '.join(inner.model_fields)}"
    return "true or false" if annotation is bool else "a whole number or a text"


def _unknown(place: Place, value: Any) -> Finding:
    key = dotted(place)
    *path, name = (str(part) for part in place)
    table = _table_at(tuple(path)) or Job
    near = get_close_matches(name, list(table.model_fields), n=1, cutoff=0.6)
    full = [".".join((*path, match)) for match in near] or _elsewhere(name)
    problem = f"unknown key, its value is {shown(value)}"
    if full:
        return Finding(key, problem, f"nearest known key {full[0]}", f"write {full[0]} or remove it")
    return Finding(key, problem, f"the keys {', '.join(table.model_fields)}", "correct the name or remove it")


def _elsewhere(name: str) -> list[str]:
    by_name: dict[str, str] = {}
    for key in (*_tables(), *all_keys()):
        by_name.setdefault(key.rsplit(".", maxsplit=1)[-1], key)
    return [by_name[match] for match in get_close_matches(name, list(by_name), n=1, cutoff=0.6)]


@cache
def _tables() -> tuple[str, ...]:
    parents = (key.split(".")[:-1] for key in all_keys())
    return tuple(dict.fromkeys(".".join(parent) for parent in parents if parent))


def dotted(place: Place) -> str:
    """Return the dotted key of a place, array indices left out.

    Parameters
    ----------
    place : tuple of str and int
        Names of tables and key, indices of arrays.

    Returns
    -------
    str
        Dotted key; characters that cannot be printed are escaped.
    """
    names = (part for part in place if isinstance(part, str))
    return ".".join(name if name.isprintable() else ascii(name) for name in names)


def key_of(place: Place) -> str:
    """Return the dotted key of a place inside the models: what the library adds for the members of a union is cut.

    Parameters
    ----------
    place : tuple of str and int
        Where the library found an error.

    Returns
    -------
    str
        Dotted key.
    """
    parts: list[str] = []
    table: type[Table] | None = Job
    for part in place:
        if table is None or not isinstance(part, str):
            break
        parts.append(part)
        table = inner_table(table, part) if part in table.model_fields else None
    return ".".join(parts)


def _number_in_words(value: Any) -> str:
    if isinstance(value, str) and _DECIMAL_COMMA.fullmatch(value.strip()):
        return f"a point is the decimal mark: write {value.strip().replace(',', '.')} without quotation marks"
    if isinstance(value, str) and _NUMBER.fullmatch(value.strip()):
        return f"write {value.strip()} without quotation marks"
    return ""


_STANDARD_ACTIONS = {
    "finite_number": "write a finite number; NaN and infinity cannot be made",
    "bounds": "correct the value",
    "literal_error": "write one of these words in quotation marks",
}


def _action(kind: str, key: str, value: Any) -> str:
    if key.startswith("turning.control.") and kind in {"missing", "literal_error"}:
        return _LOOK_UP
    if kind == "missing":
        return _ADVICE.get(key, "state it")
    if kind == "int_type" and isinstance(value, float) and value.is_integer() and abs(value) < 1e6:
        return f"write {value:.0f} without a point"
    return _number_in_words(value) or _STANDARD_ACTIONS.get(kind, "correct the value")


def finding_of(error: Mapping[str, Any], units: Units) -> Finding:
    """Translate one error of the models.

    Parameters
    ----------
    error : mapping
        An entry of the library's list of errors: type, loc and input.
    units : {"mm", "inch"}
        Units of the job.

    Returns
    -------
    Finding
        The same in words.
    """
    kind, place, value = error["type"], error["loc"], error["input"]
    if kind == "extra_forbidden":
        return _unknown(place, value)
    key = key_of(place)
    if kind == "missing":
        row = len(place) > key.count(".") + 1
        problem = "a row is too short" if row else "value is missing"
        return Finding(key, problem, allowed_values(key, units), _action(kind, key, value))
    return Finding(
        key, f"value is {_with_unit(key, value, units)}", allowed_values(key, units), _action(kind, key, value)
    )


def _with_unit(key: str, value: Any, units: Units) -> str:
    *path, name = key.split(".")
    table = _table_at(tuple(path))
    measure = measure_of(table, name) if table is not None else None
    return shown(value, unit="" if measure is None or "," in measure.unit(units) else measure.unit(units))
