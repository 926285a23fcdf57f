"""Where the rings of a triangulated surface of revolution go, and how many vertices each has, for the fewest triangles.

Lengths are measured in the *metric of the chord error*: along the meridian ``du = sqrt|κ| ds``, around the axis the circle
``c = 2π sqrt(r |sin ψ|)``. In it a triangle whose corners lie on the surface strays by ``R²/2``, R being its
circumradius, or the largest half side where it is obtuse. The best triangle is equilateral (Fejes Tóth), and

    ``N* = ∫ c du / ((3√3/2) τ)``

of them are needed, half as many where the deviation is balanced on both sides.

Rings come in *bands*: within a band each ring has the same count and is turned by half a step against the one before,
which makes isosceles triangles, nearly equilateral ones. Only between two bands, where the count grows, the triangles
take every shape up to right-angled ones, and that strip must be lower. Bands grow by about the cube root of ``2/n``, where
what the strips between them cost and what the change of shape within them costs are balanced.

References
----------
L. Fejes Tóth, P. M. Gruber: best approximation of convex surfaces by polyhedra (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from math import ceil, cos, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from profiles.facets import facet_spans
from profiles.meridian import Meridian
from profiles.stitching import Rings, Sample
from profiles.surfaces import Surface, TurnedCurve

Array = NDArray[np.float64]

GRID = 4096
LEAST_COUNT = 6
FIRST_RADIUS = 0.5
"""Radius of the first ring about a pole [mm] that readers which weld near vertices need; smaller only if it must be."""

GROWTHS = np.linspace(0.6, 2.2, 17)
PATIENCE = np.linspace(0.86, 1.0, 8)
ROUNDS = 5
SWEEPS = 6
SAMPLE = 24


@dataclass(frozen=True, eq=False)
class RingRow:
    """The rings of a surface from its inner to its outer end.

    Parameters
    ----------
    where : ndarray of shape (k,)
        Arc length of each ring [mm].
    counts : ndarray of shape (k,)
        Vertices of each ring; 1 for the pole.
    """

    where: Array
    counts: NDArray[np.int64]

    @property
    def triangles(self) -> int:
        """How many triangles the strips between the rings have."""
        several = np.where(self.counts > 1, self.counts, 0)
        return int((several[:-1] + several[1:]).sum())


def chord_measure(curve: Meridian) -> float:
    """Return ``∫ sqrt|K| dA`` over the surface that a curve turns [mm], K being the Gaussian curvature."""
    where, density = _density(curve)
    return float(np.trapezoid(density[0] * density[1], where))


def forming_rings(surface: TurnedCurve, spread: float, *, start: int, end: int) -> RingRow:
    """Return the fewest rings and vertices that keep within a spread of deviations.

    Parameters
    ----------
    surface : TurnedCurve
        The surface, from the pole or a bore outwards [mm].
    spread : float
        Difference allowed between the largest and the smallest deviation of a facet with corners on the surface [mm].
    start, end : int
        Least count of the first ring (0 for a pole) and of the last one.

    Returns
    -------
    RingRow
        Rings whose facets keep the spread.
    """
    goal = radius = sqrt(2.0 * spread)
    best: RingRow | None = None
    for _ in range(ROUNDS):
        row, found = _levelled(surface, _fewest(_Metric.of(surface.curve, goal), radius, start, end))
        if found <= spread and (best is None or row.triangles < best.triangles):
            best = row
        change = sqrt(spread / found) * 0.999 if found > 0.0 else 1.0
        if best is not None and 0.99 < change < 1.02:
            break
        radius *= min(max(change, 0.5), 1.1)
    while best is None:
        radius *= 0.93
        row, found = _levelled(surface, _fewest(_Metric.of(surface.curve, goal), radius, start, end))
        best = row if found <= spread else None
    return best


def _density(curve: Meridian) -> tuple[Array, tuple[Array, Array]]:
    """Return arc lengths with ``du/ds`` and ``c`` there."""
    grids = [np.linspace(start, end, GRID // (len(curve.breaks) - 1) + 2) for start, end in pairwise(curve.breaks)]
    where = np.unique(np.concatenate(grids))
    around = np.maximum(curve.radius(where), 0.0) * np.abs(np.sin(curve.slope(where)))
    return where, (np.sqrt(np.abs(curve.curvature(where))), 2.0 * pi * np.sqrt(around))


@dataclass(frozen=True, eq=False)
class _Metric:
    """The circle at even steps of the meridian's length, both in the metric of the chord error."""

    span: float
    circle: Array
    along: tuple[Array, Array]

    @classmethod
    def of(cls, curve: Meridian, radius: float) -> _Metric:
        where, (along, around) = _density(curve)
        # A flat stretch is given a trace of length, so that it counts as less than a strip.
        along = np.maximum(along, 0.3 * radius / (curve.end - curve.start))
        run = np.concatenate([[0.0], np.cumsum(0.5 * (along[1:] + along[:-1]) * np.diff(where))])
        even = np.linspace(0.0, run[-1], GRID + 1)
        return cls(float(run[-1]), np.interp(even, run, np.maximum(around, 1e-6 * radius)), (run, where))

    def around(self, place: Array) -> tuple[Array, Array]:
        """Return the circle at places, and how fast it grows."""
        at = np.clip(place * (GRID / self.span), 0.0, GRID - 1e-9)
        index = at.astype(np.intp)
        rise = self.circle[index + 1] - self.circle[index]
        return self.circle[index] + (at - index) * rise, rise * (GRID / self.span)

    def lengths(self, places: Array) -> Array:
        """Return arc lengths [mm] of places in the metric."""
        return np.asarray(np.interp(places, *self.along))

    def places(self, where: float) -> float:
        """Return the place in the metric of an arc length [mm]."""
        return float(np.interp(where, self.along[1], self.along[0]))


