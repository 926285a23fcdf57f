"""Laws of springback: what the reflecting face does when the sheet lets go of the mould.

Every law maps the meridional curvature of the released face to that of the face as it lies on the mould, at equal arc
length: ``κ_mould(s) = gain(s) κ_part(s) + shift(s)``. The map has an inverse as long as the gain is not zero, so the
way back from mould to part needs no law of its own. A meridian is assumed to keep its length on release.

A new law is one function here and one row in :data:`LAWS`.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fabricate.job_keys import Springback
from profiles.errors import GeometryError, JobError
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import Series, constant, merged_breaks, resolve

Array = NDArray[np.float64]

LEAST_PERCENT, MOST_PERCENT = -20.0, 40.0


@dataclass(frozen=True, eq=False)
class ReleasedFace:
    """The reflecting face of the finished part, released.

    Parameters
    ----------
    face : Face
        Its equation.
    meridian : Meridian
        Its curve from the axis to the end of the trim, by its own arc length [mm].
    rim : float
        Arc length at the rim [mm].
    """

    face: Face
    meridian: Meridian
    rim: float


@dataclass(frozen=True, eq=False)
class CurvatureMap:
    """``κ_mould = gain κ_part + shift`` over the arc length.

    Parameters
    ----------
    gain : Series
        Factor [-].
    shift : Series
        What is added [1/mm].
    """

    gain: Series
    shift: Series

    def load(self, part: Meridian) -> Meridian:
        """Return the face as it lies on the mould, from the released face [mm]."""
        return self._mapped(part, lambda where, bend: self.gain(where) * bend + self.shift(where))

    def release(self, on_mould: Meridian) -> Meridian:
        """Return the released face, from the face as it lies on the mould [mm]."""
        return self._mapped(on_mould, lambda where, bend: (bend - self.shift(where)) / self.gain(where))

    def _mapped(self, meridian: Meridian, change: Callable[[Array, Array], Array]) -> Meridian:
        start, end = meridian.start, meridian.end
        breaks = merged_breaks(meridian.breaks, self.gain.breaks, self.shift.breaks, start=start, end=end)
        # Sizes of curvatures are measured against a turn of one radian over the whole length.
        (bend,) = resolve(
            lambda where: change(where, meridian.curvature(where))[None], breaks, sizes=[10.0 / (end - start)]
        )
        first = np.asarray(meridian.start)
        return Meridian.of_curvature(
            bend, slope=float(meridian.slope(first)), radius=float(meridian.radius(first))
        ).raised(float(meridian.height(first)))


Law = Callable[[ReleasedFace, Springback, float], CurvatureMap]


def no_springback(part: ReleasedFace, _stated: Springback, _percent: float) -> CurvatureMap:
    """Return the map that changes nothing: the part keeps the mould's shape."""
    return CurvatureMap(constant(1.0, 0.0, part.meridian.end), constant(0.0, 0.0, part.meridian.end))


def focal_length_law(part: ReleasedFace, _stated: Springback, percent: float) -> CurvatureMap:
    """Return the map under which R0 on the mould is ``(1 − p/100)`` times the part's, all else being equal.

    Raises
    ------
    GeometryError
        If the face with that vertex radius ends before the trim.
    """
    face = part.face
    tighter = Face((1.0 - 0.01 * percent) * face.focal_length, face.conic_constant, face.asphere)
    on_mould = Meridian.of_face(tighter, part.meridian.end)
    start, end = 0.0, part.meridian.end
    breaks = merged_breaks(part.meridian.breaks, on_mould.breaks, start=start, end=end)
    (shift,) = resolve(
        lambda where: (on_mould.curvature(where) - part.meridian.curvature(where))[None],
        breaks,
        sizes=[10.0 / end],
    )
    return CurvatureMap(constant(1.0, start, end), shift)


def curvature_law(part: ReleasedFace, _stated: Springback, percent: float) -> CurvatureMap:
    """Return the map of ``κ_part = κ_mould (1 − p/100)``."""
    end = part.meridian.end
    return CurvatureMap(constant(1.0 / (1.0 - 0.01 * percent), 0.0, end), constant(0.0, 0.0, end))


