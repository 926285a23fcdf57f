"""The drilled holes of a mould: from ``[mould.air_holes]`` and ``[mould.bolts]`` to holes of the exact solid.

*Air holes* run through, from the base plane or the end of the spigot to the forming surface or the pad of a hub.
*Bolts* are blind holes from the base plane. Either kind stands evenly on its circle, its first hole at azimuth 0, the
x-axis of the solid. A drill's *point* goes on beyond the depth of a blind hole: the solid shows the hole without it,
but what a bolt must keep is kept by its point too. Heights are those of the solid, millimetres over the base plane.

References
----------
A point of 118 degrees, common practice, is 0.3 diameters long.
"""

from __future__ import annotations

from collections.abc import Iterator
from math import cos, pi, radians, sin, tan

import numpy as np

from fabricate.chain import Chain
from fabricate.job_hole_rules import HOLE_WALL
from fabricate.job_keys import Job
from fabricate.mould import Mould
from fabricate.solid import mould_solid
from profiles.arcpath import ArcPath
from profiles.drilling import DrilledSolid, clearance
from profiles.errors import GeometryError, JobError
from profiles.hole import Hole
from profiles.solids import Solid

BOLT_COVER = 3.0
"""Material that is left between a bolt hole's point and the forming surface, at least [mm]."""

POINT_LENGTH = 0.5 / tan(radians(59.0))
"""Length of a drill's point over its diameter [-]."""


def drilled_mould(chain: Chain, *, fit: float = 1e-5) -> DrilledSolid:
    """Return the mould of a job as an exact solid, with the holes that the job asks for.

    Parameters
    ----------
    chain : Chain
        The job's maps from part to mould [mm].
    fit : float
        How far arcs beyond a trim line may stray from the forming surface [mm].

    Returns
    -------
    DrilledSolid
        Base plane at height 0; without holes the turned solid alone [mm].

    Raises
    ------
    JobError
        If the holes do not fit in the mould.
    """
    turned = mould_solid(chain.mould, fit=fit)
    air, bolts = _air_holes(chain), _bolts(chain, turned)
    _check_kind(turned, air, "mould.air_holes.circle_diameter", _circle(chain.job.mould.air_holes))
    pointed = tuple(_pointed(bolt) for bolt in bolts)
    _check_kind(turned, pointed, "mould.bolts.circle_diameter", _circle(chain.job.mould.bolts))
    if air and bolts:
        _check_kind(turned, (*air, *pointed), "mould.bolts.circle_diameter", _circle(chain.job.mould.bolts))
    return DrilledSolid(turned, (*air, *bolts), HOLE_WALL)


def drilling_outlines(chain: Chain) -> tuple[ArcPath, ...]:
    """Return one hole of each kind as a lathe drawing shows it, turned into the plane of the half section.

    Parameters
    ----------
    chain : Chain
        The job's maps from part to mould [mm].

    Returns
    -------
    tuple of ArcPath
        Closed outlines in the lathe frame, air hole before bolt: lower end, outer wall, upper end, inner wall; of a
        hole on the axis its half [mm].
    """
    air, bolts = chain.job.mould.air_holes, chain.job.mould.bolts
    if air is None and bolts is None:
        return ()
    solid = drilled_mould(chain)
    firsts = ([] if air is None else [0]) + ([] if bolts is None else [len(solid.holes) - bolts.count])
    return tuple(solid.section(first).moved(along=chain.mould.base) for first in firsts)


def drilling_words(job: Job) -> list[str]:
    """Say what is drilled into a mould.

    Parameters
    ----------
    job : Job
        The job in its own units.

    Returns
    -------
    list of str
        One phrase for each kind of hole, with count, circle and diameter; none without holes.
    """
    unit, found = "in" if job.units == "inch" else "mm", []
    air, bolts = job.mould.air_holes, job.mould.bolts
    if air is not None:
        where = f"on a circle of diameter {air.circle_diameter:g} {unit}" if air.circle_diameter else "on the axis"
        holes = "1 air hole" if air.count == 1 else f"{air.count} air holes"
        found.append(f"{holes} of diameter {air.diameter:g} {unit} {where}, through to the forming side")
    if bolts is not None:
        found.append(
            f"{bolts.count} bolt holes of diameter {bolts.hole_diameter:g} {unit} on a circle of diameter "
            f"{bolts.circle_diameter:g} {unit}, {bolts.hole_depth:g} {unit} deep from the base plane"
        )
    return found


def sheet_over(chain: Chain, radius: float) -> float:
    """Return how thick the formed sheet is over a place on the mould.

    Parameters
    ----------
    chain : Chain
        The job's maps from part to mould [mm].
    radius : float
        Of the place on the mould, no farther out than the forming surface [mm].

    Returns
    -------
    float
        Thickness along the normal there [mm].
    """
    where = np.linspace(chain.on_mould.start, chain.on_mould.end, 1025)
    foot = chain.on_mould.points(where) + chain.shift(where)[:, None] * chain.on_mould.normals(where)
    place = float(np.interp(radius, chain.enlargement * foot[:, 0], where))
    return float(chain.thickness(place))


def _circle(table: object) -> float:
    return float(getattr(table, "circle_diameter", 0.0))


