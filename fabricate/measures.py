"""What a value in the job file measures, and the bounds it must keep.

A *measure* is attached to a key of the job with ``typing.Annotated``. It is the one place that knows the unit of the
value in a millimetre job and in an inch job, so that defaults, bounds, conversion and the words of a refusal all
follow from it. Bounds are written for a millimetre job and are converted for an inch job. They are bounds of
plausibility: nothing outside them is a dish that anybody makes.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise
from typing import Any, Literal

from pydantic import GetCoreSchemaHandler, ValidationInfo
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

Units = Literal["mm", "inch"]

MM_PER_INCH = 25.4
_METRES_PER_FOOT = 0.3048


class Measure(ABC):
    """A check and two conversions for the value of one key; the base of the measures below."""

    @abstractmethod
    def allowed(self, units: Units) -> str:
        """Return the allowed values in words.

        Parameters
        ----------
        units : {"mm", "inch"}
            Units of the job.

        Returns
        -------
        str
            Bounds with their unit.
        """

    @abstractmethod
    def unit(self, units: Units) -> str:
        """Return the unit of the value in a job of these units, or an empty text.

        Parameters
        ----------
        units : {"mm", "inch"}
            Units of the job.

        Returns
        -------
        str
            Unit, such as ``"mm"`` or ``"ft/min"``.
        """

    @abstractmethod
    def keeps(self, value: Any, units: Units) -> bool:
        """Say whether a value of the right type keeps the bounds.

        Parameters
        ----------
        value : object
            Value as typed, in the units of the job.
        units : {"mm", "inch"}
            Units of the job.

        Returns
        -------
        bool
            True where the value is allowed.
        """

    def from_inch_job(self, value: Any) -> Any:
        """Return the value that a millimetre job states for this value of an inch job.

        Parameters
        ----------
        value : object
            Value in an inch job.

        Returns
        -------
        object
            The same in a millimetre job.
        """
        return value

    def to_inch_job(self, value: Any) -> Any:
        """Return the value that an inch job states for this value of a millimetre job.

        Parameters
        ----------
        value : object
            Value in a millimetre job.

        Returns
        -------
        object
            The same in an inch job.
        """
        return value

    def _check(self, value: Any, info: ValidationInfo) -> Any:
        units: Units = (info.context or {}).get("units", "mm")
        if value is not None and not self.keeps(value, units):
            raise PydanticCustomError("bounds", "{allowed}", {"allowed": self.allowed(units)})
        return value

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.with_info_after_validator_function(self._check, handler(source))


@dataclass(frozen=True)
class Quantity(Measure):
    """A number with a unit.

    Parameters
    ----------
    low, high : float
        Bounds, in the unit of a millimetre job; both allowed.
    unit_mm, unit_inch : str
        Unit in a millimetre job and in an inch job.
    factor : float
        One unit of the inch job in units of the millimetre job.
    """

    low: float
    high: float
    unit_mm: str = ""
    unit_inch: str = ""
    factor: float = 1.0

    def unit(self, units: Units) -> str:
        """Return the unit in a job of these units; see `Measure.unit`."""
        return self.unit_inch if units == "inch" else self.unit_mm

    def _bound(self, value: float, units: Units) -> float:
        return value / self.factor if units == "inch" else value

    def allowed(self, units: Units) -> str:
        """Return the bounds in words; see `Measure.allowed`."""
        low, high = (f"{self._bound(bound, units):.7g}" for bound in (self.low, self.high))
        return f"a number from {low} to {high} {self.unit(units)}".rstrip()

    def keeps(self, value: Any, units: Units) -> bool:
        """Say whether the number is within the bounds; see `Measure.keeps`."""
        return bool(self._bound(self.low, units) <= value <= self._bound(self.high, units))

    def from_inch_job(self, value: Any) -> Any:
        """Return the number for a millimetre job; see `Measure.from_inch_job`."""
        return value if self.factor == 1.0 else value * self.factor

    def to_inch_job(self, value: Any) -> Any:
        """Return the number for an inch job; see `Measure.to_inch_job`."""
        return value if self.factor == 1.0 else value / self.factor


def length(low: float, high: float) -> Quantity:
    """Return the measure of a length.

    Parameters
    ----------
    low, high : float
        Bounds [mm].

    Returns
    -------
    Quantity
        A length in mm or inches.
    """
    return Quantity(low, high, "mm", "in", MM_PER_INCH)


def speed_per_minute(low: float, high: float) -> Quantity:
    """Return the measure of a cutting speed.

    Parameters
    ----------
    low, high : float
        Bounds [m/min].

    Returns
    -------
    Quantity
        A speed in m/min or ft/min.
    """
    return Quantity(low, high, "m/min", "ft/min", _METRES_PER_FOOT)


def speed_per_second(low: float, high: float) -> Quantity:
    """Return the measure of a speed at the rim of turning stock.

    Parameters
    ----------
    low, high : float
        Bounds [m/s].

    Returns
    -------
    Quantity
        A speed in m/s or ft/s.
    """
    return Quantity(low, high, "m/s", "ft/s", _METRES_PER_FOOT)


def plain(low: float, high: float, *, unit: str = "") -> Quantity:
    """Return the measure of a number whose unit does not follow the units of the job.

    Parameters
    ----------
    low, high : float
        Bounds [unit].
    unit : str
        Unit, empty for a plain number.

    Returns
    -------
    Quantity
        A number in one fixed unit.
    """
    return Quantity(low, high, unit, unit)


def _tuples(value: Any) -> Any:
    """Turn the arrays of a TOML file into tuples, two deep, and leave anything else for the type to refuse."""
    if not isinstance(value, list):
        return value
    return tuple(tuple(item) if isinstance(item, list) else item for item in value)


class _ArrayMeasure(Measure):
    """A measure of an array; TOML gives lists, the job holds tuples."""

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        inner = super().__get_pydantic_core_schema__(source, handler)
        return core_schema.no_info_before_validator_function(_tuples, inner)


@dataclass(frozen=True)
class Coefficients(_ArrayMeasure):
    """Coefficients A4, A6, … of an even asphere, in units^-3, units^-5, ….

    Parameters
    ----------
    most : int
        Largest number of coefficients.
    """

    most: int

    def unit(self, units: Units) -> str:
        """Return the units of the coefficients; see `Measure.unit`."""
        name = "in" if units == "inch" else "mm"
        return f"{name}^-3, {name}^-5, …"

    def allowed(self, units: Units) -> str:
        """Return the allowed arrays in words; see `Measure.allowed`."""
        return f"an array of at most {self.most} numbers A4, A6, … in {self.unit(units)}"

    def keeps(self, value: Any, units: Units) -> bool:  # noqa: ARG002 - the count has no unit
        """Say whether there are few enough; see `Measure.keeps`."""
        return len(value) <= self.most

    def _scaled(self, value: Any, step: Callable[[float, int], float]) -> tuple[float, ...]:
        return tuple(step(coefficient, 1 - 2 * index) for index, coefficient in enumerate(value, start=2))

    def from_inch_job(self, value: Any) -> Any:
        """Return the coefficients for a millimetre job; see `Measure.from_inch_job`."""
        return self._scaled(value, lambda coefficient, power: coefficient * MM_PER_INCH**power)

    def to_inch_job(self, value: Any) -> Any:
        """Return the coefficients for an inch job; see `Measure.to_inch_job`."""
        return self._scaled(value, lambda coefficient, power: coefficient / MM_PER_INCH**power)


@dataclass(frozen=True)
class Rows(_ArrayMeasure):
    """A table of rows whose first column increases.

    Parameters
    ----------
    names : tuple of str
        Name of each column.
    columns : tuple of Quantity
        Measure of each column.
    most : int
        Largest number of rows.
    """

    names: tuple[str, ...]
    columns: tuple[Quantity, ...]
    most: int = 1000

    def unit(self, units: Units) -> str:
        """Return the units of the columns; see `Measure.unit`."""
        return ", ".join(column.unit(units) for column in self.columns)

    def allowed(self, units: Units) -> str:
        """Return the allowed tables in words; see `Measure.allowed`."""
        columns = "; ".join(
            f"{name}, {column.allowed(units)}" for name, column in zip(self.names, self.columns, strict=True)
        )
        return f"1 to {self.most} rows [{', '.join(self.names)}], {self.names[0]} increasing ({columns})"

    def keeps(self, value: Any, units: Units) -> bool:
        """Say whether all rows keep their bounds in increasing order; see `Measure.keeps`."""
        inside = all(column.keeps(cell, units) for row in value for column, cell in zip(self.columns, row, strict=True))
        rising = all(later[0] > earlier[0] for earlier, later in pairwise(value))
        return 1 <= len(value) <= self.most and inside and rising

    def from_inch_job(self, value: Any) -> Any:
        """Return the rows for a millimetre job; see `Measure.from_inch_job`."""
        return tuple(
            tuple(column.from_inch_job(cell) for column, cell in zip(self.columns, row, strict=True)) for row in value
        )

    def to_inch_job(self, value: Any) -> Any:
        """Return the rows for an inch job; see `Measure.to_inch_job`."""
        return tuple(
            tuple(column.to_inch_job(cell) for column, cell in zip(self.columns, row, strict=True)) for row in value
        )


@dataclass(frozen=True)
class Words(Measure):
    """A line of text that fits into a file header: printable, of a bounded length.

    Parameters
    ----------
    least, most : int
        Bounds of the number of characters.
    """

    least: int
    most: int

    def unit(self, units: Units) -> str:  # noqa: ARG002 - a text has no unit
        """Return no unit; see `Measure.unit`."""
        return ""

    def allowed(self, units: Units) -> str:  # noqa: ARG002 - a text has no unit
        """Return the allowed texts in words; see `Measure.allowed`."""
        return f"one line of {self.least} to {self.most} printable characters in quotation marks"

    def keeps(self, value: Any, units: Units) -> bool:  # noqa: ARG002 - a text has no unit
        """Say whether the text is one printable line; see `Measure.keeps`."""
        return bool(self.least <= len(value.strip()) and len(value) <= self.most and value.isprintable())
