"""Drawings in DXF, written and read back."""

from __future__ import annotations

import math
import os
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from outputs import dxf
from outputs.dxf import Drawing, Entities, Version, read_drawing, write_drawing
from outputs.dxf_pieces import Arc, Line, chained
from outputs.plain_text import plain_text
from profiles.arcpath import ArcPath
from profiles.errors import FormatError, WriteError

VERSIONS: tuple[Version, ...] = ("R2010", "R12")
ENTITIES: tuple[Entities, ...] = ("polyline", "line-arc")
FORMS = [(version, entities) for version in VERSIONS for entities in ENTITIES]


def path_of(*vertices: tuple[float, float], bulges: tuple[float, ...]) -> ArcPath:
    return ArcPath(np.array(vertices), np.array(bulges))


CURVE = path_of((0.0, 0.0), (-3.75, 40.0), (-61.25, 160.0), (-70.0, 172.5), bulges=(-0.05, -0.09, 0.0))
BODY = path_of(
    (0.0, 0.0), (-60.0, 160.0), (-63.0, 163.0), (-100.0, 163.0), (-100.0, 0.0), (0.0, 0.0),
    bulges=(-0.13, math.tan(math.pi / 8.0), 0.0, 0.0, 0.0),
)  # fmt: skip
CENTRE_LINE = path_of((-110.0, 0.0), (10.0, 0.0), bulges=(0.0,))
LAYERS = {"MOULD_CURVE": (CURVE,), "MOULD_BODY": (BODY,), "CENTRE_LINE": (CENTRE_LINE,), "REFLECTING_FACE": (CURVE,)}
DRAWING = Drawing("mm", LAYERS, ("Terrace heater 400", "Chuck for spinning, revision 1"))


def written(
    tmp_path: Path,
    drawing: Drawing = DRAWING,
    version: Version = "R2010",
    entities: Entities = "polyline",
) -> Path:
    path = tmp_path / f"{version}-{entities}.dxf"
    write_drawing(drawing, path, version=version, entities=entities)
    return path


def tags(path: Path) -> list[tuple[int, str]]:
    lines = path.read_bytes().decode("ascii").split("\r\n")
    assert lines.pop() == ""
    return [(int(code), value) for code, value in zip(lines[::2], lines[1::2], strict=True)]


def changed(path: Path, old: str, new: str, count: int = 1) -> Path:
    """Put one text of the file in the place of another, both with \\n for the line ends."""
    content = path.read_bytes().decode("ascii").replace("\r\n", "\n")
    assert old in content
    path.write_bytes(content.replace(old, new, count).encode("latin-1"))
    return path


def assert_same(found: ArcPath, wanted: ArcPath, tolerance: float) -> None:
    assert len(found) == len(wanted)
    assert np.abs(found.vertices - wanted.vertices).max() <= tolerance
    for index in range(len(wanted)):
        parts = np.array([0.25, 0.5, 0.75])
        assert np.abs(found.along(index, parts) - wanted.along(index, parts)).max() <= tolerance
    assert found.closed == wanted.closed


@st.composite
def paths(draw: st.DrawFn) -> ArcPath:
    """Any path whose vertices advance along the spindle; closed ones come back to the first."""
    count = draw(st.integers(1, 6))
    steps = draw(st.lists(st.tuples(st.floats(1e-3, 80.0), st.floats(-1.4, 1.4)), min_size=count, max_size=count))
    curved = st.floats(-3.0, 3.0).map(lambda bulge: bulge if abs(bulge) > 1e-13 else 0.0)
    flat = st.sampled_from([0.0, 1e-12, 1e-9, -1e-7, 1e-6, -1e-5, 1.0, -1.0])
    bulges = draw(st.lists(curved | flat, min_size=count, max_size=count))
    start = draw(st.tuples(st.floats(-500.0, 500.0), st.floats(0.0, 500.0)))
    moves = [(length * math.cos(angle), length * math.sin(angle)) for length, angle in steps]
    vertices = np.cumsum(np.array([start, *moves]), axis=0)
    if draw(st.booleans()):
        vertices = np.vstack([vertices, vertices[:1]])
        bulges.append(draw(curved | flat))
    return ArcPath(vertices, np.array(bulges))


