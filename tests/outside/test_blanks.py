"""Blanks and mean thicknesses held against published and derived values.

Sources, each as far as it was seen:

- *Sheet and Plate Metal Work*, "Spherical bowl", Figs 223 to 225, and ch. XXVIII "Solid pans", Fig. 237 (seen at
  chestofbooks.com; the printed answer of the pan was an image, so it is computed).
- R. B. Hodgson, *Machines and Tools Employed in the Working of Sheet Metals*, ch. XX "Blank dimensions", Fig. 271 (seen
  at chestofbooks.com).
- Holtzapffel, *Turning and Mechanical Manipulation*, "Circular works spun in the lathe" (seen at chestofbooks.com).
- A cup of an exam question (seen at curioustab.com).
- R. J. Crawford, *Plastics Engineering*, 3rd ed., Example 4.7, p. 310, eq. 4.28 (seen in an excerpt that stops before
  the result of part (b); 0.16 from memory).
- UC Berkeley MAS 2.0, "Thermoforming: theoretical considerations" (seen): the free bubble, and the cone of 45 degrees.

What is marked *derived* follows from the shape's area. A number printed with ten digits is met to 1e-9, one printed in
a book to half of its last digit.
"""

from __future__ import annotations

import numpy as np
import pytest

from fabricate.blank import equal_area_diameter, mean_thickness
from fabricate.chain import rim_arc_length
from fabricate.forming_keys import Thinning
from fabricate.thinning import FormedSheet, straight_vacuum
from profiles.arcpath import ArcPath
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import constant
from profiles.solids import area

QUARTER = float(np.tan(np.pi / 8))
"""Bulge of a quarter of a circle."""


def lines(*vertices: tuple[float, float]) -> ArcPath:
    return ArcPath(np.array(vertices), np.zeros(len(vertices) - 1))


def hemisphere(diameter: float, *beyond: tuple[float, float]) -> ArcPath:
    """Return a hemisphere, its pole at height 0, and lines from its rim."""
    vertices = np.array([(0.0, 0.0), (0.5 * diameter, 0.5 * diameter), *beyond])
    return ArcPath(vertices, np.array([QUARTER, *(0.0 for _ in beyond)]))


def paraboloid(focal_length: float, diameter: float) -> Meridian:
    face = Face(focal_length)
    return Meridian.of_face(face, rim_arc_length(face, 0.5 * diameter))


def frustum(bottom: float, top: float, height: float) -> ArcPath:
    return lines((0.0, 0.0), (0.5 * bottom, 0.0), (0.5 * top, height))


def test_the_hemisphere_of_sheet_and_plate_metal_work() -> None:
    assert equal_area_diameter(area(hemisphere(100.0))) == pytest.approx(np.sqrt(2.0) * 100.0, rel=1e-12)
    # The book's rule divides by 1.4 for the disc's radius, which is 1.0 % more.
    assert 2.0 * 100.0 / 1.4 / equal_area_diameter(area(hemisphere(100.0))) == pytest.approx(1.010, abs=5e-4)


def test_the_cap_of_sheet_and_plate_metal_work() -> None:
    diameter, height = 100.0, 20.0
    turn = 2.0 * np.arctan2(height, 0.5 * diameter)
    cap = ArcPath(np.array([[0.0, 0.0], [0.5 * diameter, height]]), np.array([np.tan(0.25 * turn)]))
    assert equal_area_diameter(area(cap)) == pytest.approx(np.sqrt(diameter**2 + 4.0 * height**2), rel=1e-12)
    assert equal_area_diameter(area(cap)) == pytest.approx(107.7032961, rel=1e-9)


def test_the_solid_pan_of_2_feet_and_1_foot_6() -> None:
    pan = lines((0.0, 0.0), (12.0, 0.0), (12.0, 18.0))
    assert equal_area_diameter(area(pan)) == pytest.approx(48.0, rel=1e-14)


def test_the_cup_of_the_exam_question() -> None:
    cup = lines((0.0, 0.0), (12.5, 0.0), (12.5, 15.0))
    assert equal_area_diameter(area(cup)) == pytest.approx(46.09772229, rel=1e-9)


def test_the_frustum_of_hodgson_by_its_corners() -> None:
    vessel = frustum(2.0, 4.0, 2.5)
    assert area(vessel) == pytest.approx(28.519, abs=5e-4)
    assert equal_area_diameter(area(vessel)) == pytest.approx(6.026, abs=5e-4)
    assert (area(vessel), equal_area_diameter(area(vessel))) == pytest.approx((28.51858395, 6.025860009), rel=1e-9)


def test_the_frustum_of_hodgson_by_mean_diameter_and_slant() -> None:
    # Mean diameter 3, slant 2.75: the height is what the slant leaves.
    vessel = frustum(2.0, 4.0, np.sqrt(2.75**2 - 1.0))
    assert area(vessel) == pytest.approx(29.06, abs=5e-3)
    assert equal_area_diameter(area(vessel)) == pytest.approx(6.083, abs=5e-4)
    assert (area(vessel), equal_area_diameter(area(vessel))) == pytest.approx((29.05973205, 6.082762530), rel=1e-9)


