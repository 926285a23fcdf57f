"""Laws of thinning: how thick the formed sheet is along the meridian.

A law takes the reflecting face as it lies on the mould and returns the thickness over its arc length. A new law is
one function here and one row in :data:`LAWS`.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from fabricate.law_table import LawRow
from fabricate.springback import arc_lengths_at, table_over_radius
from profiles.meridian import Meridian
from profiles.series import Series, constant, merged_breaks, resolve

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class FormedSheet:
    """What a thinning law may look at.

    Parameters
    ----------
    on_mould : Meridian
        The reflecting face as it lies on the mould, from the axis to the end of the forming surface [mm].
    released : Meridian
        The same face released, at equal arc length [mm].
    thickness : float
        Thickness of the sheet before forming [mm].
    """

    on_mould: Meridian
    released: Meridian
    thickness: float


class ThinningTable(Protocol):
    """What a law may read of the job's table ``[forming.thinning]``, lengths in millimetres.

    The keys are those of `fabricate.forming_keys.Thinning`, where their units and meaning stand.
    """

    @property
    def law(self) -> str:
        """Name of the law."""

    @property
    def stations(self) -> tuple[tuple[float, float], ...] | None:
        """Rows of radius on the finished face and thickness [mm]."""


Law = Callable[[FormedSheet, ThinningTable], Series]


def no_thinning(sheet: FormedSheet, _stated: ThinningTable) -> Series:
    """Return the sheet's own thickness everywhere [mm]: conventional spinning, to first order."""
    return constant(sheet.thickness, sheet.on_mould.start, sheet.on_mould.end)


def sine_law(sheet: FormedSheet, _stated: ThinningTable) -> Series:
    """Return ``t = t0 cos ψ`` [mm]: shear spinning, and a sheet draped while its free part stays a tangent cone.

    References
    ----------
    A printed table that was seen in a public copy; it refers to Wong, Dean & Lin, Int. J. Mach. Tools Manuf. 43 (2003)
    1419-1435, which was not.
    """
    curve = sheet.on_mould
    (thickness,) = resolve(
        lambda where: sheet.thickness * np.cos(curve.slope(where))[None], curve.breaks, sizes=[sheet.thickness]
    )
    return thickness


def straight_vacuum(sheet: FormedSheet, _stated: ThinningTable) -> Series:
    """Return the thickness of a sheet drawn into a cavity from the rim inwards [mm].

    ``t = t0 (1 + cos ψ)/2 · exp(−∫ (1 − cos ψ)/r ds)``, the integral from the place to the end of the forming surface.

    Notes
    -----
    Geometric element analysis with a spherical free cap of area ``A = 2π r²/(1 + cos ψ)``:
    ``d(ln t)/dr = (2π r / cos ψ − A')/A`` with ``t = t0 (1 + cos ψ)/2`` at the start. The part of ``A'`` that comes
    from the slope integrates to ``ln(1 + cos ψ)``; what remains is ``(1 − cos ψ)/r`` over the arc length.

    References
    ----------
    UC Berkeley MAS 2.0, "Thermoforming: theoretical considerations", for the cone (seen in a public copy).
    """
    curve = sheet.on_mould

    def rate(where: Array) -> Array:
        slope, radius = curve.slope(where), curve.radius(where)
        return np.asarray(2.0 * np.sin(0.5 * slope) ** 2 / np.maximum(radius, 1e-300))

    sizes = [10.0 / (curve.end - curve.start)]
    (loss,) = resolve(lambda where: rate(where)[None], curve.breaks, sizes=sizes)
    running = loss.integral()
    whole = float(running(curve.end))
    (thickness,) = resolve(
        lambda where: (0.5 * sheet.thickness * (1.0 + np.cos(curve.slope(where))) * np.exp(running(where) - whole))[
            None
        ],
        curve.breaks,
        sizes=[sheet.thickness],
    )
    return thickness


def stations(sheet: FormedSheet, stated: ThinningTable) -> Series:
    """Return a measured table of radius on the finished face and thickness [mm].

    PCHIP between its rows, constant beyond them. A table that reaches the axis with a slope is rounded off there, as
    little as will do, for else the mould would end in a point or a dimple.
    """
    rows = np.array(stated.stations)
    table = table_over_radius(rows[:, 0], rows[:, 1])
    curve, released = sheet.on_mould, sheet.released
    rounded = _rounding_radius(table, sheet, rows[:, 0])
    breaks = merged_breaks(
        curve.breaks,
        arc_lengths_at(released, np.append(rows[:, 0], rounded)),
        start=curve.start,
        end=curve.end,
    )
    (thickness,) = resolve(
        lambda where: table(_kept_off_axis(released.radius(where), rounded))[None], breaks, sizes=[sheet.thickness]
    )
    return thickness


def _rounding_radius(table: Callable[[Array], Array], sheet: FormedSheet, radii: Array) -> float:
    """Return the radius within which a slope of the table at the axis is rounded off [mm]; 0 for none.

    Rounded off within R, a slope T' bends the mould by up to 1.85 T'/R: R is such that a third of the face's curvature
    is left, but it never reaches past the table's first row.
    """
    step = 1e-6 * sheet.released.end
    slope = abs(float(table(step * np.arange(3.0)) @ np.array([-1.5, 2.0, -0.5]))) / step
    first_row = float(radii[radii > 0.0][0]) if (radii > 0.0).any() else 0.0
    return min(3.0 * slope / float(sheet.released.curvature(sheet.released.start)), first_row) if slope > 1e-9 else 0.0


def _kept_off_axis(radius: Array, within: float) -> Array:
    """Return the radius, smoothly kept at ``within/√3`` or more: level at the axis and unchanged from ``within`` on."""
    if within == 0.0:
        return radius
    lift = np.maximum(1.0 - (radius / within) ** 2, 0.0) ** 3
    return np.asarray(np.sqrt(radius**2 + within**2 / 3.0 * lift))


LAWS: Mapping[str, LawRow[Law]] = {
    "none": LawRow(no_thinning),
    "sine-law": LawRow(sine_law),
    "straight-vacuum": LawRow(straight_vacuum),
    "stations": LawRow(stations, one_of=("stations",)),
}
"""Every law of thinning by the name that the job gives it."""


def thickness_on_mould(sheet: FormedSheet, stated: ThinningTable) -> Series:
    """Return the formed sheet's thickness over the arc length of the reflecting face on the mould [mm]."""
    return LAWS[stated.law].make(sheet, stated)
