"""What an existing mould would make of a job's sheet: its drawing or its readings, through the chain, to the part.

A shop has a rack of chucks. The mould is taken as the smooth bowl nearest to its drawn arcs or read points; springback
is stated for the reflector that the part becomes, so the part's own focal length is sought that the law is true for.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from fabricate.chain import Chain
from fabricate.drawing import MOULD_CURVE, unit_length
from fabricate.job_keys import Job
from fabricate.measures import Units
from fabricate.predicted import PredictedPart
from outputs.dxf import read_drawing
from outputs.readings import UNITS, read_readings
from profiles.errors import GeometryError, JobError
from profiles.fitted_face import FittedFace, fitted_face
from profiles.meridian import Meridian, arc_length_over_aperture

Array = NDArray[np.float64]

SAMPLES_PER_ARC = 25
BALL_CENTRES = {"ball-centre", "ball-centres", "ball-center", "ball-centers"}
ROUNDS = 30
SAME_FOCUS = 1e-6
SAME_PLACE = 1e-6
LEAST_SHOWN = 5e-5


@dataclass(frozen=True, eq=False)
class PartOfMould:
    """The part that a job's sheet becomes on an existing mould.

    Parameters
    ----------
    source : Path
        Drawing or readings of the mould.
    fit : FittedFace
        The mould as a smooth bowl [mm].
    reach : float
        Radius to which the mould is known [mm].
    part : PredictedPart
        The part beside the reflector that the job asks for [mm].
    part_reach : float
        Radius to which the part reaches [mm].
    """

    source: Path
    fit: FittedFace
    reach: float
    part: PredictedPart
    part_reach: float

    def as_json(self, units: Units) -> dict[str, Any]:
        """Return the figures as plain values, lengths in the units of a job."""
        unit = unit_length(units)
        form, at_radius = self.part.largest_form_error
        return {
            "mould": str(self.source),
            "mould_fit_rms": self.fit.rms / unit,
            "mould_reach_radius": self.reach / unit,
            "part_reach_radius": self.part_reach / unit,
            "best_focal_length": self.part.best_focal_length / unit,
            "wanted_focal_length": 0.5 / unit / float(self.part.wanted.curvature(0.0)),
            "wanted_best_focal_length": self.part.wanted_best_focal_length / unit,
            "largest_form_error": form / unit,
            "at_radius": at_radius / unit,
            "slope_rms_mrad": 1e3 * self.part.slope_rms,
        }


def part_of_mould(job: Job, source: Path) -> PartOfMould:
    """Return the part that a job's sheet becomes on an existing mould.

    Parameters
    ----------
    job : Job
        The job, in its own units: sheet, process, springback, and the reflector that is wanted.
    source : Path
        A lathe drawing (.dxf) with a layer ``MOULD_CURVE``, or readings of the mould (.csv).

    Returns
    -------
    PartOfMould
        The part beside the reflector that is wanted.

    Raises
    ------
    FormatError
        If the file cannot be read.
    JobError
        If it does not hold the curve of a mould of the job's kind, or no part lies over it.
    """
    in_mm = job.in_millimetres()
    radius, height = _points(source, Chain(in_mm), unit_length(job.units))
    try:
        fit = fitted_face(radius, height)
        mould = _meridian(fit, float(radius.max()))
        part = _settled(in_mm, mould)
    except (GeometryError, JobError) as error:
        raise JobError(f"{source}: {error}") from error
    wanted, reach = Chain(in_mm), float(part.radius(part.end))
    hole, rim = 0.5 * in_mm.reflector.hole_diameter, 0.5 * in_mm.reflector.rim_diameter
    if reach <= hole:
        raise JobError(
            f"{source}: the part on this mould ends at radius {reach:.6g} mm, within its own hole; allowed: a mould "
            f"that reaches past the hole's radius, {hole:.6g} mm; do: check the mould's points and their unit"
        )
    predicted = PredictedPart(
        part, wanted.released.meridian, hole, wanted.released.rim, wanted.released.rim, min(rim, reach)
    )
    return PartOfMould(source, fit, float(radius.max()), predicted, reach)


def _points(source: Path, chain: Chain, unit: float) -> tuple[Array, Array]:
    """Return points of a mould's forming surface, heights towards the rim [mm]."""
    if source.suffix.lower() == ".dxf":
        return _drawn(source, chain)
    readings = read_readings(source)
    if BALL_CENTRES & {word.lower().replace(" ", "-") for remark in readings.notes.items() for word in remark}:
        raise JobError(
            f"{source}: says that its points are centres of a ball; allowed: points of the mould's surface; do: take "
            "the ball's radius off them along the normal, and say surface"
        )
    scale = UNITS[readings.unit] if readings.unit else unit
    radius, height = readings.radius * scale, readings.height * scale
    # A chuck is read as it stands: deeper towards the rim. The bowl's heights are the same with the other sign.
    falls = float((radius - radius.mean()) @ height) < 0.0
    return radius, -height if falls else height


