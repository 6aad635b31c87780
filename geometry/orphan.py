"""A child process ends when the run that started it does, even if that was killed."""

from __future__ import annotations

import ctypes
import os
import signal
import sys
import threading
import time

#: Linux: "send me this signal when my parent dies" (prctl(2)).
_PARENT_DEATH = 1

#: Elsewhere the parent is looked for so often, s.
_LOOK = 1.0


def end_with(parent: int) -> None:
    """Let this process end as soon as its parent has.

    Parameters
    ----------
    parent : int
        Process id of the one that started this process.
    """
    if not hasattr(os, "getppid") or os.name == "nt":
        return
    if sys.platform == "linux":
        ctypes.CDLL(None).prctl(_PARENT_DEATH, signal.SIGKILL, 0, 0, 0)
    else:
        threading.Thread(target=_watch, args=(parent,), daemon=True).start()
    if os.getppid() != parent:
        # It died before we asked.
        os._exit(1)


def _watch(parent: int) -> None:
    while os.getppid() == parent:
        time.sleep(_LOOK)
    os._exit(1)
