"""How fast the stock may turn: until it runs true, once it does, at its rim, and at the cut.

``n = 1000 v / (2 π r)`` with the cutting speed v in m/min, the radius r in mm and n in rev/min. Near the axis that
grows without end, so a limit holds it. Where a control cannot hold the cutting speed itself, the speed goes in steps:
the limit over powers of `STEP`, changed at the radii where each step would cut too fast.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

import numpy as np

from fabricate.contour import RADIUS, split_at
from fabricate.job_keys import Job
from fabricate.turning_setup import Setup
from outputs.gcode import Block, Feed, Rapid, SpindleSpeed
from profiles.arcpath import ArcPath
from profiles.errors import JobError

STEP = 1.15
SLOWEST = 2.0
_FOOT = 0.3048


@dataclass(frozen=True)
class Limits:
    """What the spindle of one job may do.

    Parameters
    ----------
    untrued, trued : float
        Highest speed until the stock runs true, and from then on [rev/min].
    surface_speed : float
        Cutting speed [m/min].
    note : str
        What lowered the limits, or nothing.
    """

    untrued: float
    trued: float
    surface_speed: float
    note: str = ""


def rim_speed(radius: float, rpm: float) -> float:
    """Return the speed of a rim, ``v = 2 π r n``.

    Parameters
    ----------
    radius : float
        Radius of the rim [mm].
    rpm : float
        Spindle speed [rev/min].

    Returns
    -------
    float
        Speed [m/s].

    Examples
    --------
    >>> round(rim_speed(600.0, 400.0), 1)
    25.1
    """
    return 2e-3 * math.pi * radius * rpm / 60.0


def spindle_speed(radius: float, surface_speed: float) -> float:
    """Return the spindle speed that cuts at a given speed, ``n = 1000 v / (2 π r)``.

    Parameters
    ----------
    radius : float
        Radius of the cut [mm].
    surface_speed : float
        Cutting speed [m/min].

    Returns
    -------
    float
        Spindle speed [rev/min].

    Examples
    --------
    >>> round(spindle_speed(2.0, 200.0))
    15915
    """
    return 1e3 * surface_speed / (2.0 * math.pi * radius)


def limits_of(job: Job, setup: Setup) -> Limits:
    """Return the limits of the spindle, those of a metal mould lowered to its rim-speed limit.

    Parameters
    ----------
    job : Job
        The job, in its own units.
    setup : Setup
        Stock and mould.

    Returns
    -------
    Limits
        Speeds [rev/min, m/min].

    Raises
    ------
    JobError
        If stock that can fly apart would turn with a rim faster than its limit, or the cutting speed is too slow for
        the stock.
    """
    turning, radius = setup.turning, setup.stock.radius
    _check_slowest(job, setup)
    allowed = turning.rim_speed_limit
    if not allowed or rim_speed(radius, turning.spindle_limit) <= allowed:
        return Limits(turning.spindle_limit_untrued, turning.spindle_limit, turning.surface_speed)
    highest = turning.spindle_limit * allowed / rim_speed(radius, turning.spindle_limit)
    row = job.mould.row
    if row is None or row.rim_speed_limit_required:
        raise JobError(_too_fast(job, setup, highest))
    note = (
        f"spindle_limit {turning.spindle_limit:g} lowered to {math.floor(highest)} rev/min: "
        f"the stock's rim may run at {_rim_text(job, allowed)}"
    )
    return Limits(min(turning.spindle_limit_untrued, highest), highest, turning.surface_speed, note)


def stepped(blocks: Iterable[Block], setup: Setup, limits: Limits, limit: float) -> Iterator[Block]:
    """Yield the same moves with a spindle speed before each cut that asks for another one.

    Parameters
    ----------
    blocks : iterable of Block
        Moves of the nose centre [mm].
    setup : Setup
        Insert and mould.
    limits : Limits
        The cutting speed [m/min].
    limit : float
        Highest speed for these moves [rev/min].

    Yields
    ------
    Block
        Cuts broken where the speed changes; no point of the nose cuts faster than the cutting speed.
    """
    first = spindle_speed(1.0, limits.surface_speed) / limit
    # A female mould's insert touches the work on its far side from the axis.
    wider = 0.0 if setup.male else setup.nose
    place, rung = (0.0, 0.0), -1
    for block in blocks:
        if not isinstance(block, Feed):
            place = (block.radius, block.height) if isinstance(block, Rapid) else place
            yield block
            continue
        for piece in _pieces(place, block, first, wider):
            wanted = _rung(max(place[0], piece.radius) + wider, first)
            if wanted != rung:
                rung = wanted
                yield SpindleSpeed(limit / STEP**rung)
            yield piece
            place = (piece.radius, piece.height)


def _rung(radius: float, first: float) -> int:
    """Return how many steps under the limit a cut at a radius must run; ``first`` is the widest radius for none."""
    return 0 if radius <= first else math.ceil(math.log(radius / first) / math.log(STEP) - 1e-9)


def _pieces(start: tuple[float, float], cut: Feed, first: float, wider: float) -> Iterator[Feed]:
    """Yield a cut in parts that end at the radii where the speed steps."""
    low, high = sorted((start[0] + wider, cut.radius + wider))
    rungs = range(_rung(low, first), _rung(high, first))
    radii = [radius for rung in rungs if low < (radius := first * STEP**rung) - 1e-6 and radius < high - 1e-6]
    if not radii:
        yield cut
        return
    path = ArcPath(np.array([start, (cut.radius, cut.height)]), np.array([cut.bulge]))
    fractions = sorted(split_at(path, 0, RADIUS, radius - wider) for radius in radii)
    done = 0.0
    for fraction, point in zip([*fractions, 1.0], path.along(0, np.array([*fractions, 1.0])).tolist(), strict=True):
        yield Feed(point[0], point[1], math.tan((fraction - done) * math.atan(cut.bulge)), cut.feed)
        done = fraction


def _check_slowest(job: Job, setup: Setup) -> None:
    """Refuse a cutting speed at which the stock would hardly turn."""
    slowest = spindle_speed(setup.stock.radius, setup.turning.surface_speed)
    if slowest >= SLOWEST:
        return
    least = setup.turning.surface_speed * SLOWEST / slowest
    unit, foot = ("ft/min", _FOOT) if job.units == "inch" else ("m/min", 1.0)
    raise JobError(
        f"turning.surface_speed: value is {setup.turning.surface_speed / foot:g} {unit}, which turns stock of diameter "
        f"{setup.text(2.0 * setup.stock.radius)} {setup.units} "
        f"at {slowest:.2g} rev/min; allowed: at least {least / foot:.3g} {unit}; "
        "do: raise it"
    )


def _rim_text(job: Job, speed: float) -> str:
    return f"{speed / _FOOT:.4g} ft/s" if job.units == "inch" else f"{speed:.4g} m/s"


def _too_fast(job: Job, setup: Setup, highest: float) -> str:
    turning, radius = setup.turning, setup.stock.radius
    material = f'"{job.mould.material}"' if job.mould.material else "unnamed material"
    return (
        f"turning.spindle_limit: value is {turning.spindle_limit:g} rev/min, at which the rim of the stock, of "
        f"{material} and {setup.text(2.0 * radius)} {setup.units} in diameter, runs at "
        f"{_rim_text(job, rim_speed(radius, turning.spindle_limit))}; allowed: at most {math.floor(highest)} rev/min, "
        f"for turning.rim_speed_limit = {_rim_text(job, turning.rim_speed_limit)}; do: lower spindle_limit"
    )
