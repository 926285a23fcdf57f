"""Thinning held against closed forms.

- Straight vacuum forming into a cone, geometric element analysis: ``t/t0 = (1 + cos β)/2 · (r/R)^(sec β − 1)``; UC
  Berkeley MAS 2.0, "Thermoforming: theoretical considerations" (the formula seen in a public copy). Exact for the cone,
  so the tolerance is 1e-9.
- Shear spinning: the sine law, half angle measured from the axis, as a printed table (seen in a public copy) has
  it to two digits; it refers to Wong, Dean & Lin, Int. J. Mach. Tools Manuf. 43 (2003) 1419-1435 (not seen).
- Volume: what the sheet loses in thickness it gains in area, so the sheet that has gone into the cavity is still there;
  derived.
"""

from __future__ import annotations

import numpy as np
import pytest
from numpy.testing import assert_allclose

from fabricate.forming_keys import Thinning
from fabricate.thinning import FormedSheet, sine_law, straight_vacuum
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import constant

STATED = Thinning(law="none")


@pytest.mark.parametrize("angle", [10.0, 30.0, 45.0, 60.0])
def test_the_cone(angle: float) -> None:
    slope = np.radians(angle)
    cone = Meridian.of_curvature(constant(0.0, 0.0, 100.0), slope=slope, radius=5.0)
    thickness = straight_vacuum(FormedSheet(cone, cone, 3.0), STATED)
    where = np.linspace(0.0, 100.0, 51)
    radius = cone.radius(where)
    published = 0.5 * (1.0 + np.cos(slope)) * (radius / radius[-1]) ** (1.0 / np.cos(slope) - 1.0)
    assert_allclose(thickness(where) / 3.0, published, rtol=1e-9)


@pytest.mark.parametrize(
    ("share_of_slant", "published"), [(0.0, 0.75), (0.25, 0.5625), (0.5, 0.375), (0.75, 0.1875), (0.9, 0.075)]
)
def test_the_published_cone_of_60_degrees(share_of_slant: float, published: float) -> None:
    slope = np.radians(60.0)
    cone = Meridian.of_curvature(constant(0.0, 0.0, 99.0), slope=slope, radius=np.cos(slope))
    thickness = straight_vacuum(FormedSheet(cone, cone, 1.0), STATED)
    # The apex lies one millimetre below the start: the slant from rim to apex is 100.
    assert float(thickness(99.0 - 100.0 * share_of_slant)) == pytest.approx(published, rel=1e-9)


def test_what_goes_into_the_cavity_stays_in_the_sheet() -> None:
    # The free cap over radius r has the area 2π r²/(1 + cos ψ) and the thickness of the wall where it touches: cap and
    # wall together keep the volume of the flat disc, wherever the touching has got to.
    bowl = Meridian.of_face(Face(95.0), 160.0)
    thickness = straight_vacuum(FormedSheet(bowl, bowl, 3.0), STATED)
    wall = np.linspace(20.0, 160.0, 20001)
    radius, slope = bowl.radius(wall), bowl.slope(wall)
    laid = np.trapezoid(2.0 * np.pi * radius * thickness(wall), wall)
    cap = 2.0 * np.pi * radius[0] ** 2 / (1.0 + np.cos(slope[0])) * float(thickness(20.0))
    assert laid + cap == pytest.approx(np.pi * radius[-1] ** 2 * 3.0, rel=1e-7)


@pytest.mark.parametrize(
    ("half_angle", "ratio"), [(90.0, 1.0), (60.0, np.sqrt(0.75)), (45.0, np.sqrt(0.5)), (30.0, 0.5)]
)
def test_the_sine_law(half_angle: float, ratio: float) -> None:
    cone = Meridian.of_curvature(constant(0.0, 0.0, 10.0), slope=np.radians(90.0 - half_angle), radius=5.0)
    thickness = sine_law(FormedSheet(cone, cone, 2.0), STATED)
    assert float(thickness(5.0)) / 2.0 == pytest.approx(ratio, rel=1e-12)
