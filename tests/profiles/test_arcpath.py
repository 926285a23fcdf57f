from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from profiles.arcpath import ArcPath
from profiles.errors import GeometryError

QUARTER = np.tan(np.pi / 8.0)


def _quarter_circle() -> ArcPath:
    return ArcPath(np.array([[1.0, 0.0], [0.0, 1.0]]), np.array([QUARTER]))


def test_a_quarter_circle() -> None:
    path = _quarter_circle()
    assert_allclose(path.turns, [np.pi / 2.0])
    assert_allclose(path.curvatures, [1.0])
    assert_allclose(path.lengths, [np.pi / 2.0])
    assert_allclose(path.centres, [[0.0, 0.0]], atol=1e-15)
    assert_allclose(path.tangents[0], [[0.0, 1.0]], atol=1e-15)
    assert_allclose(path.tangents[1], [[-1.0, 0.0]], atol=1e-15)


@given(st.floats(-3.0, 3.0), st.floats(0.0, 1.0))
def test_points_along_an_arc_lie_on_its_circle(turn: float, share: float) -> None:
    path = ArcPath(np.array([[0.0, 0.0], [2.0, 1.0]]), np.array([np.tan(0.25 * turn)]))
    point = path.along(0, np.array([share]))[0]
    if abs(turn) > 1e-3:
        assert np.hypot(*(point - path.centres[0])) == pytest.approx(1.0 / abs(path.curvatures[0]), rel=1e-9)
    else:
        assert_allclose(point, share * np.array([2.0, 1.0]), atol=1e-3)


@given(st.floats(-0.9, 5.0))
def test_an_offset_keeps_centre_and_angle(distance: float) -> None:
    # To the left of a path that turns left is towards its centre.
    moved = _quarter_circle().offset(-distance)
    assert_allclose(np.hypot(*moved.vertices.T), 1.0 + distance, rtol=1e-12)
    assert_allclose(moved.bulges, [QUARTER])


def test_an_offset_past_the_centre_folds() -> None:
    with pytest.raises(GeometryError, match="folds an arc of radius 1 mm"):
        _quarter_circle().offset(1.5)


def test_a_corner_has_no_offset() -> None:
    corner = ArcPath(np.array([[0.0, 0.0], [1.0, 0.0], [1.0, 1.0]]), np.zeros(2))
    with pytest.raises(GeometryError, match="corners"):
        corner.offset(0.1)


def test_there_and_back() -> None:
    path = ArcPath(np.array([[1.0, 0.0], [0.0, 1.0], [-2.0, 1.5]]), np.array([QUARTER, -0.1]))
    for changed in (path.reversed().reversed(), path.swapped().swapped(), path.turned_over().turned_over()):
        assert_allclose(changed.vertices, path.vertices)
        assert_allclose(changed.bulges, path.bulges)


def test_points_stray_by_no_more_than_the_sagitta() -> None:
    points = _quarter_circle().points(sagitta=1e-3)
    middles = 0.5 * (points[1:] + points[:-1])
    assert 0.0 <= 1.0 - np.hypot(*middles.T).min() <= 1e-3


def test_gaps_and_doubled_vertices_are_refused() -> None:
    with pytest.raises(GeometryError, match="is not continued at"):
        _quarter_circle().joined(_quarter_circle())
    with pytest.raises(GeometryError, match="coincide"):
        ArcPath(np.zeros((2, 2)), np.zeros(1))
    with pytest.raises(GeometryError, match=r"not shapes \(2, 2\) and \(2,\)"):
        ArcPath(np.array([[0.0, 0.0], [1.0, 0.0]]), np.zeros(2))
    with pytest.raises(GeometryError, match="finite"):
        ArcPath(np.array([[0.0, 0.0], [np.nan, 0.0]]), np.zeros(1))
