"""One place that sets the threads of every numerical library."""

from __future__ import annotations

import os
from collections.abc import Iterator
from contextlib import contextmanager

from threadpoolctl import threadpool_limits

from .direct.factor import load


def cores() -> int:
    """Return the number of cores this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def default_count() -> int:
    """Return what ``OMP_NUM_THREADS`` says, else one thread less than there are cores.

    The threads of a factorisation wait for the slowest of them many times. On a
    machine of two cores with anything else at work, two threads took longer than
    one; a core left free costs little where there are many.
    """
    asked = os.environ.get("OMP_NUM_THREADS", "")
    return int(asked) if asked.isdigit() and int(asked) > 0 else max(1, cores() - 1)


@contextmanager
def threads(count: int | None = None, library: str | None = None) -> Iterator[int]:
    """Run a block with `count` threads in the direct solver and one in numpy's own library.

    Two pools of threads that both wait by spinning take the cores from each
    other: the same eigen-solve has been seen to take ten times as long.

    Parameters
    ----------
    count : int, optional
        Default: see `default_count`.
    library : str, optional
        Direct solver that will be used; see `direct.factor.factorise`. Only MKL
        PARDISO uses more than one thread.

    Yields
    ------
    int
        The number of threads of the direct solver.
    """
    if count is None:
        count = default_count()
    # What is not loaded yet cannot be limited.
    load(library)
    with threadpool_limits(limits=1, user_api="blas"):
        restore = _direct_threads(count)
        try:
            yield count
        finally:
            restore()


def _direct_threads(count: int):
    try:
        from .direct.mkl import set_threads
    except (ImportError, OSError):
        return lambda: None
    before = set_threads(count)
    return lambda: set_threads(before)
