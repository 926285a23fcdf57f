"""The summary of a made package: the mould's key numbers, the deviation of each file, and every warning."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import asdict, dataclass
from textwrap import wrap
from typing import Any

import numpy as np

from fabricate.drawing import unit_length
from fabricate.holes import drilling_words
from fabricate.make import MadePackage
from fabricate.measures import Units
from fabricate.notices import notices
from fabricate.order import Order
from fabricate.part_report import STATEMENT, UNIT_NAMES, forming_json, forming_rows, prediction_json, prediction_rows
from fabricate.proof import Proof
from fabricate.verdict import FileVerdict
from profiles.best_parabola import best_parabola

WIDTH = 100
MEANING = (
    "Proved means that the files match the mould curve of the stated model. What the part will be depends on the "
    "springback and the thickness that the job states: measure the first part."
)
PLACES = {"male": "male mould (chuck)", "female": "female mould (cavity)"}


@dataclass(frozen=True)
class MouldFigures:
    """Key numbers of a mould curve, lengths in the unit of the job.

    Parameters
    ----------
    kind : str
        "male" or "female".
    depth : float
        Height of the rim's material point over the mould's vertex.
    rim_radius, rim_z : float
        Where the rim's material point lies on the mould: radius, and Z from the lathe's work zero. A rim that is cut
        on the mould is cut at this radius.
    end_radius : float
        Radius at which the forming surface ends, past the trim.
    parabola_focal_length, parabola_departure : float
        The parabola of least largest departure from the curve, and that departure.
    springback_words : str
        Which way the part moves on release, and by how much at the rim.
    arcs : int
        Number of arcs of the mould curve.
    arcs_limit : float
        The number that theory allows for the tolerance of the files.
    facets : int
        Number of triangles of the solid.
    """

    kind: str
    depth: float
    rim_radius: float
    rim_z: float
    end_radius: float
    parabola_focal_length: float
    parabola_departure: float
    springback_words: str
    arcs: int
    arcs_limit: float
    facets: int


def mould_figures(order: Order) -> MouldFigures:
    """Return the key numbers of an order's mould.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.

    Returns
    -------
    MouldFigures
        In the unit of the job.
    """
    chain, mould, unit = order.chain, order.mould, order.unit
    rim_radius, rim_height = chain.point_on_mould(chain.released.rim)
    fit = best_parabola(mould.curve)
    return MouldFigures(
        kind=mould.kind,
        depth=rim_height / unit,
        rim_radius=rim_radius / unit,
        rim_z=(-rim_height if mould.kind == "male" else rim_height - mould.land_height) / unit,
        end_radius=float(mould.curve.radius(mould.curve.end)) / unit,
        parabola_focal_length=fit.focal_length / unit,
        parabola_departure=fit.departure / unit,
        springback_words=_springback_words(order),
        arcs=len(order.forming_arcs.path),
        arcs_limit=order.forming_arcs.limit,
        facets=len(order.mesh.triangles),
    )


def _springback_words(order: Order) -> str:
    """Say which way the reflecting face moves on release: depth, opening and slope at the rim's material point."""
    chain, unit, name = order.chain, order.unit, UNIT_NAMES[order.job.units]
    on_mould, part, rim = chain.on_mould, chain.released.meridian, chain.released.rim
    deeper = float(on_mould.height(rim) - part.height(rim)) / unit
    opened = 2.0 * float(part.radius(rim) - on_mould.radius(rim)) / unit
    slope = float(np.degrees(on_mould.slope(rim) - part.slope(rim)))
    if max(abs(deeper), abs(opened)) < 1e-9:
        return "none stated: the part is taken to keep the mould's shape"
    depth_word = "shallower" if deeper > 0.0 else "deeper"
    rim_word = "opens" if opened > 0.0 else "closes"
    return (
        f"on release the part is taken to come out {abs(deeper):.3f} {name} {depth_word} than it lies on the mould, "
        f"its rim {rim_word} by {abs(opened):.3f} {name} on the diameter and {abs(slope):.3f} degrees"
        f"{_at_one_radius(order)}"
    )


def _at_one_radius(order: Order) -> str:
    """Say how much lower the rim stands than the face on the mould at the same radius, where a depth gauge stands."""
    chain, unit, name = order.chain, order.unit, UNIT_NAMES[order.job.units]
    on_mould, part, rim = chain.on_mould, chain.released.meridian, chain.released.rim
    radius = float(part.radius(rim))
    if radius > float(on_mould.radius(on_mould.end)):
        return ""
    low = float(on_mould.height(on_mould.at_radius(radius)) - part.height(rim)) / unit
    return (
        f"; a depth gauge at radius {radius / unit:.3f} {name} on both reads {abs(low):.3f} {name} "
        f"{'less' if low > 0.0 else 'more'} on the part"
    )


