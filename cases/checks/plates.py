"""Plates, a disc, a membrane and a ring."""

from __future__ import annotations

from math import pi, sqrt

from .record import Basis, Check, document, isotropic, spectrum

_STEEL = isotropic(200.0, 0.3, 8000.0)
_MODULUS, _DENSITY = 200e9, 8000.0


def _plate_unit(side: float, thickness: float, nu: float) -> float:
    """Return sqrt(D / rho h) / (2 pi a^2), Hz; lengths in mm."""
    return (
        1e3 * thickness / side**2 * sqrt(_MODULUS / (12.0 * (1.0 - nu**2) * _DENSITY)) / (2.0 * pi)
    )


_FREE_SQUARE = document(
    "Free thin square plate",
    {"family": "plate", "length": 10000.0, "width": 10000.0, "thickness": 50.0},
    _STEEL,
    modes=8,
    size=230.0,
)
_FREE_DISC = document(
    "Free thin disc",
    {"family": "plate", "diameter": 100.0, "thickness": 1.0},
    isotropic(200.0, 0.333333333333, 8000.0),
    modes=9,
    size=4.0,
)

PLATES = (
    Check(
        title="Thick circular ring",
        source="NAFEMS R0015 (1987), Test 6; three-dimensional values recomputed",
        basis=Basis.RECOMPUTED,
        tolerance=0.1,
        document=document(
            "Thick circular ring",
            {"family": "ring", "mean_diameter": 2000.0, "section_diameter": 100.0},
            _STEEL,
            modes=12,
            size=60.0,
        ),
        expected=spectrum(
            (51.533, 2),
            (53.214, 2),
            (146.919, 2),
            (149.664, 2),
            (281.071, 2),
            (284.692, 2),
            printed=(51.85, 53.38, 148.8, 151.0, 287.0, 289.5),
        ),
        quick=False,
        note="The benchmark prints slender-ring theory, 0.3 to 2.1 % above the true ring.",
    ),
    Check(
        title="Tapered membrane, clamped",
        source="NAFEMS TNSB Rev. 3 (1990), FV32; plane stress recomputed to order 18",
        basis=Basis.PLANE_STRESS,
        tolerance=0.1,
        document=document(
            "Tapered membrane, clamped",
            {
                "outline": [
                    [0.0, -2500.0],
                    [10000.0, -500.0],
                    [10000.0, 500.0],
                    [0.0, 2500.0],
                ],
                "thickness": 50.0,
            },
            _STEEL,
            modes=6,
            size=300.0,
            mount=[
                {"kind": "held", "faces": [{"plane": "x", "at": "min"}], "axes": ["x", "y"]},
                {"kind": "held", "faces": ["bottom"], "axes": ["z"]},
            ],
        ),
        expected=spectrum(
            (44.617, 1),
            (130.011, 1),
            (162.689, 1),
            (245.987, 1),
            (379.718, 1),
            (391.406, 1),
            printed=(44.623, 130.03, 162.70, 246.05, 379.90, 391.44),
        ),
    ),
    Check(
        title="Thick square plate, side faces held normal to the plate",
        source="NAFEMS TNSB Rev. 3 (1990), FV52; three-dimensional values recomputed",
        basis=Basis.RECOMPUTED,
        tolerance=0.1,
        document=document(
            "Thick square plate, side faces held",
            {"family": "plate", "length": 10000.0, "width": 10000.0, "thickness": 1000.0},
            _STEEL,
            modes=10,
            size=500.0,
            mount={"kind": "held", "faces": ["x_min", "x_max", "y_min", "y_max"], "axes": ["z"]},
        ),
        expected=spectrum(
            (44.178, 1),
            (107.322, 2),
            (163.12, 1),
            (193.647, 1),
            (203.29, 1),
            (203.65, 1),
            (206.77, 2),
            (219.2645, 1),
            printed=(45.897, 109.44, 167.89, 193.59, None, None, 206.19, None),
        ),
        note="The benchmark holds the four bottom edges only, lines that a solid does not feel, "
        "prints thick-plate theory and leaves out the pair near 203.5; here the side faces "
        "are held and the three-dimensional values decide.",
    ),
    Check(
        title="Free thin square plate, as a solid",
        source="NAFEMS TNSB Rev. 3 (1990), FV12; three-dimensional values recomputed",
        basis=Basis.RECOMPUTED,
        tolerance=0.1,
        document=_FREE_SQUARE,
        expected=spectrum(
            (1.6205, 1), (2.3593, 1), (2.9219, 1), (4.187, 2), (7.354, 2), (7.660, 1)
        ),
        quick=False,
    ),
    Check(
        title="Free thin square plate, as published",
        source="NAFEMS TNSB Rev. 3 (1990), FV12",
        basis=Basis.PUBLISHED_PLATE,
        tolerance=1.0,
        document=_FREE_SQUARE,
        expected=spectrum(
            (1.622, 1),
            (2.360, 1),
            (2.922, 1),
            (4.190, 2),
            (7.356, 2),
            (7.668, 1),
            printed=(None, None, None, 4.233, 7.416, 7.392),
        ),
        quick=False,
        note="From the fourth mode on the benchmark prints the values of a coarse series; the "
        "converged thin-plate values decide.",
    ),
    Check(
        title="Free thin square plate, thin-plate theory",
        source="Leissa, J. Sound Vib. 31 (1973) 257, free plate; recomputed",
        basis=Basis.PLATE_THEORY,
        tolerance=0.5,
        unit=_plate_unit(10000.0, 50.0, 0.3),
        measure="omega a^2 sqrt(rho h/D)",
        document=_FREE_SQUARE,
        expected=spectrum(
            (13.4682, 1),
            (19.5961, 1),
            (24.2702, 1),
            (34.8009, 2),
            printed=(13.49, 19.79, 24.43, 35.02),
        ),
        quick=False,
        note="The published values, upper bounds of a short series, are up to 1 % high.",
    ),
    Check(
        title="Thin square plate, clamped along one side",
        source="Barton, J. Appl. Mech. 18 (1951) 129; recomputed",
        basis=Basis.PLATE_THEORY,
        tolerance=0.5,
        unit=_plate_unit(100.0, 1.0, 0.3),
        measure="omega a^2 sqrt(rho h/D)",
        document=document(
            "Thin square plate, clamped along one side",
            {"family": "plate", "length": 100.0, "width": 100.0, "thickness": 1.0},
            _STEEL,
            modes=5,
            size=3.0,
            mount={"kind": "clamped", "faces": ["x_min"]},
        ),
        expected=spectrum(
            (3.4710, 1),
            (8.506, 1),
            (21.284, 1),
            (27.199, 1),
            (30.955, 1),
            printed=(3.492, 8.525, 21.43, 27.33, 31.11),
        ),
        quick=False,
        note="The published values are up to 0.7 % high.",
    ),
    Check(
        title="Free thin disc",
        source="thin-plate theory, frequency equation recomputed for Poisson's ratio 1/3",
        basis=Basis.PLATE_THEORY,
        tolerance=0.5,
        unit=_plate_unit(50.0, 1.0, 1.0 / 3.0),
        measure="omega a^2 sqrt(rho h/D)",
        document=_FREE_DISC,
        expected=spectrum((5.2511, 2), (9.0761, 1), (12.2216, 2), (20.5173, 2), (21.4919, 2)),
    ),
    Check(
        title="Free thin disc, as remembered",
        source="Leissa, Vibration of Plates, NASA SP-160 (1969), Table 2.6",
        basis=Basis.MEMORY,
        tolerance=0.5,
        unit=_plate_unit(50.0, 1.0, 1.0 / 3.0),
        measure="omega a^2 sqrt(rho h/D)",
        document=_FREE_DISC,
        expected=spectrum((5.253, 2), (9.084, 1), (12.23, 2), (20.52, 2), (21.6, 2)),
        note="The table says Poisson's ratio 0.33; its numbers fit 1/3 better.",
    ),
)
