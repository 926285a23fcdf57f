"""The blank: what to cut from the sheet, what it and the part weigh, and how thick the part comes out.

The *formed sheet* runs from the axis to the end of the forming surface (rim and trim) and over the flat flange and the
metal of a bead beyond it. Its radius, arc length and thickness are taken on the reflecting face as it lies on the
mould, before the part shrinks. It has the volume of what was formed, ``∫ 2π r t ds = π D0² t0 / 4``: a law that keeps
the thickness gives a blank of the part's area, the sine law one of its diameter. A *thermoformed* sheet is clamped and
stretched instead: its blank is the clamp's opening and grip. Lengths are millimetres, masses kilograms.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from fabricate.chain import Chain
from fabricate.mould import Mould
from profiles.errors import JobError
from profiles.series import Series, merged_breaks, resolve
from profiles.solids import area

Array = NDArray[np.float64]
Rule = Literal["area", "diameter", "volume", "clamp"]

THERMOFORMED = ("drape-forming", "straight-vacuum")
"""Processes whose sheet is clamped and stretched."""

_RULES: dict[str, Rule] = {"none": "area", "sine-law": "diameter"}
_KG_PER_MM3 = 1e-9
"""What one kg/m³ is in kg/mm³."""


@dataclass(frozen=True)
class Blank:
    """What to cut, and what becomes of it.

    Parameters
    ----------
    diameter : float
        Of the round blank to cut [mm].
    rule : {"area", "diameter", "volume", "clamp"}
        What gave it: the formed sheet's area where it keeps its thickness, the formed sheet's own diameter under the
        sine law, its volume under any other law, or the clamp of a thermoformed sheet.
    developed_length : float
        The other rule of the trade, for comparison: twice the meridian with flange and bead [mm].
    formed_diameter : float
        Of the formed sheet at its outermost, on the mould [mm].
    volume : float
        Of the formed sheet, ``∫ 2π r t ds`` [mm³].
    blank_mass : float
        Of the round blank [kg].
    part_mass : float
        Of the finished part from hole to rim, without flange, bead and coating [kg].
    rim_thickness : float
        Of the sheet at the rim [mm].
    thinnest, thinnest_radius : float
        Least thickness of the part between hole and rim, and the radius on the finished reflecting face where it lies,
        the innermost where the sheet is equally thin over a stretch [mm].
    tolerance_share : float
        How much of the sheet's thickness tolerance reaches the reflecting face along its normal, at most, between hole
        and rim [-]: 0 where that face lies on the mould, else the local ``t/t0``.
    form_error : float or None
        What ``sheet.thickness_tolerance`` so moves the reflecting face by along its normal, ± [mm]; None where it
        reaches that face and is not stated.
    clamp_opening : float or None
        Diameter that the clamp of a thermoformed sheet leaves free [mm]; None for a spun one, as the next three.
    mean_area_ratio : float or None
        Area of the forming surface's sheet over that of the flat disc in its mouth [-]; on average the sheet thins to
        `thickness` over this.
    depth_of_draw : float or None
        From the plane of the mould's land to its vertex [mm].
    draw_ratio : float or None
        Depth of draw over the clamp's opening [-].
    """

    diameter: float
    rule: Rule
    developed_length: float
    formed_diameter: float
    volume: float
    blank_mass: float
    part_mass: float
    rim_thickness: float
    thinnest: float
    thinnest_radius: float
    tolerance_share: float
    form_error: float | None
    clamp_opening: float | None = None
    mean_area_ratio: float | None = None
    depth_of_draw: float | None = None
    draw_ratio: float | None = None

    @property
    def developed_difference(self) -> float:
        """How much larger than the blank the developed length is [mm]."""
        return self.developed_length - self.diameter


@dataclass(frozen=True)
class _Beyond:
    """The sheet beyond the forming surface: a flat flange, then the metal of a bead."""

    radius: float
    length: float
    volume: float


@dataclass(frozen=True)
class _Stretch:
    """The thickness of the part between hole and rim."""

    rim: float
    thinnest: float
    thinnest_radius: float
    thickest: float


def blank_of(chain: Chain) -> Blank:
    """Return the blank of a job.

    Parameters
    ----------
    chain : Chain
        The maps between part and mould [mm].

    Returns
    -------
    Blank
        What to cut, in millimetres and kilograms.

    Raises
    ------
    JobError
        If the clamp's opening is smaller than the mouth of the mould, or the mould does not fit.

    Notes
    -----
    The developed length is the meridian laid flat. A blank of that size would have more area than the part, so the
    sheet would have to get thicker; against equal area it is 1 % larger at f/D 0.5 and 4 % at f/D 0.25.
    """
    job = chain.job
    beyond, within = _beyond(chain), _stretch(chain)
    volume = _sheet_volume(chain) + beyond.volume
    draw = _draw(chain) if job.forming.process in THERMOFORMED else {}
    if draw:
        diameter = draw["clamp_opening"] + 2.0 * job.forming.clamp_grip
    else:
        diameter = equal_area_diameter(volume / job.sheet.thickness)
    density = job.sheet.row.density_kg_m3 * _KG_PER_MM3
    share = _tolerance_share(chain, within)
    known = share == 0.0 or job.sheet.thickness_tolerance > 0.0
    return Blank(
        diameter=diameter,
        rule="clamp" if draw else _RULES.get(job.forming.thinning.law, "volume"),
        developed_length=2.0 * (chain.on_mould.end + beyond.length),
        formed_diameter=2.0 * beyond.radius,
        volume=volume,
        blank_mass=density * 0.25 * np.pi * diameter**2 * job.sheet.thickness,
        part_mass=density * part_volume(chain),
        rim_thickness=within.rim,
        thinnest=within.thinnest,
        thinnest_radius=within.thinnest_radius,
        tolerance_share=share,
        form_error=share * job.sheet.thickness_tolerance if known else None,
        **draw,
    )


def equal_area_diameter(area: float) -> float:
    """Return the diameter of the disc that has an area, ``√(4 A/π)``.

    Parameters
    ----------
    area : float
        Area [mm²].

    Returns
    -------
    float
        Diameter [mm].

    Examples
    --------
    >>> round(equal_area_diameter(1.0), 5)
    1.12838
    """
    return float(np.sqrt(4.0 * area / np.pi))


def mean_thickness(thickness: float, flat_area: float, formed_area: float) -> float:
    """Return how thick a stretched sheet is on average, ``h_f = A_i h_i / A_f``.

    Parameters
    ----------
    thickness : float
        Of the sheet before forming [mm].
    flat_area, formed_area : float
        Area of the sheet that is stretched, before and after [mm²].

    Returns
    -------
    float
        Mean thickness [mm].

    References
    ----------
    R. J. Crawford, *Plastics Engineering*, 3rd ed., eq. 4.28, p. 310 (seen in an excerpt).

    Examples
    --------
    A free bubble blown to a hemisphere has twice the area of its disc:

    >>> mean_thickness(3.0, 1.0, 2.0)
    1.5
    """
    return thickness * flat_area / formed_area


def part_volume(chain: Chain) -> float:
    """Return the volume of the finished part's sheet, between its two faces from the hole to the rim.

    ``2π ∫∫ (r + ε η sin ψ)(1 + ε κ η) dη ds`` over the released reflecting face, ``η`` the depth below it, from the
    coating's far side to the sheet's: exact, not area times thickness. ``ε`` is 1 for a concave reflecting face, behind
    which the sheet lies on the wider side, and −1 for a convex one. Hole and rim are cut along the normal.

    Parameters
    ----------
    chain : Chain
        The maps between part and mould [mm].

    Returns
    -------
    float
        Volume of the sheet [mm³], without coating, flange and bead.

    Notes
    -----
    The blank's own volume is reckoned on the reflecting face as it lies on the mould. A part with its trim may so come
    out heavier or lighter than its blank by about thickness over radius of curvature; the thinning laws know no better.
    """
    part, thickness, coating = chain.released.meridian, chain.thickness, chain.job.sheet.coating_thickness
    side = 1.0 if chain.job.reflector.reflecting_face == "concave" else -1.0
    start, end = _hole(chain), chain.released.rim
    breaks = merged_breaks(part.breaks, thickness.breaks, start=start, end=end)

    def below(where: Array) -> Array:
        radius, sine, bend = part.radius(where), np.sin(part.slope(where)), part.curvature(where)

        def running(depth: Array | float) -> Array:
            turn = 0.5 * side * (sine + radius * bend)
            return np.asarray(depth * (radius + depth * (turn + depth * bend * sine / 3.0)))

        return running(coating + thickness(where)) - running(max(coating, 0.0))

    (rate,) = resolve(lambda where: below(where)[None], breaks, sizes=[float(part.radius(end)) * thickness.size])
    return float(2.0 * np.pi * rate.integral()(end))


def _hole(chain: Chain) -> float:
    """Return the arc length at the hole's edge on the reflecting face [mm], 0 without a hole."""
    return float(chain.released.meridian.at_radius(0.5 * chain.job.reflector.hole_diameter))