def _isosceles(side: Array, radius: float) -> Array:
    """Return how high isosceles triangles over a side may be: ``R + sqrt(R² − a²/4)``; 0 where none may."""
    room = radius**2 - 0.25 * side * side
    return np.where(room >= 0.0, radius + np.sqrt(np.maximum(room, 0.0)), 0.0)


def _band_height(metric: _Metric, place: Array, count: Array, radius: float) -> tuple[Array, Array]:
    """Return how high strips between rings of one count may be, and the sides on the outer ring."""
    circle, growth = metric.around(place)
    inner = circle / count
    # Chords of the inner ring lie farther from the outer one than its arcs do, those of the outer one nearer.
    most = height = np.maximum(_isosceles(inner, radius) - inner * inner * growth / (8.0 * circle), 0.0)
    for _ in range(2):
        beyond, growth = metric.around(place + height)
        outer = beyond / count
        height = np.minimum(most, _isosceles(outer, radius) + outer * outer * growth / (8.0 * beyond))
    return height, outer


def _change_height(metric: _Metric, place: Array, counts: tuple[Array, Array], radius: float) -> Array:
    """Return how high strips between rings of two counts may be: their longest sides are diameters."""
    inner = metric.around(place)[0] / counts[0]
    outer = metric.around(place + radius)[0] / counts[1]
    return np.sqrt(np.maximum(4.0 * radius**2 - 0.25 * (inner + outer) ** 2, 0.09 * radius**2))


def _marches(metric: _Metric, radius: float, start: int) -> list[list[tuple[float, int]]]:
    """Return places and counts of rings for every habit, each strip as high as may be."""
    growth, patience = (part.ravel() for part in np.meshgrid(GROWTHS, PATIENCE))
    first = _first_rings(metric, radius, start)
    place, count = (np.full(len(growth), first[-1][part]) for part in (0, 1))
    rows = []
    while (place < metric.span).any():
        more = np.maximum(count + 1, np.rint(count + growth * np.cbrt(2.0 * count * count))).astype(np.int64)
        height, side = _band_height(metric, place, count, radius)
        less = side * (count / more)
        # What a side is worth is the area that triangles over it cover.
        change = side * height < patience * less * _isosceles(less, radius)
        done = place >= metric.span
        height = np.where(change, _change_height(metric, place, (count, more), radius), height)
        count = np.where(change & ~done, more, count)
        place = place + height
        place = np.where(place > metric.span - 0.02 * height, metric.span, place)
        rows.append((place, np.where(done, 0, count)))
    places, counts = np.array([row[0] for row in rows]), np.array([row[1] for row in rows])
    kept = [counts[:, lane] > 0 for lane in range(len(growth))]
    return [
        first + list(zip(places[rows, lane].tolist(), counts[rows, lane].tolist(), strict=True))
        for lane, rows in enumerate(kept)
    ]


