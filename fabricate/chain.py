"""The one place that puts the maps between part and mould in order, both ways.

``mould = shrink⁻¹( offset( springback⁻¹( reflecting face ) ) )``

The reflecting face goes first to its shape on the mould at equal arc length (springback inverted), then along its
normal through coating, sheet and cover to the forming surface, and is then enlarged by what the part will shrink.
Distances along the normal count towards the focus. Lengths are millimetres.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import NoReturn

import numpy as np

from fabricate.bending import BendingSheet
from fabricate.curvature_map import CurvatureMap, ReleasedFace
from fabricate.job_keys import Job
from fabricate.mould import Kind, Mould, mould_around, with_trim_line
from fabricate.springback import StatedSpringback, springback_map
from fabricate.thinning import FormedSheet, thickness_on_mould
from profiles.errors import GeometryError, JobError
from profiles.face import Face
from profiles.meridian import Meridian, arc_length_over_aperture
from profiles.offset_source import offset_source
from profiles.series import Series

NEAREST_TO_CLOSING = 0.9999


@dataclass(frozen=True, eq=False)
class Chain:
    """The maps from a part's reflecting face to its mould and back, for one job.

    Parameters
    ----------
    job : Job
        The job, in millimetres.
    """

    job: Job

    @property
    def kind(self) -> Kind:
        """Male where the sheet's concave face lies on the mould, else female."""
        return "male" if self.job.forming.contact_face == "concave" else "female"

    @cached_property
    def released(self) -> ReleasedFace:
        """The reflecting face of the finished part as the job states it, with its trim."""
        reflector = self.job.reflector
        face = Face(reflector.focal_length, reflector.conic_constant, reflector.asphere)
        rim = rim_arc_length(face, 0.5 * reflector.rim_diameter)
        return ReleasedFace(face, Meridian.of_face(face, rim + self.job.forming.trim_allowance), rim)

    @property
    def stated_springback(self) -> StatedSpringback:
        """What the law of springback is made from."""
        sheet, row = self.job.sheet, self.job.sheet.row
        mirror_side = 1 if self.job.reflector.reflecting_face == "concave" else -1
        bending = BendingSheet(sheet.thickness, row.youngs_modulus_mpa, row.poisson, mirror_side)
        return StatedSpringback(self.released, self.job.forming.springback, bending)

    @cached_property
    def springback(self) -> CurvatureMap:
        """What the reflecting face's curvature does on release."""
        return springback_map(self.stated_springback)

    @cached_property
    def on_mould(self) -> Meridian:
        """The reflecting face as it lies on the mould, before the part has shrunk away from it."""
        return self.springback.load(self.released.meridian)

    @cached_property
    def thickness(self) -> Series:
        """Thickness of the formed sheet over the arc length [mm]."""
        return self._thickness(self.on_mould)

    @cached_property
    def shift(self) -> Series:
        """From the reflecting face to the forming surface, along the normal, towards the focus positive [mm]."""
        return self._shift(self.on_mould)

    @property
    def enlargement(self) -> float:
        """Size of the cold mould over that of the cold part [-]: ``1/(1 − S)``, hot-mould S also over ``1 + αΔT``."""
        shrinkage = self.job.forming.shrinkage
        factor = 1.0 / (1.0 - 0.01 * shrinkage.percent)
        if shrinkage.reference == "hot-mould":
            factor /= 1.0 + (shrinkage.mould_expansion or 0.0) * (shrinkage.temperature_rise or 0.0)
        return factor

    @cached_property
    def forming_surface(self) -> Meridian:
        """The exact mould curve in the mould frame, from the axis to the end of the trim."""
        return _on_its_vertex(self.to_mould(self.released.meridian))

    @cached_property
    def mould(self) -> Mould:
        """The mould around the forming surface.

        Raises
        ------
        JobError
            If the part would lock on the mould, or the mould's body does not fit.
        """
        _check_release(self.forming_surface)
        mould = mould_around(self.forming_surface, self.kind, self.job.mould)
        depth = self.job.mould.trim_line_depth
        return with_trim_line(mould, self.point_on_mould(self.released.rim)[0], depth) if depth else mould

    @property
    def vertex_gap(self) -> float:
        """Height of the reflecting face's vertex over the mould's vertex, while it lies on the mould [mm]."""
        return -self.enlargement * float(self.shift(self.shift.start))

    def point_on_mould(self, arc_length: float) -> tuple[float, float]:
        """Return where a material point of the reflecting face lies on the mould's forming surface.

        Parameters
        ----------
        arc_length : float
            Of the point, along the reflecting face [mm].

        Returns
        -------
        radius, height : float
            Of the foot of its normal on the cold mould, the height over the mould's vertex [mm].
        """
        where = np.array([arc_length])
        foot = self.on_mould.points(where) + self.shift(where)[:, None] * self.on_mould.normals(where)
        radius, height = self.enlargement * foot[0]
        return float(radius), float(height) + self.vertex_gap

    def to_mould(self, part: Meridian) -> Meridian:
        """Return the forming surface that makes a released reflecting face.

        Parameters
        ----------
        part : Meridian
            The released face from the axis outwards [mm].

        Returns
        -------
        Meridian
            The forming surface, cold [mm].

        Raises
        ------
        GeometryError
            If the offset folds.
        """
        on_mould = self.springback.load(part)
        try:
            return on_mould.offset(self._shift(on_mould)).scaled(self.enlargement)
        except GeometryError as error:
            raise GeometryError(f"sheet.thickness, sheet.coating_thickness, mould.cover_thickness: {error}") from error

    def to_part(self, mould: Meridian) -> Meridian:
        """Return the released reflecting face that a forming surface makes.

        Parameters
        ----------
        mould : Meridian
            The forming surface from the axis outwards, cold [mm].

        Returns
        -------
        Meridian
            The released face, its vertex at height 0 [mm].

        Raises
        ------
        GeometryError
            If the thickness does not settle, or the offset folds.
        """
        contact = mould.scaled(1.0 / self.enlargement)
        return _on_its_vertex(self.springback.release(offset_source(contact, self._shift)))

    def _thickness(self, on_mould: Meridian) -> Series:
        sheet = FormedSheet(on_mould, self.released.meridian, self.job.sheet.thickness)
        return thickness_on_mould(sheet, self.job.forming.thinning)

    def _shift(self, on_mould: Meridian) -> Series:
        job = self.job
        reflecting_inside = job.reflector.reflecting_face == "concave"
        contact_inside = job.forming.contact_face == "concave"
        coating = -job.sheet.coating_thickness if reflecting_inside else job.sheet.coating_thickness
        cover = job.mould.cover_thickness if contact_inside else -job.mould.cover_thickness
        through = float(contact_inside) - float(reflecting_inside)
        thickness = self._thickness(on_mould)
        return Series(tuple(through * piece + (coating + cover) for piece in thickness.pieces))


