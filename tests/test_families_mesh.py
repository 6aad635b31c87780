"""Every family through the mesher: all promised faces found, areas and volume right."""

import numpy as np
import pytest
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.mesher import generate
from modewright.geometry.shape import make_shape

FORK = {"length": 60.0, "width": 12.0, "thickness": 3.0, "slot_length": 36.0, "slot_width": 2.0}
ARCH = {"length": 60.0, "width": 15.0, "thickness": 6.0, "arch_length": 30.0, "arch_depth": 3.0}
TUNING = {"prong_length": 30.0, "prong_thickness": 5.0, "prong_width": 6.0, "gap": 6.0}
STEPS = [
    {"length": 20.0, "width": 8.0, "thickness": 3.0},
    {"length": 20.0, "width": 5.0, "thickness": 3.0},
    {"length": 10.0, "width": 10.0, "thickness": 4.0},
]

# (family, dimensions, element size in mm)
BODIES = {
    "bar tapered both ways": (
        "bar",
        {
            "length": 60.0,
            "width": 8.0,
            "thickness": 4.0,
            "width_tip": 5.0,
            "thickness_tip": 2.0,
            "flush": "bottom",
        },
        8.0,
    ),
    "round bar tapered": ("bar", {"length": 30.0, "diameter": 8.0, "diameter_tip": 6.0}, 6.0),
    "stepped bar of three widths": ("stepped_bar", {"segments": STEPS}, 8.0),
    "stepped bar flush": ("stepped_bar", {"segments": STEPS[:2], "flush": "bottom"}, 8.0),
    "arch with cord holes": (
        "arched_bar",
        {**ARCH, "arch_profile": "cosine", "cord_distance": 10.0, "cord_diameter": 2.5},
        8.0,
    ),
    "circular arch": ("arched_bar", {**ARCH, "arch_profile": "circle"}, 8.0),
    "fork": ("fork", FORK, 8.0),
    "fork of three prongs tapered both ways": (
        "fork",
        {
            **FORK,
            "prongs": 3,
            "prong_lengths": [30.0, 36.0, 33.0],
            "width_tip": 10.0,
            "thickness_tip": 2.0,
            "slot_end": "square",
        },
        8.0,
    ),
    "tuning fork": ("tuning_fork", {**TUNING, "stem_length": 15.0}, 6.0),
    "tuning fork with a flat back": (
        "tuning_fork",
        {**TUNING, "base_radius": 6.0, "stem_length": 15.0, "stem_diameter": 4.5},
        6.0,
    ),
    "plate with holes": (
        "plate",
        {
            "length": 60.0,
            "width": 40.0,
            "thickness": 4.0,
            "holes": [{"x": -15.0, "y": 5.0, "diameter": 10.0}],
        },
        12.0,
    ),
    "disc": ("plate", {"diameter": 50.0, "thickness": 5.0}, 12.0),
    "ring": ("ring", {"mean_diameter": 50.0, "width": 8.0, "thickness": 5.0}, 12.0),
    "torus": ("ring", {"mean_diameter": 30.0, "section_diameter": 8.0}, 6.0),
    "tube with cross holes": (
        "tube",
        {
            "length": 30.0,
            "outer_diameter": 20.0,
            "wall": 4.0,
            "holes": [{"distance": 9.0, "diameter": 5.0}],
        },
        6.0,
    ),
    "bell": (
        "revolved",
        {"profile": [[0, 40], [12, 39], [18, 20], [28, 0]], "wall": [5.0, 5.0, 4.0, 4.0]},
        10.0,
    ),
    "bowl with a flat crown": (
        "revolved",
        {"profile": [[6, 0], [20, 0], [25, 20]], "wall": 5.0, "curve": "straight"},
        8.0,
    ),
    "turned section": (
        "revolved",
        {"profile": [[10, 0], [20, 0], [22, 8], [10, 8], [10, 0]], "curve": "straight"},
        8.0,
    ),
    "comb": (
        "comb",
        {
            "base_length": 10.0,
            "base_width": 12.0,
            "base_thickness": 3.0,
            "tines": [
                {"length": 20.0, "width": 3.0, "thickness": 3.0},
                {"length": 18.0, "width": 3.0, "thickness": 3.0, "gap": 2.0},
                {"length": 15.0, "width": 3.0, "thickness": 2.0},
            ],
        },
        6.0,
    ),
}


def vector_areas(mesh, face):
    """Area and area vector of a face from its corner triangles."""
    corners = mesh.points[mesh.facet_nodes(face)[:, :3]] * 1e3
    normal = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]) / 2
    return np.linalg.norm(normal, axis=1).sum(), normal.sum(axis=0)


@pytest.mark.parametrize("body", BODIES)
def test_every_family_meshes_with_the_faces_it_promises(body):
    family, dimensions, size = BODIES[body]
    shape = make_shape(FAMILIES[family], dimensions)
    solid = shape.solid()
    mesh = generate(shape, size_mm=size)
    # Nothing missing, and nothing that the family forgot to name.
    assert set(mesh.faces) == set(solid.faces)
    if solid.volume is not None:
        assert mesh.volume * 1e9 == pytest.approx(solid.volume, rel=1e-6)
    for name, area in solid.areas.items():
        # Chords of curved faces fall short of the arc; flat faces are exact.
        assert vector_areas(mesh, name)[0] == pytest.approx(area, rel=0.1), name
    # Faces that close the body: their area vectors add up to nothing.
    total = sum(vector_areas(mesh, name)[1] for name in mesh.faces)
    assert np.linalg.norm(total) < 1e-6 * sum(vector_areas(mesh, n)[0] for n in mesh.faces)


def centre(mesh, face):
    """Middle of the box round a face, mm."""
    points = mesh.points[mesh.face_nodes(face)] * 1e3
    return (points.min(axis=0) + points.max(axis=0)) / 2


def test_faces_lie_where_the_conventions_put_them():
    fork = generate(make_shape(FAMILIES["fork"], FORK), size_mm=8.0)
    assert centre(fork, "root") == pytest.approx([0, 0, 0], abs=1e-9)
    assert centre(fork, "tip_1") == pytest.approx([60, -3.5, 0])
    assert centre(fork, "tip_2") == pytest.approx([60, 3.5, 0])
    assert centre(fork, "left")[1] == pytest.approx(6)
    assert centre(fork, "top")[2] == pytest.approx(1.5)
    tuning = generate(make_shape(FAMILIES["tuning_fork"], TUNING), size_mm=6.0)
    # Behind x = 0: a yoke of 3 + 1.5 * 5 mm and a stem of 30 mm.
    assert centre(tuning, "stem_end") == pytest.approx([-40.5, 0, 0], abs=1e-9)
    assert centre(tuning, "tip_1") == pytest.approx([30, 0, -5.5])
    assert centre(tuning, "tip_2") == pytest.approx([30, 0, 5.5])


def test_a_drilled_tube_lost_what_the_drill_took():
    # Two cylinders crossing at right angles: chords of both walls over the hole's disc.
    _, dimensions, size = BODIES["tube with cross holes"]
    mesh = generate(make_shape(FAMILIES["tube"], dimensions), size_mm=size)
    z = 2.5 * np.sin((np.arange(2000) + 0.5) / 2000 * np.pi - np.pi / 2)
    chords = 2 * np.sqrt(6.25 - z**2) * (2 * np.sqrt(100 - z**2) - 2 * np.sqrt(36 - z**2))
    taken = np.sum(chords * np.sqrt(6.25 - z**2)) * np.pi / 2000
    assert mesh.volume * 1e9 == pytest.approx(np.pi * 64 * 30 - taken, rel=1e-5)
