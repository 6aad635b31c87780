"""An accuracy in cents drives the mesh."""

import importlib.util
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from modewright.cases.reader import build_case
from modewright.cases.verbs.modes import answer_modes
from modewright.fem.modal import adapt as adapting
from modewright.fem.modal.refinement import graded, size_factors, smoothed
from modewright.fem.modal.solve import case_mesh, solve
from modewright.geometry.errors import InputError
from modewright.geometry.mesher import generate
from modewright.geometry.quality import evenness
from modewright.geometry.size_field import SizeField

FORK = {
    "family": "fork", "length": 60.0, "width": 12.0, "thickness": 3.0,
    "slot_length": 36.0, "slot_width": 3.0,
}  # fmt: skip
PLATE = {
    "family": "plate", "length": 60.0, "width": 20.0, "thickness": 4.0,
    "holes": [{"x": 5.0, "y": 0.0, "diameter": 8.0}],
}  # fmt: skip


def case(shape, mount=None, **settings):
    return build_case(
        {
            "title": "Part of the tide clock",
            "shape": shape,
            "material": {"name": "carbon steel"},
            "mount": mount or {"kind": "free"},
            "solve": {"modes": 3, **settings},
        }
    )


def fork(**settings):
    return case(FORK, {"kind": "clamped", "faces": ["root"]}, **settings)


def cents(a, b):
    return 1200.0 * np.log2(np.asarray(a) / np.asarray(b))


@pytest.mark.parametrize(("part", "accuracy", "fine"), [(fork, 2.0, 1.4), (None, 4.0, 1.8)])
def test_accuracy_is_reached(part, accuracy, fine):
    """By estimate, and against a fine uniform mesh less its own (small) error."""
    make = part or (lambda **settings: case(PLATE, **settings))
    result = solve(make(accuracy_cents=accuracy))
    assert result.solve_facts.meshes > 1
    assert not [words for words in result.warnings if "accuracy_cents" in words]
    assert all(0.0 <= row.mesh_error_cents <= accuracy for row in result.modes)
    truth = solve(make(size=fine))
    assert max(row.mesh_error_cents for row in truth.modes) < accuracy
    true = cents([row.raw_hz for row in result.modes], truth.frequencies)
    assert np.all(np.abs(true) < 1.3 * accuracy)


def test_an_accuracy_that_is_met_at_once_takes_one_mesh():
    result = solve(case(PLATE, accuracy_cents=80.0))
    assert result.solve_facts.meshes == 1
    assert result.solve_facts.missing_modes in (0, None)
    mesh = case_mesh(case(PLATE, accuracy_cents=80.0))
    np.testing.assert_array_equal(mesh.points, result.mesh.points)


def test_same_digits_twice():
    one, other = (solve(case(PLATE, accuracy_cents=12.0)) for _ in range(2))
    assert one.solve_facts.meshes == other.solve_facts.meshes
    np.testing.assert_array_equal(one.mesh.points, other.mesh.points)
    np.testing.assert_array_equal(one.frequencies, other.frequencies)


def test_at_the_limit_the_best_result_stands_with_a_warning(monkeypatch):
    monkeypatch.setattr(adapting, "MOST_UNKNOWNS", 15_000)
    block = {"family": "bar", "length": 20.0, "width": 10.0, "thickness": 8.0}
    held = {"kind": "clamped", "faces": ["root"]}
    result = solve(case(block, held, accuracy_cents=0.05))
    assert result.mesh_facts.unknowns < 25_000
    assert max(row.mesh_error_cents for row in result.modes) > 0.05
    (words,) = [words for words in result.warnings if "accuracy_cents = 0.05" in words]
    assert "the limit here" in words
    # The clamped end has sharp edges, and they have a name.
    assert "'root'" in words


def test_a_mesh_that_was_given_is_taken_as_it_is():
    part = case(PLATE, accuracy_cents=0.1)
    result = solve(part, mesh=generate(part.shape, coarse=True))
    (words,) = [words for words in result.warnings if "accuracy_cents" in words]
    assert "the mesh was given" in words


def uniform_field(shape, sizes):
    """Sizes as a function of the points (n, 3) mm, on the corners of a coarse mesh."""
    mesh = generate(shape, coarse=True)
    corners, cells = np.unique(mesh.cells[:, :4], return_inverse=True)
    points = 1e3 * mesh.points[corners]
    return SizeField(points=points, cells=cells.reshape(-1, 4), sizes=sizes(points))


def test_cells_follow_the_size_field():
    """0.6 mm at one corner, growing to 3 mm: edges are as asked for, near and far."""
    shape = case(PLATE).shape
    corner = np.array([-30.0, -10.0, 2.0])

    def size(points):
        return np.clip(0.6 + 0.3 * np.linalg.norm(points - corner, axis=1), 0.6, 3.0)

    mesh = generate(shape, size_field=uniform_field(shape, size))
    assert evenness(mesh.points, mesh.cells).min() > 0.05
    ends = 1e3 * mesh.points[mesh.cells[:, :4]]
    edge = np.linalg.norm(ends[:, 0] - ends[:, 1], axis=1)
    distance = np.linalg.norm(ends.mean(axis=1) - corner, axis=1)
    near, far = distance < 2.0, (distance > 15.0) & (ends[..., 0].mean(axis=1) > 15.0)
    assert 0.5 < np.median(edge[near]) < 1.5
    assert 2.0 < np.median(edge[far]) < 4.0


