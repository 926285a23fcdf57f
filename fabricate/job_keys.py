"""The keys of the job file: one frozen model per table, one field per key.

A key's type, bounds, unit, default and meaning stand here and nowhere else; the reader, the canonical text, the
conversion to millimetres and the starter job all follow from these fields. A field without a default is required.
What one key demands of another stands in ``job_rules``. Defaults are those of a millimetre job.
"""

from __future__ import annotations

from typing import Annotated, Any, Literal, TypeVar

from pydantic import BaseModel, ConfigDict, Field

from fabricate.materials import QUANTITIES, Kind, Material, SourcedValue, has_material, material
from fabricate.measures import (
    Coefficients,
    Measure,
    Rows,
    Units,
    Words,
    length,
    plain,
    speed_per_minute,
    speed_per_second,
)

FaceWord = Literal["concave", "convex"]
Process = Literal["spinning", "shear-spinning", "drape-forming", "straight-vacuum"]
SpringbackLaw = Literal["none", "focal-length", "curvature", "bending", "stations"]
ThinningLaw = Literal["none", "sine-law", "straight-vacuum", "stations"]

# The same word of a control's dialect in a millimetre job.
_MILLIMETRE_WORDS = {"G20": "G21", "G70": "G71"}

_RADIUS = length(0.0, 1e5)
_PERCENT = plain(-1000.0, 1000.0, unit="%")
_TOLERANCE = length(0.0, 100.0)

Pairs = tuple[tuple[float, float], ...]


class Table(BaseModel):
    """A table of the job file: frozen, no unknown keys, no number in quotation marks, no NaN, no infinity."""

    model_config = ConfigDict(frozen=True, extra="forbid", strict=True, allow_inf_nan=False)


AnyTable = TypeVar("AnyTable", bound=Table)


