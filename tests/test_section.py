"""Properties of cross-sections against published values and limits."""

import numpy as np
import pytest
from modewright.geometry.section import of_rectangle, of_tube, torsion_of_rectangle

# Three digits: Timoshenko and Goodier, Theory of Elasticity, art. 109. Six digits:
# the same series summed in higher precision.
BETA = {
    1.0: (0.141, 0.140577),
    1.2: (0.166, 0.166119),
    1.5: (0.196, 0.195761),
    2.0: (0.229, 0.228682),
    2.5: (0.249, 0.249365),
    3.0: (0.263, 0.263317),
    4.0: (0.281, 0.280813),
    5.0: (0.291, 0.291317),
    10.0: (0.312, 0.312325),
}


@pytest.mark.parametrize("ratio", BETA)
def test_torsion_of_a_rectangle_agrees_with_the_published_table(ratio):
    beta = float(torsion_of_rectangle(ratio * 3.0, 3.0)) / (ratio * 3.0 * 27.0)
    three, six = BETA[ratio]
    assert beta == pytest.approx(three, abs=5.1e-4)
    assert beta == pytest.approx(six, abs=6e-7)


def test_torsion_does_not_mind_which_side_is_called_width():
    sides = np.array([1.0, 2.5, 9.0])
    np.testing.assert_allclose(
        torsion_of_rectangle(sides, 4.0), torsion_of_rectangle(4.0, sides), rtol=1e-14
    )


def test_torsion_of_a_thin_strip_loses_its_two_ends():
    # Limit of the series: J = b t^3 / 3 (1 - 0.630249 t / b).
    assert float(torsion_of_rectangle(1000.0, 1.0)) == pytest.approx(
        1000.0 / 3 * (1 - 0.630249e-3), rel=1e-9
    )


def test_rectangle_second_moments_are_about_the_right_axes():
    sections = of_rectangle([0.0, 1.0], 8.0, 2.0, offset=0.5)
    np.testing.assert_allclose(sections.area, 16.0)
    np.testing.assert_allclose(sections.i_across, 8.0 * 2.0**3 / 12)
    np.testing.assert_allclose(sections.i_through, 2.0 * 8.0**3 / 12)
    np.testing.assert_allclose(sections.offset, 0.5)
    assert sections.form == "rectangle"


def test_tube_by_integration_over_rings():
    edges = np.linspace(4.0, 6.0, 20001)
    r, dr = (edges[:-1] + edges[1:]) / 2, np.diff(edges)
    sections = of_tube([0.0], 12.0, 8.0)
    assert sections.form == "tube"
    assert sections.area[0] == pytest.approx(np.sum(2 * np.pi * r * dr), rel=1e-8)
    assert sections.torsion[0] == pytest.approx(np.sum(2 * np.pi * r**3 * dr), rel=1e-8)
    assert sections.i_across[0] == pytest.approx(sections.torsion[0] / 2)
    assert sections.i_through[0] == pytest.approx(sections.torsion[0] / 2)


def test_a_bar_without_a_bore_is_a_circle():
    sections = of_tube([0.0, 5.0], np.array([2.0, 1.0]))
    assert sections.form == "circle"
    np.testing.assert_allclose(sections.area, np.pi / 4 * np.array([4.0, 1.0]))


def test_scaling_to_metres_keeps_the_powers():
    small, large = of_rectangle([0.0, 0.06], 8e-3, 1e-3), of_rectangle([0.0, 60.0], 8.0, 1.0)
    scaled = large.scaled(1e-3)
    for name in ("x", "area", "i_across", "i_through", "torsion"):
        np.testing.assert_allclose(getattr(scaled, name), getattr(small, name), rtol=1e-12)
