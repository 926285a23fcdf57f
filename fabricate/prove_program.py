"""The proof of the turning program, as one of the files of a package."""

from __future__ import annotations

from pathlib import Path

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
    proof = prove_turning(read_text(path), order.job, order.mould)
    findings = tuple(sentence for _, sentence in proof.findings)
    if proof.deviation is None:
        return unreadable(order.tolerance, *findings)
    found = proof.deviation
    return FileVerdict(found.normal, 1e3 * found.slope, found.at_radius, order.tolerance, findings)
