"""The child process that runs the kernel: a pickled request in, a pickled answer out.

Its argument is the process id of its parent, with which it ends.
"""

from __future__ import annotations

import os
import pickle
import sys
from typing import Any

from .orphan import end_with


def main() -> None:
    """Answer one request from standard input on what was standard output."""
    end_with(int(sys.argv[1]))
    # The CAD library prints on its own; only the answer may go to the parent's pipe.
    answers = os.fdopen(os.dup(1), "wb")
    os.dup2(2, 1)
    request = pickle.load(sys.stdin.buffer)
    answers.write(pickle.dumps(_answer(request), protocol=pickle.HIGHEST_PROTOCOL))
    answers.flush()
    # Libraries that crash while they are unloaded must not spoil a finished answer.
    os._exit(0)


def _answer(request: dict[str, Any]) -> object:
    from .errors import ModewrightError

    try:
        from . import kernel
    except (OSError, ImportError) as error:
        return ("unloadable", str(error))
    try:
        return kernel.mesh(kernel.Request(**request))
    except ModewrightError as error:
        return error
    except MemoryError:
        return ("memory", "")


if __name__ == "__main__":
    main()
