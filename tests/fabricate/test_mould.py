from __future__ import annotations

from typing import Any, Literal

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fabricate.mould import Mould, mould_around
from fabricate.mould_keys import Mould as Shape
from fabricate.solid import mould_solid
from profiles.arcs import tangent_arcs
from profiles.errors import JobError
from profiles.face import Face
from profiles.meridian import Meridian

Kind = Literal["male", "female"]
CURVE = Meridian.of_face(Face(100.0), 160.0)


def _mould(kind: Kind, **shape: Any) -> Mould:
    return mould_around(CURVE, kind, Shape(**({"body_height": 40.0, "edge_radius": 3.0} | shape)))


@pytest.mark.parametrize("kind", ["male", "female"])
def test_the_edge_is_tangent_to_forming_surface_and_land(kind: Kind) -> None:
    mould = _mould(kind, land_width=20.0)
    assert mould.rim is not None
    starts, ends = mould.rim.tangents
    slope = float(CURVE.slope(CURVE.end)) * (-1.0 if kind == "male" else 1.0)
    assert starts[0] == pytest.approx([np.cos(slope), np.sin(slope)], abs=1e-12)
    assert ends[0] == pytest.approx([1.0, 0.0], abs=1e-12)
    assert 1.0 / abs(mould.rim.curvatures[0]) == pytest.approx(3.0, rel=1e-12)
    assert mould.rim.lengths[1] == pytest.approx(20.0, rel=1e-12)


def test_a_fillet_on_a_male_mould_and_a_lip_on_a_female_one() -> None:
    male, female = _mould("male"), _mould("female")
    assert male.rim is not None
    assert female.rim is not None
    # Seen along the walk outwards with the mould to the right: a fillet turns left, a lip right.
    assert male.rim.bulges[0] > 0.0
    assert female.rim.bulges[0] < 0.0


def test_the_work_zero_and_the_base() -> None:
    male, female = _mould("male"), _mould("female")
    end, slope = CURVE.points(CURVE.end), float(CURVE.slope(CURVE.end))
    drop = 3.0 * (1.0 - np.cos(slope))
    assert male.land == pytest.approx(-end[1] - drop, rel=1e-12)
    assert male.base == pytest.approx(-end[1] - 40.0, rel=1e-12)
    assert female.land == 0.0
    assert female.base == pytest.approx(-end[1] - drop - 40.0, rel=1e-12)


def test_outer_diameter_replaces_the_land() -> None:
    assert _mould("male", outer_diameter=400.0).outer_radius == 200.0
    assert _mould("male").outer_radius == pytest.approx(
        float(CURVE.radius(CURVE.end)) + 3.0 * np.sin(float(CURVE.slope(CURVE.end)))
    )


def test_a_spigot_lies_below_the_base_and_a_bore_goes_through() -> None:
    mould = _mould("male", spigot_diameter=60.0, spigot_length=25.0, bore_diameter=20.0)
    assert mould.lowest == pytest.approx(mould.base - 25.0)
    assert mould.bore_radius == 10.0
    assert float(mould.curve.radius(mould.curve.start)) == pytest.approx(10.0, abs=1e-12)


@given(
    kind=st.sampled_from(["male", "female"]),
    land=st.floats(0.0, 50.0),
    edge=st.floats(0.0, 10.0),
    bore=st.one_of(st.just(0.0), st.floats(1.0, 40.0)),
    spigot=st.one_of(st.just(0.0), st.floats(50.0, 200.0)),
)
def test_the_half_section_is_closed_and_is_a_solid(
    kind: Kind, land: float, edge: float, bore: float, spigot: float
) -> None:
    mould = _mould(
        kind,
        land_width=land,
        edge_radius=edge,
        bore_diameter=bore,
        spigot_diameter=spigot,
        spigot_length=10.0 if spigot else 0.0,
    )
    section = mould.half_section(mould.to_lathe(tangent_arcs(mould.curve, 3)))
    assert section.closed
    assert section.vertices[:, 0].min() >= 0.0
    assert mould_solid(mould).volume > 0.0


@pytest.mark.parametrize(
    ("shape", "message"),
    [
        (
            {"bore_diameter": 400.0},
            r"mould\.bore_diameter: value is 400 mm; allowed: less than the forming surface's end",
        ),
        (
            {"bore_diameter": 60.0, "spigot_diameter": 50.0, "spigot_length": 5.0},
            r"less than mould\.spigot_diameter, 50",
        ),
        ({"spigot_diameter": 50.0}, r"mould\.spigot_length: value is 0 mm .* both above 0 or both 0"),
        ({"outer_diameter": 200.0}, r"mould\.outer_diameter: value is 200 mm; allowed: at least 298\.643884 mm"),
        (
            {"spigot_diameter": 900.0, "spigot_length": 5.0},
            r"mould\.spigot_diameter: value is 900 mm; allowed: at most",
        ),
        ({"body_height": 0.2, "edge_radius": 30.0}, r"mould\.body_height: value is 0\.2 mm; allowed: more than"),
    ],
)
def test_what_does_not_fit_is_refused(shape: dict[str, float], message: str) -> None:
    with pytest.raises(JobError, match=message):
        _mould("male", **shape)
