"""The follow block: its face lies the sheet's thickness off the chuck, and its files are made, proved and guarded."""

from __future__ import annotations

import json
import re
from collections.abc import Callable
from pathlib import Path

import ezdxf
import numpy as np
import pytest
from typer.testing import CliRunner, Result

from fabricate.command import app
from fabricate.follow_block import follow_block_of, sheet_outside, turned_job
from fabricate.follow_block_drawing import BLOCK_BODY, BLOCK_CURVE, SHEET, block_drawing
from fabricate.job import Job, parse_job, questions
from fabricate.make import make_package
from fabricate.notices import notices
from fabricate.order import BLOCK_DRAWING, BLOCK_PROGRAM, PROOF, Order
from fabricate.proof import prove_package
from fabricate.prove_follow_block import prove_block_drawing, prove_block_program
from outputs.dxf import write_drawing
from outputs.gcode import write_program
from profiles.errors import GeometryError, JobError, WriteError

BLOCK = """
[follow_block]
diameter = 30.0
body_height = 20.0
edge_radius = 1.5
program = true
"""
HUB = "\n[mould.hub]\ndiameter = 16.0\n"
MALE = f"""
title = "Small dish"
units = "mm"
[reflector]
focal_length = 20.0
rim_diameter = 60.0
reflecting_face = "concave"
[sheet]
material = "aluminium 1050-O"
thickness = 1.0
[forming]
process = "spinning"
contact_face = "concave"
trim_allowance = 4.0
[forming.springback]
law = "none"
[forming.thinning]
law = "none"
[mould]
material = "steel"
land_width = 6.0
edge_radius = 4.0
{BLOCK}
[tolerance.files]
chord_error = 0.02
[drawing]
version = "R2010"
entities = "polyline"
[turning]
spindle_direction = "M3"
spindle_limit_untrued = 400
spindle_limit = 1500
rim_speed_limit = 12.0
nose_radius = 0.4
depth_of_cut = 2.0
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
TO_FEMALE = ('contact_face = "concave"', 'contact_face = "convex"')
TO_OUTSIDE_MIRROR = ('reflecting_face = "concave"', 'reflecting_face = "convex"')
TO_SINE_LAW = ('[forming.thinning]\nlaw = "none"', '[forming.thinning]\nlaw = "sine-law"')
TO_COATED = ("thickness = 1.0\n", "thickness = 1.0\ncoating_thickness = 0.05\n")
TO_COVERED = ("land_width = 6.0\n", "land_width = 6.0\ncover_thickness = 0.4\n")
TO_BORED = ("body_height = 20.0\n", "body_height = 20.0\nbore_diameter = 8.0\n")
TO_PADDED = ("[tolerance.files]", HUB + "[tolerance.files]")
TO_R12 = ('version = "R2010"\nentities = "polyline"', 'version = "R12"\nentities = "line-arc"')
TO_NO_PROGRAM = ("program = true\n", "")
TO_NO_BLOCK = (BLOCK, "")
TO_NO_TURNING = (MALE[MALE.index("[turning]") :], "")
LENGTHS = r"(?m)^(\w*(?:diameter|length|thickness|width|radius|height|allowance|chord_error|depth_of_cut)) = ([\d.]+)$"


def varied(*changes: tuple[str, str]) -> str:
    """Return the text of the job with some of its words changed."""
    text = MALE
    for old, new in changes:
        assert old in text
        text = text.replace(old, new)
    return text


def in_inches(text: str) -> str:
    """Return the same job in inches."""
    text = re.sub(LENGTHS, lambda found: f"{found[1]} = {float(found[2]) / 25.4!r}", text)
    words = {'"mm"': '"inch"', '"G21"': '"G20"', "rim_speed_limit = 12.0": "rim_speed_limit = 40.0"}
    for old, new in words.items():
        text = text.replace(old, new)
    return text


def job_of(*changes: tuple[str, str]) -> Job:
    """Return a job of the text with some of its words changed."""
    return parse_job(varied(*changes), name="typed.toml")


def order_of(*changes: tuple[str, str]) -> Order:
    """Return an order of the text with some of its words changed."""
    return Order(job_of(*changes))


# the geometry


@pytest.mark.parametrize(
    ("changes", "kind"),
    [
        ((), "female"),
        ((TO_FEMALE,), "male"),
        ((TO_OUTSIDE_MIRROR,), "female"),
        ((TO_FEMALE, TO_OUTSIDE_MIRROR), "male"),
        ((TO_BORED,), "female"),
    ],
)
def test_every_point_of_the_face_is_the_sheets_thickness_off_the_chuck(
    changes: tuple[tuple[str, str], ...], kind: str
) -> None:
    order = order_of(*changes)
    chuck, body = order.chain.forming_surface, order.follow_block.body
    assert body.kind == kind
    face = body.curve.points(np.linspace(body.curve.start, body.curve.end, 50))
    side = -1.0 if kind == "female" else 1.0
    over_chuck = face + np.array([0.0, side])
    where = chuck.nearest(over_chuck)
    gaps = over_chuck - chuck.points(where)
    normals = side * chuck.normals(where)
    assert gaps == pytest.approx(normals, abs=1e-10)
    assert body.curve.radius(body.curve.end) == pytest.approx(15.0, abs=1e-10)


def test_the_face_of_a_sheet_that_thins_is_its_own_thickness_off_the_chuck() -> None:
    chain = order_of(TO_SINE_LAW).chain
    # The mirror lies on the chuck: the foot of every point of the sheet's outside is the chuck's own point.
    where = np.linspace(0.0, chain.on_mould.end, 40)
    thickness = np.cos(chain.on_mould.slope(where))
    wanted = chain.forming_surface.points(where) - thickness[:, None] * chain.forming_surface.normals(where)
    outside = sheet_outside(chain)
    assert outside.points(outside.nearest(wanted)) == pytest.approx(wanted, abs=1e-9)
    assert thickness[-1] < 0.8


@pytest.mark.parametrize("changes", [(), (TO_FEMALE,), (TO_OUTSIDE_MIRROR,), (TO_FEMALE, TO_OUTSIDE_MIRROR)])
def test_a_coating_is_no_part_of_the_sheet_under_the_block_and_a_cover_is_between(
    changes: tuple[tuple[str, str], ...],
) -> None:
    chain = order_of(*changes, TO_COATED, TO_COVERED).chain
    chuck, outside = chain.forming_surface, sheet_outside(chain)
    points = outside.points(np.linspace(0.0, 0.8 * outside.end, 30))
    gaps = np.hypot(*(points - chuck.points(chuck.nearest(points))).T)
    assert gaps == pytest.approx(np.full(30, 1.0 + 0.4), abs=1e-9)


def test_a_plug_has_a_round_edge_that_stays_clear_of_the_sheet() -> None:
    body = order_of(TO_FEMALE).follow_block.body
    assert body.rim is not None
    slope = float(body.curve.slope(body.curve.end))
    assert body.outer_radius == pytest.approx(15.0 + 1.5 * (1.0 - np.sin(slope)))
    assert np.abs(body.rim.curvatures) == pytest.approx([1.0 / 1.5])
    start, end = body.rim.tangents
    assert start[0] == pytest.approx((np.cos(slope), -np.sin(slope)))
    assert end[0] == pytest.approx((0.0, -1.0))
    assert body.land_height - body.curve.height(body.curve.end) == pytest.approx(1.5 * np.cos(slope))
    assert body.base == pytest.approx(-float(body.curve.height(body.curve.end)) - 20.0)


def test_a_cavity_has_a_lip() -> None:
    body = order_of().follow_block.body
    slope = float(body.curve.slope(body.curve.end))
    assert body.outer_radius == pytest.approx(15.0 + 1.5 * np.sin(slope))
    assert body.base == pytest.approx(-body.land_height - 20.0)
    assert body.land == 0.0


# over a pad


def test_over_a_pad_the_face_is_flat_and_goes_around_its_edge() -> None:
    order = order_of(TO_PADDED)
    chuck, curve = order.chain.forming_surface, order.follow_block.body.curve
    edge = chuck.points(chuck.at_radius(8.0))
    face = curve.points(np.linspace(curve.start, curve.end, 400)) + np.array([0.0, edge[1] - 1.0])
    beyond = chuck.part(float(chuck.at_radius(8.0)), chuck.end)
    over = np.hypot(*(face - beyond.points(beyond.nearest(face))).T)
    flat = face[:, 0] <= 8.0
    assert face[flat, 1] == pytest.approx(np.full(flat.sum(), edge[1] - 1.0), abs=1e-12)
    assert over[~flat] == pytest.approx(np.ones((~flat).sum()), abs=1e-9)
    assert np.abs(np.diff(curve.slope(np.linspace(curve.start, curve.end, 20001)))).max() < 1e-2


def test_over_a_pad_a_sheet_that_thins_lies_on_an_arc_that_starts_on_the_pad() -> None:
    curve = order_of(TO_PADDED, TO_SINE_LAW).follow_block.body.curve
    flat, around = curve.breaks[1:3]
    middle = 0.5 * (flat + around)
    slope = float(curve.slope(around))
    assert flat == pytest.approx(8.0 - np.sin(slope), abs=0.02)
    assert 1.0 / curve.curvature(middle) == pytest.approx(1.0 + np.cos(slope), rel=0.1)


@pytest.mark.parametrize("changes", [(), (TO_SINE_LAW,), (TO_BORED,)])
def test_the_arcs_around_a_pad_are_few_tangent_and_close(changes: tuple[tuple[str, str], ...]) -> None:
    fit = order_of(TO_PADDED, *changes).block_arcs
    assert len(fit.path) <= 5
    assert np.abs(fit.path.kinks).max() < 1e-9
    assert fit.deviation.normal <= 0.02


@pytest.mark.parametrize("diameter", ["12.0", "16.0"])
def test_a_block_no_wider_than_the_pad_is_flat(diameter: str) -> None:
    order = order_of(TO_PADDED, ("diameter = 30.0", f"diameter = {diameter}"))
    body = order.follow_block.body
    assert (body.kind, len(order.block_arcs.path)) == ("male", 1)
    assert order.block_arcs.path.vertices == pytest.approx(np.array([(0.0, 0.0), (0.5 * float(diameter), 0.0)]))
    drawing = block_drawing(order.follow_block, order.block_arcs.path, order.job)
    assert any("follow block, flat; half section" in note for note in drawing.notes)
    assert not order.block_plan.proof.findings
    (sheet,) = drawing.layers[SHEET]
    # x is Z: the sheet lies over the block, and rises from it beyond the pad
    assert sheet.vertices[:2, 0] == pytest.approx([1.0, 1.0], abs=0.02)
    assert sheet.vertices[-1, 0] > 1.0


# whole packages

VARIANTS: dict[str, tuple[tuple[str, str], ...]] = {
    "male chuck": (),
    "cavity": (TO_FEMALE,),
    "bored": (TO_BORED, TO_R12),
    "padded": (TO_PADDED, TO_R12),
    "shear-spun": (TO_SINE_LAW, ('"spinning"', '"shear-spinning"'), ('arcs = "centre"', 'arcs = "lines"')),
    "stepped": (TO_FEMALE, TO_BORED, ('"G92"', '"none"'), ('arcs = "centre"', 'arcs = "radius"'), TO_R12),
}


@pytest.mark.parametrize(
    ("name", "units"),
    [
        ("male chuck", "mm"),
        ("cavity", "inch"),
        ("bored", "inch"),
        ("padded", "mm"),
        ("shear-spun", "mm"),
        ("stepped", "inch"),
    ],
)
def test_a_package_with_a_follow_block_is_made_and_proved(name: str, units: str, tmp_path: Path) -> None:
    text = varied(*VARIANTS[name])
    order = Order(parse_job(text if units == "mm" else in_inches(text), name="typed.toml"))
    made = make_package(order, tmp_path / "package")
    assert [entry for entry in made.proof.files if entry.startswith("follow")] == [BLOCK_DRAWING, BLOCK_PROGRAM]
    proof = prove_package(order, tmp_path / "package")
    assert proof.passed
    found = proof.files[BLOCK_DRAWING]
    assert found.normal_mm is not None
    assert found.normal_mm <= 0.02
    document = ezdxf.readfile(tmp_path / "package" / BLOCK_DRAWING)
    assert document.audit().errors == []
    layers = {entity.dxf.layer for entity in document.modelspace()}
    assert layers == {BLOCK_CURVE, BLOCK_BODY, SHEET, "CENTRE_LINE", "NOTES"}
    make_package(order, tmp_path / "package")


def test_inches_and_millimetres_give_the_same_block() -> None:
    in_mm, in_inch = order_of(), Order(parse_job(in_inches(MALE), name="typed.toml"))
    for order in (in_mm, in_inch):
        assert order.follow_block.body.outer_radius == pytest.approx(in_mm.follow_block.body.outer_radius)
    drawn = [block_drawing(order.follow_block, order.block_arcs.path, order.job) for order in (in_mm, in_inch)]
    ends = [drawing.layers[BLOCK_BODY][0].vertices.max(axis=0) for drawing in drawn]
    assert ends[0] == pytest.approx(25.4 * ends[1], abs=1e-6)


def test_the_program_says_what_it_turns() -> None:
    order = order_of()
    texts = [block.text for block in order.block_plan.program.blocks if hasattr(block, "text")]
    assert "female follow block of material not stated" in texts
    assert "work zero: on the axis, at the top of the lip, Z away from the headstock" in texts
    assert any(note.startswith("follow-block.nc: the outside of a cavity is not turned") for note in notices(order))
    assert turned_job(order.job).mould.material == ""


def test_without_a_program_only_the_drawing_is_written(tmp_path: Path) -> None:
    order = order_of(TO_NO_PROGRAM, TO_NO_TURNING)
    assert BLOCK_DRAWING in order.file_names
    assert BLOCK_PROGRAM not in order.file_names
    make_package(order, tmp_path / "package")
    assert not (tmp_path / "package" / BLOCK_PROGRAM).exists()


def test_without_the_table_nothing_of_a_block_is_written() -> None:
    order = order_of(TO_NO_BLOCK)
    assert not [name for name in order.file_names if name.startswith("follow")]
    with pytest.raises(JobError, match="follow_block: the table is missing"):
        follow_block_of(order.chain)


def test_a_replaced_package_may_have_had_other_files(tmp_path: Path) -> None:
    with_block, without = order_of(TO_NO_PROGRAM, TO_NO_TURNING), order_of(TO_NO_BLOCK, TO_NO_TURNING)
    for order in (with_block, without, with_block, without):
        make_package(order, tmp_path / "package", replace=True)
    assert not (tmp_path / "package" / BLOCK_DRAWING).exists()
    assert (tmp_path / "package.previous" / BLOCK_DRAWING).exists()


def test_a_folder_with_a_blocks_file_of_ones_own_is_no_untouched_package(tmp_path: Path) -> None:
    order = order_of(TO_NO_BLOCK, TO_NO_TURNING)
    make_package(order, tmp_path / "package")
    (tmp_path / "package" / BLOCK_DRAWING).write_text("mine", encoding="utf-8")
    with pytest.raises(WriteError, match="holds something else than an untouched package of this job"):
        make_package(order, tmp_path / "package")


# planted faults


def run(*arguments: object) -> Result:
    """Run the command; whatever is no exit is raised."""
    result = CliRunner().invoke(app, [str(argument) for argument in arguments])
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    return result


@pytest.fixture(scope="module", params=["male chuck", "cavity"])
def made(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with a job file and its package."""
    folder = tmp_path_factory.mktemp("made")
    (folder / "typed.toml").write_text(varied(*VARIANTS[request.param]), encoding="utf-8")
    assert run("make", folder / "typed.toml", "-o", folder / "package").exit_code == 0
    return folder


