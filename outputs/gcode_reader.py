"""Reading a turning program the way its control would: word by word, strictly, and sharing nothing with the writer.

The interpreter knows only the words of the grammar (NISTIR 6556 §3.3) and of the stated dialect, and refuses whatever
else stands in the text. What it gives back is what a control would do: moves between positions (radius, height), with
the feed, spindle and section in force. A *section* is the stretch between a comment and the comment "END" of the same
name.

References
----------
T. R. Kramer, F. M. Proctor, E. Messina, "The NIST RS274NGC Interpreter - Version 3", NISTIR 6556, 17 August 2000.
The words of turning (G95 to G97, G99, G50) are no part of it: common practice.
"""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from outputs.gcode_words import COORDINATES, Dialect, TextBlock, scan_line, words_before_moving
from profiles.arcpath import ArcPath
from profiles.errors import FormatError

Point = tuple[float, float]

RADIUS_TOLERANCE = {"mm": 0.002, "inch": 0.0002}


@dataclass(frozen=True)
class Move:
    """One move as the control makes it; lengths in the program's unit [mm or in].

    Parameters
    ----------
    kind : {"rapid", "feed"}
        Whether it is a rapid or a cut.
    start, end : tuple of float
        (radius, height) [mm or in]; the start of the first move is unknown, None.
    bulge : float
        Tangent of a quarter of the turn [-], left positive in the (radius, height) plane; 0 for a line.
    feed : float or None
        Feed per revolution in force [mm or in].
    line : int
        Number of the line in the text, from 1.
    section : str
        Name of the innermost section around it, or "".
    spindle_limit : float or None
        Limit in force [rev/min].
    spindle_mode : {"G96", "G97", None}
        Constant surface speed, constant speed, or neither stated yet.
    spindle_speed : float or None
        Surface speed [m/min or ft/min] under G96, speed [rev/min] under G97.
    spindle_direction : {"M3", "M4", None}
        None while the spindle stands.
    """

    kind: Literal["rapid", "feed"]
    start: Point | None
    end: Point
    bulge: float
    feed: float | None
    line: int
    section: str
    spindle_limit: float | None
    spindle_mode: str | None
    spindle_speed: float | None
    spindle_direction: str | None


@dataclass(frozen=True)
class Section:
    """A named stretch of the text: its comment's line and that of its end, from 1."""

    name: str
    first_line: int
    last_line: int


@dataclass(frozen=True)
class Replay:
    """What a program does: its moves and sections in order, and its comments as (line, text in capitals)."""

    moves: tuple[Move, ...]
    sections: tuple[Section, ...]
    comments: tuple[tuple[int, str], ...]

    def moves_in(self, name: str) -> tuple[Move, ...]:
        """Return the moves, rapids too, between the comments (NAME) and (END NAME).

        Parameters
        ----------
        name : str
            The section's name as the comment spells it, in capitals.

        Returns
        -------
        tuple of Move
            The moves in order [mm or in].

        Raises
        ------
        FormatError
            If the program does not have exactly one such section.
        """
        found = [section for section in self.sections if section.name == name]
        starts = [line for line, text in self.comments if text == name]
        if len(found) != 1 or len(starts) != 1:
            raise FormatError(
                f"the program has {len(starts)} comments ({name}) and {len(found)} ended by (END {name}), "
                f"where it must have one of each: write the program again"
            )
        return tuple(move for move in self.moves if found[0].first_line < move.line < found[0].last_line)

    def section(self, name: str) -> ArcPath:
        """Return the path cut between the comments (NAME) and (END NAME), in (radius, height) [mm or in].

        Parameters
        ----------
        name : str
            The section's name as the comment spells it, in capitals.

        Returns
        -------
        ArcPath
            The cuts in order [mm or in].

        Raises
        ------
        FormatError
            If the program does not have exactly one such section, or its cuts do not make one unbroken path.
        """
        cuts = [move for move in self.moves_in(name) if move.kind == "feed" and move.start != move.end]
        if not cuts:
            raise FormatError(f"nothing is cut between ({name}) and (END {name}): write the program again")
        for before, after in itertools.pairwise(cuts):
            if before.end != after.start:
                raise FormatError(
                    f"line {after.line}: the cut of section {name} starts at {after.start} and not at {before.end}, "
                    f"where the one before ended: write the program again"
                )
        vertices = [cuts[0].start, *(move.end for move in cuts)]
        return ArcPath(np.array(vertices), np.array([move.bulge for move in cuts]))


