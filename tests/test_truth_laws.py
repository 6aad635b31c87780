"""Laws that hold whatever the part: scaling, temperature, turned bodies, equal modes."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

SHAPE = {"length": 60.0, "width": 9.0, "thickness": 4.0, "width_tip": 6.0, "thickness_tip": 3.0}
STEEL = {
    "name": "carbon steel",
    "youngs_modulus_gpa": 200.0,
    "poisson_ratio": 0.3,
    "density": 8000.0,
    "modulus_slope_ppm_per_k": -240.0,
    "expansion_ppm_per_k": 12.0,
}


def wedge(block, factor=1.0, counts=(10, 2, 2)):
    """A bar that tapers evenly, so that it has neither equal sides nor equal ends."""
    length = SHAPE["length"] * factor

    def warp(points):
        share = points[:, 0] / length
        return points * np.column_stack([np.ones_like(share), 1 - share / 3, 1 - share / 4])

    return block((length, SHAPE["width"] * factor, SHAPE["thickness"] * factor), counts, warp=warp)


@pytest.fixture(scope="module")
def wedge_modes(block, solve_as_case):
    return solve_as_case("bar", SHAPE, mesh=wedge(block), material=STEEL, modes=8)


def test_half_the_size_is_an_octave_up(block, solve_as_case, wedge_modes):
    small = {name: value / 2 for name, value in SHAPE.items()}
    modes = solve_as_case("bar", small, mesh=wedge(block, 0.5), material=STEEL, modes=8)
    np.testing.assert_allclose(modes.frequencies, 2 * wedge_modes.frequencies, rtol=1e-8)
    assert modes.names == wedge_modes.names
    for one, other in zip(modes.modes, wedge_modes.modes, strict=True):
        assert one.cents_from_note == pytest.approx(other.cents_from_note, abs=1e-4)
        assert one.modal_mass_g == pytest.approx(other.modal_mass_g / 8, rel=1e-6)


@pytest.mark.parametrize(("key", "power"), [("youngs_modulus_gpa", 0.5), ("density", -0.5)])
def test_stiffness_and_density_go_by_the_root(block, solve_as_case, wedge_modes, key, power):
    material = {**STEEL, key: STEEL[key] * 1.7}
    modes = solve_as_case("bar", SHAPE, mesh=wedge(block), material=material, modes=8)
    np.testing.assert_allclose(modes.frequencies, 1.7**power * wedge_modes.frequencies, rtol=1e-8)
    assert modes.names == wedge_modes.names


def test_warmth_is_half_of_modulus_slope_and_expansion(block, solve_as_case, wedge_modes):
    rise = 10.0
    modes = solve_as_case(
        "bar", SHAPE, mesh=wedge(block), material=STEEL, modes=8,
        surroundings={"temperature_c": 20.0 + rise},
    )  # fmt: skip
    # (1/f) df/dT = (slope + alpha) / 2: all lengths grow alike and the mass stays.
    wanted = 1200 / np.log(2) * 0.5 * (-240e-6 + 12e-6) * rise
    cents = 1200 * np.log2(modes.frequencies / wedge_modes.frequencies)
    np.testing.assert_allclose(cents, wanted, rtol=2e-3)


def test_names_of_an_imported_body_turn_with_it(block, solve_as_case):
    corners = [[0.0, 0.0], [60.0, 0.0], [60.0, 9.0], [0.0, 9.0]]
    mesh = wedge(block)
    turn, _ = np.linalg.qr(np.array([[0.3, -0.8, 0.5], [0.9, 0.4, -0.2], [0.1, 0.5, 0.8]]))
    turn *= np.sign(np.linalg.det(turn))
    turned = replace(mesh, points=mesh.points @ turn.T + (0.2, -0.1, 0.05))
    # The outline only says that the body is an imported one; the mesh is the body.
    still, moved = (
        solve_as_case(
            "outline", {"outline": corners, "thickness": 4.0}, mesh=body, material=STEEL, modes=8
        )
        for body in (mesh, turned)
    )
    assert still.anatomy.kind.value == "bar"
    assert {name.rsplit(" ", 1)[0] for name in still.names} >= {
        "flatwise bending", "edgewise bending", "torsion",
    }  # fmt: skip
    assert moved.names == still.names
    np.testing.assert_allclose(moved.frequencies, still.frequencies, rtol=1e-8)
    # Shapes turn too, sign and all.
    np.testing.assert_allclose(
        moved.shapes, still.shapes @ turn.T, atol=1e-5 * np.abs(still.shapes).max()
    )
    for one, other in zip(moved.modes, still.modes, strict=True):
        assert one.shares == pytest.approx(other.shares, abs=1e-7)


def test_names_outlast_the_mesh(block, solve_as_case, wedge_modes):
    finer = solve_as_case(
        "bar", SHAPE, mesh=wedge(block, counts=(16, 4, 3)), material=STEEL, modes=8
    )
    other = solve_as_case("bar", SHAPE, size=4.0, material=STEEL, modes=8)
    longer = {**SHAPE, "length": 60.6, "width": 9.1}
    changed = solve_as_case("bar", longer, size=4.0, material=STEEL, modes=8)
    assert finer.names == other.names == changed.names == wedge_modes.names
    np.testing.assert_allclose(other.frequencies, finer.frequencies, rtol=1.5e-2)


def test_twelve_equal_tines_come_whole_and_by_number(block, solve_as_case):
    # A structured mesh is the same in every tine.
    tine, gap, length, base, margin = 3.0, 2.0, 20.0, 4.0, 2.0
    width, thickness = 12 * tine + 11 * gap + 2 * margin, 2.0
    pitch = (tine + gap) / width

    def keep(share):
        along, across = share[:, 0], share[:, 1]
        row = across - margin / width
        in_tine = (row > 0) & (row < 1 - 2 * margin / width) & (np.mod(row, pitch) < tine / width)
        return (along < base / (base + length)) | in_tine

    mesh = block((base + length, width, thickness), (12, int(width), 1), keep=keep)
    # The base is held at its back and its upper and lower faces.
    names = {"root": "base_back", "left": "base_left", "right": "base_right"}
    faces = {names.get(name, name): indices for name, indices in mesh.faces.items()}
    middles = mesh.points[mesh.facets[:, :3]].mean(axis=1)
    for name, new in (("bottom", "base_bottom"), ("top", "base_top")):
        indices = faces.pop(name)
        faces[new] = indices[middles[indices, 0] < 1e-3 * base]
    mesh = replace(mesh, faces=faces)
    row = {"length": length, "width": tine, "thickness": thickness, "gap": gap}
    modes = solve_as_case(
        "comb",
        {
            "base_length": base,
            "base_width": width,
            "base_thickness": thickness,
            "tines": [row] * 12,
        },
        mesh=mesh,
        modes=5,
        held=["base_back", "base_top", "base_bottom"],
    )
    assert len(modes) == 12
    assert 1200 * np.log2(modes.frequencies[11] / modes.frequencies[0]) < 0.5
    assert {mode.name for mode in modes.modes} == {
        f"flatwise bending 1, tine {k}" for k in range(1, 13)
    }
    # Each moves alone.
    for mode in modes.modes:
        number = int(mode.name.rsplit(" ", 1)[1])
        assert mode.tine_shares[number - 1] > 0.95
