"""Names of motions written down by hand, on meshes built here: the right name is known.

No solver and no mesher takes part, so nothing but the naming can be wrong.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import permutations

import numpy as np
import pytest
from modewright.fem.modal.element import cell_gradients, cell_quadrature, cell_values
from modewright.fem.modal.naming.identify import Identity, identify
from modewright.geometry.anatomy import Anatomy, Frame, Kind, Region, Role
from modewright.geometry.mesh import EDGES, Mesh
from scipy.sparse import csr_array
from scipy.special import jn_zeros, jv


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


# --- equal bending directions, clusters ---


def turned_pair(first, second, angle):
    c, s = np.cos(angle), np.sin(angle)
    return [c * first + s * second, c * second - s * first]


def unit(mesh, mass, field):
    u = np.stack(np.broadcast_arrays(*field(*mesh.points.T)), axis=1)
    return u / np.sqrt(np.sum(u * (mass @ u)))


@pytest.mark.parametrize("angle", [0.0, 0.6, 2.0, -1.1])
def test_equal_directions_part_along_the_axis(angle):
    side = ((0.0, LENGTH), (-0.003, 0.003), (-0.003, 0.003))
    mesh = blocks(side, divisions=[(24, 2, 2)])
    mass = mass_of(mesh)
    fields = []
    for n in (1, 2):
        up, across = (unit(mesh, mass, f(cantilever(n))) for f in (flatwise, edgewise))
        fields += turned_pair(up, across, angle * n)
    fields.append(unit(mesh, mass, torsion(1)))
    found = named(mesh, replace(BAR, square=True), fields, [200, 200.01, 1250, 1250.2, 4000])
    assert found.names == ("bending 1 a", "bending 1 b", "bending 2 a", "bending 2 b", "torsion 1")
    assert [label.pair for label in found.labels] == [
        "bending 1 b",
        "bending 1 a",
        "bending 2 b",
        "bending 2 a",
        None,
    ]
    for i, axis in ((0, 2), (1, 1), (2, 2), (3, 1)):
        sideways = np.linalg.norm(found.shapes[i], axis=0)
        assert sideways[axis] > 100 * sideways[3 - axis]
    for i, j in ((0, 0), (0, 1), (1, 1), (2, 2), (2, 3)):
        product = np.sum(found.shapes[i] * (mass @ found.shapes[j]))
        assert product == pytest.approx(float(i == j), abs=1e-7)


def test_split_directions_keep_their_letters():
    # A grain of solder on one side parts the pair by more than half a cent.
    side = ((0.0, LENGTH), (-0.003, 0.003), (-0.003, 0.003))
    mesh = blocks(side, divisions=[(24, 2, 2)])
    fields = [f(cantilever(n)) for n in (1, 2) for f in (edgewise, flatwise)]
    found = named(mesh, replace(BAR, square=True), fields, [200, 204, 1250, 1270])
    assert found.names == ("bending 1 b", "bending 1 a", "bending 2 b", "bending 2 a")
    assert {label.pair for label in found.labels} == {None}


@pytest.mark.parametrize("angle", [0.0, 0.5, 1.3])
def test_two_kinds_that_meet_are_told_apart(bar, angle):
    # Edgewise 1 crosses flatwise 2 and torsion 1: a solver returns any mixture.
    mass = mass_of(bar)
    kinds = (flatwise(cantilever(1)), flatwise(cantilever(2)), edgewise(cantilever(1)), torsion(1))
    first, *rest = (unit(bar, mass, f) for f in kinds)
    rng = np.random.default_rng(int(10 * angle))
    mix, _ = np.linalg.qr(rng.normal(size=(3, 3)))
    fields = [first, *np.tensordot(mix, np.array(rest), 1)]
    found = named(bar, BAR, fields, [100.0, 627.0, 627.1, 627.2])
    assert found.names[0] == "flatwise bending 1"
    assert set(found.names[1:]) == {"flatwise bending 2", "edgewise bending 1", "torsion 1"}
    for label in found.labels[1:]:
        assert label.shares is not None
        assert max(label.shares.values()) > 0.97
        assert label.pair in found.names[1:]


# --- prongs and tines ---

ROOT, GAP = 0.03, 0.001


def limbs(count, role):
    """A root and `count` limbs beside each other, and the anatomy that says so."""
    pitch = WIDTH / count
    sides = [(-WIDTH / 2 + i * pitch, -WIDTH / 2 + (i + 1) * pitch) for i in range(count)]
    inner = [(a + GAP / 4, b - GAP / 4) for a, b in sides]
    boxes = [((0, ROOT), SIDES[1], SIDES[2])]
    boxes += [((ROOT, LENGTH), (a, b), SIDES[2]) for a, b in inner]
    mesh = blocks(*boxes, divisions=[(6, 4, 1)] + [(14, 1, 1)] * count)
    regions = tuple(
        Region(role=role, number=i, low=(ROOT, a, -np.inf), high=(np.inf, b, np.inf))
        for i, (a, b) in enumerate(sides, 1)
    )
    return mesh, replace(BAR, regions=regions), sides


def limb_motion(sides, amounts, direction=2, root=0.05):
    """Each limb bends like a cantilever by its amount; the root a little, with the first."""

    def field(x, y, z):
        t = np.maximum(x - ROOT, 0.0)
        w = t**2 * (3 * (LENGTH - ROOT) - t) / (2 * (LENGTH - ROOT) ** 3) + root * x / LENGTH
        slope = (
            np.gradient(w, x)
            if False
            else 3 * t * (2 * (LENGTH - ROOT) - t) / (2 * (LENGTH - ROOT) ** 3)
        )
        amount = np.zeros_like(x)
        for (a, b), value in zip(sides, amounts, strict=True):
            amount[(y >= a) & (y <= b) & (x >= ROOT)] = value
        parts = [-(z if direction == 2 else 0 * z) * slope * amount, 0 * x, 0 * x]
        parts[direction] = w * amount
        return parts

    return field


def test_two_prongs_go_together_opposed_or_alone():
    mesh, anatomy, sides = limbs(2, Role.PRONG)
    fields = [
        limb_motion(sides, (1, 1)),
        limb_motion(sides, (-1, 1)),
        limb_motion(sides, (1, -1), direction=1),
        limb_motion(sides, (0.8, 1), direction=1),
        limb_motion(sides, (0.2, 1)),
        limb_motion(sides, (-1, 0.3)),
    ]
    labels = named(mesh, anatomy, fields).labels
    assert [label.name for label in labels] == [
        "flatwise bending 1, prongs together",
        "flatwise bending 1, prongs opposed",
        "edgewise bending 1, prongs opposed",
        "edgewise bending 1, prongs together",
        "flatwise bending 1, prong 2",
        "flatwise bending 1, prong 1",
    ]
    balances = [label.prong_balance for label in labels]
    wanted = [1, -1, -1, 1.6 / 1.64, 0.4 / 1.04, -0.6 / 1.09]
    assert balances == pytest.approx(wanted, abs=1e-3)
    for label in labels:
        assert label.tine_shares is not None
        assert label.root_share is not None
        assert sum(label.tine_shares) + label.root_share == pytest.approx(1.0)


def test_two_equal_prongs_meet_as_together_and_opposed():
    mesh, anatomy, sides = limbs(2, Role.PRONG)
    mass = mass_of(mesh)
    both, against = (unit(mesh, mass, limb_motion(sides, (1, k), root=0)) for k in (1, -1))
    found = named(mesh, anatomy, turned_pair(both, against, 0.7), [300.0, 300.01])
    assert set(found.names) == {
        "flatwise bending 1, prongs together",
        "flatwise bending 1, prongs opposed",
    }


def test_three_prongs_carry_a_mark_each():
    mesh, anatomy, sides = limbs(3, Role.PRONG)
    fields = [limb_motion(sides, a) for a in ((1, 1, 1), (-1, 0.05, 1), (-1, 2, -1), (0, 1, 0.1))]
    labels = named(mesh, anatomy, fields).labels
    assert [label.name for label in labels] == [
        "flatwise bending 1, prongs + + +",
        "flatwise bending 1, prongs + 0 -",
        "flatwise bending 1, prongs + - +",
        "flatwise bending 1, prong 2",
    ]
    assert {label.prong_balance for label in labels} == {None}


def test_twelve_equal_tines_each_have_their_mode():
    mesh, anatomy, sides = limbs(12, Role.TINE)
    mass = mass_of(mesh)
    each = np.array([unit(mesh, mass, limb_motion(sides, row, root=0)) for row in np.eye(12)])
    mix, _ = np.linalg.qr(np.random.default_rng(3).normal(size=(12, 12)))
    fields = list(np.tensordot(mix, each, 1))
    found = named(mesh, anatomy, fields, 440.0 * 2 ** (np.arange(12) * 0.1 / 1200))
    assert sorted(found.names) == sorted(f"flatwise bending 1, tine {i}" for i in range(1, 13))
    for label in found.labels:
        assert label.tine_shares is not None
        assert max(label.tine_shares) > 0.99


def test_shared_tines_are_told_by_their_range():
    mesh, anatomy, sides = limbs(6, Role.TINE)
    amounts = ((0, 0, 1, 1, 1, 0), (0, 0.1, 1, 0, 0, 0), (1, 1, 1, 1, 1, 1), (0, 0, 1, -1, 1, 0))
    found = named(mesh, anatomy, [limb_motion(sides, a) for a in amounts])
    assert found.names == (
        "flatwise bending 1, tines 3-5",
        "flatwise bending 1, tine 3",
        "flatwise bending 1, tines 1-6",
        "flatwise bending 2, tines 3-5",
    )


# --- plates ---

PLATE = Anatomy(kind=Kind.PLATE, length=0.2)


@pytest.fixture(scope="module")
def plate():
    return blocks(((-0.1, 0.1), (-0.06, 0.06), (-0.002, 0.002)), divisions=[(20, 14, 1)])


def surface(w, ends=(0.2, 0.12)):
    """A plate's motion of mean-surface deflection w(t along, t across), thin-plate slopes."""

    def field(x, y, z):
        def at(x, y):
            return w(x / ends[0] + 0.5, y / ends[1] + 0.5)

        h = 1e-6
        return (
            -z * (at(x + h, y) - at(x - h, y)) / (2 * h),
            -z * (at(x, y + h) - at(x, y - h)) / (2 * h),
            at(x, y),
        )

    return field


