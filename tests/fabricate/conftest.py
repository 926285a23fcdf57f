"""Shared strategies: ``st.from_type(Job)`` draws valid jobs over all processes, faces, laws, sheets and units.

Registered by type, because test modules cannot import one another.
"""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st

from fabricate.job import Job, parse_job
from fabricate.job_text import toml_value
from fabricate.materials import mould_materials, sheet_materials

_INCH = {"mm": 1.0, "inch": 25.4}
_CONTACTS = {
    "spinning": ("concave", "convex"),
    "shear-spinning": ("concave", "convex"),
    "drape-forming": ("concave",),
    "straight-vacuum": ("convex",),
}


def _dump(data: dict[str, Any], path: str = "") -> str:
    leaves = [f"{key} = {toml_value(value)}" for key, value in data.items() if not isinstance(value, dict)]
    tables = [_dump(value, f"{path}.{key}".lstrip(".")) for key, value in data.items() if isinstance(value, dict)]
    return "\n".join(([f"[{path}]"] if path else []) + leaves + tables)


def _numbers(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_nan=False, allow_subnormal=False)


@st.composite
def _springbacks(draw: st.DrawFn, rim: float, unit: float) -> dict[str, Any]:
    law = draw(st.sampled_from(["none", "focal-length", "curvature", "bending", "stations"]))
    if law == "none":
        return {"law": law}
    if law == "bending":
        estimate = {"accept_estimate": draw(st.booleans())} if draw(st.booleans()) else {}
        return {"law": law, "flow_stress_mpa": draw(_numbers(1.0, 500.0))} | estimate
    if law == "stations":
        radii = sorted(draw(st.sets(st.integers(0, 50), min_size=1, max_size=6)))
        return {"law": law, "stations": [[rim / 100.0 * step, draw(_numbers(-5.0, 8.0))] for step in radii]}
    values = {
        "percent": _numbers(-20.0, 40.0),
        "depth_loss": _numbers(-5.0, 5.0),
        "rim_slope_loss_deg": _numbers(-2, 5),
    }
    name = draw(st.sampled_from(sorted(values)))
    return {"law": law, name: draw(values[name]) / (unit if name == "depth_loss" else 1.0)}


@st.composite
def _thinnings(draw: st.DrawFn, process: str, rim: float, thickness: float) -> dict[str, Any]:
    laws = ["sine-law", "straight-vacuum", "stations"] + (["none"] if process != "shear-spinning" else [])
    law = draw(st.sampled_from(laws))
    if law != "stations":
        return {"law": law}
    return {"law": law, "stations": [[0.0, thickness], [rim / 2.0, thickness * draw(_numbers(0.4, 1.5))]]}


@st.composite
def _shrinkages(draw: st.DrawFn) -> dict[str, Any]:
    table: dict[str, Any] = {"percent": draw(_numbers(0.0, 3.0))}
    if draw(st.booleans()):
        table |= {"reference": "hot-mould", "mould_expansion": 23e-6, "temperature_rise": draw(_numbers(0.0, 90.0))}
    return table


@st.composite
def _turnings(draw: st.DrawFn, units: str) -> dict[str, Any]:
    words = {"mm": ["G21", "G71", "none"], "inch": ["G20", "G70", "none"]}[units]
    feed = draw(st.sampled_from(["G99", "G95"]))
    control = {
        "x_word": draw(st.sampled_from(["diameter", "radius"])),
        "plane_word": draw(st.sampled_from(["G18", "none"])),
        "units_word": draw(st.sampled_from(words)),
        "absolute_word": draw(st.sampled_from(["none", "G90"] if feed == "G95" else ["none"])),
        "feed_per_rev_word": feed,
        "spindle_limit_word": draw(st.sampled_from(["G50", "G92", "D", "none"])),
        "arcs": draw(st.sampled_from(["centre", "radius", "lines"])),
        "decimals": draw(st.integers(3 if units == "mm" else 4, 6)),
    }
    table: dict[str, Any] = {
        "spindle_direction": draw(st.sampled_from(["M3", "M4"])),
        "spindle_limit_untrued": draw(st.integers(50, 300)),
        "spindle_limit": draw(_numbers(300.0, 3000.0)),
        "rim_speed_limit": draw(_numbers(5.0, 30.0)),
    }
    if draw(st.booleans()):
        table |= {"nose_radius": 0.8 / _INCH[units], "tool_post": "front", "control_point": "nose-centre"}
    return table | {"control": control}


@st.composite
def _sheets(draw: st.DrawFn, unit: float) -> tuple[dict[str, Any], float, bool]:
    thickness = draw(_numbers(0.3, 6.0)) / unit
    sheet: dict[str, Any] = {"thickness": thickness}
    row = draw(st.sampled_from([*sheet_materials(), None]))
    if row is None:
        numbers = {"youngs_modulus_mpa": 70000, "poisson": 0.33, "yield_mpa": 40.0, "density_kg_m3": 2700}
        return sheet | {"material": "sheet of the yard", "properties": numbers | {"kind": "plastic"}}, thickness, True
    if draw(st.booleans()):
        thickness = 0.127 * 92.0 ** ((36 - 16) / 39.0) / unit
        sheet = {"gauge": 16, "gauge_system": "AWG"}
    return sheet | {"material": row.name}, thickness, row.kind == "plastic"


@st.composite
def job_files(draw: st.DrawFn) -> str:
    """Draw the text of a valid job file."""
    units = draw(st.sampled_from(["mm", "inch"]))
    unit = _INCH[units]
    rim = draw(_numbers(40.0, 3000.0)) / unit
    focal = rim * draw(_numbers(0.15, 2.0))
    process = draw(st.sampled_from(sorted(_CONTACTS)))
    sheet, thickness, plastic = draw(_sheets(unit))
    reflector: dict[str, Any] = {"rim_diameter": rim, "reflecting_face": draw(st.sampled_from(["concave", "convex"]))}
    by_depth = draw(st.booleans())
    reflector |= {"depth": rim**2 / (16.0 * focal)} if by_depth else {"focal_length": focal}
    reflector |= {"hole_diameter": rim * 0.1} if draw(st.booleans()) else {}
    reflector |= {"asphere": [draw(_numbers(-0.01, 0.01)) / rim**3]} if draw(st.booleans()) else {}
    reflector |= {"conic_constant": draw(_numbers(-3.0, -0.8))} if not by_depth and draw(st.booleans()) else {}
    forming: dict[str, Any] = {
        "process": process,
        "contact_face": draw(st.sampled_from(_CONTACTS[process])),
        "springback": draw(_springbacks(rim, unit)),
        "thinning": draw(_thinnings(process, rim, thickness)),
    }
    forming |= {"shrinkage": draw(_shrinkages())} if plastic or draw(st.booleans()) else {}
    data: dict[str, Any] = {
        "title": draw(st.text("abcäöé \"\\'#", max_size=20).map(lambda text: f"Quillet Bay {text}")),
        "units": units,
        "reflector": reflector,
        "sheet": sheet,
        "forming": forming,
        "tolerance": {"files": {"chord_error": draw(_numbers(0.001, 0.1)) / unit}},
    }
    data |= {"mould": {"material": draw(st.sampled_from(mould_materials())).name}} if draw(st.booleans()) else {}
    data |= {"turning": draw(_turnings(units))} if draw(st.booleans()) else {}
    return _dump(data)


st.register_type_strategy(Job, job_files().map(lambda text: parse_job(text, name="drawn.toml")))
