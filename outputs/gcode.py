"""Turning programs in G-code: the blocks of a program, and writing them in the words of one lathe's control.

A *dialect* (`outputs.gcode_words`) says how one control spells things; a *block* is one line of a program. Positions
are (radius, height) of the control point in the program's own unit, mm or inch; the height is the word Z, positive away
from the headstock, and the radius is the word X, doubled where the control wants diameters. I, K and R are never
doubled.

A stretch of a feed is straight or an arc given by its *bulge*, the tangent of a quarter of its turn, positive where
it turns left in the (radius, height) plane. Controls name arcs as seen from +Y, where the plane is (Z, X): a negative
bulge is therefore counter-clockwise, G3.

Arcs are worked out from the rounded ends, so only the rounding of I and K is left: it moves the centre by at most half
a unit of the last digit times sqrt(2), and so parts the distances to the two ends by at most twice that, 0.0014 mm with
three decimals and 0.00014 in with four. NISTIR 6556 §3.5.3.2 allows 0.002 mm and 0.0002 in, so no arc need be split
for it. Reading back is the work of `outputs.gcode_reader`.

References
----------
T. R. Kramer, F. M. Proctor, E. Messina, "The NIST RS274NGC Interpreter - Version 3", NISTIR 6556, 17 August 2000.
The words of turning (G95 to G97, G99, G50) are no part of it: common practice.
"""

from __future__ import annotations

import itertools
import math
import textwrap
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np

from outputs.choice import check_one_of
from outputs.gcode_words import Dialect
from profiles.arcpath import ArcPath
from profiles.errors import FormatError

__all__ = [
    "Block",
    "Comment",
    "Dialect",
    "Direction",
    "Feed",
    "Program",
    "ProgramStop",
    "Rapid",
    "SpindleLimit",
    "SpindleSpeed",
    "SpindleStart",
    "SpindleStop",
    "SurfaceSpeed",
    "comment_lines",
    "write_program",
]

Point = tuple[float, float]

Direction = Literal["M3", "M4"]

LINE_LENGTH = 100
FEED_DECIMALS = 4
STRAIGHT_TURN = 1e-4
LONGEST_RADIUS_ARC = math.radians(150.0)
LARGEST_TURN = math.radians(270.0)
ENDING_SPEED = 50.0

_SHORT_CHORD = {"mm": 0.05, "inch": 0.002}
_SPELLED_OUT = str.maketrans(
    {"(": " ", ")": " ", "%": " percent", ";": ",", "°": " deg", "±": "+/-", "×": " x ", "µ": "u", "μ": "u"}
    | {"⌀": "dia ", "Ø": "O", "ø": "o", "\N{EN DASH}": "-", "\N{EM DASH}": "-", "\N{FRACTION SLASH}": "/"}
)


@dataclass(frozen=True)
class Comment:
    """A remark for people; also names a section: ``(FINISH)`` to ``(END FINISH)``."""

    text: str


@dataclass(frozen=True)
class SpindleLimit:
    """The highest speed any later block may ask for [rev/min], until the next limit.

    Written as its own block under G50 and G92. Under "D" it goes out with each `SurfaceSpeed`, and under "none" the
    writer alone holds to it; both get a comment.
    """

    rpm: float

    def __post_init__(self) -> None:
        _check_speed("spindle limit", self.rpm, "rev/min")


@dataclass(frozen=True)
class SurfaceSpeed:
    """Constant surface speed G96 [m/min or ft/min], never faster than its limit [rev/min], which stays in force."""

    speed: float
    limit: float

    def __post_init__(self) -> None:
        _check_speed("surface speed", self.speed, "m/min or ft/min")
        _check_speed("spindle limit", self.limit, "rev/min")


@dataclass(frozen=True)
class SpindleSpeed:
    """Constant speed G97 [rev/min]."""

    rpm: float

    def __post_init__(self) -> None:
        _check_speed("spindle speed", self.rpm, "rev/min")


@dataclass(frozen=True)
class SpindleStart:
    """Start of the spindle, M3 or M4."""

    direction: Direction

    def __post_init__(self) -> None:
        check_one_of("spindle direction", self.direction, get_args(Direction))


@dataclass(frozen=True)
class SpindleStop:
    """Stop of the spindle, M5."""


@dataclass(frozen=True)
class ProgramStop:
    """A stop until the operator starts again, M0."""


@dataclass(frozen=True)
class Rapid:
    """A straight move at rapid speed, G0, to a radius and height [mm or in]."""

    radius: float
    height: float

    def __post_init__(self) -> None:
        _check_position(self.radius, self.height)


@dataclass(frozen=True)
class Feed:
    """A cut to a radius and height [mm or in], straight or an arc, at a feed per revolution [mm or in].

    The bulge is the tangent of a quarter of the arc's turn [-], left positive in the (radius, height) plane.
    """

    radius: float
    height: float
    bulge: float
    feed: float

    def __post_init__(self) -> None:
        _check_position(self.radius, self.height)
        if not math.isfinite(self.feed) or round(self.feed, FEED_DECIMALS) <= 0.0:
            raise FormatError(
                f"a feed of {self.feed!r} per revolution is not allowed: it must be 0.0001 or more; raise the feed"
            )
        if not abs(4.0 * math.atan(self.bulge)) <= LARGEST_TURN:
            raise FormatError(
                f"an arc of bulge {self.bulge!r} turns by more than 270 degrees, which rounding makes uncertain: "
                f"give it as two arcs"
            )


