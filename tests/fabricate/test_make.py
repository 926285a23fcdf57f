"""Whole packages: the five demo jobs in millimetres and in inches, every choice, and where a package may stand."""

from __future__ import annotations

import csv
import hashlib
import json
import re
import tomllib
import warnings
from collections.abc import Iterator, Mapping
from functools import cache
from importlib.resources import files
from itertools import pairwise
from pathlib import Path
from typing import Any

import ezdxf
import numpy as np
import pytest
import trimesh
from gcodeparser import parse_gcode_lines
from typer.testing import CliRunner, Result

from fabricate import make as make_module
from fabricate.command import app
from fabricate.job import parse_job, read_job
from fabricate.job_text import toml_value
from fabricate.order import DRAWING, JOB, PACKAGE_FILES, PROGRAM, PROOF, SOLID, TABLE, Order
from fabricate.turning_setup import dialect_of
from outputs.gcode_reader import read_program

DEMOS = {
    name: files("fabricate").joinpath(f"demo/{name}.toml").read_text(encoding="utf-8")
    for name in ("lamp", "terrace-heater", "listening-dish", "link-dish", "display-bowl")
}
LENGTHS = {
    *("focal_length", "depth", "rim_diameter", "hole_diameter", "thickness", "thickness_tolerance"),
    *("coating_thickness", "trim_allowance", "depth_loss", "land_width", "edge_radius", "body_height"),
    *("outer_diameter", "bore_diameter", "spigot_diameter", "spigot_length", "cover_thickness", "chord_error"),
    *("profile", "rms", "roundness", "nose_radius", "depth_of_cut", "finish_allowance", "roughing_feed"),
    *("finishing_feed", "stock_allowance"),
}
SPEEDS = {"surface_speed", "rim_speed_limit"}
INCH_WORDS = {"G21": "G20", "G71": "G70", "none": "none"}

QUICK = """
title = "Small {name}"
units = "mm"
[reflector]
focal_length = 20.0
rim_diameter = 60.0
hole_diameter = {hole}
reflecting_face = "{face}"
[sheet]
material = "aluminium 1050-O"
thickness = 1.0
[forming]
process = "{process}"
contact_face = "{contact}"
trim_allowance = 4.0
[forming.springback]
law = "none"
[forming.thinning]
law = "{thinning}"
[mould]
material = "steel"
land_width = 6.0
edge_radius = 4.0
{mould}
[tolerance.files]
chord_error = 0.05
[drawing]
version = "{version}"
entities = "{entities}"
"""
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
PLAIN = {
    "name": "dish",
    "hole": 0.0,
    "face": "concave",
    "process": "spinning",
    "contact": "concave",
    "thinning": "none",
    "mould": "",
    "version": "R2010",
    "entities": "polyline",
}


def quick(*, turning: bool = False, **changes: object) -> str:
    """Return a small coarse job."""
    return QUICK.format(**(PLAIN | changes)) + (TURNING if turning else "")


# the converter to inches: it knows the units of the contract and shares nothing with the product's own


def in_inches(text: str) -> str:
    """Return the same job in inches."""
    return as_toml(_converted(tomllib.loads(text)) | {"units": "inch"})


def _converted(table: Mapping[str, Any]) -> dict[str, Any]:
    return {key: _converted_value(key, value) for key, value in table.items()}


def _converted_value(key: str, value: Any) -> Any:
    if isinstance(value, Mapping):
        return _converted(value)
    if key == "asphere":
        return [number * 25.4 ** (2 * half - 1) for half, number in enumerate(value, start=2)]
    if key == "stations":
        return [[radius / 25.4, second] for radius, second in value]
    if key in LENGTHS:
        return value / 25.4
    if key in SPEEDS:
        return value / 0.3048
    return {"units_word": INCH_WORDS.get(str(value), value), "decimals": 5}.get(key, value)


def as_toml(data: Mapping[str, Any], path: str = "") -> str:
    """Return a job's tables as TOML."""
    own = [f"{key} = {toml_value(value)}" for key, value in data.items() if not isinstance(value, dict)]
    inner = [as_toml(value, f"{path}.{key}".lstrip(".")) for key, value in data.items() if isinstance(value, dict)]
    return "\n".join(([f"[{path}]"] if path else []) + own + inner)