@pytest.fixture
def package(made: Path, tmp_path: Path) -> Path:
    """A package to spoil, its job file beside it."""
    (tmp_path / "package").mkdir()
    for entry in (made / "package").iterdir():
        (tmp_path / "package" / entry.name).write_bytes(entry.read_bytes())
    (tmp_path / "typed.toml").write_bytes((made / "typed.toml").read_bytes())
    return tmp_path / "package"


def findings(package: Path, failed: str) -> str:
    """Prove a spoilt package: exit 1, only this file has failed; return what is said of it."""
    result = run("prove", package.parent / "typed.toml", package, "--json")
    assert result.exit_code == 1, result.stderr
    files = json.loads(result.stdout)["files"]
    assert [name for name, verdict in files.items() if not verdict["passed"]] == [failed]
    return "\n".join(files[failed]["findings"])


def redraw(package: Path, layer: str, change: Callable[[np.ndarray], None]) -> None:
    """Change the points (x, y, bulge) of the one polyline of a layer."""
    document = ezdxf.readfile(package / BLOCK_DRAWING)
    (line,) = [entity for entity in document.modelspace() if entity.dxf.layer == layer]
    points = np.array(line.get_points("xyb"))
    change(points)
    line.set_points(points.tolist(), format="xyb")
    document.saveas(package / BLOCK_DRAWING)


