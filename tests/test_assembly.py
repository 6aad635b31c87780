"""Stiffness and mass against an independent assembly, and what elasticity demands."""

import numpy as np
import pytest
import scipy.sparse as sp
import skfem
from modewright.fem.modal import assembly
from modewright.fem.modal.assembly import assemble, curved_cells
from modewright.fem.modal.material import Material
from modewright.fem.modal.pattern import make_pattern
from modewright.fem.modal.rigid import rigid_motions
from modewright.geometry.mesh import Mesh
from scipy.spatial.transform import Rotation
from skfem.helpers import ddot, dot, sym_grad

STEEL = Material(name="steel", youngs_modulus=205e9, poisson_ratio=0.29, density=7850.0)
MAPLE = Material(
    name="maple",
    youngs_modulus=(13.86e9, 0.9009e9, 1.82952e9),
    shear_modulus=(0.87318e9, 1.53846e9, 0.29106e9),
    poisson_ratio=(0.476, 0.424, 0.3811),
    density=705.6,
)


def bent(points: np.ndarray) -> np.ndarray:
    """Return points moved smoothly, so that cells get curved sides."""
    x, y, z = points.T
    return points + 0.08 * np.column_stack([y * z, np.sin(2 * x), x * x - y * z])


def voigt_tensor(stiffness: np.ndarray) -> np.ndarray:
    """Return C_ijkl of a Voigt matrix."""
    row = np.array([[0, 5, 4], [5, 1, 3], [4, 3, 2]])
    return stiffness[row[:, :, None, None], row[None, None]]


def voigt_matrix(tensor: np.ndarray) -> np.ndarray:
    first, second = np.array([0, 1, 2, 1, 0, 0]), np.array([0, 1, 2, 2, 2, 1])
    return tensor[first[:, None], second[:, None], first, second]


def reference(mesh: Mesh, stiffness: np.ndarray, density: float, degrees: tuple[int, int]):
    """Return K, M of scikit-fem's ready-made vector element, in our numbering."""
    doubled = skfem.MeshTet2(mesh.points.T.copy(), mesh.cells.T.copy())
    element = skfem.ElementVector(skfem.ElementTetP2())
    tensor = voigt_tensor(stiffness)

    @skfem.BilinearForm
    def elastic(u, v, w):
        stress = np.einsum("ijkl,kl...->ij...", tensor, sym_grad(u))
        return ddot(stress, sym_grad(v))

    @skfem.BilinearForm
    def inertia(u, v, w):
        return density * dot(u, v)

    basis = skfem.Basis(doubled, element, intorder=degrees[0])
    k = elastic.assemble(basis)
    m = inertia.assemble(skfem.Basis(doubled, element, intorder=degrees[1]))
    # Where each of its unknowns sits tells which node of ours it is.
    where = basis.doflocs.T[0::1]
    order = np.empty(len(where), int)
    nodes = {tuple(np.round(p, 9)): i for i, p in enumerate(mesh.points)}
    for dof, place in enumerate(where):
        order[dof] = nodes[tuple(np.round(place, 9))]
    component = np.zeros(len(where), int)
    for node in range(len(mesh.points)):
        mine = np.flatnonzero(order == node)
        component[mine] = np.arange(3)
    new = 3 * order + component
    swap = sp.csr_matrix((np.ones(len(new)), (new, np.arange(len(new)))))
    return swap @ k @ swap.T, swap @ m @ swap.T


def rotated(stiffness: np.ndarray, turn: np.ndarray) -> np.ndarray:
    """Return the stiffness of a material turned by a rotation matrix."""
    tensor = np.einsum(
        "ia,jb,kc,ld,abcd->ijkl", turn, turn, turn, turn, voigt_tensor(stiffness), optimize=True
    )
    return voigt_matrix(tensor)


TURN = Rotation.from_euler("zyx", [0.5, 0.3, -0.8]).as_matrix()


@pytest.mark.parametrize("warp", [None, bent], ids=["straight", "curved"])
@pytest.mark.parametrize(
    "stiffness",
    [STEEL.stiffness(), rotated(MAPLE.stiffness(), TURN)],
    ids=["isotropic", "anisotropic"],
)
def test_agrees_with_a_ready_made_vector_form(brick, warp, stiffness):
    mesh = brick((1.0, 0.8, 0.6), (2, 2, 1), warp=warp)
    bent_rule = (assembly.CURVED_STIFFNESS, assembly.CURVED_MASS)
    degrees = bent_rule if warp else (assembly.STRAIGHT_STIFFNESS, assembly.STRAIGHT_MASS)
    assert curved_cells(mesh.points, mesh.cells).all() == (warp is not None)
    ours = assemble(mesh, stiffness, 7850.0)
    # The other side's rules beyond degree 4 are those of `element.cell_quadrature`.
    k, m = reference(mesh, stiffness, 7850.0, tuple(d + (d > 4) for d in degrees))
    assert abs(ours.stiffness - k).max() < 1e-10 * abs(k).max()
    whole = sp.kron(ours.mass, sp.eye(3)).tocsr()
    assert abs(whole - m).max() < 1e-10 * abs(m).max()


