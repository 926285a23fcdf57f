"""The material table: what sheets and moulds are made of, each value with its source.

A *sheet* is formed into the part, a *mould* is what it is formed on. The *softening temperature* is where a plastic
begins to give way, the *forming temperature* where its sheet is formed. Values are typical ones at room temperature
from ``materials.toml``; a source that begins with ``seen:`` was read in the place it names, ``from memory`` was not.
"""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache
from importlib.resources import files
from math import isfinite
from typing import Any, Literal

from profiles.errors import JobError

Use = Literal["sheet", "mould"]
Kind = Literal["metal", "plastic", "wood", "laminate", "board", "print"]

KINDS: Mapping[Use, tuple[Kind, ...]] = {
    "sheet": ("metal", "plastic"),
    "mould": ("metal", "wood", "laminate", "board", "print"),
}
RIM_SPEED_KINDS: tuple[Kind, ...] = ("wood", "laminate", "board", "print")
"""Kinds of stock that can fly apart: a rim-speed limit must be stated before they are turned (common practice)."""

QUANTITIES: Mapping[str, str] = {
    "youngs_modulus_mpa": "MPa",
    "poisson": "",
    "yield_mpa": "MPa",
    "density_kg_m3": "kg/m³",
    "thermal_expansion_per_k": "1/K",
    "softening_temperature_c": "°C",
    "forming_temperature_c": "°C",
}
"""Every quantity of the table with its unit; the last two only where they apply."""
_WHERE_IT_APPLIES = ("softening_temperature_c", "forming_temperature_c")


@dataclass(frozen=True)
class SourcedValue:
    """A value of the table with its range and source.

    Parameters
    ----------
    quantity : str
        A key of `QUANTITIES`, which gives the unit.
    value, low, high : float
        What is reckoned with, and the range of the sources; low and high are the value itself where they agree.
    source : str
        Where it comes from: ``seen: …`` or ``from memory …``.

    Raises
    ------
    JobError
        If the value is not finite, outside its range, or without a source.
    """

    quantity: str
    value: float
    low: float
    high: float
    source: str

    def __post_init__(self) -> None:
        if not all(isfinite(number) for number in (self.low, self.value, self.high)):
            raise JobError(f"{self.quantity}: {self.value} is not a finite number; give a measured value")
        if not self.low <= self.value <= self.high:
            raise JobError(f"{self.quantity}: {self.value} is outside its range {self.low} to {self.high}; correct one")
        if not self.source.startswith(("seen", "from memory", "stated in the job")):
            raise JobError(
                f'{self.quantity}: the source is "{self.source}"; allowed: "seen: …" or "from memory …"; name it'
            )

    @property
    def unit(self) -> str:
        """Unit of the value."""
        return QUANTITIES[self.quantity]


@dataclass(frozen=True)
class Material:
    """A row of the table, or a sheet whose properties the job states.

    Parameters
    ----------
    name : str
        As written in the job.
    use : {"sheet", "mould"}
        What it is for.
    kind : str
        One of `KINDS` for that use.
    values : tuple of SourcedValue
        Its quantities with their sources.

    Raises
    ------
    JobError
        If the kind does not belong to the use, or a quantity is missing.
    """

    name: str
    use: Use
    kind: Kind
    values: tuple[SourcedValue, ...]

    def __post_init__(self) -> None:
        if self.kind not in KINDS[self.use]:
            raise JobError(f'{self.name}: kind is "{self.kind}"; allowed: {", ".join(KINDS[self.use])}; correct it')
        missing = [name for name in QUANTITIES if name not in _WHERE_IT_APPLIES and self._find(name) is None]
        # A sheet stated in the job may leave its expansion open; nothing in the table does.
        if missing and not (missing == ["thermal_expansion_per_k"] and self.use == "sheet"):
            raise JobError(f"{self.name}: {', '.join(missing)} is missing; state it")

    def _find(self, quantity: str) -> float | None:
        return next((entry.value for entry in self.values if entry.quantity == quantity), None)

    def _required(self, quantity: str) -> float:
        return next(entry.value for entry in self.values if entry.quantity == quantity)

    @property
    def youngs_modulus_mpa(self) -> float:
        """Young's modulus [MPa]."""
        return self._required("youngs_modulus_mpa")

    @property
    def poisson(self) -> float:
        """Poisson's ratio [-]."""
        return self._required("poisson")

    @property
    def yield_mpa(self) -> float:
        """Yield stress [MPa]; for plastics, wood and boards the strength that its source names."""
        return self._required("yield_mpa")

    @property
    def density_kg_m3(self) -> float:
        """Density [kg/m³]."""
        return self._required("density_kg_m3")

    @property
    def thermal_expansion_per_k(self) -> float | None:
        """Coefficient of linear thermal expansion [1/K]; none where a job left it open."""
        return self._find("thermal_expansion_per_k")

    @property
    def softening_temperature_c(self) -> float | None:
        """Temperature where it begins to give way [°C]; none where that does not apply."""
        return self._find("softening_temperature_c")

    @property
    def forming_temperature_c(self) -> float | None:
        """Temperature at which the sheet is formed [°C]; none where that does not apply."""
        return self._find("forming_temperature_c")

    @property
    def rim_speed_limit_required(self) -> bool:
        """Whether a rim-speed limit must be stated before this stock is turned."""
        return self.kind in RIM_SPEED_KINDS


def _sourced(quantity: str, entry: Mapping[str, Any]) -> SourcedValue:
    value = float(entry["value"])
    return SourcedValue(
        quantity, value, float(entry.get("low", value)), float(entry.get("high", value)), str(entry["source"])
    )


