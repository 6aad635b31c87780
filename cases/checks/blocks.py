"""Free bodies whose whole spectrum is known in three dimensions."""

from __future__ import annotations

from math import cos, pi, sin, sqrt

from .record import Basis, Check, document, isotropic, named, spectrum

_NU = 0.3
_MODULUS, _DENSITY = 200e9, 8000.0
_STEEL = isotropic(_MODULUS * 1e-9, _NU, _DENSITY)

#: Speed of shear waves, m/s.
_SHEAR = sqrt(_MODULUS / (2.0 * (1.0 + _NU)) / _DENSITY)

_SIDE = 0.1
_RADIUS = 0.05

#: Points of a half circle from pole to pole; a spline through them is round to 1e-5.
_POINTS = 13
_HALF_CIRCLE = [
    [0.0, 100.0],
    *(
        [50.0 * sin(pi * i / (_POINTS - 1)), 50.0 + 50.0 * cos(pi * i / (_POINTS - 1))]
        for i in range(1, _POINTS - 1)
    ),
    [0.0, 0.0],
    [0.0, 100.0],
]

_MAPLE_EL = 13.86

BLOCKS = (
    Check(
        title="Free cube",
        source="Demarest, JASA 49 (1971) 768; Ohno, J. Phys. Earth 24 (1976) 355; "
        "recomputed to order 15",
        basis=Basis.RECOMPUTED,
        tolerance=0.05,
        unit=_SHEAR / (2.0 * pi * _SIDE),
        measure="omega L sqrt(rho/G)",
        document=document(
            "Free cube",
            {"family": "bar", "length": 100.0, "width": 100.0, "thickness": 100.0},
            _STEEL,
            modes=14,
            size=13.0,
        ),
        expected=spectrum(
            (2.85605, 2), (3.84597, 3), (3.91125, 3), (pi * sqrt(2.0), 3), (4.57279, 3)
        ),
        note="Modes 9-11 are Lame's plane shear, pi sqrt 2 exactly, whatever Poisson's ratio is.",
    ),
    Check(
        title="Free solid sphere",
        source="Lamb, Proc. London Math. Soc. 13 (1882) 189; Sato & Usami, Geophys. Mag. 31 "
        "(1962); roots recomputed",
        basis=Basis.EXACT,
        tolerance=0.05,
        unit=_SHEAR / (2.0 * pi * _RADIUS),
        measure="omega a sqrt(rho/G)",
        document=document(
            "Free solid sphere",
            {"family": "revolved", "profile": _HALF_CIRCLE},
            _STEEL,
            modes=28,
            size=12.0,
        ),
        expected=spectrum(
            (2.501133, 5),
            (2.646217, 5),
            (3.529987, 3),
            (3.864700, 7),
            (3.937401, 7),
            (4.995514, 1),
        ),
        quick=False,
        note="In order: torsional n = 2, spheroidal n = 2 and 1, torsional n = 3, spheroidal "
        "n = 3, breathing.",
    ),
    Check(
        title="Free rectangular bar, aluminium",
        source="three-dimensional Ritz series after Visscher et al., JASA 90 (1991) 2154",
        basis=Basis.RECOMPUTED,
        tolerance=0.05,
        document=(
            ALUMINIUM_BAR := document(
                "Free rectangular bar, aluminium",
                {"family": "bar", "length": 200.0, "width": 30.0, "thickness": 10.0},
                isotropic(68.9, 0.33, 2700.0),
                modes=10,
                size=4.0,
            )
        ),
        expected=named(
            {
                "flatwise bending 1": 1287.67,
                "flatwise bending 2": 3499.4,
                "edgewise bending 1": 3619.38,
                "torsion 1": 4364.9,
                "flatwise bending 3": 6722.1,
                "torsion 2": 8796.8,
                "edgewise bending 2": 8942.58,
                "flatwise bending 4": 10826.0,
                "axial 1": 12614.58,
                "torsion 3": 13355.4,
            }
        ),
    ),
    Check(
        title="Free rectangular bar, orthotropic maple",
        source="ratios of the Wood Handbook (FPL-GTR-190, 2010), Table 5-1; three-dimensional Ritz "
        "series after Visscher et al., JASA 90 (1991) 2154",
        basis=Basis.RECOMPUTED,
        tolerance=0.05,
        document=document(
            "Free rectangular bar, orthotropic maple",
            {"family": "bar", "length": 300.0, "width": 50.0, "thickness": 20.0},
            {
                "youngs_modulus_gpa": [_MAPLE_EL, 0.065 * _MAPLE_EL, 0.132 * _MAPLE_EL],
                "shear_modulus_gpa": [0.063 * _MAPLE_EL, 0.111 * _MAPLE_EL, 0.021 * _MAPLE_EL],
                "poisson_ratio": [0.476, 0.424, 0.774 * 0.065 / 0.132],
                "density": 705.6,
            },
            modes=10,
            size=5.5,
        ),
        expected=spectrum(
            (980.81, 1),
            (1255.1, 1),
            (1991.80, 1),
            (2530.7, 1),
            (2612.9, 1),
            (3919.9, 1),
            (4180.3, 1),
            (4555.0, 1),
            (5898.8, 1),
            (6007.7, 1),
        ),
        note="The rolling shear modulus and the density are chosen for the check. The table's "
        "nu_TR of 0.349 does not fit its other ratios; nu_RT ET/ER = 0.381 is used.",
    ),
)
