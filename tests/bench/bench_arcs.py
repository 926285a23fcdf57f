"""Print how many arcs a curve needs, beside the limit, touching biarcs and chords. Run as a script; a minute or two.

``python tests/bench/bench_arcs.py``
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from fabricate.chain import rim_arc_length
from profiles.arcpath import ArcPath
from profiles.arcs import arc_limit, fewest_arcs
from profiles.chords import balanced_chords
from profiles.deviation import deviation
from profiles.face import Face
from profiles.meridian import Meridian

RIM = 200.0
RATIOS = (0.2, 0.25, 0.3, 0.4, 0.6, 1.0, 1.5)
OFFSETS = (1.5, -1.5)
TOLERANCES = (0.05, 0.01, 0.001, 0.0001)
BIARCS_TO_OPTIMUM = (72.0 * np.sqrt(3.0) / 40.5) ** (1.0 / 3.0)


def _curve(ratio: float, offset: float) -> Meridian:
    face = Face(2.0 * RIM * ratio)
    return Meridian.of_face(face, rim_arc_length(face, RIM)).offset(offset)


def _biarc(curve: Meridian, start: float, end: float) -> tuple[NDArray[np.float64], list[float]]:
    """Return the middle vertex and the two bulges of a biarc of equal tangent lengths that touches at both ends."""
    first, last = curve.points(np.array([start, end]))
    out, into = curve.tangents(np.array([start, end]))
    gap = last - first
    both = out + into
    # Equal tangent lengths d: |gap − d (out + in)| = 2 d, a quadratic in d.
    square, linear, rest = both @ both - 4.0, -2.0 * (gap @ both), gap @ gap
    reach = (-linear - np.sqrt(linear**2 - 4.0 * square * rest)) / (2.0 * square)
    reach = reach if reach > 0.0 else (-linear + np.sqrt(linear**2 - 4.0 * square * rest)) / (2.0 * square)
    middle = 0.5 * (first + last + reach * (out - into))

    def bulge(along: NDArray[np.float64], chord: NDArray[np.float64]) -> float:
        return float(np.tan(0.5 * np.arctan2(along[0] * chord[1] - along[1] * chord[0], along @ chord)))

    return middle, [bulge(out, middle - first), -bulge(-into, middle - last)]


def _biarcs(curve: Meridian, count: int) -> ArcPath:
    where = np.linspace(curve.start, curve.end, 2001)
    density = np.cbrt(np.abs(curve.curvature.derivative()(where)))
    running = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]))])
    joints = np.interp(np.linspace(0.0, running[-1], count + 1), running, where)
    vertices, bulges = [curve.points(joints[0])], []
    for start, end in pairwise(joints.tolist()):
        middle, two = _biarc(curve, start, end)
        vertices += [middle, curve.points(np.array(end))]
        bulges += two
    return ArcPath(np.array(vertices), np.array(bulges))


def _fewest_biarcs(curve: Meridian, tolerance: float) -> int:
    """Return the number of arcs, two a biarc."""
    count = max(1, int(BIARCS_TO_OPTIMUM * arc_limit(curve, tolerance) / 2.0) - 1)
    while deviation(curve, _biarcs(curve, count)).normal > tolerance:
        count += 1
    return 2 * count


def main() -> None:
    """Print the table."""
    print(f"{'f/D':>5}{'offset':>8}{'chord error':>13}{'limit N*':>10}{'arcs':>6}{'biarcs':>8}{'chords':>8}  arcs/N*")
    worst = 0.0
    for ratio in RATIOS:
        for offset in OFFSETS:
            curve = _curve(ratio, offset)
            for tolerance in TOLERANCES:
                fit = fewest_arcs(curve, distance=tolerance)
                biarcs, chords = _fewest_biarcs(curve, tolerance), len(balanced_chords(curve, distance=tolerance))
                over = len(fit.path) - int(np.ceil(fit.limit + 0.3))
                worst = max(worst, over)
                print(
                    f"{ratio:>5}{offset:>8}{tolerance:>13}{fit.limit:>10.2f}{len(fit.path):>6}{biarcs:>8}{chords:>8}"
                    f"{len(fit.path) / fit.limit:>9.3f}"
                )
    print(f"most arcs over the limit ceil(N* + 0.3): {worst:.0f}")


if __name__ == "__main__":
    main()
