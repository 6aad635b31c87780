"""Rigid-body motions: all six, and those that supports and springs leave."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import scipy.linalg as sla

from .constraint import Constraint

#: Share of a rigid motion (root mean square) along held directions that is rounding.
_HELD = 1e-6

#: Share of the springs' energy below which a motion is free of them: a bed of
#: normal springs on a meshed cylinder resists turning by this little.
_SPRUNG = 1e-5


def rigid_motions(points: np.ndarray) -> np.ndarray:
    """Return three translations and three rotations (3n, 6) of points (n, 3).

    Rotations turn about the mean point by 1/size, so that all six are of about
    the same size.
    """
    x = points - points.mean(axis=0)
    x = x / np.sqrt((x**2).sum(axis=1).mean())
    motions = np.zeros((len(points), 3, 6))
    motions[:, [0, 1, 2], [0, 1, 2]] = 1.0
    for axis in range(3):
        motions[:, :, 3 + axis] = np.cross(np.eye(3)[axis], x)
    return motions.reshape(-1, 6)


def rigid_basis(
    points: np.ndarray,
    constraint: Constraint,
    spring_energy: np.ndarray,
    apply_mass: Callable[[np.ndarray], np.ndarray],
) -> np.ndarray:
    """Return the rigid motions that cost no energy, mass-orthonormal.

    Parameters
    ----------
    points : (n, 3) float, m
    constraint : Constraint
    spring_energy : (6, 6) float, N/m
        R^T K R of the springs alone, R the `rigid_motions`.
    apply_mass : (3n, k) -> (3n, k)

    Returns
    -------
    (3n, r) float, 1/sqrt(kg)
        0 to 6 motions.
    """
    motions = rigid_motions(points)
    allowed = np.eye(6)
    held = int((~constraint.free).sum())
    if held:
        across = constraint.violation(motions).reshape(-1, 6)
        square, mixes = np.linalg.eigh(across.T @ across / held)
        allowed = mixes[:, square < _HELD**2]
    if spring_energy.any() and allowed.shape[1]:
        energy, mixes = np.linalg.eigh(allowed.T @ spring_energy @ allowed)
        allowed = allowed @ mixes[:, energy < _SPRUNG * np.trace(spring_energy)]
    if allowed.shape[1] == 0:
        return np.zeros((motions.shape[0], 0))
    basis = constraint.to_vectors(constraint.to_unknowns(motions @ allowed))
    for _ in range(2):
        root = sla.cholesky(basis.T @ apply_mass(basis))
        basis = sla.solve_triangular(root, basis.T, trans=1).T
    return np.ascontiguousarray(basis)
