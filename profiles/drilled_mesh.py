"""Closed triangle meshes of drilled solids: the mesh of the turned solid, less one prism for each hole.

A prism has the cross-section of its hole, so that it takes away the volume of the cylinder: its corners lie outside
of the circle by two parts where the middles of its sides lie inside by one. Prisms are cut out in double precision by
the library manifold3d; facets that no hole touches stay as they are. Rounding to single precision could turn a facet
over that is thin where an edge of the mesh happens to run near an edge of a prism: such a prism is turned about its own
axis, and all are cut again.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, pi, sin, sqrt
from typing import Any

import numpy as np
from numpy.typing import NDArray

from profiles.drilling import DrilledSolid
from profiles.errors import GeometryError
from profiles.hole import Hole
from profiles.revolve import Mesh, revolve

Array = NDArray[np.float64]
Rows = NDArray[np.intp]

LEAST_SIDES = 12
FINEST = 0.01
"""Part of its radius by which a prism may stray from its hole at most, so that it looks round."""

OVERSHOOT = 1.0
"""How far a prism stands out of the solid where its hole is open, or goes on into the wider part of a step [mm]."""

TURNS = 8
TURN = 0.38196601125
"""Part of a side by which a prism is turned from one try to the next: of all numbers the worst to repeat itself."""

THICK = 128.0
"""Height of facets at a hole, in steps of single precision, with which no further turn is tried."""

THINNEST = 4.0


@dataclass(frozen=True, eq=False)
class _Part:
    """A closed mesh, and for each facet the number of the plane face that it belongs to."""

    vertices: Array
    triangles: Rows
    faces: Rows


@dataclass(frozen=True, eq=False)
class _Cut:
    """What is left of a mesh, rounded to single precision.

    The source of a facet is the number of the one it is a part of, or how many there were and the number of its hole.
    """

    vertices: Array
    triangles: Rows
    sources: Rows


@dataclass(frozen=True, eq=False)
class _Cutter:
    """The mesh of a turned solid, as the library has it, and what is to be cut out."""

    solid: DrilledSolid
    facets: int
    body: Any
    sides: tuple[int, ...]
    step: float

    def cut(self, turns: Array) -> tuple[_Cut, Array]:
        """Return what is left with prisms turned by parts of a side, and the least height of facets at each hole."""
        prisms = [_prism(self.solid, *chosen) for chosen in zip(range(len(turns)), self.sides, turns, strict=True)]
        cut = _cut(self.body, self.facets, prisms)
        return cut, self._least_heights(cut)

    def _least_heights(self, cut: _Cut) -> Array:
        """Return the least height of the facets that touch each hole [mm], of a flat's only where it is too little."""
        hole = np.full(len(cut.vertices), -1)
        walls = cut.sources >= self.facets
        hole[cut.triangles[walls]] = (cut.sources[walls] - self.facets)[:, None]
        touched = hole[cut.triangles]
        here = np.flatnonzero(touched.max(axis=1) >= 0)
        corners = cut.vertices[cut.triangles[here]]
        sides = corners - np.roll(corners, 1, axis=1)
        longest = np.linalg.norm(sides, axis=2).max(axis=1)
        heights = np.linalg.norm(np.cross(sides[:, 0], sides[:, 1]), axis=1) / np.maximum(longest, 1e-300)
        # A facet of a flat cannot lean.
        flat = (corners[:, :, 2] == corners[:, :1, 2]).all(axis=1)
        heights[flat & (heights >= THINNEST * self.step)] = np.inf
        least = np.full(len(self.sides) + 1, np.inf)
        for corner in range(3):
            np.minimum.at(least, touched[here, corner], heights)
        return least[:-1]


def drilled_mesh(solid: DrilledSolid, *, chord_error: float) -> Mesh:
    """Return a closed mesh of a drilled solid that keeps to its exact surface.

    Parameters
    ----------
    solid : DrilledSolid
        The exact solid, its forming surface up [mm].
    chord_error : float
        Largest normal deviation allowed, on the walls of the holes too [mm].

    Returns
    -------
    Mesh
        Closed, outward, each vertex once, the facets of the forming surface first. Without holes it is the mesh of the
        turned solid.

    Raises
    ------
    GeometryError
        If the turned solid has no mesh, the library refuses the cut, or no turn of a prism keeps its facets thicker
        than what single precision tells apart.
    """
    if not solid.holes:
        return revolve(solid.turned, chord_error=chord_error)
    step = float(np.spacing(np.float32(solid.size)))
    error = min(chord_error - step, 0.5 * solid.wall)
    turned = revolve(solid.turned, chord_error=error)
    sides = tuple(_sides(hole.radius, 0.9 * error) for hole in solid.holes)
    body = _manifold(_Part(turned.vertices, turned.triangles, _flats(turned)), _new_names(1))
    return _sorted_mesh(_well_turned(_Cutter(solid, len(turned.triangles), body, sides, step)), turned.forming)


def _well_turned(cutter: _Cutter) -> _Cut:
    """Return the cut with the turns of the prisms, of a few, that leave the thickest facets."""
    best = np.full(len(cutter.sides), TURN)
    cut, heights = cutter.cut(best)
    last = best
    for number in range(2, TURNS + 1):
        thin = heights < THICK * cutter.step
        if not thin.any():
            break
        last = np.where(thin, number * TURN % 1.0, best)
        cut, found = cutter.cut(last)
        best, heights = np.where(found > heights, last, best), np.maximum(found, heights)
    if (best != last).any():
        cut, heights = cutter.cut(best)
    thinnest = int(np.argmin(heights))
    if heights[thinnest] < THINNEST * cutter.step:
        raise GeometryError(
            f"{cutter.solid.holes[thinnest]}: a facet at it is only {heights[thinnest]:.2g} mm high, where an STL's "
            f"numbers are {cutter.step:.2g} mm apart; allowed: {THINNEST * cutter.step:.2g} mm or more; do: allow a "
            "larger chord error, or move the hole a little"
        )
    return cut


