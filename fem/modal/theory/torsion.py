"""Saint-Venant torsion of bars."""

from __future__ import annotations

import numpy as np

from ....geometry.anatomy import Sections
from .ritz import make_grid, spectrum
from .support import Held, clamped_columns


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
    Engineering, 4th ed. 1974, section 5.5. J after Saint-Venant stands in `Sections`.
    """
    grid = make_grid(sections.x, count + 5)
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
