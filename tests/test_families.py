"""Shape families: examples, volumes by independent integration, and wrong dimensions."""

import copy
import math
import pickle
from dataclasses import is_dataclass

import numpy as np
import pytest
from modewright.geometry.errors import InputError
from modewright.geometry.families import shell
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.shape import make_shape
from modewright.geometry.solid import Cut, Fuse

PARAMETRIC = [
    "bar",
    "stepped_bar",
    "arched_bar",
    "fork",
    "tuning_fork",
    "plate",
    "ring",
    "tube",
    "revolved",
    "comb",
]


def shape(family, **changes):
    """The family's example with some dimensions changed."""
    return make_shape(FAMILIES[family], {**copy.deepcopy(FAMILIES[family].example), **changes})


def make(family, **dimensions):
    return make_shape(FAMILIES[family], dimensions)


def integral(values, x):
    return float(np.trapezoid(values, x))


# --- what holds for every family ---


def test_the_table_names_each_family_by_its_own_name():
    assert set(PARAMETRIC) <= set(FAMILIES)
    assert all(family.name == name for name, family in FAMILIES.items())


@pytest.mark.parametrize("family", PARAMETRIC)
def test_examples_make_solids_that_cross_a_process_border(family):
    solid = shape(family).solid()
    assert pickle.loads(pickle.dumps(solid)) == solid
    assert solid.faces
    assert set(solid.areas) <= set(solid.faces)
    assert solid.volume is None or solid.volume > 0
    assert solid.thin > 0
    assert solid.faces == tuple(dict.fromkeys(solid.faces))


@pytest.mark.parametrize("family", PARAMETRIC)
def test_every_promised_face_is_named_somewhere_in_the_records(family):
    solid = shape(family).solid()
    assert set(solid.faces) <= names(solid.body)


def names(record):
    """All face names in a tree of records."""
    if isinstance(record, Fuse):
        return set().union(*map(names, record.parts))
    if isinstance(record, Cut):
        return set().union(names(record.base), *map(names, record.tools))
    found = {getattr(record, key, None) for key in ("start", "end", "face")}
    if is_dataclass(record) and hasattr(record, "profile"):
        for loop in (record.profile.outer, *record.profile.holes):
            found |= {segment.face for segment in loop}
    if is_dataclass(record) and hasattr(record, "first"):
        found |= {segment.face for segment in record.first.outer}
    return found


@pytest.mark.parametrize("family", PARAMETRIC)
def test_all_lengths_doubled_doubles_the_solid(family):
    def doubled(value):
        if isinstance(value, dict):
            return {k: doubled(v) for k, v in value.items()}
        if isinstance(value, list | tuple):
            return [doubled(v) for v in value]
        return value if isinstance(value, bool | int | str) and family == "fork" else 2 * value

    # The example of the fork counts nothing; every other number is a length.
    example = {k: doubled(v) for k, v in FAMILIES[family].example.items()}
    if family == "fork":
        example = {k: 2 * v for k, v in FAMILIES[family].example.items()}
    one, two = shape(family).solid(), make_shape(FAMILIES[family], example).solid()
    if family == "comb":  # the default gap does not grow with the rest
        example["tines"] = [{**t, "gap": 2.0} for t in example["tines"]]
        two = make_shape(FAMILIES[family], example).solid()
    if one.volume is not None:
        assert two.volume == pytest.approx(8 * one.volume, rel=1e-9)
    for name, area in one.areas.items():
        assert two.areas[name] == pytest.approx(4 * area, rel=1e-6), name
    assert two.thin == pytest.approx(2 * one.thin, rel=1e-6)


