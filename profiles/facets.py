"""How far flat facets stray from a surface of revolution: bounded, not sampled.

Over one facet the signed distance d is a smooth function of two coordinates, and the way it bends is known
(:mod:`profiles.surfaces`), so that its extremes need no sampling:

- where d is convex its largest value is at a corner. Its smallest is found by Newton's method and bounded by the
  tangent plane there, ``d(p) ≥ d(q) + g·(p − q)``, which is exact at the minimum; where d is concave, likewise;
- where d is a saddle both extremes are on the edges. These are divided, and between two points an edge strays from
  its chord by at most ``M e²/8``, M bounding the second derivative;
- where the kind changes, what bends the wrong way is outweighed by a quadratic, which costs at most ``M e²/6``; the
  facet is divided in four until that is negligible.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.surfaces import Bends, Contact, Surface

Array = NDArray[np.float64]
Rows = NDArray[np.intp]
Kinds = NDArray[np.int8]

CONVEX, CONCAVE, SADDLE = 1, -1, 0

EDGE_PARTS = 12
DIVISIONS = 5
NEGLIGIBLE = 2e-3
"""Part of a facet's range by which a bound may exceed it before the facet is divided."""

ROUNDS = 8


@dataclass(frozen=True, eq=False)
class Spans:
    """Range of the signed distance over each of m facets.

    Parameters
    ----------
    low, high : ndarray of shape (m,)
        Bounds of the smallest and the largest signed distance, outside positive [mm].
    """

    low: Array
    high: Array

    @property
    def largest(self) -> Array:
        """Largest distance on either side for each facet [mm]."""
        return np.maximum(np.abs(self.low), np.abs(self.high))


@dataclass(frozen=True, eq=False)
class _Bounds:
    """Bounds of the distance over facets, by how much they may be too wide, and the range met at the corners."""

    low: Array
    high: Array
    slack: Array
    met: tuple[Array, Array]


def facet_spans(surface: Surface, vertices: Array, triangles: Rows, *, contact: Contact | None = None) -> Spans:
    """Return bounds of the signed distance between facets and a surface.

    Parameters
    ----------
    surface : Surface
        The exact surface [mm].
    vertices : ndarray of shape (n, 3)
        Corners in space [mm].
    triangles : ndarray of shape (m, 3)
        Row numbers of each facet's corners.
    contact : Contact, optional
        What the surface is to the vertices, where that is known.

    Returns
    -------
    Spans
        Never narrower than any sampling finds, to rounding.
    """
    bounds = _bounds(surface, vertices, triangles, contact or surface.touch(vertices))
    here = np.flatnonzero(bounds.slack > 0.0)
    if len(here):
        wide = _Bounds(
            bounds.low[here], bounds.high[here], bounds.slack[here], (bounds.met[0][here], bounds.met[1][here])
        )
        bounds.low[here], bounds.high[here] = _narrowed(surface, vertices[triangles[here]], wide)
    return Spans(bounds.low, bounds.high)


def _bounds(surface: Surface, vertices: Array, triangles: Rows, contact: Contact) -> _Bounds:
    corners = vertices[triangles]
    beside = 0.5 * longest_sides(corners)
    feet = contact.where[triangles]
    bends = surface.bends(least(feet) - beside, most(feet) + beside)
    values = contact.distance[triangles]
    met = least(values), most(values)
    low, high = met[0].copy(), met[1].copy()
    kinds, slack = _kinds(bends, corners, contact.gradient[triangles])
    for kind in (CONVEX, CONCAVE):
        here = np.flatnonzero(kinds == kind)
        if len(here):
            bound = _least_convex(surface, corners[here], _Corners.of(contact, triangles[here], kind), kind)
            (low if kind == CONVEX else high)[here] = kind * bound
    here = np.flatnonzero(kinds == SADDLE)
    if len(here):
        low[here], high[here] = _saddle(surface, vertices, triangles[here], contact)
    return _Bounds(low - slack, high + slack, slack, met)


