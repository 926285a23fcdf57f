from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from profiles.errors import GeometryError
from profiles.face import Face


@given(st.floats(1.0, 1000.0), st.floats(0.0, 3000.0))
def test_every_point_is_as_far_from_the_focus_as_from_the_directrix(focal_length: float, radius: float) -> None:
    height = float(Face(focal_length).height(radius))
    assert np.hypot(radius, height - focal_length) == pytest.approx(height + focal_length, rel=1e-12)


@given(st.from_type(Face), st.floats(0.0, 1.0))
def test_the_incline_is_the_derivative_of_the_height(face: Face, share: float) -> None:
    radius, step = share * face.focal_length, 1e-4 * face.focal_length
    rise = (face.height(radius + step) - face.height(abs(radius - step))) / (
        radius + step - abs(radius - step) + 1e-300
    )
    if radius > step:
        assert float(rise) == pytest.approx(float(face.incline(radius)), abs=1e-6)


def test_a_closed_conic_ends() -> None:
    with pytest.raises(GeometryError, match="ends at radius 200 mm and has no point at 201 mm"):
        Face(100.0, 0.0).height(201.0)


def test_a_face_needs_a_focal_length() -> None:
    with pytest.raises(GeometryError, match="positive focal length, not -1 mm"):
        Face(-1.0)
