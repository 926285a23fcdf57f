"""Gauge numbers of sheet, each meaningless without the name of its system.

A *gauge system* is a rule or a table that gives the thickness of a numbered gauge; in ounces per square foot the
number is a weight. A new system is one row of `GAUGE_SYSTEMS`. Exact thicknesses are given; a mill's own tolerance
comes on top.

References
----------
AWG: ASTM B258, ``0.127 mm · 92^((36 − n)/39)`` (from memory). SWG: the British imperial standard of 1884 (from
memory). USG and MSG: the weights of the United States act of 3 March 1893, over 40 lb/ft² per inch and over
41.82 lb/ft² per inch of sheet steel (from memory). oz/ft2: copper of 0.322 lb/in³, 8.91 g/cm³, for which the 16 oz
sheet is the 0.0216 in of the trade's tables (both from memory; other sources print 0.321 to 0.323 lb/in³).
"""

from __future__ import annotations

from collections.abc import Mapping
from difflib import get_close_matches
from types import MappingProxyType

from fabricate.measures import MM_PER_INCH
from profiles.errors import JobError


def _awg() -> dict[str, float]:
    numbered = {str(number): 0.127 * 92.0 ** ((36 - number) / 39.0) for number in range(41)}
    zeros = {"0" * count: 0.127 * 92.0 ** ((35 + count) / 39.0) for count in range(4, 1, -1)}
    return zeros | numbered


# Thickness in thousandths of an inch of the numbers 0, 1, 2, … (from memory).
_SWG_MILS = (
    *(324.0, 300.0, 276.0, 252.0, 232.0, 212.0, 192.0, 176.0, 160.0, 144.0),
    *(128.0, 116.0, 104.0, 92.0, 80.0, 72.0, 64.0, 56.0, 48.0, 40.0),
    *(36.0, 32.0, 28.0, 24.0, 22.0, 20.0, 18.0, 16.4, 14.8, 13.6, 12.4),
)
# Weight in ounces per square foot of the numbers 7, 8, 9, … (from memory).
_OUNCES = (
    *(120.0, 110.0, 100.0, 90.0, 80.0, 70.0, 60.0, 50.0, 45.0, 40.0, 36.0, 32.0),
    *(28.0, 24.0, 22.0, 20.0, 18.0, 16.0, 14.0, 12.0, 11.0, 10.0, 9.0, 8.0),
)
_LIGHTEST, _HEAVIEST = 4, 96
_COPPER_POUNDS_PER_CUBIC_INCH = 0.322
_SQUARE_INCHES_PER_SQUARE_FOOT = 144.0


def _swg() -> dict[str, float]:
    return {str(number): mils / 1000.0 * MM_PER_INCH for number, mils in enumerate(_SWG_MILS)}


def _by_weight(pounds_per_inch: float) -> dict[str, float]:
    return {
        str(number): ounces / 16.0 / pounds_per_inch * MM_PER_INCH for number, ounces in enumerate(_OUNCES, start=7)
    }


def _copper() -> dict[str, float]:
    pounds_per_inch = _COPPER_POUNDS_PER_CUBIC_INCH * _SQUARE_INCHES_PER_SQUARE_FOOT
    return {str(ounces): ounces / 16.0 / pounds_per_inch * MM_PER_INCH for ounces in range(_LIGHTEST, _HEAVIEST + 1)}


GAUGE_SYSTEMS: Mapping[str, Mapping[str, float]] = MappingProxyType(
    {
        "AWG": MappingProxyType(_awg()),
        "SWG": MappingProxyType(_swg()),
        "USG": MappingProxyType(_by_weight(40.0)),
        "MSG": MappingProxyType(_by_weight(41.82)),
        "oz/ft2": MappingProxyType(_copper()),
    }
)
"""Thickness [mm] by number and by system: AWG for copper alloys and aluminium, SWG the British imperial gauge,
USG the United States standard (stainless), MSG the manufacturers' standard (plain steel), oz/ft2 the weight of copper
sheet in ounces per square foot."""

SHEETS_OF_SYSTEM: Mapping[str, str] = MappingProxyType({"oz/ft2": "copper"})
"""The metal, as the names in the material table begin, of the systems that are of one metal only."""

_MOST_LISTED = 50


def numbers_of(system: str) -> str:
    """Return the numbers of a gauge system in words.

    Parameters
    ----------
    system : str
        A name of `GAUGE_SYSTEMS`.

    Returns
    -------
    str
        All of them, or where they are many the first and the last.

    Examples
    --------
    >>> numbers_of("oz/ft2")
    'whole numbers from 4 to 96'
    """
    numbers = tuple(GAUGE_SYSTEMS[system])
    if len(numbers) > _MOST_LISTED:
        return f"whole numbers from {numbers[0]} to {numbers[-1]}"
    return ", ".join(numbers)


def gauge_thickness(gauge: int | str, system: str) -> float:
    """Return the thickness of a numbered gauge.

    Parameters
    ----------
    gauge : int or str
        Number of the gauge; the heavy ones as ``"00"``, ``"000"``, ``"0000"``.
    system : str
        A name of `GAUGE_SYSTEMS`.

    Returns
    -------
    float
        Thickness [mm].

    Raises
    ------
    JobError
        If the system or the number is not in the tables.

    Examples
    --------
    >>> gauge_thickness(36, "AWG")
    0.127
    >>> round(gauge_thickness(16, "MSG") / 25.4, 4)
    0.0598
    >>> round(gauge_thickness(16, "oz/ft2") / 25.4, 4)
    0.0216
    """
    if system not in GAUGE_SYSTEMS:
        by_lower = {name.lower(): name for name in GAUGE_SYSTEMS}
        near = [by_lower[name] for name in get_close_matches(system.lower(), by_lower, n=1, cutoff=0.5)]
        hint = f"write {near[0]}, or" if near else "name one of these, or"
        raise JobError(
            f'value is "{system}"; allowed: {", ".join(GAUGE_SYSTEMS)}; do: {hint} state the thickness itself'
        )
    table = GAUGE_SYSTEMS[system]
    if str(gauge) not in table:
        raise JobError(
            f"value is {gauge}, which {system} does not have here; allowed: {numbers_of(system)}; "
            "do: correct the number or state the thickness itself"
        )
    return table[str(gauge)]
