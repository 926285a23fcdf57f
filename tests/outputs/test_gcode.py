"""Writing turning programs: every dialect, round trips, an independent reader, and what the writer refuses."""

from __future__ import annotations

import itertools
import math
import re

import numpy as np
import pytest
from gcodeparser import parse_gcode_lines
from hypothesis import given
from hypothesis import strategies as st

from outputs.gcode import (
    Comment,
    Dialect,
    Feed,
    Program,
    ProgramStop,
    Rapid,
    SpindleLimit,
    SpindleSpeed,
    SpindleStart,
    SpindleStop,
    SurfaceSpeed,
    comment_lines,
    write_program,
)
from outputs.gcode_reader import Move, read_program
from profiles.arcpath import ArcPath
from profiles.errors import FormatError

METRIC = {
    "units": "mm",
    "x_word": "diameter",
    "plane_word": "G18",
    "units_word": "G21",
    "absolute_word": "none",
    "feed_per_rev_word": "G99",
    "spindle_limit_word": "G50",
    "arcs": "centre",
    "decimals": 4,
}
UNIT_CHOICES = [("mm", word, count) for word in ("G21", "G71", "none") for count in (3, 4, 6)]
UNIT_CHOICES += [("inch", word, count) for word in ("G20", "G70", "none") for count in (4, 5, 6)]
COMBINATIONS = [
    Dialect(units, x_word, plane, units_word, absolute, feed, limit, arcs, decimals)  # type: ignore[arg-type]
    for (units, units_word, decimals), x_word, plane, (absolute, feed), limit, arcs in itertools.product(
        UNIT_CHOICES,
        ("diameter", "radius"),
        ("G18", "none"),
        (("none", "G99"), ("none", "G95"), ("G90", "G95")),
        ("G50", "G92", "D", "none"),
        ("centre", "radius", "lines"),
    )
]
SHORT_CHORD = {"mm": 0.05, "inch": 0.002}


def dialect(**changes: object) -> Dialect:
    return Dialect(**(METRIC | changes))  # type: ignore[arg-type]


def spindle(control: Dialect) -> tuple[object, ...]:
    speed = SpindleSpeed(300.0) if control.spindle_limit_word == "none" else SurfaceSpeed(180.0, 600.0)
    return SpindleLimit(600.0), SpindleSpeed(200.0), SpindleStart("M3"), speed


def program(control: Dialect, *blocks: object) -> Program:
    return Program(control, (*spindle(control), *blocks))  # type: ignore[arg-type]


def text_of(control: Dialect, *blocks: object) -> str:
    return write_program(program(control, *blocks))


def unit_of(control: Dialect) -> tuple[float, float]:
    """Half a unit of the last digit, as a radius and as a height."""
    half = 0.5 * 10.0**-control.decimals * (1.0 + 1e-9)
    return half / (2.0 if control.x_word == "diameter" else 1.0) + 1e-12, half + 1e-12


def check_end(control: Dialect, move: Move, wanted: Feed | Rapid) -> None:
    across, along = unit_of(control)
    assert abs(move.end[0] - wanted.radius) <= across
    assert abs(move.end[1] - wanted.height) <= along


def check_cut(control: Dialect, start: tuple[float, float], wanted: Feed, moves: list[Move]) -> None:
    """A cut and the stretches written for it: ends, turn, and every point within a few units of the last digit."""
    check_end(control, moves[-1], wanted)
    arc = ArcPath(np.array([start, (wanted.radius, wanted.height)]), np.array([wanted.bulge]))
    points = arc.along(0, np.linspace(0.0, 1.0, 4001))
    tolerance = 6.0 * 10.0**-control.decimals + arc.lengths[0] / 8000.0
    for move in moves:
        path = ArcPath(np.array([move.start, move.end]), np.array([move.bulge]))
        if abs(arc.turns[0]) >= 1.0001e-4 and math.dist(*path.vertices) >= SHORT_CHORD[control.units]:
            assert move.bulge * wanted.bulge > 0.0
            middle = path.along(0, np.array([0.5]))
            assert np.hypot(*(points - middle).T).min() < tolerance
    if abs(arc.turns[0]) >= 1.0001e-4 and math.dist(*arc.vertices) > 1.0:
        turn = sum(4.0 * math.atan(move.bulge) for move in moves)
        assert turn == pytest.approx(arc.turns[0], abs=20.0 * 10.0**-control.decimals)


