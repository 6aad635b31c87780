"""What the families say of themselves: frames, sections, regions and sizes."""

import numpy as np
import pytest
from modewright.geometry.anatomy import Kind, Role
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.shape import make_shape


def make(family, **dimensions):
    return make_shape(FAMILIES[family], dimensions or FAMILIES[family].example)


ONE_LIMB = [
    ("bar", {"length": 60.0, "width": 8.0, "thickness": 1.2}),
    ("bar", {"length": 60.0, "width": 8.0, "thickness": 3.0, "width_tip": 5.0}),
    (
        "bar",
        {
            "length": 60.0,
            "width": 8.0,
            "thickness": 3.0,
            "width_tip": 2.0,
            "thickness_tip": 0.75,
            "flush": "bottom",
        },
    ),
    ("bar", {"length": 60.0, "diameter": 5.0, "diameter_tip": 2.0}),
    ("stepped_bar", dict(FAMILIES["stepped_bar"].example)),
    ("arched_bar", dict(FAMILIES["arched_bar"].example)),
    ("arched_bar", {**FAMILIES["arched_bar"].example, "arch_profile": "cosine"}),
    (
        "arched_bar",
        {
            **FAMILIES["arched_bar"].example,
            "thickness": 70.0,
            "arch_depth": 65.0,
            "arch_profile": "circle",
        },
    ),
    ("tube", dict(FAMILIES["tube"].example)),
]


@pytest.mark.parametrize(("family", "dimensions"), ONE_LIMB)
def test_sections_integrate_to_the_volume(family, dimensions):
    shape = make(family, **dimensions)
    anatomy, solid = shape.anatomy(), shape.solid()
    sections = anatomy.sections
    assert sections.x[0] == 0.0
    assert sections.x[-1] == pytest.approx(anatomy.length)
    assert np.all(np.diff(sections.x) >= 0)
    volume = np.trapezoid(sections.area, sections.x)
    assert volume == pytest.approx(solid.volume * 1e-9, rel=1e-4)
    ends = [solid.areas[name] * 1e-6 for name in anatomy.ends]
    assert sections.area[[0, -1]] == pytest.approx(ends)


@pytest.mark.parametrize(("family", "dimensions"), ONE_LIMB)
def test_linear_interpolation_between_stations_is_close(family, dimensions):
    sections = make(family, **dimensions).anatomy().sections
    # Skipping every other station multiplies the error of the rest by four.
    if len(sections.x) < 65 or "circle" in dimensions.values():
        return
    low = 1 if family == "arched_bar" else 0
    x = sections.x[low : len(sections.x) - low]
    for name in ("area", "i_across", "i_through", "torsion"):
        y = getattr(sections, name)[low : len(sections.x) - low]
        error = np.interp(x[1::2], x[::2], y[::2]) / y[1::2] - 1
        assert np.abs(error).max() / 4 < 1.3e-4, name


def test_a_step_is_two_stations_at_one_place():
    sections = make("stepped_bar").anatomy().sections
    np.testing.assert_allclose(sections.x, [0, 0.015, 0.015, 0.055, 0.055, 0.060])
    np.testing.assert_allclose(sections.area, np.repeat([16, 8, 12.8], 2) * 1e-6)
    assert sections.offset is None


def test_the_centroid_of_a_flush_bar_sinks_with_its_top():
    bar = make(
        "bar", length=60.0, width=8.0, thickness=3.0, thickness_tip=1.0, flush="bottom"
    ).anatomy()
    assert bar.sections.offset[0] == 0
    assert bar.sections.offset[-1] == pytest.approx(-1e-3)
    rows = [
        {"length": 20.0, "width": 8.0, "thickness": 3.0},
        {"length": 20.0, "width": 8.0, "thickness": 2.0},
    ]
    stepped = make("stepped_bar", segments=rows, flush="bottom").anatomy()
    np.testing.assert_allclose(stepped.sections.offset, [0, 0, -0.5e-3, -0.5e-3])


def test_the_arch_is_thinnest_at_mid_length_and_lifts_the_centroid():
    sections = make("arched_bar").anatomy().sections
    middle = len(sections.x) // 2
    assert sections.x[middle] == pytest.approx(0.120)
    assert sections.area[middle] == pytest.approx(40e-3 * 6e-3)
    assert sections.offset[middle] == pytest.approx(3e-3)
    assert sections.offset[0] == pytest.approx(0)


@pytest.mark.parametrize(
    ("family", "dimensions", "square", "round_"),
    [
        ("bar", {"length": 60.0, "width": 3.0, "thickness": 3.0}, True, False),
        ("bar", {"length": 60.0, "width": 3.0, "thickness": 3.1}, False, False),
        ("bar", {"length": 60.0, "width": 3.0, "thickness": 3.0, "width_tip": 2.0}, False, False),
        ("bar", {"length": 60.0, "diameter": 3.0}, False, True),
        (
            "stepped_bar",
            {"segments": [{"length": 9.0, "width": 3.0, "thickness": 3.0}]},
            True,
            False,
        ),
        ("tube", {"length": 60.0, "outer_diameter": 9.0, "wall": 1.0}, False, True),
        ("plate", {"diameter": 60.0, "thickness": 2.0}, False, True),
    ],
)
def test_equal_bending_directions_are_told(family, dimensions, square, round_):
    anatomy = make(family, **dimensions).anatomy()
    assert (anatomy.square, anatomy.round) == (square, round_)


def test_a_square_bar_tapered_flush_is_not_square():
    tapered = {"width": 4.0, "thickness": 4.0, "width_tip": 2.0, "thickness_tip": 2.0}
    assert make("bar", length=60.0, **tapered).anatomy().square
    assert not make("bar", length=60.0, **tapered, flush="bottom").anatomy().square