def shape(n):
    """The free-free beam's deflection with n nodes, over 0..1."""
    if n < 2:
        return (lambda t: 1 + 0 * t) if n == 0 else (lambda t: 2 * t - 1)
    w, _ = free(n - 1)
    return lambda t: w((1 - t) * LENGTH)


def product(m, n):
    return lambda s, t: shape(m)(s) * shape(n)(t)


def test_plates_are_named_by_their_nodal_lines(plate):
    orders = [(1, 1), (2, 0), (2, 1), (0, 2), (3, 0), (1, 2), (4, 2)]
    fields = [surface(product(*order)) for order in orders]
    fields.insert(3, lambda x, y, z: (np.sin(np.pi * x / 0.2), 0 * x, 0 * x))
    labels = named(plate, PLATE, fields).labels
    names = [f"plate ({m},{n})" for m, n in orders]
    names.insert(3, "plate in-plane 1")
    assert [label.name for label in labels] == names
    assert {label.shares is None for label in labels} == {True}


def test_two_equal_products_stand_both_in_the_name(plate):
    both = [
        lambda s, t: product(2, 0)(s, t) + 0.9 * product(0, 2)(s, t),
        lambda s, t: 0.85 * product(2, 0)(s, t) - product(0, 2)(s, t),
        lambda s, t: product(2, 0)(s, t) - 0.7 * product(0, 2)(s, t),
    ]
    assert named(plate, PLATE, [surface(w) for w in both]).names == (
        "plate (2,0)+(0,2)",
        "plate (2,0)-(0,2)",
        "plate (2,0)",
    )


