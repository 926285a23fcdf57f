"""The fewest tangent arcs for a curve.

To first order the normal distance ``e`` between a curve and an arc path obeys ``e'' = κ_curve − κ_arc``, and
``κ_arc`` is constant on each arc: the best path with continuous tangents is a Bernoulli monospline, which spreads

    ``N* = ∫ (|κ'| / (72 √3 τ))^(1/3) ds``

arcs over the curve for a distance τ. :func:`fewest_arcs` reaches that: joints start evenly spread in
``∫ |κ'|^(1/3) ds``, then positions and normal offsets of the joints are bettered by linear programs that lower the
largest deviation. Tangents follow from ``θ_(i+1) = 2 χ_i − θ_i``, χ the angle of a chord, and are level on the axis.

References
----------
Bernoulli monosplines as the splines of least deviation (from memory); the count follows from the maximum of the cubic
Bernoulli polynomial, ``√3/36``.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.deviation import Deviation, deviation
from profiles.errors import GeometryError
from profiles.meridian import Meridian

Array = NDArray[np.float64]
Dual = NDArray[np.complex128]

MOST_ARCS = 400
ROUNDS = 6
FRACTIONS = 0.5 - 0.5 * np.cos(np.pi * np.arange(21) / 20)
TINY = 1e-30


@dataclass(frozen=True)
class ArcFit:
    """A path of arcs and what it was asked for.

    Parameters
    ----------
    path : ArcPath
        Arcs with continuous tangents.
    deviation : Deviation
        Its departure from the curve [mm, rad].
    limit : float
        N*, the number of arcs that theory allows for the distance asked for [-].
    """

    path: ArcPath
    deviation: Deviation
    limit: float


def arc_limit(curve: Meridian, distance: float) -> float:
    """Return how many tangent arcs a distance tolerance needs, ``∫ (|κ'| / (72 √3 τ))^(1/3) ds``.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    distance : float
        τ, the largest normal distance allowed [mm].

    Returns
    -------
    float
        N* [-], not rounded.
    """
    _, running = _arc_density(curve)
    return float(running[-1] / (72.0 * np.sqrt(3.0) * distance) ** (1.0 / 3.0))


def arc_limit_for_slope(curve: Meridian, slope: float) -> float:
    """Return how many arcs of the distance-optimal path a slope tolerance needs, ``∫ (|κ'| / 12σ)^(1/2) ds``.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    slope : float
        σ, the largest angle allowed between path and curve [rad].

    Returns
    -------
    float
        The number of arcs [-], not rounded.
    """
    where = np.linspace(curve.start, curve.end, 2001)
    change = np.abs(curve.curvature.derivative()(where))
    return float(np.trapezoid(np.sqrt(change / (12.0 * slope)), where))


def fewest_arcs(curve: Meridian, *, distance: float, slope: float = 0.0) -> ArcFit:
    """Return the tangent arcs, as few as will do, that keep to a curve.

    Parameters
    ----------
    curve : Meridian
        The exact curve. One that starts on the axis is met with a level tangent there.
    distance : float
        Largest normal distance allowed [mm].
    slope : float
        Largest angle allowed between path and curve [rad]; 0 asks for none.

    Returns
    -------
    ArcFit
        The path, its proved deviation and the theoretical number of arcs.

    Raises
    ------
    GeometryError
        If more than 400 arcs would be needed.

    Examples
    --------
    >>> from profiles.face import Face
    >>> fit = fewest_arcs(Meridian.of_face(Face(110.0), 208.0), distance=0.005)
    >>> len(fit.path), fit.deviation.normal < 0.005
    (4, True)
    """
    limit = arc_limit(curve, distance)
    count = max(1, int(np.ceil(limit - 0.45)))
    if slope > 0.0:
        count = max(count, int(0.9 * arc_limit_for_slope(curve, slope)))
    while count <= MOST_ARCS:
        path = _best_path(curve, count)
        found = deviation(curve, path)
        if found.normal <= distance and (slope <= 0.0 or found.slope <= slope):
            return ArcFit(path, found, limit)
        count += 1
    raise GeometryError(
        f"a distance of {distance:g} mm and a slope of {1e3 * slope:g} mrad need more than {MOST_ARCS} arcs: "
        "allow a larger chord error or slope"
    )


def tangent_arcs(curve: Meridian, count: int) -> ArcPath:
    """Return the path of so many tangent arcs that departs least from a curve.

    Parameters
    ----------
    curve : Meridian
        The exact curve.
    count : int
        Number of arcs, at least 1.

    Returns
    -------
    ArcPath
        Arcs with continuous tangents, level on the axis.
    """
    return _best_path(curve, count)


def _arc_density(curve: Meridian) -> tuple[Array, Array]:
    """Return arc lengths and the running integral of ``|κ'|^(1/3)`` there."""
    where = np.linspace(curve.start, curve.end, 2001)
    change = np.abs(curve.curvature.derivative()(where))
    density = np.cbrt(change)
    running = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]) * np.diff(where))])
    return where, running


def _first_joints(curve: Meridian, count: int) -> Array:
    where, running = _arc_density(curve)
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


def _best_path(curve: Meridian, count: int) -> ArcPath:
    state = _State(_first_joints(curve, count), np.zeros(count + 1), 0.0)
    best, least, trust = state, np.inf, 0.3
    for _ in range(ROUNDS):
        gaps, by_place, by_turn = _linearised(curve, state)
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
        gaps, _, _ = _linearised(curve, state)
        best = state if float(np.abs(gaps).max()) < least else best
    return _path(curve, best)


def _linearised(curve: Meridian, state: _State) -> tuple[Array, Array, Array]:
    """Return the deviation in each arc's samples, and what moving its ends does to it.

    Returns
    -------
    gaps : ndarray of shape (N, m)
        Signed distance of the curve from the path [mm].
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

    distance = _distance_to_arcs(starts, ends, tangent, points)
    chord = ends[:4] - starts[:4]
    turned = (chord.real[..., 0] * chord.imag[..., 1] - chord.real[..., 1] * chord.imag[..., 0]) / (
        (chord.real**2).sum(axis=-1) * TINY
    )
    return distance[0].real.reshape(count, -1), distance.imag / TINY, 2.0 * turned


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
