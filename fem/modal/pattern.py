"""Which nodes of a mesh share a cell, and where each cell's entries go.

Stiffness and mass have one 3 x 3 block (one number) for every pair of nodes
that share a cell. The upper triangle of those pairs, sorted by row, is the
`Pattern`. It depends on the cells alone, so a sweep that moves the points of
one mesh keeps it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp

#: Local node pairs a <= b of a ten-node cell.
_FIRST, _SECOND = np.triu_indices(10)


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Pattern:
    """Upper triangle of the node pairs that share a cell, by rows.

    Attributes
    ----------
    nodes : number of nodes n
    indptr : (n + 1,) int
    indices : (p,) int
        Second node of each pair, ascending within a row; the diagonal comes first.
    gather : (p, 100 c) csr of ones
        Sums the 10 x 10 entries of all cells into pairs. An entry (a, b) of a
        cell is used where node a <= node b, its mirror image is not.
    """

    nodes: int
    indptr: np.ndarray
    indices: np.ndarray
    gather: sp.csr_matrix

    @property
    def rows(self) -> np.ndarray:
        """First node of each pair, (p,) int."""
        return np.repeat(np.arange(self.nodes, dtype=self.indices.dtype), np.diff(self.indptr))

    def positions(self, first: np.ndarray, second: np.ndarray) -> np.ndarray:
        """Return where the pairs (first <= second) stand; each must share a cell."""
        keys = self.rows.astype(np.int64) * self.nodes + self.indices
        return np.searchsorted(keys, first.astype(np.int64) * self.nodes + second)


def make_pattern(cells: np.ndarray, nodes: int) -> Pattern:
    """Return the pattern of a mesh.

    Parameters
    ----------
    cells : (c, 10) int
    nodes : int
        Number of nodes n; each belongs to at least one cell.
    """
    a, b = cells[:, _FIRST], cells[:, _SECOND]
    ahead = a <= b
    low, high = np.where(ahead, a, b).ravel(), np.where(ahead, b, a).ravel()
    keys, order = _sorted_pairs(low, high, nodes)
    starts = np.flatnonzero(np.diff(keys, prepend=-1))
    unique = keys[starts]

    local = np.where(ahead, 10 * _FIRST + _SECOND, 10 * _SECOND + _FIRST)
    local += 100 * np.arange(len(cells))[:, None]
    # 32-bit indices as long as they hold: half the memory traffic of the sums.
    index = np.int32 if 100 * len(cells) < 2**31 else np.int64
    gather = sp.csr_matrix(
        (
            np.ones(len(keys)),
            local.ravel()[order].astype(index),
            np.append(starts, len(keys)).astype(index),
        ),
        shape=(len(unique), 100 * len(cells)),
    )
    rows = unique // nodes
    indptr = np.zeros(nodes + 1, np.int32)
    np.cumsum(np.bincount(rows, minlength=nodes), out=indptr[1:])
    indices = (unique - rows * nodes).astype(np.int32)
    return Pattern(nodes=nodes, indptr=indptr, indices=indices, gather=gather)


def _sorted_pairs(low: np.ndarray, high: np.ndarray, nodes: int) -> tuple[np.ndarray, np.ndarray]:
    """Return keys low * nodes + high in ascending order, and the order that sorts them."""
    keys = low.astype(np.int64) * nodes + high
    bits = len(keys).bit_length()
    if int(nodes * nodes).bit_length() + bits > 63:
        order = np.argsort(keys, kind="stable")
        return keys[order], order
    # Key and entry number in one word: a plain sort is several times faster than
    # an argsort, and equal keys keep the order of the cells.
    packed = (keys << bits) | np.arange(len(keys))
    packed.sort()
    return packed >> bits, packed & ((1 << bits) - 1)
