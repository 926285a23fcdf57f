"""An order: a job together with the exact geometry that its files are written from and proved against."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property, partial

from fabricate.blank import Blank, blank_of
from fabricate.chain import Chain
from fabricate.drawing import fit_distance, unit_length
from fabricate.follow_block import FollowBlock, follow_block_of, turned_job
from fabricate.follow_block_pad import fewest_arcs_around
from fabricate.holes import drilled_mould
from fabricate.job import Job, job_hash, job_text
from fabricate.mould import Mould
from fabricate.solid import FITTED
from fabricate.stock_fit import StockFit, stock_fit
from fabricate.turning import TurningPlan, plan_turning
from profiles.arcs import ArcFit, fewest_arcs
from profiles.drilled_mesh import drilled_mesh
from profiles.drilling import DrilledSolid
from profiles.errors import JobError
from profiles.meridian import Meridian
from profiles.revolve import Mesh

DRAWING = "lathe-profile.dxf"
SOLID = "mould.stl"
PROGRAM = "turning.nc"
BLOCK_DRAWING = "follow-block.dxf"
BLOCK_PROGRAM = "follow-block.nc"
TABLE = "sag-table.csv"
JOB = "job.toml"
PROOF = "proof.json"
PACKAGE_FILES = (DRAWING, SOLID, PROGRAM, TABLE, JOB, PROOF)
"""The files of a package whose job asks for a turning program and nothing further."""
EVERY_FILE = (DRAWING, SOLID, PROGRAM, BLOCK_DRAWING, BLOCK_PROGRAM, TABLE, JOB, PROOF)
"""Every file that a package may have, in the order in which they are written."""


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
    def blank(self) -> Blank:
        """What sheet to cut, and what becomes of it [mm, kg]."""
        return blank_of(self.chain)

    @cached_property
    def forming_arcs(self) -> ArcFit:
        """The fewest tangent arcs for the forming surface, in the mould frame [mm]."""
        return self._fewest_arcs(self.mould.curve)

    def _fewest_arcs(self, curve: Meridian, fit: Callable[..., ArcFit] = fewest_arcs) -> ArcFit:
        distance = fit_distance(self.tolerance, self.job.units)
        return fit(curve, distance=distance, slope=(1.0 - 1e-6) * self.slope_tolerance)

    @cached_property
    def exact_solid(self) -> DrilledSolid:
        """The mould as an exact solid with its holes, base plane at height 0 [mm]."""
        return drilled_mould(self.chain, fit=FITTED * self.tolerance)

    @cached_property
    def mesh(self) -> Mesh:
        """The mould as triangles within tolerance of the exact solid [mm]."""
        return drilled_mesh(self.exact_solid, chord_error=self.tolerance)

    @cached_property
    def turning_plan(self) -> TurningPlan:
        """The turning program, for a job that asks for one."""
        return plan_turning(self.job, self.mould, self.forming_arcs.path)

    @cached_property
    def stock_fit(self) -> StockFit:
        """Size and mass of stock and mould, for a job that asks for a turning program [mm, kg]."""
        return stock_fit(self.job, self.mould, self.exact_solid.volume)

    @cached_property
    def follow_block(self) -> FollowBlock:
        """The follow block and the sheet under it [mm], for a job that asks for one."""
        return follow_block_of(self.chain)

    @cached_property
    def block_arcs(self) -> ArcFit:
        """The fewest tangent arcs for the face of the follow block, in its mould frame [mm]."""
        return self._fewest_arcs(self.follow_block.body.curve, self._block_fit)

    @cached_property
    def block_plan(self) -> TurningPlan:
        """The turning program of the follow block, for a job that asks for one."""
        job, body = turned_job(self.job), self.follow_block.body
        try:
            return plan_turning(job, body, self.block_arcs.path, part="follow block", fit=self._block_fit)
        except JobError as error:
            raise JobError(f"follow_block.program: value is true, and for the block {error}") from error

    @property
    def _block_fit(self) -> Callable[..., ArcFit]:
        return partial(fewest_arcs_around, around=self.follow_block.around)

    @property
    def turns_block(self) -> bool:
        """Whether the job asks for a turning program of a follow block."""
        return self.job.follow_block is not None and self.job.follow_block.program

    @property
    def file_names(self) -> tuple[str, ...]:
        """The files of its work package that can be proved, in the order in which they are written."""
        wanted = {
            PROGRAM: self.job.turning is not None,
            BLOCK_DRAWING: self.job.follow_block is not None,
            BLOCK_PROGRAM: self.turns_block,
        }
        return tuple(name for name in EVERY_FILE if name != PROOF and wanted.get(name, True))
