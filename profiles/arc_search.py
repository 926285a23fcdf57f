"""The search for the best tangent arcs: joints, their normal offsets and directions, by rounds of linear programs.

``θ_(i+1) = 2 χ_i − θ_i`` ties the direction at each joint to the chords before it. Every round linearises the distance
of samples of the curve from their arcs, exactly (by dual numbers), and lowers the largest within a trusted range.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.meridian import Meridian

Array = NDArray[np.float64]
Dual = NDArray[np.complex128]

ROUNDS = 6
FRACTIONS = 0.5 - 0.5 * np.cos(np.pi * np.arange(21) / 20)
TINY = 1e-30


@dataclass(frozen=True)
class Aim:
    """What is lowered: the distance, and with it the lean where one is asked for.

    Parameters
    ----------
    distance : float
        Largest distance wanted [mm].
    slope : float
        Largest lean wanted [rad]; 0: none is asked for.
    """

    distance: float
    slope: float

    @property
    def weight(self) -> float:
        """Distance that a lean of one radian counts for [mm]."""
        return self.distance / self.slope if self.slope > 0.0 else 0.0

    def density(self, change: Array) -> Array:
        """Return how many arcs a millimetre of curve needs where κ changes so fast [1/mm]."""
        by_distance = np.cbrt(change / (72.0 * np.sqrt(3.0) * self.distance))
        if self.slope <= 0.0:
            return np.asarray(by_distance)
        return np.asarray(np.maximum(by_distance, np.sqrt(change / (12.0 * self.slope))))


def arc_density(curve: Meridian, aim: Aim) -> tuple[Array, Array]:
    """Return how many arcs a curve needs up to a place.

    Parameters
    ----------
    curve : Meridian
        The exact curve [mm].
    aim : Aim
        What is asked of the arcs.

    Returns
    -------
    where : ndarray of shape (n,)
        Arc lengths [mm].
    running : ndarray of shape (n,)
        Number of arcs from the start to there [-].
    """
    where = np.linspace(curve.start, curve.end, 2001)
    density = aim.density(np.abs(curve.curvature.derivative()(where)))
    running = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]) * np.diff(where))])
    return where, running


def _first_joints(curve: Meridian, count: int, aim: Aim) -> Array:
    where, running = arc_density(curve, aim)
    # A trace of even spacing keeps joints apart where the curvature does not change at all.
    steady = (where - where[0]) / (where[-1] - where[0])
    spread = running / running[-1] + 0.02 * steady if running[-1] > 0.0 else steady
    return np.interp(np.linspace(0.0, spread[-1], count + 1), spread, where)


@dataclass(frozen=True, eq=False)
class _State:
    """Joints by arc length, their normal offsets, and the direction in which the path starts."""

    joints: Array
    offsets: Array
    lean: float

    def vertices(self, curve: Meridian) -> Array:
        return curve.points(self.joints) + self.offsets[:, None] * curve.normals(self.joints)


def _tangents(curve: Meridian, state: _State) -> Array:
    """Return the path's directions at its joints (``θ_(i+1) = 2 χ_i − θ_i``), unit vectors (n + 1, 2)."""
    chords = np.diff(state.vertices(curve), axis=0)
    angles = np.empty(len(state.joints))
    angles[0] = float(curve.slope(curve.start)) + state.lean
    for number, chord in enumerate(np.arctan2(chords[:, 1], chords[:, 0])):
        angles[number + 1] = 2.0 * chord - angles[number]
    return np.column_stack([np.cos(angles), np.sin(angles)])


def _path(curve: Meridian, state: _State) -> ArcPath:
    vertices = state.vertices(curve)
    if curve.on_axis:
        vertices[0, 0] = 0.0
    chords = np.diff(vertices, axis=0)
    starts = _tangents(curve, state)[:-1]
    cross = starts[:, 0] * chords[:, 1] - starts[:, 1] * chords[:, 0]
    half_turns = np.arctan2(cross, (starts * chords).sum(axis=1))
    return ArcPath(vertices, np.tan(0.5 * half_turns))


