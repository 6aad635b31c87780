"""The motion of modes at quadrature points: sums over a body that no mesh can bend.

Every number that names a mode is an integral over the body, never a sum over
nodes: nodes crowd where the mesh is fine, volume does not.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from ....geometry.anatomy import Frame
from ....geometry.mesh import Mesh
from ..element import cell_gradients, cell_quadrature, cell_values

#: Numbers held at once in a block of cells: keeps a block within the cache.
_BLOCK = 1_500_000

#: Returns a matrix (rows, p), dense or sparse, for points first..last of a body.
Functionals = Callable[[int, int], Any]


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Motion:
    """Modes of a body, in its anatomy's frame, with its quadrature.

    Attributes
    ----------
    cells : (c, 10) int
    nodes : (n, 3) float, m
        The nodes in the frame.
    nodal : (n, 3, m) float
        Displacements at the nodes, in the frame.
    basis : (q, 10) float
        Shape functions at the quadrature points of a cell.
    points : (c * q, 3) float, m
        Quadrature points in the frame.
    weights : (c * q,) float, m3
    """

    cells: np.ndarray
    nodes: np.ndarray
    nodal: np.ndarray
    basis: np.ndarray
    points: np.ndarray
    weights: np.ndarray

    @property
    def count(self) -> int:
        """Number of modes m."""
        return self.nodal.shape[2]

    @property
    def low(self) -> np.ndarray:
        """Lower corner (3,) of the body's box in the frame."""
        return self.nodes.min(axis=0)

    @property
    def high(self) -> np.ndarray:
        """Upper corner (3,) of the body's box in the frame."""
        return self.nodes.max(axis=0)

    @property
    def cell_size(self) -> float:
        """Edge of a regular tetrahedron of the mean cell volume, m."""
        volume = self.weights.sum() / len(self.cells)
        return float((6.0 * np.sqrt(2.0) * volume) ** (1.0 / 3.0))

    def sums(
        self, functionals: Functionals | None = None, groups: np.ndarray | None = None
    ) -> tuple[np.ndarray, np.ndarray]:
        """Return linear sums and energies of all modes in one pass over the cells.

        Parameters
        ----------
        functionals : callable, optional
            Called with first and last point of a block; returns (rows, p) that
            multiplies the motion there (the quadrature weight included).
        groups : (points,) int, optional
            Group of each point, from 0; default one group for the body.

        Returns
        -------
        linear : (m, rows, 3) float
            Sum over the points of functional times displacement.
        energies : (g, 3, m, m) float
            Integral over each group of the product of two modes, by direction.
        """
        groups = np.zeros(len(self.weights), int) if groups is None else groups
        count, q = self.count, len(self.basis)
        energies = np.zeros((int(groups.max(initial=0)) + 1, 3, count, count))
        linear: Any = 0.0
        step = max(1, _BLOCK // (q * 3 * count))
        roots = np.sqrt(self.weights)
        flat = self.nodal.reshape(len(self.nodal), -1)
        for first in range(0, len(self.cells), step):
            cells = self.cells[first : first + step]
            low, high = first * q, (first + len(cells)) * q
            moved = np.matmul(self.basis, flat[cells]).reshape(high - low, -1)
            if functionals is not None:
                linear = linear + functionals(low, high) @ moved
            moved *= roots[low:high, None]
            here = groups[low:high]
            for group in np.unique(here):
                part = moved if (here == group).all() else moved[here == group]
                part = part.reshape(-1, 3, count).transpose(1, 0, 2)
                energies[group] += part.transpose(0, 2, 1) @ part
        if functionals is None:
            return np.zeros((count, 0, 3)), energies
        return np.asarray(linear).reshape(-1, 3, count).transpose(2, 0, 1), energies


def motion(mesh: Mesh, frame: Frame, shapes: np.ndarray, degree: int = 2) -> Motion:
    """Return the motion of modes `shapes` (m, n, 3) on a mesh, in a frame.

    Points of degree 2, four a cell with equal weights, are close enough together for
    shapes that a second-order mesh can carry, and a rule of one sign keeps every
    energy positive and every sum of shares exact (the rules of degree 3 and 4 have a
    negative weight).
    """
    at, weights = cell_quadrature(degree)
    basis = cell_values(at)
    local = frame.local(mesh.points)
    corners = local[mesh.cells]
    jacobian = np.matmul(
        corners.transpose(0, 2, 1)[:, None], cell_gradients(at)[None]
    )  # (c, q, 3, 3)
    a, b, c = (jacobian[..., k] for k in range(3))
    measure = np.abs(np.einsum("cqi,cqi->cq", np.cross(a, b), c)) * weights
    return Motion(
        cells=mesh.cells,
        nodes=local,
        nodal=np.ascontiguousarray(frame.rotated(shapes).transpose(1, 2, 0)),
        basis=basis,
        points=np.matmul(basis, corners).reshape(-1, 3),
        weights=measure.ravel(),
    )
