"""Air holes and bolts: whole packages made, read by others and proved; what is refused, asked and said."""

from __future__ import annotations

import re
from pathlib import Path

import ezdxf
import numpy as np
import pytest
import trimesh
from hypothesis import given, settings
from hypothesis import strategies as st
from typer.testing import CliRunner, Result

from fabricate.command import app
from fabricate.holes import BOLT_COVER, POINT_LENGTH, drilled_mould, drilling_words, sheet_over
from fabricate.job import parse_job
from fabricate.notices import notices
from fabricate.order import DRAWING, SOLID, Order
from fabricate.prove_solid import prove_solid
from outputs.stl import write_stl
from profiles.drilling import DrilledSolid
from profiles.errors import DishwrightError, JobError

JOB = """
title = "Drilled dish"
units = "{units}"
[reflector]
focal_length = {f20}
rim_diameter = {f60}
reflecting_face = "concave"
[sheet]
material = "aluminium 1050-O"
thickness = {f1}
[forming]
process = "spinning"
contact_face = "{contact}"
trim_allowance = {f4}
[forming.springback]
law = "none"
[forming.thinning]
law = "none"
[mould]
material = "steel"
land_width = {f6}
edge_radius = {f4}
{mould}
{air}
{bolts}
[tolerance.files]
chord_error = {chord}
[drawing]
version = "{version}"
entities = "{entities}"
{turning}
"""
AIR = "[mould.air_holes]\ndiameter = {diameter}\ncount = {count}\ncircle_diameter = {circle}"
BOLTS = "[mould.bolts]\ncircle_diameter = {circle}\ncount = {count}\nhole_diameter = {diameter}\nhole_depth = {depth}"
TURNING = """
[turning]
spindle_direction = "M3"
spindle_limit_untrued = 400
spindle_limit = 1500
depth_of_cut = 4.0
[turning.control]
x_word = "diameter"
plane_word = "G18"
units_word = "G21"
absolute_word = "G90"
feed_per_rev_word = "G95"
spindle_limit_word = "G92"
arcs = "centre"
decimals = 4
"""


def air(*, diameter: float = 1.0, count: int = 4, circle: float = 40.0) -> str:
    return AIR.format(diameter=diameter, count=count, circle=circle)


def bolts(*, circle: float = 24.0, count: int = 3, diameter: float = 5.0, depth: float = 12.0) -> str:
    return BOLTS.format(circle=circle, count=count, diameter=diameter, depth=depth)


def job(*, contact: str = "concave", mould: str = "", air: str = air(), bolts: str = bolts(), **changes: object) -> str:
    """Return a small job; its holes are given in its units."""
    scale = 25.4 if changes.get("units") == "inch" else 1.0
    lengths = {f"f{value}": value / scale for value in (1, 4, 6, 20, 60)}
    values = {"units": "mm", "version": "R2010", "entities": "polyline", "turning": "", "chord": 0.02 / scale}
    return JOB.format(**(values | lengths | changes), contact=contact, mould=mould, air=air, bolts=bolts)


def run(*arguments: object) -> Result:
    """Run the command; whatever is no exit is raised."""
    result = CliRunner().invoke(app, [str(argument) for argument in arguments])
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    return result


def order_of(text: str) -> Order:
    return Order(parse_job(text, name="job.toml"))


INCH_AIR = air(diameter=0.0394, circle=1.575)
INCH_BOLTS = bolts(circle=0.95, diameter=0.2, depth=0.5)
PACKAGES = {
    "male": job(),
    "female": job(contact="convex"),
    "male in inches": job(units="inch", air=INCH_AIR, bolts=INCH_BOLTS),
    "female in inches": job(units="inch", contact="convex", air=INCH_AIR, bolts=INCH_BOLTS),
    "bored, with a spigot": job(
        mould="bore_diameter = 8.0\nspigot_diameter = 30.0\nspigot_length = 6.0",
        air=air(circle=18.0),
        bolts=bolts(circle=44.0, diameter=4.0),
        version="R12",
    ),
    "on the axis, lines and arcs": job(air=air(count=1, circle=0.0, diameter=2.0), entities="line-arc"),
    "air holes only": job(contact="convex", bolts=""),
    "bolts only, R12, lines and arcs": job(air="", version="R12", entities="line-arc"),
    "hub with a pilot": job(
        mould="[mould.hub]\ndiameter = 16.0\npilot_diameter = 4.0\npilot_length = 3.0",
        air=air(circle=10.0),
        bolts=bolts(circle=28.0, diameter=4.0),
    ),
}