# Flat faces and cylinders alone: the areas of all faces are known.
@pytest.mark.parametrize("family", ["bar", "stepped_bar", "plate", "ring", "tube", "comb"])
def test_the_surface_is_the_slope_of_the_volume(family):
    """Growing a body by h all round adds about h times its surface to its volume."""
    h = 1e-4
    grown = {
        "bar": {"length": 60 + 2 * h, "width": 8 + 2 * h, "thickness": 1.2 + 2 * h},
        "plate": {"diameter": 120 + 2 * h, "thickness": 2 + 2 * h},
        "ring": {"width": 5 + 2 * h, "thickness": 4 + 2 * h},
        "tube": {"length": 300 + 2 * h, "outer_diameter": 25 + 2 * h, "wall": 2 + 2 * h},
        "stepped_bar": {
            # The outer segments gain h at their free ends; a thicker one also at a step.
            "segments": [
                {"length": 15 + 2 * h, "width": 8 + 2 * h, "thickness": 2 + 2 * h},
                {"length": 40 - 2 * h, "width": 8 + 2 * h, "thickness": 1 + 2 * h},
                {"length": 5 + 2 * h, "width": 8 + 2 * h, "thickness": 1.6 + 2 * h},
            ]
        },
        "comb": {
            "base_length": 12 + 2 * h,
            "base_width": 20 + 2 * h,
            "base_thickness": 3 + 2 * h,
            # The base's front moves out by h, each tine's tip too.
            "tines": [
                {"length": n, "width": 3 + 2 * h, "thickness": 1 + 2 * h, "gap": 1 - 2 * h}
                for n in (34.0, 31.0, 28.0, 25.0)
            ],
        },
    }
    solid = shape(family).solid()
    assert set(solid.areas) == set(solid.faces)
    slope = (shape(family, **grown[family]).solid().volume - solid.volume) / h
    assert sum(solid.areas.values()) == pytest.approx(slope, rel=1e-3)


# --- volumes and areas, integrated here in another way ---


def test_bar_tapered_both_ways_is_a_frustum_of_its_own():
    solid = make(
        "bar", length=60.0, width=8.0, thickness=3.0, width_tip=5.0, thickness_tip=1.5
    ).solid()
    x = np.linspace(0.0, 60.0, 20001)
    width, thickness = 8 - 3 * x / 60, 3 - 1.5 * x / 60
    assert solid.volume == pytest.approx(integral(width * thickness, x), rel=1e-8)
    slope = math.hypot(1.0, 0.75 / 60)
    assert solid.areas["top"] == pytest.approx(integral(width, x) * slope, rel=1e-8)
    slope = math.hypot(1.0, 1.5 / 60)
    assert solid.areas["left"] == pytest.approx(integral(thickness, x) * slope, rel=1e-8)


def test_bar_flush_below_is_as_heavy_as_centred_and_flat_below():
    tapered = {"length": 60.0, "width": 8.0, "thickness": 3.0, "thickness_tip": 1.5}
    centred, flush = make("bar", **tapered).solid(), make("bar", **tapered, flush="bottom").solid()
    assert flush.volume == pytest.approx(centred.volume)
    assert flush.areas["bottom"] == pytest.approx(480.0)
    assert flush.areas["top"] == pytest.approx(8 * math.hypot(60, 1.5))


def test_round_bar_tapered_is_a_cone_frustum():
    solid = make("bar", length=60.0, diameter=5.0, diameter_tip=3.0).solid()
    x = np.linspace(0.0, 60.0, 20001)
    radius = 2.5 - x / 60
    assert solid.volume == pytest.approx(integral(np.pi * radius**2, x), rel=1e-8)
    assert solid.areas["side"] == pytest.approx(
        integral(2 * np.pi * radius, x) * math.hypot(1, 1 / 60), rel=1e-8
    )


def test_stepped_bar_by_counting_boxes():
    rows = [
        {"length": 20.0, "width": 8.0, "thickness": 3.0},
        {"length": 10.0, "width": 5.0, "thickness": 4.0},
    ]
    solid = make("stepped_bar", segments=rows).solid()
    assert solid.volume == pytest.approx(20 * 24 + 10 * 20)
    assert solid.areas["step_1"] == pytest.approx(24 + 20 - 2 * 5 * 3)
    total = 24 + 20 + solid.areas["step_1"] + 2 * (20 * (8 + 3) + 10 * (5 + 4))
    assert sum(solid.areas.values()) == pytest.approx(total)


