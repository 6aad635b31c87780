"""Modes as files for other programs: arrays (``modes.npz``) and fields (``modes.vtu``)."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from ..fem.modal.modes import Mode, Modes
from ..geometry.exchange import write_vtu
from .table import hertz


def write_npz(path: Path, modes: Modes) -> None:
    """Write the arrays of a result.

    ``points`` (n, 3) m; ``cells`` (c, 10) int, VTK node order; ``shapes``
    (m, n, 3) 1/sqrt(kg), mass-normalised; ``frequencies_hz`` (m,); ``names`` (m,) str.
    """
    np.savez_compressed(
        path,
        points=modes.mesh.points,
        cells=modes.mesh.cells,
        shapes=modes.shapes,
        frequencies_hz=modes.frequencies,
        names=np.array(modes.names, dtype=np.str_),
    )


def write_modes_vtu(path: Path, modes: Modes) -> None:
    """Write all modes in one VTU file, as float32 point vectors named for their modes.

    Points in m, quadratic tetrahedra, shapes mass-normalised (1/sqrt(kg)).
    """
    digits = max(2, len(str(len(modes))))
    fields = {
        field_name(mode, digits): np.ascontiguousarray(shape, dtype=np.float32)
        for mode, shape in zip(modes.modes, modes.shapes, strict=True)
    }
    write_vtu(path, modes.mesh, fields)


def field_name(mode: Mode, digits: int = 2) -> str:
    """Return what a mode's vectors are called, such as ``mode_01 torsion 1 (196.00 Hz)``."""
    return f"mode_{mode.index:0{digits}} {mode.name} ({hertz(mode.frequency_hz)} Hz)"
