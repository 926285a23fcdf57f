from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from profiles.errors import GeometryError
from profiles.series import constant, merged_breaks, resolve


def test_a_smooth_function_is_held_to_rounding() -> None:
    (sine,) = resolve(lambda where: np.sin(where)[None], [0.0, 10.0], sizes=[1.0])
    where = np.linspace(0.0, 10.0, 999)
    assert_allclose(sine(where), np.sin(where), atol=1e-13)
    assert_allclose(sine.derivative()(where), np.cos(where), atol=1e-11)
    assert_allclose(sine.integral(value=-1.0)(where), -np.cos(where), atol=1e-13)


def test_a_corner_at_a_break_costs_nothing() -> None:
    (kink,) = resolve(lambda where: np.abs(where - 1.0)[None], [0.0, 1.0, 3.0], sizes=[1.0])
    assert len(kink.pieces) == 2
    assert kink(1.0) == pytest.approx(0.0, abs=1e-14)


def test_a_corner_elsewhere_is_refused() -> None:
    with pytest.raises(GeometryError, match=r"not smooth near 0\.3333.* mm along it"):
        resolve(lambda where: np.abs(where - 1.0 / 3.0)[None], [0.0, 1.0], sizes=[1.0])


def test_a_function_that_is_not_finite_is_refused() -> None:
    with np.errstate(divide="ignore"), pytest.raises(GeometryError, match="no finite value everywhere between 0 and 1"):
        resolve(lambda where: (1.0 / np.zeros_like(where))[None], [0.0, 1.0], sizes=[1.0])


def test_the_noise_of_a_function_is_not_chased() -> None:
    generator = np.random.default_rng(3)

    def noisy(where: np.ndarray) -> np.ndarray:
        return (np.cos(where) + 1e-13 * generator.standard_normal(where.shape))[None]

    (cosine,) = resolve(noisy, [0.0, 2.0], sizes=[1.0])
    assert len(cosine.pieces) == 1
    assert len(cosine.pieces[0].coef) < 25


def test_noise_everywhere_is_refused_and_ends() -> None:
    generator = np.random.default_rng(3)
    with pytest.raises(GeometryError, match="not smooth"):
        resolve(lambda where: generator.standard_normal((1, *where.shape)), [0.0, 1.0], sizes=[1.0])


@given(st.lists(st.floats(-2.0, 2.0), min_size=2, max_size=6))
def test_the_largest_value_is_no_less_than_any_sample(factors: list[float]) -> None:
    def wave(where: np.ndarray) -> np.ndarray:
        return sum(factor * np.cos(number * where) for number, factor in enumerate(factors))[None]

    (series,) = resolve(wave, [0.0, 4.0], sizes=[1.0])
    sampled = series(np.linspace(0.0, 4.0, 3001))
    assert series.largest()[1] >= sampled.max() - 1e-12
    assert series.smallest()[1] <= sampled.min() + 1e-12


def test_solve_inverts_an_increasing_function() -> None:
    (growth,) = resolve(lambda where: np.exp(where)[None], [0.0, 3.0], sizes=[20.0])
    assert_allclose(growth.solve([1.0, 2.0, np.exp(3.0)]), [0.0, np.log(2.0), 3.0], atol=1e-13)


def test_breaks_that_rounding_sets_apart_are_one() -> None:
    merged = merged_breaks(np.array([0.0, 1.0, 2.0]), np.array([0.0, 1.0 + 1e-12, 2.0]), start=0.0, end=2.0)
    assert_allclose(merged, [0.0, 1.0, 2.0])


def test_a_constant_has_its_value_everywhere() -> None:
    assert constant(3.0, 0.0, 1.0)(np.array([0.0, 0.5])).tolist() == [3.0, 3.0]
