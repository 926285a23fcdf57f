"""What is on the lathe: the stock, the insert and the mould that is to come out of it.

Everything here is in millimetres and in the lathe frame (radius, Z), and every position of the tool is that of the
*nose centre*, the centre of the insert's rounded nose. The *control point*, which the program's words move, is the nose
centre itself or the *imaginary tip*, where the lines that touch the nose along X and along Z meet.

A *male* mould is turned by an insert that faces the axis and the headstock, so that the work lies on its −radius and
−Z sides; a *female* one by an insert that faces away from the axis. Only the former can turn the outer side as well.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from fabricate.job_keys import Job
from fabricate.measures import Units
from fabricate.mould import Mould
from fabricate.turning_keys import Turning
from outputs.gcode_words import Dialect
from profiles.arcpath import ArcPath
from profiles.errors import JobError

CLEARANCE = 2.0
LIFT = 1.0
PARKING = 20.0
HELD = 5.0
FLANK = math.tan(math.radians(5.0))
INCH = 25.4
NO_TABLE = "turning: the table is missing; allowed: a [turning] table with its control; do: lay it out for a program"


@dataclass(frozen=True)
class Stock:
    """A plain solid cylinder in the lathe frame.

    Parameters
    ----------
    radius : float
        Half its diameter [mm].
    front, back : float
        Z of its faces, away from and towards the headstock [mm].
    """

    radius: float
    front: float
    back: float


@dataclass(frozen=True, eq=False)
class Setup:
    """One mould on the lathe, with the insert that cuts it.

    Parameters
    ----------
    mould : Mould
        What is to be turned.
    turning : Turning
        The job's ``[turning]`` table, in millimetres.
    chord_error : float
        Largest normal deviation that the forming surface may have [mm].
    units : {"mm", "inch"}
        What the program and every message count in.
    """

    mould: Mould
    turning: Turning
    chord_error: float
    units: Units

    @classmethod
    def of(cls, job: Job, mould: Mould) -> Setup:
        """Return the set-up of a job that has a ``[turning]`` table.

        Parameters
        ----------
        job : Job
            The job, in its own units.
        mould : Mould
            Its mould.

        Returns
        -------
        Setup
            In millimetres.

        Raises
        ------
        JobError
            If the job has no ``[turning]`` table.
        """
        in_mm = job.in_millimetres()
        if in_mm.turning is None:
            raise JobError(NO_TABLE)
        return cls(mould, in_mm.turning, in_mm.tolerance.files.chord_error, job.units)

    @property
    def unit(self) -> float:
        """Length of one unit of the job [mm]."""
        return INCH if self.units == "inch" else 1.0

    @property
    def digit(self) -> float:
        """The last digit of the program's positions [mm]."""
        return self.unit * 10.0**-self.turning.control.decimals

    @property
    def male(self) -> bool:
        """Whether the mould is male."""
        return self.mould.kind == "male"

    @property
    def nose(self) -> float:
        """Radius of the insert's nose [mm]."""
        return self.turning.nose_radius

    @property
    def allowance(self) -> float:
        """What roughing leaves, along the normal [mm]."""
        return self.turning.finish_allowance

    @property
    def stock(self) -> Stock:
        """The cylinder that is in the lathe at the start."""
        extra = self.turning.stock_allowance
        return Stock(self.mould.widest + extra, extra + self.mould.top, self.mould.lowest)

    @property
    def reach(self) -> float:
        """Lowest Z that the nose may touch [mm]: short of the base, where jaws or a faceplate hold the stock."""
        mould = self.mould
        return mould.base + min(HELD, 0.5 * (mould.land - mould.base)) if self.male else self.vertex

    @cached_property
    def core(self) -> ArcPath | None:
        """The arc, level on the axis, that carries the forming surface on under a bore; None without, or with a hub."""
        if self.mould.hub is not None or not self.mould.bore_radius:
            return None
        radius, height = self.mould.back.vertices[-1]
        slope = float(self.mould.curve.slope(self.mould.curve.start)) * (-1.0 if self.male else 1.0)
        vertices = np.array([(0.0, height - radius * np.tan(0.5 * slope)), (radius, height)])
        return ArcPath(vertices, np.array([np.tan(0.25 * slope)]))

    @property
    def vertex(self) -> float:
        """Z at which the forming surface, a hub, or what carries it on under a bore, meets the axis [mm]."""
        if self.mould.hub is not None:
            return float(self.mould.hub.vertices[0, 1])
        if self.core is not None:
            return float(self.core.vertices[0, 1])
        return 0.0 if self.male else -self.mould.land_height

    @property
    def end_slope(self) -> float:
        """Slope of the forming surface at its outer end [rad], positive."""
        return float(self.mould.curve.slope(self.mould.curve.end))

    @property
    def off(self) -> float:
        """Radius at which the nose centre is clear of the stock, the part of it that is held included [mm]."""
        return self.stock.radius + self.nose + CLEARANCE

    @property
    def above(self) -> float:
        """Z at which the nose centre is clear of the stock's front [mm]."""
        return self.stock.front + self.nose + CLEARANCE

    @property
    def home(self) -> tuple[float, float]:
        """Radius and Z of the nose centre where the program begins, stops and ends [mm]."""
        return self.stock.radius + self.nose + PARKING, self.stock.front + self.nose + PARKING

    @cached_property
    def control_shift(self) -> tuple[float, float]:
        """From the nose centre to the control point, in radius and Z [mm]."""
        if self.turning.control_point == "nose-centre":
            return 0.0, 0.0
        return (-self.nose if self.male else self.nose), -self.nose

    def text(self, value: float) -> str:
        """Return a length given in mm as headers and messages write it: in the job's units, without their name."""
        return f"{value / self.unit:.{3 if self.units == 'mm' else 4}f}"


def dialect_of(job: Job) -> Dialect:
    """Return the words of the control that a job's turning program is written for.

    Parameters
    ----------
    job : Job
        The job, in its own units, with a ``[turning]`` table.

    Returns
    -------
    Dialect
        Units and words of the job.

    Raises
    ------
    JobError
        If the job has no ``[turning]`` table.
    """
    if job.turning is None:
        raise JobError(NO_TABLE)
    return Dialect(units=job.units, **job.turning.control.model_dump())
