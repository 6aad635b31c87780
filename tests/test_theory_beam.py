import numpy as np
import pytest
import skfem
from modewright.fem.modal.material import Material
from modewright.fem.modal.theory.axial import axial_frequencies
from modewright.fem.modal.theory.beam import beam_frequencies, beam_roots
from modewright.fem.modal.theory.timoshenko import (
    bending_frequencies,
    pinned_frequency,
    shear_coefficient,
)
from modewright.fem.modal.theory.torsion import torsion_frequencies
from modewright.geometry.section import of_rectangle, of_tube
from scipy.linalg import expm
from scipy.sparse.linalg import eigsh
from skfem.helpers import ddot, dot, sym_grad, trace

STEEL = Material(name="steel", youngs_modulus=200e9, poisson_ratio=0.3, density=7850.0)
CLAMPED = "first end clamped"


@pytest.mark.parametrize(
    ("ends", "roots"),
    [  # recomputed from the characteristic equations to ten decimals
        ("clamped-free", [1.8751040687, 4.6940911330, 7.8547574382, 10.9955407349]),
        ("free-free", [4.7300407449, 7.8532046241, 10.9956078380, 14.1371654913]),
        ("clamped-pinned", [3.9266023120, 7.0685827456, 10.2101761228, 13.3517687778]),
        ("pinned-pinned", [np.pi, 2 * np.pi, 3 * np.pi, 4 * np.pi]),
    ],
)
def test_roots_of_uniform_beams(ends, roots):
    assert beam_roots(ends, 4) == pytest.approx(roots, abs=2e-10)


def test_slender_cantilever_of_nafems_test_71():
    # Abbassian, Dawswell, Knowles, Selected Benchmarks for Natural Frequency Analysis,
    # NAFEMS R0015, 1987, Test 71: 10 x 0.125 x 0.125 m, as quoted; 4 digits
    published = [1.010, 6.327, 17.716, 34.717, 57.390, 85.730]
    material = Material(name="steel", youngs_modulus=200e9, poisson_ratio=0.3, density=8000.0)
    b = 0.125
    formula = beam_frequencies(beam_roots("clamped-free", 6), 10.0, b * b, b**4 / 12, 200e9, 8000.0)
    bar = of_rectangle([0.0, 10.0], b, b)
    ritz = bending_frequencies(bar, material, "flatwise", CLAMPED, 6, slender=True)
    assert formula == pytest.approx(published, rel=5e-4)
    assert ritz == pytest.approx(formula, rel=1e-6)


def test_timoshenko_pinned_beam():
    # SFM/AFNOR Guide de validation 1990, pp. 192-193: 2 x 0.05 x 0.05 m; with shear and
    # rotary inertia, kappa 0.8497, recomputed: 28.6718 and 114.3311 Hz; slender 28.7017
    b = 0.05
    shear = shear_coefficient("rectangle", 0.3) * 2e11 / 2.6
    assert shear / (2e11 / 2.6) == pytest.approx(0.8497, abs=1e-4)
    found = [pinned_frequency(n, 2.0, b * b, b**4 / 12, 2e11, shear, 7800.0) for n in (1, 2)]
    assert found == pytest.approx([28.6718, 114.3311], abs=1e-4)
    slender = pinned_frequency(1, 2.0, b * b, b**4 / 12e8, 2e11, shear, 7800.0) * 1e4
    assert slender == pytest.approx(28.7017, abs=1e-4)


@pytest.mark.parametrize(
    ("form", "bore", "kappa"),
    [  # Cowper 1966 at nu = 0.3; thin tube 2 (1 + nu) / (4 + 3 nu)
        ("rectangle", 0.0, 13.0 / 15.3),
        ("circle", 0.0, 7.8 / 8.8),
        ("tube", 0.0, 7.8 / 8.8),
        ("tube", 1.0, 2.6 / 4.9),
    ],
)
def test_shear_coefficients(form, bore, kappa):
    assert shear_coefficient(form, 0.3, bore) == pytest.approx(kappa, rel=1e-12)


def _state_matrix(omega, sections, i, kappa):
    """Return A of (w, theta, M, V)' = A (w, theta, M, V) between stations i and i + 1."""
    area, second = sections.area[i], sections.i_across[i]
    shear = kappa * 200e9 / 2.6
    a = np.zeros((4, 4))
    a[0, 1], a[0, 3], a[1, 2], a[2, 3] = 1.0, 1.0 / (shear * area), 1.0 / (200e9 * second), -1.0
    a[2, 1], a[3, 0] = -7850.0 * second * omega**2, -7850.0 * area * omega**2
    return a * (sections.x[i + 1] - sections.x[i])


