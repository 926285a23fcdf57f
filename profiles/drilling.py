"""Solids of revolution with round holes drilled parallel to their axis: volume, area, and what holes must keep.

What a hole is stands in :mod:`profiles.hole`. A *stepped hole* is two holes on one axis, the second beginning where the
first ends. The *wall* is the material between a hole and whatever is next to it.

In the half section of the solid a hole covers a rectangle, from its least to its most radius about the solid's axis.
As the solid is the same all around, a hole is as far from any face as that rectangle is from its line.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from math import dist, hypot

import numpy as np

from profiles.arcpath import ArcPath
from profiles.disc import over_circle, over_disc
from profiles.errors import GeometryError
from profiles.half_section import Box, Flat, curve_gap, flat_faces, stretch_gap
from profiles.hole import Hole
from profiles.meridian import Meridian
from profiles.solids import Array, Solid

LEAST_WALL = 0.2
"""Wall that a hole keeps to everything else unless more is asked for [mm]."""

SAME = 1e-9


@dataclass(frozen=True, eq=False)
class Ends:
    """Where a hole begins and ends in a solid.

    Parameters
    ----------
    low : float
        Height of its lower end, which is flat [mm].
    high : float or Meridian
        Height of its upper end where that is flat, else the forming curve [mm].
    floor, ceiling : tuple of float or None
        Inner and outer radius about the hole's own axis of the flat that closes it below and above [mm].
    """

    low: float
    high: float | Meridian
    floor: tuple[float, float] | None
    ceiling: tuple[float, float] | None

    def heights(self, radii: Array) -> Array:
        """Return the heights of the upper end [mm] at radii about the solid's axis [mm]."""
        if isinstance(self.high, Meridian):
            reached = np.clip(radii, *self.high.radius(np.array([self.high.start, self.high.end])))
            return np.asarray(self.high.height(self.high.at_radius(reached)))
        return np.full(np.shape(radii), self.high)

    def spread(self, radii: Array) -> Array:
        """Return by how much the upper end is larger than its plan, ``1/cos ψ`` [-], at radii [mm]."""
        if isinstance(self.high, Meridian):
            reached = np.clip(radii, *self.high.radius(np.array([self.high.start, self.high.end])))
            return np.asarray(1.0 / np.cos(self.high.slope(self.high.at_radius(reached))))
        return np.ones(np.shape(radii))

    @property
    def breaks(self) -> Array:
        """Radii about the solid's axis between which the upper end is smooth [mm]."""
        return self.high.radius(self.high.breaks) if isinstance(self.high, Meridian) else np.empty(0)