def read_program(text: str, dialect: Dialect) -> Replay:
    """Return what a turning program makes a lathe do whose control reads it by the given dialect.

    Parameters
    ----------
    text : str
        The whole program.
    dialect : Dialect
        The control's words, unit [mm or in] and number of decimals.

    Returns
    -------
    Replay
        Moves, sections and comments in order; lengths in the dialect's unit [mm or in].

    Raises
    ------
    FormatError
        At the first thing the control would refuse or could misread, naming the line, its text and what is wrong.

    Notes
    -----
    A G2 and a G3 through the same points are told apart: the wrong one is kept as the long way round that a control
    would cut.
    """
    state = _State()
    moves: list[Move] = []
    comments: list[tuple[int, str]] = []
    for number, line in enumerate(text.split("\n"), start=1):
        block = scan_line(number, line.removesuffix("\r"), dialect)
        if state.ended and block.text.strip():
            raise block.error("text after M30: the program ends there, so remove it")
        comments += [(number, comment.strip().upper()) for comment in block.comments]
        state, move = _obeyed(state, block, dialect)
        moves += [move] if move else []
    if not moves:
        raise FormatError("the program has no move at all: it is empty or cut short; write it again")
    if not state.ended:
        raise FormatError(f"line {number}: the program stops without M30: it is cut short; write it again")
    sections = _sections(comments)
    placed = (replace(move, section=_innermost(sections, move.line)) for move in moves)
    return Replay(tuple(placed), sections, tuple(comments))


@dataclass(frozen=True)
class _State:
    """What is in force after a block."""

    position: Point | None = None
    motion: str | None = None
    feed: float | None = None
    limit: float | None = None
    mode: str | None = None
    speed: float | None = None
    direction: str | None = None
    stated: frozenset[str] = frozenset()
    ended: bool = False


def _obeyed(state: _State, block: TextBlock, dialect: Dialect) -> tuple[_State, Move | None]:
    """Return what is in force after a block, in the order of NISTIR 6556 Table 8, and the move it makes."""
    feed = block.number("F")
    if feed is not None:
        state = replace(state, feed=feed)
    state = _spindle_set(state, block, dialect)
    state = _preamble_read(state, block, dialect)
    state, move = _moved(state, block, dialect)
    if "M30" in block.codes:
        if state.direction or state.mode != "G97":
            raise block.error("M30 comes while the spindle runs or G96 is in force: write G97 and M5 before it")
        state = replace(state, ended=True)
    return state, move


def _spindle_set(state: _State, block: TextBlock, dialect: Dialect) -> _State:
    """Return the state with the spindle words of a block obeyed."""
    speed, top = block.number("S"), block.number("D")
    word = block.code_among("G50", "G92", "G96", "G97")
    if word and speed is None:
        raise block.error(f"{word} without S: write the speed beside it")
    if top is not None and word != "G96":
        raise block.error("D limits the spindle beside G96 only: remove it")
    if word in {"G50", "G92"}:
        if block.has(COORDINATES):
            raise block.error(f"{word} with coordinates shifts the work zero: remove the coordinates")
        state = replace(state, limit=speed)
    elif speed is not None:
        state = _speed_set(state, block, top, by_block=dialect.spindle_limit_word == "D")
    turn = block.code_among("M3", "M4", "M5")
    if turn in {"M3", "M4"} and not state.speed:
        raise block.error(f"{turn} starts the spindle with no speed in force: write G97 S before it")
    return replace(state, direction=None if turn == "M5" else turn) if turn else state


def _speed_set(state: _State, block: TextBlock, top: float | None, *, by_block: bool) -> _State:
    """Return the state with a speed word obeyed; ``by_block``: whether each G96 states its own limit ``top``."""
    mode = block.code_among("G96", "G97") or state.mode
    if mode is None:
        raise block.error("S without G96 or G97 in force: write one of them")
    state = replace(state, mode=mode, speed=block.number("S"), limit=state.limit if top is None else top)
    if mode == "G96" and not (top if by_block and "G96" in block.codes else state.limit):
        raise block.error("G96 with no spindle limit stated before it: near the axis nothing would hold the spindle")
    return state


def _preamble_read(state: _State, block: TextBlock, dialect: Dialect) -> _State:
    """Return the state with the block's preamble words noted, which must all come before the first move."""
    found = words_before_moving(dialect).intersection(block.codes)
    if found and state.position is not None:
        raise block.error(f"{', '.join(sorted(found))} comes after the first move: it belongs before it")
    return replace(state, stated=state.stated | found)


def _moved(state: _State, block: TextBlock, dialect: Dialect) -> tuple[_State, Move | None]:
    """Return the state after the block's motion, and the motion."""
    word = block.code_among("G0", "G1", "G2", "G3")
    if not (word or block.has(COORDINATES)):
        return state, None
    state = replace(state, motion=word or state.motion)
    end = _end(state, block, dialect)
    _check_motion(state, block, dialect)
    move = Move(
        kind="rapid" if state.motion == "G0" else "feed",
        start=state.position,
        end=end,
        bulge=_bulge(state, end, block, dialect) if state.motion in {"G2", "G3"} else 0.0,
        feed=state.feed,
        line=block.line,
        section="",
        spindle_limit=state.limit,
        spindle_mode=state.mode,
        spindle_speed=state.speed,
        spindle_direction=state.direction,
    )
    return replace(state, position=end), move


