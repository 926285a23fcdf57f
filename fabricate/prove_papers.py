"""The proof of the papers of a package: its sag table, its job file and its own earlier proof."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from fabricate.inspection import sag_columns, sag_table
from fabricate.job import job_hash, parse_job
from fabricate.order import JOB, Order
from fabricate.verdict import FileVerdict, measured, unreadable
from outputs.table import Column, read_table
from outputs.text_file import read_text
from profiles.deviation import Deviation
from profiles.errors import FormatError, JobError

Array = NDArray[np.float64]

READING = "reading"


def prove_table(path: Path, order: Order) -> FileVerdict:
    """Read a sag table back and compare every column; readings may have been filled in since.

    Parameters
    ----------
    path : Path
        The table.
    order : Order
        The job and its exact geometry.

    Returns
    -------
    FileVerdict
        Largest departure of the sag along the normal and of the slope [mm, mrad].

    Raises
    ------
    FormatError
        If the table cannot be read, or a column, a row or a number is missing.
    """
    found = read_table(path)
    count = len(next(iter(found.values())))
    if count < 2:
        raise FormatError(f"{path}: holds {count} stations; allowed: 2 or more; do: make the package again")
    table = sag_table(order.chain, order.job.units, stations=count)
    columns = sag_columns(table, _package_hash(path, order), order.tolerance)
    gaps = {column.name: _gaps(found, column, path) for column in columns}
    wrong = tuple(_column_findings(columns, gaps))
    unit = columns[1].name.removeprefix("radius")
    lean = np.radians(table.slope_deg)
    sag = gaps[f"part_sag{unit}"] * np.cos(lean) * order.unit
    if not (np.isfinite(sag).all() and np.isfinite(gaps["slope_deg"]).all()):
        return unreadable(order.tolerance, *wrong)
    worst, steepest = int(np.argmax(sag)), int(np.argmax(gaps["slope_deg"]))
    largest = Deviation(
        float(sag[worst]),
        float(table.radius[worst]) * order.unit,
        float(np.radians(gaps["slope_deg"][steepest])),
        float(table.radius[steepest]) * order.unit,
    )
    return measured(largest, order.tolerance, 0.0, wrong)


def _package_hash(table: Path, order: Order) -> str:
    """Return the hash of the job file beside a table, which may be of an earlier version; without one, the job's."""
    try:
        return job_hash(read_text(table.with_name(JOB)))
    except FormatError:
        return order.sha256


def _column_findings(columns: tuple[Column, ...], gaps: Mapping[str, Array]) -> Iterator[str]:
    for column in columns:
        gap = gaps[column.name].max()
        if column.is_text and gap > 0.0:
            yield f"column {column.name} is not {column.values[0]} throughout, as the job asks"
        elif gap > 0.51 * 10.0**-column.decimals:
            said = f"differs from the job by {gap:.6g}" if np.isfinite(gap) else "has a cell that is no number"
            yield f"column {column.name} {said}"


def _gaps(found: Mapping[str, tuple[str, ...]], column: Column, path: Path) -> Array:
    """Return how far each value of a column is from what it should be: infinite for an unequal text, 0 for readings."""
    if column.name not in found:
        raise FormatError(
            f"{path}: has no column {column.name}; allowed: the columns of a sag table; do: make it again"
        )
    if column.name.startswith(READING):
        return np.zeros(len(column.values))
    pairs = zip(found[column.name], column.values, strict=True)
    return np.array([_gap(typed, wanted) for typed, wanted in pairs])


def _gap(typed: str, wanted: float | str | None) -> float:
    if wanted is None or isinstance(wanted, str):
        return 0.0 if typed == (wanted or "") else np.inf
    try:
        gap = abs(float(typed) - wanted)
    except ValueError:
        return np.inf
    return gap if np.isfinite(gap) else np.inf


def prove_job(path: Path, order: Order) -> FileVerdict:
    """Read a package's job file back and compare it with the job, key by key.

    Parameters
    ----------
    path : Path
        The job file.
    order : Order
        The job and its exact geometry.

    Returns
    -------
    FileVerdict
        No departure, or the finding that it is another job.

    Raises
    ------
    FormatError
        If the file cannot be read, or is no job.
    """
    try:
        same = parse_job(read_text(path), name=str(path)) == order.job
    except JobError as error:
        raise FormatError(str(error)) from error
    others = () if same else ("is another job than the one that was asked for: prove it against its own job file",)
    return FileVerdict(0.0, 0.0, 0.0, order.tolerance, others)


def prove_proof(path: Path, order: Order) -> FileVerdict:
    """Read a package's own proof back: it must be of this job file and have passed.

    Parameters
    ----------
    path : Path
        The proof.
    order : Order
        The job and its exact geometry.

    Returns
    -------
    FileVerdict
        No departure, or what is wrong.

    Raises
    ------
    FormatError
        If the file cannot be read or is no proof.
    """
    stated = _stated(path)
    others = []
    files = stated.get("files")
    verdicts = files if isinstance(files, dict) else {}
    passed = [name for name, said in verdicts.items() if isinstance(said, dict) and said.get("passed") is True]
    if stated.get("passed") is not True or not set(order.file_names) <= set(passed) or len(passed) < len(verdicts):
        others.append("does not say of every file and of the package that it has passed")
    if stated.get("job_sha256") != job_hash(read_text(path.with_name(JOB))):
        others.append(f"is of another {JOB} than the one that stands beside it")
    return FileVerdict(0.0, 0.0, 0.0, order.tolerance, tuple(others))


def _stated(path: Path) -> Mapping[str, Any]:
    text = read_text(path)
    try:
        stated = json.loads(text)
    except (ValueError, RecursionError) as error:
        raise FormatError(f"{path}: is not JSON: {error}; allowed: a proof; do: make the package again") from error
    if not isinstance(stated, dict):
        raise FormatError(f"{path}: is no JSON object; allowed: a proof; do: make the package again")
    return stated
