"""Stiffness and mass of a mesh of ten-node tetrahedra.

Element matrices come from P[a, b, k, l] = integral of dNa/dx_k dNb/dx_l. The
stiffness block of nodes a, b is linear in it, K_ij = sum_kl C_ikjl P_kl, so
one 9 x 9 matrix holds any material; isotropic ones need no path of their own.
On straight cells P = det J (J^-1 (x) J^-1) P_reference: two small products of
whole-mesh matrices and no loop over points. Curved cells take the sum over
quadrature points.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp

from ...geometry.mesh import EDGES, Mesh
from .element import cell_gradients, cell_quadrature, cell_values
from .pattern import Pattern, make_pattern

#: Degrees of exactness of the quadrature rules. Straight cells: exact.
STRAIGHT_STIFFNESS, STRAIGHT_MASS = 2, 4
CURVED_STIFFNESS, CURVED_MASS = 4, 6

#: A mid-side node nearer than this share of the edge to its middle is straight.
_STRAIGHT = 1e-10

#: Cells worked on at once where arrays of several hundred numbers a cell arise.
_CHUNK = 4096

#: Voigt row of the tensor component (i, j).
_VOIGT = np.array([[0, 5, 4], [5, 1, 3], [4, 3, 2]])


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Matrices:
    """Stiffness and mass of a body, upper triangle of node pairs.

    Attributes
    ----------
    pattern : Pattern
    blocks : (9, p) float, N/m
        Component (i, j) of the stiffness block of each pair in row 3 i + j.
    masses : (p,) float, kg
        The mass matrix, the same for the three directions.
    """

    pattern: Pattern
    blocks: np.ndarray
    masses: np.ndarray

    @property
    def stiffness(self) -> sp.csr_matrix:
        """The whole symmetric stiffness matrix (3n, 3n), N/m; unknown 3 node + direction."""
        pattern = self.pattern
        upper = sp.bsr_matrix(
            (self.blocks.T.reshape(-1, 3, 3), pattern.indices, pattern.indptr),
            shape=(3 * pattern.nodes,) * 2,
        ).tocsr()
        strict = sp.triu(upper, 1, format="csr")
        return strict + strict.T.tocsr() + sp.diags_array(upper.diagonal()).tocsr()

    @property
    def mass(self) -> sp.csr_matrix:
        """The whole symmetric mass matrix (n, n), kg, of one direction."""
        return symmetric(self.pattern, self.masses)


def assemble(
    mesh: Mesh, stiffness: np.ndarray, density: float, pattern: Pattern | None = None
) -> Matrices:
    """Return stiffness and consistent mass of a homogeneous body.

    Parameters
    ----------
    mesh : Mesh
    stiffness : (6, 6) float, Pa
        Voigt order xx yy zz yz xz xy, engineering shear strains.
    density : float, kg/m3
    pattern : Pattern, optional
        Of a mesh with the same cells.
    """
    cells = mesh.cells
    if pattern is None:
        pattern = make_pattern(cells, len(mesh.points))
    material = _material_map(np.asarray(stiffness, float))
    curved = np.flatnonzero(curved_cells(mesh.points, cells))
    straight = np.setdiff1d(np.arange(len(cells)), curved, assume_unique=True)

    metric, volumes = _straight_metric(mesh.points, cells[straight], material)
    stiff_reference, mass_reference = _reference_tensors()
    bent_blocks, bent_masses = _curved(mesh.points[cells[curved]], material, density)

    blocks = np.empty((9, len(pattern.indices)))
    entries = np.empty((len(cells), 100))
    for component in range(9):
        # Without curved cells the products land in place.
        if len(curved):
            entries[straight] = metric[component] @ stiff_reference
            entries[curved] = bent_blocks[component]
        else:
            np.matmul(metric[component], stiff_reference, out=entries)
        blocks[component] = pattern.gather @ entries.ravel()
    entries[straight] = (density * volumes)[:, None] * mass_reference
    entries[curved] = bent_masses
    return Matrices(pattern=pattern, blocks=blocks, masses=pattern.gather @ entries.ravel())


def curved_cells(points: np.ndarray, cells: np.ndarray) -> np.ndarray:
    """Return (c,) bool: which cells have a mid-side node off the middle of its edge."""
    bent = np.zeros(len(cells), bool)
    for node, (i, j) in enumerate(EDGES, start=4):
        start, end = points[cells[:, i]], points[cells[:, j]]
        off = np.linalg.norm(points[cells[:, node]] - 0.5 * (start + end), axis=1)
        bent |= off > _STRAIGHT * np.linalg.norm(end - start, axis=1)
    return bent


def symmetric(pattern: Pattern, values: np.ndarray) -> sp.csr_matrix:
    """Return the whole symmetric (n, n) matrix whose upper triangle is given by pairs."""
    upper = sp.csr_matrix((values, pattern.indices, pattern.indptr), shape=(pattern.nodes,) * 2)
    diagonal = sp.diags_array(upper.diagonal(), format="csr")
    return (upper + upper.T.tocsr() - diagonal).tocsr()


def _material_map(stiffness: np.ndarray) -> np.ndarray:
    """Return L (9, 9) with K_(ij) = sum_(kl) P_(kl) L[(kl), (ij)], L = C_ikjl."""
    tensor = stiffness[_VOIGT[:, :, None, None], _VOIGT[None, None]]
    return tensor.transpose(1, 3, 0, 2).reshape(9, 9)


def _reference_tensors() -> tuple[np.ndarray, np.ndarray]:
    """Return integrals on the unit tetrahedron: P (9, 100) and the mass (100,)."""
    x, w = cell_quadrature(STRAIGHT_STIFFNESS)
    g = cell_gradients(x)
    stiff = np.einsum("q,qak,qbl->klab", w, g, g).reshape(9, 100)
    x, w = cell_quadrature(STRAIGHT_MASS)
    n = cell_values(x)
    return stiff, np.einsum("q,qa,qb->ab", w, n, n).ravel()


def _straight_metric(
    points: np.ndarray, cells: np.ndarray, material: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Return what turns reference integrals into stiffness, and det J.

    Returns
    -------
    (9, c, 9) float
        For each component (i, j): det J (J^-1 (x) J^-1) L over reference pairs (k, l).
    (c,) float
        det J, six times the volume.
    """
    corner = points[cells[:, :4]]
    jacobian = (corner[:, 1:] - corner[:, :1]).transpose(0, 2, 1)
    determinant = np.linalg.det(jacobian)
    inverse = np.linalg.inv(jacobian)
    outer = inverse[:, :, None, :, None] * inverse[:, None, :, None, :]
    outer *= determinant[:, None, None, None, None]
    metric = outer.reshape(-1, 9) @ material
    return np.ascontiguousarray(metric.reshape(-1, 9, 9).transpose(2, 0, 1)), determinant


