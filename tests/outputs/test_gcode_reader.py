"""Reading turning programs: what is in force, sections, and one test for each fault planted in a good program."""

from __future__ import annotations

import math

import numpy as np
import pytest

from outputs.gcode_reader import Move, Replay, read_program
from outputs.gcode_words import Dialect
from profiles.errors import FormatError

CENTRE = Dialect("mm", "diameter", "G18", "G21", "none", "G99", "G50", "centre", 3)
RADIUS = Dialect("mm", "radius", "G18", "G21", "G90", "G95", "D", "radius", 3)
LINES = Dialect("inch", "radius", "none", "G70", "none", "G95", "none", "lines", 4)

CENTRE_TEXT = """(DEMO OF QUILLET BAY)
G18
G21
G40
G99
G50 S600
G97 S200
M3
G0 X0.000 Z5.000
G96 S180
(FINISH)
G1 X0.000 Z0.000 F0.1000
G3 X20.000 Z-10.000 I0.000 K-10.000 F0.2000
G2 X24.000 Z-12.000 I2.000 K0.000 F0.2000
(END FINISH)
G0 X50.000 Z5.000
G97 S50
M5
M30
"""
RADIUS_TEXT = """G18
G21
G90
G40
G95
G97 S200
M4
G96 S180 D600
G0 X0.000 Z0.000
G3 X10.000 Z-10.000 R10.000 F0.2000
G97 S50
M5
M30
"""
LINES_TEXT = """G70
G40
G95
G97 S200
M4
G0 X0.0000 Z0.0000
G1 X10.0000 Z-10.0000 F0.0200
G97 S50
M5
M30
"""


def moves_of(text: str, dialect: Dialect) -> tuple[Move, ...]:
    return read_program(text, dialect).moves


def test_a_program_is_replayed_in_full() -> None:
    replay = read_program(CENTRE_TEXT, CENTRE)
    rapid, line, male, _, away = replay.moves
    assert (rapid.kind, rapid.start, rapid.end, rapid.section) == ("rapid", None, (0.0, 5.0), "")
    assert (rapid.spindle_mode, rapid.spindle_speed, rapid.spindle_limit, rapid.spindle_direction) == (
        *("G97", 200.0, 600.0, "M3"),
    )
    assert (line.kind, line.start, line.end, line.bulge, line.feed) == ("feed", (0.0, 5.0), (0.0, 0.0), 0.0, 0.1)
    assert (line.spindle_mode, line.spindle_speed, line.line, line.section) == ("G96", 180.0, 12, "FINISH")
    assert male.end == (10.0, -10.0)
    assert male.bulge == pytest.approx(-math.tan(math.pi / 8.0), abs=1e-12)
    assert (away.kind, away.end, away.section) == ("rapid", (25.0, 5.0), "")
    assert replay.comments == ((1, "DEMO OF QUILLET BAY"), (11, "FINISH"), (15, "END FINISH"))


def test_a_section_is_its_cuts_as_a_path() -> None:
    replay = read_program(CENTRE_TEXT, CENTRE)
    path = replay.section("FINISH")
    assert path.vertices.tolist() == [[0.0, 5.0], [0.0, 0.0], [10.0, -10.0], [12.0, -12.0]]
    assert np.allclose(path.turns, [0.0, -math.pi / 2.0, math.pi / 2.0], atol=1e-12)
    assert [move.line for move in replay.moves_in("FINISH")] == [12, 13, 14]


def test_sections_may_stand_inside_each_other() -> None:
    text = CENTRE_TEXT.replace("G3 X20", "(DEEP)\nG3 X20").replace("G2 X24", "(END DEEP)\nG2 X24")
    moves = moves_of(text, CENTRE)
    assert [move.section for move in moves] == ["", "FINISH", "DEEP", "FINISH", ""]


def test_other_dialects_are_replayed() -> None:
    arc = moves_of(RADIUS_TEXT, RADIUS)[1]
    assert (arc.end, arc.spindle_limit, arc.spindle_direction) == ((10.0, -10.0), 600.0, "M4")
    assert 4.0 * math.atan(arc.bulge) == pytest.approx(-math.pi / 2.0, abs=1e-12)
    assert moves_of(LINES_TEXT, LINES)[1].end == (10.0, -10.0)


def test_words_stay_in_force_and_case_blanks_and_line_ends_do_not_matter() -> None:
    text = RADIUS_TEXT.replace("G3 X10.000 Z-10.000 R10.000 F0.2000", "N10 g01 x 1 .000 f0.2000\n\n\tZ-1.000 (CUT)")
    moves = moves_of(text.lower().replace("\n", "\r\n"), RADIUS)
    assert [(move.kind, move.end) for move in moves] == [
        *[("rapid", (0.0, 0.0)), ("feed", (1.0, 0.0)), ("feed", (1.0, -1.0))],
    ]
    assert moves[-1].feed == 0.2


