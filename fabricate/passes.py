"""The passes that turn a mould, as moves of the nose centre in millimetres of the lathe frame.

A male mould is trued on its outside, faced, and roughed by cuts from outside inwards, each a depth of cut nearer to the
headstock. A female one is faced and roughed from the axis outwards; each cut enters by a ramp that falls towards the
axis, so that the insert never drills. A last roughing cut along the contour leaves the allowance, and the finishing cut
runs from the axis outwards and off the part. A trim line is scribed last. Rapids run along X or along Z only, as not
every control moves straight when both go at once. Every pass begins and ends at home, clear of the stock.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import chain, pairwise

import numpy as np

from fabricate.contour import HEIGHT, RADIUS, Contour, place_at
from fabricate.feature_passes import groove_blocks, outside_cut, trim_line_blocks
from fabricate.turning_setup import CLEARANCE, FLANK, LIFT, Setup
from outputs.gcode import Block, Comment, Feed, Rapid
from profiles.arcpath import ArcPath
from profiles.errors import JobError

TRUING = "TRUE THE OUTSIDE"
FACING = "FACE THE FRONT"
ROUGHING = "ROUGH"
CONTOURING = "ROUGH ALONG THE CONTOUR"
FINISHING = "FINISH"
EDGING = "FINISH EDGE AND LAND"
HUB = "FINISH HUB"
TRIM_LINE = "TRIM LINE"
SECTIONS = (TRUING, FACING, ROUGHING, CONTOURING, FINISHING, EDGING)

MOST_CUTS = 2000


@dataclass(frozen=True, eq=False)
class Passes:
    """The passes of one mould.

    Parameters
    ----------
    setup : Setup
        Stock, insert and mould.
    roughed : Contour
        Where the nose centre runs to leave the finishing allowance [mm].
    finished : Contour
        Where it runs to finish [mm].
    grooves : tuple of ArcPath
        Where it runs to rough the groove of a lead-out, cut by cut [mm].
    """

    setup: Setup
    roughed: Contour
    finished: Contour
    grooves: tuple[ArcPath, ...] = ()

    def untrued(self) -> Iterator[Block]:
        """Yield what is cut before the stock runs true: outside and front.

        Yields
        ------
        Block
            Moves of the nose centre [mm], between comments that name their section.

        Raises
        ------
        JobError
            If a depth of cut asks for too many cuts.
        """
        if self.setup.male:
            yield from _section(TRUING, self._outside())
        yield from _section(FACING, self._cuts(self.setup.stock.front, self._face_levels))

    def trued(self) -> Iterator[Block]:
        """Yield what is cut once the stock runs true: roughing, finishing and the trim line.

        Yields
        ------
        Block
            Moves of the nose centre [mm], between comments that name their section.

        Raises
        ------
        JobError
            If a depth of cut asks for too many cuts.
        """
        yield from _section(ROUGHING, self._cuts(self._faced_to, self._rough_levels))
        yield from _section(CONTOURING, chain(self._along_contour(), groove_blocks(self.setup, self.grooves)))
        yield from self._finish()
        if self.setup.mould.trim_line is not None:
            yield from _section(TRIM_LINE, trim_line_blocks(self.setup))

    @property
    def _faced_to(self) -> float:
        """Z of the front once it is faced [mm]."""
        setup = self.setup
        # What the fitted path stands off the vertex, by less than the tolerance, is no step to leave on the axis.
        on_axis = float(self.roughed.whole.vertices[0][1]) - setup.nose
        return min(setup.stock.front, on_axis if setup.male else setup.mould.land + setup.allowance)

    @property
    def _roughed_to(self) -> float:
        """Z of the lowest level that roughing may cut [mm]."""
        setup = self.setup
        return (setup.mould.land if setup.male else setup.vertex) + setup.allowance

    def _outside(self) -> Iterator[Block]:
        """Yield cuts along the outer side, the last one a finishing cut."""
        setup, turning = self.setup, self.setup.turning
        last = min(turning.finish_allowance, turning.stock_allowance + setup.mould.widest - setup.mould.outer_radius)
        rough = self._levels(setup.stock.radius, setup.mould.outer_radius + last)
        radii = [(radius, turning.roughing_feed) for radius in rough]
        radii += [(setup.mould.outer_radius, turning.finishing_feed)] if last > 0.0 else []
        if not radii:
            return
        yield Rapid(setup.home[0], setup.above)
        for radius, feed in radii:
            places = outside_cut(setup, radius)
            yield Rapid(places[0][0], setup.above)
            for place in places:
                yield Feed(*place, 0.0, feed)
            beside, end = places[-1][0] + LIFT, places[-1][1]
            yield Feed(beside, end + LIFT, 0.0, turning.roughing_feed)
            yield Rapid(beside, setup.above)
        yield from _go_home(setup, beside)

    @property
    def _face_levels(self) -> list[float]:
        return self._levels(self.setup.stock.front, self._faced_to)

    @property
    def _rough_levels(self) -> list[float]:
        levels = self._levels(self._faced_to, self._roughed_to)
        # A cavity's lowest level is a point on the axis, which the cut along the contour takes.
        return levels if self.setup.male else levels[:-1]

    def _cuts(self, floor: float, levels: list[float]) -> Iterator[Block]:
        """Yield level cuts that take the stock down from a floor, at Z, to the last of the levels."""
        if levels:
            yield from self._cuts_inwards(levels) if self.setup.male else self._cuts_outwards(floor, levels)

    def _cuts_inwards(self, levels: list[float]) -> Iterator[Block]:
        setup, feed = self.setup, self.setup.turning.roughing_feed
        yield Rapid(setup.off, setup.home[1])
        for level in levels:
            height = level + setup.nose
            end = self._wall(height)
            yield Rapid(setup.off, height)
            yield Feed(end, height, 0.0, feed)
            yield Feed(end + LIFT, height + LIFT, 0.0, feed)
            yield Rapid(setup.off, height + LIFT)
        yield from _go_home(setup, setup.off)

    def _cuts_outwards(self, floor: float, levels: list[float]) -> Iterator[Block]:
        setup, feed = self.setup, self.setup.turning.roughing_feed
        yield Rapid(self._ramp(floor, levels[0]), setup.home[1])
        for above, level in pairwise([floor, *levels]):
            height, end = level + setup.nose, self._wall(level + setup.nose)
            ramp, start = self._ramp(above, level), above + setup.nose
            back = max(0.0, end - LIFT)
            yield Rapid(ramp, start + LIFT)
            yield Feed(ramp, start, 0.0, feed)
            yield Feed(0.0, height, 0.0, feed)
            yield Feed(end, height, 0.0, feed)
            yield Feed(back, height + LIFT, 0.0, feed)
        # Straight up from the wall the edge could catch what it has not reached there.
        yield Rapid(ramp, height + LIFT)
        yield from _go_home(setup, ramp)

    def _along_contour(self) -> Iterator[Block]:
        """Yield the cut that leaves the finishing allowance everywhere."""
        setup, feed, path = self.setup, self.setup.turning.roughing_feed, self.roughed.whole
        if setup.male:
            path = path.reversed()
            start = path.vertices[0]
            yield Rapid(setup.home[0], start[1])
            yield Rapid(max(setup.off, float(start[0])), start[1])
            yield Feed(start[0], start[1], 0.0, feed)
            yield from _feeds(path, feed)
            yield Feed(0.0, path.vertices[-1][1] + LIFT, 0.0, feed)
            yield from _go_home(setup, 0.0)
            return
        floor = (self._rough_levels or [self._faced_to])[-1]
        ramp = self._ramp(floor, self._roughed_to)
        yield from self._enter((ramp, floor + setup.nose), path, feed)
        yield from _feeds(path, feed)
        yield from _leave(setup, path)

    def _finish(self) -> Iterator[Block]:
        """Yield the finishing cut from the axis outwards: forming surface, then edge and land."""
        setup, feed, path = self.setup, self.setup.turning.finishing_feed, self.finished
        yield from self._enter(self._lead_in(), path.whole, feed)
        if path.under_bore is not None:
            inner = _feeds(path.under_bore, feed)
            yield from inner if setup.mould.hub is None else _section(HUB, inner)
        yield from _section(FINISHING, _feeds(path.forming, feed))
        yield from _section(EDGING, _feeds(path.edge, feed))
        yield from _leave(setup, path.edge)

    def _enter(self, place: tuple[float, float], path: ArcPath, feed: float) -> Iterator[Block]:
        """Yield the way from home to a place over the work and down a ramp to the start of a path on the axis."""
        yield Rapid(place[0], self.setup.home[1])
        yield Rapid(place[0], place[1] + LIFT)
        yield Feed(*place, 0.0, feed)
        yield Feed(path.vertices[0][0], path.vertices[0][1], 0.0, feed)

    def _lead_in(self) -> tuple[float, float]:
        """Return where the ramp to the finishing cut begins, on the surface that roughing has left or above it."""
        roughed = self.roughed.whole
        radius = min(CLEARANCE + 10.0 * self.setup.allowance, 0.3 * float(self.finished.forming.vertices[-1][0]))
        there = place_at(roughed, RADIUS, radius)
        height = float(roughed.vertices[0][1])
        return radius, height if there is None else max(height, there[1])

    def _wall(self, height: float) -> float:
        """Return the radius at which a level cut of the nose centre meets what must be left."""
        setup, path = self.setup, self.roughed.whole
        if not setup.male and height >= setup.mould.land + setup.nose + setup.allowance - 1e-9:
            return setup.off
        if setup.male and height >= path.vertices[0][1] - 1e-6:
            return 0.0
        # A hair's breadth over the land is still where the land begins, whatever the last digits say.
        place = place_at(path, HEIGHT, max(height, float(path.vertices[:, 1].min()) + 1e-6))
        return float(path.vertices[-1][0]) if place is None else place[0]

    def _ramp(self, floor: float, level: float) -> float:
        """Return the radius at which a ramp starts that reaches a level, at Z, on the axis."""
        end = self._wall(level + self.setup.nose) or self._wall(floor + self.setup.nose)
        return min((floor - level) / FLANK, 0.8 * end)

    def _levels(self, start: float, stop: float) -> list[float]:
        """Return even steps from a start, not among them, down to a stop, none larger than the depth of cut."""
        # Where a flank stands deeper in the work than this, the nose no longer clears the axis of it.
        depth = min(self.setup.turning.depth_of_cut, 0.9 * self.setup.nose / FLANK)
        count = int(np.ceil((start - stop) / depth - 1e-9))
        if count > MOST_CUTS:
            raise JobError(
                f"turning.depth_of_cut: {self.setup.text(depth)} {self.setup.units} a cut, as it and the nose radius "
                f"allow, ask for {count} cuts through {self.setup.text(start - stop)} {self.setup.units} of stock; "
                f"allowed: at most {MOST_CUTS} cuts; do: take a larger depth of cut or nose radius"
            )
        return [float(level) for level in np.linspace(start, stop, count + 1)[1:]] if count > 0 else []


def _section(name: str, blocks: Iterator[Block]) -> Iterator[Block]:
    yield Comment(name)
    yield from blocks
    yield Comment(f"END {name}")


def _feeds(path: ArcPath, feed: float) -> Iterator[Block]:
    """Yield the cuts along a path from its first vertex, where the tool stands."""
    for (radius, height), bulge in zip(path.vertices[1:].tolist(), path.bulges.tolist(), strict=True):
        yield Feed(radius, height, bulge, feed)


def _leave(setup: Setup, path: ArcPath) -> Iterator[Block]:
    """Yield the way home from the end of a path, which lies off the part."""
    yield Rapid(setup.home[0], path.vertices[-1][1])
    yield Rapid(*setup.home)


def _go_home(setup: Setup, radius: float) -> Iterator[Block]:
    """Yield the way home from over or beside the work at a radius."""
    yield Rapid(radius, setup.home[1])
    yield Rapid(*setup.home)
