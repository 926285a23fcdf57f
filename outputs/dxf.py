"""Drawings in DXF: paths of lines and arcs on named layers, with the unit stated in every way a reader may look for.

A DXF's coordinates carry no unit. So the drawing says it in the header ($INSUNITS and $MEASUREMENT, which R12 does not
have), as text, and by a *check line* of 100 mm or 4 in that anyone can measure. Texts and check line stand on the layer
NOTES, below the geometry. Drawing x runs along the spindle, y is the radius.

A *bulge* belongs to the start vertex and is the tangent of a quarter of the turn, left positive. Coordinates have 8
decimals and bulges 12; so have the centre and the radius of an arc that stands alone, and its angles 14. Nothing is
written as a spline. The same drawing gives the same bytes on every system: lines end in CR LF, which old machines want
(common practice), and no date or random mark is written. Reading back is the work of `outputs.dxf_reader`.

References
----------
Autodesk, "DXF Reference": HEADER section, LWPOLYLINE ("tangent of 1/4 of the included angle"); R12's older POLYLINE,
VERTEX and their codes from memory, as the library ezdxf writes them.
"""

from __future__ import annotations

import io
import math
import re
import textwrap
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any, Literal

import numpy as np

from outputs.choice import check_one_of
from outputs.dxf_drawing import (
    BROKEN_WORD,
    CHECK_LENGTH,
    CHECK_TEXT,
    INSERT_UNITS,
    MEASUREMENT,
    NEXT_WORD,
    NOTES_LAYER,
    UNITS_TEXT,
    Drawing,
    Units,
    dxf_library,
)
from outputs.dxf_pieces import ANGLE_DECIMALS, ARC_DECIMALS, BULGE_DECIMALS, COORDINATE_DECIMALS, Line, pieces_of
from outputs.dxf_reader import read_drawing
from outputs.package import write_file
from outputs.plain_text import plain_text
from profiles.arcpath import ArcPath, Array
from profiles.errors import FormatError

__all__ = ["Drawing", "read_drawing", "write_drawing"]

Version = Literal["R2010", "R12"]
Entities = Literal["polyline", "line-arc"]

_CENTRE_LAYER = "CENTRE_LINE"
_LETTERS_PER_LINE = 40
_LINE_PITCH = 1.6
_CENTRE_DASHES_MM = (18.0, 12.0, -2.0, 2.0, -2.0)
_LAYER_NAME = re.compile(r"[A-Z0-9_$-]{1,31}")
_DECIMALS = {42: BULGE_DECIMALS}
_DECIMALS_OF_ARC = {10: ARC_DECIMALS, 20: ARC_DECIMALS, 40: ARC_DECIMALS, 50: ANGLE_DECIMALS, 51: ANGLE_DECIMALS}


def write_drawing(drawing: Drawing, path: Path, *, version: Version = "R2010", entities: Entities = "polyline") -> None:
    """Write a drawing as a DXF file.

    Parameters
    ----------
    drawing : Drawing
        What to write; coordinates are rounded to 8 decimals of its unit, and stretches shorter than that are left out.
    path : Path
        The file to write; an older one is replaced.
    version : {"R2010", "R12"}
        DXF version: R12 is all that many old machines read.
    entities : {"polyline", "line-arc"}
        Whether a path is one LWPOLYLINE (R12: POLYLINE) with bulges, or loose LINE and ARC entities in its order.

    Raises
    ------
    FormatError
        If the drawing is empty, a layer's name is one that R12 cannot hold or that is written here, a path is smaller
        than the written digits, or a choice is not one of those above.
    WriteError
        If the file cannot be written.
    """
    check_one_of("drawing.version", version, ("R2010", "R12"))
    check_one_of("drawing.entities", entities, ("polyline", "line-arc"))
    for name in drawing.layers:
        _check_layer(name)
    layers = {name: tuple(_as_written(name, path) for path in paths) for name, paths in drawing.layers.items()}
    if not any(layers.values()):
        raise FormatError(f"{path}: the drawing is empty; allowed: at least one path; do: give it one on any layer")
    ezdxf = dxf_library()
    metadata = ezdxf.options.write_fixed_meta_data_for_testing
    ezdxf.options.write_fixed_meta_data_for_testing = True  # no date, version or random mark: same drawing, same bytes
    try:
        stream = io.StringIO()
        _document(ezdxf, drawing, layers, version, entities).write(stream)
    finally:
        ezdxf.options.write_fixed_meta_data_for_testing = metadata
    write_file(path, _with_fixed_decimals(stream.getvalue()).encode("ascii"), overwrite=True)


