"""Functions of one variable as Chebyshev series, in pieces where the data are.

A :class:`Series` stands for a function on an interval to about rounding: it is refined until its coefficients fall
below :data:`RESOLUTION` of its size. What is then asked of it (derivatives, integrals, extremes) is found from the
coefficients and not by sampling.

References
----------
Trefethen, *Approximation Theory and Approximation Practice* (from memory): interpolation in Chebyshev points, decay
of coefficients as the test for resolution.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from itertools import pairwise

import numpy as np
from numpy.polynomial import chebyshev
from numpy.polynomial.chebyshev import Chebyshev
from numpy.typing import ArrayLike, NDArray

from profiles.errors import GeometryError

Array = NDArray[np.float64]

RESOLUTION = 2e-14
"""Coefficients below this part of a function's size are rounding."""

NOISE = 1e-11
"""Coefficients below this part of a function's size that no longer fall are taken for its own noise."""

DEGREES = (16, 32, 64)
HALVINGS = 24
MOST_PIECES = 2000


@dataclass(frozen=True, eq=False)
class Series:
    """A function on an interval, as Chebyshev series laid end to end.

    Parameters
    ----------
    pieces : tuple of numpy.polynomial.Chebyshev
        One series a piece; each begins where the one before it ends.
    """

    pieces: tuple[Chebyshev, ...]

    @property
    def breaks(self) -> Array:
        """Ends of the pieces in order, the interval's own ends included."""
        return np.array([self.start, *(piece.domain[1] for piece in self.pieces)])

    @property
    def start(self) -> float:
        """Where the interval begins."""
        return float(self.pieces[0].domain[0])

    @property
    def end(self) -> float:
        """Where the interval ends."""
        return float(self.pieces[-1].domain[1])

    def __call__(self, where: ArrayLike) -> Array:
        """Return the function's values; a little beyond the ends the outer pieces go on."""
        where = np.asarray(where, dtype=np.float64)
        if len(self.pieces) == 1:
            return np.asarray(self.pieces[0](where))
        index = np.searchsorted(self.breaks[1:-1], where, side="right")
        values = np.empty_like(where)
        for number in np.unique(index):
            here = index == number
            values[here] = self.pieces[number](where[here])
        return values

    @property
    def size(self) -> float:
        """Largest coefficient, the size of the function to within a small factor."""
        return max(float(np.abs(piece.coef).max()) for piece in self.pieces)

    def derivative(self) -> Series:
        """Return the derivative, piece by piece."""
        return Series(tuple(piece.deriv() for piece in self.pieces))

    def integral(self, *, value: float = 0.0) -> Series:
        """Return the integral that has the given value at the start."""
        pieces = []
        for piece in self.pieces:
            whole = piece.integ(lbnd=piece.domain[0]) + value
            pieces.append(whole)
            value = float(whole(piece.domain[1]))
        return Series(tuple(pieces))

    def extremes(self) -> tuple[Array, Array]:
        """Return where the function may be largest or smallest, and its values there.

        Returns
        -------
        where : ndarray
            Ends of the pieces and roots of the derivative, in increasing order.
        values : ndarray
            The function there.
        """
        places = [self.breaks]
        places.extend(real_roots(piece.deriv()) for piece in self.pieces)
        where = np.unique(np.concatenate(places))
        return where, self(where)

    def largest(self) -> tuple[float, float]:
        """Return where the function is largest, and its value there."""
        where, values = self.extremes()
        index = int(np.argmax(values))
        return float(where[index]), float(values[index])

    def smallest(self) -> tuple[float, float]:
        """Return where the function is smallest, and its value there."""
        where, values = self.extremes()
        index = int(np.argmin(values))
        return float(where[index]), float(values[index])

    def solve(self, values: ArrayLike) -> Array:
        """Return where an increasing function takes the given values, by Newton's method.

        Parameters
        ----------
        values : array_like
            Values between the function's values at its two ends.

        Returns
        -------
        ndarray
            The places, within the interval.
        """
        values = np.asarray(values, dtype=np.float64)
        grid = np.concatenate([np.linspace(start, end, 33) for start, end in pairwise(self.breaks.tolist())])
        where = np.interp(values, self(grid), grid)
        slope = self.derivative()
        for _ in range(5):
            where = np.clip(where - (self(where) - values) / slope(where), self.start, self.end)
        return np.asarray(where)


