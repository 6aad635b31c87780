"""Closed outlines: areas by formula, any order of drawing, and what is refused."""

import math
import random
from itertools import pairwise

import numpy as np
import pytest
from modewright.geometry.chain import chained, signed_area
from modewright.geometry.curve import as_bspline, as_ellipse, at, moved, reversed_
from modewright.geometry.errors import InputError
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.mesher import generate
from modewright.geometry.outline import outline_of_points, outline_of_segments
from modewright.geometry.shape import make_shape
from modewright.geometry.solid import Arc, Circle, EllipseArc, Line
from modewright.geometry.spline import bezier, smooth_pieces

ARC = Arc(start=(3.0, 0.0), through=(0.0, 3.0), end=(-3.0, 0.0))
ELLIPSE = EllipseArc(centre=(1.0, 2.0), major=(3.0, 1.0), ratio=0.4, first=0.3, last=4.0)
CUBIC = bezier(np.array([(0, 0), (1, 2), (3, -1), (4, 1)]))
CURVES = [Line(start=(0.0, 0.0), end=(2.0, 1.0)), ARC, ELLIPSE, CUBIC, as_bspline(ELLIPSE)]

#: A rectangle 10 x 5 with a half circle at the left; the lower right corner gapes by 0.2 um.
PADDLE = [
    Line(start=(0.0, 0.0), end=(10.0, 0.0)),
    Line(start=(10.0, 5.0), end=(10.0002, 0.0)),
    Line(start=(10.0, 5.0), end=(0.0, 5.0)),
    Arc(start=(0.0, 0.0), through=(-2.5, 2.5), end=(0.0, 5.0)),
    Circle(centre=(3.0, 2.0), radius=1.0),
]
PADDLE_AREA = 50 + math.pi * 2.5**2 / 2 - math.pi

T = np.linspace(0, 1, 41)


@pytest.mark.parametrize("curve", CURVES)
def test_reversed_curve_is_the_same_curve_backwards(curve) -> None:
    np.testing.assert_allclose(at(reversed_(curve), T), at(curve, T)[::-1], atol=1e-12)


def distance_to(curve, points: np.ndarray) -> float:
    fine = at(curve, np.linspace(0, 1, 20001))
    return float(np.abs(points[:, None] - fine[None]).max(axis=2).min(axis=1).max())


def test_elliptic_arc_as_spline_satisfies_the_ellipse() -> None:
    points = at(as_bspline(ELLIPSE), T) - np.array(ELLIPSE.centre)
    major = np.array(ELLIPSE.major)
    minor = ELLIPSE.ratio * np.array([-major[1], major[0]])
    u, v = points @ major / (major @ major), points @ minor / (minor @ minor)
    np.testing.assert_allclose(u**2 + v**2, 1.0, atol=1e-12)
    np.testing.assert_allclose(points[[0, -1]] + ELLIPSE.centre, at(ELLIPSE, T[[0, -1]]))


@pytest.mark.parametrize("matrix", [((2.0, 1.0), (0.0, 0.5)), ((1.0, 0.3), (0.2, -1.0))])
@pytest.mark.parametrize("curve", [*CURVES, Circle(centre=(1.0, 1.0), radius=2.0)])
def test_moved_curve_goes_through_the_moved_points(curve, matrix) -> None:
    m, shift = np.array(matrix), np.array([5.0, -2.0])
    wanted = at(curve, T) @ m.T + shift
    assert distance_to(moved(curve, m, shift), wanted) < 1e-3


def test_even_map_keeps_arcs_circular() -> None:
    turn = 2.0 * np.array([[0.6, -0.8], [0.8, 0.6]])
    assert isinstance(moved(ARC, turn, np.zeros(2)), Arc)
    assert isinstance(moved(as_ellipse(ARC), np.diag([1.0, 3.0]), np.zeros(2)), EllipseArc)


def test_area_of_segments_by_formula() -> None:
    outline = outline_of_segments(PADDLE)
    assert outline.area == pytest.approx(PADDLE_AREA, rel=1e-7)
    assert len(outline.holes) == 1
    assert outline.edges == ("edge_1", "edge_2", "edge_3", "edge_4", "edge_5")
    ellipse = EllipseArc(centre=(0.0, 0.0), major=(0.0, 7.0), ratio=0.5, first=1.0, last=7.3)
    whole = EllipseArc(
        centre=(0.0, 0.0), major=(0.0, 7.0), ratio=0.5, first=1.0, last=1.0 + 2 * math.pi
    )
    assert outline_of_segments([whole]).area == pytest.approx(math.pi * 7 * 3.5, rel=1e-12)
    assert signed_area((ellipse,)) > 0


def test_order_and_direction_of_drawing_do_not_matter() -> None:
    shuffle = random.Random(5)
    for _ in range(20):
        drawn = [reversed_(s) if shuffle.random() < 0.5 else s for s in PADDLE]
        shuffle.shuffle(drawn)
        assert outline_of_segments(drawn).area == pytest.approx(PADDLE_AREA, rel=2e-5)


def test_loops_run_anticlockwise_and_close_exactly() -> None:
    for loop in chained(PADDLE[:4]):
        assert signed_area(loop) > 0
        for one, other in pairwise((*loop, loop[0])):
            assert at(one, T)[-1] == pytest.approx(at(other, T)[0], abs=1e-12)


