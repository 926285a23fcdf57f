"""The mould that a sheet is formed on: its forming surface and the rest of its half section.

A *male* mould (chuck, drape mould) carries the sheet's concave face, a *female* one (cavity) its convex face. In the
*mould frame* the forming surface is a bowl: its height rises with the radius from the vertex at 0. In the *lathe frame*
(radius, Z) Z is positive away from the headstock and 0 is the vertex of a male mould, the plane of the land of a
female one. Lengths are millimetres.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np

from fabricate import mould_keys
from profiles.arcpath import ArcPath
from profiles.errors import JobError
from profiles.meridian import Meridian

Kind = Literal["male", "female"]

TELLABLE = 1e-6
"""An edge radius or a land that is smaller [mm] is none."""


@dataclass(frozen=True, eq=False)
class Mould:
    """A mould of revolution.

    Parameters
    ----------
    kind : {"male", "female"}
        Which face of the sheet it carries.
    curve : Meridian
        The exact forming surface in the mould frame, from the axis or the bore outwards [mm].
    rim : ArcPath or None
        Edge arc and land in the lathe frame, from the end of the forming surface to the outer side [mm]; None
        where there is neither.
    back : ArcPath
        Outer side, base, spigot and bore or axis in the lathe frame, from the outer edge to where the forming surface
        starts [mm].
    land_height : float
        Height of the land's plane in the mould frame [mm].
    edge_radius : float
        Radius of the edge between forming surface and land [mm].
    """

    kind: Kind
    curve: Meridian
    rim: ArcPath | None
    back: ArcPath
    land_height: float
    edge_radius: float

    @property
    def outer_radius(self) -> float:
        """Radius of the outer side [mm]."""
        return float(self.back.vertices[0, 0])

    @property
    def bore_radius(self) -> float:
        """Radius of the bore [mm], 0 without one."""
        return float(self.back.vertices[-1, 0])

    @property
    def base(self) -> float:
        """Z of the base plane in the lathe frame [mm]."""
        return float(self.back.vertices[1, 1])

    @property
    def lowest(self) -> float:
        """Z of the lowest point in the lathe frame, the end of the spigot where there is one [mm]."""
        return float(self.back.vertices[:, 1].min())

    @property
    def land(self) -> float:
        """Z of the land's plane in the lathe frame [mm]."""
        return -self.land_height if self.kind == "male" else 0.0

    def to_lathe(self, path: ArcPath) -> ArcPath:
        """Return a path of the mould frame in the lathe frame."""
        return path.turned_over() if self.kind == "male" else path.moved(along=-self.land_height)

    def from_lathe(self, path: ArcPath) -> ArcPath:
        """Return a path of the lathe frame in the mould frame."""
        return path.turned_over() if self.kind == "male" else path.moved(along=self.land_height)

    def half_section(self, forming: ArcPath) -> ArcPath:
        """Return the closed half section with a given path for the forming surface, both in the lathe frame.

        Parameters
        ----------
        forming : ArcPath
            From the axis or bore to the end of the forming surface [mm].

        Returns
        -------
        ArcPath
            Closed path: forming surface, edge, land, outer side, base, spigot, bore or axis [mm].
        """
        rest = self.back if self.rim is None else self.rim.joined(self.back)
        vertices = np.vstack([forming.vertices, rest.vertices[1:-1], forming.vertices[:1]])
        return ArcPath(vertices, np.concatenate([forming.bulges, rest.bulges]))