@pytest.mark.parametrize("held", ["free", "first end clamped", "both ends clamped"])
def test_stepped_timoshenko_beam_against_transfer_matrices(held):
    # Exact: the state at the far end is a product of matrix exponentials, and the
    # part of it that the ends hold at zero is singular at a natural frequency.
    bar = of_rectangle([0.0, 0.11, 0.11, 0.2], 0.01, np.array([0.012, 0.012, 0.02, 0.02]))
    start = [0, 1] if held == "free" else [2, 3]
    end = [0, 1] if held == "both ends clamped" else [2, 3]

    def determinant(hertz):
        omega = 2 * np.pi * hertz
        through = expm(_state_matrix(omega, bar, 2, 13 / 15.3)) @ expm(
            _state_matrix(omega, bar, 0, 13 / 15.3)
        )
        return np.linalg.det(through[np.ix_(end, start)])

    for f in bending_frequencies(bar, STEEL, "flatwise", held, 4):
        assert determinant(f * (1 - 1e-6)) * determinant(f * (1 + 1e-6)) < 0.0


def test_tube_against_transfer_matrices():
    # kappa of Cowper 1966 for inner over outer radius m = 0.8, nu = 0.3, by hand
    m2 = 0.64
    kappa = 7.8 * (1 + m2) ** 2 / (8.8 * (1 + m2) ** 2 + 23.6 * m2)
    tube = of_tube([0.0, 0.2], 0.025, 0.02)
    for f in bending_frequencies(tube, STEEL, "flatwise", "free", 3):
        signs = [
            np.linalg.det(expm(_state_matrix(2 * np.pi * f * near, tube, 0, kappa))[2:, :2])
            for near in (1 - 1e-6, 1 + 1e-6)
        ]
        assert signs[0] * signs[1] < 0.0


def test_square_cantilever_against_three_dimensions():
    # converged 3-D Ritz, end face held, 1 x 0.05 x 0.05 m: 40.79, 252.72, 695.15, 1329.1;
    # torsion 719.4, axial 1263.9. The clamp stiffens the solid by a quarter of a per cent.
    bar = of_rectangle([0.0, 1.0], 0.05, 0.05)
    bending = bending_frequencies(bar, STEEL, "flatwise", CLAMPED, 4)
    assert bending == pytest.approx([40.79, 252.72, 695.15, 1329.1], rel=3.2e-3)
    assert bending_frequencies(bar, STEEL, "edgewise", CLAMPED, 4) == pytest.approx(bending)
    torsion = torsion_frequencies(bar, 200e9 / 2.6, 7850.0, CLAMPED, 1)
    assert torsion == pytest.approx([719.4], rel=1.2e-3)
    assert axial_frequencies(bar, STEEL, CLAMPED, 1) == pytest.approx([1263.9], rel=2e-3)


def test_free_aluminium_bar_against_three_dimensions():
    # converged 3-D Ritz, free 0.2 x 0.03 x 0.01 m, E 68.9 GPa, nu 0.33, 2700 kg/m3
    alloy = Material(name="alloy", youngs_modulus=68.9e9, poisson_ratio=0.33, density=2700.0)
    bar = of_rectangle([0.0, 0.2], 0.03, 0.01)
    flat = bending_frequencies(bar, alloy, "flatwise", "free", 4)
    assert flat == pytest.approx([1287.67, 3499.4, 6722.1, 10826.0], rel=9e-3)
    assert flat[0] == pytest.approx(1287.67, rel=1e-3)
    edge = bending_frequencies(bar, alloy, "edgewise", "free", 2)
    assert edge == pytest.approx([3619.38, 8942.58], rel=2.2e-3)
    # the lateral inertia brings the rod's 12629.2 Hz to the solid's 12614.58 Hz
    assert axial_frequencies(bar, alloy, "free", 1) == pytest.approx([12614.58], rel=5e-5)
    torsion = torsion_frequencies(bar, 68.9e9 / 2.66, 2700.0, "free", 3)
    assert torsion == pytest.approx([4352.7, 8705.4, 13058.0], rel=1e-5)  # the bare formula
    assert torsion == pytest.approx([4364.9, 8796.8, 13355.4], rel=2.3e-2)  # 3-D


