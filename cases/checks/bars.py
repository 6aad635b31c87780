"""Slender bars against beam theory and Saint-Venant's torsion."""

from __future__ import annotations

from math import pi, sqrt

from .blocks import ALUMINIUM_BAR
from .record import Basis, Check, document, isotropic, named, spectrum

_NAFEMS_STEEL = isotropic(200.0, 0.3, 8000.0)

_MODULUS, _NU, _DENSITY = 200e9, 0.3, 7800.0
_STEEL = isotropic(_MODULUS * 1e-9, _NU, _DENSITY)
_SHEAR = sqrt(_MODULUS / (2.0 * (1.0 + _NU)) / _DENSITY)

_TAPERS = "recomputed; full tables in Naguleswaran, J. Sound Vib. 172 (1994) 289"
_MABIE = "Mabie & Rogers, JASA 51 (1972) 1771, as used in VPCS SDLL09"
_TIP_MASS = "cantilever with a point mass, frequency equation of Euler-Bernoulli theory, recomputed"


def _flatwise(*values: float, printed: tuple[float | None, ...] | None = None):
    names = {f"flatwise bending {i}": value for i, value in enumerate(values, 1)}
    return named(names, printed)


def _beam_unit(height: float, length: float) -> float:
    """Return sqrt(E I / rho A) / (2 pi L^2) of a rectangular section, Hz; lengths in mm."""
    return 1e3 * height / length**2 * sqrt(_MODULUS / (12.0 * _DENSITY)) / (2.0 * pi)


def _cantilever(title: str, width: float, thickness: float, *, modes: int, size: float, **more):
    dimensions = {k: more.pop(k) for k in ("width_tip", "thickness_tip") if k in more}
    shape = {"family": "bar", "length": 100.0, "width": width, "thickness": thickness}
    return document(
        title,
        {**shape, **dimensions},
        _STEEL,
        modes=modes,
        size=size,
        mount={"kind": "clamped", "faces": ["root"]},
        **more,
    )


def _taper(title: str, source: str, values: tuple[float, ...], unit: float, **dimensions) -> Check:
    printed = dimensions.pop("printed", None)
    return Check(
        title=title,
        source=source,
        basis=Basis.BEAM_THEORY,
        tolerance=0.5,
        unit=unit,
        measure=dimensions.pop("measure", "omega L^2 sqrt(rho A/EI) at the root"),
        document=_cantilever(title, modes=6, **dimensions),
        expected=_flatwise(*values, printed=printed),
        quick=dimensions["size"] >= 1.0,
    )


def _tip_mass(ratio: float, *values: float) -> Check:
    title = f"Slender cantilever with {ratio:g} times its mass on the tip"
    grams = ratio * _DENSITY * 100.0 * 2.0 * 1.0 * 1e-6
    return Check(
        title=title,
        source=_TIP_MASS,
        basis=Basis.BEAM_THEORY,
        tolerance=0.5,
        unit=_beam_unit(1.0, 100.0),
        measure="omega L^2 sqrt(rho A/EI)",
        document=_cantilever(
            title,
            2.0,
            1.0,
            modes=5,
            size=1.0,
            attached_mass=[{"face": "tip", "grams": grams}],
        ),
        expected=_flatwise(*values),
        quick=ratio == 1.0,
        note="The mass is spread over the whole tip face; L/h = 100.",
    )


