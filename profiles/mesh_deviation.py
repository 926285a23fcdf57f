"""The proof of a solid's mesh: read-back facets against the exact half section, by bounds and not by samples.

Each facet is measured against the stretch of the half section that its corners lie on, or against the drilled hole
(:mod:`profiles.hole_deviation`). If the facets are one closed surface, all within tolerance of the exact one and facing
the same way as it, and enclose its volume, then they cover it exactly once: projecting them along its normals is a map
of degree one.

Every check collects what it finds; a finding is a stable code and a sentence.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from profiles.drilling import DrilledSolid
from profiles.facets import facet_spans, least, longest_sides, most
from profiles.hole_deviation import HoleFacets, hole_facets, without_holes
from profiles.mesh_topology import Finding, Topology, facet_normals, topology
from profiles.solids import Solid
from profiles.surfaces import Contact, Surface, TurnedCurve, stretches

Array = NDArray[np.float64]
Rows = NDArray[np.intp]

CORNER = 12.0
"""How far a corner may lie off its stretch, in chord errors: rings at sharp edges move along both normals."""


@dataclass(frozen=True)
class MeshDeviation:
    """What a mesh is to the exact solid.

    Parameters
    ----------
    normal : float
        Largest normal distance of a facet of the forming surface [mm]; never less than any sampling finds.
    at_radius : float
        Radius of that facet's middle [mm].
    slope : float
        Largest lean of a facet of the forming surface, met at a corner [rad].
    slope_at_radius : float
        Radius of that corner [mm].
    body : float
        Largest normal distance of the other facets: edge, land, sides, base, spigot, bore, holes [mm].
    body_at_radius : float
        Radius of that facet's middle [mm].
    volume : float
        Signed volume of the mesh [mm^3].
    forming_facets : int
        How many facets make up the forming surface.
    findings : tuple of (str, str)
        A code and a sentence for everything that is wrong; empty for a sound mesh.
    """

    normal: float
    at_radius: float
    slope: float
    slope_at_radius: float
    body: float
    body_at_radius: float
    volume: float
    forming_facets: int
    findings: tuple[Finding, ...]


@dataclass(frozen=True, eq=False)
class _Facets:
    """Facets sorted by the stretches they belong to, and measured."""

    owners: Rows
    strayed: Array
    lean: Array
    facing: Array


def mesh_deviation(solid: Solid | DrilledSolid, corners: Array, normals: Array, *, chord_error: float) -> MeshDeviation:
    """Return how far read-back facets stray from the exact solid, and everything that is wrong with them.

    Parameters
    ----------
    solid : Solid or DrilledSolid
        The exact solid [mm].
    corners : ndarray of shape (m, 3, 3)
        Three corners of each facet as they stand in the file [mm].
    normals : ndarray of shape (m, 3)
        The normal stated for each facet [-].
    chord_error : float
        Largest normal distance allowed [mm].

    Returns
    -------
    MeshDeviation
        Its findings are those of `topology`, and ``numbers``, ``forming``, ``body``, ``hole``, ``facing``,
        ``coverage`` and ``volume``.

    Notes
    -----
    The lean of a facet is largest at a corner, up to terms of the third order in its size.
    """
    finite = np.isfinite(corners).all(axis=(1, 2)) & np.isfinite(normals).all(axis=1)
    if not finite.all() or not len(corners):
        wrong = int((~finite).sum())
        sentence = f"{len(corners)} facets, {wrong} of them with a number that is not finite; allowed: 4 or more, none"
        return MeshDeviation(np.inf, 0.0, np.inf, 0.0, np.inf, 0.0, 0.0, 0, (("numbers", sentence),))
    whole = topology(corners, normals)
    drilled = solid if isinstance(solid, DrilledSolid) else DrilledSolid(solid)
    holes = hole_facets(drilled, whole, corners, chord_error=chord_error)
    facets = _all_measured(stretches(drilled.turned), whole, corners, holes, chord_error)
    radii = np.hypot(*(corners[:, 0, :2] + corners[:, 1, :2] + corners[:, 2, :2]).T) / 3.0
    forming = facets.owners == 0
    normal, at_radius = _worst(facets.strayed, radii, forming)
    body, body_at_radius = _worst(facets.strayed, radii, ~forming)
    lean = most(facets.lean)
    slope, slope_row = _worst(lean, np.arange(float(len(lean))), forming)
    corner = corners[int(slope_row), int(facets.lean[int(slope_row)].argmax())]
    findings = [
        *whole.findings,
        *_strayed("forming", "the forming surface", (normal, at_radius), chord_error),
        *_strayed("body", "the rest of the solid", (body, body_at_radius), chord_error),
        *holes.findings,
        *_turned_away(facets, radii),
        *_coverage(drilled.turned, without_holes(whole, holes.holes >= 0), facets.owners, chord_error),
        *_volume(solid, whole.volume, chord_error),
    ]
    return MeshDeviation(
        normal,
        at_radius,
        slope,
        float(np.hypot(corner[0], corner[1])),
        body,
        body_at_radius,
        whole.volume,
        int(forming.sum()),
        tuple(findings),
    )


def _all_measured(
    surfaces: tuple[TurnedCurve, *tuple[Surface, ...]],
    whole: Topology,
    corners: Array,
    holes: HoleFacets,
    chord_error: float,
) -> _Facets:
    """Return all facets measured, those of holes as numbered after the stretches."""
    turned = np.flatnonzero(holes.holes < 0)
    part = _measured(surfaces, replace(whole, triangles=whole.triangles[turned]), corners[turned], chord_error)
    owners, lean = len(surfaces) + holes.holes, np.zeros((len(corners), 3))
    strayed, facing = holes.strayed.copy(), holes.facing.copy()
    owners[turned], strayed[turned], lean[turned], facing[turned] = part.owners, part.strayed, part.lean, part.facing
    return _Facets(owners, strayed, lean, facing)


def _measured(
    surfaces: tuple[TurnedCurve, *tuple[Surface, ...]], whole: Topology, corners: Array, chord_error: float
) -> _Facets:
    contacts = [surface.touch(whole.vertices) for surface in surfaces]
    apart = np.stack([most(contact.apart[whole.triangles]) for contact in contacts])
    feet, curve = contacts[0].where[whole.triangles], surfaces[0].curve
    # A facet of the edge or of a bore touches the forming surface with corners on its last or first ring alone.
    apart[0, least(feet) >= curve.end - 0.5 * chord_error] = np.inf
    if not curve.on_axis:
        apart[0, most(feet) <= curve.start + 0.5 * chord_error] = np.inf
    owners = np.argmin(apart, axis=0)
    near = apart <= apart.min(axis=0) + 2.0 * chord_error
    several = near.sum(axis=0) > 1
    normals = facet_normals(corners)
    count = len(owners)
    strayed, lean, facing = np.full(count, np.inf), np.zeros((count, 3)), np.full(count, -1.0)
    for number, (surface, contact) in enumerate(zip(surfaces, contacts, strict=True)):
        here = np.flatnonzero((owners == number) & ~several | near[number] & several)
        if not len(here):
            continue
        found = _distances(surface, contact, whole, (here, apart[number, here], chord_error))
        leans, cosines = _leans(contact, whole.triangles[here], normals[here])
        # Of several stretches the one that a facet faces with, and then the one that it strays from least.
        better = ((cosines > 0.0) & (facing[here] <= 0.0)) | (
            ((cosines > 0.0) == (facing[here] > 0.0)) & (found < strayed[here])
        )
        taken = here[better]
        owners[taken], strayed[taken] = number, found[better]
        lean[taken], facing[taken] = leans[better], cosines[better]
    return _Facets(owners, strayed, lean, facing)


def _distances(surface: Surface, contact: Contact, whole: Topology, chosen: tuple[Rows, Array, float]) -> Array:
    """Return the largest distance of each of some facets from a stretch [mm]; chosen by row and how far they are."""
    here, apart, chord_error = chosen
    triangles = whole.triangles[here]
    off = apart > CORNER * chord_error
    # Far off, the bounds by the surface's bending no longer hold, but no distance grows faster than the way.
    found = np.where(off, apart + longest_sides(whole.vertices[triangles]), 0.0)
    close = np.flatnonzero(apart <= _reach(surface))
    if len(close):
        spans = facet_spans(surface, whole.vertices, triangles[close], contact=contact)
        found[close] = np.where(off[close], np.maximum(spans.largest, apart[close]), spans.largest)
    return found


def _reach(surface: Surface) -> float:
    """Return how far off a stretch its bends hold for the distance [mm]."""
    bends = surface.bends(np.array([-np.inf]), np.array([np.inf]))
    strongest = max(float(np.abs(bend).max()) for bend in vars(bends).values())
    return 0.05 / max(strongest, 1e-300)


def _leans(contact: Contact, triangles: Rows, normals: Array) -> tuple[Array, Array]:
    """Return the angle between facet and surface at each corner [rad], and the least cosine of it."""
    gradients = contact.gradient[triangles]
    cosine = np.einsum("mcx,mx->mc", gradients, normals)
    # The cross product is short where the two are nearly the same, so that small leans keep their digits.
    across = np.cross(gradients, normals[:, None, :])
    return np.arctan2(np.sqrt(np.einsum("mcx,mcx->mc", across, across)), cosine), least(cosine)


def _worst(values: Array, places: Array, chosen: NDArray[np.bool_]) -> tuple[float, float]:
    """Return the largest of the chosen values and its place; infinite where there is none."""
    if not chosen.any():
        return np.inf, 0.0
    row = int(np.argmax(np.where(chosen, values, -np.inf)))
    return float(values[row]), float(places[row])


def _strayed(code: str, what: str, found: tuple[float, float], chord_error: float) -> list[Finding]:
    normal, radius = found
    if normal <= chord_error:
        return []
    if normal == np.inf:
        return [(code, f"no facet lies on {what}; allowed: all of it covered")]
    return [(code, f"{what} strays by {normal:.6g} mm at radius {radius:.4f} mm; allowed: {chord_error:g} mm")]


def _turned_away(facets: _Facets, radii: Array) -> list[Finding]:
    away = facets.facing <= 0.0
    if not away.any():
        return []
    radius = float(radii[int(np.argmax(away))])
    return [("facing", f"{int(away.sum())} facets face away from outside, the first at radius {radius:.4f} mm")]


def _coverage(solid: Solid, whole: Topology, owners: Rows, chord_error: float) -> list[Finding]:
    """Follow the edges between forming surface and the rest: once round its end, and once round a bore."""
    forming = owners[whole.pairs] == 0
    border = forming[:, 0] != forming[:, 1]
    # In the direction in which the forming facet uses the edge.
    edges = np.where(forming[border, :1], whole.edges[border], whole.edges[border, ::-1])
    points = whole.vertices[edges]
    azimuth = np.arctan2(points[..., 1], points[..., 0])
    turn = (azimuth[:, 1] - azimuth[:, 0] + np.pi) % (2.0 * np.pi) - np.pi
    ends = solid.curve.points(np.array([solid.curve.end, solid.curve.start]))
    plane = np.stack([np.hypot(points[..., 0], points[..., 1]), points[..., 2]], axis=-1)
    far = [np.hypot(*(plane - end).transpose(2, 0, 1)).max(axis=1, initial=0.0) for end in ends]
    allowed = CORNER * chord_error
    bored = float(ends[1, 0]) > 1e-9 * solid.size
    at_end = (far[0] <= allowed) & (far[0] <= far[1])
    at_start = (far[1] <= allowed) & ~at_end & bored
    rounds = (float(turn[at_end].sum()), float(turn[at_start].sum()))
    wanted = (2.0 * np.pi, -2.0 * np.pi if bored else 0.0)
    stray = ~(at_end | at_start)
    if not stray.any() and np.allclose(rounds, wanted, atol=1e-6):
        return []
    where = float(plane[int(np.argmax(stray)), 0, 0]) if stray.any() else float(ends[0, 0])
    return [
        (
            "coverage",
            f"the forming surface is not covered once from its inner to its outer end: its facets are bordered "
            f"near radius {where:.4f} mm; allowed: a border at radius {ends[0, 0]:.4f} mm"
            + (f" and one at {ends[1, 0]:.4f} mm" if bored else ""),
        )
    ]


def _volume(solid: Solid | DrilledSolid, found: float, chord_error: float) -> list[Finding]:
    allowed = chord_error * solid.area
    if abs(found - solid.volume) <= allowed:
        return []
    return [
        (
            "volume",
            f"the facets enclose {found:.8g} mm^3 instead of {solid.volume:.8g} mm^3 (Pappus-Guldinus); "
            f"allowed: {allowed:.4g} mm^3 more or less",
        )
    ]
