"""Pictures in SVG: drawings of lines and arcs as a drafting sheet has them, one ink and one accent on white.

A picture is a sheet of paper in millimetres, u to the right and v upwards from its lower left corner. An arc stays an
arc: SVG's own command A. What a line means is told by its width and its dashes and by a label, never by colour alone,
so that the picture can be read in greyscale. The same picture gives the same text on every system: fixed decimals, no
date, no mark of the writer, and no element that has to be referred to by name, which is why hatching is drawn line by
line and a window is an element svg of its own, which clips what is in it.

References
----------
W3C, "Scalable Vector Graphics (SVG) 1.1 (Second Edition)", 16 August 2011: 8.3.8 elliptical arcs, 7.2 nested svg
elements, 10 text; from memory.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Iterator
from xml.sax.saxutils import escape

import numpy as np

from outputs.svg_items import (
    Anchor,
    Area,
    Dimension,
    Item,
    Label,
    Leader,
    Pattern,
    Picture,
    Point,
    Stroke,
    Window,
    circle,
)
from profiles.arcpath import ArcPath
from profiles.errors import FormatError

__all__ = [
    "Anchor",
    "Area",
    "Dimension",
    "Item",
    "Label",
    "Leader",
    "Picture",
    "Stroke",
    "Window",
    "circle",
    "picture_text",
]

INK, ACCENT, PAPER = "#20262b", "#b5431c", "#ffffff"
DASHES: dict[Pattern, str] = {"solid": "", "dashed": "2 1.2", "chain": "8 1.2 1.2 1.2", "phantom": "6 1 1 1 1 1"}
FONT = "Helvetica, Arial, Liberation Sans, sans-serif"
DECIMALS = 2
HATCH_PITCH, HATCH_WIDTH = 2.2, 0.1
ARROW_LENGTH, ARROW_WIDTH = 2.6, 0.9
TEXT_GAP, CAPITAL = 0.9, 0.72
EXTENSION_GAP, EXTENSION_BEYOND = 1.0, 1.4
HATCH_SAGITTA = 0.01
_TURN_45 = math.sqrt(0.5) * np.array([[1.0, 1.0], [-1.0, 1.0]])
_NOT_XML = re.compile("[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")


def picture_text(picture: Picture) -> str:
    """Return a picture as the text of an SVG file.

    Parameters
    ----------
    picture : Picture
        What to draw [mm of paper].

    Returns
    -------
    str
        The file's text; its lengths have 2 decimals [mm of paper].

    Raises
    ------
    FormatError
        If the picture shows nothing.

    Examples
    --------
    A half circle, one native arc:

    >>> bow = Stroke((ArcPath([(1.0, 1.0), (9.0, 1.0)], [-1.0]),))
    >>> print(picture_text(Picture(10.0, 6.0, (bow,), "Bow")).splitlines()[-3])
    <path d="M1.00 5.00A4.00 4.00 0 0 1 9.00 5.00" stroke-width="0.18"/>
    """
    lines = [line for item in picture.items for line in _drawn(item, picture.height)]
    if not lines:
        raise FormatError(f"picture {picture.title!r}: shows 0 items; allowed: at least 1; do: give it something")
    width, height = _number(picture.width), _number(picture.height)
    head = (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width}mm" height="{height}mm" '
        f'viewBox="0 0 {width} {height}" role="img" font-family="{FONT}">',
        f"<title>{_text(picture.title)}</title>",
        f"<desc>{_text(picture.description)}</desc>",
        f'<rect width="{width}" height="{height}" fill="{PAPER}"/>',
        f'<g fill="none" stroke="{INK}" stroke-linejoin="round">',
    )
    return "\n".join((*head, *lines, "</g>", "</svg>", ""))


def _drawn(item: Item, height: float) -> Iterator[str]:
    """Yield the elements of one item on a sheet of the given height."""
    match item:
        case Stroke():
            dashes = f' stroke-dasharray="{DASHES[item.pattern]}"' if DASHES[item.pattern] else ""
            colour = f' stroke="{ACCENT}"' if item.accent else ""
            yield from _path(item.paths, f'{colour} stroke-width="{_number(item.width)}"{dashes}', height)
        case Area(fill="hatch"):
            yield from _path(_hatching(item.outline), f' stroke-width="{_number(HATCH_WIDTH)}"', height)
        case Area():
            colour = {"ink": INK, "accent": ACCENT}.get(item.fill, PAPER)
            yield from _path((item.outline,), f' fill="{colour}" stroke="none"', height)
        case Label():
            yield _label(item, height)
        case Dimension() | Leader():
            parts = _dimension(item) if isinstance(item, Dimension) else _leader(item)
            yield from (line for part in parts for line in _drawn(part, height))
        case Window():
            yield from _window(item, height)


def _path(paths: Iterable[ArcPath], attributes: str, height: float) -> Iterator[str]:
    """Yield one element path, or nothing where there is no path."""
    data = "".join(_commands(path, height) for path in paths)
    if data:
        yield f'<path d="{data}"{attributes}/>'


def _commands(path: ArcPath, height: float) -> str:
    """Return the commands of a path: v runs downwards in SVG, so a left turn is its sweep 0."""
    words = [f"M{_place(path.vertices[0], height)}"]
    for end, bend, turn in zip(path.vertices[1:], path.curvatures, path.turns, strict=True):
        place = _place(end, height)
        if not bend:
            words.append(f"L{place}")
            continue
        radius = _number(1.0 / abs(bend))
        words.append(f"A{radius} {radius} 0 {int(abs(turn) > math.pi)} {int(turn < 0.0)} {place}")
    if path.closed:
        words.append("Z")
    return "".join(words)


def _hatching(outline: ArcPath) -> Iterator[ArcPath]:
    """Yield lines at 45 degrees inside a closed path, at whole multiples of the pitch from the sheet's corner."""
    points = outline.points(sagitta=HATCH_SAGITTA) @ _TURN_45.T
    starts, ends = points[:-1], points[1:]
    first, last = points[:, 1].min() / HATCH_PITCH, points[:, 1].max() / HATCH_PITCH
    for level in HATCH_PITCH * np.arange(math.ceil(first), math.floor(last) + 1):
        crossed = (starts[:, 1] <= level) != (ends[:, 1] <= level)
        below, above = starts[crossed], ends[crossed]
        along = below[:, 0] + (level - below[:, 1]) / (above[:, 1] - below[:, 1]) * (above[:, 0] - below[:, 0])
        for pair in np.sort(along).reshape(-1, 2):
            yield ArcPath(np.column_stack([pair, [level, level]]) @ _TURN_45, np.zeros(1))


