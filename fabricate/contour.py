"""Where the nose centre runs so that the nose touches, or stays a little off, the mould.

A contour starts on the axis and ends off the part. It has three parts: a hub, or what carries the forming surface on
under a bore; the forming surface; and lead-out, edge and land. Of lines and arcs, a contour is lines and arcs again.
Lengths are millimetres in the lathe frame.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fabricate.contour_features import hub_offset, lead_offset, rolled_to
from fabricate.turning_setup import CLEARANCE, Setup
from profiles.arcpath import ArcPath, Array
from profiles.chords import balanced_chords
from profiles.errors import GeometryError
from profiles.meridian import Meridian

RADIUS, HEIGHT = 0, 1


@dataclass(frozen=True, eq=False)
class Contour:
    """A path of the nose centre, in parts that follow one another.

    Parameters
    ----------
    under_bore : ArcPath or None
        From the axis to where the forming surface starts, along a hub where there is one; None without hub and bore.
    forming : ArcPath
        Along the forming surface.
    edge : ArcPath
        Along lead-out, edge and land and off the part.
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
        inner = None if self.under_bore is None else chorded(self.under_bore, sagitta)
        return Contour(inner, chorded(self.forming, sagitta), chorded(self.edge, sagitta))


def contour_at(setup: Setup, forming: ArcPath, distance: float, *, grooved: bool = True) -> Contour:
    """Return the path on which the nose centre keeps a distance from the mould.

    Parameters
    ----------
    setup : Setup
        Mould and insert.
    forming : ArcPath
        The forming surface in the mould frame, from the axis, bore or hub outwards [mm].
    distance : float
        From the mould to the nose centre [mm]: the nose radius for a finished surface.
    grooved : bool
        Whether the path follows the groove of a lead-out, or passes over it.

    Returns
    -------
    Contour
        Of lines and arcs [mm].

    Raises
    ------
    GeometryError
        If the distance is not smaller than a concave radius of the forming surface or of the groove, or does not fit
        on the hub.
    """
    mould, path = setup.mould, setup.mould.to_lathe(forming)
    shifted = path.offset(distance)
    if mould.hub is not None and not setup.male:
        reached = _off_pad(setup, mould.curve.offset(distance), distance)
        shifted = _from_point(shifted, reached.points(reached.start) - (0.0, mould.land_height))
    lead = None if mould.lead is None else lead_offset(mould.lead, distance, grooved=grooved)
    folded = _fillet_folds(setup, distance)
    if folded and lead is not None and shifted.vertices[-1, HEIGHT] > mould.land + distance:
        lead = _cut_at_height(lead, mould.land + distance)
    elif folded:
        shifted, lead = _cut_at_height(shifted, mould.land + distance), None
    inner = _inner(setup, shifted, distance)
    edge = _edge(setup, shifted if lead is None else lead, distance, folded=folded)
    return Contour(inner, shifted, edge if lead is None else continued(_starting_at(shifted, lead), edge))


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
        Parallel to the mould curve, on the tool's side [mm]. In a cavity with a hub it begins where the nose touches
        the pad as well.

    Raises
    ------
    GeometryError
        If the nose is not smaller than a concave radius of the forming surface, or stands on the pad all the way.
    """
    return _off_pad(setup, setup.mould.curve.offset(-setup.nose if setup.male else setup.nose), setup.nose)


def chorded(path: ArcPath, sagitta: float) -> ArcPath:
    """Return a path with every arc broken into chords.

    Parameters
    ----------
    path : ArcPath
        The path [mm].
    sagitta : float
        How far the chords may stray [mm].

    Returns
    -------
    ArcPath
        Of lines [mm].
    """
    points = path.points(sagitta=sagitta)
    return ArcPath(points, np.zeros(len(points) - 1))


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


def _off_pad(setup: Setup, curve: Meridian, distance: float) -> Meridian:
    """Return a curve parallel to the forming surface from where it is that far over the pad of a cavity's hub."""
    if setup.mould.hub is None or setup.male:
        return curve
    own = setup.mould.curve
    level, most = float(own.height(own.start)) + distance, float(curve.height(curve.end))
    if level >= most:
        raise GeometryError(
            f"a nose that stands {distance:g} mm over the pad of the hub is {level - most:g} mm over the end of the "
            "forming surface"
        )
    return curve.part(float(curve.height.solve(level)), curve.end)


