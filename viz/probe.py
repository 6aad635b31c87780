"""Whether this machine can render, tried once in a child process.

Where OpenGL is missing, the renderer ends the whole process; nothing can
catch that from inside.
"""

from __future__ import annotations

import os
import subprocess
import sys
from functools import cache

from ..geometry.orphan import end_with

#: What to install on Debian and its relatives.
PACKAGES = "libegl1 libgl1"

_PATIENCE = 120.0
_WINDOW = "VTK_DEFAULT_OPENGL_WINDOW"
_EGL = "vtkEGLRenderWindow"


def rendering_problem() -> str | None:
    """Return why pictures cannot be drawn here, one sentence, or None if they can."""
    return _probe()[0]


def rendering_environment() -> dict[str, str]:
    """Return the environment for child processes that render."""
    return {**os.environ, **_probe()[1]}


@cache
def _probe() -> tuple[str | None, dict[str, str]]:
    """Return the problem or None, and what to add to the environment."""
    ways: list[dict[str, str]] = [{}]
    if sys.platform.startswith("linux") and _WINDOW not in os.environ:
        # EGL first: it needs no display, and a display that does not answer costs nothing.
        ways.insert(0, {_WINDOW: _EGL})
    reason = ""
    for way in ways:
        reason = _try(way)
        if not reason:
            return None, way
    return (
        f"this machine cannot draw with OpenGL ({reason}); "
        f"on Debian or Ubuntu: apt-get install {PACKAGES}"
    ), {}


def _try(way: dict[str, str]) -> str:
    """Return why rendering fails in this way, or an empty text."""
    code = (
        f"from {end_with.__module__} import end_with; end_with({os.getpid()}); "
        f"from {__package__}.scene import check_rendering; check_rendering()"
    )
    try:
        child = subprocess.run(
            [sys.executable, "-P", "-c", code],
            env={**os.environ, **way},
            stdin=subprocess.DEVNULL,
            capture_output=True,
            text=True,
            errors="replace",
            timeout=_PATIENCE,
            check=False,
        )
    except subprocess.TimeoutExpired:
        return f"no picture after {_PATIENCE:.0f} s"
    except OSError as error:
        return f"no child process: {error}"
    return "" if child.returncode == 0 else ending(child.returncode, child.stderr)


def ending(code: int, stderr: str) -> str:
    """Return how a child process ended, as a phrase."""
    if code < 0:
        return f"the renderer crashed, signal {-code}"
    lines = [line.strip() for line in stderr.splitlines() if line.strip()]
    return lines[-1] if lines else f"the renderer ended with code {code}"
