"""The material table for people: which rows, and laid out for a terminal."""

from __future__ import annotations

from typing import get_args

from fabricate.materials import Kind, Use, source_rows, table_rows
from profiles.errors import JobError

COLUMN_GAP = "  "


def listing(use: str | None, kinds: tuple[str, ...], *, with_sources: bool) -> str:
    """Return the material table as text.

    Parameters
    ----------
    use : str or None
        "sheet" or "mould"; None for both.
    kinds : tuple of str
        Only these kinds; empty for all.
    with_sources : bool
        One line a value with its source, instead of one line a material.

    Returns
    -------
    str
        Lines.

    Raises
    ------
    JobError
        If there is no such use or kind.
    """
    _check_word("--use", use, get_args(Use))
    for kind in kinds:
        _check_word("--kind", kind, get_args(Kind))
    rows = (source_rows if with_sources else table_rows)(use=use, kinds=kinds)  # type: ignore[arg-type]
    return _laid_out(rows)


def _check_word(option: str, word: str | None, allowed: tuple[str, ...]) -> None:
    if word is not None and word not in allowed:
        raise JobError(f'{option}: value is "{word}"; allowed: {", ".join(allowed)}; do: use one of these')


def _laid_out(rows: tuple[tuple[str, ...], ...]) -> str:
    widths = [max(len(cell) for cell in column) for column in zip(*rows, strict=True)]
    return "".join(
        COLUMN_GAP.join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() + "\n"
        for row in rows
    )
