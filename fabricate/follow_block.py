"""The follow block of a spun job: what clamps the blank against the nose of the chuck while it is spun.

Its *face* fits the sheet's *outer face*, the one away from the chuck, as it lies on the chuck: from the forming surface
through cover and formed sheet, along the normal. A coating is laid on after forming, so that there is none yet. Over a
chuck the block is a cavity, in a cavity it is a plug, and like a mould it has a mould frame and a lathe frame of its
own (see ``mould``), both with the vertex of its face on the axis. Lengths are millimetres.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from fabricate import mould_keys
from fabricate.chain import Chain
from fabricate.follow_block_pad import FLAT, over_pad
from fabricate.job_keys import Job
from fabricate.mould import TELLABLE, Kind, Mould, mould_around
from profiles.arcpath import ArcPath
from profiles.errors import GeometryError, JobError
from profiles.meridian import Meridian
from profiles.series import Series
from profiles.solids import turned_over

BEYOND = 1.2
"""How much farther than the block the sheet is followed, as a part of the block's radius."""

NO_BLOCK = "follow_block: the table is missing; allowed: a [follow_block] table; do: lay it out for a block"


@dataclass(frozen=True, eq=False)
class FollowBlock:
    """A follow block and the sheet under it.

    Parameters
    ----------
    body : Mould
        The block, as a mould whose forming surface is its face [mm].
    sheet : Meridian
        The sheet's face on the chuck, from the axis or the edge of the chuck's pad to beyond the block, in the block's
        mould frame [mm].
    around : float
        Arc length at which the face has gone around the edge of the chuck's pad [mm]; 0 without a pad.
    """

    body: Mould
    sheet: Meridian
    around: float = 0.0


def follow_block_of(chain: Chain) -> FollowBlock:
    """Return the follow block of a spun job.

    Parameters
    ----------
    chain : Chain
        The maps between part and mould [mm], of a job with a ``[follow_block]`` table.

    Returns
    -------
    FollowBlock
        The block and the sheet under it [mm].

    Raises
    ------
    JobError
        If there is no such table, or the block does not fit.
    GeometryError
        If the sheet's outer face folds.
    """
    table = chain.job.follow_block
    if table is None:
        raise JobError(NO_BLOCK)
    outer, around = _outside(chain)
    vertex = float(outer.height(outer.start))
    face = _face(outer.raised(-vertex), table)
    # A flat face, all of it over the pad of a chuck, is turned like a plug's, whose mould frame is the other way round.
    hollow = chain.kind == "male" and float(face.slope(face.end)) > FLAT
    kind: Kind = "female" if hollow else "male"
    shape = mould_keys.Mould(
        edge_radius=table.edge_radius if kind == "female" else 0.0,
        body_height=table.body_height,
        bore_diameter=table.bore_diameter,
    )
    body = mould_around(face, kind, shape)
    body = _rounded(body, table) if kind == "male" else body
    sheet = _inside(chain, body.outer_radius).raised(-vertex)
    return FollowBlock(body, turned_over(sheet) if chain.kind == kind else sheet, around)


def sheet_outside(chain: Chain) -> Meridian:
    """Return the sheet's outer face as it lies on the chuck.

    Parameters
    ----------
    chain : Chain
        The maps between part and mould [mm].

    Returns
    -------
    Meridian
        The face away from the chuck, without coating, from the axis to the end of the trim, in the chuck's mould frame
        [mm]. Over a pad it is flat, and round where the sheet goes around the pad's edge.

    Raises
    ------
    JobError
        If it cannot be told over the chuck's pad.
    GeometryError
        If that face folds.
    """
    return _outside(chain)[0]


def turned_job(job: Job) -> Job:
    """Return a job whose ``[turning]`` values turn the block: its stock is not the chuck's, and is not named.

    Parameters
    ----------
    job : Job
        The job in its own units.

    Returns
    -------
    Job
        The same job without a mould's material.
    """
    return job.model_copy(update={"mould": mould_keys.Mould()})


