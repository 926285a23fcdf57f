"""The picture of the demo job's work package, as committed for the README.

After a change that is meant to alter it, write it anew and look at it::

    python tests/fabricate/test_picture.py
"""

from __future__ import annotations

import json
import re
import tempfile
from itertools import pairwise
from pathlib import Path
from xml.etree import ElementTree as ET

import numpy as np
import pytest

import fabricate
from fabricate.job import parse_job, read_job
from fabricate.make import make_package
from fabricate.order import DRAWING, PROGRAM, PROOF, Order
from fabricate.picture import WIDTH, package_picture
from fabricate.picture_files import read_package
from outputs.svg import Picture, picture_text
from profiles.errors import FormatError

DEMO = Path(fabricate.__file__).parent / "demo"
COMMITTED = DEMO / "terrace-heater.svg"
NUMBER = re.compile(r"-?\d+(?:\.\d+)?")


def demo_picture(folder: Path) -> tuple[Order, Picture]:
    order = Order(read_job(DEMO / "terrace-heater.toml"))
    make_package(order, folder)
    return order, package_picture(order, folder)


@pytest.fixture(scope="module")
def package(tmp_path_factory: pytest.TempPathFactory) -> tuple[Order, Path, Picture]:
    folder = tmp_path_factory.mktemp("picture") / "package"
    order, picture = demo_picture(folder)
    return order, folder, picture


@pytest.fixture
def copy(package: tuple[Order, Path, Picture], tmp_path: Path) -> Path:
    for name in (DRAWING, PROGRAM, PROOF):
        (tmp_path / name).write_bytes((package[1] / name).read_bytes())
    return tmp_path


def texts(text: str) -> list[str]:
    return [element.text or "" for element in ET.fromstring(text).iter() if element.tag.endswith("}text")]  # noqa: S314


def test_the_committed_picture_is_that_of_the_package(package: tuple[Order, Path, Picture]) -> None:
    # Other releases of the libraries may end the search for the arcs a hair elsewhere: a tenth of a millimetre on paper
    drawn, committed = picture_text(package[2]), COMMITTED.read_text(encoding="utf-8")
    assert NUMBER.sub("0", drawn) == NUMBER.sub("0", committed)
    places = ([float(number) for number in NUMBER.findall(text)] for text in (drawn, committed))
    assert next(places) == pytest.approx(next(places), abs=0.1)


def test_it_states_the_figures_of_the_files(package: tuple[Order, Path, Picture]) -> None:
    order, folder, picture = package
    found = texts(picture_text(picture))
    radius, height = order.chain.point_on_mould(order.chain.released.rim)
    assert f"rim, cut here: radius {radius:.3f} mm" in found
    assert f"depth {height:.3f} mm" in found
    assert f"base to work zero {-order.mould.base:.3f} mm" in found
    assert {"work zero", "rapid (dashed)", "lengths in mm", "scale 1:2"} <= set(found)
    curve = read_package(order, folder).curve
    assert f"forming surface: {len(curve)} arcs," in found
    files = json.loads((folder / PROOF).read_text(encoding="utf-8"))["files"]
    drawing, program = (f"{files[name]['normal_mm']:.2g}" for name in (DRAWING, PROGRAM))
    assert f"drawing {drawing}, program {program}" in found


def test_nothing_lies_off_the_sheet(package: tuple[Order, Path, Picture]) -> None:
    picture = package[2]
    # Windows clip what they show, so only what stands outside them counts.
    text = re.sub(r'<svg x=".*?</svg>', "", picture_text(picture), flags=re.DOTALL)
    for data in re.findall(r' d="([^"]*)"', text):
        for across, down in re.findall(r"(-?\d+\.\d+) (-?\d+\.\d+)(?=[MLAZ]|$)", data):
            assert 0.0 <= float(across) <= WIDTH
            assert 0.0 <= float(down) <= picture.height


def test_it_follows_the_files_and_not_the_job(package: tuple[Order, Path, Picture], copy: Path) -> None:
    order, _, picture = package
    proof = (copy / PROOF).read_text(encoding="utf-8")
    (copy / PROOF).write_text(re.sub(r'"normal_mm": [\d.e-]+', '"normal_mm": 0.0012', proof), encoding="utf-8")
    assert "drawing 0.0012, program 0.0012" in texts(picture_text(package_picture(order, copy)))
    lines = (copy / PROGRAM).read_text(encoding="utf-8").splitlines(keepends=True)
    first = lines.index("(ROUGH)\n")
    without = [line for number, line in enumerate(lines) if not (first < number < lines.index("(END ROUGH)\n"))]
    (copy / PROGRAM).write_text("".join(without), encoding="utf-8")
    assert len(picture_text(package_picture(order, copy))) < len(picture_text(picture)) - 2000


def test_the_nose_runs_at_its_radius_from_the_surface(package: tuple[Order, Path, Picture]) -> None:
    order, folder, _ = package
    program = read_package(order, folder).program
    assert program is not None
    points = order.mould.from_lathe(program.finishing).vertices[1:-1]
    feet = order.mould.curve.points(order.mould.curve.nearest(points))
    assert np.hypot(*(points - feet).T) == pytest.approx(program.nose, abs=order.tolerance)


def test_rapids_along_one_line_are_one_line(package: tuple[Order, Path, Picture]) -> None:
    order, folder, _ = package
    program = read_package(order, folder).program
    assert program is not None
    spans: dict[tuple[int, float], list[tuple[float, float]]] = {}
    for rapid in program.rapids:
        axis = int(np.argmax(np.ptp(rapid.vertices, axis=0)))
        low, high = sorted(rapid.vertices[:, axis].tolist())
        spans.setdefault((axis, rapid.vertices[0, 1 - axis]), []).append((low, high))
    for found in spans.values():
        found.sort()
        assert all(before[1] < after[0] for before, after in pairwise(found))


def test_a_job_without_a_program_has_its_section_alone(package: tuple[Order, Path, Picture], copy: Path) -> None:
    text = package[0].text
    order = Order(parse_job(text[: text.index("[turning]")], name="section.toml"))
    (copy / PROGRAM).unlink()
    found = texts(picture_text(package_picture(order, copy)))
    assert DRAWING in found
    assert PROGRAM not in found


@pytest.mark.parametrize(
    ("name", "content", "message"),
    [
        (PROOF, "{", r"proof.json: does not state the deviation of lathe-profile.dxf and turning.nc"),
        (PROOF, '{"files": {}}', r"proof.json: does not state the deviation .*KeyError\('lathe-profile.dxf'\)"),
        (PROGRAM, "G0\n", r"a motion with neither X nor Z"),
        (DRAWING, "", r"lathe-profile.dxf"),
    ],
)
def test_a_damaged_package_is_refused(
    package: tuple[Order, Path, Picture], copy: Path, name: str, content: str, message: str
) -> None:
    (copy / name).write_text(content, encoding="utf-8")
    with pytest.raises(FormatError, match=message):
        package_picture(package[0], copy)


if __name__ == "__main__":
    with tempfile.TemporaryDirectory() as place:
        COMMITTED.write_bytes(picture_text(demo_picture(Path(place) / "package")[1]).encode())
