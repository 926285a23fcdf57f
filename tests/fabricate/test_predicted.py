"""The part that written curves lead to: the wanted reflector from the exact mould, and every fault of a curve seen."""

from __future__ import annotations

import json
import re
from dataclasses import replace
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from typer.testing import CliRunner

from fabricate.chain import Chain
from fabricate.command import app
from fabricate.job import Job, parse_job
from fabricate.order import Order
from fabricate.part_report import STATEMENT, prediction_json, prediction_rows
from fabricate.predicted import PredictedPart, exact_part, predicted_part, sensitivities
from fabricate.springback import percent_of
from fabricate.turning_proof import finish_path
from fabricate.written_face import face_over
from outputs.gcode import write_program
from profiles.arcpath import ArcPath
from profiles.deviation import deviation
from profiles.errors import DishwrightError
from profiles.meridian import Meridian

DEMOS = ("terrace-heater", "lamp", "link-dish", "listening-dish", "display-bowl")
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
material = "{material}"
thickness = {thickness}
coating_thickness = {coating}
thickness_tolerance = {sheet_tolerance}
[forming]
process = "spinning"
contact_face = "{faces[1]}"
trim_allowance = {trim}
trim = "{cut}"
[forming.springback]
{springback}
[forming.thinning]
{thinning}
[forming.shrinkage]
percent = {shrinkage}
[mould]
cover_thickness = {cover}
bore_diameter = {bore}
[tolerance.files]
chord_error = {chord}
"""
LENGTHS = {
    "focal": 110.0,
    "rim": 400.0,
    "hole": 0.0,
    "thickness": 1.5,
    "coating": 0.0,
    "sheet_tolerance": 0.0,
    "trim": 8.0,
    "cover": 0.0,
    "bore": 0.0,
    "chord": 0.01,
}
NONE = 'law = "none"'


def job_text(**changes: Any) -> str:
    values = LENGTHS | {
        "units": "mm",
        "conic": -1.0,
        "faces": ("concave", "concave"),
        "material": "aluminium 1085-O",
        "cut": "on-mould",
        "springback": NONE,
        "thinning": NONE,
        "shrinkage": 0.0,
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


@cache
def drawn(name: str) -> PredictedPart:
    return predicted_part(demo(name).chain, demo(name).forming_arcs.path)


def arcs_along(curve: Meridian, places: np.ndarray, *, aside: np.ndarray | float = 0.0) -> ArcPath:
    """Return arcs through points of a curve or beside it, each with the turn of the curve between them."""
    points = curve.points(places) + np.atleast_1d(aside)[:, None] * curve.normals(places)
    return ArcPath(points, np.tan(0.25 * np.diff(curve.slope(places))))


# the part from the exact mould


@pytest.mark.parametrize("faces", [("concave", "concave"), ("concave", "convex"), ("convex", "concave")])
@pytest.mark.parametrize("extra", [{}, {"shrinkage": 0.8, "coating": 0.03, "cover": 0.4}])
def test_the_exact_mould_of_a_sphere_makes_the_sphere(faces: tuple[str, str], extra: dict[str, float]) -> None:
    # Without springback the mould of a sphere is a sphere: one arc is the exact curve, and nothing is fitted.
    chain = Chain(job(faces=faces, conic=0.0, focal=120.0, **extra))
    mould = chain.mould.curve
    path = arcs_along(mould, np.array([mould.start, mould.end]))
    part = predicted_part(chain, path)
    assert abs(part.largest_form_error[0]) < 1e-9
    assert part.slope_rms < 1e-11
    assert part.rim_radius == pytest.approx(200.0, abs=1e-9)
    assert part.depth == pytest.approx(240.0 - np.sqrt(240.0**2 - 200.0**2), abs=1e-9)
    assert part.best_focal_length == pytest.approx(part.wanted_best_focal_length, abs=1e-8)


@pytest.mark.parametrize("name", ["display-bowl"])
def test_the_exact_mould_of_a_demo_job_makes_its_reflector(name: str) -> None:
    chain = demo(name).chain
    mould = chain.mould.curve
    part = predicted_part(chain, arcs_along(mould, np.linspace(mould.start, mould.end, 13)))
    # A dozen arcs with the curve's own ends and turns stray by a micrometre or two.
    assert abs(part.largest_form_error[0]) < 2e-3
    assert part.best_focal_length == pytest.approx(chain.job.reflector.focal_length, abs=3e-4)
    assert part.rim_radius == pytest.approx(0.5 * chain.job.reflector.rim_diameter, abs=5e-4)


@pytest.mark.parametrize("name", DEMOS)
def test_the_part_of_no_fault_is_the_one_that_was_asked_for(name: str) -> None:
    chain = demo(name).chain
    part = exact_part(chain)
    assert abs(part.largest_form_error[0]) < 1e-12
    assert part.rim_radius == pytest.approx(0.5 * chain.job.reflector.rim_diameter, abs=1e-9)
    assert part.best_focal_length == pytest.approx(chain.job.reflector.focal_length, rel=1e-9)


# the part from written arcs


@pytest.mark.parametrize("name", DEMOS)
def test_the_drawing_leads_to_the_reflector_within_twice_its_own_deviation(name: str) -> None:
    order = demo(name)
    part = drawn(name)
    strays = deviation(order.mould.curve, order.forming_arcs.path).normal
    form, where = part.largest_form_error
    # Vertex on vertex: the deviation there and the one of the other sign elsewhere add up.
    assert 0.5 * strays < abs(form) <= 2.02 * strays <= 2.02 * order.tolerance
    assert part.hole_radius <= where <= 0.5 * order.chain.job.reflector.rim_diameter + 1e-9
    assert part.best_focal_length == pytest.approx(order.chain.job.reflector.focal_length, rel=2e-4)
    assert part.stations()[0] == part.hole_radius


@pytest.mark.parametrize("name", ["terrace-heater", "lamp"])
def test_the_program_leads_to_the_same_part_as_the_drawing(name: str) -> None:
    order = demo(name)
    assert order.turning_plan.program is not None
    text = write_program(order.turning_plan.program)
    path, clearance = finish_path(text, order.job, order.mould)
    turned = predicted_part(order.chain, path, clearance=clearance)
    radius = drawn(name).stations(101)
    # The words of a program have three or four decimals.
    assert np.abs(turned.form_error(radius) - drawn(name).form_error(radius)).max() < 1e-3
    assert turned.best_focal_length == pytest.approx(drawn(name).best_focal_length, abs=2e-3)
    assert turned.rim_radius == pytest.approx(drawn(name).rim_radius, abs=1e-3)


@pytest.mark.parametrize(
    ("faces", "fault"),
    [(("concave", "concave"), 0.1), (("concave", "convex"), -0.1), (("convex", "concave"), 0.1)],
)
def test_a_tenth_of_a_millimetre_on_the_mould_is_a_tenth_on_the_part(faces: tuple[str, str], fault: float) -> None:
    chain = Chain(job(faces=faces))
    mould = chain.mould.curve
    places = np.concatenate(
        [np.linspace(0.0, 100.0, 5), np.linspace(102.0, 150.0, 3), np.linspace(152.0, mould.end, 5)]
    )
    aside = np.where((places > 101.0) & (places < 151.0), fault, 0.0)
    part = predicted_part(chain, arcs_along(mould, places, aside=aside))
    whole, clean = part.form_error(np.array([110.0, 120.0, 130.0])), part.form_error(np.array([40.0, 90.0, 170.0]))
    # The sign: a forming surface nearer to the focus lays the sheet nearer to it, on whichever side.
    assert whole == pytest.approx(fault, abs=3e-3)
    assert clean == pytest.approx(0.0, abs=3e-3)


def test_a_fault_at_a_hole_is_seen_and_one_inside_it_is_not() -> None:
    chain = Chain(job(hole=80.0, bore=60.0))
    mould = chain.mould.curve
    assert float(mould.radius(mould.start)) == pytest.approx(30.0)
    places = mould.start + np.array([0.0, 3.0, 6.0, *np.linspace(9.0, mould.end - mould.start, 8)])
    within = predicted_part(chain, arcs_along(mould, places, aside=np.where(places < mould.start + 4.0, 0.1, 0.0)))
    sound = predicted_part(chain, arcs_along(mould, places))
    assert within.stations()[0] == 40.0
    # The level of the whole is that of the vertex, which is not there: the carried-on face is level with the bore.
    shape = within.form_error(within.stations(101)) - sound.form_error(sound.stations(101))
    assert np.ptp(shape) == pytest.approx(0.1 * (1.0 - 0.743), abs=0.03)


def test_a_path_that_strays_further_than_the_sheet_bends_is_refused_or_measured() -> None:
    chain = Chain(job())
    mould = chain.mould.curve
    path = arcs_along(mould, np.linspace(0.0, mould.end, 9)).moved(along=500.0)
    try:
        face = face_over(chain, path)
    except DishwrightError:
        return
    assert np.isfinite(face.points(np.linspace(face.start, face.end, 9))).all()


@settings(max_examples=3)
@given(st.from_type(Job))
def test_any_job_is_predicted_within_a_few_times_what_its_curve_strays(asked: Job) -> None:
    chain = Chain(asked.in_millimetres())
    try:
        mould = chain.mould.curve
    except DishwrightError:
        return
    path = arcs_along(mould, np.linspace(mould.start, mould.end, 8))
    part = predicted_part(chain, path)
    strays = deviation(mould, path).normal
    assert abs(part.largest_form_error[0]) < 4.0 * strays + 1e-6 * mould.end
    assert np.isfinite([part.best_focal_length, part.depth, part.slope_rms]).all()


# units, trim


def test_an_inch_job_has_the_part_of_its_twin_in_millimetres() -> None:
    same = {"springback": 'law = "focal-length"\npercent = 2.0', "faces": ("concave", "convex"), "shrinkage": 0.3}
    metric, inch = (Order(job(units=units, **same)) for units in ("mm", "inch"))
    path = metric.forming_arcs.path
    first, second = predicted_part(metric.chain, path), predicted_part(inch.chain, path)
    radius = first.stations(51)
    assert np.abs(first.form_error(radius) - second.form_error(radius)).max() < 1e-9
    assert first.best_focal_length == pytest.approx(second.best_focal_length, abs=1e-9)
    for one, other in zip(sensitivities(metric.chain), sensitivities(inch.chain), strict=True):
        assert one.cause == other.cause
        assert one.focal_length == pytest.approx(other.focal_length, abs=1e-7)
        assert one.rim_diameter == pytest.approx(other.rim_diameter, abs=1e-7)
    said = [text for _, text in prediction_rows(inch, {"lathe-profile.dxf": second})]
    assert "rim diameter 15.748" in said[0]
    assert all(" mm" not in text.replace("0.0591 mm", "") for text in said)


@pytest.mark.parametrize("cut", ["on-mould", "after-release"])
def test_where_the_rim_is_cut(cut: str) -> None:
    chain = Chain(job(cut=cut, trim=20.0))
    mould = chain.mould.curve
    places = np.linspace(0.0, mould.end, 8)
    wide = predicted_part(chain, arcs_along(mould, places, aside=-0.2))  # the sheet lies 0.2 mm further out
    sine = float(np.sin(chain.released.meridian.slope(chain.released.rim)))
    wider = 0.2 * sine if cut == "on-mould" else 0.0
    assert wide.rim_radius - 200.0 == pytest.approx(wider, abs=2e-2 * 0.2 + 1e-3)
    assert wide.trimmed_radius == (None if cut == "on-mould" else 200.0)
    assert wide.depth == pytest.approx(float(wide.face.height(wide.face.at_radius(wide.rim_radius))))


def test_a_part_too_small_for_its_rim_is_measured_as_far_as_it_reaches() -> None:
    chain = Chain(job(cut="after-release", trim=0.0, shrinkage=1.0, material="PETG"))
    (*_, shrunk) = sensitivities(chain)
    assert shrunk.cause == "0.1 % more of shrinkage"
    # All of it is smaller by 0.1 in 99: the rim's material point, and the focus.
    assert shrunk.rim_diameter == pytest.approx(-400.0 / 990.0, rel=1e-3)
    assert shrunk.focal_length == pytest.approx(-110.0 / 990.0, rel=1e-3)


# sensitivities, each beside a chain of its own


def by_another_chain(before: Chain, after: Chain, *, rim: float | None = None) -> PredictedPart:
    """Return the part that one job's mould makes of the sheet of another, its rim at a given arc length."""
    known = exact_part(before)
    return replace(known, face=after.to_part(before.forming_surface), rim=known.rim if rim is None else rim)


