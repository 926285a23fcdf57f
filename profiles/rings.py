"""Where the rings of a triangulated surface of revolution go, and how many vertices each has, for the fewest triangles.

In the metric of the chord error (:mod:`profiles.ring_metric`) the best triangle is equilateral (Fejes Tóth), and

    ``N* = ∫ sqrt|K| dA / ((3√3/2) τ)``

of them are needed, half as many where the deviation is balanced on both sides.

Rings come in *bands*: within a band each ring has the same count and is turned by half a step against the one before,
which makes isosceles triangles, nearly equilateral ones. Only between two bands, where the count grows, the triangles
take every shape up to right-angled ones, and that strip must be lower. Bands grow by about the cube root of ``2/n``,
where what the strips between them cost and what the change of shape within them costs are balanced. Several such
*habits* are tried; the best is thinned out until its strips are as high as they may be, and its rings are then moved
until every strip strays alike, by its exact deviation.

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

from profiles.errors import GeometryError
from profiles.facets import facet_spans
from profiles.ring_metric import Metric, worth
from profiles.stitching import Rings, Sample
from profiles.surfaces import Surface, TurnedCurve

Array = NDArray[np.float64]
Counts = NDArray[np.int64]
Plan = list[tuple[float, int]]

LEAST_COUNT = 6
FEW = 20
"""Rings of so few vertices are not thinned out."""

FIRST_RADIUS = 0.5
"""Radius of the first ring about a pole [mm] that readers which weld near vertices need; smaller only if it must be."""

GROWTHS = np.linspace(0.6, 2.2, 17)
PATIENCE = np.linspace(0.86, 1.0, 8)
LEAST_CHANGE = 0.6
CANDIDATES = 2
THINNINGS = 6
ROUNDS = 5
SWEEPS = 4
SAMPLE = 24
LAST_ROUNDS = 30
FOLDED = 1.03
"""What rings too close to each other count as: more than is allowed."""


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
    counts: Counts


def forming_rings(surface: TurnedCurve, spread: float, *, start: int, end: int, ease: float = 1.0) -> RingRow:
    """Return the fewest rings and vertices that keep within a spread of deviations.

    Parameters
    ----------
    surface : TurnedCurve
        The surface, from the pole or a bore outwards [mm].
    spread : float
        Difference allowed between the largest and the smallest deviation of a facet with corners on the surface [mm].
    start, end : int
        Least count of the first ring (0 for a pole) and of the last one.
    ease : float
        Part of the spread that the last strip may use.

    Returns
    -------
    RingRow
        Rings whose facets keep the spread.

    Raises
    ------
    GeometryError
        If no rings are found that do.
    """
    radius = sqrt(2.0 * spread)
    task = _Task(surface, Metric.of(surface.curve, radius), spread, (start, end), ease)
    plans = sorted((_ended(task, plan, radius) for plan in _marches(task, radius)), key=triangle_count)[:CANDIDATES]
    search = _Search(radius)
    for _ in range(ROUNDS):
        thinned = [(_thinned(task, plan, search.radius), plan) for plan in plans]
        counts, plan = min(thinned, key=lambda pair: triangle_count(pair[0]))
        plans = [plan]
        if search.settled(*_levelled(task, counts, search.radius)):
            break
    for _ in range(ROUNDS if search.best is None else 0):
        counts = _denser(counts, 1.04)
        if search.settled(*_levelled(task, counts, radius)) or search.best:
            break
    return search.best or _one_band(task, radius)


@dataclass(frozen=True, eq=False)
class _Task:
    """What rings are wanted for; ``ends`` are the least counts of the first and the last ring."""

    surface: TurnedCurve
    metric: Metric
    spread: float
    ends: tuple[int, int]
    ease: float


class _Search:
    """The search for the largest circumradius whose rings keep the spread."""

    def __init__(self, radius: float) -> None:
        self.radius = radius
        self.best: RingRow | None = None
        self._good, self._bad, self._failures = 0.0, np.inf, 0

    def settled(self, row: RingRow, excess: float) -> bool:
        """Take rings and their spread, as a part of what is allowed; return whether better ones need no search."""
        if excess <= 1.0:
            self._good = self.radius
            if self.best is None or triangle_count(row.counts.tolist()) < triangle_count(self.best.counts.tolist()):
                self.best = row
        else:
            self._bad = min(self._bad, self.radius)
            self._failures += 1
        # Counts are whole numbers: a step too small would give the same ones again.
        goal = 0.9995 - 0.002 * self._failures
        change = min(max(goal / sqrt(max(excess, 1e-9)), 0.5), 1.1)
        self.radius *= change
        if self._good and self._bad < np.inf and not self._good < self.radius < self._bad:
            self.radius = sqrt(self._good * self._bad)
        return self.best is not None and ((excess <= 1.0 and change < 1.006) or self._bad < 1.006 * self._good)


def _one_band(task: _Task, radius: float) -> RingRow:
    """Return rings of one count, for surfaces whose few rings fit no bands."""
    circle = float(task.metric.circle.max())
    count, strips = max(*task.ends, LEAST_COUNT, ceil(circle / (1.5 * radius))), ceil(task.metric.span / radius)
    for _ in range(LAST_ROUNDS):
        first = count if task.ends[0] else 1
        row, excess = _levelled(task, [first] + [count] * max(strips, 1), radius)
        if excess <= 1.0:
            return row
        count, strips = ceil(1.15 * count), ceil(1.15 * strips)
    raise GeometryError(
        f"no rings of facets were found that stray by less than {task.spread:g} mm on this forming surface; allowed: "
        "a surface that is smooth against the chord error; do: allow a larger chord error or a smoother surface"
    )


def triangle_count(counts: list[int]) -> int:
    """Return how many triangles the strips between rings of given counts have.

    Parameters
    ----------
    counts : list of int
        Vertices of each ring, 1 for a pole.

    Returns
    -------
    int
        Number of triangles.

    Examples
    --------
    >>> triangle_count([1, 6, 12])
    24
    """
    several = [0 if count == 1 else count for count in counts]
    return 2 * sum(several) - several[0] - several[-1]


def _marches(task: _Task, radius: float) -> list[Plan]:
    """Return places and counts of rings for every habit, each strip as high as may be."""
    metric = task.metric
    growth, patience = (part.ravel() for part in np.meshgrid(GROWTHS, PATIENCE))
    first = _first_rings(metric, radius, task.ends[0])
    place, count = (np.full(len(growth), first[-1][part]) for part in (0, 1))
    rows = []
    while (place < metric.span).any():
        more = np.maximum(count + 1, np.rint(count + growth * np.cbrt(2.0 * count * count))).astype(np.int64)
        height, side = metric.band_height(place, count, radius)
        change = side * height < patience * worth(side * (count / more), radius)
        # Nor may a band go on until its last ring leaves no room for the strip to the next.
        change |= metric.change_height(place + height, count, more, radius) < LEAST_CHANGE * radius
        done = place >= metric.span
        height = np.where(change, metric.change_height(place, count, more, radius), height)
        count = np.where(change & ~done, more, count)
        place = place + height
        place = np.where(place > metric.span - 0.02 * height, metric.span, place)
        rows.append((place, np.where(done, 0, count)))
    if not rows:
        return [first]
    places, counts = (np.array([row[part] for row in rows]) for part in (0, 1))
    kept = (counts > 0).sum(axis=0).tolist()
    return [
        first + list(zip(places[:length, lane].tolist(), counts[:length, lane].tolist(), strict=True))
        for lane, length in enumerate(kept)
    ]


def _first_rings(metric: Metric, radius: float, start: int) -> Plan:
    """Return the pole and its fan, or the ring at the bore."""
    if start:
        needed = max(ceil(float(metric.around(np.zeros(1))[0][0]) / (1.6 * radius)), LEAST_COUNT)
        beyond = max(ceil(float(metric.around(np.full(1, radius))[0][0]) / (1.4 * radius)), LEAST_COUNT)
        if start <= 1.2 * beyond:
            return [(0.0, max(start, needed))]
        # A bore may ask for more than the forming surface does: one strip gets rid of it.
        height = metric.change_height(np.zeros(1), np.array([start]), np.array([beyond]), radius)
        return [(0.0, start), (min(float(height[0]), metric.span), beyond)]
    count = LEAST_COUNT
    wanted = metric.place(FIRST_RADIUS) * 1.03
    if 2.0 * radius * cos(pi / 24.0) > wanted:
        while 2.0 * radius * cos(pi / count) < wanted:
            count += 1
    return [(0.0, 1), (min(2.0 * radius * cos(pi / count), metric.span), count)]


def _ended(task: _Task, plan: Plan, radius: float) -> list[int]:
    """Return the counts of a plan with enough vertices on the last ring."""
    metric, end = task.metric, task.ends[1]
    counts = [count for _, count in plan]
    if counts[-1] >= end:
        return counts
    place = np.array([metric.span - radius])
    height = float(metric.change_height(place, np.array(counts[-1:]), np.array([end]), radius)[0])
    # One more strip takes the change; what it covers is taken from those before it.
    inner = [count for where, count in plan[:-1] if where < metric.span - 1.2 * height] or counts[:1]
    return [*inner, counts[-1], end] if inner[-1] > 1 or len(counts) > 2 else [1, end]


def _thinned(task: _Task, counts: list[int], radius: float) -> list[int]:
    """Return counts made smaller in one proportion until the strips are as high as they may be."""
    metric, ends = task.metric, task.ends
    low, high, best = 0.8, 1.12, _denser(counts, 1.12)
    even, needed = np.ones(len(counts) - 1), radius
    for _ in range(THINNINGS):
        share = 0.5 * (low + high)
        fewer = [round(count * share) if count > FEW else count for count in counts]
        fewer = [max(fewer[0], ends[0]), *fewer[1:-1], max(fewer[-1], ends[1])]
        needed, places = metric.landing(fewer, even, guess=needed, closeness=1e-3)
        if needed <= radius and not metric.folded(places, radius):
            high, best = share, fewer
        else:
            low = share
    return best


def _denser(counts: list[int], share: float) -> list[int]:
    return [ceil(count * share) if count > 1 else 1 for count in counts]


def _levelled(task: _Task, counts: list[int], radius: float) -> tuple[RingRow, float]:
    """Return rings placed so that every strip strays alike, and the largest spread as a part of what is allowed."""
    surface, metric = task.surface, task.metric
    number = np.array(counts)
    sample = Sample.of(Rings(number, alternating(number)), most=SAMPLE)
    factors, best, least = np.ones(len(counts) - 1), np.empty(0), np.inf
    for _ in range(SWEEPS):
        radius, places = metric.landing(counts, factors, guess=radius, closeness=1e-4)
        low, high = strip_spans(surface, surface.curve.points(metric.arc_lengths(places)), sample)
        spreads = (high - low) / task.spread
        spreads[-1] /= task.ease
        most = float(spreads.max())
        if metric.folded(places, 0.8 * radius):
            most = max(most, FOLDED)
        if most < least:
            best, least = places, most
        if spreads.min() > 0.985 * most:
            break
        factors *= np.sqrt(spreads.mean() / np.maximum(spreads, 0.1 * most))
    return RingRow(metric.arc_lengths(best), number), least


def alternating(counts: Counts, *, first: int = 0) -> Counts:
    """Return which rings are turned by half a step: each against the one before, where it has the same count.

    Parameters
    ----------
    counts : ndarray of shape (k,)
        Vertices of each ring.
    first : int
        Whether the first ring is turned.

    Returns
    -------
    ndarray of shape (k,)
        1 for a turned ring, else 0.
    """
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