def _nudge(points: np.ndarray) -> None:
    points[:, 0] += 0.03


def _scale(points: np.ndarray) -> None:
    points[:, :2] *= 1.01


@pytest.mark.parametrize("change", [_nudge, _scale])
@pytest.mark.parametrize(
    ("layer", "said"),
    [
        (BLOCK_CURVE, "strays by"),
        (BLOCK_BODY, "layer BLOCK_BODY is not the half section around the block's face"),
        (SHEET, "layer SHEET strays by"),
    ],
)
def test_a_changed_layer_is_found(package: Path, layer: str, said: str, change: Callable[[np.ndarray], None]) -> None:
    redraw(package, layer, change)
    assert said in findings(package, BLOCK_DRAWING)


def test_a_centre_line_off_the_axis_is_found(package: Path) -> None:
    document = ezdxf.readfile(package / BLOCK_DRAWING)
    (line,) = [entity for entity in document.modelspace() if entity.dxf.layer == "CENTRE_LINE"]
    line.set_points([(x, y + 0.01) for x, y in line.get_points("xy")])
    document.saveas(package / BLOCK_DRAWING)
    assert "layer CENTRE_LINE does not lie on the axis" in findings(package, BLOCK_DRAWING)


def test_a_missing_layer_is_found(package: Path) -> None:
    document = ezdxf.readfile(package / BLOCK_DRAWING)
    for entity in [entity for entity in document.modelspace() if entity.dxf.layer == SHEET]:
        document.modelspace().delete_entity(entity)
    document.saveas(package / BLOCK_DRAWING)
    assert "layer SHEET holds 0 paths; allowed: 1" in findings(package, BLOCK_DRAWING)


