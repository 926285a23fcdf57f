"""What a job file leaves open and the reader fills in: defaults, and values that follow from others.

An inch job's default lengths and speeds are those of a millimetre job, converted. A focal length follows from a depth,
a thickness from a gauge, and the kind of a sheet that the table lacks from the process that forms it.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from math import floor
from types import MappingProxyType
from typing import Any

from fabricate.gauges import GAUGE_SYSTEMS, gauge_thickness
from fabricate.job_facts import Facts, UnknownFactError, found
from fabricate.job_findings import Finding, inner_table, shown
from fabricate.job_table import Table, measure_of
from fabricate.materials import has_material
from fabricate.measures import MM_PER_INCH, Units
from fabricate.roughness import feed_for_rt, rt_for_ra
from profiles.errors import JobError
from profiles.face import Face

# A typed depth agrees with a focal length when it is the same to a millionth, or to the last digit of a depth gauge.
_SAME_RELATIVE = 1e-6
_SAME_MM = 1e-3


def filled_in(table: type[Table], data: Mapping[str, Any], units: Units) -> dict[str, Any]:
    """Return a table as typed with its defaults written out.

    Parameters
    ----------
    table : type of Table
        Model of the table.
    data : mapping
        The table as typed.
    units : {"mm", "inch"}
        Units of the job; default lengths and speeds of an inch job are converted.

    Returns
    -------
    dict
        The table with every default; required keys that are missing stay missing, keys without a default absent.
    """
    result = dict(data)
    for name, field in table.model_fields.items():
        inner = inner_table(table, name)
        typed = result.get(name)
        if inner is not None and isinstance(typed, Mapping):
            result[name] = filled_in(inner, typed, units)
        elif name in result:
            continue
        elif inner is not None and (field.is_required() or field.default is not None):
            result[name] = filled_in(inner, {}, units)
        elif inner is None and not field.is_required() and field.default is not None:
            result[name] = _default(table, name, units)
    return result


def _default(table: type[Table], name: str, units: Units) -> Any:
    value = table.model_fields[name].default
    measure = measure_of(table, name)
    return measure.to_inch_job(value) if units == "inch" and measure is not None else value


def focal_length_of(depth: float, rim_radius: float, *, conic_constant: float, asphere: tuple[float, ...]) -> float:
    """Return the focal length of the face that has a given depth at its rim.

    The terms of the asphere come off the depth first; ``r² − 2 R0 z + (1 + K) z² = 0`` gives R0 of the conic.

    Parameters
    ----------
    depth : float
        Height of the rim over the vertex [mm].
    rim_radius : float
        Half the rim diameter [mm].
    conic_constant : float
        K of ISO 10110-12 [-].
    asphere : tuple of float
        A4, A6, … [mm^-3, mm^-5, …].

    Returns
    -------
    float
        Focal length [mm].

    Raises
    ------
    JobError
        If no such face has that depth there.

    Examples
    --------
    >>> focal_length_of(56.25, 150.0, conic_constant=-1.0, asphere=())
    100.0

    References
    ----------
    ISO 10110-12 (from memory).
    """
    terms = sum(factor * rim_radius ** (2 * index) for index, factor in enumerate(asphere, start=2))
    conic = depth - terms
    if conic <= 0.0:
        raise JobError(f"the asphere alone is {terms:g} deep at the rim, the depth is only {depth:g}")
    squeeze = (1.0 + conic_constant) * conic
    radius = (rim_radius**2 + squeeze * conic) / (2.0 * conic)
    if radius <= max(squeeze, 0.0):
        raise JobError(f"no conic with conic constant {conic_constant:g} is {depth:g} deep at radius {rim_radius:g}")
    return radius / 2.0


def depth_of(facts: Facts) -> float:
    """Return the depth at the rim that the stated focal length gives.

    Parameters
    ----------
    facts : Facts
        The job.

    Returns
    -------
    float
        Height of the rim over the vertex [units of the job].

    Raises
    ------
    GeometryError
        If the conic ends before the rim.
    """
    face = Face(facts["reflector.focal_length"], facts["reflector.conic_constant"], tuple(facts["reflector.asphere"]))
    return float(face.height(facts["reflector.rim_diameter"] / 2.0))


def same_length(typed: float, derived: float, units: Units) -> bool:
    """Say whether two lengths agree: to a millionth, or to 0.001 mm.

    Parameters
    ----------
    typed, derived : float
        The lengths [units of the job].
    units : {"mm", "inch"}
        Units of the job.

    Returns
    -------
    bool
        True where they agree.
    """
    last_digit = _SAME_MM / MM_PER_INCH if units == "inch" else _SAME_MM
    return abs(typed - derived) <= max(_SAME_RELATIVE * abs(derived), last_digit)


def gauge_in_units(facts: Facts) -> float:
    """Return the thickness of the stated gauge.

    Parameters
    ----------
    facts : Facts
        The job.

    Returns
    -------
    float
        Thickness [units of the job].

    Raises
    ------
    JobError
        If the system or the number is unknown.
    """
    thickness = gauge_thickness(facts["sheet.gauge"], facts["sheet.gauge_system"])
    # Twelve digits: 0.036 in is 0.9144 mm, not 0.9143999999999999.
    return float(f"{thickness / MM_PER_INCH if facts.units == 'inch' else thickness:.12g}")


def _focal_length(facts: Facts) -> float:
    return focal_length_of(
        facts["reflector.depth"],
        facts["reflector.rim_diameter"] / 2.0,
        conic_constant=facts["reflector.conic_constant"],
        asphere=tuple(facts["reflector.asphere"]),
    )


def _kind(facts: Facts) -> str:
    return "metal" if facts["forming.process"] in {"spinning", "shear-spinning"} else "plastic"


def _needs_kind(facts: Facts) -> bool:
    stated = isinstance(found(facts.typed, ["sheet", "properties"]), Mapping)
    return stated and not has_material(str(facts["sheet.material"]), "sheet")


def _needs_focal_length(facts: Facts) -> bool:
    return facts.was_typed("reflector.depth")


def _needs_thickness(facts: Facts) -> bool:
    return str(facts["sheet.gauge"]) in GAUGE_SYSTEMS.get(str(facts["sheet.gauge_system"]), {})


def _needs_feed(facts: Facts) -> bool:
    """Whether a roughness is asked for that a round nose can leave."""
    height = asked_cusp(facts)
    return 0.0 < height < float(facts["turning.nose_radius"]) * _unit(facts)


def asked_cusp(facts: Facts) -> float:
    """Return the height of the cusps that a job with a ``[turning]`` table asks for [mm], 0 where it asks for none."""
    if facts.typed.get("turning") is None:
        return 0.0
    mean = float(facts["turning.roughness_ra_um"])
    return 1e-3 * (rt_for_ra(mean) if mean else float(facts["turning.roughness_rt_um"]))


def feed_in_units(facts: Facts) -> float:
    """Return the finishing feed that leaves the roughness asked for [units of the job]."""
    unit = _unit(facts)
    feed = feed_for_rt(asked_cusp(facts), float(facts["turning.nose_radius"]) * unit)
    # Five digits, the last one downwards: a program writes no more, and the roughness is kept.
    step = 1e-5
    return float(f"{floor(feed / unit / step) * step:.5f}")


def _unit(facts: Facts) -> float:
    return MM_PER_INCH if facts.units == "inch" else 1.0


_DERIVED: Mapping[str, tuple[Callable[[Facts], bool], Callable[[Facts], Any]]] = MappingProxyType(
    {
        "reflector.focal_length": (_needs_focal_length, _focal_length),
        "sheet.thickness": (_needs_thickness, gauge_in_units),
        "sheet.properties.kind": (_needs_kind, _kind),
        "turning.finishing_feed": (_needs_feed, feed_in_units),
    }
)


def derived(facts: Facts) -> tuple[dict[str, Any], tuple[Finding, ...]]:
    """Return the values that follow from others, for the keys that were not typed.

    Parameters
    ----------
    facts : Facts
        The job.

    Returns
    -------
    tuple of dict and tuple of Finding
        Value by dotted key, and the depth that no face has.
    """
    values: dict[str, Any] = {}
    findings: list[Finding] = []
    for key, (needed, value_of) in _DERIVED.items():
        try:
            if not facts.was_typed(key) and needed(facts):
                values[key] = value_of(facts)
        except UnknownFactError:
            continue
        except JobError as error:
            findings.append(_no_such_depth(facts, str(error)))
    return values, tuple(findings)


def _no_such_depth(facts: Facts, reason: str) -> Finding:
    problem = f"value is {shown(facts['reflector.depth'], unit=facts.length_unit)}: {reason}"
    allowed = "a depth that a face of this rim_diameter, conic_constant and asphere can have"
    return Finding("reflector.depth", problem, allowed, "correct one of them")
