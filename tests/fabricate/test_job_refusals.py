"""One table of everything that the file alone decides: a valid demo job, edited once, and what the refusal says."""

# ruff: noqa: E501 - the table keeps one case to a line, so that it can be read down its columns

from __future__ import annotations

import re
from importlib.resources import files

import pytest

from fabricate.job import parse_job
from profiles.errors import JobError

HEATER = files("fabricate").joinpath("demo/terrace-heater.toml").read_text(encoding="utf-8")
DISH = files("fabricate").joinpath("demo/listening-dish.toml").read_text(encoding="utf-8")
LAMP = files("fabricate").joinpath("demo/lamp.toml").read_text(encoding="utf-8")
BOWL = files("fabricate").joinpath("demo/display-bowl.toml").read_text(encoding="utf-8")

F110 = "focal_length = 110.0"
D400 = "rim_diameter = 400.0"
T1 = "thickness = 1.0"
P21 = 'law = "focal-length"\npercent = 2.1'
MATERIAL = 'material = "aluminium 1085-O"'
THINNING = '[forming.thinning]\nlaw = "none"'
SHRINKAGE = '[forming.shrinkage]\npercent = 0.6\nreference = "cold-mould"'
CONTACT = 'contact_face = "concave"'
FLAT_BOARD = "youngs_modulus_mpa = 1\npoisson = 0.3\nyield_mpa = 1\n"