def _without_first(points: np.ndarray) -> np.ndarray:
    return points[1:]


def _only_pad(points: np.ndarray) -> np.ndarray:
    return points[:2]


def _bent_pad(points: np.ndarray) -> np.ndarray:
    points[0, 2] = 0.1
    return points


def _longer_pad(points: np.ndarray) -> np.ndarray:
    points[1, 1] += 0.03
    return points


@pytest.mark.parametrize("change", [_without_first, _only_pad, _bent_pad, _longer_pad])
def test_a_changed_pad_is_found(change: Callable[[np.ndarray], np.ndarray], tmp_path: Path) -> None:
    order, path = order_of(TO_PADDED), tmp_path / BLOCK_DRAWING
    write_drawing(block_drawing(order.follow_block, order.block_arcs.path, order.job), path)
    assert prove_block_drawing(path, order).passed
    document = ezdxf.readfile(path)
    (line,) = [entity for entity in document.modelspace() if entity.dxf.layer == SHEET]
    line.set_points(change(np.array(line.get_points("xyb"))).tolist(), format="xyb")
    document.saveas(path)
    assert "layer SHEET strays by" in prove_block_drawing(path, order).findings[0]


@pytest.mark.parametrize("changes", [(), (TO_R12,), (TO_BORED, TO_R12)])
@pytest.mark.parametrize("units", ["mm", "inch"])
def test_the_files_over_a_pad_prove(units: str, changes: tuple[tuple[str, str], ...], tmp_path: Path) -> None:
    text = varied(TO_PADDED, *changes)
    order = Order(parse_job(text if units == "mm" else in_inches(text), name="typed.toml"))
    asked = order.job.drawing
    drawing = block_drawing(order.follow_block, order.block_arcs.path, order.job)
    write_drawing(drawing, tmp_path / BLOCK_DRAWING, version=asked.version, entities=asked.entities)
    assert prove_block_drawing(tmp_path / BLOCK_DRAWING, order).passed
    (tmp_path / BLOCK_PROGRAM).write_text(write_program(order.block_plan.program), encoding="ascii")
    assert prove_block_program(tmp_path / BLOCK_PROGRAM, order).passed


