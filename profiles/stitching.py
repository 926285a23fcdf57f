"""Rings of vertices about an axis, and the triangles between neighbouring rings, joined by index.

A ring is a circle divided evenly; a *pole* is a ring of one vertex on the axis. A ring begins at the azimuth 0, or half
a step after it when it is *turned*. Between two rings each step of either makes one triangle, with the nearest vertex
of the other ring: as many triangles as both have vertices, no vertex on an edge, and no seam.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import gcd

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Rows = NDArray[np.intp]


@dataclass(frozen=True, eq=False)
class Rings:
    """Rings in the order of a walk that has the outside to its left; each strip joins a ring to the next.

    Parameters
    ----------
    counts : ndarray of shape (k,)
        Vertices of each ring; 1 for a pole.
    turned : ndarray of shape (k,)
        1 for a ring that begins half a step after azimuth 0, else 0.
    closed : bool
        Whether a last strip joins the last ring to the first.
    """

    counts: NDArray[np.int64]
    turned: NDArray[np.int64]
    closed: bool = False

    @property
    def firsts(self) -> NDArray[np.int64]:
        """Row number of each ring's first vertex."""
        return np.concatenate([[0], np.cumsum(self.counts)[:-1]])

    @property
    def pairs(self) -> list[tuple[int, int]]:
        """Numbers of the two rings of each strip."""
        number = len(self.counts)
        return [(index, (index + 1) % number) for index in range(number if self.closed else number - 1)]

    def ring(self, index: int) -> tuple[int, int]:
        """Return how many vertices a ring has, and 1 where it is turned."""
        return int(self.counts[index]), int(self.turned[index])

    def azimuths(self, ring: Rows, step: Rows) -> Array:
        """Return the azimuths [rad] of vertices, given by ring and step."""
        return np.asarray(np.pi * (2 * step + self.turned[ring]) / self.counts[ring])

    def vertices(self, points: Array) -> Array:
        """Return the vertices in space (n, 3) of rings at points (radius, height) (k, 2) [mm]."""
        ring = np.repeat(np.arange(len(self.counts)), self.counts)
        step = np.arange(len(ring)) - self.firsts[ring]
        return _turned(points[ring], self.azimuths(ring, step))

    def strips(self) -> list[Rows]:
        """Return the triangles of each strip, counter-clockwise seen from outside."""
        firsts, found = self.firsts, []
        for one, other in self.pairs:
            count = int(self.counts[one])
            part = stitch(self.ring(one), self.ring(other))
            found.append(np.where(part < count, firsts[one] + part, firsts[other] + part - count))
        return found


@dataclass(frozen=True, eq=False)
class Sample:
    """Triangles that stand for all others of their strip by symmetry, on vertices of their own.

    Parameters
    ----------
    rings : ndarray of shape (n,)
        Ring of each vertex.
    angles : ndarray of shape (n,)
        Azimuth of each vertex [rad].
    triangles : ndarray of shape (m, 3)
        Row numbers of vertices, strip after strip.
    firsts : ndarray of shape (s,)
        Row number of each strip's first triangle.
    """

    rings: Rows
    angles: Array
    triangles: Rows
    firsts: Rows

    @classmethod
    def of(cls, rings: Rings, *, most: int | None = None) -> Sample:
        """Return one period of every strip of rings, or about ``most`` triangles of it that lean most and least."""
        firsts = rings.firsts
        parts = []
        for one, other in rings.pairs:
            first, second = rings.ring(one), rings.ring(other)
            part = stitch(first, second, share=gcd(first[0], second[0]) if 1 not in {first[0], second[0]} else 0)
            if most is not None and len(part) > most:
                part = part[_extremes(part, first, second, most)]
            parts.append(np.where(part < first[0], firsts[one] + part, firsts[other] + part - first[0]))
        used, triangles = np.unique(np.concatenate(parts), return_inverse=True)
        number = np.searchsorted(firsts, used, side="right") - 1
        angles = rings.azimuths(number, used - firsts[number])
        starts = np.cumsum([0, *(len(part) for part in parts[:-1])])
        return cls(number, angles, triangles.reshape(-1, 3), starts)

    def vertices(self, points: Array) -> Array:
        """Return the vertices in space (n, 3) for rings at points (radius, height) (k, 2) [mm]."""
        return _turned(points[self.rings], self.angles)


def _extremes(part: Rows, one: tuple[int, int], other: tuple[int, int], most: int) -> Rows:
    """Return which triangles of a strip lean most and least, over the first ring and over the second."""
    azimuth = np.where(
        part < one[0], (2 * part + one[1]) / (2 * one[0]), (2 * (part - one[0]) + other[1]) / (2 * other[0])
    )
    over_other = part[:, 2] >= one[0]
    apex = np.where(over_other, azimuth[:, 0], azimuth[:, 1])
    base = np.where(over_other, azimuth[:, 1], azimuth[:, 0])
    step = np.where(over_other, 0.5 / other[0], 0.5 / one[0])
    lean = np.abs((base + step - apex + 0.5) % 1.0 - 0.5)
    chosen = []
    for rows in (np.flatnonzero(over_other), np.flatnonzero(~over_other)):
        order = rows[np.argsort(lean[rows], kind="stable")]
        chosen += [order[: most // 8], order[-(most // 2 - most // 8) :]]
    return np.unique(np.concatenate(chosen))


def _turned(points: Array, angles: Array) -> Array:
    """Return points (radius, height) (n, 2) turned about the axis, in space (n, 3)."""
    return np.column_stack([points[:, 0] * np.cos(angles), points[:, 0] * np.sin(angles), points[:, 1]])


def stitch(one: tuple[int, int], other: tuple[int, int], *, share: int = 1) -> Rows:
    """Return the triangles between two rings.

    Parameters
    ----------
    one, other : tuple of int
        How many vertices a ring has, and 1 where it is turned by half a step, else 0.
    share : int
        Return the first of so many equal shares of them only; 0 for a single triangle at a pole.

    Returns
    -------
    ndarray of shape (m, 3)
        Vertices of the first ring count from 0, those of the second go on from there.

    Examples
    --------
    >>> stitch((1, 0), (3, 0)).tolist()
    [[0, 1, 2], [0, 2, 3], [0, 3, 1]]
    """
    (first, first_turned), (second, second_turned) = one, other
    steps = [0 if count == 1 else count // share if share else 1 for count in (first, second)]
    # A step's middle, as a share of the circle times twice both counts: whole numbers, so that ties are ties.
    middles_one = (2 * np.arange(steps[0]) + 1 + first_turned) * second
    middles_other = (2 * np.arange(steps[1]) + 1 + second_turned) * first
    of_other = np.argsort(np.concatenate([middles_one, middles_other]), kind="stable") >= steps[0]
    here: Rows = np.cumsum(~of_other) - ~of_other
    there: Rows = np.cumsum(of_other) - of_other
    third = np.where(of_other, first + (there + 1) % second, (here + 1) % first)
    return np.column_stack([here % first, first + there % second, third])