# base, text to replace, its replacement, what the refusal says
REFUSED = {
    # the file as a whole
    "decimal comma": (HEATER, T1, "thickness = 1,5", "a point is the decimal mark"),
    "decimal comma in marks": (HEATER, T1, 'thickness = "1,5"', 'sheet.thickness: value is "1,5"; allowed: a number from 0.01 to 100 mm; do: a point is the decimal mark: write 1.5'),
    "number in marks": (HEATER, T1, 'thickness = "1.5"', "do: write 1.5 without quotation marks"),
    "no TOML": (HEATER, T1, "thickness 1.0", "line 9, column 11: not TOML"),
    "unfinished": (HEATER, "decimals = 4", "decimals = [4", "not TOML: Unclosed array at the end of the file"),
    "key twice": (HEATER, T1, f"{T1}\n{T1}", "Cannot overwrite a value"),
    "number of 5000 digits": (HEATER, T1, f"thickness = {'1' * 5000}", "is not a job file"),
    "huge whole number": (HEATER, T1, f"thickness = {'1' * 400}", "sheet.thickness: value is 111"),
    "nested arrays": (HEATER, T1, f"thickness = {'[' * 3000}{']' * 3000}", "is not a job file"),
    "unknown table": (HEATER, "[turning]", "[lathe]\nswing = 500\n[turning]", "lathe: unknown key, its value is a table"),
    "mistyped key": (HEATER, F110, "focal_lenght = 110.0", "nearest known key reflector.focal_length"),
    "key of another table": (HEATER, D400, f"{D400}\ntrim_allowance = 3", "reflector.trim_allowance: unknown key, its value is 3; allowed: nearest known key forming.trim_allowance"),
    # head
    "units missing": (HEATER, 'units = "mm"', "", 'units: value is missing; allowed: "mm", "inch"'),
    "units unknown": (HEATER, '"mm"', '"cm"', 'units: value is "cm"; allowed: "mm", "inch"'),
    "title missing": (HEATER, 'title = "Terrace heater 400"', "", "title: value is missing"),
    "title empty": (HEATER, "Terrace heater 400", " ", 'title: value is " "; allowed: one line of 1 to 120'),
    "title of two lines": (HEATER, "Terrace heater 400", "a\\nb", "title: value is \"a\\nb\"; allowed: one line"),
    "revision a fraction": (HEATER, 'units = "mm"', 'units = "mm"\nrevision = 1.5', "revision: value is 1.5"),
    # reflector
    "focal length and depth missing": (HEATER, F110, "", "state focal_length, or depth in its place"),
    "focal length and depth contradict": (HEATER, F110, f"{F110}\ndepth = 95", "reflector.depth: value is 95 mm, but focal_length = 110 gives a depth of 90.9091 mm"),
    "focal length not finite": (HEATER, F110, "focal_length = nan", "reflector.focal_length: value is nan mm"),
    "diameter infinite": (HEATER, D400, "rim_diameter = inf", "NaN and infinity cannot be made"),
    "diameter a switch": (HEATER, D400, "rim_diameter = true", "reflector.rim_diameter: value is true"),
    "diameter nought": (HEATER, D400, "rim_diameter = 0", "a number from 1 to 100000 mm"),
    "focal length negative": (HEATER, F110, "focal_length = -110.0", "reflector.focal_length: value is -110.0 mm"),
    "far too steep": (HEATER, F110, "focal_length = 5", "reflector.focal_length: value is 5 mm at a rim_diameter of 400 mm"),
    "depth of no conic": (HEATER, F110, "depth = 260\nconic_constant = 0.5", "no conic with conic constant 0.5 is 260 deep at radius 200"),
    "depth of asphere alone": (HEATER, F110, "depth = 10\nasphere = [1e-8]", "the asphere alone is 16 deep at the rim"),
    "depth beside no face": (HEATER, F110, f"{F110}\ndepth = 90\nconic_constant = 3", "but a conic with conic constant 3"),
    "asphere out of proportion": (HEATER, D400, f"{D400}\nasphere = [1.0]", "reflector.asphere: value is 1 for A4"),
    "asphere too long": (HEATER, D400, f"{D400}\nasphere = {[0.0] * 11}", "an array of at most 10 numbers"),
    "asphere no numbers": (HEATER, D400, f'{D400}\nasphere = ["a"]', 'reflector.asphere: value is "a"'),
    "hole as wide as rim": (HEATER, D400, f"{D400}\nhole_diameter = 400", "less than rim_diameter, 400 mm"),
    "reflecting face missing": (HEATER, 'reflecting_face = "concave"', "", "reflector.reflecting_face: value is missing"),
    # sheet
    "material missing": (HEATER, MATERIAL, "", "sheet.material: value is missing"),
    "material unknown": (HEATER, "1085-O", "1085", 'no sheet of the material table; allowed: "aluminium 1085-O"'),
    "own sheet without values": (HEATER, f"{MATERIAL}\n{T1}", f'material = "x"\n{T1}\n[sheet.properties]\n{FLAT_BOARD}', "sheet.properties.density_kg_m3: value is missing"),
    "kind against the table": (HEATER, T1, f'{T1}\n[sheet.properties]\nkind = "plastic"', 'the material table has "aluminium 1085-O" as a metal'),
    "thickness missing": (HEATER, T1, "", "state thickness, or gauge with gauge_system"),
    "gauge without system": (HEATER, T1, "gauge = 18", "sheet.gauge_system: value is missing; allowed: AWG, SWG, USG, MSG"),
    "system without gauge": (HEATER, T1, f'{T1}\ngauge_system = "AWG"', "sheet.gauge: value is missing"),
    "system unknown": (HEATER, T1, 'gauge = 18\ngauge_system = "XYZ"', 'sheet.gauge_system: value is "XYZ"; allowed: AWG'),
    "gauge unknown": (HEATER, T1, 'gauge = 77\ngauge_system = "SWG"', "sheet.gauge: value is 77; allowed: the numbers of SWG"),
    "gauge a fraction": (HEATER, T1, 'gauge = 20.0\ngauge_system = "AWG"', "sheet.gauge: value is 20.0; allowed: a whole number or a text; do: write 20 without a point"),
    "weight of another metal": (HEATER, T1, 'gauge = 16\ngauge_system = "oz/ft2"', 'sheet.gauge_system: value is "oz/ft2" with material = "aluminium 1085-O": a weight per area is a thickness of copper only; allowed: a sheet of copper, or one of AWG, SWG, USG, MSG; do: correct material or gauge_system'),
    "weight too small": (HEATER, T1, 'gauge = 3\ngauge_system = "oz/ft2"', "sheet.gauge: value is 3; allowed: the numbers of oz/ft2: whole numbers from 4 to 96"),
    "gauge against thickness": (HEATER, T1, f'{T1}\ngauge = 16\ngauge_system = "AWG"', "but AWG 16 is 1.2908"),
    "sheet polished away": (HEATER, T1, f"{T1}\ncoating_thickness = -1.0", "polishing would leave nothing of a sheet of 1 mm"),
    # forming
    "process unknown": (HEATER, '"spinning"', '"pressing"', 'forming.process: value is "pressing"; allowed: "spinning"'),
    "contact face missing": (HEATER, CONTACT, "", "say which face of the sheet lies on the mould"),
    "draped into a cavity": (DISH, CONTACT, 'contact_face = "convex"', 'value is "convex" with process = "drape-forming"; allowed: "concave"'),
    "drawn over a mould": (BOWL, 'contact_face = "convex"', CONTACT, 'value is "concave" with process = "straight-vacuum"; allowed: "convex"'),
    "shear spinning without thinning": (HEATER, '"spinning"', '"shear-spinning"', 'forming.thinning.law: value is "none" with process = "shear-spinning"'),
    "trim wider than the part": (LAMP, "trim_allowance = 3.0", "trim_allowance = 300.0", "at most rim_diameter, 60 mm"),
    "springback missing": (HEATER, f"[forming.springback]\n{P21}", "", 'forming.springback.law: value is missing; allowed: "none", "focal-length"'),
    "springback without value": (HEATER, P21, 'law = "focal-length"', "forming.springback.percent: value is missing; allowed: percent or depth_loss or rim_slope_loss_deg"),
    "springback stated twice": (HEATER, P21, f"{P21}\ndepth_loss = 2", "percent and depth_loss are stated together"),
    "springback of none": (HEATER, P21, 'law = "none"\npercent = 2.1', 'value is 2.1 beside law = "none", which has no use for it'),
    "springback too large": (HEATER, "percent = 2.1", "percent = 41", "forming.springback.percent: value is 41 %; allowed: a number from -20 to 40 %"),
    "springback too negative": (HEATER, "percent = 2.1", "percent = -20.5", "value is -20.5 %; allowed: a number from -20 to 40 %"),
    "estimate without its law": (HEATER, P21, f"{P21}\naccept_estimate = true", "forming.springback.accept_estimate: value is true beside"),
    "bending without flow stress": (HEATER, P21, 'law = "bending"', "forming.springback.flow_stress_mpa: value is missing"),
    "stations missing": (HEATER, P21, 'law = "stations"', "forming.springback.stations: value is missing"),
    "stations empty": (HEATER, P21, 'law = "stations"\nstations = []', "allowed: 1 to 1000 rows [radius, percent]"),
    "stations not increasing": (HEATER, P21, 'law = "stations"\nstations = [[5, 1], [5, 2]]', "value is [[5, 1], [5, 2]]; allowed: 1 to 1000 rows [radius, percent], radius increasing"),
    "stations below the axis": (HEATER, P21, 'law = "stations"\nstations = [[-5, 1]]', "radius, a number from 0 to"),
    "station of three columns": (HEATER, P21, 'law = "stations"\nstations = [[5, 1, 2]]', "forming.springback.stations: value is [5, 1, 2]"),
    "station of one column": (HEATER, P21, 'law = "stations"\nstations = [[5]]', "forming.springback.stations: a row is too short"),
    "station not finite": (HEATER, P21, 'law = "stations"\nstations = [[5, nan]]', "forming.springback.stations: value is nan"),
    "thinning missing": (HEATER, THINNING, "", "forming.thinning.law: value is missing"),
    "thinning law unknown": (HEATER, THINNING, '[forming.thinning]\nlaw = "sine"', 'forming.thinning.law: value is "sine"'),
    "thinning stations of another law": (HEATER, THINNING, f"{THINNING}\nstations = [[0, 1]]", 'value is [[0, 1]] beside law = "none"'),
    "thinning stations missing": (HEATER, THINNING, '[forming.thinning]\nlaw = "stations"', "forming.thinning.stations: value is missing"),
    "thicker than twice": (HEATER, THINNING, '[forming.thinning]\nlaw = "stations"\nstations = [[0, 2.5]]', "value is 2.5 mm at radius 0, in a sheet of 1"),
    "shrinkage of plastic missing": (DISH, SHRINKAGE, "", 'the sheet, "polycarbonate", is a plastic'),
    "hot mould without expansion": (DISH, '"cold-mould"', '"hot-mould"\ntemperature_rise = 60', "forming.shrinkage.mould_expansion: value is missing"),
    "hot mould without temperature": (DISH, '"cold-mould"', '"hot-mould"\nmould_expansion = 6e-5', "forming.shrinkage.temperature_rise: value is missing"),
    "cold mould with expansion": (DISH, '"cold-mould"', '"cold-mould"\nmould_expansion = 6e-5', "holds the mould's expansion already"),
    # mould
    "mould material unknown": (HEATER, "tooling board", "toling board", 'no mould of the material table; allowed: "tooling board"'),
    "bore as wide as rim": (LAMP, "bore_diameter = 6.0", "bore_diameter = 60.0", "mould.bore_diameter: value is 60 mm; allowed: less than rim_diameter"),
    "spigot without length": (LAMP, "body_height = 25.0", "body_height = 25.0\nspigot_diameter = 20", "mould.spigot_length: value is 0.0 mm"),
    "spigot without diameter": (LAMP, "body_height = 25.0", "body_height = 25.0\nspigot_length = 20", "mould.spigot_diameter: value is 0.0 mm"),
    "spigot inside the bore": (LAMP, "body_height = 25.0", "body_height = 25.0\nspigot_length = 9\nspigot_diameter = 6", "more than bore_diameter, 6 mm"),
    # tolerance and drawing
    "chord error missing": (HEATER, "chord_error = 0.005", "", "tolerance.files.chord_error: value is missing"),
    "chord error nought": (HEATER, "chord_error = 0.005", "chord_error = 0.0", "a number from 1e-05 to 10 mm"),
    "profile negative": (HEATER, "profile = 0.5", "profile = -0.5", "tolerance.part.profile: value is -0.5 mm"),
    "drawing version unknown": (HEATER, "[turning]", '[drawing]\nversion = "R14"\n[turning]', 'drawing.version: value is "R14"; allowed: "R2010", "R12"'),
    # turning
    "spindle direction missing": (HEATER, 'spindle_direction = "M3"', "", 'turning.spindle_direction: value is missing; allowed: "M3", "M4"'),
    "spindle limit missing": (HEATER, "spindle_limit = 500", "", "no turning program is written without a spindle limit"),
    "untrued limit missing": (HEATER, "spindle_limit_untrued = 200", "", "turning.spindle_limit_untrued: value is missing"),
    "untrued above true": (HEATER, "spindle_limit_untrued = 200", "spindle_limit_untrued = 501", "at most spindle_limit, 500 rev/min"),
    "rim speed of board": (HEATER, "rim_speed_limit = 15.0", "", 'turning.rim_speed_limit: value is 0 m/s, and the mould is of "tooling board"'),
    "rim speed of unnamed stock": (LAMP, 'material = "steel"', "", "and mould.material is not stated"),
    "control missing": (HEATER, "[turning.control]", "[turning.contrl]", "turning.control.x_word: value is missing"),
    "G90 with G99": (HEATER, 'feed_per_rev_word = "G95"', 'feed_per_rev_word = "G99"', "on such controls G90 is a cutting cycle"),
    "word for inches in mm": (HEATER, '"G21"', '"G20"', 'value is "G20" with units = "mm", which it contradicts; allowed: G21, G71, none'),
    "too few decimals": (HEATER, "decimals = 4", "decimals = 2", "turning.control.decimals: value is 2; allowed: a number from 3 to 6"),
    "decimals a fraction": (HEATER, "decimals = 4", "decimals = 4.0", "turning.control.decimals: value is 4.0"),
    "control word unknown": (HEATER, '"G18"', '"G17"', 'turning.control.plane_word: value is "G17"; allowed: "G18", "none"; do: look the word up'),
}  # fmt: skip

