"""Boundary facets gathered into faces: by names given to triangles or nodes, else by angle."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components

#: Neighbouring facets whose normals turn by more than this lie on two faces, degrees.
FEATURE_ANGLE = 40.0


def faces_of(
    points: np.ndarray,
    facets: np.ndarray,
    triangles: Mapping[str, np.ndarray],
    nodes: Mapping[str, np.ndarray],
) -> dict[str, np.ndarray]:
    """Return the faces of a mesh: name -> indices into `facets`, so that each has a name.

    Parameters
    ----------
    points : (n, 3)
    facets : (f, 6) int
    triangles : name -> (k, 3) int
        Corner nodes of named triangles; those inside the body are left out.
    nodes : name -> (k,) int
        Named nodes: a facet is on that face if all its corners are.

    Notes
    -----
    Facets without a name are parted at edges sharper than `FEATURE_ANGLE` and
    called face_1, face_2 … by increasing x, y, z of their middles.
    """
    key = _keys(facets[:, :3], len(points))
    order = np.argsort(key)
    found: dict[str, np.ndarray] = {}
    for name, corners in triangles.items():
        wanted = _keys(corners, len(points))
        at = np.minimum(np.searchsorted(key[order], wanted), len(key) - 1)
        hits = np.unique(order[at[key[order][at] == wanted]])
        if len(hits):
            found[name] = hits
    for name, members in nodes.items():
        inside = np.zeros(len(points), bool)
        inside[members] = True
        hits = np.flatnonzero(inside[facets[:, :3]].all(axis=1))
        if len(hits) and name not in found:
            found[name] = hits
    unnamed = np.ones(len(facets), bool)
    for hits in found.values():
        # A name for the whole surface tells no face from another.
        if len(hits) < len(facets):
            unnamed[hits] = False
    count = 0
    for group in _parted(points, facets, np.flatnonzero(unnamed)):
        count += 1
        while f"face_{count}" in found:
            count += 1
        found[f"face_{count}"] = group
    return found


def _keys(triangles: np.ndarray, n: int) -> np.ndarray:
    a, b, c = np.sort(triangles, axis=1).astype(np.int64).T
    return (a * n + b) * n + c


def _parted(points: np.ndarray, facets: np.ndarray, chosen: np.ndarray) -> list[np.ndarray]:
    """Return groups of the `chosen` facets joined across smooth edges, in a stable order."""
    if not len(chosen):
        return []
    corners = facets[chosen, :3]
    a, b, c = (points[corners[:, k]] for k in range(3))
    normals = np.cross(b - a, c - a)
    areas = np.linalg.norm(normals, axis=1)
    normals /= areas[:, None]
    edges = np.sort(corners[:, [[0, 1], [1, 2], [2, 0]]].reshape(-1, 2), axis=1)
    _, number = np.unique(edges, axis=0, return_inverse=True)
    number = number.ravel()
    order = np.argsort(number, kind="stable")
    count = np.bincount(number)
    pairs = order[count[number[order]] == 2].reshape(-1, 2) // 3
    cosines = np.einsum("ij,ij->i", normals[pairs[:, 0]], normals[pairs[:, 1]])
    i, j = pairs[cosines > np.cos(np.radians(FEATURE_ANGLE))].T
    links = coo_matrix((np.ones(len(i)), (i, j)), shape=(len(chosen), len(chosen)))
    _, labels = connected_components(links, directed=False)
    weights = np.bincount(labels, areas)
    middles = (a + b + c) / 3 * areas[:, None]
    centres = np.column_stack([np.bincount(labels, middles[:, k]) for k in range(3)])
    centres /= weights[:, None]
    grid = 1e-6 * float(np.ptp(points, axis=0).max())
    rank = sorted(range(len(weights)), key=lambda k: tuple(np.round(centres[k] / grid).tolist()))
    return [chosen[labels == k] for k in rank]
