"""What forming does to the sheet of a job, in figures and in words: springback, thickness, blank, rim, and the part.

The predicted part comes from files as they were written, read back. Lengths of the figures are in the unit of the job.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict
from pathlib import Path
from typing import Any

import numpy as np

from fabricate.blank import Blank
from fabricate.drawing import MOULD_CURVE
from fabricate.hoop_strain import hoop_strain
from fabricate.order import DRAWING, PROGRAM, Order
from fabricate.predicted import PredictedPart, Sensitivity, predicted_part, sensitivities
from fabricate.prove_drawing import layer_path
from fabricate.rim import rim_of
from fabricate.shrinkage import shrinkage_conventions
from fabricate.springback_terms import ShopTerms, shop_terms
from fabricate.turning_proof import finish_path
from outputs.dxf import read_drawing
from outputs.text_file import read_text

STATEMENT = (
    "an arithmetic check under the stated springback, thickness and shrinkage; no verdict on a part: measure the first"
)
UNIT_NAMES = {"mm": "mm", "inch": "in"}

LEAST_MOVE = 5e-4
"""A shorter move is none [units of the job]."""

Row = tuple[str, str]


def predicted_parts(order: Order, folder: Path) -> Mapping[str, PredictedPart]:
    """Return the part that each written curve leads to.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    folder : Path
        Where its files are.

    Returns
    -------
    mapping of str to PredictedPart
        By file name: the drawing, and the program where there is one [mm].

    Raises
    ------
    FormatError
        If a file cannot be read.
    """
    chain, drawing = order.chain, folder / DRAWING
    curve = layer_path(read_drawing(drawing), MOULD_CURVE, order, drawing)
    parts = {DRAWING: predicted_part(chain, order.mould.from_lathe(curve))}
    if order.job.turning is not None:
        path, clearance = finish_path(read_text(folder / PROGRAM), order.job, order.mould)
        parts[PROGRAM] = predicted_part(chain, path, clearance=clearance)
    return parts


def prediction_json(order: Order, parts: Mapping[str, PredictedPart]) -> dict[str, Any]:
    """Return predicted parts and their sensitivities as plain values [mm, mrad].

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    parts : mapping of str to PredictedPart
        By file name.

    Returns
    -------
    dict
        ``statement``, ``files`` and ``sensitivities``.
    """
    moved = [
        {"cause": one.cause, **{f"{name}_mm": value for name, value in asdict(one).items() if name != "cause"}}
        for one in sensitivities(order.chain)
    ]
    files = {name: _part_json(part) for name, part in parts.items()}
    return {"statement": STATEMENT, "files": files, "sensitivities": moved}


def _part_json(part: PredictedPart) -> dict[str, Any]:
    radius = part.stations()
    form, slope = part.form_error(radius), part.slope_error(radius)
    return {
        "rim_diameter_mm": 2.0 * part.rim_radius,
        "depth_mm": part.depth,
        "best_focal_length_mm": part.best_focal_length,
        "largest_form_error_mm": part.largest_form_error[0],
        "at_radius_mm": part.largest_form_error[1],
        "slope_rms_mrad": 1e3 * part.slope_rms,
        "stations": [
            {"radius_mm": where, "form_error_mm": error, "slope_error_mrad": 1e3 * lean}
            for where, error, lean in zip(radius.tolist(), form.tolist(), slope.tolist(), strict=True)
        ],
    }


def forming_json(order: Order) -> dict[str, Any]:
    """Return what forming does, as plain values in the unit of the job.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.

    Returns
    -------
    dict
        ``units``, ``springback``, ``hoop_strain``, ``blank``, ``rim`` and ``shrinkage``; masses in kg, slopes in
        degrees.
    """
    chain, unit, blank = order.chain, order.unit, order.blank
    terms, rim, strain, sizes = shop_terms(chain), rim_of(chain), hoop_strain(chain), shrinkage_conventions(chain)
    plain = {"rule", "blank_mass", "part_mass", "tolerance_share", "mean_area_ratio", "draw_ratio"}
    figures = asdict(blank) | {"developed_difference": blank.developed_difference}
    return {
        "units": order.job.units,
        "springback": {
            "focal_length_percent": terms.focal_length_percent,
            "curvature_percent": terms.curvature_percent,
            "depth_loss": terms.depth_loss / unit,
            "rim_slope_loss_deg": terms.rim_slope_loss_deg,
            "rim_opening": terms.rim_opening / unit,
            "stations": terms.stations and [[radius / unit, percent] for radius, percent in terms.stations],
        },
        "hoop_strain": asdict(strain) | {"at_radius": strain.at_radius / unit},
        "blank": {
            name: value if name in plain or value is None else value / unit ** (3 if name == "volume" else 1)
            for name, value in figures.items()
        },
        "rim": {
            "mould_radius": rim.mould_radius / unit,
            "mould_z": rim.mould_z / unit,
            "diameter": rim.diameter / unit,
            "outside_diameter": rim.outside_diameter / unit,
            "slope_deg": float(np.degrees(rim.slope)),
            "thickness": rim.thickness / unit,
        },
        "shrinkage": {
            "percent": sizes.percent,
            "mould_rim_diameter": sizes.by_mould / unit,
            "mould_rim_diameter_by_part": sizes.by_part / unit,
            "difference": sizes.difference / unit,
        },
    }


def forming_rows(order: Order) -> list[Row]:
    """Return what forming does, as labels and sentences for people.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.

    Returns
    -------
    list of (str, str)
        Springback in every term, thickness, blank, rim and shrinkage.
    """
    terms, blank = shop_terms(order.chain), order.blank
    rows = [("springback as", _terms_words(terms, order)), ("hoop strain", _strain_words(order))]
    if terms.depth_loss == 0.0:
        rows = []
    rows += [("thickness", _thickness_words(blank, order)), ("blank", _blank_words(blank, order))]
    if blank.draw_ratio is not None:
        rows.append(("draw", _draw_words(blank, order)))
    rows += [
        ("mass", f"blank {blank.blank_mass:.3f} kg, part {blank.part_mass:.3f} kg"),
        ("rim of part", _rim_words(order)),
    ]
    if order.job.forming.shrinkage.percent:
        rows.append(("shrinkage", _shrinkage_words(order)))
    return rows


def _length(value: float, order: Order, decimals: int = 3) -> str:
    more = 0 if order.job.units == "mm" else 1
    return f"{value / order.unit:.{decimals + more}f} {UNIT_NAMES[order.job.units]}"


def _terms_words(terms: ShopTerms, order: Order) -> str:
    said = [
        f"{terms.focal_length_percent:.3f} % of focal length" if terms.focal_length_percent is not None else "",
        f"{terms.curvature_percent:.3f} % of curvature" if terms.curvature_percent is not None else "",
        f"depth_loss {_length(terms.depth_loss, order)}",
        f"rim_slope_loss_deg {terms.rim_slope_loss_deg:.4f}",
    ]
    text = ", or ".join(one for one in said if one) + ": the same depth at the rim"
    rows = terms.stations
    if rows is None:
        return text
    picked = (rows[0], rows[len(rows) // 2], rows[-1])
    table = ", ".join(f"{percent:.2f} % at {_length(radius, order, 1)}" for radius, percent in picked)
    return f"{text}; as stations, the share of 1/(2f) that is lost at each radius: {table} (all rows: make --json)"


def _strain_words(order: Order) -> str:
    strain = hoop_strain(order.chain)
    way = "stretches" if strain.largest > 0.0 else "shrinks"
    return (
        f"that release {way} the sheet around the axis by {100.0 * abs(strain.largest):.3f} % at radius "
        f"{_length(strain.at_radius, order, 2)}; before it yields it springs {100.0 * strain.yield_strain:.3f} %"
    )


def _thickness_words(blank: Blank, order: Order) -> str:
    text = (
        f"{_length(blank.rim_thickness, order)} at the rim, thinnest {_length(blank.thinnest, order)} at radius "
        f"{_length(blank.thinnest_radius, order, 2)}; "
    )
    if not blank.tolerance_share:
        return text + "the mirror lies on the mould, so none of the sheet's tolerance reaches it"
    share = f"{100.0 * blank.tolerance_share:.1f} % of the sheet's tolerance reaches the mirror, which is the free face"
    if blank.form_error is None:
        return f"{text}{share}; its tolerance is not stated (sheet.thickness_tolerance)"
    return f"{text}{share}: ±{_length(blank.form_error, order)}"


def _blank_words(blank: Blank, order: Order) -> str:
    by = {
        "area": "of the reflecting face's area on the mould with its trim, as the sheet keeps its thickness",
        "diameter": "the formed sheet's own diameter, as shear spinning keeps it",
        "volume": "of the formed sheet's volume",
        "clamp": "the clamp's opening and its grip",
    }[blank.rule]
    forming = order.job.forming
    more = ", flange and bead included" if forming.flange_width or forming.bead_allowance else ""
    return (
        f"diameter {_length(blank.diameter, order, 2)}, {by}{more}; the rule of developed length would say "
        f"{_length(blank.developed_length, order, 2)}, {_length(abs(blank.developed_difference), order, 2)} "
        f"{'more' if blank.developed_difference >= 0.0 else 'less'}, and is not used"
    )


def _draw_words(blank: Blank, order: Order) -> str:
    return (
        f"{_length(blank.depth_of_draw or 0.0, order, 2)} deep in a clamp opening of "
        f"{_length(blank.clamp_opening or 0.0, order, 2)}, ratio {blank.draw_ratio:.3f}; over the mould's mouth "
        f"the sheet's area grows {blank.mean_area_ratio:.3f} times"
    )


def _rim_words(order: Order) -> str:
    rim = rim_of(order.chain)
    return (
        f"diameter {_length(rim.diameter, order)} on the reflecting face, {_length(rim.outside_diameter, order)} over "
        "the sheet's outside edge"
    )


def _shrinkage_words(order: Order) -> str:
    sizes = shrinkage_conventions(order.chain)
    return (
        f"{sizes.percent:g} % as part/(1 − S), ISO 294-4: the rim is {_length(sizes.by_mould, order)} wide on the "
        f"mould; part·(1 + S) would make it {_length(sizes.difference, order, 4)} less"
    )


def prediction_rows(order: Order, parts: Mapping[str, PredictedPart]) -> list[Row]:
    """Return predicted parts and sensitivities, as labels and sentences for people.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    parts : mapping of str to PredictedPart
        By file name.

    Returns
    -------
    list of (str, str)
        A row for each file, then one for each cause.
    """
    rows = [(name, _part_words(part, order)) for name, part in parts.items()]
    moved = [f"{one.cause}: {_moved_words(one, order)}" for one in sensitivities(order.chain)]
    return [*rows, *(("" if number else "sensitive to", text) for number, text in enumerate(moved))]


def _moved_words(moved: Sensitivity, order: Order) -> str:
    if max(abs(moved.focal_length), abs(moved.rim_sag), abs(moved.rim_diameter)) < LEAST_MOVE * order.unit:
        job = order.job
        on_mould = moved.cause.startswith("a sheet") and job.forming.contact_face == job.reflector.reflecting_face
        return (
            "nothing, as the mirror lies on the mould"
            if on_mould
            else f"less than {_length(LEAST_MOVE * order.unit, order, 4)}"
        )
    return (
        f"focus {_signed(moved.focal_length, order)}, sag at the rim {_signed(moved.rim_sag, order)}, rim diameter "
        f"{_signed(moved.rim_diameter, order)}"
    )


def _part_words(part: PredictedPart, order: Order) -> str:
    form, where = part.largest_form_error
    return (
        f"rim diameter {_length(2.0 * part.rim_radius, order)}, depth {_length(part.depth, order)}, best focal length "
        f"{_length(part.best_focal_length, order)}; form error up to {_length(abs(form), order, 4)} at radius "
        f"{_length(where, order, 1)}, slope error {1e3 * part.slope_rms:.3f} mrad RMS"
    )


def _signed(value: float, order: Order) -> str:
    # Nothing is written without a sign: a last digit of rounding is no direction.
    return (
        _length(0.0, order)
        if abs(value) < LEAST_MOVE * order.unit
        else ("+" if value > 0.0 else "−") + _length(abs(value), order)
    )
