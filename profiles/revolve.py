"""Closed triangle meshes of solids of revolution, built by index from the exact half section with the fewest triangles.

Vertices are rounded to single precision at once, so that a file that holds single precision gives them back unchanged.
Where the facets lie is a choice for the forming surface: *inside* the solid, *outside* of it, or *balanced*, with the
vertices off the surface by as much as the middles of the facets are on the other side. Edge, land, sides and base are
always balanced.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from profiles.errors import GeometryError
from profiles.facets import facet_spans
from profiles.meridian import Meridian
from profiles.ring_chain import TANGENT, Chain, chain_rings
from profiles.ring_metric import chord_measure
from profiles.solids import Solid
from profiles.stitching import Sample
from profiles.surfaces import Surface, TurnedArc, TurnedCurve, stretches

Array = NDArray[np.float64]
Rows = NDArray[np.intp]
Facets = Literal["inside", "outside", "balanced"]

MARGIN = 0.995
"""Part of the chord error that is used: the rest is left to whoever measures."""

EASE = 0.97
"""Part of the spread that the forming surface's last strip may use, for the edge shares its ring."""

SHARP = 0.05
"""Angle [rad] from which on two surfaces meet in a sharp corner."""

CORNER_SHARE = 0.15
"""Part of its spread that a surface takes beside a sharp corner with the forming surface."""

MOST_TRIANGLES = 4_000_000
ROUNDS = 10

BODY_SHARES = (1.0, 0.85, 0.7, 0.5)
"""Parts of its spread that the rest may take, tried in turn where a larger one is not kept."""


@dataclass(frozen=True, eq=False)
class Mesh:
    """A closed surface of triangles.

    Parameters
    ----------
    vertices : ndarray of shape (n, 3)
        Corners, each once (x, y, z), in numbers that single precision holds [mm].
    triangles : ndarray of shape (m, 3)
        Row numbers of each triangle's corners, counter-clockwise seen from outside.
    forming : int
        How many triangles, the first ones, make up the forming surface.
    """

    vertices: Array
    triangles: Rows
    forming: int

    @property
    def corners(self) -> Array:
        """Corners of each triangle [mm], shape (m, 3, 3)."""
        return self.vertices[self.triangles]

    @property
    def normals(self) -> Array:
        """Outward unit normal of each triangle [-], shape (m, 3)."""
        corners = self.corners
        normals = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
        return np.asarray(normals / np.linalg.norm(normals, axis=1)[:, None])


def triangle_limit(curve: Meridian, *, chord_error: float, facets: Facets = "balanced") -> float:
    """Return how many triangles the best mesh of a forming surface has, ``∫ sqrt|K| dA / ((3√3/2) τ)``.

    Parameters
    ----------
    curve : Meridian
        The forming curve [mm].
    chord_error : float
        τ, the largest normal deviation allowed [mm].
    facets : {"inside", "outside", "balanced"}
        Where the facets lie; balanced ones need half as many.

    Returns
    -------
    float
        Number of triangles [-], not rounded.

    References
    ----------
    L. Fejes Tóth; P. M. Gruber (from memory): the asymptotic limit for surfaces of positive Gaussian curvature K.
    """
    sides = 2.0 if facets == "balanced" else 1.0
    return chord_measure(curve) / (1.5 * sqrt(3.0) * chord_error * sides)


def revolve(solid: Solid, *, chord_error: float, facets: Facets = "balanced") -> Mesh:
    """Return a closed mesh of a solid that keeps to its exact surface.

    Parameters
    ----------
    solid : Solid
        The exact half section, its forming surface up [mm].
    chord_error : float
        Largest normal deviation allowed [mm].
    facets : {"inside", "outside", "balanced"}
        Where the facets of the forming surface lie: in the solid's material, over it, or as much on either side.

    Returns
    -------
    Mesh
        Closed, outward, each vertex once; its deviation is at most 0.995 of the chord error.

    Raises
    ------
    GeometryError
        If single precision can't hold the chord error at that size, more than 4 000 000 triangles are needed, or the
        half section has stretches too small to be told apart in single precision.
    """
    surfaces, room = _told_apart(solid, chord_error)
    _check_number(triangle_limit(solid.curve, chord_error=room, facets=facets), chord_error)
    for share in BODY_SHARES:
        found = _settled(surfaces, room, share, facets)
        if found is not None:
            return _mesh(solid, *found, chord_error)
    raise GeometryError(
        f"no mesh was found that keeps a chord error of {chord_error:g} mm on this half section; allowed: stretches "
        "that are long against the chord error; do: allow a larger chord error, or change the smallest radius or land"
    )