def test_the_converter_to_inches() -> None:
    text = (
        '[reflector]\nasphere = [2.0]\nrim_diameter = 50.8\n[turning]\nrim_speed_limit = 15.24\n[x]\nunits_word = "G71"'
    )
    assert tomllib.loads(in_inches(text)) == {
        "units": "inch",
        "reflector": {"asphere": [2.0 * 25.4**3], "rim_diameter": 2.0},
        "turning": {"rim_speed_limit": 15.24 / 0.3048},
        "x": {"units_word": "G70"},
    }


def run(*arguments: object) -> Result:
    """Run the command; whatever is no exit is raised."""
    result = CliRunner().invoke(app, [str(argument) for argument in arguments])
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    return result


def made(text: str, folder: Path) -> Path:
    """Make a package and return its folder."""
    source = folder / "typed.toml"
    source.write_text(text, encoding="utf-8")
    result = run("make", source, "-o", folder / "package")
    assert result.exit_code == 0, result.stderr or result.stdout
    return folder / "package"


def contents(folder: Path) -> dict[str, bytes]:
    """Return every file of a folder."""
    return {entry.name: entry.read_bytes() for entry in sorted(folder.iterdir())}


@cache
def order_of(text: str) -> Order:
    """Return the exact geometry of a job."""
    return Order(parse_job(text, name="test.toml"))


# the five demo jobs, in both units

UNITS = ("mm", "inch")
CASES = {f"{name}-{units}": (name, units) for name in DEMOS for units in UNITS}


class Package:
    """A package of a demo job."""

    def __init__(self, name: str, units: str, folder: Path) -> None:
        self.name, self.units = name, units
        self.text = DEMOS[name] if units == "mm" else in_inches(DEMOS[name])
        self.source = folder / "typed.toml"
        self.folder = made(self.text, folder)
        self.unit = 1.0 if units == "mm" else 25.4
        self.suffix = "mm" if units == "mm" else "in"

    @property
    def order(self) -> Order:
        return order_of(self.text)


@pytest.fixture(scope="module", params=CASES)
def package(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Package]:
    name, units = CASES[request.param]
    yield Package(name, units, tmp_path_factory.mktemp("demo"))
    order_of.cache_clear()


def test_a_package_is_whole_and_proves(package: Package) -> None:
    wanted = {name for name in PACKAGE_FILES if name != PROGRAM or "[turning]" in package.text}
    assert {entry.name for entry in package.folder.iterdir()} == wanted
    result = run("prove", package.source, package.folder)
    assert result.exit_code == 0, result.stdout
    assert "FAILED" not in result.stdout


def test_an_inch_job_makes_the_same_mould(package: Package) -> None:
    metric = Order(parse_job(DEMOS[package.name], name="metric.toml"))
    assert package.order.exact_solid.volume == pytest.approx(metric.exact_solid.volume, rel=1e-9)
    assert package.order.tolerance == pytest.approx(metric.tolerance, rel=1e-12)


def test_the_proof_is_as_the_contract_says(package: Package) -> None:
    proof = json.loads((package.folder / PROOF).read_text(encoding="utf-8"))
    assert {"version", "job_sha256", "passed", "files"} <= proof.keys()
    assert proof["job_sha256"] == hashlib.sha256((package.folder / JOB).read_bytes()).hexdigest()
    assert proof["passed"] is True
    assert set(proof["files"]) == {entry.name for entry in package.folder.iterdir()} - {PROOF}
    tolerance = tomllib.loads(package.text)["tolerance"]["files"]["chord_error"] * package.unit
    for verdict in proof["files"].values():
        assert {"normal_mm", "slope_mrad", "at_radius_mm", "tolerance_mm", "passed"} <= verdict.keys()
        assert verdict["passed"] is True
        assert verdict["tolerance_mm"] == pytest.approx(tolerance)
        assert 0.0 <= verdict["normal_mm"] <= verdict["tolerance_mm"]
        assert 0.0 <= verdict["at_radius_mm"] <= package.order.mould.outer_radius


