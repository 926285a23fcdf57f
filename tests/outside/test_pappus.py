"""Areas and volumes of solids of revolution against Pappus–Guldinus and closed forms.

The numbers are those of the project's table of check values, topic 1 (paraboloid geometry) and topic 9 (file formats).
Their sources: ``V = π R² h/2``: derived, and stated in Wikipedia, "Parabolic reflector"; area of a paraboloid
``(8 π f²/3) ((1 + s²)^(3/2) − 1)`` with ``s = R/2f``: elementary calculus; torus ``V = 2 π² R r²``, ``A = 4 π² R r``:
Pappus–Guldinus, derived. Printed to ten digits, so they are compared to half a unit of the tenth.
"""

from __future__ import annotations

import numpy as np
import pytest

from profiles.arcpath import ArcPath
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.revolve import revolve
from profiles.solids import Solid, area, volume

DIGITS = 6e-10


def paraboloid(focal_length: float, diameter: float) -> Meridian:
    face = Face(focal_length)
    whole = Meridian.of_face(face, 0.75 * diameter)
    return Meridian.of_face(face, float(whole.at_radius(0.5 * diameter)))


@pytest.mark.parametrize(
    ("focal_length", "diameter", "surface", "bowl"),
    [(100.0, 300.0, 79848.81328, 1988039.101), (250.0, 600.0, 306838.7866, 12723450.25)],
)
def test_paraboloid(focal_length: float, diameter: float, surface: float, bowl: float) -> None:
    curve = paraboloid(focal_length, diameter)
    assert area(curve) == pytest.approx(surface, rel=DIGITS)
    # The bowl up to the rim plane lies between curve and axis.
    assert volume(curve) == pytest.approx(bowl, rel=DIGITS)


def test_closed_forms_of_the_paraboloid() -> None:
    focal_length, radius = 100.0, 150.0
    curve = paraboloid(focal_length, 2.0 * radius)
    slope = radius / (2.0 * focal_length)
    assert area(curve) == pytest.approx(
        8.0 * np.pi * focal_length**2 / 3.0 * ((1.0 + slope**2) ** 1.5 - 1.0), rel=1e-12
    )
    assert volume(curve) == pytest.approx(np.pi * radius**2 * (radius**2 / (4.0 * focal_length)) / 2.0, rel=1e-12)


@pytest.mark.parametrize(
    ("f_over_d", "area_over_flat"),
    [(0.20, 1.323520625), (0.25, 1.218951416), (0.35, 1.118369790), (0.50, 1.060113296), (1.00, 1.015465939)],
)
def test_area_over_flat_area(f_over_d: float, area_over_flat: float) -> None:
    """Topic 1, table of f/D against rim angle, column area/flat area."""
    assert area(paraboloid(f_over_d, 1.0)) / (0.25 * np.pi) == pytest.approx(area_over_flat, rel=DIGITS)


def test_first_theorem_by_arc_length_and_centroid() -> None:
    """Topic 9: L = 163.0647181, centroid at 77.93429189, A = 79848.81328 for f = 100, D = 300."""
    curve = paraboloid(100.0, 300.0)
    assert curve.end == pytest.approx(163.0647181, rel=DIGITS)
    assert area(curve) / (2.0 * np.pi * curve.end) == pytest.approx(77.93429189, rel=DIGITS)


def test_torus() -> None:
    """Topic 9: R = 5, r = 1: V = 98.69604401, A = 197.3920880."""
    ring = ArcPath(
        np.array([[6.0, 0.0], [5.0, 1.0], [4.0, 0.0], [5.0, -1.0], [6.0, 0.0]]), np.full(4, np.tan(np.pi / 8))
    )
    assert volume(ring) == pytest.approx(98.69604401, rel=DIGITS)
    assert area(ring) == pytest.approx(197.3920880, rel=DIGITS)


def test_female_mould() -> None:
    """Topic 9: a cylinder of diameter 300, 20 higher than the bowl f = 100, D = 300 in it: 3401755.795."""
    curve = paraboloid(100.0, 300.0).raised(20.0)
    rest = ArcPath(np.array([[150.0, 76.25], [150.0, 0.0], [0.0, 0.0], [0.0, 20.0]]), np.zeros(3))
    solid = Solid(curve, rest)
    assert solid.volume == pytest.approx(3401755.795, rel=DIGITS)
    assert solid.forming_area == pytest.approx(79848.81328, rel=DIGITS)
    # The mesh encloses as much, to its chord error over its area.
    mesh = revolve(solid, chord_error=0.02)
    one, two, three = (mesh.corners[:, corner] for corner in range(3))
    enclosed = float((one * np.cross(two, three)).sum() / 6.0)
    assert enclosed == pytest.approx(3401755.795, abs=0.02 * solid.area)
