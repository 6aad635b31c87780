"""Peak memory of this process."""

from __future__ import annotations

import sys

import psutil


def peak_megabytes() -> float:
    """Return the largest resident memory this process has had so far, MB (2^20 bytes)."""
    if sys.platform == "win32":
        return psutil.Process().memory_info().peak_wset / 2**20
    import resource

    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    # Kilobytes on Linux and the BSDs, bytes on macOS.
    return peak / 2**20 if sys.platform == "darwin" else peak / 2**10