@dataclass(frozen=True, eq=False)
class DrilledSolid:
    """A solid of revolution and the holes that are drilled into it.

    Parameters
    ----------
    turned : Solid
        The solid before it is drilled [mm].
    holes : tuple of Hole
        The holes; none are allowed too [mm].
    wall : float
        The least material between a hole and another hole, an edge, a side or a surface that it does not run out
        through [mm].

    Raises
    ------
    GeometryError
        If a hole does not lie within the faces that it runs out through, comes too near to another face or hole, or
        breaks through.
    """

    turned: Solid
    holes: tuple[Hole, ...] = ()
    wall: float = LEAST_WALL

    def __post_init__(self) -> None:
        for hole, ends, _ in self._kinds:
            self._check_walls(hole, ends)
        for one, other in self._close():
            self._check_apart(one, other)

    @property
    def curve(self) -> Meridian:
        """The exact forming curve [mm]."""
        return self.turned.curve

    @property
    def rest(self) -> ArcPath:
        """The remaining half section [mm]."""
        return self.turned.rest

    @property
    def size(self) -> float:
        """Largest coordinate of the half section [mm]."""
        return self.turned.size

    @cached_property
    def ends(self) -> tuple[Ends, ...]:
        """Where each hole begins and ends.

        Raises
        ------
        GeometryError
            If a hole does not lie within the faces that it runs out through.
        """
        return tuple(self._ends(hole) for hole in self.holes)

    @cached_property
    def volume(self) -> float:
        """Volume of the solid without what is drilled out [mm^3]."""
        return self.turned.volume - sum(count * _drilled_volume(hole, ends) for hole, ends, count in self._kinds)

    @cached_property
    def area(self) -> float:
        """Area of the whole surface, walls and ends of the holes included [mm^2]."""
        return self.turned.area + sum(count * _area_change(hole, ends) for hole, ends, count in self._kinds)

    @cached_property
    def forming_area(self) -> float:
        """Area of the forming surface without the mouths of the holes [mm^2]."""
        return self.turned.forming_area - sum(
            count * over_disc(hole.distance, hole.radius, ends.spread, ends.breaks)
            for hole, ends, count in self._kinds
            if isinstance(ends.high, Meridian)
        )

    def section(self, number: int) -> ArcPath:
        """Return one hole as it is drawn in the half section, in the plane of both axes.

        Parameters
        ----------
        number : int
            Which of the holes.

        Returns
        -------
        ArcPath
            Closed, counter-clockwise: lower end, outer wall, upper end as a straight line, inner wall; of a hole on
            the axis its half [mm].
        """
        hole, ends = self.holes[number], self.ends[number]
        inner, outer = hole.least_radius, hole.most_radius
        high = ends.heights(np.array([outer, inner]))
        corners = [(inner, ends.low), (outer, ends.low), (outer, float(high[0])), (inner, float(high[1]))]
        return ArcPath(np.array([*corners, corners[0]]), np.zeros(4))

    @cached_property
    def _kinds(self) -> tuple[tuple[Hole, Ends, int], ...]:
        """Holes that differ in more than their azimuth, their ends, and how many there are of each."""
        found: dict[object, tuple[Hole, Ends, int]] = {}
        for hole, ends in zip(self.holes, self.ends, strict=True):
            kind = (round(hole.distance, 9), hole.diameter, hole.bottom, hole.top, ends.floor, ends.ceiling)
            first = found.get(kind, (hole, ends, 0))
            found[kind] = (*first[:2], first[2] + 1)
        return tuple(found.values())

    def _close(self) -> Iterator[tuple[Hole, Hole]]:
        """Yield pairs of holes that are near to each other in plan."""
        centres = np.array([hole.centre for hole in self.holes]).reshape(-1, 2)
        radii = np.array([hole.radius for hole in self.holes])
        apart = np.hypot(*(centres[:, None] - centres).T) - radii[:, None] - radii
        for one, other in np.argwhere(np.triu(apart < self.wall, 1)).tolist():
            yield self.holes[one], self.holes[other]

    def _ends(self, hole: Hole) -> Ends:
        low = self._face(hole, up=False).height if hole.open_below else hole.bottom
        high: float | Meridian = hole.top
        if hole.open_above:
            ends = self.curve.radius(np.array([self.curve.start, self.curve.end]))
            over = Flat(np.nan, float(ends[0]), float(ends[1]), looks_up=True)
            high = self.curve if self._within(hole, over) else self._face(hole, up=True).height
        below = [other for other in self.holes if _goes_on(other, hole)]
        above = [other for other in self.holes if _goes_on(hole, other)]
        floor = None if hole.open_below else _closure(hole, below)
        ceiling = None if hole.open_above else _closure(hole, above)
        return Ends(low, high, floor, ceiling)

    def _within(self, hole: Hole, face: Flat) -> bool:
        """Whether a hole lies within the radii of a face, its wall left."""
        inside = face.inner <= SAME * self.size or hole.least_radius - self.wall >= face.inner - SAME
        return inside and hole.most_radius + self.wall <= face.outer + SAME

    def _face(self, hole: Hole, *, up: bool) -> Flat:
        """Return the flat face that a hole runs out through."""
        faces = [face for face in flat_faces(self.turned) if face.looks_up == up]
        found = [face for face in faces if self._within(hole, face)]
        if not found:
            where = "above" if up else "below"
            rings = " or ".join(f"{face.inner:.6g} to {face.outer:.6g}" for face in faces) or "none"
            curve = f"the forming surface (to {float(self.curve.radius(self.curve.end)):.6g}) or " if up else ""
            raise GeometryError(
                f"{hole}: covers the radii {hole.least_radius:.6g} to {hole.most_radius:.6g} mm and runs out {where} "
                f"across an edge; allowed: {self.wall:g} mm inside of {curve}a flat face (radii {rings} mm); "
                "do: move it or make it smaller"
            )
        return max(found, key=lambda face: face.height) if up else min(found, key=lambda face: face.height)

    def _check_walls(self, hole: Hole, ends: Ends) -> None:
        depth = float(ends.heights(np.array([hole.least_radius, hole.most_radius])).min()) - ends.low
        if depth < self.wall - SAME:
            raise GeometryError(
                f"{hole}: is {depth:.4g} mm deep from the face that it runs out through; allowed: {self.wall:g} mm or "
                "more; do: correct its bottom or its top"
            )
        gap, where = min(self._gaps(hole, ends), default=(np.inf, ""))
        if gap < self.wall - SAME:
            raise GeometryError(
                f"{hole}: comes within {gap:.4g} mm of {where}"
                f"{' and breaks through it' if gap <= 0.0 else ''}; allowed: {self.wall:g} mm or more; "
                "do: move it, or make it smaller or shallower"
            )

    def _gaps(self, hole: Hole, ends: Ends) -> Iterator[tuple[float, str]]:
        """Yield how far a hole is from each face that it does not run out through, and what that is [mm]."""
        box = _box(hole, ends)
        if not isinstance(ends.high, Meridian):
            yield curve_gap(self.curve, box), "the forming surface"
        rest = self.rest
        for number in range(len(rest)):
            ends_of = rest.vertices[number : number + 2]
            on_axis = bool((ends_of[:, 0] <= SAME * self.size).all())
            flat = ends_of[0, 1] == ends_of[1, 1] and rest.bulges[number] == 0.0
            own = (hole.open_below and ends_of[0, 1] == ends.low) or (hole.open_above and ends_of[0, 1] == ends.high)
            if on_axis or (flat and own):
                continue
            first, last = (f"({radius:.6g}, {height:.6g})" for radius, height in ends_of.tolist())
            yield stretch_gap(rest, number, box), f"the face from (radius, height) {first} to {last} mm"

    def _check_apart(self, one: Hole, other: Hole) -> None:
        if _goes_on(one, other) or _goes_on(other, one):
            self._check_step(one, other)
            return
        beside = dist(one.centre, other.centre) - one.radius - other.radius
        over = max(one.bottom - other.top, other.bottom - one.top)
        gap = hypot(max(beside, 0.0), max(over, 0.0)) if max(beside, over) > 0.0 else beside
        if gap < self.wall - SAME:
            raise GeometryError(
                f"{one} and {other}: are {gap:.4g} mm apart{', so that they overlap' if gap < 0.0 else ''}; allowed: "
                f"{self.wall:g} mm or more; do: move them apart or make them smaller"
            )

    def _check_step(self, one: Hole, other: Hole) -> None:
        step = abs(one.radius - other.radius)
        if step < self.wall - SAME:
            raise GeometryError(
                f"{one} and {other}: make a step of {step:.4g} mm; allowed: {self.wall:g} mm or more; do: make them "
                "one hole, or the wider one wider"
            )


