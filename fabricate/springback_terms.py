"""Springback in every term that a shop may use, whichever of them the job states.

Terms that lose the same depth at the rim are taken for the same springback: each is solved for from that loss. Between
axis and rim the laws differ, by little; the table of stations alone follows the law that the job states.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fabricate.chain import Chain
from fabricate.curvature_map import ReleasedFace, depth_loss, rim_slope_loss
from fabricate.springback import added_curvature, percent_losing, percent_of
from profiles.series import merged_breaks

ROWS = 17
NODES = 48
LEAST_FACTOR, MOST_FACTOR = 0.5, 2.0
ROUNDING = 1e-12

Rows = tuple[tuple[float, float], ...]


@dataclass(frozen=True)
class ShopTerms:
    """One springback in the shop's terms; what the job itself states stands here as stated.

    Parameters
    ----------
    focal_length_percent, curvature_percent : float or None
        The percentage of either law that loses the same depth at the rim [%]; None where none from −20 to 40 does.
    depth_loss : float
        Depth of the rim on the mould less that of the part [mm]; positive where the part comes out shallower.
    rim_slope_loss_deg : float
        Slope of the rim on the mould less that of the part [degrees].
    rim_opening : float
        How much the rim's diameter grows on release [mm].
    stations : tuple of (float, float) or None
        Rows of radius on the finished face [mm] and percentage [%], as the law ``stations`` has them, that lose the
        same depth at the rim; None where no table in these proportions does.
    """

    focal_length_percent: float | None
    curvature_percent: float | None
    depth_loss: float
    rim_slope_loss_deg: float
    rim_opening: float
    stations: Rows | None


def shop_terms(chain: Chain) -> ShopTerms:
    """Return the springback that a job states in all of the shop's terms, solved and not approximated.

    Parameters
    ----------
    chain : Chain
        The job's maps between part and mould [mm].

    Returns
    -------
    ShopTerms
        Lengths in mm.

    Raises
    ------
    JobError
        If the springback that the job states cannot be made.

    Notes
    -----
    All is of the reflecting face at the rim's material point, before shrinkage.
    """
    stated, part = chain.job.forming.springback, chain.released
    # What the sheet's own length hides is no springback.
    least = ROUNDING * part.meridian.end
    lost = _settled(depth_loss(part, chain.springback), least)
    turned = _settled(float(np.degrees(rim_slope_loss(part, chain.springback))), np.degrees(ROUNDING))
    opened = 2.0 * float(part.meridian.radius(part.rim) - chain.on_mould.radius(part.rim))
    return ShopTerms(
        focal_length_percent=_percent(chain, "focal-length", lost),
        curvature_percent=_percent(chain, "curvature", lost),
        depth_loss=lost if stated.depth_loss is None else stated.depth_loss,
        rim_slope_loss_deg=turned if stated.rim_slope_loss_deg is None else stated.rim_slope_loss_deg,
        rim_opening=_settled(opened, least),
        stations=_stations(chain, lost),
    )


def _settled(value: float, least: float) -> float:
    return 0.0 if abs(value) < least else value


def _percent(chain: Chain, law: str, lost: float) -> float | None:
    """Return the percentage of a law that loses a depth; the job's own where that is its law."""
    stated = chain.stated_springback
    if stated.table.law == law:
        return percent_of(stated)
    return 0.0 if lost == 0.0 else percent_losing(stated, law, lost, loss=depth_loss)


def _stations(chain: Chain, lost: float) -> Rows | None:
    """Return the table of stations in the proportions of the stated law; the job's own where it has one."""
    stated, part = chain.job.forming.springback, chain.released
    if stated.stations is not None:
        return stated.stations
    radii = np.linspace(0.0, 0.5 * chain.job.reflector.rim_diameter, ROWS)
    where = part.meridian.at_radius(radii)
    added = chain.on_mould.curvature(where) - part.meridian.curvature(where)
    percents = 100.0 * part.face.vertex_radius * added
    factor = 0.0 if lost == 0.0 else _factor(part, np.column_stack([radii, percents]), lost)
    if factor is None:
        return None
    # 0 is added so that there is no −0.
    return tuple(zip(radii.tolist(), (factor * percents + 0.0).tolist(), strict=True))


def _factor(part: ReleasedFace, rows: np.ndarray, lost: float) -> float | None:
    """Return the factor by which a table loses a depth; None where none near 1 does.

    The depth at the rim is ``∫ sin(ψ_part + c Δψ) ds``, c the factor; Gauss's rule is exact on pieces of the series.
    """
    from scipy.optimize import brentq

    on_mould = added_curvature(part, rows).load(part.meridian)
    nodes, weights = np.polynomial.legendre.leggauss(NODES)
    ends = merged_breaks(on_mould.breaks, part.meridian.breaks, start=0.0, end=part.rim)
    halves = 0.5 * np.diff(ends)[:, None]
    where = 0.5 * (ends[:-1] + ends[1:])[:, None] + halves * nodes
    slope = part.meridian.slope(where)
    turn = on_mould.slope(where) - slope

    def excess(factor: float) -> float:
        deeper = 2.0 * np.cos(slope + 0.5 * factor * turn) * np.sin(0.5 * factor * turn)
        return float((halves * weights * deeper).sum()) - lost

    if excess(LEAST_FACTOR) * excess(MOST_FACTOR) > 0.0:
        return None
    return float(brentq(excess, LEAST_FACTOR, MOST_FACTOR, xtol=1e-15, rtol=1e-15))