@pytest.mark.parametrize("profile", ["parabola", "circle", "cosine"])
def test_arched_bar_by_slices(profile):
    solid = make(
        "arched_bar",
        length=240.0,
        width=40.0,
        thickness=12.0,
        arch_length=130.0,
        arch_depth=7.0,
        arch_profile=profile,
        cord_distance=50.0,
        cord_diameter=3.0,
    ).solid()
    x = np.linspace(-65.0, 65.0, 40001)
    radius = (65**2 + 7**2) / 14
    removed = {
        "parabola": 7 * (1 - (x / 65) ** 2),
        "circle": np.sqrt(radius**2 - x**2) - radius + 7,
        "cosine": 3.5 * (1 + np.cos(np.pi * x / 65)),
    }[profile]
    side = 240 * 12 - integral(removed, x) - 2 * np.pi * 1.5**2
    assert solid.areas["left"] == pytest.approx(side, rel=1e-7)
    assert solid.volume == pytest.approx(40 * side, rel=1e-7)
    rise = np.gradient(removed, x)
    assert solid.areas["arch"] == pytest.approx(40 * integral(np.hypot(1, rise), x), rel=1e-6)


def fork_width(x, dimensions):
    """Metal across a fork at x, summed prong by prong (arrays)."""
    d = {"width_tip": dimensions["width"], "prongs": 2, **dimensions}
    width = d["width"] + (d["width_tip"] - d["width"]) * x / d["length"]
    n, slot, closed = d["prongs"], d["slot_width"], d["length"] - d["slot_length"]
    into = x - closed
    open_ = np.where(into > 0, slot, 0.0)
    if d.get("slot_end", "round") == "round":
        r = slot / 2
        chord = 2 * np.sqrt(np.clip(r**2 - (r - into) ** 2, 0, None))
        open_ = np.where((into > 0) & (into < r), chord, open_)
    metal = width - (n - 1) * open_
    inner = (d["width_tip"] - (n - 1) * slot) / n
    for i, length in enumerate(d.get("prong_lengths", ())):
        outer = inner + (width - d["width_tip"]) / 2
        metal = metal - np.where(into > length, outer if i in (0, n - 1) else inner, 0.0)
    return metal


@pytest.mark.parametrize(
    "dimensions",
    [
        {"slot_end": "round"},
        {"slot_end": "square"},
        {"prongs": 3, "prong_lengths": [50.0, 60.0, 55.0], "width_tip": 10.0},
        {"prongs": 4, "width_tip": 15.0, "thickness_tip": 2.0, "slot_end": "square"},
        {"prong_lengths": [60.0, 48.0], "thickness_tip": 4.0},
    ],
)
def test_fork_by_slices(dimensions):
    d = {
        "length": 100.0,
        "width": 12.0,
        "thickness": 3.0,
        "slot_length": 60.0,
        "slot_width": 2.0,
        **dimensions,
    }
    solid = make("fork", **d).solid()
    x = (np.arange(400_000) + 0.5) * 100.0 / 400_000
    metal = fork_width(x, d)
    thickness = 3.0 + (d.get("thickness_tip", 3.0) - 3.0) * x / 100.0
    assert solid.volume == pytest.approx(np.sum(metal * thickness) * 100.0 / 400_000, rel=1e-6)
    slant = math.hypot(1.0, (d.get("thickness_tip", 3.0) - 3.0) / 200.0)
    assert solid.areas["top"] == pytest.approx(np.sum(metal) * 100.0 / 400_000 * slant, rel=1e-6)