def _narrowed(surface: Surface, corners: Array, bounds: _Bounds) -> tuple[Array, Array]:
    """Return narrower bounds for facets (m, 3, 3), dividing each where it may leave the range met on it so far."""
    allowed = NEGLIGIBLE * (bounds.high - bounds.low) + 1e-10
    low, high = bounds.met[0].copy(), bounds.met[1].copy()
    met_low, met_high = low.copy(), high.copy()
    facet = np.arange(len(corners))
    for division in range(DIVISIONS + 1):
        np.minimum.at(met_low, facet, bounds.met[0])
        np.maximum.at(met_high, facet, bounds.met[1])
        beyond = (bounds.low < met_low[facet] - allowed[facet]) | (bounds.high > met_high[facet] + allowed[facet])
        open_ = beyond & (bounds.slack > 0.0) & (division < DIVISIONS)
        np.minimum.at(low, facet[~open_], bounds.low[~open_])
        np.maximum.at(high, facet[~open_], bounds.high[~open_])
        if not open_.any():
            break
        vertices, triangles = _quarters(corners[open_])
        facet, corners = np.repeat(facet[open_], 4), vertices[triangles]
        bounds = _bounds(surface, vertices, triangles, surface.touch(vertices))
    return low, high


def _kinds(bends: Bends, corners: Array, gradients: Array) -> tuple[Kinds, Array]:
    """Return which kind each facet is taken for, and by how much the distance may overstep what that kind allows.

    A function becomes convex when a quadratic is added that outweighs what bends the other way, and a facet is then
    out by at most a sixth of that quadratic along its sides.
    """
    convex = (bends.along_least >= 0.0) & (bends.around_least >= 0.0)
    concave = (bends.along_most <= 0.0) & (bends.around_most <= 0.0)
    saddle = ((bends.along_least >= 0.0) & (bends.around_most <= 0.0)) | (
        (bends.along_most <= 0.0) & (bends.around_least >= 0.0)
    )
    kinds = np.select([convex, concave, saddle], [CONVEX, CONCAVE, SADDLE], CONVEX).astype(np.int8)
    slack = np.zeros(len(corners))
    mixed = np.flatnonzero(~(convex | concave | saddle))
    if len(mixed):
        squares = _side_squares(corners[mixed], gradients[mixed])
        below = _weighed(
            squares, np.maximum(-bends.along_least, 0.0)[mixed], np.maximum(-bends.around_least, 0.0)[mixed]
        )
        above = _weighed(squares, np.maximum(bends.along_most, 0.0)[mixed], np.maximum(bends.around_most, 0.0)[mixed])
        kinds[mixed] = np.where(below <= above, CONVEX, CONCAVE)
        slack[mixed] = np.minimum(below, above) / 6.0
    return kinds, slack


def least(values: Array) -> Array:
    """Return the least of a few columns, faster than by a reduction along short rows.

    Parameters
    ----------
    values : ndarray of shape (m, k)
        Values in any unit.

    Returns
    -------
    ndarray of shape (m,)
        The least of each row, in the same unit.
    """
    return np.asarray(np.min(np.ascontiguousarray(values.T), axis=0))


def most(values: Array) -> Array:
    """Return the largest of a few columns, as `least` does.

    Parameters
    ----------
    values : ndarray of shape (m, k)
        Values in any unit.

    Returns
    -------
    ndarray of shape (m,)
        The largest of each row, in the same unit.
    """
    return np.asarray(np.max(np.ascontiguousarray(values.T), axis=0))


def longest_sides(corners: Array) -> Array:
    """Return the longest side of each facet.

    Parameters
    ----------
    corners : ndarray of shape (m, 3, 3)
        Three corners of each facet [mm].

    Returns
    -------
    ndarray of shape (m,)
        Lengths [mm].
    """
    sides = (corners[:, one] - corners[:, other] for one, other in ((0, 1), (1, 2), (2, 0)))
    return np.asarray(np.sqrt(np.max([np.einsum("mx,mx->m", side, side) for side in sides], axis=0)))


@dataclass(frozen=True, eq=False)
class _Corners:
    """Distances and gradients at the three corners of facets, times the sign that makes them convex."""

    values: Array
    gradients: Array

    @classmethod
    def of(cls, contact: Contact, triangles: Rows, sign: int) -> _Corners:
        return cls(sign * contact.distance[triangles], sign * contact.gradient[triangles])


