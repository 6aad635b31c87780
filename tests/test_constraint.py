"""Supports: what they hold, on axes, oblique and curved faces, and where faces meet."""

from dataclasses import replace

import numpy as np
import pytest
import scipy.sparse as sp
from modewright.fem.modal.assembly import assemble
from modewright.fem.modal.case import Case
from modewright.fem.modal.constraint import (
    hold_axes,
    hold_normals,
    make_constraint,
)
from modewright.fem.modal.direct.triangle import entries
from modewright.fem.modal.material import Material
from modewright.fem.modal.mount import Hold, Mount
from modewright.fem.modal.reduction import reduce_blocks, scalar_blocks
from modewright.fem.modal.spectrum import solve_spectrum
from modewright.fem.modal.system import build_system
from modewright.geometry.errors import InputError
from modewright.geometry.mesh import Mesh
from modewright.geometry.selector import ByName
from scipy.spatial.transform import Rotation

STEEL = Material(name="steel", youngs_modulus=205e9, poisson_ratio=0.29, density=7850.0)
MAPLE = Material(
    name="maple",
    youngs_modulus=(13.86e9, 0.9009e9, 1.82952e9),
    shear_modulus=(0.87318e9, 1.53846e9, 0.29106e9),
    poisson_ratio=(0.476, 0.424, 0.3811),
    density=705.6,
)
TURN = Rotation.from_euler("zyx", [0.5, 0.3, -0.8]).as_matrix()


def case(*mounts: Mount, material: Material = STEEL, **more) -> Case:
    return Case(title="", shape=None, material=material, mounts=mounts, **more)  # type: ignore[arg-type]


def mount(hold: Hold, *faces: str, axes: tuple[str, ...] = ()) -> Mount:
    return Mount(hold=hold, faces=tuple(ByName(name=f) for f in faces), axes=axes)


def frequencies(mesh, *mounts, modes=8, **more) -> np.ndarray:
    return solve_spectrum(build_system(case(*mounts, **more), mesh), modes=modes).frequencies


def tube_wedge(points: np.ndarray) -> np.ndarray:
    """Return a box (radius - 16 mm, angle, z) rolled up to a sector of a tube."""
    r, angle, z = points.T + np.array([[0.016], [0.0], [0.0]])
    return np.column_stack([r * np.cos(angle), r * np.sin(angle), z])


def test_reduction_is_the_product_with_the_transformation(brick):
    mesh = brick((1.0, 0.8, 0.6), (2, 2, 1), warp=lambda p: p @ TURN.T)
    facets = mesh.facets
    constraint = make_constraint(
        len(mesh.points),
        [
            hold_normals(mesh.points, facets[mesh.faces["x_min"]]),
            hold_normals(mesh.points, facets[mesh.faces["y_max"]]),
            hold_axes(mesh.face_nodes("z_min")[:5], [0, 2]),
            hold_axes(mesh.face_nodes("x_max"), [0, 1, 2]),
        ],
    )
    matrices = assemble(mesh, MAPLE.stiffness(), 700.0)
    t = constraint.transformation
    columns = (t.T @ t).toarray()
    np.testing.assert_allclose(
        columns, np.diag(constraint.free[constraint.moving].ravel()), atol=1e-14
    )
    pins = 7.0 * (np.eye(len(columns)) - columns)
    for blocks, whole in (
        (matrices.blocks, matrices.stiffness),
        (scalar_blocks(matrices.masses), sp.kron(matrices.mass, sp.eye(3)).tocsr()),
    ):
        upper = reduce_blocks(matrices.pattern, blocks, constraint, pin=7.0)
        wanted = np.triu((t.T @ whole @ t).toarray() + pins)
        got = entries(upper)
        assert np.abs(got.toarray() - wanted).max() < 1e-13 * np.abs(wanted).max()
        # By blocks, the diagonal first in its row and whole.
        assert (upper.indices[upper.indptr[:-1]] == np.arange(len(constraint.moving))).all()
        assert (np.diff(upper.indptr) > 0).all()
        own = upper.data[upper.indptr[:-1]]
        np.testing.assert_allclose(own, own.transpose(0, 2, 1), atol=1e-13 * np.abs(own).max())
    y = np.random.default_rng(0).standard_normal((t.shape[1], 3))
    free = constraint.free[constraint.moving].reshape(-1, 1)
    np.testing.assert_allclose(constraint.to_vectors(y), t @ y, atol=1e-14)
    np.testing.assert_allclose(constraint.to_unknowns(t @ y), y * free, atol=1e-14)
    assert np.abs(constraint.violation(t @ y)).max() < 1e-14
    v = np.random.default_rng(1).standard_normal((3 * len(mesh.points), 2))
    np.testing.assert_allclose(constraint.to_unknowns(v), t.T @ v, atol=1e-14)
    allowed = np.matmul(constraint.projectors(), v.reshape(-1, 3, 2)).reshape(v.shape)
    np.testing.assert_allclose(allowed, t @ (t.T @ v), atol=1e-14)


