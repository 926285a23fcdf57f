"""Triangles of a mesh against the best there can be, over focal ratio, chord error and where the facets lie.

Run as ``python tests/bench/bench_mesh.py``. The limit N* is ``∫ sqrt(K) dA / ((3√3/2) τ)``, half of it for balanced
facets (L. Fejes Tóth; P. M. Gruber, from memory). Times are of one run each.
"""

from __future__ import annotations

import sys
import time

import numpy as np

from profiles.arcpath import ArcPath
from profiles.face import Face
from profiles.meridian import Meridian
from profiles.mesh_deviation import mesh_deviation
from profiles.revolve import revolve, triangle_limit
from profiles.solids import Solid, turned_over

DIAMETER = 400.0
HEAD = "f/D    chord_mm  facets          N*  forming  ratio    all  deviation  slope_mrad  build_s  proof_s\n"


def chuck(f_over_d: float) -> Solid:
    """Return a male mould of 400 mm with an edge of 3 mm."""
    face = Face(f_over_d * DIAMETER)
    whole = Meridian.of_face(face, DIAMETER)
    curve = Meridian.of_face(face, float(whole.at_radius(0.5 * DIAMETER)))
    slope, depth = float(curve.slope(curve.end)), float(curve.height(curve.end))
    curve = turned_over(curve).raised(depth + 40.0)
    radius = 0.5 * DIAMETER + 3.0 * np.sin(slope)
    land = 40.0 - 3.0 * (1.0 - np.cos(slope))
    vertices = [curve.points(curve.end), (radius, land), (radius, 0.0), (0.0, 0.0), (0.0, 40.0 + depth)]
    return Solid(curve, ArcPath(np.array(vertices), np.array([np.tan(0.25 * slope), 0.0, 0.0, 0.0])))


def main() -> None:
    """Print the table."""
    sys.stdout.write(HEAD)
    for f_over_d in (0.2, 0.275, 0.35, 0.5, 0.8, 1.5):
        solid = chuck(f_over_d)
        for chord_error in (0.05, 0.02, 0.005, 0.002):
            for facets in ("inside", "outside", "balanced"):
                start = time.perf_counter()
                mesh = revolve(solid, chord_error=chord_error, facets=facets)
                built = time.perf_counter()
                found = mesh_deviation(solid, mesh.corners, mesh.normals, chord_error=chord_error)
                proved = time.perf_counter()
                limit = triangle_limit(solid.curve, chord_error=chord_error, facets=facets)
                sys.stdout.write(
                    f"{f_over_d:<6g} {chord_error:<8g}  {facets:<8} {limit:9.0f} {mesh.forming:8d}  "
                    f"{mesh.forming / limit:.3f} {len(mesh.triangles):7d}  {found.normal / chord_error:9.4f}  "
                    f"{1e3 * found.slope:10.2f}  {built - start:7.3f}  {proved - built:7.3f}"
                    f"{'  ' + str(found.findings) if found.findings else ''}\n"
                )


if __name__ == "__main__":
    main()
