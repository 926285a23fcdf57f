"""Laws of springback: what the reflecting face does when the sheet lets go of the mould.

Every law ties the meridional curvature of the face as it lies on the mould to that of the released face, at equal arc
length, both ways: a :class:`CurvatureMap`. A meridian is assumed to keep its length on release.

A new law is one function here and one row in :data:`LAWS`.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fabricate.bending import BendingSheet, bent_after, bent_before, elastic_curvature
from fabricate.forming_keys import Springback
from profiles.errors import GeometryError, JobError
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import Series, merged_breaks, resolve

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


Bends = Callable[[Array, Array], Array]
"""Curvatures [1/mm] at arc lengths [mm] from the curvatures [1/mm] on the other side of a release."""


@dataclass(frozen=True, eq=False)
class CurvatureMap:
    """The meridional curvature on the mould and of the released part, each from the other.

    Parameters
    ----------
    loaded : callable
        Curvature on the mould from arc length and curvature of the released face [1/mm].
    released : callable
        Its inverse.
    breaks : ndarray
        Arc lengths between which both are smooth [mm]; empty where they are so everywhere.
    """

    loaded: Bends
    released: Bends
    breaks: Array

    @classmethod
    def of(cls, *, gain: float = 1.0, shift: Series | None = None) -> CurvatureMap:
        """Return the map ``κ_mould = gain κ_part + shift``.

        Parameters
        ----------
        gain : float
            Factor [-].
        shift : Series or None
            What is added over the arc length [1/mm]; None for nothing.
        """

        def added(where: Array) -> Array | float:
            return 0.0 if shift is None else shift(where)

        return cls(
            lambda where, bend: np.asarray(gain * bend + added(where)),
            lambda where, bend: np.asarray((bend - added(where)) / gain),
            np.empty(0) if shift is None else shift.breaks,
        )

    def load(self, part: Meridian) -> Meridian:
        """Return the face as it lies on the mould, from the released face [mm]."""
        return self._mapped(part, self.loaded)

    def release(self, on_mould: Meridian) -> Meridian:
        """Return the released face, from the face as it lies on the mould [mm]."""
        return self._mapped(on_mould, self.released)

    def _mapped(self, meridian: Meridian, change: Bends) -> Meridian:
        start, end = meridian.start, meridian.end
        breaks = merged_breaks(meridian.breaks, self.breaks, start=start, end=end)
        # Sizes of curvatures are measured against a turn of one radian over the whole length.
        (bend,) = resolve(
            lambda where: change(where, meridian.curvature(where))[None], breaks, sizes=[10.0 / (end - start)]
        )
        first = np.asarray(meridian.start)
        return Meridian.of_curvature(
            bend, slope=float(meridian.slope(first)), radius=float(meridian.radius(first))
        ).raised(float(meridian.height(first)))


@dataclass(frozen=True, eq=False)
class StatedSpringback:
    """What a law is made from.

    Parameters
    ----------
    part : ReleasedFace
        The released reflecting face [mm].
    table : Springback
        The table of the job, in millimetres.
    sheet : BendingSheet
        The sheet.
    """

    part: ReleasedFace
    table: Springback
    sheet: BendingSheet


Law = Callable[[StatedSpringback, float], CurvatureMap]


def no_springback(_stated: StatedSpringback, _percent: float) -> CurvatureMap:
    """Return the map that changes nothing: the part keeps the mould's shape."""
    return CurvatureMap.of()


def focal_length_law(stated: StatedSpringback, percent: float) -> CurvatureMap:
    """Return the map under which R0 on the mould is ``(1 − p/100)`` times the part's, all else being equal.

    Raises
    ------
    GeometryError
        If the face with that vertex radius ends before the trim.
    """
    part = stated.part
    tighter = Face((1.0 - 0.01 * percent) * part.face.focal_length, part.face.conic_constant, part.face.asphere)
    on_mould = Meridian.of_face(tighter, part.meridian.end)
    end = part.meridian.end
    breaks = merged_breaks(part.meridian.breaks, on_mould.breaks, start=0.0, end=end)
    (shift,) = resolve(
        lambda where: (on_mould.curvature(where) - part.meridian.curvature(where))[None], breaks, sizes=[10.0 / end]
    )
    return CurvatureMap.of(shift=shift)


def curvature_law(_stated: StatedSpringback, percent: float) -> CurvatureMap:
    """Return the map of ``κ_part = κ_mould (1 − p/100)``."""
    return CurvatureMap.of(gain=1.0 / (1.0 - 0.01 * percent))