def test_the_sag_table_is_as_the_contract_says(package: Package) -> None:
    with (package.folder / TABLE).open(encoding="utf-8", newline="") as stream:
        header, *rows = list(csv.reader(stream))
    lengths = [f"{name}_{package.suffix}" for name in ("radius", "part_sag", "lower", "upper")]
    end = [f"mould_sag_{package.suffix}", f"reading_{package.suffix}", "job"]
    assert header == ["station", *lengths, "slope_deg", *end]
    assert len(rows) == 17
    assert [row[0] for row in rows] == [str(number) for number in range(1, 18)]
    assert {row[7] for row in rows} == {""}
    assert {row[8] for row in rows} == {hashlib.sha256((package.folder / JOB).read_bytes()).hexdigest()[:12]}
    job = tomllib.loads(package.text)
    hole, rim = job["reflector"].get("hole_diameter", 0.0), job["reflector"]["rim_diameter"]
    radius, sag, lower, upper, slope = np.array([[float(cell) for cell in row[1:6]] for row in rows]).T
    digit = 1e-4 if package.units == "mm" else 1e-5
    np.testing.assert_allclose(radius, np.linspace(0.5 * hole, 0.5 * rim, 17), atol=0.51 * digit)
    focal = job["reflector"]["focal_length"]
    np.testing.assert_allclose(sag, radius**2 / (4.0 * focal), atol=1.5 * digit)
    np.testing.assert_allclose(slope, np.degrees(np.arctan(radius / (2.0 * focal))), atol=2e-4 / (digit * 1e4))
    band = job["tolerance"]["part"]["profile"] * np.sqrt(1.0 + (radius / (2.0 * focal)) ** 2)
    np.testing.assert_allclose(sag - lower, band, atol=2.0 * digit)
    np.testing.assert_allclose(upper - sag, band, atol=2.0 * digit)


def test_another_reader_finds_nothing_wrong_with_the_drawing(package: Package) -> None:
    document = ezdxf.readfile(package.folder / DRAWING)
    assert document.audit().errors == []
    curves = document.modelspace().query('*[layer=="MOULD_CURVE"]')
    assert len(curves) == 1
    assert not curves[0].closed
    # x runs along the spindle, y is the radius: the last vertex is where the forming surface ends.
    *_, (across, along) = [(y, x) for x, y in curves[0].get_points("xy")]
    mould = package.order.mould
    radius, height = mould.curve.points(mould.curve.end)
    place = -height if mould.kind == "male" else height - mould.land_height
    near = package.order.tolerance / package.unit
    assert (across, along) == pytest.approx((radius / package.unit, place / package.unit), rel=0.0, abs=near)
    bodies = document.modelspace().query('*[layer=="MOULD_BODY"]')
    assert [body.closed for body in bodies] == [True]


def test_another_reader_finds_the_solid_whole(package: Package) -> None:
    mesh = trimesh.load_mesh(package.folder / SOLID)
    assert mesh.is_watertight
    assert mesh.is_winding_consistent
    assert mesh.volume > 0.0
    solid = package.order.exact_solid
    # the sides are no part of the forming surface, but have to keep the tolerance too
    assert abs(mesh.volume - solid.volume) <= package.order.tolerance * solid.area
    forming = mesh.volume - solid.volume
    assert abs(forming) <= package.order.tolerance * solid.forming_area
    assert mesh.bounds[0, 2] == pytest.approx(0.0, abs=1e-5)


def test_another_reader_finds_the_same_moves(package: Package) -> None:
    if "[turning]" not in package.text:
        assert not (package.folder / PROGRAM).exists()
        return
    text = (package.folder / PROGRAM).read_text(encoding="ascii")
    moves = read_program(text, dialect_of(package.order.job)).moves
    in_diameters = tomllib.loads(package.text)["turning"]["control"]["x_word"] == "diameter"
    found = list(_ends(text, diameter=in_diameters))
    assert len(found) == len(moves)
    for (line, kind, end), move in zip(found, moves, strict=True):
        assert (line, kind) == (move.line, "rapid" if move.kind == "rapid" else "feed")
        assert end == pytest.approx(move.end, abs=1e-12)


