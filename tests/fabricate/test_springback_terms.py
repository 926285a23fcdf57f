"""One springback in every term of the shop: each term, given to the reader as a job of its own, gives the others."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fabricate.chain import Chain
from fabricate.curvature_map import depth_loss, rim_slope_loss
from fabricate.job import Job, parse_job
from fabricate.job_text import toml_value
from fabricate.springback_terms import ShopTerms, shop_terms
from profiles.errors import JobError

RIM = 400.0
LAWS = st.sampled_from(["focal-length", "curvature"])
F_OVER_D = st.floats(0.2, 1.5)
PERCENTS = st.floats(0.05, 8.0) | st.floats(-5.0, -0.05)


def _job(ratio: float, *, conic: float = -1.0, **springback: object) -> Job:
    stated = "\n".join(f"{key} = {toml_value(value)}" for key, value in springback.items())
    return parse_job(
        f"""
title = "A dish"
units = "mm"
[reflector]
focal_length = {ratio * RIM}
rim_diameter = {RIM}
conic_constant = {conic}
reflecting_face = "concave"
[sheet]
material = "aluminium 1085-O"
thickness = 1.5
[forming]
process = "spinning"
contact_face = "concave"
[forming.springback]
{stated}
[forming.thinning]
law = "none"
[tolerance.files]
chord_error = 0.01
""",
        name="test.toml",
    )


def _terms(ratio: float, *, conic: float = -1.0, **springback: object) -> ShopTerms:
    return shop_terms(Chain(_job(ratio, conic=conic, **springback)))


def _percent(terms: ShopTerms, law: str) -> float:
    percent = terms.focal_length_percent if law == "focal-length" else terms.curvature_percent
    assert percent is not None
    return percent


@settings(max_examples=6)
@given(F_OVER_D, LAWS, PERCENTS)
def test_each_term_gives_the_others_back(ratio: float, law: str, percent: float) -> None:
    terms = _terms(ratio, law=law, percent=percent)
    assert _percent(terms, law) == percent
    by_depth = _terms(ratio, law=law, depth_loss=terms.depth_loss)
    assert _percent(by_depth, law) == pytest.approx(percent, abs=1e-9)
    assert by_depth.depth_loss == terms.depth_loss
    by_slope = _terms(ratio, law=law, rim_slope_loss_deg=terms.rim_slope_loss_deg)
    assert _percent(by_slope, law) == pytest.approx(percent, abs=1e-9)
    assert by_slope.rim_slope_loss_deg == terms.rim_slope_loss_deg
    assert by_slope.depth_loss == pytest.approx(terms.depth_loss, abs=1e-9)
    assert by_slope.rim_opening == pytest.approx(terms.rim_opening, abs=1e-9)


@settings(max_examples=6)
@given(F_OVER_D, LAWS, PERCENTS)
def test_the_table_of_stations_loses_the_same_depth(ratio: float, law: str, percent: float) -> None:
    terms = _terms(ratio, law=law, percent=percent)
    assert terms.stations is not None
    tabled = _terms(ratio, law="stations", stations=terms.stations)
    assert tabled.depth_loss == pytest.approx(terms.depth_loss, abs=1e-9)
    assert tabled.stations == terms.stations
    assert _percent(tabled, law) == pytest.approx(percent, abs=1e-9)


@settings(max_examples=5)
@given(F_OVER_D, st.lists(st.floats(0.2, 4.0), min_size=1, max_size=5), LAWS)
def test_the_percentage_of_a_table_loses_the_same_depth(ratio: float, percents: list[float], law: str) -> None:
    rows = [[RIM / 2.0 / len(percents) * index, percent] for index, percent in enumerate(percents)]
    terms = _terms(ratio, law="stations", stations=rows)
    again = _terms(ratio, law=law, percent=_percent(terms, law))
    assert again.depth_loss == pytest.approx(terms.depth_loss, abs=1e-9)


@pytest.mark.parametrize("law", ["focal-length", "curvature"])
def test_the_percentage_of_an_estimate_loses_the_same_depth(law: str) -> None:
    terms = _terms(0.3, law="bending", flow_stress_mpa=9.0)
    again = _terms(0.3, law=law, percent=_percent(terms, law))
    assert again.depth_loss == pytest.approx(terms.depth_loss, abs=1e-9)


def test_the_terms_are_what_the_curves_do() -> None:
    chain = Chain(_job(0.275, law="focal-length", percent=2.1))
    terms, part, rim = shop_terms(chain), chain.released, chain.released.rim
    assert terms.depth_loss == pytest.approx(depth_loss(part, chain.springback), abs=1e-12)
    assert terms.rim_slope_loss_deg == pytest.approx(np.degrees(rim_slope_loss(part, chain.springback)), abs=1e-12)
    # Practitioners' notes: trimmed at r = 200 on the chuck, the 400 mm heater that springs open is 1.4 mm too large.
    assert terms.rim_opening == pytest.approx(1.4, abs=0.06)
    assert terms.rim_opening == pytest.approx(RIM - 2.0 * float(chain.on_mould.radius(rim)), abs=1e-9)


def test_the_stations_stand_evenly_from_the_axis_to_the_rim() -> None:
    stations = _terms(0.5, law="curvature", percent=2.0).stations
    assert stations is not None
    assert [radius for radius, _ in stations] == pytest.approx(np.linspace(0.0, 200.0, 17).tolist(), abs=1e-12)
    # κ is 1/(2f) on the axis: two per cent of the mould's, 2/98 of the part's.
    assert stations[0][1] == pytest.approx(100.0 * 2.0 / 98.0, rel=1e-3)


def test_no_springback_is_none_in_every_term() -> None:
    terms = _terms(0.4, law="none")
    assert terms.stations is not None
    assert {percent for _, percent in terms.stations} == {0.0}
    assert (terms.focal_length_percent, terms.curvature_percent) == (0.0, 0.0)
    assert (terms.depth_loss, terms.rim_slope_loss_deg, terms.rim_opening) == (0.0, 0.0, 0.0)


def test_where_no_percentage_gives_the_depth_there_is_none() -> None:
    terms = _terms(0.3, law="stations", stations=[[0.0, 300.0], [100.0, 60.0]])
    assert terms.depth_loss > 60.0
    assert terms.focal_length_percent is None
    assert terms.curvature_percent is None


def test_a_depth_is_solved_for_on_a_face_that_closes_before_40_percent() -> None:
    # An ellipse with R0 of 240, 40 % tighter, closes within the arc length of this part.
    lost = _terms(0.3, conic=0.3, law="focal-length", percent=2.0).depth_loss
    assert _percent(_terms(0.3, conic=0.3, law="focal-length", depth_loss=lost), "focal-length") == pytest.approx(
        2.0, abs=1e-9
    )
    with pytest.raises(JobError, match=r"depth_loss: value is 150; allowed: what -20 to 1\d\.\d+ % of springback give"):
        _terms(0.3, conic=0.3, law="focal-length", depth_loss=150.0)