def _outside(chain: Chain) -> tuple[Meridian, float]:
    """Return the sheet's outer face, and the arc length at which it has gone around the edge of a pad [mm]."""
    outer = _on_chuck(chain, outer=True)
    hub = chain.job.mould.hub
    return (outer, 0.0) if hub is None else over_pad(chain, outer, 0.5 * hub.diameter)


def _inside(chain: Chain, block_radius: float) -> Meridian:
    """Return the sheet's face on the chuck, beyond a pad, to a little beyond the block, in the chuck's frame [mm]."""
    inner, hub = _on_chuck(chain, outer=False), chain.job.mould.hub
    pad = 0.5 * hub.diameter if hub is not None else 0.0
    reach = min(BEYOND * max(block_radius, pad), float(inner.radius(inner.end)))
    start = float(inner.at_radius(pad)) if pad else inner.start
    return inner.part(start, float(inner.at_radius(reach)))


def _on_chuck(chain: Chain, *, outer: bool) -> Meridian:
    """Return the sheet's face away from the chuck, or the one on it, in the chuck's mould frame [mm]."""
    sheet, forming = chain.job.sheet, chain.job.forming
    mirror_inside = chain.job.reflector.reflecting_face == "concave"
    inside = (forming.contact_face == "concave") != outer
    coating = -sheet.coating_thickness if mirror_inside else sheet.coating_thickness
    through = float(inside) - float(mirror_inside)
    shift = Series(tuple(through * piece + coating for piece in chain.thickness.pieces))
    try:
        face = chain.on_mould.offset(shift)
    except GeometryError as error:
        raise GeometryError(f"follow_block, the sheet's faces on the chuck: {error}") from error
    return face.scaled(chain.enlargement).raised(chain.vertex_gap)


def _face(outer: Meridian, table: mould_keys.FollowBlock) -> Meridian:
    """Return the sheet's outer face as far as the block goes; refuse what does not fit."""
    radius, end = 0.5 * table.diameter, float(outer.radius(outer.end))
    if radius > end:
        raise JobError(
            f"follow_block.diameter: value is {table.diameter:g} mm; allowed: at most {2.0 * end:.6g} mm, where the "
            "sheet's outer face ends; do: make the block smaller"
        )
    if table.bore_diameter >= table.diameter:
        raise JobError(
            f"follow_block.bore_diameter: value is {table.bore_diameter:g} mm; allowed: less than "
            f"follow_block.diameter, {table.diameter:g} mm; do: make the bore smaller"
        )
    face = outer.part(outer.start, float(outer.at_radius(radius)))
    least, most = (np.degrees(extreme[1]) for extreme in (face.slope.smallest(), face.slope.largest()))
    if least < -1e-7 or most >= 90.0:
        raise JobError(
            f"follow_block: the sheet's outer face under the block has slopes from {least:.4g} to {most:.4g} degrees; "
            "allowed: from 0 up to but not 90; do: check thinning.stations, or make the block smaller"
        )
    return face


def _rounded(plug: Mould, table: mould_keys.FollowBlock) -> Mould:
    """Return a plug, sharp so far, with a round edge between face and outer side, clear of the sheet."""
    edge = table.edge_radius
    if edge <= TELLABLE:
        return plug
    (radius, height), slope = plug.curve.points(plug.curve.end), float(plug.curve.slope(plug.curve.end))
    outer, level = float(radius + edge * (1.0 - np.sin(slope))), float(height + edge * np.cos(slope))
    if -level <= plug.base:
        raise JobError(
            f"follow_block.body_height: value is {table.body_height:g} mm; allowed: more than {level - height:.6g} mm, "
            f"which the round edge takes; do: make the body higher or edge_radius ({edge:g} mm) smaller"
        )
    rim = ArcPath(np.array([(radius, -height), (outer, -level)]), np.array([-np.tan(0.25 * (0.5 * np.pi - slope))]))
    back = np.vstack([[(outer, -level), (outer, plug.base)], plug.back.vertices[2:]])
    return replace(plug, rim=rim, back=ArcPath(back, np.zeros(len(back) - 1)), land_height=level, edge_radius=edge)
