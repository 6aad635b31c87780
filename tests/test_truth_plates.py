"""Flat bodies with part supports, held to published benchmarks.

[R] marks values recomputed from the governing equations, [P] published ones. Rings,
discs, the free square plate and the ball stand among the examples (`test_examples.py`).
"""

from __future__ import annotations

import numpy as np
import pytest

#: NAFEMS FV52 (TNSB Rev. 3, 1990), 10 x 10 x 1 m, w = 0 on the whole of the four side
#: faces: three-dimensional Ritz values [R]. Bottom edges alone would have no limit.
FV52 = (44.178, 107.322, 107.322, 163.12, 193.647, 203.29, 203.65, 206.77, 206.77, 219.2645)


@pytest.mark.parametrize(
    ("counts", "tolerance"),
    [((12, 12, 2), 1.3e-3), pytest.param((20, 20, 4), 5e-4, marks=pytest.mark.slow)],
)
def test_a_thick_plate_held_normal_to_itself(block, solve_as_case, counts, tolerance):
    modes = solve_as_case(
        "plate",
        {"length": 1000.0, "width": 1000.0, "thickness": 100.0},
        mesh=block((1000, 1000, 100), counts, middle=True),
        modes=10,
        mount={"kind": "held", "axes": ["z"], "faces": ["x_min", "x_max", "y_min", "y_max"]},
    )
    assert modes.solve_facts.rigid_modes == 3
    np.testing.assert_allclose(modes.frequencies, 10 * np.array(FV52), rtol=tolerance)
    # Listed by what they do, not by place: five bend, four stay in the plane.
    in_plane = [i for i, name in enumerate(modes.names) if "in-plane" in name]
    assert in_plane == [4, 7, 8, 9]


def test_a_tapered_membrane(block, solve_as_case):
    # NAFEMS FV32: 44.623, 130.03, 162.70, 246.05, 379.90, 391.44 [P]; plane stress, Ritz to
    # order 18 [R]. A solid is kept in its plane by one face.
    wanted = 10 * np.array([44.617, 130.011, 162.689, 245.987, 379.718, 391.406])

    def warp(points):
        narrowed = points.copy()
        narrowed[:, 1] *= 1 - 0.8 * points[:, 0] / 1000
        return narrowed

    modes = solve_as_case(
        "bar",
        {"length": 1000.0, "width": 500.0, "thickness": 5.0, "width_tip": 100.0},
        mesh=block((1000, 500, 5), (20, 10, 1), warp=warp),
        mount=[
            {"kind": "held", "axes": ["x", "y"], "faces": ["root"]},
            {"kind": "held", "axes": ["z"], "faces": ["bottom"]},
        ],
    )
    np.testing.assert_allclose(modes.frequencies, wanted, rtol=5e-4)
    assert [name[:5] for name in modes.names] == ["edgew", "edgew", "axial"] + 2 * ["edgew"] + [
        "axial"
    ]
