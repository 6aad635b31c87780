"""The estimated mesh error against errors known without it."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from modewright.cases.reader import build_case, read_case
from modewright.fem.modal.enrichment import enrich, enrichment_functions
from modewright.fem.modal.singular import saturation
from modewright.fem.modal.solve import solve
from modewright.geometry.mesh import EDGES, Mesh

EXAMPLES = Path(__file__).parents[1] / "cases/examples"


def sized(case, size, modes=None):
    settings = replace(case.settings, size=size, modes=modes or case.settings.modes)
    return replace(case, settings=settings, targets=(), measured=())


def cents(a, b):
    return 1200.0 * np.log2(np.asarray(a) / np.asarray(b))


def test_enrichment_makes_second_order_third_order():
    """With the ten second-order functions it spans all twenty cubic polynomials."""
    from modewright.fem.modal.element import cell_values

    rng = np.random.default_rng(1)
    points = rng.dirichlet(np.ones(4), 60)[:, :3]
    space = np.hstack([cell_values(points), enrichment_functions(points)[0]])
    powers = [(i, j, k) for i in range(4) for j in range(4 - i) for k in range(4 - i - j)]
    cubic = np.stack([np.prod(points**p, axis=1) for p in powers], axis=1)
    assert np.linalg.matrix_rank(space) == 20
    left = cubic - space @ np.linalg.lstsq(space, cubic, rcond=None)[0]
    assert np.abs(left).max() < 1e-12


def test_enrichment_gradients_match_differences():
    points = np.array([[0.1, 0.2, 0.3], [0.3, 0.3, 0.1]])
    gradients = enrichment_functions(points)[1]
    for axis in range(3):
        step = 1e-6 * np.eye(3)[axis]
        slope = enrichment_functions(points + step)[0] - enrichment_functions(points - step)[0]
        np.testing.assert_allclose(gradients[..., axis], slope / 2e-6, atol=1e-8)


def test_neighbours_share_edges_and_faces():
    """Two cells on one triangle: 9 + 7 functions, 3 edges and one face shared."""
    corners = np.array([[0, 1, 2, 3], [1, 2, 3, 4]])
    pairs = [tuple(sorted(c[list(e)])) for c in corners for e in EDGES]
    number = {pair: 5 + i for i, pair in enumerate(dict.fromkeys(pairs))}
    mids = np.array([number[pair] for pair in pairs]).reshape(2, 6)
    space = enrich(np.hstack([corners, mids]))
    assert len(space.mids) == 9 + 7
    assert len(set(space.cells[0]) & set(space.cells[1])) == 4


@pytest.fixture(scope="module")
def bar():
    """The free aluminium bar whose converged values are in its [[expect]] rows."""
    case = read_case(EXAMPLES / "hour_bar/case.toml")
    return case, {size: solve(sized(case, size)) for size in (8.0, 5.0)}


@pytest.mark.parametrize("size", [8.0, 5.0])
def test_estimate_against_converged_ritz_values(bar, size):
    """Free rectangular bar, converged 3-D Ritz values (independent of any mesh) [R]."""
    case, results = bar
    rows = {row.name: row for row in results[size].modes}
    for expected in case.expected:
        row = rows[expected.mode]
        true = cents(row.raw_hz, expected.frequency)
        if true > 0.5:
            assert 0.7 < row.mesh_error_cents / true < 1.5, row.name
        assert abs(cents(row.frequency_hz, expected.frequency)) < max(0.3 * true, 0.05)


def test_estimate_falls_as_the_mesh_is_refined(bar):
    """Bending of a smooth body: error goes as h^4, so with the unknowns to the power -4/3."""
    _, results = bar
    coarse, fine = results[8.0], results[5.0]
    h = (fine.mesh_facts.unknowns / coarse.mesh_facts.unknowns) ** (1 / 3)
    for name in ("flatwise bending 1", "flatwise bending 2", "edgewise bending 1"):
        errors = [
            next(m.mesh_error_cents for m in r.modes if m.name == name) for r in (coarse, fine)
        ]
        assert 2.8 < np.log(errors[0] / errors[1]) / np.log(h) < 5.5


def block(mount):
    return build_case(
        {
            "title": "Block on a bed",
            "shape": {"family": "bar", "length": 40.0, "width": 10.0, "thickness": 8.0},
            "material": {"name": "carbon steel"},
            "mount": mount,
            "solve": {"modes": 4, "size": 4.0},
        }
    )


def test_a_very_stiff_bed_has_the_error_of_a_clamp():
    bed = {"kind": "springs", "faces": ["root"]}
    bed |= {"normal_n_per_mm3": 1e9, "tangential_n_per_mm3": 1e9}
    clamped = solve(block({"kind": "clamped", "faces": ["root"]}))
    sprung = solve(block(bed))
    for one, other in zip(clamped.modes, sprung.modes, strict=True):
        assert one.raw_hz == pytest.approx(other.raw_hz, rel=3e-5)
        # The estimate of the clamp knows that its edge is singular; the bed's does not.
        assert 0.5 < other.mesh_error_cents / one.mesh_error_cents < 1.1


def test_only_cells_at_sharp_inner_or_clamped_edges_are_weighted():
    """A free brick has no singular edge; clamping one end makes the rim of that end one."""
    case = block({"kind": "free"})
    from modewright.fem.modal.solve import case_mesh

    mesh: Mesh = case_mesh(case)
    assert np.all(saturation(mesh, None) == 1.0)
    allowed = np.tile(np.eye(3), (len(mesh.points), 1, 1))
    allowed[mesh.face_nodes("root")] = 0.0
    factor = saturation(mesh, allowed)
    near = mesh.points[mesh.cells[:, :4], 0].min(axis=1) < 1e-9
    assert factor.max() == pytest.approx(1.0 / (1.0 - (2.0 / 3.0) ** (4 * 0.711)))
    assert np.all(factor[~near] == 1.0)


SHAPES = {
    "round-ended fork": {
        "family": "fork", "length": 60.0, "width": 12.0, "thickness": 3.0,
        "slot_length": 36.0, "slot_width": 3.0,
    },
    "arched bar": {
        "family": "arched_bar", "length": 120.0, "width": 20.0, "thickness": 10.0,
        "arch_length": 70.0, "arch_depth": 6.0,
    },
    "plate with a hole": {
        "family": "plate", "length": 60.0, "width": 20.0, "thickness": 4.0,
        "holes": [{"x": 5.0, "y": 0.0, "diameter": 8.0}],
    },
    "tube": {"family": "tube", "length": 60.0, "outer_diameter": 20.0, "wall": 3.0},
    "bell": {
        "family": "revolved", "wall": 3.0,
        "profile": [[0.0, 30.0], [12.0, 27.0], [16.0, 14.0], [24.0, 0.0]],
    },
}  # fmt: skip


@pytest.mark.slow
@pytest.mark.parametrize("name", SHAPES)
def test_estimate_on_five_shapes(name):
    """True error: the same body at over 8 times the unknowns, extrapolated."""
    clamped = name == "round-ended fork"
    case = build_case(
        {
            "title": name,
            "shape": SHAPES[name],
            "material": {"name": "carbon steel"},
            "mount": {"kind": "clamped", "faces": ["root"]} if clamped else {"kind": "free"},
            "solve": {"modes": 6},
        }
    )
    size = {"tube": 6.0, "bell": 6.0, "plate with a hole": 5.0}.get(name, 4.0)
    coarse = solve(sized(case, size))
    # Curvature, not the size asked for, rules the coarse mesh of the bell.
    fine = solve(sized(case, size / (5.4 if name == "bell" else 3.6), modes=8))
    assert fine.mesh_facts.unknowns > 8 * coarse.mesh_facts.unknowns
    converged = {mode.name: mode.frequency_hz for mode in fine.modes}
    compared = 0
    for mode in coarse.modes:
        true = cents(mode.raw_hz, converged[mode.name])
        if true > 0.5:
            assert 0.7 < mode.mesh_error_cents / true < 1.5, (mode.name, true)
            compared += 1
    assert compared >= 2
