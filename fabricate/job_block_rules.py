"""What the keys of the follow block demand of the process, of the part and of turning."""

from __future__ import annotations

from collections.abc import Iterator

from fabricate.job_facts import Facts
from fabricate.job_findings import Finding

_SPUN = ("spinning", "shear-spinning")


def _process(facts: Facts) -> Iterator[Finding]:
    """Refuse a follow block where nothing is spun."""
    process = facts["forming.process"]
    if process is not None and process not in _SPUN:
        problem = f'value is a table beside forming.process = "{process}", which has no use for it'
        yield Finding("follow_block", problem, "with spinning and shear-spinning only", "remove it, or change process")


def _diameter(facts: Facts) -> Iterator[Finding]:
    """Refuse a block that is wider than the part."""
    unit, value, rim = facts.length_unit, facts["follow_block.diameter"], facts["reflector.rim_diameter"]
    if value is not None and rim is not None and value > rim:
        problem = f"value is {value:g} {unit}"
        yield Finding("follow_block.diameter", problem, f"at most rim_diameter, {rim:g} {unit}", "correct one of them")


def _bore(facts: Facts) -> Iterator[Finding]:
    """Refuse a bore that leaves nothing of the block."""
    unit, value, diameter = facts.length_unit, facts["follow_block.bore_diameter"], facts["follow_block.diameter"]
    if diameter is not None and value >= diameter:
        problem, allowed = f"value is {value:g} {unit}", f"less than follow_block.diameter, {diameter:g} {unit}"
        yield Finding("follow_block.bore_diameter", problem, allowed, "correct one of them")


def _pilot(facts: Facts) -> Iterator[Finding]:
    """Refuse a block that a pilot on the chuck's pad would run into."""
    unit, value = facts.length_unit, facts["follow_block.bore_diameter"]
    pilot = facts["mould.hub.pilot_diameter"] or 0.0
    through = (facts["mould.hub.pilot_length"] or 0.0) > (facts["sheet.thickness"] or 0.0)
    if pilot > 0.0 and through and value <= pilot:
        problem = f"value is {value:g} {unit}, and a pilot of {pilot:g} {unit} stands through the sheet"
        allowed = f"more than mould.hub.pilot_diameter, {pilot:g} {unit}"
        yield Finding("follow_block.bore_diameter", problem, allowed, "give the block a bore that clears the pilot")


def _program(facts: Facts) -> Iterator[Finding]:
    """Refuse a turning program of the block without a lathe's table, or of unnamed stock without a limit."""
    if not facts["follow_block.program"]:
        return
    if not facts.was_typed("turning"):
        problem = "value is true, and there is no [turning] table"
        yield Finding(
            "follow_block.program", problem, "true with a [turning] table", "lay the table out, or leave program false"
        )
    elif facts["turning.rim_speed_limit"] == 0.0:
        unit = "ft/s" if facts.units == "inch" else "m/s"
        problem = f"value is 0 {unit}, with follow_block.program = true: what the block is turned from is not stated"
        action = "state the highest rim speed that the block's stock may have, or leave program false"
        yield Finding("turning.rim_speed_limit", problem, f"above 0 {unit}", action)


BLOCK_RULES = (_process, _diameter, _bore, _pilot, _program)
"""The rules of a job that has a ``[follow_block]`` table."""
