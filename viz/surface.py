"""The curved outer surface of a mesh as flat triangles that follow a mode shape."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.sparse as sparse
from scipy.sparse.csgraph import connected_components

from ..geometry.mesh import Mesh

#: Triangles meeting at more than this are parted by an edge one can see, degrees.
SHARP_DEGREES = 30.0


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Surface:
    """Triangles on the outer surface; points on sharp edges stand once for each side.

    Attributes
    ----------
    points : (p, 3) float, m
    triangles : (t, 3) int
        Outward normal by the right-hand rule.
    weights : (p, n) sparse
        Values at the points from values at the n nodes of the mesh.
    edges : (e, 2) int
        Points at the ends of each sharp edge.
    edge_triangles : (e, 2) int
        The two triangles that meet there.
    patches : (p,) int
        Number of the smooth part of the surface each point belongs to.
    """

    points: np.ndarray
    triangles: np.ndarray
    weights: sparse.csr_array
    edges: np.ndarray
    edge_triangles: np.ndarray
    patches: np.ndarray

    def values(self, nodal: np.ndarray) -> np.ndarray:
        """Return values (p, ...) at the points from nodal ones (n, ...)."""
        nodal = np.asarray(nodal, dtype=float)
        flat = self.weights @ nodal.reshape(len(nodal), -1)
        return flat.reshape(-1, *nodal.shape[1:])


def outer_surface(mesh: Mesh, *, levels: int = 1, sharp: float = SHARP_DEGREES) -> Surface:
    """Return the outer surface of a mesh.

    Parameters
    ----------
    mesh : Mesh
    levels : int
        Each curved facet becomes 4**levels triangles; 1 uses just its six nodes.
    sharp : float, degrees
        Smallest angle between triangles that counts as an edge.
    """
    corners, weights = _split_facets(mesh.facets, len(mesh.points), levels)
    places = weights @ mesh.points
    normals = _unit(_triangle_normals(places, corners))
    first, second, shared = _neighbours(corners)
    bend = np.einsum("ij,ij->i", normals[first], normals[second])
    smooth = bend > np.cos(np.radians(sharp))
    # A point is a set of triangle corners joined across smooth edges.
    corner_of = _corner_finder(corners)
    joined = np.vstack(
        [
            np.column_stack([corner_of(first[smooth], v), corner_of(second[smooth], v)])
            for v in (shared[smooth, 0], shared[smooth, 1])
        ]
    )
    count, label = _components(corners.size, joined)
    source = np.empty(count, dtype=np.int64)
    source[label] = corners.ravel()
    triangles = label.reshape(-1, 3)
    rim = ~smooth
    edges = np.column_stack(
        [label[corner_of(first[rim], shared[rim, 0])], label[corner_of(first[rim], shared[rim, 1])]]
    )
    sides = np.vstack([triangles[:, :2], triangles[:, 1:]])
    return Surface(
        points=places[source],
        triangles=triangles,
        weights=sparse.csr_array(weights[source]),
        edges=edges,
        edge_triangles=np.column_stack([first[rim], second[rim]]),
        patches=_components(count, sides)[1],
    )


def triangle_normals(points: np.ndarray, triangles: np.ndarray) -> np.ndarray:
    """Return the unit normals (t, 3) of triangles."""
    return _unit(_triangle_normals(points, triangles))


def point_normals(points: np.ndarray, triangles: np.ndarray) -> np.ndarray:
    """Return unit normals (p, 3) at points: the mean over their triangles, by area."""
    normals = _triangle_normals(points, triangles)
    flat = triangles.ravel()
    each = np.repeat(normals, 3, axis=0)
    total = [np.bincount(flat, weights=each[:, k], minlength=len(points)) for k in range(3)]
    return _unit(np.column_stack(total))


def _triangle_normals(points: np.ndarray, triangles: np.ndarray) -> np.ndarray:
    a, b, c = (points[triangles[:, k]] for k in range(3))
    return np.cross(b - a, c - a)


def _unit(vectors: np.ndarray) -> np.ndarray:
    length = np.linalg.norm(vectors, axis=1, keepdims=True)
    return vectors / np.where(length > 0, length, 1.0)


def _components(count: int, pairs: np.ndarray) -> tuple[int, np.ndarray]:
    graph = sparse.coo_array(
        (np.ones(len(pairs), dtype=np.int8), (pairs[:, 0], pairs[:, 1])), shape=(count, count)
    )
    found, label = connected_components(graph, directed=False)
    return int(found), label.astype(np.int64)


def _corner_finder(triangles: np.ndarray):
    """Return a function (triangle, vertex) -> number of that corner, 3 * triangle + 0..2."""

    def find(triangle: np.ndarray, vertex: np.ndarray) -> np.ndarray:
        return 3 * triangle + np.argmax(triangles[triangle] == vertex[:, None], axis=1)

    return find


def _neighbours(triangles: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return pairs of triangles (k,), (k,) that share an edge, and its ends (k, 2)."""
    ends = np.sort(triangles[:, [[0, 1], [1, 2], [2, 0]]].reshape(-1, 2), axis=1)
    owner = np.repeat(np.arange(len(triangles)), 3)
    order = np.lexsort((ends[:, 1], ends[:, 0]))
    ends, owner = ends[order], owner[order]
    same = np.flatnonzero(np.all(ends[1:] == ends[:-1], axis=1))
    return owner[same], owner[same + 1], ends[same]


def _split_facets(
    facets: np.ndarray, nodes: int, levels: int
) -> tuple[np.ndarray, sparse.csr_array]:
    """Return triangles (t, 3) and the weights (p, n) of their corners.

    A lattice of 2**levels steps a side lies on each facet. Facets that share a
    side share its lattice points, found again by the corners they lie between.
    """
    steps = 2**levels
    lattice = np.array(
        [(steps - i - j, i, j) for j in range(steps + 1) for i in range(steps + 1 - j)]
    )
    number = {(int(i), int(j)): k for k, (_, i, j) in enumerate(lattice)}
    small = []
    for j in range(steps):
        for i in range(steps - j):
            small.append((number[i, j], number[i + 1, j], number[i, j + 1]))
            if i + j < steps - 1:
                small.append((number[i + 1, j], number[i + 1, j + 1], number[i, j + 1]))
    key = np.where(lattice[None] > 0, facets[:, None, :3] * (steps + 1) + lattice[None], -1)
    key = np.sort(key.reshape(-1, 3), axis=1)
    _, chosen, inverse = np.unique(key, axis=0, return_index=True, return_inverse=True)
    corners = inverse.reshape(len(facets), -1)[:, small].reshape(-1, 3)

    facet, place = np.divmod(chosen, len(lattice))
    shape = _quadratic(lattice / steps)[place]
    rows = np.repeat(np.arange(len(chosen)), 6)
    weights = sparse.csr_array(
        (shape.ravel(), (rows, facets[facet].ravel())), shape=(len(chosen), nodes)
    )
    weights.eliminate_zeros()
    return corners, weights


def _quadratic(area: np.ndarray) -> np.ndarray:
    """Return the six quadratic shape functions (q, 6) at area coordinates (q, 3), VTK order."""
    a, b, c = area.T
    return np.column_stack(
        [a * (2 * a - 1), b * (2 * b - 1), c * (2 * c - 1), 4 * a * b, 4 * b * c, 4 * c * a]
    )