@st.composite
def programs(draw: st.DrawFn) -> Program:
    """Give programs of cuts whose feeds tell them apart."""
    control = draw(st.sampled_from(COMBINATIONS))
    place = st.floats(-200.0, 200.0).map(lambda value: round(value, 7))
    bulge = st.just(0.0) if control.arcs == "lines" else st.floats(-2.4, 2.4)
    ends = draw(st.lists(st.tuples(place, place, bulge), min_size=1, max_size=8))
    cuts = [Feed(u, v, b, 0.1 + 0.001 * index) for index, (u, v, b) in enumerate(ends)]
    return program(control, Rapid(draw(place), draw(place)), *cuts)


def last_position(made: Program) -> tuple[float, float]:
    rapid = next(block for block in made.blocks if isinstance(block, Rapid))
    return rapid.radius, rapid.height


@given(programs())
def test_round_trip_keeps_ends_and_arcs(made: Program) -> None:
    replay = read_program(write_program(made), made.dialect)
    start = last_position(made)
    check_end(made.dialect, replay.moves[0], Rapid(*start))
    for wanted in (block for block in made.blocks if isinstance(block, Feed)):
        moves = [move for move in replay.moves if move.kind == "feed" and abs(move.feed - wanted.feed) < 1e-6]  # type: ignore[operator]
        if moves:
            check_cut(made.dialect, start, wanted, moves)
        else:
            across, along = unit_of(made.dialect)
            assert abs(wanted.radius - start[0]) <= 2.0 * across
            assert abs(wanted.height - start[1]) <= 2.0 * along
        start = wanted.radius, wanted.height
    for before, after in itertools.pairwise(replay.moves):
        assert before.end == after.start


@given(programs())
def test_an_independent_reader_sees_the_same_words_and_ends(made: Program) -> None:
    text = write_program(made)
    lines = [line for line in text.splitlines() if not line.startswith("(")]
    parsed = list(parse_gcode_lines("\n".join(lines)))
    assert len(parsed) == len(lines)
    factor = 2.0 if made.dialect.x_word == "diameter" else 1.0
    moves = iter(read_program(text, made.dialect).moves)
    for line, block in zip(lines, parsed, strict=True):
        first, *others = line.split()
        assert block.command_str == first
        assert block.params == {word[0]: pytest.approx(float(word[1:]), abs=0.0) for word in others}
        if first in {"G0", "G1", "G2", "G3"}:
            move = next(moves)
            assert (block.get_param("X"), block.get_param("Z")) == (factor * move.end[0], move.end[1])
            assert block.get_param("F") == (move.feed if move.kind == "feed" else None)
    assert next(moves, None) is None


def test_every_dialect_writes_what_it_reads() -> None:
    cuts = [(40.0, -3.0, 0.05), (60.0, -3.0, -0.4), (60.0, -30.0, 0.9), (61.0, -30.5, 0.0)]
    for control in COMBINATIONS:
        blocks = [Feed(u, v, 0.0 if control.arcs == "lines" else b, 0.15) for u, v, b in cuts]
        made = program(control, Rapid(1.0, 2.0), Comment("finish"), *blocks, Comment("end finish"), Rapid(70.0, 9.0))
        path = read_program(write_program(made), control).section("FINISH")
        assert np.abs(path.vertices[-1] - (61.0, -30.5)).max() < 1e-9
        assert path.turns.sum() == pytest.approx(sum(4.0 * math.atan(block.bulge) for block in blocks), abs=1e-3)


def test_program_text_is_what_a_turner_would_write() -> None:
    made = program(
        dialect(),
        ProgramStop(),
        Rapid(0.0, 5.0),
        Comment("Finish"),
        Feed(0.0, 0.0, 0.0, 0.1),
        Feed(10.0, -10.0, -math.tan(math.pi / 8.0), 0.1),
        Comment("End finish"),
        SpindleStop(),
    )
    assert write_program(made).splitlines() == [
        *["G18", "G21", "G40", "G99", "G50 S600", "G97 S200", "M3", "G96 S180", "M0", "G0 X0.0000 Z5.0000"],
        *["(FINISH)", "G1 X0.0000 Z0.0000 F0.1000", "G3 X20.0000 Z-10.0000 I0.0000 K-10.0000 F0.1000"],
        *["(END FINISH)", "M5", "G97 S50", "M5", "M30"],
    ]


def test_writing_twice_gives_the_same_text() -> None:
    made = program(dialect(), Rapid(0.1, 0.2), Feed(3.0, 4.0, 0.3, 0.1))
    assert write_program(made) == write_program(made)


