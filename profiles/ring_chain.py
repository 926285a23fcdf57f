"""All rings of a solid's surface in the order of the walk: forming surface, edge, land, outer side, base, bore.

Neighbouring stretches share the ring at their joint, so that no vertex ever lies on an edge. A plane asks for no count
of its own; a cylinder or cone for the count that holds the sagitta of its circle's chords; an arc, a piece of a torus,
for nearly equilateral triangles.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import acos, ceil, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from profiles.rings import LEAST_COUNT, alternating, forming_rings
from profiles.stitching import Rings
from profiles.surfaces import Surface, TurnedArc, TurnedCurve

Array = NDArray[np.float64]
Rows = NDArray[np.intp]

TANGENT = 0.2
"""Turn [rad] at a joint under which two stretches count as tangent."""


@dataclass(frozen=True, eq=False)
class Chain:
    """The rings of a closed surface.

    Parameters
    ----------
    surfaces : tuple of Surface
        The stretches; the first is the forming surface.
    rings : Rings
        Counts and phases of the rings.
    points : ndarray of shape (k, 2)
        Radius and height of each ring, on the exact surface [mm].
    owners : ndarray of shape (s,)
        Number of the surface that each strip belongs to.
    """

    surfaces: tuple[Surface, ...]
    rings: Rings
    points: Array
    owners: Rows


@dataclass(frozen=True, eq=False)
class _Stretch:
    """Rings of one stretch after its first: where they are, and their counts."""

    points: Array
    counts: list[int]


def chain_rings(
    surfaces: tuple[TurnedCurve, *tuple[TurnedArc, ...]],
    *,
    forming_spread: float,
    ease: float,
    body_spread: float,
    shares: Array,
) -> Chain:
    """Return the rings of a solid's surface.

    Parameters
    ----------
    surfaces : tuple of TurnedCurve and TurnedArc
        Forming surface and the rest, in order round the half section.
    forming_spread : float
        Difference allowed between largest and smallest deviation on the forming surface, corners being on it [mm].
    ease : float
        Part of it that the forming surface's last strip may use, where the edge shares its ring.
    body_spread : float
        The same for the rest [mm].
    shares : ndarray of shape (len(surfaces) - 1,)
        Part of it that the strips of each stretch of the rest may use.

    Returns
    -------
    Chain
        Ends in a pole, or in the ring where it began on a bored solid. It begins with the forming surface, or with the
        pole of a pad on the axis that the forming surface surrounds.

    Raises
    ------
    GeometryError
        If no rings are found that keep the spread on the forming surface.
    """
    forming, *body = surfaces
    bored = float(forming.curve.radius(forming.curve.start)) > 1e-9 * float(forming.curve.radius(forming.curve.end))
    # An arc's share goes into lower strips; a cylinder has nothing but its count.
    needs = [
        _need(part, body_spread * (1.0 if part.curvature else share), joined=number == 0)
        for number, (part, share) in enumerate(zip(body, shares.tolist(), strict=True))
    ]
    tangent = _tangent(forming, body[0])
    row = forming_rings(
        forming,
        forming_spread,
        start=max(needs[-1], LEAST_COUNT) if bored else 0,
        end=needs[0],
        ease=ease if tangent else 1.0,
    )
    parts = [_Stretch(forming.curve.points(row.where), row.counts.tolist())]
    if not bored:
        parts[0].points[0, 0] = 0.0
    last = parts[0].counts[0] if bored else 1
    pole = _stretches_to_pole(body)
    for number, part in enumerate(body):
        if number == pole:
            parts.append(_Stretch(np.array([[0.0, part.ends[0][1]]]), [1]))
        joint = 1 if number + 1 == pole else _joint_count(body, needs, number, last)
        split = number == 0 and tangent
        parts.append(
            _stretch(part, (parts[-1].counts[-1], needs[number], joint), body_spread * float(shares[number]), split)
        )
    return _from_pad(surfaces, parts, pole) if pole < len(body) and bored else _joined(surfaces, parts, bored)


def _stretches_to_pole(body: list[TurnedArc]) -> int:
    """Return how many stretches of the rest come before the axis: all of them where it is not met, or last of all."""
    radii = [float(part.ends[1][0]) for part in body]
    return next((number + 1 for number, radius in enumerate(radii) if radius <= 1e-9 * max(radii)), len(body))


def _from_pad(surfaces: tuple[Surface, ...], parts: list[_Stretch], pole: int) -> Chain:
    """Return the chain of a solid with a pad on the axis: pole, pad, forming surface, and the rest down to the axis."""
    outer, pad = _joined(surfaces, parts[: pole + 1], bored=False), parts[pole + 1 :]
    points = np.concatenate([part.points for part in pad])[:-1]
    counts = [count for part in pad for count in part.counts]
    rings = Rings(
        np.concatenate([counts[:-1], outer.rings.counts]),
        np.concatenate([np.zeros(len(counts) - 1, dtype=np.int64), outer.rings.turned]),
    )
    owners = np.repeat(np.arange(pole + 1, pole + len(pad)), [len(part.counts) for part in pad[1:]])
    return Chain(surfaces, rings, np.concatenate([points, outer.points]), np.concatenate([owners, outer.owners]))


def _joined(surfaces: tuple[Surface, ...], parts: list[_Stretch], bored: bool) -> Chain:  # noqa: FBT001
    points = np.concatenate([part.points for part in parts])
    counts = np.array([count for part in parts for count in part.counts])
    turned = alternating(np.array(parts[0].counts)).tolist()
    for part in parts[1:]:
        own = counts[len(turned) - 1 : len(turned) + len(part.counts)]
        turned += _kept(own, turned[-1])[1:].tolist()
    owners = np.repeat(np.arange(len(parts)), [len(part.counts) - (part is parts[0]) for part in parts])
    if bored:
        points, counts, turned = points[:-1], counts[:-1], turned[:-1]
    return Chain(surfaces, Rings(counts, np.array(turned), closed=bored), points, owners)


def _kept(counts: NDArray[np.int64], first: int) -> NDArray[np.int64]:
    """Return phases that stay as they are from ring to ring of the same count.

    On narrow stretches, chords of rings that turn against each other would cross.
    """
    same = np.cumprod(counts == counts[0])
    return np.where(same > 0, first, 0)


def _tangent(forming: TurnedCurve, part: TurnedArc) -> bool:
    normal = forming.curve.normals(forming.curve.end)
    first = part.normals[0]
    return abs(float(normal[0] * first[1] - normal[1] * first[0])) < TANGENT and float(normal @ first) > 0.0


def _is_plane(part: TurnedArc) -> bool:
    return not part.curvature and max(abs(float(normal[0])) for normal in part.normals) < 1e-9


def _need(part: TurnedArc, spread: float, *, joined: bool) -> int:
    """Return the least count of a stretch's rings; one that is joined to the forming surface asks for no more."""
    radius, width = max(float(end[0]) for end in part.ends), abs(float(part.ends[1][0] - part.ends[0][0]))
    across = 1.0 if part.curvature else abs(float(part.normals[0][0]))
    # Chords may not reach far across a narrow stretch beside them.
    beside = _chords(radius, max(0.98 * spread, 0.3 * width))
    if part.curvature:
        # The fewest triangles have sides of sqrt(2) circumradii on a saddle, and strips as high, else of sqrt(3).
        side = 1.95 if joined else sqrt(2.0) if _is_saddle(part) else sqrt(3.0)
        return max(LEAST_COUNT, beside, ceil(_circle(part) / (side * sqrt(2.0 * spread))))
    return max(LEAST_COUNT, beside, _chords(radius, 0.98 * spread / max(across, 1e-12)))


