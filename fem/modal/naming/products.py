"""Functions of uniform beams, by their number of nodes, for products over plates.

Deflections of free-free, clamped-free and clamped-clamped uniform beams (R. D.
Blevins, Formulas for Natural Frequency and Mode Shape, 1979, table 8-1), written
with decaying exponentials only so that high orders lose no digits.
"""

from __future__ import annotations

import numpy as np


def beam_functions(t: np.ndarray, count: int, *, first: bool, last: bool) -> np.ndarray:
    """Return (count, n): the functions with 0, 1, 2 ... nodes between the ends.

    Each has a mean square of 1 over the beam and is positive at its last free end
    (at its first free end where the last is held; beside its last end where both are).

    Parameters
    ----------
    t : (n,) float
        Place along the beam, 0 to 1.
    count : how many
    first, last : whether the end at 0 and the end at 1 is held
    """
    if last and not first:
        return beam_functions(1.0 - t, count, first=True, last=False)
    rows: list[np.ndarray] = []
    if not first:
        rows = [np.ones_like(t), np.sqrt(3.0) * (2.0 * t - 1.0)]
    order = 0
    while len(rows) < count:
        order += 1
        row = _function(t, order, first, last)
        # The sign beside the last end, told at a point close enough to it.
        near = _function(np.array([1.0 - 0.1 / (order + 1)]), order, first, last)
        rows.append(row * np.sign(near))
    return np.array(rows[:count])


def _function(t: np.ndarray, order: int, first: bool, last: bool) -> np.ndarray:
    alike = first == last
    # cos(b) cosh(b) = 1 for equal ends, = -1 for one held: fixed point of the root.
    side = 1.0 if alike else -1.0
    b = (order + 0.5 if alike else order - 0.5) * np.pi
    for _ in range(50):
        decay = 2.0 * np.exp(-b) / (1.0 + np.exp(-2.0 * b))  # 1 / cosh
        slope = -np.sin(b) + side * decay * np.tanh(b)
        b -= (np.cos(b) - side * decay) / slope
    e = np.exp(-b)
    if alike:
        rest = np.cos(b) - np.sin(b) - e  # (1 - s) (sinh b - sin b)
        scale = 1.0 - e * e - 2.0 * e * np.sin(b)  # 2 e^-b (sinh b - sin b)
    else:
        rest = np.cos(b) + np.sin(b) + e  # (1 - s) (cosh b + cos b)
        scale = 1.0 + e * e + 2.0 * e * np.cos(b)
    s = 1.0 - 2.0 * e * rest / scale
    growing = rest * np.exp(-b * (1.0 - t)) / scale
    hyperbolic = 0.5 * (1.0 + s) * np.exp(-b * t) + growing
    wave = np.cos(b * t) - s * np.sin(b * t)
    return hyperbolic - wave if first else hyperbolic + wave
