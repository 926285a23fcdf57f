"""Cusps of a turned surface against worked examples.

``Rt = f²/(8 r)`` with f = 0.2 mm and r = 0.8 mm gives 6.25 µm: a worked example seen on two web pages; an insert
maker's note has the same as ``125 f²/r`` in µm (seen). Ra of a parabolic cusp is ``f²/(18 √3 r)``: one web page prints
``f²/(31.2 r)`` = 1.60 µm, others ``f²/(32 r)`` = 1.56 µm, which takes Ra for a quarter of Rt (both seen; 31.2 is the
right rounding of 31.1769).
"""

from __future__ import annotations

from math import sqrt

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fabricate.roughness import feed_for_rt, rt_for_feed, rt_for_ra


def test_the_worked_example_of_rt() -> None:
    # The formula leaves the cusp's own height out against the nose: a part of Rt/2r.
    assert 1e3 * rt_for_feed(0.2, 0.8) == pytest.approx(6.25, rel=6.25e-3 / 1.6 * 1.1)
    assert 1e3 * rt_for_feed(0.2, 0.8) == pytest.approx(1e3 * (0.8 - sqrt(0.8**2 - 0.01)), rel=1e-9)


def test_the_worked_example_of_ra() -> None:
    rt = 0.2**2 / (8.0 * 0.8)
    ra = 0.2**2 / (18.0 * sqrt(3.0) * 0.8)
    assert rt_for_ra(ra) == pytest.approx(rt, rel=1e-12)
    assert 1e3 * ra == pytest.approx(1.60, abs=0.005)


@given(st.floats(0.05, 5.0), st.floats(1e-3, 0.5))
def test_feed_and_cusp_go_both_ways(nose: float, share: float) -> None:
    feed = share * nose
    assert feed_for_rt(rt_for_feed(feed, nose), nose) == pytest.approx(feed, rel=1e-9)
