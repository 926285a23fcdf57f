"""What must never become files: one row for each fault in a job, in its geometry or in its turning, through ``make``.

Every refusal names key and value, says what is allowed and what to do, leaves with 2 and writes nothing.
"""

# ruff: noqa: E501 - the table keeps one case to a line, so that it can be read down its columns

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from typer.testing import CliRunner, Result

from fabricate import order, turning
from fabricate.command import app
from outputs.gcode import write_program

MALE = """
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
material = "maple"
land_width = 6.0
edge_radius = 4.0
body_height = 40.0
[tolerance.files]
chord_error = 0.1
[turning]
spindle_direction = "M3"
spindle_limit_untrued = 400
spindle_limit = 1500
rim_speed_limit = 15.0
nose_radius = 0.8
finish_allowance = 0.3
[turning.control]
x_word = "diameter"
plane_word = "G18"
units_word = "G21"
absolute_word = "none"
feed_per_rev_word = "G99"
spindle_limit_word = "G50"
arcs = "centre"
decimals = 4
"""
FEMALE = MALE.replace('contact_face = "concave"', 'contact_face = "convex"')
NO_SPRINGBACK = '[forming.springback]\nlaw = "none"'
NO_THINNING = '[forming.thinning]\nlaw = "none"'
STATIONS = '[forming.springback]\nlaw = "stations"\nstations = '
OWN = "outer_diameter = {}\nbody_height = 40.0"

