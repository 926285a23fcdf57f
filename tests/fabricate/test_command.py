"""The command as people and other programs call it: results, messages, exit codes, and never a traceback."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import tomllib
from collections.abc import Mapping
from importlib.metadata import version
from importlib.resources import files
from pathlib import Path

import pytest
from typer.testing import CliRunner, Result

from fabricate import command
from fabricate.command import app
from fabricate.inspection import sag_columns, sag_table
from fabricate.job import parse_job
from fabricate.materials import mould_materials, sheet_materials
from fabricate.order import Order
from outputs.table import aligned_text, table_text

LAMP = Path(str(files("fabricate").joinpath("demo/lamp.toml")))
COMMANDS = ("make", "prove", "table", "materials", "new")
SMALL = """
title = "Small dish"
units = "mm"
[reflector]
focal_length = 20.0
rim_diameter = 60.0
reflecting_face = "concave"
[sheet]
material = "aluminium 1050-O"
thickness = 1.0
[forming]
process = "spinning"
contact_face = "concave"
[forming.springback]
law = "none"
[forming.thinning]
law = "none"
[tolerance.files]
chord_error = 0.1
"""


def run(*arguments: object) -> Result:
    """Run the command; whatever is no exit is raised."""
    result = CliRunner().invoke(app, [str(argument) for argument in arguments])
    if result.exception is not None and not isinstance(result.exception, SystemExit):
        raise result.exception
    return result


@pytest.fixture
def job(tmp_path: Path) -> Path:
    """The file of a small job."""
    (tmp_path / "small.toml").write_text(SMALL, encoding="utf-8")
    return tmp_path / "small.toml"


# what every command has


def test_help_names_every_command() -> None:
    for arguments in ([], ["--help"]):
        result = run(*arguments)
        assert all(f"  {name} " in result.stdout + result.stderr for name in COMMANDS)
    assert run("--help").exit_code == 0


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_has_help(name: str) -> None:
    result = run(name, "--help")
    assert result.exit_code == 0
    assert "Usage: " in result.stdout
    assert "--help" in result.stdout


def test_version() -> None:
    result = run("--version")
    assert (result.exit_code, result.stdout) == (0, f"dishwright {version('dishwright')}\n")


@pytest.mark.parametrize(
    "arguments",
    [
        ["polish"],
        ["make", "a", "b"],
        ["make", "--no-such-option"],
        ["prove"],
        ["prove", LAMP],
        ["table"],
        ["table", LAMP, "--stations", "1"],
        ["table", LAMP, "--stations", "1001"],
        ["table", LAMP, "--stations", "many"],
        ["materials", "--use"],
        ["new", "--no-such-option"],
    ],
)
def test_what_cannot_be_parsed_is_refused(arguments: list[object]) -> None:
    result = run(*arguments)
    assert result.exit_code == 2
    assert result.stdout == ""
    assert "Error: " in result.stderr


JOB_FILES: Mapping[str, tuple[bytes | None, str]] = {
    "missing": (None, "no such file; allowed: a job file; do: check the name; `dishwright new` writes a starter job"),
    "binary": (bytes(range(256)), "is not UTF-8 (byte 0x80); allowed: a text file in UTF-8"),
    "no TOML": (b"a job\n", "line 1, column 3: not TOML"),
    "empty": (b"", "title: value is missing"),
    "huge": (b"#" * 1_000_001, "allowed: at most 1000000"),
}


@pytest.mark.parametrize("case", JOB_FILES)
@pytest.mark.parametrize("name", ["make", "prove", "table"])
def test_a_file_that_is_no_job(name: str, case: str, tmp_path: Path) -> None:
    content, said = JOB_FILES[case]
    path = tmp_path / "strange.toml"
    if content is not None:
        path.write_bytes(content)
    result = run(name, path, *{"make": ["-o", tmp_path / "out"], "prove": [tmp_path], "table": []}[name])
    assert result.exit_code == 2
    assert result.stdout == ""
    assert f"{path}: " in result.stderr
    assert said in result.stderr
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize("name", ["make", "prove", "table"])
def test_a_folder_where_a_job_file_belongs(name: str, tmp_path: Path) -> None:
    result = run(name, tmp_path, *([tmp_path] if name == "prove" else []))
    assert result.exit_code == 2
    assert f"{tmp_path}: is a folder; allowed: a job file; do: name the file in it" in result.stderr


# make and prove


def test_a_bare_make_makes_the_demo_job(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    result = run("make")
    assert (result.exit_code, result.stderr) == (0, "")
    assert "Terrace heater 400, revision 1: male mould (chuck)" in result.stdout
    assert "The package is in terrace-heater" in result.stdout
    assert {entry.name for entry in tmp_path.iterdir()} == {"terrace-heater"}
    again = run("prove", command.DEMO, "terrace-heater", "--json")
    assert again.exit_code == 0
    assert json.loads(again.stdout)["passed"] is True


def test_the_folder_is_named_after_the_job(job: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "here").mkdir()
    monkeypatch.chdir(tmp_path / "here")
    result = run("make", job, "--json")
    assert (result.exit_code, result.stderr) == (0, "")
    said = json.loads(result.stdout)
    assert said["folder"] == "small"
    assert said["proof"]["passed"] is True
    assert any("no turning program is written" in warning for warning in said["warnings"])
    proof = run("prove", job, "small", "--json")
    assert {name: verdict["passed"] for name, verdict in json.loads(proof.stdout)["files"].items()} == dict.fromkeys(
        ["lathe-profile.dxf", "mould.stl", "sag-table.csv", "job.toml", "proof.json"], True
    )


def test_what_is_proved_is_never_said_to_be_right(job: Path, tmp_path: Path) -> None:
    said = " ".join(run("make", job, "-o", tmp_path / "out").stdout.split())
    assert "Proved means that the files match the mould curve of the stated model." in said
    assert "measure the first part" in said


def test_json_of_a_refusal_is_no_json(tmp_path: Path) -> None:
    for arguments in (["make", tmp_path / "no.toml", "--json"], ["prove", tmp_path / "no.toml", tmp_path, "--json"]):
        result = run(*arguments)
        assert (result.exit_code, result.stdout) == (2, "")


# table


def test_the_table_for_a_file_or_a_pipe() -> None:
    order = Order(parse_job(LAMP.read_text(encoding="utf-8"), name="lamp.toml"))
    wanted = table_text(sag_columns(sag_table(order.chain, "mm"), order.sha256, order.tolerance))
    for option in ([], ["--csv"]):
        result = run("table", LAMP, *option)
        assert (result.exit_code, result.stdout, result.stderr) == (0, wanted, "")


def test_the_table_at_a_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    order = Order(parse_job(LAMP.read_text(encoding="utf-8"), name="lamp.toml"))
    columns = sag_columns(sag_table(order.chain, "mm", stations=5), order.sha256, order.tolerance)

    class Terminal:
        """A standard output that is a terminal."""

        stdout = type("Screen", (), {"isatty": staticmethod(lambda: True)})

    monkeypatch.setattr(command, "sys", Terminal)
    assert run("table", LAMP, "--stations", 5).stdout == aligned_text(columns)
    assert run("table", LAMP, "--stations", 5, "--csv").stdout == table_text(columns)


@pytest.mark.parametrize("stations", [2, 3, 1000])
def test_the_number_of_stations(stations: int) -> None:
    lines = run("table", LAMP, "--stations", stations).stdout.splitlines()
    assert len(lines) == stations + 1
    assert lines[1].startswith("1,5.0000,")
    assert lines[-1].startswith(f"{stations},30.0000,")


def test_the_table_of_a_job_that_cannot_be_made(job: Path) -> None:
    job.write_text(SMALL.replace("focal_length = 20.0", "focal_length = -1.0"), encoding="utf-8")
    result = run("table", job)
    assert (result.exit_code, result.stdout) == (2, "")
    assert f"{job}: reflector.focal_length: value is -1.0 mm; allowed: " in result.stderr


# materials


def test_every_material_is_listed() -> None:
    text = run("materials").stdout
    for row in (*sheet_materials(), *mould_materials()):
        assert f" {row.name} " in text


@pytest.mark.parametrize("use", ["sheet", "mould"])
def test_materials_for_one_use(use: str) -> None:
    header, *rows = run("materials", "--use", use).stdout.splitlines()
    wanted = {"sheet": sheet_materials(), "mould": mould_materials()}[use]
    assert header.startswith("use ")
    assert len(rows) == len(wanted)
    assert all(row.startswith(f"{use} ") for row in rows)


def test_materials_of_some_kinds() -> None:
    rows = run("materials", "--kind", "wood", "--kind", "print").stdout.splitlines()[1:]
    wanted = {row.name for row in mould_materials() if row.kind in {"wood", "print"}}
    assert len(rows) == len(wanted)
    assert all(any(f" {name} " in row for name in wanted) for row in rows)


def test_materials_with_their_sources() -> None:
    result = run("materials", "--source", "--use", "sheet")
    header, *rows = result.stdout.splitlines()
    assert result.exit_code == 0
    assert header.split() == ["name", "quantity", "value", "unit", "range", "source"]
    assert len(rows) == sum(len(row.values) for row in sheet_materials())


@pytest.mark.parametrize(
    ("option", "word", "allowed"),
    [("--use", "roof", "sheet, mould"), ("--kind", "stone", "metal, plastic, wood, laminate, board, print")],
)
def test_no_such_use_or_kind(option: str, word: str, allowed: str) -> None:
    result = run("materials", option, word)
    assert (result.exit_code, result.stdout) == (2, "")
    assert f'{option}: value is "{word}"; allowed: {allowed}; do: use one of these' in result.stderr


# new

OPTIONS = {
    "--title": "Harbour lamp",
    "--units": "mm",
    "--focal-length": 20,
    "--rim-diameter": 60,
    "--hole-diameter": 8,
    "--reflecting-face": "concave",
    "--material": "aluminium 1050-O",
    "--thickness": 1,
    "--process": "spinning",
    "--contact-face": "concave",
    "--mould-material": "steel",
}
SETTINGS = ["forming.springback.law=none", "forming.thinning.law=none", "tolerance.files.chord_error=0.1"]
TURNING = [
    *("spindle_direction=M3", "spindle_limit_untrued=400", "spindle_limit=1500", "control.x_word=diameter"),
    *("control.plane_word=G18", "control.units_word=G21", "control.absolute_word=none", "control.arcs=centre"),
    *("control.feed_per_rev_word=G99", "control.spindle_limit_word=G50", "control.decimals=4"),
]


def flat(options: Mapping[str, object], settings: list[str]) -> list[object]:
    """Return options and settings as arguments."""
    named = [argument for pair in options.items() for argument in pair]
    return [*named, *(argument for setting in settings for argument in ("--set", setting))]


def test_a_starter_job_with_nothing_in_hand() -> None:
    result = run("new")
    assert result.exit_code == 0
    assert "title" not in tomllib.loads(result.stdout)
    assert "# title =  # <-- to be stated" in result.stdout
    assert result.stderr.startswith("still to be stated: title, units, reflector.focal_length, ")
    assert "[turning]\n" not in result.stdout
    assert "[turning]\n" in run("new", "--turning").stdout


def test_a_starter_job_is_refused_until_it_is_complete(tmp_path: Path) -> None:
    assert run("new", "-o", tmp_path / "job.toml", *flat(OPTIONS, [])).exit_code == 0
    result = run("make", tmp_path / "job.toml", "-o", tmp_path / "out")
    assert result.exit_code == 2
    assert "forming.springback.law: value is missing" in result.stderr


def test_a_starter_job_with_everything_in_hand_is_made(tmp_path: Path) -> None:
    settings = [*SETTINGS, *(f"turning.{setting}" for setting in TURNING)]
    result = run("new", "-o", tmp_path / "job.toml", *flat(OPTIONS, settings))
    assert (result.exit_code, result.stdout) == (0, "")
    assert "still to be stated" not in result.stderr
    said = json.loads(run("make", tmp_path / "job.toml", "-o", tmp_path / "out", "--json").stdout)
    assert said["title"] == "Harbour lamp"
    assert "turning.nc" in said["proof"]["files"]


def test_a_starter_job_by_depth_and_gauge() -> None:
    options = {name: value for name, value in OPTIONS.items() if name not in {"--focal-length", "--thickness"}}
    result = run("new", *flat(options | {"--depth": 11.25, "--gauge": "18", "--gauge-system": "AWG"}, SETTINGS))
    assert (result.exit_code, result.stderr) == (0, "")
    assert parse_job(result.stdout, name="new.toml").reflector.focal_length == pytest.approx(20.0)


BAD_VALUES = {
    "--title": ("two\nlines", "title: value is "),
    "--units": ("furlong", 'units: value is "furlong"; allowed: "mm", "inch"'),
    "--focal-length": ("nan", "reflector.focal_length: value is nan"),
    "--depth": ("shallow", 'reflector.depth: value is "shallow"; allowed: a number from '),
    "--rim-diameter": ("-60", "reflector.rim_diameter: value is -60"),
    "--reflecting-face": ("hollow", 'reflector.reflecting_face: value is "hollow"'),
    "--material": ("tin foil", 'sheet.material: value is "tin foil"'),
    "--thickness": ("inf", "sheet.thickness: value is inf"),
    "--process": ("pressing", 'forming.process: value is "pressing"'),
    "--contact-face": ("both", 'forming.contact_face: value is "both"'),
    "--mould-material": ("butter", 'mould.material: value is "butter"'),
}


@pytest.mark.parametrize("option", [*BAD_VALUES])
def test_a_value_that_is_not_allowed_is_refused_at_once(option: str, tmp_path: Path) -> None:
    value, said = BAD_VALUES[option]
    result = run("new", "-o", tmp_path / "job.toml", *flat(OPTIONS | {option: value}, []))
    if option == "--material":
        # a sheet that the table lacks may be described
        assert result.exit_code == 0
        assert "sheet.properties.density_kg_m3" in result.stderr
        return
    assert (result.exit_code, result.stdout) == (2, "")
    assert said in result.stderr
    assert list(tmp_path.iterdir()) == []


BAD_SETTINGS = {
    "no key": ("=3", '--set: value is "=3"; allowed: KEY=VALUE'),
    "no value": ("title", '--set: value is "title"; allowed: KEY=VALUE'),
    "unknown key": ("reflector.focal_lenght=3", "allowed: reflector.focal_length; do: correct the key"),
    "a table": ("turning.control=3", "turning.control: unknown key, its value is 3"),
    "bad number": ("forming.springback.percent=41", "forming.springback.percent: value is 41 %"),
    "inline table": ("reflector.rim_diameter={a = 1}", 'reflector.rim_diameter: value is "{a = 1}"'),
    "a date": ("revision=2024-01-01", 'revision: value is "2024-01-01"'),
    "date in an array": ("reflector.asphere=[2024-01-01]", 'reflector.asphere: value is "[2024-01-01]"'),
    "a delete character": ('title="\\u007f"', 'title: value is "\\u007f"; allowed: one line of printable characters'),
    "a lone surrogate": ("title=\udcff", 'title: value is "\\udcff"'),
    "endless digits": ("revision=" + "1" * 5000, "revision: value is "),
}


@pytest.mark.parametrize("case", BAD_SETTINGS)
def test_a_setting_that_is_not_allowed(case: str, tmp_path: Path) -> None:
    setting, said = BAD_SETTINGS[case]
    result = run("new", "-o", tmp_path / "job.toml", "--set", setting)
    assert (result.exit_code, result.stdout) == (2, "")
    assert said in result.stderr
    assert list(tmp_path.iterdir()) == []


def test_values_that_contradict_each_other(tmp_path: Path) -> None:
    result = run("new", "-o", tmp_path / "job.toml", *flat(OPTIONS | {"--depth": 95}, []))
    assert result.exit_code == 2
    assert "reflector.depth: value is 95 mm, but focal_length = 20 gives a depth of 11.25 mm" in result.stderr
    assert list(tmp_path.iterdir()) == []


def test_an_existing_file_is_not_overwritten(job: Path) -> None:
    result = run("new", "-o", job)
    assert result.exit_code == 2
    assert "exists already; allowed: a new name" in result.stderr
    assert job.read_text(encoding="utf-8") == SMALL


def test_a_starter_job_into_no_folder(job: Path, tmp_path: Path) -> None:
    for place in (tmp_path / "none" / "job.toml", job / "job.toml", tmp_path):
        result = run("new", "-o", place)
        assert (result.exit_code, result.stdout) == (2, "")
        assert "; allowed: " in result.stderr


# the process itself: streams, codes, tracebacks

POSIX = pytest.mark.skipif(os.name != "posix", reason="needs POSIX streams")
CALL = [sys.executable, "-c", "from fabricate.command import main; main()"]


def call(*arguments: object, stdout: int = subprocess.PIPE, **environment: str) -> subprocess.CompletedProcess[str]:
    """Run the command as a process of its own."""
    return subprocess.run(
        [*CALL, *(str(argument) for argument in arguments)],
        stdout=stdout,
        stderr=subprocess.PIPE,
        text=True,
        errors="surrogateescape",
        check=False,
        env={**os.environ, **environment},
    )


def test_the_process_leaves_with_the_code() -> None:
    assert call("--version").returncode == 0
    refused = call("table", "no-such-file.toml")
    assert (refused.returncode, refused.stdout) == (2, "")
    assert refused.stderr.startswith("no-such-file.toml: no such file")


@POSIX
@pytest.mark.parametrize("arguments", [["materials"], ["new"], ["--help"]])
def test_a_full_disk_behind_standard_output(arguments: list[str]) -> None:
    with Path("/dev/full").open("wb") as full:
        result = call(*arguments, stdout=full.fileno())
    assert result.returncode == 2
    assert "standard output: can't be written: No space left on device" in result.stderr
    assert "Traceback" not in result.stderr


@POSIX
def test_a_closed_standard_output() -> None:
    closed = "import os; os.close(1); os.execv(sys.executable, [sys.executable, *sys.argv[1:]])"
    process = subprocess.run(
        [sys.executable, "-c", f"import sys; {closed}", *CALL[1:], "table", str(LAMP)],
        stderr=subprocess.PIPE,
        text=True,
        check=False,
    )
    assert (process.returncode, process.stderr) == (0, "")


@POSIX
def test_a_name_that_cannot_be_shown(job: Path, tmp_path: Path) -> None:
    folder = tmp_path / "out\udcff"
    result = call("make", job, "-o", folder, PYTHONIOENCODING="utf-8:strict")
    assert (result.returncode, result.stderr) == (0, "")
    assert "out\\udcff" in result.stdout.replace("\n", "")
    assert folder.is_dir()