def rim_arc_length(face: Face, radius: float) -> float:
    """Return the arc length of a face's meridian from the axis to a radius, ``∫ sqrt(1 + z'²) dr`` [mm].

    Parameters
    ----------
    face : Face
        The face.
    radius : float
        Radius of the rim [mm].

    Returns
    -------
    float
        Arc length [mm].

    Raises
    ------
    GeometryError
        If the face ends before that radius.

    Examples
    --------
    For ``R = 2 f``, ``f (√2 + asinh 1)``:

    >>> round(rim_arc_length(Face(1.0), 2.0), 9)
    2.295587149
    """
    if radius > NEAREST_TO_CLOSING * face.widest:
        raise GeometryError(
            f"the rim's radius is {radius:.6g} mm and the face closes at {face.widest:.6g} mm; allowed: up to "
            f"{NEAREST_TO_CLOSING} of that; do: ask for a smaller rim or a longer focal length"
        )
    run = arc_length_over_aperture(face, face.aperture(radius))
    return float(run(run.end))


def _on_its_vertex(curve: Meridian) -> Meridian:
    return curve.raised(-float(curve.height(curve.start)))


def _check_release(surface: Meridian) -> None:
    """Refuse a forming surface whose slope leaves 0 to 90 degrees: the part would lock on it."""
    low, least = surface.slope.smallest()
    high, most = surface.slope.largest()
    if least < -1e-9:
        _refuse_release(surface, low, lambda slope: slope < -1e-9)
    if most >= 0.5 * np.pi:
        _refuse_release(surface, high, lambda slope: slope >= 0.5 * np.pi)


def _refuse_release(surface: Meridian, worst: float, locks: Callable[[np.ndarray], np.ndarray]) -> NoReturn:
    """Say where the slope first turns out of its range, and how far it goes."""
    where = np.append(np.linspace(surface.start, surface.end, 20001), worst)
    turns = where[int(np.argmax(locks(surface.slope(where))))]
    first, last = (abs(float(surface.radius(place))) for place in (turns, worst))
    raise JobError(
        f"forming: the mould is re-entrant: its slope turns at radius {first:.6g} mm and is "
        f"{np.degrees(float(surface.slope(worst))):.4g} degrees at {last:.6g} mm; allowed: "
        "a slope from 0 up to but not 90 degrees all the way; do: check springback.stations, thinning.stations and the "
        "asphere, or the part locks on"
    )