def assert_moved_alike(before: Chain, number: int, part: PredictedPart, *, rel: float, least: float = 1e-6) -> None:
    found, known = sensitivities(before)[number], exact_part(before)
    radius = 0.5 * before.job.reflector.rim_diameter
    sag = float(part.face.height(part.face.at_radius(radius)) - known.face.height(known.face.at_radius(radius)))
    near = {"rel": rel, "abs": least}
    assert found.focal_length == pytest.approx(part.best_focal_length - known.best_focal_length, **near)
    assert found.rim_sag == pytest.approx(sag, **near)
    assert found.rim_diameter == pytest.approx(2.0 * (part.rim_radius - known.rim_radius), **near)
    assert found.form == pytest.approx(part.largest_form_error[0], **near)


STATIONS = 'law = "stations"\nstations = [[0.0, {0}], [120.0, {1}], [200.0, {2}]]'


@pytest.mark.parametrize(("percent", "conic"), [(0.0, -1.0), (2.1, -1.0), (-10.0, -2.0), (39.0, -1.0)])
def test_one_percentage_point_of_focal_length(percent: float, conic: float) -> None:
    # The mould stays: the part whose focal length it is, less one point more, has a longer one.
    law = 'law = "focal-length"\npercent = {}'
    before = Chain(job(springback=law.format(percent), conic=conic))
    longer = 110.0 * (100.0 - percent) / (99.0 - percent)
    after = Chain(job(springback=law.format(percent + 1.0), conic=conic, focal=longer))
    assert sensitivities(before)[0].cause == "one percentage point more of springback"
    assert_moved_alike(before, 0, by_another_chain(before, after), rel=1e-6)