def test_held_plates_count_only_inner_lines(plate):
    # Clamped at x_min: the first mode has no nodal line, the edge itself is none.
    def line(n):
        w, _ = cantilever(n)
        return lambda t: w(t * LENGTH)

    fields = [
        surface(lambda s, t, m=m, n=n: line(m + 1)(s) * shape(n)(t))
        for m, n in ((0, 0), (0, 1), (1, 0), (1, 1), (0, 2), (2, 0))
    ]
    assert named(plate, PLATE, fields).names == tuple(
        f"plate ({m},{n})" for m, n in ((0, 0), (0, 1), (1, 0), (1, 1), (0, 2), (2, 0))
    )


def test_plates_held_all_round_count_only_inner_lines(plate):
    orders = [(0, 0), (1, 0), (0, 1), (2, 0), (1, 1), (3, 1)]
    fields = [
        surface(lambda s, t, m=m, n=n: np.sin((m + 1) * np.pi * s) * np.sin((n + 1) * np.pi * t))
        for m, n in orders
    ]
    assert named(plate, PLATE, fields).names == tuple(f"plate ({m},{n})" for m, n in orders)


@pytest.mark.parametrize("angle", [0.3, 1.0])
def test_a_square_plate_s_equal_modes_part_by_direction(angle):
    mesh = blocks(((-0.1, 0.1), (-0.1, 0.1), (-0.002, 0.002)), divisions=[(14, 14, 1)])
    mass = mass_of(mesh)
    pair = [unit(mesh, mass, surface(product(*o), (0.2, 0.2))) for o in ((2, 1), (1, 2))]
    found = named(mesh, PLATE, turned_pair(*pair, angle), [500.0, 500.05])
    assert set(found.names) == {"plate (2,1)", "plate (1,2)"}
    assert {label.pair for label in found.labels} == set(found.names)


