"""The proof of a follow block's files: its drawing and its turning program, measured against its exact face."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np

from fabricate.drawing import CENTRE_LINE
from fabricate.follow_block import turned_job
from fabricate.follow_block_drawing import BLOCK_BODY, BLOCK_CURVE, SHEET
from fabricate.order import Order
from fabricate.prove_drawing import SAME_PLACE, layer_path, same_path
from fabricate.prove_program import turned_verdict
from fabricate.verdict import FileVerdict, measured, unreadable
from outputs.dxf import Drawing, read_drawing
from profiles.arcpath import ArcPath
from profiles.deviation import deviation


def prove_block_drawing(path: Path, order: Order) -> FileVerdict:
    """Read the drawing of a follow block back and measure it.

    Parameters
    ----------
    path : Path
        The drawing.
    order : Order
        The job and its exact geometry.

    Returns
    -------
    FileVerdict
        Deviation of the layer ``BLOCK_CURVE`` from the block's exact face [mm, mrad], and what is wrong with the other
        layers.

    Raises
    ------
    FormatError
        If the drawing cannot be read or a layer is missing.
    """
    if order.job.follow_block is None:
        return unreadable(order.tolerance, "stands in the package of a job without a [follow_block] table: take it out")
    drawing = read_drawing(path)
    curve = layer_path(drawing, BLOCK_CURVE, order, path)
    body = order.follow_block.body
    found = deviation(body.curve, body.from_lathe(curve))
    return measured(found, order.tolerance, order.slope_tolerance, tuple(_other_findings(drawing, curve, order, path)))


def prove_block_program(path: Path, order: Order) -> FileVerdict:
    """Read the turning program of a follow block back, measure the finished face and replay it on its stock.

    Parameters
    ----------
    path : Path
        The program.
    order : Order
        The job and its exact geometry.

    Returns
    -------
    FileVerdict
        Deviation of the finished face from the block's exact face [mm, mrad], and every fault that was found.

    Raises
    ------
    FormatError
        If the file cannot be read.
    """
    if not order.turns_block:
        said = "stands in the package of a job without follow_block.program = true: take it out"
        return unreadable(order.tolerance, said)
    return turned_verdict(path, turned_job(order.job), order.follow_block.body, order.tolerance)


def _other_findings(drawing: Drawing, curve: ArcPath, order: Order, path: Path) -> Iterator[str]:
    block = order.follow_block
    if drawing.units != order.job.units:
        yield f"is drawn in {drawing.units}; allowed: {order.job.units}"
    if not same_path(layer_path(drawing, BLOCK_BODY, order, path), block.body.half_section(curve)):
        yield f"layer {BLOCK_BODY} is not the half section around the block's face"
    if np.abs(layer_path(drawing, CENTRE_LINE, order, path).vertices[:, 0]).max() > SAME_PLACE:
        yield f"layer {CENTRE_LINE} does not lie on the axis"
    sheet = block.body.from_lathe(layer_path(drawing, SHEET, order, path))
    strays = _sheet_strays(order, sheet)
    if not strays <= order.tolerance:
        yield f"layer {SHEET} strays by {strays:.6g} mm; allowed: {order.tolerance:.6g} mm"


def _sheet_strays(order: Order, path: ArcPath) -> float:
    """Return how far a path in the block's mould frame strays from the sheet's face on the chuck [mm]."""
    block = order.follow_block
    if not block.around:
        return deviation(block.sheet, path).normal
    edge = block.sheet.points(block.sheet.start)
    if len(path) < 2 or path.bulges[0]:
        return float("inf")
    pad = float(np.hypot(*(path.vertices[:2] - [(0.0, edge[1]), edge]).T).max())
    return max(pad, deviation(block.sheet, ArcPath(path.vertices[1:], path.bulges[1:])).normal)