def test_one_percentage_point_where_none_is_stated() -> None:
    before, after = Chain(job()), Chain(job(springback='law = "focal-length"\npercent = 1.0', focal=110.0 / 0.99))
    assert_moved_alike(before, 0, by_another_chain(before, after), rel=1e-6)


@pytest.mark.parametrize(
    ("stated", "one_more"),
    [
        ('law = "curvature"\npercent = -3.0', 'law = "curvature"\npercent = -2.0'),
        ('law = "curvature"\npercent = 39.0', 'law = "curvature"\npercent = 40.0'),
        (STATIONS.format(1.0, 2.0, 0.5), STATIONS.format(2.0, 3.0, 1.5)),
    ],
)
def test_one_percentage_point_of_curvature(stated: str, one_more: str) -> None:
    before = Chain(job(springback=stated))
    assert_moved_alike(before, 0, by_another_chain(before, Chain(job(springback=one_more))), rel=1e-6)


@pytest.mark.parametrize("key", ["depth_loss = 2.0", "rim_slope_loss_deg = 0.6"])
def test_one_percentage_point_where_a_loss_is_stated(key: str) -> None:
    before = Chain(job(springback=f'law = "curvature"\n{key}'))
    percent = percent_of(before.stated_springback)
    after = Chain(job(springback=f'law = "curvature"\npercent = {percent + 1.0!r}'))
    assert_moved_alike(before, 0, by_another_chain(before, after), rel=1e-6)