# base, text to replace, its replacement, what the refusal says
REFUSED = {
    # figures that contradict each other, or are none
    "focal length against depth": (MALE, "focal_length = 20.0", "focal_length = 20.0\ndepth = 12.0", "reflector.depth: value is 12 mm, but focal_length = 20 gives a depth of 11.25 mm"),
    "units missing": (MALE, 'units = "mm"\n', "", 'units: value is missing; allowed: "mm", "inch"'),
    "gauge without system": (MALE, "thickness = 1.0", "gauge = 18", "sheet.gauge_system: value is missing; allowed: AWG, SWG, USG, MSG"),
    "NaN": (MALE, "focal_length = 20.0", "focal_length = nan", "reflector.focal_length: value is nan mm"),
    "infinity": (MALE, "body_height = 40.0", "body_height = inf", "mould.body_height: value is inf mm"),
    "minus infinity": (MALE, "land_width = 6.0", "land_width = -inf", "mould.land_width: value is -inf mm"),
    "decimal comma": (MALE, "thickness = 1.0", "thickness = 1,0", "a point is the decimal mark"),
    "decimal comma in marks": (MALE, "thickness = 1.0", 'thickness = "1,0"', 'sheet.thickness: value is "1,0"'),
    "unknown key": (MALE, "focal_length", "focal_lenght", "nearest known key reflector.focal_length"),
    # what no default is safe for
    "reflecting face not stated": (MALE, 'reflecting_face = "concave"', "", "reflector.reflecting_face: value is missing"),
    "contact face not stated": (MALE, 'contact_face = "concave"', "", "forming.contact_face: value is missing"),
    "springback not stated": (MALE, NO_SPRINGBACK, "", "forming.springback.law: value is missing"),
    "thinning not stated": (MALE, NO_THINNING, "", "forming.thinning.law: value is missing"),
    "chord error not stated": (MALE, "chord_error = 0.1", "", "tolerance.files.chord_error: value is missing"),
    "springback too large": (MALE, NO_SPRINGBACK, '[forming.springback]\nlaw = "curvature"\npercent = 40.1', "forming.springback.percent: value is 40.1 %; allowed: a number from -20 to 40 %"),
    "springback too negative": (MALE, NO_SPRINGBACK, '[forming.springback]\nlaw = "focal-length"\npercent = -20.1', "forming.springback.percent: value is -20.1 %; allowed: a number from -20 to 40 %"),
    "depth loss past all springback": (MALE, NO_SPRINGBACK, '[forming.springback]\nlaw = "focal-length"\ndepth_loss = 30.0', "forming.springback.depth_loss: value is 30"),
    # geometry
    "offset past the centre of curvature": (MALE.replace('"concave"\n[sheet]', '"convex"\n[sheet]'), "thickness = 1.0", "thickness = 45.0", "folds the curve"),
    "cover past the centre of curvature": (MALE, "body_height = 40.0", "body_height = 40.0\ncover_thickness = 41.0", "folds the curve"),
    "part locks on": (MALE, NO_SPRINGBACK, f"{STATIONS}[[0.0, 0.0], [5.0, -100.0]]", "the mould is re-entrant: its slope turns at radius "),
    "bore past the forming surface": (MALE, "body_height = 40.0", "body_height = 40.0\nbore_diameter = 59.0\nspigot_diameter = 20.0\nspigot_length = 5.0", "mould.spigot_diameter"),
    "hub wider than the mould": (MALE, "body_height = 40.0", "body_height = 40.0\nspigot_diameter = 200.0\nspigot_length = 5.0", "mould.spigot_diameter: value is 200 mm; allowed: at most the mould's outer diameter"),
    "land that does not fit": (MALE, "body_height = 40.0", OWN.format(61.0), "mould.outer_diameter: value is 61 mm; allowed: at least"),
    "body lower than its edge": (MALE, "body_height = 40.0", "body_height = 0.5", "mould.body_height: value is 0.5 mm; allowed: more than"),
    # turning
    "nose in a hollow too tight": (MALE, "nose_radius = 0.8", "nose_radius = 5.0", "turning.nose_radius: value is 5.000 mm"),
    "nose in a cavity too tight": (FEMALE, "nose_radius = 0.8", "nose_radius = 45.0", "turning.nose_radius: value is 45.000 mm"),
    "spindle limit not stated": (MALE, "spindle_limit = 1500\n", "", "no turning program is written without a spindle limit"),
    "untrued limit not stated": (MALE, "spindle_limit_untrued = 400\n", "", "turning.spindle_limit_untrued: value is missing"),
    "spindle direction not stated": (MALE, 'spindle_direction = "M3"\n', "", "turning.spindle_direction: value is missing"),
    "rim speed of wood not stated": (MALE, "rim_speed_limit = 15.0\n", "", 'turning.rim_speed_limit: value is 0 m/s, and the mould is of "maple"'),
    "rim speed of wood too high": (MALE, "spindle_limit = 1500", "spindle_limit = 9000", "turning.spindle_limit: value is 9000 rev/min"),
    "rim speed of laminate too high": (MALE.replace("maple", "MDF laminate"), "spindle_limit = 1500", "spindle_limit = 9000", '"MDF laminate"'),
    "rim speed of board too high": (MALE.replace("maple", "tooling board"), "spindle_limit = 1500", "spindle_limit = 9000", '"tooling board"'),
    "rim speed of a print too high": (MALE.replace("maple", "PLA print"), "spindle_limit = 1500", "spindle_limit = 9000", '"PLA print"'),
    "rim speed of unnamed stock too high": (MALE.replace('"maple"', '""'), "spindle_limit = 1500", "spindle_limit = 9000", "unnamed material"),
    "G90 where it cuts": (MALE, 'absolute_word = "none"', 'absolute_word = "G90"', "on such controls G90 is a cutting cycle"),
    "word of the wrong unit": (MALE, '"G21"', '"G20"', 'value is "G20" with units = "mm"'),
    "digits too coarse": (MALE.replace("chord_error = 0.1", "chord_error = 0.0005"), "decimals = 4", "decimals = 3", "turning.control.decimals: value is 3"),
}  # fmt: skip
CONTROL = (
    *("x_word", "plane_word", "units_word", "absolute_word", "feed_per_rev_word", "spindle_limit_word", "arcs"),
    "decimals",
)


def make(text: str, folder: Path) -> Result:
    """Make a package; whatever is no exit is raised."""
    (folder / "job.toml").write_text(text, encoding="utf-8")
    result = CliRunner().invoke(app, ["make", str(folder / "job.toml"), "-o", str(folder / "out")])
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    return result


def check_refused(text: str, says: str, folder: Path) -> None:
    """Make a package and see it refused in these words, with nothing written."""
    result = make(text, folder)
    assert (result.exit_code, result.stdout) == (2, "")
    assert says in result.stderr
    assert all(line.startswith(f"{folder / 'job.toml'}: ") for line in result.stderr.splitlines())
    assert all("; allowed: " in line and "; do: " in line for line in result.stderr.splitlines())
    assert [entry.name for entry in folder.iterdir()] == ["job.toml"]


@pytest.mark.parametrize("base", ["male", "female"])
def test_the_jobs_edited_here_are_made_as_they_stand(base: str, tmp_path: Path) -> None:
    assert make(MALE if base == "male" else FEMALE, tmp_path).exit_code == 0