def _sides(radius: float, room: float) -> int:
    """Return how many sides a prism needs to stray from its cylinder by at most ``a θ²/3``, 2θ being a side's angle."""
    allowed = min(room, FINEST * radius)
    return max(LEAST_SIDES, ceil(pi / sqrt(3.0 * allowed / radius)))


def _prism(solid: DrilledSolid, number: int, sides: int, turn: float) -> _Part:
    """Return the prism of a hole, turned by a part of a side."""
    hole = solid.holes[number]
    angles = 2.0 * pi * (np.arange(sides) + turn) / sides
    reach = hole.radius * sqrt(2.0 * pi / (sides * sin(2.0 * pi / sides)))
    ring = np.array(hole.centre) + reach * np.column_stack([np.cos(angles), np.sin(angles)])
    low, high = _heights(solid, hole)
    flats = [np.column_stack([ring, np.full(sides, height)]) for height in (low, high)]
    vertices = np.vstack([*flats, [[*hole.centre, low], [*hole.centre, high]]])
    this = np.arange(sides)
    after = (this + 1) % sides
    under, over = np.full(sides, 2 * sides), np.full(sides, 2 * sides + 1)
    facets = [
        (this, after, after + sides),
        (this, after + sides, this + sides),
        (after, this, under),
        (this + sides, after + sides, over),
    ]
    triangles = np.concatenate([np.column_stack(corners) for corners in facets])
    return _Part(vertices, triangles, np.concatenate([this, this, under, over]))


def _heights(solid: DrilledSolid, hole: Hole) -> tuple[float, float]:
    """Return between which heights a prism stands: out of the solid at an open end, into the wider part at a step."""
    heights = np.concatenate([solid.rest.vertices[:, 1], solid.curve.height(solid.curve.breaks)])
    low = float(heights.min()) - OVERSHOOT if hole.open_below else hole.bottom
    high = float(heights.max()) + OVERSHOOT if hole.open_above else hole.top
    for other in solid.holes:
        if other.centre == hole.centre and other.radius > hole.radius:
            into = min(OVERSHOOT, 0.5 * (other.top - other.bottom))
            low -= into if other.top == hole.bottom else 0.0
            high += into if other.bottom == hole.top else 0.0
    return low, high


def _cut(body: Any, facets: int, prisms: list[_Part]) -> _Cut:
    """Cut prisms out of a body of so many facets."""
    import manifold3d

    first = _new_names(len(prisms))
    tools = [_manifold(prism, first + number) for number, prism in enumerate(prisms)]
    left = manifold3d.Manifold.batch_boolean([body, *tools], manifold3d.OpType.Subtract)
    if left.status() != manifold3d.Error.NoError or left.is_empty():
        raise GeometryError(
            f"{len(prisms)} holes cannot be cut out of a mesh of {facets} facets ({left.status()}); allowed: holes "
            "inside the solid; do: change the chord error a little"
        )
    found = left.to_mesh64()
    sources = np.array(found.face_id, dtype=np.intp)
    ends = np.array(found.run_index, dtype=np.intp) // 3
    for start, end, name in zip(ends[:-1], ends[1:], found.run_original_id, strict=True):
        if name >= first:
            sources[start:end] = facets + int(name) - first
    points = np.array(found.vert_properties, dtype=np.float64)[:, :3].astype(np.float32).astype(np.float64) + 0.0
    return _Cut(points, np.array(found.tri_verts, dtype=np.intp), sources)


def _new_names(number: int) -> int:
    """Return the first of some numbers under which the library knows meshes."""
    import manifold3d

    return int(manifold3d.Manifold.reserve_ids(number))


def _manifold(part: _Part, name: int) -> Any:
    """Return a mesh as the library has it, under a number of its own."""
    import manifold3d

    mesh = manifold3d.Mesh64(
        np.ascontiguousarray(part.vertices),
        np.ascontiguousarray(part.triangles, dtype=np.uint64),
        run_index=np.array([0, 3 * len(part.triangles)], dtype=np.uint64),
        run_original_id=np.array([name], dtype=np.uint32),
        face_id=part.faces.astype(np.uint64),
    )
    return manifold3d.Manifold(mesh)


def _flats(mesh: Mesh) -> Rows:
    """Return face numbers that join the facets of each flat, so that it needs no corners inside, and no others."""
    heights = mesh.corners[:, :, 2]
    flat = np.flatnonzero((heights == heights[:, :1]).all(axis=1))
    faces = np.arange(len(mesh.triangles))
    keys = np.column_stack([flat < mesh.forming, np.sign(mesh.normals[flat, 2]), heights[flat, 0]])
    _, firsts, group = np.unique(keys, axis=0, return_index=True, return_inverse=True)
    faces[flat] = flat[firsts][group.reshape(-1)]
    return faces


def _sorted_mesh(cut: _Cut, forming: int) -> Mesh:
    """Return the facets in the order of the turned mesh, then the holes' walls, each vertex once."""
    order = np.argsort(cut.sources, kind="stable")
    vertices, numbers = np.unique(cut.vertices, axis=0, return_inverse=True)
    return Mesh(vertices, numbers.reshape(-1)[cut.triangles[order]], int((cut.sources < forming).sum()))
