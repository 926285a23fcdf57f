"""Laws of springback: what the reflecting face does when the sheet lets go of the mould.

Every law ties the meridional curvature of the face as it lies on the mould to that of the released face, at equal arc
length, both ways: a `CurvatureMap`. A meridian is assumed to keep its length on release.

A new law is one function here and one row in :data:`LAWS`.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cache
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from fabricate.bending import BendingSheet, bent_after, bent_before, elastic_curvature
from fabricate.curvature_map import CurvatureMap, ReleasedFace, depth_loss, rim_slope_loss
from fabricate.law_table import LawRow
from profiles.errors import GeometryError, JobError
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import merged_breaks, resolve

Array = NDArray[np.float64]

LEAST_PERCENT, MOST_PERCENT = -20.0, 40.0
HALVINGS = 24


class SpringbackTable(Protocol):
    """What a law may read of the job's table ``[forming.springback]``, lengths in millimetres.

    The keys are those of `fabricate.forming_keys.Springback`, where their units and meaning stand.
    """

    @property
    def law(self) -> str:
        """Name of the law."""

    @property
    def percent(self) -> float | None:
        """Percentage of the law [%]."""

    @property
    def depth_loss(self) -> float | None:
        """Depth on the mould less that of the part [mm]."""

    @property
    def rim_slope_loss_deg(self) -> float | None:
        """Slope of the rim on the mould less that of the part [degrees]."""

    @property
    def stations(self) -> tuple[tuple[float, float], ...] | None:
        """Rows of radius on the finished face [mm] and percentage [%]."""

    @property
    def flow_stress_mpa(self) -> float | None:
        """Flow stress after forming [MPa]."""

    @property
    def accept_estimate(self) -> bool:
        """Whether an estimate of more than 40 % is accepted."""


@dataclass(frozen=True, eq=False)
class StatedSpringback:
    """What a law is made from.

    Parameters
    ----------
    part : ReleasedFace
        The released reflecting face [mm].
    table : SpringbackTable
        The table of the job, in millimetres.
    sheet : BendingSheet
        The sheet.
    """

    part: ReleasedFace
    table: SpringbackTable
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
    return added_curvature(stated.part, np.array(stated.table.stations))


def added_curvature(part: ReleasedFace, rows: Array) -> CurvatureMap:
    """Return the map that a table of stations makes.

    Parameters
    ----------
    part : ReleasedFace
        The released reflecting face [mm].
    rows : ndarray of shape (n, 2)
        Radius on the finished face, increasing [mm], and what the mould has more there in parts of 1/(2f) [%].

    Returns
    -------
    CurvatureMap
        ``κ_mould(s) = κ_part(s) + p(r)/100 · 1/(2f)``, PCHIP between rows, constant beyond.
    """
    percent = table_over_radius(rows[:, 0], rows[:, 1])
    meridian, end = part.meridian, part.meridian.end
    unit = 0.01 / part.face.vertex_radius
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


SHOP_TERMS = ("percent", "depth_loss", "rim_slope_loss_deg")
"""The keys of which any one states the amount of a law that has a percentage."""

LAWS: Mapping[str, LawRow[Law]] = {
    "none": LawRow(no_springback),
    "focal-length": LawRow(focal_length_law, one_of=SHOP_TERMS),
    "curvature": LawRow(curvature_law, one_of=SHOP_TERMS),
    "bending": LawRow(bending_law, one_of=("flow_stress_mpa",), options=("accept_estimate",)),
    "stations": LawRow(stations_law, one_of=("stations",)),
}
"""Every law of springback by the name that the job gives it."""


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
        If no percentage in range gives what is stated.
    """
    return LAWS[stated.table.law].make(stated, percent_of(stated))


def percent_of(stated: StatedSpringback) -> float:
    """Return the percentage of the stated law, solved for where the depth or slope lost is given [%].

    Raises
    ------
    JobError
        If no percentage in range gives what is stated.
    """
    table, law = stated.table, stated.table.law
    if table.depth_loss is not None:
        percent, key = percent_losing(stated, law, table.depth_loss, loss=depth_loss), "depth_loss"
    elif table.rim_slope_loss_deg is not None:
        slope = float(np.radians(table.rim_slope_loss_deg))
        percent, key = percent_losing(stated, law, slope, loss=rim_slope_loss), "rim_slope_loss_deg"
    else:
        return 0.0 if table.percent is None else table.percent
    if percent is None:
        low, high = percents_followed(lambda tried: depth_loss(stated.part, LAWS[law].make(stated, tried)))
        raise JobError(
            f"forming.springback.{key}: value is {getattr(table, key):g}; allowed: what {low:.4g} to {high:.4g} % of "
            "springback give; do: check the value and its sign"
        )
    return percent


def percent_losing(
    stated: StatedSpringback, law: str, wanted: float, *, loss: Callable[[ReleasedFace, CurvatureMap], float]
) -> float | None:
    """Return the percentage under which a law loses as much as is wanted, solved for and not approximated.

    Parameters
    ----------
    stated : StatedSpringback
        Released face, table and sheet.
    law : str
        A law of `LAWS` that has a percentage.
    wanted : float
        The loss [mm or rad].
    loss : callable
        `depth_loss` [mm] or `rim_slope_loss` [rad].

    Returns
    -------
    float or None
        The percentage [%]; None where none from −20 to 40 loses that much.
    """
    from scipy.optimize import brentq

    @cache
    def lost(percent: float) -> float:
        return loss(stated.part, LAWS[law].make(stated, percent))

    low, high = percents_followed(lost)
    if (lost(low) - wanted) * (lost(high) - wanted) > 0.0:
        return None
    return float(brentq(lambda percent: lost(percent) - wanted, low, high, xtol=1e-13, rtol=1e-14))


def percents_followed(lost: Callable[[float], float]) -> tuple[float, float]:
    """Return the least and the greatest percentage that a face can be followed under, −20 and 40 at most.

    Parameters
    ----------
    lost : callable
        What is lost at a percentage; raises GeometryError where the face closes before its trim, as an ellipse may.

    Returns
    -------
    least, greatest : float
        Percentages [%].
    """
    return _followed(lost, LEAST_PERCENT), _followed(lost, MOST_PERCENT)


def _followed(lost: Callable[[float], float], bound: float) -> float:
    """Return the bound, or how near to it the face can be followed."""

    def follows(percent: float) -> bool:
        try:
            lost(percent)
        except GeometryError:
            return False
        return True

    if follows(bound):
        return bound
    near, far = 0.0, bound
    for _ in range(HALVINGS):
        middle = 0.5 * (near + far)
        near, far = (middle, far) if follows(middle) else (near, middle)
    return near


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
