"""Whether loose facets make one closed surface: corners matched by their exact coordinates.

A surface is closed and consistently wound where each *edge*, a pair of corners, is used exactly twice, once in each
direction. Every check collects what it finds and none stops the next.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from profiles.facets import longest_sides

Array = NDArray[np.float64]
Rows = NDArray[np.intp]
Finding = tuple[str, str]

NORMAL_LEAN = 1e-3
"""Angle allowed between a stated normal and the one of the winding [rad]."""


@dataclass(frozen=True, eq=False)
class Topology:
    """How facets hang together.

    Parameters
    ----------
    vertices : ndarray of shape (n, 3)
        Corners that differ [mm].
    triangles : ndarray of shape (m, 3)
        Row numbers of each facet's corners.
    pairs : ndarray of shape (e, 2)
        Row numbers of the two facets at each edge that is used once in either direction.
    edges : ndarray of shape (e, 2)
        Row numbers of its corners, in the direction in which the first of the two facets uses it.
    volume : float
        Signed volume [mm^3], positive where the facets face outwards.
    findings : tuple of (str, str)
        A code and a sentence for everything that is wrong.
    """

    vertices: Array
    triangles: Rows
    pairs: Rows
    edges: Rows
    volume: float
    findings: tuple[Finding, ...]


def topology(corners: Array, normals: Array) -> Topology:
    """Return how facets hang together, and what is wrong with it.

    Parameters
    ----------
    corners : ndarray of shape (m, 3, 3)
        Three corners of each facet [mm], finite.
    normals : ndarray of shape (m, 3)
        The normal stated for each facet [-].

    Returns
    -------
    Topology
        Its findings are ``degenerate``, ``duplicate``, ``open``, ``crowded``, ``winding``, ``pieces``, ``inside-out``
        and ``normal``.
    """
    vertices, triangles = _welded(corners)
    findings = _flat_facets(corners, triangles) + _twins(vertices, triangles)
    pairs, edges, wrong = _edges(vertices, triangles)
    findings += wrong
    pieces = _pieces(len(triangles), pairs)
    if pieces > 1:
        findings.append(("pieces", f"the surface is in {pieces} pieces that share no edge; allowed: 1"))
    volume = _volume(corners)
    if volume <= 0.0:
        findings.append(
            ("inside-out", f"the facets face inwards: they enclose {volume:.6g} mm^3; allowed: more than 0")
        )
    findings += _stated(corners, normals)
    return Topology(vertices, triangles, pairs, edges, volume, tuple(findings))


def facet_normals(corners: Array) -> Array:
    """Return the unit normals that the winding of facets gives them.

    Parameters
    ----------
    corners : ndarray of shape (m, 3, 3)
        Three corners of each facet [mm].

    Returns
    -------
    ndarray of shape (m, 3)
        Unit vectors [-]; 0 where a facet has no area.
    """
    normals = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
    return np.asarray(normals / np.maximum(np.linalg.norm(normals, axis=1), 1e-300)[:, None])


def _welded(corners: Array) -> tuple[Array, Rows]:
    """Return corners that differ, and each facet's by row number."""
    points = corners.reshape(-1, 3) + 0.0
    order = np.lexsort(points.T)
    ordered = points[order]
    new = np.concatenate([[True], (ordered[1:] != ordered[:-1]).any(axis=1)])
    numbers = np.empty(len(points), dtype=np.intp)
    numbers[order] = np.cumsum(new) - 1
    return ordered[new], numbers.reshape(-1, 3)


def _flat_facets(corners: Array, triangles: Rows) -> list[Finding]:
    area = np.linalg.norm(np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]), axis=1)
    same = (triangles == np.roll(triangles, 1, axis=1)).any(axis=1)
    flat = same | (area <= 1e-12 * longest_sides(corners) ** 2)
    if not flat.any():
        return []
    where = _place(corners[int(np.argmax(flat))].mean(axis=0))
    return [("degenerate", f"{_many(flat, 'facet')} no area, the first {where}; allowed: none")]


