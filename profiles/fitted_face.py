"""The smooth face of revolution that lies nearest to given points: a paraboloid, with even terms added, or a conic."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

import numpy as np
from numpy.typing import NDArray

from profiles.errors import GeometryError
from profiles.face import Face

Array = NDArray[np.float64]

ROUNDS = 5
WORTH = 6.0
"""By how much a further term must better the criterion: noise does so in about one of a hundred sets of points."""
LARGEST = 1e6
"""Largest coordinate of a point [mm]."""
FAR = 5e-3
"""Points further from every bowl than this part of their largest radius, root mean square, are those of no bowl."""
TINY = 1e-30
ROUNDING = 1e-12
"""Distances below this part of the largest radius are rounding."""


@dataclass(frozen=True, eq=False)
class FittedFace:
    """A face through points.

    Parameters
    ----------
    face : Face
        Its equation [mm].
    vertex_height : float
        Height of its vertex in the frame of the points [mm].
    rms : float
        Root mean square distance of the points along the normal [mm].
    """

    face: Face
    vertex_height: float
    rms: float


def fitted_face(radius: Array, height: Array, *, most_terms: int = 4) -> FittedFace:
    """Return the face nearest to points of a bowl, by least squares of the normal distance.

    Parameters
    ----------
    radius, height : ndarray of shape (n,)
        The points [mm].
    most_terms : int
        Most terms beside the paraboloid's own: a conic constant, or r⁴, r⁶, … A term is taken up only where the points
        bear it out.

    Returns
    -------
    FittedFace
        Face, vertex and root mean square distance [mm].

    Raises
    ------
    GeometryError
        If a coordinate is not finite or too large, there are fewer than 4 different radii, or no face that opens
        upwards comes near the points: nearer than half a percent of the largest radius, root mean square.

    Notes
    -----
    The height is linear in its unknowns; the distance along the axis times the cosine of the slope stands for the
    normal one, exact to first order. A term is taken up by the criterion of Akaike as corrected for few points (from
    memory).
    """
    size = _checked_size(radius, height)
    most_terms = min(most_terms, _different(radius) - 4)
    best = _even(radius, height, size)
    if best is None:
        raise GeometryError(
            "no bowl that opens upwards comes near the points; allowed: points of a bowl, its heights counted towards "
            "the rim; do: check signs and columns"
        )
    least = _loss(best.gaps, size)
    shapes: list[tuple[int, Callable[[Array, Array, float], _Candidate | None]]] = [
        (1, _conic),
        *((terms, partial(_even, terms=terms)) for terms in range(1, most_terms + 1)),
    ]
    for terms, nearest in shapes if most_terms > 0 else ():
        found = nearest(radius, height, size)
        loss = _loss(found.gaps, size, terms) if found else np.inf
        if found is not None and loss < least - WORTH:
            best, least = found, loss
    rms = float(np.sqrt(np.mean(best.gaps**2)))
    if rms > FAR * size:
        raise GeometryError(
            f"the points stray from the nearest bowl by {rms:.4g} mm RMS; allowed: up to {FAR * size:.4g} mm, "
            f"{100.0 * FAR:g} % of their largest radius; do: check columns, unit, and that the radius is 0 on the axis"
        )
    return FittedFace(best.face, best.vertex, rms)


@dataclass(frozen=True, eq=False)
class _Candidate:
    """A face, the height of its vertex, and the distances that remain along its normal [mm]."""

    face: Face
    vertex: float
    gaps: Array


def _different(radius: Array) -> int:
    return len(np.unique(np.round(np.abs(radius), 6)))


def _checked_size(radius: Array, height: Array) -> float:
    """Return the largest radius of points that a face can be laid through [mm]."""
    largest = float(np.abs(np.concatenate([radius, height])).max(initial=0.0))
    if not largest <= LARGEST:
        raise GeometryError(
            f"a point has the coordinate {largest:.6g} mm; allowed: up to {LARGEST:g} mm; do: check the points and "
            "their unit"
        )
    different = _different(radius)
    if different < 4:
        raise GeometryError(f"the points lie on {different} radii; allowed: 4 or more; do: measure at more radii")
    return float(np.abs(radius).max())


def _even(radius: Array, height: Array, size: float, terms: int = 0) -> _Candidate | None:
    """Return the nearest paraboloid with some even terms added; None where it opens downwards."""
    share = radius / size
    powers = 2 * np.arange(terms + 2)
    basis = share[:, None] ** powers
    incline = powers / size * share[:, None] ** np.maximum(powers - 1, 0)
    weights = np.ones(len(radius))
    for _ in range(ROUNDS):
        values = np.asarray(np.linalg.lstsq(basis * weights[:, None], height * weights, rcond=None)[0])
        weights = 1.0 / np.hypot(1.0, incline @ values)
    vertex, opening, *more = (values / size ** powers.astype(np.float64)).tolist()
    if opening <= 0.0:
        return None
    return _Candidate(Face(0.25 / opening, -1.0, tuple(more)), vertex, (height - basis @ values) * weights)


def _conic(radius: Array, height: Array, size: float) -> _Candidate | None:
    """Return the nearest conic; None where none that opens upwards reaches the points.

    With the vertex at height v, ``r² = 2 R0 (z − v) − (1 + K)(z − v)²``: linear in the coefficients of z, and what
    remains is the normal distance times the gradient.
    """
    innermost = float(height[np.argmin(np.abs(radius))])
    square, tall = (radius / size) ** 2, (height - innermost) / size
    basis = np.vander(tall, 3, increasing=True)
    weights = np.ones(len(radius))
    for _ in range(ROUNDS):
        values = np.linalg.lstsq(basis * weights[:, None], square * weights, rcond=None)[0]
        weights = 1.0 / np.sqrt(4.0 * square + (values[1] + 2.0 * values[2] * tall) ** 2 + TINY)
    level, rise, bend = values.tolist()
    inside = rise**2 - 4.0 * level * bend
    if rise <= 0.0 or inside <= 0.0:
        return None
    over = -2.0 * level / (rise + inside**0.5)
    face, vertex = Face(0.25 * size * (rise + 2.0 * bend * over), -1.0 - bend), innermost + size * over
    if size >= face.widest:
        return None
    gaps = (height - vertex - face.height(radius)) / np.hypot(1.0, face.incline(radius))
    return _Candidate(face, vertex, gaps)


def _loss(gaps: Array, size: float, terms: int = 0) -> float:
    """Return the criterion for the distances that remain with some terms beside the paraboloid's own."""
    count, unknowns = len(gaps), terms + 3
    if count <= unknowns + 1:
        return np.inf if terms else 0.0
    square = max(float(np.mean(gaps**2)), (ROUNDING * size) ** 2)
    return count * float(np.log(square)) + 2.0 * unknowns * count / (count - unknowns - 1)
