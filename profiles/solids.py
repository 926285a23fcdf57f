"""Solids of revolution from their exact half section, and areas and volumes by Pappus–Guldinus.

The *half section* of a solid is a closed outline in the plane (radius, height) that is walked with the solid to the
right: the *forming curve* outwards from the axis or the bore, then the *rest* (edge, land, outer side, base, spigot,
bore) back to where the curve starts. The left of the walk is outside. Lengths are millimetres.

References
----------
Pappus–Guldinus: a surface of revolution has the area of its line times the way of the line's centroid, a solid the
volume of its half section times the way of the section's centroid. Both are ``2π`` times a first moment about the axis.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from profiles.arcpath import ArcPath
from profiles.errors import GeometryError
from profiles.meridian import Meridian
from profiles.series import Series, resolve

Array = NDArray[np.float64]

JOIN = 1e-9
"""Gap allowed where forming curve and rest meet, as a part of the solid's size."""

FLAT_ARC = 3e-3
"""Half angle [rad] under which an arc's moments come from their power series."""


@dataclass(frozen=True, eq=False)
class Solid:
    """A solid of revolution whose forming surface faces up.

    Parameters
    ----------
    curve : Meridian
        The exact forming curve from the axis or the bore outwards, in the solid's own frame [mm]: its height rises with
        the radius on a female mould and falls on a male one, see `turned_over`.
    rest : ArcPath
        The remaining half section, from the end of the curve by edge, land, outer side, base, spigot and bore or axis
        back to its start [mm].

    Raises
    ------
    GeometryError
        If the two do not meet, a radius is negative, or the outline runs the wrong way round.
    """

    curve: Meridian
    rest: ArcPath

    def __post_init__(self) -> None:
        ends = self.curve.points(np.array([self.curve.end, self.curve.start]))
        gap = float(np.hypot(*(ends - self.rest.vertices[[0, -1]]).T).max())
        if not gap <= JOIN * self.size:
            raise GeometryError(
                f"forming curve and the rest of the half section are {gap:.3g} mm apart where they should meet; "
                f"allowed: {JOIN * self.size:.3g} mm; do: let the rest start at the curve's end and end at its start"
            )
        least = min(float(self.rest.vertices[:, 0].min()), float(ends[:, 0].min()))
        if least < -JOIN * self.size:
            raise GeometryError(
                f"a half section reaches radius {least:g} mm; allowed: 0 or more; do: keep it on one side of the axis"
            )
        if self.volume <= 0.0:
            raise GeometryError(
                f"a half section encloses {self.volume:.6g} mm^3; allowed: more than 0; do: walk it with the solid to "
                "the right: the forming curve outwards, then edge, outer side, base and bore"
            )

    @cached_property
    def size(self) -> float:
        """Largest coordinate of the half section [mm]."""
        ends = self.curve.points(self.curve.breaks)
        return float(max(np.abs(ends).max(), np.abs(self.rest.vertices).max()))

    @cached_property
    def forming_area(self) -> float:
        """Area of the forming surface [mm^2]."""
        return area(self.curve)

    @cached_property
    def area(self) -> float:
        """Area of the whole surface [mm^2]."""
        return self.forming_area + area(self.rest)

    @cached_property
    def volume(self) -> float:
        """Volume of the solid [mm^3]."""
        return -np.pi * (_squares(self.curve) + _squares(self.rest))


def turned_over(curve: Meridian) -> Meridian:
    """Return a curve with its heights turned into depths: a bowl becomes a dome.

    Parameters
    ----------
    curve : Meridian
        Any curve [mm].

    Returns
    -------
    Meridian
        The same radius over the arc length, height and slope with the other sign [mm, rad].
    """
    return Meridian(curve.radius, _negative(curve.height), _negative(curve.slope))


