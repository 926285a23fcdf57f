"""What an existing mould makes of a job's sheet: from its drawing, from its readings, and by the command."""

from __future__ import annotations

import json
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from typer.testing import CliRunner, Result

from fabricate.chain import Chain
from fabricate.command import app
from fabricate.drawing import CENTRE_LINE, MOULD_CURVE, to_drawing
from fabricate.from_mould import PartOfMould, part_of_mould, words
from fabricate.job import parse_job
from fabricate.job_keys import Job
from fabricate.measures import Units
from fabricate.order import Order
from outputs.dxf import Drawing, write_drawing
from profiles.arcpath import ArcPath
from profiles.errors import DishwrightError, FormatError, JobError

BASE = """
title = "Dish"
units = "{units}"
[reflector]
focal_length = {focal}
conic_constant = {conic}
rim_diameter = {rim}
hole_diameter = {hole}
reflecting_face = "{faces[0]}"
[sheet]
material = "aluminium 1085-O"
thickness = {thickness}
[forming]
process = "spinning"
contact_face = "{faces[1]}"
trim_allowance = {trim}
[forming.springback]
{springback}
[forming.thinning]
{thinning}
[mould]
bore_diameter = {bore}
[tolerance.files]
chord_error = {chord}
"""
LENGTHS = {
    "focal": 110.0,
    "rim": 400.0,
    "hole": 0.0,
    "thickness": 1.5,
    "trim": 8.0,
    "bore": 0.0,
    "chord": 0.02,
}
PERCENT = 'law = "focal-length"\npercent = 2.1'


def job_text(**changes: Any) -> str:
    values = LENGTHS | {
        "units": "mm",
        "conic": -1.0,
        "faces": ("concave", "concave"),
        "springback": PERCENT,
        "thinning": 'law = "none"',
    }
    values |= changes
    if values["units"] == "inch":
        values |= {name: values[name] / 25.4 for name in LENGTHS}
    return BASE.format(**values)


def job(**changes: Any) -> Job:
    return parse_job(job_text(**changes), name="dish.toml")


@cache
def demo(name: str) -> Order:
    text = files("fabricate").joinpath(f"demo/{name}.toml").read_text(encoding="utf-8")
    return Order(parse_job(text, name=name))


def draw(path: Path, curve: ArcPath, *, units: Units = "mm", layer: str = MOULD_CURVE) -> Path:
    """Write a curve of the lathe frame [mm] as the drawing of a mould."""
    write_drawing(Drawing(units, {layer: (to_drawing(curve, units),)}), path)
    return path


def drawing_of(order: Order, path: Path, *, units: Units = "mm") -> Path:
    return draw(path, order.mould.to_lathe(order.forming_arcs.path), units=units)


def sphere(path: Path, radius: float, reach: float, *, male: bool) -> Path:
    """Write the drawing of a mould that is one arc."""
    turn = float(np.arcsin(reach / radius))
    rise = radius * (1.0 - np.cos(turn))
    side = -1.0 if male else 1.0
    points = np.array([[0.0, 0.0 if male else -rise], [reach, -rise if male else 0.0]])
    return draw(path, ArcPath(points, np.array([side * np.tan(0.25 * turn)])))


def readings(path: Path, radius: np.ndarray, height: np.ndarray, *, unit: str = "_mm", head: str = "") -> Path:
    rows = (f"{where:.6f},{tall:.6f}\n" for where, tall in zip(radius, height, strict=True))
    path.write_text(f"{head}radius{unit},sag{unit}\n{''.join(rows)}", encoding="utf-8")
    return path


def on_mould(asked: Job, count: int = 25) -> tuple[np.ndarray, np.ndarray]:
    """Return points of a job's exact mould, heights rising to the rim [mm]."""
    surface = Chain(asked.in_millimetres()).forming_surface
    return surface.points(np.linspace(surface.start, surface.end, count)).T


def figures(found: PartOfMould) -> dict[str, Any]:
    return found.as_json("mm")


# a job's own mould


