"""Where the rim is: on the mould, and what calipers read on the finished part.

The *rim* is the material point at which the reflecting face is cut. On the mould it lies at another radius than on the
released part, and the metal's outside edge at another one again: the edge is cut along the normal, and the outside of
a dish whose mirror is inside is wider than the mirror by the sheet's thickness. Lengths are millimetres.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fabricate.chain import Chain


@dataclass(frozen=True)
class Rim:
    """The rim's places.

    Parameters
    ----------
    mould_radius, mould_z : float
        Where its material point lies on the mould: radius, and Z from the lathe's work zero [mm].
    diameter : float
        On the reflecting face of the finished part [mm].
    outside_diameter : float
        Over the sheet's outside edge of the finished part, as calipers read it [mm].
    slope : float
        Of the finished reflecting face there [rad].
    thickness : float
        Of the sheet there [mm].
    """

    mould_radius: float
    mould_z: float
    diameter: float
    outside_diameter: float
    slope: float
    thickness: float


def rim_of(chain: Chain) -> Rim:
    """Return where the rim of a job is.

    Parameters
    ----------
    chain : Chain
        The maps between part and mould [mm].

    Returns
    -------
    Rim
        In millimetres and radians.

    Raises
    ------
    JobError
        If the part would lock on the mould, or the mould does not fit.

    Notes
    -----
    With the mirror inside, the outside edge is ``D + 2 (t + c) sin ψ`` wide, ``c`` the coating between mirror and
    sheet (negative where the mirror was polished down); with the mirror outside it is the mirror's own edge.
    """
    job, mould, where = chain.job, chain.mould, chain.released.rim
    radius, height = chain.point_on_mould(where)
    part = chain.released.meridian
    slope, thickness = float(part.slope(where)), float(chain.thickness(where))
    diameter = 2.0 * float(part.radius(where))
    inside = job.reflector.reflecting_face == "concave"
    behind = 2.0 * (thickness + job.sheet.coating_thickness) * np.sin(slope) if inside else 0.0
    return Rim(
        mould_radius=radius,
        mould_z=-height if mould.kind == "male" else height - mould.land_height,
        diameter=diameter,
        outside_diameter=float(diameter + behind),
        slope=slope,
        thickness=thickness,
    )
