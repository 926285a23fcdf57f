"""Tables as CSV for spreadsheets and the bench, and aligned for a terminal.

Numbers have fixed decimals and a decimal point; lines end in LF; the text is UTF-8. A text that a spreadsheet could
take for a formula, or a reader for a comment, is written with an apostrophe before it, which the reader takes off
again. Reading is strict in structure and says the line: a table filled in by hand is the likeliest to be broken.

References
----------
RFC 4180 (2005) for quoting, from memory.
"""

from __future__ import annotations

import csv
import io
import math
import re
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from outputs.package import write_file
from profiles.errors import FormatError

__all__ = ["Column", "aligned_text", "read_table", "table_columns", "table_lines", "table_text", "write_table"]

MOST_DECIMALS = 15

_ACTIVE = re.compile(r"'*[=+\-@\t#]")
_QUOTED = re.compile(r"'+[=+\-@\t#]")


@dataclass(frozen=True)
class Column:
    """One column of a table.

    Parameters
    ----------
    name : str
        Its name in the header row, the unit in it.
    values : sequence of float or str
        Its cells from the top; a text is written as it is but on one line, "" or None leaves the cell empty.
    decimals : int
        Decimals of its numbers.

    Raises
    ------
    FormatError
        If the name is blank, the decimals are not 0 to 15, or a number is not finite.
    """

    name: str
    values: Sequence[float | str | None]
    decimals: int = 0

    def __post_init__(self) -> None:
        object.__setattr__(self, "values", tuple(self.values))
        if not self.name.strip():
            raise FormatError(f"a column is named {self.name!r}; allowed: a name that is not blank; do: name it")
        if not 0 <= self.decimals <= MOST_DECIMALS:
            raise FormatError(
                f"column {self.name} asks for {self.decimals} decimals; allowed: 0 to {MOST_DECIMALS}; do: choose fewer"
            )
        for row, value in enumerate(self.values, start=1):
            if value is not None and not isinstance(value, str) and not math.isfinite(value):
                raise FormatError(
                    f"column {self.name}, row {row}: value is {value}; allowed: finite numbers, text, or nothing; "
                    f"do: leave the cell empty where there is no value"
                )

    @property
    def cells(self) -> tuple[str, ...]:
        """The values as text, with fixed decimals and no minus zero."""
        return tuple(self._cell(value) for value in self.values)

    @property
    def is_text(self) -> bool:
        """Whether any value is a text that is not empty."""
        return any(isinstance(value, str) and value for value in self.values)

    def _cell(self, value: float | str | None) -> str:
        """Return one value as text."""
        if value is None or isinstance(value, str):
            return " ".join((value or "").splitlines())
        return f"{round(float(value), self.decimals) + 0.0:.{self.decimals}f}"


def table_text(columns: Sequence[Column]) -> str:
    """Return a table as CSV.

    Parameters
    ----------
    columns : sequence of Column
        The columns from the left, of one length.

    Returns
    -------
    str
        A header row and one line per row, each ended by a line feed.

    Raises
    ------
    FormatError
        If there is no column, they differ in length, or two have one name.

    Examples
    --------
    >>> print(table_text([Column("radius_mm", [0, 12.5], 2), Column("reading_mm", ["", ""])]), end="")
    radius_mm,reading_mm
    0.00,
    12.50,
    """
    _check_columns(columns)
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow([_inactive(column.name) for column in columns])
    writer.writerows(_rows(columns))
    return stream.getvalue()


def write_table(columns: Sequence[Column], path: Path) -> None:
    """Write a table as a CSV file.

    Parameters
    ----------
    columns : sequence of Column
        The columns from the left, of one length.
    path : Path
        The file to write; an older one is replaced.

    Raises
    ------
    FormatError
        If there is no column, they differ in length, or two have one name.
    WriteError
        If the file cannot be written.
    """
    write_file(path, table_text(columns), overwrite=True)


def read_table(path: Path) -> Mapping[str, tuple[str, ...]]:
    """Return the columns that a CSV file holds.

    Parameters
    ----------
    path : Path
        The file: a header row, then rows of as many cells. Lines that begin with # and rows without any entry are
        skipped.

    Returns
    -------
    mapping of str to tuple of str
        For each name in the header its cells from the top, blanks around them taken off.

    Raises
    ------
    FormatError
        If the file is missing, is no text, has no header or the same name twice in it, or a row has more or fewer
        cells than the header.
    """
    return table_columns(path, table_lines(path))


def table_columns(path: Path, lines: Sequence[str]) -> Mapping[str, tuple[str, ...]]:
    """Return the columns that the lines of a CSV file hold, as `read_table` does.

    Parameters
    ----------
    path : Path
        The file, for messages.
    lines : sequence of str
        Its lines, with their ends.

    Returns
    -------
    mapping of str to tuple of str
        For each name in the header its cells from the top, blanks around them taken off.

    Raises
    ------
    FormatError
        If there is no header or the same name twice in it, or a row has more or fewer cells than the header.
    """
    rows = _numbered_rows(path, lines)
    names = next(rows, (0, [""]))[1]
    if not any(names):
        raise FormatError(f"{path}: has no header row; allowed: CSV that names its columns first; do: add their names")
    _check_header(path, names)
    cells: list[list[str]] = []
    for line, row in rows:
        if len(row) != len(names):
            raise FormatError(
                f"{path}: line {line} has {len(row)} cells; allowed: {len(names)} as in the header; "
                f"do: complete the line, and write numbers with a decimal point"
            )
        cells.append(row)
    return {name: tuple(row[index] for row in cells) for index, name in enumerate(names)}