def _curved(
    nodes: np.ndarray, material: np.ndarray, density: float
) -> tuple[np.ndarray, np.ndarray]:
    """Return stiffness (9, c, 100) and mass (c, 100) of curved cells, nodes (c, 10, 3)."""
    blocks = np.empty((9, len(nodes), 100))
    masses = np.empty((len(nodes), 100))
    x, w = cell_quadrature(CURVED_STIFFNESS)
    slopes = cell_gradients(x)
    y, v = cell_quadrature(CURVED_MASS)
    values, value_slopes = cell_values(y), cell_gradients(y)
    pairs = (values[:, :, None] * values[:, None, :]).reshape(len(y), 100)
    for first in range(0, len(nodes), _CHUNK):
        part = slice(first, min(first + _CHUNK, len(nodes)))
        jacobian = np.matmul(nodes[part].transpose(0, 2, 1)[:, None], slopes)
        gradients = np.matmul(slopes, np.linalg.inv(jacobian))
        weights = w * np.linalg.det(jacobian)
        count = len(gradients)
        flat = gradients.reshape(count, len(w), 30)
        products = np.matmul((flat * weights[..., None]).transpose(0, 2, 1), flat)
        products = products.reshape(count, 10, 3, 10, 3).transpose(0, 1, 3, 2, 4)
        blocks[:, part] = (products.reshape(-1, 9) @ material).T.reshape(9, count, 100)
        jacobian = np.matmul(nodes[part].transpose(0, 2, 1)[:, None], value_slopes)
        masses[part] = (density * v * np.linalg.det(jacobian)) @ pairs
    return blocks, masses
