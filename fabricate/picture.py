"""The picture of a work package: a drafting sheet made from the package's own files.

Nothing in it is drawn from the job: section, reflecting face and arcs are the drawing's, the passes are the program's,
read as its control would, and the deviations are the proof's. The plot between the details measures the drawing's
arcs once more against the exact mould curve, point by point.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import partial
from itertools import pairwise
from pathlib import Path
from typing import Literal

import numpy as np

from fabricate.order import DRAWING, PROGRAM, Order
from fabricate.picture_details import Detail, program_detail, section_detail
from fabricate.picture_files import ReadPackage, read_package
from fabricate.picture_plot import deviation_plot, small_length
from fabricate.picture_views import (
    MEDIUM,
    SMALL,
    Places,
    Point,
    View,
    line,
    program_view,
    rectangle,
    section_view,
    work_zero,
)
from outputs.svg import Item, Label, Picture, Stroke

WIDTH, MARGIN = 260.0, 4.0
_LEFT, _RIGHT = 26.0, 5.0
_HIGHEST = 95.0
_SCALES = (10.0, 5.0, 2.0, 1.0, 0.5, 0.4, 0.25, 0.2, 1.0 / 6.0, 0.125, 0.1, 0.05, 0.04, 0.025, 0.02, 0.01)
_ENLARGEMENT = 4.0
_STRIP, _ROW, _WINDOW = 18.0, 46.0, 62.0
_INSET, _OFF_CENTRE, _LETTER = 4.0, 8.0, 0.56
_CELLS = (82.0, 144.0, 220.0)
_DETAIL = "the rim, enlarged 4 times"
_NAMES = {"mm": "mm", "inch": "inches"}


@dataclass(frozen=True)
class _Sheet:
    """Where things stand on the paper [mm of paper]."""

    scale: float
    axis: float
    zero: float
    base: float
    height: float


def package_picture(order: Order, folder: Path) -> Picture:
    """Return the picture of a work package.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    folder : Path
        Its work package.

    Returns
    -------
    Picture
        A sheet 260 mm wide [mm of paper].

    Raises
    ------
    FormatError
        If a file of the package is missing or cannot be read.

    Notes
    -----
    The places of the labels suit a male mould that fills the sheet, as the packaged demo job's does; on the sheets of
    other moulds a label may lie over a line.
    """
    files = read_package(order, folder)
    sheet = _sheet(order, files)
    job = order.job
    return Picture(
        WIDTH,
        sheet.height,
        tuple(_items(order, files, sheet)),
        f"Work package: {job.title}, revision {job.revision}",
        f"Half section of the mould from {DRAWING}, passes from {PROGRAM}, and the largest deviation of both.",
    )


def _sheet(order: Order, files: ReadPackage) -> _Sheet:
    """Return the layout: the largest usual scale at which both halves fit."""
    mould = order.mould
    left = mould.outer_radius
    right, top = left, 0.0
    if files.program:
        ends = np.vstack([path.vertices for path in files.program.rapids])
        right, top = ends.max(axis=0)
    low = float(files.body.vertices[:, 1].min())
    room = WIDTH - 2.0 * MARGIN - _LEFT - _RIGHT
    scale = next(
        (scale for scale in _SCALES if scale * (left + right) <= room and scale * (top - low) <= _HIGHEST), _SCALES[-1]
    )
    spare = room - scale * (left + right)
    base = MARGIN + _STRIP + 5.0 + _ROW + 21.0
    zero = base - scale * low
    height = zero + max(scale * top, 16.0) + 16.5 + MARGIN
    return _Sheet(scale, MARGIN + _LEFT + 0.5 * spare + scale * left, zero, base, round(height, 1))


def _items(order: Order, files: ReadPackage, sheet: _Sheet) -> Iterator[Item]:
    left, right = (View((sheet.axis, sheet.zero), sheet.scale, side) for side in (-1, 1))
    places, write = _places(order), partial(_length, order)
    row = MARGIN + _STRIP + 5.0
    yield Stroke((rectangle((MARGIN, MARGIN), (WIDTH - MARGIN, sheet.height - MARGIN)),), MEDIUM)
    yield from _axis(sheet)
    yield from _heading(sheet, DRAWING, "half section; drawing x is upright here", "start")
    yield from section_view(files, left, places, write)
    low, high = (MARGIN + _INSET, row), (MARGIN + _INSET + _WINDOW, row + _ROW)
    centre = (places.end_radius + _OFF_CENTRE / (_ENLARGEMENT * sheet.scale), 0.5 * (places.rim[1] + places.land))
    detail = Detail.around("A", (low, high), centre, left, _ENLARGEMENT)
    yield from detail.framed(tuple(section_detail(files, detail, places)), _DETAIL)
    yield from deviation_plot(order, files, (high[0] + 24.0, row), (WIDTH - high[0] - 8.0, row + _ROW))
    if files.program:
        yield from _heading(sheet, PROGRAM, "path of the nose centre, X to the right, Z up", "end")
        yield from program_view(files.program, files.body, right, places, write)
        detail = Detail.around("B", ((WIDTH - high[0], row), (WIDTH - low[0], row + _ROW)), centre, right, _ENLARGEMENT)
        yield from detail.framed(tuple(program_detail(files.program, files.body, detail)), _DETAIL)
    yield from work_zero(left)
    yield from _strip(order, files, sheet)


def _heading(sheet: _Sheet, name: str, remark: str, anchor: Literal["start", "end"]) -> Iterator[Item]:
    """Yield the name of the file that half of the sheet is drawn from."""
    across = MARGIN + _INSET if anchor == "start" else WIDTH - MARGIN - _INSET
    top = sheet.height - MARGIN
    yield Label(name, (across, top - 7.0), 4.4, anchor, bold=True)
    yield Label(remark, (across, top - 12.2), SMALL, anchor)


def _places(order: Order) -> Places:
    mould, chain = order.mould, order.chain
    radius, height = chain.point_on_mould(chain.released.rim)
    male = mould.kind == "male"
    return Places(
        male,
        (radius, -height if male else height - mould.land_height),
        0.0 if male else -mould.land_height,
        mould.base,
        mould.land,
        mould.outer_radius,
        float(mould.curve.radius(mould.curve.end)),
        order.job.forming.trim == "on-mould",
    )


def _axis(sheet: _Sheet) -> Iterator[Item]:
    ends = [(sheet.axis, sheet.base - 5.0), (sheet.axis, sheet.height - MARGIN - 14.0)]
    yield Stroke((line(*ends),), pattern="chain")


def _strip(order: Order, files: ReadPackage, sheet: _Sheet) -> Iterator[Item]:
    """Yield the title strip: four cells of three lines."""
    job = order.job
    top = MARGIN + _STRIP
    edges = (MARGIN, *_CELLS, WIDTH - MARGIN)
    yield Stroke(
        (line((MARGIN, top), (WIDTH - MARGIN, top)), *(line((at, MARGIN), (at, top)) for at in _CELLS)), MEDIUM
    )
    number = f"number {job.number}, " if job.number else ""
    yield _fitted(job.title, (MARGIN + _INSET, top - 6.2), edges[1] - edges[0], 4.6, bold=True)
    cells = (
        ("", f"{number}revision {job.revision}", "drawn from the files of its work package"),
        _mould_words(order),
        _deviation_words(order, files),
        (
            f"lengths in {_NAMES[job.units]}",
            f"scale {_ratio(sheet.scale)}",
            f"A, B {_ratio(_ENLARGEMENT * sheet.scale)}",
        ),
    )
    for (edge, end), texts in zip(pairwise(edges), cells, strict=True):
        for index, text in enumerate(texts):
            if text:
                yield _fitted(text, (edge + _INSET, top - 5.9 - 4.7 * index), end - edge, SMALL)


def _fitted(text: str, place: Point, cell: float, size: float, *, bold: bool = False) -> Label:
    """Return a label whose letters are small enough for a cell of the title strip."""
    room = (cell - 1.5 * _INSET) / (_LETTER * max(len(text), 1))
    return Label(text, place, min(size, room), bold=bold)


def _mould_words(order: Order) -> tuple[str, str, str]:
    job = order.job
    of = f" of {job.mould.material}" if job.mould.material else ""
    face = f"reflecting face {job.reflector.reflecting_face}"
    return (f"{order.mould.kind} mould{of}", f"for {job.sheet.material}, {job.sheet.thickness:g} thick", face)


def _deviation_words(order: Order, files: ReadPackage) -> tuple[str, str, str]:
    drawing, *program = (small_length(value, order) for value in files.deviations.values())
    found = f"drawing {drawing}" + (f", program {program[0]}" if program else "")
    return ("largest deviation from the exact curve:", found, f"allowed {small_length(order.tolerance, order)}")


def _ratio(scale: float) -> str:
    """Return a scale as a drawing states it."""
    return f"{scale:g}:1" if scale > 1.0 else f"1:{round(1.0 / scale, 3):g}"


def _length(order: Order, value: float) -> str:
    return f"{value / order.unit:.3f} mm" if order.job.units == "mm" else f"{value / order.unit:.4f} in"
