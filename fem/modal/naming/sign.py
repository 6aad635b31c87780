"""The sign of a mode: up is where a fixed, lopsided field says it is."""

from __future__ import annotations

import numpy as np
from scipy.sparse import csr_array

from ....geometry.anatomy import Frame
from ....geometry.mesh import Mesh

#: Powers of (along, across, through) and the vector each is multiplied with. No
#: symmetry of a body leaves this field unchanged or turns it over, so hardly any
#: mode is orthogonal to it.
_FIELD = (
    ((0, 0, 0), (0.31, 0.53, 0.83)),
    ((1, 0, 0), (0.73, 0.67, 1.00)),
    ((0, 1, 0), (0.59, 0.37, 0.71)),
    ((0, 0, 1), (0.43, -0.79, 0.29)),
    ((2, 0, 0), (0.47, 0.61, 0.97)),
    ((1, 1, 0), (0.41, 0.23, 0.89)),
    ((0, 2, 0), (0.19, 0.33, -0.57)),
    ((1, 0, 1), (-0.51, 0.35, 0.13)),
    ((0, 1, 1), (0.27, -0.45, 0.17)),
    ((3, 0, 0), (0.55, 0.39, 0.77)),
    ((2, 1, 0), (0.21, 0.63, 0.69)),
    ((1, 2, 0), (0.25, 0.15, 0.49)),
    ((0, 3, 0), (0.11, 0.09, 0.65)),
)


def fixed_signs(mesh: Mesh, frame: Frame, shapes: np.ndarray, mass: csr_array) -> np.ndarray:
    """Return (m,) of +1 or -1 that makes the mass product with the fixed field positive.

    Parameters
    ----------
    mesh, frame : the body and its anatomy's frame
    shapes : (m, n, 3)
    mass : (n, n) kg, the scalar mass matrix
    """
    local = frame.local(mesh.points)
    low, high = local.min(axis=0), local.max(axis=0)
    unit = (local - low) / (high - low).max()
    field = np.zeros_like(local)
    for powers, vector in _FIELD:
        term = np.ones(len(unit))
        for axis, power in enumerate(powers):
            for _ in range(power):
                term = term * unit[:, axis]
        field += term[:, None] * np.asarray(vector)
    weighted = mass @ (field @ np.asarray(frame.axes))
    return np.where(np.tensordot(shapes, weighted, 2) < 0.0, -1.0, 1.0)
