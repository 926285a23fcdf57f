"""Tables as CSV and for a terminal."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from outputs.table import Column, aligned_text, read_table, table_text, write_table
from profiles.errors import FormatError, WriteError


def written(tmp_path: Path, content: str | bytes) -> Path:
    path = tmp_path / "table.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode("utf-8"))
    return path


class TestWriting:
    def test_numbers_have_fixed_decimals(self) -> None:
        columns = [Column("station", [1, 2]), Column("radius_mm", np.array([0.0, 12.34567]), 3)]
        assert table_text(columns) == "station,radius_mm\n1,0.000\n2,12.346\n"

    @pytest.mark.parametrize("value", [-0.0, -0.0004, -1e-300])
    def test_there_is_no_minus_zero(self, value: float) -> None:
        assert table_text([Column("sag", [value], 3)]) == "sag\n0.000\n"

    def test_large_numbers_have_no_exponent(self) -> None:
        assert table_text([Column("number", [1e15, -1e-7], 7)]) == "number\n1000000000000000.0000000\n-0.0000001\n"

    def test_cells_can_be_empty(self) -> None:
        assert table_text([Column("station", [1, 2]), Column("reading", ["", None])]) == "station,reading\n1,\n2,\n"

    def test_a_single_empty_column_keeps_its_rows(self) -> None:
        assert table_text([Column("reading", ["", ""])]) == 'reading\n""\n""\n'

    @pytest.mark.parametrize("mark", ["=", "+", "-", "@", "\t", "#"])
    def test_no_text_is_a_formula(self, mark: str) -> None:
        row = table_text([Column("note", [f"{mark}1+2"])]).split("\n", 1)[1]
        assert next(csv.reader(io.StringIO(row, newline="")))[0] == f"'{mark}1+2"

    def test_negative_numbers_are_no_formulas(self) -> None:
        assert table_text([Column("sag", [-1.5], 1)]) == "sag\n-1.5\n"

    def test_text_is_quoted_where_it_must_be(self) -> None:
        assert table_text([Column("note", ['a "b", c'])]) == 'note\n"a ""b"", c"\n'

    def test_a_text_stays_on_its_line(self) -> None:
        assert table_text([Column("note", ["a\nb\r\n# c\x85"])]) == "note\na b # c\n"

    @pytest.mark.parametrize("value", [float("nan"), float("inf"), np.float64("nan")])
    def test_only_finite_numbers(self, value: float) -> None:
        with pytest.raises(
            FormatError, match=r"column sag, row 2: value is (nan|inf); allowed: .*; do: leave the cell empty"
        ):
            Column("sag", [0.0, value], 3)

    @pytest.mark.parametrize("decimals", [-1, 16])
    def test_decimals_have_bounds(self, decimals: int) -> None:
        with pytest.raises(FormatError, match=rf"column sag asks for {decimals} decimals; allowed: 0 to 15; do: "):
            Column("sag", [0.0], decimals)

    def test_a_column_has_a_name(self) -> None:
        with pytest.raises(FormatError, match="a column is named ' '; allowed: a name that is not blank"):
            Column(" ", [])

    @pytest.mark.parametrize("columns", [[], [Column("a", [1]), Column("b", [])], [Column("a", [1]), Column("a", [2])]])
    def test_columns_must_make_a_table(self, columns: list[Column]) -> None:
        for make in (table_text, aligned_text):
            with pytest.raises(
                FormatError, match=r"a table cannot be made of .*; allowed: unlike names, equal lengths"
            ):
                make(columns)

    def test_a_file_that_cannot_be_written_is_refused(self, tmp_path: Path) -> None:
        with pytest.raises(WriteError, match="cannot be written"):
            write_table([Column("a", [1])], tmp_path / "absent" / "table.csv")


class TestTerminal:
    def test_numbers_stand_right_and_text_left(self) -> None:
        columns = [Column("n", [9, 10]), Column("sag_mm", [-0.5, 12.25], 2), Column("name", ["rim", "a"])]
        assert aligned_text(columns) == " n  sag_mm  name\n 9   -0.50  rim\n10   12.25  a\n"

    def test_an_empty_column_leaves_no_blanks_at_the_end(self) -> None:
        assert aligned_text([Column("n", [1]), Column("reading", [""])]) == "n  reading\n1\n"


class TestReading:
    def test_what_is_written_is_read(self, tmp_path: Path) -> None:
        columns = [
            Column("station", [1, 2]),
            Column("sag_mm", [0.5, -12.25], 3),
            Column("reading_mm", ["", ""]),
            Column("job", ["3f2a99", "3f2a99"]),
        ]
        write_table(columns, tmp_path / "table.csv")
        assert read_table(tmp_path / "table.csv") == {
            "station": ("1", "2"),
            "sag_mm": ("0.500", "-12.250"),
            "reading_mm": ("", ""),
            "job": ("3f2a99", "3f2a99"),
        }

    @given(
        st.lists(
            st.tuples(
                st.text(st.characters(exclude_categories=["C", "Z"]) | st.sampled_from("'=+-@#,;\"")),
                st.text("'=+-@\t#\"a,;"),
            ),
            max_size=5,
        )
    )
    def test_any_text_comes_back(self, tmp_path_factory: pytest.TempPathFactory, rows: list[tuple[str, str]]) -> None:
        path = tmp_path_factory.getbasetemp() / "any.csv"
        write_table(
            [Column("n", range(len(rows))), Column("a", [a for a, _ in rows]), Column("b", [b for _, b in rows])], path
        )
        found = read_table(path)
        assert found["a"] == tuple(a for a, _ in rows)
        assert found["b"] == tuple(b for _, b in rows)

    def test_remarks_blank_lines_mark_and_blanks_are_skipped(self, tmp_path: Path) -> None:
        content = (
            '\ufeff# part: 3, "A"\r\n\r\n radius , sag\r\n# "open\r\n0, 1.5 \r\n,\r\n"# by a spreadsheet",\r\n 5,2\r\n'
        )
        assert read_table(written(tmp_path, content)) == {"radius": ("0", "5"), "sag": ("1.5", "2")}

    def test_a_table_without_rows_has_empty_columns(self, tmp_path: Path) -> None:
        assert read_table(written(tmp_path, "radius,sag\n")) == {"radius": (), "sag": ()}

    def test_older_spreadsheets_are_understood(self, tmp_path: Path) -> None:
        content = "# 20 °C, so far… good\nradius,sag\n1,2\n".encode("cp1252")
        assert read_table(written(tmp_path, content)) == {"radius": ("1",), "sag": ("2",)}

    @pytest.mark.parametrize(
        ("content", "message"),
        [
            ("# remark\nradius,sag\n1,2\n\n3\n", r"line 5 has 1 cells; allowed: 2 as in the header; do: complete"),
            ("radius,sag\n1,5,2,5\n", r"line 2 has 4 cells; .* with a decimal point"),
            ("radius;sag\n1,5;2,5\n", r"the header 'radius;sag' has no comma; allowed: .*; do: save it as CSV with"),
            ("radius,radius\n1,2\n", r"the header names column 2 'radius'; allowed: .* no name twice; do: "),
            ("radius,\n1,2\n", r"the header names column 2 ''; allowed: a name for every column"),
            ("", r"has no header row; allowed: CSV that names its columns first; do: add their names"),
            ("# only a remark\n", r"has no header row"),
            ('radius,sag\n1,"2\n', r"line 2: .*; allowed: CSV; do: check the quotation marks"),
            ("radius,sag\n1,2\n".encode("utf-16"), r"is no plain text; allowed: CSV in UTF-8; do: save it as CSV"),
        ],
    )
    def test_what_is_no_table_is_refused(self, tmp_path: Path, content: str | bytes, message: str) -> None:
        with pytest.raises(FormatError, match=rf"table\.csv: {message}"):
            read_table(written(tmp_path, content))

    @pytest.mark.parametrize("name", ["absent.csv", "."])
    def test_a_file_that_cannot_be_read_is_refused(self, tmp_path: Path, name: str) -> None:
        with pytest.raises(FormatError, match=r"cannot be read \(.*\); allowed: a CSV file; do: check the name"):
            read_table(tmp_path / name)
