"""What stands on a drafting sheet: lines, hatched areas, labels, dimensions, leaders and windows.

The sheet is measured in millimetres of paper, u to the right and v upwards from its lower left corner. What a line
means is told by its width, its dashes and a label, never by colour alone. `outputs.svg` writes it.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np

from profiles.arcpath import ArcPath
from profiles.errors import FormatError

Point = tuple[float, float]
Pattern = Literal["solid", "dashed", "chain", "phantom"]
Fill = Literal["hatch", "ink", "accent", "paper"]
Anchor = Literal["start", "middle", "end"]

THIN = 0.18
TEXT_SIZE = 3.5


@dataclass(frozen=True, eq=False)
class Stroke:
    """Lines of one kind.

    Parameters
    ----------
    paths : tuple of ArcPath
        What is drawn [mm of paper].
    width : float
        Width of the line [mm of paper].
    pattern : {"solid", "dashed", "chain", "phantom"}
        Solid, dashed, long and short dashes (centre lines), long and two short dashes (what is not there now).
    accent : bool
        Whether it is drawn in the accent instead of in ink.
    """

    paths: tuple[ArcPath, ...]
    width: float = THIN
    pattern: Pattern = "solid"
    accent: bool = False


@dataclass(frozen=True, eq=False)
class Area:
    """A filled area without an outline.

    Parameters
    ----------
    outline : ArcPath
        Closed path around it [mm of paper].
    fill : {"hatch", "ink", "accent", "paper"}
        Thin parallel lines at 45 degrees (cut material), or a plain fill.
    """

    outline: ArcPath
    fill: Fill = "hatch"

    def __post_init__(self) -> None:
        if not self.outline.closed:
            ends = self.outline.vertices[[0, -1]].tolist()
            raise FormatError(
                f"area: its outline runs from {ends[0]} to {ends[1]} mm; allowed: a closed path; do: end it where it "
                f"starts"
            )


@dataclass(frozen=True)
class Label:
    """A line of text.

    Parameters
    ----------
    text : str
        What it says.
    place : tuple of float
        Where the base line begins, has its middle or ends [mm of paper].
    size : float
        Size of the letters [mm of paper].
    anchor : {"start", "middle", "end"}
        Which of these the place is.
    upright : bool
        Whether it is written upwards.
    bold, accent : bool
        How it is written.
    """

    text: str
    place: Point
    size: float = TEXT_SIZE
    anchor: Anchor = "start"
    upright: bool = False
    bold: bool = False
    accent: bool = False


@dataclass(frozen=True)
class Dimension:
    """A dimension: two extension lines, a line with an arrowhead at each end, and a text on it.

    Parameters
    ----------
    first, second : tuple of float
        What is measured, from the one to the other, along the dimension line [mm of paper].
    line : float
        Where the dimension line runs: its v, or, of an upright one, its u [mm of paper].
    text : str
        Figure, with its unit where the sheet does not state it.
    upright : bool
        Whether the distance is measured along v instead of along u.
    size : float
        Size of the letters [mm of paper].
    """

    first: Point
    second: Point
    line: float
    text: str
    upright: bool = False
    size: float = TEXT_SIZE


@dataclass(frozen=True)
class Leader:
    """A label with a thin line that ends with an arrowhead in what it names.

    Parameters
    ----------
    label : Label
        The text, anchored at its start or at its end.
    tip : tuple of float
        What the arrowhead touches [mm of paper].
    """

    label: Label
    tip: Point


@dataclass(frozen=True, eq=False)
class Window:
    """A rectangle of the sheet that cuts off what reaches out of it.

    Parameters
    ----------
    low, high : tuple of float
        Lower left and upper right corner [mm of paper].
    items : tuple of Item
        What is seen in it, in the sheet's own coordinates [mm of paper].
    """

    low: Point
    high: Point
    items: tuple[Item, ...]


Item = Stroke | Area | Label | Dimension | Leader | Window


@dataclass(frozen=True, eq=False)
class Picture:
    """A sheet of paper.

    Parameters
    ----------
    width, height : float
        Size [mm of paper].
    items : tuple of Item
        What is drawn, the last on top [mm of paper].
    title, description : str
        What readers hear who do not see the picture.
    """

    width: float
    height: float
    items: tuple[Item, ...]
    title: str
    description: str = ""

    def __post_init__(self) -> None:
        for name, value in (("width", self.width), ("height", self.height)):
            if not 0.0 < value < math.inf:
                raise FormatError(f"picture.{name}: value is {value} mm; allowed: more than 0; do: state its size")


def circle(centre: Point, radius: float) -> ArcPath:
    """Return a circle as two arcs, counter-clockwise.

    Parameters
    ----------
    centre : tuple of float
        Its centre [mm].
    radius : float
        Its radius [mm].

    Returns
    -------
    ArcPath
        Closed path [mm].
    """
    across, along = centre
    ends = [(across + radius, along), (across - radius, along), (across + radius, along)]
    return ArcPath(np.array(ends), np.ones(2))