def test_tuning_fork_u_of_one_thickness_is_two_bars_and_a_half_ring():
    solid = make(
        "tuning_fork",
        prong_length=60.0,
        prong_thickness=5.0,
        prong_width=6.0,
        gap=6.0,
        base_radius=8.0,
    ).solid()
    assert solid.areas["left"] == pytest.approx(2 * 60 * 5 + np.pi / 2 * (8**2 - 3**2))


@pytest.mark.parametrize(("base", "yoke"), [(12.0, "long"), (6.0, "flat")])
def test_tuning_fork_yoke_by_slices(base, yoke):
    solid = make(
        "tuning_fork",
        prong_length=60.0,
        prong_thickness=5.0,
        prong_width=6.0,
        gap=6.0,
        base_radius=base,
        stem_diameter=4.0,
    ).solid()
    z = (np.arange(200_000) + 0.5) * 8.0 / 200_000
    if yoke == "long":  # straight sides for 4 mm, then a half circle of 8 mm
        back = 4.0 + np.sqrt(64 - z**2)
    else:  # a flat back with corners of 6 mm
        back = np.sqrt(np.clip(36 - np.clip(z - 2.0, 0, None) ** 2, 0, None))
    bottom = np.sqrt(np.clip(9 - z**2, 0, None))
    area = 2 * 60 * 5 + 2 * np.sum(back - bottom) * 8.0 / 200_000
    assert solid.areas["left"] == pytest.approx(area, rel=1e-6)


def test_plate_with_holes_loses_their_discs():
    holes = [{"x": -20.0, "y": 5.0, "diameter": 8.0}, {"x": 10.0, "y": 0.0, "diameter": 12.0}]
    solid = make("plate", length=60.0, width=40.0, thickness=2.0, holes=holes).solid()
    assert solid.areas["top"] == pytest.approx(2400 - np.pi * (16 + 36))
    assert solid.volume == pytest.approx(2 * (2400 - np.pi * 52))
    assert solid.faces[-2:] == ("hole_1", "hole_2")
    assert solid.thin == pytest.approx(2.0)


def test_thin_finds_the_web_between_two_holes():
    holes = [{"x": 0.0, "y": 0.0, "diameter": 10.0}, {"x": 10.3, "y": 0.0, "diameter": 10.0}]
    assert make("plate", diameter=80.0, thickness=2.0, holes=holes).solid().thin == pytest.approx(
        0.3
    )


def test_ring_by_washers():
    solid = make("ring", mean_diameter=50.0, width=6.0, thickness=3.0).solid()
    assert solid.volume == pytest.approx(np.pi * (28**2 - 22**2) * 3)
    torus = make("ring", mean_diameter=50.0, section_diameter=4.0).solid()
    z = np.sin(np.linspace(-np.pi / 2, np.pi / 2, 20001)) * 2
    half = np.sqrt(np.clip(4 - z**2, 0, None))
    washers = np.pi * ((25 + half) ** 2 - (25 - half) ** 2)
    assert torus.volume == pytest.approx(integral(washers, z), rel=1e-6)


def test_revolved_polygons_by_cones():
    cup = make("revolved", profile=[[0, 0], [20, 0], [20, 10], [0, 10], [0, 0]], curve="straight")
    assert cup.solid().volume == pytest.approx(np.pi * 400 * 10)
    assert cup.solid().faces == ("crown", "lip", "outer")
    # A cone of 45 degrees with a wall of 1 mm square to it: the difference of two cones.
    cone = make("revolved", profile=[[0, 30], [30, 0]], curve="straight", wall=1.0).solid()
    # Section: the parallelogram between the lines less the triangle cut off square at the lip.
    s = math.sqrt(0.5)
    corners = np.array([(0, 30), (30, 0), (30 - s, -s), (0, 30 - math.sqrt(2))])
    moment = shoelace(corners)
    assert cone.volume == pytest.approx(2 * np.pi * moment)
    assert cone.areas["crown"] == pytest.approx(np.pi * 30 * 30 * math.sqrt(2))