def edit(package: Path, old: str, new: str) -> None:
    """Change the first match of a pattern in the block's program."""
    text = (package / BLOCK_PROGRAM).read_text(encoding="ascii")
    changed = re.sub(old, new, text, count=1)
    assert changed != text
    (package / BLOCK_PROGRAM).write_text(changed, encoding="ascii")


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        (r"(\(FINISH\)\n)G[23] (X\S+ Z\S+) I\S+ K\S+", r"\g<1>G1 \g<2>", "off the mould curve"),
        (r"\nM0\n", "\n", "nothing stops the program"),
        (r"\(END FINISH\)\n", "", "FINISH"),
        (r"\nM3\n", "\nM4\n", "the spindle turns M4, not M3"),
        (r"F0\.2500", "F0.3500", "a feed of 0.35"),
    ],
)
def test_a_changed_program_is_found(package: Path, old: str, new: str, said: str) -> None:
    edit(package, old, new)
    assert said in findings(package, BLOCK_PROGRAM)


def test_the_moulds_own_program_is_no_program_of_the_block(package: Path) -> None:
    (package / BLOCK_PROGRAM).write_bytes((package / "turning.nc").read_bytes())
    assert "off the mould curve" in findings(package, BLOCK_PROGRAM)


@pytest.mark.parametrize("name", [BLOCK_DRAWING, BLOCK_PROGRAM])
def test_a_missing_file_is_found(package: Path, name: str) -> None:
    (package / name).unlink()
    assert re.search("no such file|cannot be read", findings(package, name))


