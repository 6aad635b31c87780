"""Area and first moments of a plane loop, by Green's theorem."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from scipy.interpolate import BSpline as Piecewise

from ..solid import Arc, BSpline, Circle, Line, Loop, Segment

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(20)


@dataclass(frozen=True, kw_only=True, slots=True)
class Measure:
    """What a plane loop encloses, positive whichever way it runs.

    Attributes
    ----------
    area : length2
    moment_x, moment_y : length3
        Integrals of the first and the second coordinate over the area.
    """

    area: float
    moment_x: float
    moment_y: float


def measure(loop: Loop) -> Measure:
    """Return area and moments of a loop of lines, arcs, circles and B-splines without weights."""
    total = np.zeros(3)
    for segment in loop:
        for point, slope, first, last in _pieces(segment):
            s = first + (last - first) * (_NODES + 1) / 2
            (x, y), (dx, dy) = point(s), slope(s)
            terms = np.stack([(x * dy - y * dx) / 2, x**2 * dy / 2, -(y**2) * dx / 2])
            total += terms @ _WEIGHTS * (last - first) / 2
    area, moment_x, moment_y = total * np.sign(total[0])
    return Measure(area=float(area), moment_x=float(moment_x), moment_y=float(moment_y))


def swept_length(segment: Segment) -> tuple[float, float]:
    """Return a segment's length and the integral of its first coordinate along it.

    The latter times 2 pi is the area of the surface it sweeps about the second axis.
    """
    length = moment = 0.0
    for point, slope, first, last in _pieces(segment):
        s = first + (last - first) * (_NODES + 1) / 2
        speed = np.hypot(*slope(s)) * abs(last - first) / 2
        length += float(speed @ _WEIGHTS)
        moment += float((point(s)[0] * speed) @ _WEIGHTS)
    return length, moment


_Curve = Callable[[np.ndarray], np.ndarray]
_Piece = tuple[_Curve, _Curve, float, float]


def _pieces(segment: Segment) -> list[_Piece]:
    """Return point(s), slope(s), first and last parameter of the smooth pieces."""
    if isinstance(segment, Line):
        a, b = np.array(segment.start), np.array(segment.end)
        return [
            (
                lambda s: a[:, None] + (b - a)[:, None] * s,
                lambda s: np.broadcast_to((b - a)[:, None], (2, len(s))),
                0.0,
                1.0,
            )
        ]
    if isinstance(segment, Circle):
        return _circular(segment.centre, segment.radius, 0.0, 2 * math.pi)
    if isinstance(segment, Arc):
        centre, radius = circle_through(segment.start, segment.through, segment.end)
        a, m, b = (
            math.atan2(p[1] - centre[1], p[0] - centre[0])
            for p in (segment.start, segment.through, segment.end)
        )
        turn = (b - a) % (2 * math.pi)
        if (m - a) % (2 * math.pi) > turn:
            turn -= 2 * math.pi
        return _circular(centre, radius, a, a + turn)
    if isinstance(segment, BSpline) and not segment.weights:
        knots = np.asarray(segment.knots)
        curve = Piecewise(knots, np.asarray(segment.poles), segment.degree)
        slope = curve.derivative()
        breaks = np.unique(knots)
        return [
            (lambda s: curve(s).T, lambda s: slope(s).T, float(a), float(b))
            for a, b in pairwise(breaks)
        ]
    raise TypeError(f"no measure of {type(segment).__name__}")


def _circular(
    centre: tuple[float, float], radius: float, first: float, last: float
) -> list[_Piece]:
    def point(s: np.ndarray) -> np.ndarray:
        return np.stack([centre[0] + radius * np.cos(s), centre[1] + radius * np.sin(s)])

    def slope(s: np.ndarray) -> np.ndarray:
        return np.stack([-radius * np.sin(s), radius * np.cos(s)])

    return [(point, slope, first, last)]


def circle_through(
    a: tuple[float, float], b: tuple[float, float], c: tuple[float, float]
) -> tuple[tuple[float, float], float]:
    """Return the centre and radius of the circle through three points not in line."""
    bx, by = b[0] - a[0], b[1] - a[1]
    cx, cy = c[0] - a[0], c[1] - a[1]
    double = 2 * (bx * cy - by * cx)
    x = (cy * (bx**2 + by**2) - by * (cx**2 + cy**2)) / double
    y = (bx * (cx**2 + cy**2) - cx * (bx**2 + by**2)) / double
    return (a[0] + x, a[1] + y), math.hypot(x, y)