@pytest.mark.parametrize("name", ["lamp", "listening-dish", "display-bowl"])
def test_the_own_drawing_of_a_demo_job_makes_its_reflector(name: str, tmp_path: Path) -> None:
    order = demo(name)
    found = part_of_mould(order.job, drawing_of(order, tmp_path / "chuck.dxf"))
    said = figures(found)
    # The arcs take turns on either side of the curve, and the smooth bowl between them lies nearer than they do.
    assert said["mould_fit_rms"] < order.tolerance
    assert abs(said["largest_form_error"]) < 1.5 * order.tolerance
    assert said["best_focal_length"] == pytest.approx(said["wanted_focal_length"], rel=3e-4)
    assert said["wanted_focal_length"] == pytest.approx(order.chain.job.reflector.focal_length)
    assert said["mould_reach_radius"] == pytest.approx(
        float(order.mould.curve.radius(order.mould.curve.end)), abs=order.tolerance
    )
    assert found.part_reach > 0.5 * order.chain.job.reflector.rim_diameter


LAWS = [
    {"springback": 'law = "curvature"\ndepth_loss = 2.0', "faces": ("concave", "convex")},
    {"springback": 'law = "bending"\nflow_stress_mpa = 9.0', "thickness": 2.0},
    {"springback": PERCENT, "thinning": 'law = "sine-law"', "faces": ("convex", "concave")},
    {"springback": 'law = "stations"\nstations = [[0.0, 1.0], [100.0, 1.5], [200.0, 0.8]]'},
    {"springback": PERCENT, "conic": 0.0, "focal": 130.0},
    {"springback": PERCENT, "conic": -2.5, "hole": 60.0, "bore": 40.0},
    pytest.param(
        {
            "faces": ("concave", "convex"),
            "thinning": 'law = "stations"\nstations = [[0.0, 1.5], [120.0, 1.3], [204.0, 1.2]]',
        },
        marks=pytest.mark.slow,
    ),
]


@pytest.mark.parametrize("changes", LAWS)
def test_readings_of_the_own_mould_make_the_reflector(changes: dict[str, Any], tmp_path: Path) -> None:
    asked = job(**changes)
    radius, height = on_mould(asked, 60)
    found = part_of_mould(asked, readings(tmp_path / "chuck.csv", radius, height))
    said = figures(found)
    # A bowl of four terms follows the bends of a table to hundredths of a millimetre only, and says how nearly.
    smooth = not any("stations" in str(value) for value in changes.values())
    assert said["mould_fit_rms"] < (1e-5 if smooth else 1e-2)
    assert abs(said["largest_form_error"]) < (1e-4 if smooth else 4e-2)
    assert said["best_focal_length"] == pytest.approx(said["wanted_best_focal_length"], abs=1e-3 if smooth else 5e-2)


# another job's mould


@pytest.mark.parametrize(
    "changes",
    [
        {},
        {"springback": 'law = "curvature"\npercent = 3.0'},
        {"faces": ("concave", "convex"), "springback": 'law = "focal-length"\npercent = -1.5'},
    ],
)
def test_the_chuck_of_another_job_makes_the_reflector_of_that_job(changes: dict[str, Any], tmp_path: Path) -> None:
    other = Order(job(focal=123.0, **changes))
    found = part_of_mould(job(**changes), drawing_of(other, tmp_path / "other.dxf"))
    said = figures(found)
    assert said["best_focal_length"] == pytest.approx(123.0, abs=0.02)
    assert said["wanted_focal_length"] == pytest.approx(110.0)
    # What it is beside the reflector that was asked for: r²/4f for r²/4f.
    straight = 200.0**2 / 4.0 * (1.0 / 123.0 - 1.0 / 110.0)
    assert said["largest_form_error"] == pytest.approx(straight / np.hypot(1.0, 200.0 / 220.0), abs=0.03)
    assert said["at_radius"] == pytest.approx(200.0, abs=0.2)
    (_, focus, *_) = words(found, job(**changes))
    assert "13.0" in focus
    assert "longer than that of the face that the job asks for, 110.0000 mm" in focus