def summary_json(order: Order, made: MadePackage) -> dict[str, Any]:
    """Return the summary as plain values for ``make --json``.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    made : MadePackage
        The package.

    Returns
    -------
    dict
        ``folder``, ``title``, ``units``, ``mould``, ``forming``, ``predicted``, ``warnings`` and ``proof``; lengths of
        ``mould`` and ``forming`` in the unit of the job.
    """
    return {
        "folder": str(made.folder),
        "title": order.job.title,
        "units": order.job.units,
        "mould": asdict(mould_figures(order)),
        "forming": forming_json(order),
        "predicted": prediction_json(order, made.parts),
        "warnings": list(notices(order)),
        "proof": made.proof.as_json(),
    }


def summary_text(order: Order, made: MadePackage) -> str:
    """Return the summary for people.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.
    made : MadePackage
        The package.

    Returns
    -------
    str
        Lines of at most about 100 characters.
    """
    head = f"{order.job.title}, revision {order.job.revision}: {PLACES[order.mould.kind]}"
    parts = (
        [head],
        _mould_lines(order),
        _lines(forming_rows(order)),
        proof_lines(made.proof, order.job.units),
        [*wrap(f"The part that these files lead to: {STATEMENT}.", WIDTH), *_lines(prediction_rows(order, made.parts))],
        _warning_lines(order),
        wrap(MEANING, WIDTH),
        [f"The package is in {made.folder}"],
    )
    return "\n\n".join("\n".join(lines) for lines in parts if lines) + "\n"


def proof_lines(proof: Proof, units: Units) -> list[str]:
    """Return the proof as a table for people, with every finding under it.

    Parameters
    ----------
    proof : Proof
        What was found.
    units : {"mm", "inch"}
        Units of the job, in which lengths are shown.

    Returns
    -------
    list of str
        A line for each file: largest deviation, its radius, lean [mrad], tolerance and verdict.
    """
    lines = [f"{'file':<18}{'deviation':>12}{'at radius':>12}{'lean':>12}{'allowed':>12}"]
    for name, verdict in proof.files.items():
        allowed = f" {verdict.tolerance_mm / unit_length(units):.5g}".rjust(9) + f" {UNIT_NAMES[units]}"
        lines.append(f"{name:<18}{_figures(verdict, units)}{allowed}  {'within' if verdict.passed else 'FAILED'}")
    findings = [f"{name}: {finding}" for name, verdict in proof.files.items() for finding in verdict.findings]
    return lines + [line for finding in findings for line in wrap(finding, WIDTH, subsequent_indent="  ")]


def _figures(verdict: FileVerdict, units: Units) -> str:
    if verdict.normal_mm is None or verdict.at_radius_mm is None or verdict.slope_mrad is None:
        return f"{'not measured':>36}"
    unit, name = unit_length(units), UNIT_NAMES[units]
    decimals = 6 if units == "mm" else 7
    deviation = f"{verdict.normal_mm / unit:>{decimals + 3}.{decimals}f} {name}"
    radius, lean = f" {verdict.at_radius_mm / unit:.2f}", f" {verdict.slope_mrad:.3f}"
    return f"{deviation:>12}{radius:>9} {name}{lean:>7} mrad"


def _mould_lines(order: Order) -> list[str]:
    figures, name = mould_figures(order), UNIT_NAMES[order.job.units]
    trim = "trim on the mould" if order.job.forming.trim == "on-mould" else "trim after release; the rim lies"
    rows = (
        ("depth", f"{figures.depth:.4f} {name}, vertex to rim on the mould"),
        ("rim", f"{trim} at radius {figures.rim_radius:.4f} {name}, Z {figures.rim_z:.4f} {name}"),
        ("forming surface", f"ends at radius {figures.end_radius:.4f} {name}, past the trim"),
        (
            "best parabola",
            f"f {figures.parabola_focal_length:.4f} {name}; the mould curve departs from it by up to "
            f"{figures.parabola_departure:.5f} {name}",
        ),
        ("springback", figures.springback_words),
        ("arcs", f"{figures.arcs} (theory allows {figures.arcs_limit:.2f} for this chord error)"),
        ("solid", f"{figures.facets} triangles"),
        *((("stock", _stock_words(order)),) if order.job.turning is not None else ()),
        *(("drilled", text) for text in drilling_words(order.job)),
    )
    return _lines(rows)


def _stock_words(order: Order) -> str:
    fit, unit, name = order.stock_fit, order.unit, UNIT_NAMES[order.job.units]
    size = f"{fit.diameter / unit:.2f} {name} wide, {fit.length / unit:.2f} {name} long"
    if fit.stock_mass is None or fit.mould_mass is None:
        return f"{size}; its mass is not known, as mould.material is not stated"
    return f"{size}; {fit.stock_mass:.4g} kg, of which {fit.mould_mass:.4g} kg are the mould"


def _lines(rows: Iterable[tuple[str, str]]) -> list[str]:
    return [line for label, text in rows for line in _labelled(label, text)]


def _labelled(label: str, text: str) -> list[str]:
    return wrap(text, WIDTH, initial_indent=f"{label:<18}", subsequent_indent=" " * 18)


def _warning_lines(order: Order) -> list[str]:
    return [line for text in notices(order) for line in wrap(f"Note: {text}", WIDTH, subsequent_indent="  ")]
