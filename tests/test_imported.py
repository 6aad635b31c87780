"""Kind and axes of bodies known by their mesh alone: they turn with the body."""

from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from modewright.geometry.anatomy import Kind
from modewright.geometry.imported import imported_anatomy
from modewright.geometry.mesh import Mesh
from modewright.geometry.tetrahedra import boundary, raised, split, turned_positive
from scipy.spatial.transform import Rotation

TURNS = [Rotation.from_rotvec(v).as_matrix() for v in ((0.3, -1.2, 0.7), (2.0, 0.1, 0.4))]
SHIFT = np.array([0.1, -0.2, 0.05])


def lattice(sides: tuple[float, float, float], at: tuple[float, float, float], cells=(6, 3, 2)):
    """Return points and tetrahedra of a block of `sides` mm with its low corner `at`."""
    n = np.array(cells)
    steps = [np.linspace(0, s, k + 1) for s, k in zip(sides, n, strict=True)]
    points = np.stack(np.meshgrid(*steps, indexing="ij"), -1).reshape(-1, 3) + at
    number = np.arange(len(points)).reshape(n + 1)
    corner = [(0, 0, 0), (1, 0, 0), (1, 1, 0), (0, 1, 0)]
    corner += [(i, j, 1) for i, j, _ in corner]
    i, j, k = n
    bricks = np.column_stack(
        [number[a : a + i, b : b + j, c : c + k].ravel() for a, b, c in corner]
    )
    return points * 1e-3, turned_positive(points, split("hexahedron", bricks))


def body(*blocks, warp=None) -> Mesh:
    """Return a mesh of blocks laid beside each other; moments do not mind that they only touch."""
    points, tets, count = [], [], 0
    for p, t in blocks:
        points.append(p)
        tets.append(t + count)
        count += len(p)
    nodes = np.concatenate(points)
    nodes, cells = raised(nodes if warp is None else warp(nodes), np.concatenate(tets))
    return Mesh(points=nodes, cells=cells, facets=boundary(cells))


def turned(mesh: Mesh, turn: np.ndarray) -> Mesh:
    return replace(mesh, points=mesh.points @ turn.T + SHIFT)


BAR = body(lattice((60, 8, 2), (0, -4, -1)))
#: A foot at one end, to one side, on the upper face: no symmetry at all.
FOOTED = body(lattice((60, 8, 2), (0, 0, 0)), lattice((10, 4, 3), (0, 4, 2)))
PLATE = body(lattice((50, 30, 3), (-25, -15, 0)), lattice((10, 8, 3), (25, 0, 0)))


@pytest.mark.parametrize(
    ("sides", "kind"),
    [
        ((60, 8, 2), Kind.BAR),
        ((24, 8, 2), Kind.BAR),
        ((23.9, 8, 1.7), Kind.NONE),
        ((23.9, 8, 1.6), Kind.PLATE),
        ((20, 20, 20), Kind.NONE),
        ((20, 20, 4), Kind.PLATE),
        ((20, 20, 4.1), Kind.NONE),
    ],
)
def test_kind_by_the_two_ratios(sides, kind: Kind) -> None:
    mesh = body(lattice(sides, (3, 4, 5)))
    assert imported_anatomy(mesh).kind is kind
    for turn in TURNS:
        assert imported_anatomy(turned(mesh, turn)).kind is kind


def test_bar_frame() -> None:
    anatomy = imported_anatomy(BAR)
    np.testing.assert_allclose(anatomy.frame.axes, np.eye(3), atol=1e-9)
    np.testing.assert_allclose(anatomy.frame.origin, 0, atol=1e-12)
    assert anatomy.length == pytest.approx(0.06)
    assert not anatomy.square


@pytest.mark.parametrize("mesh", [FOOTED, PLATE], ids=["bar", "plate"])
@pytest.mark.parametrize("turn", TURNS)
def test_axes_turn_with_the_body(mesh: Mesh, turn: np.ndarray) -> None:
    rest, moved = imported_anatomy(mesh), imported_anatomy(turned(mesh, turn))
    np.testing.assert_allclose(moved.frame.axes, np.array(rest.frame.axes) @ turn.T, atol=1e-9)
    np.testing.assert_allclose(moved.frame.origin, turn @ rest.frame.origin + SHIFT, atol=1e-9)
    assert moved.length == pytest.approx(rest.length)