def best_path(curve: Meridian, count: int, aim: Aim) -> ArcPath:
    """Return the path of so many tangent arcs that departs least from a curve.

    Parameters
    ----------
    curve : Meridian
        The exact curve [mm].
    count : int
        Number of arcs, at least 1.
    aim : Aim
        What is lowered.

    Returns
    -------
    ArcPath
        Arcs with continuous tangents, level on the axis [mm].
    """
    state = _State(_first_joints(curve, count, aim), np.zeros(count + 1), 0.0)
    best, least, trust = state, np.inf, 0.3
    for _ in range(ROUNDS):
        gaps, by_place, by_turn = _linearised(curve, state, aim.weight)
        largest = float(np.abs(gaps).max())
        if largest > least:
            trust *= 0.3
        elif largest > 0.999 * least:
            best = state
            break
        else:
            best, least = state, largest
        state = _step(curve, state, gaps, by_place, by_turn, trust)
    else:
        gaps, _, _ = _linearised(curve, state, aim.weight)
        best = state if float(np.abs(gaps).max()) < least else best
    return _path(curve, best)


def _linearised(curve: Meridian, state: _State, weight: float) -> tuple[Array, Array, Array]:
    """Return the deviation in each arc's samples, and what moving its ends does to it.

    Returns
    -------
    gaps : ndarray of shape (N, m)
        Signed distance of the curve from the path [mm], then the weighted lean where it has a weight [mm].
    by_place : ndarray of shape (5, N, m)
        Its derivative by the arc's own start and end joint, start and end offset, and start direction.
    by_turn : ndarray of shape (4, N)
        Derivative of ``2 χ``, twice the chord's angle, by the first four of these.
    """
    joints, offsets = state.joints, state.offsets
    count = len(joints) - 1
    vertices, normals = state.vertices(curve), curve.normals(joints)
    stretch = curve.tangents(joints) * (1.0 - curve.curvature(joints) * offsets)[:, None]
    where = joints[:-1, None] + FRACTIONS * np.diff(joints)[:, None]
    samples, along = curve.points(where), curve.tangents(where)
    heading = _tangents(curve, state)[:-1]

    # Dual numbers as imaginary parts too small to act on the real ones: exact derivatives of the formulas below.
    starts = np.repeat(vertices[None, :-1], 5, axis=0).astype(complex)
    ends = np.repeat(vertices[None, 1:], 5, axis=0).astype(complex)
    points = np.repeat(samples[None], 5, axis=0).astype(complex)
    tangent = np.repeat(heading[None], 5, axis=0).astype(complex)
    starts[0] += 1j * TINY * stretch[:-1]
    ends[1] += 1j * TINY * stretch[1:]
    starts[2] += 1j * TINY * normals[:-1]
    ends[3] += 1j * TINY * normals[1:]
    points[0] += 1j * TINY * along * (1.0 - FRACTIONS)[None, :, None]
    points[1] += 1j * TINY * along * FRACTIONS[None, :, None]
    tangent[4] += 1j * TINY * np.column_stack([-heading[:, 1], heading[:, 0]])

    departure = _distance_to_arcs(starts, ends, tangent, points)
    if weight > 0.0:
        turning = (curve.curvature(where)[..., None] * curve.normals(where))[None] * 1j * TINY
        directions = np.repeat(along[None], 5, axis=0).astype(complex)
        directions[0] += turning[0] * (1.0 - FRACTIONS)[None, :, None]
        directions[1] += turning[0] * FRACTIONS[None, :, None]
        lean = _lean_to_arcs(starts, ends, tangent, points, directions)
        departure = np.concatenate([departure, weight * lean], axis=-1)
    chord = ends[:4] - starts[:4]
    turned = (chord.real[..., 0] * chord.imag[..., 1] - chord.real[..., 1] * chord.imag[..., 0]) / (
        (chord.real**2).sum(axis=-1) * TINY
    )
    return departure[0].real.reshape(count, -1), departure.imag / TINY, 2.0 * turned


def _distance_to_arcs(starts: Dual, ends: Dual, tangent: Dual, points: Dual) -> Dual:
    """Return signed distances of points from arcs given by start, direction and end; shapes (5, N, …)."""
    chord = ends - starts
    bend = 2.0 * (tangent[..., 0] * chord[..., 1] - tangent[..., 1] * chord[..., 0]) / (chord**2).sum(axis=-1)
    reach = points - starts[:, :, None, :]
    rise = tangent[..., 0, None] * reach[..., 1] - tangent[..., 1, None] * reach[..., 0]
    square = (reach**2).sum(axis=-1)
    bend = bend[..., None]
    root = np.sqrt(1.0 - 2.0 * bend * rise + bend**2 * square)
    return np.asarray((2.0 * rise - bend * square) / (1.0 + root))