def _settled(
    surfaces: tuple[TurnedCurve, *tuple[TurnedArc, ...]], room: float, share: float, facets: Facets
) -> tuple[Chain, Array] | None:
    """Return rings, and their points where the facets are wanted, that keep a deviation [mm]; None if none do."""
    forming, ease, body = 1.0, EASE, _shares_at_corners(surfaces)
    before = np.zeros(0)
    for _ in range(ROUNDS):
        chain = chain_rings(
            surfaces,
            forming_spread=room * forming * (2.0 if facets == "balanced" else 1.0),
            ease=ease,
            body_spread=2.0 * room * share,
            shares=body,
        )
        points, excess = _displaced(chain, facets, room)
        if excess.max() <= 1.0:
            return chain, points
        if np.array_equal(excess, before):
            return None
        before = excess
        forming *= min(1.0, 0.998 / excess[0])
        # At the joint the edge takes over the forming surface's shift: what is too much there comes from both.
        ease = max(ease * min(1.0, 0.97 / max(excess[1], 0.5)), 0.6)
        body = np.where(excess[1:] > 1.0, np.minimum(0.93, 0.98 / np.maximum(excess[1:], 0.5)) * body, body)
    return None


def _shares_at_corners(surfaces: tuple[TurnedCurve, *tuple[TurnedArc, ...]]) -> Array:
    """Return what part of its spread each stretch of the rest may take, shape (k,).

    Beside a sharp corner with the forming surface, at a bore or an edge without a radius, a chord of the shared ring
    strays from both surfaces at once: there the rest leaves nearly all of the deviation to the forming surface.
    """
    curve, rest = surfaces[0].curve, surfaces[1:]
    ends = curve.normals(np.array([curve.end, curve.start]))
    shares = np.ones(len(rest))
    for index, meeting, own in ((0, rest[0].normals[0], ends[0]), (-1, rest[-1].normals[1], ends[1])):
        on_axis = index == -1 and curve.on_axis
        if not on_axis and float(meeting @ own) < np.cos(SHARP):
            shares[index] = CORNER_SHARE
    return shares


def _told_apart(solid: Solid, chord_error: float) -> tuple[tuple[TurnedCurve, *tuple[TurnedArc, ...]], float]:
    """Return the stretches that a mesh can show, and the deviation that is left for its facets [mm]."""
    step = float(np.spacing(np.float32(solid.size)))
    # Half a step in each of three coordinates, of which two share the radius.
    rounding = 0.75 * step
    if not rounding <= 0.2 * chord_error < np.inf:
        raise GeometryError(
            f"a chord error of {chord_error:g} mm cannot be kept on a solid of {solid.size:.6g} mm: an STL's numbers "
            f"are {step:.2g} mm apart there; allowed: {5.0 * rounding:.2g} mm or more; do: allow a larger chord error"
        )
    forming, *body = stretches(solid)
    lengths = np.array([part.path.lengths[part.number] for part in body])
    shown = lengths > max(0.25 * chord_error, 4.0 * step)
    # A coarse mesh is still to look like the solid, down to its narrowest stretch.
    finest = min(float(solid.rest.vertices[:, 0].max()) / 200.0, float(lengths[shown].min()) / 3.0)
    room = min(MARGIN * chord_error - float(lengths[~shown].sum()), finest) - rounding
    return (forming, *(part for part, kept in zip(body, shown.tolist(), strict=True) if kept)), room


def _check_number(number: float, chord_error: float) -> None:
    if number > MOST_TRIANGLES:
        raise GeometryError(
            f"a chord error of {chord_error:g} mm needs about {number:.3g} triangles; allowed: {MOST_TRIANGLES}; "
            f"do: allow at least {chord_error * number / (0.9 * MOST_TRIANGLES):.2g} mm"
        )


def _displaced(chain: Chain, facets: Facets, room: float) -> tuple[Array, Array]:
    """Return the rings' points moved to where the facets are wanted, and each stretch's deviation as a part of room."""
    sample = Sample.of(chain.rings)
    low, high = _strip_spans(chain, chain.points, sample)
    points = chain.points + _shifts(chain, facets, low, high)
    low, high = _strip_spans(chain, points, sample)
    excess = np.zeros(len(chain.surfaces))
    np.maximum.at(excess, chain.owners, np.maximum(-low, high) / room)
    return points, excess


def _strip_spans(chain: Chain, points: Array, sample: Sample) -> tuple[Array, Array]:
    """Return the least and largest signed distance of each strip's facets from its own stretch [mm]."""
    vertices = sample.vertices(points)
    number = np.diff([*sample.firsts, len(sample.triangles)])
    owner = np.repeat(chain.owners, number)
    low, high = np.empty(len(owner)), np.empty(len(owner))
    for index, surface in enumerate(chain.surfaces):
        here = np.flatnonzero(owner == index)
        used, triangles = np.unique(sample.triangles[here], return_inverse=True)
        spans = facet_spans(surface, vertices[used], triangles.reshape(-1, 3))
        low[here], high[here] = spans.low, spans.high
    return np.minimum.reduceat(low, sample.firsts), np.maximum.reduceat(high, sample.firsts)


