"""Whether the insert can turn a mould's hub, groove and trim line, and what the shop should know of them.

Behind its nose the insert has two flanks, 5° off the lines that touch the nose along X and along Z. So the nose can
touch a surface whose normal lies from 5° before to 5° beyond the quarter turn between those lines, and no other.
"""

from __future__ import annotations

import math

from fabricate.turning_setup import FLANK, Setup
from profiles.errors import JobError

_FLANK_ANGLE = math.atan(FLANK)


def check_features(setup: Setup) -> None:
    """Refuse a groove or a trim line that the insert cannot cut.

    Parameters
    ----------
    setup : Setup
        Mould and insert.

    Raises
    ------
    JobError
        If the groove's radius is not larger than the nose, its sides or those of the trim line stand too steep for the
        flanks, or the trim line is deeper than the nose's radius.
    """
    _check_groove(setup)
    _check_trim_line(setup)


def _check_groove(setup: Setup) -> None:
    lead = setup.mould.lead
    if lead is None or len(lead) == 1:
        return
    radius, nose = 1.0 / float(lead.curvatures[1]), setup.nose
    if radius <= nose * (1.0 + 1e-9):
        raise JobError(
            f"mould.lead_out.groove_radius: value is {setup.text(radius)} {setup.units}; allowed: more than "
            f"turning.nose_radius, {setup.text(nose)} {setup.units}; do: take an insert with a smaller nose, or a "
            "larger groove"
        )
    # A side that leans back over the groove could be cut a little, but no arc of the path may turn back in X.
    steepest = min(0.5 * math.pi - setup.end_slope, setup.end_slope + _FLANK_ANGLE)
    if 0.5 * float(lead.turns[1]) > steepest + 1e-9:
        raise JobError(
            f"mould.lead_out.groove_depth: value is {setup.text(_depth(radius, 0.5 * float(lead.turns[1])))} "
            f"{setup.units}, at which the sides of the groove are too steep for the insert's flanks; allowed: at most "
            f"{setup.text(_depth(radius, steepest))} {setup.units}, on a lead-out that stands at "
            f"{math.degrees(setup.end_slope):.1f} degrees; do: make the groove shallower or its radius larger, or "
            "leave the [turning] table out"
        )


def _check_trim_line(setup: Setup) -> None:
    line = setup.mould.trim_line
    if line is None:
        return
    slope = abs(float(setup.mould.curve.slope(line.where)))
    most = _depth(setup.nose, min(0.5 * math.pi - slope, slope) + _FLANK_ANGLE)
    if line.depth > most:
        raise JobError(
            f"mould.trim_line_depth: value is {setup.text(line.depth)} {setup.units}; allowed: at most "
            f"{setup.text(most)} {setup.units}, which a nose of radius {setup.text(setup.nose)} can mark before the "
            f"insert's flank does, at a slope of {math.degrees(slope):.1f} degrees; do: make the line shallower, or "
            "turning.nose_radius larger"
        )


def _depth(radius: float, angle: float) -> float:
    """Return how deep an arc is sunk that turns by an angle from its middle to its end [mm]."""
    return radius * (1.0 - math.cos(angle))


def feature_notes(setup: Setup) -> list[str]:
    """Return what the shop should know of how a mould's features are turned.

    Parameters
    ----------
    setup : Setup
        Mould and insert.

    Returns
    -------
    list of str
        One sentence each.
    """
    mould, unit, nose = setup.mould, setup.units, setup.text(setup.nose)
    notes = []
    if mould.hub is not None and len(mould.hub) > 1:
        notes.append(
            f"the foot of the pilot keeps a fillet of the nose's radius, {nose} {unit}: chamfer the hole of the blank, "
            "or undercut the foot with another tool"
        )
    if mould.hub is not None and not setup.male:
        notes.append(f"around the pad of the cavity a fillet of the nose's radius stays, {nose} {unit}")
    if mould.trim_line is not None:
        notes.append(
            f"the trim line is marked by the nose, {setup.text(mould.trim_line.depth)} {unit} deep: in the solid it is "
            "a groove of 90 degrees"
        )
    if mould.draft and not setup.male:
        notes.append("the draft of the outside is made elsewhere, as the outside is")
    return notes
