"""The words of a turning program: those one lathe's control knows, and taking a line of text apart into them.

A *dialect* says how one control spells things. Two lathes read the same word as a limit and as a cutting cycle, so
nothing is assumed: what the dialect does not state may not stand in a program. A line is taken apart by the grammar of
NISTIR 6556 §3.3: letters with numbers, comments in brackets, one word of each modal group, each letter once.

References
----------
T. R. Kramer, F. M. Proctor, E. Messina, "The NIST RS274NGC Interpreter - Version 3", NISTIR 6556, 17 August 2000.
The words of turning (G95 to G97, G99, G50) are no part of it: common practice.
"""

from __future__ import annotations

import functools
import re
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Literal, get_args

from outputs.choice import check_one_of
from profiles.errors import FormatError

Units = Literal["mm", "inch"]
XWord = Literal["diameter", "radius"]
PlaneWord = Literal["G18", "none"]
UnitsWord = Literal["G20", "G21", "G70", "G71", "none"]
AbsoluteWord = Literal["none", "G90"]
FeedWord = Literal["G99", "G95"]
LimitWord = Literal["G50", "G92", "D", "none"]
Arcs = Literal["centre", "radius", "lines"]

LONGEST_LINE = 256

_ALLOWED: dict[str, tuple[object, ...]] = {
    "units": get_args(Units),
    "x_word": get_args(XWord),
    "plane_word": get_args(PlaneWord),
    "units_word": get_args(UnitsWord),
    "absolute_word": get_args(AbsoluteWord),
    "feed_per_rev_word": get_args(FeedWord),
    "spindle_limit_word": get_args(LimitWord),
    "arcs": get_args(Arcs),
}
_UNITS_WORDS: dict[str, tuple[str, ...]] = {"mm": ("G21", "G71", "none"), "inch": ("G20", "G70", "none")}
_DECIMALS = {"mm": (3, 6), "inch": (4, 6)}
_MODAL_GROUPS = (
    ("motion", ("G0", "G1", "G2", "G3")),
    ("plane", ("G17", "G18", "G19")),
    ("distance", ("G90", "G91")),
    ("feed", ("G93", "G94", "G95", "G98", "G99")),
    ("unit", ("G20", "G21", "G70", "G71")),
    ("compensation", ("G40", "G41", "G42")),
    ("speed", ("G50", "G92", "G96", "G97")),
    ("stopping", ("M0", "M2", "M30")),
    ("spindle", ("M3", "M4", "M5")),
)
_STATED = {
    "plane": "plane_word",
    "distance": "absolute_word",
    "feed": "feed_per_rev_word",
    "unit": "units_word",
    "speed": "spindle_limit_word",
}
COORDINATES = "XZIKR"
_WORD = re.compile(r"([A-Z])([-+.0-9]*)")
_COMPENSATION = "would compensate the nose a second time, because the path is compensated already: keep G40"
_ARC = "is an arc, where the dialect has arcs = 'lines': write straight stretches"
_REASONS = {
    "G2": _ARC,
    "G3": _ARC,
    "G41": _COMPENSATION,
    "G42": _COMPENSATION,
    "G96": "would run without a limit, where the dialect has spindle_limit_word = 'none': use G97",
}