def _lean_to_arcs(starts: Dual, ends: Dual, tangent: Dual, points: Dual, directions: Dual) -> Dual:
    """Return the sines of the angles between directions at points and the arcs beside them; shapes (5, N, …)."""
    chord = ends - starts
    bend = 2.0 * (tangent[..., 0] * chord[..., 1] - tangent[..., 1] * chord[..., 0]) / (chord**2).sum(axis=-1)
    reach = points - starts[:, :, None, :]
    left = np.stack([-tangent[..., 1], tangent[..., 0]], axis=-1)[:, :, None, :]
    outward = left - bend[..., None, None] * reach
    return np.asarray((directions * outward).sum(axis=-1) / np.sqrt((outward**2).sum(axis=-1)))


def _step(curve: Meridian, state: _State, gaps: Array, by_place: Array, by_turn: Array, trust: float) -> _State:
    """Return the state after one linear program: least largest deviation within the trusted range."""
    from scipy.optimize import linprog

    unknowns = _Unknowns(len(gaps))
    cost = np.zeros(unknowns.bound + 1)
    cost[unknowns.bound] = 1.0
    level = curve.on_axis
    result = linprog(
        cost,
        A_ub=_within_bound(unknowns, by_place),
        b_ub=np.concatenate([-gaps.ravel(), gaps.ravel()]),
        A_eq=_stays_tangent(unknowns, by_turn),
        b_eq=np.zeros(unknowns.arcs),
        bounds=_ranges(state, trust, level=level),
        method="highs",
    )
    if result.x is None:
        return state
    return _State(
        state.joints + result.x[: unknowns.offset],
        state.offsets + result.x[unknowns.offset : unknowns.turn],
        state.lean + float(result.x[unknowns.turn]),
    )


@dataclass(frozen=True)
class _Unknowns:
    """Where the linear program keeps what: moves of joints, offsets and directions, then the largest deviation."""

    arcs: int

    @property
    def offset(self) -> int:
        return self.arcs + 1

    @property
    def turn(self) -> int:
        return 2 * (self.arcs + 1)

    @property
    def bound(self) -> int:
        return 3 * (self.arcs + 1)

    @property
    def of_each_arc(self) -> Array:
        """Columns of an arc's two joints, two offsets and start direction, shape (5, N)."""
        number = np.arange(self.arcs)
        return np.stack([number, number + 1, self.offset + number, self.offset + number + 1, self.turn + number])


def _within_bound(unknowns: _Unknowns, by_place: Array) -> object:
    """Return the rows of ``±(gap + J x) ≤ E``, two for each sample, as a sparse matrix."""
    from scipy.sparse import coo_array

    _, count, samples = by_place.shape
    row = np.arange(count * samples)
    rows = np.tile(row, 5)
    columns = np.repeat(unknowns.of_each_arc.ravel(), samples)
    bound, minus = np.full(row.size, unknowns.bound), np.full(row.size, -1.0)
    values = np.concatenate([by_place.ravel(), minus, -by_place.ravel(), minus])
    places = (
        np.concatenate([rows, row, rows + row.size, row + row.size]),
        np.concatenate([columns, bound, columns, bound]),
    )
    return coo_array((values, places), shape=(2 * row.size, unknowns.bound + 1)).tocsr()


def _stays_tangent(unknowns: _Unknowns, by_turn: Array) -> object:
    """Return the rows of ``θ_(i+1) + θ_i − 2 χ_i = 0``, to first order, as a sparse matrix."""
    from scipy.sparse import coo_array

    number = np.arange(unknowns.arcs)
    values = np.concatenate([-by_turn.ravel(), np.ones(2 * unknowns.arcs)])
    places = (
        np.concatenate([np.tile(number, 4), number, number]),
        np.concatenate([unknowns.of_each_arc[:4].ravel(), unknowns.turn + number, unknowns.turn + number + 1]),
    )
    return coo_array((values, places), shape=(unknowns.arcs, unknowns.bound + 1)).tocsr()


def _ranges(state: _State, trust: float, *, level: bool) -> Array:
    """Return how far each unknown may move: joints a part of their spacing, a start on the axis not at all."""
    spacing = np.diff(state.joints)
    room = trust * np.concatenate([[0.0], np.minimum(spacing[:-1], spacing[1:]), [0.0]])
    free = np.full(len(state.joints), np.inf)
    upper = np.concatenate([room, free, [0.0 if level else np.inf], free[1:], [np.inf]])
    lower = -upper
    lower[-1] = 0.0
    return np.column_stack([lower, upper])