@pytest.mark.parametrize(
    ("thinning", "faces"),
    [(NONE, ("concave", "convex")), (NONE, ("convex", "concave")), ('law = "sine-law"', ("concave", "convex"))],
)
def test_a_thicker_sheet(faces: tuple[str, str], thinning: str) -> None:
    before = Chain(job(faces=faces, sheet_tolerance=0.06, thinning=thinning))
    after = Chain(job(faces=faces, thickness=1.56, thinning=thinning))
    assert sensitivities(before)[1].cause == "a sheet thicker by its tolerance"
    # The rim's material point goes along the normal, by the share of the sheet that lies there.
    moved = (
        0.06
        * float(before.thickness(before.released.rim))
        / 1.5
        * float(np.sin(before.on_mould.slope(before.released.rim)))
    )
    part = by_another_chain(before, after)
    radius = 200.0 - moved if faces[0] == "concave" else 200.0 + moved
    # What a law of thinning makes of the moved face is left out there: it is of second order.
    part = replace(part, rim=float(part.face.at_radius(radius)))
    assert_moved_alike(before, 1, part, rel=1e-3, least=2e-4 if "sine" in thinning else 1e-6)


def test_a_thicker_sheet_that_springs_less() -> None:
    bending = 'law = "bending"\nflow_stress_mpa = 9.0'
    before = Chain(job(springback=bending))
    assert sensitivities(before)[1].cause == "a sheet 5 % thicker"
    # The mirror lies on the mould, and is not where it was all the same: a thicker sheet springs back less.
    assert sensitivities(before)[1].focal_length < -0.01
    after = Chain(job(springback=bending, thickness=1.575))
    assert_moved_alike(before, 1, by_another_chain(before, after), rel=1e-6)


