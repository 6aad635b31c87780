"""Work on rows split among threads.

The libraries below release Python's lock inside their loops, and threads that
have nothing to do sleep, unlike those of a pool that waits for work by spinning.
"""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from itertools import pairwise
from typing import TypeVar

import numpy as np
import scipy.sparse as sp

Result = TypeVar("Result")

#: Fewer rows than this are not worth a thread.
_FEWEST = 20_000


def in_slices(work: Callable[[slice], Result], rows: int, workers: int) -> list[Result]:
    """Return the results of `work` on `workers` equal slices of rows, done at the same time."""
    if workers < 2 or rows < _FEWEST:
        return [work(slice(0, rows))]
    edges = np.linspace(0, rows, workers + 1).astype(int)
    parts = [slice(a, b) for a, b in pairwise(edges.tolist())]
    with ThreadPoolExecutor(workers - 1) as pool:
        others = [pool.submit(work, part) for part in parts[1:]]
        return [work(parts[0]), *(other.result() for other in others)]


class SplitMatrix:
    """A sparse matrix whose products with several vectors use several threads."""

    def __init__(self, matrix: sp.csr_matrix, workers: int) -> None:
        self._rows, self._workers = len(matrix.indptr) - 1, workers

        def view(rows: slice) -> tuple[int, sp.csr_matrix]:
            ends = matrix.indptr[rows.start : rows.stop + 1]
            inside = slice(ends[0], ends[-1])
            parts = (matrix.data[inside], matrix.indices[inside], ends - ends[0])
            return rows.start, sp.csr_matrix(parts, shape=(rows.stop - rows.start, self._rows))

        self._parts = dict(in_slices(view, self._rows, workers))

    def __matmul__(self, vectors: np.ndarray) -> np.ndarray:
        """Return the product (n, k) with vectors (n, k)."""
        out = np.empty(vectors.shape)

        def multiply(rows: slice) -> None:
            out[rows] = self._parts[rows.start] @ vectors

        in_slices(multiply, self._rows, self._workers)
        return out
