"""What a turning program does to its stock, cut by cut.

The insert is swept along every cut and taken from a section of the stock. Nothing of the
finished mould may be missing (a *gouge*), nothing may be left standing where the program turns it, no rapid may meet
the stock that stands at that moment, no cut may be much thicker than the depth of cut, and the nose centre may not pass
the axis. A *run* is a row of cuts without a rapid between them. Lengths are millimetres in the lathe frame.

A cut may be thicker than the nose is wide, so the *insert* is more than its nose: behind it lie two flanks, 5° off
the lines that touch the nose along X and along Z, as long as the depth of cut. Its holder is not known.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from fabricate.job_keys import Job
from fabricate.mould import Mould
from fabricate.removal_features import filleted, marked
from fabricate.turning_setup import FLANK, Setup
from outputs.gcode_reader import Move, Replay
from profiles.arcpath import ArcPath, Array

FINE = 1e-4
COARSE = 1e-3
SLACK = 0.01
THICK = 1.5

Finding = tuple[str, str]


@dataclass(frozen=True)
class Removal:
    """What the replay of a program found.

    Parameters
    ----------
    findings : tuple of (str, str)
        A code and a sentence for each kind of fault; empty for a sound program.
    gouge_mm : float
        How deep the nose cuts into the finished mould at most [mm].
    left_mm : float
        How thick the stock still stands over the finished mould, where the program turns it [mm].
    """

    findings: tuple[Finding, ...]
    gouge_mm: float
    left_mm: float


@dataclass(frozen=True, eq=False)
class _Step:
    """A rapid, or a run of cuts, as points of the nose centre [mm]."""

    rapid: bool
    points: Array
    line: int


def replay_removal(replay: Replay, job: Job, mould: Mould) -> Removal:
    """Replay a program on its stock.

    Parameters
    ----------
    replay : Replay
        The program as its control reads it, in the job's units.
    job : Job
        The job, in its own units, with a ``[turning]`` table.
    mould : Mould
        Its mould [mm].

    Returns
    -------
    Removal
        Findings, gouge and what is left [mm].
    """
    import shapely

    setup = Setup.of(job, mould)
    steps = tuple(_steps(replay, setup))
    inserts = [_insert(setup, step.points) for step in steps]
    finished = marked(setup, shapely.Polygon(_section(setup)))
    left_over, findings = _cut(setup, steps, inserts)
    gouge, where = _gouge(setup, steps, inserts, finished)
    if gouge > setup.chord_error + COARSE:
        findings.append(("gouge", f"line {where}: the insert cuts {gouge:.4f} mm into the finished mould"))
    left, place = _left(setup, left_over, filleted(setup, finished))
    if left > setup.chord_error + SLACK:
        code = "nub" if place[0] < setup.nose else "left-standing"
        findings.append((code, f"{left:.4f} mm is left standing at radius {place[0]:.3f}, Z {place[1]:.3f} mm"))
    return Removal((*_out_of_bounds(setup, steps), *findings), gouge, left)


def _steps(replay: Replay, setup: Setup) -> Iterator[_Step]:
    """Yield rapids and runs of cuts in order."""
    run: list[Array] = []
    line = 0
    for move in replay.moves:
        points = _points(move, setup)
        if move.kind == "feed":
            line = line if run else move.line
            run.append(points[1:] if run else points)
            continue
        if run:
            yield _Step(rapid=False, points=np.vstack(run), line=line)
            run = []
        yield _Step(rapid=True, points=points, line=move.line)
    if run:
        yield _Step(rapid=False, points=np.vstack(run), line=line)


def _points(move: Move, setup: Setup) -> Array:
    """Return points of the nose centre along a move; where it comes from nowhere known, its end twice [mm]."""
    shift = np.array(setup.control_shift)
    ends: Array = setup.unit * np.array([move.end if move.start is None else move.start, move.end]) - shift
    if not move.bulge or (ends[0] == ends[1]).all():
        return ends
    return ArcPath(ends, np.array([move.bulge])).points(sagitta=FINE)


def _section(setup: Setup) -> Array:
    """Return points around the finished half section, closer to it than `FINE`."""
    mould, curve = setup.mould, setup.mould.curve
    bend = float(np.abs(curve.curvature(np.linspace(curve.start, curve.end, 201))).max())
    count = int(np.clip((curve.end - curve.start) * np.sqrt(bend / (8.0 * FINE)), 50, 4000))
    points = curve.points(np.linspace(curve.start, curve.end, count))
    forming = mould.to_lathe(ArcPath(points, np.zeros(count - 1))).vertices
    rest = mould.back if mould.rim is None else mould.rim.joined(mould.back)
    around = np.vstack([forming, rest.points(sagitta=FINE)])
    # On the axis the last digits may fall on its far side, which would make the outline cross itself.
    return np.column_stack([np.maximum(around[:, 0], 0.0), around[:, 1]])


def _cut(setup: Setup, steps: tuple[_Step, ...], inserts: list[Any]) -> tuple[Any, list[Finding]]:
    """Return what is left of the stock, and what its cutting found."""
    import shapely

    stock = shapely.box(0.0, setup.stock.back, setup.stock.radius, setup.stock.front)
    thick = 0.5 * THICK * max(setup.turning.depth_of_cut, setup.allowance) + SLACK
    corners = int(np.ceil(np.pi / 4.0 / np.sqrt(2.0 * COARSE / max(setup.nose, 4.0 * COARSE))))
    findings: dict[str, str] = {}
    for step, insert in zip(steps, inserts, strict=True):
        if step.rapid:
            gap = shapely.distance(insert, stock)
            if gap < setup.nose - SLACK:
                findings.setdefault(
                    "rapid-through-stock",
                    f"line {step.line}: a rapid drives the insert {setup.nose - gap:.3f} mm or more into stock that "
                    "still stands",
                )
            continue
        swept = _around(insert.buffer(setup.nose, quad_segs=corners))
        removed = stock.intersection(swept)
        stock = stock.difference(swept)
        if removed.area and not removed.buffer(-thick).is_empty:
            findings.setdefault(
                "heavy-cut",
                f"line {step.line}: a cut thicker than {2.0 * thick:.3f} mm, where depth_of_cut is "
                f"{setup.turning.depth_of_cut:g} mm",
            )
    return stock, list(findings.items())


def _around(swept: Any) -> Any:
    """Return what a sweep takes from turning stock: what passes the axis cuts on the other side as well."""
    import shapely

    if swept.bounds[0] >= 0.0:
        return swept
    return shapely.union(swept, shapely.transform(swept, lambda places: places * (-1.0, 1.0)))


def _insert(setup: Setup, points: Array) -> Any:
    """Return what the insert sweeps on a path, less the nose radius all around."""
    import shapely

    size = max(setup.turning.depth_of_cut, setup.allowance)
    side = 1.0 if setup.male else -1.0
    shape = size * np.array([(0.0, 0.0), (side, FLANK), (side, 1.0), (side * FLANK, 1.0)])
    corners = points[:, None, :] + shape
    strokes = shapely.convex_hull(shapely.multipoints(np.hstack([corners[:-1], corners[1:]])))
    return strokes[0] if len(strokes) == 1 else shapely.union_all(strokes)


def _gouge(setup: Setup, steps: tuple[_Step, ...], inserts: list[Any], finished: Any) -> tuple[float, int]:
    """Return how deep the insert cuts into the finished section, and on which line the run begins that does."""
    import shapely

    gaps = shapely.distance(inserts, finished)
    worst = int(np.argmin(gaps))
    return max(0.0, setup.nose - float(gaps[worst])), steps[worst].line


def _left(setup: Setup, stock: Any, finished: Any) -> tuple[float, tuple[float, float]]:
    """Return how thick stock stands over the finished section, where the program turns it, and where."""
    import shapely

    mould, top = setup.mould, setup.stock.front + 1.0
    # Nose and flank leave a hollow at the foot of the turned outside.
    foot = setup.nose + FLANK * max(setup.turning.depth_of_cut, setup.allowance)
    low = setup.reach + foot if setup.male else mould.base
    wide = setup.stock.radius + 1.0 if setup.male else mould.outer_radius
    over = stock.intersection(shapely.box(mould.bore_radius, low, wide, top)).difference(finished)
    places = shapely.get_coordinates(over)
    if not len(places):
        return 0.0, (0.0, 0.0)
    thick = shapely.distance(shapely.points(places), finished)
    worst = int(np.argmax(thick))
    return float(thick[worst]), (float(places[worst, 0]), float(places[worst, 1]))


def _out_of_bounds(setup: Setup, steps: tuple[_Step, ...]) -> Iterator[Finding]:
    """Yield a finding where the nose centre passes the axis, and where the nose goes lower than the stock is free."""
    tolerance = setup.chord_error + SLACK
    for step in steps:
        if float(step.points[:, 0].min()) < -tolerance:
            yield (
                "past-axis",
                f"line {step.line}: the nose centre passes the axis, where the work climbs under the flank",
            )
            break
    for step in steps:
        if setup.male and float(step.points[:, 1].min()) - setup.nose < setup.reach - tolerance:
            yield (
                "too-deep",
                f"line {step.line}: the nose goes below Z {setup.reach:.3f} mm, where nothing is to be turned",
            )
            break