@dataclass(frozen=True)
class Dialect:
    """How one lathe's control spells a program; no field has a default because none is safe.

    Parameters
    ----------
    units : {"mm", "inch"}
        Unit of every coordinate and, per revolution, of every feed.
    x_word : {"diameter", "radius"}
        What the word X means; I and R are radii in any case.
    plane_word, units_word, absolute_word : str
        The words that choose the XZ plane, the unit and absolute coordinates, or "none".
    feed_per_rev_word : {"G99", "G95"}
        The word for feed per revolution.
    spindle_limit_word : {"G50", "G92", "D", "none"}
        The word that limits the spindle: a block of its own, or D beside G96. "none" allows no G96.
    arcs : {"centre", "radius", "lines"}
        Arcs by I and K, by R, or none at all.
    decimals : int
        Digits after the point of every coordinate: 3 to 6 in mm, 4 to 6 in inch.

    Raises
    ------
    FormatError
        If a value is not allowed, or two of them contradict each other.
    """

    units: Units
    x_word: XWord
    plane_word: PlaneWord
    units_word: UnitsWord
    absolute_word: AbsoluteWord
    feed_per_rev_word: FeedWord
    spindle_limit_word: LimitWord
    arcs: Arcs
    decimals: int

    def __post_init__(self) -> None:
        for key, allowed in _ALLOWED.items():
            check_one_of(key, getattr(self, key), allowed)
        if self.units_word not in _UNITS_WORDS[self.units]:
            raise FormatError(
                f"units_word = {self.units_word!r} contradicts units = {self.units!r}: allowed with it are "
                f"{_listed(_UNITS_WORDS[self.units])}; state the word with which this control chooses {self.units}"
            )
        if self.absolute_word == "G90" and self.feed_per_rev_word == "G99":
            raise FormatError(
                "absolute_word = 'G90' contradicts feed_per_rev_word = 'G99': on controls with G99, G90 is a cutting "
                "cycle; allowed with G99 is 'none', and with G90 the feed word is 'G95': see the control's manual"
            )
        least, most = _DECIMALS[self.units]
        if isinstance(self.decimals, bool) or not isinstance(self.decimals, int) or not least <= self.decimals <= most:
            raise FormatError(
                f"decimals = {self.decimals!r} is not allowed: with units = {self.units!r} state a whole number "
                f"from {least} to {most}, as many as the control takes"
            )


@dataclass(frozen=True)
class TextBlock:
    """One line: its G and M words as codes, its other words by letter, its comments."""

    line: int
    text: str
    codes: tuple[str, ...] = ()
    words: tuple[tuple[str, str], ...] = ()
    comments: tuple[str, ...] = ()

    def error(self, wrong: str) -> FormatError:
        """Return the error that says what is wrong with this line, and what to do."""
        return FormatError(f"line {self.line}: {self.text!r}: {wrong}")

    def has(self, letters: str) -> bool:
        """Return whether one of the letters begins a word of this line."""
        return any(letter in letters for letter, _ in self.words)

    def number(self, letter: str) -> float | None:
        """Return the number of the word that begins with a letter, in the unit of that word."""
        return next((float(digits) for name, digits in self.words if name == letter), None)

    def code_among(self, *codes: str) -> str | None:
        """Return the first G or M word of this line that is one of ``codes``."""
        return next((code for code in self.codes if code in codes), None)


def scan_line(number: int, line: str, dialect: Dialect) -> TextBlock:
    """Return a line taken apart into words, each one known to the dialect and spelt as it says.

    Parameters
    ----------
    number : int
        Number of the line in its text, from 1.
    line : str
        The line without its end.
    dialect : Dialect
        The words of the control.

    Raises
    ------
    FormatError
        If the line breaks the grammar, or holds a word that this control has not or could misread.
    """
    block = TextBlock(number, line)
    if len(line) > LONGEST_LINE:
        raise block.error(f"{len(line)} characters, where a line may have {LONGEST_LINE}: break it up")
    odd = next((letter for letter in line if not (" " <= letter <= "~" or letter == "\t")), None)
    if odd is not None:
        raise block.error(f"the character {odd!r} is not plain ASCII: remove it")
    if not re.fullmatch(r"([^()]|\([^()]*\))*", line):
        raise block.error("a comment's brackets are nested, or not closed on its line: mend the brackets")
    pieces = re.split(r"\(([^()]*)\)", line)
    words = [word for piece in pieces[::2] for word in _words(block, re.sub(r"\s", "", piece).upper())]
    if "N" in [letter for letter, _ in words[1:]]:
        raise block.error("N does not stand first, or stands more than once: a line's number comes before its words")
    codes = [_code(block, *word) for word in words if word[0] in "GM"]
    others = [word for word in words if word[0] not in "GM"]
    block = replace(block, codes=tuple(codes), words=tuple(others), comments=tuple(pieces[1::2]))
    _check_words(block, dialect)
    _check_codes(block, dialect)
    return block


