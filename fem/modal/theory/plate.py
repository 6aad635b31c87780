"""Rectangular plates after Kirchhoff, free or clamped at one side."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.polynomial import legendre
from scipy.linalg import eigh

_DEGREE = 16
_POINTS = 40


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class PlateModes:
    """Bending modes of a rectangular plate.

    Attributes
    ----------
    parameters : (m,) float
        lambda^2 = omega a^2 sqrt(rho h / D), ascending, a the length.
    deflections : (m, q, q) float
        At `points` along the length and across the width.
    points, weights : (q,) float
        Gauss-Legendre points and weights on -1 .. 1.
    """

    parameters: np.ndarray
    deflections: np.ndarray
    points: np.ndarray
    weights: np.ndarray


def plate_modes(aspect: float, nu: float, count: int, *, clamped: bool = False) -> PlateModes:
    """Return the lowest modes of a rectangular plate, without rigid motions.

    Rayleigh-Ritz with products of Legendre polynomials up to degree 16 each
    way (times (1 + x)^2 for a clamp at the first end of the length), of

        1/2 D int w_xx^2 + w_yy^2 + 2 nu w_xx w_yy + 2 (1 - nu) w_xy^2 dA
        1/2 rho h int w_t^2 dA

    Parameters
    ----------
    aspect : float, length over width
    nu : Poisson's ratio
    count : int
    clamped : bool
        Clamped at the first end of the length, else free all round.

    References
    ----------
    Leissa A. W., J. Sound Vib. 31 (1973) 257-293; Bassily & Dickinson, J.
    Appl. Mech. 42 (1975) 858-864 for polynomials in the Ritz method.
    """
    points, weights = legendre.leggauss(_POINTS)
    along = _functions(points, 2 if clamped else 0)
    across = _functions(points, 0)

    def integrals(functions: tuple[np.ndarray, ...]) -> dict[tuple[int, int], np.ndarray]:
        return {
            (i, j): functions[i].T @ (weights[:, None] * functions[j])
            for i in range(3)
            for j in range(3)
        }

    # Lengths in halves of the plate's length: x = a xi / 2, y = b eta / 2.
    fx, fy, r = integrals(along), integrals(across), aspect
    stiff = (
        np.kron(fx[2, 2], fy[0, 0])
        + r**4 * np.kron(fx[0, 0], fy[2, 2])
        + nu * r**2 * (np.kron(fx[2, 0], fy[0, 2]) + np.kron(fx[0, 2], fy[2, 0]))
        + 2.0 * (1.0 - nu) * r**2 * np.kron(fx[1, 1], fy[1, 1])
    )
    mass = np.kron(fx[0, 0], fy[0, 0])
    rigid = 0 if clamped else 3
    values, vectors = eigh(stiff, mass, subset_by_index=(0, rigid + count - 1))
    values, vectors = values[rigid:], vectors[:, rigid:]
    n = along[0].shape[1]
    shapes = [along[0] @ v.reshape(n, -1) @ across[0].T for v in vectors.T]
    return PlateModes(
        parameters=4.0 * np.sqrt(values),
        deflections=np.array(shapes),
        points=points,
        weights=weights,
    )


def _functions(x: np.ndarray, power: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return (1 + x)^power P_k(x) and two derivatives, each (q, k), of unit norm."""
    basis = [
        legendre.legmul(legendre.poly2leg([1.0, 2.0, 1.0] if power else [1.0]), row)
        for row in np.eye(_DEGREE + 1)
    ]
    return tuple(
        np.column_stack(
            [
                legendre.legval(x, legendre.legder(b, order)) * np.sqrt(k + 0.5)
                for k, b in enumerate(basis)
            ]
        )
        for order in range(3)
    )  # type: ignore[return-value]


def plate_frequencies(
    parameters: np.ndarray,
    length: float,
    thickness: float,
    modulus: float,
    nu: float,
    density: float,
) -> np.ndarray:
    """Return frequencies lambda^2 / (2 pi a^2) sqrt(D / (rho h)), Hz."""
    rigidity = modulus * thickness**2 / (12.0 * (1.0 - nu**2) * density)
    return np.asarray(parameters) / (2.0 * np.pi * length**2) * np.sqrt(rigidity)
