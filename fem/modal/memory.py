"""Memory: the peak of this process so far, and what a solve may take."""

from __future__ import annotations

import sys
from pathlib import Path

import psutil

from ...geometry.errors import SolveError

#: Where a container's limit and use stand (Linux, version 2 and 1 of its interface).
_LIMITS = (
    ("/sys/fs/cgroup/memory.max", "/sys/fs/cgroup/memory.current"),
    (
        "/sys/fs/cgroup/memory/memory.limit_in_bytes",
        "/sys/fs/cgroup/memory/memory.usage_in_bytes",
    ),
)

#: Bytes that a solve takes: a row for what grows with the unknowns n (mesh, assembly,
#: shapes, mesh error), and one for the factor, which grows as n^(4/3) in solid bodies
#: (nested dissection; A. George, SIAM J. Numer. Anal. 10 (1973) 345).
_PER_UNKNOWN, _PER_FACTOR = 4000.0, 120.0

#: Share of the free memory that a solve may take.
_SHARE = 0.6


def peak_megabytes() -> float:
    """Return the largest resident memory this process has had so far, MB (2^20 bytes)."""
    if sys.platform == "win32":
        return psutil.Process().memory_info().peak_wset / 2**20
    import resource

    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    # Kilobytes on Linux and the BSDs, bytes on macOS.
    return peak / 2**20 if sys.platform == "darwin" else peak / 2**10


class NoRoom(SolveError):
    """A factorisation is known not to fit before it begins.

    Attributes
    ----------
    needed, free : bytes
    """

    def __init__(self, needed: float, free: float) -> None:
        super().__init__(
            f"the factorisation would take {needed / 2**30:.1f} GB and {free / 2**30:.1f} GB of "
            "memory are free; use a coarser mesh (solve.size)"
        )
        self.needed, self.free = needed, free


def free_bytes() -> float:
    """Return the memory that can be had without swapping, in this container if in one."""
    free = float(psutil.virtual_memory().available)
    for limit, use in _LIMITS:
        try:
            room = int(Path(limit).read_text()) - int(Path(use).read_text())
        except (OSError, ValueError):
            # No such limit ("max" is a word).
            continue
        free = min(free, max(float(room), 0.0))
    return free


def refuse_beyond_memory(needed: float) -> None:
    """Raise NoRoom if so many bytes are not free."""
    free = free_bytes()
    if needed > free:
        raise NoRoom(needed, free)


def affordable_unknowns() -> float:
    """Return about how many unknowns a solve in the memory now free can have."""
    free = _SHARE * free_bytes()
    unknowns = free / _PER_UNKNOWN
    for _ in range(30):
        # The factor's share depends slowly on the unknowns: a fixed point.
        unknowns = free / (_PER_UNKNOWN + _PER_FACTOR * unknowns ** (1.0 / 3.0))
    return unknowns