def shoelace(points):
    """First moment of a polygon's area in the first coordinate."""
    (x, y), (u, v) = points.T, np.roll(points, -1, axis=0).T
    cross = x * v - u * y
    return abs((cross * (x + u)).sum()) / 6


def hemisphere_error(n):
    angle = np.linspace(0.0, np.pi / 2, n)
    profile = [[40 * math.sin(a), 40 * math.cos(a)] for a in angle]
    profile[0][0] = 0.0
    solid = make("revolved", profile=profile, wall=2.0).solid()
    return abs(solid.volume / (2 / 3 * np.pi * (40**3 - 38**3)) - 1)


def test_spline_shell_converges_to_the_hemisphere():
    coarse, fine = hemisphere_error(7), hemisphere_error(25)
    assert coarse < 1e-4
    assert fine < coarse / 30


def test_a_bowl_and_a_bell_are_mirror_images():
    bell = [[0.0, 50.0], [30.0, 45.0], [50.0, 20.0], [55.0, 0.0]]
    bowl = [[r, -z] for r, z in bell]
    one, two = (make("revolved", profile=p, wall=2.0).solid() for p in (bell, bowl))
    assert one.volume == pytest.approx(two.volume, rel=1e-9)
    for name in ("crown", "lip", "inner", "outer"):
        assert one.areas[name] == pytest.approx(two.areas[name], rel=1e-9)
    # Inward means into the cup: the inner surface is the smaller one.
    assert one.areas["inner"] < one.areas["outer"] + one.areas["crown"]


def test_the_wall_of_a_spline_shell_is_as_thick_as_asked():
    points = [(0.0, 80.0), (22.0, 78.0), (32.0, 62.0), (36.0, 40.0), (42.0, 20.0), (56.0, 0.0)]
    loop = shell.walled(points, (3.0,) * 6, straight=False)
    outer, inner = (
        np.vstack([curve_of(s) for s in loop if s.face in faces])
        for faces in (("crown", "outer"), ("inner",))
    )
    gaps = np.linalg.norm(inner[:, None] - outer[None], axis=2).min(axis=1)
    # Of the samples, 0.02 mm apart, the nearest is at most a hair farther than the wall.
    np.testing.assert_allclose(gaps, 3.0, atol=1e-4)


def curve_of(segment):
    """Points along a cubic or higher span, by de Casteljau's rule (one polynomial piece)."""
    poles, t = np.array(segment.poles)[:, None, :], np.linspace(0, 1, 1001)[:, None]
    while len(poles) > 1:
        poles = (1 - t) * poles[:-1] + t * poles[1:]
    return poles[0]


def test_comb_by_counting_boxes():
    tines = [
        {"length": 20.0, "width": 3.0, "thickness": 2.0},
        {"length": 18.0, "width": 2.0, "thickness": 1.0},
    ]
    comb = make("comb", base_length=10.0, base_width=8.0, base_thickness=2.0, tines=tines)
    solid = comb.solid()
    assert solid.volume == pytest.approx(160 + 120 + 36)
    assert solid.areas["base_front"] == pytest.approx(16 - 6 - 2)


def test_a_dimension_deep_in_a_list_can_be_changed():
    comb = shape("comb").with_dimension("tines.2.length", 40.0)
    assert comb.solid().areas["top_2"] == pytest.approx(120.0)
    bell = shape("revolved").with_dimension("wall.3", 3.0)
    assert bell.dimensions["wall"][2] == 3.0


# --- wrong dimensions: one sentence with the key and what is allowed ---

