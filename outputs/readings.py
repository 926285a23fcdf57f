"""Readings of a surface from the bench: a table of points, with remarks that say how they were taken.

A readings file is CSV with a header row: ``radius,sag`` or ``x,y,z``, each name with ``_mm`` or ``_in`` behind it where
the file states its unit; or a sag table with its column ``reading`` filled in. Columns beside those are left alone.
Cells are parted by commas, numbers have a decimal point. Lines that begin with # may carry ``key: value``.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from outputs.table import table_columns, table_lines
from profiles.errors import FormatError

Array = NDArray[np.float64]

UNITS = {"mm": 1.0, "in": 25.4}
LAYOUTS = (("radius", "sag"), ("x", "y", "z"), ("radius", "reading"))
"""Columns that hold a point, in the order in which they are looked for."""

_NUMBER = re.compile(r"[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)?")
_REMARK = re.compile(r"\s*\"?#")


@dataclass(frozen=True, eq=False)
class Readings:
    """Points of a surface.

    Parameters
    ----------
    layout : tuple of str
        Names of the columns without their unit: radius and sag, x, y and z, or radius and reading.
    values : ndarray of shape (n, 2 or 3)
        The points, in the file's unit [mm or in].
    unit : {"mm", "in"} or None
        Stated in the header; None where it is not.
    notes : mapping of str to str
        Remarks by their key in lower case; a remark without a colon is a key with nothing to it.
    """

    layout: tuple[str, ...]
    values: Array
    unit: str | None
    notes: Mapping[str, str]

    @property
    def radius(self) -> Array:
        """Distance of each point from the axis of the coordinates [the file's unit]."""
        if len(self.layout) == 3:
            return np.asarray(np.hypot(self.values[:, 0], self.values[:, 1]))
        return np.abs(self.values[:, 0])

    @property
    def height(self) -> Array:
        """Its coordinate along the axis [the file's unit]."""
        return np.asarray(self.values[:, -1])


def read_readings(path: Path) -> Readings:
    """Read a readings file.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    Readings
        Its points, rows without a reading left out, and its remarks.

    Raises
    ------
    FormatError
        If the file cannot be read, has no such columns, mixes units, holds a cell that is no number, or was sent back
        without a single reading.
    """
    lines = table_lines(path)
    columns = table_columns(path, lines)
    units, plain = _units(path, columns)
    layout = next((names for names in LAYOUTS if set(names) <= set(plain)), None)
    if layout is None:
        raise FormatError(
            f"{path}: has the columns {', '.join(columns)[:200]}; allowed: radius and sag, or x, y and z, each with "
            "_mm or _in behind it or nothing, or a sag table with its column reading; do: name the columns in the "
            "first row"
        )
    used = {units[name] for name in layout}
    if len(used) > 1:
        stated = ", ".join(f"{name} in {units[name] or 'no stated unit'}" for name in layout)
        raise FormatError(
            f"{path}: has {stated}; allowed: one unit for all of them, or none; do: convert a column, or correct its "
            "name"
        )
    rows = zip(*(plain[name] for name in layout), strict=True)
    values = [_point(path, row, cells) for row, cells in enumerate(rows, start=1) if cells[-1] != ""]
    if not values:
        raise FormatError(f"{path}: holds no reading; allowed: a filled-in table; do: fill in its column {layout[-1]}")
    return Readings(layout, np.array(values), used.pop(), _notes(lines))


def _units(
    path: Path, columns: Mapping[str, tuple[str, ...]]
) -> tuple[Mapping[str, str | None], Mapping[str, tuple[str, ...]]]:
    """Return unit and cells of each column by its name without the unit."""
    units: dict[str, str | None] = {}
    plain: dict[str, tuple[str, ...]] = {}
    for name, cells in columns.items():
        word, _, unit = name.strip().lower().rpartition("_")
        known = unit in UNITS and bool(word)
        short = word if known else name.strip().lower()
        if short in plain:
            raise FormatError(f"{path}: has the column {short} twice; allowed: once; do: take one away")
        units[short], plain[short] = (unit if known else None), cells
    return units, plain


def _point(path: Path, row: int, cells: Iterable[str]) -> list[float]:
    return [_number(path, row, cell) for cell in cells]


def _number(path: Path, row: int, cell: str) -> float:
    if _NUMBER.fullmatch(cell) is None or not math.isfinite(float(cell)):
        raise FormatError(
            f'{path}: row {row} below the header holds "{cell[:40]}"; allowed: finite numbers with a decimal point; '
            "do: correct the cell"
        )
    return float(cell)


def _notes(lines: Iterable[str]) -> Mapping[str, str]:
    """Return the remarks, without what a spreadsheet puts around a line that it takes for a row of cells."""
    remarks = (line.strip().strip('",').removeprefix("#").partition(":") for line in lines if _REMARK.match(line))
    return {key.strip().lower(): value.strip() for key, _, value in remarks if key.strip()}
