"""The views of a work package's picture: the half section and the turning program.

The mould stands upright, its axis in the middle of the sheet: the half section of the drawing on the left, the path of
the program's nose centre on the right, X to the right and Z upwards. Lengths of the mould are millimetres in the lathe
frame (radius, Z), those of the sheet millimetres of paper.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from fabricate.picture_files import ReadPackage, ReadProgram
from outputs.svg import Anchor, Area, Dimension, Item, Label, Leader, Stroke, circle
from profiles.arcpath import ArcPath

Point = tuple[float, float]

HEAVY, MEDIUM, FINE = 0.6, 0.3, 0.13
SMALL = 3.2
_TICK = 1.3
_ZERO_MARK = 1.7


@dataclass(frozen=True)
class View:
    """How the mould lies on the paper.

    Parameters
    ----------
    zero : tuple of float
        Where radius 0 and Z 0 are [mm of paper].
    scale : float
        Millimetres of paper for one of the mould [-].
    side : int
        1 where the radius runs to the right, -1 where it runs to the left.
    """

    zero: Point
    scale: float
    side: int = 1

    def point(self, radius: float, height: float) -> Point:
        """Return where a point of the lathe frame lies [mm of paper].

        Parameters
        ----------
        radius, height : float
            The point [mm].

        Returns
        -------
        tuple of float
            Across and up [mm of paper].
        """
        return self.zero[0] + self.side * self.scale * radius, self.zero[1] + self.scale * height

    def path(self, path: ArcPath) -> ArcPath:
        """Return a path of the lathe frame as it lies on the paper.

        Parameters
        ----------
        path : ArcPath
            The path [mm].

        Returns
        -------
        ArcPath
            The path [mm of paper].
        """
        scaled = path.scaled(self.scale)
        turned = ArcPath(scaled.vertices * (self.side, 1.0), self.side * scaled.bulges)
        return turned.moved(across=self.zero[0], along=self.zero[1])


@dataclass(frozen=True)
class Places:
    """Places of the mould that the picture names, in the lathe frame.

    Parameters
    ----------
    male : bool
        Whether the mould is male.
    rim : tuple of float
        Where the rim's material point lies: radius and Z [mm].
    vertex, base, land : float
        Z of the vertex, the base plane and the land [mm].
    outer_radius, end_radius : float
        Radius of the outer side, and of the end of the forming surface [mm].
    trimmed_on_mould : bool
        Whether the rim is cut where it lies on the mould.
    """

    male: bool
    rim: Point
    vertex: float
    base: float
    land: float
    outer_radius: float
    end_radius: float
    trimmed_on_mould: bool


Write = Callable[[float], str]


def section_view(files: ReadPackage, view: View, places: Places, write: Write) -> Iterator[Item]:
    """Yield the half section with its dimensions.

    Parameters
    ----------
    files : ReadPackage
        What was read back [mm].
    view : View
        How it lies on the paper.
    places : Places
        Named places of the mould [mm].
    write : callable
        Returns a length [mm] as the sheet writes it.

    Yields
    ------
    Item
        To be drawn in this order [mm of paper].
    """
    curve = view.path(files.curve)
    yield Area(view.path(files.body))
    yield Stroke((view.path(files.body),), MEDIUM)
    yield Stroke((curve,), HEAVY, accent=True)
    yield Stroke(tuple(joint_ticks(curve)), MEDIUM)
    yield from _section_dimensions(view, places, write)
    lines = (f"forming surface: {len(files.curve)} arcs,", "tangent, joints ticked")
    place, anchor = _void(view, places)
    yield Leader(Label(lines[0], place, anchor=anchor), _joint(curve))
    yield Label(lines[1], (place[0], place[1] - 4.8), anchor=anchor)


def _void(view: View, places: Places) -> tuple[Point, Anchor]:
    """Return where a label has room: over the outer end of a male mould, in the cavity of a female one."""
    if places.male:
        return (view.point(places.outer_radius, 0.0)[0] + 46.5, view.zero[1] - 6.8), "end"
    return (view.zero[0] - 58.0, view.point(*places.rim)[1] - 7.0), "start"


def _section_dimensions(view: View, places: Places, write: Write) -> Iterator[Item]:
    outside = view.point(places.outer_radius, 0.0)[0]
    rim, vertex = view.point(*places.rim), view.point(0.0, places.vertex)
    what = "rim, cut here: radius" if places.trimmed_on_mould else "rim lies at radius"
    yield Dimension(rim, view.zero, view.zero[1] + 10.0, f"{what} {write(places.rim[0])}")
    level = outside - 12.0 if places.male else view.zero[0] - 9.0
    yield Dimension(rim, vertex, level, f"depth {write(abs(places.rim[1] - places.vertex))}", upright=True)
    edge = view.point(places.outer_radius, places.base)
    top = view.zero if places.male else view.point(places.outer_radius, 0.0)
    yield Dimension(edge, top, outside - 19.0, f"base to work zero {write(-places.base)}", upright=True)


def _joint(curve: ArcPath) -> Point:
    """Return a joint in the middle of a path on the paper."""
    across, up = curve.vertices[len(curve) // 2]
    return float(across), float(up)


def joint_ticks(curve: ArcPath) -> Iterator[ArcPath]:
    """Yield a tick across each joint of a path.

    Parameters
    ----------
    curve : ArcPath
        The path [mm of paper].

    Yields
    ------
    ArcPath
        Short lines [mm of paper].
    """
    starts, _ = curve.tangents
    for vertex, way in zip(curve.vertices[1:-1], starts[1:], strict=True):
        across = _TICK * np.array([-way[1], way[0]])
        yield ArcPath(np.array([vertex - across, vertex + across]), np.zeros(1))


def program_view(program: ReadProgram, body: ArcPath, view: View, places: Places, write: Write) -> Iterator[Item]:
    """Yield the path of the nose centre over the outline of the mould.

    Parameters
    ----------
    program : ReadProgram
        What was read back [mm].
    body : ArcPath
        Half section of the mould [mm].
    view : View
        How it lies on the paper.
    places : Places
        Named places of the mould [mm].
    write : callable
        Returns a length [mm] as the sheet writes it.

    Yields
    ------
    Item
        To be drawn in this order [mm of paper].
    """
    stock = program.stock
    corners = [(0.0, stock.front), (stock.radius, stock.front), (stock.radius, stock.back), (0.0, stock.back)]
    yield Stroke((view.path(ArcPath(np.array(corners), np.zeros(3))),), MEDIUM, "phantom")
    yield Stroke((view.path(body),), MEDIUM)
    yield from moves(program, view, inside_stock=False)
    yield from _pass_labels(program, view, places)
    top = max(float(rapid.vertices[:, 1].max()) for rapid in program.rapids)
    rapid, corner = view.point(0.1 * stock.radius, top), view.point(stock.radius, stock.back)
    yield Leader(Label("rapid (dashed)", (rapid[0] + 9.0, rapid[1] - 6.5)), rapid)
    text = f"stock, diameter {write(2.0 * stock.radius)}"
    yield Leader(Label(text, (corner[0] - 9.0, corner[1] - 8.0), anchor="end"), corner)


def _pass_labels(program: ReadProgram, view: View, places: Places) -> Iterator[Item]:
    """Yield the names of finishing and roughing, inside the outline of the mould."""
    stock, path = program.stock, program.finishing
    number = max(len(path) - 2, 0)
    (radius, height) = path.along(number, np.array([0.5]))[0].tolist()
    low = view.zero[1] + view.scale * stock.back
    reach = (0.44 if places.male else 0.58) * view.scale * stock.radius
    anchor: Anchor = "end" if places.male else "start"
    rows = (low + 16.0, low + 24.0) if places.male else (low + 11.0, low + 4.0)
    label = Label("finishing pass (heavy)", (view.zero[0] + reach, rows[0]), anchor=anchor)
    yield Leader(label, view.point(radius, height))
    inwards = 0.9 * radius
    rough = level_line(program.cuts, inwards, (height, stock.front), 0.35)
    if rough:
        label = Label("roughing (thin)", (view.zero[0] + reach, rows[1]), anchor=anchor)
        yield Leader(label, view.point(*rough))


def level_line(paths: tuple[ArcPath, ...], radius: float, between: Point, share: float) -> Point | None:
    """Return a point on one of the level lines that cross a radius between two heights.

    Parameters
    ----------
    paths : tuple of ArcPath
        Lines and arcs of one stretch each [mm].
    radius : float
        Radius at which they are crossed [mm].
    between : tuple of float
        Lowest and highest Z [mm].
    share : float
        Which of them, from the lowest, 0, to the highest, 1 [-].

    Returns
    -------
    tuple of float or None
        Radius and Z [mm]; None where no level line is there.
    """
    levels = sorted(
        float(path.vertices[0, 1])
        for path in paths
        if path.vertices[0, 1] == path.vertices[1, 1] and between[0] < path.vertices[0, 1] < between[1]
        if path.vertices[:, 0].min() <= radius <= path.vertices[:, 0].max()
    )
    return (radius, levels[int(share * (len(levels) - 1))]) if levels else None


def moves(program: ReadProgram, view: View, *, inside_stock: bool) -> Iterator[Item]:
    """Yield cuts solid and rapids dashed, the finishing pass heavy.

    Parameters
    ----------
    program : ReadProgram
        What was read back [mm].
    view : View
        How it lies on the paper.
    inside_stock : bool
        Whether rapids back over what has just been cut are drawn too, which takes a large scale.

    Yields
    ------
    Item
        To be drawn in this order [mm of paper].
    """
    rapids = [path for path in program.rapids if inside_stock or not _is_over_stock(path, program)]
    yield Stroke(tuple(view.path(path) for path in program.cuts), FINE)
    yield Stroke(tuple(view.path(path) for path in rapids), FINE, "dashed")
    yield Stroke((view.path(program.finishing),), HEAVY, accent=True)


def _is_over_stock(rapid: ArcPath, program: ReadProgram) -> bool:
    """Whether the middle of a rapid lies where stock was at the start."""
    radius, height = rapid.vertices.mean(axis=0)
    return bool(radius < program.stock.radius and height < program.stock.front)


def work_zero(view: View) -> Iterator[Item]:
    """Yield the mark of the work zero: a circle with two of its quarters filled.

    Parameters
    ----------
    view : View
        How the mould lies on the paper.

    Yields
    ------
    Item
        To be drawn in this order [mm of paper].
    """
    across, up = view.zero
    ring = circle(view.zero, _ZERO_MARK)
    yield Area(ring, "paper")
    for side in (1.0, -1.0):
        corners = [(across, up), (across + side * _ZERO_MARK, up), (across, up + side * _ZERO_MARK), (across, up)]
        yield Area(ArcPath(np.array(corners), np.array([0.0, np.tan(np.pi / 8.0), 0.0])), "ink")
    yield Stroke((ring,))
    yield Leader(Label("work zero", (across - 10.0, up + 3.4), anchor="end"), (across - _ZERO_MARK, up + 0.5))


def line(start: Point, end: Point) -> ArcPath:
    """Return a straight line.

    Parameters
    ----------
    start, end : tuple of float
        Its ends [mm].

    Returns
    -------
    ArcPath
        Open path of one stretch [mm].
    """
    return ArcPath(np.array([start, end]), np.zeros(1))


def rectangle(low: Point, high: Point) -> ArcPath:
    """Return a rectangle.

    Parameters
    ----------
    low, high : tuple of float
        Lower left and upper right corner [mm].

    Returns
    -------
    ArcPath
        Closed path [mm].
    """
    corners = [low, (high[0], low[1]), high, (low[0], high[1]), low]
    return ArcPath(np.array(corners), np.zeros(4))
