"""Text that any machine can read: printable ASCII, one line, and nothing that a file format could act on."""

from __future__ import annotations

import unicodedata

_SPELLED_OUT = str.maketrans(
    {"°": " deg", "±": "+/-", "×": " x ", "µ": "u", "μ": "u", "⌀": "dia ", "Ø": "O", "ø": "o", "ß": "ss"}
    | {"\N{EN DASH}": "-", "\N{EM DASH}": "-", "\N{MINUS SIGN}": "-", "\N{FRACTION SLASH}": "/"}
    | {"\N{LEFT SINGLE QUOTATION MARK}": "'", "\N{RIGHT SINGLE QUOTATION MARK}": "'"}
    | {"\N{LEFT DOUBLE QUOTATION MARK}": '"', "\N{RIGHT DOUBLE QUOTATION MARK}": '"'}
)


def plain_text(text: str) -> str:
    """Return a text in printable ASCII on one line.

    Parameters
    ----------
    text : str
        Any text.

    Returns
    -------
    str
        The text without accents; white space of any kind made single spaces; what has no plain form made "?".

    Examples
    --------
    >>> plain_text("Café table, ±0.5 at 20 °C")
    'Cafe table, +/-0.5 at 20 deg C'
    """
    # Once before and once after decomposition: some characters only then turn into one that is spelled out.
    plain = unicodedata.normalize("NFKD", text.replace("°C", "° C").translate(_SPELLED_OUT)).translate(_SPELLED_OUT)
    plain = "".join(letter for letter in plain if not unicodedata.combining(letter))
    plain = "".join(_plain_letter(letter) for letter in plain)
    return " ".join(plain.split())


def _plain_letter(letter: str) -> str:
    """Return a printable ASCII character for any character."""
    if " " <= letter <= "~":
        return letter
    return " " if letter.isspace() or unicodedata.category(letter) == "Cc" else "?"
