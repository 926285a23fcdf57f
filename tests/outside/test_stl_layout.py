"""The layout of binary STL against public descriptions of it.

Sources
-------
[1] Layout as public descriptions have it: 80 bytes of header, a 32-bit count, for each facet twelve 32-bit floats
    (normal, three corners) and a 16-bit attribute, little-endian; so 84 + 50 n bytes, 684 for 12 facets.
[2] numpy-stl 4.1.1 wrote 684 bytes for 12 facets, 50 for each.
[3] Corners counter-clockwise seen from outside, and no "solid" at the head of a binary file: STL convention, from
    memory.
"""

from __future__ import annotations

import itertools
import struct
from pathlib import Path

import numpy as np
import pytest

from outputs.stl import read_stl, write_stl

CORNERS = np.array(list(itertools.product((0.0, 10.0), (0.0, 20.0), (0.0, 30.0))))
# Two facets for each side of the box, counter-clockwise seen from outside; corner number = 4 x + 2 y + z.
SIDES = [(0, 1, 3, 2), (4, 6, 7, 5), (0, 4, 5, 1), (2, 3, 7, 6), (0, 2, 6, 4), (1, 5, 7, 3)]
TRIANGLES = np.array([row for a, b, c, d in SIDES for row in ((a, b, c), (a, c, d))])
OUTWARD = [(-1, 0, 0), (1, 0, 0), (0, -1, 0), (0, 1, 0), (0, 0, -1), (0, 0, 1)]


@pytest.fixture
def box(tmp_path: Path) -> Path:
    write_stl(CORNERS, TRIANGLES, tmp_path / "box.stl", label="box")
    return tmp_path / "box.stl"


def test_twelve_facets_take_684_bytes(box: Path) -> None:
    """[1], [2]."""
    assert box.stat().st_size == 84 + 50 * 12 == 684


def test_every_number_stands_in_its_place(box: Path) -> None:
    """[1], taken apart with the standard library alone."""
    data = box.read_bytes()
    assert not data.startswith(b"solid")
    assert struct.unpack_from("<I", data, 80) == (12,)
    for number, triangle in enumerate(TRIANGLES):
        *values, attribute = struct.unpack_from("<12fH", data, 84 + 50 * number)
        assert tuple(values[:3]) == OUTWARD[number // 2]
        assert values[3:] == CORNERS[triangle].ravel().tolist()
        assert attribute == 0


def test_another_writer_s_file_is_read(tmp_path: Path) -> None:
    """[2]: a file of numpy-stl."""
    from stl import Mode
    from stl.mesh import Mesh

    mesh = Mesh(np.zeros(12, dtype=Mesh.dtype))
    mesh.vectors[:] = CORNERS[TRIANGLES]
    mesh.save(str(tmp_path / "other.stl"), mode=Mode.BINARY)
    assert (tmp_path / "other.stl").stat().st_size == 684
    assert (read_stl(tmp_path / "other.stl").corners == CORNERS[TRIANGLES]).all()


def test_volume_and_orientation(box: Path) -> None:
    """Volume of a box by the divergence theorem, positive where the corners run counter-clockwise from outside [3]."""
    first, second, third = np.moveaxis(read_stl(box).corners, 1, 0)
    assert np.einsum("ij,ij->", first, np.cross(second, third)) / 6.0 == pytest.approx(10.0 * 20.0 * 30.0, rel=1e-12)