def _ends(text: str, *, diameter: bool) -> Iterator[tuple[int, str, tuple[float, float]]]:
    """Yield line, kind and end (radius, Z) of each move as the other reader sees it."""
    across = along = float("nan")
    for number, line in enumerate(text.splitlines(), start=1):
        for found in parse_gcode_lines(re.sub(r"\([^)]*\)", "", line)):
            if found.command[0] == "G" and found.command[1] in (0, 1, 2, 3):
                place = found.get_param("X", float), found.get_param("Z", float)
                across = across if place[0] is None else place[0] / (2.0 if diameter else 1.0)
                along = along if place[1] is None else place[1]
                yield number, "rapid" if found.command[1] == 0 else "feed", (across, along)


def test_making_a_package_of_its_own_job_file_gives_the_same_bytes(package: Package, tmp_path: Path) -> None:
    again = Order(read_job(package.folder / JOB))
    assert again.job == package.order.job
    assert again.text.encode("utf-8") == (package.folder / JOB).read_bytes()
    if package.units == "mm" or package.name == "link-dish":
        return  # same job, same bytes; digits are at stake only where values were divided by 25.4
    result = run("make", package.folder / JOB, "-o", tmp_path / "again")
    assert result.exit_code == 0, result.stderr
    assert contents(tmp_path / "again") == contents(package.folder)


# every choice

BORED = "bore_diameter = 6.0\nspigot_diameter = 20.0\nspigot_length = 9.0"
COMBINATIONS = {
    "concave on concave": {"mould": "outer_diameter = 120.0"},
    "convex on concave": {"face": "convex", "version": "R12"},
    "concave on convex": {"contact": "convex", "version": "R12", "entities": "line-arc"},
    "convex on convex": {"face": "convex", "contact": "convex", "entities": "line-arc"},
    "shear spun": {"process": "shear-spinning", "thinning": "sine-law"},
    "draped": {"process": "drape-forming", "thinning": "sine-law", "version": "R12", "entities": "line-arc"},
    "draped outside": {"process": "drape-forming", "face": "convex"},
    "drawn": {"process": "straight-vacuum", "contact": "convex", "thinning": "straight-vacuum", "version": "R12"},
    "drawn outside": {"process": "straight-vacuum", "contact": "convex", "face": "convex"},
    "bored male with spigot": {"hole": 8.0, "mould": BORED},
    "bored female with spigot": {"hole": 8.0, "contact": "convex", "mould": BORED},
}


@pytest.mark.parametrize("case", COMBINATIONS)
def test_every_choice_gives_a_package_that_proves(case: str, tmp_path: Path) -> None:
    text = quick(turning=True, name=case, **COMBINATIONS[case])
    folder = made(text, tmp_path)
    assert run("prove", tmp_path / "typed.toml", folder).exit_code == 0
    assert ezdxf.readfile(folder / DRAWING).audit().errors == []
    mesh = trimesh.load_mesh(folder / SOLID)
    assert mesh.is_watertight
    assert abs(mesh.volume - order_of(text).exact_solid.volume) <= 0.05 * order_of(text).exact_solid.area
    lowest = -9.0 if "spigot" in case else 0.0
    assert mesh.bounds[0, 2] == pytest.approx(lowest, abs=1e-6)


def test_a_job_without_turning_gets_no_program_and_is_told(tmp_path: Path) -> None:
    (tmp_path / "job.toml").write_text(quick(), encoding="utf-8")
    result = run("make", tmp_path / "job.toml", "-o", tmp_path / "out")
    assert result.exit_code == 0
    assert not (tmp_path / "out" / PROGRAM).exists()
    assert "no turning program is written" in result.stdout


@pytest.mark.parametrize("contact", ["concave", "convex"])
def test_arcs_of_the_finishing_pass_turn_the_way_the_contract_says(contact: str, tmp_path: Path) -> None:
    folder = made(quick(turning=True, contact=contact), tmp_path)
    text = (folder / PROGRAM).read_text(encoding="ascii")
    finish = text.split("(FINISH)")[1].split("(END FINISH)")[0]
    words = set(re.findall(r"\bG[0-3]\b", finish)) - {"G1"}
    assert words == ({"G3"} if contact == "concave" else {"G2"})


