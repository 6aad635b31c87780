"""Names of solved parts: against symmetry, theory's order, other meshes, crossings."""

from __future__ import annotations

import numpy as np
import pytest
from modewright.fem.modal.case import Case
from modewright.fem.modal.material import Material
from modewright.fem.modal.mount import Hold, Mount
from modewright.fem.modal.naming.identify import Identity, identify
from modewright.fem.modal.spectrum import solve_spectrum
from modewright.fem.modal.system import build_system
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.mesh import Mesh
from modewright.geometry.mesher import generate
from modewright.geometry.selector import ByName
from modewright.geometry.shape import make_shape


def steel(poisson=0.29):
    return Material(name="steel", youngs_modulus=205e9, poisson_ratio=poisson, density=7850.0)


def solved(
    family, *held, size, modes, material=None, **dimensions
) -> tuple[Mesh, np.ndarray, Identity]:
    shape = make_shape(FAMILIES[family], dimensions)
    faces = tuple(ByName(name=name) for name in held)
    mounts = (Mount(hold=Hold.CLAMPED, faces=faces),) if held else ()
    mesh = generate(shape, size_mm=size)
    case = Case(title="", shape=shape, material=material or steel(), mounts=mounts)
    system = build_system(case, mesh)
    spectrum = solve_spectrum(system, modes=modes)
    anatomy = shape.anatomy()
    assert anatomy is not None
    found = identify(mesh, anatomy, spectrum.frequencies, spectrum.shapes, system.mass)
    return mesh, spectrum.frequencies, found


def ratios_to_first(frequencies, names, wanted):
    return [frequencies[names.index(name)] / frequencies[0] for name in wanted]


def test_names_of_a_bar_outlast_the_mesh_and_a_small_change():
    first = solved("bar", "root", size=2.5, modes=8, length=60, width=8, thickness=1.2)
    finer = solved("bar", "root", size=1.6, modes=8, length=60, width=8, thickness=1.2)
    other = solved("bar", "root", size=2.5, modes=8, length=61, width=8.1, thickness=1.21)
    assert first[2].names == finer[2].names == other[2].names
    # Clamped-free beam, 1 : 6.27 : 17.5 : 34.4 (Blevins 1979, table 8-1).
    wanted = [f"flatwise bending {n}" for n in (1, 2, 3, 4)]
    got = ratios_to_first(first[1], first[2].names, wanted)
    np.testing.assert_allclose(got, (1, 6.267, 17.55, 34.39), rtol=0.015)
    for one, two in zip(first[2].labels, finer[2].labels, strict=True):
        assert one.shares == pytest.approx(two.shares, abs=0.005)
        assert one.nodal_points_mm == pytest.approx(two.nodal_points_mm, abs=0.05)
    # Signs too: the tip goes the same way.
    tips = [i.shapes[:, np.argmax(m.points @ (1.0, 0.3, 0.2))] for m, _, i in (first, finer)]
    assert (np.einsum("mk,mk->m", *tips) > 0).all()


def test_names_change_places_where_two_modes_cross():
    # Edgewise bending rises with the width, flatwise bending does not; they cross
    # near width / thickness = 6.27, the ratio of the second flatwise to the first.
    narrow, wide = (
        solved("bar", "root", size=2.5, modes=4, length=60, width=w, thickness=1.2)
        for w in (7.2, 8.0)
    )
    assert set(narrow[2].names) == set(wide[2].names)
    assert narrow[2].names[1:3] == ("edgewise bending 1", "flatwise bending 2")
    assert wide[2].names[1:3] == ("flatwise bending 2", "edgewise bending 1")
    two = [f[i.names.index("flatwise bending 2")] for _, f, i in (narrow, wide)]
    assert two[0] == pytest.approx(two[1], rel=0.005)


@pytest.mark.parametrize("section", [{"width": 6, "thickness": 6}, {"diameter": 6}])
def test_square_and_round_bars_bend_in_pairs(section):
    _, frequencies, found = solved("bar", size=3.0, modes=6, length=80, **section)
    assert found.names[:4] == ("bending 1 a", "bending 1 b", "bending 2 a", "bending 2 b")
    assert found.labels[0].pair == "bending 1 b"
    assert frequencies[1] / frequencies[0] < 1.001
    for i, axis in ((0, 2), (1, 1), (2, 2), (3, 1)):
        sideways = np.linalg.norm(found.shapes[i], axis=0)
        assert sideways[axis] > 50 * sideways[3 - axis]


