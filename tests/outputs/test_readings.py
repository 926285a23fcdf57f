"""Readings from the bench: what a table of points may look like, and what is said of one that does not."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from outputs.readings import Readings, read_readings
from outputs.table import Column, write_table
from profiles.errors import FormatError

POINTS = ((0.0, 0.0), (50.0, 5.75), (100.0, 23.0))


def read(folder: Path, content: str | bytes) -> Readings:
    path = folder / "readings.csv"
    path.write_bytes(content if isinstance(content, bytes) else content.encode("utf-8"))
    return read_readings(path)


def refusal(folder: Path, content: str | bytes) -> str:
    """Return what is said of a file that is refused, the folder's name left out."""
    with pytest.raises(FormatError) as found:
        read(folder, content)
    message = str(found.value)
    assert message.startswith(f"{folder / 'readings.csv'}: ")
    assert "; allowed: " in message
    assert "; do: " in message
    return message.removeprefix(f"{folder / 'readings.csv'}: ")


class TestLayouts:
    def test_radius_and_sag(self, tmp_path: Path) -> None:
        found = read(tmp_path, "radius,sag\n0,0\n50,5.75\n100,23\n")
        assert (found.layout, found.unit, dict(found.notes)) == (("radius", "sag"), None, {})
        assert found.values.tolist() == [list(point) for point in POINTS]
        assert found.radius.tolist() == [0.0, 50.0, 100.0]
        assert found.height.tolist() == [0.0, 5.75, 23.0]

    def test_points_in_space(self, tmp_path: Path) -> None:
        found = read(tmp_path, "x,y,z\n3,4,1.5\n-5,12,2.5\n")
        assert found.layout == ("x", "y", "z")
        assert found.radius.tolist() == [5.0, 13.0]
        assert found.height.tolist() == [1.5, 2.5]

    def test_a_filled_in_sag_table(self, tmp_path: Path) -> None:
        path = tmp_path / "sag-table.csv"
        names = ("station", "radius_mm", "part_sag_mm", "mould_sag_mm", "reading_mm", "job")
        rows = (
            (1, 0.0, 0.0, 0.0, "0.02", "abc"),
            (2, 50.0, 5.7, 5.8, "", "abc"),
            (3, 99.5, 23.0, 23.4, "-23.1", "abc"),
        )
        columns = [
            Column(name, values, 3 if name.endswith("_mm") else 0)
            for name, values in zip(names, zip(*rows, strict=True), strict=True)
        ]
        write_table(columns, path)
        found = read_readings(path)
        assert (found.layout, found.unit) == (("radius", "reading"), "mm")
        assert found.values.tolist() == [[0.0, 0.02], [99.5, -23.1]]

    def test_a_column_sag_goes_before_an_empty_column_of_readings(self, tmp_path: Path) -> None:
        assert read(tmp_path, "reading,radius,sag\n,1,2\n").values.tolist() == [[1.0, 2.0]]

    def test_other_columns_are_left_alone(self, tmp_path: Path) -> None:
        found = read(tmp_path, "who,sag,radius,when\nTom,1.5,10,noon\n,2.5,20,\n")
        assert found.values.tolist() == [[10.0, 1.5], [20.0, 2.5]]

    def test_a_radius_on_the_other_side_of_the_axis_is_a_distance_too(self, tmp_path: Path) -> None:
        assert read(tmp_path, "radius,sag\n-50,5\n50,5\n").radius.tolist() == [50.0, 50.0]

    @pytest.mark.parametrize("header", ["Radius,SAG", " radius , sag ", "RADIUS_MM,Sag_MM"])
    def test_the_names_may_be_written_large_and_with_blanks(self, header: str, tmp_path: Path) -> None:
        assert read(tmp_path, f"{header}\n1,2\n").layout == ("radius", "sag")

    @pytest.mark.parametrize(
        ("header", "unit"),
        [
            ("radius_mm,sag_mm", "mm"),
            ("radius_in,sag_in", "in"),
            ("x_in,y_in,z_in", "in"),
            ("radius_in,reading_in", "in"),
        ],
    )
    def test_a_stated_unit(self, header: str, unit: str, tmp_path: Path) -> None:
        found = read(tmp_path, f"{header}\n{'1,' * header.count(',')}2\n")
        assert found.unit == unit
        assert found.height.tolist() == [2.0]

    @pytest.mark.parametrize("cell", ["1.5", "+1.5", " 1.5 ", "1.50", "15e-1", ".15E1", "0001.5", '"1.5"', "'+1.5"])
    def test_ways_to_write_a_number(self, cell: str, tmp_path: Path) -> None:
        assert read(tmp_path, f"radius,sag\n7,{cell}\n").height.tolist() == [1.5]

    def test_rows_without_a_reading_are_left_out(self, tmp_path: Path) -> None:
        found = read(tmp_path, "radius,sag\n0,0\n50,\n,\n\n75,  \n100,23\n")
        assert found.radius.tolist() == [0.0, 100.0]


