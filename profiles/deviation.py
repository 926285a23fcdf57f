"""How far a path of lines and arcs strays from an exact curve, and how much it leans: found, not sampled.

Over one line or arc the signed normal distance is a smooth function of the curve's arc length. It is held as a
Chebyshev series, whose extremes are roots of a polynomial. Each stretch answers for the part of the curve between
its two end normals, so that every point of the curve has its foot on the stretch it is measured against and, the
other way round, every point of the path is the foot of some point of the curve: one figure bounds both ways.

Where a path is so far off that its normals no longer sort the curve, the bound falls back on the distance being
1-Lipschitz: the largest sampled distance plus half the spacing of the samples, both ways.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.meridian import Meridian
from profiles.series import critical_places, transform

Array = NDArray[np.float64]

SAMPLES = 4000
WIDEST_TURN = 2.5


@dataclass(frozen=True)
class Deviation:
    """The largest departure of a path from a curve.

    Parameters
    ----------
    normal : float
        Largest distance between the two, along the normal [mm]; never less than any sampling finds.
    at_radius : float
        Radius at which it is reached [mm].
    slope : float
        Largest angle between path and curve [rad].
    slope_at_radius : float
        Radius at which that is reached [mm].
    """

    normal: float
    at_radius: float
    slope: float
    slope_at_radius: float


@dataclass(frozen=True)
class _Fans:
    """Arc lengths between which each stretch answers for the curve, and where the joints' nearest points are."""

    lower: Array
    upper: Array
    joints: Array


def deviation(curve: Meridian, path: ArcPath) -> Deviation:
    """Return the largest departure of a path from a curve, and of the curve from the path, ends included.

    Parameters
    ----------
    curve : Meridian
        The exact curve, its radius and height in the path's own plane [mm].
    path : ArcPath
        Lines and arcs that run the same way.

    Returns
    -------
    Deviation
        Bounds to about 1e-12 of the curve's size [mm, rad].

    Examples
    --------
    The sagitta of a chord of a circle, ``R (1 − cos(θ/2))``:

    >>> from profiles.series import constant
    >>> circle = Meridian.of_curvature(constant(0.01, 0.0, 50.0))
    >>> chord = ArcPath(circle.points(np.array([0.0, 50.0])), np.zeros(1))
    >>> round(deviation(circle, chord).normal, 9), round(100 * (1 - float(np.cos(0.25))), 9)
    (3.108757829, 3.108757829)
    """
    fans = _fans(curve, path)
    if fans is None:
        return _lipschitz(curve, path)
    found = _Largest()
    stretches = _stretches(curve, fans)
    for degree in np.unique(stretches.degrees).tolist():
        _search(curve, path, stretches, degree, found)
    _search_joints(curve, path, fans, found)
    return Deviation(
        found.normal,
        float(curve.radius(found.normal_where)),
        found.slope,
        float(curve.radius(found.slope_where)),
    )


class _Largest:
    """The largest values so far and where they were met."""

    def __init__(self) -> None:
        self.normal, self.normal_where = 0.0, 0.0
        self.slope, self.slope_where = 0.0, 0.0

    def meet_normal(self, where: Array, values: Array) -> None:
        index = int(np.argmax(np.abs(values)))
        largest = float(np.abs(values).flat[index])
        if largest >= self.normal:
            self.normal, self.normal_where = largest, float(where.flat[index])

    def meet_slope(self, where: Array, values: Array) -> None:
        index = int(np.argmax(np.abs(values)))
        largest = float(np.abs(values).flat[index])
        if largest >= self.slope:
            self.slope, self.slope_where = largest, float(where.flat[index])


def gaps(curve: Meridian, path: ArcPath, numbers: NDArray[np.int_], where: Array) -> Array:
    """Return the signed distances and leans between points of a curve and stretches of a path.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    path : ArcPath
        The path.
    numbers : ndarray of shape (k,)
        Stretches of the path.
    where : ndarray of shape (k, n)
        Arc lengths of the curve's points beside each stretch [mm].

    Returns
    -------
    ndarray of shape (2, k, n)
        How far the curve lies to the left of the stretch [mm], and how much it is turned to the left of it [rad].
    """
    tangent = path.tangents[0][numbers]
    left = np.stack([-tangent[:, 1], tangent[:, 0]], axis=-1)[:, None, :]
    bend = path.curvatures[numbers][:, None]
    reach = curve.points(where) - path.vertices[numbers][:, None, :]
    rise = (reach * left).sum(axis=-1)
    square = (reach**2).sum(axis=-1)
    root = np.sqrt(np.maximum(1.0 - 2.0 * bend * rise + bend**2 * square, 0.0))
    # Distance to the circle without dividing by its curvature, so that a line is no special case.
    distance = (2.0 * rise - bend * square) / (1.0 + root)
    outward = (left - bend[..., None] * reach) / np.maximum(root, 1e-300)[..., None]
    lean = np.arcsin(np.clip((curve.tangents(where) * outward).sum(axis=-1), -1.0, 1.0))
    return np.stack([distance, lean])


