"""Arc paths as loose LINE and ARC entities, and such entities chained into paths again.

An ARC runs counter-clockwise from its start angle to its end angle, whichever way the path runs: an entity does not
know its direction. It follows from the order: the entity written first comes first, and the path leaves it where the
next one begins. Where that leaves both ways open (a single arc, or two that close), the first entity runs its own
way. So that this is never wrong, a clockwise arc is then written as two halves of one circle, which read as one.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from profiles.arcpath import ArcPath

Point = tuple[float, float]

COORDINATE_DECIMALS = 8
BULGE_DECIMALS = 12
ARC_DECIMALS = 12
ANGLE_DECIMALS = 14

JOINT_TOLERANCE = 1e-5
"""Entities whose ends lie this close follow one another [mm or in]."""

_TIE = 1e-7
_STRAIGHT_BULGE = 2e-8


@dataclass(frozen=True)
class Line:
    """A LINE entity: its ends in the order written [mm or in]."""

    start: Point
    end: Point


@dataclass(frozen=True)
class Arc:
    """An ARC entity, counter-clockwise from one angle to the other.

    Parameters
    ----------
    centre : tuple of float
        Centre [mm or in].
    radius : float
        Radius [mm or in].
    start_angle, end_angle : float
        Directions from the centre [deg], from the u-axis.
    """

    centre: Point
    radius: float
    start_angle: float
    end_angle: float


@dataclass(frozen=True)
class _Link:
    """One stretch of a path to be, and the ARC that it was read from, if it was one."""

    start: Point
    end: Point
    bulge: float
    arc: Arc | None = None

    @property
    def radius(self) -> float:
        """Radius [mm or in], 0 for a line."""
        return self.arc.radius if self.arc else 0.0

    def turned(self) -> _Link:
        """Return the stretch walked the other way."""
        return replace(self, start=self.end, end=self.start, bulge=-self.bulge)


def pieces_of(path: ArcPath) -> tuple[Line | Arc, ...]:
    """Return the LINE and ARC entities of a path, in order.

    Parameters
    ----------
    path : ArcPath
        A path with rounded vertices [mm or in].

    Returns
    -------
    tuple of Line or Arc
        Entities with the digits that are written [mm or in]. Their ends lie within 1e-7 of the vertices up to a radius
        of 1e8, where the digits of an angle give out.

    Notes
    -----
    A stretch that turns by less than 1e-7 rad is written as a line: it bulges by less than 1e-8 of its length.
    """
    bulges = np.where(np.abs(path.bulges) < _STRAIGHT_BULGE, 0.0, path.bulges).tolist()
    vertices = [(float(across), float(up)) for across, up in path.vertices]
    pieces = [
        _arc(start, end, bulge) if bulge else Line(start, end)
        for (start, end), bulge in zip(itertools.pairwise(vertices), bulges, strict=True)
    ]
    first = pieces[0]
    if isinstance(first, Arc) and bulges[0] < 0.0 and _is_ambiguous(len(path), closed=path.closed):
        return (*_halves(first), *pieces[1:])
    return tuple(pieces)


def chained(pieces: Sequence[Line | Arc]) -> tuple[ArcPath, ...]:
    """Return the paths that LINE and ARC entities make, each in the direction in which it was written.

    Parameters
    ----------
    pieces : sequence of Line or Arc
        Entities in the order of the file [mm or in].

    Returns
    -------
    tuple of ArcPath
        Paths in the order of their first entities [mm or in]. At a joint the end of the sharper of the two stretches
        counts, a line's before all, as its digits are the better ones.

    Raises
    ------
    GeometryError
        If an entity has no length.
    """
    loose = [_link(piece) for piece in pieces]
    paths = []
    while loose:
        chain = [loose.pop(0)]
        if loose and not _leads_to(chain[0], loose[0]):
            chain[0] = chain[0].turned()
        _grow(chain, loose)
        if not _is_closed(chain):
            backwards = [link.turned() for link in reversed(chain)]
            _grow(backwards, loose)
            chain = [link.turned() for link in reversed(backwards)]
        paths.append(_path(_with_halves_joined(chain)))
    return tuple(paths)


def _is_ambiguous(count: int, *, closed: bool) -> bool:
    """Return whether so many entities cannot tell in which direction their path runs."""
    return count == (2 if closed else 1)


def _halves(arc: Arc) -> tuple[Arc, Arc]:
    """Return the two halves of an arc, in the order in which it is walked clockwise."""
    turn = (arc.end_angle - arc.start_angle) % 360.0
    middle = round((arc.start_angle + 0.5 * turn) % 360.0, ANGLE_DECIMALS) % 360.0
    return replace(arc, start_angle=middle), replace(arc, end_angle=middle)


def _arc(start: Point, end: Point, bulge: float) -> Arc:
    """Return the ARC between two points, angles and radius taken from the centre as it is written."""
    if bulge < 0.0:
        start, end, bulge = end, start, -bulge
    reach = (1.0 - bulge * bulge) / (4.0 * bulge)
    centre = (
        round(0.5 * (start[0] + end[0]) - reach * (end[1] - start[1]), ARC_DECIMALS) + 0.0,
        round(0.5 * (start[1] + end[1]) + reach * (end[0] - start[0]), ARC_DECIMALS) + 0.0,
    )
    radius = 0.5 * (math.dist(centre, start) + math.dist(centre, end))
    return Arc(centre, round(radius, ARC_DECIMALS), _angle(centre, start), _angle(centre, end))


def _angle(centre: Point, point: Point) -> float:
    """Return the direction from the centre to a point [deg], from 0 to under 360."""
    angle = math.degrees(math.atan2(point[1] - centre[1], point[0] - centre[0])) % 360.0
    return round(angle, ANGLE_DECIMALS) % 360.0 + 0.0


def _link(piece: Line | Arc) -> _Link:
    """Return an entity as a stretch, in its own direction."""
    if isinstance(piece, Line):
        return _Link(piece.start, piece.end, 0.0)
    turn = math.radians((piece.end_angle - piece.start_angle) % 360.0)
    return _Link(_on(piece, piece.start_angle), _on(piece, piece.end_angle), math.tan(0.25 * turn), piece)


def _on(arc: Arc, angle: float) -> Point:
    """Return the point of an arc in a direction [deg], on the grid of the digits that are written."""
    radians = math.radians(angle)
    across = arc.centre[0] + arc.radius * math.cos(radians)
    up = arc.centre[1] + arc.radius * math.sin(radians)
    return (round(across, COORDINATE_DECIMALS) + 0.0, round(up, COORDINATE_DECIMALS) + 0.0)


def _leads_to(first: _Link, second: _Link) -> bool:
    """Return whether a stretch runs towards the next one in its own direction, or touches it with neither end."""
    ahead = min(math.dist(first.end, second.start), math.dist(first.end, second.end))
    behind = min(math.dist(first.start, second.start), math.dist(first.start, second.end))
    return ahead <= behind + _TIE or behind > JOINT_TOLERANCE


def _is_closed(chain: list[_Link]) -> bool:
    """Return whether a chain of several stretches ends where it began."""
    return len(chain) > 1 and math.dist(chain[0].start, chain[-1].end) <= JOINT_TOLERANCE


def _grow(chain: list[_Link], loose: list[_Link]) -> None:
    """Move to the end of the chain, one by one, the loose stretches that continue it, the earliest first."""
    while not _is_closed(chain):
        end = chain[-1].end
        for index, link in enumerate(loose):
            ahead, behind = math.dist(end, link.start), math.dist(end, link.end)
            if min(ahead, behind) <= JOINT_TOLERANCE:
                chain.append(link if ahead <= behind else link.turned())
                del loose[index]
                break
        else:
            return


def _with_halves_joined(chain: list[_Link]) -> list[_Link]:
    """Return the chain with its first two stretches made one, where they are a clockwise arc written in halves."""
    if len(chain) < 2 or not _is_ambiguous(len(chain) - 1, closed=_is_closed(chain)):
        return chain
    first, second = chain[:2]
    if first.arc is None or second.arc is None or max(first.bulge, second.bulge) >= 0.0:
        return chain
    if (first.arc.centre, first.arc.radius) != (second.arc.centre, second.arc.radius):
        return chain
    bulge = math.tan(math.atan(first.bulge) + math.atan(second.bulge))
    return [replace(first, end=second.end, bulge=bulge), *chain[2:]]


def _path(chain: list[_Link]) -> ArcPath:
    """Return a chain as a path."""
    closed = _is_closed(chain)
    joints = [_joint(before, after) for before, after in itertools.pairwise(chain)]
    first = _joint(chain[-1], chain[0]) if closed else chain[0].start
    last = first if closed else chain[-1].end
    return ArcPath(np.array([first, *joints, last]), np.array([link.bulge for link in chain]))


def _joint(before: _Link, after: _Link) -> Point:
    """Return where two stretches meet: the end of the sharper one."""
    return before.end if before.radius <= after.radius else after.start
