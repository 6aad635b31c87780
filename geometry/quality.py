"""Shape of curved second-order tetrahedra: the sign and evenness of det J."""

from __future__ import annotations

import numpy as np

from .mesh import EDGES

_CORNERS = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 1]], float)

#: Where det J is looked at: corners, mid-edges, centroid; (11, 3) on the unit tetrahedron.
STATIONS = np.vstack(
    (_CORNERS, [(_CORNERS[a] + _CORNERS[b]) / 2 for a, b in EDGES], [_CORNERS.mean(axis=0)])
)


def shape_values(at: np.ndarray) -> np.ndarray:
    """Return the values (q, 10) of the ten shape functions at points (q, 3); see `gradients`."""
    lam = np.column_stack((1 - at.sum(axis=1), at))
    middle = [4 * lam[:, a] * lam[:, b] for a, b in EDGES]
    return np.column_stack((lam * (2 * lam - 1), *middle))


def gradients(at: np.ndarray) -> np.ndarray:
    """Return gradients (q, 10, 3) of the ten shape functions at points (q, 3).

    The functions are L (2 L - 1) at corners and 4 L_a L_b at mid-edges, with L the
    barycentric coordinates; nodes in VTK order.
    """
    lam = np.column_stack((1 - at.sum(axis=1), at))
    slope = np.array([[-1, -1, -1], [1, 0, 0], [0, 1, 0], [0, 0, 1]], float)
    corner = (4 * lam - 1)[:, :, None] * slope
    middle = [4 * (lam[:, [a]] * slope[b] + lam[:, [b]] * slope[a])[:, None, :] for a, b in EDGES]
    return np.concatenate((corner, *middle), axis=1)


def determinants(points: np.ndarray, cells: np.ndarray) -> np.ndarray:
    """Return det J (c, 11) of cells (c, 10) at `STATIONS`."""
    x = points[cells]
    jacobians = np.einsum("qai,caj->cqij", gradients(STATIONS), x, optimize=True)
    return np.linalg.det(jacobians)


def evenness(points: np.ndarray, cells: np.ndarray) -> np.ndarray:
    """Return (c,) the smallest over the largest det J of each cell.

    1 for straight-sided cells, 0 or less for inverted ones.
    """
    det = determinants(points, cells)
    high = det.max(axis=1)
    return np.where(high > 0, det.min(axis=1) / np.where(high > 0, high, 1.0), -1.0)


def volumes(points: np.ndarray, cells: np.ndarray) -> np.ndarray:
    """Return the exact volume (c,) of each curved cell; det J is a cubic."""
    det = np.einsum("qai,caj->cqij", gradients(_CUBIC[:, :3]), points[cells], optimize=True)
    return np.linalg.det(det) @ _CUBIC[:, 3]


def facet_areas(points: np.ndarray, facets: np.ndarray) -> np.ndarray:
    """Return the area (f,) of each curved facet (f, 6), by quadrature of degree 5."""
    x = points[facets]
    lam = np.column_stack((1 - _TRIANGLE[:, :2].sum(axis=1), _TRIANGLE[:, :2]))
    slope = np.array([[-1, -1], [1, 0], [0, 1]], float)
    corner = (4 * lam - 1)[:, :, None] * slope
    middle = [
        4 * (lam[:, [a]] * slope[b] + lam[:, [b]] * slope[a])[:, None, :]
        for a, b in ((0, 1), (1, 2), (2, 0))
    ]
    tangents = np.einsum("qai,faj->fqij", np.concatenate((corner, *middle), axis=1), x)
    normals = np.cross(tangents[:, :, 0], tangents[:, :, 1])
    return np.linalg.norm(normals, axis=2) @ _TRIANGLE[:, 2]


def straighten(points: np.ndarray, cells: np.ndarray, bad: np.ndarray) -> np.ndarray:
    """Return points with the mid-side nodes of the `bad` cells at the middle of their edges."""
    moved = points.copy()
    for column, (a, b) in enumerate(EDGES, 4):
        ends = cells[bad][:, [a, b]]
        moved[cells[bad][:, column]] = points[ends].mean(axis=1)
    return moved


def _cubic_rule() -> np.ndarray:
    """Return points and weights (5, 4) exact to degree 3 on the unit tetrahedron (Keast 1986)."""
    rows = [[0.25, 0.25, 0.25, -4 / 5 / 6]]
    for k in range(4):
        lam = [1 / 6] * 4
        lam[k] = 1 / 2
        rows.append([*lam[1:], 9 / 20 / 6])
    return np.array(rows)


def _triangle_rule() -> np.ndarray:
    """Return points and weights (7, 3) exact to degree 5 on the unit triangle (Radon 1948)."""
    root = 15**0.5
    rows = [[1 / 3, 1 / 3, 9 / 80]]
    for a, weight in (
        ((6 - root) / 21, (155 - root) / 2400),
        ((6 + root) / 21, (155 + root) / 2400),
    ):
        rows += [[a, a, weight], [1 - 2 * a, a, weight], [a, 1 - 2 * a, weight]]
    return np.array(rows)


_CUBIC = _cubic_rule()
_TRIANGLE = _triangle_rule()
