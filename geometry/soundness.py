"""Whether an imported mesh is one sound body."""

from __future__ import annotations

from typing import Any

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components

from .errors import InputError
from .mesh import EDGES
from .quality import evenness
from .tetrahedra import neighbours, signed_volumes

#: Cells whose smallest det J is below this share of their largest cannot be computed with.
_EVEN = 1e-3

#: Share of the mean cell volume below which a cell has no volume.
_EMPTY = 1e-9


def refuse_unsound(points: np.ndarray, cells: np.ndarray) -> None:
    """Refuse meshes that are not one body of positive, distinct, properly joined cells.

    Parameters
    ----------
    points : (n, 3) m
    cells : (c, 10) int, VTK order

    Raises
    ------
    InputError
        For cells that are inverted, flat, duplicate, overlap a neighbour, or
        hang on the rest by less than a side; for several bodies.
    """
    volumes = signed_volumes(points, cells)
    if np.any(flat := np.abs(volumes) <= _EMPTY * np.abs(volumes).mean()):
        _refuse("without volume", flat, points, cells)
    bad = (volumes < 0) | (evenness(points, cells) < _EVEN)
    if bad.any():
        _refuse("inverted or folded", bad, points, cells)
    corners = np.sort(cells[:, :4], axis=1)
    _, at, count = np.unique(corners, axis=0, return_inverse=True, return_counts=True)
    if np.any(twice := count[at.ravel()] > 1):
        _refuse("present more than once", twice, points, cells)
    _refuse_overlaps(points, cells)
    _refuse_unshared(points, cells)
    _refuse_pieces(points, cells)


def _refuse_unshared(points: np.ndarray, cells: np.ndarray) -> None:
    """Refuse edges whose cells have mid-side nodes of their own: the body would gape there."""
    edges = np.sort(cells[:, EDGES].reshape(-1, 2), axis=1)
    _, first, at = np.unique(edges, axis=0, return_index=True, return_inverse=True)
    middle = cells[:, 4:].ravel()
    if np.any(own := (middle != middle[first][at.ravel()]).reshape(-1, 6).any(axis=1)):
        _refuse("with mid-side nodes that their neighbours do not share", own, points, cells)


def _refuse_overlaps(points: np.ndarray, cells: np.ndarray) -> None:
    """Refuse sides shared by three cells, or by two on the same side of it."""
    sides, number = neighbours(cells)
    count = np.bincount(number)
    if np.any(crowded := (count[number] > 2).reshape(-1, 4).any(axis=1)):
        _refuse("joined three to a side", crowded, points, cells)
    order = np.argsort(number, kind="stable")
    shared = order[count[number[order]] == 2].reshape(-1, 2)
    # Outward triangles of two cells on either side run opposite ways.
    one, other = sides[shared[:, 0]], sides[shared[:, 1]]
    start = np.argmax(other == one[:, :1], axis=1)
    following = other[np.arange(len(other)), (start + 1) % 3]
    if np.any(same := following == one[:, 1]):
        overlapping = np.zeros(len(cells), bool)
        overlapping[shared[same] // 4] = True
        _refuse("lying over a neighbour", overlapping, points, cells)


def _refuse_pieces(points: np.ndarray, cells: np.ndarray) -> None:
    _, number = neighbours(cells)
    cell = np.arange(len(number)) // 4
    total = len(cells) + int(number.max()) + 1
    links = coo_matrix((np.ones(len(cell)), (cell, len(cells) + number)), shape=(total, total))
    labels = connected_components(links, directed=False)[1][: len(cells)]
    _, labels = np.unique(labels, return_inverse=True)
    pieces = int(labels.max()) + 1
    if pieces == 1:
        return
    nodes = [set(cells[labels == k, :4].ravel().tolist()) for k in range(min(pieces, 50))]
    touching = any(nodes[0] & other for other in nodes[1:])
    sizes = np.bincount(labels)
    small = int(np.argmin(sizes))
    x, y, z = points[cells[labels == small][0, :4]].mean(axis=0) * 1e3
    how = (
        "that hold together by an edge or a point only"
        if touching
        else "that share no nodes (merge coincident nodes, if they are meant to be joined)"
    )
    raise InputError(
        f"falls into {pieces} bodies {how}; the smallest has {sizes[small]} cells, "
        f"near ({x:.4g}, {y:.4g}, {z:.4g}) mm"
    )


def _refuse(what: str, bad: Any, points: np.ndarray, cells: np.ndarray) -> None:
    first = int(np.flatnonzero(bad)[0])
    x, y, z = points[cells[first, :4]].mean(axis=0) * 1e3
    raise InputError(
        f"has {np.count_nonzero(bad)} of {len(cells)} cells {what}, "
        f"the first near ({x:.4g}, {y:.4g}, {z:.4g}) mm"
    )