# --- round bodies ---


def round_body(radii, heights, divisions):
    def place(at):
        r, angle, z = at.T
        return np.stack([r * np.cos(angle), r * np.sin(angle), z], axis=1)

    return blocks((radii, (0, 2 * np.pi), heights), divisions=[divisions], place=place)


def cylindrical(radial, tangential, axial):
    """A field given by its components, functions of (r, angle, z)."""

    def field(x, y, z):
        r, angle = np.hypot(x, y), np.arctan2(y, x)
        u, v, w = (part(r, angle, z) + 0 * r for part in (radial, tangential, axial))
        c, s = np.cos(angle), np.sin(angle)
        return u * c - v * s, u * s + v * c, w

    return field


def nothing(r, angle, z):
    return 0 * r


def disc_field(d, c, phase=0.0, radius=0.08):
    # A Bessel function with c zeros inside, the last at four fifths of the radius.
    k = (jn_zeros(d, c)[-1] / 0.8 if c else 1.0) / radius
    return cylindrical(nothing, nothing, lambda r, a, z: jv(d, k * r) * np.cos(d * a - phase))


DISC = Anatomy(kind=Kind.DISC, round=True)


def test_discs_are_named_by_diameters_and_circles():
    mesh = round_body((0.0005, 0.08), (-0.001, 0.001), (10, 32, 1))
    kinds = [(2, 0), (0, 1), (3, 0), (1, 1), (0, 2), (5, 0), (2, 1)]
    fields, names, frequencies = [], [], []
    for i, (d, c) in enumerate(kinds):
        for j in range(2 if d else 1):
            # Any two directions, a quarter wave apart.
            fields.append(disc_field(d, c, phase=0.4 + j * np.pi / 2))
            frequencies.append(300.0 * (i + 1) + 0.01 * j)
        names += [f"disc ({d},{c}) a", f"disc ({d},{c}) b"] if d else [f"disc ({d},{c})"]
    fields.append(cylindrical(lambda r, a, z: r, nothing, nothing))
    frequencies.append(9000.0)
    names.append("disc in-plane 1")
    found = named(mesh, DISC, fields, frequencies)
    assert list(found.names) == names
    # `a` is symmetric about the angle zero: it moves there, where `b` stands still.
    edge = int(np.argmin(np.linalg.norm(mesh.points - (0.08, 0.0, 0.0), axis=1)))
    for i, name in enumerate(names):
        moves = abs(found.shapes[i, edge, 2]) / np.abs(found.shapes[i]).max()
        if name.endswith("a"):
            assert moves > 0.1
        elif name.endswith("b"):
            assert moves < 0.02


def test_rings_are_named_by_order_and_plane():
    radius = 0.05
    mesh = round_body((0.048, 0.052), (-0.002, 0.002), (1, 48, 1))

    def flexure(n, phase):
        return cylindrical(
            lambda r, a, z: np.cos(n * a - phase),
            lambda r, a, z: -np.sin(n * a - phase) / n,
            nothing,
        )

    def lift(n, phase):
        turn = 1.0 / radius
        return cylindrical(
            lambda r, a, z: turn * z * np.cos(n * a - phase),
            nothing,
            lambda r, a, z: (1 - turn * (r - radius)) * np.cos(n * a - phase),
        )

    def stretch(n, phase):
        return cylindrical(
            lambda r, a, z: np.cos(n * a - phase),
            lambda r, a, z: n * np.sin(n * a - phase),
            nothing,
        )

    def twist(n, phase):
        return cylindrical(
            lambda r, a, z: z * np.cos(n * a - phase),
            nothing,
            lambda r, a, z: -(r - radius) * np.cos(n * a - phase),
        )

    fields, names, frequencies = [], [], []
    kinds = [(lift, 2, "out-of-plane"), (flexure, 2, "in-plane"), (flexure, 3, "in-plane")]
    kinds += [(lift, 3, "out-of-plane"), (twist, 0, "torsional"), (stretch, 0, "extensional")]
    kinds += [(stretch, 1, "extensional"), (twist, 1, "torsional"), (stretch, 2, "extensional")]
    for i, (kind, n, word) in enumerate(kinds):
        for j in range(2 if n else 1):
            fields.append(kind(n, (1.1 if n else 0.0) + j * np.pi / 2))
            frequencies.append(200.0 * (i + 1) * 2 ** (0.1 * j / 1200))
        names += [f"ring {n} {word} a", f"ring {n} {word} b"] if n else [f"ring {n} {word}"]
    found = named(mesh, Anatomy(kind=Kind.RING, round=True), fields, frequencies)
    assert list(found.names) == names
    assert not any(label.mixed for label in found.labels)
    assert found.labels[0].pair == names[1]


