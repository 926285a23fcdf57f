"""The keys of the job file: one frozen model per table, one field per key.

A key's type, bounds, unit, default and meaning stand here and nowhere else; the reader, the canonical text, the
conversion to millimetres and the starter job all follow from these fields. A field without a default is required.
What one key demands of another stands in ``job_rules``. Defaults are those of a millimetre job.
"""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from fabricate.forming_keys import FaceWord, Forming, Sheet
from fabricate.job_table import Table, from_inches
from fabricate.measures import Coefficients, Units, Words, length, plain
from fabricate.mould_keys import FollowBlock, Mould
from fabricate.turning_keys import Machine, Turning

# The same word of a control's dialect in a millimetre job.
_MILLIMETRE_WORDS = {"G20": "G21", "G70": "G71"}

_TOLERANCE = length(0.0, 100.0)


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
    follow_block: FollowBlock | None = Field(
        default=None, description="the follow block of a spun job; without this table none is drawn"
    )
    tolerance: Tolerance
    drawing: Drawing = Drawing()
    turning: Turning | None = Field(default=None, description="the turning program; without this table none is written")
    machine: Machine | None = Field(default=None, description="the lathe; a stock that does not fit it is refused")

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
        converted = from_inches(self).model_copy(update={"units": "mm"})
        turning = converted.turning
        if turning is None:
            return converted
        word = _MILLIMETRE_WORDS.get(turning.control.units_word, turning.control.units_word)
        control = turning.control.model_copy(update={"units_word": word})
        return converted.model_copy(update={"turning": turning.model_copy(update={"control": control})})