@pytest.mark.parametrize("mesh", [BAR, FOOTED, PLATE])
def test_frame_is_right_handed_and_orthonormal(mesh: Mesh) -> None:
    axes = np.array(imported_anatomy(mesh).frame.axes)
    np.testing.assert_allclose(axes @ axes.T, np.eye(3), atol=1e-12)
    assert np.linalg.det(axes) == pytest.approx(1)


def test_origin_is_at_the_first_end_and_the_long_tail_points_along() -> None:
    anatomy = imported_anatomy(FOOTED)
    local = anatomy.frame.local(FOOTED.points)
    assert local[:, 0].min() == pytest.approx(0, abs=1e-12)
    assert local[:, 0].max() == pytest.approx(anatomy.length)
    # The foot is at x = 0, so the thin tail, where the third moment lies, is the far end.
    assert anatomy.frame.axes[0][0] > 0.99


def test_square_section_lies_along_its_sides() -> None:
    mesh = body(lattice((60, 6, 6), (0, -3, -3), cells=(8, 2, 2)))
    for turn in (np.eye(3), *TURNS):
        anatomy = imported_anatomy(turned(mesh, turn))
        assert anatomy.square
        across = np.abs(turn.T @ anatomy.frame.axes[1])
        assert across.max() == pytest.approx(1, abs=1e-6)


def test_square_plate_lies_along_its_sides() -> None:
    mesh = body(lattice((40, 40, 3), (0, 0, 0), cells=(4, 4, 1)))
    anatomy = imported_anatomy(turned(mesh, TURNS[0]))
    assert np.abs(TURNS[0].T @ anatomy.frame.axes[0]).max() == pytest.approx(1, abs=1e-6)
    assert anatomy.length == pytest.approx(0.04)


def test_round_section_is_square_and_stays_deterministic() -> None:
    def rounded(points: np.ndarray) -> np.ndarray:
        x, y, z = points.T
        largest = np.maximum(np.abs(y), np.abs(z))
        pull = np.where(largest > 0, largest / np.maximum(np.hypot(y, z), 1e-12), 1.0)
        return np.column_stack((x, y * pull, z * pull))

    mesh = body(lattice((60, 6, 6), (0, -3, -3), cells=(8, 8, 8)), warp=rounded)
    one, two = imported_anatomy(mesh), imported_anatomy(mesh)
    assert one.square
    assert one.frame == two.frame


def test_flat_faces_named_top_and_bottom_say_what_is_through() -> None:
    """A bar higher than wide, cut from sheet: its flat faces, not its shortest side, count."""
    mesh = body(lattice((60, 3, 8), (0, 0, 0)))
    assert abs(imported_anatomy(mesh).frame.axes[2][1]) == pytest.approx(1)
    z = mesh.points[mesh.facets[:, :3], 2]
    faces = {
        "top": np.flatnonzero((z > 7.99e-3).all(axis=1)),
        "bottom": np.flatnonzero((z < 1e-5).all(axis=1)),
    }
    for turn in (np.eye(3), *TURNS):
        anatomy = imported_anatomy(turned(replace(mesh, faces=faces), turn))
        np.testing.assert_allclose(turn.T @ anatomy.frame.axes[2], [0, 0, 1], atol=1e-9)
        assert np.linalg.det(anatomy.frame.axes) == pytest.approx(1)


def test_small_changes_of_shape_turn_the_axes_little() -> None:
    angles = []
    for height in np.linspace(2.9, 3.1, 9):
        mesh = body(lattice((60, 8, 2), (0, 0, 0)), lattice((10, 4, float(height)), (0, 4, 2)))
        angles.append(np.array(imported_anatomy(mesh).frame.axes))
    assert max(np.abs(a - b).max() for a, b in pairwise(angles)) < 0.02
