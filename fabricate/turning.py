"""The turning program of a mould: its passes, speeds and header, replayed before anyone may have it.

Geometry is worked out in millimetres for the nose centre, and comes out for the control point in the job's units. A
program whose replay finds a fault is refused: no program is better than a bad one.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

import numpy as np

from fabricate.contour import chorded, chorded_forming, contour_at
from fabricate.contour_features import groove_cuts
from fabricate.job_keys import Job
from fabricate.mould import Mould
from fabricate.passes import Passes
from fabricate.program_header import STOP_TO_CHECK, header
from fabricate.speeds import Limits, limits_of, spindle_speed, stepped
from fabricate.turning_features import check_features, feature_notes
from fabricate.turning_proof import TurningProof, prove_turning
from fabricate.turning_setup import Setup, dialect_of
from outputs.gcode import (
    Block,
    Comment,
    Feed,
    Program,
    ProgramStop,
    Rapid,
    SpindleLimit,
    SpindleSpeed,
    SpindleStart,
    SpindleStop,
    SurfaceSpeed,
    write_program,
)
from profiles.arcpath import ArcPath
from profiles.arcs import ArcFit, fewest_arcs
from profiles.errors import FormatError, GeometryError, JobError


@dataclass(frozen=True)
class TurningPlan:
    """A turning program that has been replayed without a fault.

    Parameters
    ----------
    program : Program
        What to write.
    notes : tuple of str
        What the shop should know of it, one sentence each.
    proof : TurningProof
        What its replay found: the deviation of the finished surface, and what was left standing.
    """

    program: Program
    notes: tuple[str, ...]
    proof: TurningProof


def plan_turning(
    job: Job, mould: Mould, forming: ArcPath, *, part: str = "mould", fit: Callable[..., ArcFit] = fewest_arcs
) -> TurningPlan:
    """Return the turning program of a mould, replayed.

    Parameters
    ----------
    job : Job
        The job, in its own units, with a ``[turning]`` table.
    mould : Mould
        Its mould [mm].
    forming : ArcPath
        Arcs of the forming surface in the mould frame, from the axis or bore outwards [mm]. Where the digits of the
        program leave too little of the tolerance for them, closer ones are fitted.
    part : str
        What the program's header calls it.
    fit : callable
        Fits closer arcs to the forming surface, as `fewest_arcs` does.

    Returns
    -------
    TurningPlan
        The program in the job's units, for its control.

    Raises
    ------
    JobError
        If a pass cannot be cut, the stock would turn too fast, the decimals are too coarse, or the replay finds a
        fault.
    """
    setup = Setup.of(job, mould)
    _check_nose(setup)
    check_features(setup)
    _check_decimals(setup)
    limits = limits_of(job, setup)
    plan = _planned(job, setup, limits, forming, part)
    if plan.proof.out_of_tolerance and setup.turning.control.arcs != "lines":
        plan = _planned(job, setup, limits, _closer(job, setup, fit), part)
    if plan.proof.out_of_tolerance:
        found = "; ".join(text for _, text in plan.proof.findings)
        raise JobError(
            f"turning.control.decimals: value is {setup.turning.control.decimals}, with which {found}; allowed: digits "
            "that keep tolerance.files; do: write more decimals if the control takes them, or widen the tolerance"
        )
    if plan.proof.findings:
        raise JobError(
            "turning: the replay of the program finds: "
            + "; ".join(text for _, text in plan.proof.findings)
            + "; allowed: no fault; do: correct the keys of [turning] that it names, or leave the table out"
        )
    return plan


def _planned(job: Job, setup: Setup, limits: Limits, forming: ArcPath, part: str) -> TurningPlan:
    """Return a program and its proof, which may still have found faults."""
    passes = _passes(job, setup, forming)
    dialect = dialect_of(job)
    cuts = (tuple(passes.untrued()), tuple(passes.trued()))
    lowest = min(block.height for part in cuts for block in part if isinstance(block, Rapid | Feed)) - setup.nose
    try:
        blocks = (
            *header(job, setup, limits, lowest=lowest, part=part),
            *_to_control(_phase(job, setup, limits, limits.untrued, cuts[0]), setup),
            *_stop(limits),
            *_to_control(_phase(job, setup, limits, limits.trued, cuts[1]), setup),
        )
        program = Program(dialect, blocks)
        text = write_program(program)
    except FormatError as error:
        raise JobError(f"turning: {error}; allowed: what this control can be told; do: correct the key") from error
    return TurningPlan(program, _notes(setup, limits), prove_turning(text, job, setup.mould))


def _passes(job: Job, setup: Setup, forming: ArcPath) -> Passes:
    try:
        finished = contour_at(setup, forming, setup.nose)
        roughed = contour_at(setup, forming, setup.nose + setup.allowance, grooved=False)
        grooves = _grooves(setup)
        if setup.turning.control.arcs == "lines":
            share = setup.chord_error - setup.digit
            chords = chorded_forming(setup, share, 0.9e-3 * job.tolerance.files.slope_mrad)
            ungrooved = contour_at(setup, forming, setup.nose, grooved=False).chorded(0.5 * share).along(chords)
            finished = finished.chorded(0.5 * share).along(chords)
            grooves = tuple(chorded(cut, max(0.1 * setup.allowance, 0.5 * share)) for cut in grooves)
            # Chords cut corners: where the allowance does not cover that, roughing runs where finishing will.
            covered = setup.allowance > 2.0 * setup.chord_error
            roughed = roughed.chorded(0.1 * setup.allowance) if covered else ungrooved
    except GeometryError as error:
        raise JobError(
            f"turning.nose_radius: value is {setup.text(setup.nose)} {job.units}, and the path of the nose "
            f"cannot be made: {error}; allowed: a nose, with its finish_allowance, that fits the mould; do: take a "
            "smaller nose radius"
        ) from error
    return Passes(setup, roughed, finished, grooves)


def _grooves(setup: Setup) -> tuple[ArcPath, ...]:
    """Return the cuts that rough the groove of a lead-out; none where there is none."""
    lead = setup.mould.lead
    return () if lead is None else groove_cuts(lead, setup.nose, setup.allowance, setup.turning.depth_of_cut)


def _closer(job: Job, setup: Setup, fit: Callable[..., ArcFit]) -> ArcPath:
    """Return arcs that keep the tolerances after rounding, and at the end, where a lean shifts the nose along."""
    share = setup.chord_error - setup.digit
    lean = 0.98e-3 * job.tolerance.files.slope_mrad or np.inf
    slope = min(lean, 0.5 * share / setup.nose)
    return fit(setup.mould.curve, distance=0.8 * share, slope=slope).path


def _phase(job: Job, setup: Setup, limits: Limits, limit: float, cuts: tuple[Block, ...]) -> Iterator[Block]:
    """Yield the start of the spindle under one limit and the cuts under it, for the nose centre [mm]."""
    turning = setup.turning
    start = min(limit, spindle_speed(setup.stock.radius, turning.surface_speed))
    yield SpindleLimit(limit)
    yield SpindleSpeed(start)
    yield SpindleStart(turning.spindle_direction)
    yield Rapid(*setup.home)
    if turning.control.spindle_limit_word == "none":
        yield from stepped(cuts, setup, limits, limit)
        return
    yield SurfaceSpeed(job.turning.surface_speed if job.turning else turning.surface_speed, limit)
    yield from cuts


def _stop(limits: Limits) -> Iterator[Block]:
    """Yield the stop between untrued and trued stock."""
    yield SpindleStop()
    for text in STOP_TO_CHECK:
        yield Comment(text.format(limit=int(limits.trued)))
    yield ProgramStop()


def _to_control(blocks: Iterable[Block], setup: Setup) -> Iterator[Block]:
    """Yield blocks of the nose centre in mm as blocks of the control point in the job's units."""
    across, along = setup.control_shift
    unit = setup.unit
    for block in blocks:
        match block:
            case Rapid():
                yield Rapid((block.radius + across) / unit, (block.height + along) / unit)
            case Feed():
                place = (block.radius + across) / unit, (block.height + along) / unit
                yield Feed(*place, block.bulge, block.feed / unit)
            case _:
                yield block