def _label(label: Label, height: float) -> str:
    """Return the element of a label."""
    across, down = label.place[0], height - label.place[1]
    where = f'x="{_number(across)}" y="{_number(down)}"'
    anchor = "" if label.anchor == "start" else f' text-anchor="{label.anchor}"'
    turned = f' transform="rotate(-90 {_number(across)} {_number(down)})"' if label.upright else ""
    weight = ' font-weight="bold"' if label.bold else ""
    look = f' font-size="{_number(label.size)}" fill="{ACCENT if label.accent else INK}" stroke="none"'
    return f"<text {where}{anchor}{turned}{weight}{look}>{_text(label.text)}</text>"


def _dimension(item: Dimension) -> Iterator[Stroke | Area | Label]:
    """Yield the parts of a dimension; where there is no room between them the arrowheads point inwards."""
    axis = 1 if item.upright else 0
    feet = [_on_line(item, point[axis]) for point in (item.first, item.second)]
    for point, foot in zip((item.first, item.second), feet, strict=True):
        yield from _extension(point, foot)
    reach = abs(feet[1][axis] - feet[0][axis])
    outside = reach < 3.0 * ARROW_LENGTH
    ends = [_towards(foot, other, -2.0 * ARROW_LENGTH) for foot, other in zip(feet, feet[::-1], strict=True)]
    yield Stroke((_line(*(ends if outside else feet)),))
    for foot, other, end in zip(feet, feet[::-1], ends, strict=True):
        yield _arrowhead(foot, end if outside else other)
    middle = 0.5 * (feet[0][axis] + feet[1][axis])
    place = (item.line - TEXT_GAP, middle) if item.upright else (middle, item.line + TEXT_GAP)
    yield Label(item.text, place, item.size, "middle", item.upright)


def _on_line(item: Dimension, along: float) -> Point:
    """Return a point of the dimension line."""
    return (item.line, along) if item.upright else (along, item.line)


def _extension(point: Point, foot: Point) -> Iterator[Stroke]:
    """Yield the extension line from a point to a little beyond the dimension line."""
    reach = math.dist(point, foot)
    if reach > EXTENSION_GAP:
        yield Stroke((_line(_towards(point, foot, EXTENSION_GAP), _towards(foot, point, -EXTENSION_BEYOND)),))


def _leader(item: Leader) -> Iterator[Stroke | Area | Label]:
    """Yield the parts of a leader, which sets out at half the height of the letters."""
    label = item.label
    side = -TEXT_GAP if label.anchor == "start" else TEXT_GAP
    start = (label.place[0] + side, label.place[1] + 0.5 * CAPITAL * label.size)
    yield Stroke((_line(start, item.tip),))
    yield _arrowhead(item.tip, start)
    yield label


def _arrowhead(tip: Point, behind: Point) -> Area:
    """Return a narrow filled arrowhead at ``tip``, its line coming from ``behind``."""
    way = np.subtract(tip, behind) / math.dist(tip, behind)
    foot = np.array(tip) - ARROW_LENGTH * way
    half = 0.5 * ARROW_WIDTH * np.array([-way[1], way[0]])
    return Area(ArcPath(np.array([tip, foot + half, foot - half, tip]), np.zeros(3)), "ink")


def _window(window: Window, height: float) -> Iterator[str]:
    """Yield a nested element svg with the same coordinates as the sheet's, which clips at its edges."""
    (left, bottom), (right, top) = window.low, window.high
    x, y, wide, high = (_number(value) for value in (left, height - top, right - left, top - bottom))
    yield f'<svg x="{x}" y="{y}" width="{wide}" height="{high}" viewBox="{x} {y} {wide} {high}">'
    yield from (line for item in window.items for line in _drawn(item, height))
    yield "</svg>"


def _line(start: Point, end: Point) -> ArcPath:
    return ArcPath(np.array([start, end]), np.zeros(1))


def _towards(start: Point, end: Point, distance: float) -> Point:
    """Return the point at a distance from ``start`` towards ``end``, a negative one away from it."""
    share = distance / math.dist(start, end)
    return start[0] + share * (end[0] - start[0]), start[1] + share * (end[1] - start[1])


def _place(point: Iterable[float], height: float) -> str:
    across, up = point
    return f"{_number(across)} {_number(height - up)}"


def _number(value: float) -> str:
    return f"{round(float(value), DECIMALS) + 0.0:.{DECIMALS}f}"


def _text(text: str) -> str:
    """Return a text as XML holds it, with a question mark for what it cannot hold."""
    return escape(_NOT_XML.sub("?", text))
