"""Reading a drawing back from DXF: its unit from every place that states it, its paths with the digits of the file.

The unit must be stated, and every statement must agree: $INSUNITS and $MEASUREMENT where the version has them, the text
"UNITS: MM" or "UNITS: INCH" on the layer NOTES where there is one, and the length of the check line, which must be
there. Every other layer may hold polylines, lines and arcs in the plane of the drawing, and nothing else.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from pathlib import Path
from typing import Any

import numpy as np

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
from outputs.dxf_pieces import Arc, Line, Point, chained
from profiles.arcpath import ArcPath
from profiles.errors import FormatError, GeometryError

__all__ = ["read_drawing"]

_UNITS: tuple[Units, ...] = ("mm", "inch")
_CHECK_TOLERANCE = 1e-6
_NOT_PLAIN = 2 | 4 | 8 | 16 | 32 | 64  # fitted curve or spline, three dimensions, meshes: bits of a POLYLINE's flag 70
_MAKE_AGAIN = "do: write the drawing again"


def read_drawing(path: Path) -> Drawing:
    """Return the drawing that a DXF file holds.

    Parameters
    ----------
    path : Path
        The file: R12 or later, as text.

    Returns
    -------
    Drawing
        Its unit, its paths layer by layer [mm or in], and its notes. Loose lines and arcs are chained into paths
        where their ends meet, in the order and the direction in which they were written.

    Raises
    ------
    FormatError
        If the file is missing, is no whole DXF, does not state its unit or contradicts itself in it, or holds anything
        but polylines, lines and arcs of finite size on a layer other than NOTES.
    """
    _check_whole(path)
    ezdxf = dxf_library()
    # What a damaged file sets off inside the library is of many kinds; all of them mean that it is no DXF.
    damages = (ezdxf.DXFError, OSError, ValueError, LookupError, TypeError, AttributeError, ArithmeticError)
    try:
        return _drawing(path, ezdxf.readfile(path))
    except FormatError:
        raise
    except (*damages, RuntimeError, AssertionError, StopIteration) as error:
        raise FormatError(
            f"{path}: is not a DXF that can be read ({error}); allowed: a DXF file of R12 or later; {_MAKE_AGAIN}"
        ) from error


def _check_whole(path: Path) -> None:
    """Refuse a file that is missing, or does not begin and end as a DXF does."""
    try:
        content = path.read_bytes()
    except OSError as error:
        raise FormatError(
            f"{path}: cannot be read ({error.strerror}); allowed: a DXF file; do: check the name and who may read it"
        ) from error
    if content[:22] == b"AutoCAD Binary DXF\r\n\x1a\x00":
        raise FormatError(f"{path}: is a binary DXF; allowed: DXF as text; do: save it as text (ASCII) DXF")
    if b"SECTION" not in content[:10000]:
        raise FormatError(f"{path}: is not a DXF; allowed: a DXF file of R12 or later; {_MAKE_AGAIN}")
    if content.split()[-2:] != [b"0", b"EOF"]:
        raise FormatError(f"{path}: breaks off before its end; allowed: a DXF that ends in EOF; {_MAKE_AGAIN}")


def _drawing(path: Path, document: Any) -> Drawing:
    """Return the drawing in the library's view of the file."""
    by_layer: dict[str, list[Any]] = {}
    for entity in document.modelspace():
        by_layer.setdefault(entity.dxf.layer, []).append(entity)
    marks = by_layer.pop(NOTES_LAYER, [])
    texts = [entity.dxf.text for entity in marks if entity.dxftype() == "TEXT"]
    units = _units(path, document, texts, [entity for entity in marks if entity.dxftype() == "LINE"])
    layers = {name: tuple(_paths(path, name, entities)) for name, entities in by_layer.items()}
    return Drawing(units, layers, tuple(_notes(texts, units)))


def _units(path: Path, document: Any, texts: list[str], lines: list[Any]) -> Units:
    """Return the unit on which header, text and check line agree."""
    stated: dict[str, Units] = {}
    if document.dxfversion > "AC1009":
        for variable, codes in (("$INSUNITS", INSERT_UNITS), ("$MEASUREMENT", MEASUREMENT)):
            stated[variable] = _unit_of_code(path, variable, document.header.get(variable), codes)
    spoken = [(text, units) for text in texts for units in _UNITS if text.strip() == UNITS_TEXT[units]]
    for text, units in spoken[:1]:  # written first; a later one is somebody's remark
        stated[f'the text "{text.strip()}"'] = units
    if not stated:
        raise FormatError(
            f'{path}: does not state its unit; allowed: a text "{UNITS_TEXT["mm"]}" or "{UNITS_TEXT["inch"]}" on layer '
            f"{NOTES_LAYER}, or $INSUNITS; {_MAKE_AGAIN}"
        )
    units = next(iter(stated.values()))
    if len(set(stated.values())) > 1:
        said = ", ".join(f"{source} says {unit}" for source, unit in stated.items())
        raise FormatError(f"{path}: contradicts itself in its unit: {said}; allowed: one unit; {_MAKE_AGAIN}")
    _check_length(path, lines, units)
    return units


def _unit_of_code(path: Path, variable: str, code: object, codes: dict[str, int]) -> Units:
    """Return the unit that a header variable states."""
    for units in _UNITS:
        if code == codes[units]:
            return units
    raise FormatError(
        f"{path}: {variable} is {code}; allowed: {codes['mm']} (mm) or {codes['inch']} (inch); {_MAKE_AGAIN}"
    )


