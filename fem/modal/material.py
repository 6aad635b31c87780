"""An elastic material, isotropic or orthotropic."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ...geometry.errors import InputError

Triple = tuple[float, float, float]


@dataclass(frozen=True, kw_only=True, slots=True)
class Material:
    """Elastic, thermal and strength properties, SI.

    Orthotropic materials give three values: moduli along x, y, z; shear moduli
    and Poisson ratios in the planes xy, xz, yz, with
    nu_ij = -strain_j / strain_i under stress along i.

    Attributes
    ----------
    name : str
    youngs_modulus : Pa, one value or three
    poisson_ratio : one value or three
    density : kg/m3
    shear_modulus : Pa, three values; None for isotropic materials
    loss_factor : material's own, or None where unknown
    expansion : 1/K, linear
    modulus_slope : 1/K, (1/E) dE/dT near room temperature
    conductivity : W/(m K)
    specific_heat : J/(kg K)
    endurance : Pa, stress amplitude for very long life, polished and unnotched
    """

    name: str
    youngs_modulus: float | Triple
    poisson_ratio: float | Triple
    density: float
    shear_modulus: Triple | None = None
    loss_factor: float | None = None
    expansion: float | None = None
    modulus_slope: float | None = None
    conductivity: float | None = None
    specific_heat: float | None = None
    endurance: float | None = None

    @property
    def orthotropic(self) -> bool:
        """Whether the three directions differ."""
        return self.shear_modulus is not None

    @property
    def axial_modulus(self) -> float:
        """Young's modulus along x, Pa."""
        e = self.youngs_modulus
        return e[0] if isinstance(e, tuple) else e

    def stiffness(self) -> np.ndarray:
        """Return the stiffness matrix C (6, 6), Pa, in Voigt order xx yy zz yz xz xy.

        Shear strains are engineering strains (gamma = 2 epsilon).

        Raises
        ------
        InputError
            If the constants are not those of a stable material (C must be
            positive definite).
        """
        if isinstance(self.youngs_modulus, tuple):
            e, g, nu = self.youngs_modulus, self.shear_modulus, self.poisson_ratio
            if g is None or not isinstance(nu, tuple):
                raise InputError("orthotropic materials need three values each", key="material")
            (ex, ey, ez), (gxy, gxz, gyz), (nxy, nxz, nyz) = e, g, nu
        else:
            ex = ey = ez = self.youngs_modulus
            nxy = nxz = nyz = float(self.poisson_ratio)  # type: ignore[arg-type]
            gxy = gxz = gyz = ex / (2.0 * (1.0 + nxy))
        compliance = np.zeros((6, 6))
        compliance[:3, :3] = [
            [1 / ex, -nxy / ex, -nxz / ex],
            [-nxy / ex, 1 / ey, -nyz / ey],
            [-nxz / ex, -nyz / ey, 1 / ez],
        ]
        compliance[3, 3], compliance[4, 4], compliance[5, 5] = 1 / gyz, 1 / gxz, 1 / gxy
        scale = np.sqrt(np.diag(compliance))
        if np.linalg.eigvalsh(compliance / np.outer(scale, scale)).min() <= 1e-9:
            raise InputError(
                "the elastic constants are not those of a stable material "
                "(the stiffness matrix is not positive definite)",
                key="material.poisson_ratio",
                value=self.poisson_ratio,
            )
        return np.linalg.inv(compliance)

    def at(self, temperature_rise: float) -> Material:
        """Return the material warmer by so many K than where its values hold.

        Moduli follow `modulus_slope`, density the expansion of the volume.

        Raises
        ------
        InputError
            If no stiffness would be left.
        """
        stiffer = 1.0 + (self.modulus_slope or 0.0) * temperature_rise
        longer = 1.0 + (self.expansion or 0.0) * temperature_rise
        if stiffer <= 0.0:
            raise InputError(
                f"{self.name} would have no stiffness left with its modulus_slope_ppm_per_k",
                key="surroundings.temperature_c",
            )
        e, g = self.youngs_modulus, self.shear_modulus
        return replace(
            self,
            youngs_modulus=(
                (e[0] * stiffer, e[1] * stiffer, e[2] * stiffer)
                if isinstance(e, tuple)
                else e * stiffer
            ),
            shear_modulus=g and (g[0] * stiffer, g[1] * stiffer, g[2] * stiffer),
            density=self.density / longer**3,
        )