def _sheet_volume(chain: Chain) -> float:
    """Return ``∫ 2π r t ds`` over the forming surface [mm³]."""
    face, thickness = chain.on_mould, chain.thickness
    breaks = merged_breaks(face.breaks, thickness.breaks, start=face.start, end=face.end)
    sizes = [float(face.radius(face.end)) * thickness.size]
    (rate,) = resolve(lambda where: (face.radius(where) * thickness(where))[None], breaks, sizes=sizes)
    return float(2.0 * np.pi * rate.integral()(face.end))


def _beyond(chain: Chain) -> _Beyond:
    """Return flange and bead: the flange flat, the bead flat with it or else along the sheet's last direction.

    A flat ring keeps the sheet's own thickness under every law that has a formula, a measured table goes on as it ends.
    """
    face, forming = chain.on_mould, chain.job.forming
    radius, slope = float(face.radius(face.end)), float(face.slope(face.end))
    edge = float(chain.thickness(face.end))
    flat = edge if forming.thinning.law == "stations" else chain.job.sheet.thickness
    lean, bead_thickness = (0.0, flat) if forming.flange_width > 0.0 else (slope, edge)
    lip, bead = radius + forming.flange_width, forming.bead_allowance
    outermost = lip + bead * np.cos(lean)
    flange_volume = np.pi * (lip**2 - radius**2) * flat
    bead_volume = np.pi * (lip + outermost) * bead * bead_thickness
    return _Beyond(float(outermost), forming.flange_width + bead, float(flange_volume + bead_volume))


