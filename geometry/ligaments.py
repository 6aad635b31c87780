"""Places of a mesh that are thin against its cells, and want finer ones."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

#: A place is thin where the wall is under this share of the facets' own size.
_THIN = 0.4

#: Where more than this share of the surface is thin, the whole body is.
_LOCAL = 0.2


@dataclass(frozen=True, kw_only=True, slots=True)
class Spot:
    """A ball in which cells are to be of `size`; mm."""

    centre: tuple[float, float, float]
    radius: float
    size: float


def thin_places(points: np.ndarray, facets: np.ndarray, size: float) -> list[Spot]:
    """Return spots where two surfaces are close together through the metal.

    A body that is thin all over (a plate, a tube) has none: its size was chosen
    for the whole.

    Parameters
    ----------
    points : (n, 3) mm
    facets : (f, 6) int, normals outward
    size : global element size, mm
    """
    a, b, c = (points[facets[:, k]] for k in range(3))
    normal = np.cross(b - a, c - a)
    twice = np.linalg.norm(normal, axis=1)
    normal = normal / twice[:, None]
    centre = (a + b + c) / 3
    # Side of the equilateral triangle of the same area.
    side = np.sqrt(twice / 2 * 4 / 3**0.5)

    wall = _walls(centre, normal, side)
    thin = wall < _THIN * side
    if twice[thin].sum() > _LOCAL * twice.sum():
        return []
    return spots(centre[thin], np.maximum(wall[thin], size / 8), size)


def spots(centres: np.ndarray, sizes: np.ndarray, size: float) -> list[Spot]:
    """Return few spots that cover all centres (k, 3), each as fine as its finest (k,)."""
    if not len(centres):
        return []
    pitch = 0.5 * size
    while True:
        cell = np.floor(centres / pitch).astype(np.int64)
        _, group = np.unique(cell, axis=0, return_inverse=True)
        group = group.ravel()
        count = int(group.max()) + 1
        if count <= 300:
            break
        pitch *= 1.5
    found = []
    for k in range(count):
        mine = group == k
        middle = centres[mine].mean(axis=0)
        reach = float(np.linalg.norm(centres[mine] - middle, axis=1).max())
        x, y, z = middle.tolist()
        found.append(
            Spot(centre=(x, y, z), radius=reach + 0.5 * size, size=float(sizes[mine].min()))
        )
    return found


def _walls(centre: np.ndarray, normal: np.ndarray, side: np.ndarray) -> np.ndarray:
    """Return the wall (f,) behind each facet, infinite where it is not thin."""
    wall = np.full(len(centre), np.inf)
    # Facets that are fine already neither ask for finer ones nor crowd the search.
    coarse = np.flatnonzero(side > 0.3 * side.max())
    i, j = coarse[_pairs(centre[coarse], 0.8 * float(side.max()))]
    across = centre[j] - centre[i]
    depth = -np.einsum("ij,ij->i", across, normal[i])
    aside = np.linalg.norm(across + depth[:, None] * normal[i], axis=1)
    facing = np.einsum("ij,ij->i", normal[i], normal[j]) < -0.7
    behind = facing & (depth > 0) & (aside < 0.6 * side[i])
    np.minimum.at(wall, i[behind], depth[behind])
    return wall


def _pairs(points: np.ndarray, reach: float) -> np.ndarray:
    """Return pairs (2, p) of points in the same or in neighbouring cubes of side `reach`."""
    cube = np.floor((points - points.min(axis=0)) / reach).astype(np.int64) + 1
    _, ny, nz = cube.max(axis=0) + 2
    key = (cube[:, 0] * ny + cube[:, 1]) * nz + cube[:, 2]
    order = np.argsort(key, kind="stable")
    ranked = key[order]
    steps = np.arange(-1, 2)
    first, second = [], []
    for shift in ((steps[:, None] * ny + steps[None, :]) * nz).ravel():
        # Three cubes in a row along z are one run of keys.
        low = np.searchsorted(ranked, key + shift - 1, side="left")
        count = np.searchsorted(ranked, key + shift + 1, side="right") - low
        start = np.repeat(low - np.concatenate(([0], np.cumsum(count)[:-1])), count)
        first.append(np.repeat(np.arange(len(points)), count))
        second.append(order[start + np.arange(count.sum())])
    return np.stack((np.concatenate(first), np.concatenate(second)))
