"""Meshes of drilled solids: closed, outward, proved; and holes planted wrong one by one."""

from __future__ import annotations

from collections.abc import Callable
from math import cos, pi, sin

import numpy as np
import pytest
import trimesh
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from profiles.arcpath import ArcPath
from profiles.drilled_mesh import drilled_mesh
from profiles.drilling import DrilledSolid
from profiles.errors import GeometryError
from profiles.face import Face
from profiles.hole import Hole
from profiles.meridian import Meridian
from profiles.mesh_deviation import MeshDeviation, mesh_deviation
from profiles.revolve import Mesh, revolve
from profiles.solids import Solid, turned_over

CHORD_ERROR = 0.05


def dome(*, bore: float = 8.0, spigot: float = 60.0) -> Solid:
    """Return a male mould of 200 mm with bore and spigot."""
    whole = turned_over(Meridian.of_face(Face(60.0), 110.0)).raised(70.0)
    curve = whole.part(float(whole.at_radius(bore)), whole.end)
    radius, height = curve.points(curve.end)
    slope = -float(curve.slope(curve.end))
    edge = (radius + 3.0 * np.sin(slope), height - 3.0 * (1.0 - np.cos(slope)))
    vertices = [(radius, height), edge, (edge[0] + 6.0, edge[1]), (edge[0] + 6.0, 0.0), (spigot, 0.0)]
    vertices += [(spigot, -9.0), (bore, -9.0), (bore, float(curve.height(curve.start)))]
    return Solid(curve, ArcPath(np.array(vertices), np.array([np.tan(0.25 * slope), *[0.0] * 6])))


def bowl() -> Solid:
    """Return a cavity with a land."""
    curve = Meridian.of_face(Face(60.0), 110.0).raised(20.0)
    radius, height = curve.points(curve.end)
    vertices = [(radius, height), (radius + 12.0, height), (radius + 12.0, 0.0), (0.0, 0.0), (0.0, 20.0)]
    return Solid(curve, ArcPath(np.array(vertices), np.zeros(4)))


def ring(number: int, distance: float, diameter: float, *, top: float = np.inf) -> tuple[Hole, ...]:
    angles = [2.0 * pi * one / number for one in range(number)]
    return tuple(Hole((distance * cos(angle), distance * sin(angle)), diameter, top=top) for angle in angles)


HOLES = {
    "dome": (dome(), (*ring(3, 30.0, 2.0), *ring(3, 75.0, 3.0), *ring(4, 68.0, 8.0, top=14.0)[1:])),
    "bowl": (
        bowl(),
        (
            Hole((0.0, 0.0), 4.0),
            *ring(3, 50.0, 2.0),
            *ring(4, 90.0, 8.0, top=30.0),
            # A vent drilled wide from behind, and one through the land.
            Hole((0.0, -40.0), 6.0, top=15.0),
            Hole((0.0, -40.0), 0.8, bottom=15.0),
            Hole((0.0, 105.5), 2.0),
        ),
    ),
}


@pytest.fixture(scope="module", params=HOLES)
def made(request: pytest.FixtureRequest) -> tuple[DrilledSolid, Mesh]:
    turned, holes = HOLES[request.param]
    solid = DrilledSolid(turned, holes)
    return solid, drilled_mesh(solid, chord_error=CHORD_ERROR)


def proof(solid: DrilledSolid, mesh: Mesh) -> MeshDeviation:
    return mesh_deviation(solid, mesh.corners, mesh.normals, chord_error=CHORD_ERROR)


def heights(mesh: Mesh) -> np.ndarray:
    corners = mesh.corners
    sides = corners - np.roll(corners, 1, axis=1)
    area = np.linalg.norm(np.cross(sides[:, 0], sides[:, 1]), axis=1)
    return area / np.linalg.norm(sides, axis=2).max(axis=1)


def test_a_drilled_mesh_is_proved(made: tuple[DrilledSolid, Mesh]) -> None:
    solid, mesh = made
    found, plain = proof(solid, mesh), revolve(solid.turned, chord_error=CHORD_ERROR)
    turned = mesh_deviation(solid.turned, plain.corners, plain.normals, chord_error=CHORD_ERROR)
    assert found.findings == ()
    assert found.normal <= CHORD_ERROR
    assert found.body <= CHORD_ERROR
    assert found.forming_facets == mesh.forming
    # Thin facets at the holes lean no more than the others.
    assert found.slope <= 1.1 * turned.slope
    assert heights(mesh).min() > 4.0 * np.spacing(np.float32(solid.size))
    # What the holes take away is right far closer than the tolerance: only what the mouths lie off counts.
    taken = turned.volume - found.volume
    mouths = sum(pi * hole.radius**2 for hole in solid.holes if hole.open_above)
    assert taken == pytest.approx(solid.turned.volume - solid.volume, abs=CHORD_ERROR * mouths + 0.5)


