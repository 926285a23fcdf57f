"""The keys of the job file that say what the sheet is formed on: ``[mould]`` and ``[follow_block]``.

A key's type, bounds, unit, default and meaning stand here and nowhere else; see ``job_keys``.
"""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from fabricate.job_table import Table
from fabricate.materials import Material, material
from fabricate.measures import Words, length, plain


class LeadOut(Table):
    """A straight stretch of the mould beyond the forming surface, along its last tangent, before the edge radius."""

    distance: Annotated[float, length(0.01, 1000.0)] = Field(description="along the tangent")
    groove_radius: Annotated[float, length(0.0, 100.0)] = Field(
        default=0.0, description="of a round groove across its middle, in which a bead is rolled; 0: none"
    )
    groove_depth: Annotated[float, length(0.0, 100.0)] = Field(default=0.0, description="of that groove; 0: none")


class Hub(Table):
    """A flat pad at the centre of the mould, level with the forming surface at its edge."""

    diameter: Annotated[float, length(0.1, 1e5)] = Field(description="of the pad")
    pilot_diameter: Annotated[float, length(0.0, 1e5)] = Field(
        default=0.0, description="of a pin on the pad that centres a pierced blank; 0: none"
    )
    pilot_length: Annotated[float, length(0.0, 1000.0)] = Field(default=0.0, description="over the pad; 0: none")


class AirHoles(Table):
    """Holes drilled through the mould that let out the air between it and the sheet."""

    diameter: Annotated[float, length(0.1, 100.0)] = Field(description="of each hole")
    count: Annotated[int, plain(1, 100)] = Field(default=1, description="evenly on their circle")
    circle_diameter: Annotated[float, length(0.0, 1e5)] = Field(
        default=0.0, description="of the circle that they lie on; 0: one hole on the axis"
    )


class Bolts(Table):
    """Blind holes for the bolts of a backplate, drilled from the base plane."""

    circle_diameter: Annotated[float, length(1.0, 1e5)] = Field(description="of the circle that they lie on")
    count: Annotated[int, plain(2, 100)] = Field(description="evenly on their circle")
    hole_diameter: Annotated[float, length(0.5, 200.0)] = Field(description="of each hole")
    hole_depth: Annotated[float, length(0.1, 1e4)] = Field(description="over the base plane")


class Mould(Table):
    """What the sheet is formed on: the chuck, drape mould or cavity."""

    material: Annotated[str, Words(0, 80)] = Field(
        default="",
        description="a mould material of `dishwright materials`; decides mass and the need of a rim-speed limit",
    )
    land_width: Annotated[float, length(0.0, 1e4)] = Field(
        default=0.0, description="flat ring beyond the forming surface"
    )
    edge_radius: Annotated[float, length(0.0, 1000.0)] = Field(
        default=3.0, description="between the forming surface and the land"
    )
    body_height: Annotated[float, length(0.1, 1e4)] = Field(
        default=40.0, description="from the base plane to the lowest point of the forming surface"
    )
    outer_diameter: Annotated[float, length(0.0, 1e5)] = Field(default=0.0, description="0: from the land")
    bore_diameter: Annotated[float, length(0.0, 1e5)] = Field(default=0.0, description="through the mould; 0: none")
    spigot_diameter: Annotated[float, length(0.0, 1e5)] = Field(
        default=0.0, description="below the base plane; 0: none"
    )
    spigot_length: Annotated[float, length(0.0, 1e4)] = Field(default=0.0, description="below the base plane; 0: none")
    cover_thickness: Annotated[float, length(0.0, 100.0)] = Field(
        default=0.0, description="flock or flannel laid on the mould"
    )
    trim_line_depth: Annotated[float, length(0.0, 5.0)] = Field(
        default=0.0, description="of a line scribed where the rim is cut, at its material point; 0: none"
    )
    draft_deg: Annotated[float, plain(0.0, 45.0, unit="degrees")] = Field(
        default=0.0, description="of the outer side: it widens towards the base, so that a formed skirt lets go"
    )
    lead_out: LeadOut | None = Field(default=None, description="straight stretch beyond the forming surface")
    hub: Hub | None = Field(default=None, description="flat pad at the centre")
    air_holes: AirHoles | None = Field(default=None, description="holes that let the air out")
    bolts: Bolts | None = Field(default=None, description="bolt holes of a backplate")

    @property
    def row(self) -> Material | None:
        """The mould's row of the material table; none where the material is not stated."""
        return material(self.material, use="mould") if self.material else None


class FollowBlock(Table):
    """The block that holds the blank against the chuck while it is spun."""

    diameter: Annotated[float, length(1.0, 1e5)] = Field(description="of its face, which fits the sheet's outside")
    body_height: Annotated[float, length(0.1, 1e4)] = Field(
        default=30.0, description="from its back to the deepest point of its face"
    )
    edge_radius: Annotated[float, length(0.0, 1000.0)] = Field(default=1.0, description="of its lip")
    bore_diameter: Annotated[float, length(0.0, 1e5)] = Field(
        default=0.0, description="through the block, for a pilot or a tail centre; 0: none"
    )
    program: bool = Field(
        default=False, description="write its turning program too, by [turning], whose rim_speed_limit must be stated"
    )
