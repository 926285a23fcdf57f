"""The starter job: a commented job file with what the shop has in hand filled in.

What is required and not in hand stays behind a comment sign, marked ``<-- to be stated``; the reader refuses the file
until it is. Nothing that no default is safe for, such as springback, shrinkage or a word of the control, is invented.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from textwrap import wrap
from typing import Any, Literal

from fabricate.job_findings import all_keys, allowed_values, inner_table, shown
from fabricate.job_keys import Job
from fabricate.job_table import Table, measure_of
from fabricate.job_text import toml_value
from fabricate.law_table import LawRow
from fabricate.materials import has_material, material
from fabricate.measures import Units
from fabricate.springback import LAWS as SPRINGBACK_LAWS
from fabricate.thinning import LAWS as THINNING_LAWS
from profiles.errors import JobError

JobValue = str | bool | int | float | Sequence["JobValue"]
State = Literal["written", "to be stated", "left out"]

_MARK = "  # <-- to be stated"
_WIDTH = 100
_PROPERTIES = "sheet.properties"
_NEEDED_PROPERTIES = ("youngs_modulus_mpa", "poisson", "yield_mpa", "density_kg_m3")
_HEAD = (
    "# A job for dishwright. What follows # is comment.",
    "# A line marked <-- to be stated needs its value: take away the # in front of the key and write it.",
    "# A point is the decimal mark. Unknown keys are refused.",
)
_TABLES_OF_LAWS: Mapping[str, Mapping[str, LawRow[Any]]] = {
    "forming.springback": SPRINGBACK_LAWS,
    "forming.thinning": THINNING_LAWS,
}
_NO_TURNING = (
    "",
    "# Without a [turning] table no turning program is written.",
)


@dataclass(frozen=True)
class Starter:
    """What the shop has in hand.

    Parameters
    ----------
    given : mapping
        Value by dotted key of the job file.
    tables : collection of str
        Optional tables to lay out beside those that a given key opens: ``"turning"``, ``"sheet.properties"``.

    Raises
    ------
    JobError
        If a given key is no key of the job file; names the nearest one.
    """

    given: Mapping[str, JobValue]
    tables: Collection[str] = ()

    def __post_init__(self) -> None:
        for key, value in self.given.items():
            if key not in all_keys():
                near = get_close_matches(key, all_keys(), n=1, cutoff=0.5) or ["the keys of the job file"]
                raise JobError(
                    f"{key}: unknown key, its value is {shown(value)}; allowed: {near[0]}; do: correct the key"
                )

    @property
    def units(self) -> Units | None:
        """Units of the job, none where they are not in hand."""
        stated = self.given.get("units")
        return "inch" if stated == "inch" else "mm" if stated == "mm" else None

    def lays_out(self, path: str) -> bool:
        """Say whether an optional table is laid out.

        Parameters
        ----------
        path : str
            Dotted name of the table.

        Returns
        -------
        bool
            True where it was asked for, holds a given key, or describes a sheet that the table lacks.
        """
        opened = path in self.tables or any(key.startswith(f"{path}.") for key in self.given)
        return opened or (path == _PROPERTIES and self._own_sheet())

    def _own_sheet(self) -> bool:
        name = self.given.get("sheet.material")
        return name is not None and not has_material(str(name), "sheet")

    def state(self, key: str, default: JobValue | None) -> State:
        """Return what becomes of a key.

        Parameters
        ----------
        key : str
            Dotted key.
        default : object
            Its default; none where it has none.

        Returns
        -------
        {"written", "to be stated", "left out"}
            Written with its value or default; marked for the reader; or shown behind a comment sign only.
        """
        if key in self.given:
            return "written"
        special = self._of_alternatives(key) or self._of_law(key) or self._of_material(key)
        if special is not None:
            return special
        return "left out" if default is None else "written"

    def _of_alternatives(self, key: str) -> State | None:
        other = {"reflector.focal_length": "reflector.depth", "sheet.thickness": "sheet.gauge"}.get(key)
        if other is not None:
            return "left out" if other in self.given else "to be stated"
        return "to be stated" if key == "sheet.gauge_system" and "sheet.gauge" in self.given else None

    def _of_law(self, key: str) -> State | None:
        table, _, name = key.rpartition(".")
        laws = _TABLES_OF_LAWS.get(table)
        if laws is None or name == "law":
            return None
        row = laws.get(str(self.given.get(f"{table}.law")))
        if row is None:
            return "left out"
        if name in row.options:
            return "written"
        answered = any(f"{table}.{other}" in self.given for other in row.one_of)
        return "to be stated" if name in row.one_of[:1] and not answered else "left out"

    def _of_material(self, key: str) -> State | None:
        if key == "forming.shrinkage.percent" and not self._metal():
            return "to be stated"
        if key == "turning.rim_speed_limit" and self._needs_rim_speed():
            return "to be stated"
        hot = self.given.get("forming.shrinkage.reference") == "hot-mould"
        if hot and key in {"forming.shrinkage.mould_expansion", "forming.shrinkage.temperature_rise"}:
            return "to be stated"
        table, _, name = key.rpartition(".")
        needed = table == _PROPERTIES and name in _NEEDED_PROPERTIES and self._own_sheet()
        return "to be stated" if needed else None

    def _metal(self) -> bool:
        name = self.given.get("sheet.material")
        kind = self.given.get("sheet.properties.kind")
        return kind == "metal" or (name is not None and not self._own_sheet() and material(str(name)).kind == "metal")

    def _needs_rim_speed(self) -> bool:
        name = str(self.given.get("mould.material", ""))
        return not has_material(name, "mould") or material(name, use="mould").rim_speed_limit_required


@dataclass(frozen=True)
class _Line:
    """One key of the starter job: comment above, and the line itself."""

    key: str
    state: State
    text: str
    comment: str


def _keys(starter: Starter, table: type[Table], path: str) -> Iterator[_Line | str]:
    """Yield the head of the table, then its keys, then the tables inside it."""
    names = list(table.model_fields)
    if path:
        summary = (table.__doc__ or "").strip().splitlines()[0]
        yield from ("", f"[{path}]", *(f"# {line}" for line in wrap(summary, _WIDTH)))
    yield from (_line(starter, table, path, name) for name in names if inner_table(table, name) is None)
    for name in names:
        inner = inner_table(table, name)
        inside = f"{path}.{name}".lstrip(".")
        optional = not table.model_fields[name].is_required() and table.model_fields[name].default is None
        if inner is not None and (not optional or starter.lays_out(inside)):
            yield from _keys(starter, inner, inside)


def _line(starter: Starter, table: type[Table], path: str, name: str) -> _Line:
    key = f"{path}.{name}".lstrip(".")
    field = table.model_fields[name]
    default = None if field.is_required() else field.default
    state = starter.state(key, default)
    if state == "left out" and field.is_required() and key not in {"reflector.focal_length", "sheet.thickness"}:
        state = "to be stated"
    follows_units = _follows_units(table, name)
    if state == "written" and key not in starter.given and follows_units and starter.units is None:
        state = "left out"
    value = starter.given.get(key, _rounded(table, name, default, starter.units))
    text = f"{name} = {toml_value(value)}" if state == "written" else f"# {name} ="
    comment = f"{name}: {field.description}. Allowed: {allowed_values(key, starter.units or 'mm')}."
    return _Line(key, state, text + (_MARK if state == "to be stated" else ""), comment)


def _may_be_added(starter: Starter) -> Iterator[str]:
    """Yield the optional tables that are not laid out, each with its meaning."""
    left = [
        (path, description)
        for path, description in _optional_tables(Job, "")
        if path != "turning" and not starter.lays_out(path)
    ]
    if left:
        yield from ("", "# Tables that may be added; `dishwright new --set TABLE.KEY=VALUE` lays them out:")
        yield from (f"# [{path}]  {description}" for path, description in left)


def _optional_tables(table: type[Table], path: str) -> Iterator[tuple[str, str]]:
    for name, field in table.model_fields.items():
        inner = inner_table(table, name)
        if inner is None:
            continue
        inside = f"{path}.{name}".lstrip(".")
        if not field.is_required() and field.default is None:
            yield inside, field.description or ""
        else:
            yield from _optional_tables(inner, inside)


def _follows_units(table: type[Table], name: str) -> bool:
    measure = measure_of(table, name)
    return measure is not None and measure.unit("mm") != measure.unit("inch")


def _rounded(table: type[Table], name: str, default: JobValue | None, units: Units | None) -> JobValue | None:
    measure = measure_of(table, name)
    if units != "inch" or measure is None or not isinstance(default, float) or not _follows_units(table, name):
        return default
    return float(f"{measure.to_inch_job(default):.3g}")


def starter_text(given: Mapping[str, JobValue], *, tables: Collection[str] = ()) -> str:
    """Return a commented starter job.

    Every key stands there with its meaning, its unit and what is allowed. Defaults are written out, in an inch job
    rounded to three digits; where the units are not in hand, the defaults of lengths and speeds are left out.

    Parameters
    ----------
    given : mapping
        What the shop has in hand: value by dotted key of the job file, such as ``{"reflector.rim_diameter": 400.0}``.
    tables : collection of str
        Optional tables to lay out beside those that a given key opens: ``"turning"``, ``"sheet.properties"``.

    Returns
    -------
    str
        TOML with comments.

    Raises
    ------
    JobError
        If a given key is no key of the job file.
    """
    starter = Starter(given, tables=tables)
    lines = list(_HEAD)
    for entry in _keys(starter, Job, ""):
        if isinstance(entry, str):
            lines.append(entry)
        else:
            lines.extend(
                ("", *(f"# {line}" for line in wrap(entry.comment, _WIDTH, break_on_hyphens=False)), entry.text)
            )
    lines.extend(() if starter.lays_out("turning") else _NO_TURNING)
    lines.extend(_may_be_added(starter))
    return "\n".join(lines) + "\n"


def starter_gaps(given: Mapping[str, JobValue], *, tables: Collection[str] = ()) -> tuple[str, ...]:
    """Return the keys that the starter job still leaves to be stated.

    Parameters
    ----------
    given : mapping
        As for `starter_text`.
    tables : collection of str
        As for `starter_text`.

    Returns
    -------
    tuple of str
        Dotted keys in the order of the file.

    Raises
    ------
    JobError
        If a given key is no key of the job file.
    """
    entries = _keys(Starter(given, tables=tables), Job, "")
    return tuple(entry.key for entry in entries if isinstance(entry, _Line) and entry.state == "to be stated")
