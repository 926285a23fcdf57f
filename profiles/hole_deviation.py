"""The part of a mesh's proof that is about drilled holes: their facets against exact cylinders and flats.

A hole is a solid of revolution about its own axis: its *wall* is a line parallel to the axis, turned about it, and a
closed end a flat ring or disc. A facet belongs to a hole where its corners lie on one of these and it faces as that
does, more than it does on any stretch of the turned solid. The wall is covered once if its facets are bordered by one
round at either end.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.drilling import DrilledSolid, Ends
from profiles.facets import facet_spans, least, most
from profiles.hole import Hole
from profiles.mesh_topology import Finding, Topology, facet_normals
from profiles.surfaces import Contact, Surface, TurnedArc, stretches

Array = NDArray[np.float64]
Rows = NDArray[np.intp]

REACH = 12.0
"""How far a corner may lie off the wall or the end of a hole, in chord errors, to be taken for one of it."""


@dataclass(frozen=True, eq=False)
class HoleFacets:
    """Which facets of a mesh belong to holes, and what they are to them.

    Parameters
    ----------
    holes : ndarray of shape (m,)
        Number of each facet's hole, −1 for a facet of the turned solid.
    strayed : ndarray of shape (m,)
        Largest distance from the exact wall or end [mm], 0 for the others.
    facing : ndarray of shape (m,)
        Least cosine between the facet's normal and the exact one at a corner [-], 1 for the others.
    findings : tuple of (str, str)
        The code ``hole`` and a sentence for each hole that is missing, strays or is not covered once.
    """

    holes: Rows
    strayed: Array
    facing: Array
    findings: tuple[Finding, ...]


@dataclass(frozen=True, eq=False)
class _Claims:
    """Facets that may belong to one hole, by row.

    How much they are like its surfaces, how far they stray from these and how they face, and which are on its wall.
    """

    rows: Rows
    likeness: Array
    strayed: Array
    facing: Array
    on_wall: NDArray[np.bool_]

    def part(self, chosen: NDArray[np.bool_]) -> _Claims:
        return _Claims(*(values[chosen] for values in vars(self).values()))


@dataclass(frozen=True, eq=False)
class _Mesh:
    """The facets, and the turned solid's surfaces that they may belong to instead."""

    whole: Topology
    normals: Array
    turned: tuple[Surface, ...]
    chord_error: float

    @property
    def reach(self) -> float:
        return REACH * self.chord_error


def hole_facets(solid: DrilledSolid, whole: Topology, corners: Array, *, chord_error: float) -> HoleFacets:
    """Return which facets belong to the holes of a solid, how far they stray, and what is wrong with them.

    Parameters
    ----------
    solid : DrilledSolid
        The exact solid [mm].
    whole : Topology
        How the facets hang together.
    corners : ndarray of shape (m, 3, 3)
        Three corners of each facet [mm], finite.
    chord_error : float
        Largest normal distance allowed [mm].

    Returns
    -------
    HoleFacets
        Of each facet, and the findings for each hole.
    """
    mesh = _Mesh(whole, facet_normals(corners), stretches(solid.turned), chord_error)
    count = len(corners)
    holes, walls = np.full(count, -1), np.full(count, -1)
    likeness, strayed, facing = np.full(count, -np.inf), np.zeros(count), np.ones(count)
    for number, (hole, ends) in enumerate(zip(solid.holes, solid.ends, strict=True)):
        claims = _claims(mesh, hole, ends)
        # A facet may be near to two holes on one axis.
        claims = claims.part(claims.likeness > likeness[claims.rows])
        holes[claims.rows], likeness[claims.rows] = number, claims.likeness
        strayed[claims.rows], facing[claims.rows] = claims.strayed, claims.facing
        walls[claims.rows] = np.where(claims.on_wall, number, -1)
    findings = (
        *_strayed(solid, holes, walls, strayed, chord_error),
        *_uncovered(solid, mesh, walls),
    )
    return HoleFacets(holes, strayed, facing, findings)


def _surfaces(hole: Hole, ends: Ends) -> Iterator[Surface]:
    """Yield the wall of a hole and the flats at its ends, about its own axis, their outside in the hole."""
    high = float(ends.heights(np.linspace(hole.least_radius, hole.most_radius, 9)).max())
    yield _line((hole.radius, ends.low), (hole.radius, high))
    if ends.ceiling is not None:
        yield _line((ends.ceiling[1], high), (ends.ceiling[0], high))
    if ends.floor is not None:
        yield _line((ends.floor[0], ends.low), (ends.floor[1], ends.low))


def _line(first: tuple[float, float], last: tuple[float, float]) -> TurnedArc:
    return TurnedArc(ArcPath(np.array([first, last]), np.zeros(1)), 0)


