"""Patches: rectangles imprinted on flat named faces."""

from __future__ import annotations

from typing import Any

import numpy as np

from ..errors import InputError
from ..solid import Patch
from .naming import samples

#: Distance from the plane below which a face is flat, as a share of the body's diagonal.
_FLAT = 1e-6


def corners(cad: Any, patch: Patch, faces: list[int], size: float) -> np.ndarray:
    """Return the corners (4, 3) of a patch in the plane of the faces it lies on.

    Parameters
    ----------
    cad : kernel handle
    patch : Patch
    faces : tags of the faces that carry the name ``patch.face``
    size : diagonal of the body, mm

    Raises
    ------
    InputError
        If the face is not flat or the rectangle has no area.
    """
    points = np.vstack([_spread(cad, tag) for tag in faces])
    centre = points.mean(axis=0)
    normal = np.linalg.svd(points - centre)[2][2]
    if np.abs((points - centre) @ normal).max() > _FLAT * size:
        raise InputError("a patch needs a flat face", value=patch.face)
    axis = int(np.argmax(np.abs(normal)))
    first, second = (i for i in range(3) if i != axis)
    (a0, b0), (a1, b1) = patch.low, patch.high
    if not (a0 < a1 and b0 < b1):
        raise InputError(
            "a patch runs from its lower to its higher corner",
            value=f"from {patch.low} to {patch.high}",
        )
    ring = np.zeros((4, 3))
    ring[:, first] = a0, a1, a1, a0
    ring[:, second] = b0, b0, b1, b1
    across = [first, second]
    ring[:, axis] = centre[axis] - ((ring - centre)[:, across] @ normal[across]) / normal[axis]
    if abs(normal[axis]) > 1.0 - 1e-12:
        ring[:, axis] = points[0, axis]
    return ring


def add_rectangle(cad: Any, ring: np.ndarray) -> int:
    """Return the tag of a plane face with these corners (4, 3) in the current model."""
    occ = cad.model.occ
    points = [occ.addPoint(*p) for p in ring.tolist()]
    lines = [occ.addLine(points[i], points[(i + 1) % 4]) for i in range(4)]
    return occ.addPlaneSurface([occ.addCurveLoop(lines)])


def imprint(cad: Any, volume: int, rings: list[np.ndarray]) -> int:
    """Split the faces of a volume along rectangles; return the volume's new tag."""
    tools = [(2, add_rectangle(cad, ring)) for ring in rings]
    _, parts = cad.model.occ.fragment([(3, volume)], tools)
    cad.model.occ.synchronize()
    return next(tag for dim, tag in parts[0] if dim == 3)


def _spread(cad: Any, face: int) -> np.ndarray:
    """Return points (k, 3) all over a face: its corners and points inside."""
    around = cad.model.getBoundary([(2, face)], oriented=False, recursive=True)
    corner = [cad.model.getValue(0, tag, []) for dim, tag in around if dim == 0]
    return np.vstack([*corner, samples(cad, face)])
