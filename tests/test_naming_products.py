"""Beam functions by their number of nodes."""

from __future__ import annotations

import numpy as np
import pytest
from modewright.fem.modal.naming.products import beam_functions

# An even number of points: none falls on the node in the middle.
T = np.linspace(0.0, 1.0, 20000)


@pytest.mark.parametrize(
    ("first", "last"), [(False, False), (True, False), (False, True), (True, True)]
)
def test_functions_are_numbered_by_nodes_and_orthonormal(first, last):
    rows = beam_functions(T, 16, first=first, last=last)
    inner = rows[:, 10:-10]
    assert [int((np.diff(np.sign(row)) != 0).sum()) for row in inner] == list(range(16))
    gram = np.trapezoid(rows[:, None] * rows[None], T, axis=2)
    np.testing.assert_allclose(gram, np.eye(16), atol=2e-5)
    for end, held in ((0, first), (-1, last)):
        # Held ends stand still; free ends swing to twice the root mean square, but
        # for the two rigid functions (1 and the square root of 3).
        swing = np.abs(rows[0 if first or last else 2 :, end])
        np.testing.assert_allclose(swing, 0.0 if held else 2.0, atol=1e-6)
    side = rows[:, -20] if not last else (rows[:, 20] if not first else rows[:, -20])
    assert (side > 0).all()