def test_a_radius_too_small_by_rounding_is_a_half_circle() -> None:
    arc = moves_of(RADIUS_TEXT.replace("X10.000 Z-10.000 R10.000", "X0.000 Z-20.000 R9.999"), RADIUS)[1]
    assert arc.bulge == pytest.approx(-1.0, abs=1e-12)


def test_a_swapped_arc_word_is_the_long_way_round() -> None:
    text = CENTRE_TEXT.replace("G3 X20.000 Z-10.000", "G2 X20.000 Z-10.000")
    assert 4.0 * math.atan(moves_of(text, CENTRE)[2].bulge) == pytest.approx(1.5 * math.pi, abs=1e-12)
    small = CENTRE_TEXT.replace("G3 X20.000 Z-10.000 I0.000 K-10.000", "G2 X0.200 Z-0.001 I0.000 K-10.000")
    small = small.replace("G2 X24.000 Z-12.000 I2.000 K0.000", "G1 X24.000 Z-12.000")
    assert 4.0 * math.atan(moves_of(small, CENTRE)[2].bulge) > math.radians(300.0)


FAULTS = [
    # What the control must be told before it moves.
    ("G18\n", "", r"line 8: 'G0 X0.000 Z5.000': G18 is missing before the first move"),
    ("G21\n", "", r"'G0 X0.000 Z5.000': G21 is missing before the first move"),
    ("G40\n", "", r"'G0 X0.000 Z5.000': G40 is missing before the first move"),
    ("G99\n", "", r"'G0 X0.000 Z5.000': G99 is missing before the first move"),
    ("G18\n", "G17\n", r"line 2: 'G17': G17 is not what the dialect says, plane_word = 'G18'"),
    ("G21\n", "G20\n", r"line 3: 'G20': G20 is not what the dialect says, units_word = 'G21'"),
    ("G21\n", "G71\n", r"line 3: 'G71': G71 is not what the dialect says, units_word = 'G21'"),
    ("G99\n", "G98\n", r"line 5: 'G98': G98 is not what the dialect says, feed_per_rev_word = 'G99'"),
    ("G99\n", "G95\n", r"line 5: 'G95': G95 is not what the dialect says, feed_per_rev_word = 'G99'"),
    ("G99\n", "G99\nG91\n", r"line 6: 'G91': G91 is not what the dialect says, absolute_word = 'none'"),
    ("G96 S180\n", "G96 S180\nG18\n", r"line 11: 'G18': G18 comes after the first move"),
    # Words that mean something else, or nothing.
    ("G99\n", "G90\nG99\n", r"line 5: 'G90': G90 is a cutting cycle on a control with G99"),
    ("G50 S600", "G92 S600", r"line 6: 'G92 S600': G92 is a cutting cycle on a control with G99"),
    ("G0 X50", "G94 X50", r"'G94 X50.000 Z5.000': G94 is a cutting cycle on a control with G99"),
    ("G40", "G41", r"line 4: 'G41': G41 would compensate the nose a second time"),
    ("G40", "G42", r"line 4: 'G42': G42 would compensate the nose a second time"),
    ("M3\n", "M3\nM8\n", r"line 9: 'M8': M8 is an unknown word"),
    ("M3\n", "M3\nT0101\n", r"line 9: 'T0101': T0101 is an unknown word"),
    ("M3\n", "M3\nG28 U0.000\n", r"line 9: 'G28 U0.000': U0.000 is an unknown word"),
    ("M3\n", "M3\nG28\n", r"line 9: 'G28': G28 is an unknown word"),
    ("M3\n", "M3\nG92.1\n", r"line 9: 'G92.1': G92.1 is an unknown word"),
    ("G96 S180", "G96 S180 D600", r"line 10: 'G96 S180 D600': D600 is an unknown word"),
    ("M3\n", "/M3\n", r"line 8: '/M3': '/M3' is no word of a letter and a number"),
    ("M3\n", "M3 ; START\n", r"line 8: 'M3 ; START': .* is no word of a letter and a number"),
    ("M3\n", "M3\n%\n", r"line 9: '%': '%' is no word"),
    # Numbers.
    ("X20.000", "X20.00", r"line 13: .*: X20.00 is not written with exactly 3 digits after a decimal point"),
    ("X20.000", "X20000", r"line 13: .*: X20000 is not written with exactly 3 digits"),
    ("X20.000", "X.000", r"line 13: .*: X.000 is not written with exactly 3 digits .* and one or more before it"),
    ("X20.000", "X20.0000", r"line 13: .*: X20.0000 is not written with exactly 3 digits"),
    ("X20.000", "X2.0.000", r"line 13: .*: X2.0.000 is not written with exactly 3 digits"),
    ("X20.000", "X20,000", r"line 13: .*: ',000.* is no word"),
    ("X20.000", "X2.000E1", r"line 13: .*: E1: no number may have an exponent"),
    ("K-10.000", "K-10000", r"line 13: .*: K-10000 is not written with exactly 3 digits"),
    ("F0.2000", "F02000", r"line 13: .*: F02000 is not written with exactly 4 digits"),
    ("S180", "S18.0", r"line 10: .*: S18.0 is not written with a whole number"),
    ("X20.000", "X20.000 X20.000", r"line 13: .*: the letter X stands more than once"),
    # The order of words.
    ("G0 X50", "G0 G1 X50", r"line 16: .*: G0 and G1 are of one modal group \(motion\)"),
    ("M5\n", "M3 M5\n", r"line 18: 'M3 M5': M3 and M5 are of one modal group \(spindle\)"),
    ("M3\n", "M3 N20\n", r"line 8: 'M3 N20': N does not stand first"),
    ("M3\n", "N123456 M3\n", r"line 8: 'N123456 M3': N123456 is not written with one to five digits"),
    # Feed and spindle.
    (" F0.1000", "", r"line 12: 'G1 X0.000 Z0.000': a cut with no feed in force"),
    ("F0.1000", "F0.0000", r"line 12: .*: a cut with no feed in force"),
    ("M3\n", "", r"line 11: 'G1 X0.000 Z0.000 F0.1000': a cut with the spindle not running"),
    ("M3\n", "M3\nM5\n", r"line 13: .*: a cut with the spindle not running"),
    ("S180", "S0", r"line 12: .*: a cut with the spindle not running"),
    ("G97 S200\n", "", r"line 7: 'M3': M3 starts the spindle with no speed in force"),
    ("G50 S600\n", "", r"line 9: 'G96 S180': G96 with no spindle limit stated before it"),
    ("G50 S600\n", "G50 S0\n", r"line 10: 'G96 S180': G96 with no spindle limit stated before it"),
    ("G50 S600", "G50", r"line 6: 'G50': G50 without S"),
    ("G50 S600", "G50 X0.000 S600", r"line 6: .*: G50 with coordinates shifts the work zero"),
    ("G50 S600", "S600", r"line 6: 'S600': S without G96 or G97 in force"),
    # Motion.
    (
        "G0 X0.000 Z5.000",
        "G1 X0.000 Z5.000 F0.1000",
        r"line 9: .*: the first move must be a rapid G0 with both X and Z",
    ),
    ("G0 X0.000 Z5.000", "G0 X0.000", r"line 9: 'G0 X0.000': the first move must be a rapid G0 with both X and Z"),
    ("G0 X0.000 Z5.000", "X0.000 Z5.000", r"line 9: .*: the first move must be a rapid"),
    ("G1 X0.000 Z0.000", "G1", r"line 12: 'G1 F0.1000': a motion with neither X nor Z"),
    ("K-10.000", "K-10.003", r"line 13: .*: the arc's radii differ: 10.003 at its start .* 0.002 mm is allowed"),
    ("I0.000 K-10.000", "", r"line 13: .*: an arc with neither I nor K"),
    ("I0.000 K-10.000", "R10.000", r"line 13: .*: G3 with R, where the dialect has arcs = 'centre'"),
    ("G3 X20.000 Z-10.000 I", "G1 X20.000 Z-10.000 I", r"line 13: .*: G1 with I or K or R"),
    ("X20.000 Z-10.000 I", "X0.000 Z0.000 I", r"line 13: .*: an arc that ends where it starts is a full circle"),
    ("X20.000 Z-10.000 I", "X0.000 Z-0.001 I", r"line 13: .*: .* in one direction from its centre is a full circle"),
    ("I2.000 K0.000", "I0.001 K0.000", r"line 14: .*: the arc's radii differ"),
    # The text.
    ("(FINISH)", "((FINISH))", r"line 11: '\(\(FINISH\)\)': a comment's brackets are nested, or not closed"),
    ("(FINISH)", "(FINISH", r"line 11: .*: a comment's brackets are nested, or not closed"),
    ("(FINISH)", "FINISH)", r"line 11: .*: a comment's brackets are nested, or not closed"),
    ("(FINISH)", "(FINISH Ø)", r"line 11: .*: the character 'Ø' is not plain ASCII"),
    ("(FINISH)", "(FINISH\0)", r"line 11: .*: the character '\\x00' is not plain ASCII"),
    ("(FINISH)", f"({'X' * 255})", r"line 11: .*: 257 characters, where a line may have 256"),
    # The end.
    ("M5\nM30\n", "M5\n", r"line 19: the program stops without M30"),
    ("M30\n", "M30\nM5\n", r"line 20: 'M5': text after M30"),
    ("M30\n", "M30\n(BYE)\n", r"line 20: '\(BYE\)': text after M30"),
    ("M5\n", "", r"line 18: 'M30': M30 comes while the spindle runs or G96 is in force"),
    ("G97 S50\n", "", r"line 18: 'M30': M30 comes while the spindle runs or G96 is in force"),
]