class TestRoundTrip:
    @pytest.mark.parametrize(("version", "entities"), FORMS)
    @pytest.mark.parametrize("units", ["mm", "inch"])
    def test_what_is_written_is_read(
        self, tmp_path: Path, version: Version, entities: Entities, units: dxf.Units
    ) -> None:
        found = read_drawing(written(tmp_path, Drawing(units, LAYERS, DRAWING.notes), version, entities))
        assert found.units == units
        assert found.notes == DRAWING.notes
        assert list(found.layers) == list(LAYERS)
        for name, (wanted,) in LAYERS.items():
            (path,) = found.layers[name]
            # Within the written digits: half a unit of the eighth decimal in each coordinate.
            assert_same(path, wanted, 1e-8)
            assert np.abs(path.bulges - wanted.bulges).max() < 1e-9

    @given(path=paths(), units=st.sampled_from(["mm", "inch"]))
    @settings(max_examples=40, deadline=None)
    @pytest.mark.parametrize(("version", "entities"), FORMS)
    def test_any_path_comes_back(
        self,
        tmp_path_factory: pytest.TempPathFactory,
        version: Version,
        entities: Entities,
        path: ArcPath,
        units: dxf.Units,
    ) -> None:
        drawing = Drawing(units, {"MOULD_CURVE": (path,)})
        (found,) = read_drawing(written(tmp_path_factory.getbasetemp(), drawing, version, entities)).layers[
            "MOULD_CURVE"
        ]
        assert_same(found, path, 1e-6)

    @pytest.mark.parametrize("turn", [-5.0, -1.0, -1e-3, 1e-3, 1.0, 5.0])
    @pytest.mark.parametrize("closing", [None, 0.0, -0.3, 0.3])
    @pytest.mark.parametrize("version", VERSIONS)
    def test_a_lone_arc_keeps_its_direction(
        self, tmp_path: Path, version: Version, turn: float, closing: float | None
    ) -> None:
        bulge = math.tan(0.25 * turn)
        path = path_of((0.0, 0.0), (-60.0, 200.0), bulges=(bulge,))
        if closing is not None:
            path = path.joined(path_of((-60.0, 200.0), (0.0, 0.0), bulges=(closing,)))
        drawing = Drawing("mm", {"MOULD_CURVE": (path,)})
        (found,) = read_drawing(written(tmp_path, drawing, version, "line-arc")).layers["MOULD_CURVE"]
        assert_same(found, path, 1e-7)

    def test_a_large_radius_keeps_its_ends(self, tmp_path: Path) -> None:
        # Bulge c / 4R for a chord of 50 mm and radii of 1 m to 10 km, one after the other.
        bulges = tuple(
            50.0 / (4.0 * radius) * (-1.0) ** exponent for exponent, radius in enumerate(10.0 ** np.arange(3, 8))
        )
        path = path_of(*((-30.0 * step, 40.0 * step) for step in range(6)), bulges=bulges)
        (found,) = read_drawing(written(tmp_path, Drawing("mm", {"A": (path,)}), entities="line-arc")).layers["A"]
        assert_same(found, path, 1e-7)

    @pytest.mark.parametrize(("version", "entities"), FORMS)
    def test_several_paths_of_a_layer_stay_apart(self, tmp_path: Path, version: Version, entities: Entities) -> None:
        apart = (CURVE, BODY.moved(across=-300.0), CENTRE_LINE.moved(along=-5.0))
        found = read_drawing(written(tmp_path, Drawing("mm", {"A": apart}), version, entities)).layers["A"]
        assert len(found) == 3
        for path, wanted in zip(found, apart, strict=True):
            assert_same(path, wanted, 1e-8)

    def test_a_stretch_under_the_last_digit_is_left_out(self, tmp_path: Path) -> None:
        path = path_of((0.0, 0.0), (10.0, 0.0), (10.0, 1e-9), (20.0, 5.0), bulges=(0.0, 0.2, 0.1))
        (found,) = read_drawing(written(tmp_path, Drawing("mm", {"A": (path,)}))).layers["A"]
        assert found.vertices.tolist() == [[0.0, 0.0], [10.0, 0.0], [20.0, 5.0]]
        assert found.bulges.tolist() == [0.0, 0.1]

    def test_writing_and_reading_is_quick(self, tmp_path: Path) -> None:
        written(tmp_path)
        began = time.perf_counter()
        read_drawing(written(tmp_path))
        assert time.perf_counter() - began < 0.5  # 0.04 s when alone on its machine