@pytest.mark.parametrize("thickness", [0.8, 1.5, 3.0])
def test_the_same_chuck_under_another_sheet(thickness: float, tmp_path: Path) -> None:
    # A sphere stays one through the sheet: in a cavity of radius 250 the mirror has what the sheet leaves of it.
    asked = job(
        thickness=thickness, faces=("concave", "convex"), springback='law = "none"', conic=0.0, focal=124.0, rim=300.0
    )
    found = part_of_mould(asked, sphere(tmp_path / "cavity.dxf", 250.0, 170.0, male=False))
    assert found.fit.rms < 1e-7
    vertex = 0.5 / float(found.part.face.curvature(0.0))
    assert vertex == pytest.approx(0.5 * (250.0 - thickness), abs=1e-5)


def test_a_mould_too_small_says_so(tmp_path: Path) -> None:
    asked = job()
    radius, height = on_mould(asked)
    inner = radius < 150.0
    found = part_of_mould(asked, readings(tmp_path / "small.csv", radius[inner], height[inner]))
    assert found.reach == pytest.approx(float(radius[inner].max()), abs=1e-5)
    assert found.part_reach < 152.0
    assert found.part.rim_radius == found.part_reach
    assert figures(found)["best_focal_length"] == pytest.approx(110.0, abs=1e-3)
    assert any(
        "short of the rim that the job asks for: the mould is too small for it" in text for text in words(found, asked)
    )


def test_a_mould_larger_than_the_part_is_used_as_far_as_the_trim(tmp_path: Path) -> None:
    asked, larger = job(), job(rim=700.0)
    found = part_of_mould(asked, readings(tmp_path / "large.csv", *on_mould(larger)))
    assert found.reach > 345.0
    assert 200.0 < found.part_reach < 210.0
    assert figures(found)["best_focal_length"] == pytest.approx(110.0, abs=1e-3)
    assert not any("short of the rim" in text for text in words(found, asked))


# readings as the bench sends them


@pytest.mark.parametrize(("side", "faces"), [(1.0, ("concave", "convex")), (-1.0, ("concave", "concave"))])
def test_readings_may_rise_or_fall_towards_the_rim(side: float, faces: tuple[str, str], tmp_path: Path) -> None:
    asked = job(faces=faces)
    radius, height = on_mould(asked)
    found = part_of_mould(asked, readings(tmp_path / "chuck.csv", radius, side * height - 42.0))
    assert figures(found)["best_focal_length"] == pytest.approx(110.0, abs=1e-3)
    assert found.fit.vertex_height == pytest.approx(-42.0 * side, abs=1e-4)


@pytest.mark.parametrize("seed", range(2))
def test_noise_of_the_bench(seed: int, tmp_path: Path) -> None:
    asked = job()
    radius, height = on_mould(asked)
    noise = np.random.default_rng(seed).normal(0.0, 0.02, len(radius))
    said = figures(part_of_mould(asked, readings(tmp_path / "chuck.csv", radius, height + noise)))
    assert said["best_focal_length"] == pytest.approx(110.0, abs=0.1)
    assert said["mould_fit_rms"] == pytest.approx(0.015, abs=0.01)
    assert abs(said["largest_form_error"]) < 0.05


def test_points_in_space_and_a_traverse_across_the_mould(tmp_path: Path) -> None:
    asked = job()
    radius, height = on_mould(asked)
    turn = np.linspace(0.0, 20.0, len(radius))
    rows = "".join(
        f"{r * np.cos(a):.7f},{r * np.sin(a):.7f},{-z:.7f}\n" for r, a, z in zip(radius, turn, height, strict=True)
    )
    path = tmp_path / "cloud.csv"
    path.write_text(f"x,y,z\n{rows}", encoding="utf-8")
    across = readings(tmp_path / "across.csv", np.append(-radius[::-1], radius), np.append(height[::-1], height))
    for source in (path, across):
        assert figures(part_of_mould(asked, source))["best_focal_length"] == pytest.approx(110.0, abs=1e-3)


@pytest.mark.parametrize(("unit", "length"), [("_in", 25.4), ("", 25.4), ("_mm", 1.0)])
def test_readings_in_the_units_they_state_or_those_of_the_job(unit: str, length: float, tmp_path: Path) -> None:
    asked = job(units="inch")
    radius, height = on_mould(asked)
    found = part_of_mould(asked, readings(tmp_path / "chuck.csv", radius / length, height / length, unit=unit))
    assert found.as_json("inch")["best_focal_length"] == pytest.approx(110.0 / 25.4, abs=1e-4)
    (_, focus, form, *_) = words(found, asked)
    assert "of best focal length 4.3307 in" in focus
    assert " mm" not in focus + form


