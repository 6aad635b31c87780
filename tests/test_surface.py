"""Springs and attached masses on faces, against sums and simple mechanics."""

import numpy as np
import pytest
from modewright.fem.modal.assembly import symmetric
from modewright.fem.modal.attachment import local_thickness, patch_mass
from modewright.fem.modal.case import Case
from modewright.fem.modal.material import Material
from modewright.fem.modal.mount import AttachedMass, Hold, Mount
from modewright.fem.modal.spectrum import solve_spectrum
from modewright.fem.modal.surface import facet_areas, spread_mass, spring_bed
from modewright.fem.modal.system import build_system
from modewright.geometry.errors import InputError
from modewright.geometry.selector import ByName
from scipy.spatial.transform import Rotation

STEEL = Material(name="steel", youngs_modulus=205e9, poisson_ratio=0.29, density=7850.0)
TURN = Rotation.from_euler("zyx", [0.5, 0.3, -0.8]).as_matrix()


def rolled(points: np.ndarray) -> np.ndarray:
    """Return a box (radius - 16 mm, angle, z) rolled up to a sector of a tube."""
    r, angle, z = points.T + np.array([[0.016], [0.0], [0.0]])
    return np.column_stack([r * np.cos(angle), r * np.sin(angle), z])


def case(*mounts: Mount, masses: tuple[AttachedMass, ...] = (), material=STEEL, **more) -> Case:
    return Case(
        title="",
        shape=None,  # type: ignore[arg-type]
        material=material,
        mounts=mounts,
        attached_masses=masses,
        **more,
    )


def springs(face: str, normal: float, tangential: float) -> Mount:
    return Mount(
        hold=Hold.SPRINGS,
        faces=(ByName(name=face),),
        normal_stiffness=normal,
        tangential_stiffness=tangential,
    )


def clamped(face: str = "x_min") -> Mount:
    return Mount(hold=Hold.CLAMPED, faces=(ByName(name=face),))


def test_areas_of_flat_and_round_faces(brick):
    flat = brick((0.03, 0.02, 0.01), (3, 2, 1), warp=lambda p: p @ TURN.T)
    assert facet_areas(flat.points, flat.facet_nodes("z_max")).sum() == pytest.approx(6e-4)
    assert facet_areas(flat.points, flat.facets).sum() == pytest.approx(2.2e-3)
    tube = brick((0.004, np.pi, 0.02), (1, 12, 1), warp=rolled)
    outer = facet_areas(tube.points, tube.facet_nodes("x_max")).sum()
    assert outer == pytest.approx(np.pi * 0.02 * 0.02, rel=1e-5)


def test_a_spread_mass_is_exact_and_centred(brick):
    mesh = brick((0.03, 0.02, 0.01), (3, 2, 1))
    facets = mesh.facet_nodes("x_max")
    matrices = spread_mass(mesh.points, facets, 2e-3)
    assert matrices.sum() == pytest.approx(2e-3, rel=1e-13)
    y = mesh.points[facets][:, :, 1]
    assert np.einsum("fa,fab->", y, matrices) == pytest.approx(2e-3 * 0.01, rel=1e-12)
    # And its moment of inertia about the face's middle: m w^2 / 12.
    about = y - 0.01
    inertia = np.einsum("fa,fab,fb->", about, matrices, about)
    assert inertia == pytest.approx(2e-3 * 0.02**2 / 12, rel=1e-12)


def test_energy_of_a_spring_bed_in_rigid_motions(brick):
    mesh = brick((0.03, 0.02, 0.01), (3, 2, 1), warp=lambda p: p @ TURN.T)
    facets = mesh.facet_nodes("z_max")
    bed = spring_bed(mesh.points, facets, 5e9, 2e9)
    area, normal, along = 6e-4, TURN[:, 2], TURN[:, 0]
    for direction, stiffness in ((normal, 5e9), (along, 2e9)):
        energy = np.einsum("i,fabij,j->", direction, bed, direction)
        assert energy == pytest.approx(stiffness * area, rel=1e-12)
    # Turning about the face's own y axis: normal springs times second moment.
    middle = np.array([0.015, 0.01, 0.01]) @ TURN.T
    motion = np.cross(TURN[:, 1], mesh.points[facets] - middle)
    energy = np.einsum("fai,fabij,fbj->", motion, bed, motion)
    assert energy == pytest.approx(5e9 * 0.02 * 0.03**3 / 12, rel=1e-12)


