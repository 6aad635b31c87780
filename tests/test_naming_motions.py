"""Names of motions written down by hand, on meshes built here: the right name is known.

No solver and no mesher takes part, so nothing but the naming can be wrong.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import permutations

import numpy as np
import pytest
from scipy.sparse import csr_array

from modewright.fem.modal.element import cell_gradients, cell_quadrature, cell_values
from modewright.fem.modal.naming.identify import Identity, identify
from modewright.geometry.anatomy import Anatomy, Frame, Kind, Region, Role
from modewright.geometry.mesh import EDGES, Mesh

FAR = 1.0


def blocks(*boxes, divisions, place=None):
    """A mesh of boxes ((x0, x1), (y0, y1), (z0, z1)), each cut into small cells.

    Boxes share no nodes where they touch: only sums over the body are needed.
    `place` maps the points afterwards, cell edges to curves.
    """
    points, cells, start = [], [], 0
    for box, counts in zip(boxes, divisions, strict=True):
        axes = [np.linspace(*side, 2 * n + 1) for side, n in zip(box, counts, strict=True)]
        grid = np.stack(np.meshgrid(*axes, indexing="ij"), axis=-1).reshape(-1, 3)
        shape = tuple(2 * n + 1 for n in counts)
        base = np.stack(np.meshgrid(*[np.arange(n) * 2 for n in counts], indexing="ij"), axis=-1)
        base = base.reshape(-1, 3)
        for order in permutations(range(3)):
            corners = [np.zeros(3, int)]
            for axis in order:
                corners.append(corners[-1] + 2 * np.eye(3, dtype=int)[axis])
            even = np.linalg.det(np.array(corners[1:])) > 0
            if not even:
                corners[2], corners[3] = corners[3], corners[2]
            corners += [(corners[i] + corners[j]) // 2 for i, j in EDGES]
            nodes = [np.ravel_multi_index((base + c).T, shape) for c in corners]
            cells.append(np.stack(nodes, axis=1) + start)
        points.append(grid)
        start += len(grid)
    at = np.concatenate(points)
    return Mesh(
        points=at if place is None else place(at),
        cells=np.concatenate(cells),
        facets=np.zeros((0, 6), int),
    )


def mass_of(mesh, density=8000.0):
    at, weights = cell_quadrature(4)
    values = cell_values(at)
    jacobian = np.einsum("cai,qaj->cqij", mesh.points[mesh.cells], cell_gradients(at))
    measure = np.abs(np.linalg.det(jacobian)) * weights * density
    local = np.einsum("cq,qa,qb->cab", measure, values, values)
    rows = np.repeat(mesh.cells, 10, axis=1).ravel()
    columns = np.tile(mesh.cells, (1, 10)).ravel()
    n = len(mesh.points)
    return csr_array((local.ravel(), (rows, columns)), shape=(n, n))


def named(mesh, anatomy, fields, frequencies=None) -> Identity:
    """Identify fields, functions of (x, y, z) giving three components."""
    mass = mass_of(mesh)
    shapes = []
    for field in fields:
        if callable(field):
            parts = field(*mesh.points.T)
            field = np.stack([np.broadcast_to(p, len(mesh.points)) for p in parts], axis=1)
        shapes.append(field / np.sqrt(np.sum(field * (mass @ field))))
    if frequencies is None:
        frequencies = 100.0 * (1.0 + np.arange(len(fields)))
    return identify(mesh, anatomy, np.asarray(frequencies, float), np.array(shapes), mass)


# --- bars ---

LENGTH, WIDTH, THICK = 0.1, 0.012, 0.004
SIDES = ((0.0, LENGTH), (-WIDTH / 2, WIDTH / 2), (-THICK / 2, THICK / 2))
BAR = Anatomy(kind=Kind.BAR, length=LENGTH, ends=("root", "tip"))
CANTILEVER = (1.8751040687119611, 4.694091132974174, 7.854757438237613)
FREE = (4.730040744862704, 7.853204624095838, 10.995607838001671)


@pytest.fixture(scope="module")
def bar():
    return blocks(SIDES, divisions=[(40, 4, 2)])


def cantilever(n):
    b = CANTILEVER[n - 1] / LENGTH
    s = (np.sinh(b * LENGTH) - np.sin(b * LENGTH)) / (np.cosh(b * LENGTH) + np.cos(b * LENGTH))

    def w(x):
        return np.cosh(b * x) - np.cos(b * x) - s * (np.sinh(b * x) - np.sin(b * x))

    def slope(x):
        return b * (np.sinh(b * x) + np.sin(b * x) - s * (np.cosh(b * x) - np.cos(b * x)))

    return w, slope


def free(n):
    b = FREE[n - 1] / LENGTH
    s = (np.cosh(b * LENGTH) - np.cos(b * LENGTH)) / (np.sinh(b * LENGTH) - np.sin(b * LENGTH))

    def w(x):
        return np.cosh(b * x) + np.cos(b * x) - s * (np.sinh(b * x) + np.sin(b * x))

    def slope(x):
        return b * (np.sinh(b * x) - np.sin(b * x) - s * (np.cosh(b * x) + np.cos(b * x)))

    return w, slope


def flatwise(line):
    w, slope = line
    return lambda x, y, z: (-z * slope(x), 0 * x, w(x))


def edgewise(line):
    w, slope = line
    return lambda x, y, z: (-y * slope(x), w(x), 0 * x)


def torsion(n):
    k = (n - 0.5) * np.pi / LENGTH
    return lambda x, y, z: (0 * x, -z * np.sin(k * x), y * np.sin(k * x))


def axial(n):
    k = (n - 0.5) * np.pi / LENGTH
    return lambda x, y, z: (np.sin(k * x), 0 * x, 0 * x)


def crosswise(n):
    return lambda x, y, z: (0 * x, 0 * x, (y**2 - WIDTH**2 / 12) * np.cos(n * np.pi * x / LENGTH))


ORDERED = (
    (flatwise(cantilever(1)), "flatwise bending 1"),
    (edgewise(cantilever(1)), "edgewise bending 1"),
    (flatwise(cantilever(2)), "flatwise bending 2"),
    (torsion(1), "torsion 1"),
    (flatwise(cantilever(3)), "flatwise bending 3"),
    (axial(1), "axial 1"),
    (torsion(2), "torsion 2"),
    (edgewise(cantilever(2)), "edgewise bending 2"),
    (crosswise(1), "crosswise bending 1"),
)


def test_a_bar_is_named_by_what_moves(bar):
    fields, names = zip(*ORDERED, strict=True)
    labels = named(bar, BAR, fields).labels
    assert tuple(label.name for label in labels) == names
    for label in labels:
        assert label.shares is not None
        assert sum(label.shares.values()) == pytest.approx(1.0, abs=1e-12)
        assert not label.mixed
        assert max(label.shares.values()) > 0.98
        assert label.pair is None
        assert label.root_share is label.tine_shares is label.prong_balance is None


def test_shares_of_a_sum_of_motions_are_those_of_its_energies(bar):
    # Half the energy bends, 0.3 twists, 0.2 runs along: amplitudes by their roots.
    mass = mass_of(bar)
    parts = []
    for field, share in ((flatwise(cantilever(1)), 0.45), (torsion(1), 0.33), (axial(1), 0.22)):
        u = np.stack(field(*bar.points.T), axis=1)
        parts.append(np.sqrt(share / np.sum(u * (mass @ u))) * u)
    label = named(bar, BAR, [sum(parts)]).labels[0]
    assert label.shares is not None
    assert label.shares["flatwise bending"] == pytest.approx(0.45, abs=2e-3)
    assert label.shares["torsion"] == pytest.approx(0.33, abs=2e-3)
    assert label.shares["axial"] == pytest.approx(0.22, abs=2e-3)
    assert label.name == "flatwise bending 1"
    assert label.mixed


def test_rotation_of_sections_belongs_to_bending(bar):
    # A stubby bar's slope carries much energy; the same bar without it does not.
    w, slope = cantilever(3)
    label = named(bar, BAR, [flatwise((w, lambda x: 3.0 * slope(x)))]).labels[0]
    assert label.shares is not None
    # Turning slices three times too far is still rigid motion about y.
    assert label.shares["flatwise bending"] > 0.99


def test_names_do_not_depend_on_sign(bar):
    fields, names = zip(*ORDERED, strict=True)
    mass = mass_of(bar)
    both = []
    for sign in (1.0, -1.0):
        shapes = [sign * np.stack(f(*bar.points.T), axis=1) for f in fields]
        shapes = np.array([u / np.sqrt(np.sum(u * (mass @ u))) for u in shapes])
        both.append(identify(bar, BAR, 100.0 + 50 * np.arange(len(fields)), shapes, mass))
    assert both[0].names == both[1].names == names
    np.testing.assert_allclose(both[0].shapes, both[1].shapes, rtol=0, atol=0)


def test_names_and_signs_do_not_depend_on_the_mesh(bar):
    fields, names = zip(*ORDERED, strict=True)
    coarse = blocks(SIDES, divisions=[(17, 2, 1)])
    fine, rough = named(bar, BAR, fields), named(coarse, BAR, fields)
    assert rough.names == fine.names == names
    for near, far in zip(fine.labels, rough.labels, strict=True):
        assert near.shares is not None
        assert far.shares == pytest.approx(near.shares, abs=0.01)
    # Same sign: the tip corner goes the same way on both meshes.
    for shapes in zip(fine.shapes, rough.shapes, strict=True):
        tips = [
            u[np.argmin(np.linalg.norm(m.points - (LENGTH, WIDTH / 2, THICK / 2), axis=1))]
            for u, m in zip(shapes, (bar, coarse), strict=True)
        ]
        assert tips[0] @ tips[1] > 0


def test_names_follow_the_frame_of_the_body(bar):
    # The same bar lying askew, its frame with it: an imported body.
    rng = np.random.default_rng(5)
    axes, _ = np.linalg.qr(rng.normal(size=(3, 3)))
    axes *= np.sign(np.linalg.det(axes))
    origin = np.array([0.3, -0.2, 0.7])
    moved = replace(bar, points=bar.points @ axes + origin)
    frame = Frame(origin=tuple(origin), axes=tuple(map(tuple, axes)))
    fields, names = zip(*ORDERED, strict=True)
    here = [np.stack(f(*bar.points.T), axis=1) for f in fields]
    still = named(bar, BAR, here)
    turned = named(moved, replace(BAR, frame=frame), [u @ axes for u in here])
    assert turned.names == names
    np.testing.assert_allclose(turned.shapes, still.shapes @ axes, atol=1e-9)
    for one, other in zip(still.labels, turned.labels, strict=True):
        assert one.nodal_points_mm == pytest.approx(other.nodal_points_mm, abs=1e-3)


def test_nodal_points_of_a_free_bar_are_those_of_the_beam(bar):
    # Blevins, Formulas for Natural Frequency and Mode Shape (1979), table 8-1, free-free beam:
    # nodes at 0.224, 0.776; 0.132, 0.5, 0.868; 0.0944, 0.356, 0.644, 0.906 of the length.
    labels = named(bar, BAR, [flatwise(free(n)) for n in (1, 2, 3)]).labels
    wanted = ((0.224, 0.776), (0.132, 0.5, 0.868), (0.0944, 0.356, 0.644, 0.906))
    for label, nodes in zip(labels, wanted, strict=True):
        got = np.array(label.nodal_points_mm) / (1e3 * LENGTH)
        np.testing.assert_allclose(got, nodes, atol=6e-4)


def test_nodal_points_of_a_held_bar_leave_the_root_out(bar):
    # Same table, clamped-free beam: 0.774; 0.501, 0.868.
    fields = [flatwise(cantilever(1)), edgewise(cantilever(2)), flatwise(cantilever(3)), torsion(1)]
    labels = named(bar, BAR, fields).labels
    assert labels[0].nodal_points_mm == ()
    assert labels[3].nodal_points_mm == ()
    np.testing.assert_allclose(labels[1].nodal_points_mm, [78.3], atol=0.1)
    np.testing.assert_allclose(labels[2].nodal_points_mm, [50.3, 86.8], atol=0.1)
