from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from profiles.errors import GeometryError
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import constant, resolve


@given(st.from_type(Face), st.floats(0.1, 2.0))
def test_a_face_walked_by_arc_length_keeps_to_the_face(face: Face, share: float) -> None:
    curve = Meridian.of_face(face, share * face.focal_length)
    where = np.linspace(0.0, curve.end, 201)
    radius, height = curve.points(where).T
    assert_allclose(height, face.height(radius), atol=1e-12 * face.focal_length)
    assert_allclose(np.tan(curve.slope(where)), face.incline(radius), rtol=1e-11, atol=1e-12)


@given(st.from_type(Meridian))
def test_arc_length_is_arc_length(curve: Meridian) -> None:
    where = np.linspace(curve.start, curve.end, 101)
    assert_allclose(curve.radius.derivative()(where), np.cos(curve.slope(where)), atol=1e-9)
    assert_allclose(curve.height.derivative()(where), np.sin(curve.slope(where)), atol=1e-9)


@given(st.from_type(Meridian))
def test_curvature_alone_gives_the_curve_back(curve: Meridian) -> None:
    again = Meridian.of_curvature(curve.curvature)
    where = np.linspace(0.0, curve.end, 101)
    assert_allclose(again.points(where), curve.points(where), atol=1e-11 * curve.end)


@given(st.from_type(Meridian), st.floats(-0.2, 0.2))
def test_an_offset_keeps_its_distance_and_comes_back(curve: Meridian, share: float) -> None:
    distance = share / float(np.abs(curve.curvature(np.linspace(0.0, curve.end, 201))).max())
    moved = curve.offset(distance)
    where = np.linspace(curve.start, curve.end, 51)
    feet = moved.nearest(curve.points(where))
    assert_allclose(np.hypot(*(moved.points(feet) - curve.points(where)).T), abs(distance), atol=1e-9 * curve.end)
    back = moved.offset(-distance)
    assert back.end == pytest.approx(curve.end, abs=1e-11 * curve.end)
    assert_allclose(back.points(where), curve.points(where), atol=1e-11 * curve.end)


def test_an_offset_that_varies_moves_each_point_along_its_normal() -> None:
    curve = Meridian.of_face(Face(100.0), 150.0)
    (distance,) = resolve(lambda where: (1.0 + 0.01 * where)[None], [0.0, 150.0], sizes=[1.0])
    where = np.linspace(0.0, 150.0, 31)
    wanted = curve.points(where) + (1.0 + 0.01 * where)[:, None] * curve.normals(where)
    moved = curve.offset(distance)
    assert_allclose(moved.points(moved.nearest(wanted)), wanted, atol=1e-10)


def test_an_offset_as_large_as_the_radius_of_curvature_folds() -> None:
    with pytest.raises(GeometryError, match=r"offset of 200 mm .* folds the curve"):
        Meridian.of_face(Face(100.0), 150.0).offset(200.0)


def test_a_face_that_ends_too_early_is_refused() -> None:
    with pytest.raises(GeometryError, match=r"face ends .* before the 400 mm that rim and trim need"):
        Meridian.of_face(Face(100.0, 0.0), 400.0)


@given(st.from_type(Meridian), st.floats(0.01, 100.0))
def test_scaling_enlarges_everything_alike(curve: Meridian, factor: float) -> None:
    where = np.linspace(curve.start, curve.end, 21)
    large = curve.scaled(factor)
    assert_allclose(large.points(factor * where), factor * curve.points(where), atol=1e-12 * factor * curve.end)
    assert_allclose(large.slope(factor * where), curve.slope(where), atol=1e-12)


def test_a_part_keeps_its_arc_lengths() -> None:
    curve = Meridian.of_face(Face(100.0), 150.0)
    part = curve.part(20.0, 90.0)
    assert (part.start, part.end) == (20.0, 90.0)
    assert_allclose(part.points(50.0), curve.points(50.0), atol=1e-12)


def test_a_circle_from_its_curvature() -> None:
    circle = Meridian.of_curvature(constant(0.01, 0.0, 150.0))
    assert_allclose(circle.points(150.0), [100.0 * np.sin(1.5), 100.0 * (1.0 - np.cos(1.5))], atol=1e-12)