def mould_around(curve: Meridian, kind: Kind, shape: mould_keys.Mould) -> Mould:
    """Return the mould that a forming surface and the ``[mould]`` table describe.

    Parameters
    ----------
    curve : Meridian
        The forming surface from the axis to its end, in the mould frame [mm].
    kind : {"male", "female"}
        Which face of the sheet it carries.
    shape : mould_keys.Mould
        The table, in millimetres.

    Returns
    -------
    Mould
        Forming surface (from the bore, where there is one), edge, land, outer side, base, spigot and bore.

    Raises
    ------
    JobError
        If bore, spigot, land, edge or outer diameter do not fit.
    """
    end = curve.points(curve.end)
    slope = float(curve.slope(curve.end))
    edge = shape.edge_radius if shape.edge_radius > TELLABLE else 0.0
    bore = 0.5 * shape.bore_diameter
    _check_bore(bore, float(end[0]), shape)
    drop = edge * (1.0 - np.cos(slope))
    tangent_radius = float(end[0] + edge * np.sin(slope))
    outer = _outer_radius(tangent_radius, shape)
    land_height = float(end[1] + drop)
    sign = -1.0 if kind == "male" else 1.0
    shift = 0.0 if kind == "male" else -land_height
    base = sign * float(end[1] if kind == "male" else 0.0) + shift - shape.body_height
    land = sign * land_height + shift
    if base >= land:
        raise JobError(
            f"mould.body_height: value is {shape.body_height:g} mm; allowed: more than {drop:.6g} mm, so that the base "
            f"lies below the land; do: make the body higher or the edge radius ({shape.edge_radius:g} mm) smaller"
        )
    inner = curve.part(float(curve.at_radius(bore)), curve.end) if bore else curve
    first = inner.points(inner.start)
    return Mould(
        kind,
        inner,
        _rim(np.array([end[0], sign * end[1] + shift]), slope, sign, (tangent_radius, outer, land)),
        _back(outer, land, base, (bore, sign * float(first[1]) + shift), shape),
        land_height,
        edge,
    )


def _check_bore(bore: float, end: float, shape: mould_keys.Mould) -> None:
    if bore >= end:
        raise JobError(
            f"mould.bore_diameter: value is {2.0 * bore:g} mm; allowed: less than the forming surface's end, "
            f"{2.0 * end:.6g} mm; do: make the bore smaller"
        )
    spigot = 0.5 * shape.spigot_diameter
    if (spigot > 0.0) != (shape.spigot_length > 0.0):
        raise JobError(
            f"mould.spigot_length: value is {shape.spigot_length:g} mm with mould.spigot_diameter "
            f"{shape.spigot_diameter:g} mm; allowed: both above 0 or both 0; do: state the other one too"
        )
    if spigot and bore >= spigot:
        raise JobError(
            f"mould.bore_diameter: value is {2.0 * bore:g} mm; allowed: less than mould.spigot_diameter, "
            f"{2.0 * spigot:g} mm; do: make the bore smaller or the spigot larger"
        )


def _outer_radius(tangent_radius: float, shape: mould_keys.Mould) -> float:
    outer = 0.5 * shape.outer_diameter if shape.outer_diameter else tangent_radius + shape.land_width
    if outer < tangent_radius:
        raise JobError(
            f"mould.outer_diameter: value is {shape.outer_diameter:g} mm; allowed: at least "
            f"{2.0 * tangent_radius:.9g} mm, where the edge meets the land; do: make it larger, or 0 to follow the land"
        )
    if 0.5 * shape.spigot_diameter > outer:
        raise JobError(
            f"mould.spigot_diameter: value is {shape.spigot_diameter:g} mm; allowed: at most the mould's outer "
            f"diameter, {2.0 * outer:.6g} mm; do: make the spigot smaller or the land wider"
        )
    return outer if outer - tangent_radius > TELLABLE else tangent_radius


def _rim(end: np.ndarray, slope: float, sign: float, land: tuple[float, float, float]) -> ArcPath | None:
    """Return edge arc and land in the lathe frame; ``land`` is where it begins and ends, and its Z."""
    tangent_radius, outer, height = land
    vertices, bulges = [end], []
    for vertex, bulge in (((tangent_radius, height), -sign * np.tan(0.25 * slope)), ((outer, height), 0.0)):
        if np.hypot(*(np.array(vertex) - vertices[-1])) > 0.0:
            vertices.append(np.array(vertex))
            bulges.append(bulge)
    return ArcPath(np.array(vertices), np.array(bulges)) if bulges else None


def _back(outer: float, land: float, base: float, start: tuple[float, float], shape: mould_keys.Mould) -> ArcPath:
    """Return outer side, base, spigot and bore or axis in the lathe frame; ``start`` is the forming surface's start."""
    bore, spigot, lowest = start[0], 0.5 * shape.spigot_diameter, base - shape.spigot_length
    vertices = [(outer, land), (outer, base)]
    if spigot and spigot < outer:
        vertices.append((spigot, base))
    if spigot:
        vertices.append((spigot, lowest))
    vertices += [(bore, lowest), start]
    # A spigot as wide as the mould only lengthens the outer side.
    kept = [vertices[0], *(vertex for before, vertex in pairwise(vertices) if vertex != before)]
    return ArcPath(np.array(kept), np.zeros(len(kept) - 1))