def test_an_independent_reader(made: tuple[DrilledSolid, Mesh]) -> None:
    solid, mesh = made
    read = trimesh.Trimesh(mesh.vertices, mesh.triangles, process=False)
    assert read.is_watertight
    assert read.is_winding_consistent
    assert read.volume == pytest.approx(solid.volume, abs=CHORD_ERROR * solid.area)
    assert read.area == pytest.approx(solid.area, rel=2e-3)
    tunnels = sum(hole.through for hole in solid.holes) + (1 if solid.turned.curve.start > 0.0 else 0)
    stepped = sum(hole.open_above and not hole.open_below for hole in solid.holes)
    assert read.euler_number == 2 - 2 * (tunnels + stepped)
    for hole in solid.holes:
        # A needle through a hole meets no facet, and in one that is blind from below those at its end and above.
        blind = hole.open_below and not hole.open_above and hole.top != 15.0
        assert pierced(mesh, hole.centre) == ([hole.top] if blind else [])


def pierced(mesh: Mesh, centre: tuple[float, float]) -> list[float]:
    """Return the heights of the flat facets that an upright line beside a hole's axis goes through."""
    corners = mesh.corners[:, :, :2] - centre - (1e-3, 2e-3)
    after = np.roll(corners, -1, axis=1)
    across = corners[..., 0] * after[..., 1] - corners[..., 1] * after[..., 0]
    inside = (across > 0.0).all(axis=1) | (across < 0.0).all(axis=1)
    heights = mesh.corners[inside, :, 2]
    return heights[(heights == heights[:, :1]).all(axis=1), 0].tolist()


def test_facets_far_from_holes_are_those_of_the_turned_solid(made: tuple[DrilledSolid, Mesh]) -> None:
    solid, mesh = made
    step = float(np.spacing(np.float32(solid.size)))
    turned = revolve(solid.turned, chord_error=CHORD_ERROR - step)
    whole = {tuple(sorted(map(tuple, facet))) for facet in turned.corners[: turned.forming].tolist()}
    kept = [tuple(sorted(map(tuple, facet))) in whole for facet in mesh.corners[: mesh.forming].tolist()]
    near = np.zeros(mesh.forming, dtype=bool)
    middles = mesh.corners[: mesh.forming].mean(axis=1)
    for hole in solid.holes:
        near |= np.hypot(*(middles[:, :2] - hole.centre).T) < hole.radius + 12.0
    assert all(kept[row] for row in np.flatnonzero(~near))
    assert sum(kept) > 0.8 * turned.forming


def test_the_same_bytes_twice(made: tuple[DrilledSolid, Mesh]) -> None:
    solid, mesh = made
    again = drilled_mesh(solid, chord_error=CHORD_ERROR)
    assert again.vertices.tobytes() == mesh.vertices.tobytes()
    assert again.triangles.tobytes() == mesh.triangles.tobytes()
    assert again.forming == mesh.forming
    assert (mesh.vertices == mesh.vertices.astype(np.float32)).all()


def test_without_holes_it_is_the_turned_mesh() -> None:
    solid = dome()
    found, turned = drilled_mesh(DrilledSolid(solid), chord_error=CHORD_ERROR), revolve(solid, chord_error=CHORD_ERROR)
    assert found.vertices.tobytes() == turned.vertices.tobytes()
    assert found.triangles.tobytes() == turned.triangles.tobytes()
    assert found.forming == turned.forming


def test_a_prism_has_the_volume_of_its_hole_and_strays_evenly() -> None:
    solid = DrilledSolid(dome(), ring(1, 70.0, 12.0, top=20.0))
    mesh, turned = drilled_mesh(solid, chord_error=CHORD_ERROR), revolve(solid.turned, chord_error=CHORD_ERROR - 7.7e-6)
    volume = [trimesh.Trimesh(one.vertices, one.triangles, process=False).volume for one in (turned, mesh)]
    assert volume[0] - volume[1] == pytest.approx(pi * 36.0 * 20.0, rel=1e-6)
    wall = np.hypot(*(mesh.vertices[mesh.vertices[:, 2] == 20.0, :2] - (70.0, 0.0)).T)
    wall = wall[wall > 1.0]
    sides = len(wall)
    assert 0.0 < wall.max() - 6.0 <= 0.91 * CHORD_ERROR
    assert 6.0 - wall.min() * cos(pi / sides) == pytest.approx(0.5 * (wall.max() - 6.0), rel=0.05)


