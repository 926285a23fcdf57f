"""Closed forms of the paraboloid and of its parallel curves, held against the curves that the tool computes.

Sources, each with how it was met:

- depth and rim angle ``tan(φ/2) = D/4f``: astronomy.me.uk/?p=16230 (seen);
- ``4 f y = x²``: Wikipedia, "Parabolic reflector" (seen in a copy);
- conic equation ``y² − 2Rx + (K+1)x² = 0``: Wikipedia, "Conic constant" (seen);
- ISO 10110-12:2019, aspheric surfaces: the formula is from memory;
- arc length, area, volume, radii of curvature, parallel curves: elementary calculus, derived.

Every number below was computed from these with 30 digits and more; tolerances are those of the printed digits or a
relative 1e-9, whichever is coarser.
"""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from fabricate.chain import rim_arc_length
from profiles.errors import GeometryError
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.solids import area as surface_area


def _dish(focal_length: float, diameter: float) -> Meridian:
    face = Face(focal_length)
    return Meridian.of_face(face, rim_arc_length(face, 0.5 * diameter))


@pytest.mark.parametrize(
    ("radius", "sag"),
    [(25.0, 1.5625), (50.0, 6.25), (75.0, 14.0625), (100.0, 25.0), (125.0, 39.0625), (150.0, 56.25)],
)
def test_sag_for_f_100(radius: float, sag: float) -> None:
    assert float(Face(100.0).height(radius)) == pytest.approx(sag, rel=1e-12)


@pytest.mark.parametrize(
    ("focal_length", "diameter", "depth", "rim_angle", "half_arc", "area"),
    [
        (100.0, 300.0, 56.25, 73.73979529, 163.0647181, 79848.81328),
        (250.0, 600.0, 90.0, 61.92751306, 317.1347815, 306838.7866),
        (1.0, 4.0, 1.0, 90.0, 2.295587149, 8.0 / 3.0 * np.pi * (2.0**1.5 - 1.0)),
    ],
)
def test_depth_rim_angle_arc_and_area(
    focal_length: float, diameter: float, depth: float, rim_angle: float, half_arc: float, area: float
) -> None:
    curve = _dish(focal_length, diameter)
    assert float(curve.height(curve.end)) == pytest.approx(depth, rel=1e-9)
    assert 2.0 * np.degrees(float(curve.slope(curve.end))) == pytest.approx(rim_angle, rel=1e-9)
    assert curve.end == pytest.approx(half_arc, rel=1e-9)
    assert surface_area(curve) == pytest.approx(area, rel=1e-9)


F_OVER_D_TABLE = [
    # f/D, rim angle (degrees), depth/D, area / flat area, whole arc / D, cosine of the slope at the rim
    (0.20, 102.6803835, 0.312500, 1.323520625, 1.219427735, 0.6246950476),
    (0.25, 90.00000000, 0.250000, 1.218951416, 1.147793575, 0.7071067812),
    (0.30, 79.61114218, 0.2083333333, 1.157445468, 1.105945822, 0.7682212796),
    (0.40, 64.01076642, 0.156250, 1.092081069, 1.061738769, 0.8479983040),
    (0.60, 45.23972990, 0.1041666667, 1.042222222, 1.028224796, 0.9230769231),
    (1.00, 28.07248694, 0.062500, 1.015465939, 1.010321126, 0.9701425001),
    (1.50, 18.92464442, 0.04166666667, 1.006912625, 1.004610528, 0.9863939238),
    (2.00, 14.25003270, 0.031250, 1.003896137, 1.002598097, 0.9922778767),
]


@pytest.mark.parametrize(("ratio", "rim_angle", "depth", "area", "arc", "cosine"), F_OVER_D_TABLE)
def test_the_table_over_f_over_d(
    ratio: float, rim_angle: float, depth: float, area: float, arc: float, cosine: float
) -> None:
    curve = _dish(300.0 * ratio, 300.0)
    slope = float(curve.slope(curve.end))
    assert 2.0 * np.degrees(slope) == pytest.approx(rim_angle, rel=1e-9)
    assert float(curve.height(curve.end)) / 300.0 == pytest.approx(depth, rel=1e-9)
    assert surface_area(curve) / (np.pi * 150.0**2) == pytest.approx(area, rel=1e-9)
    assert 2.0 * curve.end / 300.0 == pytest.approx(arc, rel=1e-9)
    assert np.cos(slope) == pytest.approx(cosine, rel=1e-9)


