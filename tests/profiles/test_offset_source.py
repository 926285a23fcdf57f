"""The curve under an offset whose distance depends on that very curve: it is found, or refused."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.interpolate import PchipInterpolator

from profiles.errors import GeometryError
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.offset_source import offset_source
from profiles.series import Series, constant, merged_breaks, resolve

Distance = Callable[[Meridian], Series]
CASES = [(0.2, 0.8), (0.25, -0.8), (0.4, 0.8), (0.4, -0.8), (1.5, 0.8)]
"""Focal length over diameter, and thickness [mm]: to the left of the curve, towards its focus, positive."""


def even(distance: float) -> Distance:
    return lambda curve: constant(distance, curve.start, curve.end)


def by_slope(distance: float) -> Distance:
    """A sheet that is thinner where it stands steeper, as shear spinning leaves it."""

    def found(curve: Meridian) -> Series:
        (series,) = resolve(lambda where: distance * np.cos(curve.slope(where))[None], curve.breaks, sizes=[1.0])
        return series

    return found


def table(distance: float, rows: np.ndarray) -> Distance:
    """A measured table over the arc length of the sought curve, with a kink in its bend at each row."""
    values = distance * (1.0 - 0.3 * (rows - rows[0]) ** 2 / (rows[-1] - rows[0]) ** 2)
    between = PchipInterpolator(rows, values)

    def found(curve: Meridian) -> Series:
        breaks = merged_breaks(
            curve.breaks, rows[(rows > curve.start) & (rows < curve.end)], start=curve.start, end=curve.end
        )
        (series,) = resolve(lambda where: between(np.clip(where, rows[0], rows[-1]))[None], breaks, sizes=[1.0])
        return series

    return found


def dish(ratio: float, *, rim: float = 200.0) -> Meridian:
    """The meridian of a paraboloid of a focal length over rim diameter, past its rim by a twentieth."""
    return Meridian.of_face(Face(rim * ratio), 0.525 * rim * np.hypot(1.0, 0.25 / ratio))


def gap(curve: Meridian, distance_of: Distance) -> float:
    """Return how far the curve that is found lies from the one that was offset, in parts of its length."""
    found = offset_source(curve.offset(distance_of(curve)), distance_of)
    where = np.linspace(curve.start, min(curve.end, found.end), 301)
    apart = float(np.abs(found.points(where) - curve.points(where)).max())
    return max(apart, abs(found.end - curve.end)) / curve.end


@pytest.mark.parametrize(("ratio", "distance"), CASES)
def test_an_even_sheet(ratio: float, distance: float) -> None:
    assert gap(dish(ratio), even(distance)) < 1e-12


@pytest.mark.parametrize(("ratio", "distance"), CASES)
def test_a_sheet_that_thins_by_its_slope(ratio: float, distance: float) -> None:
    assert gap(dish(ratio), by_slope(distance)) < 1e-11


@pytest.mark.parametrize(("ratio", "distance"), CASES)
def test_a_measured_table(ratio: float, distance: float) -> None:
    curve = dish(ratio)
    assert gap(curve, table(distance, curve.end * np.array([0.0, 0.4, 0.7, 0.95]))) < 1e-10


@pytest.mark.parametrize(
    ("last", "distance"),
    [(0.999, 0.8), (0.99995, -0.8), (1.0, 0.8)],
)
def test_a_table_under_a_smooth_curve(last: float, distance: float) -> None:
    # The two curves differ in length: a row near the end, as of a mould too short for it, may lie on one of them only.
    curve = dish(0.35)
    rows = table(distance, curve.end * np.array([0.0, 0.5, last]))
    found = offset_source(curve, rows)
    back = found.offset(rows(found))
    where = np.linspace(curve.start, min(curve.end, back.end), 301)
    assert np.abs(back.points(where) - curve.points(where)).max() < 1e-8 * curve.end
    assert back.end == pytest.approx(curve.end, rel=1e-8)


def test_a_curve_that_starts_off_the_axis() -> None:
    whole = dish(0.35)
    assert gap(whole.part(0.3 * whole.end, whole.end), by_slope(0.8)) < 1e-11


@settings(max_examples=8)
@given(
    ratio=st.floats(0.2, 1.5),
    rim=st.floats(20.0, 3000.0),
    share=st.floats(-0.005, 0.005),
    law=st.sampled_from([even, by_slope]),
)
def test_any_size(ratio: float, rim: float, share: float, law: Callable[[float], Distance]) -> None:
    curve = dish(ratio, rim=rim)
    assert gap(curve, law(share * curve.end)) < 1e-9


class TestRefusals:
    def test_a_sheet_as_thick_as_the_bowl_is_tight(self) -> None:
        with pytest.raises(
            GeometryError,
            match=r"an offset of 150 mm at radius \S+ mm folds the curve; allowed: less than its radius of curvature "
            "there; do: use a thinner sheet or cover",
        ):
            offset_source(dish(0.25), even(-150.0))

    def test_a_thickness_that_changes_faster_than_the_arc_length(self) -> None:
        curve = dish(0.35)

        def steep(sought: Meridian) -> Series:
            (series,) = resolve(lambda where: 3.0 * (where - 50.0)[None], [sought.start, sought.end], sizes=[1.0])
            return series

        with pytest.raises(
            GeometryError,
            match="a thickness changes by 3 mm per mm of the curve; allowed: less than 1; do: check the thickness",
        ):
            offset_source(curve, steep)

    def test_a_search_that_does_not_settle(self) -> None:
        asked = iter(range(10**6))

        def restless(sought: Meridian) -> Series:
            return constant(1.0 + 0.01 * (next(asked) + 1) ** 2, sought.start, sought.end)

        with pytest.raises(
            GeometryError,
            match=r"the curve under an offset is found to 0\.\d+ mm only; allowed: \S+ mm; do: use a thinner sheet, or "
            r"state its thickness by a gentler table",
        ):
            offset_source(dish(0.35), restless)
