"""Straight cells of any kind to second-order tetrahedra, and the facets around them."""

from __future__ import annotations

import numpy as np

from .mesh import EDGES

#: Quadrilateral sides of each kind of cell that has some.
_QUADS = {
    "pyramid": ((0, 1, 2, 3),),
    "wedge": ((0, 1, 4, 3), (1, 2, 5, 4), (2, 0, 3, 5)),
    "hexahedron": (
        *((0, 1, 2, 3), (4, 5, 6, 7), (0, 1, 5, 4)),
        *((1, 2, 6, 5), (2, 3, 7, 6), (3, 0, 4, 7)),
    ),
}

#: Triangular sides.
_TRIANGLES = {
    "pyramid": ((0, 1, 4), (1, 2, 4), (2, 3, 4), (3, 0, 4)),
    "wedge": ((0, 1, 2), (3, 4, 5)),
    "hexahedron": (),
}

#: Sides of a tetrahedron with their mid-side nodes, outward, VTK order.
_SIDES = np.array([[1, 2, 3, 5, 9, 8], [0, 3, 2, 7, 9, 6], [0, 1, 3, 4, 8, 7], [0, 2, 1, 6, 5, 4]])


def split(kind: str, cells: np.ndarray) -> np.ndarray:
    """Return tetrahedra (t, 4) that fill pyramids, wedges or hexahedra.

    Every cell is fanned from its lowest-numbered node, and every quadrilateral
    side is cut through its lowest-numbered node, so that neighbours agree on
    the cut (Dompierre, Labbe, Vallet and Camarero, "How to subdivide pyramids,
    prisms and hexahedra into tetrahedra", 8th Int. Meshing Roundtable, 1999).

    Parameters
    ----------
    kind : ``pyramid``, ``wedge`` or ``hexahedron``
    cells : (c, 5), (c, 6) or (c, 8) int, VTK order
    """
    apex = cells.min(axis=1)
    parts = []
    for quad in _QUADS[kind]:
        sides = cells[:, quad]
        low = np.argmin(sides, axis=1)
        turned = np.take_along_axis(sides, (low[:, None] + np.arange(4)) % 4, axis=1)
        parts += [turned[:, [0, 1, 2]], turned[:, [0, 2, 3]]]
    parts += [cells[:, triangle] for triangle in _TRIANGLES[kind]]
    tets = [np.column_stack((apex, part))[~np.any(part == apex[:, None], axis=1)] for part in parts]
    return np.concatenate(tets)


def turned_positive(points: np.ndarray, tets: np.ndarray) -> np.ndarray:
    """Return tetrahedra (t, 4) with two nodes swapped where their volume is negative."""
    wrong = signed_volumes(points, tets) < 0
    tets = tets.copy()
    tets[wrong] = tets[wrong][:, [0, 2, 1, 3]]
    return tets


def turned(cells: np.ndarray) -> np.ndarray:
    """Return second-order cells (c, 10) numbered the other way round."""
    return cells[:, [0, 2, 1, 3, 6, 5, 4, 7, 9, 8]]


def in_order(points: np.ndarray, cells: np.ndarray) -> np.ndarray | None:
    """Return second-order cells (c, 10) with their mid-side nodes in VTK order.

    Formats differ in that order; where the nodes lie tells it. None if they
    lie near no edges.
    """
    corners, middles = points[cells[:, :4]], points[cells[:, 4:]]
    edges = corners[:, EDGES].mean(axis=2)
    size = np.ptp(corners, axis=1).max(axis=1)
    apart = np.linalg.norm(edges[:, :, None] - middles[:, None], axis=3) / size[:, None, None]
    column = np.argmin(np.median(apart, axis=0), axis=1)
    if len(set(column.tolist())) < 6:
        return None
    return np.column_stack((cells[:, :4], cells[:, 4 + column]))


def signed_volumes(points: np.ndarray, cells: np.ndarray) -> np.ndarray:
    """Return the volume (c,) of the straight tetrahedra on the corners of cells (c, 4+)."""
    a, b, c, d = (points[cells[:, k]] for k in range(4))
    return np.einsum("ij,ij->i", np.cross(b - a, c - a), d - a) / 6


def raised(points: np.ndarray, tets: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return points and second-order cells (t, 10) with nodes at the middle of the edges."""
    edges = np.sort(tets[:, EDGES].reshape(-1, 2), axis=1)
    unique, at = np.unique(edges, axis=0, return_inverse=True)
    middles = points[unique].mean(axis=1)
    cells = np.column_stack((tets, len(points) + at.reshape(-1, 6)))
    return np.concatenate((points, middles)), cells


def boundary(cells: np.ndarray) -> np.ndarray:
    """Return the facets (f, 6) that belong to one cell (c, 10) only, outward, VTK order."""
    sides = cells[:, _SIDES].reshape(-1, 6)
    _, first, count = np.unique(
        np.sort(sides[:, :3], axis=1), axis=0, return_index=True, return_counts=True
    )
    return sides[np.sort(first[count == 1])]


def neighbours(cells: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return the sides (c * 4, 3) by cell, and for each the number of its unique triangle."""
    sides = cells[:, _SIDES[:, :3]].reshape(-1, 3)
    _, number = np.unique(np.sort(sides, axis=1), axis=0, return_inverse=True)
    return sides, number.ravel()
