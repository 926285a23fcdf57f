"""The keys of the job file that say how the mould is turned, and on what: ``[turning]`` and ``[machine]``.

A key's type, bounds, unit, default and meaning stand here and nowhere else; see ``job_keys``.
"""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from fabricate.job_table import Table
from fabricate.measures import length, plain, speed_per_minute, speed_per_second


class Control(Table):
    """How this lathe's control spells things: look each word up in its manual, no default is safe."""

    x_word: Literal["diameter", "radius"] = Field(description="what the X word counts")
    plane_word: Literal["G18", "none"] = Field(description="the XZ plane, where the control has the word")
    units_word: Literal["G20", "G21", "G70", "G71", "none"] = Field(
        description="inches G20 or G70, millimetres G21 or G71; must agree with units"
    )
    absolute_word: Literal["none", "G90"] = Field(description="G90 is a cutting cycle where G99 is feed per turn")
    feed_per_rev_word: Literal["G99", "G95"] = Field(description="feed per revolution")
    spindle_limit_word: Literal["G50", "G92", "D", "none"] = Field(
        description="limit under constant surface speed; none: no G96 at all, speeds stepped with G97"
    )
    arcs: Literal["centre", "radius", "lines"] = Field(description="I and K, or R, or no arcs")
    decimals: Annotated[int, plain(3, 6)] = Field(description="3 to 6 in a millimetre job, 4 to 6 in an inch job")


class Turning(Table):
    """The turning program; without this table none is written."""

    spindle_direction: Literal["M3", "M4"] = Field(description="M4 may unscrew a chuck from a threaded nose")
    spindle_limit_untrued: Annotated[float, plain(1.0, 1e5, unit="rev/min")] = Field(
        description="until the stock runs true"
    )
    spindle_limit: Annotated[float, plain(1.0, 1e5, unit="rev/min")] = Field(description="of the trued stock")
    rim_speed_limit: Annotated[float, speed_per_second(0.0, 300.0)] = Field(
        default=0.0, description="of the stock; to be stated for wood, laminate, board and printed stock; 0: none"
    )
    surface_speed: Annotated[float, speed_per_minute(1.0, 5000.0)] = Field(default=180.0, description="cutting speed")
    tool_post: Literal["rear", "front"] = Field(default="rear", description="for the header and the picture only")
    control_point: Literal["imaginary-tip", "nose-centre"] = Field(
        default="imaginary-tip", description="the point of the insert that the program moves"
    )
    nose_radius: Annotated[float, length(0.01, 50.0)] = Field(default=0.8, description="of the insert")
    depth_of_cut: Annotated[float, length(0.01, 50.0)] = Field(default=1.5, description="roughing")
    finish_allowance: Annotated[float, length(0.0, 20.0)] = Field(default=0.3, description="left by roughing")
    roughing_feed: Annotated[float, length(0.001, 10.0)] = Field(default=0.25, description="per revolution")
    finishing_feed: Annotated[float, length(0.001, 10.0)] = Field(default=0.1, description="per revolution")
    roughness_rt_um: Annotated[float, plain(0.0, 500.0, unit="um")] = Field(
        default=0.0, description="height of the cusps asked for, from which finishing_feed follows; 0: not asked for"
    )
    roughness_ra_um: Annotated[float, plain(0.0, 100.0, unit="um")] = Field(
        default=0.0, description="instead of roughness_rt_um: mean roughness of the cusps; 0: not asked for"
    )
    stock_allowance: Annotated[float, length(0.0, 500.0)] = Field(
        default=3.0, description="a plain cylinder: this much larger on the radius and on the front"
    )
    control: Control


class Machine(Table):
    """The lathe: what it takes and how it turns; a stock that does not fit is refused."""

    swing: Annotated[float, length(0.0, 1e5)] = Field(
        default=0.0, description="largest diameter that turns over the bed and slide; 0: not stated"
    )
    largest_mass_kg: Annotated[float, plain(0.0, 1e6, unit="kg")] = Field(
        default=0.0, description="of stock that the spindle carries; 0: not stated"
    )
    lowest_speed: Annotated[float, plain(0.0, 1e5, unit="rev/min")] = Field(
        default=0.0, description="of the spindle; 0: not stated"
    )
    highest_speed: Annotated[float, plain(0.0, 1e5, unit="rev/min")] = Field(
        default=0.0, description="of the spindle; 0: not stated"
    )
