"""What the keys of turning demand of each other, of the mould's material and of the units."""

from __future__ import annotations

from collections.abc import Iterator

from fabricate.job_derive import asked_cusp, feed_in_units
from fabricate.job_facts import Facts
from fabricate.job_findings import Finding
from fabricate.materials import has_material, material
from fabricate.measures import MM_PER_INCH

_UNITS_OF_WORD = {"G20": "inch", "G70": "inch", "G21": "mm", "G71": "mm"}
_FEWEST_DECIMALS = {"mm": 3, "inch": 4}

HIGHEST_CUSP = 1.0 / 32.0
"""Of a cusp over the nose radius: a feed of half the radius leaves it, and a finishing cut takes no more."""


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


def _roughness(facts: Facts) -> Iterator[Finding]:
    """Refuse a roughness stated twice, one that no nose leaves, and a feed that contradicts it."""
    height, mean = facts["turning.roughness_rt_um"], facts["turning.roughness_ra_um"]
    name = "turning.roughness_ra_um" if mean else "turning.roughness_rt_um"
    if height and mean:
        problem = f"value is {mean:g} um with roughness_rt_um = {height:g} um"
        yield Finding(name, problem, "one of the two", "take the other one away, or write 0")
        return
    cusp = asked_cusp(facts)
    nose = facts["turning.nose_radius"] * (MM_PER_INCH if facts.units == "inch" else 1.0)
    if cusp >= HIGHEST_CUSP * nose:
        problem = f"value is {mean or height:g} um, a cusp {1e3 * cusp:.4g} um high"
        allowed = f"cusps under {1e3 * HIGHEST_CUSP * nose:.4g} um, for which the feed is half the nose radius"
        yield Finding(name, problem, allowed, "correct one of them")
    elif cusp:
        wanted, typed = feed_in_units(facts), facts["turning.finishing_feed"]
        if abs(typed - wanted) > 1e-9:
            problem = f"value is {typed:g} {facts.length_unit} and {name.split('.')[1]} asks for {wanted:g}"
            yield Finding("turning.finishing_feed", problem, "the two in agreement", "state one of them")


def _machine(facts: Facts) -> Iterator[Finding]:
    """Refuse a spindle limit that the lathe cannot turn at."""
    if facts.typed.get("machine") is None:
        return
    lowest, highest = facts["machine.lowest_speed"], facts["machine.highest_speed"]
    if highest and lowest > highest:
        problem = f"value is {lowest:g} rev/min"
        yield Finding("machine.lowest_speed", problem, f"at most highest_speed, {highest:g} rev/min", "correct one")
    for name in ("spindle_limit", "spindle_limit_untrued"):
        value = facts[f"turning.{name}"]
        if highest and value > highest:
            allowed = f"at most machine.highest_speed, {highest:g} rev/min"
            yield Finding(f"turning.{name}", f"value is {value:g} rev/min", allowed, "lower it")
        if value < lowest:
            allowed = f"at least machine.lowest_speed, {lowest:g} rev/min"
            yield Finding(f"turning.{name}", f"value is {value:g} rev/min", allowed, "raise it, or use another lathe")


TURNING_RULES = (_rim_speed, _spindle_limits, _decimals, _units_word, _absolute_word, _roughness, _machine)
"""The rules of a job that has a ``[turning]`` table."""
