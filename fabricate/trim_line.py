"""The line that is scribed on a mould where the rim is cut: a groove of 90° across the normal at that place.

It lies at the rim's material point on the forming surface, symmetrical to the normal there. What is exact of it is its
*apex*, the depth below the surface; its edges are where two lines at 45° to the normal meet the surface. Everything is
in millimetres of the lathe frame (radius, Z), where a path outwards has the mould to its right.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.errors import JobError
from profiles.meridian import Meridian

Array = NDArray[np.float64]

ROUNDS = 30
SHARE = 0.5
"""How much of the way from the rim to either end of the forming surface the depth may take."""


@dataclass(frozen=True, eq=False)
class TrimLine:
    """A scribed line.

    Parameters
    ----------
    depth : float
        Along the normal, from the surface to the apex [mm].
    where : float
        Arc length of the rim's material point on the forming surface [mm].
    inner, outer : float
        Arc lengths of the groove's edges [mm].
    point : ndarray of shape (2,)
        That material point [mm].
    normal : ndarray of shape (2,)
        Unit vector out of the mould there [-].
    path : ArcPath
        The groove: inner edge, apex, outer edge [mm].
    """

    depth: float
    where: float
    inner: float
    outer: float
    point: Array
    normal: Array
    path: ArcPath

    def centre(self, radius: float) -> Array:
        """Return where the centre of a round nose stands that marks the line to its depth.

        Parameters
        ----------
        radius : float
            Of the nose [mm].

        Returns
        -------
        ndarray of shape (2,)
            Radius and Z [mm].
        """
        return np.asarray(self.point + (radius - self.depth) * self.normal)


def trim_line_on(surface: Meridian, radius: float, depth: float) -> TrimLine:
    """Return the line scribed on a forming surface.

    Parameters
    ----------
    surface : Meridian
        The forming surface outwards, in the lathe frame [mm].
    radius : float
        Of the rim's material point on it [mm].
    depth : float
        Of the line, along the normal [mm].

    Returns
    -------
    TrimLine
        In the lathe frame [mm].

    Raises
    ------
    JobError
        If the line is too deep for what lies between the rim and either end of the forming surface.
    """
    first, last = (float(surface.radius(end)) for end in (surface.start, surface.end))
    where = float(surface.at_radius(radius)) if first < radius < last else surface.end
    room = SHARE * min(surface.end - where, where - surface.start)
    if depth > room:
        raise JobError(
            f"mould.trim_line_depth: value is {depth:g} mm; allowed: at most {max(room, 0.0):.4g} mm, half of the "
            f"forming surface between the rim's place on the mould, at radius {radius:.6g} mm, and its nearer end; do: "
            "make the line shallower, or forming.trim_allowance wider"
        )
    point, normal = surface.points(where), surface.normals(where)
    apex = point - depth * normal
    inner, outer = (_edge(surface, where, apex, normal, side * depth) for side in (-1.0, 1.0))
    corners = np.array([surface.points(inner), apex, surface.points(outer)])
    return TrimLine(depth, where, inner, outer, point, normal, ArcPath(corners, np.zeros(2)))


def _edge(surface: Meridian, where: float, apex: Array, normal: Array, aside: float) -> float:
    """Return the arc length at which a side of the groove meets the surface; ``aside`` is about how far off it is."""
    along = np.array([normal[1], -normal[0]])
    # On that side of the groove the way along the surface equals the way up from the apex.
    across = along - np.copysign(1.0, aside) * normal
    place = where + aside
    for _ in range(ROUNDS):
        gap = float((surface.points(place) - apex) @ across)
        place -= gap / float(surface.tangents(place) @ across)
    return float(place)