def _shifts(chain: Chain, facets: Facets, low: Array, high: Array) -> Array:
    """Return how far each ring is moved (radius, height) [mm]."""
    count = len(chain.points)
    normals = [_ring_normals(chain, surface) for surface in chain.surfaces]
    shifts = np.zeros((count, 2))
    for ring in range(count):
        # On an open chain the first ring has no strip before it, the last none after it.
        strips = [strip for strip in (ring - 1, ring) if chain.rings.closed or 0 <= strip < count - 1]
        wanted = _wanted(chain, [strip % len(chain.owners) for strip in strips], facets, (low, high))
        shifts[ring] = _shift([(normals[owner][ring], distance) for owner, distance in wanted])
        if chain.rings.counts[ring] == 1:
            (owner, distance), *_ = wanted
            shifts[ring] = 0.0, distance / normals[owner][ring, 1]
    return shifts


def _ring_normals(chain: Chain, surface: Surface) -> Array:
    """Return the outward normals (radius, height) of one stretch at every ring."""
    points = chain.points
    return surface.touch(np.column_stack([points[:, 0], np.zeros(len(points)), points[:, 1]])).gradient[:, [0, 2]]


def _wanted(chain: Chain, strips: list[int], facets: Facets, spans: tuple[Array, Array]) -> list[tuple[int, float]]:
    """Return for each stretch that meets a ring its number and how far outward the ring should move [mm]."""
    found = []
    for owner in dict.fromkeys(int(chain.owners[strip]) for strip in strips):
        mine = [strip for strip in strips if chain.owners[strip] == owner]
        least, most = float(spans[0][mine].min()), float(spans[1][mine].max())
        place = facets if owner == 0 else "balanced"
        found.append((owner, {"inside": -most, "outside": -least, "balanced": -0.5 * (least + most)}[place]))
    # The forming surface comes first, for it decides where two stretches are tangent.
    return sorted(found, key=lambda pair: (pair[0] != 0, -abs(pair[1])))


def _shift(wanted: list[tuple[Array, float]]) -> Array:
    """Return the shift that moves a ring by given distances along one or two normals."""
    normal, distance = wanted[0]
    if len(wanted) == 2:
        other = wanted[1][0]
        if abs(normal[0] * other[1] - normal[1] * other[0]) > TANGENT:
            return np.linalg.solve(np.array([normal, other]), np.array([distance, wanted[1][1]]))
    return normal * distance


def _mesh(solid: Solid, chain: Chain, points: Array, chord_error: float) -> Mesh:
    """Return the mesh of a chain, its vertices rounded to single precision."""
    strips = chain.rings.strips()
    # The forming surface comes first, whatever lies inside it.
    triangles = np.concatenate([strips[number] for number in np.argsort(chain.owners != 0, kind="stable")])
    _check_number(len(triangles), chord_error)
    # What rounding alone sets off a plane or the axis lies on it: a thousandth of what single precision tells apart.
    nothing = 1e-3 * float(np.spacing(np.float32(solid.size)))
    points = np.where(np.abs(points) < nothing, 0.0, points)
    vertices = chain.rings.vertices(points).astype(np.float32).astype(np.float64) + 0.0
    forming = sum(len(strip) for strip, owner in zip(strips, chain.owners.tolist(), strict=True) if owner == 0)
    mesh = Mesh(vertices, triangles, forming)
    _check_facets(solid, mesh)
    return mesh


def _check_facets(solid: Solid, mesh: Mesh) -> None:
    """Refuse facets that single precision has flattened."""
    corners = mesh.corners
    sides = corners - np.roll(corners, 1, axis=1)
    longest = np.linalg.norm(sides, axis=2).max(axis=1)
    areas = np.linalg.norm(np.cross(sides[:, 0], sides[:, 1]), axis=1)
    step = float(np.spacing(np.float32(solid.size)))
    flat = areas <= 1.5 * step * longest
    if flat.any():
        number = int(np.argmax(flat))
        radius = float(np.hypot(*corners[number, 0, :2]))
        raise GeometryError(
            f"a facet at radius {radius:.6g} mm is only {areas[number] / longest[number]:.2g} mm high, where an STL's "
            f"numbers are {step:.2g} mm apart; allowed: {1.5 * step:.2g} mm or more; do: allow a larger chord "
            "error, or make the smallest edge radius, land or bore larger"
        )