def _check_decimals(setup: Setup) -> None:
    """Refuse digits that would take more than half of the tolerance."""
    if 2.0 * setup.digit <= setup.chord_error * (1.0 + 1e-9):
        return
    raise JobError(
        f"turning.control.decimals: value is {setup.turning.control.decimals}, so that positions are rounded to "
        f"{setup.digit / setup.unit:g} {setup.units}, too coarse for tolerance.files.chord_error = "
        f"{setup.chord_error / setup.unit:g} {setup.units}; allowed: a last digit of at most half the chord error; do: "
        "write more decimals if the control takes them, or allow a larger chord error"
    )


def _check_nose(setup: Setup) -> None:
    """Refuse a nose that does not fit into the tightest hollow of the mould."""
    hollows = [(setup.nose + setup.allowance, "with finish_allowance ", _forming_hollow(setup))]
    rim = setup.mould.edge_and_land
    # The edge of a male mould is a hollow, that of a plug is round and none.
    if setup.male and rim is not None and setup.end_slope > 1e-9 and rim.bulges[0] >= 0.0:
        hollows.append((setup.nose, "", setup.mould.edge_radius))
    for size, what, hollow in hollows:
        if size >= hollow * (1.0 - 1e-9):
            raise JobError(
                f"turning.nose_radius: value is {setup.text(setup.nose)} {setup.units}, {what}not smaller than the "
                f"mould's smallest concave radius, {setup.text(hollow)} {setup.units}; allowed: less than that; "
                "do: take an insert with a smaller nose, or a larger mould.edge_radius where that is the hollow"
            )


def _forming_hollow(setup: Setup) -> float:
    """Return the smallest concave radius of the forming surface [mm], infinite where there is none."""
    curvature = setup.mould.curve.curvature
    if setup.male:
        bend = -float(curvature.smallest()[1])
    else:
        # Under a bore the arc that goes on to the axis counts as well.
        under_bore = 0.0 if setup.core is None else float(setup.core.curvatures[0])
        bend = max(float(curvature.largest()[1]), under_bore)
    return 1.0 / bend if bend > 1e-12 else float("inf")


def _notes(setup: Setup, limits: Limits) -> tuple[str, ...]:
    held = setup.text(setup.reach)
    notes = [
        f"the outside is turned down to Z {held} {setup.units}: what is left is for a faceplate or screws, not for jaws"
        if setup.male
        else "the outside of a cavity is not turned by this program, as its insert cannot: true the stock before",
        "the flanks and holder of the insert are not known here: the program's header says what they must clear",
        limits.note,
    ]
    if setup.mould.bore_radius:
        notes.append("the stock is turned solid to the axis: the bore is made elsewhere")
    notes += feature_notes(setup)
    return tuple(note for note in notes if note)
