"""The follow block over a chuck with a flat pad at its nose: the sheet goes around the pad's edge.

Over the pad the sheet's outer face is flat, around the pad's edge it is an arc, and from there on it is what it is
without a pad. The three are tangent to one another. Lengths are millimetres in the chuck's or the block's mould frame.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.polynomial.chebyshev import Chebyshev

from fabricate.chain import Chain
from profiles.arcpath import ArcPath
from profiles.arcs import ArcFit, arc_limit, fewest_arcs
from profiles.deviation import deviation
from profiles.errors import GeometryError, JobError
from profiles.meridian import Meridian
from profiles.series import Series, constant

FLAT = 1e-9
"""A slope under it [rad] is none."""
SHARES = (0.5, 0.2, 0.05, 0.01)
"""What the arcs beyond the pad's edge may take of a tolerance, one after the other until the edge fits too."""
SHORT = 1e-6


def over_pad(chain: Chain, outer: Meridian, pad: float) -> tuple[Meridian, float]:
    """Return the sheet's outer face over a chuck that is flat out to a radius.

    Parameters
    ----------
    chain : Chain
        The maps between part and mould [mm].
    outer : Meridian
        The face over a chuck without a pad, in the chuck's mould frame [mm].
    pad : float
        Radius of the pad [mm].

    Returns
    -------
    face : Meridian
        Flat, an arc tangent to both, and the rest of the face [mm].
    around : float
        Arc length at which it has gone around the pad's edge [mm].

    Raises
    ------
    JobError
        If the face would have a corner, or the pad does not fit.

    Notes
    -----
    A sheet that keeps its thickness has it for the radius of the arc; one that thins by its slope starts on the pad, on
    a wider arc: with Δ the rise from the flat to where the rest begins at the slope ψ, ``R = Δ/(1 − cos ψ)``.
    """
    _check_pad(chain)
    edge = _material_point(chain, pad)
    through = chain.enlargement * float(chain.thickness(edge))
    level = chain.point_on_mould(edge)[1] - chain.enlargement * float(chain.thickness(chain.thickness.start))
    start = float(outer.at_radius(pad + through * np.sin(float(chain.on_mould.slope(edge)))))
    (radius, height), slope = outer.points(start), float(outer.slope(start))
    bend, flat = _corner(radius, height - level, slope)
    if bend <= 0.0 or flat <= 0.0:
        raise JobError(
            f"mould.hub.diameter: value is {2.0 * pad:g} mm, and the sheet's outer face cannot go around the edge of "
            "the pad with the thickness it has there; allowed: a pad from whose edge the sheet rises; do: check "
            "thinning.stations, or leave the [follow_block] table out"
        )
    around = flat + bend * slope
    curvature = Series((*constant(0.0, 0.0, flat).pieces, *constant(1.0 / bend, flat, around).pieces))
    inside, rest = Meridian.of_curvature(curvature).raised(level), outer.part(start, outer.end)
    parts = zip((inside.radius, inside.height, inside.slope), (rest.radius, rest.height, rest.slope), strict=True)
    return Meridian(*(Series((*first.pieces, *_moved(second, around - start))) for first, second in parts)), around


