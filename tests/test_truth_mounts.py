"""Supports held to rigid-body formulas, to limits and to symmetry."""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np
from modewright.geometry.mesh import Mesh
from scipy.linalg import eigh
from scipy.optimize import brentq

RHO = 8000.0
STIFF = {
    "name": "carbon steel",
    "youngs_modulus_gpa": 1000.0,
    "poisson_ratio": 0.3,
    "density": RHO,
}


def test_a_stiff_block_on_a_bed_of_springs(block, solve_as_case):
    length, width, thickness = 10.0, 30.0, 20.0
    normal, tangential = 0.02, 0.01  # N/mm3
    modes = solve_as_case(
        "bar",
        {"length": length, "width": width, "thickness": thickness},
        mesh=block((length, width, thickness), (2, 4, 3)),
        material=STIFF,
        mount={
            "kind": "springs",
            "faces": ["root"],
            "normal_n_per_mm3": normal,
            "tangential_n_per_mm3": tangential,
        },
    )
    assert modes.solve_facts.rigid_modes == 0
    a, b, c = 1e-3 * length, 1e-3 * width, 1e-3 * thickness
    area, mass = b * c, RHO * a * b * c
    kn, kt = 1e9 * normal * area, 1e9 * tangential * area
    heave = np.sqrt(kn / mass)
    twist = np.sqrt(kt * (b**2 + c**2) / 12 / (mass * (b**2 + c**2) / 12))

    def rocking(side):
        """Sideways motion u of the bed and the turn about it, of a rigid block."""
        inertia = mass * (side**2 / 12 + a**2 / 3)
        stiffness = np.diag([kt, kn * side**2 / 12])
        return np.sqrt(eigh(stiffness, [[mass, mass * a / 2], [mass * a / 2, inertia]])[0])

    wanted = np.sort([heave, twist, *rocking(b), *rocking(c)]) / (2 * np.pi)
    np.testing.assert_allclose(modes.frequencies, wanted, rtol=1e-3)


def test_a_rod_that_slides_against_springs(block, solve_as_case):
    # Plane waves are exact where nothing strains sideways: x tan x = k L / E,
    # omega = (x / L) sqrt(E / rho).
    length, modulus = 0.050, 200e9
    for pull in (0.3, 5.0):
        modes = solve_as_case(
            "bar",
            {"length": 1e3 * length, "width": 4.0, "thickness": 3.0},
            mesh=block((1e3 * length, 4, 3), (8, 1, 1)),
            material={"name": "carbon steel", "youngs_modulus_gpa": modulus * 1e-9,
                      "poisson_ratio": 0.0, "density": RHO},
            mount=[
                {"kind": "springs", "faces": ["root"],
                 "normal_n_per_mm3": pull * modulus / length * 1e-9},
                {"kind": "sliding", "faces": ["left", "right", "top", "bottom"]},
            ],
            modes=2,
        )  # fmt: skip
        roots = [
            brentq(
                lambda x, pull=pull: x * np.sin(x) - pull * np.cos(x), n * np.pi, (n + 1) * np.pi
            )
            for n in (0, 1)
        ]
        wanted = np.array(roots) / (2 * np.pi * length) * np.sqrt(modulus / RHO)
        np.testing.assert_allclose(modes.frequencies, wanted, rtol=2e-5)
        assert modes.names == ("axial 1", "axial 2")


def test_springs_go_from_free_to_clamped(block, solve_as_case):
    shape = {"length": 60.0, "width": 8.0, "thickness": 3.0}
    mesh = block((60, 8, 3), (12, 2, 2))

    def raw(modes):
        return np.array([mode.raw_hz for mode in modes.modes])

    def on(stiffness, count=6):
        bed = {"kind": "springs", "faces": ["root"], "normal_n_per_mm3": stiffness,
               "tangential_n_per_mm3": stiffness}  # fmt: skip
        return solve_as_case("bar", shape, mesh=mesh, mount=bed, modes=count)

    clamped = solve_as_case("bar", shape, mesh=mesh, held=["root"])
    near, nearer = on(1e8), on(1e9)
    assert nearer.names == clamped.names
    off, less = 1 - raw(near) / raw(clamped), 1 - raw(nearer) / raw(clamped)
    assert np.all(less > 0)
    assert np.all(less < 5e-5)
    # A bed gives by 1 / k.
    np.testing.assert_allclose(off / less, 10.0, rtol=0.15)
    free = solve_as_case("bar", shape, mesh=mesh, modes=3)
    np.testing.assert_allclose(raw(on(1e-2, 9))[6:], raw(free), rtol=2e-4)


# --- a fork cut along its plane of symmetry ---

LENGTH, HALF, THICKNESS, SLOT, CLOSED = 100.0, 7.0, 2.5, 2.0, 40.0
COUNTS = (30, 7, 2)