@pytest.fixture(scope="module", params=PACKAGES)
def made(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> tuple[Order, Path]:
    folder = tmp_path_factory.mktemp("made")
    (folder / "job.toml").write_text(PACKAGES[request.param], encoding="utf-8")
    result = run("make", folder / "job.toml", "-o", folder / "out")
    assert result.exit_code == 0, result.stderr + result.stdout
    return order_of(PACKAGES[request.param]), folder


def test_a_package_with_holes_is_made_and_proved(made: tuple[Order, Path]) -> None:
    order, folder = made
    result = run("prove", folder / "job.toml", folder / "out")
    assert result.exit_code == 0, result.stdout
    assert order.exact_solid.holes
    again = order_of(order.text)
    assert again.mesh.vertices.tobytes() == order.mesh.vertices.tobytes()


def test_the_solid_as_another_program_reads_it(made: tuple[Order, Path]) -> None:
    order, folder = made
    mesh = trimesh.load_mesh(folder / "out" / SOLID)
    solid = order.exact_solid
    assert mesh.is_watertight
    assert mesh.volume == pytest.approx(solid.volume, abs=order.tolerance * solid.area)
    tunnels = sum(hole.through for hole in solid.holes) + (order.mould.bore_radius > 0.0)
    assert mesh.euler_number == 2 - 2 * tunnels
    # No corner stands in a hole, and each hole has corners all around it.
    for hole in solid.holes:
        away = np.hypot(*(mesh.vertices[:, :2] - hole.centre).T)
        level = mesh.vertices[:, 2] < (hole.top - 1e-3 if not hole.open_above else np.inf)
        assert away[level].min() > hole.radius - order.tolerance
        assert (away[level] < hole.radius + order.tolerance).sum() >= 12


def test_the_drawing_as_another_program_reads_it(made: tuple[Order, Path]) -> None:
    order, folder = made
    document = ezdxf.readfile(folder / "out" / DRAWING)
    drawn = document.modelspace().query('*[layer=="DRILLING"]')
    points = [(point[0], point[1]) for entity in drawn for point in corners_of(entity)]
    for table in (order.job.mould.air_holes, order.job.mould.bolts):
        if table is None:
            continue
        radius = 0.5 * table.circle_diameter
        half = 0.5 * (table.diameter if hasattr(table, "diameter") else table.hole_diameter)
        for edge in (max(radius - half, 0.0), radius + half):
            assert min(abs(point[1] - edge) for point in points) < 1e-6
    lowest = order.mould.lowest if order.job.mould.air_holes and order.job.mould.bolts is None else order.mould.base
    assert min(abs(point[0] * order.unit - lowest) for point in points) < 1e-6
    said = re.sub(r"\s+", " ", " ".join(text.dxf.text for text in document.modelspace().query("TEXT")))
    for words in drilling_words(order.job):
        assert f"DRILLING: {words}" in said


def corners_of(entity: object) -> list[tuple[float, float]]:
    kind = entity.dxftype()  # type: ignore[attr-defined]
    if kind == "LINE":
        return [tuple(entity.dxf.start.vec2), tuple(entity.dxf.end.vec2)]  # type: ignore[attr-defined]
    if kind == "LWPOLYLINE":
        return [point[:2] for point in entity.get_points("xy")]  # type: ignore[attr-defined]
    return [tuple(vertex.dxf.location.vec2) for vertex in entity.vertices]  # type: ignore[attr-defined]


def test_half_of_a_hole_on_the_axis_is_drawn() -> None:
    order = order_of(PACKAGES["on the axis, lines and arcs"])
    outline = order.exact_solid.section(0)
    assert outline.vertices[:, 0].tolist() == [0.0, 1.0, 1.0, 0.0, 0.0]
    assert outline.vertices[3, 1] == pytest.approx(-order.mould.base, abs=1e-9)


# planted faults


def spoilt(folder: Path, target: Path) -> Path:
    (target / "out").mkdir()
    for entry in (folder / "out").iterdir():
        (target / "out" / entry.name).write_bytes(entry.read_bytes())
    return target / "out"


def findings(folder: Path, package: Path, failed: str) -> str:
    result = run("prove", folder / "job.toml", package)
    assert result.exit_code == 1
    text = re.sub(r"\s+", " ", result.stdout)
    assert f"{failed}:" in text
    return text


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"air": ""}, "hole of 1 mm at (20, 0): is missing"),
        ({"bolts": ""}, "hole of 5 mm at (12, 0): is missing"),
        ({"air": air(diameter=1.2)}, "hole of 1 mm at (20, 0): strays by 0.1"),
        ({"air": air(count=8)}, "the rest of the solid strays by"),
        ({"bolts": bolts(circle=24.2)}, "hole of 5 mm at (12, 0): strays by 0.1"),
        ({"bolts": bolts(count=4)}, "strays by"),
        (
            {"bolts": bolts(depth=13.0)},
            "hole of 5 mm at (12, 0): its wall runs from 0.0000 to 13.0000 mm; allowed: 0.0000 to 12.0000",
        ),
    ],
)
def test_a_solid_drilled_otherwise(changes: dict[str, str], message: str, tmp_path: Path) -> None:
    other = order_of(job(**changes)).mesh  # type: ignore[arg-type]
    write_stl(other.vertices, other.triangles, tmp_path / SOLID, label="drilled otherwise")
    verdict = prove_solid(tmp_path / SOLID, order_of(job()))
    assert not verdict.passed
    assert message in "\n".join(verdict.findings)


