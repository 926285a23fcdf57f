"""Warnings beyond the trade's limits: each seen to speak and to keep silent."""

from __future__ import annotations

import re
from functools import cache
from importlib.resources import files

import pytest

from fabricate.forming_limits import LIMITS, warnings
from fabricate.job import parse_job
from fabricate.notices import notices
from fabricate.order import Order

DEMOS = ("lamp", "terrace-heater", "listening-dish", "link-dish", "display-bowl")


@cache
def _warned(
    *,
    process: str = "spinning",
    contact: str = "concave",
    law: str = "none",
    focal: float = 110.0,
    rim: float = 400.0,
    conic: float = -1.0,
    thickness: float = 1.5,
    material: str = "aluminium 1085-O",
    forming: str = "",
    mould: str = "",
    profile: float = 0.5,
    units: str = "mm",
) -> tuple[str, ...]:
    text = f"""
title = "A dish of Quillet Bay"
units = "{units}"
[reflector]
focal_length = {focal}
conic_constant = {conic}
rim_diameter = {rim}
reflecting_face = "concave"
[sheet]
material = "{material}"
thickness = {thickness}
[forming]
process = "{process}"
contact_face = "{contact}"
{forming}
[forming.springback]
law = "none"
[forming.thinning]
law = "{law}"
[forming.shrinkage]
percent = 0.5
[mould]
{mould}
[tolerance.files]
chord_error = {0.01 if units == "mm" else 0.0004}
[tolerance.part]
profile = {profile}
"""
    return warnings(Order(parse_job(text, name="test.toml")))


def _one(said: tuple[str, ...], pattern: str) -> None:
    assert len(said) == 1
    assert re.fullmatch(pattern, said[0]), said[0]


def test_what_the_demo_jobs_are_told() -> None:
    said = {}
    for name in DEMOS:
        text = files("fabricate").joinpath(f"demo/{name}.toml").read_text(encoding="utf-8")
        said[name] = warnings(Order(parse_job(text, name=name)))
    _one(
        said.pop("lamp"),
        r"tolerance\.part\.profile is 0\.1 mm; conventional spinning usually holds ±0\.5 mm \(seen in a secondary "
        r"copy\): can the shop hold that\?",
    )
    assert set(said.values()) == {()}


def test_an_ordinary_job_is_told_nothing() -> None:
    assert _warned() == ()
    assert _warned(process="shear-spinning", law="sine-law", thickness=0.3) == ()


def test_the_notices_carry_them() -> None:
    text = files("fabricate").joinpath("demo/lamp.toml").read_text(encoding="utf-8")
    order = Order(parse_job(text, name="lamp"))
    assert set(warnings(order)) <= set(notices(order))


@pytest.mark.parametrize(
    ("material", "focal", "words"),
    [
        ("aluminium 1085-O", 28.0, r"1\.6\d times the formed sheet's \S+ mm, more than about 1\.6 in one pass \("),
        ("aluminium 1085-O", 16.0, r"2\.\d+ times the formed sheet's \S+ mm, more than about 2 for aluminium \("),
        ("copper C11000-O", 16.0, r"2\.\d+ times the formed sheet's \S+ mm, more than about 2 for copper \("),
        ("steel DC04", 20.0, r"1\.\d+ times the formed sheet's \S+ mm, more than about 1\.8 for steel \("),
        ("stainless 304", 32.0, r"1\.5\d* times the formed sheet's \S+ mm, more than about 1\.5 for stainless \("),
        ("brass C26000-O", 16.0, r"2\.\d+ times the formed sheet's \S+ mm, more than about 1\.6 in one pass \("),
    ],
)
def test_a_blank_too_large_for_its_part(material: str, focal: float, words: str) -> None:
    said = _warned(material=material, focal=focal)
    _one(said, rf"the blank of \S+ mm is {words}general handbook knowledge, from memory, low confidence\): .*\?")


def test_a_shallower_part_is_not_asked_about() -> None:
    assert _warned(focal=32.0) == ()
    assert _warned(material="stainless 304", focal=40.0) == ()


def test_shear_reduction_is_judged_by_reduction_not_slope() -> None:
    # A slope of 73 degrees takes 71 % and is let go; one of 80 degrees takes 83 %.
    assert _warned(process="shear-spinning", law="sine-law", focal=31.0) == ()
    said = _warned(process="shear-spinning", law="sine-law", focal=18.0)
    _one(
        said,
        r"shear spinning takes 82\.\d % of the thickness where the sheet is steepest, 79\.\d+ degrees at radius "
        r"20\d\.?\d* mm on the mould, more than about 80 % \(Kalpakcioglu 1961 for metals of at least 50 % reduction "
        r"of area, from memory\): will it stand that in one pass\?",
    )


def test_a_sheet_thin_for_its_diameter() -> None:
    _one(
        _warned(focal=480.0, rim=1200.0, thickness=0.8),
        r"sheet\.thickness is 0\.8 mm, 0\.06\d % of the blank's 1269 mm and less than about 0\.1 % \(common practice, "
        r"from memory\): will it wrinkle\?",
    )
    assert _warned(focal=480.0, rim=1200.0, thickness=1.5) == ()


