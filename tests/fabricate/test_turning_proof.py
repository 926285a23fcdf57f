"""Faults planted in good programs, one at a time: each must be found, by what it is."""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import cache
from importlib.resources import files

import pytest

from fabricate.chain import Chain
from fabricate.job import Job, parse_job
from fabricate.mould import Mould
from fabricate.turning import plan_turning
from fabricate.turning_proof import prove_turning
from outputs.gcode import write_program
from profiles.arcs import fewest_arcs

HEATER = files("fabricate").joinpath("demo/terrace-heater.toml").read_text(encoding="utf-8")
LAMP = files("fabricate").joinpath("demo/lamp.toml").read_text(encoding="utf-8")
BOWL = files("fabricate").joinpath("demo/display-bowl.toml").read_text(encoding="utf-8")
STEPPED = HEATER.replace('spindle_limit_word = "D"', 'spindle_limit_word = "none"')
LINES = HEATER.replace('arcs = "centre"', 'arcs = "lines"')
NO_UNITS = HEATER.replace('units_word = "G21"', 'units_word = "none"')


@cache
def made(text: str) -> tuple[Job, Mould, str]:
    job = parse_job(text, name="job.toml")
    mould = Chain(job.in_millimetres()).mould
    slope = 1e-3 * job.tolerance.files.slope_mrad
    forming = fewest_arcs(mould.curve, distance=0.99 * job.tolerance.files.chord_error, slope=slope).path
    return job, mould, write_program(plan_turning(job, mould, forming).program)


def codes_of(base: str, program: str) -> list[str]:
    job, mould, _ = made(base)
    return [code for code, _ in prove_turning(program, job, mould).findings]


def sub(pattern: str, new: str, *, count: int = 0) -> Callable[[str], str]:
    return lambda text: re.sub(pattern, new, text, count=count, flags=re.MULTILINE)


def drop(pattern: str, *, count: int = 1) -> Callable[[str], str]:
    return sub(rf"^{pattern}$\n", "", count=count)


def in_section(name: str, change: Callable[[str], str]) -> Callable[[str], str]:
    def changed(text: str) -> str:
        head, rest = text.split(f"({name})\n")
        body, tail = rest.split(f"(END {name})\n")
        return f"{head}({name})\n{change(body)}(END {name})\n{tail}"

    return changed


