"""Where the nose centre runs so that the nose touches, or stays a little off, the mould.

A contour starts on the axis and ends off the part. It has three parts: what carries the forming surface on under a
bore, the forming surface, and edge and land. Of lines and arcs, a contour is lines and arcs again. Lengths are
millimetres in the lathe frame.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fabricate.turning_setup import CLEARANCE, Setup
from profiles.arcpath import ArcPath
from profiles.chords import balanced_chords
from profiles.meridian import Meridian

RADIUS, HEIGHT = 0, 1


@dataclass(frozen=True, eq=False)
class Contour:
    """A path of the nose centre, in parts that follow one another.

    Parameters
    ----------
    under_bore : ArcPath or None
        From the axis to where the forming surface starts; None without a bore.
    forming : ArcPath
        Along the forming surface.
    edge : ArcPath
        Along edge and land and off the part.
    """

    under_bore: ArcPath | None
    forming: ArcPath
    edge: ArcPath

    @property
    def whole(self) -> ArcPath:
        """All parts, from the axis to off the part."""
        path = continued(self.forming, self.edge)
        return path if self.under_bore is None else continued(self.under_bore, path)

    def along(self, forming: ArcPath) -> Contour:
        """Return the contour with another path along the forming surface, to which the one under the bore leads."""
        return Contour(self.under_bore and _ending_at(self.under_bore, forming), forming, self.edge)

    def chorded(self, sagitta: float) -> Contour:
        """Return the contour with every arc broken into chords that stray by at most ``sagitta`` [mm]."""
        inner = None if self.under_bore is None else _chorded(self.under_bore, sagitta)
        return Contour(inner, _chorded(self.forming, sagitta), _chorded(self.edge, sagitta))


def contour_at(setup: Setup, forming: ArcPath, distance: float) -> Contour:
    """Return the path on which the nose centre keeps a distance from the mould.

    Parameters
    ----------
    setup : Setup
        Mould and insert.
    forming : ArcPath
        The forming surface in the mould frame, from the axis or bore outwards [mm].
    distance : float
        From the mould to the nose centre [mm]: the nose radius for a finished surface.

    Returns
    -------
    Contour
        Of lines and arcs [mm].

    Raises
    ------
    GeometryError
        If the distance is not smaller than a concave radius of the forming surface.
    """
    path = setup.mould.to_lathe(forming)
    shifted = path.offset(distance)
    folded = _fillet_folds(setup, distance)
    if folded:
        shifted = _cut_at_height(shifted, setup.mould.land + distance)
    inner = None if setup.core is None else _ending_at(setup.core.offset(distance), shifted)
    return Contour(inner, shifted, _edge(setup, shifted, distance, folded=folded))


def chorded_forming(setup: Setup, tolerance: float, slope: float) -> ArcPath:
    """Return chords on which the nose centre makes the forming surface, for a control without arcs.

    Parameters
    ----------
    setup : Setup
        Mould and insert.
    tolerance : float
        Largest normal deviation of what is cut [mm].
    slope : float
        Largest lean of a chord [rad]; 0 asks for none.

    Returns
    -------
    ArcPath
        In the lathe frame, balanced on both sides of the exact path [mm].

    Raises
    ------
    GeometryError
        If too many chords would be needed.

    Notes
    -----
    The nose centre's exact path is parallel to the mould curve, so it strays from its chords by as much as the cut
    surface strays from the mould.
    """
    return setup.mould.to_lathe(balanced_chords(nose_curve(setup), distance=tolerance, slope=slope))


def nose_curve(setup: Setup) -> Meridian:
    """Return the exact path of the nose centre along the forming surface, in the mould frame [mm].

    Parameters
    ----------
    setup : Setup
        Mould and insert.

    Returns
    -------
    Meridian
        Parallel to the mould curve, on the tool's side [mm].

    Raises
    ------
    GeometryError
        If the nose is not smaller than a concave radius of the forming surface.
    """
    return setup.mould.curve.offset(-setup.nose if setup.male else setup.nose)


def continued(first: ArcPath, second: ArcPath) -> ArcPath:
    """Return two paths as one, where the second starts within a hair's breadth of the first one's end."""
    vertices = np.vstack([first.vertices, second.vertices[1:]])
    return ArcPath(vertices, np.concatenate([first.bulges, second.bulges]))


def split_at(path: ArcPath, index: int, axis: int, value: float) -> float:
    """Return the fraction of a stretch's length at which one of its coordinates takes a value.

    Parameters
    ----------
    path : ArcPath
        The path.
    index : int
        Which stretch; the coordinate must only rise or only fall on it.
    axis : int
        0 for the radius, 1 for the height.
    value : float
        The coordinate [mm].

    Returns
    -------
    float
        From 0 to 1 [-].
    """
    start, end = path.vertices[index], path.vertices[index + 1]
    if path.bulges[index] == 0.0:
        return float(np.clip((value - start[axis]) / (end[axis] - start[axis]), 0.0, 1.0))
    centre, radius = path.centres[index], 1.0 / abs(path.curvatures[index])
    side = 1 - axis
    middle = path.along(index, np.array([0.5]))[0]
    point = np.empty(2)
    point[axis] = value
    aside = np.sqrt(max(radius**2 - (value - centre[axis]) ** 2, 0.0))
    point[side] = centre[side] + np.copysign(aside, (middle - centre)[side])
    first, there = start - centre, point - centre
    angle = np.arctan2(first[0] * there[1] - first[1] * there[0], first @ there)
    return float(np.clip(angle / path.turns[index], 0.0, 1.0))


def place_at(path: ArcPath, axis: int, value: float) -> tuple[float, float] | None:
    """Return the first point of a path at which one of its coordinates takes a value.

    Parameters
    ----------
    path : ArcPath
        The path.
    axis : int
        0 for the radius, 1 for the height.
    value : float
        The coordinate [mm].

    Returns
    -------
    tuple of float, or None
        Radius and height [mm]; None where the path has no such point.
    """
    gaps = path.vertices[:, axis] - value
    crossed = np.flatnonzero((gaps[:-1] * gaps[1:] <= 0.0) & (gaps[:-1] != gaps[1:]))
    if not len(crossed):
        return None
    index = int(crossed[0])
    point = path.along(index, np.array([split_at(path, index, axis, value)]))[0]
    return float(point[0]), float(point[1])


def _ending_at(path: ArcPath, following: ArcPath) -> ArcPath:
    """Return a path that ends where the one that follows it starts, which is a hair's breadth away."""
    return ArcPath(np.vstack([path.vertices[:-1], following.vertices[:1]]), path.bulges)


