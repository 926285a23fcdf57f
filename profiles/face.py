"""The reflecting face as a surface of revolution: conic with even asphere.

The vertex is the origin, the focus of a paraboloid lies at height ``+f``; heights are measured along the axis.

References
----------
ISO 10110-12, *Optics and photonics, preparation of drawings, part 12: aspheric surfaces* (formula from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from profiles.errors import GeometryError

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Face:
    """A conic section turned about its axis, with even polynomial terms added.

    ``z(r) = r² / (R0 (1 + sqrt(1 − (1 + K) r²/R0²))) + A4 r⁴ + A6 r⁶ + …`` with ``R0 = 2 f``.

    Parameters
    ----------
    focal_length : float
        Half the radius of curvature at the vertex [mm], positive.
    conic_constant : float
        K [-]: −1 for a paraboloid, 0 for a sphere.
    asphere : tuple of float
        A4, A6, … [mm^-3, mm^-5, …].

    Raises
    ------
    GeometryError
        If the focal length is not a positive finite number.

    Examples
    --------
    >>> round(float(Face(110.0).height(200.0)), 4)
    90.9091
    """

    focal_length: float
    conic_constant: float = -1.0
    asphere: tuple[float, ...] = ()

    def __post_init__(self) -> None:
        if not 0.0 < self.focal_length < np.inf:
            raise GeometryError(f"a face needs a positive focal length, not {self.focal_length:g} mm")

    @property
    def vertex_radius(self) -> float:
        """Radius of curvature at the vertex, twice the focal length [mm]."""
        return 2.0 * self.focal_length

    @property
    def widest(self) -> float:
        """Radius at which the conic closes and the face ends [mm]; infinite for a paraboloid."""
        opening = 1.0 + self.conic_constant
        return self.vertex_radius / float(np.sqrt(opening)) if opening > 0.0 else np.inf

    @property
    def closed(self) -> bool:
        """Whether the conic closes, as a sphere does."""
        return bool(np.isfinite(self.widest))

    def aperture(self, radius: float) -> float:
        """Return the aperture up to a radius [mm]: the radius itself, or where the conic closes ``W asin(r/W)``.

        The face is a smooth function of its aperture right up to where it closes; of the radius it is not. Radii past
        0.9999 of the widest are cut off there.
        """
        return self.widest * float(np.arcsin(min(radius / self.widest, 0.9999))) if self.closed else radius

    def radius_at(self, aperture: Array) -> Array:
        """Return the radius [mm] at an aperture [mm]."""
        return np.asarray(self.widest * np.sin(aperture / self.widest)) if self.closed else aperture

    def radius_rate(self, aperture: Array) -> Array:
        """Return the radius' derivative by the aperture [-]."""
        return np.cos(aperture / self.widest) if self.closed else np.ones_like(aperture)

    def _root(self, radius: Array) -> Array:
        inside = 1.0 - (1.0 + self.conic_constant) * (radius / self.vertex_radius) ** 2
        if (inside <= 0.0).any():
            raise GeometryError(
                f"a conic with conic constant {self.conic_constant:g} and focal length {self.focal_length:g} mm "
                f"ends at radius {self.widest:g} mm and has no point at {np.max(radius):g} mm; allowed: radii on the "
                "conic; do: ask for a smaller rim and trim, a longer focal length or a smaller conic constant"
            )
        return np.asarray(np.sqrt(inside))

    def _terms(self) -> list[tuple[int, float]]:
        return [(2 * index, coefficient) for index, coefficient in enumerate(self.asphere, start=2)]

    def height(self, radius: ArrayLike) -> Array:
        """Return the height over the vertex [mm] at a radius [mm].

        Parameters
        ----------
        radius : array_like
            Distance from the axis [mm].

        Returns
        -------
        ndarray
            Height along the axis, towards the focus positive [mm].

        Raises
        ------
        GeometryError
            If the conic ends before that radius.
        """
        radius = np.asarray(radius, dtype=np.float64)
        conic = radius**2 / (self.vertex_radius * (1.0 + self._root(radius)))
        return np.asarray(conic + sum(factor * radius**power for power, factor in self._terms()))

    def incline(self, radius: ArrayLike) -> Array:
        """Return the height's derivative by the radius [-], the tangent of the slope; arguments as for `height`."""
        radius = np.asarray(radius, dtype=np.float64)
        conic = radius / (self.vertex_radius * self._root(radius))
        return np.asarray(conic + sum(power * factor * radius ** (power - 1) for power, factor in self._terms()))
