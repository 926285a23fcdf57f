"""The sag table for the bench: what a depth gauge should read at each station, and between which limits.

Sag is measured from the vertex of the reflecting face, towards the focus positive. Stations are even in radius, from
the edge of the hole (or the axis) to the rim. All values are in the job's own units.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fabricate.chain import Chain
from fabricate.measures import MM_PER_INCH, Units
from outputs.table import Column

Array = NDArray[np.float64]

STATIONS = 17
HASH_DIGITS = 12
FEWEST_DECIMALS = {"mm": 4, "inch": 5}
SLOPE_DECIMALS = 4
SUFFIX = {"mm": "mm", "inch": "in"}


@dataclass(frozen=True, eq=False)
class SagTable:
    """Stations of the reflecting face, in the unit of the job.

    Parameters
    ----------
    units : {"mm", "inch"}
        Unit of the lengths.
    radius : ndarray of shape (n,)
        Distance of each station from the axis.
    part_sag, lower, upper : ndarray of shape (n,)
        Sag of the finished part and its limits.
    slope_deg : ndarray of shape (n,)
        Slope of the finished part [degrees].
    mould_sag : ndarray of shape (n,)
        Height of the mould over its vertex at the same radius; NaN where the forming surface does not reach.
    """

    units: Units
    radius: Array
    part_sag: Array
    lower: Array
    upper: Array
    slope_deg: Array
    mould_sag: Array


def sag_table(chain: Chain, units: Units, *, stations: int = STATIONS) -> SagTable:
    """Return the sag table of a job.

    Parameters
    ----------
    chain : Chain
        The job's maps from part to mould [mm].
    units : {"mm", "inch"}
        Unit of the table.
    stations : int
        Number of stations, at least 2.

    Returns
    -------
    SagTable
        The stations.

    Notes
    -----
    The tolerance band along the normal is wider along the axis: ``sag ∓ profile √(1 + tan² ψ)``.
    """
    reflector = chain.job.reflector
    radius = np.linspace(0.5 * reflector.hole_diameter, 0.5 * reflector.rim_diameter, stations)
    face = chain.released.face
    sag, incline = face.height(radius), face.incline(radius)
    band = chain.job.tolerance.part.profile * np.hypot(1.0, incline)
    unit = 1.0 if units == "mm" else MM_PER_INCH
    return SagTable(
        units,
        radius / unit,
        sag / unit,
        (sag - band) / unit,
        (sag + band) / unit,
        np.degrees(np.arctan(incline)),
        _height_at(chain, radius) / unit,
    )


def sag_columns(table: SagTable, job_hash: str, tolerance: float) -> tuple[Column, ...]:
    """Return the columns of a sag table as the bench gets it.

    Parameters
    ----------
    table : SagTable
        The stations.
    job_hash : str
        SHA-256 of the job file.
    tolerance : float
        Largest departure allowed in a file [mm]; a fine one asks for more digits.

    Returns
    -------
    tuple of Column
        ``station``, lengths named with their unit, an empty ``reading`` and the first 12 digits of the hash.
    """
    count, unit, decimals = len(table.radius), SUFFIX[table.units], decimals_for(table.units, tolerance)
    lengths = {
        "radius": table.radius,
        "part_sag": table.part_sag,
        "lower": table.lower,
        "upper": table.upper,
    }
    return (
        Column("station", tuple(float(number) for number in range(1, count + 1)), 0),
        *(_length(f"{name}_{unit}", values, decimals) for name, values in lengths.items()),
        Column("slope_deg", tuple(table.slope_deg.tolist()), SLOPE_DECIMALS),
        _length(f"mould_sag_{unit}", table.mould_sag, decimals),
        Column(f"reading_{unit}", ("",) * count, decimals),
        Column("job", (job_hash[:HASH_DIGITS],) * count, 0),
    )


def decimals_for(units: Units, tolerance: float) -> int:
    """Return how many decimals keep the rounding of a written length under a tenth of a tolerance.

    Parameters
    ----------
    units : {"mm", "inch"}
        Unit of the length.
    tolerance : float
        Largest departure allowed [mm].

    Returns
    -------
    int
        At least 4 in millimetres, 5 in inches.
    """
    unit = 1.0 if units == "mm" else MM_PER_INCH
    return max(FEWEST_DECIMALS[units], int(np.ceil(np.log10(5.0 * unit / tolerance))))


def _length(name: str, values: Array, decimals: int) -> Column:
    return Column(name, tuple("" if np.isnan(value) else float(value) for value in values), decimals)


def _height_at(chain: Chain, radius: Array) -> Array:
    """Return the forming surface's height over its vertex, NaN beyond its end and over the pad of a hub [mm]."""
    surface, hub = chain.forming_surface, chain.job.mould.hub
    reached = radius <= float(surface.radius(surface.end)) * (1.0 + 1e-12)
    reached &= radius >= (0.0 if hub is None else 0.5 * hub.diameter)
    height = np.full_like(radius, np.nan)
    height[reached] = surface.height(surface.at_radius(radius[reached]))
    return height