def with_holes(turned: Solid, holes: tuple[Hole, ...]) -> Mesh:
    return drilled_mesh(DrilledSolid(turned, holes), chord_error=CHORD_ERROR)


def changed(hole: Hole, **to: object) -> Hole:
    return Hole(**({name: getattr(hole, name) for name in ("centre", "diameter", "bottom", "top")} | to))  # type: ignore[arg-type]


def aside(hole: Hole, distance: float) -> Hole:
    return changed(hole, centre=(hole.centre[0] + distance, hole.centre[1]))


TAU = CHORD_ERROR
WRONG: dict[str, Callable[[Hole], tuple[Hole, ...]]] = {
    "missing": lambda _: (),
    "one more": lambda hole: (hole, Hole((-20.0, -25.0), 2.0)),
    "one more, blind": lambda hole: (hole, Hole((-20.0, -25.0), 2.0, top=12.0)),
    "a little wider": lambda hole: (changed(hole, diameter=hole.diameter + 6.0 * TAU),),
    "much wider": lambda hole: (changed(hole, diameter=hole.diameter + 2.0),),
    "a little narrower": lambda hole: (changed(hole, diameter=hole.diameter - 6.0 * TAU),),
    "much narrower": lambda hole: (changed(hole, diameter=0.4 * hole.diameter),),
    "a little aside": lambda hole: (aside(hole, 3.0 * TAU),),
    "far aside": lambda hole: (aside(hole, -4.0),),
}
WRONG_BLIND: dict[str, Callable[[Hole], tuple[Hole, ...]]] = {
    "a little too deep": lambda hole: (changed(hole, top=hole.top + 3.0 * TAU),),
    "far too deep": lambda hole: (changed(hole, top=hole.top + 3.0),),
    "a little too short": lambda hole: (changed(hole, top=hole.top - 3.0 * TAU),),
    "far too short": lambda hole: (changed(hole, top=0.5 * hole.top),),
    "through": lambda hole: (changed(hole, top=np.inf),),
}
WRONG_THROUGH: dict[str, Callable[[Hole], tuple[Hole, ...]]] = {
    "not through": lambda hole: (changed(hole, top=12.0),),
    "all but through": lambda hole: (changed(hole, bottom=5.0),),
    "from above only": lambda hole: (changed(hole, bottom=14.0),),
}
# The first hole of the dome runs through, the eighth of the bowl is blind.
CASES = [("dome", fault, 0) for fault in (*WRONG, *WRONG_THROUGH)]
CASES += [("bowl", fault, 7) for fault in (*WRONG, *WRONG_BLIND)]


@pytest.mark.parametrize(("name", "fault", "number"), CASES)
def test_planted_faults_are_found(name: str, fault: str, number: int) -> None:
    turned, holes = HOLES[name]
    spoil = (WRONG | WRONG_BLIND | WRONG_THROUGH)[fault]
    spoilt = (*holes[:number], *spoil(holes[number]), *holes[number + 1 :])
    found = proof(DrilledSolid(turned, holes), with_holes(turned, spoilt))
    codes = {code for code, _ in found.findings}
    assert codes <= {"hole", "body", "forming", "facing", "coverage", "volume"}
    assert codes & ({"body", "forming"} if fault.startswith("one more") else {"hole"})


@pytest.mark.parametrize(
    "holes",
    [
        # The pole of the mesh stands on a wall, or beside it by less than the chord error.
        (Hole((0.3, 0.1), 0.6),),
        (Hole((0.3, 0.0), 0.6),),
        (Hole((3.0, 0.0), 6.02),),
        # A step that is narrower than what is taken for one wall.
        (Hole((30.0, 0.0), 6.0, top=15.0), Hole((30.0, 0.0), 5.5, bottom=15.0)),
        (Hole((30.0, 0.0), 5.5, top=15.0), Hole((30.0, 0.0), 6.0, bottom=15.0)),
    ],
)
def test_holes_in_awkward_places(holes: tuple[Hole, ...]) -> None:
    solid = DrilledSolid(bowl(), holes)
    found = proof(solid, with_holes(bowl(), holes))
    assert found.findings == ()
    assert found.volume == pytest.approx(solid.volume, abs=CHORD_ERROR * solid.area)


def step(*, wide: float = 6.0, narrow: float = 0.8, level: float = 15.0) -> tuple[Hole, ...]:
    return (Hole((0.0, -40.0), wide, top=level), Hole((0.0, -40.0), narrow, bottom=level))