def test_a_stiff_block_on_springs_moves_like_a_mass_on_a_spring(brick):
    # Soft springs under a 20 x 20 x 10 mm block: up and down at sqrt(k A / m).
    mesh = brick((0.02, 0.02, 0.01), (2, 2, 1))
    normal, tangential = 1e9, 0.4e9
    system = build_system(case(springs("z_min", normal, tangential)), mesh)
    assert system.rigid.shape[1] == 0
    spectrum = solve_spectrum(system, modes=6)
    mass, area = 7850.0 * 4e-6, 4e-4
    assert system.body_mass == pytest.approx(mass)
    # That motion alone has the same height everywhere.
    still = spectrum.shapes[..., 2].std(axis=1) / np.abs(spectrum.shapes[..., 2]).mean(axis=1)
    vertical = spectrum.frequencies[still.argmin()]
    wanted = np.sqrt(normal * area / mass) / (2 * np.pi)
    assert vertical == pytest.approx(wanted, rel=3e-4)
    # The block's own stiffness lowers it, never raises it.
    assert vertical < wanted
    # Turning about the vertical: kt times the polar moment of the face.
    polar, inertia = 0.02**4 / 6, mass * 2 * 0.02**2 / 12
    twist = np.sqrt(tangential * polar / inertia) / (2 * np.pi)
    assert np.abs(spectrum.frequencies / twist - 1).min() < 3e-4


def test_a_very_stiff_bed_is_a_clamp(brick):
    mesh = brick((0.06, 0.01, 0.004), (6, 1, 1))
    clamp = solve_spectrum(build_system(case(clamped()), mesh), modes=6).frequencies
    previous = np.inf
    for stiffness in (1e15, 1e17, 1e19):
        bed = build_system(case(springs("x_min", stiffness, stiffness)), mesh)
        off = np.abs(solve_spectrum(bed, modes=6).frequencies / clamp - 1).max()
        # Softer, and nearer with every step until rounding.
        assert off < 0.3 * previous
        previous = off
    assert previous < 1e-5


@pytest.mark.parametrize(("tangential", "rigid"), [(0.0, 3), (1e9, 0)])
def test_rigid_motions_left_by_springs(brick, tangential, rigid):
    mesh = brick((0.02, 0.02, 0.01), (2, 2, 1), warp=lambda p: p @ TURN.T)
    system = build_system(case(springs("z_min", 1e9, tangential)), mesh)
    spectrum = solve_spectrum(system, modes=4)
    assert system.rigid.shape[1] == spectrum.rigid_modes == rigid
    assert spectrum.frequencies[0] > 100.0


def test_normal_springs_round_a_tube_do_not_resist_its_turning(brick):
    mesh = brick((0.004, np.pi, 0.02), (1, 8, 1), warp=rolled)
    system = build_system(case(springs("x_max", 1e12, 0.0)), mesh)
    assert system.rigid.shape[1] == 2


def test_a_tip_mass_lowers_the_pitch_as_beams_say(brick):
    # Cantilever with a point mass m at the tip, mu = m / (rho A L): exact roots
    # omega L^2 sqrt(rho A / E I) 3.5160 (mu 0) and 2.0163 (mu 0.5) of the beam
    # equation; slender enough for shear to matter little to the ratio.
    mesh = brick((0.12, 0.004, 0.004), (24, 1, 1))
    bare = solve_spectrum(build_system(case(clamped()), mesh), modes=1).frequencies[0]
    mass = AttachedMass(mass=0.5 * 7850 * 0.12 * 0.004**2, face=ByName(name="x_max"))
    system = build_system(case(clamped(), masses=(mass,)), mesh)
    loaded = solve_spectrum(system, modes=1).frequencies[0]
    assert system.attached_mass == pytest.approx(mass.mass)
    assert system.mass.sum() == pytest.approx(1.5 * 7850 * 0.12 * 0.004**2)
    assert loaded / bare == pytest.approx(2.0163 / 3.5160, rel=1e-3)