@pytest.mark.parametrize("faces", [("concave", "convex")])
def test_more_shrinkage(faces: tuple[str, str]) -> None:
    plastic = {"material": "PETG", "faces": faces, "springback": 'law = "focal-length"\npercent = 1.0'}
    before, after = (Chain(job(shrinkage=percent, **plastic)) for percent in (0.6, 0.7))
    assert_moved_alike(before, 2, by_another_chain(before, after, rim=before.released.rim * 0.993 / 0.994), rel=2e-2)


@pytest.mark.parametrize(("material", "shrinkage", "causes"), [("steel DC04", 0.0, 2), ("steel DC04", 0.1, 3)])
def test_a_metal_is_not_asked_for_shrinkage_it_does_not_have(material: str, shrinkage: float, causes: int) -> None:
    assert len(sensitivities(Chain(job(material=material, shrinkage=shrinkage)))) == causes


# what is said


def test_a_prediction_in_plain_values() -> None:
    order = demo("terrace-heater")
    said = prediction_json(order, {"lathe-profile.dxf": drawn("terrace-heater")})
    assert said["statement"] == STATEMENT
    assert "no verdict" in STATEMENT
    found = said["files"]["lathe-profile.dxf"]
    assert found["rim_diameter_mm"] == pytest.approx(400.0, abs=0.02)
    assert found["best_focal_length_mm"] == pytest.approx(110.0, abs=0.01)
    assert abs(found["largest_form_error_mm"]) >= max(abs(row["form_error_mm"]) for row in found["stations"])
    assert [row["radius_mm"] for row in found["stations"]] == pytest.approx(np.linspace(0.0, 200.0, 17).tolist())
    springback = said["sensitivities"][0]
    assert set(springback) == {"cause", "rim_sag_mm", "rim_diameter_mm", "focal_length_mm", "form_mm"}
    assert springback["focal_length_mm"] > 0.0 > springback["rim_sag_mm"]  # the part opens and is shallower


def test_a_prediction_in_words() -> None:
    order = demo("terrace-heater")
    rows = prediction_rows(order, {"lathe-profile.dxf": drawn("terrace-heater")})
    assert [label for label, _ in rows] == ["lathe-profile.dxf", "sensitive to", ""]
    assert "best focal length 110.000 mm; form error up to 0.00" in rows[0][1]
    assert rows[1][1].startswith("one percentage point more of springback: focus +1.1")
    assert rows[2][1].startswith("a sheet 5 % thicker: ")


# what stands in a package


@pytest.fixture(scope="module")
def package(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, str]:
    """A small package, and what was said of it."""
    folder = tmp_path_factory.mktemp("predicted")
    (folder / "dish.toml").write_text(
        job_text(
            focal=20.0,
            rim=60.0,
            thickness=1.0,
            trim=4.0,
            chord=0.05,
            springback='law = "focal-length"\npercent = 2.0',
        ),
        encoding="utf-8",
    )
    result = CliRunner().invoke(app, ["make", str(folder / "dish.toml"), "-o", str(folder / "dish")])
    assert result.exit_code == 0, result.stderr
    return folder, " ".join(result.stdout.split())


def test_the_proof_states_the_predicted_part_and_is_proved_again(package: tuple[Path, str]) -> None:
    folder, _ = package
    stated = json.loads((folder / "dish" / "proof.json").read_text(encoding="utf-8"))["predicted"]
    assert stated["statement"] == STATEMENT
    assert list(stated["files"]) == ["lathe-profile.dxf"]
    assert stated["files"]["lathe-profile.dxf"]["best_focal_length_mm"] == pytest.approx(20.0, abs=0.02)
    assert len(stated["files"]["lathe-profile.dxf"]["stations"]) == 17
    assert stated["sensitivities"][0]["cause"] == "one percentage point more of springback"
    again = CliRunner().invoke(app, ["prove", str(folder / "dish.toml"), str(folder / "dish")])
    assert again.exit_code == 0, again.stdout


def test_the_summary_says_which_way_the_part_moves_and_gives_no_verdict(package: tuple[Path, str]) -> None:
    _, said = package
    assert "on release the part is taken to come out" in said
    assert " mm shallower than it lies on the mould, its rim opens by " in said
    assert re.search(
        r"lathe-profile\.dxf rim diameter 60\.\d+ mm, depth 11\.\d+ mm, best focal length (20\.0|19\.9)", said
    )
    assert "no verdict on a part: measure the first" in said
