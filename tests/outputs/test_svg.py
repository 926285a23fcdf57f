"""Pictures in SVG: native arcs, dashes, hatching, dimensions, escaped text, and the same bytes each time."""

from __future__ import annotations

import math
import re
from xml.etree import ElementTree as ET

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from outputs.svg import (
    ACCENT,
    INK,
    Area,
    Dimension,
    Item,
    Label,
    Leader,
    Picture,
    Stroke,
    Window,
    circle,
    picture_text,
)
from profiles.arcpath import ArcPath
from profiles.errors import FormatError

SPACE = "{http://www.w3.org/2000/svg}"
HEIGHT = 50.0
SQUARE = ArcPath(np.array([(10.0, 10.0), (30.0, 10.0), (30.0, 30.0), (10.0, 30.0), (10.0, 10.0)]), np.zeros(4))


def drawn(*items: Item) -> ET.Element:
    """Return the root element of a sheet of 80 by 50 mm as an independent reader of XML sees it."""
    return ET.fromstring(picture_text(Picture(80.0, HEIGHT, items, "A sheet")))  # noqa: S314


def paths(*items: Item) -> list[ET.Element]:
    return list(drawn(*items).iter(f"{SPACE}path"))


def arc_centre(words: list[float]) -> tuple[float, float]:
    """Return the centre of ``M x0 y0 A r r 0 large sweep x1 y1``, by the conversion in appendix F.6.5 for a circle."""
    x0, y0, radius, _, _, large, sweep, x1, y1 = words
    half = math.hypot(x1 - x0, y1 - y0) / 2.0
    rise = math.sqrt(max(radius**2 - half**2, 0.0)) * (1.0 if large != sweep else -1.0)
    return (x0 + x1) / 2.0 - rise * (y1 - y0) / (2.0 * half), (y0 + y1) / 2.0 + rise * (x1 - x0) / (2.0 * half)


def numbers(data: str) -> list[float]:
    return [float(word) for word in re.findall(r"-?\d+(?:\.\d+)?", data)]


class TestLines:
    @given(st.floats(-3.0, 3.0).filter(lambda bulge: abs(bulge) > 0.05 and abs(abs(bulge) - 1.0) > 0.05))
    def test_an_arc_is_a_native_arc_about_its_own_centre(self, bulge: float) -> None:
        path = ArcPath(np.array([(20.0, 20.0), (36.0, 28.0)]), np.array([bulge]))
        (element,) = paths(Stroke((path,)))
        data = element.get("d") or ""
        assert re.fullmatch(r"M[\d. ]+A[\d. ]+", data)
        across, down = arc_centre(numbers(data))
        # Two decimals of the ends and of the radius, on the flattest of these arcs.
        assert (across, HEIGHT - down) == pytest.approx(tuple(path.centres[0]), abs=0.1)

    def test_the_sheet_is_upright(self) -> None:
        (element,) = paths(Stroke((ArcPath(np.array([(0.0, 0.0), (3.0, 48.0)]), np.zeros(1)),)))
        assert element.get("d") == "M0.00 50.00L3.00 2.00"

    def test_dashes_and_accent_are_said_where_they_are_meant(self) -> None:
        (solid,), (rapid,) = paths(Stroke((SQUARE,))), paths(Stroke((SQUARE,), 0.2, "dashed", accent=True))
        assert (solid.get("stroke"), solid.get("stroke-dasharray")) == (None, None)
        assert (rapid.get("stroke"), rapid.get("stroke-dasharray")) == (ACCENT, "2 1.2")

    def test_a_closed_path_is_closed(self) -> None:
        (element,) = paths(Stroke((SQUARE,)))
        assert (element.get("d") or "").endswith("Z")


class TestAreas:
    def test_hatching_covers_the_area_evenly_and_stays_in_it(self) -> None:
        (element,) = paths(Area(circle((40.0, 25.0), 20.0)))
        ends = np.array(numbers(element.get("d") or "")).reshape(-1, 2, 2)
        assert np.hypot(*(ends - (40.0, 25.0)).reshape(-1, 2).T).max() < 20.02
        # Lines at a pitch p over an area A are A / p long altogether, but for what the border cuts off at random.
        length = np.hypot(*np.diff(ends, axis=1)[:, 0].T).sum()
        assert length == pytest.approx(math.pi * 20.0**2 / 2.2, rel=0.03)

    @pytest.mark.parametrize(("fill", "colour"), [("ink", INK), ("accent", ACCENT), ("paper", "#ffffff")])
    def test_plain_fills(self, fill: str, colour: str) -> None:
        (element,) = paths(Area(SQUARE, fill))  # type: ignore[arg-type]
        assert (element.get("fill"), element.get("stroke")) == (colour, "none")

    def test_an_open_area_is_refused(self) -> None:
        with pytest.raises(FormatError, match=r"from \[10.0, 10.0\] to \[30.0, 10.0\] mm; allowed: a closed path"):
            Area(ArcPath(SQUARE.vertices[:2], np.zeros(1)))