class TestText:
    @pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
    def test_ends_of_lines(self, end: str, tmp_path: Path) -> None:
        found = read(tmp_path, end.join(["# part: 7", "radius,sag", "0,0", "50,5.75", "100,23", ""]))
        assert found.values.tolist() == [list(point) for point in POINTS]
        assert found.notes == {"part": "7"}

    def test_a_byte_order_mark_hides_no_remark(self, tmp_path: Path) -> None:
        found = read(tmp_path, "\ufeff# part: Müller 7\nradius,sag\n1,2\n")
        assert found.notes == {"part": "Müller 7"}

    def test_the_code_page_of_an_older_spreadsheet(self, tmp_path: Path) -> None:
        found = read(tmp_path, "# recipe: 300 °C\nradius,sag\n1,2\n".encode("cp1252"))
        assert found.notes == {"recipe": "300 °C"}

    def test_remarks(self, tmp_path: Path) -> None:
        text = (
            "# Job: 0123456789ab\n#part:3: the better one\n  # Sheet Lot : 8 \n# clamped\n#\n# : nothing\n"
            "radius,sag\n# instrument: bridge, dial\n1,2\n"
        )
        assert read(tmp_path, text).notes == {
            "job": "0123456789ab",
            "part": "3: the better one",
            "sheet lot": "8",
            "clamped": "",
            "instrument": "bridge, dial",
        }

    def test_remarks_as_a_spreadsheet_sends_them_back(self, tmp_path: Path) -> None:
        found = read(tmp_path, '# part: 3,,\n"# instrument: bridge, dial",,\nwho,radius,sag\nTom,1,2\n')
        assert found.notes == {"part": "3", "instrument": "bridge, dial"}
        assert found.values.tolist() == [[1.0, 2.0]]

    def test_a_file_is_read_once(self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
        times: list[Path] = []
        once = Path.read_bytes
        monkeypatch.setattr(Path, "read_bytes", lambda path: times.append(path) or once(path))
        read(tmp_path, "# part: 3\nradius,sag\n1,2\n")
        assert len(times) == 1  # a pipe gives its bytes but once


class TestRefusals:
    @pytest.mark.parametrize(
        "cell",
        [
            "nan",
            "NaN",
            "inf",
            "-Infinity",
            "1_000",
            "0x10",
            "1,5",
            "1.5 mm",
            "five",
            "1e999",
            "١٢",
            "--1",
            "1.2.3",
            "e5",
        ],
    )
    def test_what_is_no_finite_number(self, cell: str, tmp_path: Path) -> None:
        assert refusal(tmp_path, f'radius,sag\n0,0\n5,"{cell}"\n') == (
            f'row 2 below the header holds "{cell}"; allowed: finite numbers with a decimal point; do: correct the cell'
        )

    def test_a_reading_at_no_radius(self, tmp_path: Path) -> None:
        assert refusal(tmp_path, "radius,sag\n,5\n").startswith('row 1 below the header holds ""; allowed: finite')

    def test_a_long_cell_is_cut_short(self, tmp_path: Path) -> None:
        assert len(refusal(tmp_path, f"radius,sag\n1,{'z' * 5000}\n")) < 200

    @pytest.mark.parametrize(
        "text",
        ["radius,sag\n", "radius_mm,part_sag_mm,reading_mm\n0,0,\n50,5.7,\n", "x,y,z\n1,2,\n"],
    )
    def test_a_table_sent_back_unfilled(self, text: str, tmp_path: Path) -> None:
        assert refusal(tmp_path, text).startswith(
            "holds no reading; allowed: a filled-in table; do: fill in its column"
        )

    @pytest.mark.parametrize(
        ("header", "stated"),
        [
            ("radius_mm,sag_in", "radius in mm, sag in in"),
            ("radius_mm,sag", "radius in mm, sag in no stated unit"),
            ("radius,reading_in", "radius in no stated unit, reading in in"),
            ("x_mm,y_mm,z", "x in mm, y in mm, z in no stated unit"),
        ],
    )
    def test_two_units(self, header: str, stated: str, tmp_path: Path) -> None:
        assert refusal(tmp_path, f"{header}\n{'1,' * header.count(',')}2\n") == (
            f"has {stated}; allowed: one unit for all of them, or none; do: convert a column, or correct its name"
        )

    @pytest.mark.parametrize(
        "header",
        ["radius,height", "r,z", "x,y", "radius", "radius_inch,sag_inch", "radius (mm),sag (mm)", "_mm,_in", "0,0"],
    )
    def test_other_columns(self, header: str, tmp_path: Path) -> None:
        said = refusal(tmp_path, f"{header}\n1{',2' * header.count(',')}\n")
        assert said.startswith(("has the columns ", "the header names column"))
        if said.startswith("has"):
            assert "allowed: radius and sag, or x, y and z, each with _mm or _in behind it or nothing" in said

    @pytest.mark.parametrize(
        ("header", "said"),
        [
            (
                "radius,radius,sag",
                "the header names column 2 'radius'; allowed: a name for every column, and no name twice",
            ),
            ("radius_mm,radius_in,sag_mm", "has the column radius twice; allowed: once; do: take one away"),
            ("radius,Radius,sag", "has the column radius twice; allowed: once; do: take one away"),
        ],
    )
    def test_a_column_twice(self, header: str, said: str, tmp_path: Path) -> None:
        assert refusal(tmp_path, f"{header}\n1,1,2\n").startswith(said)

    @pytest.mark.parametrize("mark", [";", "\t", "|"])
    def test_cells_parted_by_something_else(self, mark: str, tmp_path: Path) -> None:
        said = refusal(tmp_path, f"radius{mark}sag\n0,0{mark}1,5\n")
        assert said.endswith(
            "has no comma; allowed: cells parted by commas, numbers with a decimal point; "
            "do: save it as CSV with commas"
        )

    def test_decimal_commas(self, tmp_path: Path) -> None:
        said = refusal(tmp_path, "radius,sag\n0,0\n50,5,75\n")
        assert said == (
            "line 3 has 3 cells; allowed: 2 as in the header; "
            "do: complete the line, and write numbers with a decimal point"
        )

    @pytest.mark.parametrize(
        ("content", "said"),
        [
            (b"", "has no header row; "),
            (b"# part: 3\n\n", "has no header row; "),
            (b"solid\0\0\0", "is no plain text; "),
            ("radius,sag\n1,2\n".encode("utf-16"), "is no plain text; "),
            (b'radius,sag\n"1,2\n', "line 2: "),
        ],
    )
    def test_what_is_no_table(self, content: bytes, said: str, tmp_path: Path) -> None:
        assert refusal(tmp_path, content).startswith(said)

    def test_no_such_file(self, tmp_path: Path) -> None:
        path = tmp_path / "gone.csv"
        with pytest.raises(
            FormatError, match=r"gone\.csv: cannot be read \(No such file.*allowed: a CSV file; do: check"
        ):
            read_readings(path)


NAMES = st.sampled_from(["radius", "sag", "reading", "x", "y", "z", "radius_mm", "sag_in", "reading_mm", "job", ""])
CELLS = st.one_of(
    st.sampled_from(["", "1", "-2.5", "1e3", "nan", "1_0", "5,5", '"', "#", "'", "  "]),
    st.floats(width=32).map(str),
    st.text(max_size=4),
)
TABLES = st.lists(NAMES, min_size=1, max_size=5).flatmap(
    lambda names: st.lists(st.lists(CELLS, min_size=len(names), max_size=len(names)).map(",".join), max_size=4).map(
        lambda rows: "\n".join([",".join(names), *rows])
    )
)


@given(st.one_of(st.binary(max_size=60), TABLES.map(lambda text: text.encode("utf-8", "surrogatepass"))))
def test_any_file_is_read_or_refused(tmp_path_factory: pytest.TempPathFactory, content: bytes) -> None:
    try:
        found = read(tmp_path_factory.getbasetemp(), content)
    except FormatError:
        return
    assert np.isfinite(found.values).all()
    assert len(found.radius) == len(found.height) > 0
    assert (found.radius >= 0.0).all()


@given(points=st.lists(st.tuples(*[st.floats(-1e6, 1e6, allow_subnormal=False)] * 3), min_size=1, max_size=6))
def test_what_is_written_comes_back(tmp_path_factory: pytest.TempPathFactory, points: list[tuple[float, ...]]) -> None:
    text = "x_mm,y_mm,z_mm\n" + "".join(",".join(map(repr, point)) + "\n" for point in points)
    found = read(tmp_path_factory.getbasetemp(), text)
    assert found.values.tolist() == [list(point) for point in points]
