"""The mould that a sheet is formed on: its forming surface and the rest of its half section.

A *male* mould (chuck, drape mould) carries the sheet's concave face, a *female* one (cavity) its convex face. In the
*mould frame* the forming surface is a bowl: its height rises with the radius from the vertex at 0. In the *lathe frame*
(radius, Z) Z is positive away from the headstock and 0 is the vertex of a male mould, the plane of the land of a
female one. Lengths are millimetres.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Literal

import numpy as np

from fabricate import mould_keys
from fabricate.mould_features import check_draft, check_hub, hub_path, lead_out_path, widened
from fabricate.trim_line import TrimLine, trim_line_on
from profiles.arcpath import ArcPath
from profiles.errors import JobError
from profiles.meridian import Meridian
from profiles.solids import turned_over

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
        The exact forming surface in the mould frame, from the axis, the bore or the hub outwards [mm].
    rim : ArcPath or None
        Lead-out, edge arc and land in the lathe frame, from the end of the forming surface to the outer side [mm];
        None where there is none of them.
    back : ArcPath
        Outer side, base, spigot, bore or axis, and hub in the lathe frame, from the outer edge to where the forming
        surface starts [mm].
    land_height : float
        Height of the land's plane in the mould frame [mm].
    edge_radius : float
        Radius of the edge between forming surface and land [mm].
    hub : ArcPath or None
        Pilot and pad in the lathe frame, from the axis to where the forming surface starts, as if there were no bore
        [mm]; None without a hub.
    lead : ArcPath or None
        The lead-out, with which the rim begins [mm]; None without one.
    trim_line : TrimLine or None
        The line scribed where the rim is cut, which neither forming surface nor half section show.
    """

    kind: Kind
    curve: Meridian
    rim: ArcPath | None
    back: ArcPath
    land_height: float
    edge_radius: float
    hub: ArcPath | None = None
    lead: ArcPath | None = None
    trim_line: TrimLine | None = None

    @property
    def outer_radius(self) -> float:
        """Radius of the outer side at the land [mm]."""
        return float(self.back.vertices[0, 0])

    @property
    def widest(self) -> float:
        """Largest radius of the outer side, at the base where it has draft [mm]."""
        return float(self.back.vertices[1, 0])

    @property
    def draft(self) -> float:
        """Angle by which the outer side widens towards the base [rad]."""
        (radius, land), (widest, base) = self.back.vertices[:2].tolist()
        return float(np.arctan2(widest - radius, land - base))

    @property
    def bore_radius(self) -> float:
        """Radius of the bore [mm], 0 without one."""
        return float(self.back.vertices[:, 0].min())

    @property
    def base(self) -> float:
        """Z of the base plane in the lathe frame [mm]."""
        return float(self.back.vertices[1, 1])

    @property
    def lowest(self) -> float:
        """Z of the lowest point in the lathe frame, the end of the spigot where there is one [mm]."""
        return float(self.back.vertices[:, 1].min())

    @property
    def top(self) -> float:
        """Z of the highest point in the lathe frame, the virtual vertex of a male mould's bore included [mm]."""
        if self.kind == "female":
            return self.land
        return 0.0 if self.hub is None else float(self.hub.vertices[0, 1])

    @property
    def edge_and_land(self) -> ArcPath | None:
        """The rim without a lead-out before it [mm]; None where nothing is left."""
        rim, lead = self.rim, self.lead
        if rim is None or lead is None:
            return rim
        return ArcPath(rim.vertices[len(lead) :], rim.bulges[len(lead) :]) if len(rim) > len(lead) else None

    @property
    def forming(self) -> Meridian:
        """The exact forming surface in the lathe frame, outwards [mm]."""
        return turned_over(self.curve) if self.kind == "male" else self.curve.raised(-self.land_height)

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
        Forming surface (from the bore or the hub, where there is one), lead-out, edge, land, outer side, base, spigot,
        bore and hub.

    Raises
    ------
    JobError
        If bore, hub, spigot, lead-out, land, edge, outer diameter or draft do not fit.
    """
    end = curve.points(curve.end)
    slope = float(curve.slope(curve.end))
    edge = shape.edge_radius if shape.edge_radius > TELLABLE else 0.0
    _check_bore(0.5 * shape.bore_diameter, float(end[0]), shape)
    check_hub(shape, float(end[0]), male=kind == "male")
    last = end + (0.0 if shape.lead_out is None else shape.lead_out.distance) * curve.tangents(curve.end)
    drop = edge * (1.0 - np.cos(slope))
    tangent_radius = float(last[0] + edge * np.sin(slope))
    outer = _outer_radius(tangent_radius, shape)
    land_height = float(last[1] + drop)
    sign = -1.0 if kind == "male" else 1.0
    shift = 0.0 if kind == "male" else -land_height
    base = sign * float(end[1] if kind == "male" else 0.0) + shift - shape.body_height
    land = sign * land_height + shift
    _check_base(base, land, shape)
    ends = np.array([end, last]) * (1.0, sign) + (0.0, shift)
    lead = None if shape.lead_out is None else lead_out_path(shape.lead_out, *ends)
    rim = _joined(lead, _rim(ends[1], slope, sign, (tangent_radius, outer, land)))
    check_draft(shape, slope, male=kind == "male", has_rim=rim is not None and rim is not lead)
    hub_or_bore = shape.bore_diameter if shape.hub is None else shape.hub.diameter
    inner = curve.part(float(curve.at_radius(0.5 * hub_or_bore)), curve.end) if hub_or_bore else curve
    first = sign * float(inner.points(inner.start)[1]) + shift
    hub = None if shape.hub is None else hub_path(shape.hub, first)
    return Mould(kind, inner, rim, _back((outer, land), base, first, hub, shape), land_height, edge, hub, lead)


def with_trim_line(mould: Mould, radius: float, depth: float) -> Mould:
    """Return a mould with a line scribed on its forming surface.

    Parameters
    ----------
    mould : Mould
        The mould without it.
    radius : float
        Of the rim's material point on the mould [mm].
    depth : float
        Of the line, along the normal [mm]; 0 gives the mould itself.

    Returns
    -------
    Mould
        The same mould, marked.

    Raises
    ------
    JobError
        If the line does not fit on the forming surface.
    """
    return replace(mould, trim_line=trim_line_on(mould.forming, radius, depth)) if depth else mould


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
    return outer if outer - tangent_radius > TELLABLE else tangent_radius


def _check_base(base: float, land: float, shape: mould_keys.Mould) -> None:
    if base >= land:
        least = shape.body_height + base - land
        raise JobError(
            f"mould.body_height: value is {shape.body_height:g} mm; allowed: more than {least:.6g} mm, so that the "
            f"base lies below the land; do: make the body higher or the edge radius ({shape.edge_radius:g} mm) smaller"
            + ("" if shape.lead_out is None else ", or the lead-out shorter")
        )


def _joined(lead: ArcPath | None, rim: ArcPath | None) -> ArcPath | None:
    return rim if lead is None else lead if rim is None else lead.joined(rim)


def _rim(end: np.ndarray, slope: float, sign: float, land: tuple[float, float, float]) -> ArcPath | None:
    """Return edge arc and land in the lathe frame; ``land`` is where it begins and ends, and its Z."""
    tangent_radius, outer, height = land
    vertices, bulges = [end], []
    for vertex, bulge in (((tangent_radius, height), -sign * np.tan(0.25 * slope)), ((outer, height), 0.0)):
        if np.hypot(*(np.array(vertex) - vertices[-1])) > 0.0:
            vertices.append(np.array(vertex))
            bulges.append(bulge)
    return ArcPath(np.array(vertices), np.array(bulges)) if bulges else None


def _back(
    edge: tuple[float, float], base: float, first: float, hub: ArcPath | None, shape: mould_keys.Mould
) -> ArcPath:
    """Return outer side, base, spigot, bore or axis, and hub in the lathe frame.

    ``edge`` is where the outer side begins, ``first`` the Z at which the forming surface starts.
    """
    outer = widened(edge[0], edge[1] - base, shape)
    bore, spigot, lowest = 0.5 * shape.bore_diameter, 0.5 * shape.spigot_diameter, base - shape.spigot_length
    if spigot > outer:
        raise JobError(
            f"mould.spigot_diameter: value is {shape.spigot_diameter:g} mm; allowed: at most the mould's outer "
            f"diameter, {2.0 * outer:.6g} mm; do: make the spigot smaller or the land wider"
        )
    vertices = [edge, (outer, base)]
    if spigot and spigot < outer:
        vertices.append((spigot, base))
    if spigot:
        vertices.append((spigot, lowest))
    vertices.append((bore, lowest))
    ends = [(bore, first)] if hub is None else [(bore, float(hub.vertices[0, 1])), *_corners(hub)]
    # A spigot as wide as the mould only lengthens the outer side.
    vertices += ends
    kept = [vertices[0], *(vertex for before, vertex in pairwise(vertices) if vertex != before)]
    return ArcPath(np.array(kept), np.zeros(len(kept) - 1))


def _corners(hub: ArcPath) -> list[tuple[float, float]]:
    return [(float(radius), float(height)) for radius, height in hub.vertices[1:]]
