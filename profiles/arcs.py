"""The fewest tangent arcs for a curve.

To first order the normal distance ``e`` between a curve and an arc path obeys ``e'' = κ_curve − κ_arc``, and
``κ_arc`` is constant on each arc: the best path with continuous tangents is a Bernoulli monospline, which spreads

    ``N* = ∫ (|κ'| / (72 √3 τ))^(1/3) ds``

arcs over the curve for a distance τ. :func:`fewest_arcs` reaches that: joints start evenly spread in
``∫ |κ'|^(1/3) ds``, then positions and normal offsets of the joints are bettered by linear programs that lower the
largest deviation. Tangents follow from ``θ_(i+1) = 2 χ_i − θ_i``, χ the angle of a chord, and are level on the axis.

References
----------
Bernoulli monosplines as the splines of least deviation (from memory); the count follows from the maximum of the cubic
Bernoulli polynomial, ``√3/36``.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from profiles.arc_search import Aim, arc_density, best_path
from profiles.arcpath import ArcPath
from profiles.deviation import Deviation, deviation
from profiles.errors import GeometryError
from profiles.meridian import Meridian

MOST_ARCS = 400


@dataclass(frozen=True)
class ArcFit:
    """A path of arcs and what it was asked for.

    Parameters
    ----------
    path : ArcPath
        Arcs with continuous tangents.
    deviation : Deviation
        Its departure from the curve [mm, rad].
    limit : float
        N*, the number of arcs that theory allows for the distance asked for [-].
    """

    path: ArcPath
    deviation: Deviation
    limit: float


def arc_limit(curve: Meridian, distance: float) -> float:
    """Return how many tangent arcs a distance tolerance needs, ``∫ (|κ'| / (72 √3 τ))^(1/3) ds``.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    distance : float
        τ, the largest normal distance allowed [mm].

    Returns
    -------
    float
        N* [-], not rounded.
    """
    _, running = arc_density(curve, Aim(distance, 0.0))
    return float(running[-1])


def arc_limit_for_slope(curve: Meridian, slope: float) -> float:
    """Return how many arcs of the distance-optimal path a slope tolerance needs, ``∫ (|κ'| / 12σ)^(1/2) ds``.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    slope : float
        σ, the largest angle allowed between path and curve [rad].

    Returns
    -------
    float
        The number of arcs [-], not rounded.
    """
    where = np.linspace(curve.start, curve.end, 2001)
    change = np.abs(curve.curvature.derivative()(where))
    return float(np.trapezoid(np.sqrt(change / (12.0 * slope)), where))


def fewest_arcs(curve: Meridian, *, distance: float, slope: float = 0.0) -> ArcFit:
    """Return the tangent arcs, as few as will do, that keep to a curve.

    Parameters
    ----------
    curve : Meridian
        The exact curve. One that starts on the axis is met with a level tangent there.
    distance : float
        Largest normal distance allowed [mm].
    slope : float
        Largest angle allowed between path and curve [rad]; 0 asks for none.

    Returns
    -------
    ArcFit
        The path, its proved deviation and the theoretical number of arcs.

    Raises
    ------
    GeometryError
        If more than 400 arcs would be needed.

    Examples
    --------
    >>> from profiles.face import Face
    >>> fit = fewest_arcs(Meridian.of_face(Face(110.0), 208.0), distance=0.005)
    >>> round(fit.limit, 1), len(fit.path), fit.deviation.normal < 0.005
    (5.5, 6, True)
    """
    limit = arc_limit(curve, distance)
    count = max(1, int(np.ceil(limit - 0.45)))
    if slope > 0.0:
        count = max(count, int(0.8 * arc_limit_for_slope(curve, slope)))
    aim = Aim(distance, slope)
    while count <= MOST_ARCS:
        path = best_path(curve, count, aim)
        found = deviation(curve, path)
        if found.normal <= distance and (slope <= 0.0 or found.slope <= slope):
            return ArcFit(path, found, limit)
        count += 1
    raise GeometryError(
        f"a distance of {distance:g} mm and a slope of {1e3 * slope:g} mrad need more than {MOST_ARCS} arcs; "
        f"allowed: up to {MOST_ARCS}; do: allow a larger chord error or slope"
    )


def tangent_arcs(curve: Meridian, count: int) -> ArcPath:
    """Return the path of so many tangent arcs that departs least from a curve.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    count : int
        Number of arcs, at least 1.

    Returns
    -------
    ArcPath
        Arcs with continuous tangents, level on the axis.
    """
    return best_path(curve, count, Aim(1.0, 0.0))
