"""Curved cells against closed forms."""

import numpy as np
import pytest
from modewright.geometry.curving import relaxed
from modewright.geometry.mesh import EDGES, FACET_EDGES
from modewright.geometry.quality import (
    STATIONS,
    determinants,
    evenness,
    facet_areas,
    gradients,
    straighten,
    volumes,
)

UNIT = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 1]], float)
CELL = np.arange(10)[None]


def straight(corners):
    return np.vstack((corners, [(corners[a] + corners[b]) / 2 for a, b in EDGES]))


def test_gradients_agree_with_differences_of_a_quadratic():
    # A quadratic is reproduced exactly, and so is its gradient.
    def quadratic(p):
        x, y, z = p.T
        return 1 + 2 * x - y + 3 * z + x * x - 2 * x * y + 0.5 * z * z + y * z

    def slope(p):
        x, y, z = p.T
        return np.column_stack((2 + 2 * x - 2 * y, -1 - 2 * x + z, 3 + z + y))

    at = np.random.default_rng(1).random((20, 3)) / 3
    got = np.einsum("qai,a->qi", gradients(at), quadratic(straight(UNIT)))
    np.testing.assert_allclose(got, slope(at), atol=1e-13)


def test_straight_cell_is_even_and_has_its_volume():
    points = straight(UNIT @ np.diag([1.0, 2.0, 3.0]))
    assert evenness(points, CELL) == pytest.approx(1.0)
    assert volumes(points, CELL) == pytest.approx(1.0)
    assert len(STATIONS) == 11


def test_reversed_cell_has_negative_determinants():
    points = straight(UNIT[[0, 2, 1, 3]])
    assert determinants(points, CELL).max() < 0
    assert evenness(points, CELL) == -1.0


def test_mid_node_moved_past_its_quarter_inverts_the_cell():
    # Along a straight edge the map folds where the mid node leaves the middle half.
    points = straight(UNIT)
    points[4] = [0.26, 0, 0]
    assert evenness(points, CELL)[0] > 0
    points[4] = [0.24, 0, 0]
    assert evenness(points, CELL)[0] < 0
    mended = straighten(points, CELL, np.array([True]))
    assert evenness(mended, CELL) == pytest.approx(1.0)


def test_curved_volume_by_the_divergence_of_a_known_bulge():
    # Moving mid node 4 by h adds the integral of its shape function's gradient times h.
    points = straight(UNIT)
    h = 1e-6
    points[4] += [0, 0, -h]
    bulge = volumes(points, CELL)[0] - 1 / 6
    # The face z = 0 bulges by 4 L0 L1 h, whose integral over the unit triangle is h / 6.
    assert bulge == pytest.approx(h / 6, rel=1e-5)


def test_facet_area_of_a_parabolic_gutter():
    # z = 4 x (1 - x) h over the unit triangle: area by fine subdivision in x.
    h = 0.2
    corners = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0]], float)
    points = np.vstack((corners, [(corners[a] + corners[b]) / 2 for a, b in FACET_EDGES]))
    points[:, 2] = 4 * points[:, 0] * (1 - points[:, 0]) * h
    x = (np.arange(20000) + 0.5) / 20000
    exact = np.mean((1 - x) * np.sqrt(1 + (4 * h * (1 - 2 * x)) ** 2))
    got = facet_areas(points, np.arange(6)[None])[0]
    assert got == pytest.approx(exact, rel=2e-3)
    flat = points * [1, 1, 0]
    assert facet_areas(flat, np.arange(6)[None])[0] == pytest.approx(0.5, rel=1e-14)


def test_inner_nodes_follow_a_bent_surface_and_the_surface_stays():
    # Two cells that share a face; the outer edges of one are bent strongly.
    corners = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 0.2], [1, 1, 0.2]], float)
    tets = np.array([[0, 1, 2, 3], [1, 4, 2, 3]])
    nodes, cells = list(corners), []
    known = {}
    for tet in tets:
        row = list(tet)
        for a, b in EDGES:
            pair = tuple(sorted((tet[a], tet[b])))
            if pair not in known:
                known[pair] = len(nodes)
                nodes.append((corners[tet[a]] + corners[tet[b]]) / 2)
            row.append(known[pair])
        cells.append(row)
    points, cells = np.array(nodes), np.array(cells)
    # Only the edge (1, 2) is inside: hold the rest, bend the neighbours downwards.
    inner = known[(1, 2)]
    held = np.setdiff1d(np.arange(len(points)), inner)
    facets = np.resize(held, (4, 6))
    for pair in ((0, 1), (0, 2)):
        points[known[pair], 2] -= 0.08
    moved = relaxed(points, cells, facets)
    np.testing.assert_array_equal(moved[held], points[held])
    # Part of the way: its own ends stay, the neighbours went down by 0.08.
    assert -0.08 < moved[inner, 2] - points[inner, 2] < -0.003
