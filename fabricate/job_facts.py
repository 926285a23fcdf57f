"""What a job file says, as far as it could be understood: the ground on which one key is judged against another.

A *fact* is the value of a key, typed or filled in by default, that its own model accepts. Asking for a key whose value
was refused ends the rule that asks, so that every other rule can still be heard.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from fabricate.measures import Units

Data = Mapping[str, Any]


class UnknownFactError(Exception):
    """The value of a key was refused or is missing; caught where the rules are run, never shown."""


@dataclass(frozen=True)
class Facts:
    """Values by dotted key.

    Parameters
    ----------
    filled : mapping
        The job with its defaults.
    typed : mapping
        The job as typed.
    refused : frozenset of str
        Dotted keys whose values the models refuse.
    units : {"mm", "inch"}
        Units of the job.
    """

    filled: Data
    typed: Data
    refused: frozenset[str]
    units: Units

    def __getitem__(self, key: str) -> Any:
        parts = key.split(".")
        if any(".".join(parts[:count]) in self.refused for count in range(1, len(parts) + 1)):
            raise UnknownFactError(key)
        return found(self.filled, parts)

    @property
    def length_unit(self) -> str:
        """Unit of a length, for messages."""
        return "in" if self.units == "inch" else "mm"

    def was_typed(self, key: str) -> bool:
        """Say whether a key stands in the file.

        Parameters
        ----------
        key : str
            Dotted key.

        Returns
        -------
        bool
            True where it was typed, whatever its value.
        """
        return found(self.typed, key.split(".")) is not None


def found(data: Any, parts: list[str]) -> Any:
    """Return what stands at the end of a path of keys, or None.

    Parameters
    ----------
    data : mapping
        Tables within tables.
    parts : list of str
        Names of the tables, then the key.

    Returns
    -------
    object
        The value, None where there is none.
    """
    for part in parts:
        if not isinstance(data, Mapping) or part not in data:
            return None
        data = data[part]
    return data
