"""A new law is one function and one row of the table of laws: nothing else has to change, and here nothing does."""

from __future__ import annotations

import numpy as np
import pytest

from fabricate import springback, thinning
from fabricate.chain import Chain
from fabricate.curvature_map import CurvatureMap
from fabricate.job import Job, job_text, parse_job
from fabricate.law_table import LawRow
from fabricate.notices import notices
from fabricate.order import Order
from fabricate.springback import SHOP_TERMS, StatedSpringback
from fabricate.springback_terms import shop_terms
from fabricate.starter import starter_gaps, starter_text
from fabricate.thinning import FormedSheet, ThinningTable
from profiles.errors import JobError
from profiles.series import Series, resolve

JOB = """
title = "A dish"
units = "mm"
[reflector]
focal_length = 110.0
rim_diameter = 400.0
reflecting_face = "concave"
[sheet]
material = "aluminium 1085-O"
thickness = 1.0
[forming]
process = "spinning"
contact_face = "convex"
[forming.springback]
law = "even"
percent = 2.0
[forming.thinning]
law = "thirds"
[tolerance.files]
chord_error = 0.1
"""


def even(stated: StatedSpringback, percent: float) -> CurvatureMap:
    """Return the map that takes the same curvature away everywhere: a percentage of that at the vertex."""
    part = stated.part.meridian
    (shift,) = resolve(
        lambda where: np.full((1, len(where)), 0.01 * percent / stated.part.face.vertex_radius),
        part.breaks,
        sizes=[10.0 / part.end],
    )
    return CurvatureMap.of(shift=shift)


def thirds(sheet: FormedSheet, _stated: ThinningTable) -> Series:
    """Return a sheet that loses a third of its thickness where it is vertical [mm]."""
    curve = sheet.on_mould
    (thickness,) = resolve(
        lambda where: sheet.thickness * (1.0 - np.sin(curve.slope(where)) ** 2 / 3.0)[None],
        curve.breaks,
        sizes=[sheet.thickness],
    )
    return thickness


@pytest.fixture(autouse=True)
def new_rows(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(springback.LAWS, "even", LawRow(even, one_of=SHOP_TERMS))
    monkeypatch.setitem(thinning.LAWS, "thirds", LawRow(thirds))


def _job(text: str = JOB) -> Job:
    return parse_job(text, name="test.toml")


def test_its_mould_is_made_and_gives_the_part_back() -> None:
    chain = Chain(_job())
    added = chain.on_mould.curvature(50.0) - chain.released.meridian.curvature(50.0)
    assert float(added) == pytest.approx(0.02 / 220.0, rel=1e-10)
    assert float(chain.thickness(0.0)) == pytest.approx(1.0, abs=1e-12)
    assert 0.6 < float(chain.thickness(200.0)) < 0.9
    assert chain.mould.kind == "female"
    part, where = chain.to_part(chain.to_mould(chain.released.meridian)), np.linspace(0.0, chain.released.rim, 101)
    assert np.abs(part.points(where) - chain.released.meridian.points(where)).max() < 1e-9


@pytest.mark.parametrize("term", ["depth_loss", "rim_slope_loss_deg"])
def test_its_percentage_is_solved_for(term: str) -> None:
    terms = shop_terms(Chain(_job()))
    job = _job(JOB.replace("percent = 2.0", f"{term} = {getattr(terms, term)!r}"))
    assert springback.percent_of(Chain(job).stated_springback) == pytest.approx(2.0, abs=1e-9)


def test_it_is_converted_into_every_term() -> None:
    terms = shop_terms(Chain(_job()))
    assert terms.stations is not None
    # The law that takes the same away everywhere is a table of one number.
    assert [percent for _, percent in terms.stations] == pytest.approx([2.0] * 17, abs=1e-9)


def test_the_canonical_text_is_read_back() -> None:
    job = _job()
    assert _job(job_text(job)) == job


def test_its_name_stands_among_what_is_allowed() -> None:
    with pytest.raises(JobError) as refused:
        _job(JOB.replace('"even"', '"evn"').replace('"thirds"', "3"))
    assert str(refused.value).splitlines() == [
        'test.toml: forming.springback.law: value is "evn"; allowed: "none", "focal-length", "curvature", "bending", '
        '"stations", "even"; do: write one of these words in quotation marks',
        'test.toml: forming.thinning.law: value is 3; allowed: "none", "sine-law", "straight-vacuum", "stations", '
        '"thirds"; do: write one of these words in quotation marks',
    ]


def test_without_its_row_it_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delitem(springback.LAWS, "even")
    with pytest.raises(JobError, match=r'forming\.springback\.law: value is "even"; allowed: "none"'):
        _job()


@pytest.mark.parametrize(
    ("typed", "said"),
    [
        ("", "forming.springback.percent: value is missing; allowed: percent or depth_loss or rim_slope_loss_deg"),
        (
            "percent = 2.0\ndepth_loss = 1.0",
            "forming.springback.depth_loss: percent and depth_loss are stated together",
        ),
        ("percent = 2.0\nflow_stress_mpa = 9.0", 'flow_stress_mpa: value is 9.0 beside law = "even", which has no use'),
        (
            "percent = 2.0\naccept_estimate = true",
            'accept_estimate: value is true beside law = "even", which has no use',
        ),
        ("depth_loss = 100.0", "depth_loss: value is 100; allowed: what -20 to 40 % of springback give"),
    ],
)
def test_the_keys_of_its_row_are_asked_for(typed: str, said: str) -> None:
    with pytest.raises(JobError) as refused:
        _ = Chain(_job(JOB.replace("percent = 2.0", typed))).mould
    assert said in str(refused.value)


def test_an_option_of_its_own_may_be_stated_beside(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(springback.LAWS, "even", LawRow(even, one_of=("percent",), options=("flow_stress_mpa",)))
    job = _job(JOB.replace("percent = 2.0", "percent = 2.0\nflow_stress_mpa = 9.0"))
    assert _job(job_text(job)) == job
    with pytest.raises(JobError, match=r"flow_stress_mpa: value is missing"):
        _job(JOB.replace('"even"\npercent = 2.0', '"bending"'))


def test_the_starter_job_lays_it_out() -> None:
    given = {"forming.springback.law": "even", "forming.thinning.law": "thirds"}
    assert 'law = "even"' in starter_text(given)
    gaps = [key for key in starter_gaps(given) if key.startswith(("forming.springback", "forming.thinning"))]
    assert gaps == ["forming.springback.percent"]


def test_its_work_is_questioned_where_it_closes_the_part(monkeypatch: pytest.MonkeyPatch) -> None:
    # No key of the job is negative: that the part closes shows on its curve only.
    monkeypatch.setitem(
        springback.LAWS, "even", LawRow(lambda stated, percent: even(stated, -percent), one_of=SHOP_TERMS)
    )
    (said,) = (text for text in notices(Order(_job())) if text.startswith("forming.springback.law"))
    assert "value is" not in said
    assert said.startswith('forming.springback.law is "even": on the whole the part closes on release, its rim ')
    assert said.endswith(" mm deeper; is that meant?")
