"""Cuts that only some moulds need: a groove roughed, a trim line scribed, an outside with draft.

Like all passes they are moves of the nose centre in millimetres of the lathe frame, and every rapid runs along X or
along Z alone.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from fabricate.contour_features import over_groove
from fabricate.turning_setup import CLEARANCE, LIFT, Setup
from outputs.gcode import Block, Feed, Rapid
from profiles.arcpath import ArcPath


def outside_cut(setup: Setup, radius: float) -> tuple[tuple[float, float], ...]:
    """Return where the nose centre goes from over the front to turn the outside down to a radius.

    Parameters
    ----------
    setup : Setup
        Stock, insert and mould.
    radius : float
        Of the outside at the land, as this cut leaves it [mm].

    Returns
    -------
    tuple of (float, float)
        Radius and Z of one point, with draft of two: along the axis, then along the taper as far as there is stock
        [mm].
    """
    end, draft = setup.reach + setup.nose, setup.mould.draft
    if not draft:
        return ((radius + setup.nose, end),)
    # Where the nose touches the taper at the height of the land.
    across, along = radius + setup.nose * math.cos(draft), setup.mould.land + setup.nose * math.sin(draft)
    if along <= end:
        return ((across, end),)
    wide = min(across + (along - end) * math.tan(draft), setup.stock.radius + setup.nose)
    return (across, along), (wide, along - (wide - across) / math.tan(draft))


def groove_blocks(setup: Setup, cuts: tuple[ArcPath, ...]) -> Iterator[Block]:
    """Yield the cuts that rough the groove of a lead-out, from home and back.

    Parameters
    ----------
    setup : Setup
        Stock, insert and mould.
    cuts : tuple of ArcPath
        One under the other [mm].

    Yields
    ------
    Block
        Moves of the nose centre [mm]; none without cuts.
    """
    if setup.mould.lead is None or not cuts:
        return
    feed = setup.turning.roughing_feed
    radius, height = over_groove(setup.mould.lead, setup.nose + setup.allowance + CLEARANCE).tolist()
    yield Rapid(radius, setup.home[1])
    for cut in cuts:
        yield Rapid(radius, height)
        for place, bulge in zip(cut.vertices.tolist(), [0.0, *cut.bulges.tolist()], strict=True):
            yield Feed(place[0], place[1], bulge, feed)
        yield Feed(radius, height, 0.0, feed)
        yield Rapid(radius, height + LIFT)
    yield Rapid(radius, setup.home[1])
    yield Rapid(*setup.home)


def trim_line_blocks(setup: Setup) -> Iterator[Block]:
    """Yield the touch along the normal that scribes the trim line, from home and back.

    Parameters
    ----------
    setup : Setup
        Stock, insert and mould.

    Yields
    ------
    Block
        Moves of the nose centre [mm]; none without a trim line.
    """
    line = setup.mould.trim_line
    if line is None:
        return
    feed = setup.turning.finishing_feed
    radius, height = (line.point + (setup.nose + CLEARANCE) * line.normal).tolist()
    yield Rapid(radius, setup.home[1])
    yield Rapid(radius, height)
    deepest = line.centre(setup.nose)
    yield Feed(float(deepest[0]), float(deepest[1]), 0.0, feed)
    yield Feed(radius, height, 0.0, feed)
    yield Rapid(radius, setup.home[1])
    yield Rapid(*setup.home)
