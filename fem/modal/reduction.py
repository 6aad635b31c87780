"""From blocks of node pairs to the matrix that the direct solver factorises."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp

from .constraint import Constraint
from .pattern import Pattern


def reduce_blocks(
    pattern: Pattern, blocks: np.ndarray, constraint: Constraint, pin: float = 0.0
) -> sp.bsr_matrix:
    """Return the upper triangle, by 3 x 3 blocks, of a matrix over the nodes that can move.

    Blocks stand in the local directions of their nodes. Directions that a support
    holds at a node that can still move keep their place, with `pin` on the
    diagonal and nothing beside it: whole blocks make the solver's analysis three
    times as fast, and a right side that is zero there stays so. Diagonal blocks
    are whole.

    Parameters
    ----------
    pattern : Pattern
    blocks : (9, p) float
        Component (i, j) of the block of each pair in row 3 i + j.
    constraint : Constraint
    pin : float
        Diagonal of held directions.
    """
    moving = constraint.moving
    kept = np.zeros(pattern.nodes, bool)
    kept[moving] = True
    number = np.cumsum(kept) - 1
    rows, columns = pattern.rows, pattern.indices
    stay = kept[rows] & kept[columns]
    rows, columns = rows[stay], columns[stay]
    data = np.empty((len(rows), 3, 3))
    flat = data.reshape(-1, 9)
    for component in range(9):
        flat[:, component] = blocks[component, stay]

    _turn(data, rows, columns, constraint)
    free = constraint.free
    partly = np.zeros(pattern.nodes, bool)
    partly[constraint.partly] = True
    touched = np.flatnonzero(partly[rows] | partly[columns])
    data[touched] *= free[rows[touched], :, None] & free[columns[touched], None, :]
    diagonal = touched[rows[touched] == columns[touched]]
    data[diagonal] += pin * (np.eye(3) * ~free[rows[diagonal]][:, None])

    indptr = np.zeros(len(moving) + 1, np.int32)
    np.cumsum(np.bincount(number[rows], minlength=len(moving)), out=indptr[1:])
    return sp.bsr_matrix(
        (data, number[columns].astype(np.int32), indptr), shape=(3 * len(moving),) * 2
    )


def scalar_blocks(values: np.ndarray) -> np.ndarray:
    """Return blocks (9, p) equal to values (p,) times the identity."""
    blocks = np.zeros((9, len(values)))
    blocks[[0, 4, 8]] = values
    return blocks


def _turn(data: np.ndarray, rows: np.ndarray, columns: np.ndarray, constraint: Constraint) -> None:
    """Turn blocks (p, 3, 3) into the local directions of both nodes, in place."""
    if len(constraint.turned) == 0:
        return
    frame = np.full(len(constraint.free), -1)
    frame[constraint.turned] = np.arange(len(constraint.turned))
    directions = np.concatenate([constraint.directions, np.eye(3)[None]])
    first, second = frame[rows], frame[columns]
    touched = np.flatnonzero((first >= 0) | (second >= 0))
    left = directions[first[touched]].transpose(0, 2, 1)
    data[touched] = np.matmul(np.matmul(left, data[touched]), directions[second[touched]])
