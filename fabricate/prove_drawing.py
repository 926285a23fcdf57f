"""The proof of the lathe drawing: every layer read back and compared with what it stands for."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np

from fabricate.drawing import (
    CENTRE_LINE,
    MOULD_BODY,
    MOULD_CURVE,
    REFLECTING_FACE,
    from_drawing,
    reflecting_face_on_mould,
)
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
    curve = _layer(drawing, MOULD_CURVE, order, path)
    found = deviation(order.mould.curve, order.mould.from_lathe(curve))
    others = tuple(_other_findings(drawing, curve, order, path))
    return measured(found, order.tolerance, order.slope_tolerance, others)


def _layer(drawing: Drawing, name: str, order: Order, path: Path) -> ArcPath:
    """Return the one path of a layer, in the lathe frame [mm]."""
    paths = drawing.layers.get(name, ())
    if len(paths) != 1:
        raise FormatError(
            f"{path}: layer {name} holds {len(paths)} paths; allowed: 1; do: make the package again from its job"
        )
    return from_drawing(paths[0], order.job.units)


def _other_findings(drawing: Drawing, curve: ArcPath, order: Order, path: Path) -> Iterator[str]:
    mould = order.mould
    if drawing.units != order.job.units:
        yield f"is drawn in {drawing.units}; allowed: {order.job.units}"
    if not _same_path(_layer(drawing, MOULD_BODY, order, path), mould.half_section(curve)):
        yield f"layer {MOULD_BODY} is not the half section around the mould curve"
    if np.abs(_layer(drawing, CENTRE_LINE, order, path).vertices[:, 0]).max() > SAME_PLACE:
        yield f"layer {CENTRE_LINE} does not lie on the axis"
    face = mould.from_lathe(_layer(drawing, REFLECTING_FACE, order, path))
    strays = deviation(reflecting_face_on_mould(order.chain), face).normal
    if not strays <= order.tolerance:
        yield f"layer {REFLECTING_FACE} strays by {strays:.6g} mm; allowed: {order.tolerance:.6g} mm"


def _same_path(found: ArcPath, wanted: ArcPath) -> bool:
    return (
        len(found) == len(wanted)
        and bool(np.abs(found.vertices - wanted.vertices).max() <= SAME_PLACE)
        and bool(np.abs(found.bulges - wanted.bulges).max() <= SAME_BULGE)
    )