def test_a_drawing_without_a_hole_or_with_it_elsewhere(made: tuple[Order, Path], tmp_path: Path) -> None:
    order, folder = made
    kinds = len(drilling_words(order.job))
    package = spoilt(folder, tmp_path)
    document = ezdxf.readfile(package / DRAWING)
    for entity in document.modelspace().query('*[layer=="DRILLING"]'):
        entity.translate(0.01, 0.0, 0.0)
    document.saveas(package / DRAWING)
    assert "layer DRILLING does not show the holes as they are drilled" in findings(folder, package, DRAWING)
    for entity in document.modelspace().query('*[layer=="DRILLING"]'):
        document.modelspace().delete_entity(entity)
    document.saveas(package / DRAWING)
    assert f"layer DRILLING shows 0 kinds of holes; allowed: {kinds}" in findings(folder, package, DRAWING)


def test_a_drawing_that_says_another_number(tmp_path: Path) -> None:
    (tmp_path / "job.toml").write_text(job(), encoding="utf-8")
    assert run("make", tmp_path / "job.toml", "-o", tmp_path / "out").exit_code == 0
    content = (tmp_path / "out" / DRAWING).read_bytes()
    assert b"DRILLING: 4 air holes" in content
    (tmp_path / "out" / DRAWING).write_bytes(content.replace(b"DRILLING: 4 air holes", b"DRILLING: 6 air holes"))
    assert 'the notes do not say "DRILLING: 4 air holes of diameter 1 mm' in findings(
        tmp_path, tmp_path / "out", DRAWING
    )


# what is refused

