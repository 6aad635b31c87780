"""From blocks of node pairs to the upper triangle over the unknowns."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp

from .constraint import Constraint
from .pattern import Pattern


def reduce_blocks(pattern: Pattern, blocks: np.ndarray, constraint: Constraint) -> sp.csr_matrix:
    """Return the upper triangle of T^T A T, sorted, with all zeros of the pattern kept.

    Two matrices of one pattern and constraint share `indptr` and `indices`, so
    that their data may be added.

    Parameters
    ----------
    pattern : Pattern
    blocks : (9, p) float
        Component (i, j) of the block of each pair in row 3 i + j.
    constraint : Constraint
        Gives T; see `Constraint.transformation`.
    """
    blocks = _turn(pattern, blocks, constraint)
    free, numbers, ptr = constraint.free, constraint.numbers, pattern.indptr
    rows, columns = pattern.rows, pattern.indices
    diagonal = rows == columns

    # Where the first entry of each pair stands, counted from the start of a full
    # row of its first node.
    width = free.sum(axis=1)
    widths = width[columns]
    start = np.cumsum(widths) - widths
    start -= np.append(start, 0)[ptr[:-1]][rows]
    below = np.cumsum(free, axis=1) - free
    totals = np.add.reduceat(widths, ptr[:-1])
    lengths = (totals[:, None] - below)[free]
    count = int(lengths.sum())
    index = np.int32 if count < 2**31 else np.int64
    indptr = np.zeros(constraint.unknowns + 1, index)
    np.cumsum(lengths, out=indptr[1:])
    indices = np.empty(count, np.int32)
    data = np.empty(count)

    for a in range(3):
        # Of a diagonal block only b >= a is stored: row a begins that much later.
        first = np.zeros(len(free), np.int64)
        first[free[:, a]] = indptr[numbers[free[:, a], a]]
        base = (first - below[:, a])[rows] + start
        for b in range(3):
            used = free[rows, a] & free[columns, b]
            if b < a:
                used &= ~diagonal
            slot = (base + below[columns, b])[used]
            indices[slot] = numbers[columns[used], b]
            data[slot] = blocks[3 * a + b, used]
    upper = sp.csr_matrix((data, indices, indptr), shape=(constraint.unknowns,) * 2)
    upper.has_sorted_indices = True
    upper.has_canonical_format = True
    return upper


def scalar_blocks(values: np.ndarray) -> np.ndarray:
    """Return blocks (9, p) equal to values (p,) times the identity."""
    blocks = np.zeros((9, len(values)))
    blocks[[0, 4, 8]] = values
    return blocks


def _turn(pattern: Pattern, blocks: np.ndarray, constraint: Constraint) -> np.ndarray:
    """Return blocks in the local directions of both nodes."""
    if len(constraint.turned) == 0:
        return blocks
    frame = np.full(pattern.nodes, -1)
    frame[constraint.turned] = np.arange(len(constraint.turned))
    directions = np.concatenate([constraint.directions, np.eye(3)[None]])
    first, second = frame[pattern.rows], frame[pattern.indices]
    touched = np.flatnonzero((first >= 0) | (second >= 0))
    old = blocks[:, touched].T.reshape(-1, 3, 3)
    left = directions[first[touched]].transpose(0, 2, 1)
    new = np.matmul(np.matmul(left, old), directions[second[touched]])
    turned = blocks.copy()
    turned[:, touched] = new.reshape(-1, 9).T
    return turned
