"""What the trade takes for the limits of forming a sheet, each with where it comes from, and warnings beyond them.

None of them is a law: they are figures of handbooks and guides, some from memory, and a shop that knows better goes on.
A new limit is one row of :data:`LIMITS`, one function and one row of the table at the end. A function says one
sentence: the key or the number, its value, the limit and its source; or an empty text.

References
----------
Spinning: a secondary public copy for thickness and tolerance; the ratios of blank to part from memory (general handbook
knowledge, low confidence); S. Kalpakcioglu, "A study of shear-spinnability of metals", 1961 (from memory).
Thermoforming: the design guides of thermopro.com, kal-plastics.com and formary.de (seen).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np

from fabricate.blank import THERMOFORMED, Blank, blank_of
from fabricate.order import Order


@dataclass(frozen=True)
class Limit:
    """A limit of the trade.

    Parameters
    ----------
    value : float
        The limit, in the unit that `LIMITS` names for it.
    source : str
        Where it comes from, in words that stand in a warning.
    """

    value: float
    source: str


_HANDBOOK = "general handbook knowledge, from memory, low confidence"
_GUIDES = "trade guides seen at thermopro.com and kal-plastics.com"
_COPY = "seen in a secondary copy"
_RADII = "trade guides seen at thermopro.com and formary.de"

LIMITS: Mapping[str, Limit] = {
    "spinning ratio, one pass": Limit(1.6, _HANDBOOK),
    "spinning ratio, aluminium": Limit(2.0, _HANDBOOK),
    "spinning ratio, copper": Limit(2.0, _HANDBOOK),
    "spinning ratio, steel": Limit(1.8, _HANDBOOK),
    "spinning ratio, stainless": Limit(1.5, _HANDBOOK),
    "shear reduction": Limit(80.0, "Kalpakcioglu 1961 for metals of at least 50 % reduction of area, from memory"),
    "thickness over blank": Limit(0.1, "common practice, from memory"),
    "thinnest by hand": Limit(0.5, _COPY),
    "thickest by hand": Limit(6.0, _COPY),
    "spinning tolerance": Limit(0.5, _COPY),
    "cavity depth": Limit(75.0, _GUIDES),
    "drape depth": Limit(100.0, _GUIDES),
    "edge radius": Limit(1.5, _RADII),
    "draft, female": Limit(2.0, "trade guides conflict: from 0 to 2"),
    "draft, male": Limit(3.0, "trade guides conflict: from 1.5 to 3"),
}
"""Ratios of blank to part [-]; reduction, thickness over blank diameter and depth over width [%]; thickness, tolerance
and radius [mm]; draft [degrees]. Ratios by the first word of the sheet's name are those of several passes."""


def warnings(order: Order) -> tuple[str, ...]:
    """Return what lies beyond the limits of forming.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.

    Returns
    -------
    tuple of str
        One sentence each, lengths in the unit of the job.
    """
    return tuple(warning for look in _LOOKS if (warning := look(order)))


def _spun(order: Order) -> Blank | None:
    """Return the blank of a job of conventional spinning, else None."""
    return blank_of(order.chain) if order.job.forming.process == "spinning" else None


def _spinning_ratio(order: Order) -> str:
    blank = _spun(order)
    if blank is None:
        return ""
    ratio, one_pass = blank.diameter / blank.formed_diameter, LIMITS["spinning ratio, one pass"]
    family = order.job.sheet.row.name.split()[0].lower()
    most = LIMITS.get(f"spinning ratio, {family}")
    said = (
        f"the blank of {_length(blank.diameter, order)} is {ratio:.3g} times the formed sheet's "
        f"{_length(blank.formed_diameter, order)}"
    )
    if most is not None and ratio > most.value:
        return (
            f"{said}, more than about {most.value:g} for {family} ({most.source}): will the sheet stand it without an "
            "anneal or another process before?"
        )
    if ratio <= one_pass.value:
        return ""
    return f"{said}, more than about {one_pass.value:g} in one pass ({one_pass.source}): are several passes planned?"


def _shear_reduction(order: Order) -> str:
    if order.job.forming.process != "shear-spinning":
        return ""
    face, limit = order.chain.on_mould, LIMITS["shear reduction"]
    where, slope = face.slope.largest()
    reduction = 100.0 * (1.0 - float(np.cos(slope)))
    if reduction <= limit.value:
        return ""
    return (
        f"shear spinning takes {reduction:.3g} % of the thickness where the sheet is steepest, {np.degrees(slope):.3g} "
        f"degrees at radius {_length(abs(float(face.radius(where))), order)} on the mould, more than about "
        f"{limit.value:g} % ({limit.source}): will it stand that in one pass?"
    )


def _thin_for_its_diameter(order: Order) -> str:
    blank, limit = _spun(order), LIMITS["thickness over blank"]
    if blank is None:
        return ""
    share = 100.0 * order.chain.job.sheet.thickness / blank.diameter
    if share >= limit.value:
        return ""
    return (
        f"sheet.thickness is {order.job.sheet.thickness:g} {order.job.units}, {share:.2g} % of the blank's "
        f"{_length(blank.diameter, order)} and less than about {limit.value:g} % ({limit.source}): will it wrinkle?"
    )