def stations_law(stated: StatedSpringback, _percent: float) -> CurvatureMap:
    """Return the map of ``κ_mould(s) = κ_part(s) + p(r)/100 · 1/(2f)``, PCHIP between rows, constant beyond."""
    rows = np.array(stated.table.stations)
    percent = table_over_radius(rows[:, 0], rows[:, 1])
    meridian, end = stated.part.meridian, stated.part.meridian.end
    unit = 0.01 / stated.part.face.vertex_radius
    breaks = merged_breaks(meridian.breaks, arc_lengths_at(meridian, rows[:, 0]), start=0.0, end=end)
    (shift,) = resolve(lambda where: unit * percent(meridian.radius(where))[None], breaks, sizes=[10.0 / end])
    return CurvatureMap.of(shift=shift)


def bending_law(stated: StatedSpringback, _percent: float) -> CurvatureMap:
    """Return the map of elastic–plastic bending, ``κ_part = κ_mould (1 − 3x + 4x³)`` on the mid-surface.

    ``x = Y'/(E' t κ_mould)``, in plane strain ``E' = E/(1 − ν²)`` and ``Y' = 2Y/√3``, Y the flow stress after forming.

    Raises
    ------
    JobError
        If the face has no curvature somewhere, or more than 40 % are predicted and the job does not accept it.

    Notes
    -----
    An estimate and no bound: it leaves out the stretch that forming adds, which takes springback away.

    References
    ----------
    The cubic: MIT 2.008, Homework 5 "Springback", eq. (1) (seen in a public copy). E': Marciniak, Duncan & Hu,
    *Mechanics of Sheet Metal Forming*, 2nd ed., eq. 6.10 (seen in a public copy); the factor of Y' from memory.
    """
    sheet, part = stated.sheet, stated.part.meridian
    limit = elastic_curvature(sheet, stated.table.flow_stress_mpa or 0.0)
    least, at_least = part.curvature.smallest()[::-1]
    if least <= 0.0:
        raise JobError(
            f'forming.springback.law: value is "bending", and the face has no curvature at radius '
            f"{float(part.radius(at_least)):.6g} mm; allowed: a face curved everywhere; do: state another law"
        )
    half = 0.5 * sheet.mirror_side * sheet.thickness

    def loaded(_where: Array, bend: Array) -> Array:
        middle = bent_before(bend / (1.0 + half * bend), limit)
        return np.asarray(middle / (1.0 - half * middle))

    def released(_where: Array, bend: Array) -> Array:
        middle = bent_after(bend / (1.0 + half * bend), limit)
        return np.asarray(middle / (1.0 - half * middle))

    share = 100.0 * float(1.0 - least / loaded(part.curvature.breaks, np.array([least]))[0])
    if share > MOST_PERCENT and not stated.table.accept_estimate:
        raise JobError(
            f'forming.springback.law: value is "bending", which predicts {share:.3g} % at radius '
            f"{float(part.radius(at_least)):.6g} mm; allowed: up to {MOST_PERCENT:g} %, as it leaves out the stretch "
            "of forming; do: state the springback that the shop has seen, or accept_estimate = true"
        )
    return CurvatureMap(loaded, released, np.empty(0))


LAWS: Mapping[str, Law] = {
    "none": no_springback,
    "focal-length": focal_length_law,
    "curvature": curvature_law,
    "bending": bending_law,
    "stations": stations_law,
}


def springback_map(stated: StatedSpringback) -> CurvatureMap:
    """Return the map that the job states.

    Parameters
    ----------
    stated : StatedSpringback
        Released face, table and sheet.

    Returns
    -------
    CurvatureMap
        From part to mould and back.

    Raises
    ------
    JobError
        If the law is not built in, or no percentage in range gives what is stated.
    """
    law = stated.table.law
    if law not in LAWS:
        raise JobError(
            f'forming.springback.law: value is "{law}"; allowed: {", ".join(LAWS)}; do: state the springback in '
            "one of these"
        )
    return LAWS[law](stated, percent_of(stated))


def percent_of(stated: StatedSpringback) -> float:
    """Return the percentage of the stated law, solved for where the depth or slope lost is given [%]."""
    table, part = stated.table, stated.part
    if table.depth_loss is not None:
        wanted, lost, key = table.depth_loss, depth_loss, "depth_loss"
    elif table.rim_slope_loss_deg is not None:
        wanted, lost, key = np.radians(table.rim_slope_loss_deg), rim_slope_loss, "rim_slope_loss_deg"
    else:
        return 0.0 if table.percent is None else table.percent

    def excess(percent: float) -> float:
        return lost(part, LAWS[table.law](stated, percent)) - wanted

    return _solved(excess, f"forming.springback.{key}", getattr(table, key))


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
