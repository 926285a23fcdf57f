"""The proof of the mould solid: facets read back, their closure, and how far they stray from the exact solid."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from fabricate.order import Order
from fabricate.solid import FITTED
from fabricate.verdict import FileVerdict
from outputs.stl import read_stl
from profiles.mesh_deviation import mesh_deviation


def prove_solid(path: Path, order: Order) -> FileVerdict:
    """Read a mould solid back and measure it.

    Parameters
    ----------
    path : Path
        The solid.
    order : Order
        The job and its exact geometry.

    Returns
    -------
    FileVerdict
        Deviation of the forming surface's facets [mm, mrad], and everything that is wrong with the mesh.

    Raises
    ------
    FormatError
        If the file cannot be read.
    """
    facets = read_stl(path)
    # Arcs stand for the forming surface beyond a trim line, and take their share of the tolerance.
    allowed = order.tolerance * (1.0 if order.mould.trim_line is None else 1.0 - FITTED)
    found = mesh_deviation(order.exact_solid, facets.corners, facets.normals, chord_error=allowed)
    findings = tuple(sentence for _, sentence in found.findings)
    if not np.isfinite([found.normal, found.slope]).all():
        return FileVerdict(None, None, None, order.tolerance, findings)
    return FileVerdict(found.normal, 1e3 * found.slope, found.at_radius, order.tolerance, findings)
