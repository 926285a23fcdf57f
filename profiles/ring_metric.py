"""The metric in which chord errors are squares of lengths, and how high strips of triangles may be in it.

Along the meridian ``du = sqrt|κ| ds``, around the axis the circle ``c = 2π sqrt(r |sin ψ|)``. In this metric a triangle
whose corners lie on the surface strays by ``R²/2``, R being its circumradius, or half its longest side where it is
obtuse. All lengths here are lengths of the metric unless a name says otherwise.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from math import cos, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from profiles.meridian import Meridian

Array = NDArray[np.float64]
Counts = NDArray[np.int64]

GRID = 4096
LOWEST = 0.4
"""Lowest strip worth having, in circumradii: lower ones waste triangles, and fold where rings are small."""

LANDINGS = 12


def chord_measure(curve: Meridian) -> float:
    """Return ``∫ sqrt|K| dA`` over the surface that a curve turns.

    Parameters
    ----------
    curve : Meridian
        The curve [mm].

    Returns
    -------
    float
        The integral, K being the Gaussian curvature [mm].
    """
    where, (along, around) = _density(curve)
    return float(np.trapezoid(along * around, where))


def _density(curve: Meridian) -> tuple[Array, tuple[Array, Array]]:
    """Return arc lengths with ``du/ds`` and ``c`` there."""
    share = GRID // (len(curve.breaks) - 1) + 2
    where = np.unique(np.concatenate([np.linspace(*ends, share) for ends in pairwise(curve.breaks.tolist())]))
    around = np.maximum(curve.radius(where), 0.0) * np.abs(np.sin(curve.slope(where)))
    return where, (np.sqrt(np.abs(curve.curvature(where))), 2.0 * pi * np.sqrt(around))


@dataclass(frozen=True, eq=False)
class Metric:
    """A surface of revolution in the metric of the chord error.

    Parameters
    ----------
    span : float
        Length of the meridian.
    circle : ndarray of shape (GRID + 1,)
        Circle around the axis at even steps of that length.
    along : tuple of ndarray
        Increasing lengths, and the curve's arc lengths there [mm].
    """

    span: float
    circle: Array
    along: tuple[Array, Array]

    @classmethod
    def of(cls, curve: Meridian, radius: float) -> Metric:
        """Return the metric of the surface that a curve turns, flat stretches being given a trace of ``radius``."""
        where, (along, around) = _density(curve)
        along = np.maximum(along, 0.3 * radius / (curve.end - curve.start))
        run = np.concatenate([[0.0], np.cumsum(0.5 * (along[1:] + along[:-1]) * np.diff(where))])
        even = np.linspace(0.0, run[-1], GRID + 1)
        return cls(float(run[-1]), np.interp(even, run, np.maximum(around, 1e-6 * radius)), (run, where))

    def arc_lengths(self, places: Array) -> Array:
        """Return arc lengths [mm] of places."""
        return np.asarray(np.interp(places, *self.along))

    def place(self, arc_length: float) -> float:
        """Return the place of an arc length [mm]."""
        return float(np.interp(arc_length, self.along[1], self.along[0]))

    def around(self, place: Array) -> tuple[Array, Array]:
        """Return the circle at places, and how fast it grows."""
        at = np.clip(place * (GRID / self.span), 0.0, GRID - 1e-9)
        index = at.astype(np.intp)
        rise = self.circle[index + 1] - self.circle[index]
        return self.circle[index] + (at - index) * rise, rise * (GRID / self.span)

    def band_height(self, place: Array, count: Array, radius: float) -> tuple[Array, Array]:
        """Return how high strips between rings of one count may be, and the sides of triangles on the outer ring."""
        circle, growth = self.around(place)
        inner = circle / count
        # Chords of the inner ring lie farther from the outer one than its arcs do, those of the outer one nearer.
        most = height = np.maximum(_isosceles(inner, radius) - inner * inner * growth / (8.0 * circle), 0.05 * radius)
        for _ in range(2):
            beyond, growth = self.around(place + height)
            outer = beyond / count
            height = np.minimum(most, _isosceles(outer, radius) + outer * outer * growth / (8.0 * beyond))
        return height, outer

    def change_height(self, place: Array, inner_count: Array, outer_count: Array, radius: float) -> Array:
        """Return how high strips between rings of two counts may be.

        The worst triangle over the inner ring has its foot half an outer side off the middle, at p and q from the ends:
        ``(h² + p²)(h² + q²) = 4 R² h²``. The worst over the outer ring is obtuse, with the same longest side.
        """
        circle, growth = self.around(place)
        inner = circle / inner_count
        outer = self.around(place + radius)[0] / outer_count
        short, long = 0.5 * np.maximum(inner - outer, 0.0), 0.5 * (inner + outer)
        room = 4.0 * radius**2 - short * short - long * long
        rest = np.sqrt(np.maximum(room * room - (2.0 * short * long) ** 2, 0.0))
        height = np.sqrt(np.maximum(0.5 * (room + rest), 0.0)) - inner * inner * growth / (8.0 * circle)
        return np.maximum(height, 0.05 * radius)

    def landing(
        self, counts: list[int], factors: Array, *, guess: float = 0.0, closeness: float = 1e-6
    ) -> tuple[float, Array]:
        """Return the circumradius with which strips of given counts fill the span, and the places of their rings.

        Parameters
        ----------
        counts : list of int
            Vertices of each ring; 1 for a pole at the start.
        factors : ndarray of shape (len(counts) - 1,)
            Each strip's own circumradius, as a multiple of the one returned.
        guess : float
            A circumradius to begin with, 0 for none.
        closeness : float
            How closely the span is met before the places are stretched to it, as a part of it.

        Returns
        -------
        radius : float
            The circumradius.
        places : ndarray of shape (len(counts),)
            From 0 to the span.
        """
        radius, places, miss = guess or self.span / (1.4 * len(factors)), np.zeros(1), 1.0
        for _ in range(LANDINGS):
            places = np.array(self._rings(counts, (radius * factors).tolist()))
            miss = float(places[-1]) / self.span
            if abs(miss - 1.0) < closeness:
                break
            # Heights grow by somewhat more than the square of the circumradius, the sides being given.
            radius *= min(max(miss**-0.45, 0.5), 2.0)
        return radius, places / miss

    def folded(self, places: Array, radius: float) -> bool:
        """Whether a strip between places is too low to be a good one."""
        return bool(np.diff(places).min() < LOWEST * radius)

    def _rings(self, counts: list[int], radii: list[float]) -> list[float]:
        """Return the places of rings of given counts, each strip as high as its circumradius allows."""
        place, places = 0.0, [0.0]
        for (inner, outer), radius in zip(pairwise(counts), radii, strict=True):
            if inner == 1:
                place += 2.0 * radius * cos(pi / outer)
            elif inner == outer:
                place += self._band_step(place, inner, radius)
            else:
                place += self._change_step(place, inner, outer, radius)
            places.append(place)
        return places

    @cached_property
    def _steps(self) -> tuple[list[float], float]:
        """The circle as a list, which is faster for one place at a time, and steps per length."""
        return self.circle.tolist(), GRID / self.span

    def _around_one(self, place: float) -> tuple[float, float]:
        circle, steps = self._steps
        at = place * steps
        index = min(int(at), GRID - 1)
        rise = circle[index + 1] - circle[index]
        return circle[index] + (at - index) * rise, rise * steps

    def _band_step(self, place: float, count: int, radius: float) -> float:
        """`band_height` for one place."""
        circle, growth = self._around_one(place)
        side = circle / count
        room = radius * radius - 0.25 * side * side
        most = height = max(radius + sqrt(max(room, 0.0)) - side * side * growth / (8.0 * circle), 0.05 * radius)
        for _ in range(2):
            circle, growth = self._around_one(min(place + height, self.span))
            side = circle / count
            room = radius * radius - 0.25 * side * side
            tall = sqrt(room) if room > 0.0 else -sqrt(-room)
            height = min(most, max(radius + tall + side * side * growth / (8.0 * circle), 0.05 * radius))
        return height

    def _change_step(self, place: float, inner_count: int, outer_count: int, radius: float) -> float:
        """`change_height` for one place."""
        circle, growth = self._around_one(place)
        inner = circle / inner_count
        outer = self._around_one(min(place + radius, self.span))[0] / outer_count
        short, long = 0.5 * max(inner - outer, 0.0), 0.5 * (inner + outer)
        room = 4.0 * radius * radius - short * short - long * long
        rest = sqrt(max(room * room - (2.0 * short * long) ** 2, 0.0))
        height = sqrt(max(0.5 * (room + rest), 0.0)) - inner * inner * growth / (8.0 * circle)
        return max(height, 0.05 * radius)


def worth(side: Array, radius: float) -> Array:
    """Return what area isosceles triangles over a side cover, two by two.

    Parameters
    ----------
    side : ndarray
        The side, in the metric.
    radius : float
        Circumradius that the triangles may have, in the metric.

    Returns
    -------
    ndarray
        Side times height; 0 where no such triangle has so small a circumradius.
    """
    return side * _isosceles(side, radius)


def _isosceles(side: Array, radius: float) -> Array:
    """Return how high isosceles triangles over a side may be: ``R + sqrt(R² − a²/4)``; 0 where none may."""
    room = radius**2 - 0.25 * side * side
    return np.where(room >= 0.0, radius + np.sqrt(np.maximum(room, 0.0)), 0.0)
