"""What the shop is told or asked about a job: the questions of the job itself, and what only its mould shows.

A *notice* is a sentence with the key or the number it is about; the job goes on. A new notice is one function here and
one row of the table at the end.
"""

from __future__ import annotations

from collections.abc import Callable

from fabricate.job import questions
from fabricate.order import Order

DEEPEST_CAVITY = 0.75


def notices(order: Order) -> tuple[str, ...]:
    """Return everything that the shop should be told or asked.

    Parameters
    ----------
    order : Order
        The job and its exact geometry.

    Returns
    -------
    tuple of str
        One sentence each.
    """
    own = (notice for look in _NOTICES if (notice := look(order)))
    plan = order.turning_plan.notes if order.job.turning is not None else ()
    return (*questions(order.job), *own, *plan)


def _no_program(order: Order) -> str:
    return "" if order.job.turning is not None else "there is no [turning] table: no turning program is written"


def _wide_bore(order: Order) -> str:
    bore, hole = order.job.mould.bore_diameter, order.job.reflector.hole_diameter
    if bore <= hole:
        return ""
    return (
        f"mould.bore_diameter is {bore:g} {order.job.units} and reflector.hole_diameter {hole:g}: the reflecting "
        "face has nothing under it there; is a bore that wide meant?"
    )


def _deep_cavity(order: Order) -> str:
    if order.mould.kind == "male":
        return ""
    curve = order.mould.curve
    depth, width = float(order.mould.land_height), 2.0 * float(curve.radius(curve.end))
    if depth <= DEEPEST_CAVITY * width:
        return ""
    return (
        f"the cavity is {depth / order.unit:.4g} {order.job.units} deep and {width / order.unit:.4g} wide, more than "
        f"{100.0 * DEEPEST_CAVITY:.0f} % (common practice): will the sheet still reach its bottom?"
    )


def _soft_mould(order: Order) -> str:
    row, sheet = order.job.mould.row, order.job.sheet.row
    softens = None if row is None else row.softening_temperature_c
    if row is None or softens is None or sheet.forming_temperature_c is None:
        return ""
    if softens >= sheet.forming_temperature_c:
        return ""
    return (
        f'mould.material "{row.name}" softens at about {softens:g} °C and the sheet is formed at about '
        f"{sheet.forming_temperature_c:g} °C: will the mould hold its shape?"
    )


def _nothing_to_clamp(order: Order) -> str:
    forming, mould = order.job.forming, order.job.mould
    if forming.process != "straight-vacuum" or mould.land_width > 0.0 or mould.outer_diameter > 0.0:
        return ""
    return (
        f'mould.land_width is {mould.land_width:g} with process "{forming.process}": there is no land for the sheet '
        "to seal on; is there a frame beside the mould?"
    )


def _short_thickness_table(order: Order) -> str:
    rows = order.job.forming.thinning.stations
    if not rows:
        return ""
    rim = 0.5 * order.job.reflector.rim_diameter
    if rows[0][0] <= 0.5 * order.job.reflector.hole_diameter and rows[-1][0] >= rim:
        return ""
    return (
        f"forming.thinning.stations runs from radius {rows[0][0]:g} to {rows[-1][0]:g} {order.job.units} and the rim "
        f"lies at {rim:g}: beyond its rows the thickness is taken to stay as it is there"
    )


_NOTICES: tuple[Callable[[Order], str], ...] = (
    _no_program,
    _wide_bore,
    _deep_cavity,
    _soft_mould,
    _nothing_to_clamp,
    _short_thickness_table,
)
