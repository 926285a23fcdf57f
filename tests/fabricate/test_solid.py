from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import shapely

import fabricate
from fabricate.job import parse_job
from fabricate.order import Order

DEMO = (Path(fabricate.__file__).parent / "demo" / "terrace-heater.toml").read_text(encoding="utf-8")
SHARES = np.array([[1, 0, 0], [0.5, 0.5, 0], [0, 0.5, 0.5], [0.5, 0, 0.5], [1 / 3, 1 / 3, 1 / 3], [0.25, 0.75, 0]])


@pytest.mark.parametrize(
    "mould",
    [
        "body_height = 40.0",
        "body_height = 40.0\nbore_diameter = 12.0",
        "body_height = 40.0\nspigot_diameter = 60.0\nspigot_length = 10.0\nbore_diameter = 30.0",
    ],
    ids=["plain", "bored", "spigot"],
)
@pytest.mark.parametrize("edge", ["3.0", "0.0"])
def test_no_point_of_the_mesh_is_farther_from_the_solid_than_allowed(mould: str, edge: str) -> None:
    # Against the half section itself, corners and all, and not against surfaces continued past their ends.
    text = DEMO[: DEMO.index("[turning]")].replace("chord_error = 0.005", "chord_error = 0.02")
    text = text.replace("body_height = 40.0", mould).replace("edge_radius = 3.0", f"edge_radius = {edge}")
    order = Order(parse_job(text, name="solid.toml"))
    curve, rest = order.exact_solid.curve, order.exact_solid.rest
    section = np.vstack([curve.points(np.linspace(curve.start, curve.end, 20001)), rest.points(sagitta=1e-5)[1:]])
    points = np.einsum("kw,nwd->nkd", SHARES, order.mesh.corners).reshape(-1, 3)
    stretches = shapely.STRtree(shapely.linestrings(np.stack([section[:-1], section[1:]], axis=1)))
    places = shapely.points(np.hypot(points[:, 0], points[:, 1]), points[:, 2])
    _, away = stretches.query_nearest(places, return_distance=True, all_matches=False)
    assert len(away) == len(places)
    assert away.max() <= 0.02


def test_the_base_is_the_plane_of_height_0() -> None:
    order = Order(parse_job(DEMO, name="solid.toml"))
    assert order.mesh.vertices[:, 2].min() == 0.0
