"""Slender circular rings, free, after Love."""

from __future__ import annotations

import numpy as np

from ....geometry.anatomy import RingSize


def ring_in_plane(n: int, ring: RingSize, modulus: float, density: float) -> float:
    """Return the frequency of in-plane bending with 2 n nodes, Hz; n from 2.

    omega = n (n^2 - 1) / sqrt(n^2 + 1) sqrt(E I / (rho A R^4))

    References
    ----------
    Love A. E. H., Mathematical Theory of Elasticity, 4th ed. 1927, art. 293.
    """
    return n * (n**2 - 1) / np.sqrt(n**2 + 1) * _speed(ring, ring.i_axial, modulus, density)


def ring_out_of_plane(
    n: int, ring: RingSize, modulus: float, shear_modulus: float, density: float
) -> float:
    """Return the frequency of out-of-plane bending with 2 n nodes, Hz; n from 2.

    omega = n (n^2 - 1) / sqrt(n^2 + E I / (G J)) sqrt(E I / (rho A R^4)), which
    for a round section is Love's n^2 + 1 + nu.

    References
    ----------
    Love A. E. H., Mathematical Theory of Elasticity, 4th ed. 1927, art. 293.
    """
    softness = modulus * ring.i_radial / (shear_modulus * ring.torsion)
    return n * (n**2 - 1) / np.sqrt(n**2 + softness) * _speed(ring, ring.i_radial, modulus, density)


def ring_extensional(n: int, ring: RingSize, modulus: float, density: float) -> float:
    """Return the frequency of stretching along the ring, Hz; n = 0 is breathing.

    omega = sqrt(n^2 + 1) sqrt(E / rho) / R

    References
    ----------
    Love A. E. H., Mathematical Theory of Elasticity, 4th ed. 1927, art. 293.
    """
    return np.sqrt(n**2 + 1.0) * np.sqrt(modulus / density) / (2.0 * np.pi * ring.radius)


def ring_torsional(
    n: int, ring: RingSize, modulus: float, shear_modulus: float, density: float
) -> float:
    """Return the frequency of the section turning about the centre line, Hz; n from 0.

    omega^2 = (E I + n^2 G J) / (rho I_p R^2), I about a radial axis, I_p polar;
    for a round section Love's (1 + nu + n^2) G / (rho R^2).

    References
    ----------
    Love A. E. H., Mathematical Theory of Elasticity, 4th ed. 1927, art. 293.
    """
    stiffness = modulus * ring.i_radial + n**2 * shear_modulus * ring.torsion
    polar = ring.i_axial + ring.i_radial
    return np.sqrt(stiffness / (density * polar)) / (2.0 * np.pi * ring.radius)


def _speed(ring: RingSize, inertia: float, modulus: float, density: float) -> float:
    """Return sqrt(E I / (rho A R^4)) / (2 pi), Hz."""
    return np.sqrt(modulus * inertia / (density * ring.area)) / (2.0 * np.pi * ring.radius**2)
