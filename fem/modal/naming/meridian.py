"""The meridian of a body of revolution: its rings, and a way along them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.sparse import csr_array
from scipy.sparse.csgraph import dijkstra

from .motion import Motion

#: Steps over the larger extent of the meridian.
_STEPS = 40


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Meridian:
    """Rings of a body of revolution.

    Attributes
    ----------
    ring : (points,) int
        Ring of each quadrature point.
    height : (b,) float, m
        Mean height of each ring along the axis.
    row : (b,) int
        Place of each ring along the axis, from the lowest.
    station : (b,) int
        Place of each ring along the meridian, from one end to the other; the
        rings of one place lie beside each other through the wall.
    normal : (s, 2) float
        Normal of the meridian at each place, radial and axial component.
    """

    ring: np.ndarray
    height: np.ndarray
    row: np.ndarray
    station: np.ndarray
    normal: np.ndarray


def meridian(motion: Motion) -> Meridian:
    """Return the meridian of a body, found from where its points lie.

    The half plane (radius, height) is covered with squares; those that hold part
    of the body, joined to their neighbours, are walked from end to end.
    """
    weights = motion.weights
    place = np.stack([np.hypot(motion.points[:, 0], motion.points[:, 1]), motion.points[:, 2]], 1)
    low = place.min(axis=0)
    step = max(np.ptp(place, axis=0).max() / _STEPS, 0.6 * motion.cell_size)
    square = ((place - low) / step).astype(int)
    keys = square[:, 0] * (square[:, 1].max() + 3) + square[:, 1]
    _, first, ring = np.unique(keys, return_index=True, return_inverse=True)
    square = square[first]
    volume = np.bincount(ring, weights)
    centre = np.stack([np.bincount(ring, weights * place[:, k]) / volume for k in range(2)], 1)

    far = np.abs(square[:, None] - square[None]).max(axis=2)
    apart = np.linalg.norm(square[:, None] - square[None], axis=2)
    graph = csr_array(np.where((far >= 1) & (far <= 2), apart, 0.0))
    start = int(np.argmax(_reach(dijkstra(graph, indices=0))))
    length = _reach(dijkstra(graph, indices=start))
    station = np.unique(np.round(length).astype(int), return_inverse=True)[1]
    held = np.bincount(station, volume)
    path = np.stack([np.bincount(station, volume * centre[:, k]) / held for k in range(2)], 1)
    tangent = np.gradient(path, axis=0) if len(path) > 1 else np.array([[0.0, 1.0]])
    size = np.linalg.norm(tangent, axis=1, keepdims=True)
    tangent = tangent / np.where(size > 0.0, size, 1.0)
    return Meridian(
        ring=ring,
        height=centre[:, 1],
        row=np.unique(square[:, 1], return_inverse=True)[1],
        station=station,
        normal=np.stack([tangent[:, 1], -tangent[:, 0]], axis=1),
    )


def _reach(length: np.ndarray) -> np.ndarray:
    """Return path lengths with what cannot be reached set to 0."""
    return np.where(np.isfinite(length), length, 0.0)
