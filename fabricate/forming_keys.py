"""The keys of the job file that say what the sheet is and how it is formed: ``[sheet]`` and ``[forming]``.

A key's type, bounds, unit, default and meaning stand here and nowhere else; see ``job_keys``.
"""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from fabricate.job_table import Table
from fabricate.law_table import LawName
from fabricate.materials import QUANTITIES, Kind, Material, SourcedValue, has_material, material
from fabricate.measures import Rows, Words, length, plain
from fabricate.springback import LAWS as SPRINGBACK_LAWS
from fabricate.thinning import LAWS as THINNING_LAWS

FaceWord = Literal["concave", "convex"]
Process = Literal["spinning", "shear-spinning", "drape-forming", "straight-vacuum"]

_RADIUS = length(0.0, 1e5)
_PERCENT = plain(-1000.0, 1000.0, unit="%")

Pairs = tuple[tuple[float, float], ...]


class SheetProperties(Table):
    """Properties of a sheet that the table lacks, or better values for one that it has; SI units in every job."""

    kind: Literal["metal", "plastic"] | None = Field(
        default=None, description="decides whether shrinkage must be stated"
    )
    youngs_modulus_mpa: Annotated[float | None, plain(1.0, 1e6, unit="MPa")] = Field(
        default=None, description="Young's modulus"
    )
    poisson: Annotated[float | None, plain(0.0, 0.5)] = Field(default=None, description="Poisson's ratio")
    yield_mpa: Annotated[float | None, plain(0.1, 1e4, unit="MPa")] = Field(default=None, description="yield stress")
    density_kg_m3: Annotated[float | None, plain(10.0, 25000.0, unit="kg/m3")] = Field(
        default=None, description="density"
    )
    thermal_expansion_per_k: Annotated[float | None, plain(-1e-4, 1e-3, unit="1/K")] = Field(
        default=None, description="coefficient of linear thermal expansion"
    )
    softening_temperature_c: Annotated[float | None, plain(0.0, 2000.0, unit="C")] = Field(
        default=None, description="where a plastic begins to give way"
    )
    forming_temperature_c: Annotated[float | None, plain(0.0, 2000.0, unit="C")] = Field(
        default=None, description="at which a plastic sheet is formed"
    )

    def stated(self) -> dict[str, float]:
        """Return the quantities that are stated.

        Returns
        -------
        dict of str to float
            Value by quantity, in the unit that the name ends in.
        """
        return {name: value for name in QUANTITIES if (value := getattr(self, name)) is not None}


class Sheet(Table):
    """The sheet that is formed."""

    material: Annotated[str, Words(1, 80)] = Field(
        description="a sheet of `dishwright materials`, or any name with [sheet.properties]"
    )
    thickness: Annotated[float, length(0.01, 100.0)] = Field(
        description="before forming; or state gauge and gauge_system"
    )
    gauge: int | Annotated[str, Words(1, 8)] | None = Field(
        default=None,
        description='number of the gauge, "00" and heavier in quotation marks, or ounces per square foot; '
        "instead of thickness",
    )
    gauge_system: Annotated[str | None, Words(1, 20)] = Field(
        default=None, description="AWG, SWG, USG, MSG, or oz/ft2 of copper: a number alone means nothing"
    )
    thickness_tolerance: Annotated[float, length(0.0, 10.0)] = Field(
        default=0.0, description="+- on the thickness; 0: not known"
    )
    coating_thickness: Annotated[float, length(-10.0, 10.0)] = Field(
        default=0.0, description="laid on the reflecting face after forming; negative: polished away"
    )
    properties: SheetProperties | None = Field(default=None, description="for a sheet that the material table lacks")

    @property
    def row(self) -> Material:
        """The sheet's row of the material table, with what ``[sheet.properties]`` states in its place."""
        stated = {} if self.properties is None else self.properties.stated()
        values = {name: SourcedValue(name, value, value, value, "stated in the job") for name, value in stated.items()}
        kind: Kind | None = None if self.properties is None else self.properties.kind
        if has_material(self.material, "sheet"):
            known = material(self.material)
            kind = kind or known.kind
            values = {entry.quantity: entry for entry in known.values} | values
        ordered = tuple(values[name] for name in QUANTITIES if name in values)
        return Material(self.material, "sheet", kind or "metal", ordered)


