"""Planted faults: each must make ``dishwright prove`` fail, and the right file must be named."""

from __future__ import annotations

import json
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import ezdxf
import numpy as np
import pytest
from typer.testing import CliRunner, Result

from fabricate.command import app
from fabricate.job import read_job
from fabricate.order import DRAWING, JOB, PACKAGE_FILES, PROGRAM, PROOF, SOLID, TABLE, Order

FOCAL = 20.0
TAU = 0.02
MALE = f"""
title = "Small dish"
units = "mm"
[reflector]
focal_length = {FOCAL}
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
[tolerance.files]
chord_error = {TAU}
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
FEMALE = MALE.replace('contact_face = "concave"', 'contact_face = "convex"')


def run(*arguments: object) -> Result:
    """Run the command; whatever is no exit is raised."""
    result = CliRunner().invoke(app, [str(argument) for argument in arguments])
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    return result


@pytest.fixture(scope="module", params=["male", "female"])
def either(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with a job file and its package, male and female."""
    return _made(MALE if request.param == "male" else FEMALE, tmp_path_factory.mktemp(request.param))


@pytest.fixture(scope="module")
def male(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with the job file of a male mould and its package."""
    return _made(MALE, tmp_path_factory.mktemp("male"))


def _made(text: str, folder: Path) -> Path:
    (folder / "typed.toml").write_text(text, encoding="utf-8")
    assert run("make", folder / "typed.toml", "-o", folder / "package").exit_code == 0
    return folder


def _copied(source: Path, target: Path) -> Path:
    (target / "package").mkdir()
    for entry in (source / "package").iterdir():
        (target / "package" / entry.name).write_bytes(entry.read_bytes())
    (target / "typed.toml").write_bytes((source / "typed.toml").read_bytes())
    return target / "package"


@pytest.fixture
def package(male: Path, tmp_path: Path) -> Path:
    """A package to spoil, its job file beside it."""
    return _copied(male, tmp_path)


@pytest.fixture
def either_package(either: Path, tmp_path: Path) -> Path:
    """A package to spoil, of a male and of a female mould."""
    return _copied(either, tmp_path)


def findings(package: Path, *failed: str) -> str:
    """Prove a spoilt package: exit 1, only these files have failed, and each says why; return what is said of them."""
    result = run("prove", package.parent / "typed.toml", package, "--json")
    assert result.exit_code == 1, result.stderr
    proof = json.loads(result.stdout)
    assert proof["passed"] is False
    assert {name for name, verdict in proof["files"].items() if not verdict["passed"]} == set(failed)
    assert all(proof["files"][name]["findings"] for name in failed)
    return "\n".join(finding for name in failed for finding in proof["files"][name]["findings"])


def test_an_untouched_package_proves(either_package: Path) -> None:
    result = run("prove", either_package.parent / "typed.toml", either_package)
    assert result.exit_code == 0
    assert re.findall(r"^(\S+) .* within$", result.stdout, re.MULTILINE) == list(PACKAGE_FILES)


def test_findings_are_printed_for_people_too(package: Path) -> None:
    (package / SOLID).unlink()
    result = run("prove", package.parent / "typed.toml", package)
    assert result.exit_code == 1
    assert re.search(r"^mould\.stl +not measured .*FAILED$", result.stdout, re.MULTILINE)
    assert "mould.stl: cannot be read (No such file or directory)" in re.sub(r"\s+", " ", result.stdout)


# the drawing


def redraw(
    package: Path, change: Callable[[str, list[tuple[float, float, float]]], Any], *, marks: bool = True
) -> None:
    """Change the points (x, y, bulge) of every polyline, layer by layer, and with marks the check line's too."""
    document = ezdxf.readfile(package / DRAWING)
    for line in document.modelspace().query("LWPOLYLINE"):
        line.set_points(change(line.dxf.layer, list(line.get_points("xyb"))), format="xyb")
    for line in document.modelspace().query("LINE") if marks else ():
        (first, last) = change("NOTES", [(*line.dxf.start.vec2, 0.0), (*line.dxf.end.vec2, 0.0)])
        line.dxf.start, line.dxf.end = first[:2], last[:2]
    document.saveas(package / DRAWING)


def on_curve(change: Callable[[list[tuple[float, float, float]]], Any]) -> Callable[[str, Any], Any]:
    """Return a change of the mould curve alone."""
    return lambda layer, points: change(points) if layer == "MOULD_CURVE" else points


def test_rewriting_a_drawing_is_no_fault(either_package: Path) -> None:
    redraw(either_package, lambda _, points: points)
    assert run("prove", either_package.parent / "typed.toml", either_package).exit_code == 0


@pytest.mark.parametrize(("factor", "marks"), [(25.4, True), (25.4, False), (1.0 / 25.4, True), (1.001, False)])
def test_a_scaled_drawing(factor: float, marks: bool, package: Path) -> None:  # noqa: FBT001
    redraw(package, lambda _, points: [(factor * x, factor * y, bulge) for x, y, bulge in points], marks=marks)
    assert ("check line" if marks else "strays by") in findings(package, DRAWING)


def test_a_drawing_in_inches(package: Path) -> None:
    document = ezdxf.readfile(package / DRAWING)
    document.header["$INSUNITS"] = 1
    document.saveas(package / DRAWING)
    assert "contradicts itself in its unit" in findings(package, DRAWING)


@pytest.mark.parametrize("signs", [(-1.0, 1.0), (1.0, -1.0)])
def test_a_mirrored_drawing(signs: tuple[float, float], package: Path) -> None:
    redraw(package, lambda _, points: [(signs[0] * x, signs[1] * y, -bulge) for x, y, bulge in points])
    findings(package, DRAWING)


def test_a_drawing_with_its_axes_exchanged(package: Path) -> None:
    redraw(package, lambda _, points: [(y, x, -bulge) for x, y, bulge in points])
    findings(package, DRAWING)


def _shifted(points: list[tuple[float, float, float]], distance: float) -> list[tuple[float, float, float]]:
    """Move a vertex in the middle of a parabola's arcs along its normal."""
    index = len(points) // 2
    x, y, bulge = points[index]
    normal = np.array([1.0, y / (2.0 * FOCAL)]) / np.hypot(1.0, y / (2.0 * FOCAL))
    x, y = np.array([x, y]) + distance * normal
    return [*points[:index], (x, y, bulge), *points[index + 1 :]]


@pytest.mark.parametrize("side", [-1.0, 1.0])
def test_a_vertex_moved_by_twice_the_tolerance(side: float, package: Path) -> None:
    redraw(package, on_curve(lambda points: _shifted(points, 2.0 * side * TAU)))
    assert "strays by" in findings(package, DRAWING)


def test_a_bulge_with_the_wrong_sign(either_package: Path) -> None:
    def flipped(points: Any) -> Any:
        return [(x, y, -bulge if index == 0 else bulge) for index, (x, y, bulge) in enumerate(points)]

    redraw(either_package, on_curve(flipped))
    assert "strays by" in findings(either_package, DRAWING)


def test_a_bulge_of_the_body_with_the_wrong_sign(either_package: Path) -> None:
    def flipped(layer: str, points: Any) -> Any:
        if layer != "MOULD_BODY":
            return points
        edge = max(index for index, point in enumerate(points) if point[2])
        return [(x, y, -bulge if index == edge else bulge) for index, (x, y, bulge) in enumerate(points)]

    redraw(either_package, flipped)
    assert "layer MOULD_BODY is not the half section" in findings(either_package, DRAWING)


@pytest.mark.parametrize("change", ["backwards", "cut short", "one vertex"])
def test_a_curve_of_another_course(change: str, package: Path) -> None:
    def backwards(points: Any) -> Any:
        bulges = [0.0, *(-bulge for *_, bulge in points[-2::-1])]
        return [(x, y, bulge) for (x, y, _), bulge in zip(points[::-1], [*bulges[1:], 0.0], strict=True)]

    changes = {"backwards": backwards, "cut short": lambda points: points[:-1], "one vertex": lambda points: points[:1]}
    redraw(package, on_curve(changes[change]))
    findings(package, DRAWING)


@pytest.mark.parametrize("count", [4000, 6000])
def test_a_curve_of_thousands_of_vertices(count: int, package: Path) -> None:
    radius = np.linspace(0.0, 33.0, count)
    place = -(radius**2) / (4.0 * FOCAL) + np.where(np.arange(count) % 2, 1.0, -1.0)
    redraw(package, on_curve(lambda _: [(x, y, 0.0) for x, y in zip(place, radius, strict=True)]))
    assert "strays by" in findings(package, DRAWING)


def test_a_second_curve(package: Path) -> None:
    document = ezdxf.readfile(package / DRAWING)
    document.modelspace().add_lwpolyline([(0.0, 0.0), (1.0, 1.0)], dxfattribs={"layer": "MOULD_CURVE"})
    document.saveas(package / DRAWING)
    assert "layer MOULD_CURVE holds 2 paths; allowed: 1" in findings(package, DRAWING)


@pytest.mark.parametrize("layer", ["MOULD_CURVE", "MOULD_BODY", "CENTRE_LINE", "REFLECTING_FACE"])
def test_a_layer_that_is_missing(layer: str, package: Path) -> None:
    document = ezdxf.readfile(package / DRAWING)
    space = document.modelspace()
    for entity in list(space.query(f'*[layer=="{layer}"]')):
        space.delete_entity(entity)
    document.saveas(package / DRAWING)
    assert f"layer {layer} holds 0 paths" in findings(package, DRAWING)


def test_a_reflecting_face_and_a_centre_line_out_of_place(package: Path) -> None:
    def moved(layer: str, points: Any) -> Any:
        across = {"REFLECTING_FACE": 0.1, "CENTRE_LINE": 0.001}.get(layer, 0.0)
        return [(x + across, y + across, bulge) for x, y, bulge in points]

    redraw(package, moved, marks=False)
    said = findings(package, DRAWING)
    assert "layer REFLECTING_FACE strays by" in said
    assert "layer CENTRE_LINE does not lie on the axis" in said


# the turning program


def edit(package: Path, old: str, new: str, *, name: str = PROGRAM, count: int = 0) -> None:
    """Replace what a pattern finds in a text file; it must find something."""
    text = (package / name).read_text(encoding="utf-8")
    edited = re.sub(old, new, text, count=count, flags=re.MULTILINE)
    assert edited != text
    (package / name).write_text(edited, encoding="utf-8", newline="")


def test_arcs_the_other_way_round(either_package: Path) -> None:
    path = either_package / PROGRAM
    path.write_text(re.sub(r"\bG([23])\b", lambda found: f"G{5 - int(found[1])}", path.read_text("ascii")), "ascii")
    findings(either_package, PROGRAM)


TEXT_FAULTS = {
    "plane word dropped": (r"^G18\n", "", "G18 is missing before the first move"),
    "units word dropped": (r"^G21\n", "", "G21 is missing before the first move"),
    "absolute word dropped": (r"^G90\n", "", "G90 is missing before the first move"),
    "feed word dropped": (r"^G95\n", "", "G95 is missing before the first move"),
    "compensation not cancelled": (r"^G40\n", "", "G40 is missing before the first move"),
    "units word of inches": (r"^G21$", "G20", "G20 is not what the dialect says"),
    "compensation switched on": (r"^G40$", "G42", "G42"),
    "spindle limit dropped": (r"^G92 S\d+\n", "", "no spindle limit stated before it"),
    "spindle limit raised": (r"^G92 S1500$", "G92 S9000", "9000"),
    "spindle turned round": (r"^M3$", "M4", "M4"),
    "decimal point dropped in X": (r"(?<=^G1 X)(\d+)\.(\d+)", r"\1\2", "decimal point"),
    "decimal point dropped in Z": (r"(?<= Z-)(\d+)\.(\d+)(?= F)", r"\1\2", "decimal point"),
    "decimal point dropped in I": (r"(?<=I)(-?\d+)\.(\d+)", r"\1\2", "decimal point"),
    "decimal point dropped in F": (r"(?<=F)(\d+)\.(\d+)", r"\1\2", "after a decimal point"),
    "decimal comma": (r"(?<=^G1 X)(\d+)\.(\d+)", r"\1,\2", "is no word of a letter and a number"),
    "end of the finishing pass dropped": (r"^\(END FINISH\)\n", "", "(END FINISH)"),
    "start of the finishing pass dropped": (r"^\(FINISH\)\n", "", "(FINISH)"),
    "both marks dropped": (r"^\((END )?FINISH\)\n", "", "(FINISH)"),
    "an unknown word": (r"^\(ROUGH\)$", "(ROUGH)\nG28", "G28"),
    "no end": (r"^M30\n", "", "M30"),
}


@pytest.mark.parametrize("fault", TEXT_FAULTS)
def test_a_program_with_a_word_wrong(fault: str, package: Path) -> None:
    old, new, said = TEXT_FAULTS[fault]
    edit(package, old, new, count=2 if fault == "both marks dropped" else 1)
    assert said in findings(package, PROGRAM)


def _in_finish(package: Path, change: Callable[[list[str]], list[str]]) -> None:
    """Change the lines of the finishing pass."""
    before, finish, after = re.split(r"(?<=\(FINISH\)\n)|(?=\(END FINISH\))", (package / PROGRAM).read_text("ascii"))
    (package / PROGRAM).write_text(before + "\n".join(change(finish.split("\n"))) + after, "ascii")


def test_a_point_of_the_finishing_pass_off_by_a_digit(package: Path) -> None:
    def raised(lines: list[str]) -> list[str]:
        arcs = [index for index, line in enumerate(lines) if line.startswith("G3")]
        middle = arcs[len(arcs) // 2]
        place = re.search(r"Z(-?\d+\.\d+)", lines[middle])
        assert place is not None
        wrong = float(place[1]) + 0.1
        return [*lines[:middle], lines[middle].replace(place[0], f"Z{wrong:.4f}"), *lines[middle + 1 :]]

    _in_finish(package, raised)
    findings(package, PROGRAM)


def test_a_line_missing_from_the_finishing_pass(package: Path) -> None:
    _in_finish(package, lambda lines: [line for index, line in enumerate(lines) if index != len(lines) // 2])
    findings(package, PROGRAM)


def test_a_rapid_through_stock(either_package: Path) -> None:
    third = r"(?<=\(ROUGH\)\n)((?:.*\n)*?(?:G1.*\n(?:G0.*\n)*){2})G1 (X\S+ Z\S+) F\S+$"
    edit(either_package, third, r"\1G0 \2", count=1)
    assert "a rapid drives the insert" in findings(either_package, PROGRAM)


def test_no_roughing(package: Path) -> None:
    edit(package, r"^\(ROUGH\)\n(?s:.*?)(?=^\(END ROUGH\))", "(ROUGH)\n", count=1)
    findings(package, PROGRAM)


def test_a_program_nobody_asked_for(package: Path) -> None:
    plain = MALE[: MALE.index("[turning]")]
    other = _made(plain, package.parent / "..")
    (other / "package" / PROGRAM).write_bytes((package / PROGRAM).read_bytes())
    (package.parent / "typed.toml").write_text(plain, encoding="utf-8")
    assert "a job without a [turning] table: take it out" in findings(other / "package", PROGRAM)


# the solid

FACET = np.dtype([("normal", "<f4", 3), ("corners", "<f4", (3, 3)), ("attribute", "<u2")])


def remesh(package: Path, change: Callable[[Any], Any]) -> None:
    """Change the facets of the solid, the stated normals following the corners."""
    content = (package / SOLID).read_bytes()
    facets = change(np.frombuffer(content[84:], dtype=FACET).copy())
    corners = facets["corners"].astype(float)
    across = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
    facets["normal"] = across / np.linalg.norm(across, axis=1)[:, None]
    (package / SOLID).write_bytes(content[:80] + len(facets).to_bytes(4, "little") + facets.tobytes())


def _with_corners(change: Callable[[Any], Any]) -> Callable[[Any], Any]:
    def changed(facets: Any) -> Any:
        facets["corners"] = change(facets["corners"])
        return facets

    return changed


def test_rewriting_a_solid_is_no_fault(either_package: Path) -> None:
    remesh(either_package, lambda facets: facets)
    assert run("prove", either_package.parent / "typed.toml", either_package).exit_code == 0


def _moved_vertex(corners: Any, distance: float) -> Any:
    """Move one vertex in the middle of the dome along its normal, in every facet that has it."""
    radii = np.hypot(corners[..., 0], corners[..., 1])
    heights = np.where(np.abs(radii - 15.0) < 5.0, corners[..., 2], -np.inf)
    x, y, z = corners[np.unravel_index(np.argmax(heights), heights.shape)]
    normal = np.array([x, y, 2.0 * FOCAL]) / np.linalg.norm([x, y, 2.0 * FOCAL])
    same = (corners == np.array([x, y, z])).all(axis=-1)
    assert same.sum() >= 4
    corners[same] += (distance * normal).astype("f4")
    return corners


SOLID_FAULTS = {
    "scaled by 25.4": (_with_corners(lambda corners: 25.4 * corners), "strays by"),
    "scaled by 1.002": (_with_corners(lambda corners: 1.002 * corners), "strays by"),
    "mirrored across": (_with_corners(lambda corners: corners * np.array([-1, 1, 1], "f4")), "face inwards"),
    "mirrored, upside down": (_with_corners(lambda corners: corners * np.array([1, 1, -1], "f4")), "face inwards"),
    "turned upside down": (_with_corners(lambda corners: corners * np.array([1, -1, -1], "f4")), "strays by"),
    "lifted off the base": (_with_corners(lambda corners: corners + np.array([0, 0, 0.1], "f4")), "strays by"),
    "vertex moved out": (_with_corners(lambda corners: _moved_vertex(corners, 2.0 * TAU)), "forming surface strays"),
    "vertex moved in": (_with_corners(lambda corners: _moved_vertex(corners, -2.0 * TAU)), "forming surface strays"),
    "inside out": (_with_corners(lambda corners: corners[:, ::-1]), "face inwards"),
    "one facet turned over": (
        _with_corners(lambda corners: np.concatenate([corners[:1, ::-1], corners[1:]])),
        "wound against each other",
    ),
    "one facet missing": (lambda facets: np.delete(facets, len(facets) // 2), "the surface is open"),
    "one facet twice": (lambda facets: np.concatenate([facets, facets[:1]]), "a twin with the same corners"),
    "nothing but one facet": (lambda facets: facets[:1], "the surface is open"),
    "a second solid inside": (
        lambda facets: np.concatenate([facets, _with_corners(lambda corners: 0.5 * corners)(facets.copy())]),
        "2 pieces",
    ),
}


@pytest.mark.parametrize("fault", SOLID_FAULTS)
def test_a_solid_that_is_wrong(fault: str, package: Path) -> None:
    change, said = SOLID_FAULTS[fault]
    remesh(package, change)
    assert said in findings(package, SOLID)


def test_a_stated_normal_that_points_inwards(package: Path) -> None:
    content = bytearray((package / SOLID).read_bytes())
    facets = np.frombuffer(bytes(content[84:]), dtype=FACET).copy()
    facets["normal"][7] *= -1
    (package / SOLID).write_bytes(bytes(content[:84]) + facets.tobytes())
    assert "normal" in findings(package, SOLID)


@pytest.mark.parametrize("value", [np.nan, np.inf, 3e38])
def test_a_corner_that_is_nowhere(value: float, package: Path) -> None:
    content = (package / SOLID).read_bytes()
    facets = np.frombuffer(content[84:], dtype=FACET).copy()
    facets["corners"][11, 1, 0] = value
    (package / SOLID).write_bytes(content[:84] + facets.tobytes())
    findings(package, SOLID)


# the papers


def _cell(package: Path, column: str, value: str, *, row: int = 5) -> None:
    lines = (package / TABLE).read_text(encoding="utf-8").split("\n")
    cells = lines[row].split(",")
    cells[lines[0].split(",").index(column)] = value
    (package / TABLE).write_text("\n".join([*lines[:row], ",".join(cells), *lines[row + 1 :]]), "utf-8", newline="")


COLUMNS = ["station", "radius_mm", "part_sag_mm", "lower_mm", "upper_mm", "slope_deg", "mould_sag_mm", "job"]


@pytest.mark.parametrize("column", COLUMNS)
def test_a_wrong_number_in_the_sag_table(column: str, package: Path) -> None:
    _cell(package, column, "1.2345")
    assert f"column {column} " in findings(package, TABLE)


@pytest.mark.parametrize(
    ("column", "value"),
    [("part_sag_mm", "x"), ("part_sag_mm", ""), ("slope_deg", "nan"), ("radius_mm", "1e400")],
)
def test_no_number_in_the_sag_table(column: str, value: str, package: Path) -> None:
    _cell(package, column, value)
    assert f"column {column} has a cell that is no number" in findings(package, TABLE)


def test_a_digit_of_the_sag_table_off_by_two(package: Path) -> None:
    sag = (package / TABLE).read_text(encoding="utf-8").split("\n")[5].split(",")[2]
    _cell(package, "part_sag_mm", f"{float(sag) + 0.0002:.4f}")
    assert "column part_sag_mm differs from the job by 0.000" in findings(package, TABLE)


def test_a_filled_in_reading_is_no_fault(package: Path) -> None:
    _cell(package, "reading_mm", "1.2")
    assert run("prove", package.parent / "typed.toml", package).exit_code == 0


@pytest.mark.parametrize("fault", ["row missing", "column missing", "readings missing", "header missing"])
def test_a_sag_table_that_lacks_something(fault: str, package: Path) -> None:
    rows = [line.split(",") for line in (package / TABLE).read_text(encoding="utf-8").splitlines()]
    kept = {
        "row missing": [*rows[:4], *rows[5:]],
        "column missing": [[*row[:3], *row[4:]] for row in rows],
        "readings missing": [[*row[:7], *row[8:]] for row in rows],
        "header missing": rows[1:],
    }[fault]
    (package / TABLE).write_text("".join(",".join(row) + "\n" for row in kept), encoding="utf-8")
    findings(package, TABLE)


def test_the_job_file_of_another_job(package: Path) -> None:
    edit(package, r"^rim_diameter = 60\.0$", "rim_diameter = 60.1", name=JOB, count=1)
    # Table and proof are tied to the job file that stands beside them.
    said = findings(package, JOB, TABLE, PROOF)
    assert "is another job than the one that was asked for" in said
    assert "is of another job.toml than the one that stands beside it" in said


def test_the_whole_package_of_another_job(package: Path) -> None:
    edit(package.parent, r"^rim_diameter = 60\.0$", "rim_diameter = 61.0", name="typed.toml", count=1)
    findings(package, DRAWING, SOLID, PROGRAM, TABLE, JOB)


@pytest.mark.parametrize(
    "change",
    [
        (r'"passed": true,\s*"files"', '"passed": false, "files"'),
        (r'"passed": true,\s*"files"', '"passed": "true", "files"'),
        (r'"passed": true,\s*"files"', '"files"'),
        (r'"job_sha256": "\w{8}', '"job_sha256": "00000000'),
    ],
)
def test_a_proof_that_says_something_else(change: tuple[str, str], package: Path) -> None:
    edit(package, *change, name=PROOF, count=1)
    findings(package, PROOF)


# any file, in any way

GARBAGE = bytes(range(256)) * 40
DAMAGES: dict[str, Callable[[Path], Any]] = {
    "empty": lambda path: path.write_bytes(b""),
    "cut in half": lambda path: path.write_bytes(path.read_bytes()[: path.stat().st_size // 2]),
    "cut at the end": lambda path: path.write_bytes(path.read_bytes().rstrip()[:-1]),
    "binary garbage": lambda path: path.write_bytes(GARBAGE),
    "a folder": lambda path: (path.unlink(), path.mkdir()),
}


@pytest.mark.parametrize("name", PACKAGE_FILES)
def test_a_missing_file(name: str, package: Path) -> None:
    (package / name).unlink()
    # A proof is tied to the job file beside it.
    findings(package, *((JOB, PROOF) if name == JOB else (name,)))


@pytest.mark.parametrize("damage", DAMAGES)
def test_damaged_files(damage: str, package: Path) -> None:
    for name in PACKAGE_FILES:
        DAMAGES[damage](package / name)
    findings(package, *PACKAGE_FILES)


SEEDS = range(10)


@pytest.mark.parametrize("name", [DRAWING, SOLID, PROGRAM, TABLE, JOB, PROOF])
def test_scattered_bytes_never_upset_the_proof(name: str, male: Path, tmp_path: Path) -> None:
    package = _copied(male, tmp_path)
    order = Order(read_job(tmp_path / "typed.toml"))
    content = (package / name).read_bytes()
    for seed in SEEDS:
        chance = np.random.default_rng(seed)
        spoilt = bytearray(content)
        for place in chance.integers(0, len(content), size=int(chance.integers(1, 40))):
            spoilt[place] = int(chance.integers(0, 256))
        (package / name).write_bytes(spoilt)
        assert json.dumps(_proof_of(order, package, name), allow_nan=False)


def _proof_of(order: Order, package: Path, name: str) -> Any:
    from fabricate.proof import _verdict

    return _verdict(package / name, order).as_json()


# what is no package


def test_no_such_folder(package: Path, tmp_path: Path) -> None:
    for place in (tmp_path / "nowhere", package / JOB):
        result = run("prove", tmp_path / "typed.toml", place)
        assert result.exit_code == 2
        assert "no such folder; allowed: the folder of a work package" in result.stderr
        assert result.stdout == ""


def test_an_empty_folder(tmp_path: Path) -> None:
    (tmp_path / "typed.toml").write_text(MALE, encoding="utf-8")
    (tmp_path / "empty").mkdir()
    said = findings(tmp_path / "empty", *PACKAGE_FILES)
    assert len(said.splitlines()) == len(PACKAGE_FILES)


REFUSED = {
    "not to be read": ("rim_diameter = 60.0", "rim_diameter = -60.0", "reflector.rim_diameter: value is -60"),
    "not to be made": ("edge_radius = 4.0", "edge_radius = 4.0\nouter_diameter = 50.0", "mould.outer_diameter: value"),
}


@pytest.mark.parametrize("case", REFUSED)
def test_a_job_that_is_refused(case: str, package: Path) -> None:
    old, new, said = REFUSED[case]
    edit(package.parent, re.escape(old), new, name="typed.toml")
    result = run("prove", package.parent / "typed.toml", package)
    assert result.exit_code == 2
    assert said in result.stderr
    assert result.stdout == ""