def _row(use: Use, row: Mapping[str, Any]) -> Material:
    values = {key: entry for key, entry in row.items() if key not in {"name", "kind"}}
    unknown = sorted(set(values) - set(QUANTITIES))
    if unknown:
        raise JobError(f"{row['name']}: {', '.join(unknown)} is no quantity; allowed: {', '.join(QUANTITIES)}; correct")
    return Material(
        row["name"], use, row["kind"], tuple(_sourced(key, values[key]) for key in QUANTITIES if key in values)
    )


def materials_of(text: str) -> tuple[Material, ...]:
    """Return the rows of a material table in the form of ``materials.toml``.

    Parameters
    ----------
    text : str
        TOML with the arrays of tables ``sheet`` and ``mould``.

    Returns
    -------
    tuple of Material
        Sheets first, in the order of the file.

    Raises
    ------
    JobError
        If a row is incomplete, a value implausible or without a source, or a name stands twice for one use.
    """
    data = tomllib.loads(text)
    rows = tuple(_row(use, row) for use in KINDS for row in data.get(use, ()))
    names = [(row.use, row.name) for row in rows]
    twice = sorted({name for name in names if names.count(name) > 1})
    if twice:
        raise JobError(f"{twice[0][1]}: the name stands twice among the {twice[0][0]} materials; allowed: once; rename")
    return rows


@cache
def _table() -> Mapping[tuple[Use, str], Material]:
    text = files("fabricate").joinpath("materials.toml").read_text(encoding="utf-8")
    return {(row.use, row.name): row for row in materials_of(text)}


def sheet_materials() -> tuple[Material, ...]:
    """Return all sheets of the table.

    Returns
    -------
    tuple of Material
        In the order of the table.
    """
    return tuple(row for row in _table().values() if row.use == "sheet")


def mould_materials() -> tuple[Material, ...]:
    """Return all mould materials of the table.

    Returns
    -------
    tuple of Material
        In the order of the table.
    """
    return tuple(row for row in _table().values() if row.use == "mould")


def nearest_names(name: str, use: Use) -> tuple[str, ...]:
    """Return the names of the table that a mistyped one may mean.

    Parameters
    ----------
    name : str
        As typed.
    use : {"sheet", "mould"}
        Which half of the table.

    Returns
    -------
    tuple of str
        At most three names, nearest first; all names of that use where none is near.
    """
    names = {known.lower(): known for kind, known in _table() if kind == use}
    near = get_close_matches(name.lower(), names, n=3, cutoff=0.5)
    return tuple(names[lowered] for lowered in near) or tuple(names.values())


def has_material(name: str, use: Use) -> bool:
    """Say whether the table has a row of that name and use.

    Parameters
    ----------
    name : str
        As typed.
    use : {"sheet", "mould"}
        Which half of the table.

    Returns
    -------
    bool
        True where `material` finds it.
    """
    return (use, name) in _table()


def material(name: str, *, use: Use = "sheet") -> Material:
    """Return the row of that name.

    Parameters
    ----------
    name : str
        As written in the job.
    use : {"sheet", "mould"}
        Which half of the table.

    Returns
    -------
    Material
        The row.

    Raises
    ------
    JobError
        If the table has no such row; names the nearest ones.

    Examples
    --------
    >>> material("aluminium 1100-O").yield_mpa
    34.0
    """
    if not has_material(name, use):
        near = ", ".join(f'"{known}"' for known in nearest_names(name, use))
        raise JobError(
            f'value is "{name}", which is no {use} of the material table; allowed: {near}; '
            "do: write one of these names; `dishwright materials` lists all"
        )
    return _table()[use, name]


def table_rows(*, use: Use | None = None, kinds: tuple[Kind, ...] = ()) -> tuple[tuple[str, ...], ...]:
    """Return the table as rows of text, the header first.

    Parameters
    ----------
    use : {"sheet", "mould"}, optional
        One half of the table; both where none.
    kinds : tuple of str
        Kinds to keep; all where empty.

    Returns
    -------
    tuple of tuple of str
        Use, name, kind and the quantities, units in the header; ``-`` where a quantity does not apply.
    """
    header = ("use", "name", "kind", *QUANTITIES)
    kept = [row for row in _table().values() if use in {None, row.use} and (not kinds or row.kind in kinds)]
    return (header, *((row.use, row.name, row.kind, *_cells(row)) for row in kept))


def _cells(row: Material) -> tuple[str, ...]:
    found = {entry.quantity: f"{entry.value:g}" for entry in row.values}
    return tuple(found.get(quantity, "-") for quantity in QUANTITIES)


def source_rows(*, use: Use | None = None, kinds: tuple[Kind, ...] = ()) -> tuple[tuple[str, ...], ...]:
    """Return every value with its range and source as rows of text, the header first.

    Parameters
    ----------
    use : {"sheet", "mould"}, optional
        One half of the table; both where none.
    kinds : tuple of str
        Kinds to keep; all where empty.

    Returns
    -------
    tuple of tuple of str
        Name, quantity, value, unit, range and source.
    """
    header = ("name", "quantity", "value", "unit", "range", "source")
    kept = [row for row in _table().values() if use in {None, row.use} and (not kinds or row.kind in kinds)]
    return (header, *(_source_row(row, entry) for row in kept for entry in row.values))


def _source_row(row: Material, entry: SourcedValue) -> tuple[str, ...]:
    span = "-" if entry.low == entry.high else f"{entry.low:g} to {entry.high:g}"
    return (row.name, entry.quantity, f"{entry.value:g}", entry.unit, span, entry.source)