def _stretch(chain: Chain) -> _Stretch:
    thickness, part = chain.thickness, chain.released
    where, values = _extremes(thickness, _hole(chain), part.rim)
    least = float(values.min())
    thin = float(where[int(np.argmax(values <= least * (1.0 + 1e-12)))])
    return _Stretch(float(values[-1]), least, abs(float(part.meridian.radius(thin))), float(values.max()))


def _extremes(series: Series, start: float, end: float) -> tuple[Array, Array]:
    """Return where a function may be largest or smallest on a part of its interval, in order, and its values there."""
    places = series.extremes()[0]
    where = np.array([start, *places[(places > start) & (places < end)], end])
    return where, series(where)


def _tolerance_share(chain: Chain, within: _Stretch) -> float:
    """Return the share of the sheet's thickness tolerance that reaches the reflecting face [-]."""
    if chain.job.reflector.reflecting_face == chain.job.forming.contact_face:
        return 0.0
    return within.thickest / chain.job.sheet.thickness


def _draw(chain: Chain) -> dict[str, float]:
    """Return what is said of a thermoformed sheet alone; lengths on the cold mould [mm]."""
    face, mould = chain.on_mould, chain.mould
    opening = _opening(chain.job.forming.clamp_opening, mould)
    return {
        "clamp_opening": opening,
        "mean_area_ratio": area(face) / (np.pi * float(face.radius(face.end)) ** 2),
        "depth_of_draw": mould.land_height,
        "draw_ratio": mould.land_height / opening,
    }


def _opening(stated: float, mould: Mould) -> float:
    mouth = 2.0 * _mouth_radius(mould)
    if stated == 0.0:
        return 2.0 * float(mould.back.vertices[:, 0].max())
    if stated < mouth:
        raise JobError(
            f"forming.clamp_opening: value is {stated:g} mm; allowed: at least {mouth:.6g} mm, where the mould's edge "
            "meets its land, or 0 for the mould's own outer diameter; do: make it wider, or state 0"
        )
    return stated


def _mouth_radius(mould: Mould) -> float:
    """Return the radius at which the mould's edge meets the plane of its land [mm]."""
    if mould.rim is None:
        return mould.outer_radius
    radii, heights = mould.rim.vertices.T
    level = np.abs(heights - mould.land) <= 1e-9 * (1.0 + mould.outer_radius)
    return float(radii[level].min()) if level.any() else mould.outer_radius
