"""Curving the inside of a mesh along with its surface.

The CAD library bends only the mid-side nodes that lie on curved faces. Where a
wall is thin against its curvature, an inner edge left straight beside a bent one
squeezes the cell between them. Here the inner mid-side nodes follow.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from .mesh import EDGES
from .quality import gradients

if TYPE_CHECKING:
    from scipy.sparse import csr_matrix

_RULE = np.full((4, 3), (5 - 5**0.5) / 20) + np.vstack((np.zeros(3), np.eye(3) * (5**0.5) / 5))
"""Points (4, 3) of the rule exact to degree 2 on the unit tetrahedron; equal weights."""

_ROUNDS, _ENOUGH = 60, 1e-3


def relaxed(points: np.ndarray, cells: np.ndarray, facets: np.ndarray) -> np.ndarray:
    """Return points with the inner mid-side nodes moved to even out the cells.

    The displacement u of mid-side nodes from the middle of their edges is held on
    the surface and, inside, minimises the integral of |grad u|^2 over the
    straight-sided cells, with the corners fixed. Conjugate gradients on the
    cells that touch a bent edge and their neighbours; the surface stays as it is.

    Parameters
    ----------
    points : (n, 3)
    cells : (c, 10) int
    facets : (f, 6) int
        The whole boundary.
    """
    bend = np.zeros_like(points)
    for column, (a, b) in enumerate(EDGES, 4):
        middle = (points[cells[:, a]] + points[cells[:, b]]) / 2
        bend[cells[:, column]] = points[cells[:, column]] - middle
    straight = points - bend
    held = np.zeros(len(points), dtype=bool)
    held[facets] = True
    bend[~held] = 0.0

    reach = np.linalg.norm(bend, axis=1) > 1e-9 * float(np.ptp(points, axis=0).max())
    reach[cells[reach[cells].any(axis=1)][:, 4:]] = True
    cells = cells[reach[cells].any(axis=1)]
    free = np.zeros(len(points), dtype=bool)
    free[cells[:, 4:]] = True
    free &= ~held
    unknown = np.flatnonzero(free)
    if not len(unknown):
        return points

    stiffness = _laplace(straight, cells, len(points))[unknown]
    inner = stiffness[:, unknown]
    moved = straight + bend
    moved[unknown] = straight[unknown] + _solve(inner, -(stiffness @ bend))
    return moved


def _laplace(straight: np.ndarray, cells: np.ndarray, count: int) -> csr_matrix:
    """Return the stiffness of the mid-side functions of straight cells, (n, n)."""
    # Only bodies with curved faces pay for this import.
    from scipy.sparse import csr_matrix

    corners = straight[cells[:, :4]]
    jacobian = corners[:, 1:] - corners[:, :1]
    slopes = np.linalg.inv(jacobian)
    volume = np.abs(np.linalg.det(jacobian)) / 6
    local = np.einsum("qai,cji->cqaj", gradients(_RULE)[:, 4:], slopes, optimize=True)
    blocks = np.einsum("cqaj,cqbj->cab", local, local, optimize=True) * (volume / 4)[:, None, None]
    middle = cells[:, 4:]
    rows, columns = np.repeat(middle, 6, axis=1), np.tile(middle, (1, 6))
    return csr_matrix((blocks.ravel(), (rows.ravel(), columns.ravel())), shape=(count, count))


def _solve(matrix: csr_matrix, right: np.ndarray) -> np.ndarray:
    """Return x (n, k) with matrix @ x = right, by conjugate gradients on all columns at once."""
    inverse = 1.0 / np.asarray(matrix.diagonal(), float)[:, None]
    x = np.zeros_like(right)
    rest = right.copy()
    step = inverse * rest
    power = np.einsum("ij,ij->", rest, step)
    start = power
    for _ in range(_ROUNDS):
        if power <= _ENOUGH**2 * start:
            break
        image = matrix @ step
        length = power / np.einsum("ij,ij->", step, image)
        x += length * step
        rest -= length * image
        scaled = inverse * rest
        power, last = np.einsum("ij,ij->", rest, scaled), power
        step = scaled + (power / last) * step
    return x
