"""Geometry of four dishes, computed for the practitioners' notes to the digits printed there, by other code than ours.

A lamp, a heater, a listening dish and a link dish; the numbers are plane geometry of the paraboloid (derived).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest

from fabricate.chain import rim_arc_length
from profiles.best_parabola import best_parabola
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.solids import area as surface_area


@dataclass(frozen=True)
class Dish:
    diameter: float
    focal_length: float
    thickness: float
    depth: float
    rim_half_angle_deg: float
    wall_slope_deg: float
    area_m2: float
    equal_area_blank: float
    arc_length_blank: float
    sine_law_rim_thickness: float
    outward_rim: tuple[float, float]
    inward_rim: tuple[float, float]
    axial_shift_error: float
    parabola_residual_um: float
    sag_below_rim: tuple[float, ...]


DISHES = [
    Dish(
        diameter=60,
        focal_length=12,
        thickness=0.8,
        depth=18.75,
        rim_half_angle_deg=102.68,
        wall_slope_deg=51.34,
        area_m2=0.00374,
        equal_area_blank=69.03,
        arc_length_blank=73.17,
        sine_law_rim_thickness=0.5,
        outward_rim=(30.6247, 18.2502),
        inward_rim=(29.3753, 19.2498),
        axial_shift_error=0.3002,
        parabola_residual_um=20.9,
        sag_below_rim=(18.75, 18.457, 17.5781, 16.1133, 14.0625, 11.4258, 8.2031, 4.3945, 0.0),
    ),
    Dish(
        diameter=400,
        focal_length=110,
        thickness=1.0,
        depth=90.9091,
        rim_half_angle_deg=84.55,
        wall_slope_deg=42.27,
        area_m2=0.14885,
        equal_area_blank=435.34,
        arc_length_blank=449.73,
        sine_law_rim_thickness=0.74,
        outward_rim=(200.6727, 90.1692),
        inward_rim=(199.3273, 91.649),
        axial_shift_error=0.2601,
        parabola_residual_um=9.5,
        sag_below_rim=(90.9091, 89.4886, 85.2273, 78.125, 68.1818, 55.3977, 39.7727, 21.3068, 0.0),
    ),
    Dish(
        diameter=560,
        focal_length=130,
        thickness=3.0,
        depth=150.7692,
        rim_half_angle_deg=94.24,
        wall_slope_deg=47.12,
        area_m2=0.3078,
        equal_area_blank=626.02,
        arc_length_blank=654.52,
        sine_law_rim_thickness=2.041,
        outward_rim=(282.1984, 148.7279),
        inward_rim=(277.8016, 152.8106),
        axial_shift_error=0.9586,
        parabola_residual_um=49.7,
        sag_below_rim=(150.7692, 148.4135, 141.3462, 129.5673, 113.0769, 91.875, 65.9615, 35.3365, 0.0),
    ),
    Dish(
        diameter=1200,
        focal_length=480,
        thickness=2.0,
        depth=187.5,
        rim_half_angle_deg=64.01,
        wall_slope_deg=32.01,
        area_m2=1.23511,
        equal_area_blank=1254.03,
        arc_length_blank=1274.09,
        sine_law_rim_thickness=1.696,
        outward_rim=(601.06, 185.804),
        inward_rim=(598.94, 189.196),
        axial_shift_error=0.304,
        parabola_residual_um=5.2,
        sag_below_rim=(187.5, 184.5703, 175.7812, 161.1328, 140.625, 114.2578, 82.0312, 43.9453, 0.0),
    ),
]


def _curve(dish: Dish) -> Meridian:
    face = Face(dish.focal_length)
    return Meridian.of_face(face, rim_arc_length(face, 0.5 * dish.diameter))


@pytest.mark.parametrize("dish", DISHES, ids=lambda dish: f"{dish.diameter:g}")
def test_the_paraboloid_to_its_printed_digits(dish: Dish) -> None:
    curve = _curve(dish)
    slope = np.degrees(float(curve.slope(curve.end)))
    assert float(curve.height(curve.end)) == pytest.approx(dish.depth, abs=0.5e-4)
    assert 2.0 * slope == pytest.approx(dish.rim_half_angle_deg, abs=0.5e-2)
    assert slope == pytest.approx(dish.wall_slope_deg, abs=0.5e-2)
    assert 1e-6 * surface_area(curve) == pytest.approx(dish.area_m2, abs=0.5e-5)
    assert np.sqrt(4.0 * surface_area(curve) / np.pi) == pytest.approx(dish.equal_area_blank, abs=0.5e-2)
    assert 2.0 * curve.end == pytest.approx(dish.arc_length_blank, abs=0.5e-2)
    assert dish.thickness * np.cos(np.radians(slope)) == pytest.approx(dish.sine_law_rim_thickness, abs=0.5e-3)


@pytest.mark.parametrize("dish", DISHES, ids=lambda dish: f"{dish.diameter:g}")
def test_sag_below_the_rim_at_nine_stations(dish: Dish) -> None:
    radii = np.linspace(0.0, 0.5 * dish.diameter, 9)
    face = Face(dish.focal_length)
    below = face.height(radii[-1]) - face.height(radii)
    assert below.tolist() == pytest.approx(list(dish.sag_below_rim), abs=0.5001e-4)


@pytest.mark.parametrize("dish", DISHES, ids=lambda dish: f"{dish.diameter:g}")
def test_the_parallel_curves_to_their_printed_digits(dish: Dish) -> None:
    curve = _curve(dish)
    outward, inward = curve.offset(-dish.thickness), curve.offset(dish.thickness)
    assert outward.points(outward.end).tolist() == pytest.approx(list(dish.outward_rim), abs=0.5001e-4)
    assert inward.points(inward.end).tolist() == pytest.approx(list(dish.inward_rim), abs=0.5001e-4)
    # Shifted along the axis instead, the curve is closer by t (1 − cos ψ) along the normal at the rim.
    closer = dish.thickness * (1.0 - np.cos(float(curve.slope(curve.end))))
    assert closer == pytest.approx(dish.axial_shift_error, abs=0.5e-4)


def test_the_best_parabola_of_a_parallel_curve() -> None:
    # Printed in the notes for 400 × f110, 1.0 mm outward: f 110.43 by least largest error, 5.6 µm off.
    fit = best_parabola(_curve(DISHES[1]).offset(-1.0))
    assert fit.focal_length == pytest.approx(110.43, abs=0.5e-2)
    assert 1e3 * fit.departure == pytest.approx(5.6, abs=0.05)
