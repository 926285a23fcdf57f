"""What the keys of hub and lead-out demand of each other, of bore and of the face that lies on the mould."""

from __future__ import annotations

from collections.abc import Iterator

from fabricate.job_facts import Facts
from fabricate.job_findings import Finding

DEEPEST_GROOVE = 0.95
"""Depth of a groove over its radius: towards a half round its edges stand upright, where no facets can follow."""


def _both_or_neither(facts: Facts) -> Iterator[Finding]:
    """Refuse half a pilot and half a groove."""
    for table, one, other in (
        ("mould.hub", "pilot_diameter", "pilot_length"),
        ("mould.lead_out", "groove_radius", "groove_depth"),
    ):
        first, second = facts[f"{table}.{one}"] or 0.0, facts[f"{table}.{other}"] or 0.0
        if (first > 0.0) != (second > 0.0):
            key = other if first > 0.0 else one
            problem = f"value is 0 {facts.length_unit}"
            yield Finding(f"{table}.{key}", problem, f"{one} and {other} both above 0, or both 0", "state both")


def _nested(facts: Facts) -> Iterator[Finding]:
    """Refuse a pilot that is not smaller than the pad, and either where it is not larger than the bore."""
    unit, bore = facts.length_unit, facts["mould.bore_diameter"]
    pad, pilot = facts["mould.hub.diameter"], facts["mould.hub.pilot_diameter"] or 0.0
    if pad is None:
        return
    if pad <= bore:
        yield _not_above("mould.hub.diameter", pad, ("bore_diameter", bore), unit)
    if 0.0 < pilot <= bore:
        yield _not_above("mould.hub.pilot_diameter", pilot, ("bore_diameter", bore), unit)
    if pilot >= pad:
        allowed = f"less than hub.diameter, {pad:g} {unit}"
        yield Finding("mould.hub.pilot_diameter", f"value is {pilot:g} {unit}", allowed, "correct one of them")


def _not_above(key: str, value: float, other: tuple[str, float], unit: str) -> Finding:
    allowed = f"more than {other[0]}, {other[1]:g} {unit}"
    return Finding(key, f"value is {value:g} {unit}", allowed, "correct one of them")


def _pilot_of_cavity(facts: Facts) -> Iterator[Finding]:
    """Refuse a pilot in a cavity."""
    pilot = facts["mould.hub.pilot_diameter"] or 0.0
    if pilot > 0.0 and facts["forming.contact_face"] == "convex":
        problem = f"value is {pilot:g} {facts.length_unit} on a female mould"
        allowed = "0, as the insert that turns a cavity faces away from the axis and cannot turn a pin in it"
        yield Finding("mould.hub.pilot_diameter", problem, allowed, "leave the pilot out")


def _groove(facts: Facts) -> Iterator[Finding]:
    """Refuse a groove that is nearly half round or more, or as wide as the lead-out."""
    unit, distance = facts.length_unit, facts["mould.lead_out.distance"]
    radius, depth = facts["mould.lead_out.groove_radius"] or 0.0, facts["mould.lead_out.groove_depth"] or 0.0
    if not radius or not depth or distance is None:
        return
    if depth > DEEPEST_GROOVE * radius:
        allowed = (
            f"at most {DEEPEST_GROOVE:g} of groove_radius, {DEEPEST_GROOVE * radius:g} {unit}: its sides stay open"
        )
        yield Finding("mould.lead_out.groove_depth", f"value is {depth:g} {unit}", allowed, "correct one of them")
        return
    width = 2.0 * (depth * (2.0 * radius - depth)) ** 0.5
    if width >= distance:
        allowed = f"more than the groove's width, {width:.6g} {unit}"
        action = "make the lead-out longer or the groove shallower"
        yield Finding("mould.lead_out.distance", f"value is {distance:g} {unit}", allowed, action)


FEATURE_RULES = (_both_or_neither, _nested, _pilot_of_cavity, _groove)
"""The rules of hub and lead-out."""