class TestFile:
    @pytest.mark.parametrize(("version", "entities"), FORMS)
    def test_an_audit_reports_nothing(self, tmp_path: Path, version: Version, entities: Entities) -> None:
        import ezdxf

        document = ezdxf.readfile(written(tmp_path, DRAWING, version, entities))
        auditor = document.audit()
        assert (auditor.errors, auditor.fixes) == ([], [])
        assert document.dxfversion == {"R2010": "AC1024", "R12": "AC1009"}[version]

    @pytest.mark.parametrize(("version", "entities"), FORMS)
    def test_the_extent_is_true(self, tmp_path: Path, version: Version, entities: Entities) -> None:
        import ezdxf
        from ezdxf import bbox

        half_circles = path_of((0.0, 10.0), (0.0, 30.0), (0.0, 90.0), bulges=(1.0, -1.0))
        document = ezdxf.readfile(written(tmp_path, Drawing("mm", {"A": (half_circles,)}), version, entities))
        low, high = document.header["$EXTMIN"], document.header["$EXTMAX"]
        # The half circles reach 10 to the right and 30 to the left, and the check line 100 to the right of that.
        assert low[0] == -30.0
        assert high == (70.0, 90.0, 0.0)
        drawn = bbox.extents(document.modelspace())
        assert np.abs(np.array([drawn.extmin, drawn.extmax]) - np.array([low, high])).max() < 1e-8

    @pytest.mark.parametrize(("version", "entities"), FORMS)
    def test_numbers_have_fixed_decimals_and_no_minus_zero(
        self, tmp_path: Path, version: Version, entities: Entities
    ) -> None:
        noisy = path_of((-1e-10, -1e-12), (-60.0 + 1e-10, 200.0), (-70.0, 1e-9), bulges=(-0.1, -1e-14))
        found = tags(written(tmp_path, Drawing("mm", {"A": (noisy,)}), version, entities))
        begin = found.index((2, "ENTITIES"))
        kind = ""
        for code, value in found[begin : found.index((0, "ENDSEC"), begin)]:
            kind = value if code == 0 else kind
            if 10 <= code < 60:
                decimals = {10: 12, 20: 12, 40: 12, 50: 14, 51: 14} if kind == "ARC" else {42: 12}
                assert len(value.rpartition(".")[2]) == decimals.get(code, 8), (kind, code, value)
        assert not [value for code, value in found if 10 <= code < 60 and float(value) == 0.0 and value.startswith("-")]

    @pytest.mark.parametrize(("version", "entities"), FORMS)
    def test_only_the_expected_entities_are_drawn(self, tmp_path: Path, version: Version, entities: Entities) -> None:
        found = tags(written(tmp_path, DRAWING, version, entities))
        begin = found.index((2, "ENTITIES"))
        kinds = {value for code, value in found[begin : found.index((0, "ENDSEC"), begin)] if code == 0}
        polyline = {"POLYLINE", "VERTEX", "SEQEND"} if version == "R12" else {"LWPOLYLINE"}
        assert kinds == {"TEXT", "LINE"} | (polyline if entities == "polyline" else {"ARC"})

    @pytest.mark.parametrize("version", VERSIONS)
    def test_a_closed_path_is_flagged_and_repeats_no_vertex(self, tmp_path: Path, version: Version) -> None:
        import ezdxf

        document = ezdxf.readfile(written(tmp_path, Drawing("mm", {"A": (BODY,)}), version))
        (entity,) = document.modelspace().query("LWPOLYLINE POLYLINE")
        assert entity.is_closed
        assert len(entity) == len(BODY)

    @pytest.mark.parametrize("version", VERSIONS)
    def test_the_centre_line_is_dashed(self, tmp_path: Path, version: Version) -> None:
        import ezdxf

        document = ezdxf.readfile(written(tmp_path, DRAWING, version))
        assert document.layers.get("CENTRE_LINE").dxf.linetype == "CENTER"
        assert document.layers.get("MOULD_CURVE").dxf.linetype == "Continuous"

    @pytest.mark.parametrize(("version", "entities"), FORMS)
    def test_the_same_drawing_gives_the_same_bytes(self, tmp_path: Path, version: Version, entities: Entities) -> None:
        first = written(tmp_path, DRAWING, version, entities).read_bytes()
        assert written(tmp_path, DRAWING, version, entities).read_bytes() == first

    def test_another_process_writes_the_same_bytes(self, tmp_path: Path) -> None:
        script = (
            "import sys, numpy as np, pathlib\n"
            "from outputs.dxf import Drawing, write_drawing\n"
            "from profiles.arcpath import ArcPath\n"
            "path = ArcPath(np.array([[0.0, 0.0], [-60.0, 200.0]]), np.array([0.1]))\n"
            "for version in ('R2010', 'R12'):\n"
            "    place = pathlib.Path(sys.argv[1]) / f'{version}-polyline.dxf'\n"
            "    write_drawing(Drawing('mm', {'A': (path,), 'CENTRE_LINE': (path,)}), place, version=version)\n"
        )
        (tmp_path / "other").mkdir()
        subprocess.run(
            [sys.executable, "-c", script, str(tmp_path / "other")],
            check=True,
            env={**os.environ, "PYTHONHASHSEED": "4711", "TZ": "Asia/Kathmandu"},
        )
        path = path_of((0.0, 0.0), (-60.0, 200.0), bulges=(0.1,))
        for version in VERSIONS:
            here = written(tmp_path, Drawing("mm", {"A": (path,), "CENTRE_LINE": (path,)}), version)
            assert here.read_bytes() == (tmp_path / "other" / here.name).read_bytes()

    def test_the_library_s_options_are_left_as_they_were(self, tmp_path: Path) -> None:
        import ezdxf

        assert not ezdxf.options.write_fixed_meta_data_for_testing
        written(tmp_path)
        assert not ezdxf.options.write_fixed_meta_data_for_testing

    @pytest.mark.parametrize("version", VERSIONS)
    def test_nothing_is_printed(self, tmp_path: Path, capfd: pytest.CaptureFixture[str], version: Version) -> None:
        read_drawing(written(tmp_path, DRAWING, version))
        assert capfd.readouterr() == ("", "")


