"""Free bodies: six rigid motions, and elastic modes known exactly."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from modewright.fem.modal.case import Case
from modewright.fem.modal.material import Material
from modewright.fem.modal.mount import Hold, Mount
from modewright.fem.modal.rigid import rigid_motions
from modewright.fem.modal.spectrum import solve_spectrum
from modewright.fem.modal.system import build_system
from modewright.geometry.mesher import generate
from modewright.geometry.selector import ByName
from modewright.geometry.shape import Family, Shape
from modewright.geometry.solid import Arc, Line, Profile, Revolution, Solid

ALLOY = Material(name="alloy", youngs_modulus=200e9, poisson_ratio=0.3, density=8000.0)
SHEAR_SPEED = np.sqrt(200e9 / 2.6 / 8000.0)


def free(mesh, material: Material = ALLOY):
    case = Case(title="", shape=None, material=material)  # type: ignore[arg-type]
    return build_system(case, mesh)


def ball(radius: float, size: float):
    """Return the mesh of a ball, mm."""
    arc = Arc(start=(0, -radius), through=(radius, 0), end=(0, radius), face="surface")
    axis = Line(start=(0, radius), end=(0, -radius))
    profile = Profile(outer=(arc, axis), v=(0.0, 0.0, 1.0))
    solid = Solid(body=Revolution(profile=profile), faces=("surface",), thin=radius)
    family = Family(
        name="ball",
        text="a ball",
        dimensions=(),
        faces=("surface",),
        check=lambda d: None,
        solid=lambda d, folder: solid,
        anatomy=None,
    )
    shape = Shape(family=family, dimensions={}, given={}, folder=Path())
    return generate(shape, size_mm=size)


def test_free_cube_against_its_exact_modes(brick):
    # Free isotropic cube, nu = 0.3, omega L sqrt(rho / G): Ritz series of order 15
    # (method of Demarest, JASA 49 (1971) 768); the Lame modes pi sqrt 2 are exact.
    side = 0.03
    wanted = [2.85605] * 2 + [3.84597] * 3 + [3.91125] * 3 + [np.pi * np.sqrt(2)] * 3
    spectrum = solve_spectrum(free(brick((side,) * 3, (6, 6, 6))), modes=11)
    assert spectrum.rigid_modes == 6
    got = spectrum.frequencies * 2 * np.pi * side / SHEAR_SPEED
    np.testing.assert_allclose(got, wanted, rtol=3e-3)
    # Finite elements are never below the true value.
    assert (got > np.array(wanted) - 2e-5).all()


def test_lame_mode_converges_with_the_fourth_power(brick):
    side, wanted = 0.03, np.pi * np.sqrt(2)
    errors = []
    for n in (3, 6):
        f = solve_spectrum(free(brick((side,) * 3, (n, n, n))), modes=11).frequencies
        scaled = f[8:11] * 2 * np.pi * side / SHEAR_SPEED
        errors.append(np.abs(scaled / wanted - 1).min())
    assert 3.1 < np.log2(errors[0] / errors[1]) < 4.5


def test_free_ball_against_lamb():
    # Lamb, Proc. LMS 13 (1882) 189; Sato & Usami (1962): omega a sqrt(rho / G) at
    # nu = 0.3: torsional n = 2, spheroidal n = 2, 1, torsional n = 3, spheroidal n = 3.
    wanted = np.repeat([2.501133, 2.646217, 3.529987, 3.864700, 3.937401], [5, 5, 3, 7, 7])
    spectrum = solve_spectrum(free(ball(20.0, 7.0)), modes=25)
    assert spectrum.rigid_modes == 6
    # The last multiplet is handed over whole: asked for 25, got 27.
    got = spectrum.frequencies * 2 * np.pi * 0.02 / SHEAR_SPEED
    assert len(got) == 27
    np.testing.assert_allclose(got[:13], wanted[:13], rtol=1e-3)
    np.testing.assert_allclose(got[13:], wanted[13:], rtol=2.5e-3)
    # Members of one multiplet agree far better than that.
    for first, last in ((0, 5), (5, 10)):
        assert np.ptp(got[first:last]) / got[first] < 2e-4


@pytest.mark.slow
def test_fine_free_ball_against_lamb():
    wanted = np.repeat([2.501133, 2.646217, 3.529987, 3.864700, 3.937401], [5, 5, 3, 7, 7])
    spectrum = solve_spectrum(free(ball(20.0, 3.5)), modes=27)
    got = spectrum.frequencies * 2 * np.pi * 0.02 / SHEAR_SPEED
    np.testing.assert_allclose(got, wanted, rtol=2e-4)


@pytest.mark.parametrize("library", ["mkl", "cholmod", "superlu"])
def test_the_libraries_agree_on_a_free_body(brick, library):
    system = free(brick((0.08, 0.02, 0.006), (8, 2, 1)))
    spectrum = solve_spectrum(system, modes=8, library=library)
    wanted = solve_spectrum(system, modes=8, library="mkl")
    np.testing.assert_allclose(spectrum.frequencies, wanted.frequencies, rtol=1e-9)
    overlap = np.einsum(
        "mk,nk->mn",
        spectrum.shapes.reshape(8, -1),
        system.apply_mass(wanted.shapes.reshape(8, -1).T).T,
    )
    np.testing.assert_allclose(np.abs(overlap), np.eye(8), atol=1e-6)


def test_shapes_are_mass_normalised_and_carry_no_momentum(brick):
    system = free(brick((0.08, 0.02, 0.006), (8, 2, 1)))
    shapes = solve_spectrum(system, modes=8).shapes
    flat = shapes.reshape(8, -1).T
    inertia = system.apply_mass(flat)
    np.testing.assert_allclose(flat.T @ inertia, np.eye(8), atol=1e-10)
    momentum = rigid_motions(system.mesh.points).T @ inertia
    assert np.abs(momentum).max() < 1e-10 * np.sqrt(system.body_mass)


@pytest.mark.parametrize("scale", [1e-3, 1.0, 1e3])
def test_size_only_scales_frequencies(brick, scale):
    # f ~ 1 / L, for free bodies of any size: the shift must follow.
    mesh = brick((0.08, 0.02, 0.006), (6, 1, 1))
    wanted = solve_spectrum(free(mesh), modes=5).frequencies
    scaled = solve_spectrum(free(replace(mesh, points=mesh.points * scale)), modes=5)
    assert scaled.rigid_modes == 6
    np.testing.assert_allclose(scaled.frequencies * scale, wanted, rtol=1e-9)


def test_far_from_the_origin_nothing_changes(brick):
    mesh = brick((0.08, 0.02, 0.006), (6, 1, 1))
    wanted = solve_spectrum(free(mesh), modes=5).frequencies
    place = np.array([7.0, -3.0, 11.0])
    moved = solve_spectrum(free(replace(mesh, points=mesh.points + place)), modes=5)
    np.testing.assert_allclose(moved.frequencies, wanted, rtol=1e-7)


def test_a_slender_limb_on_a_stout_body(brick):
    # The shift is guessed from the whole body; the limb's modes lie far below it.
    def keep(centre):
        inside = (np.abs(centre[:, 1] - 0.5) < 0.11) & (np.abs(centre[:, 2] - 0.5) < 0.11)
        return (centre[:, 0] < 0.4) | inside

    mesh = brick((0.2, 0.045, 0.045), (20, 5, 5), keep=keep)
    spectrum = solve_spectrum(free(mesh), modes=6)
    assert spectrum.rigid_modes == 6
    # About a clamped square bar 120 x 9 x 9 mm, both ways; the body it stands on is
    # free to swing against it, which raises the pitch.
    beam = 1.8751**2 / (2 * np.pi) * np.sqrt(200e9 * 0.009**2 / 12 / 8000) / 0.12**2
    assert (spectrum.frequencies[:2] > beam).all()
    assert (spectrum.frequencies[:2] < 1.4 * beam).all()
    assert spectrum.frequencies[2] > 2.0 * spectrum.frequencies[1]


def test_the_same_digits_on_every_run(brick):
    system = free(brick((0.05, 0.02, 0.02), (5, 2, 2)))
    first, second = (solve_spectrum(system, modes=8) for _ in range(2))
    np.testing.assert_allclose(first.frequencies, second.frequencies, rtol=1e-12)


def test_twelve_equal_tines_are_all_found(brick):
    # A comb of twelve equal tines on a stout back: twelve first bending modes
    # within a fraction of a percent, however few are asked for.
    def keep(centre):
        column = np.floor(centre[:, 1] * 24).astype(int)
        return (centre[:, 0] < 0.25) | ((column % 2 == 0) & (centre[:, 2] < 0.2))

    mesh = brick((0.04, 0.072, 0.009), (8, 24, 6), keep=keep)
    clamp = Mount(hold=Hold.CLAMPED, faces=(ByName(name="x_min"),))
    system = build_system(
        Case(title="", shape=None, material=ALLOY, mounts=(clamp,)),  # type: ignore[arg-type]
        mesh,
    )
    few = solve_spectrum(system, modes=3)
    many = solve_spectrum(system, modes=16)
    first = many.frequencies[:12]
    assert np.ptp(first) < 0.02 * first[0]
    assert many.frequencies[12] > 1.5 * first[-1]
    np.testing.assert_allclose(few.frequencies, many.frequencies[: len(few.frequencies)], rtol=1e-9)