@pytest.mark.parametrize("case", REFUSED)
def test_refused(case: str, tmp_path: Path) -> None:
    base, old, new, says = REFUSED[case]
    assert base.count(old) >= 1
    check_refused(base.replace(old, new, 1), says, tmp_path)


@pytest.mark.parametrize("word", CONTROL)
def test_a_word_of_the_control_that_is_not_stated(word: str, tmp_path: Path) -> None:
    text = re.sub(rf"^{word} = .*\n", "", MALE, flags=re.MULTILINE)
    check_refused(text, f"turning.control.{word}: value is missing", tmp_path)


def test_the_radius_at_which_the_part_locks_on_is_the_right_one(tmp_path: Path) -> None:
    base, old, new, _ = REFUSED["part locks on"]
    result = make(base.replace(old, new), tmp_path)
    said = re.search(r"its slope turns at radius (\S+) mm", result.stderr)
    assert said is not None
    # The contract's formula by plain sums: curvature less p(r)/100 of that at the vertex, p = 20 r up to r = 5.
    radius = np.linspace(0.0, 34.0, 200_001)
    slope = np.arctan(radius / 40.0)
    length = 20.0 * (np.tan(slope) / np.cos(slope) + np.arcsinh(np.tan(slope)))
    lost = np.minimum(20.0 * radius, 100.0) / 100.0 / 40.0
    step = np.diff(length)
    on_mould = slope - np.concatenate([[0.0], np.cumsum(0.5 * (lost[1:] + lost[:-1]) * step)])
    turns = int(np.argmax((on_mould <= 0.0) & (radius > 1.0)))
    middle = 0.5 * (np.cos(on_mould[1:]) + np.cos(on_mould[:-1]))
    assert float(said[1]) == pytest.approx(float(np.cumsum(middle * step)[turns - 1]), abs=1e-3)


# programs and meshes that no job can ask for: planted in what make itself writes

PROGRAMS = {
    "a rapid through stock": (r"(?<=\(ROUGH\)\n)((?:.*\n)*?(?:G1.*\n(?:G0.*\n)*){2})G1 (X\S+ Z\S+) F\S+$", r"\1G0 \2", "a rapid drives the insert"),
    "no spindle limit": (r"^G50 S\d+\n", "", "no spindle limit stated before it"),
    "no finishing pass": (r"^\(FINISH\)\n", "", "(FINISH)"),
}  # fmt: skip


@pytest.mark.parametrize("case", PROGRAMS)
def test_no_program_is_better_than_a_bad_one(case: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    old, new, says = PROGRAMS[case]

    def spoilt(program: Any) -> str:
        text = re.sub(old, new, write_program(program), flags=re.MULTILINE)
        assert text != write_program(program)
        return text

    monkeypatch.setattr(turning, "write_program", spoilt)
    check_refused(MALE, says, tmp_path)


def _crossing(vertices: Any, triangles: Any) -> tuple[Any, Any]:
    """Pull one vertex of the dome through the base."""
    moved = vertices.copy()
    moved[vertices[:, 2].argmax()] -= (0.0, 0.0, 3.0 * vertices[:, 2].max())
    return moved, triangles


MESHES = {
    "open": (lambda vertices, triangles: (vertices, triangles[:-1]), "open"),
    "inside out": (lambda vertices, triangles: (vertices, triangles[:, ::-1]), "face inwards"),
    "crossing itself": (_crossing, "strays by"),
}


@pytest.mark.parametrize("case", MESHES)
def test_a_bad_mesh_never_gets_into_place(case: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    change, says = MESHES[case]
    drilled_mesh = order.drilled_mesh

    def spoilt(*arguments: Any, **options: Any) -> Any:
        mesh = drilled_mesh(*arguments, **options)
        vertices, triangles = change(mesh.vertices, mesh.triangles)
        return type("Mesh", (), {"vertices": vertices, "triangles": triangles})

    monkeypatch.setattr(order, "drilled_mesh", spoilt)
    result = make(MALE[: MALE.index("[turning]")], tmp_path)
    assert result.exit_code == 1
    assert "the proof of mould.stl failed: nothing was moved into place" in result.stderr
    assert says in result.stdout
    assert [entry.name for entry in tmp_path.iterdir()] == ["job.toml"]
