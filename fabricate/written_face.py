"""The reflecting face that a written mould curve would make: its arcs laid under the sheet in place of the exact curve.

The sheet keeps the thickness that it has on the exact mould, as a law of thinning speaks of the shape as a whole and
not of hundredths of a millimetre.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from numpy.polynomial.chebyshev import Chebyshev
from numpy.typing import NDArray

from fabricate.chain import Chain
from profiles.arcpath import ArcPath
from profiles.meridian import Meridian
from profiles.series import Series, resolve

Array = NDArray[np.float64]

NEWTON_STEPS = 12
INNER_POWER = 12
"""Even, and high enough that the lean at a bore's edge dies out near it and moves the virtual vertex by little."""


def face_over(chain: Chain, path: ArcPath, *, clearance: float = 0.0) -> Meridian:
    """Return the reflecting face on a written mould, before release and before the part has shrunk away from it.

    Parameters
    ----------
    chain : Chain
        The job's maps.
    path : ArcPath
        The written curve in the mould frame, from the axis or bore outwards, within a small part of the sheet's
        thickness of the exact one [mm].
    clearance : float
        How far above the forming surface the path is meant to run, as that of a nose centre does, along the normal and
        towards the focus positive [mm].

    Returns
    -------
    Meridian
        The face from the axis to the end of the trim, at the arc lengths of the exact one to first order [mm].

    Raises
    ------
    GeometryError
        If the path strays so far that the face folds.
    """
    laid = path.moved(along=-chain.vertex_gap).scaled(1.0 / chain.enlargement)
    strays = _strays(chain, laid, clearance / chain.enlargement)
    return chain.on_mould.offset(strays)


def _strays(chain: Chain, path: ArcPath, clearance: float) -> Series:
    """Return how far a path lies above its place, along its normal, over the face's arc length [mm]."""
    face, shift = chain.on_mould, chain.shift
    change = shift.derivative()

    def contact(where: Array) -> tuple[Array, Array]:
        """Return points of the exact forming surface and its slope there."""
        slope, thick = face.slope(where), shift(where)
        points = face.points(where) + thick[:, None] * face.normals(where)
        lean = slope + np.arctan2(change(where), 1.0 - face.curvature(where) * thick)
        return points + clearance * np.stack([-np.sin(lean), np.cos(lean)], axis=-1), lean

    joints = face.at_radius(np.clip(path.vertices[:, 0], 0.0, float(face.radius(face.end))))
    for _ in range(NEWTON_STEPS):
        feet, lean = contact(joints)
        step = ((path.vertices - feet) * np.stack([np.cos(lean), np.sin(lean)], axis=-1)).sum(axis=1)
        joints = np.clip(joints + step, face.start, face.end)
    first = float(joints[0])
    joints[-1] = face.end
    pieces: list[Chebyshev] = []
    for number, ends in enumerate(pairwise(joints.tolist())):
        breaks = np.array([ends[0], *(place for place in shift.breaks if ends[0] < place < ends[1]), ends[1]])

        def height(where: Array, number: int = number) -> Array:
            return _height_over(path, number, *contact(where))[None]

        (stretch,) = resolve(height, breaks, sizes=[face.end])
        pieces.extend(stretch.pieces)
    strays = Series(tuple(pieces))
    return strays if first <= 1e-9 * face.end else _carried_to_axis(strays, first)


def _carried_to_axis(strays: Series, first: float) -> Series:
    """Return what strays outside a bore, carried on to the axis: level there, and smooth at the bore."""
    value, lean = float(strays(first)), float(strays.derivative()(first))

    def inside(where: Array) -> Array:
        return np.asarray((value + lean * first / INNER_POWER * ((where / first) ** INNER_POWER - 1.0))[None])

    (inner,) = resolve(inside, [0.0, first], sizes=[strays.size])
    return Series((*inner.pieces, *strays.pieces))


def _height_over(path: ArcPath, number: int, points: Array, slope: Array) -> Array:
    """Return how far one stretch of a path lies from points, along the normals of given slopes, the left positive."""
    normals = np.stack([-np.sin(slope), np.cos(slope)], axis=-1)
    start = path.vertices[number]
    if path.bulges[number] == 0.0:
        along = path.vertices[number + 1] - start
        across = np.array([-along[1], along[0]])
        return np.asarray(((start - points) @ across) / (normals @ across))
    centre = path.centres[number]
    gap = points - centre
    aside = (gap * normals).sum(axis=1)
    # |gap|² − ρ² over ρ, without the loss of digits where ρ is large: from the arc's own start.
    power = ((points - start) * (points + start - 2.0 * centre)).sum(axis=1)
    root = np.sqrt(np.maximum(aside**2 - power, 0.0))
    return np.asarray(-power / (aside + np.copysign(root, aside)))