@pytest.mark.parametrize(
    ("radius", "meridional", "transverse"),
    [(0.0, 200.0, 200.0), (75.0, 243.6376068, 213.6000936), (150.0, 390.625, 250.0)],
)
def test_radii_of_curvature_for_f_100(radius: float, meridional: float, transverse: float) -> None:
    curve = _dish(100.0, 300.0)
    where = curve.at_radius(radius)
    assert 1.0 / float(curve.curvature(where)) == pytest.approx(meridional, rel=1e-9)
    if radius:
        assert radius / np.sin(float(curve.slope(where))) == pytest.approx(transverse, rel=1e-9)


@pytest.mark.parametrize(
    ("conic_constant", "height"),
    [(-1.0, 56.25), (0.0, 67.71243445), (-0.5, 60.88350084), (0.5, 80.62870566), (-2.0, 50.0)],
)
def test_conics_of_radius_200_at_150(conic_constant: float, height: float) -> None:
    face = Face(100.0, conic_constant)
    assert float(face.height(150.0)) == pytest.approx(height, rel=1e-9)
    curve = Meridian.of_face(face, rim_arc_length(face, 150.0))
    assert_allclose(curve.points(curve.end), [150.0, height], rtol=1e-9)


def test_an_asphere_of_iso_10110_12() -> None:
    assert float(Face(100.0, -1.0, (1e-9,)).height(150.0)) == pytest.approx(56.75625, rel=1e-12)


PARALLEL_POINTS = [
    # distance towards the focus, radius on the paraboloid of f 100, radius and height of the parallel point
    (-2.0, 50.0, 50.48507125, 4.309714999),
    (-2.0, 100.0, 100.8944272, 23.21114562),
    (-2.0, 150.0, 151.2, 54.65),
    (2.0, 50.0, 49.51492875, 8.190285000),
    (2.0, 100.0, 99.10557281, 26.78885438),
    (2.0, 150.0, 148.8, 57.85),
]


@pytest.mark.parametrize(("distance", "radius", "moved_radius", "moved_height"), PARALLEL_POINTS)
def test_points_of_the_parallel_curve(distance: float, radius: float, moved_radius: float, moved_height: float) -> None:
    moved = _dish(100.0, 320.0).offset(distance)
    where = moved.at_radius(moved_radius)
    assert float(moved.height(where)) == pytest.approx(moved_height, rel=1e-9)
    assert np.tan(float(moved.slope(where))) == pytest.approx(radius / 200.0, rel=1e-8)


@pytest.mark.parametrize(("distance", "height"), [(-2.0, 53.75358161), (2.0, 58.75361847)])
def test_height_of_the_parallel_curve_at_a_given_radius(distance: float, height: float) -> None:
    moved = _dish(100.0, 320.0).offset(distance)
    assert float(moved.height(moved.at_radius(150.0))) == pytest.approx(height, rel=1e-9)


def test_length_of_the_parallel_curve() -> None:
    # Steiner: the parallel curve of a curve that turns by θ is longer by t θ.
    moved = _dish(100.0, 300.0).offset(-2.0)
    assert moved.end - moved.start == pytest.approx(164.3517203, rel=1e-9)


def test_the_parallel_curve_has_a_cusp_at_twice_the_focal_length() -> None:
    _dish(100.0, 300.0).offset(199.9)
    with pytest.raises(
        GeometryError, match="not smaller than the radius of curvature there; allowed: less than 200 mm"
    ):
        _dish(100.0, 300.0).offset(200.1)


def test_a_focus_balanced_dish() -> None:
    # Wikipedia, "Parabolic reflector" (the numbers from memory): the centre of mass of the shell at the focus.
    curve = _dish(1.0, 2.0 * 2.718683325)
    where = np.linspace(0.0, curve.end, 20001)
    radius, height = curve.points(where).T
    assert np.trapezoid(radius * (height - 1.0), where) == pytest.approx(0.0, abs=1e-6)
    assert float(curve.height(curve.end)) == pytest.approx(1.847809755, rel=1e-9)
