"""Making a work package: write every file beside its place, read it back, prove it, and only then move it there."""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from fabricate.drawing import lathe_drawing
from fabricate.follow_block_drawing import block_drawing
from fabricate.inspection import sag_columns, sag_table
from fabricate.notices import notices
from fabricate.order import (
    BLOCK_DRAWING,
    BLOCK_PROGRAM,
    DRAWING,
    EVERY_FILE,
    JOB,
    PROGRAM,
    PROOF,
    SOLID,
    TABLE,
    Order,
)
from fabricate.part_report import forming_json, predicted_parts, prediction_json
from fabricate.predicted import PredictedPart
from fabricate.proof import Proof, prove_files
from outputs.dxf import Drawing, write_drawing
from outputs.gcode import write_program
from outputs.package import staged, write_file
from outputs.stl import write_stl
from outputs.table import read_table, table_text
from profiles.errors import DishwrightError, FormatError


class ProofFailedError(DishwrightError):
    """A written file is not within tolerance; nothing has been moved into place.

    Parameters
    ----------
    proof : Proof
        What was found.
    """

    def __init__(self, proof: Proof) -> None:
        self.proof = proof
        failed = [name for name, verdict in proof.files.items() if not verdict.passed]
        super().__init__(f"the proof of {', '.join(failed)} failed: nothing was moved into place")


@dataclass(frozen=True)
class MadePackage:
    """A work package that stands in its place.

    Parameters
    ----------
    folder : Path
        Where it stands.
    proof : Proof
        What was found when its files were read back.
    parts : mapping of str to PredictedPart
        The part that each written curve leads to, by file name.
    """

    folder: Path
    proof: Proof
    parts: Mapping[str, PredictedPart]


def make_package(order: Order, folder: Path, *, replace: bool = False) -> MadePackage:
    """Write, prove and put in place the work package of a job.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    folder : Path
        Where the package goes: absent, empty, or a package of the same job that nobody has written in since.
    replace : bool
        Put it in the place of anything else too, which is kept beside it.

    Returns
    -------
    MadePackage
        The folder and the proof.

    Raises
    ------
    JobError, GeometryError
        If the job cannot be made; nothing is written.
    ProofFailedError
        If a written file is out of tolerance; nothing is moved into place.
    WriteError
        If the folder cannot be written or holds something else.
    """
    contents = _contents(order)
    with staged(
        folder,
        replace=replace,
        same_package=lambda found: _is_same_package(found, order),
        expendable=lambda found: _is_unfilled(found / TABLE),
        names=EVERY_FILE,
    ) as place:
        for name in order.file_names:
            contents[name](place / name)
        proof = prove_files(order, place)
        if not proof.passed:
            raise ProofFailedError(proof)
        parts = predicted_parts(order, place)
        stated = _stated(order, proof) | {"predicted": prediction_json(order, parts), "forming": forming_json(order)}
        write_file(place / PROOF, json.dumps(stated, indent=1, ensure_ascii=False, allow_nan=False) + "\n")
    return MadePackage(folder, proof, parts)


def _stated(order: Order, proof: Proof) -> dict[str, Any]:
    """Return what ``proof.json`` says: the proof, and what the shop was told or asked when the package was made."""
    return proof.as_json() | {"warnings": list(notices(order))}


def _contents(order: Order) -> Mapping[str, Callable[[Path], None]]:
    """Return what writes each file; everything that a job can be refused for is computed before."""
    job = order.job
    _ = order.blank  # what it is refused for is found before anything is written
    if job.turning is not None:
        _ = order.stock_fit
    drawing = lathe_drawing(order.chain, order.forming_arcs.path, job)
    mesh = order.mesh
    program = order.turning_plan.program if job.turning is not None else None
    table = sag_columns(sag_table(order.chain, job.units), order.sha256, order.tolerance)
    return _block_contents(order) | {
        DRAWING: lambda path: _draw(drawing, path, order),
        SOLID: lambda path: write_stl(mesh.vertices, mesh.triangles, path, label=f"{job.title} mm"),
        PROGRAM: lambda path: write_file(path, write_program(program) if program else ""),
        TABLE: lambda path: write_file(path, table_text(table)),
        JOB: lambda path: write_file(path, order.text),
    }


def _block_contents(order: Order) -> dict[str, Callable[[Path], None]]:
    """Return what writes the files of a follow block, for a job that asks for one."""
    if order.job.follow_block is None:
        return {}
    drawing = block_drawing(order.follow_block, order.block_arcs.path, order.job)
    program = order.block_plan.program if order.turns_block else None
    return {
        BLOCK_DRAWING: lambda path: _draw(drawing, path, order),
        BLOCK_PROGRAM: lambda path: write_file(path, write_program(program) if program else ""),
    }


def _draw(drawing: Drawing, path: Path, order: Order) -> None:
    asked = order.job.drawing
    write_drawing(drawing, path, version=asked.version, entities=asked.entities)


def _is_same_package(folder: Path, order: Order) -> bool:
    """Whether a folder holds a package of the same job and nothing of anybody's own, such as readings."""
    names = (*order.file_names, PROOF)
    strange = [entry for entry in folder.iterdir() if entry.name not in names or not entry.is_file()]
    if strange or not (folder / JOB).is_file():
        return False
    if (folder / JOB).read_bytes() != order.text.encode("utf-8"):
        return False
    return _is_unfilled(folder / TABLE)


def _is_unfilled(table: Path) -> bool:
    """Whether a sag table, where there is one, holds no readings."""
    if not table.exists():
        return True
    try:
        columns = read_table(table)
    except FormatError:
        return False
    return not any(value for name, values in columns.items() if name.startswith("reading") for value in values)
