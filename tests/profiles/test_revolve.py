"""Meshes of solids of revolution: closed, outward, within the chord error, and few."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from profiles.arcpath import ArcPath
from profiles.errors import GeometryError
from profiles.face import Face
from profiles.facets import facet_spans
from profiles.meridian import Meridian
from profiles.mesh_deviation import mesh_deviation
from profiles.revolve import Facets, Mesh, revolve, triangle_limit
from profiles.solids import Solid, turned_over
from profiles.stitching import Rings, stitch
from profiles.surfaces import stretches

MODES: tuple[Facets, ...] = ("inside", "outside", "balanced")


def mould(
    face: Face, diameter: float, *, male: bool = True, edge: float = 0.01, land: float = 0.0, bore: float = 0.0
) -> Solid:
    """Return a mould whose edge radius, land and bore are given as parts of its diameter."""
    whole = Meridian.of_face(face, 0.5 * diameter)
    curve = whole.part(float(whole.at_radius(0.5 * bore * diameter)), whole.end) if bore else whole
    curve, sign = (turned_over(curve), -1.0) if male else (curve, 1.0)
    curve = curve.raised(0.1 * diameter - min(float(curve.height(curve.start)), float(curve.height(curve.end))))
    slope, (radius, height) = abs(float(curve.slope(curve.end))), curve.points(curve.end)
    vertices, bulges = [(radius, height)], []
    if edge:
        reach = edge * diameter
        vertices.append((radius + reach * np.sin(slope), height + sign * reach * (1.0 - np.cos(slope))))
        bulges.append(-sign * np.tan(0.25 * slope))
    if land:
        vertices.append((vertices[-1][0] + land * diameter, vertices[-1][1]))
        bulges.append(0.0)
    outer, inner = vertices[-1][0], 0.5 * bore * diameter
    vertices += [(outer, 0.0), (inner, 0.0), (inner, float(curve.height(curve.start)))]
    return Solid(curve, ArcPath(np.array(vertices), np.array([*bulges, 0.0, 0.0, 0.0])))


@st.composite
def moulds(draw: st.DrawFn) -> Solid:
    diameter = draw(st.floats(10.0, 3000.0))
    focal_length = diameter * draw(st.floats(0.25, 4.0))
    conic = draw(st.sampled_from([-1.0, -1.0, -0.4, 0.3, -2.0]))
    return mould(
        Face(focal_length, conic),
        diameter,
        male=draw(st.booleans()),
        edge=draw(st.sampled_from([0.0, 0.005, 0.02])),
        land=draw(st.sampled_from([0.0, 0.03])),
        bore=draw(st.sampled_from([0.0, 0.0, 0.05])),
    )


def signed_volume(mesh: Mesh) -> float:
    one, two, three = (mesh.corners[:, corner] for corner in range(3))
    return float((one * np.cross(two, three)).sum() / 6.0)


def edges_of(mesh: Mesh) -> np.ndarray:
    return np.concatenate([mesh.triangles[:, [one, (one + 1) % 3]] for one in range(3)])


@settings(max_examples=15, deadline=None)
@given(moulds(), st.floats(1e-4, 2e-3), st.sampled_from(MODES))
def test_closed_outward_and_within_the_chord_error(solid: Solid, share: float, facets: Facets) -> None:
    chord_error = max(share * solid.size, 1e-4)
    mesh = revolve(solid, chord_error=chord_error, facets=facets)
    edges = edges_of(mesh)
    assert len(np.unique(edges, axis=0)) == len(edges)
    assert {*map(tuple, edges.tolist())} == {*map(tuple, edges[:, ::-1].tolist())}
    assert len(mesh.vertices) - len(edges) // 2 + len(mesh.triangles) == (
        0 if solid.curve.radius(solid.curve.start) > 1e-9 else 2
    )
    assert signed_volume(mesh) == pytest.approx(solid.volume, abs=chord_error * solid.area)
    found = mesh_deviation(solid, mesh.corners, mesh.normals, chord_error=chord_error)
    assert found.findings == ()
    assert found.normal <= chord_error
    assert found.body <= chord_error
    assert found.forming_facets == mesh.forming


@settings(max_examples=10, deadline=None)
@given(
    st.floats(0.25, 2.0),
    st.booleans(),
    st.sampled_from(MODES),
    st.floats(2000.0, 12000.0),
)
def test_nearly_as_few_triangles_as_the_best_mesh(f_over_d: float, male: bool, facets: Facets, number: float) -> None:  # noqa: FBT001
    solid = mould(Face(400.0 * f_over_d), 400.0, male=male)
    chord_error = triangle_limit(solid.curve, chord_error=1.0, facets=facets) / number
    mesh = revolve(solid, chord_error=chord_error, facets=facets)
    assert mesh.forming <= 1.25 * number


def test_limit_is_the_closed_form_of_the_paraboloid() -> None:
    focal_length, radius, chord_error = 110.0, 200.0, 0.005
    whole = Meridian.of_face(Face(focal_length), 300.0)
    curve = Meridian.of_face(Face(focal_length), float(whole.at_radius(radius)))
    edge = np.hypot(1.0, radius / (2.0 * focal_length))
    closed = 4.0 * np.pi * focal_length * (edge - 1.0) / (1.5 * np.sqrt(3.0) * chord_error)
    assert triangle_limit(curve, chord_error=chord_error, facets="inside") == pytest.approx(closed, rel=1e-5)
    assert triangle_limit(curve, chord_error=chord_error) == pytest.approx(0.5 * closed, rel=1e-5)


@pytest.mark.parametrize("male", [True, False])
@pytest.mark.parametrize("facets", MODES)
def test_facets_lie_on_the_side_that_was_asked_for(*, male: bool, facets: Facets) -> None:
    solid, chord_error = mould(Face(110.0), 400.0, male=male), 0.05
    mesh = revolve(solid, chord_error=chord_error, facets=facets)
    spans = facet_spans(stretches(solid)[0], mesh.vertices, mesh.triangles[: mesh.forming])
    low, high = float(spans.low.min()), float(spans.high.max())
    rounding = 2e-5
    if facets == "inside":
        assert high <= rounding
        assert low == pytest.approx(-chord_error, rel=0.05)
    elif facets == "outside":
        assert low >= -rounding
        assert high == pytest.approx(chord_error, rel=0.05)
    else:
        assert (low, high) == pytest.approx((-chord_error, chord_error), rel=0.05)


def test_vertices_are_single_precision_and_used() -> None:
    mesh = revolve(mould(Face(110.0), 400.0, bore=0.05), chord_error=0.02)
    assert (mesh.vertices == mesh.vertices.astype(np.float32)).all()
    assert len(np.unique(mesh.vertices, axis=0)) == len(mesh.vertices)
    assert (np.unique(mesh.triangles) == np.arange(len(mesh.vertices))).all()


def test_same_solid_same_mesh() -> None:
    one, other = (revolve(mould(Face(60.0), 200.0), chord_error=0.02) for _ in range(2))
    assert (one.vertices == other.vertices).all()
    assert (one.triangles == other.triangles).all()


def test_an_independent_reader_finds_a_watertight_solid() -> None:
    import trimesh

    solid = mould(Face(110.0), 400.0, land=0.03, bore=0.05)
    mesh = revolve(solid, chord_error=0.05)
    # Loose facets as a file holds them: the reader welds them itself.
    read = trimesh.Trimesh(**trimesh.triangles.to_kwargs(mesh.corners))
    assert read.is_watertight
    assert read.is_winding_consistent
    assert read.body_count == 1
    assert len(read.faces) == len(mesh.triangles)
    assert read.volume == pytest.approx(solid.volume, abs=0.05 * solid.area)
    assert read.area == pytest.approx(solid.area, rel=1e-3)
    np.testing.assert_allclose(read.bounds[:, 2], [0.0, mesh.vertices[:, 2].max()], atol=1e-6)


def test_the_first_ring_about_the_pole_is_not_tiny() -> None:
    # Equilateral triangles would put it at 0.47 mm; some more of them reach 0.5 mm.
    solid = mould(Face(30.0), 20.0)
    mesh = revolve(solid, chord_error=0.47**2 / (12.0 * 60.0) / 0.995)
    about = mesh.triangles[(mesh.triangles == 0).any(axis=1)]
    radii = np.hypot(*mesh.vertices[about[about > 0], :2].T)
    assert radii.min() >= 0.5
    assert radii.max() < 0.6


def test_flat_and_conical_forming_surfaces() -> None:
    from profiles.series import constant

    flat = mould(Face(1e7), 400.0, land=0.03)
    mesh = revolve(flat, chord_error=0.01)
    assert mesh_deviation(flat, mesh.corners, mesh.normals, chord_error=0.01).findings == ()
    assert mesh.forming < 1000
    cone = Meridian.of_curvature(constant(0.0, 0.0, 100.0), slope=-0.5, radius=20.0).raised(80.0)
    ends = cone.points(np.array([0.0, 100.0]))
    rest = ArcPath(np.array([ends[1], [ends[1, 0], 0.0], [20.0, 0.0], ends[0]]), np.zeros(3))
    solid = Solid(cone, rest)
    mesh = revolve(solid, chord_error=0.01)
    assert mesh_deviation(solid, mesh.corners, mesh.normals, chord_error=0.01).findings == ()
    assert mesh.forming < 1000


def test_hyperbolic_stretches() -> None:
    # The meridian turns from concave to convex inside the rim.
    face = Face(100.0, asphere=(-2.2e-8,))
    solid = mould(face, 300.0)
    assert solid.curve.curvature.smallest()[1] < 0.0 < solid.curve.curvature.largest()[1]
    mesh = revolve(solid, chord_error=0.02)
    found = mesh_deviation(solid, mesh.corners, mesh.normals, chord_error=0.02)
    assert found.findings == ()
    assert mesh.forming < 1.5 * triangle_limit(solid.curve, chord_error=0.02)


REFUSALS = [
    (
        3000.0,
        1e-4,
        r"chord error of 0\.0001 mm cannot be kept on a solid of .*numbers are 0\.0001.* mm apart.*do: allow",
    ),
    (2000.0, 2.4e-4, r"needs about [0-9.e+]+ triangles; allowed: 4000000; do: allow at least 0\.000[0-9]+ mm"),
    (400.0, float("nan"), r"chord error of nan mm cannot be kept"),
    (400.0, 0.0, r"chord error of 0 mm cannot be kept"),
]


@pytest.mark.parametrize(("diameter", "chord_error", "message"), REFUSALS)
def test_refusals(diameter: float, chord_error: float, message: str) -> None:
    solid = mould(Face(0.25 * diameter), diameter)
    with pytest.raises(GeometryError, match=message):
        revolve(solid, chord_error=chord_error, facets="inside")


@given(st.integers(1, 40), st.integers(0, 1), st.integers(3, 40), st.integers(0, 1))
def test_stitched_rings_use_every_step_once(first: int, turned: int, second: int, other_turned: int) -> None:
    first = first if first > 2 else 1
    triangles = stitch((first, turned), (second, other_turned))
    assert len(triangles) == (first if first > 1 else 0) + second
    edges = np.concatenate([triangles[:, [one, (one + 1) % 3]] for one in range(3)])
    inside = {*map(tuple, edges.tolist())} & {*map(tuple, edges[:, ::-1].tolist())}
    border = {*map(tuple, edges.tolist())} - inside
    wanted = {(first + (step + 1) % second, first + step) for step in range(second)}
    wanted |= {(step, (step + 1) % first) for step in range(first)} if first > 1 else set()
    assert {edge[::-1] for edge in border} == wanted


def test_rings_are_even_and_turned_by_half_a_step() -> None:
    rings = Rings(np.array([1, 4, 4]), np.array([0, 0, 1]))
    vertices = rings.vertices(np.array([[0.0, 2.0], [1.0, 1.0], [2.0, 0.0]]))
    assert vertices[0].tolist() == [0.0, 0.0, 2.0]
    assert np.degrees(np.arctan2(vertices[5:, 1], vertices[5:, 0])) == pytest.approx([45.0, 135.0, -135.0, -45.0])
    assert [len(strip) for strip in rings.strips()] == [4, 8]