SPIGOT = "spigot_diameter = 30.0\nspigot_length = 6.0"
HUB = "[mould.hub]\ndiameter = 16.0"
REFUSED = {
    "several on the axis": (
        {"air": air(circle=0.0)},
        "mould.air_holes.circle_diameter: value is 0 mm with count = 4: there is room for one hole on the axis; "
        "allowed: above 0, or count = 1; do: state the circle",
    ),
    "off its middle": (
        {"air": air(count=1, circle=0.5)},
        "value is 0.5 mm, and a hole of 1 mm there holds the axis, off its middle; allowed: 0, or 1 mm and more",
    ),
    "air holes overlap": (
        {"air": air(count=60, circle=20.0)},
        "value is 20 mm, so that 60 holes of 1 mm stand 1.047 apart; allowed: at least 38.2146 mm, which leaves a wall",
    ),
    "bolts overlap": (
        {"bolts": bolts(count=14)},
        "mould.bolts.circle_diameter: value is 24 mm, so that 14 holes of 5 mm stand 5.341 apart; allowed",
    ),
    "in inches": (
        {"units": "inch", "air": air(diameter=0.05, circle=0.4, count=40), "bolts": ""},
        "value is 0.4 in, so that 40 holes of 0.05 in stand 0.03138 apart; allowed: at least 1.1391 in, which leaves a "
        "wall of 0.0394 in",
    ),
    "bolts in the bore": (
        {"mould": "bore_diameter = 20.0"},
        "mould.bolts.circle_diameter: value is 24 mm with bore_diameter = 20 mm; allowed: at least 27 mm",
    ),
    "bolts in the spigot": (
        {"mould": SPIGOT},
        "mould.bolts.circle_diameter: value is 24 mm with spigot_diameter = 30 mm; allowed: at least 37 mm",
    ),
    "bolts outside": (
        {"bolts": bolts(circle=80.0)},
        "mould.bolts.circle_diameter: value is 80 mm with holes of 5 mm; allowed: 7 to 7",
    ),
    "no room on the base": (
        {"mould": "spigot_diameter = 79.0\nspigot_length = 6.0", "bolts": bolts(circle=100.0)},
        "allowed: no circle",
    ),
    "bolts too deep": (
        {"bolts": bolts(depth=48.0)},
        "mould.bolts.hole_depth: value is 48 mm, so that the drill's point, 0.3 diameters deeper, comes within 1",
    ),
    "bolts right through": ({"bolts": bolts(depth=60.0)}, "breaks through the forming surface; allowed: at most 46."),
    "bolts out of a land": (
        {"contact": "convex", "mould": "outer_diameter = 100.0", "bolts": bolts(circle=92.0, diameter=4.0, depth=53.0)},
        "mould.bolts.circle_diameter: value is 92 mm, and a hole of 4 mm at (46, 0): comes within 0.6",
    ),
    "air holes beyond the rim": (
        {"air": air(circle=58.0)},
        "mould.air_holes.circle_diameter: value is 58 mm, so that the holes come within 1 mm of the rim on the mould; "
        "allowed: at most 5",
    ),
    "air holes in the bore": (
        {"mould": "bore_diameter = 12.0", "air": air(circle=12.0)},
        "value is 12 mm, so that the holes meet the bore of 12 mm; allowed: at least 15 mm; do: make the circle larger",
    ),
    "air hole on the axis of the bore": (
        {"mould": "bore_diameter = 12.0", "air": air(circle=0.0, count=1)},
        "value is 0 mm, so that the holes meet",
    ),
    "air holes across the spigot": (
        {"mould": SPIGOT, "air": air(circle=29.0), "bolts": ""},
        "value is 29 mm, so that a hole lies across the edge at mould.spigot_diameter = 30 mm; allowed: at least "
        "33 mm, or at most 27 mm; do: make the circle larger or smaller",
    ),
    "air holes across the hub": (
        {"mould": HUB, "air": air(circle=16.0)},
        "a hole lies across the edge at mould.hub.diameter = 16 mm; allowed: at least 19 mm, or at most 13 mm",
    ),
    "air holes across the pilot": (
        {"mould": f"{HUB}\npilot_diameter = 4.0\npilot_length = 3.0", "air": air(circle=6.0, count=2)},
        "a hole lies across the edge at mould.hub.pilot_diameter = 4 mm; allowed: at least 7 mm; do",
    ),
    "air holes and bolts": (
        {"air": air(circle=24.0)},
        "mould.bolts.circle_diameter: value is 24 mm, and a hole of 1 mm at (12, 0) and hole of 5 mm at (12, 0): are ",
    ),
}


@pytest.mark.parametrize("name", REFUSED)
def test_refusals(name: str) -> None:
    changes, message = REFUSED[name]
    with pytest.raises(JobError, match=re.escape(message)) as refused:
        _ = order_of(job(**changes)).exact_solid  # type: ignore[arg-type]
    assert "; allowed: " in str(refused.value)
    assert "; do: " in str(refused.value)


def test_a_refusal_at_the_command(tmp_path: Path) -> None:
    (tmp_path / "job.toml").write_text(job(bolts=bolts(depth=48.0)), encoding="utf-8")
    result = run("make", tmp_path / "job.toml", "-o", tmp_path / "out")
    assert result.exit_code == 2
    assert "mould.bolts.hole_depth" in result.stderr
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize("contact", ["concave", "convex"])
def test_the_depth_that_is_allowed_is_allowed_and_leaves_the_cover(contact: str) -> None:
    with pytest.raises(JobError) as refused:
        _ = order_of(job(contact=contact, bolts=bolts(depth=70.0))).exact_solid
    allowed = re.search(r"allowed: at most ([\d.]+) mm, which leaves 3 mm", str(refused.value))
    assert allowed
    order = order_of(job(contact=contact, bolts=bolts(depth=float(allowed[1]) - 1e-4)))
    tip = order.exact_solid.holes[-1].top + POINT_LENGTH * 5.0
    curve = order.exact_solid.curve
    radius, height = curve.points(np.linspace(curve.start, curve.end, 100001)).T
    across = np.maximum(np.maximum(9.5 - radius, radius - 14.5), 0.0)
    assert np.hypot(across, np.maximum(height - tip, 0.0)).min() == pytest.approx(BOLT_COVER, abs=1e-3)


