"""The third-order functions that second-order tetrahedra lack.

One for each edge, L_i L_j (L_i - L_j), and one for each face, L_i L_j L_k, with
barycentric coordinates L: together with the ten second-order functions they
span all cubics.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ...geometry.mesh import EDGES, FACET_EDGES

#: Corner triples of the four faces of a cell.
FACES = ((0, 1, 2), (0, 1, 3), (0, 2, 3), (1, 2, 3))


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Enrichment:
    """The third-order functions of a mesh, one vector unknown each.

    Attributes
    ----------
    cells : (c, 10) int
        Function of each edge (0..5) and face (6..9) of each cell.
    signs : (c, 10) float
        -1 where the edge runs against the mesh-wide direction, else 1.
    mids : (d, 3) int
        Mid-side nodes on the edge (three times the same) or round the face.
    """

    cells: np.ndarray
    signs: np.ndarray
    mids: np.ndarray


def enrich(cells: np.ndarray) -> Enrichment:
    """Return the enrichment of second-order cells (c, 10)."""
    corners = cells[:, :4]
    edges = corners[:, EDGES]
    signs = np.ones((len(cells), 10))
    signs[:, :6] = np.where(edges[..., 0] < edges[..., 1], 1.0, -1.0)
    around = [[EDGES.index(pair) for pair in ((i, j), (j, k), (i, k))] for i, j, k in FACES]
    mids = np.concatenate(
        [np.repeat(cells[:, 4:, None], 3, axis=2), np.sort(cells[:, 4:][:, around], axis=2)],
        axis=1,
    )
    keys = _keys(mids, int(mids.max()) + 1)
    _, first, where = np.unique(keys, return_index=True, return_inverse=True)
    return Enrichment(cells=where.reshape(keys.shape), signs=signs, mids=mids.reshape(-1, 3)[first])


def enrichment_functions(points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return values (q, 10) and reference gradients (q, 10, 3) of the added functions."""
    bary = np.column_stack([1.0 - points.sum(axis=1), points])
    slopes = np.vstack([-np.ones(3), np.eye(3)])
    values = np.empty((len(points), 10))
    gradients = np.empty((len(points), 10, 3))
    for k, (i, j) in enumerate(EDGES):
        a, b = bary[:, i], bary[:, j]
        values[:, k] = a * b * (a - b)
        gradients[:, k] = np.outer(2 * a * b - b * b, slopes[i])
        gradients[:, k] += np.outer(a * a - 2 * a * b, slopes[j])
    for k, (i, j, m) in enumerate(FACES, 6):
        a, b, c = bary[:, i], bary[:, j], bary[:, m]
        values[:, k] = a * b * c
        gradients[:, k] = np.outer(b * c, slopes[i])
        gradients[:, k] += np.outer(a * c, slopes[j]) + np.outer(a * b, slopes[m])
    return values, gradients


def facet_functions(
    space: Enrichment, facets: np.ndarray, points: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Return the functions seen by facets (f, 6): three edges and the face itself.

    Parameters
    ----------
    space : Enrichment
    facets : (f, 6) int
    points : (q, 2)
        Of the unit triangle.

    Returns
    -------
    where : (f, 4) int
        Their numbers.
    values : (f, q, 4) float
    """
    bary = np.column_stack([1.0 - points.sum(axis=1), points])
    edges = [bary[:, i] * bary[:, j] * (bary[:, i] - bary[:, j]) for i, j in FACET_EDGES]
    ends = facets[:, FACET_EDGES]
    signs = np.ones((len(facets), 4))
    signs[:, :3] = np.where(ends[..., 0] < ends[..., 1], 1.0, -1.0)
    mids = facets[:, 3:]
    wanted = np.concatenate(
        [np.repeat(mids[:, :, None], 3, axis=2), np.sort(mids, axis=1)[:, None]], axis=1
    )
    count = int(space.mids.max()) + 1
    where = np.searchsorted(_keys(space.mids, count), _keys(wanted, count))
    return where, signs[:, None, :] * np.stack([*edges, bary.prod(axis=1)], axis=1)


def _keys(mids: np.ndarray, count: int) -> np.ndarray:
    """Return one number for each triple of mid-side nodes (..., 3)."""
    return (mids[..., 0].astype(np.int64) * count + mids[..., 1]) * count + mids[..., 2]
