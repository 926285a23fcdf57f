from __future__ import annotations

import hashlib
import math
from importlib.resources import files
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fabricate.job import Job, job_hash, job_text, parse_job, questions, read_job
from fabricate.job_derive import focal_length_of
from fabricate.job_table import Table
from profiles.errors import JobError
from profiles.face import Face

DEMOS = ("lamp", "terrace-heater", "listening-dish", "link-dish", "display-bowl")


def demo(name: str) -> str:
    return files("fabricate").joinpath(f"demo/{name}.toml").read_text(encoding="utf-8")


def edited(name: str, *changes: tuple[str, str]) -> str:
    text = demo(name)
    for old, new in changes:
        assert old in text
        text = text.replace(old, new, 1)
    return text


def leaves(table: Table, path: str = "") -> dict[str, object]:
    found: dict[str, object] = {}
    for name in type(table).model_fields:
        value = getattr(table, name)
        found |= leaves(value, f"{path}{name}.") if isinstance(value, Table) else {path + name: value}
    return found


def test_defaults_are_those_of_the_contract() -> None:
    minimal = "\n".join(
        line for line in demo("listening-dish").split("[mould]", maxsplit=1)[0].splitlines() if "trim" not in line
    )
    job = parse_job(minimal + "\n[tolerance.files]\nchord_error = 0.01\n", name="minimal.toml")
    expected = {
        "number": "", "revision": 1, "reflector.hole_diameter": 0.0, "reflector.conic_constant": -1.0,
        "reflector.asphere": (), "reflector.depth": None, "sheet.coating_thickness": 0.0,
        "forming.trim_allowance": 8.0, "forming.trim": "on-mould", "mould.material": "", "mould.land_width": 0.0,
        "mould.edge_radius": 3.0, "mould.body_height": 40.0, "mould.outer_diameter": 0.0, "mould.bore_diameter": 0.0,
        "mould.spigot_diameter": 0.0, "mould.spigot_length": 0.0, "mould.cover_thickness": 0.0,
        "tolerance.files.slope_mrad": 0.0, "tolerance.mould.profile": 0.0, "tolerance.part.profile": 0.5,
        "tolerance.part.slope_mrad": 0.0, "tolerance.part.rms": 0.0, "tolerance.part.focal_length": 0.0,
        "tolerance.part.rim_diameter": 0.0, "tolerance.part.roundness": 0.0, "drawing.version": "R2010",
        "drawing.entities": "polyline", "turning": None,
    }  # fmt: skip
    found = leaves(job)
    assert {key: found[key] for key in expected} == expected


def test_turning_defaults_are_those_of_the_contract() -> None:
    keys = ("surface_speed", "nose_radius", "depth_of_cut", "finish_allowance", "roughing_feed", "finishing_feed")
    kept = [line for line in demo("lamp").splitlines() if not line.startswith((*keys, "stock_allowance"))]
    turning = parse_job("\n".join(kept), name="lamp.toml").turning
    assert turning is not None
    assert [getattr(turning, key) for key in keys] == [180.0, 0.8, 1.5, 0.3, 0.25, 0.1]
    assert (turning.stock_allowance, turning.rim_speed_limit) == (3.0, 0.0)
    assert (turning.tool_post, turning.control_point) == ("rear", "imaginary-tip")


@pytest.mark.parametrize("name", DEMOS)
def test_every_demo_job_is_read_and_its_canonical_text_is_a_fixed_point(name: str) -> None:
    job = parse_job(demo(name), name=name)
    text = job_text(job)
    again = parse_job(text, name=name)
    assert again == job
    assert job_text(again) == text


@settings(max_examples=60, deadline=None)
@given(st.from_type(Job))
def test_canonical_text_is_a_fixed_point(job: Job) -> None:
    text = job_text(job)
    again = parse_job(text, name="again.toml")
    assert again == job
    assert job_text(again) == text


@settings(max_examples=40, deadline=None)
@given(st.from_type(Job))
def test_a_job_in_millimetres_can_be_read_back_and_is_its_own_conversion(job: Job) -> None:
    metric = job.in_millimetres()
    assert metric.units == "mm"
    assert metric.in_millimetres() is metric
    assert parse_job(job_text(metric), name="metric.toml") == metric