def _check_length(path: Path, lines: list[Any], units: Units) -> None:
    """Refuse a drawing whose check line has not the length that its label states."""
    wanted = CHECK_LENGTH[units]
    symbol = "mm" if units == "mm" else "in"
    if len(lines) != 1:
        raise FormatError(
            f"{path}: has {len(lines)} lines on layer {NOTES_LAYER}; allowed: 1, the check line of {wanted:g} "
            f"{symbol}; {_MAKE_AGAIN}"
        )
    length = (lines[0].dxf.end - lines[0].dxf.start).magnitude
    if not abs(length - wanted) <= _CHECK_TOLERANCE * wanted:
        raise FormatError(
            f"{path}: the check line is {length:.10g} long; allowed: {wanted:g} {symbol}; "
            f"do: undo the scaling, or write the drawing again"
        )


def _notes(texts: list[str], units: Units) -> Iterator[str]:
    """Yield the notes, their lines joined again, without the unit and the check line's label."""
    left = list(texts)
    for mark in (UNITS_TEXT[units], CHECK_TEXT[units]):
        if mark in left:
            # The label is written last, so that a note of the same words is not taken for it.
            del left[left.index(mark) if mark == UNITS_TEXT[units] else len(left) - 1 - left[::-1].index(mark)]
    note = ""
    for text in left:
        if text.startswith(NEXT_WORD):
            note += " " + text[len(NEXT_WORD) :]
        elif text.startswith(BROKEN_WORD):
            note += text[len(BROKEN_WORD) :]
        else:
            if note:
                yield note
            note = text
    if note:
        yield note


def _paths(path: Path, layer: str, entities: list[Any]) -> list[ArcPath]:
    """Return the paths of one layer: polylines as they are, loose lines and arcs chained."""
    try:
        shapes = [_shape(entity) for entity in entities]
        loose = [shape for shape in shapes if not isinstance(shape, ArcPath)]
        return [*(shape for shape in shapes if isinstance(shape, ArcPath)), *chained(loose)]
    except (ValueError, OverflowError) as error:
        raise FormatError(
            f"{path}: layer {layer}: {error}; allowed: polylines, lines and arcs in the plane of the drawing, with "
            f"finite numbers; {_MAKE_AGAIN}"
        ) from error


def _shape(entity: Any) -> ArcPath | Line | Arc:
    """Return an entity as a path or as a loose piece of one."""
    kind = entity.dxftype()
    if kind not in _SHAPES:
        raise GeometryError(f"a {kind} is none of what a path is made of")
    if not entity.dxf.extrusion.isclose((0.0, 0.0, 1.0)):
        raise GeometryError(f"a {kind} is turned out of the plane, or mirrored")
    return _SHAPES[kind](entity)


def _polyline(points: Sequence[tuple[float, ...]], *, closed: bool) -> ArcPath:
    """Return a polyline's points (x, y, bulge) as a path."""
    values = np.array(points, dtype=np.float64).reshape(-1, 3)
    vertices, bulges = values[:, :2], values[:, 2]
    if closed:
        return ArcPath(np.vstack([vertices, vertices[:1]]), bulges)
    return ArcPath(vertices, bulges[:-1])


def _light_polyline(entity: Any) -> ArcPath:
    """Return an LWPOLYLINE as a path."""
    _check_level(entity.dxf.elevation)
    return _polyline(entity.get_points("xyb"), closed=entity.closed)


def _old_polyline(entity: Any) -> ArcPath:
    """Return a POLYLINE as a path."""
    if entity.dxf.flags & _NOT_PLAIN:
        raise GeometryError("a POLYLINE is fitted with a spline, or not flat")
    _check_level(entity.dxf.elevation.z)
    points = [(*_point(vertex.dxf.location), vertex.dxf.bulge) for vertex in entity.vertices]
    return _polyline(points, closed=entity.is_closed)


def _line(entity: Any) -> Line:
    """Return a LINE."""
    return Line(_point(entity.dxf.start), _point(entity.dxf.end))


def _arc(entity: Any) -> Arc:
    """Return an ARC."""
    numbers = (entity.dxf.radius, entity.dxf.start_angle, entity.dxf.end_angle)
    if not (np.isfinite(numbers).all() and numbers[0] > 0.0):
        raise GeometryError(f"an ARC has radius {numbers[0]:g} and angles {numbers[1]:g} and {numbers[2]:g}")
    return Arc(_point(entity.dxf.center), *numbers)


_SHAPES: dict[str, Callable[[Any], ArcPath | Line | Arc]] = {
    "LWPOLYLINE": _light_polyline,
    "POLYLINE": _old_polyline,
    "LINE": _line,
    "ARC": _arc,
}


def _point(place: Any) -> Point:
    """Return a place of the library as a point of the plane."""
    if not np.isfinite(tuple(place)).all():
        raise GeometryError(f"a point lies at ({place.x:g}, {place.y:g})")
    _check_level(place.z)
    return (place.x, place.y)


def _check_level(height: float) -> None:
    """Refuse what does not lie in the plane of the drawing."""
    if height != 0.0:
        raise GeometryError(f"a point lies at height {height:g}, above the plane of the drawing")