CONTROL_WORDS = (
    *("x_word", "plane_word", "units_word", "absolute_word"),
    *("feed_per_rev_word", "spindle_limit_word", "arcs", "decimals"),
)


@pytest.mark.parametrize("case", REFUSED)
def test_refused(case: str) -> None:
    base, old, new, says = REFUSED[case]
    parse_job(base, name="valid.toml")
    assert old in base
    with pytest.raises(JobError, match=re.escape(says)) as caught:
        parse_job(base.replace(old, new, 1), name="edited.toml")
    assert all(line.startswith("edited.toml: ") for line in str(caught.value).splitlines())
    assert all("; allowed: " in line and "; do: " in line for line in str(caught.value).splitlines())


@pytest.mark.parametrize("word", CONTROL_WORDS)
def test_every_word_of_the_control_must_be_stated(word: str) -> None:
    text = "\n".join(line for line in HEATER.splitlines() if not line.startswith(word))
    with pytest.raises(JobError, match=rf"turning\.control\.{word}: value is missing; .*; do: look the word up"):
        parse_job(text, name="edited.toml")


def test_decimals_of_an_inch_job() -> None:
    text = LAMP.replace('"mm"', '"inch"').replace("G21", "G20")
    assert parse_job(text, name="inch.toml").units == "inch"
    with pytest.raises(JobError, match='decimals: value is 3 with units = "inch"; allowed: 4 to 6'):
        parse_job(text.replace("decimals = 4", "decimals = 3"), name="inch.toml")


