"""The turning program's grammar and arcs against NISTIR 6556.

T. R. Kramer, F. M. Proctor, E. Messina, "The NIST RS274NGC Interpreter - Version 3", NISTIR 6556, 17 August 2000.
The report is about machining centres: its worked arcs in the XY plane are typed here in the XZ plane with X for Z and
Y for X, because both planes are right-handed seen from the positive end of their normal (§3.5.3, §4.3.6.1).
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from outputs.gcode import Feed, Program, Rapid, SpindleSpeed, SpindleStart, write_program
from outputs.gcode_reader import Move, read_program
from outputs.gcode_words import Dialect
from profiles.arcpath import ArcPath
from profiles.errors import FormatError

START = "G18 G21 G90 G40 G95\nG97 S100 M3\n"
END = "G97 S50\nM5\nM30\n"


def control(arcs: str, *, units: str = "mm", decimals: int = 4) -> Dialect:
    word = {"mm": "G21", "inch": "G20"}[units]
    return Dialect(units, "radius", "G18", word, "G90", "G95", "G92", arcs, decimals)  # type: ignore[arg-type]


def run(*lines: str, arcs: str = "centre", units: str = "mm") -> tuple[Move, ...]:
    start = START if units == "mm" else START.replace("G21", "G20")
    return read_program(start + "\n".join(lines) + "\n" + END, control(arcs, units=units)).moves


def arc(*lines: str, arcs: str = "centre", units: str = "mm") -> ArcPath:
    last = run(*lines, arcs=arcs, units=units)[-1]
    return ArcPath(np.array([last.start, last.end]), np.array([last.bulge]))


def test_worked_example_of_the_centre_format_3_5_3_2() -> None:
    """``G17 G2 x10 y16 i3 j4`` from X7 Y7: centre (10, 11), radius 5; the clockwise sweep is 2 atan(3)."""
    path = arc("G0 Z7.0000 X7.0000", "G2 Z10.0000 X16.0000 K3.0000 I4.0000 F0.1000")
    assert path.centres[0] == pytest.approx((11.0, 10.0), abs=1e-12)
    assert 1.0 / path.curvatures[0] == pytest.approx(5.0, abs=1e-12)
    assert math.degrees(path.turns[0]) == pytest.approx(math.degrees(2.0 * math.atan(3.0)), abs=1e-9)


def test_worked_example_of_the_radius_format_3_5_3_1() -> None:
    """``G17 G2 x10 y15 r20`` from (0, 0): half the chord is half the square root of 325."""
    path = arc("G0 Z0.0000 X0.0000", "G2 Z10.0000 X15.0000 R20.0000 F0.1000", arcs="radius")
    half = 0.5 * math.sqrt(325.0)
    aside = math.sqrt(20.0**2 - half**2) / (2.0 * half)
    assert path.centres[0] == pytest.approx((7.5 - 10.0 * aside, 5.0 + 15.0 * aside), abs=1e-9)
    assert path.turns[0] == pytest.approx(2.0 * math.asin(half / 20.0), abs=1e-12)


@pytest.mark.parametrize(("word", "degrees"), [("G3", -90.0), ("G2", 270.0)])
def test_sign_rule_of_the_xz_plane_4_3_6_1(word: str, degrees: float) -> None:
    """From Z10 X0 to Z0 X10 about the origin: G3 sweeps 90 degrees, G2 270; in (radius, Z) G3 turns right."""
    path = arc("G0 Z10.0000 X0.0000", f"{word} Z0.0000 X10.0000 I0.0000 K-10.0000 F0.1000")
    assert math.degrees(path.turns[0]) == pytest.approx(degrees, abs=1e-9)
    assert path.centres[0] == pytest.approx((0.0, 0.0), abs=1e-9)


@pytest.mark.parametrize(("side", "word"), [(-1.0, "G3"), (1.0, "G2")])
@pytest.mark.parametrize("arcs", ["centre", "radius"])
def test_male_moulds_are_cut_with_g3_and_female_ones_with_g2(side: float, word: str, arcs: str) -> None:
    """From the axis outwards along z = side r**2 / (4 f), f = 100: by the direction rule of §3.5.3."""
    radii = np.linspace(0.0, 100.0, 6)
    heights = side * radii**2 / 400.0
    # The bulge of an arc tangent to the parabola on the average: half the change of slope angle, over two.
    slopes = np.arctan(side * radii / 200.0)
    bulges = np.tan(np.diff(slopes) / 4.0)
    cuts = [Feed(u, v, b, 0.1) for u, v, b in zip(radii[1:], heights[1:], bulges, strict=True)]
    blocks = (SpindleSpeed(100.0), SpindleStart("M3"), Rapid(0.0, 0.0), *cuts)
    text = write_program(Program(control(arcs), blocks))
    assert [line[:2] for line in text.splitlines() if " F" in line] == [word] * 5
    replayed = read_program(text, control(arcs)).moves[1:]
    for move, before, after in zip(replayed, radii[:-1], radii[1:], strict=True):
        path = ArcPath(np.array([move.start, move.end]), np.array([move.bulge]))
        middle = path.along(0, np.array([0.5]))[0]
        assert before < middle[0] < after
        # An arc the wrong way round would stray by twice the chord's sagitta, 20**2 / (8 * 200) = 0.25 or less.
        assert middle[1] == pytest.approx(side * middle[0] ** 2 / 400.0, abs=0.01)


@pytest.mark.parametrize(("units", "good", "bad"), [("mm", "10.0020", "10.0021"), ("inch", "10.0002", "10.0003")])
def test_radii_may_differ_by_0_002_mm_or_0_0002_inch_3_5_3_2(units: str, good: str, bad: str) -> None:
    lines = "G0 Z10.0000 X0.0000", "G3 Z0.0000 X{} I0.0000 K-10.0000 F0.1000"
    assert run(lines[0], lines[1].format(good), units=units)
    with pytest.raises(FormatError, match=f"the arc's radii differ: 10.0000 at its start and {bad} at its end"):
        run(lines[0], lines[1].format(bad), units=units)


@pytest.mark.parametrize("degrees", [10.0, 48.9396, 90.0, 180.0, 250.0])
@pytest.mark.parametrize("angle", [0.0, 0.3, 0.785, 1.4])
def test_coarse_digits_keep_written_arcs_inside_the_limit_3_5_3_2(degrees: float, angle: float) -> None:
    """With the centre worked out from rounded ends the radii differ by at most 0.0005 sqrt(2) 2 sin(turn / 2)."""
    coarse = control("centre", decimals=3)
    for radius in (1.2345, 12.34567, 123.456789):
        start = radius * math.sin(angle), radius * math.cos(angle)
        end = radius * math.sin(angle + math.radians(degrees)), radius * math.cos(angle + math.radians(degrees))
        blocks = (
            *(SpindleSpeed(100.0), SpindleStart("M3"), Rapid(*start)),
            Feed(*end, -math.tan(math.radians(degrees) / 4.0), 0.1),
        )
        text = write_program(Program(coarse, blocks))
        rapid, cut = (
            {word[0]: float(word[1:]) for word in line.split()}
            for line in text.splitlines()
            if line[:3] in {"G0 ", "G3 "}
        )
        centre = rapid["X"] + cut["I"], rapid["Z"] + cut["K"]
        difference = abs(math.hypot(cut["I"], cut["K"]) - math.dist((cut["X"], cut["Z"]), centre))
        assert difference <= 0.0005 * math.sqrt(2.0) * 2.0 * math.sin(math.radians(min(degrees, 180.0)) / 2.0) + 1e-5
        assert difference < 0.002
        assert read_program(text, coarse).moves[1].bulge < 0.0


@pytest.mark.parametrize(("radius", "degrees"), [("10.0000", 60.0), ("-10.0000", 300.0)])
def test_a_negative_radius_goes_the_long_way_3_5_3_1(radius: str, degrees: float) -> None:
    path = arc("G0 Z0.0000 X0.0000", f"G2 Z10.0000 X0.0000 R{radius} F0.1000", arcs="radius")
    assert math.degrees(path.turns[0]) == pytest.approx(degrees, abs=1e-9)


def test_spaces_and_case_3_3() -> None:
    """``g0x +0. 12 34y 7`` means ``g0 x+0.1234 y7``; the reader asks for the second number's digits too."""
    assert run("g0x +0. 12 34z 7.0 000")[0].end == (0.1234, 7.0)