ROW = {"length": 20.0, "width": 3.0, "thickness": 1.0}
BELL = {"profile": [[0, 80], [22, 78], [32, 62], [56, 0]]}
STRAIGHT = {"curve": "straight"}
WRONG = [
    ("bar", {"length": 60.0, "width": 8.0}, "thickness"),
    ("bar", {"length": 60.0, "width": 8.0, "thickness": -1.0}, "thickness"),
    ("bar", {"length": 60.0, "width": 8.0, "thickness": 1.0, "diameter": 3.0}, "width"),
    ("bar", {"length": 60.0, "diameter": 3.0, "thickness_tip": 1.0}, "thickness_tip"),
    ("bar", {"length": 60.0, "diameter": 3.0, "flush": "bottom"}, "flush"),
    ("bar", {"length": 60.0, "width": 8.0, "thickness": 1.0, "diameter_tip": 3.0}, "diameter_tip"),
    ("bar", {"length": 60.0, "width": 8.0, "thickness": 1.0, "thickness_tip": 0}, "thickness_tip"),
    ("stepped_bar", {"segments": []}, "segments"),
    ("stepped_bar", {"segments": [ROW, {**ROW, "width": 0.0}]}, "segments.2.width"),
    ("stepped_bar", {"segments": [ROW, {"length": 3.0, "width": 2.0}]}, "segments.2.thickness"),
    ("arched_bar", {"arch_length": 240.0}, "arch_length"),
    ("arched_bar", {"arch_depth": 12.0}, "arch_depth"),
    ("arched_bar", {"thickness": 80.0, "arch_depth": 66.0, "arch_profile": "circle"}, "arch_depth"),
    ("arched_bar", {"arch_profile": "ellipse"}, "arch_profile"),
    ("arched_bar", {"cord_distance": 50.0}, "cord_diameter"),
    ("arched_bar", {"cord_diameter": 5.0}, "cord_distance"),
    ("arched_bar", {"cord_distance": 2.0, "cord_diameter": 5.0}, "cord_distance"),
    ("arched_bar", {"cord_distance": 119.0, "cord_diameter": 5.0}, "cord_distance"),
    ("arched_bar", {"cord_distance": 50.0, "cord_diameter": 12.0}, "cord_diameter"),
    ("arched_bar", {"cord_distance": 100.0, "cord_diameter": 7.0}, "cord_diameter"),
    ("fork", {"slot_length": 120.0}, "slot_length"),
    ("fork", {"slot_length": 1.0}, "slot_length"),
    ("fork", {"slot_width": 14.0}, "slot_width"),
    ("fork", {"prongs": 8}, "slot_width"),
    ("fork", {"prongs": 1}, "prongs"),
    ("fork", {"prongs": 2.5}, "prongs"),
    ("fork", {"width_tip": 2.0}, "slot_width"),
    ("fork", {"width_tip": 70.0, "prongs": 4}, "width_tip"),
    ("fork", {"prong_lengths": [60.0, 60.0, 60.0]}, "prong_lengths"),
    ("fork", {"prong_lengths": [60.0, 71.0]}, "prong_lengths.2"),
    ("fork", {"prong_lengths": [0.9, 70.0]}, "prong_lengths.1"),
    ("tuning_fork", {"base_radius": 4.0}, "base_radius"),
    ("tuning_fork", {"stem_diameter": 6.0}, "stem_diameter"),
    ("tuning_fork", {"prong_width": 40.0, "stem_diameter": 15.9}, "stem_diameter"),
    ("tuning_fork", {"prong_width": 40.0, "stem_diameter": 20.0}, "stem_diameter"),
    ("tuning_fork", {"gap": 0.0}, "gap"),
    ("plate", {"width": 5.0}, "width"),
    ("plate", {"thickness": 0.0}, "thickness"),
    ("plate", {"holes": [{"x": 58.0, "y": 0.0, "diameter": 5.0}]}, "holes.1"),
    ("plate", {"holes": [{"x": 90.0, "y": 0.0, "diameter": 5.0}]}, "holes.1"),
    (
        "plate",
        {
            "holes": [
                {"x": 0.0, "y": 0.0, "diameter": 5.0},
                {"x": 3.0, "y": 4.0, "diameter": 5.0},
            ]
        },
        "holes.2",
    ),
    ("ring", {"width": 90.0}, "width"),
    ("ring", {"section_diameter": 3.0}, "width"),
    ("tube", {"wall": 12.5}, "wall"),
    ("tube", {"holes": [{"distance": 1.0, "diameter": 4.0}]}, "holes.1.distance"),
    ("tube", {"holes": [{"distance": 30.0, "diameter": 22.0}]}, "holes.1.diameter"),
    (
        "tube",
        {"holes": [{"distance": 30.0, "diameter": 4.0}, {"distance": 33.0, "diameter": 4.0}]},
        "holes.2.distance",
    ),
    ("revolved", {"wall": [1.0, 2.0]}, "wall"),
    ("revolved", {"wall": 30.0}, "wall"),
    ("revolved", {**BELL, "wall": 40.0, "curve": "straight"}, "wall"),
    ("revolved", {**BELL, "profile": [[-1, 80], [22, 78], [56, 0]], "wall": 1.0}, "profile.1"),
    ("revolved", {"profile": [[5, 80], [0, 78], [56, 0]], "wall": 1.0}, "profile.2"),
    ("revolved", {"profile": [[5, 80], [5, 80], [56, 0]], "wall": 1.0}, "profile.2"),
    ("revolved", {"profile": [[0, 5], [40, 5]], "wall": 1.0}, "profile"),
    (
        "revolved",
        {"profile": [[10, 0], [40, 0], [40, 30], [20, -10]], "wall": 0.1, "curve": "straight"},
        "profile",
    ),
    ("revolved", {"profile": [[5, 0], [9, 0], [9, 4], [5, 0]], "wall": 1.0}, "wall"),
    (
        "revolved",
        {"profile": [[0, 0], [9, 4], [9, -4], [0, 0]], "wall": None, "curve": "straight"},
        "profile",
    ),
    (
        "revolved",
        {"profile": [[5, 0], [9, 4], [9, 0], [5, 4], [5, 0]], "wall": None, "curve": "straight"},
        "profile",
    ),
    (  # a corner that touches the opposite side
        "revolved",
        {"profile": [[5, 0], [9, 0], [7, 4], [7, 0], [5, 4], [5, 0]], "wall": None, **STRAIGHT},
        "profile",
    ),
    ("comb", {"base_width": 14.0}, "base_width"),
    ("comb", {"tines": [{**ROW, "thickness": 4.0}]}, "tines.1.thickness"),
    ("comb", {"tines": [{**ROW, "gap": 0.0}]}, "tines.1.gap"),
    ("comb", {"tines": [{**ROW, "taper": 1.0}]}, "tines.1.taper"),
]


@pytest.mark.parametrize(("family", "changes", "key"), WRONG)
def test_wrong_dimensions_are_named(family, changes, key):
    example = {} if family == "bar" else FAMILIES[family].example
    with pytest.raises(InputError) as caught:
        make_shape(FAMILIES[family], {**example, **changes})
    error = caught.value
    assert error.key == f"shape.{key}"
    assert "\n" not in error.sentence
    assert error.allowed or "must be" in error.problem or "at least" in error.problem


@pytest.mark.parametrize(
    ("family", "changes"),
    [
        ("fork", {"slot_length": 119.9}),
        ("fork", {"slot_width": 13.9}),
        ("arched_bar", {"arch_depth": 11.9}),
        ("arched_bar", {"thickness": 80.0, "arch_depth": 65.0, "arch_profile": "circle"}),
        ("tube", {"wall": 12.4}),
        ("comb", {"base_width": 15.0}),
        ("plate", {"holes": [{"x": 57.0, "y": 0.0, "diameter": 5.0}]}),
        ("tuning_fork", {"base_radius": 4.1, "stem_diameter": 1.0}),
    ],
)
def test_values_just_inside_the_limits_pass(family, changes):
    assert shape(family, **changes).solid().thin > 0
