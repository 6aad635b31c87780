"""From where a body is drawn, how large, and how far its modes are exaggerated."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..geometry.anatomy import Anatomy, Kind

#: Direction towards the eye in the body's own axes (along, across, through): a
#: long part runs left to right, and motion along all three axes shows.
_EYES = {
    Kind.BAR: (-0.36, -0.74, 0.57),
    Kind.REVOLVED: (-0.40, -0.85, 0.34),
}
_EYE_OF_OTHERS = (-0.38, -0.70, 0.60)

#: Greatest motion drawn, as a share of the body's diagonal.
_REACH = 0.085

#: Greatest slope drawn: steeper, and straight-line motion no longer looks like turning.
_SLOPE = 0.55

#: Lengths a scale bar may have.
_ROUND = (1.0, 2.0, 5.0)


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class View:
    """A parallel view.

    Attributes
    ----------
    right, up, eye : (3,) unit vectors
        To the right and up on the picture; from the body towards the eye.
    low, high : (2,) m
        What must fit on the picture, in the coordinates along right and up.
    along : (3,) unit vector
        The direction the scale bar is drawn and measured in.
    """

    right: np.ndarray
    up: np.ndarray
    eye: np.ndarray
    low: np.ndarray
    high: np.ndarray
    along: np.ndarray

    def flat(self, points: np.ndarray) -> np.ndarray:
        """Return picture coordinates (n, 2), m, of points (n, 3)."""
        return np.asarray(points) @ np.column_stack([self.right, self.up])

    @property
    def size(self) -> np.ndarray:
        """Width and height (2,), m, of what must fit."""
        return self.high - self.low


def choose_view(anatomy: Anatomy, points: np.ndarray, moved: list[np.ndarray]) -> View:
    """Return a view that shows bending, twisting and sideways motion alike.

    Parameters
    ----------
    anatomy : Anatomy
    points : (p, 3) m
        The body at rest.
    moved : list of (p, 3) m
        Displacements as drawn; the body fits with each added and taken away.
    """
    axes = _axes(anatomy, points)
    eye = np.array(_EYES.get(anatomy.kind, _EYE_OF_OTHERS)) @ axes
    eye /= np.linalg.norm(eye)
    right = np.cross(axes[2], eye)
    right /= np.linalg.norm(right)
    up = np.cross(eye, right)
    local = points @ axes.T
    extent = np.ptp(local, axis=0)
    long = extent[0] > 1.5 * extent[1]
    view = View(
        right=right,
        up=up,
        eye=eye,
        low=np.zeros(2),
        high=np.zeros(2),
        along=axes[0] if long else right,
    )
    low, high = view.flat(points).min(axis=0), view.flat(points).max(axis=0)
    for motion in moved:
        for sign in (1.0, -1.0):
            flat = view.flat(points + sign * motion)
            low, high = np.minimum(low, flat.min(axis=0)), np.maximum(high, flat.max(axis=0))
    return View(right=right, up=up, eye=eye, low=low, high=high, along=view.along)


def exaggeration(points: np.ndarray, triangles: np.ndarray, motion: np.ndarray) -> float:
    """Return the factor by which a motion (p, 3) is drawn.

    The greatest displacement becomes a set share of the body's diagonal, or
    less where the body would be drawn torn: slopes are held down.
    """
    size = np.linalg.norm(motion, axis=1)
    top = size.max(initial=0.0)
    if top == 0:
        return 0.0
    diagonal = np.linalg.norm(np.ptp(points, axis=0))
    first, second = triangles[:, [0, 1, 2]].ravel(), triangles[:, [1, 2, 0]].ravel()
    rise = np.linalg.norm(motion[first] - motion[second], axis=1)
    run = np.linalg.norm(points[first] - points[second], axis=1)
    # The steepest hundredth is left out: stress is singular at sharp corners.
    slope = np.quantile(rise / run, 0.99)
    return min(_REACH * diagonal / top, _SLOPE / slope if slope > 0 else np.inf)


def scale_bar_length(longest: float) -> float:
    """Return the largest 1, 2 or 5 times a power of ten not over `longest`."""
    power = 10.0 ** np.floor(np.log10(longest))
    return max(r * power for r in _ROUND if r * power <= longest * (1 + 1e-9))


def _axes(anatomy: Anatomy, points: np.ndarray) -> np.ndarray:
    """Return the body's own axes (3, 3), rows: along, across, through.

    A body lying with its long side across (a comb on its base) is turned so
    that the longer side runs along the picture.
    """
    axes = np.array(anatomy.frame.axes, dtype=float)
    extent = np.ptp(points @ axes.T, axis=0)
    if anatomy.kind in (Kind.BAR, Kind.PLATE) and extent[1] > 1.2 * extent[0]:
        return np.array([axes[1], -axes[0], axes[2]])
    return axes
