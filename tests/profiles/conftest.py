"""Shared strategies, by type: ``Face`` draws conics with and without an asphere, ``Meridian`` curves of all kinds."""

from __future__ import annotations

import numpy as np
from hypothesis import strategies as st

from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import resolve


def _numbers(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_nan=False, allow_subnormal=False)


@st.composite
def faces(draw: st.DrawFn) -> Face:
    focal = draw(_numbers(5.0, 1000.0))
    conic = draw(st.one_of(st.just(-1.0), _numbers(-3.0, 0.5)))
    asphere = draw(st.one_of(st.just(()), st.tuples(_numbers(-0.02, 0.02))))
    return Face(focal, conic, tuple(value / (8.0 * focal**3) for value in asphere))


@st.composite
def meridians(draw: st.DrawFn) -> Meridian:
    if draw(st.booleans()):
        face = draw(faces())
        return Meridian.of_face(face, face.focal_length * draw(_numbers(0.2, 2.2)))
    size = draw(_numbers(10.0, 1000.0))
    wave = draw(_numbers(0.0, 0.3))
    turns = draw(_numbers(0.5, 4.0))

    def bend(where: np.ndarray) -> np.ndarray:
        return ((0.7 + wave * np.sin(turns * where / size)) / size)[None]

    (curvature,) = resolve(bend, [0.0, size], sizes=[10.0 / size])
    return Meridian.of_curvature(curvature)


st.register_type_strategy(Face, faces())
st.register_type_strategy(Meridian, meridians())