def test_lines_drawn_twice_count_once() -> None:
    assert outline_of_segments([*PADDLE, reversed_(PADDLE[2])]).area == pytest.approx(
        PADDLE_AREA, rel=1e-6
    )


def test_walls_are_seen() -> None:
    outline = outline_of_points(
        [(0, 0), (40, 0), (40, 20), (0, 20)], [[(1, 5), (10, 5), (10, 15), (1, 15)]]
    )
    assert outline.thin == pytest.approx(1.0, rel=1e-9)


def test_periodic_spline_is_clamped_exactly() -> None:
    angles = np.arange(8) * np.pi / 4
    ring = np.column_stack((np.cos(angles), np.sin(angles)))
    poles = np.concatenate((ring, ring[:3]))
    pieces = smooth_pieces(poles, 3, np.arange(15.0))
    assert len(pieces) == 2
    assert pieces[0].poles[0] == pytest.approx(pieces[1].poles[-1], abs=1e-12)
    # The knot values of a uniform cubic: (p0 + 4 p1 + p2) / 6.
    assert pieces[0].poles[0] == pytest.approx(tuple((ring[0] + 4 * ring[1] + ring[2]) / 6))


def test_spline_is_split_at_corners() -> None:
    poles = np.array([(0, 0), (1, 1), (2, 0), (3, 1), (4, 0)])
    assert len(smooth_pieces(poles, 2, [0, 0, 0, 1, 1, 2, 2, 2])) == 2


def test_extruded_outline_agrees_with_the_kernel() -> None:
    shape = make_shape(
        FAMILIES["outline"],
        {
            "outline": [[0, 0], [40, 0], [40, 10], [0, 10]],
            "holes": [[[5, 3], [9, 3], [9, 7], [5, 7]]],
            "thickness": 2.5,
        },
    )
    mesh = generate(shape, size_mm=3.0)
    assert mesh.volume == pytest.approx((400 - 16) * 2.5e-9, rel=1e-9)
    assert set(mesh.faces) == {"top", "bottom", *(f"edge_{i}" for i in range(1, 9))}
    np.testing.assert_allclose(mesh.points.min(axis=0), [0, 0, -1.25e-3], atol=1e-12)
    assert np.all(mesh.points[mesh.face_nodes("edge_2"), 0] == pytest.approx(0.04))


SQUARE = [(0, 0), (10, 0), (10, 10), (0, 10)]
LATE = Circle(centre=(3.0, 2.0), radius=1.0)


@pytest.mark.parametrize(
    ("segments", "words"),
    [
        ([], "no outline"),
        (PADDLE[1:], "open at"),
        ([*PADDLE[:4], Line(start=(20.0, 0.0), end=(25.0, 0.0))], "open at"),
        ([*PADDLE, Line(start=(0.0, 0.0), end=(10.0, 5.0))], "branches at (0, 0)"),
        ([*PADDLE, Circle(centre=(9.0, 2.0), radius=1.0)], "touches itself at (10, 2)"),
        ([*PADDLE, Circle(centre=(9.5, 2.0), radius=1.0)], "crosses"),
        ([*PADDLE, Circle(centre=(20.0, 2.0), radius=1.0)], "outside the outline"),
        ([*PADDLE, Circle(centre=(3.0, 2.0), radius=0.5)], "inside a hole"),
    ],
)
def test_bad_segments_are_refused_with_the_place(segments, words) -> None:
    with pytest.raises(InputError) as error:
        outline_of_segments(segments)
    assert words in str(error.value)


@pytest.mark.parametrize(
    ("values", "key", "words"),
    [
        ({"outline": [[0, 0], [10, 10], [10, 0], [0, 10]]}, None, "crosses"),
        ({"outline": [[0, 0], [10, 0], [10, 9], [5, 9], [5, 12], [5, 9]]}, None, "touches"),
        ({"outline": [[0, 0], [10, 0], [20, 0]]}, None, "touches"),
        ({"outline": [[0, 0], [10, 0]]}, "shape.outline", "at least 3"),
        ({"outline": [[0, 0], [10, 0], [10, 0], [0, 5]]}, "shape.outline.3", "repeats"),
        ({"outline": [[0, 0], [10, 0], [10, "5"]]}, "shape.outline.3", "point"),
        ({"outline": SQUARE, "holes": [[[2, 2], [12, 2], [2, 8]]]}, None, "crosses"),
        ({"outline": SQUARE, "holes": [[[22, 2], [32, 2], [22, 8]]]}, "shape.holes.1", "outside"),
        ({"outline": SQUARE, "thickness": 0}, "shape.thickness", "range"),
        ({"outline": SQUARE, "unit": "mm"}, "shape.unit", "mm"),
        ({"outline": "leaf.dxf", "holes": [SQUARE]}, "shape.holes", "points only"),
        ({"outline": "leaf.dxf", "unit": "furlong"}, "shape.unit", "choices"),
        ({"outline": 3}, "shape.outline", "list"),
    ],
)
def test_bad_outlines_are_refused(values, key, words) -> None:
    with pytest.raises(InputError) as error:
        make_shape(FAMILIES["outline"], {"thickness": 2.0, **values})
    assert words in str(error.value)
    if key:
        assert error.value.key == key
