"""A round hole parallel to the axis of a solid of revolution.

A *hole* is a cylinder beside or on the axis of the solid, from one height to another. It is *open below* where it runs
out through a flat face that looks down, and *open above* where it runs out through the forming surface or a flat face
that looks up; a hole that is open at both ends runs *through*.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from profiles.errors import GeometryError


@dataclass(frozen=True)
class Hole:
    """A round hole parallel to the axis of a solid.

    Parameters
    ----------
    centre : tuple of float
        Where its axis stands (x, y) [mm].
    diameter : float
        Its width [mm].
    bottom : float
        Height at which it begins [mm]; minus infinity: it is open below.
    top : float
        Height at which it ends [mm]; infinity: it is open above.

    Raises
    ------
    GeometryError
        If a number is none, the diameter is not positive, it has no length, or both of its ends are closed.
    """

    centre: tuple[float, float]
    diameter: float
    bottom: float = -np.inf
    top: float = np.inf

    def __post_init__(self) -> None:
        numbers = (*self.centre, self.diameter)
        if not (np.isfinite(numbers).all() and self.diameter > 0.0 and self.bottom < self.top):
            raise GeometryError(
                f"{self}: runs from {self.bottom:g} to {self.top:g} mm; allowed: finite numbers, a diameter above 0 "
                "and an end above its beginning; do: correct them"
            )
        if not (self.open_below or self.open_above):
            raise GeometryError(
                f"{self}: begins at {self.bottom:g} and ends at {self.top:g} mm inside the solid, where no drill "
                "comes; allowed: at least one open end; do: leave out its bottom or its top"
            )

    def __str__(self) -> str:
        return f"hole of {self.diameter:g} mm at ({self.centre[0]:.6g}, {self.centre[1]:.6g})"

    @property
    def radius(self) -> float:
        """Half of its width [mm]."""
        return 0.5 * self.diameter

    @property
    def distance(self) -> float:
        """How far its axis is from the solid's [mm]."""
        return float(np.hypot(*self.centre))

    @property
    def least_radius(self) -> float:
        """Radius about the solid's axis of its nearest point [mm]."""
        return max(self.distance - self.radius, 0.0)

    @property
    def most_radius(self) -> float:
        """Radius about the solid's axis of its farthest point [mm]."""
        return self.distance + self.radius

    @property
    def open_below(self) -> bool:
        """Whether it runs out through a flat face that looks down."""
        return self.bottom == -np.inf

    @property
    def open_above(self) -> bool:
        """Whether it runs out through the forming surface or a flat face that looks up."""
        return self.top == np.inf

    @property
    def through(self) -> bool:
        """Whether it is open at both ends."""
        return self.open_below and self.open_above