def test_straight_and_curved_paths_agree_on_a_straight_body(brick, monkeypatch):
    mesh = brick((1.0, 0.8, 0.6), (2, 2, 2))
    straight = assemble(mesh, MAPLE.stiffness(), 700.0)
    monkeypatch.setattr(assembly, "_STRAIGHT", -1.0)
    curved = assemble(mesh, MAPLE.stiffness(), 700.0)
    assert np.abs(straight.blocks - curved.blocks).max() < 1e-13 * np.abs(straight.blocks).max()
    np.testing.assert_allclose(straight.masses, curved.masses, atol=1e-13 * straight.masses.max())


def test_a_mixture_of_straight_and_curved_cells(brick):
    # Only the far half is bent; each cell must get its own rule.
    def half(points):
        moved = bent(points)
        return np.where(
            points[:, :1] > 0.5,
            moved - bent(points * [0, 1, 1] + [0.5, 0, 0]) + points * [0, 1, 1] + [0.5, 0, 0],
            points,
        )

    mesh = brick((1.0, 0.8, 0.6), (2, 2, 1), warp=half)
    curved = curved_cells(mesh.points, mesh.cells)
    assert 0 < curved.sum() < len(curved)
    whole = assemble(mesh, STEEL.stiffness(), 1.0)
    parts = [
        assemble(
            Mesh(points=mesh.points, cells=mesh.cells[part], facets=mesh.facets),
            STEEL.stiffness(),
            1.0,
            pattern=make_pattern(mesh.cells[part], len(mesh.points)),
        )
        for part in (curved, ~curved)
    ]
    total = parts[0].stiffness + parts[1].stiffness
    assert abs(whole.stiffness - total).max() < 1e-13 * abs(total).max()


@pytest.mark.parametrize("warp", [None, bent], ids=["straight", "curved"])
def test_rigid_motions_cost_nothing(brick, warp):
    mesh = brick((1.0, 0.8, 0.6), (2, 2, 2), warp=warp)
    k = assemble(mesh, MAPLE.stiffness(), 1.0).stiffness
    motions = rigid_motions(mesh.points)
    assert np.linalg.matrix_rank(motions) == 6
    assert np.abs(k @ motions).max() < 1e-13 * abs(k).max() * np.abs(motions).max() * 30


def test_patch_of_constant_strain_is_exact(brick):
    # The energy of any linear displacement is half the strain's square times the
    # volume, on straight and (isoparametric) curved cells alike.
    gradient = np.array([[1.0, 0.3, -0.2], [0.1, -0.5, 0.4], [0.7, 0.2, 0.6]]) * 1e-3
    strain = 0.5 * (gradient + gradient.T)
    for warp in (None, bent):
        mesh = brick((1.0, 0.8, 0.6), (2, 2, 2), warp=warp)
        matrices = assemble(mesh, MAPLE.stiffness(), 1.0)
        u = (mesh.points @ gradient.T).ravel()
        volume = matrices.mass.sum()
        density = np.einsum("ij,ijkl,kl", strain, voigt_tensor(MAPLE.stiffness()), strain)
        # Curved cells: the shapes' gradients are rational, so the rule is not exact.
        assert u @ (matrices.stiffness @ u) == pytest.approx(
            density * volume, rel=1e-12 if warp is None else 1e-5
        )


def test_mass_sums_to_density_times_volume(brick):
    mesh = brick((1.0, 0.8, 0.6), (3, 2, 2))
    mass = assemble(mesh, STEEL.stiffness(), 7850.0).mass
    assert mass.sum() == pytest.approx(7850.0 * 0.48, rel=1e-13)
    # First and second moments too: the mass matrix integrates quadratics exactly.
    x = mesh.points[:, 0]
    assert x @ mass @ np.ones_like(x) == pytest.approx(7850.0 * 0.48 / 2, rel=1e-12)
    assert x @ mass @ x == pytest.approx(7850.0 * 0.48 / 3, rel=1e-12)


def test_the_pattern_may_be_kept_when_points_move(brick):
    mesh = brick((1.0, 0.8, 0.6), (2, 2, 1))
    moved = brick((1.1, 0.7, 0.5), (2, 2, 1), warp=bent)
    pattern = make_pattern(mesh.cells, len(mesh.points))
    kept = assemble(moved, STEEL.stiffness(), 7850.0, pattern)
    fresh = assemble(moved, STEEL.stiffness(), 7850.0)
    np.testing.assert_array_equal(kept.blocks, fresh.blocks)
    np.testing.assert_array_equal(kept.masses, fresh.masses)


def test_the_pattern_does_not_depend_on_how_pairs_are_sorted(brick, monkeypatch):
    mesh = brick((1.0, 0.8, 0.6), (2, 2, 2))
    packed = make_pattern(mesh.cells, len(mesh.points))
    # A node count this large does not fit one word and takes the other path.
    import modewright.fem.modal.pattern as module

    low = np.array([5, 1, 5, 0, 1], np.int64)
    high = np.array([7, 2, 7, 3, 9], np.int64)
    small, large = module._sorted_pairs(low, high, 10), module._sorted_pairs(low, high, 2**31)
    np.testing.assert_array_equal(small[1], large[1])
    assert (np.diff(packed.rows * packed.nodes + packed.indices) > 0).all()
