"""What the shop is told or asked about a job: the questions of the job itself, and what only its mould shows.

A *notice* is a sentence with the key or the number it is about; the job goes on. A new notice is one function here and
one row of the table at the end; what lies beyond the trade's limits stands in ``forming_limits``.
"""

from __future__ import annotations

from collections.abc import Callable
from math import degrees

from fabricate import forming_limits
from fabricate.curvature_map import depth_loss
from fabricate.holes import drilling_words, sheet_over
from fabricate.hoop_strain import hoop_strain
from fabricate.job import questions
from fabricate.order import BLOCK_PROGRAM, Order

LEAST_CLOSING = 1e-9


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
    block = order.block_plan.notes if order.turns_block else ()
    of_block = (f"{BLOCK_PROGRAM}: {note}" for note in block)
    return (*questions(order.job), *own, *forming_limits.warnings(order), *plan, *of_block)


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


def _locking_groove(order: Order) -> str:
    lead, table = order.mould.lead, order.job.mould.lead_out
    if lead is None or table is None or len(lead) == 1:
        return ""
    side = degrees(0.5 * float(lead.turns[1]) + float(order.mould.curve.slope(order.mould.curve.end)))
    if side <= 90.0:
        return ""
    return (
        f"mould.lead_out.groove_depth is {table.groove_depth:g} {order.job.units}: a side of the groove leans back by "
        f"{side - 90.0:.3g} degrees from the axis, and a bead rolled into it holds the part on the mould; how does it "
        "come off?"
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


def _overstretched(order: Order) -> str:
    """Say where the springback asks more of the sheet around the axis than it can spring; see ``hoop_strain``."""
    strain = hoop_strain(order.chain)
    if not strain.exceeds_yield:
        return ""
    way = "stretches" if strain.largest > 0.0 else "shrinks"
    return (
        f"forming.springback: what is stated {way} the sheet around the axis by {100.0 * abs(strain.largest):.2g} % on "
        f"release, at radius {strain.at_radius / order.unit:.4g} {order.job.units}, and this sheet springs by "
        f"{100.0 * strain.yield_strain:.2g} % before it yields (yield over modulus, as bought; work-hardened, "
        "it springs more): beyond that it was probably never tight on the mould, or the model is wrong; measure the "
        "first part at several radii"
    )


def _closing_rim(order: Order) -> str:
    """Ask about a springback that closes the rim on the whole, unless the job's own figures were asked about."""
    if any(question.startswith("forming.springback.") for question in questions(order.job)):
        return ""
    chain = order.chain
    part, rim = chain.released, chain.released.rim
    deeper = -depth_loss(part, chain.springback)
    closed = 2.0 * float(chain.on_mould.radius(rim) - part.meridian.radius(rim))
    if max(deeper, closed) < LEAST_CLOSING * part.meridian.end:
        return ""
    return (
        f'forming.springback.law is "{order.job.forming.springback.law}": on the whole the part closes on release, its '
        f"rim {closed / order.unit:.3g} {order.job.units} smaller in diameter and {deeper / order.unit:.3g} "
        f"{order.job.units} deeper; is that meant?"
    )


def _drilled_later(order: Order) -> str:
    words = drilling_words(order.job)
    if not words or order.job.turning is None:
        return ""
    return (
        f"drilled, not turned: {'; '.join(words)}. Bolt holes come before turning, as the backplate carries the stock; "
        "air holes after it"
    )


def _wide_air_holes(order: Order) -> str:
    """Ask about air holes that are wider than the sheet is thick where it lies over them."""
    air = order.job.mould.air_holes
    if air is None:
        return ""
    thickness = sheet_over(order.chain, 0.5 * air.circle_diameter * order.unit) / order.unit
    if air.diameter <= thickness * (1.0 + 1e-6):
        return ""
    return (
        f"mould.air_holes.diameter is {air.diameter:g} {order.job.units} and the sheet over the holes is "
        f"{thickness:.3g} thick: a hole wider than the sheet is thick may mark it (from memory, of thermoforming); is "
        "that meant?"
    )


_NOTICES: tuple[Callable[[Order], str], ...] = (
    _no_program,
    _wide_bore,
    _locking_groove,
    _soft_mould,
    _nothing_to_clamp,
    _short_thickness_table,
    _overstretched,
    _closing_rim,
    _drilled_later,
    _wide_air_holes,
)
