"""What the drawing of a follow block shows: like the mould's, in drawing coordinates and the job's unit.

Work zero is the block's own, on its axis: the plane of the lip of a block that is a cavity, the vertex of one that is a
plug. The sheet is shown as it lies between block and chuck, by its other face.
"""

from __future__ import annotations

import numpy as np

from fabricate.drawing import CENTRE_LINE, centre_line, fit_distance, to_drawing
from fabricate.follow_block import FollowBlock
from fabricate.follow_block_pad import FLAT
from fabricate.job_keys import Job
from outputs.dxf import Drawing
from profiles.arcpath import ArcPath
from profiles.arcs import fewest_arcs

BLOCK_CURVE = "BLOCK_CURVE"
BLOCK_BODY = "BLOCK_BODY"
SHEET = "SHEET"

MOULDS = {"concave": "on the chuck", "convex": "in the cavity"}
ZEROS = {"male": "the vertex of its face", "female": "the plane of its lip"}
OTHER = {"concave": "convex", "convex": "concave"}


def block_drawing(block: FollowBlock, face: ArcPath, job: Job) -> Drawing:
    """Return the drawing of a follow block for the lathe.

    Parameters
    ----------
    block : FollowBlock
        The block [mm].
    face : ArcPath
        Arcs of its face in its mould frame, from the axis or bore outwards [mm].
    job : Job
        The job in its own units.

    Returns
    -------
    Drawing
        Layers in drawing coordinates and the job's unit.
    """
    curve = block.body.to_lathe(face)
    body = block.body.half_section(curve)
    distance = fit_distance(job.in_millimetres().tolerance.files.chord_error, job.units)
    sheet = fewest_arcs(block.sheet, distance=distance).path
    layers = {
        BLOCK_CURVE: curve,
        BLOCK_BODY: body,
        SHEET: block.body.to_lathe(_from_axis(sheet) if block.around else sheet),
        CENTRE_LINE: centre_line(body),
    }
    return Drawing(
        job.units, {name: (to_drawing(path, job.units),) for name, path in layers.items()}, _notes(block, job)
    )


def _from_axis(sheet: ArcPath) -> ArcPath:
    """Return the path of the sheet from the edge of a pad outwards with the flat over the pad before it."""
    centre = (0.0, sheet.vertices[0, 1])
    return ArcPath(np.vstack([centre, sheet.vertices]), np.append(0.0, sheet.bulges))


def _notes(block: FollowBlock, job: Job) -> tuple[str, ...]:
    number = f", number {job.number}" if job.number else ""
    kind, contact = block.body.kind, job.forming.contact_face
    flat = float(block.body.curve.slope(block.body.curve.end)) <= FLAT
    shape = "flat" if flat else "a plug, for a cavity" if kind == "male" else "a cavity, over a chuck"
    return (
        f"{job.title}{number}, revision {job.revision}",
        f"follow block, {shape}; half section; x along the spindle axis, 0 at {ZEROS[kind]}; y = radius",
        f"sheet: {job.sheet.material}, {job.sheet.thickness:g} {job.units}; its {OTHER[contact]} face "
        f"lies on BLOCK_CURVE, the layer {SHEET} is its face {MOULDS[contact]}",
        f"BLOCK_CURVE within {job.tolerance.files.chord_error:g} {job.units} of the sheet's face, along the normal",
    )