def real_roots(piece: Chebyshev) -> Array:
    """Return the real roots of one Chebyshev series within its own interval, in increasing order."""
    trimmed = piece.trim(RESOLUTION * max(float(np.abs(piece.coef).max()), 1e-300))
    if len(trimmed.coef) < 2:
        return np.empty(0)
    roots = trimmed.roots()
    start, end = piece.domain
    width = end - start
    # A double root comes out as a close complex pair: its real part is kept, for an extreme too many does no harm.
    near = np.abs(roots.imag) < 1e-6 * width
    real = np.sort(roots.real[near])
    return np.asarray(np.clip(real[(real > start - 1e-9 * width) & (real < end + 1e-9 * width)], start, end))


def critical_places(coefficients: Array, starts: Array, ends: Array) -> Array:
    """Return where many polynomials may be largest or smallest on intervals of their own.

    Parameters
    ----------
    coefficients : ndarray of shape (k, n)
        Chebyshev coefficients of each polynomial on its interval, lowest first; n of 2 or more.
    starts, ends : ndarray of shape (k,)
        The intervals.

    Returns
    -------
    ndarray of shape (k, n)
        The two ends and the real roots of the derivative; where there are fewer, the start again.

    Notes
    -----
    Roots are eigenvalues of colleague matrices (Good, Specht; from memory), taken for all polynomials of one degree at
    once.
    """
    slopes = np.asarray(chebyshev.chebder(coefficients, axis=1), dtype=np.float64)
    large = np.abs(slopes) > RESOLUTION * np.abs(slopes).max(axis=1, keepdims=True)
    degrees = np.where(large.any(axis=1), slopes.shape[1] - 1 - np.argmax(large[:, ::-1], axis=1), 0)
    places = np.full(coefficients.shape, -1.0)
    places[:, -1] = 1.0
    for degree in np.unique(degrees[degrees > 0]).tolist():
        rows = degrees == degree
        places[rows, 1 : degree + 1] = _roots_within(slopes[rows, : degree + 1])
    middles, halves = 0.5 * (starts + ends), 0.5 * (ends - starts)
    return np.asarray(middles[:, None] + halves[:, None] * places)


def _roots_within(coefficients: Array) -> Array:
    """Return the real roots in [−1, 1] of Chebyshev polynomials of one degree, −1 in place of each other root."""
    degree = coefficients.shape[1] - 1
    if degree == 1:
        roots = (-coefficients[:, 0] / coefficients[:, 1])[:, None].astype(complex)
    else:
        scale = np.append(1.0, np.full(degree - 1, np.sqrt(0.5)))
        beside = np.append(np.sqrt(0.5), np.full(degree - 2, 0.5))
        matrices = np.tile(np.diag(beside, 1) + np.diag(beside, -1), (len(coefficients), 1, 1))
        matrices[:, :, -1] -= 0.5 * coefficients[:, :-1] / coefficients[:, -1:] * (scale / scale[-1])
        roots = np.linalg.eigvals(matrices[:, ::-1, ::-1])
    # A double root comes out as a close complex pair: its real part is kept, for an extreme too many does no harm.
    near = (np.abs(roots.imag) < 2e-6) & (np.abs(roots.real) < 1.0 + 2e-9)
    return np.asarray(np.where(near, np.clip(roots.real, -1.0, 1.0), -1.0))


def merged_breaks(*breaks: Array, start: float, end: float) -> Array:
    """Return the breaks of several functions on an interval as one row, those that rounding alone sets apart as one."""
    inner = np.unique(np.concatenate(breaks))
    least = 1e-9 * (end - start)
    inner = inner[(inner > start + least) & (inner < end - least)]
    apart = np.diff(inner, prepend=start) > least
    return np.array([start, *inner[apart], end])


def constant(value: float, start: float, end: float) -> Series:
    """Return the function that has one value on an interval."""
    return Series((Chebyshev([value], domain=[start, end]),))