def test_orthotropic_bar_against_three_dimensions():
    # converged 3-D Ritz of free sugar maple 0.3 x 0.05 x 0.02 m: 980.81 flatwise, 1991.80 edgewise
    el = 13.86e9
    maple = Material(
        name="maple",
        youngs_modulus=(el, 0.065 * el, 0.132 * el),
        shear_modulus=(0.063 * el, 0.111 * el, 0.021 * el),
        poisson_ratio=(0.476, 0.424, 0.3811),
        density=705.6,
    )
    bar = of_rectangle([0.0, 0.3], 0.05, 0.02)
    flat = bending_frequencies(bar, maple, "flatwise", "free", 1)
    edge = bending_frequencies(bar, maple, "edgewise", "free", 1)
    assert (flat[0], edge[0]) == pytest.approx((980.81, 1991.80), rel=3e-3)


def test_lateral_inertia_of_an_orthotropic_rod():
    # Exact for a uniform free rod: f = n c / 2 L / sqrt(1 + (n pi / L)^2 (nu_xy^2 I_z +
    # nu_xz^2 I_y) / A); nu_xy thins it across, its width, nu_xz through its thickness.
    wood = Material(
        name="wood",
        youngs_modulus=(12e9, 1e9, 1e9),
        shear_modulus=(0.8e9, 0.8e9, 0.1e9),
        poisson_ratio=(0.45, 0.2, 0.3),
        density=450.0,
    )
    n = np.array([1, 2])
    lateral = (0.45**2 * 0.05**2 + 0.2**2 * 0.01**2) / 12
    exact = n * np.sqrt(12e9 / 450.0) / 0.6 / np.sqrt(1 + (n * np.pi / 0.3) ** 2 * lateral)
    found = axial_frequencies(of_rectangle([0.0, 0.3], 0.05, 0.01), wood, "free", 2)
    assert found == pytest.approx(exact, rel=1e-7)


def _taper(tip, which):
    """Return a slender cantilever tapering to `tip` times the root's size."""
    x = np.linspace(0.0, 1.0, 257)
    size = 1.0 + (tip - 1.0) * x
    width = 0.01 * (size if which in ("width", "both") else 1.0 + 0 * x)
    thickness = 0.01 * (size if which in ("thickness", "both") else 1.0 + 0 * x)
    return of_rectangle(x, width, thickness)


@pytest.mark.parametrize(
    ("tip", "which", "parameters"),
    [  # omega L^2 sqrt(rho A0 / E I0), recomputed; tables in Naguleswaran, JSV 172 (1994) 289
        (0.7, "thickness", [3.6667, 19.8806, 53.3222]),
        (0.2, "thickness", [4.2925, 15.7427, 36.8846]),
        (0.7, "width", [3.9160, 22.7860, 62.4361]),
        (0.2, "width", [5.3976, 25.6558, 65.7470]),
        (0.7, "both", [4.0669, 20.5555, 54.0152]),
        (0.2, "both", [6.1964, 18.3855, 39.8336]),
    ],
)
def test_tapered_cantilevers(tip, which, parameters):
    found = bending_frequencies(_taper(tip, which), STEEL, "flatwise", CLAMPED, 3, slender=True)
    scale = 2 * np.pi / np.sqrt(200e9 * 1e-4 / 12 / 7850.0)
    assert found * scale == pytest.approx(parameters, rel=5e-5)


@pytest.mark.parametrize(
    ("root_width", "published", "recomputed"),
    [
        (0.04, [23.289, 73.9, 165.23, 299.7, 478.1], [54.189, 171.970, 384.531, 697.429, 1112.47]),
        (0.05, [24.308, 75.56, 167.21, 301.9, 480.4], [56.559, 175.830, 389.107, 702.439, 1117.77]),
    ],
)
def test_double_taper_of_mabie_and_rogers(root_width, published, recomputed):
    # Mabie H. H., Rogers C. B., JASA 51 (1972) 1771-1774, as quoted: lambda of
    # f = lambda / (2 pi) h1 / L^2 sqrt(E / 12 rho); and recomputed in Hz
    x = np.linspace(0.0, 1.0, 257)
    bar = of_rectangle(x, root_width + (0.01 - root_width) * x, 0.04 - 0.03 * x)
    material = Material(name="steel", youngs_modulus=2e11, poisson_ratio=0.3, density=7800.0)
    found = bending_frequencies(bar, material, "flatwise", CLAMPED, 5, slender=True)
    assert found == pytest.approx(recomputed, rel=5e-5)
    to_lambda = 2 * np.pi / (0.01 * np.sqrt(2e11 / 12 / 7800.0))
    assert found * to_lambda == pytest.approx(published, rel=5e-4)