def _drawn(source: Path, chain: Chain) -> tuple[Array, Array]:
    drawing = read_drawing(source)
    paths = drawing.layers.get(MOULD_CURVE, ())
    if len(paths) != 1:
        raise JobError(
            f"{source}: layer {MOULD_CURVE} holds {len(paths)} paths; allowed: 1, the mould's curve from the axis or "
            "bore outwards; do: draw it on that layer"
        )
    path = paths[0].scaled(unit_length(drawing.units)).swapped()
    if path.vertices[-1, 0] < path.vertices[0, 0]:
        path = path.reversed()
    least = float(path.vertices[:, 0].min())
    if least < -SAME_PLACE:
        raise JobError(
            f"{source}: the mould's curve begins at radius {least:.6g} mm; allowed: one side of the axis, radius 0 and "
            "more; do: draw half of the section, the axis at y = 0"
        )
    male = chain.kind == "male"
    falls = float(path.vertices[-1, 1]) < float(path.vertices[0, 1])
    if falls != male:
        raise JobError(
            f"{source}: the mould's curve {'falls' if falls else 'rises'} from its centre, which is a "
            f"{'male' if falls else 'female'} mould; allowed: a {chain.kind} one, as forming.contact_face is "
            f'"{chain.job.forming.contact_face}"; do: check the drawing, or which face of the sheet lies on the mould'
        )
    share = np.linspace(0.0, 1.0, SAMPLES_PER_ARC)
    points = np.concatenate([path.along(number, share) for number in range(len(path))])
    return points[:, 0], -points[:, 1] if male else points[:, 1]


def _meridian(fit: FittedFace, reach: float) -> Meridian:
    run = arc_length_over_aperture(fit.face, fit.face.aperture(reach))
    return Meridian.of_face(fit.face, float(run(run.end)) * (1.0 - 1e-12))


def _settled(job: Job, mould: Meridian) -> Meridian:
    """Return the part whose own focal length the law of springback is true for: found by the secant method."""
    focal_length = 0.5 / float(mould.curvature(mould.start))
    before, lacked = 0.0, 0.0
    for _ in range(ROUNDS):
        part = _of_focal_length(job, mould, focal_length)
        lacks = 0.5 / float(part.curvature(part.start)) - focal_length
        if abs(lacks) < SAME_FOCUS * focal_length:
            return part
        secant = (focal_length - before) / (lacked - lacks) if before and lacked != lacks else 1.0
        before, lacked = focal_length, lacks
        focal_length += lacks * secant if abs(lacks * secant) < 0.5 * focal_length else lacks
    raise GeometryError(
        f"the part's focal length does not settle, last at {focal_length:.6g} mm; allowed: a mould near the reflector "
        "that is wanted; do: state springback by percent"
    )


def _of_focal_length(job: Job, mould: Meridian, focal_length: float) -> Meridian:
    """Return the part where the law is that of a reflector of a given focal length [mm]."""
    reflector = job.reflector.model_copy(update={"focal_length": focal_length, "depth": None})
    part = _on_chain(Chain(job.model_copy(update={"reflector": reflector})), mould)
    if float(part.curvature(part.start)) <= 0.0:
        raise GeometryError(
            "the part springs open past flat; allowed: a mould that the stated springback leaves a bowl; do: check the "
            "mould's points, or state springback by percent"
        )
    return part


def _on_chain(chain: Chain, mould: Meridian) -> Meridian:
    """Return the part, from no further out on the mould than the maps are stated for."""
    longest = chain.forming_surface.end
    return chain.to_part(mould if mould.end <= longest else mould.part(mould.start, longest))


def words(found: PartOfMould, job: Job) -> list[str]:
    """Return what an existing mould makes, in sentences.

    Parameters
    ----------
    found : PartOfMould
        The part.
    job : Job
        The job, in its own units.

    Returns
    -------
    list of str
        One sentence each.
    """
    name = "mm" if job.units == "mm" else "in"
    figures = found.as_json(job.units)
    best, wanted = figures["best_focal_length"], figures["wanted_best_focal_length"]
    gap = f"{abs(best - wanted):.4f} {name} {'longer' if best > wanted else 'shorter'} than that"
    sentences = [
        f"the mould in {found.source.name} reaches radius {figures['mould_reach_radius']:.4f} {name}; a smooth bowl "
        f"follows it to {figures['mould_fit_rms']:.5f} {name} RMS",
        f"on it the sheet of this job is taken to become a part of best focal length {best:.4f} {name}, "
        f"{gap if abs(best - wanted) >= LEAST_SHOWN else 'the same as that'} of the face that the job asks for, "
        f"{wanted:.4f} {name}",
        f"vertex on vertex it strays from the wanted face by up to {abs(figures['largest_form_error']):.4f} {name}, at "
        f"radius {figures['at_radius']:.3f} {name}, and leans by {figures['slope_rms_mrad']:.3f} mrad RMS",
    ]
    if found.part_reach < 0.5 * job.in_millimetres().reflector.rim_diameter - 1e-9:
        sentences.append(
            f"it ends at radius {figures['part_reach_radius']:.4f} {name}, short of the rim that the job asks for: the "
            "mould is too small for it"
        )
    return [
        *sentences,
        "this is arithmetic under the stated springback, thickness and shrinkage, and no verdict: measure the part",
    ]
