"""Where a line of a body stands still."""

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
    zeros = CubicSpline(x, deflection).roots(extrapolate=False)
    points = []
    for i in crossings(deflection, _DUST):
        between = zeros[(zeros >= x[i - 1]) & (zeros <= x[i])]
        points.append(float(between[0]) if len(between) else float(x[i]))
    return tuple(round(1e3 * (point - start), 4) for point in points)


def crossings(values: np.ndarray, dust: float) -> list[int]:
    """Return the places i where values change sign between i - 1 and i.

    Stretches of one sign that stay below `dust` times the largest value do not count.
    """
    signs = np.signbit(values)
    cuts = [0, *(np.flatnonzero(signs[1:] != signs[:-1]) + 1)]
    lobes = [float(np.abs(part).max()) for part in np.split(values, cuts[1:])]
    floor = dust * max(lobes)
    found: list[int] = []
    side: bool | None = None
    for cut, lobe in zip(cuts, lobes, strict=True):
        if lobe < floor:
            continue
        here = bool(signs[cut])
        if side is not None and here != side:
            found.append(int(cut))
        side = here
    return found
