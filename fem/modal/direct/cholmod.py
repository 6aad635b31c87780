"""CHOLMOD in the cvxopt wheel: supernodal Cholesky."""

from __future__ import annotations

from typing import Any

import cvxopt
import cvxopt.cholmod
import numpy as np

from ....geometry.errors import SolveError
from .superlu import SuperLU
from .triangle import Upper, entries, refilled

# A compiled module without type information.
_cholmod: Any = cvxopt.cholmod


class Cholmod:
    """A Cholesky factorisation; see `factor.Factor`."""

    name = "CHOLMOD"
    counts = False
    negative_pivots: int | None = None

    def __init__(self, upper: Upper) -> None:
        _cholmod.options["supernodal"] = 2
        self._upper = upper
        upper = entries(upper)
        n = len(upper.indptr) - 1
        # The upper triangle by rows is the lower one by columns, which is what
        # the library reads; entries come in the order of our own data.
        rows = cvxopt.matrix(upper.indices.astype(np.int64))
        columns = cvxopt.matrix(np.repeat(np.arange(n), np.diff(upper.indptr)))
        self._matrix: Any = cvxopt.spmatrix(1.0, rows, columns, (n, n))
        self._size = n
        self._fill(upper.data)
        self._factors = _guarded(_cholmod.symbolic, self._matrix)
        _guarded(_cholmod.numeric, self._matrix, self._factors)

    def numeric(self, values: np.ndarray) -> None:
        """Factorise anew with new values of the same pattern."""
        self._fill(entries(refilled(self._upper, values)).data)
        _guarded(_cholmod.numeric, self._matrix, self._factors)

    def solve(self, right: np.ndarray) -> np.ndarray:
        """Return x of A x = b for one right side (n,) or several (n, k)."""
        if self._factors is None:
            raise ValueError("the factorisation is closed")
        x = cvxopt.matrix(np.asfortranarray(right.reshape(self._size, -1)))
        _cholmod.solve(self._factors, x)
        return np.array(x).reshape(right.shape)

    def close(self) -> None:
        """Free the memory of the factors."""
        self._factors = None
        self._matrix = None

    def _fill(self, values: np.ndarray) -> None:
        self._matrix.V = cvxopt.matrix(np.ascontiguousarray(values, float))


def _guarded(function, *arguments):
    try:
        return function(*arguments)
    except MemoryError:
        raise SolveError(
            "the factorisation ran out of memory; use a coarser mesh (solve.size)"
        ) from None
    except ArithmeticError as error:
        raise SolveError(
            f"the stiffness matrix is not positive definite (at unknown {error}); "
            "the part may not be held as meant, or the material may be unsound"
        ) from None


def make(upper: Upper, positive: bool) -> Cholmod | SuperLU:
    """Return the factorisation of a symmetric matrix given by its upper triangle.

    Indefinite matrices have no Cholesky factorisation; SuperLU takes them.
    """
    return Cholmod(upper) if positive else SuperLU(upper)
