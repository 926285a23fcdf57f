"""What a turned mould is allowed to differ by from its exact half section, where the nose decides and not the drawing.

The trim line is the mark of the nose itself, and in an inner corner the nose leaves a fillet of its own radius.
Sections are polygons in the lathe frame [mm].
"""

from __future__ import annotations

from typing import Any

from fabricate.turning_setup import Setup

AROUND = 64
"""Chords in a quarter of a nose."""

LOCAL = 4.0
"""How much of the section around an inner corner its fillet is worked out from, in nose radii."""


def marked(setup: Setup, finished: Any) -> Any:
    """Return a finished section with the mark of the nose where the trim line is scribed.

    Parameters
    ----------
    setup : Setup
        Mould and insert.
    finished : Polygon
        The section [mm].

    Returns
    -------
    Polygon
        The section itself without a trim line [mm].
    """
    import shapely

    line = setup.mould.trim_line
    if line is None:
        return finished
    return finished.difference(shapely.Point(line.centre(setup.nose)).buffer(setup.nose, quad_segs=AROUND))


def filleted(setup: Setup, finished: Any) -> Any:
    """Return a finished section with the fillets that the nose leaves at the foot of a pilot and around a sunk pad.

    Parameters
    ----------
    setup : Setup
        Mould and insert.
    finished : Polygon
        The section [mm].

    Returns
    -------
    Polygon or MultiPolygon
        The section itself without a hub [mm].
    """
    import shapely

    for corner in inner_corners(setup):
        beside = finished.intersection(shapely.Point(corner).buffer(LOCAL * setup.nose))
        closed = beside.buffer(setup.nose, quad_segs=AROUND).buffer(-setup.nose, quad_segs=AROUND)
        finished = finished.union(closed)
    return finished


def inner_corners(setup: Setup) -> tuple[tuple[float, float], ...]:
    """Return the corners of the mould that the nose cannot reach into, radius and Z [mm]."""
    hub = setup.mould.hub
    if hub is None:
        return ()
    foot = (hub.vertices[2],) if len(hub) > 1 else ()
    edge = () if setup.male else (hub.vertices[-1],)
    return tuple((float(radius), float(height)) for radius, height in (*foot, *edge))