class TestNotes:
    @pytest.mark.parametrize(
        ("note", "read"),
        [
            ("Cup Ø 40 ±0.1 at 20 °C", "Cup O 40 +/-0.1 at 20 deg C"),
            ("100 %%d off, 5%%%", "100 %d off, 5%"),
            ("a^J b\\U+0041", "a**J b/U+0041"),
            ("two\nlines\tand\x00\x1b more", "two lines and more"),
            ("日本", "??"),
            (" ".join(["a longer remark that takes several lines"] * 4), None),
            ("job " + "0123456789abcdef" * 4, None),
            ("x" * 200, None),
            ("well-known half-truths and-so-on-and-so-forth-until-the-end of it", None),
            ("UNITS: INCH", None),
            ("UNITS: MM", None),
            ("CHECK LINE: 100 MM", None),
        ],
    )
    @pytest.mark.parametrize("version", VERSIONS)
    def test_notes_come_back_plain(self, tmp_path: Path, version: Version, note: str, read: str | None) -> None:
        drawing = Drawing("mm", {"A": (CURVE,)}, ("first", note, "  ", "last"))
        assert read_drawing(written(tmp_path, drawing, version)).notes == ("first", read or note, "last")

    @given(st.lists(st.text(), max_size=3))
    @settings(max_examples=40, deadline=None)
    def test_any_text_can_be_a_note(self, tmp_path_factory: pytest.TempPathFactory, notes: list[str]) -> None:
        drawing = Drawing("mm", {"A": (CURVE,)}, tuple(notes))
        found = read_drawing(written(tmp_path_factory.getbasetemp(), drawing, "R12")).notes
        assert len(found) == len([note for note in notes if plain_text(note)])

    @pytest.mark.parametrize("version", VERSIONS)
    def test_they_stand_clear_below_the_geometry(self, tmp_path: Path, version: Version) -> None:
        import ezdxf

        space = ezdxf.readfile(written(tmp_path, DRAWING, version)).modelspace()
        lines = [entity for entity in space if entity.dxf.layer == "NOTES" and entity.dxftype() == "LINE"]
        texts = [entity for entity in space if entity.dxf.layer == "NOTES" and entity.dxftype() == "TEXT"]
        assert [text.dxf.text for text in texts] == ["UNITS: MM", *DRAWING.notes, "CHECK LINE: 100 MM"]
        assert max(text.dxf.insert.y + text.dxf.height for text in texts) <= -10.0
        assert lines[0].dxf.start.y == lines[0].dxf.end.y < texts[-1].dxf.insert.y