class Springback(Table):
    """What the reflecting face does when the sheet lets go of the mould."""

    law: Annotated[str, LawName(SPRINGBACK_LAWS)] = Field(
        description='how it is stated; "none" says that there is none'
    )
    percent: Annotated[float | None, plain(-20.0, 40.0, unit="%")] = Field(
        default=None, description="for the laws focal-length and curvature; negative: the part closes"
    )
    depth_loss: Annotated[float | None, length(-1e4, 1e4)] = Field(
        default=None, description="instead of percent: depth of the rim on the mould less that of the part"
    )
    rim_slope_loss_deg: Annotated[float | None, plain(-60.0, 60.0, unit="degrees")] = Field(
        default=None, description="instead of percent: slope of the rim on the mould less that of the part"
    )
    stations: Annotated[Pairs | None, Rows(("radius", "percent"), (_RADIUS, _PERCENT))] = Field(
        default=None, description="for the law stations: rows [radius on the finished face, percent]"
    )
    flow_stress_mpa: Annotated[float | None, plain(0.1, 5000.0, unit="MPa")] = Field(
        default=None, description="for the law bending: flow stress after forming, not the annealed yield"
    )
    accept_estimate: bool = Field(
        default=False, description="for the law bending: go on where it predicts more than 40 percent"
    )


class Thinning(Table):
    """How thick the formed sheet is."""

    law: Annotated[str, LawName(THINNING_LAWS)] = Field(
        description='how the sheet thins; "none" says that it keeps its thickness'
    )
    stations: Annotated[Pairs | None, Rows(("radius", "thickness"), (_RADIUS, length(0.001, 200.0)))] = Field(
        default=None, description="for the law stations: rows [radius, thickness]"
    )


class Shrinkage(Table):
    """How the part shrinks on cooling; to be stated for plastics."""

    percent: Annotated[float, plain(0.0, 20.0, unit="%")] = Field(
        default=0.0, description="linear; to be stated for a plastic, as sources differ by three times"
    )
    reference: Literal["cold-mould", "hot-mould"] = Field(
        default="cold-mould",
        description="taken against the cold mould (ISO 294-4), or the hot one, which needs the next two",
    )
    mould_expansion: Annotated[float | None, plain(0.0, 1e-3, unit="1/K")] = Field(
        default=None, description="for hot-mould: expansion of the mould"
    )
    temperature_rise: Annotated[float | None, plain(0.0, 1000.0, unit="K")] = Field(
        default=None, description="for hot-mould: how much warmer than 20 C the mould is"
    )


class Forming(Table):
    """How the sheet is formed and where it is trimmed."""

    process: Process = Field(description="how the sheet is formed")
    contact_face: FaceWord = Field(description="the face of the sheet that lies on the mould")
    trim_allowance: Annotated[float, length(0.0, 1000.0)] = Field(
        default=8.0, description="beyond the rim, along the reflecting face"
    )
    trim: Literal["on-mould", "after-release"] = Field(default="on-mould", description="where the rim is cut")
    flange_width: Annotated[float, length(0.0, 1e4)] = Field(
        default=0.0, description="flat flange beyond the forming surface; counts for the blank"
    )
    bead_allowance: Annotated[float, length(0.0, 1000.0)] = Field(
        default=0.0, description="metal beyond the forming surface for a rolled bead; counts for the blank"
    )
    clamp_opening: Annotated[float, length(0.0, 1e5)] = Field(
        default=0.0, description="of a thermoformed sheet: diameter that the clamp leaves free; 0: the mould's own"
    )
    clamp_grip: Annotated[float, length(0.0, 1000.0)] = Field(
        default=20.0, description="of a thermoformed sheet: width that the clamp holds, all round"
    )
    springback: Springback
    thinning: Thinning
    shrinkage: Shrinkage = Shrinkage()
