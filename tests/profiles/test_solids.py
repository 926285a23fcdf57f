"""Half sections, areas and volumes."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from profiles.arcpath import ArcPath
from profiles.errors import GeometryError
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import constant
from profiles.solids import Solid, area, turned_over, volume


def block(curve: Meridian, *, reach: float = 0.0) -> ArcPath:
    """Return outer side, base and axis below a curve."""
    (inner, first), (outer, last) = curve.points(np.array([curve.start, curve.end]))
    return ArcPath(np.array([[outer + reach, last], [outer, -30.0], [inner, -30.0], [inner, first]]), np.zeros(3))


@given(
    st.floats(-0.9, 0.9).map(lambda bulge: bulge or 0.5),
    st.floats(0.0, 50.0),
    st.floats(0.1, 50.0),
    st.floats(-50.0, 50.0),
)
def test_arcs_agree_with_quadrature(bulge: float, radius: float, across: float, up: float) -> None:
    path = ArcPath(np.array([[radius + 60.0, 3.0], [radius + 60.0 + across, 3.0 + up]]), np.array([bulge]))
    nodes, weights = np.polynomial.legendre.leggauss(40)
    shares = 0.5 * (nodes + 1.0)
    radii = path.along(0, shares)[:, 0]
    angles = np.arctan2(*path.tangents[0][0][::-1]) + shares * path.turns[0]
    length = 0.5 * weights * path.lengths[0]
    assert area(path) == pytest.approx(2.0 * np.pi * (radii * length).sum(), rel=1e-11)
    swept = np.pi * (radii**2 * np.sin(angles) * length).sum()
    scale = np.pi * (radii**2 * length).sum()
    assert volume(path) == pytest.approx(abs(swept), abs=1e-11 * scale)


@given(st.floats(1e-7, 1e-2))
def test_nearly_straight_arcs_lose_no_digits(bulge: float) -> None:
    ends = np.array([[10.0, 0.0], [20.0, 10.0]])
    bent, straight = ArcPath(ends, np.array([bulge])), ArcPath(ends, np.zeros(1))
    # To first order the segment between arc and chord: sagitta b c/2, area 2/3 of it times the chord.
    chord = np.hypot(10.0, 10.0)
    segment = 2.0 / 3.0 * chord * (0.5 * bulge * chord)
    gain = 2.0 * np.pi * 15.0 * segment
    assert volume(bent) - volume(straight) == pytest.approx(gain, rel=2.0 * bulge + 1e-4, abs=1e-9)


def test_sphere_as_arc_and_as_curve() -> None:
    radius = 7.0
    arc = ArcPath(np.array([[0.0, -radius], [radius, 0.0]]), np.array([np.tan(np.pi / 8)]))
    curve = Meridian.of_curvature(constant(1.0 / radius, 0.0, 0.5 * np.pi * radius))
    for path in (arc, curve):
        assert area(path) == pytest.approx(2.0 * np.pi * radius**2, rel=1e-12)
        assert volume(path) == pytest.approx(2.0 / 3.0 * np.pi * radius**3, rel=1e-12)


def test_a_solid_adds_up() -> None:
    curve = turned_over(Meridian.of_face(Face(110.0), 100.0))
    solid = Solid(curve, block(curve))
    outer = float(curve.radius(curve.end))
    height = float(curve.height(curve.end)) + 30.0
    cap = volume(curve)
    assert solid.volume == pytest.approx(np.pi * outer**2 * height + cap, rel=1e-12)
    side = 2.0 * np.pi * outer * height
    assert solid.area == pytest.approx(area(curve) + side + np.pi * outer**2, rel=1e-12)
    assert solid.size == 30.0 or solid.size == pytest.approx(outer)


def test_turned_over() -> None:
    curve = Meridian.of_face(Face(50.0), 60.0)
    dome = turned_over(curve)
    where = np.linspace(0.0, 60.0, 7)
    assert (dome.points(where) == curve.points(where) * (1.0, -1.0)).all()
    assert (dome.normals(where)[:, 1] > 0.0).all()


def test_refusals() -> None:
    curve = turned_over(Meridian.of_face(Face(110.0), 100.0))
    with pytest.raises(GeometryError, match=r"are 0\.5 mm apart where they should meet; allowed: .*do: let the rest"):
        Solid(curve, block(curve, reach=0.5))
    backwards = ArcPath(
        np.vstack([curve.points(np.array([100.0])), [[120.0, 30.0], [0.0, 30.0], [0.0, 0.0]]]), np.zeros(3)
    )
    with pytest.raises(GeometryError, match=r"encloses -[0-9.e+]+ mm\^3; allowed: more than 0; do: walk it"):
        Solid(curve, backwards)
    crossing = ArcPath(
        np.vstack([curve.points(np.array([100.0])), [[99.0, -60.0], [-1.0, -60.0], [0.0, 0.0]]]), np.zeros(3)
    )
    with pytest.raises(GeometryError, match="reaches radius -1 mm; allowed: 0 or more"):
        Solid(curve, crossing)
