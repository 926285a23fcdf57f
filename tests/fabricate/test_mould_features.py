"""Hub, lead-out, draft and trim line: their geometry, and whole work packages of moulds that have them."""

from __future__ import annotations

import math
import re
from functools import cache
from pathlib import Path
from typing import Any, Literal

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fabricate.chain import Chain
from fabricate.drawing import MOULD_BODY, MOULD_CURVE, TRIM_LINE, from_drawing
from fabricate.inspection import sag_table
from fabricate.job import parse_job
from fabricate.make import make_package
from fabricate.mould import Mould, mould_around, with_trim_line
from fabricate.mould_keys import Mould as Shape
from fabricate.notices import notices
from fabricate.order import DRAWING, PROGRAM, SOLID, TABLE, Order
from fabricate.proof import prove_package
from fabricate.solid import mould_solid
from fabricate.turning_proof import prove_turning
from fabricate.turning_setup import Setup, dialect_of
from outputs.dxf import Drawing, read_drawing, write_drawing
from outputs.gcode import write_program
from outputs.gcode_reader import Replay, read_program
from profiles.arcpath import ArcPath
from profiles.errors import DishwrightError, JobError
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.mesh_deviation import mesh_deviation
from profiles.revolve import revolve
from profiles.solids import volume

Kind = Literal["male", "female"]
FOCAL = 100.0
CURVE = Meridian.of_face(Face(FOCAL), 160.0)
PLAIN: dict[str, Any] = {"body_height": 60.0, "edge_radius": 3.0}
HUB = {"hub": {"diameter": 40.0}}
PILOT = {"hub": {"diameter": 40.0, "pilot_diameter": 12.0, "pilot_length": 4.0}}
LEAD = {"lead_out": {"distance": 20.0}}
GROOVE = {"lead_out": {"distance": 20.0, "groove_radius": 5.0, "groove_depth": 2.0}}
KINDS: tuple[Kind, ...] = ("male", "female")


def moulded(kind: Kind, *tables: dict[str, Any], **keys: Any) -> Mould:
    shape: dict[str, Any] = dict(PLAIN)
    for table in tables:
        shape |= table
    return mould_around(CURVE, kind, Shape.model_validate(shape | keys))


def height(radius: float) -> float:
    return radius**2 / (4.0 * FOCAL)


# --- the geometry


@pytest.mark.parametrize("kind", KINDS)
def test_the_pad_is_level_with_the_forming_surface_at_its_edge(kind: Kind) -> None:
    plain, mould = moulded(kind), moulded(kind, HUB)
    assert mould.hub is not None
    assert float(mould.curve.radius(mould.curve.start)) == pytest.approx(20.0, abs=1e-12)
    level = -height(20.0) if kind == "male" else height(20.0) - mould.land_height
    assert mould.hub.vertices[:, 1] == pytest.approx(level, abs=1e-10)
    assert mould.back.vertices[-2:].tolist() == mould.hub.vertices.tolist()
    # Neither work zero nor land nor base move, so that body_height still counts from the virtual vertex.
    assert (mould.land, mould.base, mould.bore_radius) == (plain.land, plain.base, 0.0)


def test_the_pilot_stands_on_the_pad_and_the_bore_goes_through_it() -> None:
    mould = moulded("male", PILOT, bore_diameter=6.0)
    level = -height(20.0)
    assert mould.back.vertices[-4:] == pytest.approx(
        np.array([(3.0, level + 4.0), (6.0, level + 4.0), (6.0, level), (20.0, level)]), abs=1e-10
    )
    assert mould.bore_radius == 3.0
    assert mould.top == pytest.approx(level + 4.0, abs=1e-10)
    assert (moulded("male").top, moulded("male", HUB).top) == (0.0, pytest.approx(level, abs=1e-10))


@pytest.mark.parametrize("kind", KINDS)
def test_the_lead_out_goes_straight_on_and_the_edge_is_tangent_to_it(kind: Kind) -> None:
    mould = moulded(kind, LEAD, land_width=5.0)
    assert mould.rim is not None
    slope = float(CURVE.slope(CURVE.end)) * (-1.0 if kind == "male" else 1.0)
    assert mould.rim.tangents[0][0] == pytest.approx([np.cos(slope), np.sin(slope)], abs=1e-12)
    assert mould.rim.lengths[[0, 2]] == pytest.approx([20.0, 5.0], rel=1e-12)
    assert mould.rim.kinks == pytest.approx([0.0, 0.0], abs=1e-9)
    assert 1.0 / abs(mould.rim.curvatures[1]) == pytest.approx(3.0, rel=1e-9)
    assert mould.rim.vertices[0] == pytest.approx(mould.forming.points(mould.curve.end), abs=1e-10)


