"""The plot in a work package's picture: how far the drawing's arcs lie off the exact mould curve, over the radius."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np

from fabricate.mould import Mould
from fabricate.order import DRAWING, Order
from fabricate.picture_files import ReadPackage
from fabricate.picture_views import MEDIUM, SMALL, Point, line
from outputs.svg import Item, Label, Stroke
from profiles.arcpath import ArcPath, Array

_SAMPLES = 24
_MIDDLE, _REACH = 0.55, 0.31
_TICK, _NARROWEST = 1.2, 4.0


def deviation_plot(order: Order, files: ReadPackage, low: Point, high: Point) -> Iterator[Item]:
    """Yield the plot of the drawing's distance from the exact curve, along the normal, between its limits.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    files : ReadPackage
        What was read back [mm].
    low, high : tuple of float
        Corners of the plot, the figures to its left apart [mm of paper].

    Yields
    ------
    Item
        To be drawn in this order [mm of paper].
    """
    curve, allowed = order.mould.curve, order.tolerance
    radius = float(curve.radius(curve.end))
    middle, reach = low[1] + _MIDDLE * (high[1] - low[1]), _REACH * (high[1] - low[1])

    def place(where: float, distance: float) -> Point:
        return low[0] + (high[0] - low[0]) * where / radius, middle + reach * distance / allowed

    yield Label(f"C: the {len(files.curve)} arcs against the exact curve", (low[0] - 14.0, high[1] + 1.8), bold=True)
    for level in (allowed, 0.0, -allowed):
        yield Stroke((line(place(0.0, level), place(radius, level)),), MEDIUM, "dashed" if level else "solid")
        figure = f"{level / order.unit:+g}".replace("-", "\N{MINUS SIGN}") if level else "0"
        yield Label(figure, (low[0] - 1.5, place(0.0, level)[1] - 1.1), SMALL, "end")
    reached = small_length(files.deviations[DRAWING], order)
    words = f"allowed ±{allowed / order.unit:g}, reached {reached}, along the normal"
    yield Label(words, (low[0], middle + reach + 1.6), SMALL)
    yield Label("radius 0", (low[0], low[1]), SMALL)
    yield Label("above 0: proud of the curve", (0.5 * (low[0] + high[0]), low[1]), SMALL, "middle")
    yield Label(f"{radius / order.unit:.1f}", (high[0], low[1]), SMALL, "end")
    yield from _arcs(order, files, place)


def small_length(value: float, order: Order) -> str:
    """Return a deviation as a picture writes it: two digits, in the job's unit.

    Parameters
    ----------
    value : float
        The deviation [mm].
    order : Order
        The job.

    Returns
    -------
    str
        Digits without the unit.
    """
    return np.format_float_positional(float(f"{value / order.unit:.2g}"), trim="-")


def _arcs(order: Order, files: ReadPackage, place: Callable[[float, float], Point]) -> Iterator[Item]:
    """Yield the distance of each arc, its number, and a tick at each joint."""
    mould = order.mould
    path = mould.from_lathe(files.curve)
    foot = place(0.0, -order.tolerance)[1]
    for number in range(len(path)):
        where, proud = _proud(mould, path.along(number, np.linspace(0.0, 1.0, _SAMPLES)))
        points = [place(*pair) for pair in zip(where.tolist(), proud.tolist(), strict=True)]
        yield Stroke((ArcPath(np.array(points), np.zeros(_SAMPLES - 1)),), 0.45, accent=True)
        (left, _), (right, _) = points[0], points[-1]
        if number:
            yield Stroke((line((left, foot - _TICK), (left, foot + _TICK)),), MEDIUM)
        if right - left > _NARROWEST:
            yield Label(str(number + 1), (0.5 * (left + right), foot - 4.2), SMALL, "middle")


def _proud(mould: Mould, points: Array) -> tuple[Array, Array]:
    """Return radii of the exact curve and how far points over them stand out of the mould there [mm]."""
    feet = mould.curve.nearest(points)
    # The curve's normal points into a male mould and out of a female one.
    side = -1.0 if mould.kind == "male" else 1.0
    return mould.curve.radius(feet), side * ((points - mould.curve.points(feet)) * mould.curve.normals(feet)).sum(
        axis=1
    )