def _check_layer(name: str) -> None:
    """Refuse a layer's name that R12 cannot hold, or that is not the caller's."""
    if not _LAYER_NAME.fullmatch(name) or name in (NOTES_LAYER, "0"):
        raise FormatError(
            f"layer {name!r}: cannot hold geometry; allowed: 1 to 31 of A to Z, 0 to 9, _, $ and -, "
            f"but not 0 and {NOTES_LAYER}; do: choose another name"
        )


def _as_written(layer: str, path: ArcPath) -> ArcPath:
    """Return a path as the file will hold it, without stretches that vanish in the rounding."""
    vertices = np.round(path.vertices, COORDINATE_DECIMALS) + 0.0
    bulges = np.round(path.bulges, BULGE_DECIMALS) + 0.0
    kept = np.hypot(*np.diff(vertices, axis=0).T) > 0.0
    if not kept.any() or (np.abs(bulges[~kept]) > 1.0).any():
        raise FormatError(
            f"layer {layer}: a stretch near ({vertices[0, 0]:g}, {vertices[0, 1]:g}) begins where it ends once rounded "
            f"to {COORDINATE_DECIMALS} decimals; allowed: paths longer than that, and arcs short of a full circle; "
            f"do: break the circle in two, or check the unit"
        )
    return ArcPath(np.vstack([vertices[:1], vertices[1:][kept]]), bulges[kept])


def _document(
    ezdxf: Any, drawing: Drawing, layers: Mapping[str, tuple[ArcPath, ...]], version: Version, entities: Entities
) -> Any:
    """Return the drawing as a document of the library."""
    document = ezdxf.new(version)
    space = document.modelspace()
    _add_tables(document, layers, drawing.units)
    for name, paths in layers.items():
        for path in paths:
            _add_path(space, path, {"layer": name}, version, entities)
    lowest, highest = _extent([path for paths in layers.values() for path in paths])
    check_line = _add_notes(space, drawing, lowest)
    corners = np.vstack([lowest, highest, check_line])
    _set_header(document, drawing.units, corners.min(axis=0), corners.max(axis=0))
    return document


def _add_tables(document: Any, layers: Mapping[str, tuple[ArcPath, ...]], units: Units) -> None:
    """Add the layers, the centre line's with a line type of its own."""
    scale = CHECK_LENGTH[units] / CHECK_LENGTH["mm"]
    dashes = [round(dash * scale, COORDINATE_DECIMALS) for dash in _CENTRE_DASHES_MM]
    classes = document.classes
    classes.add_required_classes(document.dxfversion)
    classes.classes = dict(
        sorted(classes.classes.items())
    )  # the library takes them from a set: another order each time
    document.linetypes.add("CENTER", dashes, description="Center ____ _ ____ _ ____")
    for name in [name for name, paths in layers.items() if paths] + [NOTES_LAYER]:
        document.layers.add(name, color=7, linetype="CENTER" if name == _CENTRE_LAYER else "Continuous")


def _add_path(space: Any, path: ArcPath, attributes: dict[str, str], version: Version, entities: Entities) -> None:
    """Add one path as a polyline, or as its lines and arcs."""
    if entities == "polyline":
        add = space.add_polyline2d if version == "R12" else space.add_lwpolyline
        bulges = path.bulges.tolist() + ([] if path.closed else [0.0])
        points = [(x, y, bulge) for (x, y), bulge in zip(path.vertices.tolist(), bulges, strict=False)]
        add(points, format="xyb", close=path.closed, dxfattribs=attributes)
        return
    for piece in pieces_of(path):
        if isinstance(piece, Line):
            space.add_line(piece.start, piece.end, dxfattribs=attributes)
        else:
            angles = (piece.start_angle, piece.end_angle)
            space.add_arc(piece.centre, piece.radius, *angles, dxfattribs=attributes)


