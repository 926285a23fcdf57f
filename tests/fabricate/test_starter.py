from __future__ import annotations

import re
import tomllib

import pytest

from fabricate.job import parse_job
from fabricate.job_findings import all_keys
from fabricate.starter import JobValue, starter_gaps, starter_text
from profiles.errors import JobError

SPUN: dict[str, JobValue] = {
    "title": "Harbour lamp 300",
    "units": "mm",
    "reflector.focal_length": 90.0,
    "reflector.rim_diameter": 300.0,
    "reflector.reflecting_face": "concave",
    "sheet.material": "aluminium 1050-O",
    "sheet.thickness": 1.0,
    "forming.process": "spinning",
    "forming.contact_face": "concave",
    "forming.springback.law": "focal-length",
    "forming.springback.percent": 1.8,
    "forming.thinning.law": "none",
    "forming.shrinkage.percent": 0.0,
    "tolerance.files.chord_error": 0.005,
}
TURNED: dict[str, JobValue] = {
    "mould.material": "maple",
    "turning.spindle_direction": "M3",
    "turning.spindle_limit_untrued": 200,
    "turning.spindle_limit": 600,
    "turning.rim_speed_limit": 15.0,
    "turning.control.x_word": "diameter",
    "turning.control.plane_word": "G18",
    "turning.control.units_word": "G21",
    "turning.control.absolute_word": "none",
    "turning.control.feed_per_rev_word": "G99",
    "turning.control.spindle_limit_word": "G50",
    "turning.control.arcs": "centre",
    "turning.control.decimals": 4,
}

OPTIONAL = (
    "sheet.properties",
    "mould.lead_out",
    "mould.hub",
    "mould.air_holes",
    "mould.bolts",
    "follow_block",
    "turning",
    "machine",
)


def without(given: dict[str, JobValue], *keys: str) -> dict[str, JobValue]:
    return {key: value for key, value in given.items() if key not in keys}


@pytest.mark.parametrize(
    "given",
    [
        SPUN,
        SPUN | TURNED,
        without(SPUN, "reflector.focal_length") | {"reflector.depth": 62.5},
        without(SPUN, "sheet.thickness") | {"sheet.gauge": 18, "sheet.gauge_system": "AWG"},
        without(SPUN, "forming.springback.percent") | {"forming.springback.depth_loss": 1.5},
        without(SPUN, "forming.springback.percent") | {"forming.springback.law": "none"},
        without(SPUN, "forming.springback.percent")
        | {"forming.springback.law": "bending", "forming.springback.flow_stress_mpa": 90.0},
        SPUN | {"forming.thinning.law": "stations", "forming.thinning.stations": [[0.0, 1.0], [150.0, 0.9]]},
        SPUN
        | {
            "sheet.material": "yard sheet",
            "sheet.properties.youngs_modulus_mpa": 70000.0,
            "sheet.properties.poisson": 0.33,
            "sheet.properties.yield_mpa": 40.0,
            "sheet.properties.density_kg_m3": 2700.0,
        },
    ],
)
def test_with_everything_in_hand_the_starter_is_a_job(given: dict[str, JobValue]) -> None:
    assert starter_gaps(given) == ()
    job = parse_job(starter_text(given), name="starter.toml")
    data = job.model_dump()
    for key, value in given.items():
        *path, name = key.split(".")
        table = data
        for part in path:
            table = table[part]
        stated = tuple(map(tuple, value)) if isinstance(value, list) else value  # type: ignore[arg-type]
        assert table[name] == stated, key


@pytest.mark.parametrize("key", [key for key in SPUN | TURNED if key != "mould.material"])
def test_what_is_not_in_hand_is_marked_and_then_refused_by_name(key: str) -> None:
    given = without(SPUN | TURNED, key)
    if key == "forming.shrinkage.percent":
        given |= {"sheet.material": "PETG", "mould.material": "steel"}
    assert key in starter_gaps(given)
    name = key.rpartition(".")[2]
    assert re.search(rf"^# {name} =  # <-- to be stated$", starter_text(given), re.MULTILINE)
    with pytest.raises(JobError, match=rf"starter\.toml: {re.escape(key)}: value is"):
        parse_job(starter_text(given), name="starter.toml")


def test_a_metal_needs_no_shrinkage() -> None:
    given = without(SPUN, "forming.shrinkage.percent")
    assert starter_gaps(given) == ()
    assert parse_job(starter_text(given), name="starter.toml").forming.shrinkage.percent == 0.0


def test_nothing_in_hand_gives_a_file_that_is_refused_key_by_key() -> None:
    text = starter_text({})
    with pytest.raises(JobError, match="units: value is missing") as caught:
        parse_job(text, name="starter.toml")
    refused = {line.split(": ")[1] for line in str(caught.value).splitlines()}
    # The shrinkage is asked for only once the sheet is known to be a plastic.
    assert refused == set(starter_gaps({})) - {"forming.shrinkage.percent"}


def test_no_length_is_written_before_the_units_are_in_hand() -> None:
    data = tomllib.loads(starter_text(without(SPUN, "units")))
    assert "trim_allowance" not in data["forming"]
    assert "body_height" not in data["mould"]
    assert data["reflector"]["conic_constant"] == -1.0


def test_defaults_of_an_inch_job_are_inches() -> None:
    given = SPUN | {"units": "inch", "reflector.focal_length": 3.5, "reflector.rim_diameter": 12.0}
    given |= {"sheet.thickness": 0.04, "tolerance.files.chord_error": 0.0002}
    job = parse_job(starter_text(given), name="starter.toml")
    assert job.forming.trim_allowance == pytest.approx(8.0 / 25.4, rel=5e-3)
    assert job.mould.body_height == pytest.approx(40.0 / 25.4, rel=5e-3)


@pytest.mark.parametrize("units", ["mm", "inch"])
def test_every_key_stands_there_with_its_meaning_and_what_is_allowed(units: str) -> None:
    text = starter_text({"units": units}, tables=OPTIONAL)
    names = [key.rpartition(".")[2] for key in all_keys()]
    comments = re.findall(
        r"^# (\w+): .+?\.(?: |\n# )Allowed:(?: |\n# ).+?\.\n(?:# )?\1 =", text, re.MULTILINE | re.DOTALL
    )
    assert comments == names


def test_without_turning_the_starter_says_what_that_means() -> None:
    assert "Without a [turning] table no turning program is written." in starter_text(SPUN)
    assert "[turning]\n" not in starter_text(SPUN)


def test_turning_is_laid_out_on_demand_and_every_word_is_left_to_the_shop() -> None:
    gaps = starter_gaps(SPUN, tables=("turning",))
    assert [gap for gap in gaps if gap.startswith("turning.control.")] == [
        f"turning.control.{name}"
        for name in (
            *("x_word", "plane_word", "units_word", "absolute_word"),
            *("feed_per_rev_word", "spindle_limit_word", "arcs", "decimals"),
        )
    ]


def test_a_mistyped_key_is_refused_with_the_nearest() -> None:
    with pytest.raises(
        JobError, match=r"reflector\.focal: unknown key, its value is 3; allowed: reflector\.focal_length"
    ):
        starter_text({"reflector.focal": 3})


def test_tables_that_may_be_added_are_named_until_a_key_opens_them() -> None:
    assert "# [mould.hub]  flat pad at the centre" in starter_text(SPUN)
    opened = starter_text(SPUN | {"mould.hub.diameter": 30.0})
    assert "[mould.hub]\n" in opened
    assert "# [mould.hub]" not in opened
    assert "# [mould.bolts]" in opened