def test_two_matrices_of_one_pattern_line_up(brick):
    mesh = brick((1.0, 0.8, 0.6), (2, 1, 1))
    mounts = (mount(Hold.CLAMPED, "x_min"), mount(Hold.HELD, "z_max", axes=("y",)))
    system = build_system(case(*mounts), mesh)
    shifted = system.shifted(-3.0)
    np.testing.assert_array_equal(shifted.indices, system.stiffness.indices)
    np.testing.assert_array_equal(shifted.indptr, system.stiffness.indptr)
    t = system.constraint.transformation
    mass = t.T @ sp.kron(system.mass, sp.eye(3)) @ t
    wanted = np.triu(system.stiffness.toarray()) + 3.0 * np.triu(mass.toarray())
    assert np.abs(np.triu(shifted.toarray()) - wanted).max() < 1e-13 * np.abs(wanted).max()


def test_clamped_nodes_stand_still_and_held_ones_keep_their_axes(brick):
    mesh = brick((0.1, 0.02, 0.01), (5, 1, 1))
    system = build_system(
        case(mount(Hold.CLAMPED, "x_min"), mount(Hold.HELD, "x_max", axes=("z",))), mesh
    )
    shapes = solve_spectrum(system, modes=4).shapes
    assert (shapes[:, mesh.face_nodes("x_min")] == 0.0).all()
    tip = shapes[:, mesh.face_nodes("x_max")]
    assert (tip[..., 2] == 0.0).all()
    assert np.abs(tip[..., 1]).max() > 0.1 * np.abs(shapes).max()
    n = len(mesh.points)
    clamped, held = len(mesh.face_nodes("x_min")), len(mesh.face_nodes("x_max"))
    assert system.unknowns == 3 * n - 3 * clamped - held


def test_sliding_on_a_plane_across_an_axis_is_holding_that_axis(brick):
    mesh = brick((0.1, 0.02, 0.01), (6, 2, 1))
    np.testing.assert_allclose(
        frequencies(mesh, mount(Hold.SLIDING, "x_min")),
        frequencies(mesh, mount(Hold.HELD, "x_min", axes=("x",))),
        rtol=1e-9,
    )


def test_oblique_supports_follow_the_body(brick):
    # The same body with the same supports, turned in space.
    straight = brick((0.1, 0.02, 0.01), (6, 2, 1))
    turned = brick((0.1, 0.02, 0.01), (6, 2, 1), warp=lambda p: p @ TURN.T)
    mounts = (mount(Hold.SLIDING, "x_min", "z_min"), mount(Hold.SLIDING, "y_max"))
    a, b = (build_system(case(*mounts), m) for m in (straight, turned))
    assert a.unknowns == b.unknowns
    assert a.rigid.shape[1] == b.rigid.shape[1] == 0
    np.testing.assert_allclose(
        solve_spectrum(a, modes=6).frequencies, solve_spectrum(b, modes=6).frequencies, rtol=1e-9
    )


def test_a_node_on_an_edge_of_two_sliding_faces_keeps_the_edge(brick):
    mesh = brick((1.0, 1.0, 1.0), (1, 1, 1), warp=lambda p: p @ TURN.T)
    facets = np.concatenate([mesh.facets[mesh.faces[f]] for f in ("x_min", "y_min")])
    constraint = make_constraint(len(mesh.points), [hold_normals(mesh.points, facets)])
    edge = np.intersect1d(mesh.face_nodes("x_min"), mesh.face_nodes("y_min"))
    assert (constraint.free[edge].sum(axis=1) == 1).all()
    at = np.searchsorted(constraint.turned, edge)
    left = constraint.directions[at][np.arange(len(edge)), :, constraint.free[edge].argmax(axis=1)]
    np.testing.assert_allclose(np.abs(left @ TURN[:, 2]), 1.0, atol=1e-12)
    corner = np.intersect1d(edge, mesh.face_nodes("z_min"))
    assert (constraint.free[corner].sum(axis=1) == 1).all()


def test_symmetric_and_antisymmetric_halves_make_the_whole(brick):
    # A bar halved lengthwise in the plane y = 0, which moves nothing across the
    # plane (symmetric) or nothing within it (antisymmetric).
    half = brick((0.08, 0.01, 0.006), (8, 1, 1))
    clamp = mount(Hold.CLAMPED, "x_min")
    even = frequencies(half, clamp, mount(Hold.SLIDING, "y_min"), modes=7)
    odd = frequencies(half, clamp, mount(Hold.HELD, "y_min", axes=("x", "z")), modes=7)
    both = frequencies(mirrored(half), clamp, modes=7)
    np.testing.assert_allclose(np.sort([*even, *odd])[:7], both[:7], rtol=1e-9)


