from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fabricate.chain import Chain
from fabricate.hoop_strain import hoop_strain, strain_over_length
from fabricate.job import Job, parse_job
from fabricate.notices import notices
from fabricate.order import Order
from profiles.errors import DishwrightError

MIXED = 'law = "stations"\nstations = [[0.0, -2.0], [90.0, -3.0], [140.0, 4.0], [200.0, 9.0]]'


def _job(
    springback: str, *, hole: float = 0.0, sheet: str = 'material = "aluminium 1085-O"', thickness: str = "1.0"
) -> Job:
    return parse_job(
        f"""
title = "A dish"
units = "mm"
[reflector]
focal_length = 110.0
rim_diameter = 400.0
hole_diameter = {hole}
reflecting_face = "concave"
[sheet]
thickness = {thickness}
{sheet}
[forming]
process = "spinning"
contact_face = "concave"
[forming.springback]
{springback}
[forming.thinning]
law = "none"
[tolerance.files]
chord_error = 0.1
""",
        name="test.toml",
    )


def _sheet(yield_mpa: float) -> str:
    return (
        'material = "a sheet of the shop"\n[sheet.properties]\nyoungs_modulus_mpa = 70000.0\npoisson = 0.33\n'
        f"yield_mpa = {yield_mpa}\ndensity_kg_m3 = 2700.0"
    )


def _sampled(chain: Chain, start: float) -> tuple[np.ndarray, np.ndarray]:
    where = np.linspace(start, chain.released.rim, 4001)
    part, on_mould = chain.released.meridian, chain.on_mould
    return part.radius(where), part.radius(where) / on_mould.radius(where) - 1.0


def test_an_opening_dish_stretches_most_at_the_rim() -> None:
    chain = Chain(_job('law = "focal-length"\npercent = 2.1'))
    strain = hoop_strain(chain)
    on_mould = float(chain.on_mould.radius(chain.released.rim))
    assert strain.rim == strain.largest == pytest.approx(200.0 / on_mould - 1.0, rel=1e-10)
    assert strain.at_radius == pytest.approx(200.0, abs=1e-9)
    # Aluminium 1085-O of the table.
    assert strain.yield_strain == chain.job.sheet.row.yield_mpa / chain.job.sheet.row.youngs_modulus_mpa
    assert strain.exceeds_yield


def test_a_closing_dish_shrinks() -> None:
    strain = hoop_strain(Chain(_job('law = "curvature"\npercent = -1.0')))
    assert strain.rim == strain.largest < -1e-3


def test_the_largest_is_found_between_hole_and_rim() -> None:
    # Closing inside and opening outside: the largest is an extreme within, and is no row of the table.
    chain = Chain(_job(MIXED))
    strain = hoop_strain(chain)
    radii, sampled = _sampled(chain, 1.0)
    worst = int(np.argmax(np.abs(sampled)))
    assert abs(strain.largest) >= abs(sampled[worst])
    assert strain.largest == pytest.approx(sampled[worst], rel=1e-6)
    assert strain.at_radius == pytest.approx(radii[worst], abs=0.2)
    assert 50.0 < strain.at_radius < 195.0


def test_a_hole_takes_what_lies_within_it_away() -> None:
    whole, holed = (hoop_strain(Chain(_job(MIXED, hole=hole))) for hole in (0.0, 350.0))
    assert holed.rim == pytest.approx(whole.rim, abs=1e-13)
    assert holed.at_radius == pytest.approx(175.0, abs=1e-9)
    assert abs(holed.largest) < abs(whole.largest)


def test_without_springback_there_is_no_strain() -> None:
    strain = hoop_strain(Chain(_job('law = "none"')))
    assert (strain.rim, strain.largest) == pytest.approx((0.0, 0.0), abs=1e-13)
    assert not strain.exceeds_yield


def test_on_the_axis_the_strain_goes_to_nothing_smoothly() -> None:
    # Near the axis r = s − κ² s³/6 on either side: the strain is (κ_mould² − κ_part²) s²/6.
    chain = Chain(_job('law = "curvature"\npercent = 3.0'))
    strain = strain_over_length(chain.on_mould, chain.released.meridian, start=0.0, end=chain.released.rim)
    bent, left = (float(curve.curvature(0.0)) for curve in (chain.on_mould, chain.released.meridian))
    assert float(strain(0.0)) == pytest.approx(0.0, abs=1e-14)
    for where in (0.01, 0.1, 1.0):
        assert float(strain(where)) == pytest.approx((bent**2 - left**2) * where**2 / 6.0, rel=1e-3, abs=1e-14)


@settings(max_examples=30)
@given(st.from_type(Job))
def test_no_sample_is_larger(job: Job) -> None:
    chain = Chain(job.in_millimetres())
    try:
        strain = hoop_strain(chain)
    except DishwrightError:
        return
    hole = 0.5 * chain.job.reflector.hole_diameter
    _, sampled = _sampled(chain, max(float(chain.released.meridian.at_radius(hole)), 1e-3 * chain.released.rim))
    assert np.abs(sampled).max() <= abs(strain.largest) + 1e-10
    assert sampled[-1] == pytest.approx(strain.rim, abs=1e-11)


def _said(job: Job, about: str) -> list[str]:
    return [text for text in notices(Order(job)) if text.startswith(about)]


def test_more_than_the_sheet_springs_is_said_with_both_numbers() -> None:
    (said,) = _said(_job('law = "focal-length"\npercent = 2.1', sheet=_sheet(70.0)), "forming.springback:")
    assert "stretches the sheet around the axis by 0.36 % on release, at radius 200 mm" in said
    assert "this sheet springs by 0.1 % before it yields (yield over modulus, as bought" in said
    assert "it was probably never tight on the mould, or the model is wrong" in said
    (closing,) = _said(_job('law = "focal-length"\npercent = -2.1', sheet=_sheet(70.0)), "forming.springback:")
    assert "shrinks the sheet around the axis by 0.3" in closing


def test_what_the_sheet_springs_is_not_mentioned() -> None:
    assert _said(_job('law = "focal-length"\npercent = 2.1', sheet=_sheet(300.0)), "forming.springback:") == []
    assert _said(_job('law = "none"'), "forming.springback:") == []


CLOSING = [
    'law = "focal-length"\npercent = -2.0',
    'law = "curvature"\ndepth_loss = -1.5',
    'law = "focal-length"\nrim_slope_loss_deg = -0.4',
    'law = "stations"\nstations = [[0.0, -1.0], [200.0, -1.0]]',
    # Opens inside and closes on the whole.
    'law = "stations"\nstations = [[0.0, 1.0], [60.0, -3.0], [200.0, -2.0]]',
    # Closes at the rim's own place and opens on the whole.
    'law = "stations"\nstations = [[0.0, 3.0], [150.0, 2.0], [200.0, -0.5]]',
]


@pytest.mark.parametrize("springback", CLOSING)
def test_what_closes_is_asked_about_once(springback: str) -> None:
    (said,) = _said(_job(springback), "forming.springback.")
    assert said.endswith("?")
    assert "close" in said


@pytest.mark.parametrize(
    "springback", ['law = "none"', 'law = "curvature"\npercent = 2.0', 'law = "bending"\nflow_stress_mpa = 9.0']
)
def test_what_opens_is_not_asked_about(springback: str) -> None:
    assert _said(_job(springback), "forming.springback.") == []
