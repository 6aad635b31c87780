"""Meshing a shape: runs the CAD kernel in a child process, whose crash is one clear error."""

from __future__ import annotations

import os
import pickle
import signal
import subprocess
import sys
from typing import TYPE_CHECKING, Any

from .dimension import FARTHEST, SHORTEST
from .errors import InputError, MeshError, ModewrightError, ToolError
from .mesh import Mesh

if TYPE_CHECKING:
    from .shape import Shape
    from .size_field import SizeField
    from .solid import Patch

#: Debian package of each system library that the CAD library needs.
PACKAGES = {
    "libGLU": "libglu1-mesa",
    "libGL": "libgl1",
    "libOpenGL": "libopengl0",
    "libEGL": "libegl1",
    "libX11": "libx11-6",
    "libXext": "libxext6",
    "libXrender": "libxrender1",
    "libXcursor": "libxcursor1",
    "libXfixes": "libxfixes3",
    "libXft": "libxft2",
    "libXinerama": "libxinerama1",
    "libfontconfig": "libfontconfig1",
    "libgomp": "libgomp1",
    "libSM": "libsm6",
    "libICE": "libice6",
}

_COMMAND = (sys.executable, "-P", "-m", f"{__package__}.kernel_child")


def generate(
    shape: Shape,
    *,
    size_mm: float | None = None,
    patches: tuple[Patch, ...] = (),
    coarse: bool = False,
    size_field: SizeField | None = None,
    most_unknowns: float | None = None,
    time_limit: float = 300.0,
) -> Mesh:
    """Return the second-order mesh of a shape.

    Parameters
    ----------
    shape : Shape
    size_mm : float, optional
        Element size, mm; default from the thinnest section and the length
        (`geometry.sizing`).
    patches : tuple of Patch
        Rectangles imprinted on flat named faces.
    coarse : bool
        Without a size, a coarse mesh to begin a refinement with.
    size_field : SizeField, optional
        Element sizes from place to place, instead of one.
    most_unknowns : float, optional
        Meshes that would have more are refused before they are begun.
    time_limit : float, s

    Raises
    ------
    InputError
        If the shape, the size or a patch is impossible.
    MeshError
        If no valid mesh was found.
    ToolError
        If the CAD library is missing something, crashed or ran out of time.
    """
    if size_mm is not None and not SHORTEST <= size_mm <= FARTHEST:
        raise InputError(
            "is out of range",
            key="solve.size",
            value=size_mm,
            allowed=f"{SHORTEST:g} to {FARTHEST:g} mm",
        )
    if shape.family.mesh is not None:
        if patches:
            raise InputError(
                "a patch cannot be imprinted on a body that is a mesh already",
                value=patches[0].name,
            )
        return shape.family.mesh(shape.dimensions, shape.folder)
    request = {
        "solid": shape.solid(),
        "size": size_mm,
        "patches": tuple(patches),
        "coarse": coarse,
        "local": size_field,
    }
    if most_unknowns is not None:
        request["most"] = most_unknowns
    answer = _ask(request, time_limit)
    if isinstance(answer, Mesh):
        return answer
    if isinstance(answer, ModewrightError):
        raise answer
    match answer:
        case ("unloadable", str(reason)):
            raise ToolError(_missing(reason))
        case ("memory", _):
            raise MeshError("the mesh does not fit in memory; try a larger element size")
    raise ToolError("the meshing process gave an answer that makes no sense; try again")


def _ask(request: dict[str, Any], time_limit: float) -> Any:
    """Return the child's answer to a request."""
    quiet = {**os.environ, "OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1"}
    with subprocess.Popen(
        [*_COMMAND, str(os.getpid())],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        env=quiet,
        start_new_session=True,
    ) as child:
        try:
            out, err = child.communicate(pickle.dumps(request), timeout=time_limit)
        except subprocess.TimeoutExpired:
            raise ToolError(
                f"meshing took longer than {time_limit:g} s and was stopped; "
                "try a larger element size"
            ) from None
        finally:
            _end(child)
    if child.returncode != 0:
        raise ToolError(_crash(child.returncode, err))
    try:
        return pickle.loads(out)
    except (pickle.UnpicklingError, EOFError, AttributeError, ImportError, ValueError, IndexError):
        raise ToolError(
            "the meshing process gave an answer that cannot be read; try again"
        ) from None


def _end(child: subprocess.Popen[bytes]) -> None:
    """Kill the child, if it still runs, with everything it started."""
    if child.poll() is not None:
        return
    if hasattr(os, "killpg"):
        os.killpg(child.pid, signal.SIGKILL)
    else:
        child.kill()
    child.wait()


def _crash(code: int, err: bytes) -> str:
    """Return the message for a child that ended badly."""
    if code < 0:
        try:
            how = signal.Signals(-code).name
        except ValueError:
            how = f"signal {-code}"
    else:
        how = f"exit code {code}"
    lines = err.decode(errors="replace").strip().splitlines()
    told = f": {lines[-1].strip()}" if lines else ""
    return f"the meshing process crashed ({how}{told}); try another element size"


def _missing(reason: str) -> str:
    """Return the message for a CAD library that cannot be loaded."""
    library = reason.split(":")[0].strip()
    package = PACKAGES.get(library.split(".so")[0])
    if package:
        return (
            f"the CAD library needs {library}, which is not on this machine; "
            f"install it: apt-get install {package}"
        )
    return (
        f"the CAD library cannot be loaded ({reason}); reinstall modewright with its dependencies"
    )
