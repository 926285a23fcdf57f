"""An order: a job together with the exact geometry that its files are written from and proved against."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from fabricate.chain import Chain
from fabricate.drawing import fit_distance, unit_length
from fabricate.job import Job, job_hash, job_text
from fabricate.mould import Mould
from fabricate.solid import mould_solid
from fabricate.turning import TurningPlan, plan_turning
from profiles.arcs import ArcFit, fewest_arcs
from profiles.revolve import Mesh, revolve
from profiles.solids import Solid

DRAWING = "lathe-profile.dxf"
SOLID = "mould.stl"
PROGRAM = "turning.nc"
TABLE = "sag-table.csv"
JOB = "job.toml"
PROOF = "proof.json"
PACKAGE_FILES = (DRAWING, SOLID, PROGRAM, TABLE, JOB, PROOF)


@dataclass(frozen=True, eq=False)
class Order:
    """A job and what follows from it.

    Parameters
    ----------
    job : Job
        The job in its own units.
    """

    job: Job

    @cached_property
    def text(self) -> str:
        """The job file as understood, every default written out."""
        return job_text(self.job)

    @cached_property
    def sha256(self) -> str:
        """Hash of that text, 64 hexadecimal digits."""
        return job_hash(self.text)

    @cached_property
    def chain(self) -> Chain:
        """The maps between part and mould [mm]."""
        return Chain(self.job.in_millimetres())

    @property
    def unit(self) -> float:
        """Length of one unit of the job [mm]."""
        return unit_length(self.job.units)

    @property
    def mould(self) -> Mould:
        """The mould [mm]."""
        return self.chain.mould

    @property
    def tolerance(self) -> float:
        """Largest distance of any written file from the exact mould curve [mm]."""
        return self.chain.job.tolerance.files.chord_error

    @property
    def slope_tolerance(self) -> float:
        """Largest lean of arcs and turning against the exact mould curve [rad]; 0: not asked for."""
        return 1e-3 * self.job.tolerance.files.slope_mrad

    @cached_property
    def forming_arcs(self) -> ArcFit:
        """The fewest tangent arcs for the forming surface, in the mould frame [mm]."""
        return fewest_arcs(
            self.mould.curve,
            distance=fit_distance(self.tolerance, self.job.units),
            slope=(1.0 - 1e-6) * self.slope_tolerance,
        )

    @cached_property
    def exact_solid(self) -> Solid:
        """The mould as an exact solid, base plane at height 0 [mm]."""
        return mould_solid(self.mould)

    @cached_property
    def mesh(self) -> Mesh:
        """The mould as triangles within tolerance of the exact solid [mm]."""
        return revolve(self.exact_solid, chord_error=self.tolerance)

    @cached_property
    def turning_plan(self) -> TurningPlan:
        """The turning program, for a job that asks for one."""
        return plan_turning(self.job, self.mould, self.forming_arcs.path)

    @property
    def file_names(self) -> tuple[str, ...]:
        """The files of its work package that can be proved, in the order in which they are written."""
        return tuple(name for name in PACKAGE_FILES[:-1] if name != PROGRAM or self.job.turning is not None)