TUBE_LENGTH = 0.3


def test_tubes_take_bar_names_then_shell_names():
    mesh = round_body((0.011, 0.013), (0.0, TUBE_LENGTH), (1, 24, 30))

    def bend(n, phase):
        w, slope = free(n)
        stretch = LENGTH / TUBE_LENGTH

        def field(x, y, z):
            u = w(z * stretch)
            away = x * np.cos(phase) + y * np.sin(phase)
            return np.cos(phase) * u, np.sin(phase) * u, -away * stretch * slope(z * stretch)

        return field

    def shell(n, c, phase):
        return cylindrical(
            lambda r, a, z: np.cos(c * np.pi * z / TUBE_LENGTH) * np.cos(n * a - phase),
            lambda r, a, z: -np.cos(c * np.pi * z / TUBE_LENGTH) * np.sin(n * a - phase) / n,
            nothing,
        )

    kinds = [(bend, (1,), "bending 1"), (bend, (2,), "bending 2"), (shell, (2, 0), "shell (2,0)")]
    kinds += [(shell, (2, 1), "shell (2,1)"), (shell, (3, 2), "shell (3,2)")]
    kinds += [(shell, (2, 1), "shell (2,1)")]
    fields, names, frequencies = [], [], []
    for i, (kind, order, name) in enumerate(kinds):
        for j in range(2):
            fields.append(kind(*order, 0.5 + j * np.pi / 2))
            frequencies.append(400.0 * (i + 1) * 2 ** (0.1 * j / 1200))
        names += [f"{name} a", f"{name} b"]
    names[-2:] = [f"{name} #2" for name in names[-2:]]
    k = np.pi / TUBE_LENGTH
    fields.append(cylindrical(nothing, lambda r, a, z: r * np.cos(k * z), nothing))
    fields.append(cylindrical(nothing, nothing, lambda r, a, z: np.cos(k * z)))
    frequencies += [5000.0, 6000.0]
    names += ["torsion 1", "axial 1"]
    found = named(mesh, Anatomy(kind=Kind.REVOLVED, round=True), fields, frequencies)
    assert list(found.names) == names
    assert {label.shares is None for label in found.labels} == {True}
    first = np.array(found.labels[0].nodal_points_mm) / (1e3 * TUBE_LENGTH)
    np.testing.assert_allclose(first, (0.224, 0.776), atol=2e-3)


def test_bells_count_circles_along_the_wall():
    # A hemisphere, crown down: the wall's own normal, radius and height both vary.
    def place(at):
        r, angle, polar = at.T
        return np.stack(
            [
                r * np.sin(polar) * np.cos(angle),
                r * np.sin(polar) * np.sin(angle),
                r * (1 - np.cos(polar)),
            ],
            axis=1,
        )

    box = ((0.048, 0.05), (0, 2 * np.pi), (0.05, np.pi / 2))
    mesh = blocks(box, divisions=[(1, 32, 16)], place=place)
    mesh = replace(mesh, cells=mesh.cells[:, [1, 0, 2, 3, 4, 6, 5, 8, 7, 9]])

    def field(n, c):
        def parts(x, y, z):
            radius, angle = np.hypot(x, y), np.arctan2(y, x)
            polar = np.arctan2(radius, 0.049 - z)
            size = np.sin(polar) ** n * np.cos(4 * c * polar**2 / np.pi) * np.cos(n * angle)
            out = np.sin(polar) * size
            return out * np.cos(angle), out * np.sin(angle), -np.cos(polar) * size

        return parts

    orders = [(2, 0), (2, 1), (3, 1), (4, 0), (3, 2)]
    found = named(mesh, Anatomy(kind=Kind.REVOLVED, round=True), [field(*o) for o in orders])
    assert found.names == tuple(f"shell ({n},{c}) a" for n, c in orders)


# --- no kind ---


def test_bodies_without_a_kind_are_numbered():
    mesh = blocks(((0, 0.1), (0, 0.1), (0, 0.1)), divisions=[(4, 4, 4)])
    fields = [lambda x, y, z, k=k: (np.sin(k * x), np.cos(k * y), z * k) for k in (10, 20, 30)]
    found = named(mesh, Anatomy(kind=Kind.NONE), fields, [100, 100.001, 300])
    assert found.names == ("mode 1", "mode 2", "mode 3")
    assert [label.pair for label in found.labels] == ["mode 2", "mode 1", None]