def test_the_factor_of_hodgson() -> None:
    assert equal_area_diameter(1.0) == pytest.approx(1.12838, abs=5e-6)


@pytest.mark.parametrize(
    ("path", "derived"),
    [
        (lines((0.0, 0.0), (30.0, 0.0), (30.0, 40.0), (50.0, 40.0)), 140.0),
        (hemisphere(100.0, (70.0, 50.0)), 172.0465053),
        (hemisphere(100.0, (50.0, 80.0)), 178.8854382),
    ],
    ids=["cup with flange", "hemisphere with flange", "hemisphere and cylinder"],
)
def test_derived_blanks_with_flange_and_wall(path: ArcPath, derived: float) -> None:
    assert equal_area_diameter(area(path)) == pytest.approx(derived, rel=1e-9)


@pytest.mark.parametrize(
    ("focal_length", "diameter", "derived"),
    [
        (100.0, 300.0, 318.8521078),
        (250.0, 600.0, 625.0434200),
        (100.0, 400.0, 441.6245313),
        (120.0, 300.0, 313.5080481),
    ],
)
def test_derived_blanks_of_paraboloids(focal_length: float, diameter: float, derived: float) -> None:
    blank = equal_area_diameter(area(paraboloid(focal_length, diameter)))
    assert blank == pytest.approx(derived, rel=1e-9)
    share = 0.25 * diameter / focal_length
    closed = diameter * np.sqrt(2.0 / (3.0 * share**2) * ((1.0 + share**2) ** 1.5 - 1.0))
    assert blank == pytest.approx(closed, rel=1e-12)


@pytest.mark.parametrize(
    ("ratio", "length", "of_area", "between"),
    [
        (0.25, 1.147793575, 1.104061328, 1.03961),
        (1.0 / 3.0, 1.087098120, 1.062840359, 1.02282),
        (0.4, 1.061738769, 1.045026827, 1.01599),
        (0.5, 1.040228819, 1.029618034, 1.01031),
    ],
)
def test_the_developed_length_is_the_larger_rule(ratio: float, length: float, of_area: float, between: float) -> None:
    # The developed-length rule was seen in a public copy and conflicts with constant area; the numbers are derived.
    dish = paraboloid(ratio, 1.0)
    assert 2.0 * dish.end == pytest.approx(length, rel=1e-9)
    assert equal_area_diameter(area(dish)) == pytest.approx(of_area, rel=1e-9)
    assert 2.0 * dish.end / equal_area_diameter(area(dish)) == pytest.approx(between, abs=5e-6)


def test_the_ball_of_holtzapffel_is_stretched() -> None:
    # A ball of 6 in from two discs of 7½ in: spinning thinned the wall to some 78 % on average.
    ball = area(hemisphere(6.0))
    assert mean_thickness(1.0, 0.25 * np.pi * 7.5**2, ball) == pytest.approx(0.78125, rel=1e-12)
    assert equal_area_diameter(ball) == pytest.approx(8.485281, abs=5e-7)


def test_the_box_of_crawford() -> None:
    formed = 150.0 * 100.0 + 2.0 * 60.0 * (150.0 + 100.0)
    assert formed == 4.5e4
    assert mean_thickness(2.0, 150.0 * 100.0, formed) == pytest.approx(0.67, abs=5e-3)


def test_the_box_of_crawford_with_plug_assist() -> None:
    # The plug keeps 140 × 90 at 2 mm; what is left of the sheet makes the walls of 3e4 mm².
    walls, left = 2.0 * 60.0 * (150.0 + 100.0), 150.0 * 100.0 - 140.0 * 90.0
    assert mean_thickness(2.0, left, walls) == pytest.approx(0.16, rel=1e-12)


def test_the_free_bubble() -> None:
    assert mean_thickness(1.0, 0.25 * np.pi * 100.0**2, area(hemisphere(100.0))) == pytest.approx(0.5, rel=1e-12)


def test_the_mean_area_ratio_of_a_dish() -> None:
    # Derived: f/D = 0.25, (2/3)(2√2 − 1).
    ratio = area(paraboloid(50.0, 200.0)) / (np.pi * 100.0**2)
    assert ratio == pytest.approx(1.218951416, rel=1e-9)
    assert mean_thickness(1.0, 1.0, ratio) == pytest.approx(1.5 / (2.0 * np.sqrt(2.0) - 1.0), rel=1e-12)


@pytest.mark.parametrize(("share_of_slant", "published"), [(0.0, 0.8535533906), (0.5, 0.6405307517)])
def test_the_published_cone_of_45_degrees(share_of_slant: float, published: float) -> None:
    slope = 0.25 * np.pi
    cone = Meridian.of_curvature(constant(0.0, 0.0, 99.0), slope=slope, radius=np.cos(slope))
    thickness = straight_vacuum(FormedSheet(cone, cone, 1.0), Thinning(law="none"))
    # The apex lies one millimetre below the start: the slant from rim to apex is 100.
    assert float(thickness(99.0 - 100.0 * share_of_slant)) == pytest.approx(published, rel=1e-9)
