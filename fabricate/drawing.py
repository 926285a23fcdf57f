"""What the lathe drawing shows of a mould, and the mould's lines as a drawing gives them back.

A drawing has x along the spindle axis, positive away from the headstock, and y for the radius, both in the job's unit;
moulds are computed in the lathe frame (radius, Z) in millimetres.
"""

from __future__ import annotations

import numpy as np

from fabricate.blank import blank_of
from fabricate.chain import Chain
from fabricate.holes import drilling_outlines, drilling_words
from fabricate.job_keys import Job
from fabricate.measures import MM_PER_INCH, Units
from fabricate.mould_features import feature_words
from outputs.dxf import Drawing
from profiles.arcpath import ArcPath
from profiles.arcs import fewest_arcs
from profiles.meridian import Meridian

MOULD_CURVE = "MOULD_CURVE"
MOULD_BODY = "MOULD_BODY"
CENTRE_LINE = "CENTRE_LINE"
REFLECTING_FACE = "REFLECTING_FACE"
DRILLING = "DRILLING"
TRIM_LINE = "TRIM_LINE"

ROUNDING = {"mm": 2e-8, "inch": 5e-7}
"""What the written digits of a drawing may add to a deviation [mm]."""
OVERHANG = 10.0


def unit_length(units: Units) -> float:
    """Return the length of one unit of a job [mm]."""
    return 1.0 if units == "mm" else MM_PER_INCH


def lathe_drawing(chain: Chain, forming: ArcPath, job: Job) -> Drawing:
    """Return the drawing of a mould for the lathe.

    Parameters
    ----------
    chain : Chain
        The job's maps from part to mould [mm].
    forming : ArcPath
        Arcs of the forming surface in the mould frame, from the axis or bore outwards [mm].
    job : Job
        The job in its own units.

    Returns
    -------
    Drawing
        Layers in drawing coordinates and the job's unit.
    """
    mould = chain.mould
    curve = mould.to_lathe(forming)
    body = mould.half_section(curve)
    face = reflecting_face_on_mould(chain)
    distance = fit_distance(chain.job.tolerance.files.chord_error, job.units)
    layers = {
        MOULD_CURVE: curve,
        MOULD_BODY: body,
        CENTRE_LINE: centre_line(body),
        REFLECTING_FACE: mould.to_lathe(fewest_arcs(face, distance=distance).path),
    }
    if mould.trim_line is not None:
        layers[TRIM_LINE] = mould.trim_line.path
    drawn = {name: (to_drawing(path, job.units),) for name, path in layers.items()}
    holes = tuple(to_drawing(path, job.units) for path in drilling_outlines(chain))
    return Drawing(job.units, drawn | ({DRILLING: holes} if holes else {}), (*_notes(chain, job), *drilling_notes(job)))


def drilling_notes(job: Job) -> tuple[str, ...]:
    """Return what a drawing says of the holes that are drilled into a mould.

    Parameters
    ----------
    job : Job
        The job in its own units.

    Returns
    -------
    tuple of str
        One line for each kind of hole; none without holes.
    """
    return tuple(f"{DRILLING}: {words}" for words in drilling_words(job))


def fit_distance(tolerance: float, units: Units) -> float:
    """Return what a distance tolerance leaves for the fit, once the written digits have taken their share.

    Parameters
    ----------
    tolerance : float
        Largest distance of the written drawing from the exact curve [mm].
    units : {"mm", "inch"}
        Units in which the drawing is written.

    Returns
    -------
    float
        Distance [mm].
    """
    return tolerance - ROUNDING[units]


def reflecting_face_on_mould(chain: Chain) -> Meridian:
    """Return the released face, hole edge to rim, its vertex where it lies on the mould, in the mould frame [mm]."""
    face = chain.released.meridian
    hole = 0.5 * chain.job.reflector.hole_diameter
    start = float(face.at_radius(hole)) if hole else 0.0
    return face.part(start, chain.released.rim).raised(chain.vertex_gap)


def centre_line(body: ArcPath) -> ArcPath:
    """Return the axis beside a half section in the lathe frame, a little longer than it at both ends [mm]."""
    low, high = body.vertices[:, 1].min() - OVERHANG, body.vertices[:, 1].max() + OVERHANG
    return ArcPath(np.array([[0.0, low], [0.0, high]]), np.zeros(1))


def to_drawing(path: ArcPath, units: Units) -> ArcPath:
    """Return a path of the lathe frame [mm] in drawing coordinates and the job's unit."""
    return path.swapped().scaled(1.0 / unit_length(units))


def from_drawing(path: ArcPath, units: Units) -> ArcPath:
    """Return a path of a drawing in the lathe frame [mm]."""
    return path.scaled(unit_length(units)).swapped()


def _notes(chain: Chain, job: Job) -> tuple[str, ...]:
    zero = "the mould's vertex" if chain.kind == "male" else "the plane of the land"
    number = f", number {job.number}" if job.number else ""
    rim, height = (value / unit_length(job.units) for value in chain.point_on_mould(chain.released.rim))
    cut = "cut here" if job.forming.trim == "on-mould" else "the part is cut after release"
    return (
        f"{job.title}{number}, revision {job.revision}",
        f"{chain.kind} mould, half section; x along the spindle axis, 0 at {zero}; y = radius",
        f"sheet: {job.sheet.material}, {job.sheet.thickness:g} {job.units}; its {job.forming.contact_face} face "
        "lies on the mould",
        f"mould: {job.mould.material or 'material not stated'}",
        f"rim on the mould: radius {rim:.4f}, {height:.4f} {job.units} over the vertex; {cut}",
        f"blank: diameter {blank_of(chain).diameter / unit_length(job.units):.2f} {job.units}",
        f"MOULD_CURVE within {job.tolerance.files.chord_error:g} {job.units} of the exact curve, along the normal",
        *feature_words(job.mould, job.units),
    )
