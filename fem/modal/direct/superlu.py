"""SuperLU in scipy: the factorisation that is always there."""

from __future__ import annotations

import numpy as np
import scipy.sparse as sp
from scipy.sparse.linalg import splu

from ....geometry.errors import SolveError
from .triangle import Upper, entries, refilled


class SuperLU:
    """An LU factorisation in symmetric mode; see `factor.Factor`."""

    name = "SuperLU"
    counts = False
    negative_pivots: int | None = None

    def __init__(self, upper: Upper) -> None:
        self._upper = upper
        self.numeric(upper.data)

    def numeric(self, values: np.ndarray) -> None:
        """Factorise anew with new values of the same pattern."""
        self._factors = None
        upper = entries(refilled(self._upper, values))
        whole = (upper + upper.T - sp.diags_array(upper.diagonal())).tocsc()
        try:
            self._factors = splu(
                whole,
                permc_spec="MMD_AT_PLUS_A",
                diag_pivot_thresh=0.0,
                options={"SymmetricMode": True},
            )
        except MemoryError:
            raise SolveError(
                "the factorisation ran out of memory; use a coarser mesh, or install "
                "the mkl or cvxopt package, which need about half of it"
            ) from None
        except RuntimeError as error:
            raise SolveError(
                f"the matrix could not be factorised ({error}); the part may not be "
                "held as meant, or the material may be unsound"
            ) from None

    def solve(self, right: np.ndarray) -> np.ndarray:
        """Return x of A x = b for one right side (n,) or several (n, k)."""
        if self._factors is None:
            raise ValueError("the factorisation is closed")
        return self._factors.solve(np.asfortranarray(right))

    def close(self) -> None:
        """Free the memory of the factors."""
        self._factors = None


def make(upper: Upper, positive: bool) -> SuperLU:
    """Return the factorisation of a symmetric matrix given by its upper triangle."""
    return SuperLU(upper)
