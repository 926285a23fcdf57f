"""The proof of meshes: bounds against dense samples, and faults planted one by one."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from profiles.arcpath import ArcPath
from profiles.face import Face
from profiles.facets import facet_spans
from profiles.meridian import Meridian
from profiles.mesh_deviation import MeshDeviation, mesh_deviation
from profiles.revolve import Mesh, revolve
from profiles.solids import Solid, turned_over
from profiles.surfaces import Surface, TurnedArc, TurnedCurve, stretches

CHORD_ERROR = 0.05
Array = np.ndarray


def bored_dome() -> Solid:
    """Return a male mould of 200 mm with edge, land and bore."""
    whole = Meridian.of_face(Face(60.0), 110.0)
    curve = turned_over(whole.part(float(whole.at_radius(8.0)), whole.end)).raised(70.0)
    slope, (radius, height) = -float(curve.slope(curve.end)), curve.points(curve.end)
    edge = (radius + 3.0 * np.sin(slope), height - 3.0 * (1.0 - np.cos(slope)))
    vertices = [(radius, height), edge, (edge[0] + 6.0, edge[1]), (edge[0] + 6.0, 0.0), (8.0, 0.0)]
    vertices.append((8.0, float(curve.height(curve.start))))
    return Solid(curve, ArcPath(np.array(vertices), np.array([np.tan(0.25 * slope), 0.0, 0.0, 0.0, 0.0])))


def bowl(*, reach: float = 110.0) -> Solid:
    """Return a female mould without edge or bore."""
    curve = Meridian.of_face(Face(60.0), reach).raised(20.0)
    radius, height = curve.points(curve.end)
    rest = ArcPath(np.array([[radius, height], [radius, 0.0], [0.0, 0.0], [0.0, 20.0]]), np.zeros(3))
    return Solid(curve, rest)


@pytest.fixture(scope="module", params=[bored_dome, bowl])
def made(request: pytest.FixtureRequest) -> tuple[Solid, Mesh]:
    solid = request.param()
    return solid, revolve(solid, chord_error=CHORD_ERROR)


def proof(solid: Solid, corners: Array, normals: Array) -> MeshDeviation:
    return mesh_deviation(solid, corners, normals, chord_error=CHORD_ERROR)


def codes(solid: Solid, corners: Array, normals: Array | None = None) -> set[str]:
    """Return the codes found for facets, whose normals are those of their winding unless given."""
    if normals is None:
        normals = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
        normals /= np.maximum(np.linalg.norm(normals, axis=1), 1e-300)[:, None]
    return {code for code, _ in proof(solid, corners, normals).findings}


def test_a_sound_mesh_has_no_findings(made: tuple[Solid, Mesh]) -> None:
    solid, mesh = made
    found = proof(solid, mesh.corners, mesh.normals)
    assert found.findings == ()
    assert 0.9 * CHORD_ERROR < found.normal <= CHORD_ERROR
    assert found.body <= CHORD_ERROR
    assert found.forming_facets == mesh.forming
    assert found.volume == pytest.approx(solid.volume, abs=CHORD_ERROR * solid.area)
    # A facet within e of a surface of curvature radius R leans by about sqrt(2 e/R), here e being both sides together.
    assert 0.5 < found.slope / np.sqrt(4.0 * CHORD_ERROR / 120.0) < 2.0


def near_forming(mesh: Mesh, solid: Solid) -> int:
    """Return a vertex in the middle of the forming surface."""
    points = mesh.vertices
    middle = solid.curve.points(0.5 * (solid.curve.start + solid.curve.end))
    return int(np.argmin(np.hypot(np.hypot(points[:, 0], points[:, 1]) - middle[0], points[:, 2] - middle[1])))


def moved_vertex(solid: Solid, mesh: Mesh, distance: float) -> Array:
    row = near_forming(mesh, solid)
    vertices = mesh.vertices.copy()
    vertices[row] += distance * stretches(solid)[0].touch(vertices[row : row + 1]).gradient[0]
    return vertices[mesh.triangles]


def shifted(mesh: Mesh, *, up: float = 0.0, aside: float = 0.0) -> Array:
    return mesh.corners + np.array([aside, 0.0, up])


Fault = Callable[[Solid, Mesh], Array]
FAULTS: dict[str, tuple[Fault, set[str]]] = {
    "scaled by 25.4": (lambda _, mesh: 25.4 * mesh.corners, {"body", "volume"}),
    "scaled by 1/25.4": (lambda _, mesh: mesh.corners / 25.4, {"body", "volume"}),
    "scaled by 1.001": (lambda _, mesh: 1.001 * mesh.corners, {"body"}),
    "z mirrored": (lambda _, mesh: mesh.corners * (1.0, 1.0, -1.0), {"inside-out", "volume"}),
    "x mirrored": (lambda _, mesh: mesh.corners * (-1.0, 1.0, 1.0), {"inside-out", "facing"}),
    "wound the other way": (lambda _, mesh: mesh.corners[:, ::-1], {"inside-out", "facing"}),
    "one facet wound the other way": (
        lambda _, mesh: np.concatenate([mesh.corners[:1, ::-1], mesh.corners[1:]]),
        {"winding", "facing"},
    ),
    "one facet missing": (lambda _, mesh: mesh.corners[1:], {"open"}),
    "one facet twice": (lambda _, mesh: np.concatenate([mesh.corners, mesh.corners[:1]]), {"duplicate", "crowded"}),
    "vertex moved out": (lambda solid, mesh: moved_vertex(solid, mesh, 2.0 * CHORD_ERROR), {"forming"}),
    "vertex moved in": (lambda solid, mesh: moved_vertex(solid, mesh, -2.0 * CHORD_ERROR), {"forming"}),
    "shifted up": (lambda _, mesh: shifted(mesh, up=2.0 * CHORD_ERROR), {"forming", "body"}),
    "shifted down": (lambda _, mesh: shifted(mesh, up=-2.0 * CHORD_ERROR), {"forming", "body"}),
    "shifted aside": (lambda _, mesh: shifted(mesh, aside=3.0 * CHORD_ERROR), {"body"}),
    "turned upside down": (lambda _, mesh: mesh.corners * (1.0, -1.0, -1.0), {"volume"}),
    "a second solid inside": (
        lambda _, mesh: np.concatenate([mesh.corners, 0.5 * shifted(mesh, up=10.0)]),
        {"pieces", "body", "volume"},
    ),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_planted_faults_are_found(made: tuple[Solid, Mesh], fault: str) -> None:
    solid, mesh = made
    plant, wanted = FAULTS[fault]
    found = codes(solid, plant(solid, mesh))
    if fault == "turned upside down":
        assert found & {"forming", "body", "facing", "coverage"}
    else:
        assert wanted <= found


def test_a_corner_moved_in_one_facet_alone(made: tuple[Solid, Mesh]) -> None:
    solid, mesh = made
    corners = mesh.corners.copy()
    corners[mesh.forming // 2, 0] += 2.0 * CHORD_ERROR * mesh.normals[mesh.forming // 2]
    assert "open" in codes(solid, corners)


def test_a_facet_without_area(made: tuple[Solid, Mesh]) -> None:
    solid, mesh = made
    corners = mesh.corners.copy()
    corners[5, 1] = corners[5, 0]
    assert {"degenerate", "open"} <= codes(solid, corners, mesh.normals)


def test_stated_normals(made: tuple[Solid, Mesh]) -> None:
    solid, mesh = made
    for wrong in (-mesh.normals, np.zeros_like(mesh.normals), np.roll(mesh.normals, 1, axis=1)):
        assert codes(solid, mesh.corners, wrong) == {"normal"}
    single = mesh.normals.astype(np.float32).astype(np.float64)
    assert codes(solid, mesh.corners, single) == set()


def test_numbers_that_are_not_finite(made: tuple[Solid, Mesh]) -> None:
    solid, mesh = made
    corners = mesh.corners.copy()
    corners[3, 0, 0] = np.nan
    found = proof(solid, corners, mesh.normals)
    assert found.findings == (
        ("numbers", f"{len(corners)} facets, 1 of them with a number that is not finite; allowed: 4 or more, none"),
    )
    assert found.normal == np.inf
    assert codes(solid, corners[:0], mesh.normals[:0]) == {"numbers"}


def test_a_truncated_dish() -> None:
    short = revolve(bowl(reach=105.0), chord_error=CHORD_ERROR)
    assert {"body", "volume"} <= codes(bowl(), short.corners)


def test_a_hole_filled_flat() -> None:
    """The facets about the pole are replaced by a flat lid: closed, but neither covered nor near."""
    solid = bowl()
    mesh = revolve(solid, chord_error=CHORD_ERROR)
    about = (mesh.triangles == 0).any(axis=1)
    ring = mesh.triangles[about]
    vertices = mesh.vertices.copy()
    vertices[0, 2] = vertices[ring[ring > 0], 2].mean()
    found = proof(solid, vertices[mesh.triangles], mesh.normals)
    assert "forming" in {code for code, _ in found.findings}
    # Four facets in the place of many: a lid across the whole dish.
    whole = mesh.triangles[mesh.forming :]
    rim = np.intersect1d(mesh.triangles[: mesh.forming], whole)
    order = rim[np.argsort(np.arctan2(mesh.vertices[rim, 1], mesh.vertices[rim, 0]))]
    lid = np.array([[order[0], order[k], order[k + 1]] for k in range(1, len(order) - 1)])
    corners = mesh.vertices[np.concatenate([whole, lid])]
    assert {"volume"} <= codes(solid, corners)
    assert codes(solid, corners) & {"forming", "coverage"}


def test_sentences_say_what_where_and_how_much(made: tuple[Solid, Mesh]) -> None:
    solid, mesh = made
    raised = dict(proof(solid, shifted(mesh, up=0.2), mesh.normals).findings)
    assert raised["forming"].startswith("the forming surface strays by 0.2")
    assert " at radius " in raised["forming"]
    assert raised["forming"].endswith("; allowed: 0.05 mm")
    missing = dict(proof(solid, mesh.corners[1:], mesh.normals[1:]).findings)
    assert missing["open"].startswith("3 edges have one facet only, so that the surface is open, the first at radius ")


def dense(surface: Surface, corners: Array, steps: int = 40) -> tuple[Array, Array]:
    """Return the range of the distance over facets by a lattice of samples."""
    one, two = (part.ravel() for part in np.meshgrid(np.arange(steps + 1), np.arange(steps + 1)))
    inside = one + two <= steps
    shares = np.stack([steps - one - two, one, two])[:, inside] / steps
    points = np.einsum("cs,mcx->msx", shares, corners)
    values = surface.touch(points.reshape(-1, 3)).distance.reshape(len(corners), -1)
    return values.min(axis=1), values.max(axis=1)


def scattered(surface: Surface, sizes: Array, seed: int) -> Array:
    """Return facets of all shapes, with corners near a surface."""
    random = np.random.default_rng(seed)
    corners = np.empty((len(sizes), 3, 3))
    for corner in range(3):
        shares = np.clip(0.5 + sizes * random.uniform(-1, 1, len(sizes)), 0, 1)
        if isinstance(surface, TurnedCurve):
            plane = surface.curve.points(surface.curve.start + shares * (surface.curve.end - surface.curve.start))
        else:
            assert isinstance(surface, TurnedArc)
            plane = surface.path.along(surface.number, shares)
        angles = sizes * random.uniform(-1, 1, len(sizes))
        corners[:, corner] = np.column_stack([plane[:, 0] * np.cos(angles), plane[:, 0] * np.sin(angles), plane[:, 1]])
    return corners + random.normal(0.0, 1e-3, corners.shape)


SURFACES = {
    "paraboloid": TurnedCurve(Meridian.of_face(Face(110.0), 200.0)),
    "dome": TurnedCurve(turned_over(Meridian.of_face(Face(12.0), 36.0))),
    "turning over": TurnedCurve(Meridian.of_face(Face(100.0, asphere=(-2.2e-8,)), 150.0)),
    "fillet": stretches(bored_dome())[1],
    "land": stretches(bored_dome())[2],
    "side": stretches(bored_dome())[3],
    "bore": stretches(bored_dome())[5],
}


@pytest.mark.parametrize("name", SURFACES)
@settings(max_examples=8, deadline=None)
@given(st.integers(0, 10**6), st.floats(0.005, 0.08))
def test_bounds_hold_and_are_close(name: str, seed: int, size: float) -> None:
    surface = SURFACES[name]
    corners = scattered(surface, np.full(40, size), seed)
    spans = facet_spans(surface, corners.reshape(-1, 3), np.arange(120).reshape(-1, 3))
    low, high = dense(surface, corners)
    assert (spans.low <= low + 1e-11).all()
    assert (spans.high >= high - 1e-11).all()
    # Samples a fortieth of a side apart miss a little themselves.
    room = 0.05 * (high - low) + 1e-7
    assert (spans.low >= low - room).all()
    assert (spans.high <= high + room).all()
