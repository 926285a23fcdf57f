"""Proving a turning program: its text is read back as its control would, measured, and replayed on the stock.

The finishing pass stands between the comments ``(FINISH)`` and ``(END FINISH)``. The nose centre's path there is
compared with the exact curve it should follow, which is parallel to the mould curve: the distance between the two is
that of the cut surface from the mould, and the lean between them is the surface's lean.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np

from fabricate.contour import nose_curve
from fabricate.job_keys import Job
from fabricate.mould import Mould
from fabricate.passes import EDGING, FACING, FINISHING, HUB, ROUGHING, SECTIONS, TRIM_LINE, TRUING
from fabricate.removal import Finding, Removal, replay_removal
from fabricate.speeds import Limits, limits_of, spindle_speed
from fabricate.spindle_proof import spindle_findings
from fabricate.turning_keys import Turning
from fabricate.turning_setup import Setup, dialect_of
from outputs.gcode import FEED_DECIMALS
from outputs.gcode_reader import Move, Replay, read_program
from profiles.arcpath import ArcPath
from profiles.deviation import Deviation, deviation
from profiles.errors import FormatError

OUT_OF_TOLERANCE = ("deviation", "lean")
_FEED_WORD = re.compile(r"F\d")
_COMMENT = re.compile(r"\([^)]*\)")


@dataclass(frozen=True)
class TurningProof:
    """What was found in a turning program.

    Parameters
    ----------
    findings : tuple of (str, str)
        A code and a sentence for each kind of fault; empty for a sound program.
    deviation : Deviation or None
        Of the finished surface from the mould curve [mm, rad]; None where the text has no finishing pass to measure.
    removal : Removal or None
        What the replay on the stock found; None where the text cannot be read.
    """

    findings: tuple[Finding, ...]
    deviation: Deviation | None = None
    removal: Removal | None = None

    @property
    def out_of_tolerance(self) -> bool:
        """Whether the finished surface strays or leans too much."""
        return any(code in OUT_OF_TOLERANCE for code, _ in self.findings)


@dataclass(frozen=True)
class _Given:
    """What a program must keep to: the set-up [mm], its limits, and the job's unit [mm] and words."""

    job: Job
    setup: Setup
    limits: Limits

    @property
    def turning(self) -> Turning:
        """The ``[turning]`` table in the job's own units."""
        return self.job.turning or self.setup.turning


# A program is proved when it is planned and again when it is read back: the same text has the same proof.
@lru_cache(maxsize=4)
def prove_turning(text: str, job: Job, mould: Mould) -> TurningProof:
    """Read a turning program back and find every kind of fault in it.

    Parameters
    ----------
    text : str
        The program as it stands in the file.
    job : Job
        The job, in its own units, with a ``[turning]`` table.
    mould : Mould
        Its mould [mm].

    Returns
    -------
    TurningProof
        Findings, the deviation of the finished surface and what the replay found [mm, rad].

    Raises
    ------
    JobError
        If the job's own limits of the spindle contradict each other.
    """
    setup = Setup.of(job, mould)
    given = _Given(job, setup, limits_of(job, setup))
    try:
        replay = read_program(text, dialect_of(job))
    except FormatError as error:
        return TurningProof((("unreadable", str(error)),))
    spindle = spindle_findings(text, given.limits, stop_after=_end_of_facing(replay))
    findings = [*_stop_findings(text, replay, setup), *spindle, *_move_findings(text, replay, given)]
    findings += _trim_line_findings(replay, setup)
    found, measured = None, []
    try:
        found = _measured(replay, given)
        measured = list(_tolerance_findings(found, given))
    except FormatError as error:
        measured = [("no-finish", str(error))]
    removal = replay_removal(replay, job, mould)
    return TurningProof((*measured, *findings, *removal.findings), found, removal)


def _measured(replay: Replay, given: _Given) -> Deviation:
    """Return the deviation of the finished surface from the mould curve."""
    setup, exact = given.setup, nose_curve(given.setup)
    found = deviation(exact, _finish(replay, setup))
    side = -setup.nose if setup.male else setup.nose

    def on_mould(radius: float) -> float:
        if not float(exact.radius(exact.start)) <= radius <= float(exact.radius(exact.end)):
            return radius
        return radius + side * float(np.sin(exact.slope(exact.at_radius(radius))))

    return replace(found, at_radius=on_mould(found.at_radius), slope_at_radius=on_mould(found.slope_at_radius))


def _finish(replay: Replay, setup: Setup) -> ArcPath:
    """Return the path of the nose centre along the forming surface, in the mould frame [mm]."""
    across, along = setup.control_shift
    path = replay.section(FINISHING).scaled(setup.unit).moved(across=-across, along=-along)
    return setup.mould.from_lathe(path)


def finish_path(text: str, job: Job, mould: Mould) -> tuple[ArcPath, float]:
    """Return where the nose centre runs along the forming surface, and how far above it that is meant to be.

    Parameters
    ----------
    text : str
        The program as it stands in the file.
    job : Job
        The job, in its own units, with a ``[turning]`` table.
    mould : Mould
        Its mould [mm].

    Returns
    -------
    path : ArcPath
        In the mould frame [mm].
    clearance : float
        The nose radius, positive on the left of the forming surface [mm].

    Raises
    ------
    FormatError
        If the program cannot be read or has no finishing pass.
    """
    setup = Setup.of(job, mould)
    return _finish(read_program(text, dialect_of(job)), setup), -setup.nose if setup.male else setup.nose