def area(path: Meridian | ArcPath) -> float:
    """Return the area of the surface that a curve or path turns, ``2π ∫ r ds``.

    Parameters
    ----------
    path : Meridian or ArcPath
        In the plane (radius, height) [mm].

    Returns
    -------
    float
        Area [mm^2].

    Examples
    --------
    A torus of radii 5 and 1 has the area ``20 π²``:

    >>> ring = ArcPath(np.array([[6.0, 0.0], [4.0, 0.0], [6.0, 0.0]]), np.ones(2))
    >>> round(area(ring) / np.pi**2, 12)
    20.0
    """
    if isinstance(path, Meridian):
        return float(2.0 * np.pi * path.radius.integral()(path.end))
    middles = 0.5 * (path.vertices[:-1, 0] + path.vertices[1:, 0])
    # The centroid of an arc lies off the middle of its chord, to the right of an arc that turns left.
    rise = _arc_rise(0.5 * path.turns) * np.diff(path.vertices[:, 1])
    return float(2.0 * np.pi * (path.lengths * (middles + rise)).sum())


def volume(path: Meridian | ArcPath) -> float:
    """Return the volume that a closed path turns, or that lies between a curve and the axis, ``π |∫ r² dz|``.

    Parameters
    ----------
    path : Meridian or ArcPath
        In the plane (radius, height) [mm].

    Returns
    -------
    float
        Volume [mm^3].

    Examples
    --------
    A torus of radii 5 and 1 has the volume ``10 π²``:

    >>> ring = ArcPath(np.array([[6.0, 0.0], [4.0, 0.0], [6.0, 0.0]]), np.ones(2))
    >>> round(volume(ring) / np.pi**2, 12)
    10.0
    """
    return float(np.pi * abs(_squares(path)))


def _squares(path: Meridian | ArcPath) -> float:
    """Return ``∫ r² dz`` along a curve or path."""
    if isinstance(path, Meridian):
        size = float(np.abs(path.radius(path.breaks)).max()) ** 2
        (rate,) = resolve(
            lambda where: (path.radius(where) ** 2 * np.sin(path.slope(where)))[None], path.breaks, sizes=[size]
        )
        return float(rate.integral()(path.end))
    radii, heights = path.vertices.T
    chords = (radii[:-1] ** 2 + radii[:-1] * radii[1:] + radii[1:] ** 2) / 3.0 * np.diff(heights)
    return float((chords + 2.0 * _segments(path)).sum())


def _segments(path: ArcPath) -> Array:
    """Return ``∫ r dA`` over the segment between each arc and its chord, positive to the right of the chord."""
    half = 0.5 * path.turns
    across, up = np.diff(path.vertices, axis=0).T
    chord = np.hypot(across, up)
    middles = 0.5 * (path.vertices[:-1, 0] + path.vertices[1:, 0])
    flat = np.abs(half) < FLAT_ARC
    angle = np.where(flat, 1.0, half)
    sine, cosine = np.sin(angle), np.cos(angle)
    size = np.where(flat, half / 6.0 * (1.0 + 2.0 * half**2 / 15.0), (angle - sine * cosine) / (4.0 * sine**2))
    lever = np.where(
        flat,
        half**2 / 60.0 * (1.0 + 5.0 * half**2 / 21.0),
        (2.0 / 3.0 * sine**3 - cosine * (angle - sine * cosine)) / (8.0 * sine**3),
    )
    return np.asarray(chord**2 * (size * middles + lever * up))


def _arc_rise(half: Array) -> Array:
    """Return how far an arc's centroid lies off its chord's middle, as a part of the chord, for a half angle."""
    flat = np.abs(half) < FLAT_ARC
    angle = np.where(flat, 1.0, half)
    exact = (np.sin(angle) / angle - np.cos(angle)) / (2.0 * np.sin(angle))
    return np.asarray(np.where(flat, half / 6.0 * (1.0 + half**2 / 15.0), exact))


def _negative(series: Series) -> Series:
    return Series(tuple(-piece for piece in series.pieces))