@pytest.mark.parametrize("units", ["mm", "inch"])
def test_a_drawing_in_the_other_unit(units: Units, tmp_path: Path) -> None:
    order = demo("lamp")
    lamp = {"focal": 12.0, "rim": 60.0, "thickness": 0.8, "trim": 3.0, "springback": 'law = "curvature"\npercent = 1.0'}
    asked = job(units="inch" if units == "mm" else "mm", **lamp)
    found = part_of_mould(asked, drawing_of(order, tmp_path / "chuck.dxf", units=units))
    assert found.part.best_focal_length == pytest.approx(12.0, abs=4e-3)


def test_a_curve_drawn_from_the_rim_inwards(tmp_path: Path) -> None:
    order = demo("lamp")
    inwards = order.mould.to_lathe(order.forming_arcs.path).reversed()
    found = part_of_mould(order.job, draw(tmp_path / "chuck.dxf", inwards))
    assert found.part.best_focal_length == pytest.approx(12.0, abs=4e-3)


# what is refused


def refusal(asked: Job, source: Path) -> str:
    with pytest.raises(DishwrightError) as found:
        part_of_mould(asked, source)
    message = str(found.value)
    assert message.startswith(f"{source}: ")
    assert "; allowed: " in message
    assert "; do: " in message
    return message.removeprefix(f"{source}: ")


@pytest.mark.parametrize(
    ("faces", "drawn", "said"),
    [
        (
            ("concave", "concave"),
            "female",
            "the mould's curve rises from its centre, which is a female mould; allowed: a male",
        ),
        (
            ("concave", "convex"),
            "male",
            "the mould's curve falls from its centre, which is a male mould; allowed: a female",
        ),
    ],
)
def test_a_mould_of_the_other_kind(faces: tuple[str, str], drawn: str, said: str, tmp_path: Path) -> None:
    message = refusal(job(faces=faces), sphere(tmp_path / "other.dxf", 250.0, 200.0, male=drawn == "male"))
    assert message.startswith(said)
    assert f'as forming.contact_face is "{faces[1]}"' in message


def test_a_drawing_without_a_mould(tmp_path: Path) -> None:
    line = ArcPath(np.array([[0.0, 0.0], [0.0, 50.0]]), np.zeros(1))
    message = refusal(job(), draw(tmp_path / "other.dxf", line, layer=CENTRE_LINE))
    assert message.startswith("layer MOULD_CURVE holds 0 paths; allowed: 1, the mould's curve from the axis or bore")


def test_a_drawing_with_two_moulds(tmp_path: Path) -> None:
    line = ArcPath(np.array([[0.0, 0.0], [5.0, 50.0]]), np.zeros(1))
    path = tmp_path / "two.dxf"
    write_drawing(Drawing("mm", {MOULD_CURVE: (line, line.moved(along=50.0))}), path)
    assert refusal(job(), path).startswith("layer MOULD_CURVE holds 2 paths; ")


def test_a_drawing_of_both_sides(tmp_path: Path) -> None:
    order = demo("display-bowl")
    half = order.mould.to_lathe(order.forming_arcs.path)
    left = ArcPath(half.vertices * np.array([-1.0, 1.0]), -half.bulges).reversed()
    message = refusal(order.job, draw(tmp_path / "whole.dxf", left.joined(half)))
    assert message.startswith("the mould's curve begins at radius -161.8")
    assert "allowed: one side of the axis" in message


@pytest.mark.parametrize("name", ["gone.dxf", "gone.csv", "gone", "gone.DXF"])
def test_no_such_file(name: str, tmp_path: Path) -> None:
    with pytest.raises(
        FormatError, match=r"cannot be read \(No such file or directory\); allowed: a (DXF|CSV) file; do:"
    ):
        part_of_mould(job(), tmp_path / name)


def test_a_drawing_that_is_none(tmp_path: Path) -> None:
    path = tmp_path / "chuck.dxf"
    path.write_text("radius,sag\n0,0\n", encoding="utf-8")
    assert refusal(job(), path).startswith("is not a DXF; ")


