"""How far each finite-element frequency is from the converged one.

A hierarchical estimator. The second-order space is enriched by the third-order
functions that it lacks, one for each edge, L_i L_j (L_i - L_j), and one for each
face, L_i L_j L_k. For a mode u with eigenvalue lambda the error equation

    a(e, v) = lambda m(u, v) - a(u, v)    for all v of the enrichment

is solved by a few steps of conjugate gradients with nodal 3 x 3 blocks as the
preconditioner; the energy a(e, e) is the excess of lambda over the eigenvalue of
the enriched space (Bank and Weiser, Math. Comp. 44 (1985) 283, for the idea;
Ainsworth and Oden, A Posteriori Error Estimation, Wiley 2000, for eigenvalues).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp

from ...geometry.mesh import Mesh
from .element import (
    cell_gradients,
    cell_quadrature,
    cell_values,
    facet_gradients,
    facet_quadrature,
    facet_values,
)
from .enrichment import Enrichment, enrich, enrichment_functions, facet_functions

#: Conjugate-gradient steps: the energy has settled to a few per cent.
STEPS = 4

_CHUNK = 4096


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Excess:
    """Estimated excess of each eigenvalue over the converged one.

    Attributes
    ----------
    relative : (m,) float
        (lambda - lambda converged) / lambda, never negative.
    by_cell : (c, m) float
        The part of it that comes from each cell; columns sum to `relative`.
    """

    relative: np.ndarray
    by_cell: np.ndarray


def excess(
    mesh: Mesh,
    stiffness: np.ndarray,
    density: float,
    eigenvalues: np.ndarray,
    shapes: np.ndarray,
    back_solve: Callable[[np.ndarray], np.ndarray],
    *,
    shift: float = 0.0,
    allowed: np.ndarray | None = None,
    saturation: np.ndarray | None = None,
    beds: Sequence[tuple[np.ndarray, float, float]] = (),
) -> Excess:
    """Return by how much each eigenvalue exceeds the converged one.

    Parameters
    ----------
    mesh : Mesh
    stiffness : (6, 6) Pa, Voigt order xx yy zz yz xz xy
    density : kg/m3
    eigenvalues : (m,) 1/s2
    shapes : (m, n, 3), mass-normalised
    back_solve : function
        From nodal forces (n, 3, m) to the displacements (n, 3, m) they cause in
        the second-order space under the mount: the factor of the eigen-solve.
    shift : 1/s2
        Of that factor, K - shift M.
    allowed : (n, 3, 3), optional
        Projector on the motions that the mount leaves each node; None: all.
    saturation : (c,), optional
        Factor over one for cells in which the third order leaves a known part
        of the error, see `singular.saturation`.
    beds : spring beds: facets (k, 6), normal and tangential stiffness, N/m3
    """
    space = enrich(mesh.cells)
    enriched, coupled = _element_matrices(mesh, space, stiffness, density)
    residual = _residual(mesh, space, coupled, eigenvalues, shapes)
    parts = [_Elements(where=space.cells, stiffness=enriched)]
    for bed in beds:
        elements, forces = _bed(mesh, space, bed, shapes)
        residual -= _scattered(elements.where, forces, residual.shape)
        parts.append(elements)
    answer = _solve(parts, residual, _allowed(space, allowed))
    by_cell, *in_beds = (part.energy(answer) for part in parts)
    energy = by_cell.sum(axis=0) + sum(bed.sum(axis=0) for bed in in_beds)
    by_cell *= energy / np.maximum(by_cell.sum(axis=0), 1e-300)
    # The second-order space moves too, in answer to the enrichment. With the
    # first term g of the Neumann series of the Schur complement, the energy
    # is E / (1 - g): a lower bound by the Lanczos argument, and close.
    local = parts[0].local(answer)
    force = np.matmul(coupled.stiffness.transpose(0, 2, 1), local)
    force = _gathered(mesh.cells, force.reshape(-1, 3 * len(eigenvalues)), len(mesh.points))
    force = force.reshape(len(mesh.points), 3, -1)
    if allowed is not None:
        force = np.matmul(allowed, force)
    answered = np.einsum("nim,nim->m", force, back_solve(force))
    # Less the answer along the modes themselves, which belongs to K - lambda M.
    along = np.einsum("jni,nim->jm", shapes, force, optimize=True)
    answered -= (along**2 / (eigenvalues - shift)[:, None]).sum(axis=0)
    gain = answered / np.maximum(energy, 1e-300)
    by_cell /= (1.0 - np.clip(gain, 0.0, 0.5)) * eigenvalues
    if saturation is not None:
        by_cell *= saturation[:, None]
    return Excess(relative=by_cell.sum(axis=0), by_cell=by_cell)


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class _Elements:
    """Elements of the enrichment: cells, or the facets of a spring bed.

    Attributes
    ----------
    where : (e, k) int
        Functions of each.
    stiffness : (e, 3 k, 3 k) float
    """

    where: np.ndarray
    stiffness: np.ndarray

    @property
    def width(self) -> int:
        """Number of functions of an element."""
        return self.where.shape[1]

    def local(self, x: np.ndarray) -> np.ndarray:
        """Return element vectors (e, 3 k, m) of vectors (d, 3, m)."""
        return x[self.where].reshape(len(self.where), 3 * self.width, -1)

    def energy(self, x: np.ndarray) -> np.ndarray:
        """Return the energy (e, m) that vectors (d, 3, m) put into each element."""
        own = self.local(x)
        return np.einsum("eim,eim->em", own, np.matmul(self.stiffness, own))


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class _Coupling:
    """Element matrices between the enrichment and the second-order space.

    Attributes
    ----------
    stiffness : (c, 30, 30) float
    mass : (c, 10, 10) float
    """

    stiffness: np.ndarray
    mass: np.ndarray


def _element_matrices(
    mesh: Mesh, space: Enrichment, stiffness: np.ndarray, density: float
) -> tuple[np.ndarray, _Coupling]:
    """Return the stiffness of the enrichment (c, 30, 30) and its coupling."""
    points, weights = cell_quadrature(4)
    bubbles, bubble_slopes = enrichment_functions(points)
    values, slopes = cell_values(points), cell_gradients(points)
    both = np.concatenate([bubble_slopes, slopes], axis=1)
    tensor = _gradient_tensor(stiffness)
    count = len(mesh.cells)
    enriched = np.empty((count, 30, 30))
    coupling = np.empty((count, 30, 30))
    mass = np.empty((count, 10, 10))
    product = bubbles[:, :, None] * values[:, None, :]
    for start in range(0, count, _CHUNK):
        part = slice(start, start + _CHUNK)
        x = mesh.points[mesh.cells[part]]
        jacobian = np.einsum("qaj,eai->eqij", slopes, x, optimize=True)
        measure = np.linalg.det(jacobian) * weights
        gradients = np.matmul(both, np.linalg.inv(jacobian))
        gradients[:, :, :10] *= space.signs[part, None, :, None]
        size, q = len(x), len(weights)
        right = gradients.reshape(size, q, 60)
        left = (gradients[:, :, :10] * measure[..., None, None]).reshape(size, q, 30)
        blocks = np.matmul(left.transpose(0, 2, 1), right).reshape(size, 10, 3, 20, 3)
        blocks = blocks.transpose(0, 1, 3, 2, 4).reshape(-1, 9) @ tensor
        blocks = blocks.reshape(size, 10, 20, 3, 3).transpose(0, 1, 3, 2, 4)
        blocks = blocks.reshape(size, 30, 60)
        enriched[part], coupling[part] = blocks[:, :, :30], blocks[:, :, 30:]
        mass[part] = density * np.tensordot(measure, product, axes=1)
        mass[part] *= space.signs[part, :, None]
    return enriched, _Coupling(stiffness=coupling, mass=mass)


def _gradient_tensor(stiffness: np.ndarray) -> np.ndarray:
    """Return (9, 9): from products of gradients (k, l) to stiffness blocks (i, j).

    K_ij = sum_kl c_ikjl d_k v d_l u, with the fourth-order tensor c.
    """
    voigt = np.array([[0, 5, 4], [5, 1, 3], [4, 3, 2]])
    tensor = stiffness[voigt[:, :, None, None], voigt[None, None]]  # c_ikjl
    return tensor.transpose(1, 3, 0, 2).reshape(9, 9)


def _residual(
    mesh: Mesh,
    space: Enrichment,
    coupled: _Coupling,
    eigenvalues: np.ndarray,
    shapes: np.ndarray,
) -> np.ndarray:
    """Return lambda m(u, v) - a(u, v) for all functions v of the enrichment, (d, 3, m)."""
    motion = np.ascontiguousarray(shapes.transpose(1, 2, 0))
    total = np.zeros((len(space.mids), 3, len(shapes)))
    for start in range(0, len(mesh.cells), _CHUNK):
        part = slice(start, start + _CHUNK)
        local = motion[mesh.cells[part]]
        size, _, _, modes = local.shape
        flat = local.reshape(size, 30, modes)
        inertia = np.matmul(coupled.mass[part], local.reshape(size, 10, 3 * modes))
        load = inertia.reshape(size, 30, modes) * eigenvalues
        load -= np.matmul(coupled.stiffness[part], flat)
        total += _scattered(space.cells[part], load, total.shape)
    return total


def _bed(
    mesh: Mesh, space: Enrichment, bed: tuple[np.ndarray, float, float], shapes: np.ndarray
) -> tuple[_Elements, np.ndarray]:
    """Return what a spring bed adds to the enrichment, and its forces (f, 12, m) against modes."""
    facets, normal, tangential = bed
    points, weights = facet_quadrature(6)
    tangents = np.einsum("qad,fai->fqid", facet_gradients(points), mesh.points[facets])
    area = np.cross(tangents[..., 0], tangents[..., 1])
    measure = np.linalg.norm(area, axis=2)
    unit = area / measure[..., None]
    springs = tangential * np.eye(3) + (normal - tangential) * unit[..., None] * unit[:, :, None]
    springs *= (measure * weights)[..., None, None]
    where, values = facet_functions(space, facets, points)
    stiffness = np.einsum("fqb,fqij,fqc->fbicj", values, springs, values, optimize=True)
    motion = np.einsum("qa,mfai->fqim", facet_values(points), shapes[:, facets], optimize=True)
    forces = np.einsum("fqb,fqij,fqjm->fbim", values, springs, motion, optimize=True)
    count = len(facets)
    elements = _Elements(where=where, stiffness=stiffness.reshape(count, 12, 12))
    return elements, forces.reshape(count, 12, -1)


def _gathered(where: np.ndarray, values: np.ndarray, count: int) -> np.ndarray:
    """Return the sum of `values` rows at each of `count` places."""
    rows = where.ravel()
    adder = sp.csr_matrix(
        (np.ones(rows.size, values.dtype), (rows, np.arange(rows.size))), (count, rows.size)
    )
    return adder @ values


def _allowed(space: Enrichment, allowed: np.ndarray | None) -> np.ndarray | None:
    """Return projectors (d, 3, 3) on the motions left to the enrichment.

    A direction is blocked for an edge where it is for its mid-side node, for a
    face where it is for all three mid-side nodes round it.
    """
    if allowed is None:
        return None
    blocked = np.eye(3) - allowed[space.mids].mean(axis=1)
    values, vectors = np.linalg.eigh(blocked)
    kept = vectors * (values < 1.0 - 1e-6)[:, None, :]
    return np.matmul(kept, vectors.transpose(0, 2, 1))


def _scattered(where: np.ndarray, values: np.ndarray, shape: tuple[int, ...]) -> np.ndarray:
    """Return the sum (d, 3, m) of element values (e, 3 k, m) at their functions (e, k)."""
    return _gathered(where, values.reshape(where.size, -1), shape[0]).reshape(shape)


def _solve(parts: Sequence[_Elements], residual: np.ndarray, free: np.ndarray | None) -> np.ndarray:
    """Return the solutions (d, 3, m) of the error equation for all modes at once."""
    shape = residual.shape
    diagonal = np.zeros((shape[0], 3, 3))
    for part in parts:
        own = [part.stiffness[:, 3 * a : 3 * a + 3, 3 * a : 3 * a + 3] for a in range(part.width)]
        diagonal += _scattered(part.where, np.stack(own, axis=1), diagonal.shape)
    if free is not None:
        blocked = (np.eye(3) - free) * np.trace(diagonal, axis1=1, axis2=2)[:, None, None]
        diagonal = np.matmul(np.matmul(free, diagonal), free) + blocked
    inverse = np.linalg.inv(diagonal)

    def project(x: np.ndarray) -> np.ndarray:
        return x if free is None else np.matmul(free, x)

    def apply(x: np.ndarray) -> np.ndarray:
        total = np.zeros(shape)
        for part in parts:
            total += _scattered(part.where, np.matmul(part.stiffness, part.local(x)), shape)
        return project(total)

    def dot(x: np.ndarray, y: np.ndarray) -> np.ndarray:
        # A mode without error has no residual; its steps are then all zero.
        return np.maximum(np.einsum("dim,dim->m", x, y), 1e-300)

    r = project(residual)
    z = project(np.matmul(inverse, r))
    p, x, rz = z.copy(), np.zeros(shape), dot(r, z)
    for _ in range(STEPS):
        ap = apply(p)
        step = rz / dot(p, ap)
        x += step * p
        r = r - step * ap
        z = project(np.matmul(inverse, r))
        new = dot(r, z)
        p = z + (new / rz) * p
        rz = new
    return x