def _chords(radius: float, sagitta: float) -> int:
    """Return how many chords of a circle stray by no more than a sagitta."""
    return ceil(pi / acos(max(1.0 - sagitta / radius, 0.0)))


def _circle(part: TurnedArc) -> float:
    """Return the largest circle of an arc's surface, in the metric of the chord error."""
    shares = np.linspace(0.0, 1.0, 33)
    radii = part.path.along(part.number, shares)[:, 0]
    turn = float(part.path.turns[part.number])
    tangent = part.path.tangents[0][part.number]
    across = np.sin(np.arctan2(tangent[1], tangent[0]) + shares * turn)
    return 2.0 * pi * sqrt(float(np.abs(radii * across).max()))


def _joint_count(body: list[TurnedArc], needs: list[int], number: int, last: int) -> int:
    """Return the least count of the ring where a stretch of the rest ends."""
    if number == len(body) - 1:
        return last
    # A bore's lower ring has as many vertices as its upper one, which is the forming surface's first.
    if number == len(body) - 2 and last > 1 and not _is_plane(body[-1]):
        return max(last, needs[number])
    return max(
        needs[number] if float(body[number].ends[1][0]) > 0.5 * float(body[number].ends[0][0]) else 0, needs[number + 1]
    )


def _stretch(part: TurnedArc, counts: tuple[int, int, int], spread: float, split: bool) -> _Stretch:  # noqa: FBT001
    """Return the rings of one stretch after its first; ``counts`` are of the first ring, least inside, and the last."""
    first, need, last = counts
    if not part.curvature:
        # On a cylinder both rings have the same count where they can.
        end = last if last == 1 or _is_plane(part) else max(first, last)
        return _Stretch(part.ends[1][None, :], [end])
    inside = max(first, need)
    shares = _arc_shares(part, inside, spread, split=split)
    ends = max(inside, last) if last > 1 else 1
    return _Stretch(part.path.along(part.number, shares), [inside] * (len(shares) - 1) + [ends])


def _is_saddle(part: TurnedArc) -> bool:
    """Say whether an arc's bend, towards the axis' side, and the circle around it bend against each other."""
    return part.curvature * float(part.normals[0][0] + part.normals[1][0]) > 0.0


def _arc_shares(part: TurnedArc, count: int, spread: float, *, split: bool) -> Array:
    """Return where on an arc its rings lie after the first, as shares of its length."""
    radius = sqrt(2.0 * spread)
    side = min(_circle(part) / count, 1.9 * radius)
    # On a saddle the deviations to both sides add up: of the side, and of the strip's height.
    room = 4.0 * radius**2 - side**2 if _is_saddle(part) else (radius + sqrt(radius**2 - 0.25 * side**2)) ** 2
    bend = abs(part.curvature)
    strips = max(1, ceil(abs(float(part.path.turns[part.number])) / sqrt(bend * max(room, 0.25 * radius**2))))
    shares = np.arange(1, strips + 1) / strips
    # Where the bend changes its side, a lower strip leaves room for both.
    return np.concatenate([[0.3 / strips], shares]) if split else shares
