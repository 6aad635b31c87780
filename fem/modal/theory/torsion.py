"""Saint-Venant torsion of bars."""

from __future__ import annotations

import numpy as np

from ....geometry.anatomy import Sections
from .ritz import make_grid, spectrum
from .support import Held, clamped_columns


def torsion_constant(width: float, thickness: float) -> float:
    """Return Saint-Venant's J of a rectangle, m4, either side first.

    J = (b t^3 / 3) [1 - (192 t / (pi^5 b)) sum over odd n of tanh(n pi b / 2 t) / n^5]

    References
    ----------
    Timoshenko S. P., Goodier J. N., Theory of Elasticity, 3rd ed. 1970, art. 109.
    """
    b, t = max(width, thickness), min(width, thickness)
    n = np.arange(1, 200, 2)
    series = float(np.sum(np.tanh(n * np.pi * b / (2.0 * t)) / n**5))
    return b * t**3 / 3.0 * (1.0 - 192.0 * t / (np.pi**5 * b) * series)


def torsion_frequencies(
    sections: Sections, shear_modulus: float, density: float, held: Held, count: int
) -> np.ndarray:
    """Return natural frequencies of twisting, Hz, ascending; warping is free everywhere.

    Energies 1/2 int G J phi'^2 dx and 1/2 int rho (I_y + I_z) phi_t^2 dx. A
    uniform free bar gives (n / 2 L) sqrt(G J / (rho I_p)), one clamped end
    ((2 n - 1) / 4 L) of the same.

    References
    ----------
    Timoshenko S. P., Young D. H., Weaver W., Vibration Problems in
    Engineering, 4th ed. 1974, section 5.5; J as in `torsion_constant`.
    """
    grid = make_grid(sections.x, 2 * count)
    polar = np.asarray(sections.i_across, float) + np.asarray(sections.i_through, float)
    stiff = shear_modulus * grid.at_points(sections.torsion)
    mass = density * grid.at_points(polar)
    fixed = clamped_columns(held, grid.functions)
    return spectrum(
        [np.sqrt(stiff * grid.weights)[:, None] * grid.slopes],
        [np.sqrt(mass * grid.weights)[:, None] * grid.values],
        fixed,
        0 if fixed else 1,
        count,
    )[0]