class TestRefusedToWrite:
    @pytest.mark.parametrize("name", ["NOTES", "0", "", "mould", "A" * 32, "MOULD CURVE", "KÖRPER"])
    def test_layers_have_plain_names(self, tmp_path: Path, name: str) -> None:
        with pytest.raises(
            FormatError, match=rf"layer '{name}': cannot hold geometry; allowed: .*; do: choose another"
        ):
            written(tmp_path, Drawing("mm", {name: (CURVE,)}))

    def test_units_are_one_of_two(self) -> None:
        with pytest.raises(FormatError, match=r"drawing\.units: value is 'cm'; allowed: 'mm', 'inch'; do: state one"):
            Drawing("cm", {})  # type: ignore[arg-type]

    @pytest.mark.parametrize(("key", "value"), [("version", "R14"), ("entities", "spline")])
    def test_choices_are_checked(self, tmp_path: Path, key: str, value: str) -> None:
        with pytest.raises(FormatError, match=rf"drawing\.{key}: value is '{value}'; allowed: .*; do: state one"):
            write_drawing(DRAWING, tmp_path / "a.dxf", **{key: value})  # type: ignore[arg-type]

    @pytest.mark.parametrize("layers", [{}, {"A": ()}])
    def test_an_empty_drawing_is_refused(self, tmp_path: Path, layers: dict[str, tuple[ArcPath, ...]]) -> None:
        with pytest.raises(FormatError, match=r"the drawing is empty; allowed: at least one path; do: "):
            written(tmp_path, Drawing("mm", layers))

    @pytest.mark.parametrize(("end", "bulge"), [(1e-10, 0.0), (1e-10, 1e9)])
    def test_a_path_that_the_digits_cannot_hold_is_refused(self, tmp_path: Path, end: float, bulge: float) -> None:
        path = path_of((5.0, 0.0), (5.0 + end, 0.0), bulges=(bulge,))
        with pytest.raises(FormatError, match=r"layer A: a stretch near \(5, 0\) begins where it ends .*; do: break"):
            written(tmp_path, Drawing("mm", {"A": (path,)}))

    def test_a_place_that_cannot_be_written_is_refused(self, tmp_path: Path) -> None:
        with pytest.raises(WriteError, match="cannot be written"):
            write_drawing(DRAWING, tmp_path / "absent" / "a.dxf")
        assert list(tmp_path.iterdir()) == []