def test_an_inch_job_is_the_millimetre_job_in_other_units() -> None:
    metric = parse_job(
        edited(
            "link-dish",
            ("rim_diameter = 1200.0", "rim_diameter = 1200.0\nhole_diameter = 20.0\nasphere = [1e-12, -2e-19]"),
            ("depth_loss = 2.0", "depth_loss = 2.0"),
            ('law = "none"', 'law = "stations"\nstations = [[0.0, 2.0], [600.0, 1.8]]'),
            ("decimals = 3", "decimals = 4"),
        ),
        name="metric.toml",
    )
    inches = """
title = "Headland link dish 1200"
units = "inch"
[reflector]
focal_length = 18.8976377952755906
rim_diameter = 47.2440944881889764
hole_diameter = 0.78740157480314961
asphere = [1.6387064e-08, -2.1144746085624832e-12]
reflecting_face = "concave"
[sheet]
material = "aluminium 3003-O"
thickness = 0.078740157480314961
[forming]
process = "spinning"
contact_face = "concave"
trim_allowance = 0.59055118110236220
[forming.springback]
law = "focal-length"
depth_loss = 0.078740157480314961
[forming.thinning]
law = "stations"
stations = [[0.0, 0.078740157480314961], [23.622047244094488, 0.070866141732283465]]
[mould]
material = "MDF laminate"
edge_radius = 0.23622047244094488
body_height = 4.7244094488188976
[tolerance.files]
chord_error = 0.00019685039370078740
[tolerance.part]
profile = 0.059055118110236220
rms = 0.035433070866141732
[turning]
spindle_direction = "M4"
spindle_limit_untrued = 60
spindle_limit = 200
rim_speed_limit = 65.616797900262467
surface_speed = 1312.3359580052493
control_point = "nose-centre"
nose_radius = 0.047244094488188976
depth_of_cut = 0.11811023622047244
finish_allowance = 0.019685039370078740
roughing_feed = 0.015748031496062992
finishing_feed = 0.0047244094488188976
stock_allowance = 0.23622047244094488
[turning.control]
x_word = "radius"
plane_word = "G18"
units_word = "G20"
absolute_word = "G90"
feed_per_rev_word = "G95"
spindle_limit_word = "none"
arcs = "lines"
decimals = 4
"""
    converted = leaves(parse_job(inches, name="inch.toml").in_millimetres())
    for key, value in leaves(metric).items():
        if isinstance(value, str | None):
            assert converted[key] == value, key
        elif isinstance(value, tuple) and value and isinstance(value[0], tuple):
            pairs = zip(converted[key], value, strict=True)  # type: ignore[call-overload]
            assert all(row == pytest.approx(other, rel=1e-12) for row, other in pairs), key
        else:
            assert converted[key] == pytest.approx(value, rel=1e-12), key


def test_default_lengths_and_speeds_of_an_inch_job_are_converted() -> None:
    text = edited("lamp", ('"mm"', '"inch"'), ("G21", "G20")).replace("surface_speed = 120.0\n", "")
    kept = [line for line in text.splitlines() if not line.startswith(("trim_allowance", "edge_radius", "nose_radius"))]
    job = parse_job("\n".join(kept), name="inch.toml")
    assert job.turning is not None
    assert job.forming.trim_allowance == 8.0 / 25.4
    assert job.mould.edge_radius == 3.0 / 25.4
    assert job.turning.nose_radius == 0.8 / 25.4
    assert job.turning.surface_speed == 180.0 / 0.3048
    assert job.reflector.conic_constant == -1.0


def test_a_depth_gives_the_focal_length_and_is_kept() -> None:
    job = parse_job(edited("terrace-heater", ("focal_length = 110.0", "depth = 90.0")), name="depth.toml")
    assert job.reflector.focal_length == pytest.approx(400.0**2 / (16.0 * 90.0), rel=1e-15)
    assert job.reflector.depth == 90.0


@settings(deadline=None)
@given(
    focal=st.floats(10.0, 500.0), ratio=st.floats(0.3, 2.0), conic=st.floats(-4.0, 0.1), strength=st.floats(-0.05, 0.05)
)
def test_the_focal_length_of_a_depth_is_the_one_whose_face_has_it(
    focal: float, ratio: float, conic: float, strength: float
) -> None:
    radius = focal / ratio / 2.0
    asphere = (strength / radius**3,)
    depth = float(Face(focal, conic, asphere).height(radius))
    found = focal_length_of(depth, radius, conic_constant=conic, asphere=asphere)
    assert found == pytest.approx(focal, rel=1e-11)


