from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from fabricate.bending import BendingSheet
from fabricate.chain import rim_arc_length
from fabricate.curvature_map import ReleasedFace, depth_loss, rim_slope_loss
from fabricate.forming_keys import Springback
from fabricate.springback import StatedSpringback, percent_of, springback_map
from profiles.errors import JobError
from profiles.face import Face
from profiles.meridian import Meridian


def _part(conic_constant: float = -1.0, asphere: tuple[float, ...] = ()) -> ReleasedFace:
    face = Face(110.0, conic_constant, asphere)
    rim = rim_arc_length(face, 200.0)
    return ReleasedFace(face, Meridian.of_face(face, rim + 8.0), rim)


SHEET = BendingSheet(1.0, 69000.0, 0.33, 1)


def _stated(part: ReleasedFace, **table: object) -> StatedSpringback:
    return StatedSpringback(part, Springback.model_validate(table), SHEET)


def _on_mould(part: ReleasedFace, **stated: object) -> Meridian:
    return springback_map(_stated(part, **stated)).load(part.meridian)


@pytest.mark.parametrize(("conic_constant", "asphere"), [(-1.0, ()), (-0.6, ()), (-1.0, (2e-10,))])
def test_focal_length_makes_the_vertex_radius_smaller_and_keeps_the_rest(
    conic_constant: float, asphere: tuple[float, ...]
) -> None:
    part = _part(conic_constant, asphere)
    on_mould = _on_mould(part, law="focal-length", percent=2.1)
    tighter = Meridian.of_face(Face(0.979 * 110.0, conic_constant, asphere), on_mould.end)
    where = np.linspace(0.0, on_mould.end, 101)
    assert_allclose(on_mould.points(where), tighter.points(where), atol=1e-10)


def test_curvature_is_lost_everywhere_alike() -> None:
    part = _part()
    on_mould = _on_mould(part, law="curvature", percent=3.0)
    where = np.linspace(0.0, on_mould.end, 101)
    assert_allclose(part.meridian.curvature(where), 0.97 * on_mould.curvature(where), rtol=1e-10)


def test_stations_add_their_share_of_the_vertex_curvature() -> None:
    part = _part()
    on_mould = _on_mould(part, law="stations", stations=((50.0, 1.0), (150.0, 2.0)))
    for radius, percent in ((10.0, 1.0), (50.0, 1.0), (150.0, 2.0), (190.0, 2.0)):
        where = float(part.meridian.at_radius(radius))
        added = float(on_mould.curvature(where) - part.meridian.curvature(where))
        assert added == pytest.approx(0.01 * percent / 220.0, rel=1e-8)


def test_none_keeps_the_shape() -> None:
    part = _part()
    where = np.linspace(0.0, part.meridian.end, 11)
    assert_allclose(_on_mould(part, law="none").points(where), part.meridian.points(where), atol=1e-11)


@pytest.mark.parametrize("law", ["focal-length", "curvature"])
def test_the_shops_terms_are_solved_for(law: str) -> None:
    part = _part()
    known = springback_map(_stated(part, law=law, percent=2.1))
    lost, turned = depth_loss(part, known), np.degrees(rim_slope_loss(part, known))
    assert lost > 0.0
    assert percent_of(_stated(part, law=law, depth_loss=lost)) == pytest.approx(2.1, abs=1e-9)
    assert percent_of(_stated(part, law=law, rim_slope_loss_deg=float(turned))) == pytest.approx(2.1, abs=1e-9)


def test_one_percent_moves_the_rim_of_the_heater_by_nine_tenths_at_most() -> None:
    # Practitioners' notes: one percentage point moves the rim of the heater by 0.9 mm, of the link dish by 1.9 mm.
    part = _part()
    on_mould = _on_mould(part, law="focal-length", percent=1.0)
    moved = np.hypot(*(on_mould.points(part.rim) - part.meridian.points(part.rim)))
    assert moved == pytest.approx(0.7, abs=0.25)


def test_a_depth_loss_that_no_percentage_gives_is_refused() -> None:
    with pytest.raises(JobError, match=r"forming\.springback\.depth_loss: value is 80; allowed: what -20 to 40 %"):
        _on_mould(_part(), law="focal-length", depth_loss=80.0)


def test_bending_opens_the_mid_surface_as_the_cubic_says() -> None:
    part = _part()
    on_mould = _on_mould(part, law="bending", flow_stress_mpa=12.0)
    where = np.linspace(0.0, part.meridian.end, 11)
    middle, released = (1.0 / (1.0 / curve.curvature(where) + 0.5) for curve in (on_mould, part.meridian))
    share = 2.0 * 12.0 / np.sqrt(3.0) / (69000.0 / (1.0 - 0.33**2) * 1.0 * middle)
    assert_allclose(released, middle * (1.0 - 3.0 * share + 4.0 * share**3), rtol=1e-11)
    again = springback_map(_stated(part, law="bending", flow_stress_mpa=12.0)).release(on_mould)
    assert_allclose(again.points(where), part.meridian.points(where), atol=1e-10)


@settings(max_examples=30)
@given(
    st.floats(0.2, 1.5),
    st.sampled_from(
        [
            {"law": "none"},
            {"law": "focal-length", "percent": 4.0},
            {"law": "focal-length", "percent": -3.0},
            {"law": "curvature", "percent": 3.0},
            {"law": "curvature", "depth_loss": 0.5},
            {"law": "focal-length", "rim_slope_loss_deg": 0.3},
            {"law": "bending", "flow_stress_mpa": 2.0},
            {"law": "stations", "stations": ((0.0, 1.0), (60.0, -0.5), (120.0, 2.0), (200.0, 0.5))},
        ]
    ),
)
def test_what_is_released_is_what_was_loaded(ratio: float, table: dict[str, object]) -> None:
    face = Face(400.0 * ratio)
    rim = rim_arc_length(face, 200.0)
    part = ReleasedFace(face, Meridian.of_face(face, rim + 8.0), rim)
    springback = springback_map(_stated(part, **table))
    again = springback.release(springback.load(part.meridian))
    where = np.linspace(0.0, part.meridian.end, 201)
    assert_allclose(again.points(where), part.meridian.points(where), atol=1e-9)
    assert again.end == pytest.approx(part.meridian.end, abs=1e-9)


def test_an_absurd_estimate_is_refused_unless_accepted() -> None:
    with pytest.raises(JobError, match=r'"bending", which predicts \d+\.?\d* % at radius 2\d\d.* allowed: up to 40 %'):
        _on_mould(_part(), law="bending", flow_stress_mpa=60.0)
    assert _on_mould(_part(), law="bending", flow_stress_mpa=60.0, accept_estimate=True).end > 0.0
