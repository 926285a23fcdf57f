"""Where the nose centre runs along hub and lead-out, and in passes of their own through a groove and along a trim line.

Unlike the forming surface these have corners. The nose rolls over an outer corner, on an arc about it, and into an
inner one no farther than where it touches both sides, so that a fillet of its own radius stays. Lengths are
millimetres in the lathe frame; paths are walked outwards, with the mould to their right.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.errors import GeometryError

Array = NDArray[np.float64]

HAIR = 1e-9


def hub_offset(hub: ArcPath, distance: float) -> ArcPath:
    """Return the path at a distance from pilot and pad, from the axis to over the edge of the pad.

    Parameters
    ----------
    hub : ArcPath
        Pilot and pad, or pad alone, from the axis outwards [mm].
    distance : float
        From the hub to the nose centre [mm].

    Returns
    -------
    ArcPath
        Of lines, and an arc around the top of a pilot [mm].

    Raises
    ------
    GeometryError
        If the nose does not fit between the pilot and the edge of the pad.
    """
    edge, level = float(hub.vertices[-1, 0]), float(hub.vertices[-1, 1]) + distance
    if len(hub) == 1:
        return ArcPath(np.array([(0.0, level), (edge, level)]), np.zeros(1))
    pilot, top = hub.vertices[1].tolist()
    # Over a pilot that is lower than the distance the arc already ends on the level of the pad.
    below = min(distance, top + distance - level)
    foot = pilot + float(np.sqrt(below * (2.0 * distance - below)))
    if foot >= edge - HAIR:
        raise GeometryError(
            f"the ring of the pad around the pilot is {edge - pilot:g} mm wide, and the nose with what it leaves needs "
            f"more than {foot - pilot:g} mm"
        )
    turn = float(np.arccos(1.0 - below / distance))
    corners = [(0.0, top + distance), (pilot, top + distance), (foot, top + distance - below)]
    bulges = [0.0, -float(np.tan(0.25 * turn))]
    if corners[-1][1] > level + HAIR:
        corners.append((foot, level))
        bulges.append(0.0)
    return ArcPath(np.array([*corners, (edge, level)]), np.array([*bulges, 0.0]))


def rolled_to(path: ArcPath, end: Array, turn: float) -> ArcPath:
    """Return a path with an arc to a further point, on which the nose rolls over a corner.

    Parameters
    ----------
    path : ArcPath
        The path [mm].
    end : ndarray of shape (2,)
        Where the arc ends [mm].
    turn : float
        How far the nose turns to the right around the corner [rad].

    Returns
    -------
    ArcPath
        The longer path [mm].
    """
    if float(np.hypot(*(end - path.vertices[-1]))) < HAIR:
        return path
    return ArcPath(np.vstack([path.vertices, end]), np.append(path.bulges, -np.tan(0.25 * turn)))


def lead_offset(lead: ArcPath, distance: float, *, grooved: bool) -> ArcPath:
    """Return the path at a distance from a lead-out.

    Parameters
    ----------
    lead : ArcPath
        A line, or line, groove and line [mm].
    distance : float
        From the lead-out to the nose centre [mm].
    grooved : bool
        Whether the path follows the groove, or passes over it.

    Returns
    -------
    ArcPath
        Of lines and arcs [mm].

    Raises
    ------
    GeometryError
        If the distance is not smaller than the groove's radius.
    """
    if len(lead) == 1 or not grooved:
        return ArcPath(lead.vertices[[0, -1]], np.zeros(1)).offset(distance)
    line = lead.vertices + distance * _normal(lead)
    bottom = ArcPath(lead.vertices[1:3], lead.bulges[1:2]).offset(distance)
    roll = -np.tan(0.125 * lead.turns[1])
    vertices = [line[0], line[1], *bottom.vertices, line[2], line[3]]
    return ArcPath(np.array(vertices), np.array([0.0, roll, bottom.bulges[0], roll, 0.0]))


def groove_cuts(lead: ArcPath, nose: float, allowance: float, depth: float) -> tuple[ArcPath, ...]:
    """Return the paths that rough a groove, one under the other, each from its inner to its outer side.

    Parameters
    ----------
    lead : ArcPath
        Line, groove and line; a line alone has no groove [mm].
    nose : float
        Radius of the nose, smaller than the groove's [mm].
    allowance : float
        What stands over lead-out and groove afterwards, along the lead-out's normal [mm].
    depth : float
        Depth of cut [mm].

    Returns
    -------
    tuple of ArcPath
        Arcs of the nose centre, each of which touches the sides of a groove of the same radius, less sunk [mm].
    """
    if len(lead) == 1:
        return ()
    half, bulge = 0.5 * float(np.hypot(*(lead.vertices[2] - lead.vertices[1]))), float(lead.bulges[1])
    radius = 1.0 / float(lead.curvatures[1])
    return tuple(_sunk(lead, radius, nose, sunk) for sunk in _depths(half * bulge, allowance, depth))


def over_groove(lead: ArcPath, height: float) -> Array:
    """Return the point at a height over the middle of a lead-out, along its normal [mm].

    Parameters
    ----------
    lead : ArcPath
        The lead-out [mm].
    height : float
        Over its line [mm].

    Returns
    -------
    ndarray of shape (2,)
        Radius and Z [mm].
    """
    return np.asarray(0.5 * (lead.vertices[0] + lead.vertices[-1]) + height * _normal(lead))


def _depths(whole: float, allowance: float, depth: float) -> Iterator[float]:
    """Yield how deep grooves are sunk in turn; the allowance over the line is cut by the first."""
    count = int(np.ceil(whole / depth - 1e-9))
    for number in range(1, count + 1):
        sunk = whole * number / count - allowance
        if sunk > 1e-3 * whole:
            yield sunk


def _sunk(lead: ArcPath, radius: float, nose: float, sunk: float) -> ArcPath:
    middle, normal = over_groove(lead, 0.0), _normal(lead)
    along = np.array([normal[1], -normal[0]])
    half = np.sqrt(sunk * (2.0 * radius - sunk))
    edges = np.array([middle - half * along, middle + half * along])
    return ArcPath(edges, np.array([sunk / half])).offset(nose)


def _normal(lead: ArcPath) -> Array:
    """Return the unit normal of a lead-out, out of the mould."""
    along = lead.vertices[-1] - lead.vertices[0]
    return np.asarray(np.array([-along[1], along[0]]) / np.hypot(*along))
