"""Turning programs of the demo jobs: what the control would cut, what the header says, and what is refused."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from functools import cache
from importlib.resources import files

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fabricate.chain import Chain
from fabricate.job import Job, parse_job
from fabricate.mould import Mould
from fabricate.turning import TurningPlan, plan_turning
from fabricate.turning_setup import Setup, dialect_of
from outputs.gcode import Comment, Feed, write_program
from outputs.gcode_reader import read_program
from profiles.arcpath import ArcPath
from profiles.arcs import fewest_arcs
from profiles.errors import JobError

DEMO = {
    name: files("fabricate").joinpath(f"demo/{name}.toml").read_text(encoding="utf-8")
    for name in ("lamp", "terrace-heater", "link-dish", "display-bowl")
}
HEATER, LAMP, BOWL, DISH = (DEMO[name] for name in ("terrace-heater", "lamp", "display-bowl", "link-dish"))
INCH_HEATER = """title = "Terrace heater, in inches"
units = "inch"
[reflector]
focal_length = 4.33
rim_diameter = 15.75
reflecting_face = "concave"
[sheet]
material = "aluminium 1085-O"
thickness = 0.04
[forming]
process = "spinning"
contact_face = "concave"
trim_allowance = 0.3
[forming.springback]
law = "none"
[forming.thinning]
law = "none"
[mould]
material = "tooling board"
edge_radius = 0.12
body_height = 1.5
[tolerance.files]
chord_error = 0.0004
[turning]
spindle_direction = "M3"
spindle_limit_untrued = 200
spindle_limit = 500
rim_speed_limit = 50.0
surface_speed = 900.0
nose_radius = 0.03125
stock_allowance = 0.15
[turning.control]
x_word = "diameter"
plane_word = "G18"
units_word = "G20"
absolute_word = "none"
feed_per_rev_word = "G99"
spindle_limit_word = "G50"
arcs = "centre"
decimals = 5
"""


def edited(text: str, **changes: object) -> str:
    """Return the text of a job with other values for keys that stand in it once."""
    for key, value in changes.items():
        shown = f'"{value}"' if isinstance(value, str) else value
        text, count = re.subn(rf"(?m)^{key} = .*$", f"{key} = {shown}", text)
        assert count == 1, key
    return text


@cache
def ordered(text: str) -> tuple[Job, Mould, ArcPath]:
    job = parse_job(text, name="job.toml")
    in_mm = job.in_millimetres()
    mould = Chain(in_mm).mould
    slope = 1e-3 * job.tolerance.files.slope_mrad
    return job, mould, fewest_arcs(mould.curve, distance=0.9999 * in_mm.tolerance.files.chord_error, slope=slope).path


@cache
def planned(text: str) -> TurningPlan:
    return plan_turning(*ordered(text))


@cache
def written(text: str) -> str:
    return write_program(planned(text).program)


@pytest.mark.parametrize("text", [*DEMO.values(), INCH_HEATER], ids=[*DEMO, "inch"])
def test_every_demo_job_is_planned_and_keeps_its_tolerance(text: str) -> None:
    job, mould, _ = ordered(text)
    proof = planned(text).proof
    assert proof.findings == ()
    assert proof.deviation is not None
    assert proof.removal is not None
    assert proof.deviation.normal <= Setup.of(job, mould).chord_error
    assert proof.removal.left_mm < 0.1 * Setup.of(job, mould).allowance


@pytest.mark.parametrize("text", [HEATER, LAMP, BOWL], ids=["heater", "lamp", "bowl"])
def test_the_finished_surface_is_the_mould_at_every_point(text: str) -> None:
    """Measured apart from the proof: the circle around each written nose centre touches the exact curve."""
    job, mould, _ = ordered(text)
    setup = Setup.of(job, mould)
    path = read_program(written(text), dialect_of(job)).section("FINISH")
    shift = np.array(setup.control_shift)
    centres = path.points(sagitta=1e-5) - shift
    lathe = mould.to_lathe(
        ArcPath(mould.curve.points(np.linspace(mould.curve.start, mould.curve.end, 20001)), np.zeros(20000))
    )
    gaps = [np.hypot(*(lathe.vertices - centre).T).min() for centre in centres[::7]]
    assert np.abs(np.array(gaps) - setup.nose).max() < setup.chord_error + 1e-4


@pytest.mark.parametrize(("text", "word"), [(HEATER, "G3"), (LAMP, "G3"), (BOWL, "G2")], ids=["heater", "lamp", "bowl"])
def test_from_the_axis_outwards_a_male_mould_needs_g3_and_a_female_one_g2(text: str, word: str) -> None:
    lines = written(text).splitlines()
    finish = lines[lines.index("(FINISH)") + 1 : lines.index("(END FINISH)")]
    assert {line.split()[0] for line in finish} == {word}
    assert len(finish) == len(ordered(text)[2])


def test_the_nose_centre_reaches_the_axis_and_goes_no_further() -> None:
    assert min(float(word[1:]) for word in re.findall(r"X-?[\d.]+", written(HEATER))) == -1.6
    bowl = read_program(written(BOWL), dialect_of(ordered(BOWL)[0]))
    assert min(move.end[0] for move in bowl.moves) == 0.8
    for text, start in ((HEATER, (-0.8, -0.8)), (BOWL, (0.8, -0.8))):
        job, mould, _ = ordered(text)
        path = read_program(written(text), dialect_of(job)).section("FINISH")
        vertex = Setup.of(job, mould).vertex
        assert path.vertices[0] == pytest.approx((start[0], vertex + 0.8 + start[1]), abs=0.02)


def test_under_a_bore_the_finishing_pass_begins_at_its_edge_and_the_cut_before_it_on_the_axis() -> None:
    job, mould, _ = ordered(LAMP)
    replay = read_program(written(LAMP), dialect_of(job))
    first = replay.moves_in("FINISH")[0]
    edge = mould.curve.points(mould.curve.start)
    slope = float(mould.curve.slope(mould.curve.start))
    assert first.start is not None
    assert first.start[0] == pytest.approx(edge[0] + 0.4 * math.sin(slope) - 0.4, abs=2e-3)
    before = replay.moves[replay.moves.index(first) - 1]
    assert before.start == (-0.4, pytest.approx(0.0, abs=5e-3))
    assert before.kind == "feed"


def test_edge_and_land_follow_without_lifting() -> None:
    job, _, _ = ordered(BOWL)
    replay = read_program(written(BOWL), dialect_of(job))
    finish, edge = replay.moves_in("FINISH"), replay.moves_in("FINISH EDGE AND LAND")
    assert edge[0].start == finish[-1].end
    assert {move.kind for move in (*finish, *edge)} == {"feed"}
    assert edge[-1].end[1] == pytest.approx(0.0, abs=1e-3)


def test_rapids_run_along_one_axis_at_a_time() -> None:
    for text in (HEATER, BOWL):
        moves = read_program(written(text), dialect_of(ordered(text)[0])).moves
        for move in moves:
            if move.kind == "rapid" and move.start is not None:
                assert move.start[0] == move.end[0] or move.start[1] == move.end[1], move


def test_the_program_stops_with_the_spindle_at_rest_before_the_limit_rises() -> None:
    lines = written(HEATER).splitlines()
    stop = lines.index("M0")
    assert lines.index("(END FACE THE FRONT)") < lines.index("M5") < stop < lines.index("M3", stop)
    assert "D500" not in "".join(lines[:stop])
    assert lines[-3:] == ["G97 S50", "M5", "M30"]


CONTROLS = [
    {"x_word": "radius", "arcs": "radius", "spindle_limit_word": "G92"},
    {"x_word": "radius", "arcs": "lines", "spindle_limit_word": "none", "plane_word": "none"},
    {"arcs": "centre", "spindle_limit_word": "none", "absolute_word": "none", "feed_per_rev_word": "G99"},
    {"arcs": "lines", "spindle_limit_word": "G50", "decimals": 3},
]


@pytest.mark.parametrize("text", [HEATER, BOWL, INCH_HEATER], ids=["male", "female", "inch"])
@pytest.mark.parametrize("control", CONTROLS, ids=range(len(CONTROLS)))
def test_every_kind_of_control_gets_a_proved_program(text: str, control: dict[str, object]) -> None:
    changed = control if text != INCH_HEATER else control | {"decimals": 5}
    assert planned(edited(text, **changed)).proof.findings == ()
    assert ("G96" in written(edited(text, **changed))) == (control["spindle_limit_word"] != "none")


@pytest.mark.parametrize("point", ["nose-centre", "imaginary-tip"])
def test_the_control_point_moves_every_position_alike(point: str) -> None:
    text = HEATER.replace("[turning.control]", f'control_point = "{point}"\n[turning.control]')
    job, mould, _ = ordered(text)
    first = read_program(written(text), dialect_of(job)).moves[0].end
    across = 0.0 if point == "nose-centre" else -0.8
    assert first == pytest.approx((mould.outer_radius + 4.0 + 0.8 + 20.0 + across, 4.0 + 0.8 + 20.0 + across), abs=1e-4)


def test_closer_arcs_are_fitted_where_the_digits_leave_too_little() -> None:
    text = edited(HEATER, decimals=3, chord_error=0.003)
    job, mould, _ = ordered(text)
    tight = fewest_arcs(mould.curve, distance=0.0029999).path
    plan = plan_turning(job, mould, tight)
    assert plan.proof.findings == ()
    # A path that is far too coarse is not taken either.
    coarse = fewest_arcs(mould.curve, distance=0.5).path
    assert plan_turning(job, mould, coarse).proof.findings == ()


def test_the_same_job_gives_the_same_bytes() -> None:
    assert write_program(plan_turning(*ordered(LAMP)).program) == written(LAMP)


def test_no_title_can_pass_for_a_section() -> None:
    words = " ".join(["Wort"] * 18)
    title = f"FINISH (FINISH) {words} FINISH"
    plan = planned(edited(HEATER, title=title))
    assert plan.proof.findings == ()
    comments = [block.text for block in plan.program.blocks if isinstance(block, Comment)]
    assert comments.count("FINISH") == 1
    assert sum(text.startswith("JOB title") for text in comments) == 2


def test_the_header_says_what_a_turner_must_know() -> None:
    header = written(BOWL).split("(FACE THE FRONT)")[0]
    for text in (
        "(JOB TITLE WINDOW DISPLAY BOWL 300)",
        "(FEMALE MOULD OF ALUMINIUM 6061)",
        "(WORK ZERO: ON THE AXIS, AT THE PLANE OF THE LAND, Z AWAY FROM THE HEADSTOCK)",
        "(OUTSIDE: NOT TURNED HERE, AS AN INSERT FOR CAVITIES CANNOT)",
        "(X AND Z ARE OF THE IMAGINARY TIP: FROM THE NOSE CENTRE, RADIUS 0.800 AND Z -0.800)",
        "(AT MOST 200 REV/MIN UNTIL THE STOCK RUNS TRUE, 742 AFTER)",
        "LOCAL CODES AND LICENSED PRACTICE DECIDE",
    ):
        assert text in header
    lift = re.search(r"MOVED IN \+Z BY (\d+) MM", header)
    assert lift is not None
    assert int(lift[1]) > 3.0 + 68.9
    assert all(len(line) <= 100 for line in header.splitlines())
    assert "M4 CAN UNSCREW" in written(DISH)


def test_the_notes_say_what_is_left_to_the_shop() -> None:
    assert any("outside of a cavity is not turned" in note for note in planned(BOWL).notes)
    assert any("spindle_limit 800 lowered to 742" in note for note in planned(BOWL).notes)
    assert any("the bore is made elsewhere" in note for note in planned(LAMP).notes)
    assert any("down to Z -132.667 mm" in note for note in planned(HEATER).notes)


LEANING_LAMP = LAMP.replace("slope_mrad = 2.0", "slope_mrad = 6.0")
REFUSED = {
    "nose as large as the fillet": (
        *(HEATER, {"nose_radius": 3.0}),
        "turning.nose_radius: value is 3.000 mm, not smaller than the mould's smallest concave radius, 3.000 mm",
    ),
    "sharp inner corner": (
        *(HEATER, {"edge_radius": 0.0, "land_width": 5.0}),
        "turning.nose_radius: value is 0.800 mm, not smaller than the mould's smallest concave radius, 0.000 mm",
    ),
    "nose as large as the cavity": (*(BOWL, {"nose_radius": 49.0, "focal_length": 22.0}), "turning.nose_radius: value"),
    "rim too fast": (
        *(HEATER, {"spindle_limit": 900}),
        'turning.spindle_limit: value is 900 rev/min, at which the rim of the stock, of "tooling board" and 422.363 mm '
        "in diameter, runs at 19.9 m/s; allowed: at most 678 rev/min, for turning.rim_speed_limit = 15 m/s; do: lower",
    ),
    "rim too fast, in feet": (*(INCH_HEATER, {"rim_speed_limit": 20.0}), "turning.rim_speed_limit = 20 ft/s"),
    "digits too coarse": (
        *(HEATER, {"decimals": 3, "chord_error": 0.001}),
        "turning.control.decimals: value is 3, so that positions are rounded to 0.001 mm, too coarse for "
        "tolerance.files.chord_error = 0.001 mm",
    ),
    "digits too coarse for short chords": (
        *(LEANING_LAMP, {"decimals": 3, "arcs": "lines", "chord_error": 0.01}),
        "turning.control.decimals: value is 3, with which the finished surface leans by",
    ),
    "too many cuts": (*(HEATER, {"depth_of_cut": 0.01}), "turning.depth_of_cut: 0.010 mm a cut"),
    "hardly any speed": (*(DISH, {"surface_speed": 1.0}), "turning.surface_speed: value is 1 m/min, which turns stock"),
    "a feed of no digits": (*(INCH_HEATER, {"finishing_feed": 0.00004}), "turning: a feed of 4e-05 per revolution"),
}


@pytest.mark.parametrize("name", REFUSED)
def test_what_cannot_be_turned_is_refused(name: str) -> None:
    text, changes, message = REFUSED[name]
    assert isinstance(text, str)
    assert isinstance(changes, dict)
    missing = {key: value for key, value in changes.items() if f"\n{key} = " not in text}
    for key, value in missing.items():
        text = text.replace("[turning.control]", f"{key} = {value}\n[turning.control]")
    job, mould, forming = ordered(edited(text, **{key: value for key, value in changes.items() if key not in missing}))
    with pytest.raises(JobError, match=re.escape(str(message))):
        plan_turning(job, mould, forming)


def test_a_replay_that_finds_a_fault_refuses_the_job(monkeypatch: pytest.MonkeyPatch) -> None:
    good = planned(HEATER).proof
    fault = replace(good, findings=(("gouge", "line 7: the insert cuts"),))
    monkeypatch.setattr("fabricate.turning.prove_turning", lambda *_: fault)
    with pytest.raises(JobError, match="the replay of the program finds: line 7: the insert cuts"):
        plan_turning(*ordered(HEATER))


@settings(max_examples=12, deadline=None)
@given(data=st.data())
def test_the_insert_stays_outside_the_finished_part(data: st.DataObject) -> None:
    text = data.draw(st.sampled_from([HEATER, BOWL]))
    rim = data.draw(st.floats(40.0, 800.0))
    control = data.draw(st.sampled_from(["centre", "radius", "lines"]))
    text = edited(
        text,
        rim_diameter=rim,
        focal_length=rim * data.draw(st.floats(0.2, 1.2)),
        edge_radius=data.draw(st.floats(1.5, 6.0)),
        nose_radius=data.draw(st.floats(0.2, 1.2)),
        depth_of_cut=max(data.draw(st.floats(0.5, 4.0)), rim / 200.0),
        finish_allowance=data.draw(st.floats(0.0, 0.6)),
        stock_allowance=data.draw(st.floats(0.0, 8.0)),
        spindle_limit=300,
        arcs=control,
    )
    job, mould, forming = ordered(text)
    proof = plan_turning(job, mould, forming).proof
    assert proof.removal is not None
    assert proof.removal.gouge_mm <= Setup.of(job, mould).chord_error + 1e-3


def test_every_cut_states_its_feed() -> None:
    cuts = [block for block in planned(HEATER).program.blocks if isinstance(block, Feed)]
    assert written(HEATER).count(" F0.") >= len(cuts) - 2


def test_a_job_without_the_table_has_no_program() -> None:
    text = HEATER[: HEATER.index("[turning]")]
    with pytest.raises(JobError, match=re.escape("turning: the table is missing; allowed: a [turning] table")):
        plan_turning(*ordered(text))
    with pytest.raises(JobError, match="turning: the table is missing"):
        dialect_of(ordered(text)[0])