Block = Comment | SpindleLimit | SurfaceSpeed | SpindleSpeed | SpindleStart | SpindleStop | ProgramStop | Rapid | Feed


@dataclass(frozen=True)
class Program:
    """The blocks of a turning program in order, for one control. Preamble and end are added when it is written."""

    dialect: Dialect
    blocks: tuple[Block, ...]


def write_program(program: Program) -> str:
    """Return the text of a program: preamble, blocks, and G97, M5, M30 at the end.

    Parameters
    ----------
    program : Program
        What to write; lengths in the dialect's unit [mm or in].

    Returns
    -------
    str
        ASCII lines of at most 100 characters, each ended by a line feed. Moves that rounding makes empty are left
        out, and very short or nearly straight arcs (under 0.05 mm or 0.002 in, or a turn under 1e-4 rad) are lines.

    Raises
    ------
    FormatError
        If a block asks for something that this control has no word for, for more speed than the limit in force, or
        if the first move is a cut.

    Notes
    -----
    Speeds and limits are rounded down to whole numbers, so that no word asks for more than was meant.
    """
    dialect = program.dialect
    lines = _preamble(dialect)
    position: Point | None = None
    limit: float | None = None
    for block in program.blocks:
        if isinstance(block, Rapid | Feed):
            end = _on_grid(dialect, block.radius, block.height)
            lines += _moved(dialect, position, end, block)
            position = end
        else:
            lines += _said(dialect, limit, block)
            limit = _limit_after(limit, block)
    ending = ENDING_SPEED if limit is None else min(ENDING_SPEED, limit)
    return "\n".join([*lines, f"G97 {_whole('S', ending)}", "M5", "M30"]) + "\n"


def comment_lines(text: str) -> list[str]:
    """Return a remark as comments that any control can skip.

    Parameters
    ----------
    text : str
        Any text; nothing is written for a blank one.

    Returns
    -------
    list of str
        Lines of at most 100 characters in plain capitals: accents dropped, brackets and other characters that a
        control could act on replaced.

    Examples
    --------
    >>> comment_lines("Café table (round), 2.1 % springback")
    ['(CAFE TABLE ROUND , 2.1 PERCENT SPRINGBACK)']
    """
    # Once before and once after decomposition: some characters, such as a full-width bracket, only then turn plain.
    plain = unicodedata.normalize("NFKD", text.translate(_SPELLED_OUT)).translate(_SPELLED_OUT).upper()
    plain = "".join(letter for letter in plain if not unicodedata.combining(letter))
    plain = "".join(letter if " " <= letter <= "~" else " " if letter.isspace() else "?" for letter in plain)
    return [f"({line})" for line in textwrap.wrap(" ".join(plain.split()), LINE_LENGTH - 2)]


def _preamble(dialect: Dialect) -> list[str]:
    """Return the words that stand before the first move, each a line."""
    words = (dialect.plane_word, dialect.units_word, dialect.absolute_word, "G40", dialect.feed_per_rev_word)
    return [word for word in words if word != "none"]


def _said(dialect: Dialect, limit: float | None, block: Block) -> list[str]:
    """Return the lines of a block that moves nothing."""
    match block:
        case Comment():
            lines = comment_lines(block.text)
        case SpindleLimit():
            lines = _limit_lines(dialect, block.rpm)
        case SurfaceSpeed():
            lines = _surface_speed_lines(dialect, limit, block)
        case SpindleSpeed():
            _check_limit("spindle speed", block.rpm, limit)
            lines = [f"G97 {_whole('S', block.rpm)}"]
        case SpindleStart():
            lines = [block.direction]
        case SpindleStop():
            lines = ["M5"]
        case ProgramStop():
            lines = ["M0"]
        case _:
            raise FormatError(f"{block!r} is not a block of a turning program: use the blocks of this module")
    return lines


def _limit_after(limit: float | None, block: Block) -> float | None:
    """Return the spindle limit [rev/min] in force after a block."""
    if isinstance(block, SpindleLimit):
        return block.rpm
    return block.limit if isinstance(block, SurfaceSpeed) else limit


def _limit_lines(dialect: Dialect, rpm: float) -> list[str]:
    """Return the block that states a spindle limit [rev/min], or a comment where there is none."""
    if dialect.spindle_limit_word in {"D", "none"}:
        return comment_lines(f"spindle limit {math.floor(rpm)} rev/min")
    return [f"{dialect.spindle_limit_word} {_whole('S', rpm)}"]