@pytest.mark.parametrize(("before", "after", "message"), FAULTS)
def test_a_planted_fault_is_found(before: str, after: str, message: str) -> None:
    assert before in CENTRE_TEXT
    with pytest.raises(FormatError, match=message):
        read_program(CENTRE_TEXT.replace(before, after, 1), CENTRE)


OTHER_FAULTS = [
    (RADIUS, RADIUS_TEXT, "G90\n", "", r"G90 is missing before the first move"),
    (RADIUS, RADIUS_TEXT, "G90\n", "G91\n", r"G91 is not what the dialect says, absolute_word = 'G90'"),
    (RADIUS, RADIUS_TEXT, "G95\n", "G94\n", r"G94 is not what the dialect says, feed_per_rev_word = 'G95'"),
    (RADIUS, RADIUS_TEXT, " D600", "", r"'G96 S180': G96 with no spindle limit stated before it"),
    (RADIUS, RADIUS_TEXT, "G97 S200", "G97 S200 D600", r"D limits the spindle beside G96 only"),
    (RADIUS, RADIUS_TEXT, "G97 S200", "G50 S200", r"G50 is not what the dialect says, spindle_limit_word = 'D'"),
    (RADIUS, RADIUS_TEXT, "R10.000", "I0.000 K-10.000", r"G3 with I or K, where the dialect has arcs = 'radius'"),
    (RADIUS, RADIUS_TEXT, " R10.000", "", r"an arc without R, or with R zero"),
    (RADIUS, RADIUS_TEXT, "R10.000", "R0.000", r"an arc without R, or with R zero"),
    (RADIUS, RADIUS_TEXT, "R10.000", "R1.000", r"R = 1 is too small for ends 14.142 apart"),
    (LINES, LINES_TEXT, "G1 X", "G2 X", r"G2 is an arc, where the dialect has arcs = 'lines'"),
    (LINES, LINES_TEXT, "G97 S200", "G96 S200", r"G96 would run without a limit.*spindle_limit_word = 'none'"),
    (LINES, LINES_TEXT, "G70\n", "G20\n", r"G20 is not what the dialect says, units_word = 'G70'"),
    (LINES, LINES_TEXT, "G70\n", "G70\nG18\n", r"G18 is not what the dialect says, plane_word = 'none'"),
]


