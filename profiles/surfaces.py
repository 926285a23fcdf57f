"""Signed distance from points in space to the surface that one stretch of a half section turns about the axis.

The z-axis of space is the axis of revolution. The *outside* of a stretch is the left of its walk; distances are
positive there. A stretch is thought to run on beyond its ends, a curve along its end tangents, a line or arc along
itself. The distance's second derivatives are those of the parallel surface: along the meridian ``−κ/(1 − κd)``, around
the axis ``n_r/r``, and 0 along the normal. Where both are at least 0 the distance is a convex function of space.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from itertools import pairwise
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.meridian import Meridian
from profiles.series import Series
from profiles.solids import Solid

Array = NDArray[np.float64]
Rows = NDArray[np.intp]

TABLE = 512
BLOCK = 8192
"""Points taken at a time, so that what is computed of them stays near the processor."""

ROUNDING = 1e-13
STEPS = 12


@dataclass(frozen=True, eq=False)
class Contact:
    """What a surface is to k points in space.

    Parameters
    ----------
    distance : ndarray of shape (k,)
        Signed distance, outside positive [mm].
    gradient : ndarray of shape (k, 3)
        Its gradient, the outward unit normal of the surface at the point's foot [-].
    bend, hoop : ndarray of shape (k,)
        Second derivatives of the distance along the meridian and around the axis [1/mm].
    where : ndarray of shape (k,)
        Arc length of the foot along the stretch [mm]; of a line or arc not needed, and 0.
    apart : ndarray of shape (k,)
        Distance to the stretch itself, ends included [mm].
    """

    distance: Array
    gradient: Array
    bend: Array
    hoop: Array
    where: Array
    apart: Array


@dataclass(frozen=True, eq=False)
class Bends:
    """Ranges of the distance's second derivatives near a surface, each of shape (m,).

    Parameters
    ----------
    along_least, along_most : ndarray
        Along the meridian [1/mm].
    around_least, around_most : ndarray
        Around the axis [1/mm].
    """

    along_least: Array
    along_most: Array
    around_least: Array
    around_most: Array


class Surface(Protocol):
    """One stretch of a half section, turned about the axis."""

    def touch(self, points: Array) -> Contact:
        """Return what the surface is to points (k, 3) in space [mm]."""

    def distances(self, points: Array) -> Array:
        """Return the signed distances of points (k, 3) in space [mm]."""

    def bends(self, first: Array, last: Array) -> Bends:
        """Return how the distance bends between arc lengths [mm]."""


def stretches(solid: Solid) -> tuple[TurnedCurve, *tuple[TurnedArc, ...]]:
    """Return the surfaces of a solid: the forming surface first, then the rest in order, the axis itself left out.

    Parameters
    ----------
    solid : Solid
        The solid [mm].

    Returns
    -------
    tuple of TurnedCurve and TurnedArc
        One curve and at least one line or arc.
    """
    radii = solid.rest.vertices[:, 0]
    on_axis = np.maximum(radii[:-1], radii[1:]) <= 1e-9 * solid.size
    rest = (TurnedArc(solid.rest, int(number)) for number in np.flatnonzero(~on_axis))
    return (TurnedCurve(solid.curve), *rest)


def _joined(contacts: list[Contact]) -> Contact:
    """Return contacts one after another as one."""
    return Contact(*(np.concatenate(parts) for parts in zip(*(vars(one).values() for one in contacts), strict=True)))


def _contact(
    points: Array, distance: Array, normal: tuple[Array, Array], bend: Array, foot: tuple[Array, Array]
) -> Contact:
    """Put a contact together; ``foot`` is the arc length and the distance to the stretch itself."""
    across, up = normal
    radius = np.hypot(points[:, 0], points[:, 1])
    inverse = 1.0 / np.maximum(radius, 1e-300)
    on_axis = radius < 1e-12
    gradient = np.empty_like(points)
    gradient[:, 0] = np.where(on_axis, across, across * points[:, 0] * inverse)
    gradient[:, 1] = np.where(on_axis, 0.0, across * points[:, 1] * inverse)
    gradient[:, 2] = up
    along = -bend / np.maximum(1.0 - bend * distance, 1e-3)
    hoop = np.where(on_axis, along, across * inverse)
    return Contact(distance, gradient, along, hoop, *foot)


@dataclass(frozen=True, eq=False)
class TurnedCurve:
    """The surface that an exact curve turns.

    Parameters
    ----------
    curve : Meridian
        Walked with the outside to its left [mm].
    """

    curve: Meridian

    @cached_property
    def _table(self) -> _Taylor:
        cells = TABLE
        table = _Taylor.of(self.curve, cells)
        while table.error > ROUNDING * (self.curve.end - self.curve.start) and cells < 32 * TABLE:
            cells *= 4
            table = _Taylor.of(self.curve, cells)
        return table

    @cached_property
    def _bends(self) -> tuple[Array, Array, Array]:
        """Arc lengths, and the second derivatives there: along the meridian and around the axis."""
        curve = self.curve
        where = np.union1d(self._table.edges, curve.curvature.extremes()[0])
        along, radius, sine = -curve.curvature(where), curve.radius(where), np.sin(curve.slope(where))
        # On the axis the two are the same.
        off = radius > 1e-6 * radius.max()
        around = np.where(off, -sine / np.where(off, radius, 1.0), along)
        least = 1e-9 / (curve.end - curve.start)
        along[np.abs(along) < least] = 0.0
        around[np.abs(around) < least] = 0.0
        return where, along, around

    def bends(self, first: Array, last: Array) -> Bends:
        """Return how the distance bends between arc lengths [mm]."""
        where, along, around = self._bends
        if min(along.min() * along.max(), around.min() * around.max()) >= 0.0:
            ends = (along.min(), along.max(), around.min(), around.max())
            return Bends(*(np.full(len(first), end) for end in ends))
        low = np.maximum(np.searchsorted(where, first, side="right") - 1, 0)
        high = np.minimum(np.searchsorted(where, last, side="left"), len(where) - 1)
        cells = np.column_stack([low, high + 1]).ravel()
        return Bends(
            *(
                pick.reduceat(np.append(values, values[-1]), cells)[::2]
                for values in (along, around)
                for pick in (np.minimum, np.maximum)
            )
        )

    def touch(self, points: Array) -> Contact:
        """Return what the surface is to points (k, 3) in space [mm]."""
        if len(points) > BLOCK:
            return _joined([self.touch(points[first : first + BLOCK]) for first in range(0, len(points), BLOCK)])
        radius, height = np.hypot(points[:, 0], points[:, 1]), points[:, 2]
        table = self._table
        where = np.interp(radius, table.radii, table.edges)
        for _ in range(STEPS):
            along, distance, _, bend = _gap(table, radius, height, where)
            step = along / np.clip(1.0 - bend * distance, 0.2, 5.0)
            before, where = where, np.clip(where + step, self.curve.start, self.curve.end)
            # The next step is of the order of this one squared, and the distance does not feel it.
            if float(np.abs(where - before).max(initial=0.0)) <= 1e-4 * (self.curve.end - self.curve.start):
                break
        along, distance, normal, bend = _gap(table, radius, height, where)
        return _contact(points, distance, normal, bend, (where, np.hypot(along, distance)))

    def distances(self, points: Array) -> Array:
        """Return the signed distances of points (k, 3) in space [mm]."""
        return self.touch(points).distance


@dataclass(frozen=True, eq=False)
class _Taylor:
    """Radius, height and slope of a curve as Taylor polynomials over many short cells, faster than its own series."""

    edges: Array
    radii: Array
    centres: Array
    factors: Array
    error: float

    @classmethod
    def of(cls, curve: Meridian, cells: int) -> _Taylor:
        shares = np.maximum(np.ceil(cells * np.diff(curve.breaks) / (curve.end - curve.start)), 16.0).astype(int)
        pieces = [
            np.linspace(start, end, share + 1)[:-1]
            for (start, end), share in zip(pairwise(curve.breaks.tolist()), shares.tolist(), strict=True)
        ]
        edges = np.concatenate([*pieces, [curve.end]])
        centres = 0.5 * (edges[:-1] + edges[1:])
        factors = np.stack([_derivatives(series, centres) for series in (curve.radius, curve.height, curve.slope)], 1)
        radii = curve.radius(edges)
        table = cls(edges, np.maximum.accumulate(radii), centres, factors, 0.0)
        strayed = [
            np.abs(found - exact)
            for side in (edges[:-1], edges[1:])
            for found, exact in zip(table.at(side)[:2], (curve.radius(side), curve.height(side)), strict=True)
        ]
        return replace(table, error=float(np.max(strayed)))

    def at(self, where: Array) -> tuple[Array, Array, Array, Array]:
        """Return radius, height, slope and curvature at arc lengths."""
        cell = np.clip(np.searchsorted(self.edges, where, side="right") - 1, 0, len(self.centres) - 1)
        step = where - self.centres[cell]
        factors = self.factors[cell]
        values = factors[:, :, -1]
        for power in range(factors.shape[2] - 2, -1, -1):
            values = values * step[:, None] + factors[:, :, power]
        return values[:, 0], values[:, 1], values[:, 2], factors[:, 2, 1]


def _derivatives(series: Series, where: Array) -> Array:
    """Return Taylor factors of a series up to the fourth, shape (n, 5)."""
    found, scale = [series(where)], 1.0
    for power in range(1, 5):
        series, scale = series.derivative(), scale * power
        found.append(series(where) / scale)
    return np.stack(found, axis=1)


def _gap(table: _Taylor, radius: Array, height: Array, where: Array) -> tuple[Array, Array, tuple[Array, Array], Array]:
    """Return how far points lie along tangents and normals of a curve [mm], the normals and the curvature."""
    there, level, slope, bend = table.at(where)
    cosine, sine = np.cos(slope), np.sin(slope)
    across, up = radius - there, height - level
    return across * cosine + up * sine, up * cosine - across * sine, (-sine, cosine), bend


@dataclass(frozen=True, eq=False)
class TurnedArc:
    """The surface that one line or arc of a path turns.

    Parameters
    ----------
    path : ArcPath
        Walked with the outside to its left [mm].
    number : int
        Which line or arc of the path.
    """

    path: ArcPath
    number: int

    @cached_property
    def ends(self) -> tuple[Array, Array]:
        """First and last point (radius, height) [mm]."""
        return self.path.vertices[self.number], self.path.vertices[self.number + 1]

    @cached_property
    def _frame(self) -> tuple[Array, Array, float]:
        """Tangents at both ends and the curvature."""
        starts, ends = self.path.tangents
        return starts[self.number], ends[self.number], float(self.path.curvatures[self.number])

    @cached_property
    def normals(self) -> tuple[Array, Array]:
        """Outward unit normals (radius, height) at both ends."""
        start, end, _ = self._frame
        return np.array([-start[1], start[0]]), np.array([-end[1], end[0]])

    @cached_property
    def curvature(self) -> float:
        """Signed curvature [1/mm], left positive."""
        return self._frame[2]

    @cached_property
    def _around(self) -> tuple[float, float]:
        """Range of the distance's second derivative around the axis [1/mm]."""
        turn = float(self.path.turns[self.number])
        shares = np.linspace(0.0, 1.0, 2 if turn == 0.0 else 65)
        radius = np.maximum(self.path.along(self.number, shares)[:, 0], 0.0)
        across = np.cos(np.arctan2(*self.normals[0][::-1]) + shares * turn)
        across[np.abs(across) < 1e-9] = 0.0
        hoop = across / np.maximum(radius, 1e-9)
        return float(hoop.min()), float(hoop.max())

    def bends(self, first: Array, last: Array) -> Bends:  # noqa: ARG002  a line or arc bends alike everywhere
        """Return how the distance bends: alike everywhere."""
        # Beyond its ends an arc runs on straight.
        ends = (min(-self.curvature, 0.0), max(-self.curvature, 0.0), *self._around)
        return Bends(*(np.full(len(first), end) for end in ends))

    def touch(self, points: Array) -> Contact:
        """Return what the surface is to points (k, 3) in space [mm]."""
        distance, normal, bend, apart = self._foot(points)
        return _contact(points, distance, normal, bend, (np.zeros(len(points)), apart))

    def distances(self, points: Array) -> Array:
        """Return the signed distances of points (k, 3) in space [mm]."""
        if self.curvature:
            return self._foot(points)[0]
        (radius, height), (across, up) = self.ends[0], self.normals[0]
        return np.asarray((np.hypot(points[:, 0], points[:, 1]) - radius) * across + (points[:, 2] - height) * up)

    def _foot(self, points: Array) -> tuple[Array, tuple[Array, Array], Array, Array]:
        """Return distances, normals and curvatures at the feet of points, and their ways to the stretch itself."""
        start, end, bend = self._frame
        radius = np.hypot(points[:, 0], points[:, 1])
        from_first = radius - self.ends[0][0], points[:, 2] - self.ends[0][1]
        from_last = radius - self.ends[1][0], points[:, 2] - self.ends[1][1]
        before = from_first[0] * start[0] + from_first[1] * start[1]
        behind = from_last[0] * end[0] + from_last[1] * end[1]
        across, up = self.normals[0]
        rise, square = from_first[0] * across + from_first[1] * up, from_first[0] ** 2 + from_first[1] ** 2
        root = np.sqrt(np.maximum(1.0 - 2.0 * bend * rise + bend**2 * square, 1e-300))
        # Distance to the circle without dividing by its curvature, so that a line is no special case.
        distance = (2.0 * rise - bend * square) / (1.0 + root)
        normal = ((across - bend * from_first[0]) / root, (up - bend * from_first[1]) / root)
        return self._run_on((before, behind), (distance, rise, from_last), normal)

    def _run_on(
        self,
        beyond: tuple[Array, Array],
        gaps: tuple[Array, Array, tuple[Array, Array]],
        normal: tuple[Array, Array],
    ) -> tuple[Array, tuple[Array, Array], Array, Array]:
        """Let the stretch run on along its end tangents."""
        before, behind = beyond
        distance, rise, from_last = gaps
        across, up = self.normals[1]
        is_before, is_behind = before < 0.0, (behind > 0.0) & (before >= 0.0)
        distance = np.where(is_before, rise, np.where(is_behind, from_last[0] * across + from_last[1] * up, distance))
        aside = tuple(
            np.where(is_before, first, np.where(is_behind, last, own))
            for first, last, own in zip(*self.normals, normal, strict=True)
        )
        bend = np.where(is_before | is_behind, 0.0, self.curvature)
        past = np.where(is_before, before, np.where(is_behind, behind, 0.0))
        return distance, (aside[0], aside[1]), bend, np.hypot(past, distance)
