"""What formulas say of modes, by their names."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence

import numpy as np

from ....geometry.anatomy import Anatomy, DiscSize, Kind, PlateSize, RingSize
from ..material import Material
from .bars import BarTheory, Prediction, highest_number
from .disc import disc_frequency
from .patterns import pattern_of, patterns
from .plate import plate_frequencies, plate_modes
from .ring import ring_extensional, ring_in_plane, ring_out_of_plane, ring_torsional
from .support import Held

_DISC = re.compile(r"disc \((\d+),(\d+)\)( [ab])?")
_RING = re.compile(r"ring (\d+) (in-plane|out-of-plane|extensional|torsional)( [ab])?")

#: Wave number times thickness up to which Kirchhoff's plate is right to about 3 %.
_THICK = 0.4

#: Side over thickness (plates, discs) and radius over depth (rings) below which
#: thin-body formulas stay silent.
_THIN_PLATE = 10.0
_THIN_RING = 5.0

#: Plate modes solved for: more than a name list holds, fewer than blur the patterns.
_PLATE_MODES = 40


def predict(
    anatomy: Anatomy, material: Material, held: Held, names: Sequence[str]
) -> list[Prediction | None]:
    """Return the theoretical frequency of each named mode, and whose formula it is.

    Formulas stay silent (None) on shapes, mounts, materials and modes they do
    not cover: prongs, holes, thick plates and rings, part clamps, attached
    masses, half waves shorter than the section is wide.

    Parameters
    ----------
    anatomy : Anatomy, in m
    material : Material, as warm as the part
    held : Held
        As told by `support.held_of`.
    names : names of modes, as in the results

    Returns
    -------
    list of (frequency in Hz, source) or None, one per name
    """
    formula = _formula(anatomy, material, held, highest_number(names))
    return [formula(name) for name in names] if formula else [None] * len(names)


def _formula(
    anatomy: Anatomy, material: Material, held: Held, highest: int
) -> Callable[[str], Prediction | None] | None:
    """Return what predicts a mode of this body by its name."""
    if held == "other" or anatomy.regions:
        return None
    if anatomy.kind in (Kind.BAR, Kind.REVOLVED) and anatomy.sections is not None:
        return BarTheory(anatomy.sections, material, held, highest).predict
    if isinstance(material.poisson_ratio, tuple) or material.orthotropic:
        return None
    nu = float(material.poisson_ratio)
    if anatomy.kind is Kind.PLATE and anatomy.plate is not None and held != "both ends clamped":
        return _plate(anatomy.plate, material, nu, held)
    if held != "free":
        return None
    if anatomy.kind is Kind.DISC and anatomy.disc is not None:
        return lambda name: _disc(name, anatomy.disc, material, nu)  # type: ignore[arg-type]
    if anatomy.kind is Kind.RING and anatomy.ring is not None:
        return lambda name: _ring(name, anatomy.ring, material, nu)  # type: ignore[arg-type]
    return None


def _plate(
    size: PlateSize, material: Material, nu: float, held: Held
) -> Callable[[str], Prediction | None] | None:
    if min(size.length, size.width) < _THIN_PLATE * size.thickness:
        return None
    modulus = material.axial_modulus
    modes = plate_modes(size.length / size.width, nu, _PLATE_MODES, clamped=held != "free")
    frequencies = plate_frequencies(
        modes.parameters, size.length, size.thickness, modulus, nu, material.density
    )
    thin = np.sqrt(modes.parameters) / size.length * size.thickness <= _THICK
    known = patterns(modes, clamped=held != "free")
    edges = "free" if held == "free" else "cantilever"

    def formula(name: str) -> Prediction | None:
        pattern = pattern_of(name)
        mode = known.get(pattern) if pattern else None
        if mode is None or not thin[mode]:
            return None
        return float(frequencies[mode]), f"Kirchhoff {edges} plate, Ritz (Leissa 1973)"

    return formula


def _disc(name: str, size: DiscSize, material: Material, nu: float) -> Prediction | None:
    found = _DISC.fullmatch(name)
    if found is None or 2.0 * size.radius < _THIN_PLATE * size.thickness:
        return None
    diameters, circles = int(found[1]), int(found[2])
    if diameters < 2 and circles == 0:
        return None
    modulus, density = material.axial_modulus, material.density
    hertz = disc_frequency(diameters, circles, size.radius, size.thickness, modulus, nu, density)
    bending = modulus * size.thickness**2 / (12.0 * (1.0 - nu**2) * density)
    if np.sqrt(2.0 * np.pi * hertz / np.sqrt(bending)) * size.thickness > _THICK:
        return None
    return float(hertz), "Kirchhoff free round plate (Leissa, NASA SP-160, 1969)"


def _ring(name: str, size: RingSize, material: Material, nu: float) -> Prediction | None:
    found = _RING.fullmatch(name)
    if found is None:
        return None
    n, family = int(found[1]), found[2]
    depth = np.sqrt(12.0 * max(size.i_axial, size.i_radial) / size.area)
    if size.radius < _THIN_RING * depth or max(n, 1) * depth > _THICK * size.radius:
        return None
    modulus, density = material.axial_modulus, material.density
    if family == "extensional":
        return float(ring_extensional(n, size, modulus, density)), "stretching ring (Love 1927)"
    shear = modulus / (2.0 * (1.0 + nu))
    if family == "torsional":
        return float(ring_torsional(n, size, modulus, shear, density)), "twisting ring (Love 1927)"
    if n < 2:
        return None
    if family == "in-plane":
        return float(ring_in_plane(n, size, modulus, density)), "slender ring (Love 1927)"
    hertz = ring_out_of_plane(n, size, modulus, shear, density)
    return float(hertz), "slender ring out of plane (Love 1927)"