def _surface_speed_lines(dialect: Dialect, limit: float | None, block: SurfaceSpeed) -> list[str]:
    """Return the blocks of a constant surface speed, its limit stated first where it is lower than the one in force."""
    if dialect.spindle_limit_word == "none":
        raise FormatError(
            f"a surface speed of {block.speed:g} cannot be written with spindle_limit_word = 'none', because nothing "
            f"would limit the spindle near the axis: step the speed with G97 instead"
        )
    _check_limit("speed limit", block.limit, limit)
    speed = f"G96 {_whole('S', block.speed)}"
    if dialect.spindle_limit_word == "D":
        return [f"{speed} {_whole('D', block.limit)}"]
    return [speed] if block.limit == limit else [*_limit_lines(dialect, block.limit), speed]


def _moved(dialect: Dialect, start: Point | None, end: Point, block: Rapid | Feed) -> Iterator[str]:
    """Yield the text of one move between rounded positions."""
    if start == end:
        return
    if isinstance(block, Rapid):
        yield f"G0 {_target(dialect, end)}"
        return
    if start is None:
        raise FormatError(
            f"the first move is a cut to radius {block.radius:g}, height {block.height:g}, from nowhere known: "
            f"begin with a rapid"
        )
    if block.bulge and dialect.arcs == "lines":
        raise FormatError(
            f"an arc of bulge {block.bulge:g} is not allowed with arcs = 'lines': give straight stretches"
        )
    for place, stop, bulge in _pieces(dialect, start, end, block.bulge):
        yield f"{_stretch(dialect, place, stop, bulge)} F{block.feed:.{FEED_DECIMALS}f}"


def _pieces(dialect: Dialect, start: Point, end: Point, bulge: float) -> list[tuple[Point, Point, float]]:
    """Return start, end and bulge of each part of a stretch; only long arcs written with R come in parts."""
    turn = 4.0 * math.atan(bulge)
    count = math.ceil(abs(turn) / LONGEST_RADIUS_ARC) if dialect.arcs == "radius" else 1
    if count <= 1:
        return [(start, end, bulge)]
    arc = ArcPath(np.array([start, end]), np.array([bulge]))
    joints = [_on_grid(dialect, *point) for point in arc.along(0, np.arange(1, count) / count)]
    places = [start, *joints, end]
    part = math.tan(0.25 * turn / count)
    return [(place, stop, part) for place, stop in itertools.pairwise(places) if place != stop]


def _stretch(dialect: Dialect, start: Point, end: Point, bulge: float) -> str:
    """Return the words of one straight or curved stretch between rounded positions, without its feed."""
    across, along = end[0] - start[0], end[1] - start[1]
    chord = math.hypot(across, along)
    # A control can take a very short arc of very large radius for a full circle.
    if abs(4.0 * math.atan(bulge)) < STRAIGHT_TURN or chord < _SHORT_CHORD[dialect.units]:
        return f"G1 {_target(dialect, end)}"
    words = f"{'G3' if bulge < 0.0 else 'G2'} {_target(dialect, end)}"
    if dialect.arcs == "radius":
        return f"{words} {_word(dialect, 'R', chord * (1.0 + bulge**2) / (4.0 * abs(bulge)))}"
    # From the start to the middle of the chord, then to its left by the centre's distance from it.
    aside = (1.0 - bulge**2) / (4.0 * bulge)
    centre = (0.5 * across - aside * along, 0.5 * along + aside * across)
    return f"{words} {_word(dialect, 'I', centre[0])} {_word(dialect, 'K', centre[1])}"


def _on_grid(dialect: Dialect, radius: float, height: float) -> Point:
    """Return the position that the rounded words X and Z will hold, as (radius, height)."""
    factor = _x_factor(dialect)
    return round(float(factor * radius), dialect.decimals) / factor, round(float(height), dialect.decimals)


def _target(dialect: Dialect, end: Point) -> str:
    """Return the words X and Z of a rounded position."""
    return f"{_word(dialect, 'X', _x_factor(dialect) * end[0])} {_word(dialect, 'Z', end[1])}"


def _x_factor(dialect: Dialect) -> float:
    return 2.0 if dialect.x_word == "diameter" else 1.0


def _word(dialect: Dialect, letter: str, value: float) -> str:
    """Return a coordinate word; adding zero turns a minus zero into a plain one."""
    return f"{letter}{round(float(value), dialect.decimals) + 0.0:.{dialect.decimals}f}"


def _whole(letter: str, value: float) -> str:
    """Return a speed word, rounded down; a hair's breadth makes up for conversion of units."""
    return f"{letter}{math.floor(value + 1e-6)}"


def _check_speed(name: str, value: float, unit: str) -> None:
    if not (math.isfinite(value) and value >= 1.0):
        raise FormatError(f"a {name} of {value!r} {unit} is not allowed: it must be a finite number of 1 or more")


def _check_limit(name: str, rpm: float, limit: float | None) -> None:
    if limit is not None and rpm > limit:
        raise FormatError(
            f"a {name} of {rpm:g} rev/min is over the limit of {limit:g} rev/min in force: "
            f"lower it, or state a higher limit first"
        )


def _check_position(radius: float, height: float) -> None:
    for name, value in (("radius", radius), ("height", height)):
        if not abs(value) <= 99999.0:
            raise FormatError(f"a {name} of {value!r} is not allowed: it must lie within ±99999; check the lengths")