def clearance(turned: Solid, hole: Hole, *, low: float) -> float:
    """Return how far a blind hole stays under the forming surface.

    Parameters
    ----------
    turned : Solid
        The solid [mm].
    hole : Hole
        A hole with a top [mm].
    low : float
        Height at which it begins [mm].

    Returns
    -------
    float
        Distance in space [mm]; 0 where the hole reaches the surface or passes it.
    """
    box = Box(hole.least_radius, hole.most_radius, low, hole.top)
    return curve_gap(turned.curve, box)


def _box(hole: Hole, ends: Ends) -> Box:
    radii = np.linspace(hole.least_radius, hole.most_radius, 9)
    return Box(hole.least_radius, hole.most_radius, ends.low, float(ends.heights(radii).max()))


def _goes_on(lower: Hole, upper: Hole) -> bool:
    """Whether one hole begins where the other ends, on one axis."""
    return lower.centre == upper.centre and lower.top == upper.bottom


def _closure(hole: Hole, beyond: list[Hole]) -> tuple[float, float] | None:
    """Return the ring that closes a hole, inside of which a stepped hole goes on."""
    inner = max((other.radius for other in beyond), default=0.0)
    return (inner, hole.radius) if inner < hole.radius else None


def _drilled_volume(hole: Hole, ends: Ends) -> float:
    return over_disc(hole.distance, hole.radius, lambda radii: ends.heights(radii) - ends.low, ends.breaks)


def _area_change(hole: Hole, ends: Ends) -> float:
    """Return what a hole adds to a surface: its wall, and the difference between what closes and what opens it."""
    radius, distance = hole.radius, hole.distance
    change = over_circle(distance, radius, lambda radii: ends.heights(radii) - ends.low, ends.breaks)
    if hole.open_above:
        change -= over_disc(distance, radius, ends.spread, ends.breaks)
    if hole.open_below:
        change -= np.pi * radius**2
    for closure in (ends.floor, ends.ceiling):
        if closure is not None:
            change += np.pi * (closure[1] ** 2 - closure[0] ** 2)
    return change