def regions_of(anatomy, points):
    """The number of the region that holds each point (global, m); 0 where none does."""
    local = anatomy.frame.local(np.asarray(points))
    numbers = np.zeros(len(local), int)
    for region in anatomy.regions:
        inside = region.contains(local)
        assert not np.any(numbers[inside]), "regions overlap"
        numbers[inside] = region.number
    return numbers.tolist()


def test_prongs_of_a_fork_are_numbered_by_increasing_y():
    fork = make(
        "fork", length=100.0, width=12.0, thickness=3.0, slot_length=60.0, slot_width=1.5, prongs=3
    ).anatomy()
    assert [r.role for r in fork.regions] == [Role.PRONG] * 3
    points = [(0.09, -0.005, 0), (0.09, 0, 0.001), (0.041, 0.005, 0), (0.02, 0.005, 0)]
    assert regions_of(fork, points) == [1, 2, 3, 0]
    assert fork.sections is None


def test_regions_of_a_tapered_fork_part_in_the_slots():
    dimensions = {
        "length": 100.0,
        "width": 20.0,
        "thickness": 3.0,
        "slot_length": 60.0,
        "slot_width": 1.0,
        "prongs": 4,
        "width_tip": 11.0,
    }
    fork = make("fork", **dimensions).anatomy()
    # Prongs of (11 - 3) / 4 = 2 mm at the tip, 1 mm apart: edges 2.5 mm, 0.5 mm off the middle.
    y = np.array([-10.0, -3.51, -2.49, -0.51, 0.51, 2.49, 3.51, 10.0]) * 1e-3
    points = np.column_stack([np.full(8, 0.08), y, np.zeros(8)])
    assert regions_of(fork, points) == [1, 1, 2, 2, 3, 3, 4, 4]


def test_prongs_of_a_tuning_fork_are_numbered_by_increasing_z():
    fork = make("tuning_fork").anatomy()
    # Yoke of 8/2 + 1.5 * 4 = 10 mm and a stem of 30 mm behind x = 0.
    assert fork.frame.origin == pytest.approx((-0.040, 0.0, 0.0))
    assert fork.length == pytest.approx(0.120)
    points = [(0.05, 0, -0.006), (0.05, 0, 0.006), (-0.005, 0, 0.0), (-0.02, 0, 0.001)]
    assert regions_of(fork, points) == [1, 2, 0, 0]


def test_tines_of_a_comb_are_numbered_by_increasing_y():
    comb = make("comb").anatomy()
    assert [r.role for r in comb.regions] == [Role.TINE] * 4
    # Four tines of 3 mm, 1 mm apart: middles at -6, -2, 2, 6 mm.
    points = [(0.013, y, 0) for y in (-0.006, -0.002, 0.002, 0.006)] + [(0.011, 0.002, 0)]
    assert regions_of(comb, points) == [1, 2, 3, 4, 0]
    assert comb.length == pytest.approx(0.046)


def test_the_axis_of_a_tube_comes_last_in_its_frame():
    tube = make("tube").anatomy()
    assert tube.kind is Kind.REVOLVED
    assert tube.ends == ("end_a", "end_b")
    np.testing.assert_allclose(tube.frame.local(np.array([[0.3, 0.01, 0.02]])), [[0.01, 0.02, 0.3]])
    assert np.linalg.det(np.array(tube.frame.axes)) == pytest.approx(1.0)
    assert tube.sections.form == "tube"


def test_sizes_vanish_with_holes():
    hole = [{"x": 5.0, "y": 0.0, "diameter": 3.0}]
    rectangle = {"length": 60.0, "width": 40.0, "thickness": 2.0}
    whole = make("plate", **rectangle).anatomy()
    assert whole.kind is Kind.PLATE
    assert (whole.plate.length, whole.plate.width) == pytest.approx((0.06, 0.04))
    assert make("plate", **rectangle, holes=hole).anatomy().plate is None
    disc = {"diameter": 60.0, "thickness": 2.0}
    assert make("plate", **disc).anatomy().disc.radius == pytest.approx(0.03)
    assert make("plate", **disc, holes=hole).anatomy().disc is None
    tube = make("tube", **FAMILIES["tube"].example, holes=[{"distance": 9.0, "diameter": 3.0}])
    assert tube.anatomy().sections is None
    corded = {**FAMILIES["arched_bar"].example, "cord_distance": 50.0, "cord_diameter": 4.0}
    assert make("arched_bar", **corded).anatomy().sections is None


def test_ring_bends_in_its_plane_about_its_axis():
    ring = make("ring", mean_diameter=90.0, width=5.0, thickness=4.0).anatomy().ring
    assert ring.radius == pytest.approx(0.045)
    assert ring.i_axial == pytest.approx(5**3 * 4 / 12 * 1e-12)
    assert ring.i_radial == pytest.approx(5 * 4**3 / 12 * 1e-12)
    torus = make("ring", mean_diameter=90.0, section_diameter=4.0).anatomy().ring
    assert torus.i_axial == torus.i_radial == pytest.approx(np.pi * 4**4 / 64 * 1e-12)
    assert torus.torsion == pytest.approx(2 * torus.i_axial)


def test_revolved_length_is_its_height():
    cup = make("revolved", profile=[[0, 7], [20, 7], [20, 40]], wall=1.0, curve="straight")
    assert cup.anatomy().length == pytest.approx(0.033)
    assert cup.anatomy().kind is Kind.REVOLVED