def half_fork(block) -> Mesh:
    """The half at y > 0, with the named faces root and middle (y = 0)."""
    whole = block(
        (LENGTH, HALF, THICKNESS),
        COUNTS,
        keep=lambda share: (share[:, 0] < CLOSED / LENGTH) | (share[:, 1] > SLOT / 2 / HALF),
        warp=lambda points: points + np.array([0.0, HALF / 2, 0.0]),
    )
    return replace(
        whole,
        faces={
            {"right": "edge_1", "tip": "tip_2"}.get(name, name): facets
            for name, facets in whole.faces.items()
        },
    )


def mirrored(half: Mesh) -> Mesh:
    """Both halves as one body, node for node the same on either side of y = 0."""
    n = len(half.points)
    middle = half.points[:, 1] == 0.0
    image = np.where(middle, np.arange(n), n + np.cumsum(~middle) - 1)
    points = np.vstack([half.points, half.points[~middle] * (1, -1, 1)])
    # A mirror turns cells and facets inside out: change two corners, and their mid-sides.
    cells = image[half.cells][:, [0, 2, 1, 3, 6, 5, 4, 7, 9, 8]]
    facets = image[half.facets][:, [0, 2, 1, 5, 4, 3]]
    inner = np.isin(np.arange(len(half.facets)), half.faces["edge_1"])
    kept = np.cumsum(~inner) - 1
    faces = {}
    for name, indices in half.faces.items():
        if name != "edge_1":
            faces[name] = kept[indices[~inner[indices]]]
    count = (~inner).sum()
    both = {name: np.concatenate([indices, indices + count]) for name, indices in faces.items()}
    both["tip_1"], both["tip_2"] = faces["tip_2"] + count, faces["tip_2"]
    return Mesh(
        points=points,
        cells=np.vstack([half.cells, cells]),
        facets=np.vstack([half.facets[~inner], facets[~inner]]),
        faces=both,
        size=half.size,
        volume=2 * half.volume,
    )


#: Seen in the mirror y -> -y: which kinds of motion are the same on both prongs
#: ("together") in modes that the mirror leaves as they are. A slide along the plane
#: (x, z) is left; a slide along y and a turn about x are turned round.
KEPT = {"flatwise bending": "together", "axial": "together", "edgewise bending": "opposed",
        "torsion": "opposed"}  # fmt: skip


def test_a_fork_is_its_two_halves(block, solve_as_case):
    half = half_fork(block)
    corners = [
        [0.0, 0.0], [CLOSED, 0.0], [CLOSED, SLOT / 2], [LENGTH, SLOT / 2], [LENGTH, HALF],
        [0.0, HALF],
    ]  # fmt: skip
    outline = {"outline": corners, "thickness": THICKNESS}
    # The first edge drawn is the cut; the last the root, in the mesh as in the drawing.
    half = replace(half, faces={**half.faces, "edge_6": half.faces["root"]})
    clamp = {"kind": "clamped", "faces": ["edge_6"]}
    even = solve_as_case(
        "outline", outline, mesh=half, modes=8,
        mount=[clamp, {"kind": "sliding", "faces": ["edge_1"]}],
    )  # fmt: skip
    odd = solve_as_case(
        "outline", outline, mesh=half, modes=8,
        mount=[clamp, {"kind": "held", "axes": ["x", "z"], "faces": ["edge_1"]}],
    )  # fmt: skip
    fork = {
        "length": LENGTH, "width": 2 * HALF, "thickness": THICKNESS,
        "slot_length": LENGTH - CLOSED, "slot_width": SLOT, "slot_end": "square",
    }  # fmt: skip
    whole = solve_as_case("fork", fork, mesh=mirrored(half), modes=12, held=["root"])
    raw = [np.array([mode.raw_hz for mode in modes.modes]) for modes in (even, odd, whole)]
    union = sorted([*((hz, "even") for hz in raw[0]), *((hz, "odd") for hz in raw[1])])[:12]
    np.testing.assert_allclose(raw[2], [hz for hz, _ in union], rtol=1e-7)
    seen = set()
    for (_, parity), name in zip(union, whole.names, strict=True):
        motion, prongs = name.split(", prongs ")
        kind = motion.rsplit(" ", 1)[0]
        assert prongs == (KEPT[kind] if parity == "even" else
                          {"together": "opposed", "opposed": "together"}[KEPT[kind]])  # fmt: skip
        seen.add((kind, prongs))
    assert seen >= set(itertools.product(["flatwise bending", "edgewise bending"],
                                         ["together", "opposed"]))  # fmt: skip
    # The same fork by its family and a free mesh.
    free = solve_as_case("fork", fork, size=3.5, modes=6, held=["root"])
    np.testing.assert_allclose(free.frequencies, whole.frequencies[:6], rtol=1.5e-3)
    assert free.names == whole.names[:6]
