"""The kernel's mesh as arrays: VTK node order, outward facets, clean coordinates."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import MeshError

_TET10, _TRI6 = 11, 9

#: The kernel numbers the last two mid-side nodes of a tetrahedron the other way round.
_TO_VTK = [0, 1, 2, 3, 4, 5, 6, 7, 9, 8]

#: Corner columns of the four faces of a cell.
_SIDES = np.array([[1, 2, 3], [0, 3, 2], [0, 1, 3], [0, 2, 1]])


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Arrays:
    """A mesh in mm, with facets by CAD face.

    Attributes
    ----------
    points : (n, 3) float, mm
    cells : (c, 10) int, VTK order
    facets : (f, 6) int, VTK order, normals outward
    face : (f,) int, tag of the CAD face of each facet
    """

    points: np.ndarray
    cells: np.ndarray
    facets: np.ndarray
    face: np.ndarray


def read(cad: Any, volume: int, faces: list[int]) -> Arrays:
    """Return the mesh of a volume and its faces in the current model.

    Raises
    ------
    MeshError
        If the facets do not close the cells' boundary.
    """
    tags, flat, _ = cad.model.mesh.getNodes()
    where = np.zeros(int(tags.max()) + 1, dtype=np.int64)
    where[tags.astype(np.int64)] = np.arange(len(tags))
    cells = _nodes(cad, 3, volume, _TET10, where)[:, _TO_VTK]
    parts = [_nodes(cad, 2, tag, _TRI6, where) for tag in faces]
    facets = np.concatenate(parts)
    face = np.repeat(faces, [len(p) for p in parts])

    used, inverse = np.unique(cells, return_inverse=True)
    points = flat.reshape(-1, 3)[used]
    cells = inverse.reshape(cells.shape)
    at = np.searchsorted(used, facets)
    if at.max() >= len(used) or np.any(used[at] != facets):
        raise MeshError("a face of the mesh does not belong to the body; try another element size")
    facets = _outward(points, cells, at)
    return Arrays(points=_snapped(cad, points, facets, face), cells=cells, facets=facets, face=face)


def _nodes(cad: Any, dim: int, tag: int, kind: int, where: np.ndarray) -> np.ndarray:
    kinds, _, nodes = cad.model.mesh.getElements(dim, tag)
    if list(kinds) != [kind]:
        raise MeshError("a part of the body was left without cells; try another element size")
    width = 10 if kind == _TET10 else 6
    return where[nodes[0].astype(np.int64).reshape(-1, width)]


def _outward(points: np.ndarray, cells: np.ndarray, facets: np.ndarray) -> np.ndarray:
    """Return the facets turned so that their normals leave the cells behind them."""
    n = len(points)

    def key(triples: np.ndarray) -> np.ndarray:
        a, b, c = np.sort(triples, axis=1).astype(np.int64).T
        return (a * n + b) * n + c

    sides = cells[:, _SIDES].reshape(-1, 3)
    keys, first, counts = np.unique(key(sides), return_index=True, return_counts=True)
    wanted = key(facets[:, :3])
    at = np.minimum(np.searchsorted(keys, wanted), len(keys) - 1)
    closed = np.all(keys[at] == wanted) and len(np.unique(wanted)) == len(wanted)
    if not closed or np.any(counts[at] != 1) or np.count_nonzero(counts == 1) != len(wanted):
        raise MeshError("the mesh does not close around the body; try another element size")
    # Sides of positive cells point outward; a facet that runs the other way is turned.
    out = sides[first[at]]
    start = np.argmax(out == facets[:, [0]], axis=1)
    following = out[np.arange(len(out)), (start + 1) % 3]
    turned = following != facets[:, 1]
    facets = facets.copy()
    facets[turned] = facets[turned][:, [0, 2, 1, 5, 4, 3]]
    return facets


def _snapped(cad: Any, points: np.ndarray, facets: np.ndarray, face: np.ndarray) -> np.ndarray:
    """Return points with the nodes of faces square to an axis exactly in their plane."""
    points = points.copy()
    size = float(np.ptp(points, axis=0).max())
    for tag in np.unique(face):
        nodes = np.unique(facets[face == tag])
        low, high = points[nodes].min(axis=0), points[nodes].max(axis=0)
        for axis in np.flatnonzero(high - low < 1e-8 * size):
            points[nodes, axis] = round(float(low[axis] + high[axis]) / 2, 9)
    return points + 0.0
