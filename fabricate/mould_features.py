"""What a mould of revolution has beside forming surface, edge and land: hub, lead-out and draft.

The *hub* is a flat *pad* at the centre, level with the forming surface where the two meet, on a male mould perhaps with
a *pilot*, a pin that centres a pierced blank. The *lead-out* carries the forming surface straight on along its last
tangent; a *groove* may lie across its middle. *Draft* widens the outer side towards the base. Lengths are millimetres
of the lathe frame (radius, Z); a path is walked outwards, so that the mould lies to its right.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from fabricate import mould_keys
from profiles.arcpath import ArcPath
from profiles.errors import JobError

Array = NDArray[np.float64]

HAIR = 1e-6
"""A stretch that is shorter [mm] is none."""


def hub_path(hub: mould_keys.Hub, level: float) -> ArcPath:
    """Return pilot and pad from the axis to the edge of the pad.

    Parameters
    ----------
    hub : mould_keys.Hub
        The table, in millimetres.
    level : float
        Z of the pad [mm].

    Returns
    -------
    ArcPath
        One line without a pilot: the pad; three with one: its top, its side and the pad around it [mm].
    """
    pad, pilot, top = 0.5 * hub.diameter, 0.5 * hub.pilot_diameter, level + hub.pilot_length
    corners = [(0.0, top), (pilot, top), (pilot, level), (pad, level)] if pilot else [(0.0, level), (pad, level)]
    return ArcPath(np.array(corners), np.zeros(len(corners) - 1))


def check_hub(shape: mould_keys.Mould, end: float, *, male: bool) -> None:
    """Refuse a hub that does not fit between bore and forming surface, or whose pilot does not.

    Parameters
    ----------
    shape : mould_keys.Mould
        The ``[mould]`` table, in millimetres.
    end : float
        Radius at which the forming surface ends [mm].
    male : bool
        Whether the mould is male.

    Raises
    ------
    JobError
        If the pad is no larger than the bore or no smaller than the forming surface, or the pilot is half stated, on a
        female mould, no smaller than the pad or no larger than the bore.
    """
    hub = shape.hub
    if hub is None:
        return
    if hub.diameter >= 2.0 * end - HAIR:
        raise JobError(
            f"mould.hub.diameter: value is {hub.diameter:g} mm; allowed: less than the forming surface's end, "
            f"{2.0 * end:.6g} mm; do: make the pad smaller"
        )
    if hub.diameter <= shape.bore_diameter + HAIR:
        raise JobError(
            f"mould.hub.diameter: value is {hub.diameter:g} mm; allowed: more than mould.bore_diameter, "
            f"{shape.bore_diameter:g} mm; do: make the pad larger or the bore smaller"
        )
    _check_pilot(hub, shape.bore_diameter, male=male)


def _check_pilot(hub: mould_keys.Hub, bore: float, *, male: bool) -> None:
    diameter, length = hub.pilot_diameter, hub.pilot_length
    if (diameter > 0.0) != (length > 0.0):
        name, value = ("pilot_length", length) if diameter > 0.0 else ("pilot_diameter", diameter)
        raise JobError(
            f"mould.hub.{name}: value is {value:g} mm with pilot_diameter {diameter:g} mm and pilot_length "
            f"{length:g} mm; allowed: both above 0 or both 0; do: state the other one too"
        )
    if not diameter:
        return
    if not male:
        raise JobError(
            f"mould.hub.pilot_diameter: value is {diameter:g} mm on a female mould; allowed: 0, as the insert that "
            "turns a cavity faces away from the axis and cannot turn a pin in it; do: leave the pilot out"
        )
    if diameter >= hub.diameter - HAIR:
        raise JobError(
            f"mould.hub.pilot_diameter: value is {diameter:g} mm; allowed: less than mould.hub.diameter, "
            f"{hub.diameter:g} mm; do: make the pilot smaller or the pad larger"
        )
    if diameter <= bore + HAIR:
        raise JobError(
            f"mould.hub.pilot_diameter: value is {diameter:g} mm; allowed: more than mould.bore_diameter, {bore:g} mm; "
            "do: make the pilot larger or the bore smaller"
        )


def lead_out_path(lead: mould_keys.LeadOut, start: Array, end: Array) -> ArcPath:
    """Return the lead-out, its groove across the middle.

    Parameters
    ----------
    lead : mould_keys.LeadOut
        The table, in millimetres.
    start, end : ndarray of shape (2,)
        Where the forming surface ends, and the lead-out after it [mm].

    Returns
    -------
    ArcPath
        A line, or line, arc and line [mm].

    Raises
    ------
    JobError
        If the groove is half stated, deeper than its radius, or no narrower than the lead-out.
    """
    _check_groove(lead)
    half = groove_half_width(lead)
    if not half:
        return ArcPath(np.array([start, end]), np.zeros(1))
    middle, aside = 0.5 * (start + end), (end - start) * (half / lead.distance)
    corners = [start, middle - aside, middle + aside, end]
    return ArcPath(np.array(corners), np.array([0.0, lead.groove_depth / half, 0.0]))


def groove_half_width(lead: mould_keys.LeadOut) -> float:
    """Return half the width of a lead-out's groove at its top, ``sqrt(2 R d − d²)``.

    Parameters
    ----------
    lead : mould_keys.LeadOut
        The table, in millimetres.

    Returns
    -------
    float
        From the groove's middle to its edge, along the lead-out [mm]; 0 without a groove.

    Examples
    --------
    >>> groove_half_width(mould_keys.LeadOut(distance=20.0, groove_radius=5.0, groove_depth=2.0))
    4.0
    """
    return float(np.sqrt(max(lead.groove_depth * (2.0 * lead.groove_radius - lead.groove_depth), 0.0)))


def _check_groove(lead: mould_keys.LeadOut) -> None:
    radius, depth = lead.groove_radius, lead.groove_depth
    if (radius > 0.0) != (depth > 0.0):
        name, value = ("groove_depth", depth) if radius > 0.0 else ("groove_radius", radius)
        raise JobError(
            f"mould.lead_out.{name}: value is {value:g} mm with groove_radius {radius:g} mm and groove_depth "
            f"{depth:g} mm; allowed: both above 0 or both 0; do: state the other one too"
        )
    if depth > radius:
        raise JobError(
            f"mould.lead_out.groove_depth: value is {depth:g} mm; allowed: at most mould.lead_out.groove_radius, "
            f"{radius:g} mm; do: make the groove shallower or its radius larger"
        )
    width = 2.0 * groove_half_width(lead)
    if width and width >= lead.distance - HAIR:
        raise JobError(
            f"mould.lead_out.distance: value is {lead.distance:g} mm; allowed: more than the groove's width, "
            f"{width:.6g} mm; do: make the lead-out longer or the groove shallower"
        )


def widened(outer: float, height: float, shape: mould_keys.Mould) -> float:
    """Return the radius of the outer side at the base.

    Parameters
    ----------
    outer : float
        Its radius at the land [mm].
    height : float
        From the base to the land [mm].
    shape : mould_keys.Mould
        The ``[mould]`` table.

    Returns
    -------
    float
        Radius [mm], ``outer`` itself without draft.
    """
    return outer + height * float(np.tan(np.radians(shape.draft_deg))) if shape.draft_deg else outer


def check_draft(shape: mould_keys.Mould, slope: float, *, male: bool, has_rim: bool) -> None:
    """Refuse an outer side that would stand in front of the end of a male mould's forming surface.

    Parameters
    ----------
    shape : mould_keys.Mould
        The ``[mould]`` table.
    slope : float
        Of the forming surface at its end [rad].
    male : bool
        Whether the mould is male.
    has_rim : bool
        Whether an edge or a land lies between the two.

    Raises
    ------
    JobError
        If the outer side leans outwards more than the forming surface does.
    """
    steepest = 90.0 - float(np.degrees(slope))
    if male and not has_rim and shape.draft_deg > steepest:
        raise JobError(
            f"mould.draft_deg: value is {shape.draft_deg:g} degrees; allowed: at most {steepest:.4g} degrees, where "
            "the outer side begins at the end of the forming surface; do: make it smaller, or give the mould a land"
        )


def feature_words(shape: mould_keys.Mould, unit: str) -> tuple[str, ...]:
    """Return what drawing and program say of hub, lead-out, draft and trim line.

    Parameters
    ----------
    shape : mould_keys.Mould
        The ``[mould]`` table, in the job's unit.
    unit : str
        That unit.

    Returns
    -------
    tuple of str
        One line each; none without features.
    """
    words, hub, lead = [], shape.hub, shape.lead_out
    if hub is not None:
        pilot = f", pilot of diameter {hub.pilot_diameter:g}, {hub.pilot_length:g} high" if hub.pilot_length else ""
        words.append(f"hub: pad of diameter {hub.diameter:g} {unit}, level with the forming surface{pilot}")
    if lead is not None:
        groove = f", groove of radius {lead.groove_radius:g}, {lead.groove_depth:g} deep" if lead.groove_depth else ""
        words.append(f"lead-out: straight beyond the forming surface for {lead.distance:g} {unit}{groove}")
    if shape.draft_deg:
        words.append(f"draft: the outer side widens towards the base by {shape.draft_deg:g} deg")
    if shape.trim_line_depth:
        words.append(f"trim line: scribed {shape.trim_line_depth:g} {unit} deep where the rim is cut")
    return tuple(words)