def test_bounds_of_an_inch_job_are_the_same_lengths() -> None:
    text = LAMP.replace('"mm"', '"inch"').replace("G21", "G20").replace("thickness = 0.8", "thickness = 4")
    with pytest.raises(JobError, match=r"sheet\.thickness: value is 4 in; allowed: a number from .* to 3\.937008 in"):
        parse_job(text, name="inch.toml")


def test_word_for_millimetres_in_an_inch_job() -> None:
    with pytest.raises(JobError, match='value is "G21" with units = "inch", which it contradicts; allowed: G20, G70'):
        parse_job(LAMP.replace('"mm"', '"inch"'), name="inch.toml")


def test_shrinkage_of_a_thermoformed_sheet_of_its_own_must_be_stated() -> None:
    own = f'"yard sheet"\nthickness = 3.0\n[sheet.properties]\ndensity_kg_m3 = 1200\n{FLAT_BOARD}'
    text = DISH.replace('"polycarbonate"\nthickness = 3.0\n', own)
    assert parse_job(text, name="own.toml").sheet.row.kind == "plastic"
    with pytest.raises(JobError, match='the sheet, "yard sheet", is a plastic'):
        parse_job(text.replace(SHRINKAGE, ""), name="own.toml")


@pytest.mark.parametrize("value", ["3", '"concave"', "[]", "[[1]]", "2024-01-01", "true"])
@pytest.mark.parametrize("table", ["drawing", "turning", "reflector", "tolerance"])
def test_a_value_where_a_table_belongs(table: str, value: str) -> None:
    kept = re.sub(rf"^\[{table}(\..*)?\]\n(?:[^\[].*\n)*", "", HEATER, flags=re.MULTILINE)
    with pytest.raises(JobError, match=rf"{table}: value is .*; allowed: a table with the keys"):
        parse_job(f"{table} = {value}\n{kept}", name="edited.toml")


