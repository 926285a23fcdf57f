"""The mould as a solid of revolution: base plane at height 0 (a spigot below it), forming surface up, millimetres.

A trim line splits the forming surface: the exact curve ends at the line, and beyond it, in the trim, arcs take its
place that are fitted far closer than any mesh will be.
"""

from __future__ import annotations

import numpy as np

from fabricate.mould import Mould
from fabricate.trim_line import TrimLine
from profiles.arcpath import ArcPath
from profiles.arcs import fewest_arcs
from profiles.meridian import Meridian
from profiles.solids import Solid

SAME = 1e-9
"""Heights that rounding alone sets apart [mm]."""

FITTED = 2e-3
"""What arcs beyond a trim line may stray, as a part of the chord error: less than a mesh leaves of it."""


def mould_solid(mould: Mould, *, fit: float = 1e-5) -> Solid:
    """Return a mould as an exact solid.

    Parameters
    ----------
    mould : Mould
        The mould, its half section in the lathe frame [mm].
    fit : float
        How far the arcs beyond a trim line may stray from the forming surface [mm].

    Returns
    -------
    Solid
        The same half section with the base plane at height 0, a trim line cut into it [mm].

    Raises
    ------
    GeometryError
        If too many arcs would be needed beyond a trim line.
    """
    curve = mould.forming
    rest = mould.back if mould.rim is None else mould.rim.joined(mould.back)
    if mould.trim_line is not None:
        rest = _beyond(curve, mould.trim_line, fit, rest)
        curve = curve.part(curve.start, mould.trim_line.inner)
    rest = rest.moved(along=-mould.base)
    on_base = rest.vertices.copy()
    on_base[np.abs(on_base[:, 1]) < SAME, 1] = 0.0
    return Solid(curve.raised(-mould.base), ArcPath(on_base, rest.bulges))


def _beyond(curve: Meridian, line: TrimLine, fit: float, rest: ArcPath) -> ArcPath:
    """Return the line's groove and the forming surface beyond it as arcs, before the rest of the half section."""
    arcs = fewest_arcs(curve.part(line.outer, curve.end), distance=fit).path
    vertices = [line.path.vertices[:2], arcs.vertices[:-1], rest.vertices]
    return ArcPath(np.vstack(vertices), np.concatenate([line.path.bulges[:1], [0.0], arcs.bulges, rest.bulges]))