def test_rod_and_shaft_that_swell_like_a_cone():
    # Exact: with A ~ (1 + a x)^2, v = (1 + a x) u obeys the plain wave equation;
    # clamped at the small end, k cos k L = a / (1 + a L) sin k L.
    a, x = 2.0, np.linspace(0.0, 1.0, 513)
    rigid = Material(name="no Poisson", youngs_modulus=200e9, poisson_ratio=0.0, density=7850.0)
    found = axial_frequencies(of_tube(x, 0.01 * (1 + a * x)), rigid, CLAMPED, 3)
    k = 2 * np.pi * found / np.sqrt(200e9 / 7850.0)
    assert k * np.cos(k) - a / (1 + a) * np.sin(k) == pytest.approx(np.zeros(3), abs=1e-4)


def test_both_ends_and_either_end():
    x = np.linspace(0.0, 0.1, 65)
    bar = of_rectangle(x, 0.01, 0.004 - 0.02 * x)
    mirrored = of_rectangle(x, 0.01, 0.002 + 0.02 * x)
    for solve in (
        lambda s, held: bending_frequencies(s, STEEL, "flatwise", held, 3),
        lambda s, held: axial_frequencies(s, STEEL, held, 3),
        lambda s, held: torsion_frequencies(s, 8e10, 7850.0, held, 3),
    ):
        assert solve(bar, "first end clamped") == pytest.approx(
            solve(mirrored, "last end clamped"), rel=1e-6
        )
    rod = axial_frequencies(of_rectangle([0.0, 0.1], 0.01, 0.01), STEEL, "both ends clamped", 3)
    free = axial_frequencies(of_rectangle([0.0, 0.1], 0.01, 0.01), STEEL, "free", 3)
    assert rod == pytest.approx(free, rel=1e-8)


def _plane_frequencies(x, floor, top, held):
    """Return frequencies of a thin body between floor(x) and top, by quadratic cells."""
    rows = np.linspace(0.0, 1.0, 3)
    mesh = skfem.MeshQuad2.from_mesh(skfem.MeshQuad.init_tensor(x, rows))
    at = mesh.doflocs.copy()
    at[1] = floor(at[0]) + at[1] * (top - floor(at[0]))
    mesh = skfem.MeshQuad2(at, mesh.t)
    basis = skfem.Basis(mesh, skfem.ElementVector(skfem.ElementQuad2()), intorder=4)
    lam, mu = 200e9 * 0.3 / (1 - 0.09), 200e9 / 2.6

    @skfem.BilinearForm
    def stiffness(u, v, _):
        strain = sym_grad(u)
        return lam * trace(strain) * trace(sym_grad(v)) + 2 * mu * ddot(strain, sym_grad(v))

    @skfem.BilinearForm
    def inertia(u, v, _):
        return 7850.0 * dot(u, v)

    k, m = stiffness.assemble(basis), inertia.assemble(basis)
    ends = basis.get_dofs(
        lambda p: (p[0] < x[0] + 1e-9) | ((held == "both ends clamped") & (p[0] > x[-1] - 1e-9))
    ).all()
    if held != "free":
        k, m = skfem.condense(k, m, D=ends, expand=False)
    start = np.ones(k.shape[0])
    values = np.sort(eigsh(k.tocsc(), 6, m.tocsc(), sigma=-1e6, v0=start)[0])
    return np.sqrt(values[3 if held == "free" else 0 :]) / (2 * np.pi)


@pytest.mark.parametrize(
    ("held", "straight_is_off"), [("free", 0.011), ("both ends clamped", 0.10)]
)
def test_arch_cut_from_below_against_plane_stress(held, straight_is_off):
    # A thin bar 300 x 20 mm with 12 mm cut out below over 160 mm, solved as plane stress.
    def floor(x):
        t = np.abs(x - 0.15) / 0.08
        return -0.01 + np.where(t < 1.0, 0.012 * (1.0 - t**2), 0.0)

    x = np.linspace(0.0, 0.3, 151)
    solid = _plane_frequencies(x, floor, 0.01, held)[0]
    bar = of_rectangle(x, 0.001, 0.01 - floor(x), (0.01 + floor(x)) / 2)
    bent = bending_frequencies(bar, STEEL, "flatwise", held, 1)[0]
    straight = bending_frequencies(
        of_rectangle(x, 0.001, bar.area / 0.001), STEEL, "flatwise", held, 1
    )[0]
    assert bent == pytest.approx(solid, rel=6e-3)
    assert abs(straight / solid - 1.0) > straight_is_off
