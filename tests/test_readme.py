"""The README is true: its commands run as written, its output and its table of keys are what the tool says today.

``python tests/test_readme.py`` writes the output and the table of keys into the README anew.
"""

from __future__ import annotations

import os
import re
import subprocess
import sys
import tempfile
from pathlib import Path

import pytest

from fabricate.job import parse_job
from fabricate.job_findings import allowed_values, inner_table
from fabricate.job_keys import Job
from fabricate.job_table import Table
from fabricate.job_text import toml_value
from fabricate.order import Order

README = Path(__file__).parents[1] / "README.md"
OUTPUT_MARK = re.compile(r"<!-- output of: (?P<command>[^\n]+) -->\n(?:\n```text\n(?P<output>.*?)```\n)?", re.DOTALL)
KEYS_MARK = re.compile(r"<!-- keys of the job file -->\n(?P<keys>.*?)(?=\n## )", re.DOTALL)


def _commands(text: str) -> list[str]:
    """Return the commands of the README, the two that set up apart."""
    return [block.strip() for block in re.findall(r"```sh\n(.*?)```", text, re.DOTALL)][2:]


def _run(command: str, folder: Path) -> str:
    path = os.pathsep.join([str(Path(sys.executable).parent), os.environ["PATH"]])
    done = subprocess.run(
        command,
        shell=True,  # the README's own command, as a reader types it
        cwd=folder,
        env=os.environ | {"PATH": path},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


def _default(table: type[Table], name: str) -> str:
    field = table.model_fields[name]
    if field.is_required():
        return "**required**"
    return "" if field.default is None else f"`{toml_value(field.default)}`"


def _key_tables(table: type[Table], path: str) -> list[str]:
    lines: list[str] = []
    names = list(table.model_fields)
    if path:
        lines += ["", f"### `[{path}]`", "", (table.__doc__ or "").strip().splitlines()[0]]
    rows = [name for name in names if inner_table(table, name) is None]
    if rows:
        lines += ["", "| key | default | allowed | meaning |", "| --- | --- | --- | --- |"]
    for name in rows:
        allowed = allowed_values(f"{path}.{name}".lstrip("."), "mm").replace("|", "\\|")
        lines.append(f"| `{name}` | {_default(table, name)} | {allowed} | {table.model_fields[name].description} |")
    for name in names:
        inner = inner_table(table, name)
        lines += _key_tables(inner, f"{path}.{name}".lstrip(".")) if inner else []
    return lines


def _renewed(text: str) -> str:
    """Return the README with today's output and table of keys."""
    with tempfile.TemporaryDirectory() as folder:
        outputs = {command: _run(command, Path(folder)) for command in _commands(text)}
    text = OUTPUT_MARK.sub(
        lambda found: f"<!-- output of: {found['command']} -->\n\n```text\n{outputs[found['command']]}```\n", text
    )
    keys = "\n".join(_key_tables(Job, ""))
    return KEYS_MARK.sub(lambda _: f"<!-- keys of the job file -->\n{keys}\n", text)


NUMBER = re.compile(r"\d+\.\d+|\d{4,}")


def test_the_readme_says_what_the_tool_says_today() -> None:
    # Other releases of the libraries may end their searches a hair elsewhere: decimals may differ by a few per cent.
    text = README.read_text(encoding="utf-8")
    today = _renewed(text)
    assert NUMBER.sub("0.0", text) == NUMBER.sub("0.0", today)
    stated, found = ([float(number) for number in NUMBER.findall(version)] for version in (text, today))
    assert stated == pytest.approx(found, rel=0.05, abs=1e-4)


def test_the_first_two_commands_are_the_ones_that_are_run_on_a_fresh_machine() -> None:
    blocks = re.findall(r"```sh\n(.*?)```", README.read_text(encoding="utf-8"), re.DOTALL)
    assert "dishwright make" in blocks[0]
    assert all(check in blocks[1] for check in ("ruff check", "ruff format --check", "mypy", "pytest"))


@pytest.mark.parametrize("number", [0, 1])
def test_the_turning_tables_are_read_as_they_stand(number: int) -> None:
    text = README.read_text(encoding="utf-8")
    table = re.findall(r"```toml\n(.*?)```", text, re.DOTALL)[number]
    demo = (README.parent / "fabricate" / "demo" / "terrace-heater.toml").read_text(encoding="utf-8")
    job = parse_job(demo[: demo.index("[turning]")] + table, name="README.md")
    assert job.turning is not None
    assert Order(job).turning_plan.program.blocks


@pytest.mark.parametrize("caution", ["burns and blinds", "single block", "Local codes", "is a knife"])
def test_the_readme_gives_the_cautions_of_the_trade(caution: str) -> None:
    assert caution in README.read_text(encoding="utf-8")


if __name__ == "__main__":
    README.write_text(_renewed(README.read_text(encoding="utf-8")), encoding="utf-8")