@pytest.mark.parametrize("kind", KINDS)
def test_the_groove_lies_across_the_middle_of_the_lead_out(kind: Kind) -> None:
    lead = moulded(kind, GROOVE).lead
    assert lead is not None
    assert lead.lengths[0] == pytest.approx(lead.lengths[2], rel=1e-9)
    assert 1.0 / lead.curvatures[1] == pytest.approx(5.0, rel=1e-9)
    line, bottom = lead.vertices[-1] - lead.vertices[0], lead.along(1, np.array([0.5]))[0] - lead.vertices[0]
    # Walked outwards the mould lies to the right: the groove is sunk to that side.
    aside = (line[0] * bottom[1] - line[1] * bottom[0]) / np.hypot(*line)
    assert aside == pytest.approx(-2.0, rel=1e-9)
    assert (line @ bottom) / (line @ line) == pytest.approx(0.5, rel=1e-9)


@pytest.mark.parametrize("kind", KINDS)
def test_draft_widens_the_outside_towards_the_base(kind: Kind) -> None:
    plain, mould = moulded(kind), moulded(kind, draft_deg=6.0)
    assert mould.outer_radius == plain.outer_radius
    assert mould.widest == pytest.approx(plain.outer_radius + (mould.land - mould.base) * np.tan(np.radians(6.0)))
    assert np.degrees(mould.draft) == pytest.approx(6.0, rel=1e-12)
    assert (plain.widest, plain.draft) == (plain.outer_radius, 0.0)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("depth", [0.05, 0.4, 3.0])
def test_the_trim_line_is_a_groove_of_90_degrees_across_the_normal(kind: Kind, depth: float) -> None:
    mould = moulded(kind)
    line = with_trim_line(mould, float(CURVE.radius(152.0)), depth).trim_line
    assert line is not None
    assert line.where == pytest.approx(152.0, abs=1e-9)
    assert line.path.vertices[1] == pytest.approx(line.point - depth * line.normal, abs=1e-12)
    sides = line.path.vertices[[0, 2]] - line.path.vertices[1]
    assert (sides @ line.normal) / np.hypot(*sides.T) == pytest.approx(np.sqrt(0.5), rel=1e-9)
    assert line.path.vertices[[0, 2]] == pytest.approx(mould.forming.points([line.inner, line.outer]), abs=1e-12)
    assert 0.0 < line.inner < line.where < line.outer < mould.curve.end
    assert with_trim_line(mould, 100.0, 0.0) is mould


REFUSED: dict[str, tuple[Kind, dict[str, Any], str]] = {
    "pad as wide as the forming surface": (
        *("male", {"hub": {"diameter": 300.0}}),
        r"mould\.hub\.diameter: value is 300 mm; allowed: less than the forming surface's end, 295\.082 mm",
    ),
    "pad no larger than the bore": (
        *("female", HUB | {"bore_diameter": 40.0}),
        r"mould\.hub\.diameter: value is 40 mm; allowed: more than mould\.bore_diameter, 40 mm; do: make the pad",
    ),
    "half a pilot": (
        *("male", {"hub": {"diameter": 40.0, "pilot_diameter": 5.0}}),
        r"mould\.hub\.pilot_length: value is 0 mm with pilot_diameter 5 mm .* both above 0 or both 0",
    ),
    "the other half": (
        *("male", {"hub": {"diameter": 40.0, "pilot_length": 5.0}}),
        r"mould\.hub\.pilot_diameter: value is 0 mm with .* both above 0 or both 0",
    ),
    "pilot in a cavity": (
        *("female", PILOT),
        r"mould\.hub\.pilot_diameter: value is 12 mm on a female mould; allowed: 0, as the insert that turns a cavity",
    ),
    "pilot as wide as the pad": (
        *("male", {"hub": {"diameter": 40.0, "pilot_diameter": 40.0, "pilot_length": 4.0}}),
        r"mould\.hub\.pilot_diameter: value is 40 mm; allowed: less than mould\.hub\.diameter, 40 mm",
    ),
    "pilot no larger than the bore": (
        *("male", PILOT | {"bore_diameter": 12.0}),
        r"mould\.hub\.pilot_diameter: value is 12 mm; allowed: more than mould\.bore_diameter, 12 mm",
    ),
    "half a groove": (
        *("male", {"lead_out": {"distance": 20.0, "groove_radius": 5.0}}),
        r"mould\.lead_out\.groove_depth: value is 0 mm with groove_radius 5 mm .* both above 0 or both 0",
    ),
    "its other half": (
        *("male", {"lead_out": {"distance": 20.0, "groove_depth": 5.0}}),
        r"mould\.lead_out\.groove_radius: value is 0 mm .* both above 0 or both 0",
    ),
    "groove deeper than its radius": (
        *("male", {"lead_out": {"distance": 20.0, "groove_radius": 5.0, "groove_depth": 5.1}}),
        r"mould\.lead_out\.groove_depth: value is 5\.1 mm; allowed: at most mould\.lead_out\.groove_radius, 5 mm",
    ),
    "groove wider than the lead-out": (
        *("female", {"lead_out": {"distance": 8.0, "groove_radius": 5.0, "groove_depth": 2.0}}),
        r"mould\.lead_out\.distance: value is 8 mm; allowed: more than the groove's width, 8 mm; do: make the lead-out",
    ),
    "lead-out below the base": (
        *("male", {"lead_out": {"distance": 200.0}}),
        r"mould\.body_height: value is 60 mm; allowed: more than 119.* or the lead-out shorter",
    ),
    "draft in front of the forming surface": (
        *("male", {"edge_radius": 0.0, "draft_deg": 45.0, "lead_out": {"distance": 1.0}, "focal": 60.0}),
        r"mould\.draft_deg: value is 45 degrees; allowed: at most 4\d\.\d+ degrees, where the outer side begins",
    ),
}


