"""Lengthwise vibration of bars."""

from __future__ import annotations

import numpy as np

from ....geometry.anatomy import Sections
from ..material import Material
from .ritz import make_grid, spectrum
from .support import Held, clamped_columns


def axial_frequencies(sections: Sections, material: Material, held: Held, count: int) -> np.ndarray:
    """Return natural frequencies of lengthwise motion, Hz, ascending.

    Energies 1/2 int E A u'^2 dx and 1/2 int rho [A u_t^2 + (nu_xy^2 I_z +
    nu_xz^2 I_y) u_t'^2] dx, the second term being Rayleigh's lateral inertia.

    References
    ----------
    Rayleigh, Theory of Sound, 2nd ed. 1894, vol. 1, section 157; Love, Mathematical
    Theory of Elasticity, 4th ed. 1927, art. 278.
    """
    nu = material.poisson_ratio
    across, through = (nu[0], nu[1]) if isinstance(nu, tuple) else (nu, nu)
    lateral = across**2 * np.asarray(sections.i_through, float) + through**2 * np.asarray(
        sections.i_across, float
    )
    grid = make_grid(sections.x, count + 5)
    area = grid.at_points(sections.area)

    def rows(density: np.ndarray, functions: np.ndarray) -> np.ndarray:
        return np.sqrt(density * grid.weights)[:, None] * functions

    fixed = clamped_columns(held, grid.functions)
    return spectrum(
        [rows(material.axial_modulus * area, grid.slopes)],
        [
            rows(material.density * area, grid.values),
            rows(material.density * grid.at_points(lateral), grid.slopes),
        ],
        fixed,
        0 if fixed else 1,
        count,
    )[0]