# the same again, and folders that are taken


@pytest.fixture(scope="module")
def small(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with the file of a small job and its package."""
    folder = tmp_path_factory.mktemp("small")
    made(quick(turning=True), folder)
    return folder


@pytest.fixture
def place(small: Path, tmp_path: Path) -> Path:
    """A package of the small job to do with as one likes, its job file beside it."""
    for name, content in contents(small / "package").items():
        (tmp_path / "package").mkdir(exist_ok=True)
        (tmp_path / "package" / name).write_bytes(content)
    (tmp_path / "typed.toml").write_bytes((small / "typed.toml").read_bytes())
    (tmp_path / "other.toml").write_text(quick(name="other dish"), encoding="utf-8")
    return tmp_path


def names(folder: Path) -> set[str]:
    """Return what stands in a folder, hidden things too."""
    return {entry.name for entry in folder.iterdir()}


def test_the_same_job_twice_gives_the_same_bytes(small: Path, tmp_path: Path) -> None:
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        result = run("make", small / "typed.toml", "-o", tmp_path / "twice")
    assert result.exit_code == 0
    assert contents(tmp_path / "twice") == contents(small / "package")


def test_its_own_job_file_goes_into_an_empty_folder(small: Path, tmp_path: Path) -> None:
    (tmp_path / "empty").mkdir()
    assert run("make", small / "package" / JOB, "-o", tmp_path / "empty").exit_code == 0
    assert contents(tmp_path / "empty") == contents(small / "package")
    assert names(tmp_path) == {"empty"}


def test_the_same_job_goes_into_its_own_folder_again(place: Path) -> None:
    before = contents(place / "package")
    (place / "package" / SOLID).write_bytes(b"spoilt")
    assert run("make", place / "typed.toml", "-o", place / "package").exit_code == 0
    assert contents(place / "package") == before
    assert names(place) == {"package", "typed.toml", "other.toml"}


def test_the_folder_of_another_job_is_left_alone(place: Path) -> None:
    before = contents(place / "package")
    result = run("make", place / "other.toml", "-o", place / "package")
    assert result.exit_code == 2
    assert "holds something else than an untouched package of this job; allowed: " in result.stderr
    assert "--replace" in result.stderr
    assert contents(place / "package") == before
    assert names(place) == {"package", "typed.toml", "other.toml"}


def test_another_package_is_replaced_when_asked_and_kept_whole(place: Path) -> None:
    before = contents(place / "package")
    result = run("make", place / "other.toml", "-o", place / "package", "--replace")
    assert result.exit_code == 0
    assert contents(place / "package.previous") == before
    assert run("prove", place / "other.toml", place / "package").exit_code == 0
    assert run("prove", place / "typed.toml", place / "package.previous").exit_code == 0


def test_a_folder_of_somebodys_own_is_left_alone(place: Path) -> None:
    (place / "package" / "remarks.txt").write_text("the first chuck", encoding="utf-8")
    assert run("make", place / "typed.toml", "-o", place / "package").exit_code == 2
    assert (place / "package" / "remarks.txt").exists()
    assert run("make", place / "typed.toml", "-o", place / "package", "--replace").exit_code == 0
    assert (place / "package.previous" / "remarks.txt").exists()


def fill_in(table: Path) -> None:
    """Write a reading into the first row of a sag table."""
    lines = table.read_text(encoding="utf-8").split("\n")
    cells = lines[1].split(",")
    cells[lines[0].split(",").index("reading_mm")] = "0.02"
    table.write_text("\n".join([lines[0], ",".join(cells), *lines[2:]]), encoding="utf-8")


def test_readings_are_not_lost(place: Path) -> None:
    fill_in(place / "package" / TABLE)
    before = contents(place / "package")
    result = run("make", place / "typed.toml", "-o", place / "package")
    assert result.exit_code == 2
    assert contents(place / "package") == before
    assert run("prove", place / "typed.toml", place / "package").exit_code == 0, "readings spoil no proof"
    assert run("make", place / "typed.toml", "-o", place / "package", "--replace").exit_code == 0
    assert contents(place / "package.previous") == before


WRITERS = {"write_drawing": DRAWING, "write_stl": SOLID, "write_program": PROGRAM, "table_text": TABLE}


@pytest.mark.parametrize("writer", WRITERS)
def test_a_file_that_fails_its_proof_leaves_nothing(
    writer: str, small: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(make_module, writer, SPOILT[writer])
    form = ["--json"] if writer in {"write_stl", "table_text"} else []
    result = run("make", small / "typed.toml", "-o", tmp_path / "out", *form)
    assert result.exit_code == 1
    name = WRITERS[writer]
    assert f"the proof of {name} failed: nothing was moved into place" in result.stderr
    assert names(tmp_path) == set()
    if form:
        proof = json.loads(result.stdout)["proof"]
        assert [found for found, verdict in proof["files"].items() if not verdict["passed"]] == [name]
    else:
        assert re.search(rf"^{name} .*FAILED$", result.stdout, re.MULTILINE)


def _wrong_solid(vertices: Any, triangles: Any, path: Path, *, label: str) -> None:
    write_stl(np.asarray(vertices) * 1.01, triangles, path, label=label)


write_drawing, write_stl = make_module.write_drawing, make_module.write_stl
write_program, table_text = make_module.write_program, make_module.table_text
SPOILT: dict[str, Any] = {
    "write_drawing": lambda drawing, path, **_: (
        write_drawing(drawing, path.with_suffix(".dxf"), version="R12")
        or path.write_bytes(path.read_bytes().replace(b"UNITS: MM", b"UNITS: IN"))
    ),
    "write_stl": _wrong_solid,
    "write_program": lambda program: write_program(program).replace("(END FINISH)", ""),
    "table_text": lambda columns: table_text(columns).replace(",0.0000,", ",0.5000,"),
}


# places that cannot be written


def test_a_file_where_the_folder_should_stand(small: Path, tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("mine", encoding="utf-8")
    for target in ([tmp_path / "taken", "--replace"], [tmp_path / "taken" / "far" / "below"]):
        result = run("make", small / "typed.toml", "-o", *target)
        assert result.exit_code == 2
        assert "; allowed: " in result.stderr
        assert "; do: " in result.stderr
    assert names(tmp_path) == {"taken"}
    assert (tmp_path / "taken").read_text(encoding="utf-8") == "mine"


def test_a_name_that_is_too_long(small: Path, tmp_path: Path) -> None:
    result = run("make", small / "typed.toml", "-o", tmp_path / ("x" * 300))
    assert result.exit_code == 2
    assert "cannot be written" in result.stderr
    assert names(tmp_path) == set()


def test_a_full_disk(small: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(make_module, "write_stl", full)
    result = run("make", small / "typed.toml", "-o", tmp_path / "new" / "out")
    assert result.exit_code == 2
    assert "cannot be written (No space left on device)" in result.stderr
    assert names(tmp_path) == set()


def test_the_numbers_of_the_summary_are_those_of_the_mould(small: Path, tmp_path: Path) -> None:
    result = run("make", small / "typed.toml", "-o", tmp_path / "out", "--json")
    said = json.loads(result.stdout)
    stated = json.loads((tmp_path / "out" / PROOF).read_text(encoding="utf-8"))
    assert said["proof"].items() <= stated.items()
    assert set(stated["warnings"]) <= set(said["warnings"])
    figures = said["mould"]
    # Concave face of a 1 mm sheet on a male mould, no springback: the mould is the reflecting face itself.
    assert figures["kind"] == "male"
    assert figures["depth"] == pytest.approx(30.0**2 / 80.0)
    assert figures["rim_radius"] == pytest.approx(30.0)
    assert figures["rim_z"] == pytest.approx(-11.25)
    assert figures["parabola_focal_length"] == pytest.approx(20.0)
    assert figures["parabola_departure"] == pytest.approx(0.0, abs=1e-9)


def test_stations_of_a_table_are_even(small: Path) -> None:
    with (small / "package" / TABLE).open(encoding="utf-8", newline="") as stream:
        radii = [float(row["radius_mm"]) for row in csv.DictReader(stream)]
    steps = [later - earlier for earlier, later in pairwise(radii)]
    assert steps == pytest.approx([30.0 / 16.0] * 16, abs=1.01e-4)
