"""Whether the loops of a profile make a region: closed, not crossing, holes inside."""

from __future__ import annotations

from typing import Any

import numpy as np

from ..errors import InputError
from ..solid import Profile
from .profiles import Outline, draw

#: Points looked at on each curve that is not straight.
_SAMPLES = 48


def check(cad: Any, profile: Profile) -> None:
    """Refuse a profile whose loops cross or whose holes lie outside.

    The curves are drawn in a model of their own, which is removed again.

    Raises
    ------
    InputError
        Saying where, in the profile's coordinates.
    """
    current = cad.model.getCurrent()
    cad.model.add("contours")
    try:
        outline = draw(cad, profile)
        cad.model.occ.synchronize()
        axes = np.asarray((profile.u, profile.v), float)
        loops = [(points - np.asarray(profile.origin)) @ axes.T for points in _points(cad, outline)]
    finally:
        cad.model.remove()
        cad.model.setCurrent(current)
    refuse_crossings(loops)
    refuse_stray_holes(loops)


def refuse_crossings(loops: list[np.ndarray]) -> None:
    """Raise InputError if the closed polygons (k, 2) cross themselves or each other."""
    start = np.vstack(loops)
    end = np.vstack([np.roll(loop, -1, axis=0) for loop in loops])
    for first in range(0, len(start), 512):
        part = slice(first, first + 512)
        a, b = start[part, None], end[part, None]
        c, d = start[None], end[None]
        crossing = (_side(a, b, c) * _side(a, b, d) < 0) & (_side(c, d, a) * _side(c, d, b) < 0)
        if crossing.any():
            i = int(np.argmax(crossing.any(axis=1)))
            x, y = (start[first + i] + end[first + i]) / 2
            raise InputError(
                "the outline crosses itself or a hole", value=f"near ({x:.4g}, {y:.4g}) mm"
            )


def refuse_stray_holes(loops: list[np.ndarray]) -> None:
    """Raise InputError if a polygon after the first is outside it or inside another."""
    outer, *holes = loops
    for k, hole in enumerate(holes):
        x, y = hole[0]
        if not _inside(outer, hole[0]):
            raise InputError("a hole lies outside the outline", value=f"at ({x:.4g}, {y:.4g}) mm")
        if any(_inside(other, hole[0]) for i, other in enumerate(holes) if i != k):
            raise InputError("a hole lies in another hole", value=f"at ({x:.4g}, {y:.4g}) mm")


def _points(cad: Any, outline: Outline) -> list[np.ndarray]:
    """Return points (k, 3) along each loop, in order."""
    loops = []
    for curves in outline.curves:
        pieces = []
        for _, tag in curves:
            low, high = (float(bound[0]) for bound in cad.model.getParametrizationBounds(1, tag))
            count = 2 if cad.model.getType(1, tag) == "Line" else _SAMPLES
            at = np.linspace(low, high, count)
            pieces.append(np.asarray(cad.model.getValue(1, tag, at)).reshape(-1, 3))
        loops.append(_chained(pieces))
    return loops


def _chained(pieces: list[np.ndarray]) -> np.ndarray:
    """Return the pieces end to start as one ring; each may have been drawn backwards."""
    if len(pieces) == 1:
        return pieces[0][:-1]
    first, second = pieces[0], pieces[1]
    gaps = [np.linalg.norm(e - s) for e in (first[0], first[-1]) for s in (second[0], second[-1])]
    ring = [first[::-1] if int(np.argmin(gaps)) < 2 else first]
    for piece in pieces[1:]:
        last = ring[-1][-1]
        backwards = np.linalg.norm(piece[-1] - last) < np.linalg.norm(piece[0] - last)
        ring.append(piece[::-1] if backwards else piece)
    return np.vstack([piece[:-1] for piece in ring])


def _side(a: np.ndarray, b: np.ndarray, c: np.ndarray) -> np.ndarray:
    """Return +1, -1 or, near the line, 0: on which side of a to b the point c lies."""
    u, v = b - a, c - a
    cross = u[..., 0] * v[..., 1] - u[..., 1] * v[..., 0]
    scale = np.abs(u).sum(axis=-1) * np.abs(v).sum(axis=-1)
    return np.where(np.abs(cross) > 1e-9 * scale, np.sign(cross), 0.0)


def _inside(ring: np.ndarray, point: np.ndarray) -> bool:
    a, b = ring, np.roll(ring, -1, axis=0)
    spans = (a[:, 1] > point[1]) != (b[:, 1] > point[1])
    with np.errstate(divide="ignore", invalid="ignore"):
        x = a[:, 0] + (point[1] - a[:, 1]) / (b[:, 1] - a[:, 1]) * (b[:, 0] - a[:, 0])
    return bool(np.count_nonzero(spans & (point[0] < x)) % 2)