@pytest.mark.parametrize("thickness", [0.4, 8.0])
def test_a_sheet_too_thin_or_thick_by_hand(thickness: float) -> None:
    _one(
        _warned(focal=30.0, rim=100.0, thickness=thickness),
        rf"sheet\.thickness is {thickness:g} mm; by hand 0\.5 to 6 mm are spun \(seen in a secondary copy\): is the "
        r"lathe made for it\?",
    )


@pytest.mark.parametrize("thickness", [0.5, 6.0])
def test_the_ends_of_the_range_by_hand_belong_to_it(thickness: float) -> None:
    assert _warned(focal=30.0, rim=100.0, thickness=thickness) == ()
    assert _warned(focal=1.2, rim=4.0, thickness=thickness / 25.4, units="inch", profile=0.5 / 25.4) == ()


def test_a_tolerance_that_is_not_asked_for_is_not_tight() -> None:
    assert _warned(profile=0.0) == ()
    assert len(_warned(profile=0.4)) == 1


def test_a_tight_tolerance_in_inches() -> None:
    said = _warned(focal=4.0, rim=16.0, thickness=0.06, units="inch", profile=0.01)
    _one(said, r"tolerance\.part\.profile is 0\.01 inch; conventional spinning usually holds ±0\.01969 inch \(.*\?")


def test_a_deep_cavity() -> None:
    common = {"process": "straight-vacuum", "contact": "convex", "law": "straight-vacuum", "material": "PETG"}
    _one(
        _warned(focal=30.0, **common),
        r"the cavity is \S+ mm deep and \S+ mm wide, more than 75 % \(trade guides seen at thermopro\.com and "
        r"kal-plastics\.com\): will the sheet still reach its bottom\?",
    )
    assert _warned(focal=40.0, **common) == ()


def test_a_high_drape_mould() -> None:
    common = {"process": "drape-forming", "law": "sine-law", "material": "PETG"}
    _one(
        _warned(focal=23.0, **common),
        r"the drape mould is \S+ mm high and \S+ mm wide, not less than 100 % \(trade guides seen .*\): will the sheet "
        r"thin or web too much\?",
    )
    assert _warned(focal=30.0, **common) == ()


@pytest.mark.parametrize(
    ("thickness", "edge", "needed"), [(3.0, 2.9, "3"), (1.0, 1.4, r"1\.5"), (3.0, 3.0, ""), (1.0, 1.5, "")]
)
def test_a_sharp_edge(thickness: float, edge: float, needed: str) -> None:
    said = _warned(
        process="drape-forming",
        law="sine-law",
        material="PETG",
        thickness=thickness,
        mould=f"edge_radius = {edge}",
    )
    if not needed:
        assert said == ()
        return
    _one(
        said,
        rf"mould\.edge_radius is {edge:g} mm, less than {needed} mm: the sheet's thickness and at least 1\.5 mm are "
        r"usual \(trade guides seen at thermopro\.com and formary\.de\); will the edge mark or tear the sheet\?",
    )


@pytest.mark.parametrize(
    ("process", "contact", "law", "words"),
    [
        ("straight-vacuum", "convex", "straight-vacuum", r"less than 2 \(trade guides conflict: from 0 to 2\)"),
        ("drape-forming", "concave", "none", r"less than 3 \(trade guides conflict: from 1\.5 to 3\)"),
    ],
)
def test_a_steep_wall(process: str, contact: str, law: str, words: str) -> None:
    # Nearly a hemisphere: its wall stands at 88 degrees.
    said = _warned(
        process=process, contact=contact, law=law, material="PETG", focal=100.0, rim=390.0, conic=0.0,
        forming="trim_allowance = 38.0", mould="body_height = 60.0",
    )  # fmt: skip
    _one(said, rf"the mould's wall has a draft of 1\.9\d degrees at radius \S+ mm, {words}: will the part come off\?")


@pytest.mark.parametrize(
    ("forming", "draft", "asked"),
    [
        ("", 0.0, False),
        ("clamp_opening = 600.0", 0.0, True),
        ("clamp_opening = 600.0", 2.0, True),
        ("clamp_opening = 600.0", 3.0, False),
    ],
)
def test_a_skirt_over_the_outer_side(forming: str, draft: float, *, asked: bool) -> None:
    said = _warned(
        process="drape-forming", law="sine-law", material="PETG", forming=forming, mould=f"draft_deg = {draft}"
    )
    if not asked:
        assert said == ()
        return
    _one(
        said,
        rf"mould\.draft_deg is {draft:g} and forming\.clamp_opening lets the sheet down over the mould's outer side: "
        r"at least 3 degrees are usual \(trade guides conflict: from 1\.5 to 3\); if a skirt is formed there, will it "
        r"come off\?",
    )


def test_every_limit_says_where_it_comes_from() -> None:
    assert all(any(words in limit.source for words in ("seen", "from memory", "conflict")) for limit in LIMITS.values())