def _thickness_by_hand(order: Order) -> str:
    if order.job.forming.process != "spinning":
        return ""
    least, most = LIMITS["thinnest by hand"], LIMITS["thickest by hand"]
    if _below(least.value, order.chain.job.sheet.thickness) and _below(order.chain.job.sheet.thickness, most.value):
        return ""
    return (
        f"sheet.thickness is {order.job.sheet.thickness:g} {order.job.units}; by hand {_span(least, most, order)} are "
        f"spun ({least.source}): is the lathe made for it?"
    )


def _tight_tolerance(order: Order) -> str:
    asked, limit = order.chain.job.tolerance.part.profile, LIMITS["spinning tolerance"]
    if order.job.forming.process != "spinning" or asked == 0.0 or _below(limit.value, asked):
        return ""
    return (
        f"tolerance.part.profile is {order.job.tolerance.part.profile:g} {order.job.units}; conventional spinning "
        f"usually holds ±{_length(limit.value, order)} ({limit.source}): can the shop hold that?"
    )


def _deep_cavity(order: Order) -> str:
    limit = LIMITS["cavity depth"]
    depth, width = _depth_and_width(order)
    if order.mould.kind != "female" or depth <= 0.01 * limit.value * width:
        return ""
    return (
        f"the cavity is {_length(depth, order)} deep and {_length(width, order)} wide, more than "
        f"{limit.value:g} % ({limit.source}): will the sheet still reach its bottom?"
    )


def _deep_drape(order: Order) -> str:
    limit = LIMITS["drape depth"]
    depth, width = _depth_and_width(order)
    if order.job.forming.process != "drape-forming" or depth < 0.01 * limit.value * width:
        return ""
    return (
        f"the drape mould is {_length(depth, order)} high and {_length(width, order)} wide, not less than "
        f"{limit.value:g} % ({limit.source}): will the sheet thin or web too much?"
    )


def _sharp_edge(order: Order) -> str:
    least, mould = LIMITS["edge radius"], order.chain.job.mould
    needed = max(order.chain.job.sheet.thickness, least.value)
    if order.job.forming.process not in THERMOFORMED or _below(needed, mould.edge_radius):
        return ""
    return (
        f"mould.edge_radius is {order.job.mould.edge_radius:g} {order.job.units}, less than "
        f"{_length(needed, order)}: the sheet's thickness and at least {_length(least.value, order)} are usual "
        f"({least.source}); will the edge mark or tear the sheet?"
    )


def _steep_wall(order: Order) -> str:
    if order.job.forming.process not in THERMOFORMED:
        return ""
    limit = LIMITS[f"draft, {order.mould.kind}"]
    where, slope = order.mould.curve.slope.largest()
    draft = 90.0 - float(np.degrees(slope))
    if draft >= limit.value:
        return ""
    radius = _length(abs(float(order.mould.curve.radius(where))), order)
    return (
        f"the mould's wall has a draft of {draft:.3g} degrees at radius {radius}, less than {limit.value:g} "
        f"({limit.source}): will the part come off?"
    )


def _skirt_without_draft(order: Order) -> str:
    forming, mould, limit = order.chain.job.forming, order.mould, LIMITS["draft, male"]
    draft = order.job.mould.draft_deg
    # Only a clamp that is wider than the mould lets the sheet down over its outer side.
    below = forming.clamp_opening > 2.0 * mould.outer_radius
    if forming.process != "drape-forming" or not below or draft >= limit.value:
        return ""
    return (
        f"mould.draft_deg is {draft:g} and forming.clamp_opening lets the sheet down over the mould's outer side: at "
        f"least {limit.value:g} degrees are usual ({limit.source}); if a skirt is formed there, will it come off?"
    )


def _depth_and_width(order: Order) -> tuple[float, float]:
    """Return depth of the mould and width of its forming surface [mm]."""
    curve = order.mould.curve
    return float(order.mould.land_height), 2.0 * float(curve.radius(curve.end))


def _below(low: float, high: float) -> bool:
    """Say whether two lengths are in that order, or equal but for the rounding of inches."""
    return low <= high * (1.0 + 1e-9)


def _length(millimetres: float, order: Order) -> str:
    return f"{millimetres / order.unit:.4g} {order.job.units}"


def _span(least: Limit, most: Limit, order: Order) -> str:
    return f"{least.value / order.unit:.3g} to {most.value / order.unit:.3g} {order.job.units}"


_LOOKS: tuple[Callable[[Order], str], ...] = (
    _spinning_ratio,
    _shear_reduction,
    _thin_for_its_diameter,
    _thickness_by_hand,
    _tight_tolerance,
    _deep_cavity,
    _deep_drape,
    _sharp_edge,
    _steep_wall,
    _skirt_without_draft,
)