class TestRefusedToRead:
    def test_a_missing_file(self, tmp_path: Path) -> None:
        with pytest.raises(FormatError, match=r"absent\.dxf: cannot be read \(.*\); allowed: a DXF file; do: check"):
            read_drawing(tmp_path / "absent.dxf")

    @pytest.mark.parametrize(
        ("content", "message"),
        [
            (b"", "is not a DXF; allowed: a DXF file of R12 or later; do: write the drawing again"),
            (b"G21\nG18\n", "is not a DXF"),
            (b"AutoCAD Binary DXF\r\n\x1a\x00\x00\x00SECTION\x00", "is a binary DXF; allowed: DXF as text; do: save"),
            (b"0\nSECTION\n2\nENTITIES\n0\nENDSEC\n0\nEOF\n", "does not state its unit"),
            (b"0\nSECTION\nx\nENTITIES\n0\nENDSEC\n0\nEOF\n", "is not a DXF that can be read"),
        ],
    )
    def test_what_is_no_dxf(self, tmp_path: Path, content: bytes, message: str) -> None:
        (tmp_path / "a.dxf").write_bytes(content)
        with pytest.raises(FormatError, match=rf"a\.dxf: {message}"):
            read_drawing(tmp_path / "a.dxf")

    @pytest.mark.parametrize("version", VERSIONS)
    @pytest.mark.parametrize("part", [0.1, 0.5, 0.9, 0.999])
    def test_a_truncated_file(self, tmp_path: Path, version: Version, part: float) -> None:
        path = written(tmp_path, DRAWING, version)
        content = path.read_bytes()
        path.write_bytes(content[: int(part * len(content))])
        with pytest.raises(FormatError, match=r"breaks off before its end; allowed: a DXF that ends in EOF; do: "):
            read_drawing(path)

    @pytest.mark.parametrize("kind", ["SPLINE", "ELLIPSE", "CIRCLE", "POINT", "INSERT", "3DFACE"])
    def test_entities_that_are_no_lines_and_arcs(self, tmp_path: Path, kind: str) -> None:
        import ezdxf

        path = written(tmp_path)
        document = ezdxf.readfile(path)
        document.blocks.new("B")
        space, attributes = document.modelspace(), {"layer": "MOULD_CURVE"}
        add = {
            "SPLINE": lambda: space.add_spline([(0, 0), (1, 1), (2, 0)], dxfattribs=attributes),
            "ELLIPSE": lambda: space.add_ellipse((0, 0), dxfattribs=attributes),
            "CIRCLE": lambda: space.add_circle((0, 0), 1, dxfattribs=attributes),
            "POINT": lambda: space.add_point((0, 0), dxfattribs=attributes),
            "INSERT": lambda: space.add_blockref("B", (0, 0), dxfattribs=attributes),
            "3DFACE": lambda: space.add_3dface([(0, 0), (1, 0), (1, 1)], dxfattribs=attributes),
        }
        add[kind]()
        document.saveas(path)
        with pytest.raises(FormatError, match=rf"layer MOULD_CURVE: a {kind} is none of what .*; allowed: polylines"):
            read_drawing(path)

    @pytest.mark.parametrize(("version", "entities"), FORMS)
    @pytest.mark.parametrize("number", ["nan", "inf", "-inf", "1e999"])
    def test_numbers_that_are_not_finite(
        self, tmp_path: Path, version: Version, entities: Entities, number: str
    ) -> None:
        path = written(
            tmp_path, Drawing("mm", {"A": (path_of((1.5, 2.5), (8.0, 9.0), bulges=(0.0,)),)}), version, entities
        )
        with pytest.raises(FormatError, match=r"layer A: .*; allowed: polylines, lines and arcs .* finite numbers"):
            read_drawing(changed(path, "\n2.50000000\n", f"\n{number}\n"))

    @pytest.mark.parametrize(("code", "radius"), [("50", "nan"), ("40", "nan"), ("40", "-4"), ("40", "0")])
    def test_arcs_without_sense(self, tmp_path: Path, code: str, radius: str) -> None:
        path = written(tmp_path, Drawing("mm", {"A": (CURVE,)}), entities="line-arc")
        content = path.read_text(encoding="ascii")
        at = content.index("AcDbCircle")
        begin = content.index(f"\n {code}\n", at) + 5
        end = content.index("\n", begin)
        path.write_text(content[:begin] + radius + content[end:], encoding="ascii")
        with pytest.raises(FormatError, match=r"layer A: an ARC has radius"):
            read_drawing(path)

    @pytest.mark.parametrize(
        ("old", "new", "message"),
        [
            ("$INSUNITS\n 70\n4", "$INSUNITS\n 70\n5", r"\$INSUNITS is 5; allowed: 4 \(mm\) or 1 \(inch\)"),
            ("$INSUNITS\n 70\n4", "$INSUNITS\n 70\n0", r"\$INSUNITS is 0; allowed: 4"),
            ("$INSUNITS\n 70\n4", "$INSUNITS\n 70\n1", r"contradicts itself in its unit: \$INSUNITS says inch, \$MEAS"),
            (
                "$MEASUREMENT\n 70\n1",
                "$MEASUREMENT\n 70\n0",
                r"contradicts itself in its unit: .*MEASUREMENT says inch",
            ),
            ("UNITS: MM", "UNITS: INCH", r"contradicts itself in its unit: .*\"UNITS: INCH\" says inch"),
        ],
    )
    def test_units_that_contradict_each_other(self, tmp_path: Path, old: str, new: str, message: str) -> None:
        with pytest.raises(FormatError, match=message):
            read_drawing(changed(written(tmp_path), old, new))

    @pytest.mark.parametrize("version", VERSIONS)
    @pytest.mark.parametrize("length", [25.4, 100.001, 3.93700787])
    def test_a_check_line_of_another_length(self, tmp_path: Path, version: Version, length: float) -> None:
        drawing = Drawing("mm", {"A": (path_of((0.0, 0.0), (8.0, 9.0), bulges=(0.0,)),)})
        path = changed(written(tmp_path, drawing, version), " 11\n100.00000000\n", f" 11\n{length}\n")
        with pytest.raises(
            FormatError, match=rf"the check line is {length} long; allowed: 100 mm; do: undo the scaling"
        ):
            read_drawing(path)

    def test_r12_says_its_unit_by_text(self, tmp_path: Path) -> None:
        path = changed(written(tmp_path, DRAWING, "R12"), "UNITS: MM", "UNKNOWN")
        with pytest.raises(
            FormatError, match=r"does not state its unit; allowed: a text \"UNITS: MM\" or \"UNITS: INCH\""
        ):
            read_drawing(path)

    def test_r12_with_the_other_unit_fails_at_the_check_line(self, tmp_path: Path) -> None:
        path = changed(written(tmp_path, DRAWING, "R12"), "UNITS: MM", "UNITS: INCH")
        with pytest.raises(FormatError, match=r"the check line is 100 long; allowed: 4 in"):
            read_drawing(path)

    def test_a_drawing_without_a_check_line(self, tmp_path: Path) -> None:
        import ezdxf

        path = written(tmp_path)
        document = ezdxf.readfile(path)
        (line,) = document.modelspace().query('LINE[layer=="NOTES"]')
        document.modelspace().delete_entity(line)
        document.saveas(path)
        with pytest.raises(
            FormatError, match=r"has 0 lines on layer NOTES; allowed: 1, the check line of 100 mm; do: "
        ):
            read_drawing(path)

    def test_geometry_out_of_the_plane(self, tmp_path: Path) -> None:
        import ezdxf

        path = written(tmp_path)
        document = ezdxf.readfile(path)
        entity = document.modelspace().query('LWPOLYLINE[layer=="MOULD_CURVE"]').first
        entity.dxf.elevation = 2.0
        document.saveas(path)
        with pytest.raises(FormatError, match="layer MOULD_CURVE: a point lies at height 2, above the plane"):
            read_drawing(path)
        entity.dxf.elevation = 0.0
        entity.dxf.extrusion = (0.0, 0.0, -1.0)
        document.saveas(path)
        with pytest.raises(FormatError, match="layer MOULD_CURVE: a LWPOLYLINE is turned out of the plane"):
            read_drawing(path)

    def test_a_polyline_that_is_fitted_by_a_spline(self, tmp_path: Path) -> None:
        path = written(tmp_path, Drawing("mm", {"A": (CURVE,)}), "R12")
        with pytest.raises(FormatError, match="layer A: a POLYLINE is fitted with a spline, or not flat"):
            read_drawing(changed(path, "\n 70\n0\n  0\nVERTEX", "\n 70\n4\n  0\nVERTEX"))

    def test_vertices_that_coincide(self, tmp_path: Path) -> None:
        path = written(tmp_path, Drawing("mm", {"A": (CURVE,)}))
        with pytest.raises(FormatError, match="layer A: two neighbouring vertices of a path coincide"):
            read_drawing(changed(path, " 10\n-3.75000000\n 20\n40.0", " 10\n0.00000000\n 20\n00.0"))

    @given(
        st.integers(0, 2**31), st.binary(min_size=1, max_size=4), st.sampled_from(FORMS), st.sampled_from([0, 1, 40])
    )
    @settings(max_examples=60, deadline=None)
    def test_no_damage_sets_off_anything_else(
        self,
        tmp_path_factory: pytest.TempPathFactory,
        place: int,
        junk: bytes,
        form: tuple[Version, Entities],
        cut: int,
    ) -> None:
        path = written(tmp_path_factory.getbasetemp(), DRAWING, *form)
        content = path.read_bytes()
        place %= len(content)
        path.write_bytes(content[:place] + junk + content[place + cut :])
        try:
            read_drawing(path)
        except FormatError as refusal:
            assert path.name in str(refusal)  # noqa: PT017 - most damage is noticed, some falls on what nobody reads