@pytest.mark.parametrize(
    ("change", "name", "said"),
    [
        (TO_NO_BLOCK, BLOCK_DRAWING, "a job without a [follow_block] table: take it out"),
        (TO_NO_BLOCK, BLOCK_PROGRAM, "a job without follow_block.program = true: take it out"),
        (TO_NO_PROGRAM, BLOCK_PROGRAM, "a job without follow_block.program = true: take it out"),
    ],
)
def test_a_file_of_a_block_that_was_not_asked_for_is_found(
    change: tuple[str, str], name: str, said: str, package: Path, tmp_path: Path
) -> None:
    order = order_of(change)
    make_package(order, tmp_path / "other")
    (tmp_path / "other" / name).write_bytes((package / name).read_bytes())
    proof = prove_package(order, tmp_path / "other")
    assert [entry for entry, verdict in proof.files.items() if not verdict.passed] == [name]
    assert said in proof.files[name].findings[0]
    assert PROOF in proof.files


# refusals and questions


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        (
            (('"spinning"', '"drape-forming"'),),
            r'follow_block: value is a table beside forming.process = "drape-forming", which has no use for it; '
            r"allowed: with spinning and shear-spinning only; do: remove it",
        ),
        (
            (("diameter = 30.0", "diameter = 61.0"),),
            r"follow_block.diameter: value is 61 mm; allowed: at most rim_diameter, 60 mm; do: correct one of them",
        ),
        (
            (TO_BORED, ("bore_diameter = 8.0", "bore_diameter = 30.0")),
            r"follow_block.bore_diameter: value is 30 mm; allowed: less than follow_block.diameter, 30 mm",
        ),
        (
            (TO_NO_TURNING,),
            r"follow_block.program: value is true, and there is no \[turning\] table; allowed: true with a",
        ),
        (
            (("rim_speed_limit = 12.0\n", ""),),
            r"turning.rim_speed_limit: value is 0 m/s, with follow_block.program = true: what the block is turned from "
            r"is not stated; allowed: above 0 m/s",
        ),
        (
            (TO_PADDED, (HUB, HUB + "pilot_diameter = 8.0\npilot_length = 6.0\n"), TO_BORED),
            r"follow_block.bore_diameter: value is 8 mm, and a pilot of 8 mm stands through the sheet; allowed: more "
            r"than mould.hub.pilot_diameter, 8 mm; do: give the block a bore that clears the pilot",
        ),
    ],
)
def test_a_table_that_contradicts_the_rest_is_refused(changes: tuple[tuple[str, str], ...], said: str) -> None:
    with pytest.raises(JobError, match=said):
        job_of(*changes)