def _ring(count: int, circle: float) -> Iterator[tuple[float, float]]:
    """Yield even places on a circle, the first on the x-axis, without the last digits that systems differ in."""
    for number in range(count):
        angle = 2.0 * pi * number / count
        yield round(0.5 * circle * cos(angle), 12) + 0.0, round(0.5 * circle * sin(angle), 12) + 0.0


def _air_holes(chain: Chain) -> tuple[Hole, ...]:
    air = chain.job.mould.air_holes
    if air is None:
        return ()
    _check_air_circle(chain)
    return tuple(Hole(place, air.diameter) for place in _ring(air.count, air.circle_diameter))


def _check_air_circle(chain: Chain) -> None:
    """Refuse air holes that reach beyond the rim, or over the edge of bore, hub, pilot or spigot."""
    air, shape = chain.job.mould.air_holes, chain.job.mould
    if air is None:
        return
    key = f"mould.air_holes.circle_diameter: value is {air.circle_diameter:g} mm"
    rim = chain.point_on_mould(chain.released.rim)[0]
    room = air.diameter + 2.0 * HOLE_WALL
    if air.circle_diameter + room > 2.0 * rim:
        raise JobError(
            f"{key}, so that the holes come within {HOLE_WALL:g} mm of the rim on the mould; allowed: at most "
            f"{2.0 * rim - room:.6g} mm; do: make the circle smaller"
        )
    if air.circle_diameter < shape.bore_diameter + room and shape.bore_diameter:
        raise JobError(
            f"{key}, so that the holes meet the bore of {shape.bore_diameter:g} mm; allowed: at least "
            f"{shape.bore_diameter + room:.6g} mm; do: make the circle larger, or let the air out by the bore"
        )
    edges = [("mould.spigot_diameter", shape.spigot_diameter)]
    if shape.hub is not None:
        edges += [("mould.hub.diameter", shape.hub.diameter), ("mould.hub.pilot_diameter", shape.hub.pilot_diameter)]
    for name, edge in edges:
        if 0.0 < edge < 2.0 * chain.mould.widest and abs(air.circle_diameter - edge) < room:
            inside = f", or at most {edge - room:.6g} mm" if edge > 2.0 * room else ""
            allowed = f"at least {edge + room:.6g} mm{inside}"
            raise JobError(
                f"{key}, so that a hole lies across the edge at {name} = {edge:g} mm; allowed: {allowed}; do: make the "
                "circle larger or smaller"
            )


def _bolts(chain: Chain, turned: Solid) -> tuple[Hole, ...]:
    bolts = chain.job.mould.bolts
    if bolts is None:
        return ()
    _check_base(chain.mould, bolts.circle_diameter, bolts.hole_diameter)
    holes = tuple(
        Hole(place, bolts.hole_diameter, top=bolts.hole_depth) for place in _ring(bolts.count, bolts.circle_diameter)
    )
    _check_cover(turned, holes[0])
    return holes


def _check_base(mould: Mould, circle: float, diameter: float) -> None:
    """Refuse a bolt circle that does not fit on the base plane."""
    on_base = mould.back.vertices[np.abs(mould.back.vertices[:, 1] - mould.base) < 1e-9, 0]
    inner, outer = 2.0 * float(on_base.min()), 2.0 * float(on_base.max())
    room = diameter + 2.0 * HOLE_WALL
    if inner + room <= circle <= outer - room:
        return
    allowed = f"{inner + room:.6g} to {outer - room:.6g} mm" if inner + room <= outer - room else "no circle"
    raise JobError(
        f"mould.bolts.circle_diameter: value is {circle:g} mm with holes of {diameter:g} mm; allowed: {allowed}, which "
        f"leaves {HOLE_WALL:g} mm beside them on the base plane (from {inner:.6g} to {outer:.6g} mm in diameter); do: "
        "change the circle or make the holes smaller"
    )


def _check_cover(turned: Solid, bolt: Hole) -> None:
    """Refuse a bolt whose point comes too near to the forming surface."""
    cover = clearance(turned, _pointed(bolt), low=0.0)
    if cover >= BOLT_COVER:
        return
    low, high = 0.0, bolt.top
    for _ in range(40):
        middle = 0.5 * (low + high)
        deep = Hole(bolt.centre, bolt.diameter, top=middle)
        low, high = (middle, high) if clearance(turned, _pointed(deep), low=0.0) >= BOLT_COVER else (low, middle)
    allowed = f"at most {low:.4f} mm" if low > 0.1 else "no depth on this circle"
    raise JobError(
        f"mould.bolts.hole_depth: value is {bolt.top:g} mm, so that the drill's point, {POINT_LENGTH:.2g} diameters "
        f"deeper, {'breaks through' if cover <= 0.0 else f'comes within {cover:.3g} mm of'} the forming surface; "
        f"allowed: {allowed}, which leaves {BOLT_COVER:g} mm; do: drill less deep, move the circle, or make "
        "mould.body_height larger"
    )


def _pointed(bolt: Hole) -> Hole:
    """Return a blind hole as deep as the drill's point goes."""
    return Hole(bolt.centre, bolt.diameter, top=bolt.top + POINT_LENGTH * bolt.diameter)


def _check_kind(turned: Solid, holes: tuple[Hole, ...], key: str, value: float) -> None:
    """Refuse holes that the solid cannot have, under the key of their circle."""
    try:
        DrilledSolid(turned, holes, HOLE_WALL)
    except GeometryError as error:
        raise JobError(f"{key}: value is {value:g} mm, and a {error}") from error
