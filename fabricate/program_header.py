"""What a turning program says to the turner before its first word: what it makes, from what, and with which care.

Every line of the user's own text begins with ``JOB``, so that no title can pass for the name of a section.
"""

from __future__ import annotations

import math
import textwrap

from fabricate.job_keys import Job
from fabricate.mould_features import feature_words
from fabricate.speeds import Limits
from fabricate.turning_setup import FLANK, Setup
from outputs.gcode import Comment, comment_lines

_USER_LINE = 80
_DRY_RUN_MARGIN = {"mm": 10.0, "inch": 0.5}

CAUTIONS = (
    "dry run first, with the work offset moved in +Z by {lift}: more than stock and cavity",
    "then single block and low rapid override; start with the tool beyond X{x} and Z{z}",
    "never stand in line with the stock: a large unbalanced one can come off; balance and guard it",
    "cap the spindle on the machine too; check jaws, tail centre, glue lines and hidden screws",
    "gauge only with the spindle stopped; no gloves, loose clothing or chuck key near it",
    "draw off the dust; these limits are for turning, and no speed for spinning sheet on the mould",
    "local codes and licensed practice decide",
)
STOP_TO_CHECK = (
    "stopped: check that the stock is tight and runs true, that nothing rubs and guards are shut",
    "the spindle limit is {limit} rev/min after this stop",
)


def header(job: Job, setup: Setup, limits: Limits, *, lowest: float, part: str = "mould") -> tuple[Comment, ...]:
    """Return the comments at the head of a turning program.

    Parameters
    ----------
    job : Job
        The job, in its own units.
    setup : Setup
        Stock, insert and mould.
    limits : Limits
        What the spindle may do.
    lowest : float
        Lowest Z of the nose in any move [mm].
    part : str
        What is turned.

    Returns
    -------
    tuple of Comment
        In order; lengths in the job's units.
    """
    texts = [*_what(job, setup, part), *_tool(job, setup), *_spindle(job, limits), *_cautions(job, setup, lowest)]
    return (*_user_lines(job), *(Comment(text) for text in texts))


def finish_roughness(feed: float, nose_radius: float) -> float:
    """Return the height of the ridges that a feed leaves, ``Rt = f²/(8 r)``.

    Parameters
    ----------
    feed : float
        Per revolution [mm].
    nose_radius : float
        Of the insert [mm].

    Returns
    -------
    float
        Peak to valley [mm].

    Examples
    --------
    >>> round(1e3 * finish_roughness(0.1, 0.8), 2)
    1.56
    """
    return feed**2 / (8.0 * nose_radius)


def _user_lines(job: Job) -> tuple[Comment, ...]:
    texts = {"title": job.title, "number": job.number, "revision": str(job.revision)}
    lines = []
    for name, text in texts.items():
        plain = " ".join(line[1:-1] for line in comment_lines(text))
        lines += [Comment(f"JOB {name} {piece}") for piece in textwrap.wrap(plain, _USER_LINE)]
    return tuple(lines)


def _what(job: Job, setup: Setup, part: str) -> list[str]:
    mould, stock = setup.mould, setup.stock
    front, back = setup.text(stock.front), setup.text(stock.back)
    diameter = setup.text(2.0 * stock.radius)
    texts = [
        f"{mould.kind} {part} of {job.mould.material or 'material not stated'}",
        f"lengths in {job.units}, X a {job.turning.control.x_word if job.turning else 'diameter'}, feed per revolution",
        f"work zero: on the axis, at the {_zero(setup, part)}, Z away from the headstock",
        f"stock: solid cylinder of diameter {diameter}, Z {back} to {front}",
        *_outside(setup),
        *_features(job, setup),
    ]
    return [*texts, "the bore is made elsewhere"] if mould.bore_radius else texts


def _zero(setup: Setup, part: str) -> str:
    """Say where on the axis the work zero lies."""
    if setup.male:
        virtual = setup.mould.bore_radius or setup.mould.hub is not None
        return f"vertex, virtual {'at the hub' if setup.mould.hub else 'under the bore'}" if virtual else "vertex"
    return "plane of the land" if setup.mould.edge_and_land is not None and part == "mould" else "top of the lip"