def _least_convex(surface: Surface, corners: Array, start: _Corners, sign: int) -> Array:
    """Return a lower bound of ``sign`` times the distance, which is convex, over facets (m, 3, 3)."""
    sides = corners[:, 1:] - corners[:, :1]
    model = _corner_model(sides, start.gradients)
    place = _lowest_place(np.full((len(corners), 2), 1.0 / 3.0), *model)
    bound = np.full(len(corners), -np.inf)
    open_, spread = np.arange(len(corners)), most(start.values)
    for _ in range(ROUNDS):
        contact = surface.touch(corners[open_, 0] + np.einsum("mk,mkx->mx", place, sides[open_]))
        slope, bends = _local_model(contact, corners[open_, 0], sides[open_], place, sign)
        value = sign * contact.distance
        # The tangent plane is lowest at a corner of the facet.
        here = slope[:, 0] * place[:, 0] + slope[:, 1] * place[:, 1]
        plane = value - here + np.minimum(0.0, np.minimum(slope[:, 0], slope[:, 1]))
        bound[open_] = np.maximum(bound[open_], plane)
        wide = value - bound[open_] > 2e-4 * np.maximum(spread[open_] - value, 0.0) + 1e-10
        if not wide.any():
            break
        place = _lowest_place(place[wide], slope[wide], bends[wide])
        open_ = open_[wide]
    return np.asarray(np.minimum(bound, least(start.values)))


def _corner_model(sides: Array, gradients: Array) -> tuple[Array, Array]:
    """Return slope at the centroid and second derivatives along two sides, from the gradients at the corners."""
    slopes = np.einsum("mkx,mcx->mck", sides, gradients)
    change = slopes[:, 1:] - slopes[:, :1]
    return slopes.mean(axis=1), np.asarray(0.5 * (change + change.transpose(0, 2, 1)))


def _local_model(contact: Contact, first: Array, sides: Array, place: Array, sign: int) -> tuple[Array, Array]:
    """Return slope and second derivatives along two sides at one place of each facet."""
    slope = sign * np.einsum("mkx,mx->mk", sides, contact.gradient)
    points = first + np.einsum("mk,mkx->mx", place, sides)
    radius = np.maximum(np.hypot(points[:, 0], points[:, 1]), 1e-300)
    around = (sides[:, :, 1] * points[:, :1] - sides[:, :, 0] * points[:, 1:2]) / radius[:, None]
    normal = np.einsum("mkx,mx->mk", sides, contact.gradient)
    # What is left of a product of two sides beside its parts along the normal and around the axis lies on the meridian.
    whole = np.einsum("mkx,mlx->mkl", sides, sides)
    hoops = around[:, :, None] * around[:, None, :]
    along = whole - hoops - normal[:, :, None] * normal[:, None, :]
    bends = sign * (contact.bend[:, None, None] * along + contact.hoop[:, None, None] * hoops)
    return slope, bends


def _lowest_place(place: Array, slope: Array, bends: Array) -> Array:
    """Return where on the triangle (0,0), (1,0), (0,1) a convex quadratic, known at ``place``, is lowest."""
    ux, vy, uy = bends[:, 0, 0], bends[:, 1, 1], bends[:, 0, 1]
    # Coefficients of the quadratic about (0, 0).
    one = slope[:, 0] - ux * place[:, 0] - uy * place[:, 1]
    two = slope[:, 1] - uy * place[:, 0] - vy * place[:, 1]

    def height(u: Array, v: Array) -> Array:
        return np.asarray(one * u + two * v + 0.5 * (ux * u * u + vy * v * v) + uy * u * v)

    determinant = ux * vy - uy * uy
    with np.errstate(divide="ignore", invalid="ignore"):
        inner = ((uy * two - vy * one) / determinant, (uy * one - ux * two) / determinant)
        on_u = _clipped(-one / ux)
        on_v = _clipped(-two / vy)
        across = _clipped((vy - uy + two - one) / (ux + vy - 2.0 * uy))
    # Comparisons with what is not a number are false; a plane's minimum is on an edge.
    inside = (inner[0] >= 0.0) & (inner[1] >= 0.0) & (inner[0] <= 1.0 - inner[1])
    zero = np.zeros(len(place))
    places = [(on_u, zero), (zero, on_v), (across, 1.0 - across)]
    places.append((np.where(inside, inner[0], on_u), np.where(inside, inner[1], 0.0)))
    best = np.argmin(np.stack([height(u, v) for u, v in places]), axis=0)
    stacked = np.array(places)
    rows = np.arange(len(place))
    return np.stack([stacked[best, 0, rows], stacked[best, 1, rows]], axis=1)


