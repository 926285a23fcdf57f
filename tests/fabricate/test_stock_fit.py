from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from fabricate.job import parse_job
from fabricate.make import make_package
from fabricate.order import Order
from fabricate.roughness import rt_for_feed
from profiles.errors import JobError

HEATER = (Path(__file__).parents[2] / "fabricate" / "demo" / "terrace-heater.toml").read_text(encoding="utf-8")


def _order(text: str) -> Order:
    return Order(parse_job(text, name="job.toml"))


def test_stock_and_mould_weigh_what_their_volume_and_density_say() -> None:
    order = _order(HEATER)
    fit, row = order.stock_fit, order.job.mould.row
    assert row is not None
    assert fit.stock_mass == pytest.approx(1e-9 * row.density_kg_m3 * np.pi / 4.0 * fit.diameter**2 * fit.length)
    assert fit.mould_mass == pytest.approx(1e-9 * row.density_kg_m3 * order.exact_solid.volume)
    assert fit.mould_mass < fit.stock_mass


@pytest.mark.parametrize(
    ("machine", "message"),
    [
        ("swing = 400.0", "machine.swing: value is 400.000 mm, and the stock is .* mm wide"),
        ("largest_mass_kg = 2.0", "machine.largest_mass_kg: value is 2 kg, and the stock weighs"),
    ],
)
def test_stock_that_does_not_fit_is_refused_and_nothing_written(machine: str, message: str, tmp_path: Path) -> None:
    with pytest.raises(JobError, match=message):
        make_package(_order(f"{HEATER}\n[machine]\n{machine}\n"), tmp_path / "package")
    assert not (tmp_path / "package").exists()


@pytest.mark.parametrize(
    ("machine", "message"),
    [
        ("highest_speed = 150.0", "turning.spindle_limit: value is .* at most machine.highest_speed, 150"),
        ("lowest_speed = 900.0", "turning.spindle_limit: value is .* at least machine.lowest_speed, 900"),
        ("lowest_speed = 900.0\nhighest_speed = 800.0", "machine.lowest_speed: value is 900"),
    ],
)
def test_a_spindle_limit_that_the_lathe_cannot_turn_at_is_refused(machine: str, message: str) -> None:
    with pytest.raises(JobError, match=message):
        parse_job(f"{HEATER}\n[machine]\n{machine}\n", name="job.toml")


def _rough(lines: str) -> str:
    kept = [line for line in HEATER.splitlines() if not line.startswith(("nose_radius", "finishing_feed"))]
    return "\n".join(kept).replace("[turning]\n", f"[turning]\n{lines}\n") + "\n"


def test_the_finishing_feed_follows_from_the_roughness_asked_for() -> None:
    job = parse_job(_rough("roughness_rt_um = 3.2"), name="job.toml")
    assert job.turning is not None
    left = 1e3 * rt_for_feed(job.turning.finishing_feed, job.turning.nose_radius)
    assert 3.19 < left <= 3.2
    # The job as understood states both, which agree.
    assert parse_job(Order(job).text, name="job.toml") == job


@pytest.mark.parametrize(
    ("lines", "message"),
    [
        ("roughness_rt_um = 3.2\nroughness_ra_um = 0.8", "turning.roughness_ra_um: .*one of the two"),
        ("roughness_rt_um = 3.2\nfinishing_feed = 0.2", "turning.finishing_feed: value is 0.2 mm and roughness_rt_um"),
        ("roughness_rt_um = 500.0\nnose_radius = 0.4", "turning.roughness_rt_um: .*cusps under 12.5 um"),
    ],
)
def test_a_roughness_that_contradicts_is_refused(lines: str, message: str) -> None:
    with pytest.raises(JobError, match=message):
        parse_job(_rough(lines), name="job.toml")