def _features(job: Job, setup: Setup) -> list[str]:
    """Return what hub, lead-out, draft and trim line are, and where the hub stands."""
    texts, hub = list(feature_words(job.mould, job.units)), setup.mould.hub
    if hub is not None:
        texts.append(f"the pad lies at Z {setup.text(hub.vertices[-1, 1])}")
    if hub is not None and len(hub) > 1:
        texts.append(f"the pilot ends at Z {setup.text(setup.mould.top)}; its foot keeps a fillet of the nose's radius")
    return texts


def _outside(setup: Setup) -> list[str]:
    diameter = f"diameter {setup.text(2.0 * setup.mould.outer_radius)}"
    if setup.mould.draft:
        diameter = f"a taper, {diameter} at the land, {setup.text(2.0 * setup.mould.widest)} at the base,"
    if setup.male:
        return [f"outside: turned to {diameter} down to Z {setup.text(setup.reach)}, the rest is held"]
    return [
        "outside: not turned here, as an insert for cavities cannot",
        f"true it before, with another tool and under the limit for untrued stock; final {diameter.rstrip(',')}",
    ]


def _tool(job: Job, setup: Setup) -> list[str]:
    turning = setup.turning
    across, along = (setup.text(value) for value in setup.control_shift)
    point = "nose centre"
    if turning.control_point == "imaginary-tip":
        point = f"imaginary tip: from the nose centre, radius {across} and Z {along}"
    ridges = finish_roughness(turning.finishing_feed, setup.nose)
    roughness = f"{1e3 * ridges:.1f} um" if job.units == "mm" else f"{1e6 * ridges / setup.unit:.0f} microinch"
    return [
        f"insert: nose radius {setup.text(setup.nose)}, {turning.tool_post} tool post, neutral: it cuts in and out",
        f"X and Z are of the {point}",
        "tool, work offset and coolant are not called here: call them before, as the control wants it",
        "the nose is in the path: keep G40, and neither nose radius nor tip number in the tool table",
        *_clearances(setup),
        f"finishing feed {turning.finishing_feed / setup.unit:.4f}: ridges of {roughness}, f squared / 8 r",
    ]


def _clearances(setup: Setup) -> list[str]:
    """Return what the insert's flanks and holder must clear."""
    slope = math.ceil(math.degrees(float(setup.mould.curve.slope.largest()[1])))
    hub = setup.mould.hub
    if setup.male and hub is not None and len(hub) > 1:
        height = setup.text(hub.vertices[0, 1] - hub.vertices[-1, 1])
        return [f"flanks and holder must clear the pilot, a wall of 90 deg, {height} high, and the land behind"]
    if setup.male:
        return [f"flanks and holder must clear a wall of {slope} deg towards the axis, and the land behind the cut"]
    ramp = math.ceil(math.degrees(math.atan(FLANK)) - 1e-9)
    return [
        f"flanks and holder must clear a wall of {slope} deg on the side away from the axis",
        f"and ramps of {ramp} deg, steeper where the cavity is narrow, on the side of the axis",
    ]


def _spindle(job: Job, limits: Limits) -> list[str]:
    turning = job.turning
    if turning is None:
        return []
    unit = "ft/min" if job.units == "inch" else "m/min"
    texts = [
        f"spindle {turning.spindle_direction}, cutting speed {turning.surface_speed:.6g} {unit}",
        f"at most {math.floor(limits.untrued)} rev/min until the stock runs true, {math.floor(limits.trued)} after",
    ]
    unscrews = "M4 can unscrew a chuck or faceplate from a threaded spindle nose: lock it"
    return [*texts, unscrews] if turning.spindle_direction == "M4" else texts


def _cautions(job: Job, setup: Setup, lowest: float) -> list[str]:
    lift = (setup.stock.front - lowest) / setup.unit + _DRY_RUN_MARGIN[job.units]
    x_factor = 1.0 if job.turning and job.turning.control.x_word == "radius" else 2.0
    values = {
        "lift": f"{math.ceil(lift)} {job.units}",
        "x": setup.text(x_factor * (setup.home[0] + setup.control_shift[0])),
        "z": setup.text(setup.home[1] + setup.control_shift[1]),
    }
    return [text.format(**values) for text in CAUTIONS]