@given(
    st.floats(0.06, 300.0),
    st.floats(0.0, 2.0 * math.pi),
    st.floats(1e-3, 2.4),
    st.sampled_from([("mm", 3), ("inch", 4)]),
)
def test_written_radii_agree_within_the_strictest_limit(
    chord: float, angle: float, bulge: float, coarse: tuple[str, int]
) -> None:
    control = dialect(units=coarse[0], units_word="none", decimals=coarse[1], x_word="radius")
    end = chord * math.cos(angle), chord * math.sin(angle)
    line = next(row for row in text_of(control, Rapid(0.0, 0.0), Feed(*end, bulge, 0.1)).splitlines() if " F" in row)
    words = {word[0]: float(word[1:]) for word in line.split()}
    radii = math.hypot(words["I"], words["K"]), math.hypot(words["X"] - words["I"], words["Z"] - words["K"])
    assert abs(radii[0] - radii[1]) <= {"mm": 0.0015, "inch": 0.00015}[coarse[0]]


@pytest.mark.parametrize(("units", "short"), [("mm", 0.049), ("inch", 0.0019)])
def test_short_and_nearly_straight_arcs_are_lines(units: str, short: float) -> None:
    control = dialect(units=units, units_word="none")
    assert "G1 X" in text_of(control, Rapid(0.0, 0.0), Feed(short, 0.0, 0.1, 0.1))
    assert "G2 X" in text_of(control, Rapid(0.0, 0.0), Feed(1.1 * short, 0.0, 0.1, 0.1))
    assert "G1 X" in text_of(control, Rapid(0.0, 0.0), Feed(30.0, 0.0, 2.4e-5, 0.1))
    assert "G2 X" in text_of(control, Rapid(0.0, 0.0), Feed(30.0, 0.0, 2.6e-5, 0.1))


def test_moves_that_rounding_makes_empty_are_left_out() -> None:
    text = text_of(dialect(decimals=3), Rapid(1.0, 1.0), Rapid(1.0001, 1.0004), Feed(1.0002, 1.0, 0.0, 0.1))
    assert text.count("G0") == 1
    assert "G1 " not in text


def test_no_minus_zero_is_written() -> None:
    assert "-0.000" not in text_of(dialect(decimals=3), Rapid(-0.0001, -0.0004), Feed(5.0, -0.0, 0.0, 0.1))


def test_radius_words_come_in_parts_under_150_degrees() -> None:
    text = text_of(dialect(arcs="radius"), Rapid(10.0, 0.0), Feed(-10.0, 0.0, 1.0, 0.1))
    assert re.findall(r"R\S+", text) == ["R10.0000", "R10.0000"]
    for degrees, count in ((149.0, 1), (151.0, 2), (270.0, 2)):
        cut = Feed(0.0, 0.0, math.tan(math.radians(degrees) / 4.0), 0.1)
        assert text_of(dialect(arcs="radius"), Rapid(9.0, 0.0), cut).count(" R") == count


@pytest.mark.parametrize(
    ("limit_word", "line"),
    [("G50", "G50 S600\nG97 S200\nM3\nG96 S180\n"), ("G92", "G92 S600\n"), ("D", "G96 S180 D600\n")],
)
def test_each_limit_word_stands_where_its_control_wants_it(limit_word: str, line: str) -> None:
    assert line in text_of(dialect(spindle_limit_word=limit_word, feed_per_rev_word="G95"), Rapid(1.0, 1.0))


def test_a_lower_limit_is_stated_before_its_surface_speed() -> None:
    text = text_of(dialect(), SurfaceSpeed(100.0, 400.0), Rapid(1.0, 1.0))
    assert "G96 S180\nG50 S400\nG96 S100\n" in text


def test_speeds_are_rounded_down_and_the_end_keeps_the_limit() -> None:
    blocks = (SpindleLimit(40.9), SpindleSpeed(30.999), Rapid(0.0, 0.0))
    text = write_program(Program(dialect(), blocks))
    assert "G50 S40\nG97 S30\n" in text
    assert text.endswith("G97 S40\nM5\nM30\n")


@pytest.mark.parametrize(
    ("text", "lines"),
    [
        ("", []),
        ("Kübel (innen); 5 % Ø 3±1 °", ["(KUBEL INNEN , 5 PERCENT O 3+/-1 DEG)"]),
        ("a\nb\tc\x00d", ["(A B C?D)"]),
        ("\uff08wide\uff09 \N{SNOWMAN} straße", ["( WIDE ? STRASSE)".replace("( ", "(")]),
    ],
)
def test_comments_are_plain_capitals(text: str, lines: list[str]) -> None:
    assert comment_lines(text) == lines


