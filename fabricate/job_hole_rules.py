"""What the keys of drilled holes demand of each other, of bore and of spigot."""

from __future__ import annotations

from collections.abc import Iterator
from math import pi, sin

from fabricate.job_facts import Facts
from fabricate.job_findings import Finding
from fabricate.measures import MM_PER_INCH

HOLE_WALL = 1.0
"""Material that is left between two holes, or beside one, at least [mm]."""


def _on_a_circle(facts: Facts) -> Iterator[Finding]:
    """Refuse several air holes on the axis, and one so near to it that a circle and the axis are mixed up."""
    unit, count = facts.length_unit, facts["mould.air_holes.count"]
    circle, diameter = facts["mould.air_holes.circle_diameter"], facts["mould.air_holes.diameter"]
    if count is not None and count > 1 and circle == 0.0:
        problem = f"value is 0 {unit} with count = {count}: there is room for one hole on the axis"
        yield Finding("mould.air_holes.circle_diameter", problem, "above 0, or count = 1", "state the circle")
    elif count is not None and 0.0 < circle < diameter:
        problem = f"value is {circle:g} {unit}, and a hole of {diameter:g} {unit} there holds the axis, off its middle"
        allowed = f"0, or {diameter:g} {unit} and more"
        yield Finding("mould.air_holes.circle_diameter", problem, allowed, "put the hole on the axis, or off it")


def _neighbours(facts: Facts) -> Iterator[Finding]:
    """Refuse holes of one circle that overlap, or leave no wall between them."""
    unit, wall = facts.length_unit, HOLE_WALL / (MM_PER_INCH if facts.units == "inch" else 1.0)
    for table, key in (("mould.air_holes", "diameter"), ("mould.bolts", "hole_diameter")):
        count, circle, diameter = (facts[f"{table}.{name}"] for name in ("count", "circle_diameter", key))
        if count is None or count < 2 or not circle:
            continue
        apart = circle * sin(pi / count)
        if apart < diameter + wall:
            problem = (
                f"value is {circle:g} {unit}, so that {count} holes of {diameter:g} {unit} stand {apart:.4g} apart"
            )
            least = (diameter + wall) / sin(pi / count)
            allowed = f"at least {least:.4f} {unit}, which leaves a wall of {wall:.3g} {unit}"
            yield Finding(f"{table}.circle_diameter", problem, allowed, "widen the circle, or drill fewer or smaller")


def _bolts_outside(facts: Facts) -> Iterator[Finding]:
    """Refuse bolts that meet the bore, or what stands below the base plane."""
    unit, wall = facts.length_unit, HOLE_WALL / (MM_PER_INCH if facts.units == "inch" else 1.0)
    circle, diameter = facts["mould.bolts.circle_diameter"], facts["mould.bolts.hole_diameter"]
    if circle is None:
        return
    for name in ("bore_diameter", "spigot_diameter"):
        least = facts[f"mould.{name}"] + diameter + 2.0 * wall
        if facts[f"mould.{name}"] > 0.0 and circle < least:
            problem = f"value is {circle:g} {unit} with {name} = {facts[f'mould.{name}']:g} {unit}"
            allowed = f"at least {least:.6g} {unit}, which leaves a wall of {wall:.3g} {unit}"
            yield Finding(
                "mould.bolts.circle_diameter", problem, allowed, "widen the circle: bolts go into the base plane"
            )
            return


HOLE_RULES = (_on_a_circle, _neighbours, _bolts_outside)
"""The rules of a job whose mould has air holes or bolts."""