BARS = (
    Check(
        title="Pinned bar, bending",
        source="SFM/AFNOR, Guide de validation des progiciels de calcul de structures (1990) "
        "192; Timoshenko's beam with kappa of Cowper, J. Appl. Mech. 33 (1966) 335",
        basis=Basis.BEAM_THEORY,
        tolerance=0.5,
        document=document(
            "Pinned bar, bending",
            {"family": "bar", "length": 2000.0, "width": 50.0, "thickness": 50.0},
            _STEEL,
            modes=4,
            size=30.0,
            mount={"kind": "held", "faces": ["root", "tip"], "axes": ["y", "z"]},
        ),
        expected=spectrum((28.6718, 2), (114.3311, 2), printed=(28.702, 114.807)),
        note="The guide prints the Euler-Bernoulli values, which leave out shear and rotary "
        "inertia; the root of Timoshenko's equation decides.",
    ),
    Check(
        title="Square cantilever",
        source="three-dimensional Ritz series with the end face fixed, after Visscher et al., "
        "JASA 90 (1991) 2154",
        basis=Basis.RECOMPUTED,
        tolerance=0.05,
        document=document(
            "Square cantilever",
            {"family": "bar", "length": 1000.0, "width": 50.0, "thickness": 50.0},
            isotropic(200.0, 0.3, 7850.0),
            modes=10,
            size=14.0,
            mount={"kind": "clamped", "faces": ["root"]},
        ),
        expected=spectrum(
            (40.79, 2), (252.72, 2), (695.15, 2), (719.4, 1), (1263.9, 1), (1329.1, 2)
        ),
        note="The Ritz values can be up to 0.03 % high: the fixed edge is singular.",
    ),
    Check(
        title="Slender cantilever",
        source="NAFEMS R0015 (1987), Test 71",
        basis=Basis.BEAM_THEORY,
        tolerance=0.5,
        document=document(
            "Slender cantilever",
            {"family": "bar", "length": 10000.0, "width": 125.0, "thickness": 125.0},
            _NAFEMS_STEEL,
            modes=8,
            size=110.0,
            mount={"kind": "clamped", "faces": ["root"]},
        ),
        expected=spectrum(
            (1.0096, 2),
            (6.3272, 2),
            (17.7164, 2),
            (34.717, 2),
            printed=(1.010, 6.327, 17.716, None),
        ),
    ),
    _taper(
        "Cantilever of double taper, 4 and 4",
        _MABIE,
        (23.2923, 73.9188, 165.2854),
        _beam_unit(0.5, 100.0),
        printed=(23.289, 73.9, 165.23),
        measure="omega L^2 sqrt(12 rho/E) / h_tip",
        width=3.0,
        width_tip=0.75,
        thickness=2.0,
        thickness_tip=0.5,
        size=1.0,
    ),
    _taper(
        "Cantilever of double taper, 4 and 5",
        _MABIE,
        (24.3112, 75.5779, 167.2520),
        _beam_unit(0.5, 100.0),
        printed=(24.308, 75.56, 167.21),
        measure="omega L^2 sqrt(12 rho/E) / h_tip",
        width=3.75,
        width_tip=0.75,
        thickness=2.0,
        thickness_tip=0.5,
        size=0.9,
    ),
    _taper(
        "Cantilever of half the thickness at the tip",
        _TAPERS,
        (3.8238, 18.3173, 47.2648),
        _beam_unit(1.5, 100.0),
        width=2.0,
        thickness=1.5,
        thickness_tip=0.75,
        size=1.0,
    ),
    _taper(
        "Cantilever of half the width at the tip",
        _TAPERS,
        (4.3152, 23.5193, 63.1992),
        _beam_unit(1.0, 100.0),
        width=3.0,
        width_tip=1.5,
        thickness=1.0,
        size=0.9,
    ),
    _taper(
        "Cantilever of a tenth of the thickness at the tip",
        _TAPERS,
        (4.6307, 14.9308, 32.8331),
        _beam_unit(2.0, 100.0),
        width=2.0,
        thickness=2.0,
        thickness_tip=0.2,
        size=0.8,
    ),
    _tip_mass(0.1, 2.9678, 19.3558, 55.5182),
    _tip_mass(1.0, 1.5573, 16.2501, 50.8958),
    _tip_mass(5.0, 0.7569, 15.6023, 50.1623),
    Check(
        title="Round rod, twisting",
        source="torsional waves in a round rod, exact: f = (n/2L) sqrt(G/rho); "
        "Love, Mathematical Theory of Elasticity (1927), ch. 12",
        basis=Basis.EXACT,
        tolerance=0.05,
        unit=_SHEAR / (2.0 * 0.2),
        measure="2 L f sqrt(rho/G)",
        document=document(
            "Round rod, twisting",
            {"family": "bar", "length": 200.0, "diameter": 20.0},
            _STEEL,
            modes=14,
            size=8.0,
        ),
        expected=named({"torsion 1": 1.0, "torsion 2": 2.0}),
    ),
    Check(
        title="Square bar, twisting",
        source="Saint-Venant's J; Timoshenko & Goodier, Theory of Elasticity (1970), art. 109",
        basis=Basis.BEAM_THEORY,
        tolerance=0.5,
        unit=_SHEAR / (2.0 * 0.2),
        measure="2 L f sqrt(rho/G)",
        document=document(
            "Square bar, twisting",
            {"family": "bar", "length": 200.0, "width": 10.0, "thickness": 10.0},
            _STEEL,
            modes=8,
            size=4.0,
        ),
        # J = 0.140577 a^4 and the polar second moment a^4 / 6.
        expected=named({"torsion 1": sqrt(6.0 * 0.140577)}, printed=(sqrt(6.0 * 0.141),)),
        note="The book prints J to three digits; the series gives 0.140577 a^4.",
    ),
    Check(
        title="Rectangular bar 3 : 1, twisting",
        source="Saint-Venant's J; Timoshenko & Goodier, Theory of Elasticity (1970), art. 109",
        basis=Basis.BEAM_THEORY,
        tolerance=0.5,
        document=ALUMINIUM_BAR,
        expected=named({"torsion 1": 4352.7}),
        note="Only n = 1: the strip's plate action and warping raise the formula's higher "
        "modes by 1 and 2.3 %.",
    ),
)