@pytest.mark.parametrize("radius", [None, 1.0, 3.0, 40.0])
def test_a_mass_at_a_point_is_exact(brick, radius):
    mesh = brick((0.03, 0.02, 0.004), (6, 4, 1))
    item = AttachedMass(mass=1e-3, at=(11.0, 9.0, 4.05), radius=radius)
    facets, matrices = patch_mass(mesh, item)
    assert matrices.sum() == pytest.approx(1e-3, rel=1e-12)
    # Where it is: on the top, around the point, as wide as asked.
    x = mesh.points[facets]
    assert np.einsum("fab,fb->", matrices, x[..., 2]) == pytest.approx(1e-3 * 0.004, rel=1e-9)
    if radius != 40.0:
        r = 2e-3 if radius is None else radius * 1e-3
        centre = np.einsum("fab,fbi->i", matrices, x) / 1e-3
        np.testing.assert_allclose(centre, [0.011, 0.009, 0.004], atol=0.01 * r)
        # A disc of radius r about its diameter: m r^2 / 4.
        about = x[..., 0] - 0.011
        inertia = np.einsum("fa,fab,fb->", about, matrices, about)
        assert inertia == pytest.approx(1e-3 * r**2 / 4, rel=0.03)


def test_a_mass_at_a_point_joins_the_mass_matrix(brick):
    mesh = brick((0.03, 0.02, 0.004), (6, 4, 1))
    item = AttachedMass(mass=1e-3, at=(30.0, 10.0, 2.0), radius=1.5)
    system = build_system(case(clamped(), masses=(item, item)), mesh)
    assert system.mass.sum() == pytest.approx(7850 * 2.4e-6 + 2e-3, rel=1e-12)
    bare = build_system(case(clamped()), mesh)
    assert system.body_mass == bare.body_mass
    assert abs(symmetric(bare.pattern, np.ones(len(bare.pattern.indices)))).sum() > 0


def test_a_point_off_the_surface_is_told_where_the_surface_is(brick):
    mesh = brick((0.03, 0.02, 0.004), (3, 2, 1))
    with pytest.raises(InputError, match=r"attached_mass\.2\.at: .*0\.20 mm off.*4\.000\]"):
        build_system(
            case(
                clamped(),
                masses=(
                    AttachedMass(mass=1e-3, face=ByName(name="x_max")),
                    AttachedMass(mass=1e-3, at=(11.0, 9.0, 4.2), radius=1.0),
                ),
            ),
            mesh,
        )


def test_the_nearest_point_of_a_round_face_lies_on_the_curve(brick):
    tube = brick((0.004, np.pi, 0.02), (1, 10, 1), warp=rolled)
    angle = 0.7
    at = 20.05 * np.array([np.cos(angle), np.sin(angle), 0.0]) + [0, 0, 7.0]
    facets, matrices = patch_mass(tube, AttachedMass(mass=1e-3, at=tuple(at), radius=1.0))
    centre = np.einsum("fab,fbi->i", matrices, tube.points[facets]) / 1e-3
    np.testing.assert_allclose(centre, at / 20.05 * 0.02 * [1, 1, 20.05 / 20], atol=3e-5)
    assert local_thickness(
        tube,
        np.array([0.02 * np.cos(angle), 0.02 * np.sin(angle), 0.007]),
        np.array([np.cos(angle), np.sin(angle), 0.0]),
    ) == pytest.approx(0.004, rel=0.05)


def test_temperature_scales_the_part_and_its_modulus(brick):
    # f ~ sqrt(E / rho) / L: (1/f) df/dT = (1/E dE/dT + expansion) / 2, here exactly.
    warm = Material(
        name="steel",
        youngs_modulus=205e9,
        poisson_ratio=0.29,
        density=7850.0,
        expansion=12e-6,
        modulus_slope=-250e-6,
    )
    mesh = brick((0.06, 0.01, 0.004), (6, 1, 1))
    cold, hot = (
        solve_spectrum(build_system(case(clamped(), material=warm, temperature=t), mesh), modes=3)
        for t in (20.0, 70.0)
    )
    longer, stiffer = 1 + 12e-6 * 50, 1 - 250e-6 * 50
    wanted = np.sqrt(stiffer * longer)
    np.testing.assert_allclose(hot.frequencies / cold.frequencies, wanted, rtol=1e-9)
