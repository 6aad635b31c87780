"""Which mode of one part is which of another: modes followed by their shape.

The assurance criterion of Allemang and Brown ("A correlation coefficient for
modal vector analysis", Proc. 1st IMAC, 1982) compares two shapes; shapes on
another mesh are read off at the same place of the body's box.
"""

from __future__ import annotations

import numpy as np
from scipy.optimize import linear_sum_assignment
from scipy.spatial import KDTree

from ..modal.modes import Modes

#: Below this the two shapes are not the same mode.
SAME = 0.5

_CANDIDATES = 24  # cells looked at for each point


def assurance(first: Modes, second: Modes) -> np.ndarray:
    """Return how alike the shapes of two results are.

    MAC = (u.v)^2 / ((u.u)(v.v)), with the inner product over the body of
    `second` (weighted by volume; the material is uniform) and the shapes of
    `first` read at the same place of the box round the body.

    Parameters
    ----------
    first, second : Modes
        Of parts that differ little: their meshes may be any.

    Returns
    -------
    (m1, m2) float, 0 to 1
    """
    corners = second.mesh.points[second.mesh.cells[:, :4]]
    centres = corners.mean(axis=1)
    weights = np.abs(np.linalg.det(corners[:, 1:] - corners[:, :1]))
    v = _at_centres(second.shapes, second.mesh.cells)
    places = _boxed(centres, second.mesh.points)
    u = _read_at(first, places)
    norm_u = np.einsum("mck,mck,c->m", u, u, weights)
    norm_v = np.einsum("mck,mck,c->m", v, v, weights)
    product = np.einsum("mck,nck,c->mn", u, v, weights, optimize=True)
    return product**2 / (norm_u[:, None] * norm_v[None, :])


def follow(first: Modes, second: Modes) -> list[int | None]:
    """Return for each mode of `first` the position in `second` of the same mode, or None.

    The pairing makes the sum of the assurance criteria largest (Hungarian
    assignment), so that modes may cross in frequency.
    """
    alike = assurance(first, second)
    rows, columns = linear_sum_assignment(-alike)
    found: list[int | None] = [None] * len(first)
    for row, column in zip(rows, columns, strict=True):
        if alike[row, column] >= SAME:
            found[int(row)] = int(column)
    return found


def _at_centres(shapes: np.ndarray, cells: np.ndarray) -> np.ndarray:
    """Return displacements (m, c, 3) at the centroid of each second-order cell.

    There the quadratic shape functions are -1/8 at corners and 1/4 at mid-sides.
    """
    corner = shapes[:, cells[:, :4]].sum(axis=2)
    middle = shapes[:, cells[:, 4:]].sum(axis=2)
    return 0.25 * middle - 0.125 * corner


def _boxed(points: np.ndarray, body: np.ndarray) -> np.ndarray:
    """Return points in coordinates that run from 0 to 1 over the body's box."""
    low, high = body.min(axis=0), body.max(axis=0)
    return (points - low) / (high - low)


def _read_at(modes: Modes, places: np.ndarray) -> np.ndarray:
    """Return displacements (m, p, 3) of all modes at places (p, 3) of the unit box.

    Each place is read in the cell (by its corners) that it lies in or sticks
    out of least; outside the body the nearest cell is carried on a little.
    """
    points = _boxed(modes.mesh.points, modes.mesh.points)
    cells = modes.mesh.cells
    corners = points[cells[:, :4]]
    count = min(_CANDIDATES, len(cells))
    # Boxed coordinates stretch thin bodies: nearness is judged as the body is.
    size = np.ptp(modes.mesh.points, axis=0)
    _, near = KDTree(corners.mean(axis=1) * size).query(places * size, k=count)
    near = near.reshape(len(places), count)
    edges = np.swapaxes(corners[:, 1:] - corners[:, :1], 1, 2)
    inverse = np.linalg.inv(edges)
    best = np.full(len(places), -np.inf)
    cell = np.zeros(len(places), int)
    lam = np.zeros((len(places), 4))
    for candidate in near.T:
        inner = np.einsum("pij,pj->pi", inverse[candidate], places - corners[candidate, 0])
        barycentric = np.column_stack([1.0 - inner.sum(axis=1), inner])
        lowest = barycentric.min(axis=1)
        better = lowest > best
        best[better], cell[better], lam[better] = (
            lowest[better],
            candidate[better],
            barycentric[better],
        )
    # A place outside is drawn to the cell's boundary: quadratics run away outside.
    lam = np.clip(lam, 0.0, None)
    lam /= lam.sum(axis=1, keepdims=True)
    a, b = np.array([0, 1, 0, 0, 1, 2]), np.array([1, 2, 2, 3, 3, 3])
    weights = np.concatenate([lam * (2.0 * lam - 1.0), 4.0 * lam[:, a] * lam[:, b]], axis=1)
    return np.einsum("pa,mpak->mpk", weights, modes.shapes[:, cells[cell]], optimize=True)