class TestReadAsItIs:
    def test_a_flipped_bulge_is_read_as_it_stands(self, tmp_path: Path) -> None:
        path = changed(written(tmp_path, Drawing("mm", {"A": (CURVE,)})), "-0.090000000000", "0.090000000000")
        (found,) = read_drawing(path).layers["A"]
        assert found.bulges.tolist() == [-0.05, 0.09, 0.0]

    def test_scaled_geometry_is_read_as_it_stands(self, tmp_path: Path) -> None:
        import ezdxf

        path = written(tmp_path)
        document = ezdxf.readfile(path)
        for entity in document.modelspace().query('*[layer!="NOTES"]'):
            entity.scale_uniform(2.0) if hasattr(entity, "scale_uniform") else entity.scale(2.0, 2.0, 2.0)
        document.saveas(path)
        (found,) = read_drawing(path).layers["MOULD_CURVE"]
        assert_same(found, CURVE.scaled(2.0), 1e-8)

    def test_a_drawing_saved_again_by_other_software_is_read(self, tmp_path: Path) -> None:
        import ezdxf

        for version, entities in FORMS:
            path = written(tmp_path, DRAWING, version, entities)
            ezdxf.readfile(path).saveas(path)
            (found,) = read_drawing(path).layers["MOULD_BODY"]
            assert_same(found, BODY, 1e-8)


