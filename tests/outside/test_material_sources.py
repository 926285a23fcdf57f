"""The material table against the figures of its sources, in the units in which those print them.

Sources as read: alloysintl.com *aluminum 1100* (4.93 ksi), btimetals.com *aluminum 1100 tubes* (13.1e-6/°F),
substech *3003* (12.9e-6/°F), olinbrass *C26000* (11.1e-6/°F, 16 Msi), jetminmetal *5052* (13 ksi), cctprecision.com
*acrylic* (470 ksi, 4.0e-5/°F), engineersedge plastics table (345, 275 ksi), polydxplastic.com *PETG* (3.8e-5/°F).
"""

from __future__ import annotations

import pytest

from fabricate.materials import SourcedValue, material

KSI = 6.894757  # 1 psi = 6894.757 Pa
PER_FAHRENHEIT = 1.8

# Tolerances: half a unit of the last digit that the source prints.
PRINTED = {
    ("aluminium 1100-O", "yield_mpa"): (4.93 * KSI, 0.005 * KSI),
    ("aluminium 1100-O", "thermal_expansion_per_k"): (13.1e-6 * PER_FAHRENHEIT, 0.05e-6 * PER_FAHRENHEIT),
    ("aluminium 3003-O", "thermal_expansion_per_k"): (12.9e-6 * PER_FAHRENHEIT, 0.05e-6 * PER_FAHRENHEIT),
    ("aluminium 5052-O", "yield_mpa"): (13.0 * KSI, 0.5 * KSI),
    ("brass C26000-O", "thermal_expansion_per_k"): (11.1e-6 * PER_FAHRENHEIT, 0.05e-6 * PER_FAHRENHEIT),
    ("brass C26000-O", "youngs_modulus_mpa"): (16.0e3 * KSI, 0.5e3 * KSI),
    ("acrylic cast", "thermal_expansion_per_k"): (4.0e-5 * PER_FAHRENHEIT, 0.05e-5 * PER_FAHRENHEIT),
    ("polycarbonate", "youngs_modulus_mpa"): (345.0 * KSI, 0.5 * KSI),
    ("PETG", "thermal_expansion_per_k"): (3.8e-5 * PER_FAHRENHEIT, 0.05e-5 * PER_FAHRENHEIT),
}
# Both ends of a range, each as one source prints it.
RANGES = {
    ("ABS", "youngs_modulus_mpa"): (275.0 * KSI, 346.0 * KSI, 5.0),
    ("acrylic cast", "youngs_modulus_mpa"): (2800.0, 470.0 * KSI, 5.0),
    ("PETG", "yield_mpa"): (50.0, 7.7 * KSI, 0.05),
    ("PETG", "youngs_modulus_mpa"): (2000.0, 310.0 * KSI, 5.0),
    ("polycarbonate", "forming_temperature_c"): ((350.0 - 32.0) / 1.8, (415.0 - 32.0) / 1.8, 0.5),
    ("acrylic extruded", "forming_temperature_c"): ((230.0 - 32.0) / 1.8, (360.0 - 32.0) / 1.8, 0.5),
}


def entry(name: str, quantity: str) -> SourcedValue:
    return next(value for value in material(name).values if value.quantity == quantity)


@pytest.mark.parametrize(("name", "quantity"), PRINTED)
def test_a_value_is_the_printed_one(name: str, quantity: str) -> None:
    printed, half_a_digit = PRINTED[name, quantity]
    assert entry(name, quantity).source.startswith("seen")
    assert entry(name, quantity).value == pytest.approx(printed, abs=half_a_digit)


@pytest.mark.parametrize(("name", "quantity"), RANGES)
def test_a_range_spans_the_printed_ones(name: str, quantity: str) -> None:
    low, high, rounding = RANGES[name, quantity]
    assert entry(name, quantity).low == pytest.approx(low, abs=rounding)
    assert entry(name, quantity).high == pytest.approx(high, abs=rounding)
