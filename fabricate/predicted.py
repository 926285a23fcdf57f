"""The part that written files would make, and how far it would move if what is stated were a little wrong.

A prediction is arithmetic under the stated springback, thickness and shrinkage: it checks that the files lead back to
the reflector that was asked for. It says nothing of what the bench will find, and gives no verdict.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from fabricate.chain import Chain
from fabricate.springback import LAWS, added_curvature, percent_of, springback_map
from fabricate.written_face import face_over
from profiles.arcpath import ArcPath
from profiles.best_parabola import best_parabola
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.series import Series

Array = NDArray[np.float64]
Moved = tuple[Meridian, float]
"""A released face and the arc length of the rim's material point along it [mm]."""

STATIONS = 17
ONE_POINT = 0.01
SHRINKAGE_STEP = 0.001
UNKNOWN_TOLERANCE = 0.05
"""What is taken for the tolerance of a sheet whose tolerance is not stated, as a part of its thickness."""


@dataclass(frozen=True, eq=False)
class PredictedPart:
    """A released reflecting face beside the one that is wanted.

    Parameters
    ----------
    face : Meridian
        The predicted face from the axis, its vertex at height 0 [mm].
    wanted : Meridian
        The face that was asked for, likewise [mm].
    hole_radius, rim : float
        Radius of the hole [mm], and arc length of the rim's material point along the predicted face [mm].
    wanted_rim : float
        Arc length of the rim along the wanted face [mm].
    trimmed_radius : float or None
        Radius at which the rim is cut, where that happens after release [mm].
    """

    face: Meridian
    wanted: Meridian
    hole_radius: float
    rim: float
    wanted_rim: float
    trimmed_radius: float | None

    @property
    def rim_radius(self) -> float:
        """Radius of the rim [mm]."""
        return float(self.face.radius(self.rim)) if self.trimmed_radius is None else self.trimmed_radius

    @property
    def depth(self) -> float:
        """Height of the rim over the vertex [mm]."""
        return float(self.face.height(self.face.at_radius(self.rim_radius)))

    @cached_property
    def best_focal_length(self) -> float:
        """Focal length of the parabola that departs least from the face between hole and rim [mm]."""
        return best_parabola(self._used).focal_length

    @cached_property
    def wanted_best_focal_length(self) -> float:
        """Focal length of the parabola that departs least from the wanted face, as far as the face reaches [mm]."""
        ends = self.wanted.at_radius(self.stations(2))
        return best_parabola(self.wanted.part(float(ends[0]), float(ends[1]))).focal_length

    @property
    def _used(self) -> Meridian:
        return self.face.part(float(self.face.at_radius(self.hole_radius)), float(self.face.at_radius(self.rim_radius)))

    def stations(self, count: int = STATIONS) -> Array:
        """Return radii even from the hole to the rim that was asked for, as far as the face reaches [mm]."""
        end = min(float(self.wanted.radius(self.wanted_rim)), float(self.face.radius(self.face.end)))
        return np.linspace(self.hole_radius, end, count)

    def sag_error(self, radius: Array) -> Array:
        """Return how far the face lies above the wanted one, vertex on vertex, along the axis [mm]."""
        wanted = self.wanted.at_radius(radius)
        return np.asarray(self.face.height(self.face.at_radius(radius)) - self.wanted.height(wanted))

    def form_error(self, radius: Array) -> Array:
        """Return how far the face lies above the wanted one, vertex on vertex, along the normal [mm]."""
        return np.asarray(self.sag_error(radius) * np.cos(self.wanted.slope(self.wanted.at_radius(radius))))

    def slope_error(self, radius: Array) -> Array:
        """Return the face's slope less that of the wanted one [rad]."""
        return np.asarray(
            self.face.slope(self.face.at_radius(radius)) - self.wanted.slope(self.wanted.at_radius(radius))
        )

    @cached_property
    def slope_rms(self) -> float:
        """Root mean square of the slope error over the reflecting area [rad]."""
        radius = np.sqrt(np.linspace(self.hole_radius**2, self.stations()[-1] ** 2, 2001))
        return float(np.sqrt(np.mean(self.slope_error(radius) ** 2)))

    @cached_property
    def largest_form_error(self) -> tuple[float, float]:
        """The form error that is largest by its size, and its radius [mm]."""
        radius = self.stations(2001)
        error = self.form_error(radius)
        worst = int(np.argmax(np.abs(error)))
        return float(error[worst]), float(radius[worst])


@dataclass(frozen=True)
class Sensitivity:
    """How far the part moves for a small change of one cause, the mould being what it is.

    Parameters
    ----------
    cause : str
        What changes and by how much, in words.
    rim_sag, rim_diameter, focal_length, form : float
        Change of the sag at the rim's radius, of the diameter at the rim's material point, of the best focal length,
        and the largest change along the normal, vertex on vertex [mm].
    """

    cause: str
    rim_sag: float
    rim_diameter: float
    focal_length: float
    form: float


