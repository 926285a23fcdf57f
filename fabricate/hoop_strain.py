"""The hoop strain that an assumed springback implies.

A meridian is taken to keep its length on release, so each parallel circle of the sheet goes from its radius on the
mould to its radius on the part: a dish cannot open without stretching around. What stretches by more than yield over
modulus would have to yield again.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.polynomial.chebyshev import Chebyshev
from numpy.typing import NDArray

from fabricate.chain import Chain
from profiles.meridian import Meridian
from profiles.series import Series, merged_breaks, resolve

Array = NDArray[np.float64]


@dataclass(frozen=True)
class HoopStrain:
    """Strain of the parallel circles of the reflecting face on release, stretching positive.

    Parameters
    ----------
    rim : float
        At the rim [-].
    largest : float
        The largest by magnitude, with its sign, from hole edge or axis to the rim [-].
    at_radius : float
        Radius on the finished face where it is found [mm].
    yield_strain : float
        The sheet's yield stress over its Young's modulus [-].
    """

    rim: float
    largest: float
    at_radius: float
    yield_strain: float

    @property
    def exceeds_yield(self) -> bool:
        """Whether the largest strain is more than the sheet can spring."""
        return abs(self.largest) > self.yield_strain


def hoop_strain(chain: Chain) -> HoopStrain:
    """Return the hoop strain that the springback of a job implies, ``r_part(s) / r_mould(s) − 1``.

    Parameters
    ----------
    chain : Chain
        The job's maps between part and mould [mm].

    Returns
    -------
    HoopStrain
        Extremes found, not sampled.

    Raises
    ------
    JobError
        If the springback that the job states cannot be made.
    """
    part, rim = chain.released.meridian, chain.released.rim
    hole = 0.5 * chain.job.reflector.hole_diameter
    start = float(part.at_radius(hole)) if hole > 0.0 else part.start
    strain = strain_over_length(chain.on_mould, part, start=start, end=rim)
    where, largest = max(strain.largest(), strain.smallest(), key=lambda found: abs(found[1]))
    row = chain.job.sheet.row
    return HoopStrain(
        rim=float(strain(rim)),
        largest=largest,
        at_radius=abs(float(part.radius(where))),
        yield_strain=row.yield_mpa / row.youngs_modulus_mpa,
    )


def strain_over_length(on_mould: Meridian, part: Meridian, *, start: float, end: float) -> Series:
    """Return the hoop strain on release over the arc length, 0 on the axis.

    Parameters
    ----------
    on_mould, part : Meridian
        The face as it lies on the mould and released, both from the axis by equal arc length [mm].
    start, end : float
        Arc lengths between which it is asked for [mm].

    Returns
    -------
    Series
        Strain [-].

    Notes
    -----
    ``(r_part − r_mould)/s`` over ``r_mould/s``. The first is integrated from the slopes,
    ``cos ψ_part − cos ψ_mould = −2 sin((ψ_part + ψ_mould)/2) sin((ψ_part − ψ_mould)/2)``, so that it loses no digits.
    """
    breaks = merged_breaks(on_mould.breaks, part.breaks, start=part.start, end=part.end)

    def gain(where: Array) -> Array:
        one, other = part.slope(where), on_mould.slope(where)
        return np.asarray(-2.0 * np.sin(0.5 * (one + other)) * np.sin(0.5 * (one - other)))

    (rate,) = resolve(lambda where: gain(where)[None], breaks, sizes=[1.0])
    grown, radius = _over_length(rate.integral()), _over_length(on_mould.radius)
    inside = merged_breaks(grown.breaks, radius.breaks, start=start, end=end)
    (strain,) = resolve(lambda where: (grown(where) / radius(where))[None], inside, sizes=[1.0])
    return strain


def _over_length(series: Series) -> Series:
    """Return a function that is 0 at the axis, divided by the arc length from there."""
    first = series.pieces[0]
    length = Chebyshev([0.5 * first.domain[1]] * 2, domain=first.domain)
    pieces = [first // length]
    breaks = series.breaks[1:]
    if len(breaks) > 1:
        (rest,) = resolve(lambda where: (series(where) / where)[None], breaks, sizes=[1.0])
        pieces.extend(rest.pieces)
    return Series(tuple(pieces))