def table_lines(path: Path) -> list[str]:
    """Return the lines of a table's file.

    Parameters
    ----------
    path : Path
        The file: UTF-8, with or without a byte order mark, or the code page of older spreadsheets.

    Returns
    -------
    list of str
        Its lines, with their ends.

    Raises
    ------
    FormatError
        If the file is missing or is no text.
    """
    try:
        content = path.read_bytes()
    except OSError as error:
        raise FormatError(
            f"{path}: cannot be read ({error.strerror}); allowed: a CSV file; do: check the name and who may read it"
        ) from error
    if b"\0" in content:
        raise FormatError(f"{path}: is no plain text; allowed: CSV in UTF-8; do: save it as CSV")
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError:
        text = content.decode("cp1252", errors="replace")  # older spreadsheets; only remarks hold more than ASCII
    return list(io.StringIO(text, newline=""))


def aligned_text(columns: Sequence[Column]) -> str:
    """Return a table for a terminal: numbers to the right, text to the left.

    Parameters
    ----------
    columns : sequence of Column
        The columns from the left, of one length.

    Returns
    -------
    str
        A header line and one line per row, each ended by a line feed.

    Raises
    ------
    FormatError
        If there is no column, they differ in length, or two have one name.

    Examples
    --------
    >>> print(aligned_text([Column("station", [9, 10]), Column("sag", [0.5, 12.25], 2)]), end="")
    station    sag
          9   0.50
         10  12.25
    """
    _check_columns(columns)
    lists = [[column.name, *column.cells] for column in columns]
    widths = [max(len(cell) for cell in cells) for cells in lists]
    sides = ["<" if column.is_text else ">" for column in columns]
    lines = (
        "  ".join(f"{cell:{side}{width}}" for cell, side, width in zip(row, sides, widths, strict=True)).rstrip()
        for row in zip(*lists, strict=True)
    )
    return "".join(f"{line}\n" for line in lines)


def _check_columns(columns: Sequence[Column]) -> None:
    """Refuse columns that do not make a table."""
    lengths = {column.name: len(column.values) for column in columns}
    if not columns or len(lengths) != len(columns) or len(set(lengths.values())) != 1:
        said = ", ".join(f"{column.name} ({len(column.values)} rows)" for column in columns) or "no column at all"
        raise FormatError(f"a table cannot be made of {said}; allowed: unlike names, equal lengths; do: check them")


def _rows(columns: Sequence[Column]) -> Iterator[list[str]]:
    """Yield the rows, text made safe."""
    safe = [
        [
            _inactive(cell) if isinstance(value, str) else cell
            for value, cell in zip(column.values, column.cells, strict=True)
        ]
        for column in columns
    ]
    yield from (list(row) for row in zip(*safe, strict=True))


def _inactive(text: str) -> str:
    """Return a text that neither a spreadsheet nor the reader takes for anything but text."""
    return f"'{text}" if _ACTIVE.match(text) else text


def _as_meant(cell: str) -> str:
    """Return a cell without the blanks around it and without the apostrophe of `_inactive`."""
    plain = cell.strip(" ")
    return plain[1:] if _QUOTED.match(plain) else plain


def _numbered_rows(path: Path, lines: Iterable[str]) -> Iterator[tuple[int, list[str]]]:
    """Yield the rows that say anything, each with the number of its last line."""
    reader = csv.reader(_without_comments(lines), strict=True)
    try:
        for row in reader:
            cells = [_as_meant(cell) for cell in row]
            if any(cells) and not row[0].startswith("#"):
                yield reader.line_num, cells
    except csv.Error as error:
        raise FormatError(
            f"{path}: line {reader.line_num}: {error}; allowed: CSV; do: check the quotation marks of that line"
        ) from error


def _without_comments(lines: Iterable[str]) -> Iterator[str]:
    """Yield the lines, those that begin with # left blank so that the count stays right."""
    yield from ("\n" if line.lstrip().startswith("#") else line for line in lines)


def _check_header(path: Path, names: list[str]) -> None:
    """Refuse a header that cannot name columns."""
    if len(names) == 1 and any(mark in names[0] for mark in ";\t|"):
        raise FormatError(
            f"{path}: the header {names[0]!r} has no comma; allowed: cells parted by commas, numbers with a decimal "
            f"point; do: save it as CSV with commas"
        )
    for index, name in enumerate(names):
        if not name or name in names[:index]:
            raise FormatError(
                f"{path}: the header names column {index + 1} {name!r}; allowed: a name for every column, and no name "
                f"twice; do: name or delete that column"
            )
