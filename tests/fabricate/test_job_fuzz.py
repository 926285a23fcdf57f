"""Twenty thousand damaged job files: each is read or refused in words, and nothing else ever happens."""

from __future__ import annotations

import random
import re
from importlib.resources import files

import pytest

from fabricate.job import Job, job_text, parse_job, questions
from profiles.errors import JobError

DEMOS = {
    name: files("fabricate").joinpath(f"demo/{name}.toml").read_text(encoding="utf-8")
    for name in ("lamp", "terrace-heater", "listening-dish", "link-dish", "display-bowl")
}
LINES = [line for text in DEMOS.values() for line in text.splitlines()]
EXTRAS = [
    *("depth = 90.9", "gauge = 18", 'gauge_system = "AWG"', "asphere = [1e-9, -1e-15]", "conic_constant = -0.5"),
    *("stations = [[0.0, 1.0], [200.0, 1.4]]", "depth_loss = 2.0", "rim_slope_loss_deg = 0.5", 'law = "stations"'),
    *('law = "bending"', "flow_stress_mpa = 90.0", "accept_estimate = true", 'reference = "hot-mould"'),
    *("mould_expansion = 2e-5", "temperature_rise = 60.0", "[sheet.properties]", 'kind = "plastic"', 'units = "inch"'),
    *("coating_thickness = -0.2", "spigot_diameter = 30.0", "spigot_length = 12.0", "hole_diameter = 12.0"),
]
VALUES = [
    *("nan", "-inf", "inf", "0", "-0.0", "-1", "1e308", "-1e308", "5e-324", "1e-300", "1_000", "0x10", "9" * 400),
    *('"1,5"', '"1.5"', '""', '"\\u0000"', "true", "false", "[]", "[[]]", "[[1, 2]]", "[1, [2]]", "[[0, 1], [0, 2]]"),
    *("{}", "{a = 1}", "2024-01-01", "12:00:00", "''", '"concave"', '"convex"', '"none"', '"stations"', '"G99"'),
    *('"shear-spinning"', '"straight-vacuum"', '"inch"', '"PLA print"', '"maple"', '"ABS"', "1,5", "", "1e5", "1e-5"),
]
CHARACTERS = "=[]{}\"'#.,\\\n\t 0123456789-+eé\x00\x7f\ud7ff\U0001f600"
NUMBER = re.compile(r"-?\d+(?:\.\d+)?")


def _character(text: str, chance: random.Random) -> str:
    place = chance.randrange(len(text))
    return text[:place] + chance.choice(CHARACTERS) + text[place + chance.randrange(2) :]


def _value(text: str, chance: random.Random) -> str:
    lines = text.split("\n")
    place = chance.randrange(len(lines))
    lines[place] = f"{lines[place].partition('=')[0]}= {chance.choice(VALUES)}"
    return "\n".join(lines)


def _number(text: str, chance: random.Random) -> str:
    match = chance.choice(list(NUMBER.finditer(text)) or [None])
    if match is None:
        return text
    edited = f"{float(match[0]) * chance.choice([-1, 0, 1e-6, 0.1, 0.5, 2, 10, 1e6]):g}"
    return text[: match.start()] + edited + text[match.end() :]


def _swap(text: str, chance: random.Random) -> str:
    lines = text.split("\n")
    one, other = chance.randrange(len(lines)), chance.randrange(len(lines))
    head, _, value = lines[one].partition("=")
    lines[one] = f"{head}={lines[other].partition('=')[2]}"
    lines[other] = f"{lines[other].partition('=')[0]}={value}"
    return "\n".join(lines)


def _delete(text: str, chance: random.Random) -> str:
    lines = text.split("\n")
    del lines[chance.randrange(len(lines))]
    return "\n".join(lines)


def _insert(text: str, chance: random.Random) -> str:
    lines = text.split("\n")
    lines.insert(chance.randrange(len(lines) + 1), chance.choice([*LINES, *EXTRAS, *EXTRAS, *EXTRAS]))
    return "\n".join(lines)


def _read_or_refused(text: str) -> Job | str:
    try:
        return parse_job(text, name="damaged.toml")
    except JobError as error:
        return str(error)


DAMAGES = (_character, _value, _number, _swap, _delete, _insert)


@pytest.mark.parametrize("name", DEMOS)
def test_a_damaged_job_is_read_or_refused_in_words(name: str) -> None:
    chance = random.Random(f"damage {name}")  # noqa: S311 - reproducible on purpose
    read = 0
    for _ in range(4000):
        text = DEMOS[name]
        for _ in range(chance.randint(1, 4)):
            text = chance.choice(DAMAGES)(text, chance) or "x"
        job = _read_or_refused(text)
        if isinstance(job, str):
            assert job.startswith("damaged.toml: ")
            assert "; allowed: " in job
            assert "; do: " in job
            continue
        read += 1
        assert parse_job(job_text(job), name="again.toml") == job
        assert parse_job(job_text(job.in_millimetres()), name="metric.toml").units == "mm"
        assert isinstance(questions(job), tuple)
    assert 100 < read < 3900
