"""The proof of the turning program, as one of the files of a package."""

from __future__ import annotations

from pathlib import Path

from fabricate.job_keys import Job
from fabricate.mould import Mould
from fabricate.order import Order
from fabricate.turning_proof import prove_turning
from fabricate.verdict import FileVerdict, unreadable
from outputs.text_file import read_text


def prove_program(path: Path, order: Order) -> FileVerdict:
    """Read a turning program back as its control would, measure the finished surface and replay it on the stock.

    Parameters
    ----------
    path : Path
        The program.
    order : Order
        The job and its exact geometry.

    Returns
    -------
    FileVerdict
        Deviation of the finished surface from the mould curve [mm, mrad], and every fault that was found.

    Raises
    ------
    FormatError
        If the file cannot be read.
    """
    if order.job.turning is None:
        return unreadable(order.tolerance, "stands in the package of a job without a [turning] table: take it out")
    return turned_verdict(path, order.job, order.mould, order.tolerance)


def turned_verdict(path: Path, job: Job, mould: Mould, tolerance: float) -> FileVerdict:
    """Return the verdict on a turning program.

    Parameters
    ----------
    path : Path
        The program.
    job : Job
        The job in its own units, with a ``[turning]`` table.
    mould : Mould
        What it turns [mm].
    tolerance : float
        Largest distance allowed [mm].

    Returns
    -------
    FileVerdict
        Deviation of the finished surface from the exact curve [mm, mrad], and every fault that was found.

    Raises
    ------
    FormatError
        If the file cannot be read.
    """
    proof = prove_turning(read_text(path), job, mould)
    findings = tuple(sentence for _, sentence in proof.findings)
    if proof.deviation is None:
        return unreadable(tolerance, *findings)
    found = proof.deviation
    return FileVerdict(found.normal, 1e3 * found.slope, found.at_radius, tolerance, findings)
