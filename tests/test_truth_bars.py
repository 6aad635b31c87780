"""Bars held to beam theory, published tables and three-dimensional Ritz values.

`raw_hz` is an upper bound of the exact value on a straight-sided body, whatever the
mesh; `frequency_hz` is the best value. [R] marks values recomputed from the governing
equations, independent of any finite element; [P] published ones.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.linalg import expm
from scipy.optimize import brentq

E, NU, RHO = 200e9, 0.3, 8000.0
G = E / 2 / (1 + NU)
#: Saint-Venant: J = beta b t^3 at b / t = 1.5 (Timoshenko and Goodier, art. 109) [R].
BETA = 0.195761

LENGTH, WIDTH, THICKNESS = 300.0, 15.0, 10.0


#: Shear coefficients of Cowper, J. Appl. Mech. 33 (1966) 335.
RECTANGLE, CIRCLE = 10 * (1 + NU) / (12 + 11 * NU), 6 * (1 + NU) / (7 + 6 * NU)


def timoshenko(length, area, inertia, kappa, ends, count):
    """Return frequencies of a Timoshenko beam, Hz, by its exact transfer matrix.

    State (w, phi, M, V): V = kappa G A (w' - phi), M = E I phi'. Sizes in mm.
    """
    length, area, inertia = length * 1e-3, area * 1e-6, inertia * 1e-12
    shear = kappa * G * area
    scale = np.diag([1.0, 1 / length, E * inertia / length**2, E * inertia / length**3])
    start = (2, 3) if ends == "clamped" else (0, 1)

    def left_over(omega):
        a = np.zeros((4, 4))
        a[0, 1], a[0, 3] = 1.0, 1 / shear
        a[1, 2] = 1 / (E * inertia)
        a[2, 1], a[2, 3] = -RHO * inertia * omega**2, -1.0
        a[3, 0] = -RHO * area * omega**2
        transfer = expm(np.linalg.solve(scale, a) @ scale * length)
        return np.linalg.det(transfer[np.ix_((2, 3), start)])

    slender = np.sqrt(E * inertia / (RHO * area)) / length**2
    # Rigid motions of a free beam lie at zero; start above them.
    grid = slender * np.arange(2.0, 500.0, 2.0)
    values = [left_over(omega) for omega in grid]
    roots = [
        brentq(left_over, a, b, rtol=1e-12)
        for a, b, fa, fb in zip(grid, grid[1:], values, values[1:], strict=False)
        if fa * fb < 0
    ]
    return np.array(roots[:count]) / (2 * np.pi)


def by_name(modes, names):
    return np.array([modes.frequencies[modes.names.index(name)] for name in names])


def numbered(kind, count):
    return [f"{kind} {n}" for n in range(1, count + 1)]


@pytest.mark.parametrize("ends", ["free", "clamped"])
def test_a_slender_bar_bends_twists_and_stretches_as_theory_says(block, solve_as_case, ends):
    modes = solve_as_case(
        "bar",
        {"length": LENGTH, "width": WIDTH, "thickness": THICKNESS},
        mesh=block((LENGTH, WIDTH, THICKNESS), (24, 3, 3)),
        modes=11,
        held=("root",) if ends == "clamped" else (),
    )
    area = WIDTH * THICKNESS
    flat = timoshenko(LENGTH, area, area * THICKNESS**2 / 12, RECTANGLE, ends, 3)
    edge = timoshenko(LENGTH, area, area * WIDTH**2 / 12, RECTANGLE, ends, 3)
    np.testing.assert_allclose(by_name(modes, numbered("flatwise bending", 3)), flat, rtol=5e-3)
    np.testing.assert_allclose(by_name(modes, numbered("edgewise bending", 3)), edge, rtol=5e-3)
    waves = 2 if ends == "free" else 4
    polar = (WIDTH**2 + THICKNESS**2) / 12 * WIDTH * THICKNESS
    twist = np.sqrt(G * BETA * WIDTH * THICKNESS**3 / (RHO * polar)) / (waves * LENGTH * 1e-3)
    stretch = np.sqrt(E / RHO) / (waves * LENGTH * 1e-3)
    assert by_name(modes, ["torsion 1"])[0] == pytest.approx(twist, rel=5e-3)
    assert by_name(modes, ["axial 1"])[0] == pytest.approx(stretch, rel=5e-3)
    # The formulas the program itself shows are the same ones.
    shown = {mode.name: mode.theory_hz for mode in modes.modes}
    for n in range(3):
        assert shown[f"flatwise bending {n + 1}"] == pytest.approx(flat[n], rel=1e-4)
        assert shown[f"edgewise bending {n + 1}"] == pytest.approx(edge[n], rel=1e-4)


def test_a_round_bar_twists_exactly_and_bends_in_pairs(solve_as_case):
    length, diameter = 140.0, 14.0
    modes = solve_as_case("bar", {"length": length, "diameter": diameter}, size=12.0, modes=6)
    # A circle does not warp: f = (1 / 2L) sqrt(G / rho) holds in three dimensions.
    wave = np.sqrt(G / RHO) / (2e-3 * length)
    assert by_name(modes, ["torsion 1"])[0] == pytest.approx(wave, rel=5e-4)
    area = np.pi * diameter**2 / 4
    theory = timoshenko(length, area, area * diameter**2 / 16, CIRCLE, "free", 2)
    for n in (1, 2):
        a, b = by_name(modes, [f"bending {n} a", f"bending {n} b"])
        assert b == pytest.approx(a, rel=3e-4)
        assert a == pytest.approx(theory[n - 1], rel=5e-3)


#: omega L^2 sqrt(rho A0 / (E I0)) of clamped bars that taper evenly to half their root
#: size: exact Bessel solutions, recomputed [R]; tables in Naguleswaran, JSV 172 (1994) 289.
TAPERED = {
    "thickness": ((1.0, 0.5), (3.8238, 18.3173, 47.2648)),
    "width": ((0.5, 1.0), (4.3152, 23.5193, 63.1992)),
    "both": ((0.5, 0.5), (4.6252, 19.5476, 48.5789)),
}


def tapered(length, width, thickness, across, through):
    def warp(points):
        share = points[:, 0] / length
        taper = np.column_stack(
            [np.ones_like(share), 1 - (1 - across) * share, 1 - (1 - through) * share]
        )
        return points * taper

    return {
        "length": length,
        "width": width,
        "thickness": thickness,
        "width_tip": width * across,
        "thickness_tip": thickness * through,
    }, warp


@pytest.mark.parametrize("kind", TAPERED)
def test_tapered_cantilevers_against_the_tables(block, solve_as_case, kind):
    (across, through), table = TAPERED[kind]
    shape, warp = tapered(1000.0, 14.0, 10.0, across, through)
    modes = solve_as_case(
        "bar",
        shape,
        mesh=block((1000, 14, 10), (30, 2, 2), warp=warp),
        modes=6,
        held=["root"],
        # Without lateral strain the clamp holds nothing that a beam does not know of.
        material={"youngs_modulus_gpa": 200.0, "poisson_ratio": 0.0, "density": RHO,
                  "name": "carbon steel"},
    )  # fmt: skip
    unit = np.sqrt(E / (12 * RHO)) * 0.010 / (2 * np.pi)
    got = by_name(modes, numbered("flatwise bending", 3))
    np.testing.assert_allclose(got, np.array(table) * unit, rtol=1.5e-3)
    for n, value in enumerate(table, 1):
        mode = modes.modes[modes.names.index(f"flatwise bending {n}")]
        assert mode.theory_hz == pytest.approx(value * unit, rel=1.5e-3)


def test_a_double_tapered_spar_against_mabie_and_rogers(block, solve_as_case):
    # JASA 51 (1972) 1771, four to one both ways: 23.289, 73.9 [P]; 23.2923, 73.9188 [R].
    shape, warp = tapered(1000.0, 40.0, 40.0, 0.25, 0.25)
    modes = solve_as_case(
        "bar", shape, mesh=block((1000, 40, 40), (24, 2, 2), warp=warp), modes=4, held=["root"]
    )
    unit = 0.010 * np.sqrt(E / (12 * RHO)) / (2 * np.pi)
    table = np.repeat([23.2923, 73.9188], 2) * unit
    np.testing.assert_allclose(modes.frequencies, table, rtol=4e-3)
    assert [mode.theory_hz for mode in modes.modes] == pytest.approx(table, rel=4e-3)


ALUMINIUM = {
    "name": "aluminium 6061-T6",
    "youngs_modulus_gpa": 68.9,
    "poisson_ratio": 0.33,
    "density": 2700.0,
}

#: Free 200 x 30 x 10 mm bar, three-dimensional Ritz solution in Legendre products [R].
FREE_BAR = {
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

#: Sugar maple, x = L 300, y = T 50, z = R 20 mm: ratios of the Wood Handbook, USDA
#: FPL-GTR-190, table 5-1; three-dimensional Ritz solution [R].
MAPLE = {
    "name": "sugar maple",
    "youngs_modulus_gpa": [13.86, 0.065 * 13.86, 0.132 * 13.86],
    "shear_modulus_gpa": [0.063 * 13.86, 0.111 * 13.86, 0.021 * 13.86],
    "poisson_ratio": [0.476, 0.424, 0.3811],
    "density": 705.6,
}
FREE_BOARD = (980.81, 1255.1, 1991.80, 2530.7, 2612.9, 3919.9, 4180.3, 4555.0, 5898.8, 6007.7)


def hold(modes, wanted, tolerance):
    """Best values within tolerance; raw ones above, as all Ritz values are."""
    raw = np.array([mode.raw_hz for mode in modes.modes])[: len(wanted)]
    assert np.all(raw > np.array(wanted) * (1 - 5e-5))
    np.testing.assert_allclose(modes.frequencies[: len(wanted)], wanted, rtol=tolerance)


@pytest.mark.parametrize(
    ("counts", "tolerance"),
    [((20, 6, 3), 1e-3), pytest.param((32, 10, 5), 5e-4, marks=pytest.mark.slow)],
)
def test_a_free_aluminium_bar_in_three_dimensions(block, solve_as_case, counts, tolerance):
    modes = solve_as_case(
        "bar",
        {"length": 200.0, "width": 30.0, "thickness": 10.0},
        mesh=block((200, 30, 10), counts),
        modes=10,
        material=ALUMINIUM,
    )
    assert modes.names == tuple(FREE_BAR)
    assert modes.solve_facts.rigid_modes == 6
    hold(modes, list(FREE_BAR.values()), tolerance)


@pytest.mark.parametrize(
    ("counts", "tolerance"),
    [((15, 5, 3), 1e-3), pytest.param((30, 10, 6), 5e-4, marks=pytest.mark.slow)],
)
def test_a_free_maple_board_in_three_dimensions(block, solve_as_case, counts, tolerance):
    modes = solve_as_case(
        "bar",
        {"length": 300.0, "width": 50.0, "thickness": 20.0},
        mesh=block((300, 50, 20), counts),
        modes=10,
        material=MAPLE,
    )
    hold(modes, FREE_BOARD, tolerance)


def test_a_square_cantilever_in_three_dimensions(block, solve_as_case):
    # 1 m x 50 x 50 mm, the whole end face held: Ritz, up to 0.03 % high [R].
    modes = solve_as_case(
        "bar",
        {"length": 1000.0, "width": 50.0, "thickness": 50.0},
        mesh=block((1000, 50, 50), (30, 3, 3)),
        modes=8,
        held=["root"],
        material={"name": "carbon steel", "youngs_modulus_gpa": 200.0, "poisson_ratio": 0.3,
                  "density": 7850.0},
    )  # fmt: skip
    wanted = np.repeat([40.79, 252.72, 695.15, 719.4, 1263.9], [2, 2, 2, 1, 1])
    np.testing.assert_allclose(modes.frequencies, wanted, rtol=1e-3)
    assert modes.names[6:] == ("torsion 1", "axial 1")
    assert {name[:9] for name in modes.names[:6]} == {"bending 1", "bending 2", "bending 3"}


def test_a_free_cube_and_its_lame_modes(block, solve_as_case):
    # omega L sqrt(rho / G), nu = 0.3: Demarest, JASA 49 (1971) 768; Ohno, J. Phys. Earth 24
    # (1976) 355; to 1e-5 [R]. Lame's plane shear is pi sqrt 2 exactly.
    side = 100.0
    modes = solve_as_case(
        "bar",
        {"length": side, "width": side, "thickness": side},
        mesh=block((side, side, side), (5, 5, 5)),
        modes=14,
    )
    unit = np.sqrt(G / RHO) / (2 * np.pi * side * 1e-3)
    values = np.array([2.85605, 3.84597, 3.91125, np.pi * np.sqrt(2), 4.57279])
    wanted = np.repeat(values, [2, 3, 3, 3, 3]) * unit
    # The mesh is no cube: it splits triples by what it is off.
    hold(modes, wanted, 1e-3)


#: omega L^2 sqrt(rho A / EI) of a cantilever with a mass at its tip, by mass / own mass:
#: exact roots of the frequency equation [R].
TIP_MASS = {0.1: (2.9678, 19.3558), 1.0: (1.5573, 16.2501), 5.0: (0.7569, 15.6023)}


@pytest.mark.parametrize("ratio", TIP_MASS)
def test_a_mass_at_the_tip(block, solve_as_case, ratio):
    length, width, thickness = 500.0, 10.0, 7.0
    own = RHO * length * width * thickness * 1e-9
    modes = solve_as_case(
        "bar",
        {"length": length, "width": width, "thickness": thickness},
        mesh=block((length, width, thickness), (20, 2, 2)),
        modes=4,
        held=["root"],
        attached_mass=[{"face": "tip", "grams": 1e3 * ratio * own}],
    )
    unit = np.sqrt(E / (12 * RHO)) * thickness * 1e-3 / 0.5**2 / (2 * np.pi)
    got = by_name(modes, numbered("flatwise bending", 2))
    np.testing.assert_allclose(got, np.array(TIP_MASS[ratio]) * unit, rtol=2.5e-3)
