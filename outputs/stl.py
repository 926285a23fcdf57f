"""Solids in binary STL: facets of three corners, without units, in single precision.

A binary STL is a header of 80 bytes, the number of facets as a 32-bit integer, and for each facet 50 bytes: normal and
three corners as twelve 32-bit floats and a 16-bit attribute, all little-endian. The corners run counter-clockwise seen
from outside. The header must not begin with "solid", by which readers tell the older text form.

References
----------
Layout as in public descriptions of the format; orientation and header: STL convention, from memory.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from outputs.package import write_file
from outputs.plain_text import plain_text
from profiles.errors import FormatError

__all__ = ["Facets", "read_stl", "write_stl"]

Array = NDArray[np.float64]

HEADER_SIZE = 80
COUNT_SIZE = 4
FACET = np.dtype([("normal", "<f4", 3), ("corners", "<f4", (3, 3)), ("attribute", "<u2")])

_HEADER_MARK = "binary STL, "


@dataclass(frozen=True, eq=False)
class Facets:
    """The facets of a solid as a file holds them.

    Parameters
    ----------
    corners : ndarray of shape (m, 3, 3)
        Three corners (x, y, z) of each facet [mm].
    normals : ndarray of shape (m, 3)
        The normal stated for each facet [-].
    """

    corners: Array
    normals: Array


def write_stl(vertices: Array, triangles: NDArray[np.integer[Any]], path: Path, *, label: str) -> None:
    """Write a solid as binary STL.

    Parameters
    ----------
    vertices : ndarray of shape (n, 3)
        Corners (x, y, z) [mm].
    triangles : ndarray of shape (m, 3)
        Row numbers of each facet's corners, counter-clockwise seen from outside.
    path : Path
        The file to write; an older one is replaced.
    label : str
        What the header says; cut to what fits, in printable ASCII.

    Raises
    ------
    FormatError
        If the shapes do not fit, a number is not finite or too large for single precision, or a facet has no area
        once its corners are rounded to it.
    WriteError
        If the file cannot be written.

    Notes
    -----
    The normals are those of the rounded corners.
    """
    points, rows = np.asarray(vertices), np.asarray(triangles)
    _check_mesh(path, points, rows)
    with np.errstate(over="ignore"):
        corners = (points.astype("<f4") + np.float32(0.0))[rows]
    facets = np.zeros(len(rows), dtype=FACET)
    facets["corners"] = corners
    facets["normal"] = _unit_normals(path, corners)
    header = f"{_HEADER_MARK}{plain_text(label)}".encode("ascii")[:HEADER_SIZE].ljust(HEADER_SIZE)
    count = len(rows).to_bytes(COUNT_SIZE, "little")
    write_file(path, header + count + facets.tobytes(), overwrite=True)


def read_stl(path: Path) -> Facets:
    """Return the facets that a binary STL file holds.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    Facets
        Corners and normals as they stand in the file [mm].

    Raises
    ------
    FormatError
        If the file is missing, is a text STL, has not exactly the size that its number of facets asks for, holds no
        facet, or a number that is not finite.
    """
    try:
        content = path.read_bytes()
    except OSError as error:
        raise FormatError(
            f"{path}: cannot be read ({error.strerror}); allowed: a binary STL; do: check the name and who may read it"
        ) from error
    start = HEADER_SIZE + COUNT_SIZE
    count = int.from_bytes(content[HEADER_SIZE:start], "little")
    if len(content) < start or len(content) != start + count * FACET.itemsize:
        raise FormatError(f"{path}: {_wrong_size(content, count)}")
    if content.lower().startswith(b"solid"):
        raise FormatError(
            f'{path}: its header begins with "solid", which readers take for text; allowed: any other header; '
            f"do: write the solid again"
        )
    if count == 0:
        raise FormatError(f"{path}: holds no facet; allowed: 1 or more; do: write the solid again")
    facets = np.frombuffer(content, dtype=FACET, offset=start)
    corners, normals = facets["corners"].astype(np.float64), facets["normal"].astype(np.float64)
    broken = ~(np.isfinite(corners).all(axis=(1, 2)) & np.isfinite(normals).all(axis=1))
    if broken.any():
        raise FormatError(
            f"{path}: facet {int(np.argmax(broken)) + 1} of {count} has a number that is not finite; "
            f"allowed: finite numbers; do: write the solid again"
        )
    return Facets(corners, normals)


def _check_mesh(path: Path, vertices: Array, triangles: NDArray[Any]) -> None:
    """Refuse arrays that are no mesh."""
    if vertices.ndim != 2 or vertices.shape[1] != 3 or triangles.ndim != 2 or triangles.shape[1] != 3:
        raise FormatError(
            f"{path}: vertices and triangles have the shapes {vertices.shape} and {triangles.shape}; "
            f"allowed: (n, 3) and (m, 3); do: give three coordinates and three row numbers each"
        )
    if not len(triangles) or triangles.dtype.kind not in "iu":
        raise FormatError(
            f"{path}: {len(triangles)} triangles of {triangles.dtype} are no solid; allowed: 1 or more, of whole "
            f"numbers; do: check the mesh"
        )
    if triangles.min() < 0 or triangles.max() >= len(vertices):
        raise FormatError(
            f"{path}: triangles name the vertices {triangles.min()} to {triangles.max()}; "
            f"allowed: 0 to {len(vertices) - 1}; do: check the mesh"
        )
    if not (np.abs(vertices) < np.finfo(np.float32).max).all():
        raise FormatError(
            f"{path}: a vertex is not finite, or too large; allowed: coordinates that single precision can hold; "
            f"do: check the mesh"
        )


def _unit_normals(path: Path, corners: NDArray[np.float32]) -> Array:
    """Return the unit normals of facets (m, 3, 3), computed in double precision."""
    exact = corners.astype(np.float64)
    normals = np.cross(exact[:, 1] - exact[:, 0], exact[:, 2] - exact[:, 0])
    lengths = np.linalg.norm(normals, axis=1)
    if not lengths.all():
        number = int(np.argmin(lengths))
        raise FormatError(
            f"{path}: facet {number + 1} at {exact[number, 0].tolist()} has no area in single precision; "
            f"allowed: facets with an area; do: ask for a coarser mesh"
        )
    return np.asarray(normals / lengths[:, None] + 0.0)


def _wrong_size(content: bytes, count: int) -> str:
    """Return what is wrong with a file whose size does not fit."""
    if content[:200].lstrip()[:5].lower() == b"solid":
        return "is a text STL; allowed: binary STL; do: save it as binary"
    if len(content) < HEADER_SIZE + COUNT_SIZE:
        return f"is {len(content)} bytes long; allowed: 84 and 50 for each facet; do: write the solid again"
    return (
        f"is {len(content)} bytes long and says that it holds {count} facets; "
        f"allowed: {HEADER_SIZE + COUNT_SIZE + FACET.itemsize * count} bytes for these; do: write the solid again"
    )