def _clipped(values: Array) -> Array:
    return np.clip(np.nan_to_num(values, nan=0.5, posinf=1.0, neginf=0.0), 0.0, 1.0)


def _side_squares(corners: Array, gradients: Array) -> tuple[Array, Array]:
    """Return squares of the sides of facets (m, 3, 3), their parts along the meridian and whole, each of shape (m, 3).

    A side's part along the meridian changes steadily from one end to the other, so that it is largest at an end;
    a fifth is added to either for what the surface turns in between.
    """
    sides = np.roll(corners, -1, axis=1) - corners
    square = np.einsum("mcx,mcx->mc", sides, sides)
    along = np.zeros_like(square)
    for turn in (0, -1):
        points, normals = np.roll(corners, turn, axis=1), np.roll(gradients, turn, axis=1)
        radius = np.maximum(np.hypot(points[..., 0], points[..., 1]), 1e-300)
        around = (points[..., 0] * sides[..., 1] - points[..., 1] * sides[..., 0]) / radius
        along = np.maximum(along, square - around**2 - np.einsum("mcx,mcx->mc", normals, sides) ** 2)
    return 1.2 * along, 1.2 * square


def _weighed(squares: tuple[Array, Array], along: Array, around: Array) -> Array:
    """Return the largest of ``|sᵀ H s|`` for the sides of facets, H having bounds along the meridian and around."""
    return most(squares[0] * along[:, None] + squares[1] * around[:, None])


def _saddle(surface: Surface, vertices: Array, triangles: Rows, contact: Contact) -> tuple[Array, Array]:
    """Return the range of the distance over facets on which it is a saddle: that over their edges."""
    ends = np.stack([triangles, np.roll(triangles, -1, axis=1)], axis=2).reshape(-1, 2)
    ends.sort(axis=1)
    _, first, edge = np.unique(ends[:, 0] * len(vertices) + ends[:, 1], return_index=True, return_inverse=True)
    one, other = ends[first].T
    shares = np.arange(1, EDGE_PARTS)[:, None, None] / EDGE_PARTS
    points = vertices[one] + shares * (vertices[other] - vertices[one])
    values = surface.distances(points.reshape(-1, 3)).reshape(len(shares), -1)
    values = np.concatenate([values, contact.distance[one][None], contact.distance[other][None]])
    edges = edge.reshape(-1, 3)
    low, high = least(values.min(axis=0)[edges]), most(values.max(axis=0)[edges])
    corners = vertices[triangles]
    feet, beside = contact.where[triangles], 0.5 * longest_sides(corners)
    bends = surface.bends(least(feet) - beside, most(feet) + beside)
    along = np.maximum(-bends.along_least, bends.along_most)
    around = np.maximum(-bends.around_least, bends.around_most)
    squares = _side_squares(corners, contact.gradient[triangles])
    between = _weighed(squares, along, around) / (8.0 * EDGE_PARTS**2)
    return low - between, high + between


def _quarters(corners: Array) -> tuple[Array, Rows]:
    """Return each facet (m, 3, 3) divided in four at the middles of its sides: vertices and triangles."""
    middles = 0.5 * (corners + np.roll(corners, -1, axis=1))
    parts = [middles, *(np.stack([corners[:, k], middles[:, k], middles[:, k - 1]], axis=1) for k in range(3))]
    vertices = np.stack(parts, axis=1).reshape(-1, 3)
    return vertices, np.arange(len(vertices), dtype=np.intp).reshape(-1, 3)
