"""Spindle speeds: limits, rim speed, and the steps for controls that cannot hold the cutting speed."""

from __future__ import annotations

import math
import re
from importlib.resources import files

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fabricate.chain import Chain
from fabricate.job import Job, parse_job
from fabricate.speeds import STEP, Limits, limits_of, rim_speed, spindle_speed, stepped
from fabricate.turning_setup import Setup
from outputs.gcode import Feed, Rapid, SpindleSpeed
from profiles.arcpath import ArcPath
from profiles.errors import JobError

BOWL = files("fabricate").joinpath("demo/display-bowl.toml").read_text(encoding="utf-8")
HEATER = files("fabricate").joinpath("demo/terrace-heater.toml").read_text(encoding="utf-8")


def set_up(text: str) -> tuple[Job, Setup]:
    job = parse_job(text, name="job.toml")
    return job, Setup.of(job, Chain(job.in_millimetres()).mould)


MALE, FEMALE = set_up(HEATER), set_up(BOWL)


def test_the_needs_own_figures() -> None:
    """200 m/min at r = 2 mm asks for 15,900 rpm; a 1.2 m chuck at 400 rpm has a rim speed of 25 m/s."""
    assert spindle_speed(2.0, 200.0) == pytest.approx(15_900, rel=2e-3)
    assert rim_speed(600.0, 400.0) == pytest.approx(25.0, rel=6e-3)
    assert spindle_speed(80.0, 60.0 * rim_speed(80.0, 333.0)) == pytest.approx(333.0)


def test_a_metal_mould_is_slowed_to_its_rim_speed_and_says_so() -> None:
    limits = limits_of(*FEMALE)
    assert rim_speed(FEMALE[1].stock.radius, limits.trued) == pytest.approx(15.0)
    assert limits.untrued == 200.0
    assert limits.note == "spindle_limit 800 lowered to 742 rev/min: the stock's rim may run at 15 m/s"
    slow = set_up(BOWL.replace("rim_speed_limit = 15.0", "rim_speed_limit = 3.0"))
    assert limits_of(*slow).untrued == limits_of(*slow).trued < 200.0


def test_no_rim_speed_limit_leaves_a_metal_mould_its_spindle_limit() -> None:
    free = set_up(BOWL.replace("rim_speed_limit = 15.0", "rim_speed_limit = 0.0"))
    assert limits_of(*free) == Limits(200.0, 800.0, 250.0)


@pytest.mark.parametrize("material", ['"MDF laminate"', '"maple"', '"PLA print"', '"tooling board"', '""'])
def test_stock_that_can_fly_apart_is_refused_over_its_rim_speed(material: str) -> None:
    text = BOWL.replace('"aluminium 6061"', material)
    message = f"turning.spindle_limit: value is 800 rev/min, at which the rim of the stock, of {material}"
    if material == '""':
        message = message.replace('""', "unnamed material")
    with pytest.raises(JobError, match=re.escape(message) + ".*runs at 16.17 m/s; allowed: at most 742 rev/min"):
        limits_of(*set_up(text))
    limits_of(*set_up(text.replace("spindle_limit = 800", "spindle_limit = 742")))


def test_a_cutting_speed_that_hardly_turns_the_stock_is_refused() -> None:
    with pytest.raises(JobError, match=r"turning.surface_speed: value is 1 m/min.*allowed: at least 2\.43 m/min"):
        limits_of(*set_up(BOWL.replace("surface_speed = 250.0", "surface_speed = 1.0")))


@given(
    start=st.floats(0.0, 400.0),
    end=st.floats(0.0, 400.0),
    bulge=st.sampled_from([0.0, 0.05, -0.05]),
    speed=st.floats(20.0, 800.0),
    limit=st.floats(50.0, 3000.0),
    shop=st.sampled_from([MALE, FEMALE]),
)
def test_no_point_is_cut_faster_than_the_cutting_speed_nor_much_slower_than_it_may(
    start: float, end: float, bulge: float, speed: float, limit: float, shop: tuple[Job, Setup]
) -> None:
    setup = shop[1]
    cut = Feed(end, -0.4 * abs(end - start) - 1.0, bulge, 0.2)
    blocks = list(stepped([Rapid(start, 0.0), cut], setup, Limits(limit, limit, speed), limit))
    rpm, place = 0.0, (start, 0.0)
    for block in blocks[1:]:
        if isinstance(block, SpindleSpeed):
            rpm = block.rpm
            continue
        assert isinstance(block, Feed)
        widest = max(place[0], block.radius) + (0.0 if setup.male else setup.nose)
        allowed = min(limit, spindle_speed(max(widest, 1e-9), speed))
        assert allowed / STEP / 1.001 <= rpm <= allowed * 1.001
        place = (block.radius, block.height)
    assert place == pytest.approx((cut.radius, cut.height))
    turns = sum(4.0 * math.atan(block.bulge) for block in blocks if isinstance(block, Feed))
    assert turns == pytest.approx(4.0 * math.atan(bulge))


def test_an_arc_in_steps_is_the_same_arc() -> None:
    cut = Feed(300.0, -120.0, -0.1, 0.2)
    blocks = list(stepped([Rapid(0.0, 0.0), cut], MALE[1], Limits(500.0, 500.0, 100.0), 500.0))
    pieces = [block for block in blocks if isinstance(block, Feed)]
    assert len(pieces) > 5
    whole = ArcPath([[0.0, 0.0], [300.0, -120.0]], [-0.1])  # type: ignore[arg-type]
    centre, radius = whole.centres[0], 1.0 / abs(whole.curvatures[0])
    for piece in pieces:
        assert math.dist((piece.radius, piece.height), centre) == pytest.approx(radius)
