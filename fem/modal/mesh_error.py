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

from ...geometry.mesh import EDGES, FACET_EDGES, Mesh
from .element import (
    cell_gradients,
    cell_quadrature,
    cell_values,
    facet_gradients,
    facet_quadrature,
    facet_values,
)

#: Corner triples of the four faces of a cell.
FACES = ((0, 1, 2), (0, 1, 3), (0, 2, 3), (1, 2, 3))

#: Conjugate-gradient steps: the energy has settled to a few per cent.
STEPS = 4

_CHUNK = 4096


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
    keys = _keys(mids, int(cells.max()) + 1)
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
    for facets, normal, tangential in beds:
        residual -= _bed_forces(mesh, space, facets, normal, tangential, shapes)
    answer = _solve(space, enriched, residual, _allowed(space, allowed))
    local = answer[space.cells].reshape(len(mesh.cells), 30, -1)
    by_cell = np.einsum("cim,cim->cm", local, np.matmul(enriched, local), dtype=float)
    energy = by_cell.sum(axis=0)
    # The second-order space moves too, in answer to the enrichment. With the
    # first term g of the Neumann series of the Schur complement, the energy
    # is E / (1 - g): a lower bound by the Lanczos argument, and close.
    force = np.matmul(coupled.stiffness.transpose(0, 2, 1), local)
    force = _gathered(mesh.cells, force.reshape(-1, 3 * len(eigenvalues)), len(mesh.points))
    force = force.reshape(len(mesh.points), 3, -1).astype(float)
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
    enriched = np.empty((count, 30, 30), np.float32)
    coupling = np.empty((count, 30, 30), np.float32)
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
        load -= np.matmul(coupled.stiffness[part].astype(float), flat)
        total += _gathered(space.cells[part], load.reshape(-1, 3 * modes), len(total)).reshape(
            total.shape
        )
    return total


def _bed_forces(
    mesh: Mesh,
    space: Enrichment,
    facets: np.ndarray,
    normal: float,
    tangential: float,
    shapes: np.ndarray,
) -> np.ndarray:
    """Return what a spring bed does on the functions of the enrichment, (d, 3, m)."""
    points, weights = facet_quadrature(6)
    x = mesh.points[facets]
    tangents = np.einsum("qad,fai->fqid", facet_gradients(points), x)
    area = np.cross(tangents[..., 0], tangents[..., 1])
    measure = np.linalg.norm(area, axis=2)
    unit = area / measure[..., None]
    motion = np.einsum("qa,mfai->fqim", facet_values(points), shapes[:, facets], optimize=True)
    along = np.einsum("fqi,fqim->fqm", unit, motion)
    pull = tangential * motion + (normal - tangential) * unit[..., None] * along[:, :, None]
    bary = np.column_stack([1.0 - points.sum(axis=1), points])
    edges = [bary[:, i] * bary[:, j] * (bary[:, i] - bary[:, j]) for i, j in FACET_EDGES]
    functions = np.stack([*edges, bary.prod(axis=1)], axis=1)
    load = np.einsum("fq,qb,fqim->fbim", measure * weights, functions, pull, optimize=True)
    ends = facets[:, FACET_EDGES]
    load[:, :3] *= np.where(ends[..., 0] < ends[..., 1], 1.0, -1.0)[..., None, None]
    mids = facets[:, 3:]
    wanted = np.concatenate(
        [np.repeat(mids[:, :, None], 3, axis=2), np.sort(mids, axis=1)[:, None]], axis=1
    )
    count = len(mesh.points)
    where = np.searchsorted(_keys(space.mids, count), _keys(wanted, count))
    modes = len(shapes)
    total = _gathered(where, load.reshape(-1, 3 * modes), len(space.mids))
    return total.reshape(-1, 3, modes)


def _keys(mids: np.ndarray, count: int) -> np.ndarray:
    """Return one number for each triple of mid-side nodes (..., 3)."""
    return (mids[..., 0].astype(np.int64) * count + mids[..., 1]) * count + mids[..., 2]


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


def _solve(
    space: Enrichment, enriched: np.ndarray, residual: np.ndarray, free: np.ndarray | None
) -> np.ndarray:
    """Return the solutions (d, 3, m) of the error equation for all modes at once."""
    count, _, modes = residual.shape
    places = space.cells.ravel()
    own = np.stack([enriched[:, 3 * a : 3 * a + 3, 3 * a : 3 * a + 3] for a in range(10)], axis=1)
    diagonal = _gathered(space.cells, own.reshape(-1, 9).astype(float), count).reshape(-1, 3, 3)
    if free is not None:
        blocked = (np.eye(3) - free) * np.trace(diagonal, axis1=1, axis2=2)[:, None, None]
        diagonal = np.matmul(np.matmul(free, diagonal), free) + blocked
        residual = np.matmul(free, residual)
        free = free.astype(np.float32)
    inverse = np.linalg.inv(diagonal).astype(np.float32)
    adder = sp.csr_matrix(
        (np.ones(places.size, np.float32), (places, np.arange(places.size))), (count, places.size)
    )

    def project(x: np.ndarray) -> np.ndarray:
        return x if free is None else np.matmul(free, x)

    def apply(x: np.ndarray) -> np.ndarray:
        y = np.matmul(enriched, x[space.cells].reshape(-1, 30, modes))
        return project((adder @ y.reshape(-1, 3 * modes)).reshape(count, 3, modes))

    def dot(x: np.ndarray, y: np.ndarray) -> np.ndarray:
        return np.maximum(np.einsum("dim,dim->m", x, y, dtype=float), 1e-30)

    scale = np.sqrt(np.maximum(np.einsum("dim,dim->m", residual, residual), 1e-300))
    r = (residual / scale).astype(np.float32)
    z = project(np.matmul(inverse, r))
    p, x, rz = z.copy(), np.zeros_like(r), dot(r, z)
    for _ in range(STEPS):
        ap = apply(p)
        step = (rz / dot(p, ap)).astype(np.float32)
        x += step * p
        r -= step * ap
        z = project(np.matmul(inverse, r))
        new = dot(r, z)
        p = z + (new / rz).astype(np.float32) * p
        rz = new
    return x * scale.astype(np.float32)