@pytest.mark.parametrize("depth", [90.90909090909091, 90.9091, 90.909])
def test_depth_and_focal_length_may_stand_together_where_they_agree(depth: float) -> None:
    text = edited("terrace-heater", ("focal_length = 110.0", f"focal_length = 110.0\ndepth = {depth}"))
    assert parse_job(text, name="both.toml").reflector.focal_length == 110.0


def test_a_gauge_with_its_system_gives_the_thickness() -> None:
    text = edited("listening-dish", ("thickness = 3.0", 'gauge = 18\ngauge_system = "AWG"'))
    job = parse_job(text, name="gauge.toml")
    assert job.sheet.thickness == pytest.approx(0.127 * 92 ** (18 / 39), rel=1e-11)
    inch = parse_job(text.replace('"mm"', '"inch"'), name="gauge.toml")
    assert inch.sheet.thickness * 25.4 == pytest.approx(job.sheet.thickness, rel=1e-11)


@pytest.mark.parametrize("gauge", ["16", '"16"'])
@pytest.mark.parametrize("units", ["mm", "inch"])
def test_a_weight_of_copper_gives_the_thickness(gauge: str, units: str) -> None:
    text = edited(
        "terrace-heater",
        ("aluminium 1085-O", "copper C11000-O"),
        ("thickness = 1.0", f'gauge = {gauge}\ngauge_system = "oz/ft2"'),
        ('units = "mm"', f'units = "{units}"'),
    )
    text = text[: text.index("[turning]")]
    inches = parse_job(text, name="copper.toml").sheet.thickness / (25.4 if units == "mm" else 1.0)
    assert inches == pytest.approx(0.0216, abs=0.5e-4)


def test_a_weight_of_a_sheet_that_the_table_lacks_is_the_shop_s_own_matter() -> None:
    properties = "youngs_modulus_mpa = 116e3\npoisson = 0.34\nyield_mpa = 70\ndensity_kg_m3 = 8900\n"
    text = edited(
        "terrace-heater",
        ("aluminium 1085-O", "yard copper"),
        ("thickness = 1.0", 'gauge = 20\ngauge_system = "oz/ft2"'),
        ("[forming]", f"[sheet.properties]\n{properties}[forming]"),
    )
    assert parse_job(text, name="copper.toml").sheet.thickness == pytest.approx(0.685, abs=1e-3)


def test_a_sheet_of_its_own_has_the_properties_that_the_job_states() -> None:
    properties = "youngs_modulus_mpa = 70e3\npoisson = 0.33\nyield_mpa = 40\ndensity_kg_m3 = 2700\n"
    text = edited(
        "terrace-heater",
        ("aluminium 1085-O", "yard sheet"),
        ("[forming]", f"[sheet.properties]\n{properties}[forming]"),
    )
    sheet = parse_job(text, name="own.toml").sheet
    assert sheet.properties is not None
    assert sheet.properties.kind == "metal"
    assert (sheet.row.youngs_modulus_mpa, sheet.row.yield_mpa, sheet.row.kind) == (70000.0, 40.0, "metal")


def test_a_stated_property_replaces_that_of_the_table() -> None:
    text = edited("terrace-heater", ("[forming]", "[sheet.properties]\nyield_mpa = 55\n[forming]"))
    row = parse_job(text, name="own.toml").sheet.row
    assert (row.yield_mpa, row.youngs_modulus_mpa, row.values[2].source) == (55.0, 69000.0, "stated in the job")


def test_whole_numbers_are_taken_for_lengths() -> None:
    job = parse_job(edited("terrace-heater", ("400.0", "400")), name="whole.toml")
    assert job.reflector.rim_diameter == 400.0
    assert isinstance(job.reflector.rim_diameter, float)


def test_the_hash_is_of_the_utf8_bytes() -> None:
    assert job_hash('title = "é"\n') == hashlib.sha256(b'title = "\xc3\xa9"\n').hexdigest()


def test_a_job_cannot_be_changed_in_place() -> None:
    job = parse_job(demo("lamp"), name="lamp.toml")
    with pytest.raises(ValueError, match="frozen"):
        job.title = "another"  # type: ignore[misc]


