"""Shape functions in VTK node order, and exact quadrature."""

import math

import numpy as np
import pytest
from modewright.fem.modal import element
from modewright.geometry.mesh import EDGES, FACET_EDGES


def nodes(corners: np.ndarray, edges: tuple[tuple[int, int], ...]) -> np.ndarray:
    return np.vstack([corners, [(corners[i] + corners[j]) / 2 for i, j in edges]])


TET = nodes(np.vstack([np.zeros(3), np.eye(3)]), EDGES)
TRI = nodes(np.vstack([np.zeros(2), np.eye(2)]), FACET_EDGES)


@pytest.mark.parametrize(
    ("points", "values"), [(TET, element.cell_values), (TRI, element.facet_values)]
)
def test_shape_functions_are_one_at_their_own_node(points, values):
    np.testing.assert_allclose(values(points), np.eye(len(points)), atol=1e-14)


@pytest.mark.parametrize(
    ("points", "values", "gradients"),
    [
        (TET, element.cell_values, element.cell_gradients),
        (TRI, element.facet_values, element.facet_gradients),
    ],
)
def test_gradients_match_differences(points, values, gradients):
    inside = points[:3] * 0.3 + 0.1
    step = 1e-6
    for axis in range(points.shape[1]):
        shift = step * np.eye(points.shape[1])[axis]
        difference = (values(inside + shift) - values(inside - shift)) / (2 * step)
        np.testing.assert_allclose(gradients(inside)[..., axis], difference, atol=1e-8)


@pytest.mark.parametrize("degree", [2, 4, 6])
def test_cell_quadrature_is_exact(degree):
    x, w = element.cell_quadrature(degree)
    for i in range(degree + 1):
        for j in range(degree + 1 - i):
            k = degree - i - j
            exact = math.factorial(i) * math.factorial(j) * math.factorial(k)
            exact /= math.factorial(degree + 3)
            assert w @ (x[:, 0] ** i * x[:, 1] ** j * x[:, 2] ** k) == pytest.approx(
                exact, rel=1e-10
            )


def test_facet_quadrature_is_exact():
    x, w = element.facet_quadrature(4)
    for i in range(5):
        exact = math.factorial(i) * math.factorial(4 - i) / math.factorial(6)
        assert w @ (x[:, 0] ** i * x[:, 1] ** (4 - i)) == pytest.approx(exact, rel=1e-10)
