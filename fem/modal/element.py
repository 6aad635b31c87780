"""Second-order shape functions and quadrature (the home of scikit-fem).

Node order is VTK's everywhere: the four (three) corners, then the mid-side
nodes of `EDGES` (`FACET_EDGES`). scikit-fem's order is the same; a test holds it.
"""

from __future__ import annotations

from functools import cache

import numpy as np
from skfem import ElementTetP2, ElementTriP2
from skfem.quadrature import get_quadrature
from skfem.refdom import RefTet, RefTri


@cache
def cell_quadrature(degree: int) -> tuple[np.ndarray, np.ndarray]:
    """Return points (q, 3) and weights (q,) exact to `degree` on the unit tetrahedron."""
    # scikit-fem's tetrahedron rules are exact to one degree less than asked above 4.
    points, weights = get_quadrature(RefTet, degree + (degree > 4))
    return _frozen(points.T), _frozen(weights)


@cache
def facet_quadrature(degree: int) -> tuple[np.ndarray, np.ndarray]:
    """Return points (q, 2) and weights (q,) exact to `degree` on the unit triangle."""
    points, weights = get_quadrature(RefTri, degree)
    return _frozen(points.T), _frozen(weights)


def cell_values(points: np.ndarray) -> np.ndarray:
    """Return the ten shape functions (q, 10) at points (q, 3) of the unit tetrahedron."""
    return _basis(ElementTetP2(), points, 10)[0]


def cell_gradients(points: np.ndarray) -> np.ndarray:
    """Return reference gradients (q, 10, 3) at points (q, 3) of the unit tetrahedron."""
    return _basis(ElementTetP2(), points, 10)[1]


def facet_values(points: np.ndarray) -> np.ndarray:
    """Return the six shape functions (q, 6) at points (q, 2) of the unit triangle."""
    return _basis(ElementTriP2(), points, 6)[0]


def facet_gradients(points: np.ndarray) -> np.ndarray:
    """Return reference gradients (q, 6, 2) at points (q, 2) of the unit triangle."""
    return _basis(ElementTriP2(), points, 6)[1]


def _basis(
    element: ElementTetP2 | ElementTriP2, points: np.ndarray, count: int
) -> tuple[np.ndarray, np.ndarray]:
    x = np.ascontiguousarray(points.T)
    pairs = [element.lbasis(x, i) for i in range(count)]
    values = np.stack([np.broadcast_to(v, x.shape[1:]) for v, _ in pairs], axis=1)
    gradients = np.stack([np.asarray(g).T for _, g in pairs], axis=1)
    return values, gradients


def _frozen(array: np.ndarray) -> np.ndarray:
    copy = np.array(array, dtype=float)
    copy.setflags(write=False)
    return copy
