"""Codes and numbers of DXF against published descriptions of the format.

Sources
-------
[1] Autodesk, "DXF Reference", LWPOLYLINE: bulge is "the tangent of one fourth the included angle for an arc segment";
    negative if the arc goes clockwise from the start point to the end point, 0 straight, 1 a semicircle.
[2] GNU LibreDWG, reference of entities (gnu.org): LWPOLYLINE 90 number of points, 70 flag, 10/20 point, 42 bulge.
[3] ezdxf 1.4.5, `ezdxf.enums.InsertUnits`: 1 inch, 4 mm; `ezdxf.math.bulge_center` and `bulge_radius`.
"""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from outputs.dxf import Drawing, Version, read_drawing, write_drawing
from profiles.arcpath import ArcPath

# [1]: tan(angle / 4), to the ten digits of the table from which they were typed.
BULGE_OF_ANGLE = {90.0: 0.4142135624, 45.0: 0.1989123674, 30.0: 0.1316524976, 10.0: 0.04366094291}
BULGE_OF_ANGLE |= {1.0: 0.004363350821, 180.0: 1.0}


def section(path: Path, name: str) -> list[tuple[int, str]]:
    lines = path.read_text(encoding="ascii").splitlines()
    found = [(int(code), value.strip()) for code, value in zip(lines[::2], lines[1::2], strict=True)]
    begin = found.index((2, name))
    return found[begin : found.index((0, "ENDSEC"), begin)]


def entity(path: Path, kind: str) -> list[tuple[int, str]]:
    found = section(path, "ENTITIES")
    begin = found.index((0, kind))
    end = next(index for index in range(begin + 1, len(found) + 1) if index == len(found) or found[index][0] == 0)
    return found[begin:end]


def header(path: Path, variable: str) -> tuple[int, str]:
    found = section(path, "HEADER")
    return found[found.index((9, variable)) + 1]


def arc_of(angle: float) -> ArcPath:
    """A quarter, an eighth ... of a circle of radius 10 about the origin, counter-clockwise from (10, 0)."""
    end = math.radians(angle)
    return ArcPath(
        np.array([[10.0, 0.0], [10.0 * math.cos(end), 10.0 * math.sin(end)]]), np.array([math.tan(0.25 * end)])
    )


@pytest.mark.parametrize(("angle", "bulge"), BULGE_OF_ANGLE.items())
@pytest.mark.parametrize("sign", [1.0, -1.0])
@pytest.mark.parametrize("version", ["R2010", "R12"])
def test_bulge_is_the_tangent_of_a_quarter_of_the_angle(
    tmp_path: Path, version: Version, angle: float, bulge: float, sign: float
) -> None:
    path = arc_of(angle) if sign > 0.0 else arc_of(angle).turned_over()
    write_drawing(Drawing("mm", {"A": (path,)}), tmp_path / "a.dxf", version=version)
    carrier = entity(tmp_path / "a.dxf", "LWPOLYLINE" if version == "R2010" else "VERTEX")
    found = [float(value) for code, value in carrier if code == 42]
    # The table has ten significant digits.
    assert found[0] == pytest.approx(sign * bulge, rel=1e-9)


@pytest.mark.parametrize(("sign", "centre"), [(1.0, (5.0, 5.0)), (-1.0, (5.0, -5.0))])
def test_the_centre_lies_left_of_a_positive_bulge(tmp_path: Path, sign: float, centre: tuple[float, float]) -> None:
    """[3] `bulge_center` and `bulge_radius`: (0, 0) to (10, 0) with bulge 0.41421356 has (5, 5) and 7.071067812."""
    path = ArcPath(np.array([[0.0, 0.0], [10.0, 0.0]]), np.array([sign * math.tan(math.pi / 8.0)]))
    write_drawing(Drawing("mm", {"A": (path,)}), tmp_path / "a.dxf", entities="line-arc")
    written = dict(entity(tmp_path / "a.dxf", "ARC"))
    # Ten digits of the table; the centre follows from rounded ends, within a unit of their eighth decimal.
    assert float(written[40]) == pytest.approx(7.071067812, rel=1e-9)
    assert (float(written[10]), float(written[20])) == pytest.approx(centre, abs=1e-8)
    (found,) = read_drawing(tmp_path / "a.dxf").layers["A"]
    assert found.centres[0] == pytest.approx(centre, abs=1e-8)


@pytest.mark.parametrize(("units", "insert_units", "measurement"), [("mm", "4", "1"), ("inch", "1", "0")])
def test_header_states_the_unit(tmp_path: Path, units: str, insert_units: str, measurement: str) -> None:
    """[3]; $MEASUREMENT 0 English, 1 metric: from memory."""
    write_drawing(Drawing(units, {"A": (arc_of(90.0),)}), tmp_path / "a.dxf")  # type: ignore[arg-type]
    assert header(tmp_path / "a.dxf", "$INSUNITS") == (70, insert_units)
    assert header(tmp_path / "a.dxf", "$MEASUREMENT") == (70, measurement)


def test_r12_has_neither_insert_units_nor_light_polylines(tmp_path: Path) -> None:
    """[3] warns that $INSUNITS is not exported for R12; LWPOLYLINE from R14: from memory."""
    write_drawing(Drawing("mm", {"A": (arc_of(90.0),)}), tmp_path / "a.dxf", version="R12")
    assert header(tmp_path / "a.dxf", "$ACADVER") == (1, "AC1009")
    content = (tmp_path / "a.dxf").read_text(encoding="ascii")
    assert "$INSUNITS" not in content
    assert "LWPOLYLINE" not in content


def test_codes_of_a_light_polyline(tmp_path: Path) -> None:
    """[2]; bit 1 of flag 70 for closed: from memory."""
    square = ArcPath(np.array([[0.0, 0.0], [9.0, 0.0], [9.0, 9.0], [0.0, 9.0], [0.0, 0.0]]), np.zeros(4))
    write_drawing(Drawing("mm", {"A": (square,)}), tmp_path / "a.dxf")
    found = entity(tmp_path / "a.dxf", "LWPOLYLINE")
    assert [value for code, value in found if code == 100] == ["AcDbEntity", "AcDbPolyline"]
    assert (90, "4") in found
    assert (70, "1") in found
    assert [code for code, _ in found].count(10) == 4
