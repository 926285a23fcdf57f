"""What a release does to a reflecting face: its meridional curvature on the mould and after, each from the other.

The *rim* is a material point of the reflecting face: at equal arc length, on the mould and of the released part.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import Series, merged_breaks, resolve

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class ReleasedFace:
    """The reflecting face of the finished part, released.

    Parameters
    ----------
    face : Face
        Its equation.
    meridian : Meridian
        Its curve from the axis to the end of the trim, by its own arc length [mm].
    rim : float
        Arc length at the rim [mm].
    """

    face: Face
    meridian: Meridian
    rim: float


Bends = Callable[[Array, Array], Array]
"""Curvatures [1/mm] at arc lengths [mm] from the curvatures [1/mm] on the other side of a release."""


@dataclass(frozen=True, eq=False)
class CurvatureMap:
    """The meridional curvature on the mould and of the released part, each from the other.

    Parameters
    ----------
    loaded : callable
        Curvature on the mould from arc length and curvature of the released face [1/mm].
    released : callable
        Its inverse.
    breaks : ndarray
        Arc lengths between which both are smooth [mm]; empty where they are so everywhere.
    """

    loaded: Bends
    released: Bends
    breaks: Array

    @classmethod
    def of(cls, *, gain: float = 1.0, shift: Series | None = None) -> CurvatureMap:
        """Return the map ``κ_mould = gain κ_part + shift``.

        Parameters
        ----------
        gain : float
            Factor [-].
        shift : Series or None
            What is added over the arc length [1/mm]; None for nothing.
        """

        def added(where: Array) -> Array | float:
            return 0.0 if shift is None else shift(where)

        return cls(
            lambda where, bend: np.asarray(gain * bend + added(where)),
            lambda where, bend: np.asarray((bend - added(where)) / gain),
            np.empty(0) if shift is None else shift.breaks,
        )

    def weakened(self, share: float) -> CurvatureMap:
        """Return the map of a part that loses a further share of the curvature on the mould [-] on release.

        Only its way from the mould to the part is known; `load` undoes no more than this map does.
        """
        return CurvatureMap(
            self.loaded, lambda where, bend: np.asarray(self.released(where, bend) - share * bend), self.breaks
        )

    def load(self, part: Meridian) -> Meridian:
        """Return the face as it lies on the mould, from the released face [mm]."""
        return self._mapped(part, self.loaded)

    def release(self, on_mould: Meridian) -> Meridian:
        """Return the released face, from the face as it lies on the mould [mm]."""
        return self._mapped(on_mould, self.released)

    def release_near(self, written: Meridian, on_mould: Meridian, part: Meridian) -> Meridian:
        """Return the released face of a sheet on a mould that strays a little from the exact one.

        Parameters
        ----------
        written : Meridian
            The face on that mould; kinks and flats, as a mould cut in chords has, are allowed [mm].
        on_mould, part : Meridian
            The face on the exact mould, and what it releases to [mm].

        Returns
        -------
        Meridian
            The released face [mm].

        Notes
        -----
        ``ψ_part + ∫ q d(ψ_written − ψ_mould)``, q the share of a small turn on the mould that is left on release, from
        the exact curvature there. So a turn springs back alike whether it is spread over an arc or gathered in a kink.
        """
        end = written.end
        breaks = merged_breaks(written.breaks, on_mould.breaks, part.breaks, self.breaks, start=written.start, end=end)
        step = 1e-3 / end

        def left(where: Array) -> Array:
            bend = on_mould.curvature(where)
            return np.asarray((self.released(where, bend + step) - self.released(where, bend - step)) / (2.0 * step))

        def strays(where: Array) -> Array:
            return written.slope(where) - on_mould.slope(where)

        # A difference of two curvatures keeps their digits but for three.
        (share,) = resolve(lambda where: left(where)[None], breaks, sizes=[1e3])
        rate = share.derivative()
        (drift,) = resolve(lambda where: (rate(where) * strays(where))[None], breaks, sizes=[10.0 / end])
        drifted = drift.integral()
        (slope,) = resolve(
            lambda where: (part.slope(where) + share(where) * strays(where) - drifted(where))[None], breaks, sizes=[1.0]
        )
        across, up = resolve(
            lambda where: np.stack([np.cos(slope(where)), np.sin(slope(where))]), slope.breaks, sizes=[1.0, 1.0]
        )
        return Meridian(across.integral(value=float(written.radius(written.start))), up.integral(), slope)

    def _mapped(self, meridian: Meridian, change: Bends) -> Meridian:
        start, end = meridian.start, meridian.end
        breaks = merged_breaks(meridian.breaks, self.breaks, start=start, end=end)
        # Sizes of curvatures are measured against a turn of one radian over the whole length.
        (bend,) = resolve(
            lambda where: change(where, meridian.curvature(where))[None], breaks, sizes=[10.0 / (end - start)]
        )
        first = np.asarray(meridian.start)
        return Meridian.of_curvature(
            bend, slope=float(meridian.slope(first)), radius=float(meridian.radius(first))
        ).raised(float(meridian.height(first)))


def depth_loss(part: ReleasedFace, springback: CurvatureMap) -> float:
    """Return the depth on the mould less that of the part, vertex to rim, at the rim's material point [mm]."""
    return float(springback.load(part.meridian).height(part.rim) - part.meridian.height(part.rim))


def rim_slope_loss(part: ReleasedFace, springback: CurvatureMap) -> float:
    """Return the rim's slope on the mould less that of the part, at the rim's material point [rad]."""
    return float(springback.load(part.meridian).slope(part.rim) - part.meridian.slope(part.rim))