@settings(max_examples=20, deadline=None)
@given(
    contact=st.sampled_from(["concave", "convex"]),
    holes=st.tuples(st.floats(0.1, 20.0), st.integers(1, 12), st.one_of(st.just(0.0), st.floats(0.0, 80.0))),
    drilled=st.tuples(st.floats(1.0, 90.0), st.integers(2, 12), st.floats(0.5, 20.0), st.floats(0.1, 60.0)),
    mould=st.sampled_from(["", SPIGOT, "bore_diameter = 6.0", HUB]),
)
def test_any_holes_are_made_or_refused(
    contact: str, holes: tuple[float, int, float], drilled: tuple[float, int, float, float], mould: str
) -> None:
    text = job(
        contact=contact,
        mould=mould,
        air=air(diameter=holes[0], count=holes[1], circle=holes[2]),
        bolts=bolts(circle=drilled[0], count=drilled[1], diameter=drilled[2], depth=drilled[3]),
    )
    solid = made_or_refused(text)
    if isinstance(solid, str):
        assert re.search(r"mould\.(air_holes|bolts)\..*; allowed: .*; do: ", solid, re.DOTALL)
    else:
        assert len(solid.holes) == holes[1] + drilled[1]
        assert 0.0 < solid.volume < solid.turned.volume


def made_or_refused(text: str) -> DrilledSolid | str:
    try:
        return order_of(text).exact_solid
    except DishwrightError as error:
        return str(error)


# what is asked and said


def test_words() -> None:
    assert drilling_words(order_of(job()).job) == [
        "4 air holes of diameter 1 mm on a circle of diameter 40 mm, through to the forming side",
        "3 bolt holes of diameter 5 mm on a circle of diameter 24 mm, 12 mm deep from the base plane",
    ]
    inch = order_of(job(units="inch", air=air(count=1, circle=0.0, diameter=0.03), bolts="")).job
    assert drilling_words(inch) == ["1 air hole of diameter 0.03 in on the axis, through to the forming side"]
    assert drilling_words(order_of(job(air="", bolts="")).job) == []


def test_a_wide_air_hole_is_asked_about() -> None:
    said = "\n".join(notices(order_of(job(air=air(diameter=1.5)))))
    assert "mould.air_holes.diameter is 1.5 mm and the sheet over the holes is 1 thick: a hole wider than" in said
    assert "air_holes" not in "\n".join(notices(order_of(job(air=air(diameter=1.0)))))


def test_the_sheet_over_a_hole_is_the_formed_one() -> None:
    stations = '[forming.thinning]\nlaw = "stations"\nstations = [[0.0, 0.6], [20.0, 0.8], [30.0, 1.0]]'
    order = order_of(job(air=air(diameter=0.9)).replace('[forming.thinning]\nlaw = "none"', stations))
    # The sheet's radius on the mould is not the part's to the last digit: it lies on its inner face.
    assert sheet_over(order.chain, 0.0) == pytest.approx(0.6, abs=2e-3)
    assert sheet_over(order.chain, 20.0) == pytest.approx(0.8, abs=0.02)
    assert "the sheet over the holes is 0.8" in "\n".join(notices(order))


def test_a_program_says_that_the_holes_are_drilled_later() -> None:
    turned = order_of(job(turning=TURNING))
    words = "; ".join(drilling_words(turned.job))
    assert any(said.startswith(f"drilled, not turned: {words}. Bolt holes come before") for said in notices(turned))
    assert "drilled after" not in "\n".join(notices(order_of(job())))


def test_without_holes_the_solid_is_turned_only() -> None:
    order = order_of(job(air="", bolts=""))
    solid = drilled_mould(order.chain)
    assert solid.holes == ()
    assert solid.volume == solid.turned.volume
