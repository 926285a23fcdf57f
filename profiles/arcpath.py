"""Paths of straight lines and circular arcs in a plane.

A path is a row of vertices and one *bulge* for each stretch between two of them: the tangent of a quarter of the
angle through which the stretch turns, positive when it turns left (counter-clockwise), 0 when it is straight.
Plane coordinates are ``(u, v)``; in a meridian plane u is the radius and v the height.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.errors import GeometryError

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class ArcPath:
    """An open or closed path of straight lines and circular arcs.

    Parameters
    ----------
    vertices : ndarray of shape (n + 1, 2)
        The joints in order, the ends included [mm]. A closed path repeats its first vertex at the end.
    bulges : ndarray of shape (n,)
        Tangent of a quarter of each stretch's turn [-], left positive.

    Raises
    ------
    GeometryError
        If the shapes do not fit, a number is not finite, or two neighbouring vertices coincide.
    """

    vertices: Array
    bulges: Array

    def __post_init__(self) -> None:
        vertices = np.array(self.vertices, dtype=np.float64)
        bulges = np.array(self.bulges, dtype=np.float64)
        if vertices.ndim != 2 or vertices.shape[1] != 2 or len(vertices) != len(bulges) + 1 or not len(bulges):
            raise GeometryError(
                f"a path needs n + 1 vertices of two coordinates and n >= 1 bulges, "
                f"not shapes {vertices.shape} and {bulges.shape}"
            )
        if not (np.isfinite(vertices).all() and np.isfinite(bulges).all()):
            raise GeometryError("a path's vertices and bulges must be finite numbers")
        if not np.hypot(*np.diff(vertices, axis=0).T).all():
            raise GeometryError("two neighbouring vertices of a path coincide: leave one out")
        vertices.setflags(write=False)
        bulges.setflags(write=False)
        object.__setattr__(self, "vertices", vertices)
        object.__setattr__(self, "bulges", bulges)

    def __len__(self) -> int:
        """Return the number of lines and arcs."""
        return len(self.bulges)

    @property
    def closed(self) -> bool:
        """Whether the path ends where it began."""
        return bool((self.vertices[0] == self.vertices[-1]).all())

    @property
    def turns(self) -> Array:
        """Angle through which each stretch turns [rad], left positive."""
        return np.asarray(4.0 * np.arctan(self.bulges))

    @property
    def curvatures(self) -> Array:
        """Signed curvature of each stretch [1/mm], left positive, 0 for a line."""
        chords = np.hypot(*np.diff(self.vertices, axis=0).T)
        return np.asarray(4.0 * self.bulges / (chords * (1.0 + self.bulges**2)))

    @property
    def lengths(self) -> Array:
        """Arc length of each stretch [mm]."""
        chords = np.hypot(*np.diff(self.vertices, axis=0).T)
        half_turns = 0.5 * self.turns
        return np.asarray(chords / np.sinc(half_turns / np.pi))

    @property
    def tangents(self) -> tuple[Array, Array]:
        """Directions in which each stretch starts and ends, two arrays of unit vectors of shape (n, 2)."""
        chords = np.diff(self.vertices, axis=0)
        angles = np.arctan2(chords[:, 1], chords[:, 0])
        starts, ends = angles - 0.5 * self.turns, angles + 0.5 * self.turns
        return (
            np.column_stack([np.cos(starts), np.sin(starts)]),
            np.column_stack([np.cos(ends), np.sin(ends)]),
        )

    @property
    def kinks(self) -> Array:
        """Change of direction at each inner vertex [rad], 0 where the path is smooth, shape (n - 1,)."""
        starts, ends = self.tangents
        before, after = ends[:-1], starts[1:]
        cross = before[:, 0] * after[:, 1] - before[:, 1] * after[:, 0]
        return np.asarray(np.arctan2(cross, (before * after).sum(axis=1)))

    @property
    def centres(self) -> Array:
        """Centre of each arc [mm], shape (n, 2); not finite for a line."""
        chords = np.diff(self.vertices, axis=0)
        middles = 0.5 * (self.vertices[:-1] + self.vertices[1:])
        left = np.column_stack([-chords[:, 1], chords[:, 0]])
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.asarray(middles + left * ((1.0 - self.bulges**2) / (4.0 * self.bulges))[:, None])

    def moved(self, *, across: float = 0.0, along: float = 0.0) -> ArcPath:
        """Return the path shifted by ``across`` in u and ``along`` in v [mm]."""
        return ArcPath(self.vertices + np.array([across, along]), self.bulges)

    def scaled(self, factor: float) -> ArcPath:
        """Return the path enlarged about the origin by a positive ``factor`` [-]."""
        return ArcPath(self.vertices * factor, self.bulges)

    def turned_over(self) -> ArcPath:
        """Return the path mirrored in the u-axis: (u, v) becomes (u, -v)."""
        return ArcPath(self.vertices * (1.0, -1.0), -self.bulges)

    def swapped(self) -> ArcPath:
        """Return the path with its coordinates exchanged: (u, v) becomes (v, u)."""
        return ArcPath(self.vertices[:, ::-1], -self.bulges)

    def reversed(self) -> ArcPath:
        """Return the same path walked the other way."""
        return ArcPath(self.vertices[::-1], -self.bulges[::-1])

    def rounded(self, decimals: int, *, bulge_decimals: int) -> ArcPath:
        """Return the path as a file with so many decimals holds it, minus zeros made plain zeros."""
        return ArcPath(
            np.round(self.vertices, decimals) + 0.0,
            np.round(self.bulges, bulge_decimals) + 0.0,
        )

    def joined(self, other: ArcPath) -> ArcPath:
        """Return this path with ``other`` appended, which must start where this one ends.

        Raises
        ------
        GeometryError
            If there is a gap between the two.
        """
        if not (self.vertices[-1] == other.vertices[0]).all():
            raise GeometryError(f"a path that ends at {self.vertices[-1]} is not continued at {other.vertices[0]}")
        return ArcPath(
            np.vstack([self.vertices, other.vertices[1:]]),
            np.concatenate([self.bulges, other.bulges]),
        )

    def points(self, *, sagitta: float) -> Array:
        """Return points along the path, arcs broken into chords that stray by at most ``sagitta`` [mm].

        Returns
        -------
        ndarray of shape (k, 2)
            Points in order [mm], every vertex among them.
        """
        pieces = [self.vertices[:1]]
        for index, (turn, curvature) in enumerate(zip(np.abs(self.turns), np.abs(self.curvatures), strict=True)):
            step = np.sqrt(8.0 * sagitta / curvature) if curvature else np.inf
            count = max(1, int(np.ceil(turn / max(step * curvature, 1e-9)))) if curvature else 1
            pieces.append(self.along(index, np.arange(1, count + 1) / count))
        return np.vstack(pieces)

    def along(self, index: int, fractions: Array) -> Array:
        """Return points at the given fractions (0 to 1) of one stretch's length [mm], shape (k, 2)."""
        start, chord = self.vertices[index], self.vertices[index + 1] - self.vertices[index]
        turn = self.turns[index]
        # A chord from the start over a part of the arc: length ratio of sines, turned back by half of what is left.
        part = np.asarray(fractions, dtype=np.float64) * turn
        ratio = np.where(turn == 0.0, fractions, np.sin(0.5 * part) / np.sin(0.5 * turn) if turn else fractions)
        angle = 0.5 * (part - turn)
        cosine, sine = np.cos(angle), np.sin(angle)
        along = np.column_stack([cosine * chord[0] - sine * chord[1], sine * chord[0] + cosine * chord[1]])
        points = start + ratio[:, None] * along
        return np.asarray(np.where((np.asarray(fractions) == 1.0)[:, None], self.vertices[index + 1], points))

    def offset(self, distance: float) -> ArcPath:
        """Return the path at a distance [mm] to its left (negative: to its right); of arcs, arcs again.

        Parameters
        ----------
        distance : float
            How far to the left of the direction of travel the new path runs [mm].

        Raises
        ------
        GeometryError
            If the path has corners, or an arc's radius is not larger than an offset towards its centre.

        Notes
        -----
        Arcs keep their centre and their angle, so the offset adds no error of its own.
        """
        if len(self) > 1 and np.abs(self.kinks).max() > 1e-5:
            raise GeometryError("a path with corners has no offset of lines and arcs alone: round the corners first")
        if (1.0 - self.curvatures * distance <= 0.0).any():
            radius = 1.0 / np.abs(self.curvatures).max()
            raise GeometryError(
                f"an offset of {abs(distance):g} mm folds an arc of radius {radius:g} mm: keep it under that radius"
            )
        starts, ends = self.tangents
        directions = np.vstack([starts[:1], ends])
        left = np.column_stack([-directions[:, 1], directions[:, 0]])
        return ArcPath(self.vertices + distance * left, self.bulges)
