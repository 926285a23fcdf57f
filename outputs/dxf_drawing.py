"""What a drawing is: paths on named layers, and the marks by which it states its unit.

The *check line* on the layer NOTES is 100 mm or 4 in long: whoever measures it sees in which unit the drawing arrived.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any, Literal

from outputs.choice import check_one_of
from profiles.arcpath import ArcPath

Units = Literal["mm", "inch"]

NOTES_LAYER = "NOTES"

CHECK_LENGTH = {"mm": 100.0, "inch": 4.0}
INSERT_UNITS = {"mm": 4, "inch": 1}
MEASUREMENT = {"mm": 1, "inch": 0}
UNITS_TEXT = {"mm": "UNITS: MM", "inch": "UNITS: INCH"}
CHECK_TEXT = {"mm": "CHECK LINE: 100 MM", "inch": "CHECK LINE: 4 IN"}

# A line of text goes on with one blank where a word was broken, with two where it was not.
BROKEN_WORD, NEXT_WORD = " ", "  "


@dataclass(frozen=True, eq=False)
class Drawing:
    """Paths on layers, in drawing coordinates.

    Parameters
    ----------
    units : {"mm", "inch"}
        Unit of every length in it.
    layers : mapping of str to tuple of ArcPath
        For each layer its paths [mm or in], u along the spindle and v the radius. A closed path repeats its first
        vertex.
    notes : tuple of str
        Remarks for people; written in printable ASCII, so they may come back a little plainer.

    Raises
    ------
    FormatError
        If the unit is neither.
    """

    units: Units
    layers: Mapping[str, tuple[ArcPath, ...]]
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        check_one_of("drawing.units", self.units, tuple(INSERT_UNITS))
        layers = {name: tuple(paths) for name, paths in self.layers.items()}
        object.__setattr__(self, "layers", MappingProxyType(layers))
        object.__setattr__(self, "notes", tuple(self.notes))


def dxf_library() -> Any:
    """Return the library ezdxf, kept from printing remarks of its own.

    Returns
    -------
    module
        The library; importing it takes a third of a second, so only what needs it asks for it.
    """
    import logging

    import ezdxf

    logger = logging.getLogger("ezdxf")
    if not logger.handlers:
        logger.addHandler(logging.NullHandler())
    return ezdxf