def _add_notes(space: Any, drawing: Drawing, lowest: Array) -> Array:
    """Add the texts and the check line below the geometry, no wider than the check line; return its ends."""
    length = CHECK_LENGTH[drawing.units]
    height = length / _LETTERS_PER_LINE
    attributes = {"layer": NOTES_LAYER}
    texts = [UNITS_TEXT[drawing.units], *_note_lines(drawing.notes), CHECK_TEXT[drawing.units]]
    left, top = float(lowest[0]), float(lowest[1]) - 0.1 * length - height
    for index, text in enumerate(texts):
        place = (left, round(top - index * _LINE_PITCH * height, COORDINATE_DECIMALS))
        space.add_text(text, height=height, dxfattribs=attributes).set_placement(place)
    bottom = round(top - (len(texts) - 0.25) * _LINE_PITCH * height, COORDINATE_DECIMALS)
    ends = ((left, bottom), (round(left + length, COORDINATE_DECIMALS), bottom))
    space.add_line(*ends, dxfattribs=attributes)
    return np.array(ends)


def _note_lines(notes: tuple[str, ...]) -> Iterator[str]:
    """Yield the notes in lines of text, those that go on marked by leading blanks."""
    for note in notes:
        rest = _harmless(note)
        for line in textwrap.wrap(rest, _LETTERS_PER_LINE - len(NEXT_WORD)):
            mark = NEXT_WORD if rest.startswith(" ") else BROKEN_WORD if rest != _harmless(note) else ""
            rest = rest.lstrip()[len(line) :]
            yield mark + line


def _harmless(note: str) -> str:
    r"""Return a note in which nothing is a code of DXF: no %% symbol, no ^ control character, no \U+ letter."""
    return re.sub("%{2,}", "%", plain_text(note)).replace("^", "**").replace("\\", "/")


def _extent(paths: list[ArcPath]) -> tuple[Array, Array]:
    """Return the lowest and the highest coordinates that the paths reach, their arcs' bulging included."""
    points = np.vstack([points for path in paths for points in (path.vertices, *_turning_points(path))])
    return points.min(axis=0), points.max(axis=0)


def _turning_points(path: ArcPath) -> Iterator[Array]:
    """Yield the points in which an arc of the path runs along an axis, where it reaches farthest."""
    starts, _ = path.tangents
    for index in np.flatnonzero(path.bulges):
        turn = float(path.turns[index])
        first = math.atan2(starts[index][1], starts[index][0]) / (0.5 * math.pi)
        last = first + turn / (0.5 * math.pi)
        quarters = np.arange(math.ceil(min(first, last)), math.floor(max(first, last)) + 1)
        if len(quarters):
            yield path.along(int(index), np.clip((quarters - first) / (last - first), 0.0, 1.0))


def _set_header(document: Any, units: Units, lowest: Array, highest: Array) -> None:
    """State units, extent and a view that shows all of it."""
    if document.dxfversion > "AC1009":
        document.header["$INSUNITS"] = INSERT_UNITS[units]
        document.header["$MEASUREMENT"] = MEASUREMENT[units]
    low, high = ((float(corner[0]), float(corner[1]), 0.0) for corner in (lowest, highest))
    layout = document.modelspace()
    for name, attribute, corner in (("$EXTMIN", "extmin", low), ("$EXTMAX", "extmax", high)):
        document.header[name] = corner
        layout.dxf.set(attribute, corner)
    layout.dxf.limmin, layout.dxf.limmax = low[:2], high[:2]
    middle = (0.5 * (low[0] + high[0]), 0.5 * (low[1] + high[1]))
    document.set_modelspace_vport(1.1 * max(high[0] - low[0], high[1] - low[1]), middle)


def _with_fixed_decimals(text: str) -> str:
    """Return a DXF's text with fixed decimals in its header's points and in its entities, and with CR LF."""
    lines = text.split("\n")
    section = kind = ""
    for index in range(0, len(lines) - 1, 2):
        code, value = int(lines[index]), lines[index + 1]
        if code == 0:
            kind = value
        elif code == 2 and kind == "SECTION":
            section, kind = value, ""
        elif (section == "ENTITIES" and 10 <= code < 60) or (section == "HEADER" and 10 <= code < 40):
            decimals = (_DECIMALS_OF_ARC if kind == "ARC" else _DECIMALS).get(code, COORDINATE_DECIMALS)
            lines[index + 1] = f"{round(float(value), decimals) + 0.0:.{decimals}f}"
    return "\r\n".join(lines)
