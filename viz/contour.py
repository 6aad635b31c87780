"""Zero lines of a field on a surface: nodal lines of a mode, and silhouettes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .surface import Surface, point_normals

#: A smooth part of the surface whose normal motion stays below this share of the
#: greatest motion has no nodal lines of its own: it runs in its own plane.
_STILL_PATCH = 0.25

#: Motion below this share of the greatest is rest: held faces and what is close to them.
_REST = 1e-4
_NEARLY_REST = 2e-3


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Segments:
    """Line pieces whose ends lie on edges of the triangles.

    Attributes
    ----------
    low, high : (2 k,) int
        Points at the ends of the triangle edge each end lies on; ends 2 i and
        2 i + 1 make one piece.
    part : (2 k,) float
        How far from `low` to `high`, 0 to 1.
    triangles : (k,) int
        The triangle each piece lies on.
    """

    low: np.ndarray
    high: np.ndarray
    part: np.ndarray
    triangles: np.ndarray

    def places(self, points: np.ndarray) -> np.ndarray:
        """Return the ends (2 k, 3) for points (p, 3) of the surface, moved or not."""
        t = self.part[:, None]
        return (1 - t) * points[self.low] + t * points[self.high]

    def only(self, keep: np.ndarray) -> Segments:
        """Return the pieces chosen by a mask (k,)."""
        ends = np.repeat(keep, 2)
        return Segments(
            low=self.low[ends],
            high=self.high[ends],
            part=self.part[ends],
            triangles=self.triangles[keep],
        )


def zero_lines(triangles: np.ndarray, values: np.ndarray) -> Segments:
    """Return where a field, linear on each triangle, passes through zero.

    Parameters
    ----------
    triangles : (t, 3) int
    values : (p,) float
    """
    positive = values >= 0
    sides = positive[triangles]
    crossed = np.flatnonzero(sides.any(axis=1) & ~sides.all(axis=1))
    corner, side = triangles[crossed], sides[crossed]
    # The corner alone on its side; the line crosses the two edges that leave it.
    alone = np.where(side.sum(axis=1) == 1, np.argmax(side, axis=1), np.argmin(side, axis=1))
    row = np.arange(len(crossed))
    lone = corner[row, alone]
    others = np.column_stack([corner[row, (alone + 1) % 3], corner[row, (alone + 2) % 3]])
    low, high = np.repeat(lone, 2), others.ravel()
    part = values[low] / (values[low] - values[high])
    return Segments(low=low, high=high, part=np.clip(part, 0.0, 1.0), triangles=crossed)


def nodal_lines(surface: Surface, motion: np.ndarray) -> Segments:
    """Return where the surface does not move along its normal.

    Parameters
    ----------
    surface : Surface
    motion : (p, 3) float
        Displacement at its points, any scale.

    Notes
    -----
    Parts of the surface that hardly move along their normal, such as the narrow
    sides of a bar that bends flatwise, and held faces have no lines. Nor have places
    where a round surface only turns its normal through a right angle to a motion that
    stays the same, such as the flanks of a round bar that bends.
    """
    normals = point_normals(surface.points, surface.triangles)
    normal = np.einsum("ij,ij->i", motion, normals)
    size = np.linalg.norm(motion, axis=1)
    top = size.max(initial=0.0)
    if top == 0:
        return zero_lines(surface.triangles, np.ones(len(motion)))
    reach = np.zeros(surface.patches.max() + 1)
    np.maximum.at(reach, surface.patches, np.abs(normal))
    normal = np.where(reach[surface.patches] < _STILL_PATCH * top, 1.0, normal)
    lines = zero_lines(surface.triangles, normal)
    around = size[surface.triangles[lines.triangles]]
    held = (around < _REST * top).sum(axis=1) > 1
    held |= around.max(axis=1, initial=0.0) < _NEARLY_REST * top
    ends = lines.places(surface.points).reshape(-1, 2, 3)
    length = np.linalg.norm(ends[:, 1] - ends[:, 0], axis=1)
    speck = 1e-6 * np.ptp(surface.points, axis=0).max()
    corners = surface.triangles[lines.triangles]
    changes = _range(motion[corners], normals[corners].mean(axis=1))
    turns = _range(normals[corners], motion[corners].mean(axis=1))
    return lines.only(~held & (length > speck) & (changes >= turns))


def _range(vectors: np.ndarray, along: np.ndarray) -> np.ndarray:
    """Return how much vectors (t, 3, 3) at the corners of triangles differ along `along` (t, 3)."""
    return np.ptp(np.einsum("tci,ti->tc", vectors, along), axis=1)