class TestTexts:
    @given(st.text(min_size=1))
    def test_any_text_is_read_back(self, text: str) -> None:
        # Line ends are normalised by every reader of XML; what XML cannot hold becomes a question mark.
        (element,) = drawn(Label(text, (5.0, 5.0))).iter(f"{SPACE}text")
        wanted = re.sub("[^\t\n\r\u0020-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]", "?", text)
        assert element.text == wanted.replace("\r\n", "\n").replace("\r", "\n")

    def test_an_upright_label_is_turned_about_its_place(self) -> None:
        (element,) = drawn(Label("a", (5.0, 10.0), anchor="middle", upright=True)).iter(f"{SPACE}text")
        assert (element.get("transform"), element.get("text-anchor")) == ("rotate(-90 5.00 40.00)", "middle")

    def test_title_and_description_are_there_for_those_who_listen(self) -> None:
        root = ET.fromstring(  # noqa: S314
            picture_text(Picture(9.0, 9.0, (Label("x", (1.0, 1.0)),), "A < B", "one & two"))
        )
        assert [root.findtext(f"{SPACE}{name}") for name in ("title", "desc")] == ["A < B", "one & two"]


class TestDimensions:
    def test_a_dimension_measures_along_its_line(self) -> None:
        root = drawn(Dimension((10.0, 12.0), (50.0, 20.0), 30.0, "40"))
        elements = [element.get("d") or "" for element in root.iter(f"{SPACE}path")]
        assert "M10.00 20.00L50.00 20.00" in elements
        # Extension lines begin 1 mm from the point and end 1.4 mm beyond the line.
        assert {"M10.00 37.00L10.00 18.60", "M50.00 29.00L50.00 18.60"} <= set(elements)
        (text,) = root.iter(f"{SPACE}text")
        assert (text.text, text.get("x"), text.get("y")) == ("40", "30.00", "19.10")

    def test_an_upright_dimension_is_read_from_the_right(self) -> None:
        root = drawn(Dimension((10.0, 5.0), (20.0, 45.0), 30.0, "40", upright=True))
        assert "M30.00 45.00L30.00 5.00" in [element.get("d") for element in root.iter(f"{SPACE}path")]
        (text,) = root.iter(f"{SPACE}text")
        assert (text.get("x"), text.get("y")) == ("29.10", "25.00")

    def test_arrowheads_of_a_narrow_one_point_inwards(self) -> None:
        heads = [element.get("d") or "" for element in paths(Dimension((10.0, 5.0), (14.0, 5.0), 20.0, "4"))][-2:]
        assert [numbers(head)[0] for head in heads] == [10.0, 14.0]
        assert numbers(heads[0])[2] < 10.0
        assert numbers(heads[1])[2] > 14.0

    def test_a_leader_sets_out_beside_its_text(self) -> None:
        line, _ = paths(Leader(Label("rim", (20.0, 10.0), 3.0, "end"), (40.0, 30.0)))
        assert line.get("d") == "M20.90 38.92L40.00 20.00"


class TestSheets:
    def test_a_window_clips_in_the_sheets_own_coordinates(self) -> None:
        (window,) = drawn(Window((10.0, 5.0), (40.0, 25.0), (Stroke((SQUARE,)),))).iter(f"{SPACE}g")
        (inner,) = window.iter(f"{SPACE}svg")
        places = tuple(inner.get(name) for name in ("x", "y", "width", "height", "viewBox"))
        assert places == ("10.00", "25.00", "30.00", "20.00", "10.00 25.00 30.00 20.00")
        assert inner.find(f"{SPACE}path") is not None

    def test_it_is_white_all_over_and_in_millimetres(self) -> None:
        root = drawn(Stroke((SQUARE,)))
        assert (root.get("width"), root.get("height"), root.get("viewBox")) == ("80.00mm", "50.00mm", "0 0 80.00 50.00")
        paper = root.find(f"{SPACE}rect")
        assert paper is not None
        assert (paper.get("width"), paper.get("height"), paper.get("fill")) == ("80.00", "50.00", "#ffffff")

    def test_only_ink_accent_and_paper_are_used_and_nothing_is_named(self) -> None:
        items = (Area(SQUARE), Area(SQUARE, "accent"), Stroke((SQUARE,), accent=True), Label("a", (1.0, 1.0)))
        text = picture_text(Picture(80.0, HEIGHT, items, "A sheet"))
        assert set(re.findall(r"#[0-9a-f]{6}", text)) == {INK, ACCENT, "#ffffff"}
        assert " id=" not in text

    def test_the_same_picture_gives_the_same_text_without_minus_zero(self) -> None:
        stroke = Stroke((ArcPath(np.array([(-0.001, 50.001), (3.0, 4.0)]), np.zeros(1)),))
        texts = {picture_text(Picture(80.0, HEIGHT, (stroke,), "A sheet")) for _ in range(2)}
        assert len(texts) == 1
        assert "M0.00 0.00L" in texts.pop()

    @pytest.mark.parametrize(("size", "name"), [((0.0, 5.0), "width"), ((5.0, math.inf), "height")])
    def test_a_sheet_without_size_is_refused(self, size: tuple[float, float], name: str) -> None:
        with pytest.raises(FormatError, match=rf"picture.{name}: value is .* mm; allowed: more than 0"):
            Picture(*size, (), "A sheet")

    def test_an_empty_sheet_is_refused(self) -> None:
        with pytest.raises(FormatError, match="picture 'A sheet': shows 0 items; allowed: at least 1"):
            picture_text(Picture(80.0, HEIGHT, (), "A sheet"))