def test_a_size_field_must_fit_together():
    points, cells = np.eye(4, 3), np.array([[0, 1, 2, 3]])
    with pytest.raises(InputError, match="over 0 mm"):
        SizeField(points=points, cells=cells, sizes=np.zeros(4))
    with pytest.raises(InputError, match="must point at its points"):
        SizeField(points=points, cells=cells + 1, sizes=np.ones(4))
    with pytest.raises(InputError, match=r"\(n, 3\)"):
        SizeField(points=points, cells=cells, sizes=np.ones(3))


def test_equal_loads_give_equal_sizes_that_just_suffice():
    """Uniform error of 16 times what is allowed, order 4: every cell half as large."""
    load = np.full((50, 1), 16.0 / 50)
    np.testing.assert_allclose(size_factors(load, np.full(50, 4.0)), 0.5, rtol=1e-6)


def test_fewest_cells_where_the_error_is_uneven():
    """Optimal f goes as load^(-1/7) and meets the allowed error, better than any one factor."""
    load = np.geomspace(0.01, 1.0, 30)[:, None]
    load *= 4.0 / load.sum()
    factors = size_factors(load, np.full(30, 4.0))
    np.testing.assert_allclose(factors**7 * load[:, 0], factors[0] ** 7 * load[0, 0], rtol=1e-6)
    assert factors**4 @ load[:, 0] == pytest.approx(1.0, rel=1e-6)
    assert np.sum(factors**-3.0) < 30 * 4.0 ** (3 / 4)


def test_two_modes_are_both_met():
    rng = np.random.default_rng(3)
    load = rng.random((200, 2)) * [1.0, 0.3] / 20
    errors = size_factors(load, np.full(200, 4.0)) ** 4 @ load
    assert errors.max() == pytest.approx(1.0, rel=1e-3)


def test_smoothing_keeps_the_error_and_grading_bounds_the_slope():
    mesh = case_mesh(case(PLATE, size=5.0))
    corners, cells = np.unique(mesh.cells[:, :4], return_inverse=True)
    cells, points = cells.reshape(-1, 4), 1e3 * mesh.points[corners]
    x = points[cells]
    volume = np.abs(np.linalg.det(x[:, 1:] - x[:, :1])) / 6.0
    load = np.random.default_rng(1).random((len(cells), 2))
    smooth = smoothed(load, cells, volume)
    np.testing.assert_allclose(smooth.sum(axis=0), load.sum(axis=0))
    alike = volume[:, None] ** (7.0 / 3.0) * np.ones((1, 2))
    np.testing.assert_allclose(smoothed(alike, cells, volume), alike)
    edges = np.unique(np.sort(cells[:, [0, 1]], axis=1), axis=0)
    sizes = np.full(len(points), 9.0)
    sizes[edges[0, 0]] = 0.1
    first, second = edges.T
    slope = np.diff(graded(points, edges, sizes)[edges], axis=1)[:, 0]
    assert np.all(
        np.abs(slope) <= 0.4 * np.linalg.norm(points[first] - points[second], axis=1) + 1e-9
    )


@pytest.mark.parametrize(
    ("settings", "words"),
    [
        ({"accuracy_cents": 2.0, "size": 1.0}, "both size and accuracy_cents"),
        ({"accuracy_cents": 0.0}, "out of range"),
        ({"accuracy_cents": -1.0}, "out of range"),
        ({"accuracy_cents": 1e9}, "out of range"),
    ],
)
def test_settings_that_cannot_be(settings, words):
    with pytest.raises(InputError, match=words) as error:
        case(PLATE, **settings)
    assert error.value.key.startswith("solve")


def test_the_option_takes_the_place_of_the_cases_size(tmp_path):
    path = tmp_path / "case.toml"
    path.write_text(
        'title = "Lath"\n[shape]\nfamily = "bar"\nlength = 40.0\nwidth = 8.0\nthickness = 6.0\n'
        '[material]\nname = "carbon steel"\n[solve]\nmodes = 2\nsize = 0.5\n'
    )
    document = answer_modes(path, accuracy_cents=50.0).document
    assert document["case"]["solve"] == {"modes": 2, "accuracy_cents": 50.0}
    with pytest.raises(InputError, match="--size"):
        answer_modes(path, accuracy_cents=50.0, size=1.0)
    with pytest.raises(InputError, match="out of range"):
        answer_modes(path, accuracy_cents=0.0)


def test_geometry_error_of_curved_cells_is_told_apart():
    """Flat faces are exact, holes and rods are not; finer cells are truer."""
    flat = solve(case({"family": "bar", "length": 40.0, "width": 8.0, "thickness": 6.0}, size=4.0))
    assert abs(flat.mesh_facts.volume_error_ppm) < 1e-3
    assert abs(flat.mesh_facts.area_error_ppm) < 1e-3
    rod = case({"family": "bar", "length": 30.0, "diameter": 10.0}, size=6.0)
    coarse = solve(rod).mesh_facts
    fine = solve(replace(rod, settings=replace(rod.settings, size=1.4))).mesh_facts
    assert abs(coarse.volume_error_ppm) > 1.0
    assert abs(fine.volume_error_ppm) < 0.5 * abs(coarse.volume_error_ppm)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("name", "share"), [("clamped fork, round slot end", 0.7), ("free bar with a hole", 0.85)]
)
def test_fewer_unknowns_than_a_uniform_mesh(name, share):
    path = Path(__file__).parent / "benchmarks/adapted_mesh.py"
    spec = importlib.util.spec_from_file_location("adapted_mesh", path)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    row = module.compare(name)
    assert row.adapted < share * row.uniform
