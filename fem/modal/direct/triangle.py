"""The form in which matrices come to the direct solvers."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp

#: The upper triangle of a symmetric matrix, by entries or by 3 x 3 blocks; column
#: indices sorted, the diagonal there, diagonal blocks whole.
Upper = sp.csr_matrix | sp.bsr_matrix


def entries(upper: Upper) -> sp.csr_matrix:
    """Return the upper triangle entry by entry, zeros of the pattern kept."""
    if not isinstance(upper, sp.bsr_matrix):
        return upper
    matrix = upper.tocsr()
    rows = np.repeat(np.arange(len(matrix.indptr) - 1), np.diff(matrix.indptr))
    keep = matrix.indices >= rows
    indptr = np.zeros_like(matrix.indptr)
    np.cumsum(np.bincount(rows[keep], minlength=len(indptr) - 1), out=indptr[1:])
    return sp.csr_matrix((matrix.data[keep], matrix.indices[keep], indptr), shape=matrix.shape)


def refilled(upper: Upper, values: np.ndarray) -> Upper:
    """Return a matrix of the same pattern with other values."""
    kind = sp.bsr_matrix if isinstance(upper, sp.bsr_matrix) else sp.csr_matrix
    return kind((values.reshape(upper.data.shape), upper.indices, upper.indptr), shape=upper.shape)
