"""The details of a work package's picture: the rim of the half section and of the turning program, enlarged."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from fabricate.picture_files import ReadPackage, ReadProgram
from fabricate.picture_views import (
    HEAVY,
    MEDIUM,
    SMALL,
    Places,
    Point,
    View,
    joint_ticks,
    level_line,
    moves,
    rectangle,
)
from outputs.svg import Area, Item, Label, Leader, Stroke, Window, circle
from profiles.arcpath import ArcPath


@dataclass(frozen=True)
class Detail:
    """A part of a view, enlarged in a window of its own.

    Parameters
    ----------
    letter : str
        Its name.
    low, high : tuple of float
        Corners of the window [mm of paper].
    centre : tuple of float
        Radius and Z in the middle of the window [mm].
    main, view : View
        Where the part lies in the main view, and how the detail lies on the paper.
    """

    letter: str
    low: Point
    high: Point
    centre: Point
    main: View
    view: View

    @classmethod
    def around(cls, letter: str, corners: tuple[Point, Point], centre: Point, main: View, enlargement: float) -> Detail:
        """Return the detail that shows a place in the middle of a window.

        Parameters
        ----------
        letter : str
            Its name.
        corners : tuple of two points
            Lower left and upper right corner of the window [mm of paper].
        centre : tuple of float
            Radius and Z of the place [mm].
        main : View
            The main view.
        enlargement : float
            Scale of the detail over that of the main view [-].

        Returns
        -------
        Detail
            The detail.
        """
        (left, bottom), (right, top) = corners
        scale = enlargement * main.scale
        zero = (0.5 * (left + right) - main.side * scale * centre[0], 0.5 * (bottom + top) - scale * centre[1])
        return cls(letter, *corners, centre, main, View(zero, scale, main.side))

    def framed(self, items: tuple[Item, ...], title: str) -> Iterator[Item]:
        """Yield the window, its frame and title, and the frame of the part in the main view.

        Parameters
        ----------
        items : tuple of Item
            What is seen in it [mm of paper].
        title : str
            Written over it, after its letter.

        Yields
        ------
        Item
            To be drawn in this order [mm of paper].
        """
        yield Window(self.low, self.high, items)
        yield Stroke((rectangle(self.low, self.high),), MEDIUM)
        yield Label(f"{self.letter}: {title}", (self.low[0], self.high[1] + 1.8), bold=True)
        across, up = self.main.point(*self.centre)
        share = self.main.scale / self.view.scale
        half = [0.5 * share * (high - low) for low, high in zip(self.low, self.high, strict=True)]
        yield Stroke((rectangle((across - half[0], up - half[1]), (across + half[0], up + half[1])),), 0.22)
        place = (across + 0.8 * self.main.side * half[0], up - half[1] - 4.2)
        yield Label(self.letter, place, anchor="middle", bold=True)


def section_detail(files: ReadPackage, detail: Detail, places: Places) -> Iterator[Item]:
    """Yield the rim of the half section with the part's reflecting face after its release.

    Parameters
    ----------
    files : ReadPackage
        What was read back [mm].
    detail : Detail
        Where it is drawn.
    places : Places
        Named places of the mould [mm].

    Yields
    ------
    Item
        To be drawn in this order [mm of paper].
    """
    view = detail.view
    curve, face = view.path(files.curve), view.path(files.face)
    yield Area(view.path(files.body))
    yield Stroke((view.path(files.body),), MEDIUM)
    yield Stroke((curve,), HEAVY, accent=True)
    yield Stroke(tuple(joint_ticks(curve)), MEDIUM)
    yield Stroke((face,), MEDIUM, "phantom")
    rim, end = view.point(*places.rim), (float(curve.vertices[-1, 0]), float(curve.vertices[-1, 1]))
    left, top = detail.low[0], detail.high[1]
    rim_text = "rim, cut here" if places.trimmed_on_mould else "rim of the part"
    labels = (
        ("part's face, released", 45.0, _before(face, 5.0)),
        (rim_text, 35.0, rim),
        ("mould curve ends", 34.0, end),
    )
    for row, (text, reach, tip) in enumerate(labels):
        yield Leader(Label(text, (left + reach, top - 6.0 - 6.5 * row), SMALL, "end"), tip)


def _before(path: ArcPath, distance: float) -> Point:
    """Return the point of a path at about a distance before its end [mm]."""
    share = 1.0 - distance / float(path.lengths[-1])
    across, up = path.along(len(path) - 1, np.array([max(share, 0.0)]))[0]
    return float(across), float(up)


def program_detail(program: ReadProgram, body: ArcPath, detail: Detail) -> Iterator[Item]:
    """Yield the moves at the rim, the nose drawn on the finishing pass.

    Parameters
    ----------
    program : ReadProgram
        What was read back [mm].
    body : ArcPath
        Half section of the mould [mm].
    detail : Detail
        Where it is drawn.

    Yields
    ------
    Item
        To be drawn in this order [mm of paper].
    """
    view = detail.view
    yield Stroke((view.path(body),), MEDIUM)
    yield from moves(program, view, inside_stock=True)
    path, radius = view.path(program.finishing), view.scale * program.nose
    nose, low = _before(path, 14.0), detail.low
    yield Area(circle(nose, radius), "paper")
    yield Stroke((circle(nose, radius),), MEDIUM)
    yield Leader(Label("nose", (low[0] + 11.0, low[1] + 17.0), SMALL, "end"), (nose[0], nose[1] - radius))
    yield Leader(Label("finishing", (low[0] + 18.0, low[1] + 9.5), SMALL, "end"), _before(path, 5.0))
    outside = view.point(program.stock.radius, 0.0)[0]
    shown = (
        _edge_of_view(paths, program, detail, share) for paths, share in ((program.cuts, 0.8), (program.rapids, 0.4))
    )
    for text, tip in zip(("roughing", "rapid"), shown, strict=True):
        if tip is not None:
            yield Leader(Label(text, (outside + 9.0, tip[1] + 3.0), SMALL), tip)


def _edge_of_view(paths: tuple[ArcPath, ...], program: ReadProgram, detail: Detail, share: float) -> Point | None:
    """Return where a level line of a detail leaves the stock, at a share of the window's lines from below [mm]."""
    half = 0.5 * (detail.high[1] - detail.low[1]) / detail.view.scale
    found = level_line(paths, program.stock.radius, (detail.centre[1], detail.centre[1] + half), share)
    return detail.view.point(*found) if found else None