def _first_rings(metric: _Metric, radius: float, start: int) -> list[tuple[float, int]]:
    """Return the pole and its fan, or the ring at the bore."""
    if start:
        needed = float(metric.around(np.zeros(1))[0][0]) / (1.6 * radius)
        return [(0.0, max(start, LEAST_COUNT, ceil(needed)))]
    count = LEAST_COUNT
    wanted = metric.places(FIRST_RADIUS) * 1.03
    if 2.0 * radius * cos(pi / 24.0) > wanted:
        while 2.0 * radius * cos(pi / count) < wanted:
            count += 1
    return [(0.0, 1), (min(2.0 * radius * cos(pi / count), metric.span), count)]


def _fewest(metric: _Metric, radius: float, start: int, end: int) -> tuple[_Metric, list[tuple[float, int]]]:
    """Return the rings of the habit that needs the fewest triangles."""
    rings = min(_marches(metric, radius, start), key=lambda row: sum(count for _, count in row) - 0.5 * row[-1][1])
    return metric, _ended(metric, rings, radius, end)


def _ended(metric: _Metric, rings: list[tuple[float, int]], radius: float, end: int) -> list[tuple[float, int]]:
    """Return the rings with at least ``end`` vertices on the last one."""
    place, count = rings[-1]
    if count >= end:
        return rings
    if rings[-2][1] == 1:
        return [rings[0], (place, end)]
    near, counts = np.array([place - radius]), (np.array([count]), np.array([end]))
    low = float(_change_height(metric, near, counts, radius)[0])
    inner = [ring for ring in rings[:-1] if ring[0] < place - 1.2 * low] or rings[:1]
    extra = [(place - low, count)] if place - low > inner[-1][0] else []
    return [*inner, *extra, (place, end)]


def _levelled(surface: TurnedCurve, plan: tuple[_Metric, list[tuple[float, int]]]) -> tuple[RingRow, float]:
    """Return rings moved so that every strip strays alike, and the largest spread of a strip [mm]."""
    metric, rings = plan
    places, counts = np.array([ring[0] for ring in rings]), np.array([ring[1] for ring in rings])
    sample = Sample.of(Rings(counts, alternating(counts)), most=SAMPLE)
    # A strip between two counts feels its height half as much.
    power = np.where(counts[1:] == counts[:-1], 0.9, 1.4)
    best, least = places, np.inf
    for _ in range(SWEEPS):
        low, high = strip_spans(surface, surface.curve.points(metric.lengths(places)), sample)
        spreads = high - low
        most = float(spreads.max())
        if most < least:
            best, least = places, most
        if most <= 0.0 or spreads.min() > 0.99 * most:
            break
        heights = np.diff(places) * (most / np.maximum(spreads, 0.1 * most)) ** power
        run = np.concatenate([[0.0], np.cumsum(heights)])
        places = run * (metric.span / run[-1])
    return RingRow(metric.lengths(best), counts), least


def alternating(counts: NDArray[np.int64], *, first: int = 0) -> NDArray[np.int64]:
    """Return which rings are turned by half a step: each against the one before, where it has the same count."""
    turned = [first]
    for before, count in pairwise(counts.tolist()):
        turned.append(1 - turned[-1] if count == before else 0)
    return np.array(turned)


def strip_spans(surface: Surface, points: Array, sample: Sample) -> tuple[Array, Array]:
    """Return the least and the largest signed distance of each strip's facets [mm].

    Parameters
    ----------
    surface : Surface
        The exact surface.
    points : ndarray of shape (k, 2)
        Radius and height of the rings [mm].
    sample : Sample
        The facets to take.

    Returns
    -------
    low, high : ndarray of shape (s,)
        By strip [mm].
    """
    spans = facet_spans(surface, sample.vertices(points), sample.triangles)
    return np.minimum.reduceat(spans.low, sample.firsts), np.maximum.reduceat(spans.high, sample.firsts)
