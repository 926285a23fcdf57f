"""What one key of the job demands of another: every refusal that the file alone decides and no single key does.

A *rule* takes the facts and yields findings. The rules of turning stand in ``job_turning_rules``.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import Any

from fabricate.gauges import GAUGE_SYSTEMS, SHEETS_OF_SYSTEM, numbers_of
from fabricate.job_derive import depth_of, gauge_in_units, same_length
from fabricate.job_facts import Facts
from fabricate.job_findings import Finding, shown
from fabricate.law_table import LawRow
from fabricate.materials import Use, has_material, material, nearest_names
from fabricate.springback import LAWS as SPRINGBACK_LAWS
from fabricate.thinning import LAWS as THINNING_LAWS
from profiles.errors import GeometryError

Rule = Callable[[Facts], Iterator[Finding]]

_FORBIDDEN_CONTACT = {
    ("drape-forming", "convex"): "a sheet is draped over a male mould, its concave face on it",
    ("straight-vacuum", "concave"): "a sheet is drawn into a cavity, its convex face on it",
}
_PROPERTIES = ("youngs_modulus_mpa", "poisson", "yield_mpa", "density_kg_m3")
_STEEPEST = 0.03


def _contact_face(facts: Facts) -> Iterator[Finding]:
    """Refuse a contact face that the process cannot have."""
    process, face = facts["forming.process"], facts["forming.contact_face"]
    reason = _FORBIDDEN_CONTACT.get((process, face))
    if reason:
        other = "concave" if face == "convex" else "convex"
        problem = f'value is "{face}" with process = "{process}"'
        yield Finding("forming.contact_face", problem, f'"{other}": {reason}', "change contact_face or process")


def _thinning_of_process(facts: Facts) -> Iterator[Finding]:
    """Refuse shear spinning that keeps the thickness: it thins the sheet by its nature."""
    if facts["forming.process"] == "shear-spinning" and facts["forming.thinning.law"] == "none":
        problem = 'value is "none" with process = "shear-spinning", which thins the sheet by its nature'
        yield Finding("forming.thinning.law", problem, '"sine-law" or "stations"', "state how the sheet thins")


def _law(facts: Facts, table: str, laws: Mapping[str, LawRow[Any]]) -> Iterator[Finding]:
    """Refuse a law without its value, with two, or with another law's."""
    law = facts[f"{table}.law"]
    wanted, optional = laws[law].one_of, laws[law].options
    amounts, options = _keys_of(laws, lambda row: row.one_of), _keys_of(laws, lambda row: row.options)
    stated = [key for key in amounts if facts.was_typed(f"{table}.{key}")]
    for key in [key for key in stated if key not in (*wanted, *optional)]:
        problem = f'value is {shown(facts[f"{table}.{key}"])} beside law = "{law}", which has no use for it'
        allowed = ", ".join((*wanted, *optional)) or "no further key"
        yield Finding(f"{table}.{key}", problem, f"with this law {allowed}", f"remove {key} or change law")
    matching = [key for key in stated if key in wanted]
    if wanted and not matching:
        yield Finding(f"{table}.{wanted[0]}", "value is missing", " or ".join(wanted), f'state it for law = "{law}"')
    if len(matching) > 1:
        problem = f"{' and '.join(matching)} are stated together"
        yield Finding(f"{table}.{matching[1]}", problem, f"one of {', '.join(wanted)}", "keep one and remove the rest")
    for key in [key for key in options if key not in (*amounts, *optional) and facts.was_typed(f"{table}.{key}")]:
        problem = f'value is {shown(facts[f"{table}.{key}"])} beside law = "{law}", which has no use for it'
        yield Finding(f"{table}.{key}", problem, "with its own law only", f"remove {key}")


def _keys_of(laws: Mapping[str, LawRow[Any]], of_row: Callable[[LawRow[Any]], tuple[str, ...]]) -> list[str]:
    """Return the keys that the rows of a table of laws name, each once."""
    return list(dict.fromkeys(key for row in laws.values() for key in of_row(row)))