@dataclass(frozen=True, eq=False)
class _Stretches:
    """Which stretch of the path answers for which interval of the curve, and the degree that resolves it there."""

    numbers: NDArray[np.int_]
    starts: Array
    ends: Array
    degrees: NDArray[np.int_]


def _stretches(curve: Meridian, fans: _Fans) -> _Stretches:
    """Return the intervals of all stretches, parted where the curve is not smooth; shorter ones need less degree."""
    edges = [_edges(curve, low, high) for low, high in zip(fans.lower, fans.upper, strict=True)]
    numbers = np.repeat(np.arange(len(edges)), [len(row) - 1 for row in edges])
    starts, ends = np.concatenate([row[:-1] for row in edges]), np.concatenate([row[1:] for row in edges])
    share = (ends - starts) / (curve.end - curve.start)
    long = share > 1e-12
    degrees = np.where(share < 0.15, 12, np.where(share < 0.4, 24, 48))
    return _Stretches(numbers[long], starts[long], ends[long], degrees[long])


def _search(curve: Meridian, path: ArcPath, stretches: _Stretches, degree: int, found: _Largest) -> None:
    """Meet the extremes of distance and lean on the stretches that one degree resolves."""
    chosen = stretches.degrees == degree
    numbers, starts, ends = stretches.numbers[chosen], stretches.starts[chosen], stretches.ends[chosen]
    nodes, matrix = transform(degree)
    where = 0.5 * (starts + ends)[:, None] + 0.5 * (ends - starts)[:, None] * nodes
    coefficients = gaps(curve, path, numbers, where) @ matrix
    for row, meet in ((0, found.meet_normal), (1, found.meet_slope)):
        places = critical_places(coefficients[row], starts, ends)
        meet(places, gaps(curve, path, numbers, places)[row])


def _search_joints(curve: Meridian, path: ArcPath, fans: _Fans, found: _Largest) -> None:
    """Take the vertices themselves, the curve's ends, and what lies between the normals of two stretches."""
    where = np.concatenate([[curve.start], fans.joints[1:-1], [curve.end]])
    found.meet_normal(where, np.hypot(*(curve.points(where) - path.vertices).T))
    for edge, vertices in ((fans.lower, path.vertices[:-1]), (fans.upper, path.vertices[1:])):
        found.meet_normal(edge, np.hypot(*(curve.points(edge) - vertices).T))


def _edges(curve: Meridian, lower: float, upper: float) -> Array:
    inner = curve.breaks[(curve.breaks > lower) & (curve.breaks < upper)]
    return np.array([lower, *inner, upper])


def _fans(curve: Meridian, path: ArcPath) -> _Fans | None:
    """Return what part of the curve each stretch answers for, or None where the path is too far off to say."""
    joints = curve.nearest(path.vertices)
    if (np.diff(joints) <= 0.0).any() or (np.abs(path.turns) > WIDEST_TURN).any():
        return None
    starts, ends = path.tangents
    along = curve.tangents(joints)
    if ((along[:-1] * starts).sum(axis=1) < 0.9).any() or ((along[1:] * ends).sum(axis=1) < 0.9).any():
        return None
    lower = _meet_normal(curve, path.vertices[:-1], starts, joints[:-1])
    upper = _meet_normal(curve, path.vertices[1:], ends, joints[1:])
    if (lower >= upper).any():
        return None
    return _Fans(lower, upper, joints)


def _meet_normal(curve: Meridian, vertices: Array, tangents: Array, where: Array) -> Array:
    """Return where the curve crosses the normals of a path at given vertices, by Newton's method."""
    for _ in range(6):
        gap = ((curve.points(where) - vertices) * tangents).sum(axis=1)
        where = np.clip(where - gap / (curve.tangents(where) * tangents).sum(axis=1), curve.start, curve.end)
    return where


def _lipschitz(curve: Meridian, path: ArcPath) -> Deviation:
    """Bound the distance both ways by samples and half their spacing; the lean by the coarsest comparison."""
    where = np.linspace(curve.start, curve.end, SAMPLES)
    on_curve = curve.points(where)
    count = SAMPLES + 2 * len(path)
    on_path = _spread(path, count)
    there = _distances(on_curve, on_path)
    back = _distances(on_path, on_curve)
    spacing = (curve.end - curve.start) / (SAMPLES - 1) + float(path.lengths.sum()) / (count - len(path) - 1)
    worst = int(np.argmax(there))
    return Deviation(
        max(float(there.max()), float(back.max())) + spacing, float(curve.radius(where[worst])), np.pi, 0.0
    )


def _spread(path: ArcPath, count: int) -> Array:
    """Return about ``count`` points along a path, no two neighbours farther apart than its mean spacing."""
    lengths = path.lengths
    spacing = lengths.sum() / (count - len(path) - 1)
    pieces = [path.vertices[:1]]
    for number, length in enumerate(lengths):
        steps = max(1, int(np.ceil(length / spacing)))
        pieces.append(path.along(number, np.arange(1, steps + 1) / steps))
    return np.vstack(pieces)


def _distances(points: Array, others: Array) -> Array:
    """Return each point's distance to the nearest of the others."""
    from scipy.spatial import cKDTree

    return np.asarray(cKDTree(others).query(points)[0])