def test_prongs_are_told_by_what_their_tips_do():
    mesh, _, found = solved(
        "fork", "root", size=3.0, modes=10, length=120, width=14, thickness=2.5,
        slot_length=70, slot_width=2,
    )  # fmt: skip
    axis = {"flatwise": 2, "edgewise": 1}
    seen = set()
    for shape, name in zip(found.shapes, found.names, strict=True):
        kind = name.split()[0]
        if kind not in axis:
            continue
        tips = [shape[mesh.face_nodes(f"tip_{k}"), axis[kind]].mean() for k in (1, 2)]
        together = tips[0] * tips[1] > 0
        assert name.endswith("prongs together" if together else "prongs opposed")
        seen.add((kind, together))
    assert len(seen) == 4
    for label in found.labels:
        assert abs(label.prong_balance or 0.0) > 0.99


def test_twelve_equal_tines_on_a_held_base_each_have_their_mode():
    tine = {"length": 25, "width": 4, "thickness": 1, "gap": 1.5}
    _, frequencies, found = solved(
        "comb", "base_back", "base_top", "base_bottom", size=6.0, modes=12,
        base_length=4, base_width=70, base_thickness=2, tines=[tine] * 12,
    )  # fmt: skip
    assert frequencies[11] / frequencies[0] < 1.01
    bases = {f"flatwise bending 1, tine {k}" for k in range(1, 13)}
    assert set(found.names[:12]) == bases


def test_a_free_disc_has_the_modes_of_thin_plate_theory():
    _, frequencies, found = solved(
        "plate", size=12.0, modes=9, material=steel(0.33), diameter=160, thickness=3
    )
    # Leissa, Vibration of Plates (NASA SP-160, 1969), table 2.5: free circular plate,
    # poisson 0.33.
    theory = np.array([5.253, 9.084, 12.23, 20.52, 21.6])
    order = ("(2,0)", "(0,1)", "(3,0)", "(1,1)", "(4,0)")
    wanted = [f"disc {o}" + ("" if o.startswith("(0") else " a") for o in order]
    got = ratios_to_first(frequencies, found.names, wanted)
    np.testing.assert_allclose(got, theory / theory[0], rtol=0.015)


def test_a_ring_has_the_orders_of_thin_ring_theory():
    _, frequencies, found = solved(
        "ring", size=4.0, modes=12, mean_diameter=100, width=4, thickness=5
    )
    # Love, Mathematical Theory of Elasticity (4th ed.), art. 293: in-plane bending
    # goes as n (n^2 - 1) / sqrt(n^2 + 1).
    n = np.array([2, 3, 4])
    got = ratios_to_first(frequencies, found.names, [f"ring {k} in-plane a" for k in n])
    theory = n * (n**2 - 1) / np.sqrt(n**2 + 1)
    np.testing.assert_allclose(got, theory / theory[0], rtol=0.02)
    assert found.labels[found.names.index("ring 2 in-plane a")].pair == "ring 2 in-plane b"


def test_a_square_plate_has_two_products_in_a_name_and_a_pair():
    _, frequencies, found = solved("plate", size=10.0, modes=6, length=160, width=160, thickness=4)
    # Leissa (1969), table 4.64 gives the order of a free square plate: one line each way,
    # then the saddle, the bowl, and a pair.
    assert found.names[:3] == ("plate (1,1)", "plate (2,0)-(0,2)", "plate (2,0)+(0,2)")
    assert set(found.names[3:5]) == {"plate (2,1)", "plate (1,2)"}
    assert frequencies[4] / frequencies[3] < 1.001


def test_a_held_tube_bends_and_rings_as_a_shell():
    _, _, found = solved("tube", "end_a", size=6.0, modes=8, length=60, outer_diameter=40, wall=2)
    names = found.names
    assert {"shell (2,0) a", "shell (2,0) b", "bending 1 a", "bending 1 b"} <= set(names)
    # Of one circumferential order, the mode without a nodal circle is the lowest.
    for n in (2, 3):
        circles = [name[8] for name in names if name.startswith(f"shell ({n},")]
        assert circles == sorted(circles)
