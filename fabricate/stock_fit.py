"""Whether the stock fits the lathe, and what stock and mould weigh.

The density is that of the mould's material; where that is not stated, no mass is known and none is judged.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from fabricate.job_keys import Job
from fabricate.mould import Mould
from fabricate.turning_setup import Setup
from profiles.errors import JobError

KG_PER_MM3 = 1e-9
"""What one kg/m³ is in kg/mm³."""


@dataclass(frozen=True)
class StockFit:
    """Stock and mould as the lathe carries them.

    Parameters
    ----------
    diameter, length : float
        Of the stock [mm].
    stock_mass, mould_mass : float or None
        [kg]; None where the mould's material is not stated.
    """

    diameter: float
    length: float
    stock_mass: float | None
    mould_mass: float | None


def stock_fit(job: Job, mould: Mould, volume: float) -> StockFit:
    """Return size and mass of stock and mould, and refuse stock that the lathe does not take.

    Parameters
    ----------
    job : Job
        The job, in its own units, with a ``[turning]`` table.
    mould : Mould
        Its mould [mm].
    volume : float
        Of the mould [mm³].

    Returns
    -------
    StockFit
        In millimetres and kilograms.

    Raises
    ------
    JobError
        If the stock is wider than the swing or heavier than the spindle carries.
    """
    setup = Setup.of(job, mould)
    stock = setup.stock
    size = np.pi * stock.radius**2 * (stock.front - stock.back)
    density = None if job.mould.row is None else job.mould.row.density_kg_m3 * KG_PER_MM3
    fit = StockFit(
        2.0 * stock.radius,
        stock.front - stock.back,
        None if density is None else density * size,
        None if density is None else density * volume,
    )
    machine = job.machine
    if machine is not None:
        _check_swing(fit, machine.swing * setup.unit, setup)
        _check_mass(fit, machine.largest_mass_kg)
    return fit


def _check_swing(fit: StockFit, swing: float, setup: Setup) -> None:
    if swing and fit.diameter > swing:
        raise JobError(
            f"machine.swing: value is {setup.text(swing)} {setup.units}, and the stock is {setup.text(fit.diameter)} "
            f"{setup.units} wide; allowed: stock that turns over the bed; do: use a larger lathe, or a smaller land or "
            "stock_allowance"
        )


def _check_mass(fit: StockFit, largest: float) -> None:
    if not largest:
        return
    if fit.stock_mass is None:
        raise JobError(
            f"machine.largest_mass_kg: value is {largest:g} kg, and mould.material is not stated; allowed: a material "
            "whose density is known; do: name the mould's material"
        )
    if fit.stock_mass > largest:
        raise JobError(
            f"machine.largest_mass_kg: value is {largest:g} kg, and the stock weighs {fit.stock_mass:.4g} kg; allowed: "
            "stock that the spindle carries; do: use a larger lathe, a lighter material, or pre-shaped stock"
        )