def half(text: str) -> str:
    lines = text.splitlines(keepends=True)
    return "".join(lines[: len(lines) // 2])


def short_of_the_axis(text: str) -> str:
    """Stop every cut 0.9 mm before the axis; the arcs, as lines, hardly change there."""
    return re.sub(r"X-1\.6000", "X2.0000", re.sub(r"^G[23] (X\S+ Z\S+) I\S+ K\S+", r"G1 \1", text, flags=re.MULTILINE))


def scaled_x(text: str) -> str:
    return re.sub(r"X(-?[\d.]+)", lambda word: f"X{2.0 * float(word[1]):.4f}", text)


def moved_z(text: str) -> str:
    return re.sub(r"Z(-?[\d.]+)", lambda word: f"Z{float(word[1]) - 0.02:.4f}", text)


def swapped(text: str) -> str:
    return text.replace("G3 ", "G? ").replace("G2 ", "G3 ").replace("G? ", "G2 ")


FINISH_ARC = r"(G[23] X\S+ Z\S+ \S+ \S+) F\S+"

FAULTS: dict[str, tuple[str, Callable[[str], str], str]] = {
    "arcs the other way, I and K": (HEATER, in_section("FINISH", swapped), "deviation"),
    "arcs the other way, R": (BOWL, in_section("FINISH", swapped), "deviation"),
    "one arc the other way": (LAMP, in_section("FINISH", sub("G3", "G2", count=1)), "deviation"),
    "no plane word": (HEATER, drop("G18"), "unreadable"),
    "no units word": (HEATER, drop("G21"), "unreadable"),
    "the other units word": (HEATER, sub("^G21$", "G20"), "unreadable"),
    "no feed mode": (HEATER, drop("G95"), "unreadable"),
    "nose compensation": (HEATER, sub("^G40$", "G42"), "unreadable"),
    "a decimal point dropped": (LAMP, in_section("FINISH", sub(r"Z-(\d+)\.", r"Z-\1", count=1)), "unreadable"),
    "a digit dropped": (LAMP, in_section("FINISH", sub(r"\d F", " F", count=1)), "unreadable"),
    "X doubled": (HEATER, scaled_x, "unreadable"),
    "X doubled, with R": (BOWL, lambda text: scaled_x(text).replace(".0000", ".000"), "unreadable"),
    "Z of the finish a little low": (LINES, in_section("FINISH", moved_z), "deviation"),
    "no first spindle limit": (LAMP, drop("G50 S1200"), "unreadable"),
    "no second spindle limit": (LAMP, drop("G50 S2500"), "spindle-limit"),
    "the higher limit at once": (LAMP, sub("^G50 S1200$", "G50 S2500"), "spindle-limit"),
    "no limit beside G96": (HEATER, sub(r" D500$", ""), "unreadable"),
    "no G96": (HEATER, sub(r"^G96 .*\n", ""), "speed-mode"),
    "another cutting speed": (HEATER, sub(r"^G96 S300", "G96 S350"), "surface-speed"),
    "a stepped speed too high": (STEPPED, sub(r"^G97 S\d+\n(G1 X4)", r"G97 S499\n\1"), "surface-speed"),
    "a stepped speed over its limit": (STEPPED, sub(r"^G97 S200$", "G97 S260"), "surface-speed"),
    "the spindle the other way": (HEATER, sub("^M3$", "M4"), "spindle-direction"),
    "the spindle never started": (HEATER, drop("M3", count=2), "unreadable"),
    "no stop": (HEATER, drop("M0"), "no-stop"),
    "no feed on a cut": (HEATER, in_section("ROUGH", sub(" F0.3000", "", count=1)), "no-feed"),
    "no feed on a finishing arc": (HEATER, in_section("FINISH", sub(FINISH_ARC, r"\1", count=1)), "no-feed"),
    "no feed at all": (HEATER, sub(r" F[\d.]+", ""), "unreadable"),
    "a roughing feed in the finish": (HEATER, in_section("FINISH", sub("F0.1000", "F0.3000")), "feed"),
    "no start of the finish": (HEATER, drop(r"\(FINISH\)"), "no-finish"),
    "no end of the finish": (HEATER, drop(r"\(END FINISH\)"), "no-finish"),
    "a finishing arc dropped": (HEATER, in_section("FINISH", drop(r"G3 .*")), "unreadable"),
    "a finishing chord dropped": (LINES, in_section("FINISH", drop(r"G1 X2\d\d\..*")), "deviation"),
    "an empty finish": (LINES, in_section("FINISH", lambda _: ""), "no-finish"),
    "no roughing section": (HEATER, drop(r"\(END ROUGH\)"), "no-section"),
    "cut short": (HEATER, lambda text: text[: len(text) // 2], "unreadable"),
    "nothing": (HEATER, lambda _: "", "unreadable"),
    # what only the replay on the stock can see
    "a rapid for a cut": (HEATER, in_section("ROUGH", sub(r"^G1 (X\S+ Z\S+) F\S+", r"G0 \1", count=1)), "rapid"),
    "a roughing cut too low": (HEATER, in_section("ROUGH", sub(r"^(G1 X\S+) Z\S+", r"\1 Z-60.0000", count=1)), "gouge"),
    "no roughing": (HEATER, in_section("ROUGH", lambda _: ""), "heavy-cut"),
    "no last roughing cuts": (HEATER, in_section("ROUGH", half), "heavy-cut"),
    "no truing": (HEATER, in_section("TRUE THE OUTSIDE", lambda _: ""), "left-standing"),
    "no edge": (HEATER, in_section("FINISH EDGE AND LAND", lambda _: ""), "left-standing"),
    "a nub on the axis": (HEATER, short_of_the_axis, "nub"),
    "past the axis": (HEATER, in_section("FACE THE FRONT", sub(r"X-1.6000", "X-3.6000")), "past-axis"),
    "into the jaws": (HEATER, in_section("TRUE THE OUTSIDE", sub(r"Z-132.6673", "Z-137.0000")), "too-deep"),
}


@pytest.mark.parametrize("name", FAULTS)
def test_a_planted_fault_is_found(name: str) -> None:
    base, plant, code = FAULTS[name]
    good = made(base)[2]
    bad = plant(good)
    assert bad != good, "nothing was planted"
    found = codes_of(base, bad)
    assert any(entry.startswith(code) for entry in found), found


@pytest.mark.parametrize(
    "base", [HEATER, LAMP, BOWL, STEPPED, NO_UNITS, LINES], ids=["D", "bore", "female", "none", "no units", "lines"]
)
def test_nothing_is_found_in_a_good_program(base: str) -> None:
    assert codes_of(base, made(base)[2]) == []


def test_what_is_found_says_where_and_how_much() -> None:
    job, mould, good = made(LINES)
    shifted = prove_turning(in_section("FINISH", moved_z)(good), job, mould)
    sentences = dict(shifted.findings)
    assert re.search(
        r"is 0\.0\d+ mm off the mould curve at radius [\d.]+ mm, over the chord error", sentences["deviation"]
    )
    assert re.search(r"line \d+: the insert cuts 0\.02\d* mm into the finished mould", sentences["gouge"])
    assert shifted.deviation is not None
    assert shifted.deviation.normal == pytest.approx(0.02, abs=0.006)
    unread = prove_turning(drop("G18")(good), job, mould)
    assert "G18 is missing before the first move" in unread.findings[0][1]
    assert (unread.deviation, unread.removal) == (None, None)


def test_an_older_package_with_other_line_ends_is_read_alike() -> None:
    assert codes_of(HEATER, made(HEATER)[2].replace("\n", "\r\n")) == []
