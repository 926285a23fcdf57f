from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fabricate.measures import Coefficients, Rows, Words, length, plain, speed_per_minute, speed_per_second


@given(st.floats(-1e6, 1e6))
def test_a_length_comes_back_from_inches(value: float) -> None:
    measure = length(-1e6, 1e6)
    assert measure.from_inch_job(measure.to_inch_job(value)) == pytest.approx(value, rel=1e-15)


def test_one_inch_and_one_foot() -> None:
    assert length(0, 100).from_inch_job(1.0) == 25.4
    assert speed_per_minute(0, 100).from_inch_job(1.0) == 0.3048
    assert speed_per_second(0, 100).from_inch_job(10.0) == 3.048
    assert plain(0, 100, unit="%").from_inch_job(7.0) == 7.0


@pytest.mark.parametrize(("value", "units", "kept"), [
    (25.4, "mm", True), (25.5, "mm", False), (1.0, "inch", True), (1.01, "inch", False), (-0.1, "mm", False),
])  # fmt: skip
def test_bounds_are_lengths_whatever_the_units(value: float, units: str, *, kept: bool) -> None:
    assert length(0.0, 25.4).keeps(value, units) is kept  # type: ignore[arg-type]


def test_bounds_are_said_with_their_unit() -> None:
    assert length(0.0, 25.4).allowed("mm") == "a number from 0 to 25.4 mm"
    assert length(0.0, 25.4).allowed("inch") == "a number from 0 to 1 in"
    assert plain(-20.0, 40.0, unit="%").allowed("inch") == "a number from -20 to 40 %"


def test_coefficients_of_an_asphere_keep_the_height() -> None:
    measure = Coefficients(10)
    inches = (1e-4, -3e-6)
    metric = measure.from_inch_job(inches)
    radius = 5.0
    height = sum(factor * radius ** (2 * index) for index, factor in enumerate(inches, start=2))
    again = sum(factor * (25.4 * radius) ** (2 * index) for index, factor in enumerate(metric, start=2))
    assert again == pytest.approx(25.4 * height, rel=1e-14)
    assert measure.to_inch_job(metric) == pytest.approx(inches, rel=1e-14)
    assert measure.keeps((0.0,) * 10, "mm")
    assert not measure.keeps((0.0,) * 11, "mm")


@pytest.mark.parametrize(("rows", "kept"), [
    (((0.0, 1.0),), True), (((0.0, 1.0), (5.0, 2.0)), True), ((), False), (((5.0, 1.0), (5.0, 1.0)), False),
    (((5.0, 1.0), (1.0, 1.0)), False), (((0.0, 11.0),), False), (((101.0, 1.0),), False),
])  # fmt: skip
def test_rows_increase_and_keep_their_bounds(rows: tuple[tuple[float, float], ...], *, kept: bool) -> None:
    assert Rows(("radius", "percent"), (length(0, 100), plain(0, 10))).keeps(rows, "mm") is kept


def test_rows_convert_each_column_by_its_own_measure() -> None:
    measure = Rows(("radius", "percent"), (length(0, 100), plain(0, 10)))
    assert measure.from_inch_job(((1.0, 2.0), (2.0, 3.0))) == ((25.4, 2.0), (50.8, 3.0))
    assert measure.to_inch_job(((25.4, 2.0),)) == ((1.0, 2.0),)


@pytest.mark.parametrize(("text", "kept"), [
    ("Quay lamp", True), ("é ±", True), ("", False), ("  ", False), ("a\nb", False), ("a\x1bb", False),
    ("x" * 11, False),
])  # fmt: skip
def test_words_are_one_printable_line(text: str, *, kept: bool) -> None:
    assert Words(1, 10).keeps(text, "mm") is kept
