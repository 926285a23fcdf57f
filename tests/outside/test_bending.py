"""The cubic of elastic–plastic bending held against worked examples.

- A: MIT 2.008 Design & Manufacturing II, Homework 5 "Springback", Spring 2004, eq. (1): Y 5075 psi, E 10·10⁶ psi
  (printed "106", the exponent lost), T 0.125 in, radii 2 and 1 in (seen in a public copy); results computed from it.
- B: Kalpakjian & Schmid, *Manufacturing Engineering and Technology*, "Estimating springback": 0.0359 in steel, radius
  0.5 in, Y 40 000 psi, E 29·10⁶ psi; the book's 0.942 and 0.531 in are from memory.
- The stress block: plane stress bending integrated over the thickness, derived; no table.
"""

from __future__ import annotations

import numpy as np
import pytest

from fabricate.bending import bent_after, bent_before


@pytest.mark.parametrize(
    ("stress", "modulus", "thickness", "radius", "ratio", "opened"),
    [
        (5075.0, 10e6, 0.125, 2.0, 0.9756421415, 2.049931952),
        (5075.0, 10e6, 0.125, 1.0, 0.9878202677, 1.012329907),
        (40000.0, 29e6, 0.0359, 0.5, 0.9423970064, 0.5305619570),
    ],
)
def test_worked_examples(
    stress: float, modulus: float, thickness: float, radius: float, ratio: float, opened: float
) -> None:
    after = float(bent_after(np.array([1.0 / radius]), stress / (modulus * thickness))[0])
    assert after * radius == pytest.approx(ratio, rel=1e-9)
    assert 1.0 / after == pytest.approx(opened, rel=1e-9)
    assert float(bent_before(np.array([after]), stress / (modulus * thickness))[0]) == pytest.approx(
        1.0 / radius, rel=1e-9
    )


def test_what_kalpakjian_prints() -> None:
    after = float(bent_after(np.array([2.0]), 40000.0 / (29e6 * 0.0359))[0])
    assert after / 2.0 == pytest.approx(0.942, abs=0.5e-3)
    assert 1.0 / after == pytest.approx(0.531, abs=0.5e-3)


def test_the_stress_block_by_quadrature() -> None:
    # R 200, Y 34, E 68900, t 1.5: unloading the moment of an elastic–perfectly plastic strip elastically.
    radius, stress, modulus, thickness = 200.0, 34.0, 68900.0, 1.5
    height = np.linspace(-0.5 * thickness, 0.5 * thickness, 400001)
    block = np.clip(modulus * height / radius, -stress, stress)
    moment = np.trapezoid(block * height, height)
    after = 1.0 / radius - moment / (modulus * thickness**3 / 12.0)
    assert after * radius == pytest.approx(0.803751826952, rel=1e-8)
    assert float(bent_after(np.array([1.0 / radius]), stress / (modulus * thickness))[0]) == pytest.approx(
        after, rel=1e-8
    )


def test_the_way_back() -> None:
    # Wanted: R 200 of Y 34, E 68900, t 1.5, from a radius of 167.1413771 (derived).
    before = float(bent_before(np.array([1.0 / 200.0]), 34.0 / (68900.0 * 1.5))[0])
    assert 1.0 / before == pytest.approx(167.1413771, rel=1e-9)
