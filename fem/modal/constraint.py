"""Supports as the motions they leave to every node.

A support takes directions away from nodes. What is left is written as three
perpendicular local directions per node and a mark on each that is free. On most
nodes the local directions are x, y, z; only supports on oblique or curved faces
turn them.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp

from .element import facet_gradients

#: Normals at a node that differ by less (radians) belong to one smooth face.
SMOOTH = np.radians(15.0)

#: A direction this close to a coordinate axis (radians) is that axis.
_ALIGNED = 1e-9

#: A rigid motion whose share along held normals is below this (root mean square)
#: is one that the true, unmeshed face allows.
_NEARLY = 2e-3

#: Parameters of the six nodes of a facet, VTK order.
_FACET_NODES = np.array([[0, 0], [1, 0], [0, 1], [0.5, 0], [0.5, 0.5], [0, 0.5]])


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Constraint:
    """The motions that supports leave to each node.

    Attributes
    ----------
    free : (n, 3) bool
        Whether a node can move along its local direction.
    moving : (m,) int
        Nodes that can move in some direction, ascending.
    partly : (k,) int
        Those among them that cannot move in every direction, ascending.
    turned : (t,) int
        Nodes whose local directions are not x, y, z, ascending.
    directions : (t, 3, 3) float
        Their local directions, as columns.
    """

    free: np.ndarray
    moving: np.ndarray
    partly: np.ndarray
    turned: np.ndarray
    directions: np.ndarray

    @property
    def unknowns(self) -> int:
        """Number of free local components."""
        return int(self.free.sum())

    def local(self, vectors: np.ndarray) -> np.ndarray:
        """Return components (n, 3, k) along the local directions of vectors (n, 3, k)."""
        if len(self.turned) == 0:
            return vectors
        out = vectors.copy()
        out[self.turned] = np.matmul(self.directions.transpose(0, 2, 1), vectors[self.turned])
        return out

    def to_unknowns(self, vectors: np.ndarray) -> np.ndarray:
        """Return T^T v (3m, k) of vectors (3n, k)."""
        out = self.local(vectors.reshape(len(self.free), 3, -1))
        out = out if len(self.moving) == len(out) else out[self.moving]
        return self._without_held(out).reshape(-1, out.shape[-1])

    def to_vectors(self, unknowns: np.ndarray) -> np.ndarray:
        """Return T y (3n, k) of unknowns (3m, k)."""
        out = np.zeros((len(self.free), 3, unknowns.shape[1]))
        out[self.moving] = self._without_held(unknowns.reshape(-1, 3, unknowns.shape[1]))
        if len(self.turned):
            out[self.turned] = np.matmul(self.directions, out[self.turned])
        return out.reshape(-1, unknowns.shape[1])

    def _without_held(self, local: np.ndarray) -> np.ndarray:
        """Return local components (m, 3, k) of the moving nodes, zero where held."""
        partly = self.partly
        if len(partly) == 0:
            return local
        at = np.searchsorted(self.moving, partly)
        out = local.copy()
        out[at] *= self.free[partly, :, None]
        return out

    @property
    def transformation(self) -> sp.csr_matrix:
        """T (3n, 3m): displacements at all nodes from local ones of the moving nodes.

        Columns are orthonormal, or zero for directions held at a moving node.
        """
        n, moving = len(self.free), self.moving
        blocks = np.tile(np.eye(3), (n, 1, 1))
        blocks[self.turned] = self.directions
        blocks = blocks[moving] * self.free[moving, None, :]
        indptr = np.concatenate([[0], np.cumsum(self.free.any(axis=1))])
        shape = (3 * n, 3 * len(moving))
        return sp.csr_matrix(sp.bsr_matrix((blocks, np.arange(len(moving)), indptr), shape=shape))

    def projectors(self) -> np.ndarray:
        """Return the matrix (n, 3, 3) of each node that leaves only its free motion."""
        out = np.zeros((len(self.free), 3, 3))
        out[:, [0, 1, 2], [0, 1, 2]] = self.free
        turned = self.directions * self.free[self.turned, None, :]
        out[self.turned] = np.matmul(turned, turned.transpose(0, 2, 1))
        return out

    def violation(self, vectors: np.ndarray) -> np.ndarray:
        """Return the part of vectors (3n, k) along held directions, local, (n, 3, k)."""
        local = self.local(vectors.reshape(len(self.free), 3, -1)).copy()
        local[self.free] = 0.0
        return local


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Held:
    """Directions taken away from nodes.

    Attributes
    ----------
    nodes : (k,) int
        A node may come several times.
    directions : (k, 3) float
        Unit vectors.
    """

    nodes: np.ndarray
    directions: np.ndarray


def hold_axes(nodes: np.ndarray, axes: Sequence[int]) -> Held:
    """Return the coordinate directions `axes` (0, 1, 2) held at nodes (k,)."""
    unit = np.eye(3)[list(axes)]
    return Held(nodes=np.repeat(nodes, len(unit)), directions=np.tile(unit, (len(nodes), 1)))


def hold_normals(points: np.ndarray, facets: np.ndarray) -> Held:
    """Return the normals of facets (f, 6) held at their nodes.

    Facets that meet smoothly at a node give it one normal, their mean; across a
    sharp edge the node has a normal from each side.
    """
    normals = _nodal_normals(points[facets]).reshape(-1, 3)
    nodes = facets.ravel()
    order = np.argsort(nodes, kind="stable")
    nodes, normals = nodes[order], normals[order]
    starts = np.flatnonzero(np.diff(nodes, prepend=-1))
    stops = np.append(starts[1:], len(nodes))
    means = np.add.reduceat(normals, starts)
    means /= np.linalg.norm(means, axis=1)[:, None]
    owner = np.repeat(np.arange(len(starts)), stops - starts)
    aligned = np.einsum("ij,ij->i", normals, means[owner])
    sharp = np.minimum.reduceat(aligned, starts) < np.cos(SMOOTH)

    held_nodes, held = [nodes[starts[~sharp]]], [means[~sharp]]
    for at in np.flatnonzero(sharp):
        apart = _distinct(normals[starts[at] : stops[at]])
        held_nodes.append(np.full(len(apart), nodes[starts[at]]))
        held.append(apart)
    return Held(nodes=np.concatenate(held_nodes), directions=np.concatenate(held))


def make_constraint(nodes: int, held: Iterable[Held]) -> Constraint:
    """Return what is left of the motion of `nodes` nodes when directions are held."""
    held = list(held)
    free = np.ones((nodes, 3), bool)
    none = np.zeros(0, np.int64)
    at = np.concatenate([none, *(h.nodes for h in held)])
    directions = np.concatenate([np.zeros((0, 3)), *(h.directions for h in held)])

    largest = np.abs(directions).argmax(axis=1) if len(at) else none
    rest = directions.copy()
    rest[np.arange(len(at)), largest] = 0.0
    along_axis = np.linalg.norm(rest, axis=1) < _ALIGNED
    free[at[along_axis], largest[along_axis]] = False

    oblique = ~along_axis & free[at].any(axis=1)
    order = np.argsort(at[oblique], kind="stable")
    at, directions = at[oblique][order], directions[oblique][order]
    turned, starts = np.unique(at, return_index=True)
    frames = np.empty((len(turned), 3, 3))
    groups = np.split(directions, starts[1:]) if len(turned) else []
    for k, (node, group) in enumerate(zip(turned, groups, strict=True)):
        stack = np.vstack([np.eye(3)[~free[node]], group])
        _, strength, frame = np.linalg.svd(stack, full_matrices=True)
        # Two unit vectors at an angle d have singular values sqrt(1 +- cos d).
        rank = int((strength > np.sqrt(1.0 - np.cos(SMOOTH))).sum())
        free[node] = np.arange(3) >= rank
        frames[k] = frame.T
    some = free.any(axis=1)
    return Constraint(
        free=free,
        moving=np.flatnonzero(some),
        partly=np.flatnonzero(some & ~free.all(axis=1)),
        turned=turned,
        directions=frames,
    )


def mend_normals(points: np.ndarray, held: Held, motions: np.ndarray) -> Held:
    """Return held normals made exactly perpendicular to motions they nearly allow.

    The normals of a meshed cylinder are not quite radial, so that turning about
    its axis would meet a false resistance.

    Parameters
    ----------
    points : (n, 3) float
    held : Held
    motions : (3n, 6) float
        Rigid motions, all of about the same size.
    """
    if len(held.nodes) == 0:
        return held
    there = motions.reshape(len(points), 3, -1)[held.nodes]
    across = np.einsum("ki,kim->km", held.directions, there)
    square, mixes = np.linalg.eigh(across.T @ across / len(held.nodes))
    near = square < _NEARLY**2
    if not near.any():
        return held
    allowed = there @ mixes[:, near]
    remove = np.matmul(allowed, np.linalg.pinv(allowed, rcond=1e-3))
    directions = held.directions - np.einsum("kij,kj->ki", remove, held.directions)
    return Held(
        nodes=held.nodes,
        directions=directions / np.linalg.norm(directions, axis=1)[:, None],
    )


def _distinct(normals: np.ndarray) -> np.ndarray:
    """Return the mean of each group of normals (k, 3) that point nearly the same way."""
    groups: list[list[np.ndarray]] = []
    for normal in normals:
        for group in groups:
            if normal @ group[0] > np.cos(SMOOTH):
                group.append(normal)
                break
        else:
            groups.append([normal])
    means = np.array([np.sum(group, axis=0) for group in groups])
    return means / np.linalg.norm(means, axis=1)[:, None]


def _nodal_normals(facets: np.ndarray) -> np.ndarray:
    """Return unit normals (f, 6, 3) of curved facets (f, 6, 3) at their own nodes."""
    slopes = facet_gradients(_FACET_NODES)
    along = np.einsum("qa,fai->fqi", slopes[..., 0], facets)
    across = np.einsum("qa,fai->fqi", slopes[..., 1], facets)
    normals = np.cross(along, across)
    return normals / np.linalg.norm(normals, axis=-1)[..., None]
