"""The proof of the lathe drawing: every layer read back and compared with what it stands for."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np

from fabricate.drawing import (
    CENTRE_LINE,
    DRILLING,
    MOULD_BODY,
    MOULD_CURVE,
    REFLECTING_FACE,
    TRIM_LINE,
    drilling_notes,
    from_drawing,
    reflecting_face_on_mould,
)
from fabricate.holes import drilling_outlines
from fabricate.order import Order
from fabricate.verdict import FileVerdict, measured
from outputs.dxf import Drawing, read_drawing
from profiles.arcpath import ArcPath
from profiles.deviation import deviation
from profiles.errors import FormatError

SAME_PLACE = 1e-6
SAME_BULGE = 1e-9


def prove_drawing(path: Path, order: Order) -> FileVerdict:
    """Read a lathe drawing back and measure it.

    Parameters
    ----------
    path : Path
        The drawing.
    order : Order
        The job and its exact geometry.

    Returns
    -------
    FileVerdict
        Deviation of the layer ``MOULD_CURVE`` [mm, mrad], and what is wrong with the other layers.

    Raises
    ------
    FormatError
        If the drawing cannot be read or a layer is missing.
    """
    drawing = read_drawing(path)
    curve = layer_path(drawing, MOULD_CURVE, order, path)
    found = deviation(order.mould.curve, order.mould.from_lathe(curve))
    others = tuple(_other_findings(drawing, curve, order, path))
    return measured(found, order.tolerance, order.slope_tolerance, others)


def layer_path(drawing: Drawing, name: str, order: Order, path: Path) -> ArcPath:
    """Return the one path of a layer.

    Parameters
    ----------
    drawing : Drawing
        As read, in the job's unit.
    name : str
        The layer.
    order : Order
        The job and its exact geometry.
    path : Path
        The file, for messages.

    Returns
    -------
    ArcPath
        In the lathe frame [mm].

    Raises
    ------
    FormatError
        If the layer holds no path or several.
    """
    paths = drawing.layers.get(name, ())
    if len(paths) != 1:
        raise FormatError(
            f"{path}: layer {name} holds {len(paths)} paths; allowed: 1; do: make the package again from its job"
        )
    return from_drawing(paths[0], order.job.units)


def same_path(found: ArcPath, wanted: ArcPath) -> bool:
    """Say whether two paths are the same to the written digits.

    Parameters
    ----------
    found, wanted : ArcPath
        In the lathe frame [mm].

    Returns
    -------
    bool
        True for as many stretches, with the same ends and bulges.
    """
    return (
        len(found) == len(wanted)
        and bool(np.abs(found.vertices - wanted.vertices).max() <= SAME_PLACE)
        and bool(np.abs(found.bulges - wanted.bulges).max() <= SAME_BULGE)
    )


def _other_findings(drawing: Drawing, curve: ArcPath, order: Order, path: Path) -> Iterator[str]:
    mould = order.mould
    if drawing.units != order.job.units:
        yield f"is drawn in {drawing.units}; allowed: {order.job.units}"
    if not same_path(layer_path(drawing, MOULD_BODY, order, path), mould.half_section(curve)):
        yield f"layer {MOULD_BODY} is not the half section around the mould curve"
    yield from _trim_line_findings(drawing, order, path)
    if np.abs(layer_path(drawing, CENTRE_LINE, order, path).vertices[:, 0]).max() > SAME_PLACE:
        yield f"layer {CENTRE_LINE} does not lie on the axis"
    face = mould.from_lathe(layer_path(drawing, REFLECTING_FACE, order, path))
    strays = deviation(reflecting_face_on_mould(order.chain), face).normal
    if not strays <= order.tolerance:
        yield f"layer {REFLECTING_FACE} strays by {strays:.6g} mm; allowed: {order.tolerance:.6g} mm"
    yield from _drilling_findings(drawing, order)


def _drilling_findings(drawing: Drawing, order: Order) -> Iterator[str]:
    found = [from_drawing(path, order.job.units) for path in drawing.layers.get(DRILLING, ())]
    wanted = drilling_outlines(order.chain)
    if len(found) != len(wanted):
        yield f"layer {DRILLING} shows {len(found)} kinds of holes; allowed: {len(wanted)}"
    elif not all(map(same_path, found, wanted)):
        yield f"layer {DRILLING} does not show the holes as they are drilled"
    for note in drilling_notes(order.job):
        if note not in drawing.notes:
            yield f'the notes do not say "{note}"'


def _trim_line_findings(drawing: Drawing, order: Order, path: Path) -> Iterator[str]:
    line = order.mould.trim_line
    if line is None and drawing.layers.get(TRIM_LINE):
        yield f"layer {TRIM_LINE} shows a line that the job does not ask for"
    if line is not None and not same_path(layer_path(drawing, TRIM_LINE, order, path), line.path):
        yield f"layer {TRIM_LINE} is not the line at the rim's place on the mould"