def fewest_arcs_around(curve: Meridian, *, around: float, distance: float, slope: float = 0.0) -> ArcFit:
    """Return few tangent arcs for the face of a block: the flat, the arc around the pad's edge, and what follows.

    Parameters
    ----------
    curve : Meridian
        The block's face, from the axis or the bore outwards [mm].
    around : float
        Arc length at which it has gone around the pad's edge [mm]; 0 without a pad.
    distance : float
        Largest normal distance allowed [mm].
    slope : float
        Largest angle allowed between path and face [rad]; 0 asks for none.

    Returns
    -------
    ArcFit
        The path and its deviation. Beyond the pad's edge it takes a few more arcs than the fewest, as the arc around
        the edge must meet them without a corner.

    Raises
    ------
    GeometryError
        If it takes too many arcs.
    """
    if curve.start >= around - SHORT:
        return fewest_arcs(curve, distance=distance, slope=slope)
    if curve.end <= around + SHORT:
        path = _exact(curve)
        return ArcFit(path, deviation(curve, path), float(len(path)))
    rest = curve.part(around, curve.end)
    for share in SHARES:
        path = _led_in(curve, rest, fewest_arcs(rest, distance=share * distance, slope=share * slope).path)
        found = deviation(curve, path)
        if found.normal <= distance and (slope <= 0.0 or found.slope <= slope):
            return ArcFit(path, found, arc_limit(rest, distance))
    raise GeometryError(
        f"follow_block: the face around the edge of mould.hub strays by {found.normal:.4g} mm and leans by "
        f"{1e3 * found.slope:.4g} mrad; allowed: {distance:g} mm and {1e3 * slope:g} mrad; do: ask for less, or leave "
        "the [follow_block] table out"
    )


def _check_pad(chain: Chain) -> None:
    """Refuse a pad where the sheet's outer face has corners."""
    if chain.kind == "female":
        raise JobError(
            "follow_block: the table stands beside mould.hub and a convex contact face, where the plug would need a "
            "sharp edge around the pad; allowed: one of the two tables; do: leave the other out"
        )
    if chain.job.mould.cover_thickness:
        raise JobError(
            f"mould.cover_thickness: value is {chain.job.mould.cover_thickness:g} mm beside mould.hub and a "
            "[follow_block] table; allowed: 0; do: leave cover, hub or follow block out"
        )


def _material_point(chain: Chain, radius: float) -> float:
    """Return the arc length of the reflecting face on the mould whose foot lies at a radius of the chuck [mm]."""
    from scipy.optimize import brentq

    face, most = chain.on_mould, chain.point_on_mould(chain.on_mould.end)[0]
    if radius >= most:
        raise JobError(
            f"mould.hub.diameter: value is {2.0 * radius:g} mm; allowed: less than the forming surface's end, "
            f"{2.0 * most:.6g} mm; do: make the pad smaller"
        )
    return float(brentq(lambda where: chain.point_on_mould(where)[0] - radius, face.start, face.end, xtol=1e-12))


def _corner(radius: float, rise: float, slope: float) -> tuple[float, float]:
    """Return the radius of the arc that rises from a flat to a place with a slope, and where it leaves the flat."""
    bend = rise / (1.0 - np.cos(slope)) if slope > FLAT else 0.0
    return float(bend), float(radius - bend * np.sin(slope))


def _moved(series: Series, along: float) -> Iterator[Chebyshev]:
    """Yield the pieces of a function moved along its axis [mm]."""
    return (Chebyshev(piece.coef, domain=piece.domain + along) for piece in series.pieces)


def _exact(curve: Meridian) -> ArcPath:
    """Return the path of a face that is nothing but a flat and an arc."""
    slopes = curve.slope(curve.breaks)
    return ArcPath(curve.points(curve.breaks), np.tan(0.25 * np.diff(slopes)))


def _led_in(curve: Meridian, rest: Meridian, path: ArcPath) -> ArcPath:
    """Return a path that begins where the face has gone around the pad's edge, with flat and arc before it."""
    foot, start = rest.points(rest.start), curve.points(curve.start)
    moved = path.moved(across=float(foot[0] - path.vertices[0, 0]), along=float(foot[1] - path.vertices[0, 1]))
    slope = float(np.arctan2(*moved.tangents[0][0][::-1]))
    vertices, bulges = [start], []
    if float(curve.slope(curve.start)) <= FLAT:
        _, flat = _corner(float(foot[0]), float(foot[1] - start[1]), slope)
        vertices, bulges = [start, np.array([flat, start[1]])], [0.0]
    chord = moved.vertices[0] - vertices[-1]
    bulges.append(float(np.tan(0.5 * (slope - np.arctan2(chord[1], chord[0])))))
    return ArcPath(np.vstack([*vertices, moved.vertices]), np.concatenate([bulges, moved.bulges]))
