"""Where the nose centre runs: its distance from the mould, along all of it."""

from __future__ import annotations

from functools import cache
from importlib.resources import files

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from fabricate.chain import Chain
from fabricate.contour import HEIGHT, RADIUS, chorded_forming, contour_at, nose_curve, place_at, split_at
from fabricate.job import parse_job
from fabricate.turning_setup import Setup
from profiles.arcpath import ArcPath
from profiles.arcs import fewest_arcs
from profiles.deviation import deviation
from profiles.errors import GeometryError

# The arcs end off the exact curve by as much as they may, and edge and land start on it.
FITTED = 1e-3
CLOSE = FITTED + 2e-4
SHARP = ("edge_radius = 5.0\n", "edge_radius = 0.0\n")


@cache
def prepared(name: str, old: str = "", new: str = "") -> tuple[Setup, ArcPath]:
    text = files("fabricate").joinpath(f"demo/{name}.toml").read_text(encoding="utf-8").replace(old, new)
    job = parse_job(text, name="job.toml")
    mould = Chain(job.in_millimetres()).mould
    return Setup.of(job, mould), fewest_arcs(mould.curve, distance=FITTED).path


CASES = {
    "male with a fillet": ("terrace-heater",),
    "male with a bore": ("lamp",),
    "female with a lip": ("display-bowl",),
    "female with a sharp lip": ("display-bowl", *SHARP),
    "female without a land": (
        "display-bowl",
        "land_width = 25.0\nedge_radius = 5.0",
        "land_width = 0.0\nedge_radius = 0.0",
    ),
    "male without a land": ("terrace-heater", "edge_radius = 3.0", "edge_radius = 0.0"),
}


def section(setup: Setup, forming: ArcPath) -> shapely.Polygon:
    return shapely.Polygon(setup.mould.half_section(setup.mould.to_lathe(forming)).points(sagitta=1e-5))


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("distance", [0.4, 0.9])
def test_a_contour_keeps_its_distance_from_axis_to_off_the_part(name: str, distance: float) -> None:
    setup, forming = prepared(*CASES[name])
    whole = contour_at(setup, forming, distance).whole
    part = section(setup, forming)
    points = whole.points(sagitta=1e-5)
    gaps = shapely.distance(shapely.points(points[points[:, 0] >= setup.mould.bore_radius]), part)
    assert gaps.min() > distance - CLOSE
    on_part = points[(points[:, 0] >= setup.mould.bore_radius + 1.0) & (points[:, 0] <= setup.mould.outer_radius - 1.0)]
    assert shapely.distance(shapely.points(on_part), part).max() < distance + CLOSE
    assert points[0, 0] == pytest.approx(0.0, abs=1e-9)
    assert points[-1, 0] > setup.mould.outer_radius + 1.0
    assert np.abs(whole.kinks).max() < 0.05


def test_a_fillet_too_tight_for_the_allowance_is_left_for_the_finishing_cut() -> None:
    setup, forming = prepared("lamp")
    whole = contour_at(setup, forming, 1.5).whole
    points = whole.points(sagitta=1e-5)
    gaps = shapely.distance(shapely.points(points[points[:, 0] >= 3.0]), section(setup, forming))
    assert gaps.min() > 1.5 - CLOSE
    assert whole.vertices[-1, 1] == pytest.approx(setup.mould.land + 1.5)


def test_the_exact_path_of_the_nose_is_met_by_chords_on_both_sides() -> None:
    setup, _ = prepared("terrace-heater")
    path = chorded_forming(setup, 0.004, 0.0)
    found = deviation(nose_curve(setup), setup.mould.from_lathe(path))
    assert 0.002 < found.normal <= 0.004


def test_a_nose_larger_than_the_cavity_has_no_path() -> None:
    setup, forming = prepared("display-bowl")
    with pytest.raises(GeometryError, match="folds an arc of radius 19"):
        contour_at(setup, forming, 250.0)


@settings(deadline=None)
@given(
    bulge=st.floats(-0.4, 0.4).filter(lambda bulge: abs(bulge) > 1e-6) | st.just(0.0),
    fraction=st.floats(0.0, 1.0),
    axis=st.sampled_from([RADIUS, HEIGHT]),
)
def test_a_stretch_is_split_where_a_coordinate_takes_a_value(bulge: float, fraction: float, axis: int) -> None:
    path = ArcPath(np.array([[3.0, -2.0], [13.0, 8.5]]), np.array([bulge]))
    point = path.along(0, np.array([fraction]))[0]
    assert split_at(path, 0, axis, float(point[axis])) == pytest.approx(fraction, abs=1e-6)
    place = place_at(path, axis, float(point[axis]))
    assert place is not None
    assert place == pytest.approx(tuple(point), abs=1e-5)
    assert place_at(path, axis, 50.0) is None
