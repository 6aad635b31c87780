"""PARDISO in the MKL's own wheel, called without a wrapper's copies."""

from __future__ import annotations

import ctypes
import os
import sys
import weakref
from importlib import metadata
from pathlib import Path

import numpy as np
import scipy.sparse as sp

from ....geometry.errors import SolveError
from ..memory import refuse_beyond_memory
from .triangle import Upper

# Phases of the solver.
_ANALYSE, _NUMERIC, _SOLVE, _FREE = 11, 22, 33, -1

#: Matrix types: real symmetric positive definite, real symmetric indefinite.
_POSITIVE, _INDEFINITE = 2, -2

# Positions in the parameter array, counted from 0 as the library's manual does
# for C.
_OWN_VALUES, _ORDERING, _REFINEMENT, _PERTURBATION = 0, 1, 7, 9
_SCALING, _MATCHING, _COUNT_FACTOR, _COUNT_FLOPS = 10, 12, 17, 18
_NEGATIVE, _ZERO_BASED, _BLOCK = 22, 34, 36
# Results of the analysis, kB: what of it stays, and the factor to come.
_KEPT, _FACTOR = 15, 16

_OVERFLOW, _NO_MEMORY, _ZERO_PIVOT = -8, -2, -4


def _paths() -> list[Path]:
    """Return the files in which the library may lie, likeliest first."""
    folders = [Path(sys.prefix) / "lib", Path(sys.prefix) / "Library" / "bin"]
    found: list[Path] = []
    try:
        files = metadata.files("mkl") or []
    except metadata.PackageNotFoundError:
        files = []
    names = ("libmkl_rt.so", "mkl_rt.", "libmkl_rt.dylib")
    found += [Path(str(f.locate())) for f in files if f.name.startswith(names)]
    for folder in folders:
        found += sorted(folder.glob("*mkl_rt*"))
    return [path.resolve() for path in found if path.suffix != ".lib" and path.exists()]


def _load() -> ctypes.CDLL:
    # Idle threads of the library's pool must sleep at once: by default they spin for
    # 200 ms and take the cores from what runs between two solves. The pool reads
    # this when it is loaded.
    os.environ.setdefault("KMP_BLOCKTIME", "0")
    for path in _paths():
        if sys.platform == "win32":
            os.add_dll_directory(str(path.parent))
        try:
            library = ctypes.CDLL(str(path))
        except OSError:
            continue
        # 32-bit integers, whatever the environment says.
        library.MKL_Set_Interface_Layer(0)
        return library
    raise ImportError("no MKL library in this Python's environment")


_library = _load()


def set_threads(count: int) -> int:
    """Set the number of threads of this library in the calling thread; return the old one."""
    return int(_library.MKL_Set_Num_Threads_Local(ctypes.c_int(count)))