def test_a_file_is_read_with_or_without_a_byte_order_mark_and_with_any_line_end(tmp_path: Path) -> None:
    path = tmp_path / "job.toml"
    path.write_bytes(demo("lamp").encode())
    plain = read_job(path)
    path.write_bytes(b"\xef\xbb\xbf" + demo("lamp").replace("\n", "\r\n").encode())
    assert read_job(path) == plain


def test_a_missing_file_is_refused(tmp_path: Path) -> None:
    with pytest.raises(JobError, match=r"gone\.toml: no such file; allowed: a job file; do: check the name"):
        read_job(tmp_path / "gone.toml")


def test_a_folder_is_refused(tmp_path: Path) -> None:
    with pytest.raises(JobError, match="is a folder; allowed: a job file; do: name the file in it"):
        read_job(tmp_path)


def test_a_file_that_is_not_utf8_is_refused_with_its_line(tmp_path: Path) -> None:
    path = tmp_path / "job.toml"
    path.write_bytes('units = "mm"\ntitle = "Überlauf"\n'.encode("latin-1"))
    with pytest.raises(JobError, match=r"line 2 is not UTF-8 \(byte 0xdc\); allowed: a text file in UTF-8"):
        read_job(path)


def test_a_huge_file_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "job.toml"
    path.write_bytes(b"#" * 1_000_001)
    with pytest.raises(JobError, match="is over 1000000 bytes long; allowed: at most 1000000"):
        read_job(path)


def test_a_file_that_cannot_be_opened_is_refused(tmp_path: Path) -> None:
    (tmp_path / "plain").write_text("no folder")
    with pytest.raises(JobError, match="cannot be read: Not a directory; allowed: a readable job file"):
        read_job(tmp_path / "plain" / "job.toml")


@pytest.mark.parametrize(
    ("name", "changes", "question"),
    [
        (
            "terrace-heater",
            (('contact_face = "concave"', 'contact_face = "convex"'),),
            'contact_face is "convex" with process "spinning"',
        ),
        ("link-dish", (), 'spindle_direction is "M4": a chuck screwed to a threaded spindle nose'),
        ("terrace-heater", (("percent = 2.1", "percent = -2.1"),), "springback.percent is -2.1: the part would close"),
        ("link-dish", (("depth_loss = 2.0", "depth_loss = -2"),), "springback.depth_loss is -2: the part would close"),
        (
            "terrace-heater",
            (('"focal-length"\npercent = 2.1', '"stations"\nstations = [[0, 1], [90, -3]]'),),
            "has -3 % at radius 90: the part would close",
        ),
        (
            "display-bowl",
            (('"straight-vacuum"', '"drape-forming"'), ('"convex"', '"concave"')),
            'thinning.law is "straight-vacuum" with process "drape-forming"',
        ),
        (
            "listening-dish",
            (('"sine-law"', '"none"'),),
            'thinning.law is "none" with process "drape-forming", which stretches',
        ),
        (
            "listening-dish",
            (('"drape-forming"', '"spinning"'),),
            '"polycarbonate" is a plastic: a plastic is rarely spun',
        ),
        (
            "listening-dish",
            (("polycarbonate", "steel DC04"),),
            '"steel DC04" is a metal: a metal is rarely formed that way',
        ),
        ("lamp", (("G50", "G92"),), 'spindle_limit_word is "G92" with feed_per_rev_word "G99"'),
        ("lamp", (("G21", "G71"),), 'units_word is "G71" with feed_per_rev_word "G99"'),
    ],
)
def test_what_is_odd_is_asked_and_not_refused(name: str, changes: tuple[tuple[str, str], ...], question: str) -> None:
    asked = questions(parse_job(edited(name, *changes), name=name))
    assert any(question in sentence for sentence in asked), asked


@pytest.mark.parametrize("name", ["lamp", "terrace-heater", "listening-dish", "display-bowl"])
def test_nothing_is_asked_about_a_plain_job(name: str) -> None:
    assert questions(parse_job(demo(name), name=name)) == ()


@settings(max_examples=40, deadline=None)
@given(st.from_type(Job))
def test_questions_and_rows_answer_for_every_job(job: Job) -> None:
    assert all(sentence.endswith("?") for sentence in questions(job))
    assert math.isfinite(job.sheet.row.youngs_modulus_mpa)
    assert job.mould.row is None or job.mould.row.name == job.mould.material
