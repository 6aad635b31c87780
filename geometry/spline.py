"""B-splines of drawings made fit for the kernel: clamped, split at corners."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from itertools import pairwise

import numpy as np
from scipy import interpolate

from .errors import InputError
from .solid import BSpline


def smooth_pieces(
    poles: np.ndarray, degree: int, knots: Sequence[float], weights: Sequence[float] = ()
) -> list[BSpline]:
    """Return a spline as clamped pieces without corners inside; exact.

    Unclamped (periodic) splines are clamped by knot insertion, and a spline is
    split at interior knots of full multiplicity. One that ends where it starts
    is split at least once, for a loop needs two curves.

    Parameters
    ----------
    poles : (n, 2) mm
    degree : int
    knots : (n + degree + 1,)
    weights : (n,), optional

    Raises
    ------
    InputError
        If the numbers make no spline.
    """
    poles, t = np.asarray(poles, float), np.asarray(knots, float)
    w = np.asarray(weights, float) if len(weights) else np.ones(len(poles))
    if degree < 1 or len(poles) <= degree or len(t) != len(poles) + degree + 1:
        raise InputError(
            "holds a spline whose knots do not fit its poles",
            value=f"{len(poles)} poles, degree {degree}, {len(t)} knots",
        )
    if np.any(np.diff(t) < 0) or not t[degree] < t[-degree - 1]:
        raise InputError("holds a spline whose knots do not ascend")
    if len(w) != len(poles) or np.any(w <= 0) or not np.all(np.isfinite(poles)):
        raise InputError("holds a spline with weights or poles that make no curve")
    curve = interpolate.BSpline(t, np.column_stack((poles * w[:, None], w)), degree)
    return _pieces(curve, _cuts(curve))


def bezier_pieces(curve: BSpline) -> list[BSpline]:
    """Return a spline as its polynomial (or rational) spans, one each; exact."""
    w = np.asarray(curve.weights or (1.0,) * len(curve.poles))
    poles = np.column_stack((np.asarray(curve.poles) * w[:, None], w))
    whole = interpolate.BSpline(np.asarray(curve.knots, float), poles, curve.degree)
    cuts = np.unique(whole.t[curve.degree : -curve.degree])
    return [replace(piece, face=curve.face) for piece in _pieces(whole, cuts.tolist())]


def bezier(points: np.ndarray) -> BSpline:
    """Return a Bezier curve by its control points (degree + 1, 2)."""
    degree = len(points) - 1
    return BSpline(
        poles=tuple((float(x), float(y)) for x, y in points),
        degree=degree,
        knots=(0.0,) * (degree + 1) + (1.0,) * (degree + 1),
    )


def _cuts(curve: interpolate.BSpline) -> list[float]:
    """Return the parameters of both ends and of all corners."""
    low, high = float(curve.t[curve.k]), float(curve.t[-curve.k - 1])
    inner, counts = np.unique(curve.t[(curve.t > low) & (curve.t < high)], return_counts=True)
    cuts = [low, *(float(u) for u in inner[counts >= curve.k]), high]
    ends = curve(np.array([low, high]))
    ends = ends[:, :2] / ends[:, 2:]
    size = float(np.ptp(curve.c[:, :2] / curve.c[:, 2:], axis=0).max())
    if len(cuts) == 2 and math.dist(*ends) <= 1e-6 * size:
        middle = float(inner[len(inner) // 2]) if len(inner) else (low + high) / 2
        cuts.insert(1, middle)
    return cuts


def _pieces(curve: interpolate.BSpline, cuts: Sequence[float]) -> list[BSpline]:
    """Return the parts of a curve between cuts, the ends of its domain among them."""
    degree = curve.k
    for u in cuts:
        missing = degree - int(np.count_nonzero(curve.t == u))
        if missing > 0:
            curve = curve.insert_knot(u, missing)
    pieces = []
    for low, high in pairwise(cuts):
        first = int(np.searchsorted(curve.t, low, side="right")) - 1
        last = int(np.searchsorted(curve.t, high, side="left"))
        pieces.append(
            _record(curve.c[first - degree : last], degree, low, curve.t[first + 1 : last], high)
        )
    return pieces


def _record(
    homogeneous: np.ndarray, degree: int, low: float, inner: np.ndarray, high: float
) -> BSpline:
    w = homogeneous[:, 2]
    poles = homogeneous[:, :2] / w[:, None]
    plain = bool(np.allclose(w, w[0], rtol=1e-12, atol=0))
    return BSpline(
        poles=tuple((float(x), float(y)) for x, y in poles),
        degree=degree,
        knots=(*[low] * (degree + 1), *(float(u) for u in inner), *[high] * (degree + 1)),
        weights=() if plain else tuple(float(v) for v in w),
    )
