"""Integrals over a disc, and around its circle, of what depends on the distance from a point alone.

The disc has its centre at a distance d from the point, and radius a. On the circle of radius ρ about the point the
angle ``2φ`` lies inside the disc, ``cos φ = (ρ² + d² − a²)/(2 ρ d)``, so that ``∫∫ f dA = ∫ f(ρ) 2φ(ρ) ρ dρ``. Where f
is smooth it is integrated by Gauss's rule, in an angle that takes away the square roots at the ends.
"""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

NODES = 64
GRADING = 4.0
_PLACES, _WEIGHTS = np.polynomial.legendre.leggauss(NODES)


def over_disc(distance: float, radius: float, values: Callable[[Array], Array], breaks: Array) -> float:
    """Return the integral over a disc of a function of the distance from a point.

    Parameters
    ----------
    distance : float
        From the point to the centre of the disc [mm].
    radius : float
        Of the disc [mm].
    values : callable
        Of an array of distances from the point [mm], in any unit.
    breaks : ndarray
        Distances between which it is smooth [mm].

    Returns
    -------
    float
        In its unit times [mm^2].

    Examples
    --------
    The square of the distance, by the parallel axis theorem ``π a² (d² + a²/2)``:

    >>> found = over_disc(3.0, 2.0, lambda rho: rho**2, np.empty(0))
    >>> round(found / np.pi, 12)
    44.0
    """
    core = radius - distance
    total = 0.0
    if core > 0.0:
        for first, last in pairwise(_cells(0.0, core, breaks)):
            rho, weights = _rule(first, last)
            total += float((weights * values(rho) * 2.0 * np.pi * rho).sum())
    if distance > 0.0:
        for first, last in pairwise(_cells(abs(core), distance + radius, breaks)):
            rho, weights = _rule(first, last)
            total += float((weights * values(rho) * 2.0 * _half_angle(rho, distance, radius) * rho).sum())
    return total


def over_circle(distance: float, radius: float, values: Callable[[Array], Array], breaks: Array) -> float:
    """Return the integral around a circle of a function of the distance from a point.

    Parameters
    ----------
    distance : float
        From the point to the centre of the circle [mm].
    radius : float
        Of the circle [mm].
    values : callable
        Of an array of distances from the point [mm], in any unit.
    breaks : ndarray
        Distances between which it is smooth [mm].

    Returns
    -------
    float
        In its unit times [mm].

    Examples
    --------
    The square of the distance, ``2π a (d² + a²)``:

    >>> found = over_circle(3.0, 2.0, lambda rho: rho**2, np.empty(0))
    >>> round(found / np.pi, 12)
    52.0
    """
    near, far = abs(distance - radius), distance + radius
    inside = breaks[(breaks > near) & (breaks < far)] if distance > 0.0 else np.empty(0)
    cosines = (inside**2 - distance**2 - radius**2) / (2.0 * max(distance, 1e-300) * radius)
    turns = np.unique(np.concatenate([[0.0, np.pi], np.arccos(np.clip(cosines, -1.0, 1.0))]))
    total = 0.0
    for first, last in pairwise(turns.tolist()):
        turn = 0.5 * (first + last) + 0.5 * (last - first) * _PLACES
        rho = np.hypot(distance + radius * np.cos(turn), radius * np.sin(turn))
        total += float((0.5 * (last - first) * _WEIGHTS * values(rho)).sum())
    return 2.0 * radius * total


def _cells(first: float, last: float, breaks: Array) -> list[float]:
    """Return the ends of cells to integrate over: at the breaks, and narrower towards a short first radius."""
    graded = []
    edge = first * GRADING
    while 0.0 < edge < last:
        graded.append(edge)
        edge *= GRADING
    inside = [edge for edge in (*breaks.tolist(), *graded) if first < edge < last]
    return sorted({first, last, *inside})


def _rule(first: float, last: float) -> tuple[Array, Array]:
    """Return places and weights of Gauss's rule in the angle u of ``ρ = m − h cos u``."""
    angle = 0.5 * np.pi * (1.0 + _PLACES)
    half = 0.5 * (last - first)
    # From the nearer end, so that the way to it keeps its digits.
    rho = first + 2.0 * half * np.sin(0.5 * angle) ** 2
    return rho, 0.5 * np.pi * _WEIGHTS * half * np.sin(angle)


def _half_angle(rho: Array, distance: float, radius: float) -> Array:
    """Return half of the angle of a circle about the point that lies inside the disc [rad]."""
    across = np.maximum((radius - rho + distance) * (radius + rho - distance), 0.0) * (
        np.maximum((rho + distance - radius) * (rho + distance + radius), 0.0)
    )
    return np.asarray(np.arctan2(np.sqrt(across), rho**2 + distance**2 - radius**2))