def predicted_part(chain: Chain, path: ArcPath, *, clearance: float = 0.0) -> PredictedPart:
    """Return the part that a written mould curve makes under the stated springback, thickness and shrinkage.

    Parameters
    ----------
    chain : Chain
        The job's maps.
    path : ArcPath
        The written curve in the mould frame, from the axis or bore outwards [mm].
    clearance : float
        How far above the forming surface it is meant to run, see `fabricate.written_face.face_over` [mm].

    Returns
    -------
    PredictedPart
        Beside the reflector that was asked for.

    Raises
    ------
    GeometryError
        If the path strays so far from the exact curve that no face lies over it.
    """
    written = face_over(chain, path, clearance=clearance)
    (rim,) = written.nearest(chain.on_mould.points([chain.released.rim]))
    face = chain.springback.release_near(written, chain.on_mould, chain.released.meridian)
    return _part(chain, face, float(rim))


def exact_part(chain: Chain) -> PredictedPart:
    """Return the part that the exact mould makes: the reflector that was asked for."""
    return _part(chain, chain.released.meridian, chain.released.rim)


def sensitivities(chain: Chain) -> tuple[Sensitivity, ...]:
    """Return how far one point of springback, one sheet tolerance and 0.1 % of shrinkage move the part.

    Parameters
    ----------
    chain : Chain
        The job's maps.

    Returns
    -------
    tuple of Sensitivity
        One for each cause, for a change upwards; shrinkage is left out for a metal that is not said to shrink.
    """
    before = exact_part(chain)
    return tuple(_moved(before, cause, _part(chain, *moved(chain))) for cause, moved in _causes(chain))


def _causes(chain: Chain) -> tuple[tuple[str, Callable[[Chain], Moved]], ...]:
    sheet = chain.job.sheet
    known = bool(sheet.thickness_tolerance)
    thickness = "a sheet thicker by its tolerance" if known else f"a sheet {100.0 * UNKNOWN_TOLERANCE:g} % thicker"
    causes = (("one percentage point more of springback", _one_point_more), (thickness, _thicker_sheet))
    if sheet.row.kind == "metal" and not chain.job.forming.shrinkage.percent:
        return causes
    return (*causes, ("0.1 % more of shrinkage", _more_shrinkage))


def _one_point_more(chain: Chain) -> Moved:
    """Return the part of the same mould where its law has one percentage point more."""
    stated, rim = chain.stated_springback, chain.released.rim
    rows, law = stated.table.stations, stated.table.law
    if rows is not None:
        raised = np.array(rows) + np.array([0.0, 100.0 * ONE_POINT])
        return added_curvature(stated.part, raised).release(chain.on_mould), rim
    if law in {"none", "focal-length"}:
        # By that law the mould is the part's own face refocused, so the part is such a face again.
        face, kept = chain.released.face, 1.0 - 0.01 * percent_of(stated)
        longer = Face(face.focal_length * kept / (kept - ONE_POINT), face.conic_constant, face.asphere)
        return Meridian.of_face(longer, chain.released.meridian.end), rim
    if "percent" not in LAWS[law].one_of:
        return chain.springback.weakened(ONE_POINT).release(chain.on_mould), rim
    return LAWS[law].make(stated, percent_of(stated) + 100.0 * ONE_POINT).release(chain.on_mould), rim


def _thicker_sheet(chain: Chain) -> Moved:
    sheet, stated = chain.job.sheet, chain.stated_springback
    share = sheet.thickness_tolerance / sheet.thickness or UNKNOWN_TOLERANCE
    through = float(chain.job.forming.contact_face == "concave") - float(
        chain.job.reflector.reflecting_face == "concave"
    )
    further = Series(tuple(-through * share * piece for piece in chain.thickness.pieces))
    springback = chain.springback
    if stated.table.law == "bending":
        thicker = replace(stated.sheet, thickness=(1.0 + share) * stated.sheet.thickness)
        springback = springback_map(replace(stated, sheet=thicker))
    laid, rim = chain.on_mould.offset(further), chain.released.rim
    # The rim stays opposite the same place of the mould.
    foot = chain.on_mould.points(rim) + further(rim) * chain.on_mould.normals(rim)
    return springback.release(laid), float(laid.at_radius(foot[0]))


def _more_shrinkage(chain: Chain) -> Moved:
    kept = 1.0 - 0.01 * chain.job.forming.shrinkage.percent
    scale = (kept - SHRINKAGE_STEP) / kept
    return chain.released.meridian.scaled(scale), scale * chain.released.rim


def _part(chain: Chain, face: Meridian, rim: float) -> PredictedPart:
    reflector = chain.job.reflector
    cut_later = chain.job.forming.trim == "after-release"
    on_vertex = face.raised(-float(face.height(face.start)))
    return PredictedPart(
        on_vertex,
        chain.released.meridian,
        0.5 * reflector.hole_diameter,
        rim,
        chain.released.rim,
        0.5 * reflector.rim_diameter if cut_later else None,
    )


def _moved(before: PredictedPart, cause: str, after: PredictedPart) -> Sensitivity:
    return Sensitivity(
        cause,
        float(after.sag_error(after.stations(2))[-1]),
        2.0 * float(after.face.radius(after.rim) - before.face.radius(before.rim)),
        after.best_focal_length - before.best_focal_length,
        after.largest_form_error[0],
    )