def test_too_few_readings(tmp_path: Path) -> None:
    where = np.array([0.0, 50.0, 100.0])
    assert refusal(job(), readings(tmp_path / "few.csv", where, where**2 / 430.0)).startswith(
        "the points lie on 3 radii; allowed: 4 or more; do: measure at more radii"
    )


def test_readings_of_ball_centres(tmp_path: Path) -> None:
    radius, height = on_mould(job())
    for remark in ("# ball-centre\n", "# points: ball centre\n# ball radius: 3\n", "# Ball-Center: yes\n"):
        message = refusal(job(), readings(tmp_path / "balls.csv", radius, height, head=remark))
        assert message.startswith("says that its points are centres of a ball; allowed: points of the mould's surface")
    part_of_mould(
        job(), readings(tmp_path / "surface.csv", radius, height, head="# points: surface\n# ball radius: 3\n")
    )


def test_a_mould_that_the_hole_swallows(tmp_path: Path) -> None:
    asked = job(hole=60.0, bore=40.0)
    where = np.linspace(0.0, 25.0, 9)
    message = refusal(asked, readings(tmp_path / "small.csv", where, where**2 / 430.0))
    assert message.startswith("the part on this mould ends at radius 25.")
    assert "within its own hole; allowed: a mould that reaches past the hole's radius, 30 mm" in message


def test_a_mould_of_another_shape(tmp_path: Path) -> None:
    where = np.linspace(0.0, 200.0, 21)
    for height in (0.5 * where, where**2 / 430.0 + 4.0 * np.sin(where / 15.0)):
        refusal(job(), readings(tmp_path / "strange.csv", where, height))


def test_a_part_that_springs_open_past_flat(tmp_path: Path) -> None:
    # A millimetre of depth is lost to springback, and the mould has only half of one.
    where = np.linspace(0.0, 205.0, 21)
    asked = job(springback='law = "curvature"\ndepth_loss = 1.0')
    refusal(asked, readings(tmp_path / "flat.csv", where, 0.5 * (where / 205.0) ** 2))


# the command


def run(*arguments: object) -> Result:
    """Run the command; whatever is no exit is raised."""
    result = CliRunner().invoke(app, [str(argument) for argument in arguments])
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    return result


@pytest.fixture
def shop(tmp_path: Path) -> tuple[Path, Path]:
    """A job file and readings of its mould."""
    path = tmp_path / "dish.toml"
    path.write_text(job_text(), encoding="utf-8")
    return path, readings(tmp_path / "chuck.csv", *on_mould(job()))


def test_the_command_says_what_the_mould_makes_and_writes_nothing(shop: tuple[Path, Path]) -> None:
    path, chuck = shop
    before = sorted(path.parent.iterdir())
    result = run("make", path, "--from-mould", chuck)
    said = " ".join(result.stdout.split())
    assert (result.exit_code, result.stderr) == (0, "")
    assert "the mould in chuck.csv reaches radius 205." in said
    assert "best focal length 110.0000 mm, the same as that of the face that the job asks for, 110.0000 mm" in said
    assert said.endswith("and no verdict: measure the part")
    assert max(map(len, result.stdout.splitlines())) <= 100
    assert sorted(path.parent.iterdir()) == before


def test_the_command_prints_one_json_object(shop: tuple[Path, Path]) -> None:
    path, chuck = shop
    result = run("make", path, "--from-mould", chuck, "--json")
    said = json.loads(result.stdout)
    assert (result.exit_code, result.stderr) == (0, "")
    assert (said["units"], said["mould"]) == ("mm", str(chuck))
    assert said["best_focal_length"] == pytest.approx(110.0, abs=1e-3)
    assert {"mould_fit_rms", "part_reach_radius", "largest_form_error", "at_radius", "slope_rms_mrad"} <= set(said)


def test_without_a_job_the_demo_job_is_taken(shop: tuple[Path, Path]) -> None:
    assert run("make", "--from-mould", shop[1]).exit_code == 0


