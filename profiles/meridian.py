"""A curve of revolution's generating curve, exact: Chebyshev series in arc length.

Terms: ``s`` is the arc length from the axis [mm], ``r`` the radius and ``z`` the height [mm], ``ψ`` the slope, the
angle from the radius direction to the tangent [rad], ``κ = dψ/ds`` the meridional curvature [1/mm]. The *normal* points
to the left of the direction of travel: towards the focus of a bowl that is walked from its vertex outwards.

References
----------
Cesàro's intrinsic equation: a plane curve is known by its curvature as a function of its arc length (from memory).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from profiles.errors import GeometryError
from profiles.face import Face
from profiles.series import Series, constant, merged_breaks, resolve

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Meridian:
    """A plane curve with radius, height and slope as series in its own arc length.

    Parameters
    ----------
    radius, height : Series
        Coordinates over the arc length [mm].
    slope : Series
        Tangent angle over the arc length [rad].
    """

    radius: Series
    height: Series
    slope: Series

    @classmethod
    def of_face(cls, face: Face, length: float) -> Meridian:
        """Return a face's meridian from the axis outwards (``dr/ds = cos ψ``).

        Parameters
        ----------
        face : Face
            The surface of revolution.
        length : float
            Arc length to follow it for [mm].

        Returns
        -------
        Meridian
            The curve from ``s = 0`` to ``s = length``.

        Raises
        ------
        GeometryError
            If the face ends before that length.
        """
        # No curve is shorter than its radius, so the whole stretch lies within a radius of its length.
        run = arc_length_over_aperture(face, face.aperture(length))
        if float(run(run.end)) < length:
            raise GeometryError(
                f"the face ends {float(run(run.end)):.6g} mm along its meridian, before the {length:.6g} mm that "
                "rim and trim need; allowed: a rim and trim on the face; do: ask for less, or a longer focal length"
            )

        def values(aperture: Array) -> Array:
            radius = face.radius_at(aperture)
            return np.stack([radius, face.height(radius), np.arctan(face.incline(radius))])

        return _by_arc_length(values, arc_length_over_aperture(face, float(run.solve(length))))

    @classmethod
    def of_curvature(cls, curvature: Series, *, slope: float = 0.0, radius: float = 0.0) -> Meridian:
        """Return the curve that has a given curvature (Cesàro), from height 0.

        Parameters
        ----------
        curvature : Series
            κ over the arc length [1/mm].
        slope : float
            Slope at the start [rad].
        radius : float
            Radius at the start [mm].

        Returns
        -------
        Meridian
            ``ψ = ∫κ ds``, ``r = ∫cos ψ ds``, ``z = ∫sin ψ ds``.
        """
        angle = curvature.integral(value=slope)
        across, up = resolve(
            lambda where: np.stack([np.cos(angle(where)), np.sin(angle(where))]), angle.breaks, sizes=[1.0, 1.0]
        )
        return cls(across.integral(value=radius), up.integral(), angle)

    @property
    def start(self) -> float:
        """Arc length at the inner end [mm]."""
        return self.slope.start

    @property
    def end(self) -> float:
        """Arc length at the outer end [mm]."""
        return self.slope.end

    @property
    def on_axis(self) -> bool:
        """Whether the curve starts on the axis."""
        return bool(abs(self.radius(self.start)) <= 1e-12 * (self.end - self.start))

    @cached_property
    def breaks(self) -> Array:
        """Arc lengths between which the curve is smooth [mm]."""
        return merged_breaks(self.radius.breaks, self.slope.breaks, start=self.start, end=self.end)

    @cached_property
    def curvature(self) -> Series:
        """Meridional curvature over the arc length [1/mm]."""
        return self.slope.derivative()

    def points(self, where: ArrayLike) -> Array:
        """Return points (radius, height) [mm] at arc lengths [mm], shape (…, 2)."""
        return np.stack([self.radius(where), self.height(where)], axis=-1)

    def tangents(self, where: ArrayLike) -> Array:
        """Return unit tangents at arc lengths [mm], shape (…, 2)."""
        slope = self.slope(where)
        return np.stack([np.cos(slope), np.sin(slope)], axis=-1)

    def normals(self, where: ArrayLike) -> Array:
        """Return unit normals to the left of the curve at arc lengths [mm], shape (…, 2)."""
        slope = self.slope(where)
        return np.stack([-np.sin(slope), np.cos(slope)], axis=-1)

    def at_radius(self, radius: ArrayLike) -> Array:
        """Return the arc length [mm] at which the curve reaches a radius [mm]."""
        return self.radius.solve(radius)

    def nearest(self, points: Array) -> Array:
        """Return the arc lengths [mm] of the curve's points nearest to given points (n, 2) [mm]."""
        grid = np.concatenate([np.linspace(start, end, 65) for start, end in pairwise(self.breaks.tolist())])
        near = self.points(grid)
        where = np.array([grid[np.argmin(np.hypot(*(near - point).T))] for point in points])
        for _ in range(6):
            gap = self.points(where) - points
            along = (gap * self.tangents(where)).sum(axis=1)
            bend = 1.0 + self.curvature(where) * (gap * self.normals(where)).sum(axis=1)
            where = np.clip(where - along / np.maximum(bend, 0.1), self.start, self.end)
        return np.asarray(where)

    def part(self, start: float, end: float) -> Meridian:
        """Return the stretch between two arc lengths [mm], which keeps them; a little beyond the ends it goes on."""
        breaks = merged_breaks(self.breaks[1:-1], start=start, end=end)
        return Meridian(*resolve(self._values, breaks, sizes=self._sizes))

    def scaled(self, factor: float) -> Meridian:
        """Return the curve enlarged about the origin by a positive factor [-]; its arc length grows alike."""
        breaks = self.breaks * factor

        def values(where: Array) -> Array:
            return np.asarray(self._values(where / factor) * np.array([[factor], [factor], [1.0]]))

        return Meridian(*resolve(values, breaks, sizes=self._sizes * np.array([factor, factor, 1.0])))

    def raised(self, height: float) -> Meridian:
        """Return the curve shifted along the axis [mm]."""
        return Meridian(self.radius, Series(tuple(piece + height for piece in self.height.pieces)), self.slope)

    def offset(self, distance: float | Series) -> Meridian:
        """Return the curve at a distance along the normal.

        Parameters
        ----------
        distance : float or Series
            How far to the left of the curve (towards the focus of a bowl) each point moves [mm]; negative to the
            right. A series is a distance over the arc length.

        Returns
        -------
        Meridian
            ``P + δ n`` by its own arc length.

        Raises
        ------
        GeometryError
            If the offset reaches a centre of curvature of the curve or of its parallel circle, so that it folds.
        """
        shift = distance if isinstance(distance, Series) else constant(distance, self.start, self.end)
        change = shift.derivative()
        breaks = merged_breaks(self.breaks, shift.breaks, start=self.start, end=self.end)
        self._check_fold(shift, breaks)

        def speed(where: Array) -> Array:
            return np.hypot(1.0 - self.curvature(where) * shift(where), change(where))

        def values(where: Array) -> Array:
            radius, height, slope = self._values(where)
            lean = np.arctan2(change(where), 1.0 - self.curvature(where) * shift(where))
            return np.stack(
                [radius - shift(where) * np.sin(slope), height + shift(where) * np.cos(slope), slope + lean]
            )

        (rate,) = resolve(lambda where: speed(where)[None], breaks, sizes=[1.0])
        return _by_arc_length(values, rate.integral(value=self.start))

    def offset_back(self, distance: Series) -> tuple[Meridian, Series]:
        """Return the curve of which this one is the offset.

        Parameters
        ----------
        distance : Series
            How far each point of this curve lies to the left of the other one, along the other's normal [mm]; over
            this curve's arc length.

        Returns
        -------
        source : Meridian
            The curve whose offset by that distance is this one [mm].
        run : Series
            Its arc length over this curve's [mm].

        Raises
        ------
        GeometryError
            If the distance changes faster than the arc length, or the curve folds.

        Notes
        -----
        With ``P`` a point of this curve, ``n`` the other's normal and ``δ`` the distance, the other's point is
        ``P − δ n``. Its derivative is normal to n only if ``sin(ψ_here − ψ_there) = dδ/ds``.
        """
        change = distance.derivative()
        turn = change.derivative()
        breaks = merged_breaks(self.breaks, distance.breaks, start=self.start, end=self.end)
        steepest = max(change.largest()[1], -change.smallest()[1])
        if steepest >= 1.0:
            raise GeometryError(
                f"a thickness changes by {steepest:.3g} mm per mm of the curve; allowed: less than 1; do: check the "
                "thickness table"
            )

        def values(where: Array) -> Array:
            radius, height, slope = self._values(where)
            there = slope - np.arcsin(np.clip(change(where), -1.0, 1.0))
            return np.stack([radius + distance(where) * np.sin(there), height - distance(where) * np.cos(there), there])

        def speed(where: Array) -> Array:
            lean = np.sqrt(np.maximum(1.0 - change(where) ** 2, 1e-12))
            return np.asarray(lean + distance(where) * (self.curvature(where) - turn(where) / lean))

        (rate,) = resolve(lambda where: speed(where)[None], breaks, sizes=[1.0])
        folded, least = rate.smallest()
        if least <= 0.0:
            shift, radius = abs(float(distance(folded))), abs(float(self.radius(folded)))
            raise GeometryError(
                f"an offset of {shift:.6g} mm at radius {radius:.6g} mm folds the curve; allowed: less than its radius "
                "of curvature there; do: use a thinner sheet or cover"
            )
        run = rate.integral(value=self.start)
        return _by_arc_length(values, run), run

    def _check_fold(self, shift: Series, breaks: Array) -> None:
        (room,) = resolve(lambda where: (1.0 - self.curvature(where) * shift(where))[None], breaks, sizes=[1.0])
        where, least = room.smallest()
        if least <= 1e-9:
            radius = abs(float(self.radius(where)))
            raise GeometryError(
                f"an offset of {abs(float(shift(where))):.6g} mm at radius {radius:.6g} mm folds the curve: it is not "
                f"smaller than the radius of curvature there; allowed: less than "
                f"{1.0 / abs(float(self.curvature(where))):.6g} mm; do: use a thinner sheet or cover, or put the other "
                "face on the mould"
            )

    @property
    def _sizes(self) -> Array:
        size = float(np.abs(self.points(self.breaks)).max()) + (self.end - self.start)
        return np.array([size, size, 1.0])

    def _values(self, where: Array) -> Array:
        return np.stack([self.radius(where), self.height(where), self.slope(where)])


def arc_length_over_aperture(face: Face, end: float) -> Series:
    """Return a face's arc length from the axis as a function of its aperture, ``∫ sqrt(1 + z'²) dr``.

    Parameters
    ----------
    face : Face
        The surface of revolution.
    end : float
        Aperture to which it is followed, as `Face.aperture` has it [mm].

    Returns
    -------
    Series
        Arc length [mm].
    """

    def speed(aperture: Array) -> Array:
        return np.asarray(face.radius_rate(aperture) * np.hypot(1.0, face.incline(face.radius_at(aperture))))

    (rate,) = resolve(lambda aperture: speed(aperture)[None], [0.0, end], sizes=[1.0])
    return rate.integral()


def _by_arc_length(values: Callable[[Array], Array], run: Series) -> Meridian:
    """Return the curve whose radius, height and slope are functions of a parameter over which its arc length runs."""
    breaks = run(run.breaks)
    sizes = np.abs(values(run.breaks)).max(axis=1)
    size = float(sizes[:2].max())
    return Meridian(*resolve(lambda where: values(run.solve(where)), breaks, sizes=[size, size, 1.0]))
