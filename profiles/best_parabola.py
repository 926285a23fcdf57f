"""The parabola that departs least from a curve: how far a mould's curve is from being a parabola itself."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.errors import GeometryError
from profiles.meridian import Meridian

Array = NDArray[np.float64]

SAMPLES = 401
ROUNDS = 40


@dataclass(frozen=True)
class BestParabola:
    """The parabola of least largest departure.

    Parameters
    ----------
    focal_length : float
        Its focal length [mm].
    vertex_height : float
        Height of its vertex [mm].
    departure : float
        Largest distance between it and the curve, along the normal [mm].
    """

    focal_length: float
    vertex_height: float
    departure: float


def best_parabola(curve: Meridian) -> BestParabola:
    """Return the parabola ``z = z0 + r²/4f`` whose largest normal distance from a curve is least.

    Parameters
    ----------
    curve : Meridian
        The curve [mm].

    Returns
    -------
    BestParabola
        Focal length, vertex height and largest distance [mm], the distance to about 1e-3 of itself.

    Raises
    ------
    GeometryError
        If no bowl-shaped parabola fits.

    Notes
    -----
    Remez's exchange for two unknowns: three points of the curve take turns in sign, and each round moves them to where
    the distance is largest. Distances along the axis times the cosine of the slope stand for normal ones, which is
    exact to first order in the distance.

    Examples
    --------
    >>> from profiles.face import Face
    >>> fit = best_parabola(Meridian.of_face(Face(110.0), 100.0))
    >>> round(fit.focal_length, 6), round(fit.departure, 6)
    (110.0, 0.0)
    """
    turn = 0.5 - 0.5 * np.cos(np.pi * np.arange(SAMPLES) / (SAMPLES - 1))
    where = curve.start + (curve.end - curve.start) * turn
    radius, height = curve.points(where).T
    square, cosine = radius**2, np.cos(curve.slope(where))
    nodes = np.array([0, SAMPLES // 2, SAMPLES - 1])
    for _ in range(ROUNDS):
        system = np.column_stack([square[nodes], np.ones(3), np.array([1.0, -1.0, 1.0]) / cosine[nodes]])
        opening, vertex, level = np.linalg.solve(system, height[nodes])
        gaps = (height - opening * square - vertex) * cosine
        if np.abs(gaps).max() <= abs(level) * (1.0 + 1e-4) + 1e-13 * curve.end:
            break
        nodes = _exchanged(gaps, nodes)
    if opening <= 0.0:
        raise GeometryError("no parabola that opens upwards comes near the curve: check the face and its springback")
    return BestParabola(float(0.25 / opening), float(vertex), float(np.abs(gaps).max()))


def _exchanged(gaps: Array, nodes: NDArray[np.int_]) -> NDArray[np.int_]:
    """Return three places of alternating sign with the largest distance among them."""
    worst = int(np.argmax(np.abs(gaps)))
    same = [number for number in range(3) if np.sign(gaps[nodes[number]]) == np.sign(gaps[worst])]
    row = list(nodes)
    if worst < row[0]:
        row = [worst, *(row[1:] if 0 in same else row[:2])]
    elif worst > row[2]:
        row = [*(row[:2] if 2 in same else row[1:]), worst]
    else:
        nearest = min(same or [1], key=lambda number: abs(row[number] - worst))
        row[nearest] = worst
    return np.array(sorted(row))