def mirrored(mesh: Mesh) -> Mesh:
    """Return a body and its mirror image in y = 0 as one mesh."""
    image = mesh.points * [1, -1, 1]
    on_plane = mesh.points[:, 1] == 0.0
    number = np.empty(len(image), int)
    number[on_plane] = np.flatnonzero(on_plane)
    number[~on_plane] = len(image) + np.arange((~on_plane).sum())
    # Mirroring turns cells and facets inside out: swap two corners back.
    cells = number[mesh.cells[:, [0, 2, 1, 3, 6, 5, 4, 7, 9, 8]]]
    facets = number[mesh.facets[:, [0, 2, 1, 5, 4, 3]]]
    faces = {
        name: np.concatenate([at, at + len(mesh.facets)])
        for name, at in mesh.faces.items()
        if name != "y_min"
    }
    return replace(
        mesh,
        points=np.vstack([mesh.points, image[~on_plane]]),
        cells=np.vstack([mesh.cells, cells]),
        facets=np.vstack([mesh.facets, facets]),
        faces=faces,
    )


def test_sliding_on_a_cylinder_leaves_it_free_to_turn_and_shift(brick):
    # Half a tube whose outer side slides: turning about the axis and shifting
    # along it stay rigid motions, though the meshed normals are not quite radial.
    tube = brick((0.004, np.pi, 0.02), (1, 8, 2), warp=tube_wedge)
    system = build_system(case(mount(Hold.SLIDING, "x_max")), tube)
    assert system.rigid.shape[1] == 2
    spectrum = solve_spectrum(system, modes=3)
    assert spectrum.rigid_modes == 2
    assert spectrum.frequencies[0] > 1000.0
    outer = tube.face_nodes("x_max")
    radial = tube.points[outer] * [1, 1, 0]
    radial /= np.linalg.norm(radial, axis=1)[:, None]
    across = np.einsum("mki,ki->mk", spectrum.shapes[:, outer], radial)
    assert np.abs(across).max() < 2e-3 * np.abs(spectrum.shapes).max()


@pytest.mark.parametrize(
    ("mounts", "rigid"),
    [
        ((), 6),
        ((mount(Hold.FREE),), 6),
        ((mount(Hold.SLIDING, "z_min"),), 3),
        ((mount(Hold.SLIDING, "z_min", "y_min"),), 1),
        ((mount(Hold.SLIDING, "z_min", "y_min", "x_min"),), 0),
        ((mount(Hold.HELD, "x_min", axes=("y", "z")),), 3),
        ((mount(Hold.HELD, "x_min", axes=("x",)),), 3),
        ((mount(Hold.HELD, "x_min", axes=("x", "y")), mount(Hold.SLIDING, "z_max")), 0),
        ((mount(Hold.CLAMPED, "x_min"),), 0),
    ],
)
@pytest.mark.parametrize("warp", [None, lambda p: p @ TURN.T], ids=["straight", "turned"])
def test_rigid_motions_left_by_supports(brick, mounts, rigid, warp):
    if warp is not None and any(m.hold is Hold.HELD for m in mounts):
        pytest.skip("held axes do not turn with the body")
    mesh = brick((0.05, 0.02, 0.01), (3, 1, 1), warp=warp)
    system = build_system(case(*mounts), mesh)
    assert system.rigid.shape[1] == rigid
    spectrum = solve_spectrum(system, modes=2)
    assert spectrum.rigid_modes == rigid
    assert spectrum.frequencies[0] > 1000.0
    # They are motions of the constrained body, cost nothing, and are orthonormal.
    if rigid:
        assert np.abs(system.constraint.violation(system.rigid)).max() < 1e-12
        cost = np.abs(system.apply_stiffness(system.rigid)).max()
        assert cost < 1e-11 * abs(system.stiffness).max() * np.abs(system.rigid).max()
        gram = system.rigid.T @ system.apply_mass(system.rigid)
        np.testing.assert_allclose(gram, np.eye(rigid), atol=1e-12)


def test_holding_everything_is_refused(brick):
    # One cell: all its nodes lie on its surface.
    mesh = brick((0.01, 0.01, 0.01), (1, 1, 1))
    used, cells = np.unique(mesh.cells[:1], return_inverse=True)
    cells = cells.reshape(1, 10)
    sides = [[0, 2, 1, 6, 5, 4], [0, 1, 3, 4, 8, 7], [1, 2, 3, 5, 9, 8], [0, 3, 2, 7, 9, 6]]
    one = Mesh(
        points=mesh.points[used],
        cells=cells,
        facets=cells[0][sides],
        faces={"all": np.arange(4)},
    )
    with pytest.raises(InputError, match="hold every node"):
        build_system(case(mount(Hold.CLAMPED, "all")), one)


def test_an_unknown_face_is_named_with_its_key(brick):
    mesh = brick((0.01, 0.01, 0.01), (1, 1, 1))
    with pytest.raises(InputError, match=r"mount\.2\.faces.*roof.*x_min"):
        build_system(case(mount(Hold.CLAMPED, "x_min"), mount(Hold.CLAMPED, "roof")), mesh)
