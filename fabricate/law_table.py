"""The row of a table of laws, and the key of the job file whose words are the names in such a table.

A *law* is a way in which springback or thinning is stated. Its row holds the function that makes it and the keys that
it needs beside ``law``; the reader, the refusals, the canonical text and the starter job read these from the row.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Generic, TypeVar

from pydantic import GetCoreSchemaHandler
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from fabricate.measures import Measure, Units

Function_co = TypeVar("Function_co", covariant=True)


@dataclass(frozen=True)
class LawRow(Generic[Function_co]):
    """A law.

    Parameters
    ----------
    make : callable
        The law itself.
    one_of : tuple of str
        Keys of which exactly one must be stated beside ``law``; empty where it needs none.
    options : tuple of str
        Keys that may be stated beside these, and mean nothing to another law.
    """

    make: Function_co
    one_of: tuple[str, ...] = ()
    options: tuple[str, ...] = ()


@dataclass(frozen=True, eq=False)
class LawName(Measure):
    """The name of a law: a word of the table of laws as it stands when the job is read.

    Parameters
    ----------
    laws : mapping of str to LawRow
        The table.
    """

    laws: Mapping[str, LawRow[Any]]

    def unit(self, units: Units) -> str:  # noqa: ARG002 - a word has no unit
        """Return no unit; see `Measure.unit`."""
        return ""

    def allowed(self, units: Units) -> str:  # noqa: ARG002 - a word has no unit
        """Return the names in the table; see `Measure.allowed`."""
        return ", ".join(f'"{name}"' for name in self.laws)

    def keeps(self, value: Any, units: Units) -> bool:  # noqa: ARG002 - a word has no unit
        """Say whether the table has the name; see `Measure.keeps`."""
        return isinstance(value, str) and value in self.laws

    def _named(self, value: Any) -> Any:
        if not self.keeps(value, "mm"):
            # Refused in the same words as any other key that takes one word of several.
            raise PydanticCustomError("literal_error", "{allowed}", {"allowed": self.allowed("mm")})
        return value

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self._named)
