"""From shapes of motion to names, shares, a fixed sign and a fixed basis of pairs."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from scipy.sparse import csr_array

from ....geometry.anatomy import Anatomy, Kind
from ....geometry.mesh import Mesh
from .bars import read_bar
from .discs import read_disc
from .label import Identity, Label, Reading
from .motion import Motion, motion
from .numbers import labelled
from .pairs import clusters, rotation
from .plain import read_plain
from .plates import read_plate
from .revolved import read_revolved
from .rings import read_ring
from .sign import fixed_signs

#: How a body of each kind is read.
_READERS: dict[Kind, Callable[[Motion, Anatomy], Reading]] = {
    Kind.BAR: read_bar,
    Kind.PLATE: read_plate,
    Kind.DISC: read_disc,
    Kind.RING: read_ring,
    Kind.REVOLVED: read_revolved,
    Kind.NONE: read_plain,
}

__all__ = ["Identity", "Label", "identify"]


def identify(
    mesh: Mesh,
    anatomy: Anatomy,
    frequencies: np.ndarray,
    shapes: np.ndarray,
    mass: csr_array,
) -> Identity:
    """Return the names of modes and their shapes with sign and basis fixed.

    A name depends on the motion alone: not on the sign of a shape, the order in
    which equal modes were found, the mesh, or how the body lies in space.

    Parameters
    ----------
    mesh : the body
    anatomy : what it is
    frequencies : (m,) float, Hz, ascending
    shapes : (m, n, 3) float
        Mass-normalised.
    mass : (n, n) float, kg
        The scalar mass matrix, density included.

    Returns
    -------
    Identity
    """
    frequencies = np.asarray(frequencies, float)
    shapes = np.asarray(shapes, float)
    if len(frequencies) == 0:
        return Identity(shapes=shapes, labels=())
    reading = _READERS[anatomy.kind](motion(mesh, anatomy.frame, shapes), anatomy)
    turn = rotation(frequencies, reading.criteria, keep_order=reading.symmetric)
    labels = labelled(reading.turned(turn).drafts(), clusters(frequencies))
    shapes = _combined(turn, shapes)
    signs = fixed_signs(mesh, anatomy.frame, shapes, mass)
    return Identity(shapes=shapes * signs[:, None, None], labels=labels)


def _combined(turn: np.ndarray, shapes: np.ndarray) -> np.ndarray:
    """Return the shapes with clusters rotated; the others keep their digits."""
    rows = np.flatnonzero((turn != np.eye(len(turn))).any(axis=1))
    out = shapes.copy()
    if len(rows):
        out[rows] = np.tensordot(turn[np.ix_(rows, rows)], shapes[rows], 1)
    return out
