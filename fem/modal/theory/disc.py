"""Free round plates after Kirchhoff."""

from __future__ import annotations

import numpy as np
from scipy.optimize import root_scalar
from scipy.special import ive, jv


def disc_root(diameters: int, circles: int, nu: float) -> float:
    """Return lambda^2 = omega a^2 sqrt(rho h / D) of a free round plate.

    Root of, with J, I the Bessel functions of order n at lambda and ' their
    derivatives,

        [l^2 J + (1 - nu) (l J' - n^2 J)] [l^3 I' - (1 - nu) n^2 (l I' - I)]
      = [l^3 J' + (1 - nu) n^2 (l J' - J)] [l^2 I - (1 - nu) (l I' - n^2 I)]

    Parameters
    ----------
    diameters, circles : int
        Nodal diameters n and nodal circles; with n below 2 at least one circle.
    nu : Poisson's ratio

    References
    ----------
    Leissa A. W., Vibration of Plates, NASA SP-160 (1969), chapter 2.
    """
    # Rigid motions are the roots at zero of n = 0 and 1; elastic ones are counted from s.
    wanted = circles - (1 if diameters < 2 else 0)
    grid = np.arange(0.05 + 0.5 * diameters, diameters + np.pi * (circles + 2) + 1.0, 0.05)
    values = _characteristic(grid, diameters, nu)
    changes = np.flatnonzero(values[:-1] * values[1:] < 0.0)
    at = grid[changes[wanted]]
    root = root_scalar(
        lambda x: float(_characteristic(x, diameters, nu)), bracket=(at, at + 0.05), xtol=1e-12
    ).root
    return root**2


def _characteristic(x, n: int, nu: float):
    """Return the difference of the two sides, scaled to stay finite."""
    j, dj = jv(n, x), (jv(n - 1, x) - jv(n + 1, x)) / 2.0
    i, di = ive(n, x), (ive(n - 1, x) + ive(n + 1, x)) / 2.0
    rest = 1.0 - nu
    left = (x**2 * j + rest * (x * dj - n**2 * j)) * (x**3 * di - rest * n**2 * (x * di - i))
    right = (x**3 * dj + rest * n**2 * (x * dj - j)) * (x**2 * i - rest * (x * di - n**2 * i))
    return (left - right) / x**3


def disc_frequency(
    diameters: int,
    circles: int,
    radius: float,
    thickness: float,
    modulus: float,
    nu: float,
    density: float,
) -> float:
    """Return a frequency of a free round plate, Hz: lambda^2 / (2 pi a^2) sqrt(D / (rho h))."""
    rigidity = modulus * thickness**2 / (12.0 * (1.0 - nu**2) * density)
    return disc_root(diameters, circles, nu) / (2.0 * np.pi * radius**2) * np.sqrt(rigidity)