def _end(state: _State, block: TextBlock, dialect: Dialect) -> Point:
    """Return where a motion ends, as (radius, height); a coordinate not named stays."""
    across, height = block.number("X"), block.number("Z")
    if across is None and height is None:
        raise block.error("a motion with neither X nor Z: name where it ends")
    radius = across if across is None or dialect.x_word == "radius" else across / 2.0
    if state.position is not None:
        kept = state.position
        return kept[0] if radius is None else radius, kept[1] if height is None else height
    missing = words_before_moving(dialect) - state.stated
    if missing:
        raise block.error(f"{', '.join(sorted(missing))} is missing before the first move: write it at the beginning")
    if state.motion != "G0" or radius is None or height is None:
        raise block.error("the first move must be a rapid G0 with both X and Z, because the tool stands anywhere")
    return radius, height


def _check_motion(state: _State, block: TextBlock, dialect: Dialect) -> None:
    """Refuse a motion whose words do not belong to it, and a cut without feed or with the spindle at rest."""
    arc = state.motion in {"G2", "G3"}
    wrong = "IKR" if not arc else {"centre": "R", "radius": "IK"}.get(dialect.arcs, "")
    if block.has(wrong):
        raise block.error(
            f"{state.motion} with {' or '.join(wrong)}, where the dialect has arcs = {dialect.arcs!r}: "
            f"write the motion as the dialect says"
        )
    if state.motion != "G0" and not state.feed:
        raise block.error("a cut with no feed in force: write F")
    if state.motion != "G0" and not (state.direction and state.speed):
        raise block.error("a cut with the spindle not running: start it before")


def _bulge(state: _State, end: Point, block: TextBlock, dialect: Dialect) -> float:
    """Return the bulge of the arc a control would cut from the position in force to ``end``."""
    start = state.position or end
    if start == end:
        raise block.error("an arc that ends where it starts is a full circle: no turning program has one")
    if dialect.arcs == "centre":
        turn = _turn_by_centre(start, end, block, dialect, counter_clockwise=state.motion == "G3")
    else:
        turn = _turn_by_radius(start, end, block, dialect)
    # Named as seen from +Y, in the (Z, X) plane, which is the (radius, Z) plane turned over: G3 turns right there.
    return math.tan(0.25 * turn) * (-1.0 if state.motion == "G3" else 1.0)


def _turn_by_centre(start: Point, end: Point, block: TextBlock, dialect: Dialect, *, counter_clockwise: bool) -> float:
    """Return the size of an arc's turn [rad], 0 to 2 pi, from its centre I, K from the start."""
    if not block.has("IK"):
        raise block.error("an arc with neither I nor K: write its centre")
    centre = start[0] + (block.number("I") or 0.0), start[1] + (block.number("K") or 0.0)
    first, last = math.dist(start, centre), math.dist(end, centre)
    tolerance = RADIUS_TOLERANCE[dialect.units]
    if abs(first - last) > tolerance * (1.0 + 1e-9):
        raise block.error(
            f"the arc's radii differ: {first:.{dialect.decimals}f} at its start and {last:.{dialect.decimals}f} at its "
            f"end, where {tolerance:g} {dialect.units} is allowed: a digit of X, Z, I or K may be wrong"
        )
    if not min(first, last):
        raise block.error("an arc of radius 0: write a line")
    angles = [math.atan2(point[0] - centre[0], point[1] - centre[1]) for point in (start, end)]
    swept = (angles[1] - angles[0] if counter_clockwise else angles[0] - angles[1]) % (2.0 * math.pi)
    if not swept:
        raise block.error("an arc whose ends lie in one direction from its centre is a full circle: write a line")
    return swept


def _turn_by_radius(start: Point, end: Point, block: TextBlock, dialect: Dialect) -> float:
    """Return the size of an arc's turn [rad], 0 to 2 pi, from its R: negative for the long way round."""
    radius = block.number("R")
    if not radius:
        raise block.error("an arc without R, or with R zero: write its radius")
    half = 0.5 * math.dist(start, end)
    if half > abs(radius) + RADIUS_TOLERANCE[dialect.units]:
        raise block.error(
            f"R = {radius:g} is too small for ends {2.0 * half:.{dialect.decimals}f} apart: "
            f"a digit of X, Z or R may be wrong"
        )
    turn = 2.0 * math.asin(min(1.0, half / abs(radius)))
    return turn if radius > 0.0 else 2.0 * math.pi - turn


def _sections(comments: list[tuple[int, str]]) -> tuple[Section, ...]:
    """Return the stretches between each comment (NAME) and the next (END NAME)."""
    started: dict[str, int] = {}
    found: list[Section] = []
    for line, text in comments:
        name = text.removeprefix("END ")
        if name != text and name in started:
            found.append(Section(name, started.pop(name), line))
        started[text] = line
    return tuple(found)


def _innermost(sections: tuple[Section, ...], line: int) -> str:
    """Return the name of the last section to start around a line, or an empty name."""
    around = [section for section in sections if section.first_line < line < section.last_line]
    return max(around, key=lambda section: section.first_line).name if around else ""