def _words(block: TextBlock, piece: str) -> Iterator[tuple[str, str]]:
    """Yield letters and digits of a piece of text that holds no comment and no blank."""
    end = 0
    for match in _WORD.finditer(piece):
        if match.start() != end:
            break
        end = match.end()
        yield match[1], match[2]
    if end != len(piece):
        raise block.error(f"{piece[end:]!r} is no word of a letter and a number: remove it")


def _code(block: TextBlock, letter: str, digits: str) -> str:
    """Return a G or M word without leading zeros."""
    if not re.fullmatch(r"\d{1,2}", digits):
        raise block.error(f"{letter}{digits} is an unknown word: remove it")
    return f"{letter}{int(digits)}"


def _check_words(block: TextBlock, dialect: Dialect) -> None:
    """Refuse letters that mean nothing here, stand twice, or whose number is not written as agreed."""
    letters = [letter for letter, _ in block.words]
    for letter, digits in block.words:
        if letter == "E":
            raise block.error(f"E{digits}: no number may have an exponent, and E is no word: write all digits")
        if letters.count(letter) > 1:
            raise block.error(f"the letter {letter} stands more than once: keep one")
        shape, meaning = _spelling(letter, dialect)
        if not shape:
            raise block.error(f"{letter}{digits} is an unknown word: this program may not hold it")
        if not re.fullmatch(shape, digits):
            raise block.error(f"{letter}{digits} is not written with {meaning}: a digit or point may be missing")


def _spelling(letter: str, dialect: Dialect) -> tuple[str, str]:
    """Return the pattern of a letter's number and what it means; an empty pattern where the letter is unknown."""
    places = dialect.decimals
    if letter in COORDINATES:
        return rf"[-+]?\d+\.\d{{{places}}}", f"exactly {places} digits after a decimal point, and one or more before it"
    if letter == "F":
        return r"\d+\.\d{4}", "exactly 4 digits after a decimal point, and one or more before it"
    if letter == "S" or (letter == "D" and dialect.spindle_limit_word == "D"):
        return r"\d+", "a whole number"
    return (r"\d{1,5}", "one to five digits") if letter == "N" else ("", "")


def _check_codes(block: TextBlock, dialect: Dialect) -> None:
    """Refuse codes that this control has not, and two of one modal group."""
    for code in block.codes:
        refusal = _refusal(code, dialect)
        if refusal:
            raise block.error(refusal)
    for name, codes in _MODAL_GROUPS:
        found = [code for code in block.codes if code in codes]
        if len(found) > 1:
            raise block.error(f"{' and '.join(found)} are of one modal group ({name}): keep one to a line")


@functools.cache
def _allowed_codes(dialect: Dialect) -> frozenset[str]:
    """Return every G and M word that a program for this control may hold."""
    words = {"G0", "G1", "G97", "M0", "M3", "M4", "M5", "M30", *words_before_moving(dialect)}
    if dialect.arcs != "lines":
        words |= {"G2", "G3"}
    if dialect.spindle_limit_word != "none":
        words |= {"G96", dialect.spindle_limit_word}
    return frozenset(words)


def words_before_moving(dialect: Dialect) -> set[str]:
    """Return the words that must stand before the first move, G40 among them."""
    words = {dialect.plane_word, dialect.units_word, dialect.absolute_word, dialect.feed_per_rev_word, "G40"}
    return words - {"none"}


def _refusal(code: str, dialect: Dialect) -> str:
    """Return why a code may not stand in a program for this control, or nothing."""
    if code in _allowed_codes(dialect):
        return ""
    if dialect.feed_per_rev_word == "G99" and code in {"G90", "G92", "G94"}:
        return f"{code} is a cutting cycle on a control with G99: remove it"
    group = next((name for name, codes in _MODAL_GROUPS if code in codes), "")
    if group in _STATED and code != "G96":
        key = _STATED[group]
        return f"{code} is not what the dialect says, {key} = {getattr(dialect, key)!r}: keep to that"
    return f"{code} {_REASONS.get(code, 'is an unknown word: this program may not hold it')}"


def _listed(values: tuple[object, ...]) -> str:
    return ", ".join(repr(value) for value in values)