def test_a_pilot_no_longer_than_the_sheet_is_thick_needs_no_bore() -> None:
    job = job_of(TO_PADDED, (HUB, HUB + "pilot_diameter = 8.0\npilot_length = 1.0\n"))
    assert job.follow_block is not None


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        (
            (
                TO_FEMALE,
                TO_OUTSIDE_MIRROR,
                ("diameter = 30.0", "diameter = 59.9"),
                ("trim_allowance = 4.0", "trim_allowance = 0.0"),
            ),
            r"follow_block.diameter: value is 59.9 mm; allowed: at most 5\d.\d+ mm, where the sheet's outer face ends",
        ),
        (
            (TO_FEMALE, ("edge_radius = 1.5", "edge_radius = 25.0")),
            r"follow_block.body_height: value is 20 mm; allowed: more than 23.\d+ mm, which the round edge takes",
        ),
        ((TO_PADDED, TO_FEMALE), r"follow_block: the table stands beside mould.hub and a convex contact face"),
        ((TO_PADDED, TO_COVERED), r"mould.cover_thickness: value is 0.4 mm beside mould.hub and a \[follow_block\]"),
        (
            (TO_PADDED, ("nose_radius = 0.4", "nose_radius = 0.8")),
            r"follow_block.program: value is true, and for the block turning.nose_radius: value is 0.800 mm",
        ),
    ],
)
def test_a_block_that_cannot_be_made_is_refused(changes: tuple[tuple[str, str], ...], said: str) -> None:
    order = order_of(*changes)
    with pytest.raises((JobError, GeometryError), match=said):
        _ = order.block_plan


def test_a_sheet_that_grows_thicker_beyond_a_pad_is_refused() -> None:
    table = (
        '[forming.thinning]\nlaw = "none"',
        '[forming.thinning]\nlaw = "stations"\nstations = [[0.0, 0.8], [9.0, 1.0]]',
    )
    with pytest.raises(JobError, match="cannot go around the edge of the pad with the thickness it has there"):
        _ = order_of(TO_PADDED, table).follow_block


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ((), ""),
        ((("diameter = 30.0", "diameter = 31.0"),), "follow_block.diameter is 31 mm and reflector.rim_diameter 60"),
        (
            (("rim_diameter = 60.0", "rim_diameter = 60.0\nhole_diameter = 30.0"),),
            "follow_block.diameter is 30 mm and reflector.hole_diameter 30: there may be nothing under the block",
        ),
        (
            (("land_width = 6.0\n", "land_width = 6.0\nbore_diameter = 30.5\n"),),
            "follow_block.diameter is 30 mm and mould.bore_diameter 30.5: there may be nothing under the block",
        ),
    ],
)
def test_an_odd_block_is_asked_about(changes: tuple[tuple[str, str], ...], said: str) -> None:
    asked = [question for question in questions(job_of(*changes)) if "follow_block" in question]
    assert [said in question for question in asked] == ([True] if said else [])


@pytest.mark.parametrize("change", [(), (TO_FEMALE,), (TO_PADDED,)])
def test_the_sheet_is_drawn_over_the_block(change: tuple[tuple[str, str], ...]) -> None:
    order = order_of(*change)
    drawing = block_drawing(order.follow_block, order.block_arcs.path, order.job)
    (curve,), (sheet,) = drawing.layers[BLOCK_CURVE], drawing.layers[SHEET]
    zero = -order.follow_block.body.land_height if order.mould.kind == "male" else 0.0
    assert curve.vertices[0] == pytest.approx((zero, 0.0), abs=0.02)
    assert curve.vertices[-1, 1] == pytest.approx(15.0, abs=0.02)
    assert sheet.vertices[0] == pytest.approx((zero + 1.0, 0.0), abs=0.02)
    assert sheet.vertices[-1, 1] > order.follow_block.body.outer_radius