class TestChaining:
    def test_entities_out_of_order_are_found(self) -> None:
        (path,) = chained(
            [Line((10.0, 0.0), (20.0, 0.0)), Line((30.0, 5.0), (20.0, 0.0)), Line((0.0, 0.0), (10.0, 0.0))]
        )
        assert path.vertices.tolist() == [[0.0, 0.0], [10.0, 0.0], [20.0, 0.0], [30.0, 5.0]]

    def test_an_arc_is_turned_to_meet_the_next_entity(self) -> None:
        (path,) = chained([Arc((0.0, 0.0), 10.0, 0.0, 90.0), Line((10.0, 0.0), (10.0, -5.0))])
        assert path.vertices.tolist() == [[0.0, 10.0], [10.0, 0.0], [10.0, -5.0]]
        assert path.bulges[0] == pytest.approx(-math.tan(math.pi / 8.0), rel=1e-14)

    def test_small_gaps_are_closed_in_favour_of_the_line(self) -> None:
        (path,) = chained([Line((0.0, 10.0), (5.0, 10.0)), Arc((5.000003, 0.000002), 10.0, 0.0, 90.0)])
        assert path.vertices[:2].tolist() == [[0.0, 10.0], [5.0, 10.0]]

    def test_wide_gaps_part_paths(self) -> None:
        assert len(chained([Line((0.0, 0.0), (5.0, 0.0)), Line((5.0001, 0.0), (9.0, 0.0))])) == 2


def test_everything_public_is_listed() -> None:
    assert dxf.__all__ == ["Drawing", "read_drawing", "write_drawing"]
