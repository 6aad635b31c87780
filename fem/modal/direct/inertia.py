"""How many eigenvalues of a symmetric matrix are negative, where the fast library is silent.

An elimination without exchanges of rows is L D L^T in disguise: by Sylvester's law of
inertia the negative pivots are as many as the negative eigenvalues. That it did without
exchanges, and that it is exact enough for the signs to hold, is checked.
"""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp
from scipy.sparse.linalg import splu

from ....geometry.errors import SolveError
from .triangle import Upper, entries

#: Largest residual of a solve, as a share of what would be left without one, at which
#: the pivots are taken to be those of the matrix.
_TRUE = 1e-6


def negative_eigenvalues(upper: Upper) -> int:
    """Return the number of negative eigenvalues.

    Parameters
    ----------
    upper : (n, n) csr or bsr
        Upper triangle, as for `factor.factorise`.

    Raises
    ------
    SolveError
        If memory does not suffice, or the elimination cannot be trusted.
    """
    triangle = entries(upper)
    whole = (triangle + triangle.T - sp.diags_array(triangle.diagonal())).tocsc()
    try:
        factors = splu(
            whole,
            permc_spec="MMD_AT_PLUS_A",
            diag_pivot_thresh=0.0,
            options={"SymmetricMode": True},
        )
    except MemoryError:
        raise SolveError("not enough memory to count the modes; leave --prove away") from None
    except RuntimeError:
        raise _untrue() from None
    if not np.array_equal(factors.perm_r, factors.perm_c):
        raise _untrue()
    right = np.sin(1.0 + np.arange(whole.shape[0]))
    left = whole @ factors.solve(right) - right
    if not np.linalg.norm(left) <= _TRUE * np.linalg.norm(right):
        raise _untrue()
    return int((factors.U.diagonal() < 0.0).sum())


def _untrue() -> SolveError:
    return SolveError(
        "the modes could not be counted: the factorisation lost too many digits; "
        "ask for another number of modes (solve.modes)"
    )
