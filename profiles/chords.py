"""The fewest straight chords for a curve, for controls without arcs.

A chord of length ``a`` strays by ``κ a²/8``. With its ends moved off the curve by half of that, the deviation is
balanced on both sides, and a distance τ needs

    ``N = ∫ sqrt(κ / 16τ) ds``

chords, whose joints spread evenly in ``∫ sqrt(κ) ds``.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.deviation import deviation
from profiles.errors import GeometryError
from profiles.meridian import Meridian

Array = NDArray[np.float64]

MOST_CHORDS = 20_000


def chord_limit(curve: Meridian, distance: float) -> float:
    """Return how many balanced chords a distance tolerance needs, ``∫ sqrt(κ / 16τ) ds``.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    distance : float
        τ, the largest normal distance allowed [mm].

    Returns
    -------
    float
        The number of chords [-], not rounded.
    """
    _, running = _chord_density(curve)
    return float(running[-1] / np.sqrt(16.0 * distance))


def balanced_chords(curve: Meridian, *, distance: float, slope: float = 0.0) -> ArcPath:
    """Return the polyline, of as few chords as will do, that keeps to a curve on both sides.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    distance : float
        Largest normal distance allowed [mm].
    slope : float
        Largest angle allowed between chord and curve [rad]; 0 asks for none.

    Returns
    -------
    ArcPath
        Vertices off the curve by as much as the chords' middles are on the other side; every bulge is 0.

    Raises
    ------
    GeometryError
        If more than 20 000 chords would be needed.
    """
    count = max(1, int(np.ceil(chord_limit(curve, distance))))
    while count <= MOST_CHORDS:
        path = chords(curve, count)
        found = deviation(curve, path)
        if found.normal <= distance and (slope <= 0.0 or found.slope <= slope):
            return path
        excess = max(np.sqrt(found.normal / distance), found.slope / slope if slope > 0.0 else 0.0)
        count = max(count + 1, int(count * min(0.98 * excess, 4.0)))
    raise GeometryError(
        f"a distance of {distance:g} mm and a slope of {1e3 * slope:g} mrad need more than {MOST_CHORDS} chords; "
        f"allowed: up to {MOST_CHORDS}; do: allow a larger chord error or slope"
    )


def chords(curve: Meridian, count: int) -> ArcPath:
    """Return a polyline of so many chords whose deviation is balanced on both sides.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    count : int
        Number of chords, at least 1.

    Returns
    -------
    ArcPath
        Every bulge is 0.
    """
    where, running = _chord_density(curve)
    joints = np.interp(np.linspace(0.0, running[-1], count + 1), running, where)
    middles = 0.5 * (joints[:-1] + joints[1:])
    rise = curve.curvature(middles) * np.diff(joints) ** 2 / 16.0
    offsets = -0.5 * (np.concatenate([rise[:1], rise]) + np.concatenate([rise, rise[-1:]]))
    vertices = curve.points(joints) + offsets[:, None] * curve.normals(joints)
    if curve.on_axis:
        vertices[0, 0] = 0.0
    return ArcPath(vertices, np.zeros(count))


def _chord_density(curve: Meridian) -> tuple[Array, Array]:
    """Return arc lengths and the running integral of ``sqrt(κ)`` there."""
    where = np.linspace(curve.start, curve.end, 4001)
    # Flat stretches keep a trace of density, so that joints stay apart.
    bend = np.abs(curve.curvature(where))
    density = np.sqrt(bend + 1e-4 * bend.max() + 1e-15)
    running = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]) * np.diff(where))])
    return where, running
