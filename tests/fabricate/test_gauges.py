from __future__ import annotations

from itertools import pairwise

import pytest

from fabricate.gauges import GAUGE_SYSTEMS, gauge_thickness
from profiles.errors import JobError


@pytest.mark.parametrize("system", ["AWG", "SWG", "USG", "MSG"])
def test_a_higher_number_is_a_thinner_sheet(system: str) -> None:
    assert all(later < earlier for earlier, later in pairwise(GAUGE_SYSTEMS[system].values()))


def test_awg_halves_in_six_numbers_nearly() -> None:
    ratio = gauge_thickness(10, "AWG") / gauge_thickness(16, "AWG")
    assert ratio == pytest.approx(92 ** (6 / 39), rel=1e-14)


def test_awg_ends_are_its_definition() -> None:
    assert gauge_thickness("0000", "AWG") == pytest.approx(0.46 * 25.4, rel=1e-14)
    assert gauge_thickness(36, "AWG") == pytest.approx(0.005 * 25.4, rel=1e-14)


def test_usg_and_msg_differ_by_the_weight_of_an_inch_of_steel() -> None:
    assert gauge_thickness(16, "USG") == pytest.approx(25.4 / 16.0, rel=1e-14)
    for number in GAUGE_SYSTEMS["MSG"]:
        ratio = gauge_thickness(number, "USG") / gauge_thickness(number, "MSG")
        assert ratio == pytest.approx(41.82 / 40.0, rel=1e-12)


def test_the_weight_of_copper_is_its_thickness() -> None:
    for ounces in range(4, 97):
        assert gauge_thickness(ounces, "oz/ft2") == pytest.approx(
            ounces * gauge_thickness(16, "oz/ft2") / 16.0, rel=1e-14
        )
    with pytest.raises(JobError, match=r"value is 97, which oz/ft2 .*; allowed: whole numbers from 4 to 96; do:"):
        gauge_thickness(97, "oz/ft2")


def test_an_unknown_system_is_refused_with_the_nearest() -> None:
    with pytest.raises(JobError, match=r'value is "awg"; allowed: AWG, SWG, USG, MSG, oz/ft2; do: write AWG'):
        gauge_thickness(18, "awg")
    with pytest.raises(JobError, match=r'value is "OZ/FT2"; allowed: AWG, .*, oz/ft2; do: write oz/ft2'):
        gauge_thickness(16, "OZ/FT2")


def test_an_unknown_number_is_refused() -> None:
    with pytest.raises(JobError, match=r"value is 6, which MSG does not have here; allowed: 7, 8, .*, 30; do: correct"):
        gauge_thickness(6, "MSG")
