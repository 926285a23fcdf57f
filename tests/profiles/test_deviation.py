from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from profiles.arcpath import ArcPath
from profiles.arcs import tangent_arcs
from profiles.chords import chords
from profiles.deviation import deviation
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import constant


def _sampled(curve: Meridian, path: ArcPath) -> float:
    """Return the largest distance between dense samples of a curve and of a path, both ways, from below."""
    on_curve = curve.points(np.linspace(curve.start, curve.end, 1201))
    on_path = np.vstack([path.along(number, np.linspace(0.0, 1.0, 101)) for number in range(len(path))])
    spacing = curve.end / 1200 + path.lengths.max() / 100
    there = max(np.hypot(*(on_path - point).T).min() for point in on_curve)
    back = max(np.hypot(*(on_curve - point).T).min() for point in on_path)
    # The nearest sample is farther than the nearest point by no more than half a spacing.
    return float(max(there, back) - 0.5 * spacing)


def _along_normals(curve: Meridian, path: ArcPath) -> float:
    """Return the largest distance of dense samples of a curve from the circles and lines of a path near it."""
    largest = 0.0
    joints = curve.nearest(path.vertices)
    for number, (start, end) in enumerate(pairwise(joints.tolist())):
        points = curve.points(np.linspace(start, end, 301))
        if path.bulges[number]:
            radius = 1.0 / abs(path.curvatures[number])
            gaps = np.abs(np.hypot(*(points - path.centres[number]).T) - radius)
        else:
            left = np.array([-path.tangents[0][number, 1], path.tangents[0][number, 0]])
            gaps = np.abs((points - path.vertices[number]) @ left)
        largest = max(largest, float(gaps.max()))
    return largest


@settings(max_examples=20)
@given(st.from_type(Meridian), st.integers(1, 6), st.floats(-1e-3, 1e-3), st.data())
def test_it_is_never_less_than_sampling_finds(curve: Meridian, count: int, shift: float, data: st.DataObject) -> None:
    path = tangent_arcs(curve, count) if data.draw(st.booleans()) else chords(curve, 4 * count)
    moved = ArcPath(path.vertices + np.array([0.0, shift * curve.end]), path.bulges)
    found = deviation(curve, moved).normal
    assert found >= _along_normals(curve, moved) - 1e-9 * curve.end
    assert found >= _sampled(curve, moved)


@settings(max_examples=20)
@given(st.from_type(Meridian), st.integers(2, 6))
def test_it_is_no_looser_than_the_curve_needs(curve: Meridian, count: int) -> None:
    path = tangent_arcs(curve, count)
    assert deviation(curve, path).normal <= _along_normals(curve, path) * 1.001 + 1e-9 * curve.end


def test_the_lean_of_a_chord_of_a_circle_is_half_its_angle() -> None:
    circle = Meridian.of_curvature(constant(0.01, 0.0, 50.0))
    chord = ArcPath(circle.points(np.array([0.0, 50.0])), np.zeros(1))
    assert deviation(circle, chord).slope == pytest.approx(0.25, rel=1e-9)


@pytest.mark.parametrize("factor", [25.4, 1.0 / 25.4, 1.01])
def test_a_path_of_another_size_is_far_off(factor: float) -> None:
    curve = Meridian.of_face(Face(110.0), 208.0)
    assert deviation(curve, tangent_arcs(curve, 5).scaled(factor)).normal > 0.5


def test_a_path_that_is_turned_over_is_far_off() -> None:
    curve = Meridian.of_face(Face(110.0), 208.0)
    assert deviation(curve, tangent_arcs(curve, 5).turned_over()).normal > 50.0


@pytest.mark.parametrize("number", range(5))
def test_a_bulge_of_the_wrong_sign_is_found(number: int) -> None:
    curve = Meridian.of_face(Face(110.0), 208.0)
    path = tangent_arcs(curve, 5)
    bulges = path.bulges.copy()
    bulges[number] *= -1.0
    assert deviation(curve, ArcPath(path.vertices, bulges)).normal > 0.5


@pytest.mark.parametrize("missing", [0, 4])
def test_a_path_that_ends_early_is_found(missing: int) -> None:
    curve = Meridian.of_face(Face(110.0), 208.0)
    path = tangent_arcs(curve, 5)
    kept = slice(1, None) if missing == 0 else slice(None, -1)
    shorter = ArcPath(path.vertices[kept], path.bulges[kept])
    assert deviation(curve, shorter).normal > 1.0