def _twins(vertices: Array, triangles: Rows) -> list[Finding]:
    ordered = np.sort(triangles, axis=1)
    ordered = ordered[np.lexsort(ordered.T)]
    twin = (ordered[1:] == ordered[:-1]).all(axis=1)
    if not twin.any():
        return []
    where = _place(vertices[ordered[int(np.argmax(twin))]].mean(axis=0))
    return [("duplicate", f"{_many(twin, 'facet')} a twin with the same corners, the first {where}; allowed: none")]


def _edges(vertices: Array, triangles: Rows) -> tuple[Rows, Rows, list[Finding]]:
    """Return pairs of facets at sound edges, those edges, and what is wrong with the others."""
    starts, ends = triangles.ravel(), np.roll(triangles, -1, axis=1).ravel()
    number = len(vertices)
    keys = np.minimum(starts, ends) * number + np.maximum(starts, ends)
    order = np.argsort(keys, kind="stable")
    first = np.flatnonzero(np.concatenate([[True], keys[order[1:]] != keys[order[:-1]]]))
    uses = np.diff(np.append(first, len(keys)))
    forward = np.add.reduceat((starts < ends)[order].astype(np.intp), first)
    sound = (uses == 2) & (forward == 1)
    one, other = order[first[sound]], order[first[sound] + 1]
    findings = []
    for code, wrong, what in (
        ("open", uses == 1, "one facet only, so that the surface is open"),
        ("crowded", uses > 2, "more than two facets"),
        ("winding", (uses == 2) & (forward != 1), "two facets that are wound against each other"),
    ):
        if wrong.any():
            edge = order[first[int(np.argmax(wrong))]]
            where = _place(0.5 * (vertices[starts[edge]] + vertices[ends[edge]]))
            findings.append((code, f"{_many(wrong, 'edge')} {what}, the first {where}; allowed: none"))
    pairs = np.column_stack([one // 3, other // 3])
    return pairs, np.column_stack([starts[one], ends[one]]), findings


def _pieces(number: int, pairs: Rows) -> int:
    """Return into how many pieces facets fall that hang together by pairs."""
    labels = np.arange(number)
    while True:
        before = labels
        labels = labels.copy()
        low = np.minimum(before[pairs[:, 0]], before[pairs[:, 1]])
        for side in (0, 1):
            np.minimum.at(labels, pairs[:, side], low)
            np.minimum.at(labels, before[pairs[:, side]], low)
        labels = labels[labels]
        if (labels == before).all():
            return len(np.unique(labels))


def _volume(corners: Array) -> float:
    """Return the signed volume under facets, seen from the middle of their box to lose no digits."""
    middle = 0.5 * (corners.min(axis=(0, 1)) + corners.max(axis=(0, 1)))
    one, two, three = (corners[:, number] - middle for number in range(3))
    return float((one * np.cross(two, three)).sum() / 6.0)


def _stated(corners: Array, normals: Array) -> list[Finding]:
    found = facet_normals(corners)
    length = np.linalg.norm(normals, axis=1)
    off = np.linalg.norm(normals - found * length[:, None], axis=1)
    wrong = (off > NORMAL_LEAN * length) & (np.abs(found).max(axis=1) > 0.0) | (length == 0.0)
    if not wrong.any():
        return []
    where = _place(corners[int(np.argmax(wrong))].mean(axis=0))
    return [("normal", f"{_many(wrong, 'facet')} a stated normal that is not its winding's, the first {where}")]


def _many(wrong: NDArray[np.bool_], what: str) -> str:
    number = int(wrong.sum())
    return f"1 {what} has" if number == 1 else f"{number} {what}s have"


def _place(point: Array) -> str:
    return f"at radius {float(np.hypot(point[0], point[1])):.4f} mm, height {float(point[2]):.4f} mm"