@pytest.mark.parametrize("name", REFUSED)
def test_what_does_not_fit_is_refused(name: str) -> None:
    kind, keys, message = REFUSED[name]
    keys = dict(keys)
    curve = Meridian.of_face(Face(keys.pop("focal", FOCAL)), 160.0)
    with pytest.raises(JobError, match=message):
        mould_around(curve, kind, Shape.model_validate(PLAIN | keys))


@pytest.mark.parametrize("radius", [float(CURVE.radius(159.0)), float(CURVE.radius(1.0)), 200.0])
def test_a_trim_line_needs_room_on_both_sides(radius: float) -> None:
    with pytest.raises(JobError, match=r"mould\.trim_line_depth: value is 0\.6 mm; allowed: at most 0(\.5)? mm, half"):
        with_trim_line(moulded("male"), radius, 0.6)


# --- volumes by Pappus-Guldinus against closed forms


@pytest.mark.parametrize("kind", KINDS)
def test_the_pad_takes_off_a_cap_or_fills_the_bowl(kind: Kind) -> None:
    """Paraboloid and plane at radius a enclose ``π a⁴/(8 f)``; a pilot is a cylinder."""
    cap = math.pi * 20.0**4 / (8.0 * FOCAL)
    plain, hub = (mould_solid(moulded(kind, *tables)).volume for tables in ((), (HUB,)))
    assert hub - plain == pytest.approx(-cap if kind == "male" else cap, rel=1e-7)
    if kind == "male":
        assert mould_solid(moulded(kind, PILOT)).volume - hub == pytest.approx(math.pi * 6.0**2 * 4.0, rel=1e-7)


@pytest.mark.parametrize("kind", KINDS)
def test_a_groove_takes_off_what_its_segment_turns(kind: Kind) -> None:
    """A segment of turn θ has the area ``R²(θ − sin θ)/2``, and its centroid ``4 R sin³(θ/2)/(3(θ − sin θ))`` out."""
    smooth, grooved = moulded(kind, LEAD), moulded(kind, GROOVE)
    turn = 2.0 * math.acos(1.0 - 2.0 / 5.0)
    segment, out = (
        0.5 * 25.0 * (turn - math.sin(turn)),
        20.0 * math.sin(0.5 * turn) ** 3 / (3 * (turn - math.sin(turn))),
    )
    assert smooth.lead is not None
    line = smooth.lead.vertices[1] - smooth.lead.vertices[0]
    # The circle's centre stands 3 mm over the lead-out's middle, on the tool's side.
    centre = 0.5 * (smooth.lead.vertices[0] + smooth.lead.vertices[1])[0] - 3.0 * line[1] / 20.0
    turned = 2.0 * math.pi * (centre + out * line[1] / 20.0) * segment
    difference = mould_solid(smooth).volume - mould_solid(grooved).volume
    assert difference == pytest.approx(turned, rel=1e-6)


@pytest.mark.parametrize("kind", KINDS)
def test_draft_adds_a_frustum_less_a_cylinder(kind: Kind) -> None:
    plain, mould = moulded(kind), moulded(kind, draft_deg=10.0)
    inner, outer, tall = mould.outer_radius, mould.widest, mould.land - mould.base
    added = math.pi * tall * ((inner**2 + inner * outer + outer**2) / 3.0 - inner**2)
    assert mould_solid(mould).volume - mould_solid(plain).volume == pytest.approx(added, rel=1e-9)


@pytest.mark.parametrize("kind", KINDS)
def test_a_trim_line_takes_off_a_triangle_and_arcs_beyond_it_next_to_nothing(kind: Kind) -> None:
    plain = moulded(kind)
    mould = with_trim_line(plain, float(CURVE.radius(152.0)), 0.5)
    assert mould.trim_line is not None
    triangle = ArcPath(np.vstack([mould.trim_line.path.vertices, mould.trim_line.path.vertices[:1]]), np.zeros(3))
    missing = mould_solid(plain).volume - mould_solid(mould, fit=1e-6).volume
    # Between the chord of the triangle and the surface lies a sliver besides.
    assert missing == pytest.approx(volume(triangle), rel=2e-3)
    assert volume(triangle) == pytest.approx(2.0 * math.pi * float(CURVE.radius(152.0)) * 0.25, rel=0.01)


