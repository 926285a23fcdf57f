"""The proof of a work package: every written file read back and measured against the job's exact mould curve.

*Proved* means that the files match the mould curve of the stated model, with the digits that were written. It says
nothing about the part: springback and thickness are what the job states.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from importlib.metadata import version
from pathlib import Path
from typing import Any

from fabricate.order import BLOCK_DRAWING, BLOCK_PROGRAM, DRAWING, JOB, PROGRAM, PROOF, SOLID, TABLE, Order
from fabricate.prove_drawing import prove_drawing
from fabricate.prove_follow_block import prove_block_drawing, prove_block_program
from fabricate.prove_papers import prove_job, prove_proof, prove_table
from fabricate.prove_program import prove_program
from fabricate.prove_solid import prove_solid
from fabricate.verdict import FileVerdict, unreadable
from profiles.errors import FormatError, GeometryError, WriteError


@dataclass(frozen=True)
class Proof:
    """What was found of each file of a package.

    Parameters
    ----------
    job_sha256 : str
        Hash of the package's job file.
    files : mapping of str to FileVerdict
        By file name.
    """

    job_sha256: str
    files: Mapping[str, FileVerdict]

    @property
    def passed(self) -> bool:
        """Whether every file is within tolerance."""
        return all(verdict.passed for verdict in self.files.values())

    def as_json(self) -> dict[str, Any]:
        """Return the proof as plain values, in the form of ``proof.json``.

        Returns
        -------
        dict
            ``version``, ``job_sha256``, ``passed`` and ``files``.
        """
        return {
            "version": version("dishwright"),
            "job_sha256": self.job_sha256,
            "passed": self.passed,
            "files": {name: verdict.as_json() for name, verdict in self.files.items()},
        }


PROVERS: Mapping[str, Callable[[Path, Order], FileVerdict]] = {
    DRAWING: prove_drawing,
    SOLID: prove_solid,
    PROGRAM: prove_program,
    BLOCK_DRAWING: prove_block_drawing,
    BLOCK_PROGRAM: prove_block_program,
    TABLE: prove_table,
    JOB: prove_job,
    PROOF: prove_proof,
}


def prove_files(order: Order, folder: Path) -> Proof:
    """Read back and measure the files that a package is made of, its own proof apart.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    folder : Path
        Where the files are.

    Returns
    -------
    Proof
        A verdict for each file; a missing or unreadable one has failed.
    """
    return _proof(order, folder, order.file_names)


def prove_package(order: Order, folder: Path) -> Proof:
    """Read back and measure every file of a finished package, its own proof included.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    folder : Path
        The package.

    Returns
    -------
    Proof
        A verdict for each file. A turning program or a follow block's file in the package of a job that asks for none
        has failed.

    Raises
    ------
    JobError, GeometryError
        If the job cannot be made.
    WriteError
        If there is no such folder.
    """
    if not folder.is_dir():
        raise WriteError(f"{folder}: no such folder; allowed: the folder of a work package; do: check the name")
    _ = order.exact_solid  # what the job itself is refused for is no fault of a file
    optional = [name for name in (PROGRAM, BLOCK_DRAWING, BLOCK_PROGRAM) if name not in order.file_names]
    stray = [name for name in optional if (folder / name).exists()]
    return _proof(order, folder, (*order.file_names, *stray, PROOF))


def _proof(order: Order, folder: Path, names: tuple[str, ...]) -> Proof:
    return Proof(order.sha256, {name: _verdict(folder / name, order) for name in names})


def _verdict(path: Path, order: Order) -> FileVerdict:
    try:
        return PROVERS[path.name](path, order)
    except (FormatError, GeometryError) as error:
        return unreadable(order.tolerance, str(error))
