from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fabricate.chain import rim_arc_length
from profiles.arcs import arc_limit, arc_limit_for_slope, fewest_arcs, tangent_arcs
from profiles.chords import balanced_chords, chord_limit
from profiles.errors import GeometryError
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import constant, resolve

RIM = 200.0


def _curve(f_over_d: float, offset: float) -> Meridian:
    face = Face(2.0 * RIM * f_over_d)
    curve = Meridian.of_face(face, rim_arc_length(face, RIM))
    return curve.offset(offset) if offset else curve


@pytest.mark.parametrize("tolerance", [0.05, 0.01, 0.001, 0.0001])
@pytest.mark.parametrize("offset", [1.5, 0.0, -1.5])
@pytest.mark.parametrize("f_over_d", [0.2, 0.25, 0.3, 0.4, 0.6, 1.0, 1.5])
def test_the_number_of_arcs_is_at_the_limit(f_over_d: float, offset: float, tolerance: float) -> None:
    curve = _curve(f_over_d, offset)
    fit = fewest_arcs(curve, distance=tolerance)
    assert fit.deviation.normal <= tolerance
    assert len(fit.path) <= np.ceil(arc_limit(curve, tolerance) + 0.3)
    assert np.abs(fit.path.kinks).max(initial=0.0) < 1e-9
    assert fit.path.tangents[0][0, 1] == pytest.approx(0.0, abs=1e-9)
    assert fit.path.vertices[0, 0] == 0.0


@settings(max_examples=25)
@given(st.from_type(Meridian), st.floats(1e-5, 1e-3), st.sampled_from([0.0, 2e-3]))
def test_arcs_keep_both_tolerances(curve: Meridian, share: float, slope: float) -> None:
    fit = fewest_arcs(curve, distance=share * curve.end, slope=slope)
    assert fit.deviation.normal <= share * curve.end
    assert not slope or fit.deviation.slope <= slope
    assert np.abs(fit.path.kinks).max(initial=0.0) < 1e-9


def test_a_slope_tolerance_asks_for_about_what_theory_says() -> None:
    curve = _curve(0.3, 0.0)
    fit = fewest_arcs(curve, distance=0.05, slope=2e-4)
    assert len(fit.path) <= np.ceil(1.35 * arc_limit_for_slope(curve, 2e-4))


def test_a_bored_curve_may_start_with_any_tangent() -> None:
    curve = _curve(0.3, 0.0).part(20.0, 180.0)
    fit = fewest_arcs(curve, distance=0.001)
    assert len(fit.path) <= np.ceil(arc_limit(curve, 0.001) + 0.3)


def test_a_circle_is_one_arc_and_a_straight_line_one_line() -> None:
    circle = Meridian.of_curvature(constant(0.01, 0.0, 100.0))
    assert len(fewest_arcs(circle, distance=1e-6).path) == 1
    cone = Meridian.of_curvature(constant(0.0, 0.0, 100.0), slope=0.5, radius=10.0)
    path = fewest_arcs(cone, distance=1e-6).path
    assert len(path) == 1
    assert path.bulges[0] == pytest.approx(0.0, abs=1e-12)


def test_more_than_four_hundred_arcs_are_refused() -> None:
    (curvature,) = resolve(lambda where: (0.1 * np.sin(where))[None], np.linspace(0.0, 300.0, 40), sizes=[0.1])
    with pytest.raises(
        GeometryError, match="more than 400 arcs; allowed: up to 400; do: allow a larger chord error or slope"
    ):
        fewest_arcs(Meridian.of_curvature(curvature), distance=1e-7)


def test_more_arcs_come_closer() -> None:
    curve = _curve(0.275, -1.0)
    gaps = [fewest_arcs(curve, distance=10.0**-power).deviation.normal for power in range(1, 5)]
    assert gaps == sorted(gaps, reverse=True)
    assert len(tangent_arcs(curve, 3)) == 3


@settings(max_examples=25)
@given(st.from_type(Meridian), st.floats(1e-5, 1e-3))
def test_chords_keep_the_distance_with_about_as_many_as_theory_says(curve: Meridian, share: float) -> None:
    path = balanced_chords(curve, distance=share * curve.end)
    assert len(path) <= np.ceil(1.25 * chord_limit(curve, share * curve.end)) + 2
    assert not path.bulges.any()