def _claims(mesh: _Mesh, hole: Hole, ends: Ends) -> _Claims:
    """Return the facets that are more like a hole's surfaces than like any of the turned solid's."""
    vertices = mesh.whole.vertices
    away = np.hypot(*(vertices[:, :2] - hole.centre).T)
    rows = np.flatnonzero((away[mesh.whole.triangles] <= hole.radius + mesh.reach).all(axis=1))
    used, triangles = np.unique(mesh.whole.triangles[rows], return_inverse=True)
    triangles, normals = triangles.reshape(-1, 3), mesh.normals[rows]
    about = vertices[used] - np.array([*hole.centre, 0.0])
    own = [(surface, surface.touch(about)) for surface in _surfaces(hole, ends)]
    # A wall that goes on beyond its end is still one, too long.
    own[0] = (own[0][0], replace(own[0][1], apart=np.abs(own[0][1].distance)))
    alike = np.array([_likeness(contact, triangles, normals, mesh.reach) for _, contact in own])
    others = [_likeness(surface.touch(vertices[used]), triangles, normals, mesh.reach) for surface in mesh.turned]
    best, likeness = np.argmax(alike, axis=0), alike.max(axis=0)
    mine = likeness > np.max(others, axis=0)
    strayed, facing = np.zeros(len(rows)), np.ones(len(rows))
    for part, (surface, contact) in enumerate(own):
        here = np.flatnonzero(mine & (best == part))
        if len(here):
            # How far it reaches beyond an end is told by the facets that it meets there.
            strayed[here] = facet_spans(surface, about, triangles[here], contact=contact).largest
            facing[here] = _cosines(contact, triangles[here], normals[here])
    return _Claims(rows, likeness, strayed, facing, best == 0).part(mine)


def _cosines(contact: Contact, triangles: Rows, normals: Array) -> Array:
    """Return the least cosine between a facet's normal and the exact one at its corners."""
    return least(np.einsum("mcx,mx->mc", contact.gradient[triangles], normals))


def _likeness(contact: Contact, triangles: Rows, normals: Array, reach: float) -> Array:
    """Return how much facets are like parts of a surface: 1 for those that are, minus infinity out of reach."""
    apart = most(contact.apart[triangles])
    alike = _cosines(contact, triangles, normals) - apart / reach
    return np.where(apart <= reach, alike, -np.inf)


def _strayed(solid: DrilledSolid, holes: Rows, walls: Rows, strayed: Array, chord_error: float) -> Iterator[Finding]:
    """Yield what is wrong with holes that have no wall, or stray."""
    on_wall = np.bincount(walls[walls >= 0], minlength=len(solid.holes))
    largest = np.zeros(len(solid.holes))
    np.maximum.at(largest, holes[holes >= 0], strayed[holes >= 0])
    for hole, facets, most_strayed in zip(solid.holes, on_wall.tolist(), largest.tolist(), strict=True):
        if not facets:
            yield "hole", f"{hole}: is missing, or elsewhere, or of another size: no facet lies on its wall"
        elif most_strayed > chord_error:
            yield "hole", f"{hole}: strays by {most_strayed:.6g} mm; allowed: {chord_error:g} mm"


def _uncovered(solid: DrilledSolid, mesh: _Mesh, walls: Rows) -> Iterator[Finding]:
    """Yield what is wrong with walls that do not run once around, from one end of their hole to the other."""
    pairs = walls[mesh.whole.pairs]
    at_border = np.flatnonzero(pairs[:, 0] != pairs[:, 1])
    pairs, edges = pairs[at_border], mesh.whole.edges[at_border]
    for number in np.unique(walls[walls >= 0]).tolist():
        hole, ends = solid.holes[number], solid.ends[number]
        mine = (pairs == number).any(axis=1)
        # In the direction in which the facet of the wall uses the edge.
        round_it = np.where(pairs[mine, :1] == number, edges[mine], edges[mine, ::-1])
        if not _once_around(hole, ends, mesh.whole.vertices[round_it], mesh.reach):
            reached = mesh.whole.vertices[mesh.whole.triangles[walls == number], 2]
            high = float(ends.heights(np.array([hole.most_radius, hole.least_radius])).max())
            yield (
                "hole",
                f"{hole}: its wall runs from {reached.min():.4f} to {reached.max():.4f} mm; allowed: {ends.low:.4f} to "
                f"{high:.4f} mm, covered once",
            )


def _once_around(hole: Hole, ends: Ends, edges: Array, reach: float) -> bool:
    """Follow the edges (k, 2, 3) of a wall: once round its lower end, and once round its upper one."""
    azimuth = np.arctan2(edges[..., 1] - hole.centre[1], edges[..., 0] - hole.centre[0])
    turn = (azimuth[:, 1] - azimuth[:, 0] + np.pi) % (2.0 * np.pi) - np.pi
    radii = np.hypot(edges[..., 0], edges[..., 1])
    below = most(np.abs(edges[..., 2] - ends.low))
    above = most(np.abs(edges[..., 2] - ends.heights(radii)) / ends.spread(radii))
    near = np.minimum(below, above) <= reach
    rounds = [float(turn[near & low].sum()) for low in (below <= above, below > above)]
    return bool(near.all()) and np.allclose(rounds, [-2.0 * np.pi, 2.0 * np.pi], atol=1e-6)


def without_holes(whole: Topology, on_hole: NDArray[np.bool_]) -> Topology:
    """Return how the facets of the turned solid hang together, the edges at holes left out.

    Parameters
    ----------
    whole : Topology
        Of all facets.
    on_hole : ndarray of bool, shape (m,)
        Which facets belong to holes.

    Returns
    -------
    Topology
        The same vertices and triangles, and the pairs and edges of facets that belong to none.
    """
    kept = ~on_hole[whole.pairs].any(axis=1)
    return replace(whole, pairs=whole.pairs[kept], edges=whole.edges[kept])
