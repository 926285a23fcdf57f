"""The rim on the mould, over the outside edge, and by either convention of shrinkage."""

from __future__ import annotations

import numpy as np
import pytest

from fabricate.chain import Chain
from fabricate.job import parse_job
from fabricate.order import Order
from fabricate.rim import rim_of
from fabricate.shrinkage import shrinkage_conventions
from fabricate.summary import mould_figures


def _order(
    *,
    face: str = "concave",
    contact: str = "concave",
    springback: str = 'law = "none"',
    coating: float = 0.0,
    shrinkage: str = "percent = 0.0",
) -> Order:
    text = f"""
title = "A dish of Quillet Bay"
units = "mm"
[reflector]
focal_length = 110.0
rim_diameter = 400.0
reflecting_face = "{face}"
[sheet]
material = "aluminium 1085-O"
thickness = 1.0
coating_thickness = {coating}
[forming]
process = "spinning"
contact_face = "{contact}"
[forming.springback]
{springback}
[forming.thinning]
law = "none"
[forming.shrinkage]
{shrinkage}
[tolerance.files]
chord_error = 0.01
"""
    return Order(parse_job(text, name="test.toml"))


def test_calipers_on_the_outside_edge() -> None:
    # Practitioners' notes: 401.3 mm for a sheet of 1 mm whose reflecting face is 400.
    rim = rim_of(_order().chain)
    assert rim.outside_diameter == pytest.approx(401.3, abs=0.05)
    assert rim.outside_diameter == pytest.approx(400.0 + 2.0 * 200.0 / np.hypot(200.0, 220.0), rel=1e-12)
    assert (rim.diameter, rim.thickness) == pytest.approx((400.0, 1.0), rel=1e-12)
    assert np.tan(rim.slope) == pytest.approx(200.0 / 220.0, rel=1e-12)


def test_a_mirror_on_the_outside_is_the_outside() -> None:
    rim = rim_of(_order(face="convex").chain)
    assert rim.outside_diameter == rim.diameter == pytest.approx(400.0, rel=1e-12)


@pytest.mark.parametrize("coating", [0.2, -0.2])
def test_the_coating_stands_between_mirror_and_sheet(coating: float) -> None:
    sine = 200.0 / np.hypot(200.0, 220.0)
    rim = rim_of(_order(coating=coating).chain)
    assert rim.outside_diameter == pytest.approx(400.0 + 2.0 * (1.0 + coating) * sine, rel=1e-12)


def test_the_outside_edge_is_the_sheet_offset_along_the_normal() -> None:
    chain = _order().chain
    part, where = chain.released.meridian, np.array([chain.released.rim])
    outside = (part.points(where) - part.normals(where))[0, 0]
    assert rim_of(chain).outside_diameter == pytest.approx(2.0 * outside, rel=1e-13)


@pytest.mark.parametrize("contact", ["concave", "convex"])
def test_the_place_on_the_mould_is_that_of_the_summary(contact: str) -> None:
    order = _order(contact=contact, springback='law = "focal-length"\npercent = 2.1')
    rim, figures = rim_of(order.chain), mould_figures(order)
    assert (rim.mould_radius, rim.mould_z) == pytest.approx((figures.rim_radius, figures.rim_z), rel=1e-14)


@pytest.mark.parametrize(
    ("table", "heat"),
    [
        ("percent = 0.6", 1.0),
        ('percent = 0.6\nreference = "hot-mould"\nmould_expansion = 2e-5\ntemperature_rise = 60.0', 1.0012),
    ],
)
def test_the_conventions_of_shrinkage_at_the_rim(table: str, heat: float) -> None:
    conventions = shrinkage_conventions(Chain(_order(shrinkage=table).job))
    assert conventions.by_mould == pytest.approx(400.0 / 0.994 / heat, rel=1e-12)
    assert conventions.by_part == pytest.approx(400.0 * 1.006 / heat, rel=1e-12)
    assert conventions.difference == pytest.approx(400.0 * 0.006**2 / 0.994 / heat, rel=1e-9)


def test_without_shrinkage_the_conventions_agree() -> None:
    assert shrinkage_conventions(_order().chain).difference == 0.0