def _springback_keys(facts: Facts) -> Iterator[Finding]:
    """Refuse a springback law without its value, with two, or with another law's."""
    yield from _law(facts, "forming.springback", SPRINGBACK_LAWS)


def _thinning_keys(facts: Facts) -> Iterator[Finding]:
    """Refuse a thinning law without its stations or with another law's."""
    yield from _law(facts, "forming.thinning", THINNING_LAWS)


def _thinning_stations(facts: Facts) -> Iterator[Finding]:
    """Refuse a formed sheet of more than twice its thickness."""
    rows, thickness = facts["forming.thinning.stations"] or (), facts["sheet.thickness"] or 0.0
    for radius, formed in rows:
        if formed > 2.0 * thickness > 0.0:
            problem = f"value is {formed:g} {facts.length_unit} at radius {radius:g}, in a sheet of {thickness:g}"
            allowed = f"up to {2.0 * thickness:g} {facts.length_unit}, twice the sheet"
            yield Finding("forming.thinning.stations", problem, allowed, "correct the row or the thickness")


def _is_plastic(facts: Facts) -> bool:
    kind = facts["sheet.properties.kind"]
    name = str(facts["sheet.material"])
    return bool(
        kind == "plastic" or (kind is None and has_material(name, "sheet") and material(name).kind == "plastic")
    )


def _shrinkage_of_plastic(facts: Facts) -> Iterator[Finding]:
    """Refuse a plastic sheet whose shrinkage is not stated."""
    if _is_plastic(facts) and not facts.was_typed("forming.shrinkage.percent"):
        problem = f'value is missing, and the sheet, "{facts["sheet.material"]}", is a plastic'
        allowed = "a number from 0 to 20 %"
        yield Finding(
            "forming.shrinkage.percent", problem, allowed, "state the shrinkage of this sheet; no default is safe"
        )


def _shrinkage_reference(facts: Facts) -> Iterator[Finding]:
    """Refuse a hot mould without its expansion and temperature, and a cold one with them."""
    reference = facts["forming.shrinkage.reference"]
    for name in ("mould_expansion", "temperature_rise"):
        key = f"forming.shrinkage.{name}"
        if reference == "hot-mould" and not facts.was_typed(key):
            yield Finding(key, "value is missing", "a number, with reference hot-mould", "state it")
        if reference == "cold-mould" and facts.was_typed(key):
            problem = (
                f"value is {shown(facts[key])} with reference cold-mould, which holds the mould's expansion already"
            )
            yield Finding(key, problem, "with reference hot-mould only", "remove it or change reference")


def _no_row(key: str, name: str, use: Use, otherwise: str) -> Finding:
    near = ", ".join(f'"{known}"' for known in nearest_names(name, use))
    problem = f"value is {shown(name)}, which is no {use} of the material table"
    return Finding(key, problem, near, f"write one of the names that `dishwright materials` lists{otherwise}")


def _sheet_material(facts: Facts) -> Iterator[Finding]:
    """Refuse a sheet that is neither a row of the table nor described by its properties."""
    name = facts["sheet.material"]
    if name is None:
        return
    if has_material(name, "sheet"):
        yield from _other_kind(facts, name)
        return
    if not facts.was_typed("sheet.properties"):
        yield _no_row("sheet.material", name, "sheet", ", or describe the sheet in [sheet.properties]")
        return
    for key in _PROPERTIES:
        if not facts.was_typed(f"sheet.properties.{key}"):
            allowed = f'a number: the table has no row "{name}" to take it from'
            yield Finding(f"sheet.properties.{key}", "value is missing", allowed, "state it")


def _other_kind(facts: Facts, name: str) -> Iterator[Finding]:
    kind, known = facts["sheet.properties.kind"], material(name).kind
    if kind not in {None, known}:
        problem = f'value is "{kind}", but the material table has "{name}" as a {known}'
        yield Finding("sheet.properties.kind", problem, f'"{known}"', "correct it or give the sheet a name of its own")


