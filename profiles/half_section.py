"""Flat faces of a solid's half section, and how far its other lines are from a rectangle in it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.meridian import Meridian
from profiles.solids import Solid

Array = NDArray[np.float64]

SAMPLES = 513
ZOOMS = 4


@dataclass(frozen=True)
class Flat:
    """A flat ring or disc across the axis.

    Parameters
    ----------
    height : float
        Where it lies [mm].
    inner, outer : float
        Its radii; the inner one is 0 for a disc [mm].
    looks_up : bool
        Whether the outside is above it.
    """

    height: float
    inner: float
    outer: float
    looks_up: bool


@dataclass(frozen=True)
class Box:
    """A rectangle in the half section.

    Parameters
    ----------
    inner, outer : float
        Its least and its most radius [mm].
    low, high : float
        Its heights [mm].
    """

    inner: float
    outer: float
    low: float
    high: float

    def gaps(self, points: Array) -> Array:
        """Return how far points (k, 2) of the half section are from it, 0 inside [mm]."""
        radius, height = points.T
        across = np.maximum(np.maximum(self.inner - radius, radius - self.outer), 0.0)
        along = np.maximum(np.maximum(self.low - height, height - self.high), 0.0)
        return np.asarray(np.hypot(across, along))


def flat_faces(solid: Solid) -> tuple[Flat, ...]:
    """Return the flat faces of a solid beside its forming surface.

    Parameters
    ----------
    solid : Solid
        The solid [mm].

    Returns
    -------
    tuple of Flat
        In the order of the walk.
    """
    rest = solid.rest
    starts, ends = rest.vertices[:-1], rest.vertices[1:]
    flat = (rest.bulges == 0.0) & (starts[:, 1] == ends[:, 1])
    # The walk has the outside to its left: outwards along what looks up, inwards along what looks down.
    return tuple(
        Flat(height, min(first, last), max(first, last), looks_up=last > first)
        for (first, height), (last, _) in zip(starts[flat].tolist(), ends[flat].tolist(), strict=True)
    )


def curve_gap(curve: Meridian, box: Box) -> float:
    """Return how far a curve is from a rectangle.

    Parameters
    ----------
    curve : Meridian
        The curve [mm].
    box : Box
        The rectangle [mm].

    Returns
    -------
    float
        Least distance [mm], 0 where they meet.
    """
    length = curve.end - curve.start
    return _least_gap(lambda shares: curve.points(curve.start + shares * length), box)


def stretch_gap(path: ArcPath, number: int, box: Box) -> float:
    """Return how far one line or arc of a path is from a rectangle.

    Parameters
    ----------
    path : ArcPath
        The path [mm].
    number : int
        Which of its lines and arcs.
    box : Box
        The rectangle [mm].

    Returns
    -------
    float
        Least distance [mm], 0 where they meet.
    """
    return _least_gap(lambda shares: path.along(number, shares), box)


def _least_gap(points: Callable[[Array], Array], box: Box) -> float:
    """Return the least distance of a line, given by shares of its length, from a rectangle."""
    first, last, least = 0.0, 1.0, np.inf
    for _ in range(ZOOMS):
        shares = np.linspace(first, last, SAMPLES)
        gaps = box.gaps(points(shares))
        best = int(np.argmin(gaps))
        least = min(least, float(gaps[best]))
        first, last = float(shares[max(best - 1, 0)]), float(shares[min(best + 1, SAMPLES - 1)])
    return least
