"""Bending of shear-flexible beams of any section along their length."""

from __future__ import annotations

from typing import Literal

import numpy as np

from ....geometry.anatomy import Sections
from ..material import Material
from .ritz import make_grid, spectrum
from .support import Held, clamped_columns

Motion = Literal["flatwise", "edgewise"]


def shear_coefficient(form: str, nu: float, bore: float = 0.0) -> float:
    """Return the shear coefficient kappa of a section.

    Rectangle 10 (1 + nu) / (12 + 11 nu), circle 6 (1 + nu) / (7 + 6 nu), tube
    6 (1 + nu) (1 + m^2)^2 / [(7 + 6 nu) (1 + m^2)^2 + (20 + 12 nu) m^2].

    Parameters
    ----------
    form : ``rectangle``, ``circle`` or ``tube``
    nu : Poisson's ratio
    bore : m, inner over outer radius of a tube

    References
    ----------
    Cowper G. R., J. Appl. Mech. 33 (1966) 335-340.
    """
    if form == "rectangle":
        return 10.0 * (1.0 + nu) / (12.0 + 11.0 * nu)
    ring = (1.0 + bore**2) ** 2
    return 6.0 * (1.0 + nu) * ring / ((7.0 + 6.0 * nu) * ring + (20.0 + 12.0 * nu) * bore**2)


def bore_of(area: np.ndarray, inertia: np.ndarray) -> np.ndarray:
    """Return inner over outer radius of round tubes from A and I.

    From A = pi (a^2 - b^2) and I / A = (a^2 + b^2) / 4.
    """
    middle, spread = 2.0 * inertia / area, area / (2.0 * np.pi)
    return np.sqrt(np.clip((middle - spread) / (middle + spread), 0.0, 1.0))


def bending_frequencies(
    sections: Sections,
    material: Material,
    motion: Motion,
    held: Held,
    count: int,
    *,
    slender: bool = False,
) -> np.ndarray:
    """Return natural frequencies of bending of a bar, Hz, ascending.

    Ritz solution, converged to about 1e-8 for the lowest modes, of
    Timoshenko's beam with rotary inertia,

        strain energy   1/2 int E I theta'^2 + kappa G A (w' - theta)^2 dx
        kinetic energy  1/2 int rho A w_t^2 + rho I theta_t^2 dx

    Where the height e of the centroid varies (an arch cut from one side),
    flatwise bending pulls on the bar as well: with u the lengthwise motion at
    height zero, 1/2 int E A (u' - e theta')^2 dx and 1/2 int rho A (u_t - e
    theta_t)^2 dx join the energies. Orthotropic materials use E along x, G of
    the plane of bending and kappa at nu = 0.

    Parameters
    ----------
    sections : Sections, in m
    material : Material
    motion : ``flatwise`` (along through) or ``edgewise`` (along across)
    held : Held, not ``other``
    count : int
    slender : bool
        Give the Euler-Bernoulli limit: no shear, no rotary inertia.

    References
    ----------
    Timoshenko S. P., Phil. Mag. 41 (1921) 744-746; 43 (1922) 125-131.
    """
    inertia = np.asarray(sections.i_across if motion == "flatwise" else sections.i_through, float)
    grid = make_grid(sections.x, count + 5)
    area, second = grid.at_points(sections.area), grid.at_points(inertia)
    modulus, shear = material.axial_modulus, shear_rigidity(sections.form, material, motion)
    shear = shear * grid.at_points(_kappa_of(sections, inertia, material))
    rotary = 1.0
    if slender:
        # Shear and rotary inertia as of a beam 1e5 times as long as its radius of
        # gyration: 1e-9 of the squared frequency of the lowest modes, no lost digits.
        thin = 1e-10 * (sections.x[-1] - sections.x[0]) ** 2 / np.max(second / area)
        shear, rotary = shear / thin, thin

    def rows(density: np.ndarray, *fields: np.ndarray) -> np.ndarray:
        return np.sqrt(density * grid.weights)[:, None] * np.hstack(fields)

    rho, w, slope = material.density, grid.values, grid.slopes
    none = np.zeros_like(w)
    stiff = [(modulus * second, none, slope), (shear * area, slope, -w)]
    mass = [(rho * area, w, none), (rho * second * rotary, none, w)]
    height = sections.offset
    fields = 2
    if motion == "flatwise" and height is not None and np.ptp(height) > 1e-6 * sections.x[-1]:
        e = grid.at_points(height - np.mean(height))[:, None]
        stiff = [(*row, none) for row in stiff] + [(modulus * area, none, -e * slope, slope)]
        mass = [(*row, none) for row in mass] + [(rho * area, none, -e * w, w)]
        fields = 3
    found, shares = spectrum(
        [rows(*row) for row in stiff],
        [rows(*row) for row in mass],
        clamped_columns(held, grid.functions, fields),
        fields if held == "free" else 0,
        2 * count,
    )
    # Of a coupled bar, the lengthwise modes stand in the same spectrum: leave them out.
    return found[shares[:, :2].sum(axis=1) > 0.5][:count]


def shear_rigidity(form: str, material: Material, motion: Motion) -> float:
    """Return the shear modulus that a bending motion works against, Pa."""
    if material.shear_modulus is not None:
        return material.shear_modulus[1 if motion == "flatwise" else 0]
    nu = material.poisson_ratio
    assert isinstance(nu, float | int)
    return material.axial_modulus / (2.0 * (1.0 + nu))


def _kappa_of(sections: Sections, inertia: np.ndarray, material: Material) -> np.ndarray:
    """Return kappa at each station (s,)."""
    nu = 0.0 if material.orthotropic else float(material.poisson_ratio)  # type: ignore[arg-type]
    if sections.form != "tube":
        return np.full(len(sections.x), shear_coefficient(sections.form, nu))
    bores = bore_of(np.asarray(sections.area, float), inertia)
    return np.array([shear_coefficient("tube", nu, m) for m in bores])


def pinned_frequency(
    n: int,
    length: float,
    area: float,
    inertia: float,
    modulus: float,
    shear: float,
    density: float,
) -> float:
    """Return the n-th bending frequency of a uniform pinned-pinned Timoshenko beam, Hz.

    Lower root w of, with k = n pi / L and `shear` = kappa G,

        (rho^2 I / kG) w^4 - [rho A + rho I k^2 (1 + E / kG)] w^2 + E I k^4 = 0
    """
    k = n * np.pi / length
    a = density**2 * inertia / shear
    b = density * area + density * inertia * k**2 * (1.0 + modulus / shear)
    c = modulus * inertia * k**4
    # The smaller root, written without the difference of nearly equal numbers.
    return float(np.sqrt(2.0 * c / (b + np.sqrt(b * b - 4.0 * a * c))) / (2.0 * np.pi))