def _mould_material(facts: Facts) -> Iterator[Finding]:
    """Refuse a mould material that the table lacks."""
    name = facts["mould.material"]
    if name and not has_material(name, "mould"):
        yield _no_row("mould.material", name, "mould", ', or "" where it is not settled')


def _depth_and_focal_length(facts: Facts) -> Iterator[Finding]:
    """Refuse a depth that contradicts the focal length."""
    depth = facts["reflector.depth"]
    if depth is None or not facts.was_typed("reflector.focal_length"):
        return
    unit = facts.length_unit
    focal = facts["reflector.focal_length"]
    try:
        reached = depth_of(facts)
    except GeometryError as error:
        yield Finding(
            "reflector.depth", f"value is {depth:g} {unit}, but {error}", "a face out to the rim", "correct one"
        )
        return
    if not same_length(depth, reached, facts.units):
        problem = (
            f"value is {depth:g} {unit}, but focal_length = {focal:g} gives a depth of {reached:.6g} {unit} at the rim"
        )
        yield Finding("reflector.depth", problem, f"{reached:.6g} {unit}, or no depth", "correct one, or remove one")


def _gauge_and_thickness(facts: Facts) -> Iterator[Finding]:
    """Refuse a gauge without its system, one that the system lacks, and one that contradicts the thickness."""
    gauge, system = facts["sheet.gauge"], facts["sheet.gauge_system"]
    names = ", ".join(GAUGE_SYSTEMS)
    if (gauge is None) != (system is None):
        missing = "gauge" if gauge is None else "gauge_system"
        allowed = "a gauge number" if gauge is None else names
        action = "a gauge number means nothing without its system: state both, or the thickness alone"
        yield Finding(f"sheet.{missing}", "value is missing", allowed, action)
    elif system is not None and system not in GAUGE_SYSTEMS:
        yield Finding(
            "sheet.gauge_system", f"value is {shown(system)}", names, "write one of these, or state the thickness"
        )
    elif system is not None and str(gauge) not in GAUGE_SYSTEMS[system]:
        allowed = f"the numbers of {system}: {numbers_of(system)}"
        yield Finding("sheet.gauge", f"value is {shown(gauge)}", allowed, "correct it, or state the thickness")
    elif system is not None:
        yield from _gauge_against_thickness(facts)


def _gauge_of_another_metal(facts: Facts) -> Iterator[Finding]:
    """Refuse a gauge system that is of one metal only, for a sheet of the table that is of another."""
    system, name = facts["sheet.gauge_system"], facts["sheet.material"]
    metal = SHEETS_OF_SYSTEM.get(system)
    if metal is None or not has_material(str(name), "sheet") or str(name).startswith(f"{metal} "):
        return
    problem = f'value is {shown(system)} with material = "{name}": a weight per area is a thickness of {metal} only'
    others = ", ".join(other for other in GAUGE_SYSTEMS if other not in SHEETS_OF_SYSTEM)
    allowed = f"a sheet of {metal}, or one of {others}"
    yield Finding("sheet.gauge_system", problem, allowed, "correct material or gauge_system, or state the thickness")


def _gauge_against_thickness(facts: Facts) -> Iterator[Finding]:
    stated, gauged = facts["sheet.thickness"], gauge_in_units(facts)
    if facts.was_typed("sheet.thickness") and not same_length(stated, gauged, facts.units):
        unit = facts.length_unit
        name = f"{facts['sheet.gauge_system']} {facts['sheet.gauge']}"
        problem = f"value is {stated:g} {unit}, but {name} is {gauged:.6g} {unit}"
        yield Finding("sheet.thickness", problem, f"{gauged:.6g} {unit}, or no gauge", "correct one, or remove one")