def test_every_finding_is_named_not_only_the_first() -> None:
    text = HEATER.replace(F110, "focal_lenght = 110.0").replace(T1, 'thickness = "1,5"').replace("2.1", "50")
    text = text.replace('"G90"', '"G91"').replace("spindle_limit_untrued = 200", "spindle_limit_untrued = 900")
    text = text.replace("tooling board", "lead")
    with pytest.raises(JobError, match="focal_lenght") as caught:
        parse_job(text, name="edited.toml")
    keys = {line.split(": ")[1] for line in str(caught.value).splitlines()}
    assert keys == {
        "reflector.focal_length",
        "reflector.focal_lenght",
        "sheet.thickness",
        "forming.springback.percent",
        "turning.control.absolute_word",
        "turning.spindle_limit_untrued",
        "mould.material",
    }


@pytest.mark.parametrize("gauge", ["20.0", "20.5", "true", "[]", '""', "{}"])
def test_a_gauge_of_the_wrong_type_is_one_fault(gauge: str) -> None:
    with pytest.raises(JobError, match=r"sheet\.gauge: value is") as caught:
        parse_job(HEATER.replace(T1, f'gauge = {gauge}\ngauge_system = "AWG"'), name="edited.toml")
    assert len(str(caught.value).splitlines()) == 1


def test_an_empty_file_names_every_required_key() -> None:
    with pytest.raises(JobError, match="value is missing") as caught:
        parse_job("", name="empty.toml")
    keys = [line.split(": ")[1] for line in str(caught.value).splitlines()]
    assert keys == [
        *("title", "units", "reflector.focal_length", "reflector.rim_diameter", "reflector.reflecting_face"),
        *("sheet.material", "sheet.thickness", "forming.process", "forming.contact_face", "forming.springback.law"),
        *("forming.thinning.law", "tolerance.files.chord_error"),
    ]


def test_a_file_of_nothing_but_faults_is_cut_short() -> None:
    text = "\n".join(f"odd_{number} = 1" for number in range(500))
    with pytest.raises(JobError, match=r"odd\.toml: more findings follow; allowed: none") as caught:
        parse_job(text, name="odd.toml")
    assert len(str(caught.value).splitlines()) == 41
