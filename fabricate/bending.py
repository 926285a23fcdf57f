"""Springback of a bent sheet: the elastic–plastic cubic on the mid-surface, both ways.

``κ_part/κ_mould = 1 − 3x + 4x³`` with ``x = Y'/(E' t κ_mould)``; ``Y'/(E' t)`` is the *elastic curvature* of a sheet.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class BendingSheet:
    """What the bending law must know of the sheet.

    Parameters
    ----------
    thickness : float
        Of the sheet [mm].
    youngs_modulus : float
        [MPa].
    poisson : float
        [-].
    mirror_side : int
        1 where the reflecting face is the concave one, −1 where it is the convex one.
    """

    thickness: float
    youngs_modulus: float
    poisson: float
    mirror_side: int


def elastic_curvature(sheet: BendingSheet, flow_stress: float) -> float:
    """Return ``Y'/(E' t)``, half the curvature at which bending begins to be plastic [1/mm].

    Parameters
    ----------
    sheet : BendingSheet
        Its thickness [mm] and elastic constants.
    flow_stress : float
        Y, after forming [MPa].

    Returns
    -------
    float
        Curvature [1/mm].

    Examples
    --------
    >>> round(1e6 * elastic_curvature(BendingSheet(1.5, 68900.0, 0.33, 1), 34.0), 6)
    338.504345
    """
    plane_strain_modulus = sheet.youngs_modulus / (1.0 - sheet.poisson**2)
    return float(2.0 * flow_stress / np.sqrt(3.0) / (plane_strain_modulus * sheet.thickness))


def bent_after(bend: Array, limit: float) -> Array:
    """Return the mid-surface's curvature after release, ``κ (1 − 3x + 4x³)`` with ``x = limit/κ`` [1/mm].

    Parameters
    ----------
    bend : ndarray
        On the mould [1/mm].
    limit : float
        `elastic_curvature` [1/mm].

    Returns
    -------
    ndarray
        Nothing is left of a curvature under twice the limit [1/mm].

    Examples
    --------
    A mid-surface radius of 200 with x of 0.0658 opens to 248.83:

    >>> round(float(1.0 / bent_after(np.array([1.0 / 200.0]), 0.06579583938 / 200.0)[0]), 4)
    248.833
    """
    held = np.maximum(bend, 2.0 * limit)
    return np.asarray(held - 3.0 * limit + 4.0 * limit**3 / held**2)


def bent_before(bend: Array, limit: float) -> Array:
    """Return the mid-surface's curvature on the mould that leaves a given one after release [1/mm].

    Parameters
    ----------
    bend : ndarray
        After release, positive [1/mm].
    limit : float
        `elastic_curvature` [1/mm].

    Returns
    -------
    ndarray
        On the mould [1/mm].
    """
    # From the right Newton's method comes down to the root without passing it, as the function is convex there.
    held = bend + 3.0 * limit
    for _ in range(60):
        held = held - (bent_after(held, limit) - bend) / (1.0 - 8.0 * limit**3 / held**3)
    return np.asarray(held)