def _holes(facts: Facts) -> Iterator[Finding]:
    """Refuse a hole or a bore as wide as the rim."""
    unit, rim = facts.length_unit, facts["reflector.rim_diameter"]
    for key in ("reflector.hole_diameter", "mould.bore_diameter"):
        if rim is not None and facts[key] >= rim:
            problem = f"value is {facts[key]:g} {unit}"
            yield Finding(key, problem, f"less than rim_diameter, {rim:g} {unit}", "correct one of them")


def _spigot(facts: Facts) -> Iterator[Finding]:
    """Refuse half a spigot, and a bore that leaves none of it."""
    unit = facts.length_unit
    diameter, reach = facts["mould.spigot_diameter"], facts["mould.spigot_length"]
    if (diameter > 0.0) != (reach > 0.0):
        key = "mould.spigot_length" if diameter > 0.0 else "mould.spigot_diameter"
        yield Finding(
            key, f"value is 0.0 {unit}", "spigot_diameter and spigot_length both above 0, or both 0", "state both"
        )
    if 0.0 < diameter <= facts["mould.bore_diameter"]:
        problem = f"value is {diameter:g} {unit}"
        allowed = f"more than bore_diameter, {facts['mould.bore_diameter']:g} {unit}"
        yield Finding("mould.spigot_diameter", problem, allowed, "correct one of them")


def _coating(facts: Facts) -> Iterator[Finding]:
    """Refuse to polish away the whole sheet."""
    value, thickness = facts["sheet.coating_thickness"], facts["sheet.thickness"]
    if thickness is not None and -value >= thickness:
        unit = facts.length_unit
        problem = f"value is {value:g} {unit}: polishing would leave nothing of a sheet of {thickness:g} {unit}"
        yield Finding("sheet.coating_thickness", problem, f"above {-thickness:g} {unit}", "correct one of them")


def _proportions(facts: Facts) -> Iterator[Finding]:
    """Refuse a dish too steep, an asphere out of all proportion and a trim wider than the part."""
    unit, rim = facts.length_unit, facts["reflector.rim_diameter"]
    if rim is None:
        return
    focal = facts["reflector.focal_length"]
    if focal is not None and focal < _STEEPEST * rim:
        problem = f"value is {focal:g} {unit} at a rim_diameter of {rim:g} {unit}"
        allowed = f"at least {_STEEPEST:g} of rim_diameter, {_STEEPEST * rim:g} {unit}"
        yield Finding("reflector.focal_length", problem, allowed, "correct one of them")
    if facts["forming.trim_allowance"] > rim:
        problem = f"value is {facts['forming.trim_allowance']:g} {unit}"
        yield Finding("forming.trim_allowance", problem, f"at most rim_diameter, {rim:g} {unit}", "correct one of them")


def _asphere_terms(facts: Facts) -> Iterator[Finding]:
    """Refuse a term of the asphere that is deeper at the rim than the rim is wide."""
    rim = facts["reflector.rim_diameter"]
    for index, factor in enumerate(facts["reflector.asphere"] or (), start=2):
        term = abs(factor) * (rim / 2.0) ** (2 * index) if rim is not None else 0.0
        if rim is not None and term > rim:
            problem = f"value is {factor:g} for A{2 * index}, which is {term:g} {facts.length_unit} at the rim"
            allowed = f"terms of up to {rim:g} {facts.length_unit} at the rim"
            yield Finding("reflector.asphere", problem, allowed, "mind that its units are units^-3, units^-5, ...")


RULES: tuple[Rule, ...] = (
    _contact_face,
    _thinning_of_process,
    _springback_keys,
    _thinning_keys,
    _thinning_stations,
    _shrinkage_of_plastic,
    _shrinkage_reference,
    _sheet_material,
    _mould_material,
    _depth_and_focal_length,
    _gauge_and_thickness,
    _gauge_of_another_metal,
    _holes,
    _spigot,
    _coating,
    _proportions,
    _asphere_terms,
)
"""Every rule but those of turning."""
