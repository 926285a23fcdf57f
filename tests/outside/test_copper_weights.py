"""Copper sheet by weight held against the trade's tables.

Weight in ounces per square foot and thickness in inches as printed in tables of roofing copper, after ASTM B370 (from
memory). A tolerance is one unit of the last printed digit: the tables were rounded from slightly different densities.
"""

from __future__ import annotations

import pytest

from fabricate.gauges import gauge_thickness
from fabricate.materials import material


@pytest.mark.parametrize(("ounces", "inches"), [(16, 0.0216), (20, 0.0270), (24, 0.0323), (32, 0.0431), (48, 0.0646)])
def test_printed_thickness(ounces: int, inches: float) -> None:
    assert gauge_thickness(ounces, "oz/ft2") / 25.4 == pytest.approx(inches, abs=1.01e-4)


def test_sixteen_ounces_are_a_pound_on_a_square_foot() -> None:
    # 1 lb is 0.45359237 kg and 1 ft 0.3048 m, both exact; the density of the material table has its own range.
    copper = material("copper C11000-O")
    (density,) = (entry for entry in copper.values if entry.quantity == "density_kg_m3")
    weighed = 0.45359237 / 0.3048**2 / (gauge_thickness(16, "oz/ft2") / 1000.0)
    assert weighed == pytest.approx(8913.0, abs=1.0)
    assert density.low <= weighed <= density.high