def _chorded(path: ArcPath, sagitta: float) -> ArcPath:
    points = path.points(sagitta=sagitta)
    return ArcPath(points, np.zeros(len(points) - 1))


def _fillet(setup: Setup) -> ArcPath | None:
    """Return the arc between forming surface and land, where there is one."""
    rim = setup.mould.rim
    if rim is None or not rim.bulges[0]:
        return None
    return ArcPath(rim.vertices[:2], rim.bulges[:1])


def _fillet_folds(setup: Setup, distance: float) -> bool:
    """Say whether a male mould's fillet is too tight for the nose centre to follow at this distance."""
    fillet = _fillet(setup)
    return fillet is not None and float(fillet.curvatures[0]) * distance > 1.0 - 1e-9


def _cut_at_height(path: ArcPath, height: float) -> ArcPath:
    """Return a falling path up to where it reaches a height, all of it where it ends just above."""
    below = np.flatnonzero(path.vertices[1:, HEIGHT] <= height)
    if not len(below):
        return path
    index = int(below[0])
    fraction = split_at(path, index, HEIGHT, height)
    end = path.along(index, np.array([fraction]))
    bulge = np.tan(0.25 * path.turns[index] * fraction)
    vertices = np.vstack([path.vertices[: index + 1], end])
    return ArcPath(vertices, np.append(path.bulges[:index], bulge))


def _edge(setup: Setup, forming: ArcPath, distance: float, *, folded: bool) -> ArcPath:
    """Return where the nose centre runs from the end of the forming surface along edge and land and off the part."""
    start, fillet = forming.vertices[-1], _fillet(setup)
    level = setup.mould.land + distance
    if setup.male and setup.mould.rim is None:
        direction = forming.tangents[1][-1]
        # Along the tangent, but no lower than the outside is turned.
        room = (float(start[HEIGHT]) - setup.nose - setup.reach) / max(-float(direction[HEIGHT]), 1e-9)
        return ArcPath(np.array([start, start + min(setup.nose + CLEARANCE, room) * direction]), np.zeros(1))
    vertices, bulges = [start], []
    if fillet is not None and not folded:
        vertices.append(fillet.offset(distance).vertices[1])
        bulges.append(float(fillet.bulges[0]))
    elif not setup.male and setup.end_slope > 1e-9:
        # A sharp lip: the nose rolls over it.
        vertices.append(np.array([setup.mould.curve.points(setup.mould.curve.end)[0], level]))
        bulges.append(-float(np.tan(0.25 * setup.end_slope)))
    vertices.append(np.array([setup.off, level]))
    bulges.append(0.0)
    return ArcPath(np.array(vertices), np.array(bulges))
