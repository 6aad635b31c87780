"""From a case to named modes: pitches, ratios, masses and facts of a coarse bar."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from modewright.cases import build_case, compare, read_case
from modewright.fem import solve
from modewright.fem.modal.memory import peak_megabytes
from modewright.fem.modal.solve import case_mesh, case_patches
from modewright.geometry import InputError

LENGTH, WIDTH, THICKNESS = 100.0, 6.0, 4.0
E, RHO = 205e9, 7850.0
#: Roots of cos x cosh x = -1: a clamped-free beam (Blevins 1979, table 8-1).
ROOTS = (1.87510407, 4.69409113)


def document(**tables):
    return {
        "title": "Quay rod",
        "shape": {"family": "bar", "length": LENGTH, "width": WIDTH, "thickness": THICKNESS},
        "material": {
            "youngs_modulus_gpa": E / 1e9,
            "poisson_ratio": 0.29,
            "density": RHO,
            "modulus_slope_ppm_per_k": -250,
            "expansion_ppm_per_k": 12,
        },
        "mount": {"kind": "clamped", "faces": ["root"]},
        "solve": {"modes": 5, "size": 4.0},
        **tables,
    }


def euler(root: float, depth: float) -> float:
    """Return the frequency of a slender clamped-free beam, Hz."""
    inertia_over_area = (depth * 1e-3) ** 2 / 12
    return root**2 / (2 * math.pi) * math.sqrt(E * inertia_over_area / RHO) / (LENGTH * 1e-3) ** 2


@pytest.fixture(scope="module")
def mesh():
    return case_mesh(build_case(document()))


@pytest.fixture(scope="module")
def modes(mesh):
    return solve(build_case(document()), mesh=mesh)


def test_names_and_frequencies_of_a_clamped_bar(modes):
    assert modes.names[:4] == (
        "flatwise bending 1",
        "edgewise bending 1",
        "flatwise bending 2",
        "edgewise bending 2",
    )
    slender = [
        euler(ROOTS[0], THICKNESS),
        euler(ROOTS[0], WIDTH),
        euler(ROOTS[1], THICKNESS),
        euler(ROOTS[1], WIDTH),
    ]
    off = 1200 * np.log2(modes.frequencies[:4] / slender)
    # Shear and rotation make thick beams flat, the clamp's hold on the width sharp.
    assert np.all(np.abs(off) < (8, 12, 20, 40))


def test_theory_stands_beside(modes):
    for mode in modes.modes[:4]:
        assert mode.theory is not None
        assert mode.theory_hz == pytest.approx(mode.frequency_hz, rel=0.006)


def test_modal_mass_of_a_slender_cantilever_is_a_quarter_of_its_mass(modes):
    # With phi(L) = 2 the integral of phi^2 over the length is L, for every mode.
    mass = RHO * LENGTH * WIDTH * THICKNESS * 1e-9 * 1e3
    assert modes.mesh_facts.mass_g == pytest.approx(mass, rel=1e-12)
    assert modes.modes[0].modal_mass_g == pytest.approx(mass / 4, rel=0.01)
    assert modes.modes[2].modal_mass_g == pytest.approx(mass / 4, rel=0.03)


def test_each_number_follows_from_the_frequencies(modes):
    hz = modes.frequencies
    for mode in modes.modes:
        assert mode.mesh_error_cents > 0
        corrected = mode.raw_hz * 2 ** (-mode.mesh_error_cents / 1200)
        assert mode.frequency_hz == pytest.approx(corrected, rel=1e-12)
        assert mode.ratio == pytest.approx(mode.frequency_hz / hz[0], rel=1e-14)
        assert mode.nearest_gap_cents == pytest.approx(
            1200 * math.log2(hz[mode.nearest_index - 1] / mode.frequency_hz), abs=1e-9
        )
        others = np.delete(hz, mode.index - 1)
        gaps = np.abs(1200 * np.log2(others / mode.frequency_hz))
        assert abs(mode.nearest_gap_cents) == pytest.approx(gaps.min(), abs=1e-9)
        assert mode.residual < 1e-5
        assert sum(mode.shares.values()) == pytest.approx(1.0)
    assert np.all(np.diff(hz) > 0)
    assert len(modes) == len(modes.modes) == len(modes.shapes)


def test_facts(modes, mesh):
    assert modes.mesh_facts.nodes == len(mesh.points)
    assert modes.mesh_facts.cells == len(mesh.cells)
    assert modes.mesh_facts.size_mm == pytest.approx(4.0)
    assert modes.mesh_facts.volume_mm3 == pytest.approx(LENGTH * WIDTH * THICKNESS)
    held = 3 * len(mesh.face_nodes("root"))
    assert modes.mesh_facts.unknowns == 3 * len(mesh.points) - held
    assert modes.solve_facts.rigid_modes == 0
    assert set(modes.solve_facts.seconds) == {
        "mesh",
        "assemble",
        "factor",
        "eigen",
        "mesh_error",
        "names",
        "total",
    }
    assert 50 < modes.solve_facts.peak_mb < 20000
    assert peak_megabytes() >= modes.solve_facts.peak_mb


def test_targets_and_measured_pitches(mesh):
    case = build_case(
        document(
            pitch={"a4_hz": 442.0, "reference_mode": "edgewise bending 1"},
            target=[
                {"mode": "flatwise bending 1", "note": "F#5"},
                {"mode": "flatwise bending 2", "ratio": 6.0, "of": "flatwise bending 1"},
            ],
            measured=[{"mode": "edgewise bending 2", "hz": 2900.0}],
            expect=[
                {
                    "mode": "flatwise bending 1",
                    "hz": euler(ROOTS[0], THICKNESS),
                    "tolerance_cents": 8,
                    "source": "slender beam",
                },
                {"mode": "edgewise bending 1", "hz": 480, "tolerance_cents": 5, "source": "wrong"},
            ],
        )
    )
    modes = solve(case, mesh=mesh)
    first, edge, second, edge2 = modes.modes[:4]
    assert first.ratio == pytest.approx(first.frequency_hz / edge.frequency_hz)
    assert first.target_hz == pytest.approx(442.0 * 2 ** (9 / 12))
    assert first.cents_to_target == pytest.approx(
        1200 * math.log2(first.frequency_hz / first.target_hz)
    )
    assert second.target_hz == pytest.approx(6.0 * first.frequency_hz)
    assert second.cents_to_target == pytest.approx(
        1200 * math.log2(second.frequency_hz / first.frequency_hz / 6.0)
    )
    assert edge.target_hz is edge.cents_to_target is edge.measured_hz is None
    assert edge2.measured_hz == 2900.0
    assert edge2.cents_to_measured == pytest.approx(1200 * math.log2(edge2.frequency_hz / 2900.0))
    good, bad = compare(modes)
    assert good.met
    assert not bad.met
    assert "edgewise bending 1" in str(bad)


@pytest.mark.parametrize(
    ("tables", "key", "part"),
    [
        ({"target": [{"mode": "bending", "hz": 1}]}, "target.1.mode", "more than one"),
        ({"target": [{"mode": "torson 1", "hz": 1}]}, "target.1.mode", "no mode has that name"),
        (
            {"target": [{"mode": "flatwise bending 1", "ratio": 2, "of": "ring 2"}]},
            "target.1.of",
            "no mode",
        ),
        ({"measured": [{"mode": "disc (2,0)", "hz": 1}]}, "measured.1.mode", "no mode"),
        (
            {
                "measured": [
                    {"mode": "edgewise bending 1", "hz": 1},
                    {"mode": "Edgewise  bending 1", "hz": 2},
                ]
            },
            "measured.2.mode",
            "stands there already",
        ),
        ({"pitch": {"reference_mode": "plate (2,0)"}}, "pitch.reference_mode", "no mode"),
        ({"solve": {"up_to_hz": 1.0, "size": 4.0}}, "solve.up_to_hz", "no mode lies that low"),
    ],
)
def test_names_that_fit_no_mode(tables, key, part, mesh):
    with pytest.raises(InputError, match=part) as caught:
        solve(build_case(document(**tables)), mesh=mesh)
    assert caught.value.key == key


def test_a_warmer_bar_is_flatter_by_modulus_and_size(mesh, modes):
    warm = solve(build_case(document(surroundings={"temperature_c": 50})), mesh=mesh)
    # At constant mass every frequency goes with the root of E L.
    factor = math.sqrt((1 - 250e-6 * 30) * (1 + 12e-6 * 30))
    assert warm.frequencies == pytest.approx(modes.frequencies * factor, rel=1e-8)
    assert warm.mesh_facts.mass_g == pytest.approx(modes.mesh_facts.mass_g, rel=1e-10)
    assert warm.modes[0].theory_hz == pytest.approx(modes.modes[0].theory_hz * factor, rel=1e-6)


def test_a_material_without_slope_is_told(mesh):
    case = build_case(document(surroundings={"temperature_c": 50}))
    case = replace(case, material=replace(case.material, modulus_slope=None))
    assert any("modulus_slope_ppm_per_k" in text for text in solve(case, mesh=mesh).warnings)


def test_the_same_digits_again(mesh, modes):
    again = solve(build_case(document()), mesh=mesh)
    assert again.frequencies == pytest.approx(modes.frequencies, rel=1e-12)
    assert again.names == modes.names
    assert np.abs(again.shapes - modes.shapes).max() < 1e-6 * np.abs(modes.shapes).max()


def test_a_patch_that_covers_the_face_end_holds_less_than_the_whole():
    case = build_case(
        document(
            mount={
                "kind": "clamped",
                "faces": [
                    {"face": "bottom", "from": [0, -3], "to": [10, 3]},
                    {"face": "top", "from": [0, -3], "to": [10, 3]},
                ],
            }
        )
    )
    assert [patch.name for patch in case_patches(case)] == ["patch_1", "patch_2"]
    modes = solve(case)
    # Jaws of 10 mm leave 90 mm free, and give a little.
    free = LENGTH - 10.0
    wanted = euler(ROOTS[0], THICKNESS) * (LENGTH / free) ** 2
    assert wanted * 0.95 < modes.frequencies[0] < wanted


def test_pairs_of_a_square_bar_are_not_their_own_neighbours():
    shape = {"family": "bar", "length": LENGTH, "width": 5.0, "thickness": 5.0}
    modes = solve(build_case(document(shape=shape)))
    first, second = modes.modes[:2]
    assert (first.name, second.name) == ("bending 1 a", "bending 1 b")
    assert first.pair == second.name
    assert first.nearest_index == second.nearest_index == 3


def test_five_lines_of_python(tmp_path, capsys):
    path = tmp_path / "rod.toml"
    path.write_text(
        'title = "Rod"\n[shape]\nfamily = "bar"\nlength = 60\ndiameter = 5\n'
        '[material]\nname = "brass C360"\n[solve]\nmodes = 4\nsize = 4\n'
    )
    case = read_case(path)
    modes = solve(case)
    print(modes)
    assert modes.frequencies.shape == (4,)
    assert modes.shapes.shape == (4, len(modes.mesh.points), 3)
    assert len(modes.names) == 4
    assert modes.solve_facts.rigid_modes == 6
    assert modes.names[0] in capsys.readouterr().out
    assert f"<td>{modes.modes[0].frequency_hz:.2f}</td>" in modes._repr_html_()


def test_progress_tells_the_stages(mesh):
    said: list[str] = []
    solve(build_case(document()), mesh=mesh, progress=said.append)
    assert [words.split()[0] for words in said] == ["assembling", "solving", "naming"]
