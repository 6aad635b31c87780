import numpy as np
import pytest
from modewright.fem.modal.theory.disc import disc_frequency, disc_root
from modewright.fem.modal.theory.plate import plate_frequencies, plate_modes
from modewright.fem.modal.theory.ring import (
    ring_extensional,
    ring_in_plane,
    ring_out_of_plane,
    ring_torsional,
)
from modewright.geometry.anatomy import RingSize

SHAPES = [(2, 0), (0, 1), (3, 0), (1, 1), (4, 0), (5, 0), (2, 1), (0, 2), (3, 1), (1, 2)]


@pytest.mark.parametrize(
    ("nu", "parameters"),
    [  # recomputed from the characteristic equation
        (
            0.30,
            [
                5.3583,
                9.0031,
                12.4390,
                20.4746,
                21.8352,
                33.4949,
                35.2601,
                38.4432,
                53.0078,
                59.8116,
            ],
        ),
        (
            0.33,
            [
                5.2620,
                9.0689,
                12.2439,
                20.5131,
                21.5272,
                33.0618,
                35.2425,
                38.5070,
                52.9210,
                59.8591,
            ],
        ),
        (
            1 / 3,
            [
                5.2511,
                9.0761,
                12.2216,
                20.5173,
                21.4919,
                33.0120,
                35.2406,
                38.5140,
                52.9114,
                59.8643,
            ],
        ),
    ],
)
def test_free_round_plate(nu, parameters):
    assert [disc_root(*shape, nu) for shape in SHAPES] == pytest.approx(parameters, abs=6e-5)


def test_round_plate_scales():
    one = disc_frequency(2, 0, 0.1, 0.002, 2e11, 0.3, 7800.0)
    assert disc_frequency(2, 0, 0.2, 0.004, 2e11, 0.3, 7800.0) == pytest.approx(one / 2)
    assert disc_frequency(2, 0, 0.1, 0.002, 4 * 2e11, 0.3, 7800.0) == pytest.approx(2 * one)


@pytest.mark.parametrize(
    ("nu", "parameters"),
    [  # converged Ritz series, recomputed
        (
            0.30,
            [13.4682, 19.5961, 24.2702, 34.8009, 34.8009, 61.0932, 61.0932, 63.6861, 69.2654],
        ),
        (1 / 3, [13.1655, 19.2200, 24.4243, 34.2267, 34.2267, 60.9304, 60.9304, 62.7477]),
        (0.25, [13.9050, 20.1314, 24.0153, 35.6019, 35.6019, 61.2897, 61.2897, 65.0146]),
    ],
)
def test_free_square_plate(nu, parameters):
    found = plate_modes(1.0, nu, len(parameters)).parameters
    assert found == pytest.approx(parameters, abs=1e-4)
    # Leissa, JSV 31 (1973) 257-293, nu 0.3, as quoted: upper bounds 13.49, 19.79, 24.43, 35.02
    if nu == 0.30:
        assert np.all(found[:4] < [13.49, 19.79, 24.43, 35.02])
        assert found[:4] == pytest.approx([13.49, 19.79, 24.43, 35.02], rel=1e-2)


@pytest.mark.parametrize(
    ("aspect", "parameters"),
    [  # converged Ritz series, recomputed; lambda^2 on the length normal to the clamp, nu 0.3
        (0.4, [3.4975, 4.767, 8.067, 13.80, 21.52]),
        (2 / 3, [3.485, 6.388, 14.466, 21.915, 25.911]),
        (1.0, [3.471, 8.506, 21.284, 27.199, 30.955]),
        (1.5, [3.453, 11.656, 21.466, 39.326, 53.541]),
        (2.0, [3.439, 14.802, 21.434, 48.178, 60.149]),
        (5.0, [3.3975, 21.267, 33.916, 59.673, 103.74]),
    ],
)
def test_cantilever_plate(aspect, parameters):
    found = plate_modes(aspect, 0.3, 5, clamped=True).parameters
    assert found == pytest.approx(parameters, rel=3e-4)


def test_cantilever_plate_of_barton():
    # Barton M. V., J. Appl. Mech. 18 (1951) 129, square, nu 0.3, as quoted: upper bounds
    found = plate_modes(1.0, 0.3, 5, clamped=True).parameters
    assert found == pytest.approx([3.492, 8.525, 21.43, 27.33, 31.11], rel=7e-3)
    assert np.all(found < [3.492, 8.525, 21.43, 27.33, 31.11])


def test_thin_free_plate_of_nafems_fv12():
    # The Standard NAFEMS Benchmarks, 1990, FV12: 10 x 10 x 0.05 m; converged thin-plate values
    modes = plate_modes(1.0, 0.3, 8)
    found = plate_frequencies(modes.parameters, 10.0, 0.05, 200e9, 0.3, 8000.0)
    published = [1.622, 2.360, 2.922, 4.190, 4.190, 7.356, 7.356, 7.668]
    assert found == pytest.approx(published, rel=4e-4)


def test_ring_of_nafems_test_6():
    # NAFEMS R0015, 1987, Test 6: radius 1 m, round section 0.1 m. Slender-ring values as
    # quoted; converged 3-D values, recomputed, lie up to 2.1 % lower.
    area, second = np.pi * 0.05**2, np.pi * 0.05**4 / 4
    ring = RingSize(radius=1.0, area=area, i_axial=second, i_radial=second, torsion=2 * second)
    inside = [ring_in_plane(n, ring, 200e9, 8000.0) for n in (2, 3, 4)]
    outside = [ring_out_of_plane(n, ring, 200e9, 200e9 / 2.6, 8000.0) for n in (2, 3, 4)]
    assert inside == pytest.approx([53.38, 151.0, 289.5], rel=3e-4)
    assert outside == pytest.approx([51.85, 148.8, 287.0], rel=3e-4)
    assert inside == pytest.approx([53.214, 149.664, 284.692], rel=1.8e-2)
    assert outside == pytest.approx([51.533, 146.919, 281.071], rel=2.2e-2)
    breathing = ring_extensional(0, ring, 200e9, 8000.0)
    assert breathing == pytest.approx(np.sqrt(200e9 / 8000.0) / (2 * np.pi), rel=1e-12)
    assert ring_extensional(1, ring, 200e9, 8000.0) == pytest.approx(np.sqrt(2) * breathing)
    # round section: Love's (1 + nu + n^2) G / (rho R^2)
    twisting = [ring_torsional(n, ring, 200e9, 200e9 / 2.6, 8000.0) for n in (0, 1)]
    love = np.sqrt(np.array([1.3, 2.3]) * 200e9 / 2.6 / 8000.0) / (2 * np.pi)
    assert twisting == pytest.approx(love, rel=1e-12)