@given(st.text(max_size=400))
def test_no_comment_can_harm_a_program(text: str) -> None:
    for line in comment_lines(text):
        assert len(line) <= 100
        assert re.fullmatch(r"\([ -~]+\)", line)
        assert not set(line[1:-1]) & set("()%;abcdefghijklmnopqrstuvwxyz")
    replay = read_program(text_of(dialect(), Comment(text), Rapid(1.0, 1.0)), dialect())
    assert len(replay.moves) == 1


DIALECT_REFUSALS = [
    ({"units_word": "G20"}, r"units_word = 'G20' contradicts units = 'mm': allowed with it are 'G21', 'G71', 'none'"),
    ({"units_word": "G70"}, r"units_word = 'G70' contradicts units = 'mm'"),
    ({"units": "inch"}, r"units_word = 'G21' contradicts units = 'inch': allowed with it are 'G20', 'G70', 'none'"),
    ({"absolute_word": "G90"}, r"absolute_word = 'G90' contradicts feed_per_rev_word = 'G99'.*cutting cycle"),
    ({"decimals": 2}, r"decimals = 2 is not allowed.*from 3 to 6"),
    ({"decimals": 7}, r"decimals = 7 is not allowed.*from 3 to 6"),
    ({"decimals": True}, r"decimals = True is not allowed"),
    ({"decimals": 4.0}, r"decimals = 4.0 is not allowed"),
    ({"units": "inch", "units_word": "G20", "decimals": 3}, r"decimals = 3 is not allowed.*from 4 to 6"),
    ({"plane_word": "G17"}, r"plane_word: value is 'G17'; allowed: 'G18', 'none'; do: state one"),
    ({"arcs": "bulge"}, r"arcs: value is 'bulge'; allowed: 'centre', 'radius', 'lines'; do: state one"),
]


@pytest.mark.parametrize(("changes", "message"), DIALECT_REFUSALS)
def test_contradicting_dialects_are_refused(changes: dict[str, object], message: str) -> None:
    assert dialect().decimals == 4
    with pytest.raises(FormatError, match=message):
        dialect(**changes)


WRITER_REFUSALS = [
    ({}, lambda: [Feed(1.0, 1.0, 0.0, 0.1)], r"the first move is a cut to radius 1, height 1.*begin with a rapid"),
    (
        {"arcs": "lines"},
        lambda: [Rapid(0.0, 0.0), Feed(1.0, 1.0, 0.1, 0.1)],
        r"bulge 0.1 is not allowed with arcs = 'l",
    ),
    ({"spindle_limit_word": "none"}, lambda: [SurfaceSpeed(180.0, 600.0)], r"surface speed of 180 .* step the speed"),
    ({}, lambda: [SpindleSpeed(601.0)], r"spindle speed of 601 rev/min is over the limit of 600 rev/min in force"),
    ({}, lambda: [SurfaceSpeed(180.0, 700.0)], r"speed limit of 700 rev/min is over the limit of 600 rev/min"),
    ({}, lambda: ["G28"], r"'G28' is not a block of a turning program"),
    ({}, lambda: [Rapid(math.nan, 0.0)], r"radius of nan is not allowed: it must lie within ±99999"),
    ({}, lambda: [Rapid(0.0, 1e6)], r"height of 1000000.0 is not allowed"),
    ({}, lambda: [Feed(0.0, 0.0, 0.0, 0.00004)], r"feed of 4e-05 per revolution is not allowed: it must be 0.0001"),
    ({}, lambda: [Feed(0.0, 0.0, 0.0, math.inf)], r"feed of inf per revolution is not allowed"),
    ({}, lambda: [Feed(0.0, 0.0, 3.0, 0.1)], r"bulge 3.0 turns by more than 270 degrees.*two arcs"),
    ({}, lambda: [Feed(0.0, 0.0, math.nan, 0.1)], r"bulge nan turns by more"),
    ({}, lambda: [SpindleSpeed(0.0)], r"spindle speed of 0.0 rev/min is not allowed"),
    ({}, lambda: [SpindleLimit(math.inf)], r"spindle limit of inf rev/min is not allowed"),
    ({}, lambda: [SurfaceSpeed(0.5, 600.0)], r"surface speed of 0.5 m/min or ft/min is not allowed"),
    ({}, lambda: [SpindleStart("M5")], r"spindle direction: value is 'M5'; allowed: 'M3', 'M4'; do: state one"),  # type: ignore[arg-type]
]


@pytest.mark.parametrize(("changes", "blocks", "message"), WRITER_REFUSALS)
def test_the_writer_refuses(changes: dict[str, object], blocks: object, message: str) -> None:
    with pytest.raises(FormatError, match=message):
        text_of(dialect(**changes), *blocks())  # type: ignore[operator]