class Reflector(Table):
    """The reflecting face of the finished part: released, trimmed, at 20 °C."""

    focal_length: Annotated[float, length(0.1, 1e5)] = Field(
        description="from the vertex to the focus, half the radius of curvature at the vertex; or state depth"
    )
    depth: Annotated[float | None, length(0.001, 1e5)] = Field(
        default=None,
        description="from the vertex to the plane of the rim; instead of focal_length, or in agreement with it",
    )
    rim_diameter: Annotated[float, length(1.0, 1e5)] = Field(description="measured on the reflecting face")
    hole_diameter: Annotated[float, length(0.0, 1e5)] = Field(
        default=0.0, description="central hole, on the reflecting face"
    )
    conic_constant: Annotated[float, plain(-100.0, 100.0)] = Field(
        default=-1.0, description="K of ISO 10110-12: -1 a paraboloid, 0 a sphere"
    )
    asphere: Annotated[tuple[float, ...], Coefficients(10)] = Field(
        default=(), description="A4, A6, ... of ISO 10110-12, in units^-3, units^-5, ..."
    )
    reflecting_face: FaceWord = Field(description="the face that is the mirror")


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
        default=None, description='number of the gauge, "00" and heavier in quotation marks; instead of thickness'
    )
    gauge_system: Annotated[str | None, Words(1, 20)] = Field(
        default=None, description="AWG, SWG, USG or MSG: a gauge number alone means nothing"
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

    law: SpringbackLaw = Field(description='how it is stated; "none" says that there is none')
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

    law: ThinningLaw = Field(description='how the sheet thins; "none" says that it keeps its thickness')
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
    springback: Springback
    thinning: Thinning
    shrinkage: Shrinkage = Shrinkage()


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

    @property
    def row(self) -> Material | None:
        """The mould's row of the material table; none where the material is not stated."""
        return material(self.material, use="mould") if self.material else None


class FileTolerance(Table):
    """Every written file against the exact mould curve."""

    chord_error: Annotated[float, length(1e-5, 10.0)] = Field(description="largest normal deviation")
    slope_mrad: Annotated[float, plain(0.0, 1000.0, unit="mrad")] = Field(
        default=0.0, description="largest slope error of arcs and turning; 0: reported, not asked for"
    )


class MouldTolerance(Table):
    """The mould as cut."""

    profile: Annotated[float, _TOLERANCE] = Field(default=0.0, description="+-, along the normal; 0: not asked for")


class PartTolerance(Table):
    """The finished part."""

    profile: Annotated[float, _TOLERANCE] = Field(default=0.5, description="+-, along the normal; 0: not asked for")
    slope_mrad: Annotated[float, plain(0.0, 1000.0, unit="mrad")] = Field(
        default=0.0, description="RMS slope error; 0: not asked for"
    )
    rms: Annotated[float, _TOLERANCE] = Field(default=0.0, description="RMS form error; 0: not asked for")
    focal_length: Annotated[float, length(0.0, 1e4)] = Field(default=0.0, description="+-; 0: not asked for")
    rim_diameter: Annotated[float, _TOLERANCE] = Field(default=0.0, description="+-; 0: not asked for")
    roundness: Annotated[float, _TOLERANCE] = Field(default=0.0, description="of the rim; 0: not asked for")


class Tolerance(Table):
    """What the files, the mould and the part must keep."""

    files: FileTolerance
    mould: MouldTolerance = MouldTolerance()
    part: PartTolerance = PartTolerance()


class Drawing(Table):
    """The lathe drawing."""

    version: Literal["R2010", "R12"] = Field(default="R2010", description="of the DXF; R12 for old machines")
    entities: Literal["polyline", "line-arc"] = Field(
        default="polyline", description="one polyline with bulges, or lines and arcs"
    )


class Control(Table):
    """How this lathe's control spells things: look each word up in its manual, no default is safe."""

    x_word: Literal["diameter", "radius"] = Field(description="what the X word counts")
    plane_word: Literal["G18", "none"] = Field(description="the XZ plane, where the control has the word")
    units_word: Literal["G20", "G21", "G70", "G71", "none"] = Field(
        description="inches G20 or G70, millimetres G21 or G71; must agree with units"
    )
    absolute_word: Literal["none", "G90"] = Field(description="G90 is a cutting cycle where G99 is feed per turn")
    feed_per_rev_word: Literal["G99", "G95"] = Field(description="feed per revolution")
    spindle_limit_word: Literal["G50", "G92", "D", "none"] = Field(
        description="limit under constant surface speed; none: no G96 at all, speeds stepped with G97"
    )
    arcs: Literal["centre", "radius", "lines"] = Field(description="I and K, or R, or no arcs")
    decimals: Annotated[int, plain(3, 6)] = Field(description="3 to 6 in a millimetre job, 4 to 6 in an inch job")


class Turning(Table):
    """The turning program; without this table none is written."""

    spindle_direction: Literal["M3", "M4"] = Field(description="M4 may unscrew a chuck from a threaded nose")
    spindle_limit_untrued: Annotated[float, plain(1.0, 1e5, unit="rev/min")] = Field(
        description="until the stock runs true"
    )
    spindle_limit: Annotated[float, plain(1.0, 1e5, unit="rev/min")] = Field(description="of the trued stock")
    rim_speed_limit: Annotated[float, speed_per_second(0.0, 300.0)] = Field(
        default=0.0, description="of the stock; to be stated for wood, laminate, board and printed stock; 0: none"
    )
    surface_speed: Annotated[float, speed_per_minute(1.0, 5000.0)] = Field(default=180.0, description="cutting speed")
    tool_post: Literal["rear", "front"] = Field(default="rear", description="for the header and the picture only")
    control_point: Literal["imaginary-tip", "nose-centre"] = Field(
        default="imaginary-tip", description="the point of the insert that the program moves"
    )
    nose_radius: Annotated[float, length(0.01, 50.0)] = Field(default=0.8, description="of the insert")
    depth_of_cut: Annotated[float, length(0.01, 50.0)] = Field(default=1.5, description="roughing")
    finish_allowance: Annotated[float, length(0.0, 20.0)] = Field(default=0.3, description="left by roughing")
    roughing_feed: Annotated[float, length(0.001, 10.0)] = Field(default=0.25, description="per revolution")
    finishing_feed: Annotated[float, length(0.001, 10.0)] = Field(default=0.1, description="per revolution")
    stock_allowance: Annotated[float, length(0.0, 500.0)] = Field(
        default=3.0, description="a plain cylinder: this much larger on the radius and on the front"
    )
    control: Control


class Job(Table):
    """A job as understood: every default filled in, every value in the job's own units."""

    title: Annotated[str, Words(1, 120)] = Field(description="what the part is called")
    number: Annotated[str, Words(0, 60)] = Field(default="", description="the shop's own")
    revision: Annotated[int, plain(0, 1_000_000)] = Field(default=1, description="of this job")
    units: Units = Field(description="of every length here")
    reflector: Reflector
    sheet: Sheet
    forming: Forming
    mould: Mould = Mould()
    tolerance: Tolerance
    drawing: Drawing = Drawing()
    turning: Turning | None = Field(default=None, description="the turning program; without this table none is written")

    def in_millimetres(self) -> Job:
        """Return the same job with millimetres as its unit; a millimetre job is returned as it is.

        Lengths are multiplied by 25.4, an asphere's A_2i by 25.4^(1 − 2i), ft/min and ft/s by 0.3048, and the
        control's word for inches becomes the same control's word for millimetres.

        Returns
        -------
        Job
            Job with ``units`` "mm".
        """
        if self.units == "mm":
            return self
        converted = _from_inches(self).model_copy(update={"units": "mm"})
        turning = converted.turning
        if turning is None:
            return converted
        word = _MILLIMETRE_WORDS.get(turning.control.units_word, turning.control.units_word)
        control = turning.control.model_copy(update={"units_word": word})
        return converted.model_copy(update={"turning": turning.model_copy(update={"control": control})})


def measure_of(table: type[Table], name: str) -> Measure | None:
    """Return the measure of a key.

    Parameters
    ----------
    table : type of Table
        Model of the table that holds the key.
    name : str
        The key.

    Returns
    -------
    Measure or None
        None where the value is a word, a switch or a table.
    """
    return next((entry for entry in table.model_fields[name].metadata if isinstance(entry, Measure)), None)


def _from_inches(table: AnyTable) -> AnyTable:
    changes: dict[str, Any] = {}
    for name in type(table).model_fields:
        value = getattr(table, name)
        measure = measure_of(type(table), name)
        if isinstance(value, Table):
            changes[name] = _from_inches(value)
        elif measure is not None and value is not None:
            changes[name] = measure.from_inch_job(value)
    return table.model_copy(update=changes)