def _tolerance_findings(found: Deviation, given: _Given) -> Iterator[Finding]:
    allowed, lean = given.setup.chord_error, given.job.tolerance.files.slope_mrad
    if found.normal > allowed:
        yield (
            "deviation",
            f"the finished surface is {found.normal:.6f} mm off the mould curve at radius {found.at_radius:.3f} mm, "
            f"over the chord error of {allowed:g} mm",
        )
    if lean and 1e3 * found.slope > lean:
        yield (
            "lean",
            f"the finished surface leans by {1e3 * found.slope:.3f} mrad at radius {found.slope_at_radius:.3f} mm, "
            f"over the {lean:g} mrad of tolerance.files.slope_mrad",
        )


def _stop_findings(text: str, replay: Replay, setup: Setup) -> Iterator[Finding]:
    """Yield what is wrong with the sections and with the stop between untrued and trued stock."""
    names = [section.name for section in replay.sections]
    hub, line = setup.mould.hub, setup.mould.trim_line
    for name in (*SECTIONS, *((HUB,) if hub is not None else ()), *((TRIM_LINE,) if line is not None else ())):
        if names.count(name) != 1 and (name != TRUING or setup.male) and name != FINISHING:
            yield "no-section", f"the program has {names.count(name)} sections ({name}) to (END {name}), not one"
    faced = _end_of_facing(replay)
    rough = min((section.first_line for section in replay.sections if section.name == ROUGHING), default=0)
    stops = [line.strip() for line in text.split("\n")[faced : max(faced, rough - 1)]]
    if faced and "M0" not in stops:
        yield "no-stop", "nothing stops the program before the limit rises, to check that the stock runs true"


def _trim_line_findings(replay: Replay, setup: Setup) -> Iterator[Finding]:
    """Yield a finding where the trim line is scribed at another place, or to another depth, than the mould's."""
    line, shift = setup.mould.trim_line, np.array(setup.control_shift)
    if line is None:
        return
    moves = (move for move in replay.moves if move.section == TRIM_LINE and move.kind == "feed")
    places = [setup.unit * np.array(move.end) - shift for move in moves]
    off = min((float(np.hypot(*(place - line.centre(setup.nose)))) for place in places), default=np.inf)
    if off > setup.chord_error:
        yield "trim-line", f"the trim line is scribed {off:.4f} mm off its place and depth, if at all"


def _end_of_facing(replay: Replay) -> int:
    """Return the last line of what is cut before the stock runs true, 0 where the text does not say."""
    return max((section.last_line for section in replay.sections if section.name == FACING), default=0)


def _move_findings(text: str, replay: Replay, given: _Given) -> list[Finding]:
    """Return what is wrong with the speeds and feeds of the cuts, each kind once, with its first line."""
    faced, lines = _end_of_facing(replay), text.split("\n")
    found: dict[str, str] = {}
    for move in replay.moves:
        if move.kind != "feed":
            continue
        limit = np.floor((given.limits.trued if move.line > faced > 0 else given.limits.untrued) + 1e-6)
        if not _FEED_WORD.search(_COMMENT.sub("", lines[move.line - 1])):
            found.setdefault("no-feed", f"line {move.line}: a cut that does not state its feed")
        for code, problem in (*_speed_problems(move, limit, given), *_feed_problems(move, given)):
            found.setdefault(code, f"line {move.line}: {problem}")
    return list(found.items())


def _speed_problems(move: Move, limit: float, given: _Given) -> Iterator[Finding]:
    turning, speed = given.turning, move.spindle_speed or 0.0
    if move.spindle_direction != turning.spindle_direction:
        yield "spindle-direction", f"the spindle turns {move.spindle_direction}, not {turning.spindle_direction}"
    stepped = turning.control.spindle_limit_word == "none"
    if (move.spindle_mode == "G97") != stepped:
        yield "speed-mode", f"a cut under {move.spindle_mode}, where it must be {'G97' if stepped else 'G96'}"
    elif not stepped:
        if move.spindle_limit != limit:
            yield "spindle-limit", f"the spindle limit is {move.spindle_limit} rev/min, not {limit:g}"
        if speed != np.floor(turning.surface_speed + 1e-6):
            yield "surface-speed", f"the cutting speed is {speed:g}, not {turning.surface_speed:g}"
    elif speed > limit or speed > 1.01 * _fastest(move, given):
        yield "surface-speed", f"the spindle turns at {speed:g} rev/min, over its limit or that of the cutting speed"


def _fastest(move: Move, given: _Given) -> float:
    """Return the speed that cuts as fast as the job allows at the widest point of a move [rev/min]."""
    radii = [place[0] for place in (move.start, move.end) if place is not None]
    widest = given.setup.unit * max(radii) - given.setup.control_shift[0]
    return spindle_speed(max(widest, 1e-6), given.limits.surface_speed)


def _feed_problems(move: Move, given: _Given) -> Iterator[Finding]:
    turning = given.turning
    finishing, roughing = (round(feed, FEED_DECIMALS) for feed in (turning.finishing_feed, turning.roughing_feed))
    allowed = {finishing} if move.section in {HUB, FINISHING, EDGING, TRIM_LINE} else {finishing, roughing}
    if move.feed not in allowed:
        yield (
            "feed",
            f"a feed of {move.feed} per revolution, not {' or '.join(f'{feed:g}' for feed in sorted(allowed))}",
        )