def stations_law(part: ReleasedFace, stated: Springback, _percent: float) -> CurvatureMap:
    """Return the map of ``κ_mould(s) = κ_part(s) + p(r)/100 · 1/(2f)``, PCHIP between rows, constant beyond."""
    rows = np.array(stated.stations)
    percent = table_over_radius(rows[:, 0], rows[:, 1])
    meridian, end = part.meridian, part.meridian.end
    unit = 0.01 / part.face.vertex_radius
    breaks = merged_breaks(meridian.breaks, arc_lengths_at(meridian, rows[:, 0]), start=0.0, end=end)
    (shift,) = resolve(lambda where: unit * percent(meridian.radius(where))[None], breaks, sizes=[10.0 / end])
    return CurvatureMap(constant(1.0, 0.0, end), shift)


LAWS: Mapping[str, Law] = {
    "none": no_springback,
    "focal-length": focal_length_law,
    "curvature": curvature_law,
    "stations": stations_law,
}


def springback_map(part: ReleasedFace, stated: Springback) -> CurvatureMap:
    """Return the map that the job states.

    Parameters
    ----------
    part : ReleasedFace
        The released reflecting face [mm].
    stated : Springback
        The table of the job, in millimetres.

    Returns
    -------
    CurvatureMap
        From part to mould and back.

    Raises
    ------
    JobError
        If the law is not built in, or no percentage in range gives what is stated.
    """
    if stated.law not in LAWS:
        raise JobError(
            f'forming.springback.law: value is "{stated.law}"; allowed: {", ".join(LAWS)}; do: state the springback in '
            "one of these"
        )
    return LAWS[stated.law](part, stated, percent_of(part, stated))


def percent_of(part: ReleasedFace, stated: Springback) -> float:
    """Return the percentage of the stated law, solved for where the depth or slope lost is given [%]."""
    if stated.depth_loss is not None:
        wanted, lost, key = stated.depth_loss, depth_loss, "depth_loss"
    elif stated.rim_slope_loss_deg is not None:
        wanted, lost, key = np.radians(stated.rim_slope_loss_deg), rim_slope_loss, "rim_slope_loss_deg"
    else:
        return 0.0 if stated.percent is None else stated.percent

    def excess(percent: float) -> float:
        return lost(part, LAWS[stated.law](part, stated, percent)) - wanted

    return _solved(excess, f"forming.springback.{key}", getattr(stated, key))


def _solved(excess: Callable[[float], float], key: str, value: float) -> float:
    from scipy.optimize import brentq

    low, high = LEAST_PERCENT, MOST_PERCENT
    try:
        at_low, at_high = excess(low), excess(high)
    except GeometryError as error:
        raise JobError(f"{key}: value is {value:g}; allowed: what the face can follow; do: {error}") from error
    if at_low * at_high > 0.0:
        raise JobError(
            f"{key}: value is {value:g}; allowed: what {low:g} to {high:g} % of springback give; "
            "do: check the value and its sign"
        )
    return float(brentq(excess, low, high, xtol=1e-13, rtol=1e-14))


def depth_loss(part: ReleasedFace, springback: CurvatureMap) -> float:
    """Return the depth on the mould less that of the part, vertex to rim, at the rim's material point [mm]."""
    return float(springback.load(part.meridian).height(part.rim) - part.meridian.height(part.rim))


def rim_slope_loss(part: ReleasedFace, springback: CurvatureMap) -> float:
    """Return the rim's slope on the mould less that of the part, at the rim's material point [rad]."""
    return float(springback.load(part.meridian).slope(part.rim) - part.meridian.slope(part.rim))


def table_over_radius(radii: Array, values: Array) -> Callable[[Array], Array]:
    """Return a table as a function of the radius [mm]: PCHIP between its rows, constant beyond them."""
    from scipy.interpolate import PchipInterpolator

    if len(radii) == 1:
        return lambda radius: np.full_like(radius, values[0])
    inside = PchipInterpolator(radii, values)
    return lambda radius: np.asarray(inside(np.clip(radius, radii[0], radii[-1])))


def arc_lengths_at(meridian: Meridian, radii: Array) -> Array:
    """Return the arc lengths at which a curve reaches those of the radii that lie on it [mm]."""
    reached = radii[(radii > 0.0) & (radii < float(meridian.radius(meridian.end)))]
    return meridian.at_radius(reached)
