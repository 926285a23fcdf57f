"""What a picture shows of a work package: its drawing, its turning program and its proof, read back from the files.

Everything is in millimetres and in the lathe frame (radius, Z). Paths of the program are those of the nose centre.
"""

from __future__ import annotations

import json
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from fabricate.drawing import MOULD_BODY, MOULD_CURVE, REFLECTING_FACE, from_drawing
from fabricate.order import DRAWING, PROGRAM, PROOF, Order
from fabricate.passes import FINISHING
from fabricate.turning_setup import Setup, Stock, dialect_of
from outputs.dxf import Drawing, read_drawing
from outputs.gcode_reader import Move, read_program
from outputs.text_file import read_text
from profiles.arcpath import ArcPath
from profiles.errors import FormatError

_AGAIN = "do: make the package again"
_SAME_LINE = 6


@dataclass(frozen=True, eq=False)
class ReadProgram:
    """A turning program as its control would run it, for the nose centre.

    Parameters
    ----------
    finishing : ArcPath
        The finishing pass over the forming surface [mm].
    cuts : tuple of ArcPath
        Every other cut, one line or arc each [mm].
    rapids : tuple of ArcPath
        The rapids, those that run along one another joined [mm].
    stock : Stock
        What is in the lathe at the start [mm].
    nose : float
        Radius of the insert's nose [mm].
    """

    finishing: ArcPath
    cuts: tuple[ArcPath, ...]
    rapids: tuple[ArcPath, ...]
    stock: Stock
    nose: float


@dataclass(frozen=True, eq=False)
class ReadPackage:
    """The files of a package that a picture shows.

    Parameters
    ----------
    curve, body, face : ArcPath
        Layers of the drawing: forming surface, closed half section and released reflecting face [mm].
    program : ReadProgram or None
        The turning program; None for a job without one.
    deviations : mapping of str to float
        For drawing and program the largest distance from the exact mould curve, as the proof states it [mm].
    """

    curve: ArcPath
    body: ArcPath
    face: ArcPath
    program: ReadProgram | None
    deviations: dict[str, float]


def read_package(order: Order, folder: Path) -> ReadPackage:
    """Read back what a picture shows of a package.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    folder : Path
        Its work package.

    Returns
    -------
    ReadPackage
        Lines of the drawing and of the program, and the deviations that the proof states [mm].

    Raises
    ------
    FormatError
        If a file is missing, cannot be read, or does not hold what it should.
    """
    drawing = read_drawing(folder / DRAWING)
    turned = order.job.turning is not None
    names = (DRAWING, PROGRAM) if turned else (DRAWING,)
    return ReadPackage(
        curve=_layer(drawing, MOULD_CURVE, folder / DRAWING),
        body=_layer(drawing, MOULD_BODY, folder / DRAWING),
        face=_layer(drawing, REFLECTING_FACE, folder / DRAWING),
        program=_program(order, folder / PROGRAM) if turned else None,
        deviations=_deviations(folder / PROOF, names),
    )


def _layer(drawing: Drawing, name: str, path: Path) -> ArcPath:
    """Return the one path of a layer."""
    paths = drawing.layers.get(name, ())
    if len(paths) != 1:
        raise FormatError(f"{path}: layer {name} holds {len(paths)} paths; allowed: 1; {_AGAIN}")
    return from_drawing(paths[0], drawing.units)


def _program(order: Order, path: Path) -> ReadProgram:
    replay = read_program(read_text(path), dialect_of(order.job))
    setup = Setup.of(order.job, order.mould)
    across, along = setup.control_shift

    def of_nose(path: ArcPath) -> ArcPath:
        return path.scaled(setup.unit).moved(across=-across, along=-along)

    moves = [(move, of_nose(_path(move))) for move in replay.moves if move.start not in {None, move.end}]
    return ReadProgram(
        finishing=of_nose(replay.section(FINISHING)),
        cuts=tuple(path for move, path in moves if move.kind == "feed" and move.section != FINISHING),
        rapids=_joined(path for move, path in moves if move.kind == "rapid"),
        stock=setup.stock,
        nose=setup.nose,
    )


def _path(move: Move) -> ArcPath:
    return ArcPath(np.array([move.start, move.end]), np.array([move.bulge]))


def _joined(lines: Iterable[ArcPath]) -> tuple[ArcPath, ...]:
    """Return lines with those along one axis joined where they overlap, so that dashes stay dashes."""
    joined: list[ArcPath] = []
    rows: dict[tuple[int, float], list[tuple[float, float]]] = {}
    for line in lines:
        reach = np.ptp(line.vertices, axis=0)
        if reach.min() > 10.0**-_SAME_LINE:
            joined.append(line)
            continue
        axis = int(np.argmax(reach))
        low, high = np.sort(line.vertices[:, axis]).tolist()
        rows.setdefault((axis, round(float(line.vertices[0, 1 - axis]), _SAME_LINE)), []).append((low, high))
    for (axis, across), spans in rows.items():
        for low, high in _united(spans):
            ends = np.array([[low, across], [high, across]])
            joined.append(ArcPath(ends if axis == 0 else ends[:, ::-1], np.zeros(1)))
    return tuple(joined)


def _united(spans: list[tuple[float, float]]) -> list[tuple[float, float]]:
    """Return intervals without overlaps, in order."""
    united: list[tuple[float, float]] = []
    for low, high in sorted(spans):
        if united and low <= united[-1][1] + 10.0**-_SAME_LINE:
            united[-1] = (united[-1][0], max(high, united[-1][1]))
        else:
            united.append((low, high))
    return united


def _deviations(path: Path, names: tuple[str, ...]) -> dict[str, float]:
    """Return the deviations of some files as a proof states them."""
    text = read_text(path)
    try:
        files = json.loads(text)["files"]
        return {name: float(files[name]["normal_mm"]) for name in names}
    except (KeyError, TypeError, ValueError) as error:
        raise FormatError(
            f"{path}: does not state the deviation of {' and '.join(names)} ({error!r}); allowed: the proof of a whole "
            f"package; {_AGAIN}"
        ) from error
