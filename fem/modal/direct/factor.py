"""What a factorisation is, and which library makes it.

The library is the first of `mkl`, `cholmod`, `superlu` that loads. The
environment variable ``MODEWRIGHT_DIRECT`` names another choice.
"""

from __future__ import annotations

import os
from collections.abc import Callable
from importlib import import_module
from typing import Protocol

import numpy as np

from ....geometry.errors import InputError, ToolError
from .triangle import Upper

#: Name -> module; in order of preference.
LIBRARIES = {"mkl": ".mkl", "cholmod": ".cholmod", "superlu": ".superlu"}

#: Environment variable that names the library to use.
VARIABLE = "MODEWRIGHT_DIRECT"


class Factor(Protocol):
    """A factorisation of a symmetric matrix.

    Attributes
    ----------
    name : what made it, for people
    counts : whether the library tells `negative_pivots` of indefinite matrices
    negative_pivots : number of negative pivots, that is of negative eigenvalues of
        the matrix; None where the method cannot tell
    """

    name: str
    counts: bool
    negative_pivots: int | None

    def solve(self, right: np.ndarray) -> np.ndarray:
        """Return x of A x = b for one right side (n,) or several (n, k)."""
        ...

    def numeric(self, values: np.ndarray) -> None:
        """Factorise anew with new values (the `data`) of the same pattern and analysis."""
        ...

    def close(self) -> None:
        """Free the memory of the factors; also done when the object is collected."""
        ...


def factorise(upper: Upper, *, positive: bool = True, library: str | None = None) -> Factor:
    """Return the factorisation of a symmetric matrix.

    Parameters
    ----------
    upper : (n, n) csr or bsr
        Upper triangle with its diagonal, column indices sorted; of 3 x 3 blocks the
        diagonal ones are whole.
    positive : bool
        Whether the matrix is positive definite (Cholesky) or indefinite (LDL^T
        with its inertia, where the library can).
    library : str, optional
        ``mkl``, ``cholmod`` or ``superlu``; default the environment variable
        ``MODEWRIGHT_DIRECT``, else the first that loads.

    Raises
    ------
    SolveError
        If memory does not suffice or a pivot is not what it must be.
    InputError, ToolError
        If the library named is unknown, or does not load.
    """
    return load(library)(upper, positive)


def available() -> tuple[str, ...]:
    """Return the names of the libraries that load on this machine."""
    return tuple(name for name in LIBRARIES if _load(name) is not None)


def load(library: str | None = None) -> Callable[[Upper, bool], Factor]:
    """Load a library, the preferred one by default, and return what makes factors with it.

    Raises
    ------
    InputError, ToolError
        If the library named is unknown, or does not load.
    """
    library = library or os.environ.get(VARIABLE) or None
    if library is not None and library not in LIBRARIES:
        raise InputError(
            "no such direct solver", key=VARIABLE, value=library, allowed=", ".join(LIBRARIES)
        )
    for name in LIBRARIES if library is None else [library]:
        maker = _load(name)
        if maker is not None:
            return maker
    raise ToolError(
        f"the direct solver {library!r} does not load here; these do: {', '.join(available())}"
    )


def _load(name: str) -> Callable[[Upper, bool], Factor] | None:
    try:
        module = import_module(LIBRARIES[name], __package__)
    except (ImportError, OSError):
        return None
    return module.make
