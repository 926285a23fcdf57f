"""What every table of the job file is: frozen, without unknown keys, and each key with its measure."""

from __future__ import annotations

from typing import Any, TypeVar

from pydantic import BaseModel, ConfigDict

from fabricate.measures import Measure


class Table(BaseModel):
    """A table of the job file: frozen, no unknown keys, no number in quotation marks, no NaN, no infinity."""

    model_config = ConfigDict(frozen=True, extra="forbid", strict=True, allow_inf_nan=False)


AnyTable = TypeVar("AnyTable", bound=Table)


def measure_of(table: type[Table], name: str) -> Measure | None:
    """Return the measure of a key.

    Parameters
    ----------
    table : type of Table
        Model of the table that holds the key.
    name : str
        The key.

    Returns
    -------
    Measure or None
        None where the value is a word, a switch or a table.
    """
    return next((entry for entry in table.model_fields[name].metadata if isinstance(entry, Measure)), None)


def from_inches(table: AnyTable) -> AnyTable:
    """Return a table of an inch job in millimetres, its tables included.

    Parameters
    ----------
    table : Table
        Lengths in inches.

    Returns
    -------
    Table
        Lengths in mm, every other value as it was.
    """
    changes: dict[str, Any] = {}
    for name in type(table).model_fields:
        value = getattr(table, name)
        measure = measure_of(type(table), name)
        if isinstance(value, Table):
            changes[name] = from_inches(value)
        elif measure is not None and value is not None:
            changes[name] = measure.from_inch_job(value)
    return table.model_copy(update=changes)
