"""Solids in binary STL."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from outputs.stl import read_stl, write_stl
from profiles.errors import FormatError, WriteError

CORNERS = np.array([[0.0, 0.0, 0.0], [30.0, 0.0, 0.0], [0.0, 20.0, 0.0], [0.1, 0.2, 10.3]])
OUTWARD = np.array([[0, 2, 1], [0, 1, 3], [1, 2, 3], [2, 0, 3]])


@pytest.fixture
def solid(tmp_path: Path) -> Path:
    write_stl(CORNERS, OUTWARD, tmp_path / "solid.stl", label="Corner, 30 mm")
    return tmp_path / "solid.stl"


class TestWriting:
    def test_what_is_written_is_read(self, solid: Path) -> None:
        facets = read_stl(solid)
        single = CORNERS.astype(np.float32).astype(np.float64)
        assert (facets.corners == single[OUTWARD]).all()
        assert facets.corners.dtype == facets.normals.dtype == np.float64

    def test_normals_are_those_of_the_rounded_corners(self, solid: Path) -> None:
        facets = read_stl(solid)
        cross = np.cross(*(facets.corners[:, row] - facets.corners[:, 0] for row in (1, 2)))
        # Single precision holds each component of a unit normal to 2**-25.
        assert np.abs(facets.normals - cross / np.linalg.norm(cross, axis=1)[:, None]).max() <= 2.0**-25

    def test_an_independent_reader_agrees(self, solid: Path) -> None:
        from stl.mesh import Mesh

        mesh, facets = Mesh.from_file(str(solid)), read_stl(solid)
        assert (mesh.vectors == facets.corners).all()
        # numpy-stl works the normals out from the corners itself, in single precision: a few units of its last digit.
        assert np.abs(mesh.get_unit_normals() - facets.normals).max() < 1e-6
        assert (mesh.attr == 0).all()
        # Volume of a tetrahedron: a sixth of the box of its three edges; single precision, as above.
        assert float(mesh.get_mass_properties()[0]) == pytest.approx(30.0 * 20.0 * 10.3 / 6.0, rel=1e-6)

    def test_the_same_solid_gives_the_same_bytes(self, solid: Path, tmp_path: Path) -> None:
        write_stl(CORNERS.copy(), OUTWARD.astype(np.int32), tmp_path / "again.stl", label="Corner, 30 mm")
        assert (tmp_path / "again.stl").read_bytes() == solid.read_bytes()

    def test_there_is_no_minus_zero(self, tmp_path: Path) -> None:
        write_stl(-CORNERS * (1.0, 1.0, -1.0), OUTWARD, tmp_path / "solid.stl", label="")
        facets = read_stl(tmp_path / "solid.stl")
        for values in (facets.corners, facets.normals):
            assert not np.signbit(values[values == 0.0]).any()

    @pytest.mark.parametrize("label", ["solid", "  solid of mine", "Café\nsolid\x00", "x" * 200, ""])
    def test_the_header_is_plain_and_never_says_solid_first(self, tmp_path: Path, label: str) -> None:
        write_stl(CORNERS, OUTWARD, tmp_path / "solid.stl", label=label)
        header = (tmp_path / "solid.stl").read_bytes()[:80]
        assert not header.lstrip().lower().startswith(b"solid")
        assert all(0x20 <= byte < 0x7F for byte in header)

    def test_the_label_stands_in_the_header(self, solid: Path) -> None:
        assert b"Corner, 30 mm" in solid.read_bytes()[:80]

    @pytest.mark.parametrize(
        ("vertices", "triangles", "message"),
        [
            (CORNERS[:, :2], OUTWARD, r"have the shapes \(4, 2\) and \(4, 3\); allowed: \(n, 3\) and \(m, 3\)"),
            (CORNERS, OUTWARD[:0], r"0 triangles of int\d+ are no solid; allowed: 1 or more"),
            (CORNERS, OUTWARD.astype(float), r"4 triangles of float64 are no solid; .*whole numbers"),
            (CORNERS, OUTWARD + 1, r"name the vertices 1 to 4; allowed: 0 to 3; do: check the mesh"),
            (CORNERS, OUTWARD - 1, r"name the vertices -1 to 2; allowed: 0 to 3"),
            (CORNERS * np.nan, OUTWARD, r"a vertex is not finite, or too large; allowed: .*; do: check the mesh"),
            (CORNERS * 1e39, OUTWARD, r"a vertex is not finite, or too large"),
            (CORNERS[[0, 0, 1, 2]], OUTWARD, r"facet 1 at \[0.0, 0.0, 0.0\] has no area in single precision"),
        ],
    )
    def test_what_is_no_mesh_is_refused(
        self, tmp_path: Path, vertices: NDArray[np.float64], triangles: NDArray[np.int64], message: str
    ) -> None:
        with pytest.raises(FormatError, match=rf"solid\.stl: .*{message}"):
            write_stl(vertices, triangles, tmp_path / "solid.stl", label="")
        assert not (tmp_path / "solid.stl").exists()

    def test_a_facet_that_rounding_flattens_is_refused(self, tmp_path: Path) -> None:
        far = CORNERS * 1e-6 + 1000.0  # single precision has steps of 6e-5 there
        with pytest.raises(FormatError, match="has no area in single precision; allowed: facets with an area; do: "):
            write_stl(far, OUTWARD, tmp_path / "solid.stl", label="")

    def test_a_place_that_cannot_be_written_is_refused(self, tmp_path: Path) -> None:
        with pytest.raises(WriteError, match="cannot be written"):
            write_stl(CORNERS, OUTWARD, tmp_path / "absent" / "solid.stl", label="")

    @given(st.floats(1e-3, 1e4), st.floats(-1e3, 1e3))
    def test_any_solid_comes_back_to_single_precision(
        self, tmp_path_factory: pytest.TempPathFactory, size: float, place: float
    ) -> None:
        path = tmp_path_factory.getbasetemp() / "any.stl"
        vertices = CORNERS * size + (0.0, 0.0, place)
        try:
            write_stl(vertices, OUTWARD, path, label="any")
        except FormatError as refusal:
            assert "has no area in single precision" in str(refusal)  # noqa: PT017 - allowed for tiny solids far off
            return
        strays = np.abs(read_stl(path).corners - vertices[OUTWARD])
        assert (strays <= np.abs(vertices).max() * 2.0**-24).all()


class TestReading:
    @pytest.mark.parametrize(
        ("change", "message"),
        [
            (lambda data: data[:-1], r"is 283 bytes long and says that it holds 4 facets; allowed: 284 bytes"),
            (lambda data: data + b"\0", r"is 285 bytes long and says that it holds 4 facets; allowed: 284 bytes"),
            (lambda data: data[:80], r"is 80 bytes long; allowed: 84 and 50 for each facet"),
            (lambda _: b"", r"is 0 bytes long; allowed: 84"),
            (lambda data: data[:80] + bytes(4), r"holds no facet; allowed: 1 or more; do: write the solid again"),
            (lambda data: data[:80] + b"\xff" * 4 + data[84:], r"says that it holds 4294967295 facets"),
            (
                lambda _: b"solid a\nfacet normal 0 0 1\n",
                r"is a text STL; allowed: binary STL; do: save it as binary",
            ),
            (lambda _: b" SOLID a\n" + bytes(200), r"is a text STL"),
            (
                lambda data: data[:-14] + np.float32(np.nan).tobytes() + data[-10:],
                r"facet 4 of 4 has a number that is not finite; allowed: finite numbers; do: ",
            ),
        ],
    )
    def test_what_is_no_binary_stl_is_refused(self, solid: Path, change: object, message: str) -> None:
        assert callable(change)
        solid.write_bytes(change(solid.read_bytes()))
        with pytest.raises(FormatError, match=rf"solid\.stl: .*{message}"):
            read_stl(solid)

    def test_an_infinite_normal_is_refused(self, solid: Path) -> None:
        data = solid.read_bytes()
        solid.write_bytes(data[:84] + np.float32(np.inf).tobytes() + data[88:])
        with pytest.raises(FormatError, match="facet 1 of 4 has a number that is not finite"):
            read_stl(solid)

    def test_a_binary_file_that_readers_take_for_text_is_refused(self, solid: Path) -> None:
        data = solid.read_bytes()
        solid.write_bytes(b"solid".ljust(80) + data[80:])
        with pytest.raises(FormatError, match=r'header begins with "solid".*; allowed: any other header; do: '):
            read_stl(solid)

    def test_a_missing_file_is_refused(self, tmp_path: Path) -> None:
        with pytest.raises(FormatError, match=r"absent\.stl: cannot be read \(.*\); allowed: a binary STL; do: "):
            read_stl(tmp_path / "absent.stl")