class Pardiso:
    """A Cholesky or LDL^T factorisation; see `factor.Factor`."""

    name = "MKL PARDISO"
    counts = True

    def __init__(self, upper: Upper, positive: bool, wide: bool = False) -> None:
        self._integer = np.int64 if wide else np.int32
        self._call_library = _library.pardiso_64 if wide else _library.pardiso
        self._kind = _POSITIVE if positive else _INDEFINITE
        self._n = len(upper.indptr) - 1
        self._indptr = np.ascontiguousarray(upper.indptr, self._integer)
        self._indices = np.ascontiguousarray(upper.indices, self._integer)
        self._data = np.ascontiguousarray(upper.data, float).ravel()
        self._handle = np.zeros(64, np.int64)
        parameters = np.zeros(64, self._integer)
        parameters[_OWN_VALUES] = 1
        parameters[_ORDERING] = 3  # nested dissection, on all threads
        # No refinement: the eigen-solver's own residual is the check. With it, and
        # with the default copies of indices, a solve takes 3 to 8 times as long.
        parameters[_REFINEMENT] = 0
        parameters[_PERTURBATION] = 8
        parameters[_SCALING] = parameters[_MATCHING] = 0
        parameters[_COUNT_FACTOR] = parameters[_COUNT_FLOPS] = 0
        parameters[_ZERO_BASED] = 1
        # With whole 3 x 3 blocks the analysis works on nodes, three times as fast.
        blocked = isinstance(upper, sp.bsr_matrix)
        parameters[_BLOCK] = 3 if blocked else 0
        self._parameters = parameters
        self._closer = weakref.finalize(
            self, _free, self._call_library, self._handle, self._kind, self._n, parameters
        )
        self._call(_ANALYSE)
        try:
            refuse_beyond_memory(self.needed_bytes)
        except SolveError:
            self.close()
            raise
        self._call(_NUMERIC)

    @property
    def negative_pivots(self) -> int | None:
        """Number of negative eigenvalues of an indefinite matrix."""
        return int(self._parameters[_NEGATIVE]) if self._kind == _INDEFINITE else None

    @property
    def needed_bytes(self) -> float:
        """Memory that the numeric factorisation takes, as its symbolic analysis says."""
        return 1024.0 * (float(self._parameters[_KEPT]) + float(self._parameters[_FACTOR]))

    def numeric(self, values: np.ndarray) -> None:
        """Factorise anew with new values of the same pattern."""
        self._data = np.ascontiguousarray(values, float).ravel()
        self._call(_NUMERIC)

    def solve(self, right: np.ndarray) -> np.ndarray:
        """Return x of A x = b for one right side (n,) or several (n, k)."""
        if not self._closer.alive:
            raise ValueError("the factorisation is closed")
        b = np.asfortranarray(right, float)
        x = np.empty_like(b, order="F")
        self._call(_SOLVE, b, x)
        return x

    def close(self) -> None:
        """Free the memory of the factors."""
        self._closer()

    def _call(
        self, phase: int, right: np.ndarray | None = None, out: np.ndarray | None = None
    ) -> None:
        none = np.zeros(1)
        error = _run(
            self._call_library,
            self._handle,
            self._kind,
            phase,
            self._n,
            (self._data, self._indptr, self._indices),
            1 if right is None or right.ndim == 1 else right.shape[1],
            self._parameters,
            none if right is None else right,
            none if out is None else out,
        )
        if error:
            self.close()
            raise _Failure(error) if error == _OVERFLOW else SolveError(_advice(error))


class _Failure(Exception):
    """The library's 32-bit integers do not suffice."""


def _run(call, handle, kind, phase, n, matrix, count, parameters, right, out) -> int:
    integer = ctypes.c_int64 if parameters.dtype == np.int64 else ctypes.c_int32

    def number(value: int):
        return ctypes.byref(integer(value))

    def address(array: np.ndarray):
        return array.ctypes.data_as(ctypes.c_void_p)

    error = integer(0)
    unused = np.zeros(1, parameters.dtype)
    call(
        address(handle),
        number(1),
        number(1),
        number(kind),
        number(phase),
        number(n),
        *(address(array) for array in matrix),
        address(unused),
        number(count),
        address(parameters),
        number(0),
        address(right),
        address(out),
        ctypes.byref(error),
    )
    return error.value


def _free(call, handle, kind, n, parameters) -> None:
    none = np.zeros(1)
    index = np.zeros(1, parameters.dtype)
    _run(call, handle, kind, _FREE, n, (none, index, index), 1, parameters, none, none)


def _advice(error: int) -> str:
    if error in (_NO_MEMORY, -9, -10, -11):
        return (
            "the factorisation ran out of memory; use a coarser mesh (solve.size) "
            "or a machine with more memory"
        )
    if error == _ZERO_PIVOT:
        return (
            "the stiffness matrix is not positive definite; the part may not be held "
            "as meant, or the material may be unsound"
        )
    return f"the direct solver failed (PARDISO error {error}); try MODEWRIGHT_DIRECT=superlu"


def make(upper: Upper, positive: bool) -> Pardiso:
    """Return the factorisation of a symmetric matrix given by its upper triangle."""
    if upper.indptr.dtype == np.int64 and upper.nnz >= 2**31:
        return Pardiso(upper, positive, wide=True)
    try:
        return Pardiso(upper, positive)
    except _Failure:
        return Pardiso(upper, positive, wide=True)
