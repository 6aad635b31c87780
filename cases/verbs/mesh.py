"""``modewright mesh``: the second-order mesh of a case alone."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np

from ...geometry.errors import InputError
from ..answer import Answer
from ..outlet import check_file
from ..reader import read_case
from .modes import with_settings


def answer_mesh(
    path: Path,
    *,
    out: Path,
    size: float | None = None,
    progress: Callable[[str], None] | None = None,
) -> Answer:
    """Mesh a case and write the mesh in the format its file name asks for.

    Raises
    ------
    InputError
        For a mistake in the case, an unknown suffix, or a file that cannot be written.
    MeshError
        If the part could not be meshed.
    """
    check_file(out)
    case = with_settings(read_case(path), size=size)
    # Loaded only now, so that a mistake in the case is told at once.
    from ...fem.modal.solve import case_mesh
    from ...geometry.exchange import write_mesh

    mesh = case_mesh(case, progress=progress)
    try:
        write_mesh(out, mesh)
    except InputError as error:
        raise InputError(
            error.problem, key="--out", value=error.value, allowed=error.allowed
        ) from None
    except OSError as error:
        reason = (error.strerror or str(error)).lower()
        raise InputError(f"cannot be written: {reason}", key="--out", value=str(out)) from None
    mass = mesh.volume * case.material.density
    return Answer(
        document={
            "format": "modewright-mesh",
            "version": 1,
            "file": str(out),
            "nodes": len(mesh.points),
            "cells": len(mesh.cells),
            "size_mm": mesh.size * 1e3,
            "volume_mm3": mesh.volume * 1e9,
            "mass_g": mass * 1e3,
            "box_mm": [[float(v) * 1e3 for v in f(mesh.points, axis=0)] for f in (np.min, np.max)],
            "faces": {name: len(facets) for name, facets in mesh.faces.items()},
        },
        lines=(
            f"Written: {out}: {len(mesh.points)} nodes, {len(mesh.cells)} second-order "
            f"tetrahedra of {mesh.size * 1e3:.3g} mm, in mm; {mass * 1e3:.4g} g. "
            f"Faces: {', '.join(mesh.faces)}.",
        ),
    )