def resolve(function: Callable[[Array], Array], breaks: ArrayLike, *, sizes: ArrayLike) -> tuple[Series, ...]:
    """Return smooth functions as Chebyshev series with shared pieces, each refined until it is resolved.

    Parameters
    ----------
    function : callable
        Takes places, an ndarray of shape (n,), and returns k functions there, shape (k, n).
    breaks : array_like of shape (m,)
        Increasing: the ends of the interval and each place where a function is not smooth.
    sizes : array_like of shape (k,)
        Size that the rounding of each function is measured against, in its own unit.

    Returns
    -------
    tuple of Series
        The k functions.

    Raises
    ------
    GeometryError
        If the functions are not smooth between the breaks, or not finite.
    """
    breaks = np.asarray(breaks, dtype=np.float64)
    sizes = np.asarray(sizes, dtype=np.float64)[:, None]
    least = (breaks[-1] - breaks[0]) * 0.5**HALVINGS
    pieces: list[tuple[float, float, Array]] = []
    waiting = list(pairwise(breaks.tolist()))[::-1]
    while waiting:
        start, end = waiting.pop()
        coefficients = _resolved(function, start, end, sizes)
        if coefficients is not None:
            pieces.append((start, end, coefficients))
            continue
        middle = 0.5 * (start + end)
        if end - start < least or len(pieces) + len(waiting) > MOST_PIECES:
            raise GeometryError(
                f"the curve is not smooth near {middle:.6g} mm along it, so it can't be followed exactly; allowed: a "
                "smooth one; do: ask for a gentler face, springback table or thickness table"
            )
        waiting += [(middle, end), (start, middle)]
    return tuple(
        Series(tuple(Chebyshev(coefficients[row], domain=[start, end]) for start, end, coefficients in pieces))
        for row in range(len(sizes))
    )


def _resolved(function: Callable[[Array], Array], start: float, end: float, sizes: Array) -> Array | None:
    """Return the coefficients that hold the functions on an interval to rounding, or None where it is too long."""
    for degree in DEGREES:
        coefficients = interpolate(function, start, end, degree)
        if (np.abs(coefficients[:, -3:]) <= RESOLUTION * sizes).all():
            return _shortened(coefficients, 0.01 * RESOLUTION * sizes)
    floor = 2.0 * np.abs(coefficients[:, -16:]).max(axis=1, keepdims=True)
    level = np.abs(coefficients[:, 24:40]).max(axis=1, keepdims=True) <= 8.0 * floor
    if ((floor <= RESOLUTION * sizes) | (level & (floor <= NOISE * sizes))).all():
        return _shortened(coefficients, np.maximum(floor, 0.01 * RESOLUTION * sizes))
    return None


def interpolate(function: Callable[[Array], Array], start: float, end: float, degree: int) -> Array:
    """Return coefficients of the polynomials through k functions in the Chebyshev points of an interval.

    Parameters
    ----------
    function : callable
        Takes places (n,) and returns values (k, n).
    start, end : float
        Ends of the interval.
    degree : int
        Degree of the polynomials.

    Returns
    -------
    ndarray of shape (k, degree + 1)
        Chebyshev coefficients, lowest first.

    Raises
    ------
    GeometryError
        If a value is not a finite number.
    """
    nodes, matrix = transform(degree)
    values = np.atleast_2d(function(0.5 * (start + end) + 0.5 * (end - start) * nodes))
    if not np.isfinite(values).all():
        raise GeometryError(f"the curve has no finite value everywhere between {start:.6g} and {end:.6g} mm along it")
    return np.asarray(values @ matrix)


@cache
def transform(degree: int) -> tuple[Array, Array]:
    """Return Chebyshev points and the way from values there to coefficients.

    Parameters
    ----------
    degree : int
        Degree of the polynomials.

    Returns
    -------
    nodes : ndarray of shape (degree + 1,)
        Chebyshev points of the first kind, from −1 to 1.
    matrix : ndarray of shape (degree + 1, degree + 1)
        ``values @ matrix`` are the coefficients, lowest first.
    """
    nodes = chebyshev.chebpts1(degree + 1)
    basis = chebyshev.chebvander(nodes, degree)
    weights = np.full(degree + 1, 2.0 / (degree + 1))
    weights[0] *= 0.5
    return nodes, basis * weights


def _shortened(coefficients: Array, noise: Array) -> Array:
    """Return the coefficients without a tail that is mere noise of every function; ``noise`` has shape (k, 1)."""
    large = (np.abs(coefficients) > noise).any(axis=0)
    count = int(np.flatnonzero(large)[-1]) + 1 if large.any() else 1
    return coefficients[:, :count]