REFUSALS = [
    ("(" + "A" * 255 + ")", r"257 characters, where a line may have 256"),  # §3.3
    ("N000009 G0 X0.0000 Z0.0000", r"N000009 is not written with one to five digits"),  # §3.3.1
    ("G0 X1.0000E2 Z0.0000", r"E2: no number may have an exponent"),  # §3.3.2.1
    ("G0 X1.00.00 Z0.0000", r"X1.00.00 is not written with exactly 4 digits"),  # §3.3.2.1
    ("G0 X1.0000 W0.0000", r"W0.0000 is an unknown word"),  # Table 3
    ("G0 X1.0000 Z0.0000 (A (B))", r"brackets are nested"),  # §3.3.4
    ("G0 X1.0000 Z0.0000 (A", r"not closed on its line"),  # §3.3.4
    ("G0 X1.0000 Z0.0000 ; A", r"is no word of a letter and a number"),  # §3.3.4
    ("G0 X1.0000 X1.0000 Z0.0000", r"the letter X stands more than once"),  # §3.3.5
    ("G0 G1 X1.0000 Z0.0000", r"G0 and G1 are of one modal group"),  # §3.3.5, Table 4
    ("M3 M5", r"M3 and M5 are of one modal group"),  # §3.3.5, Table 4
    ("G0", r"a motion with neither X nor Z"),  # §3.5.1
    ("G41 G0 X1.0000 Z0.0000", r"G41 would compensate the nose"),  # §3.5.10: an error outside the XY plane
    ("%", r"'%' is no word"),  # §3.1: without its twin
]


@pytest.mark.parametrize(("line", "message"), REFUSALS)
def test_what_the_grammar_forbids_is_refused(line: str, message: str) -> None:
    with pytest.raises(FormatError, match=message):
        run(line, "G0 X0.0000 Z0.0000")


def test_what_the_grammar_allows_is_read() -> None:
    """A longest line of 256 characters, line numbers out of order and repeated (§3.3.1), the order of Table 8."""
    moves = run("(" + "A" * 254 + ")", "N99999 G0 X0.0000 Z0.0000", "N1 X1.0000 (A) G1 (B) Z0.0000 F0.1000", "N1")
    assert [move.kind for move in moves] == ["rapid", "feed"]
    assert moves[1].feed == 0.1


@pytest.mark.parametrize("missing", [("G3 I0.0000 K-1.0000", "neither X nor Z"), ("G3 X1.0000", "neither I nor K")])
def test_an_arc_needs_an_end_and_a_centre_3_5_3_2(missing: tuple[str, str]) -> None:
    with pytest.raises(FormatError, match=missing[1]):
        run("G0 X0.0000 Z0.0000", f"{missing[0]} F0.1000")
