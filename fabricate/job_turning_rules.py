"""What the keys of turning demand of each other, of the mould's material and of the units."""

from __future__ import annotations

from collections.abc import Iterator

from fabricate.job_facts import Facts
from fabricate.job_findings import Finding
from fabricate.materials import has_material, material

_UNITS_OF_WORD = {"G20": "inch", "G70": "inch", "G21": "mm", "G71": "mm"}
_FEWEST_DECIMALS = {"mm": 3, "inch": 4}


def _rim_speed(facts: Facts) -> Iterator[Finding]:
    """Refuse to turn stock that can fly apart, or unnamed stock, without a limit to its rim speed."""
    name, limit = facts["mould.material"], facts["turning.rim_speed_limit"]
    unit = "ft/s" if facts.units == "inch" else "m/s"
    key, action = "turning.rim_speed_limit", "state the highest rim speed that this stock may have"
    if limit > 0.0 or (name and not has_material(name, "mould")):
        return
    if not name:
        problem = f"value is {limit:g} {unit}, and mould.material is not stated"
        yield Finding(key, problem, f"above 0 {unit}, or 0 for a metal mould", f"{action}, or name the material")
    elif material(name, use="mould").rim_speed_limit_required:
        problem = f'value is {limit:g} {unit}, and the mould is of "{name}", which can fly apart'
        yield Finding(key, problem, f"above 0 {unit}", action)


def _spindle_limits(facts: Facts) -> Iterator[Finding]:
    """Refuse untrued stock that may turn faster than trued stock."""
    untrued, trued = facts["turning.spindle_limit_untrued"], facts["turning.spindle_limit"]
    if untrued > trued:
        problem = f"value is {untrued:g} rev/min"
        allowed = f"at most spindle_limit, {trued:g} rev/min"
        yield Finding("turning.spindle_limit_untrued", problem, allowed, "correct one of them")


def _decimals(facts: Facts) -> Iterator[Finding]:
    """Refuse fewer decimals than the units need."""
    value, fewest = facts["turning.control.decimals"], _FEWEST_DECIMALS[facts.units]
    if value < fewest:
        key = "turning.control.decimals"
        yield Finding(key, f'value is {value} with units = "{facts.units}"', f"{fewest} to 6", "correct the value")


def _units_word(facts: Facts) -> Iterator[Finding]:
    """Refuse a word for the units that contradicts the job's."""
    word = facts["turning.control.units_word"]
    if _UNITS_OF_WORD.get(word, facts.units) != facts.units:
        allowed = [name for name, units in _UNITS_OF_WORD.items() if units == facts.units]
        problem = f'value is "{word}" with units = "{facts.units}", which it contradicts'
        yield Finding("turning.control.units_word", problem, ", ".join((*allowed, "none")), "correct it, or units")


def _absolute_word(facts: Facts) -> Iterator[Finding]:
    """Refuse G90 where G99 is the feed per revolution: there G90 is a cutting cycle."""
    control = "turning.control"
    if facts[f"{control}.absolute_word"] == "G90" and facts[f"{control}.feed_per_rev_word"] == "G99":
        problem = 'value is "G90" with feed_per_rev_word = "G99": on such controls G90 is a cutting cycle'
        allowed = '"none" with G99; "G90" with G95'
        yield Finding(f"{control}.absolute_word", problem, allowed, "look both words up in the control's manual")


TURNING_RULES = (_rim_speed, _spindle_limits, _decimals, _units_word, _absolute_word)
"""The rules of a job that has a ``[turning]`` table."""
