"""Where the centre line of a bending mode stands still."""

from __future__ import annotations

import numpy as np
from scipy.interpolate import CubicSpline

#: A stretch between two nodes that moves less than this part of the largest
#: deflection is numerical dust (beside a held end, say), and so are its nodes.
_DUST = 0.005


def still_points(x: np.ndarray, deflection: np.ndarray, start: float) -> tuple[float, ...]:
    """Return distances (mm) from `start` at which a deflection crosses zero.

    Parameters
    ----------
    x : (s,) m, centres of slices along the line
    deflection : (s,) mean displacement of each
    start : m, where the distance is counted from
    """
    order = np.argsort(x, kind="stable")
    x, deflection = x[order], deflection[order]
    keep = np.concatenate([[True], np.diff(x) > 1e-9 * (x[-1] - x[0])])
    x, deflection = x[keep], deflection[keep]
    if len(x) < 4 or not np.any(deflection):
        return ()
    signs = np.signbit(deflection)
    cuts = np.flatnonzero(signs[1:] != signs[:-1]) + 1
    lobes = [np.abs(part).max() for part in np.split(deflection, cuts)]
    floor = _DUST * max(lobes)
    line = CubicSpline(x, deflection)
    points: list[float] = []
    last = None  # the last cut since a stretch that counts, and that stretch's sign
    side = None
    for place, lobe in enumerate(lobes):
        if lobe < floor:
            continue
        here = bool(signs[cuts[place - 1]]) if place else bool(signs[0])
        if side is not None and here != side:
            last = int(cuts[place - 1])
            points.append(_zero(line, x[last - 1], x[last]))
        side = here
    return tuple(round(1e3 * (point - start), 4) for point in points)


def _zero(line: CubicSpline, low: float, high: float) -> float:
    """Return the zero of a spline between two points of opposite sign, by bisection."""
    below = float(line(low))
    for _ in range(60):
        middle = 0.5 * (low + high)
        value = float(line(middle))
        if (value < 0.0) == (below < 0.0):
            low, below = middle, value
        else:
            high = middle
    return float(0.5 * (low + high))