@pytest.mark.parametrize(
    ("options", "said"),
    [
        (
            ["-o", "out"],
            "--output: given beside --from-mould, which writes no package; allowed: --json beside it; do: ",
        ),
        (["--replace"], "--replace: given beside --from-mould"),
        (["--replace", "--output", "out", "--json"], "--output and --replace: given beside --from-mould"),
    ],
)
def test_what_would_write_is_refused_beside_it(options: list[str], said: str, shop: tuple[Path, Path]) -> None:
    result = run("make", shop[0], "--from-mould", shop[1], *options)
    assert (result.exit_code, result.stdout) == (2, "")
    assert result.stderr.startswith(said)
    assert not Path("out").exists()


@pytest.mark.parametrize("content", ["", "radius,sag\n", "radius;sag\n0;0\n", "radius,sag\n0,nan\n", "r,z\n0,0\n"])
def test_the_command_refuses_readings_with_a_message(content: str, shop: tuple[Path, Path]) -> None:
    path, chuck = shop
    chuck.write_text(content, encoding="utf-8")
    for option in ([], ["--json"]):
        result = run("make", path, "--from-mould", chuck, *option)
        assert (result.exit_code, result.stdout) == (2, "")
        assert result.stderr.startswith(f"{chuck}: ")
        assert "; do: " in result.stderr


def test_the_command_refuses_a_folder_a_missing_file_and_a_broken_job(shop: tuple[Path, Path]) -> None:
    path, chuck = shop
    for mould in (path.parent, path.parent / "gone.dxf"):
        result = run("make", path, "--from-mould", mould)
        assert (result.exit_code, result.stdout) == (2, "")
        assert f"{mould}: cannot be read" in result.stderr
    path.write_text("units = 5", encoding="utf-8")
    result = run("make", path, "--from-mould", chuck)
    assert (result.exit_code, result.stdout) == (2, "")
    assert f"{path}: " in result.stderr


def test_lengths_in_the_messages_of_an_inch_job_are_explained(shop: tuple[Path, Path]) -> None:
    path, chuck = shop
    path.write_text(job_text(units="inch", hole=60.0, bore=40.0), encoding="utf-8")
    where = np.linspace(0.0, 25.0, 9)
    result = run("make", path, "--from-mould", readings(chuck, where, where**2 / 430.0))
    assert result.exit_code == 2
    assert "(lengths here are in mm: 1 in is 25.4 mm)" in result.stderr


NUMBERS = st.one_of(
    st.integers(-3, 300).map(str), st.floats(-1e7, 1e7).map(repr), st.sampled_from(["", "nan", "1e300", "x"])
)
ROWS = st.lists(st.tuples(NUMBERS, NUMBERS).map(",".join), max_size=8).map("\n".join)


@settings(max_examples=25)
@given(st.one_of(st.text(max_size=30), ROWS.map(lambda rows: f"radius,sag\n{rows}\n")))
def test_any_text_is_answered_or_refused(tmp_path_factory: pytest.TempPathFactory, content: str) -> None:
    path = tmp_path_factory.getbasetemp() / "any.csv"
    path.write_bytes(content.encode("utf-8", "surrogatepass"))
    try:
        found = part_of_mould(job(), path)
    except (FormatError, JobError):
        return
    json.dumps(figures(found), allow_nan=False)


@settings(max_examples=5)
@given(
    focal=st.floats(40.0, 3000.0),
    reach=st.floats(20.0, 500.0),
    bend=st.floats(-1e-10, 1e-10),
    noise=st.floats(0.0, 1.0),
    law=st.sampled_from([PERCENT, 'law = "curvature"\ndepth_loss = 1.0', 'law = "none"']),
)
def test_any_bowl_is_answered_or_refused(
    tmp_path_factory: pytest.TempPathFactory, focal: float, reach: float, bend: float, noise: float, law: str
) -> None:
    where = np.linspace(0.0, reach, 15)
    height = where**2 / (4.0 * focal) + bend * where**4 + noise * np.sin(where)
    asked = job(springback=law)
    try:
        found = part_of_mould(asked, readings(tmp_path_factory.getbasetemp() / "bowl.csv", where, height))
    except JobError:
        return
    json.dumps(figures(found), allow_nan=False)
    assert all(words(found, asked))
