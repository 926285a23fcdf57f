"""Proving the spindle words of a turning program, line by line and not only where it cuts.

Until the operator has seen at the stop that the stock runs true, no speed and no limit may be above that of untrued
stock; at the stop the spindle stands.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

import numpy as np

from fabricate.removal import Finding
from fabricate.speeds import Limits

_COMMENT = re.compile(r"\([^)]*\)")
_WORD = re.compile(r"([A-Z])([+-]?[0-9.]+)")
_LIMIT_WORDS = {"G50", "G92"}


def spindle_findings(text: str, limits: Limits, *, stop_after: int) -> Iterator[Finding]:
    """Yield what is wrong with the speeds, limits, starts and stops of the spindle, each kind once.

    Parameters
    ----------
    text : str
        The program.
    limits : Limits
        What the spindle may do [rev/min].
    stop_after : int
        The last line that is cut before the stock runs true; the stop that counts follows it.

    Yields
    ------
    tuple of (str, str)
        A code, and a sentence with the first line that it is about.
    """
    turning, trued = False, False
    met: set[str] = set()
    for number, line in enumerate(text.split("\n"), start=1):
        words = [f"{letter}{float(value):g}" for letter, value in _WORD.findall(_COMMENT.sub("", line))]
        if "M0" in words and turning:
            yield from _once(met, "stop-turning", f"line {number}: the spindle still turns at the stop")
        trued = trued or ("M0" in words and number > stop_after > 0)
        turning = (turning or "M3" in words or "M4" in words) and "M5" not in words
        allowed = float(np.floor((limits.trued if trued else limits.untrued) + 1e-6))
        for speed in _speeds(words):
            if speed > allowed:
                sentence = f"line {number}: asks for {speed:g} rev/min where the stock may turn at {allowed:g}"
                yield from _once(met, "spindle-word", sentence)


def _speeds(words: list[str]) -> list[float]:
    """Return the speeds and limits that a line states [rev/min]: not the S of a surface speed."""
    speeds = [float(word[1:]) for word in words if word.startswith("D")]
    if _LIMIT_WORDS.intersection(words) or "G97" in words:
        speeds += [float(word[1:]) for word in words if word.startswith("S")]
    return speeds


def _once(met: set[str], code: str, sentence: str) -> Iterator[Finding]:
    if code not in met:
        met.add(code)
        yield code, sentence
