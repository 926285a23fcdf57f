"""The mould as a solid of revolution: base plane at height 0 (a spigot below it), forming surface up, millimetres."""

from __future__ import annotations

import numpy as np

from fabricate.mould import Mould
from profiles.arcpath import ArcPath
from profiles.solids import Solid, turned_over

SAME = 1e-9
"""Heights that rounding alone sets apart [mm]."""


def mould_solid(mould: Mould) -> Solid:
    """Return a mould as an exact solid.

    Parameters
    ----------
    mould : Mould
        The mould, its half section in the lathe frame [mm].

    Returns
    -------
    Solid
        The same half section with the base plane at height 0 [mm].
    """
    curve = turned_over(mould.curve) if mould.kind == "male" else mould.curve.raised(-mould.land_height)
    rest = (mould.back if mould.rim is None else mould.rim.joined(mould.back)).moved(along=-mould.base)
    on_base = rest.vertices.copy()
    on_base[np.abs(on_base[:, 1]) < SAME, 1] = 0.0
    return Solid(curve.raised(-mould.base), ArcPath(on_base, rest.bulges))