MESHED: dict[str, tuple[dict[str, Any], float]] = {
    "hub": (HUB, 0.0),
    "pilot": (PILOT, 0.0),
    "pilot and bore": (PILOT | {"bore_diameter": 6.0}, 0.0),
    "lead-out": (LEAD, 0.0),
    "groove": (GROOVE | {"land_width": 5.0}, 0.0),
    "draft": ({"draft_deg": 5.0}, 0.0),
    "trim line": ({}, 0.3),
    "everything": (PILOT | GROOVE | {"bore_diameter": 6.0, "draft_deg": 5.0, "land_width": 5.0}, 0.2),
}


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("name", MESHED)
def test_the_mesh_is_closed_and_within_tolerance(kind: Kind, name: str) -> None:
    keys, depth = MESHED[name]
    if kind == "female" and "hub" in keys:
        keys = keys | HUB
    mould = with_trim_line(moulded(kind, keys), float(CURVE.radius(152.0)), depth)
    solid = mould_solid(mould, fit=1e-4)
    mesh = revolve(solid, chord_error=0.05)
    found = mesh_deviation(solid, mesh.corners, mesh.normals, chord_error=0.05 - 1e-4)
    assert found.findings == ()
    assert found.forming_facets == mesh.forming


# --- whole jobs

JOB = """
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
material = "aluminium 6061"
land_width = 6.0
edge_radius = 4.0
body_height = 40.0
[tolerance.files]
chord_error = 0.02
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
PAD_TABLE = "[mould.hub]\ndiameter = 16.0\n"
PILOT_TABLE = PAD_TABLE + "pilot_diameter = 6.0\npilot_length = 3.0\n"
LEAD_TABLE = "[mould.lead_out]\ndistance = 12.0\n"
GROOVE_TABLE = LEAD_TABLE + "groove_radius = 3.0\ngroove_depth = 0.8\n"
KEYS = {
    "hub": PAD_TABLE,
    "pilot": PILOT_TABLE,
    "pilot lower than the nose": PILOT_TABLE.replace("3.0", "0.5"),
    "pilot and bore": "bore_diameter = 4.0\n" + PILOT_TABLE,
    "lead-out": LEAD_TABLE,
    "groove": GROOVE_TABLE,
    "draft": "draft_deg = 8.0\n",
    "trim line": "trim_line_depth = 0.2\n",
    "everything": f"bore_diameter = 4.0\ndraft_deg = 5.0\ntrim_line_depth = 0.15\n{PILOT_TABLE}{GROOVE_TABLE}",
}


def job_of(kind: Kind, keys: str, *changes: tuple[str, str]) -> str:
    text = JOB.replace("[tolerance.files]", f"{keys}[tolerance.files]")
    if kind == "female":
        text = text.replace('contact_face = "concave"', 'contact_face = "convex"')
        text = re.sub("pilot_.*\n", "", text)
    for old, new in changes:
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    return text


@cache
def ordered(text: str) -> Order:
    return Order(parse_job(text, name="job.toml"))


@cache
def program(text: str) -> str:
    return write_program(ordered(text).turning_plan.program)


@cache
def replayed(text: str) -> Replay:
    return read_program(program(text), dialect_of(ordered(text).job))


def nose_path(text: str, section: str) -> ArcPath:
    across, along = Setup.of(ordered(text).job, ordered(text).mould).control_shift
    return replayed(text).section(section).moved(across=-across, along=-along)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("name", KEYS)
def test_a_package_of_each_feature_is_made_and_proved(kind: Kind, name: str, tmp_path: Path) -> None:
    order = ordered(job_of(kind, KEYS[name]))
    made = make_package(order, tmp_path / "package")
    assert all(verdict.findings == () for verdict in made.proof.files.values())
    assert {DRAWING, SOLID, PROGRAM, TABLE} < set(made.proof.files)
    assert prove_package(order, tmp_path / "package").passed
    drawing = read_drawing(tmp_path / "package" / DRAWING)
    curve, body = (from_drawing(drawing.layers[layer][0], "mm") for layer in (MOULD_CURVE, MOULD_BODY))
    # The curve is the forming surface and nothing else, and body and curve are the mould's own half section.
    ends = order.mould.curve.points([order.mould.curve.start, order.mould.curve.end])
    assert order.mould.from_lathe(curve).vertices[[0, -1]] == pytest.approx(ends, abs=0.021)
    assert body.vertices == pytest.approx(order.mould.half_section(curve).vertices, abs=1e-6)
    assert (TRIM_LINE in drawing.layers) == (name in {"trim line", "everything"})


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ('arcs = "centre"', 'arcs = "radius"'),
        ('arcs = "centre"', 'arcs = "lines"'),
        ('spindle_limit_word = "G50"', 'spindle_limit_word = "none"'),
        ("finish_allowance = 0.3", "finish_allowance = 0.0"),
        ("finish_allowance = 0.3", "stock_allowance = 0.0"),
        ("finish_allowance = 0.3", 'control_point = "nose-centre"\ndepth_of_cut = 0.4'),
    ],
)
@pytest.mark.parametrize("kind", KINDS)
def test_every_control_and_setting_gets_a_proved_program(kind: Kind, old: str, new: str) -> None:
    assert ordered(job_of(kind, KEYS["everything"], (old, new))).turning_plan.proof.findings == ()


def test_chords_with_hardly_an_allowance_leave_the_groove_to_its_own_cuts() -> None:
    text = job_of("male", KEYS["everything"], ('arcs = "centre"', 'arcs = "lines"'), ("ance = 0.3", "ance = 0.01"))
    assert ordered(text).turning_plan.proof.findings == ()


def test_an_inch_job_has_the_same_features(tmp_path: Path) -> None:
    def inches(match: re.Match[str]) -> str:
        return f"{match[1]} = {float(match[2]) / 25.4:.9g}"

    lengths = (
        "focal_length|rim_diameter|thickness|trim_allowance|land_width|edge_radius|body_height|chord_error|nose_radius"
        "|finish_allowance|bore_diameter|trim_line_depth|diameter|pilot_diameter|pilot_length|distance|groove_radius"
        "|groove_depth"
    )
    text = re.sub(rf"(?m)^({lengths}) = ([\d.]+)$", inches, job_of("male", KEYS["everything"]))
    text = (
        text.replace('units = "mm"', 'units = "inch"').replace('"G21"', '"G20"').replace("decimals = 4", "decimals = 5")
    )
    order, metric = ordered(text), ordered(job_of("male", KEYS["everything"]))
    assert order.mould.back.vertices == pytest.approx(metric.mould.back.vertices, abs=1e-6)
    assert make_package(order, tmp_path / "package").proof.passed


# --- the drawing's own layer


@pytest.mark.parametrize(
    ("paths", "message"),
    [
        ((ArcPath(np.array([(0.0, 0.0), (1.0, 1.0), (2.0, 0.0)]), np.zeros(2)),), "is not the line at the rim's place"),
        ((), "layer TRIM_LINE holds 0 paths; allowed: 1"),
    ],
)
def test_a_trim_line_elsewhere_fails_the_proof(paths: tuple[ArcPath, ...], message: str, tmp_path: Path) -> None:
    order = ordered(job_of("male", KEYS["trim line"]))
    make_package(order, tmp_path / "package")
    place = tmp_path / "package" / DRAWING
    drawing = read_drawing(place)
    layers = dict(drawing.layers) | {TRIM_LINE: paths}
    changed = Drawing(drawing.units, {name: kept for name, kept in layers.items() if kept}, drawing.notes)
    write_drawing(changed, place, version="R2010", entities="polyline")
    verdict = prove_package(order, tmp_path / "package").files[DRAWING]
    assert any(message in finding for finding in verdict.findings)


def test_a_trim_line_that_was_not_asked_for_fails_the_proof(tmp_path: Path) -> None:
    made = make_package(ordered(job_of("male", KEYS["trim line"])), tmp_path / "package")
    plain = ordered(job_of("male", ""))
    verdict = prove_package(plain, made.folder).files[DRAWING]
    assert any("shows a line that the job does not ask for" in finding for finding in verdict.findings)


# --- the program


@pytest.mark.parametrize("kind", KINDS)
def test_the_finishing_pass_is_the_forming_surface_and_nothing_else(kind: Kind) -> None:
    text = job_of(kind, KEYS["everything"])
    mould = ordered(text).mould
    path = nose_path(text, "FINISH")
    first, last = mould.forming.points([mould.curve.start, mould.curve.end])
    slope = mould.forming.slope([mould.curve.start, mould.curve.end])
    across, up = -0.8 * np.sin(slope), 0.8 * np.cos(slope)
    assert path.vertices[-1] == pytest.approx((last[0] + across[1], last[1] + up[1]), abs=0.03)
    if kind == "male":
        assert path.vertices[0] == pytest.approx((first[0] + across[0], first[1] + up[0]), abs=0.03)
    else:
        # In the corner around the pad the nose touches both before it gets to the edge of the pad.
        assert mould.hub is not None
        assert path.vertices[0, 1] == pytest.approx(mould.hub.vertices[-1, 1] + 0.8, abs=0.03)
        assert path.vertices[0, 0] == pytest.approx(first[0] - 0.8 * np.tan(0.5 * slope[0]), abs=0.2)


def test_pad_and_pilot_are_finished_before_it() -> None:
    text = job_of("male", KEYS["pilot"])
    mould = ordered(text).mould
    assert mould.hub is not None
    level, path = float(mould.hub.vertices[-1, 1]), nose_path(text, "FINISH HUB")
    assert path.vertices[:5] == pytest.approx(
        np.array([(0, level + 3.8), (3, level + 3.8), (3.8, level + 3), (3.8, level + 0.8), (8, level + 0.8)]), abs=1e-3
    )
    low = nose_path(job_of("male", KEYS["pilot lower than the nose"]), "FINISH HUB")
    assert low.vertices[2] == pytest.approx((3.0 + math.sqrt(0.8**2 - 0.3**2), level + 0.8), abs=1e-3)


def test_the_front_of_the_stock_clears_the_pilot() -> None:
    order = ordered(job_of("male", KEYS["pilot"]))
    setup = Setup.of(order.job, order.mould)
    assert setup.stock.front == pytest.approx(order.mould.top + 3.0)
    assert setup.stock.front > order.mould.top > 0.0
    wide = ordered(job_of("male", KEYS["draft"]))
    assert Setup.of(wide.job, wide.mould).stock.radius == pytest.approx(wide.mould.widest + 3.0)


@pytest.mark.parametrize("kind", KINDS)
def test_the_groove_is_cut_by_the_nose_as_it_is_drawn(kind: Kind) -> None:
    text = job_of(kind, GROOVE_TABLE)
    lead = ordered(text).mould.lead
    assert lead is not None
    path = nose_path(text, "FINISH EDGE AND LAND")
    bottom = [index for index, bend in enumerate(path.curvatures) if bend == pytest.approx(1.0 / 2.2, rel=2e-3)]
    assert len(bottom) == 1
    assert path.centres[bottom[0]] == pytest.approx(lead.centres[1], abs=2e-3)


def test_the_male_outside_is_turned_as_a_taper() -> None:
    text = job_of("male", KEYS["draft"])
    mould = ordered(text).mould
    last = [move for move in replayed(text).moves_in("TRUE THE OUTSIDE") if move.feed == 0.1]
    ends = np.array([move.end for move in last]) + 0.8
    gaps = (ends - mould.back.vertices[0]) @ np.array([np.cos(mould.draft), np.sin(mould.draft)])
    assert gaps == pytest.approx(0.8, abs=1e-3)


@pytest.mark.parametrize("kind", KINDS)
def test_the_trim_line_is_a_pass_of_its_own_after_finishing(kind: Kind) -> None:
    text = job_of(kind, KEYS["trim line"])
    order, lines = ordered(text), program(text).splitlines()
    assert lines.index("(END FINISH EDGE AND LAND)") < lines.index("(TRIM LINE)") < lines.index("(END TRIM LINE)")
    line, shift = order.mould.trim_line, np.array(Setup.of(order.job, order.mould).control_shift)
    assert line is not None
    feeds = [np.array(move.end) - shift for move in replayed(text).moves_in("TRIM LINE") if move.kind == "feed"]
    assert feeds[0] == pytest.approx(line.point + 0.6 * line.normal, abs=1e-3)
    assert feeds[1] == pytest.approx(line.point + 2.8 * line.normal, abs=1e-3)
    radius, height_there = order.chain.point_on_mould(order.chain.released.rim)
    place = (radius, -height_there if kind == "male" else height_there - order.mould.land_height)
    assert line.point == pytest.approx(place, abs=1e-9)


def edited_trim(text: str, change: str) -> str:
    """Return a program with another trim line: left out, half as deep, or much deeper."""
    lines = program(text).splitlines()
    start, end = lines.index("(TRIM LINE)"), lines.index("(END TRIM LINE)")
    if change == "left out":
        return "\n".join([*lines[:start], *lines[end + 1 :], ""])
    cut = next(number for number in range(start, end) if lines[number].startswith("G1"))
    words = dict(re.findall(r"([XZ])(-?[\d.]+)", lines[cut]))
    deeper = 0.5 if change == "deeper" else -0.1
    lines[cut] = f"G1 X{float(words['X']) - 2 * deeper:.4f} Z{float(words['Z']) - deeper:.4f} F0.1000"
    return "\n".join([*lines, ""])


@pytest.mark.parametrize(
    ("change", "codes"),
    [
        ("left out", {"no-section", "trim-line", "left-standing"}),
        ("shallower", {"trim-line", "left-standing"}),
        ("deeper", {"trim-line", "gouge"}),
    ],
)
def test_a_trim_line_that_is_not_the_moulds_is_found(change: str, codes: set[str]) -> None:
    order = ordered(job_of("male", KEYS["trim line"]))
    proof = prove_turning(edited_trim(job_of("male", KEYS["trim line"]), change), order.job, order.mould)
    assert codes <= {code for code, _ in proof.findings}


def test_a_program_without_its_hub_is_found() -> None:
    order = ordered(job_of("male", KEYS["pilot"]))
    text = (
        program(job_of("male", KEYS["pilot"])).replace("(FINISH HUB)", "(HUB)").replace("(END FINISH HUB)", "(END HUB)")
    )
    proof = prove_turning(text, order.job, order.mould)
    assert ("no-section", "the program has 0 sections (FINISH HUB) to (END FINISH HUB), not one") in proof.findings
    plain = ordered(job_of("male", ""))
    # Its pilot stands where a mould without a hub has none.
    found = prove_turning(program(job_of("male", KEYS["pilot"])), plain.job, plain.mould).findings
    assert "gouge" in {code for code, _ in found}


CANNOT: dict[str, tuple[Kind, str, tuple[tuple[str, str], ...], str]] = {
    "groove no wider than the nose": (
        *("male", GROOVE_TABLE, (("nose_radius = 0.8", "nose_radius = 3.0"),)),
        "mould.lead_out.groove_radius: value is 3.000 mm; allowed: more than turning.nose_radius, 3.000 mm",
    ),
    "groove too steep for the flanks": (
        *("female", GROOVE_TABLE, (("groove_depth = 0.8", "groove_depth = 2.0"),)),
        "mould.lead_out.groove_depth: value is 2.000 mm, at which the sides of the groove are too steep",
    ),
    "trim line deeper than the nose marks": (
        *("male", KEYS["trim line"], (("trim_line_depth = 0.2", "trim_line_depth = 0.5"),)),
        "mould.trim_line_depth: value is 0.500 mm; allowed: at most 0.2",
    ),
    "trim line wider than the trim": (
        *("male", KEYS["trim line"], (("trim_allowance = 4.0", "trim_allowance = 0.3"),)),
        "mould.trim_line_depth: value is 0.2 mm; allowed: at most 0.1",
    ),
    "no room between pilot and edge of the pad": (
        *("male", KEYS["pilot"], (("pilot_diameter = 6.0", "pilot_diameter = 14.0"),)),
        "turning.nose_radius: value is 0.800 mm, and the path of the nose cannot be made: the ring of the pad around "
        "the pilot is 1 mm wide, and the nose with what it leaves needs more than 1.1 mm",
    ),
    "a nose that stands on the pad alone": (
        *("female", PAD_TABLE.replace("16.0", "67.0"), (("nose_radius = 0.8", "nose_radius = 5.0"),)),
        "over the pad of the hub",
    ),
}


@pytest.mark.parametrize("name", CANNOT)
def test_what_the_insert_cannot_turn_is_refused(name: str) -> None:
    kind, keys, changes, message = CANNOT[name]
    with pytest.raises(JobError, match=re.escape(message)):
        _ = ordered(job_of(kind, keys, *changes)).turning_plan


RULED_OUT = {
    "half a pilot": (PAD_TABLE + "pilot_length = 3.0\n", "mould.hub.pilot_diameter: value is 0 mm"),
    "pilot and pad": (
        PILOT_TABLE.replace("= 6.0", "= 16.0"),
        "mould.hub.pilot_diameter: value is 16 mm; allowed: less",
    ),
    "pad and bore": ("bore_diameter = 16.0\n" + PAD_TABLE, "mould.hub.diameter: value is 16 mm; allowed: more than"),
    "pilot and bore": ("bore_diameter = 6.0\n" + PILOT_TABLE, "mould.hub.pilot_diameter: value is 6 mm; allowed: more"),
    "half a groove": (LEAD_TABLE + "groove_radius = 3.0\n", "mould.lead_out.groove_depth: value is 0 mm"),
    "deep groove": (
        GROOVE_TABLE.replace("0.8", "3.1"),
        "mould.lead_out.groove_depth: value is 3.1 mm; allowed: at most",
    ),
    "wide groove": (
        GROOVE_TABLE.replace("12.0", "4.0"),
        "mould.lead_out.distance: value is 4 mm; allowed: more than the",
    ),
    "no distance": ("[mould.lead_out]\n", "mould.lead_out.distance: value is missing"),
}


@pytest.mark.parametrize("name", RULED_OUT)
def test_the_file_alone_can_be_refused(name: str) -> None:
    keys, message = RULED_OUT[name]
    with pytest.raises(JobError, match=re.escape(message)):
        parse_job(job_of("male", keys), name="job.toml")


def test_a_pilot_in_a_cavity_is_refused_by_the_file() -> None:
    text = job_of("male", KEYS["pilot"]).replace('contact_face = "concave"', 'contact_face = "convex"')
    with pytest.raises(JobError, match=r"mould\.hub\.pilot_diameter: value is 6 mm on a female mould; allowed: 0"):
        parse_job(text, name="job.toml")


# --- what the shop is asked and told


def test_what_is_odd_is_asked() -> None:
    def asked(keys: str, *changes: tuple[str, str]) -> str:
        return "\n".join(notices(ordered(job_of("male", keys, *changes))))

    wide = "mould.hub.diameter is 16 mm and reflector.hole_diameter 0: the reflecting face would be flat there"
    assert wide in asked(PAD_TABLE)
    assert "mould.hub.diameter" not in asked(
        PAD_TABLE, ("rim_diameter = 60.0", "rim_diameter = 60.0\nhole_diameter = 16.0")
    )
    late = ("trim_allowance = 4.0", 'trim_allowance = 4.0\ntrim = "after-release"')
    assert 'mould.trim_line_depth is 0.2 mm with forming.trim "after-release"' in asked(KEYS["trim line"], late)
    assert "trim_line_depth is" not in asked(KEYS["trim line"])


def test_a_groove_that_would_hold_the_part_is_asked_about() -> None:
    text = job_of("male", GROOVE_TABLE.replace("0.8", "2.5"))
    assert "a bead rolled into it holds the part on the mould" in "\n".join(
        notices(ordered(text[: text.index("[turning]")]))
    )
    assert "holds the part" not in "\n".join(notices(ordered(job_of("male", GROOVE_TABLE))))


def test_header_notes_and_drawing_say_what_is_there(tmp_path: Path) -> None:
    text = job_of("male", KEYS["everything"])
    for line in (
        "(WORK ZERO: ON THE AXIS, AT THE VERTEX, VIRTUAL AT THE HUB, Z AWAY FROM THE HEADSTOCK)",
        "(HUB: PAD OF DIAMETER 16 MM, LEVEL WITH THE FORMING SURFACE, PILOT OF DIAMETER 6, 3 HIGH)",
        "(LEAD-OUT: STRAIGHT BEYOND THE FORMING SURFACE FOR 12 MM, GROOVE OF RADIUS 3, 0.8 DEEP)",
        "(DRAFT: THE OUTER SIDE WIDENS TOWARDS THE BASE BY 5 DEG)",
        "(TRIM LINE: SCRIBED 0.15 MM DEEP WHERE THE RIM IS CUT)",
        "(THE PILOT ENDS AT Z 2.200, ITS FOOT KEEPS A FILLET OF THE NOSE'S RADIUS)",
        "(FLANKS AND HOLDER MUST CLEAR THE PILOT, A WALL OF 90 DEG, 3.000 HIGH, AND THE LAND BEHIND)",
    ):
        assert line in program(text).splitlines()
    notes = "\n".join(ordered(text).turning_plan.notes)
    assert "the foot of the pilot keeps a fillet of the nose's radius, 0.800 mm" in notes
    assert "the trim line is marked by the nose, 0.150 mm deep" in notes
    assert "a fillet of the nose's radius stays" in "\n".join(ordered(job_of("female", PAD_TABLE)).turning_plan.notes)
    assert "draft of the outside is made elsewhere" in "\n".join(
        ordered(job_of("female", KEYS["draft"])).turning_plan.notes
    )
    make_package(ordered(text), tmp_path / "package")
    assert "hub: pad of diameter 16 mm, level with the forming surface, pilot of diameter 6, 3 high" in (
        read_drawing(tmp_path / "package" / DRAWING).notes
    )


def test_the_sag_table_has_no_mould_under_the_pad() -> None:
    table = sag_table(Chain(parse_job(job_of("male", PAD_TABLE), name="job.toml")), "mm")
    assert np.isnan(table.mould_sag).tolist() == (table.radius < 8.0).tolist()


# --- whatever the sizes


def _table(name: str, keys: dict[str, float]) -> str:
    return "\n".join([f"[mould.{name}]", *(f"{key} = {value!r}" for key, value in keys.items()), ""])


@st.composite
def featured(draw: st.DrawFn) -> str:
    """Draw a job with some features of any sizes."""

    def size(low: float, high: float) -> float:
        return draw(st.floats(low, high))

    kind: Kind = draw(st.sampled_from(KINDS))
    keys, tables = "", ""
    if draw(st.booleans()):
        hub = {"diameter": size(2.0, 60.0)}
        if kind == "male" and draw(st.booleans()):
            hub |= {"pilot_diameter": size(1.0, hub["diameter"]), "pilot_length": size(0.1, 10.0)}
        tables += _table("hub", hub)
    if draw(st.booleans()):
        lead = {"distance": size(2.0, 30.0)}
        if draw(st.booleans()):
            lead |= {"groove_radius": size(0.9, 6.0)}
            lead |= {"groove_depth": lead["groove_radius"] * size(0.02, 0.3)}
        tables += _table("lead_out", lead)
    keys += f"draft_deg = {size(0.0, 45.0)!r}\n" if draw(st.booleans()) else ""
    keys += f"trim_line_depth = {size(0.01, 0.3)!r}\n" if draw(st.booleans()) else ""
    keys += f"bore_diameter = {size(1.0, 12.0)!r}\n" if draw(st.booleans()) else ""
    return job_of(
        kind,
        keys + tables,
        ("edge_radius = 4.0", f"edge_radius = {draw(st.sampled_from([0.0, 2.0, 6.0]))}"),
        ("land_width = 6.0", f"land_width = {draw(st.sampled_from([0.0, 6.0]))}"),
        ("focal_length = 20.0", f"focal_length = {size(12.0, 60.0)!r}"),
        ("nose_radius = 0.8", f"nose_radius = {size(0.2, 1.6)!r}"),
        ("chord_error = 0.02", "chord_error = 0.08"),
        ('arcs = "centre"', f'arcs = "{draw(st.sampled_from(["centre", "lines"]))}"'),
    )


@settings(max_examples=6, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(text=featured())
def test_any_size_gives_a_proved_package_or_a_refusal_in_words(
    text: str, tmp_path_factory: pytest.TempPathFactory
) -> None:
    folder = tmp_path_factory.mktemp("featured") / "package"
    try:
        order = Order(parse_job(text, name="job.toml"))
        made = make_package(order, folder)
    except DishwrightError as error:
        assert "allowed: " in str(error)  # noqa: PT017
        assert "do: " in str(error)  # noqa: PT017
        assert not folder.exists()
    else:
        assert made.proof.passed