def _from_point(path: ArcPath, point: Array) -> ArcPath:
    """Return a path from where it comes nearest to a point that lies a hair's breadth off it."""
    fractions = (_fraction_beside(path, index, point) for index in range(len(path)))
    index, fraction = next(
        ((number, part) for number, part in enumerate(fractions) if part < 1.0 - 1e-6), (len(path) - 1, 0.0)
    )
    begun = path.along(index, np.array([fraction]))
    bulge = np.tan(0.25 * path.turns[index] * (1.0 - fraction))
    return ArcPath(np.vstack([begun, path.vertices[index + 1 :]]), np.append(bulge, path.bulges[index + 1 :]))


def _fraction_beside(path: ArcPath, index: int, point: Array) -> float:
    """Return the fraction of a stretch's length at which it, or what carries it on, comes nearest to a point."""
    start, end = path.vertices[index], path.vertices[index + 1]
    if path.bulges[index] == 0.0:
        return float((point - start) @ (end - start)) / float((end - start) @ (end - start))
    first, there = start - path.centres[index], point - path.centres[index]
    return float(np.arctan2(first[0] * there[1] - first[1] * there[0], first @ there) / path.turns[index])


def _inner(setup: Setup, forming: ArcPath, distance: float) -> ArcPath | None:
    """Return where the nose centre runs from the axis to the start of the forming surface."""
    mould = setup.mould
    if mould.hub is None:
        return None if setup.core is None else _ending_at(setup.core.offset(distance), forming)
    path = hub_offset(mould.hub, distance)
    if setup.male:
        path = rolled_to(path, forming.vertices[0], float(mould.curve.slope(mould.curve.start)))
    return _ending_at(path, forming)


def _starting_at(before: ArcPath, path: ArcPath) -> ArcPath:
    """Return a path that starts where the one before it ends, which is a hair's breadth away."""
    return ArcPath(np.vstack([before.vertices[-1:], path.vertices[1:]]), path.bulges)


def _ending_at(path: ArcPath, following: ArcPath) -> ArcPath:
    """Return a path that ends where the one that follows it starts, which is a hair's breadth away."""
    return ArcPath(np.vstack([path.vertices[:-1], following.vertices[:1]]), path.bulges)


def _fillet(setup: Setup) -> ArcPath | None:
    """Return the arc between forming surface and land, where there is one."""
    rim = setup.mould.edge_and_land
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


def _edge(setup: Setup, before: ArcPath, distance: float, *, folded: bool) -> ArcPath:
    """Return where the nose centre runs from the end of the path before along edge and land and off the part."""
    start, fillet = before.vertices[-1], _fillet(setup)
    level = setup.mould.land + distance
    if setup.male and setup.mould.edge_and_land is None:
        direction = before.tangents[1][-1]
        # Along the tangent, but no lower than the outside is turned.
        room = (float(start[HEIGHT]) - setup.nose - setup.reach) / max(-float(direction[HEIGHT]), 1e-9)
        return ArcPath(np.array([start, start + min(setup.nose + CLEARANCE, room) * direction]), np.zeros(1))
    vertices, bulges = [start], []
    if fillet is not None and not folded:
        vertices.append(fillet.offset(distance).vertices[1])
        bulges.append(float(fillet.bulges[0]))
    elif not setup.male and setup.end_slope > 1e-9:
        # A sharp lip: the nose rolls over it.
        lead = setup.mould.lead
        lip = setup.mould.curve.points(setup.mould.curve.end)[0] if lead is None else lead.vertices[-1, RADIUS]
        vertices.append(np.array([lip, level]))
        bulges.append(-float(np.tan(0.25 * setup.end_slope)))
    vertices.append(np.array([setup.off, level]))
    bulges.append(0.0)
    return ArcPath(np.array(vertices), np.array(bulges))
