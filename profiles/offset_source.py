"""The curve of which a given curve is the offset, where the distance depends on the very curve that is sought.

A sheet's thickness follows from the shape that it takes, and only the face that lies on a mould is known: the other
face is the curve from which the known one is as far away as the sheet is thick there. A guess of the distance over the
known curve gives a curve, and that curve a distance: they are brought together.

References
----------
D. G. Anderson, "Iterative procedures for nonlinear integral equations", J. ACM 12 (1965) 547-560 (from memory): the
next guess from all the last ones.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.polynomial.chebyshev import Chebyshev
from numpy.typing import NDArray

from profiles.errors import GeometryError
from profiles.meridian import Meridian
from profiles.series import Series, interpolate, merged_breaks, resolve

Array = NDArray[np.float64]
Distance = Callable[[Meridian], Series]

MOST_COEFFICIENTS = 49
RESOLVED = 1e-13
"""Coefficients of the first guess below this part of its size are left out, and of every later one as many."""
ROUNDS = 30
REMEMBERED = 8
SETTLED = 1e-17
STEPS_WITHOUT_GAIN = 3
NEAR_ENOUGH = 1e-8
SAME_PLACE = 5e-3
"""A break of the curve and one of the distance that are as near as this part of its length are one material point."""
BEYOND = 0.02
"""How much further than the known curve, as a part of its length, kinks of the distance are looked for."""
AT_THE_END = 1e-4
"""A kink of the distance as near to an end of the curve as this part of its length is left to that end."""


def offset_source(curve: Meridian, distance_of: Distance) -> Meridian:
    """Return the curve whose offset is a given one.

    Parameters
    ----------
    curve : Meridian
        The offset, from its start outwards [mm].
    distance_of : callable
        From a curve to the distance of its offset over its arc length, to the left positive [mm].

    Returns
    -------
    Meridian
        The curve ``c`` for which ``c.offset(distance_of(c))`` is the given one [mm].

    Raises
    ------
    GeometryError
        If the search does not settle, or a curve on its way folds.

    Notes
    -----
    Found by trial for sheets up to a hundredth of the curve's length: within 1e-11 of that length where the distance
    follows from the shape, 1e-10 where it is a table. A distance that follows from the slope leaves a boundary layer,
    as thick as the distance and at the outer end, all but undetermined: a sheet thicker than that gains up to 1e-8 of
    the length there.
    """
    guess = _Guess.first(curve, distance_of)
    best, nearest, past, waited = np.inf, curve, _Past((), ()), 0
    for _ in range(ROUNDS):
        source, run = curve.offset_back(guess.distance)
        gaps = guess.gaps(run, distance_of(source))
        worst = float(np.abs(gaps).max())
        waited += 1
        if worst < best:
            best, nearest, waited = worst, source, 0
        if worst < SETTLED * curve.end or waited == STEPS_WITHOUT_GAIN:
            break
        past = past.with_one(guess.coefficients, gaps)
        guess = guess.moved(past.proposal(), run)
    if not best < NEAR_ENOUGH * curve.end:
        raise GeometryError(
            f"the curve under an offset is found to {best:.3g} mm only; allowed: {NEAR_ENOUGH * curve.end:.3g} mm; do: "
            "use a thinner sheet, or state its thickness by a gentler table"
        )
    return nearest


@dataclass(frozen=True, eq=False)
class _Past:
    """Guesses and what each of them lacked, the last one last."""

    guesses: tuple[Array, ...]
    gaps: tuple[Array, ...]

    def with_one(self, guess: Array, gap: Array) -> _Past:
        return _Past((*self.guesses, guess)[-REMEMBERED:], (*self.gaps, gap)[-REMEMBERED:])

    def proposal(self) -> Array:
        """Return the guess whose gap would be the least, were gaps linear in the guesses, corrected by that gap."""
        guess, gap = self.guesses[-1], self.gaps[-1]
        if len(self.gaps) == 1:
            return guess + gap
        turns = np.diff(np.stack(self.gaps, axis=1), axis=1)
        steps = np.diff(np.stack(self.guesses, axis=1), axis=1)
        share = np.linalg.lstsq(turns, gap, rcond=1e-12)[0]
        return np.asarray(guess + gap - (steps + turns) @ share)


@dataclass(frozen=True)
class _Joint:
    """A material point at which the distance may have a kink: its arc length on the known and on the sought curve.

    Where the known curve has no break there, the place on it follows from the one on the sought curve; where the
    distance has none, ``there`` is None.
    """

    here: float
    there: float | None
    fixed: bool


@dataclass(frozen=True, eq=False)
class _Guess:
    """A distance between the two curves over the arc length of the known one: coefficients from joint to joint."""

    joints: tuple[_Joint, ...]
    coefficients: Array
    counts: tuple[int, ...]

    @classmethod
    def first(cls, curve: Meridian, distance_of: Distance) -> _Guess:
        """Return the distance as if the known curve were the sought one."""
        distance = distance_of(curve)
        # The sought curve may be the longer one, and have kinks that lie beyond the known one's end.
        longer = curve.scaled(1.0 + BEYOND)
        stated = distance_of(longer)
        kinks = _own_breaks(stated, longer)
        distance = stated if len(kinks) else distance
        run = _rough_run(curve, distance)
        joints = _joints(curve, run, kinks)
        if not len(kinks):
            # It follows the shape, and its breaks are where the known curve has them.
            run = Series((Chebyshev.identity(domain=[curve.start, curve.end]),))
        many = (MOST_COEFFICIENTS,) * (len(joints) - 1)
        whole = cls(joints, np.zeros(sum(many)), many)
        rows = whole.stretched(whole.gaps(run, distance))
        kept = [row[: _needed(row, RESOLVED * distance.size)] for row in rows]
        return cls(joints, np.concatenate(kept), tuple(len(row) for row in kept))

    @property
    def stretches(self) -> list[tuple[float, float]]:
        """Ends of each stretch on the known curve."""
        return list(pairwise(joint.here for joint in self.joints))

    @property
    def distance(self) -> Series:
        """The guess as a function."""
        rows = self.stretched(self.coefficients)
        return Series(tuple(Chebyshev(row, domain=ends) for row, ends in zip(rows, self.stretches, strict=True)))

    def stretched(self, coefficients: Array) -> list[Array]:
        """Return coefficients by stretch."""
        return np.split(coefficients, np.cumsum(self.counts)[:-1])

    def gaps(self, run: Series, distance: Series) -> Array:
        """Return the distance that the guess leads to less the guess, as coefficients."""
        rows = []
        for number, (ends, count) in enumerate(zip(self.stretches, self.counts, strict=True)):
            # Beyond a kink the stretch on either side goes on smoothly, until the two places of the kink agree.
            low = [joint.there for joint in self.joints[: number + 1] if joint.there is not None][-1]
            high = next(joint.there for joint in self.joints[number + 1 :] if joint.there is not None)
            rows.append(_coefficients(_between(distance, low, high), run, ends, count))
        return np.concatenate(rows) - self.coefficients

    def moved(self, coefficients: Array, run: Series) -> _Guess:
        """Return another guess, its free joints where the last try has them."""
        least = 0.01 * AT_THE_END * (run.end - run.start)
        joints = tuple(
            joint
            if joint.fixed or joint.there is None
            else _Joint(
                float(np.clip(run.solve(joint.there), run.start + least, run.end - least)), joint.there, fixed=False
            )
            for joint in self.joints
        )
        return _Guess(joints, coefficients, self.counts)


def _rough_run(curve: Meridian, distance: Series) -> Series:
    """Return the sought curve's arc length over the known one's, were the distance the same everywhere around."""
    breaks = merged_breaks(curve.breaks, distance.breaks, start=curve.start, end=curve.end)
    (rate,) = resolve(lambda where: (1.0 + curve.curvature(where) * distance(where))[None], breaks, sizes=[1.0])
    return rate.integral(value=curve.start)


def _needed(row: Array, noise: float) -> int:
    """Return how many coefficients a stretch needs, the small ones at its end left out."""
    return int(np.flatnonzero(np.abs(row) > noise).max(initial=0)) + 1


def _coefficients(distance: Series, run: Series, ends: tuple[float, float], count: int) -> Array:
    """Return a distance that is known over the sought curve as coefficients over a stretch of the known one."""
    return np.asarray(interpolate(lambda where: distance(run(where))[None], *ends, count - 1)[0])


def _joints(curve: Meridian, run: Series, kinks: Array) -> tuple[_Joint, ...]:
    """Return breaks of the known curve, kinks of the distance, and those that are one material point."""
    near, least = SAME_PLACE * (curve.end - curve.start), AT_THE_END * (curve.end - curve.start)
    inner = curve.breaks[1:-1]
    images = run(inner)
    joints = []
    left = set(kinks[(kinks > run(curve.start) + least) & (kinks < run(curve.end) - least)].tolist())
    for here, image in zip(inner.tolist(), images.tolist(), strict=True):
        kink = min(left, key=lambda place: abs(place - image), default=np.inf)
        paired = abs(kink - image) < near and abs(kink - image) <= np.abs(images - kink).min()
        joints.append(_Joint(here, kink if paired else None, fixed=True))
        left -= {kink} if paired else set()
    joints += [_Joint(float(run.solve(kink)), kink, fixed=False) for kink in left]
    first = _Joint(curve.start, -np.inf, fixed=True)
    last = _Joint(curve.end, np.inf, fixed=True)
    return (first, *sorted(joints, key=lambda joint: joint.here), last)


def _own_breaks(distance: Series, curve: Meridian) -> Array:
    """Return the breaks that a distance has of its own, beside those of the curve that it was asked for."""
    near = 1e-9 * (curve.end - curve.start)
    return np.array([place for place in distance.breaks[1:-1] if np.abs(curve.breaks - place).min() > near])


def _between(series: Series, start: float, end: float) -> Series:
    """Return a series' pieces between two places."""
    least = 1e-9 * (series.end - series.start)
    pieces = tuple(p for p in series.pieces if p.domain[1] > start + least and p.domain[0] < end - least)
    if not pieces:
        raise GeometryError(
            "the thickness changes too suddenly somewhere on the curve; allowed: a smooth run between the rows of a "
            "table; do: state it by a gentler table"
        )
    return Series(pieces)