@pytest.mark.parametrize(
    "holes",
    [
        *(step(wide=6.25), step(wide=9.0), step(narrow=1.1), step(narrow=3.0), step(level=15.3), step(level=11.0)),
        *(step()[:1], step()[1:], (Hole((0.0, -40.0), 0.8),), (Hole((0.0, -40.0), 6.0),)),
    ],
)
def test_a_stepped_hole_drilled_otherwise(holes: tuple[Hole, ...]) -> None:
    solid = DrilledSolid(bowl(), step())
    assert proof(solid, with_holes(bowl(), step())).findings == ()
    assert "hole" in dict(proof(solid, with_holes(bowl(), holes)).findings)


def test_a_mesh_without_holes_and_holes_where_none_are_wanted() -> None:
    turned, holes = HOLES["bowl"]
    mesh = revolve(turned, chord_error=CHORD_ERROR)
    found = proof(DrilledSolid(turned, holes), mesh)
    assert [sentence for code, sentence in found.findings if code == "hole"] == [
        f"{hole}: is missing, or elsewhere, or of another size: no facet lies on its wall" for hole in holes
    ]
    drilled = with_holes(turned, holes)
    found = mesh_deviation(turned, drilled.corners, drilled.normals, chord_error=CHORD_ERROR)
    assert {"body", "coverage"} <= {code for code, _ in found.findings}


def test_a_hole_with_a_lid() -> None:
    """Both mouths closed by flat facets: everything lies near where it should, but there is no wall."""
    turned, holes = HOLES["bowl"]
    solid, mesh = DrilledSolid(turned, holes[:1]), with_holes(turned, holes[:1])
    walls = mesh.triangles[np.hypot(*mesh.vertices[mesh.triangles, :2].T).T.max(axis=1) < 2.1]
    mouth = np.unique(walls[mesh.vertices[walls, 2] > 0.0])
    order = mouth[np.argsort(np.arctan2(mesh.vertices[mouth, 1], mesh.vertices[mouth, 0]))]
    lid = np.array([[order[0], order[one], order[one + 1]] for one in range(1, len(order) - 1)])
    base = np.unique(walls[mesh.vertices[walls, 2] == 0.0])
    under = base[np.argsort(np.arctan2(mesh.vertices[base, 1], mesh.vertices[base, 0]))]
    floor = np.array([[under[0], under[one + 1], under[one]] for one in range(1, len(under) - 1)])
    plugged = np.array([facet for facet in mesh.triangles.tolist() if facet not in walls.tolist()])
    spoilt = Mesh(mesh.vertices, np.concatenate([plugged, lid, floor]), mesh.forming)
    found = proof(solid, spoilt)
    assert dict(found.findings)["hole"].endswith("no facet lies on its wall")


def test_turned_about_the_axis_and_mirrored(made: tuple[DrilledSolid, Mesh]) -> None:
    solid, mesh = made
    angle = 0.01
    about = np.array([[cos(angle), -sin(angle), 0.0], [sin(angle), cos(angle), 0.0], [0.0, 0.0, 1.0]])
    turned = Mesh(mesh.vertices @ about.T, mesh.triangles, mesh.forming)
    assert "hole" in {code for code, _ in proof(solid, turned).findings}
    mirrored = Mesh(mesh.vertices * (-1.0, 1.0, 1.0), mesh.triangles[:, ::-1], mesh.forming)
    assert "hole" in {code for code, _ in proof(solid, mirrored).findings}


@settings(max_examples=8, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(data=st.data())
def test_random_holes(data: st.DataObject) -> None:
    turned = dome(spigot=50.0) if data.draw(st.booleans()) else bowl()
    low = -9.0 if turned.curve.start > 0.0 else 0.0
    holes: list[Hole] = []
    for _ in range(data.draw(st.integers(1, 6))):
        angle, distance = data.draw(st.floats(0.0, 6.3)), data.draw(st.floats(0.0, 100.0))
        top = data.draw(st.sampled_from([np.inf, low + 3.0, 12.0]))
        hole = Hole((distance * cos(angle), distance * sin(angle)), data.draw(st.floats(0.4, 12.0)), top=top)
        try:
            DrilledSolid(turned, (*holes, hole))
        except GeometryError:
            continue
        holes.append(hole)
    solid = DrilledSolid(turned, tuple(holes))
    error = data.draw(st.sampled_from([0.02, 0.1]))
    mesh = drilled_mesh(solid, chord_error=error)
    found = mesh_deviation(solid, mesh.corners, mesh.normals, chord_error=error)
    assert found.findings == ()
    assert found.volume == pytest.approx(solid.volume, abs=error * solid.area)