@pytest.mark.parametrize(("dialect", "text", "before", "after", "message"), OTHER_FAULTS)
def test_a_fault_planted_for_another_dialect_is_found(
    dialect: Dialect, text: str, before: str, after: str, message: str
) -> None:
    assert read_program(text, dialect).moves
    with pytest.raises(FormatError, match=message):
        read_program(text.replace(before, after, 1), dialect)


@pytest.mark.parametrize("text", ["", "\n\n", "G18\nG21\nG40\nG99\nG97 S50\nM5\nM30\n"])
def test_a_program_without_moves_is_refused(text: str) -> None:
    with pytest.raises(FormatError, match="the program has no move at all"):
        read_program(text, CENTRE)


SECTION_FAULTS = [
    ("(END FINISH)\n", "", r"1 comments \(FINISH\) and 0 ended by \(END FINISH\)"),
    ("(FINISH)\n", "", r"0 comments \(FINISH\) and 0 ended"),
    ("(FINISH)\n", "(FINISH)\n(END FINISH)\n(FINISH)\n", r"2 comments \(FINISH\) and 2 ended"),
    ("(FINISH)\n", "(FINISH)\n(FINISH)\n", r"2 comments \(FINISH\) and 1 ended"),
    ("(FINISH)\n", "(FINISH)\n(END FINISH)\n(REST)\n", r"nothing is cut between \(FINISH\) and \(END FINISH\)"),
    ("G2 X24", "G0 X30.000 Z-10.000\nG2 X34", r"line 15: the cut of section FINISH starts at \(15.0, -10.0\)"),
]


@pytest.mark.parametrize(("before", "after", "message"), SECTION_FAULTS)
def test_a_broken_section_is_refused(before: str, after: str, message: str) -> None:
    replay = read_program(CENTRE_TEXT.replace(before, after, 1), CENTRE)
    assert isinstance(replay, Replay)
    with pytest.raises(FormatError, match=message):
        replay.section("FINISH")
