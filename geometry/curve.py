"""Plane segments as curves: ends, reversal, moving, sampling, exact integrals."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from functools import lru_cache

import numpy as np
from scipy import interpolate

from .solid import Arc, BSpline, Circle, EllipseArc, Line, Point2, Segment, Spline

#: Sampled arcs turn by at most this much from point to point.
_TURN = math.radians(1.0)

#: Pieces that each polynomial span of a spline is sampled by.
_SPAN = 16


def ends(segment: Segment) -> tuple[Point2, Point2]:
    """Return the first and the last point; for a circle both are its rightmost."""
    match segment:
        case Line() | Arc():
            return segment.start, segment.end
        case Spline():
            return segment.points[0], segment.points[-1]
        case BSpline():
            return segment.poles[0], segment.poles[-1]
        case EllipseArc() | Circle():
            points = at(segment, np.array([0.0, 1.0]))
            return _point(points[0]), _point(points[1])


def reversed_(segment: Segment) -> Segment:
    """Return the same curve run from its end to its start."""
    match segment:
        case Line() | Arc():
            return replace(segment, start=segment.end, end=segment.start)
        case EllipseArc():
            return replace(segment, first=-segment.last, last=-segment.first, ratio=-segment.ratio)
        case Spline():
            return replace(segment, points=segment.points[::-1])
        case BSpline():
            total = segment.knots[0] + segment.knots[-1]
            return replace(
                segment,
                poles=segment.poles[::-1],
                knots=tuple(total - k for k in segment.knots[::-1]),
                weights=segment.weights[::-1],
            )
        case Circle():
            return segment


def at(segment: Segment, t: np.ndarray) -> np.ndarray:
    """Return points (n, 2) at parameters (n,) from 0 (start) to 1 (end)."""
    t = np.asarray(t, float)
    match segment:
        case Line():
            a, b = np.asarray(segment.start), np.asarray(segment.end)
            return a + t[:, None] * (b - a)
        case Arc():
            centre, radius, first, sweep = circle_of(segment)
            return _on_circle(centre, radius, first + sweep * t)
        case EllipseArc():
            major = np.asarray(segment.major)
            minor = segment.ratio * np.array([-major[1], major[0]])
            p = segment.first + (segment.last - segment.first) * t
            return segment.centre + np.outer(np.cos(p), major) + np.outer(np.sin(p), minor)
        case Circle():
            return _on_circle(np.asarray(segment.centre), segment.radius, 2 * math.pi * t)
        case BSpline():
            low, high = segment.knots[segment.degree], segment.knots[-segment.degree - 1]
            values = _function(segment)(np.clip(low + (high - low) * t, low, high))
            return values[:, :2] / values[:, 2:]
        case Spline():
            return _through(segment)(t)


def breaks(segment: Segment) -> np.ndarray:
    """Return the parameters (from 0 to 1) between which a curve is one smooth piece."""
    match segment:
        case Line():
            return np.array([0.0, 1.0])
        case Arc():
            return _turns(circle_of(segment)[3])
        case EllipseArc():
            return _turns(segment.last - segment.first)
        case Circle():
            return _turns(2 * math.pi)
        case BSpline():
            knots = np.unique(segment.knots[segment.degree : -segment.degree or None])
            return (knots - knots[0]) / (knots[-1] - knots[0])
        case Spline():
            return _through(segment).x


def sampled(segment: Segment) -> np.ndarray:
    """Return points (n, 2) along the curve, start and end among them."""
    nodes = breaks(segment)
    match segment:
        case Line():
            pieces = 1
        case BSpline() | Spline():
            pieces = _SPAN
        case _:
            pieces = math.ceil(math.radians(90) / _TURN)
    fine = np.arange(pieces) / pieces
    t = (nodes[:-1, None] + np.diff(nodes)[:, None] * fine).ravel()
    return at(segment, np.append(t, 1.0))


def area_under(segment: Segment) -> float:
    """Return the integral of (x dy - y dx) / 2 along the curve (Green), by Gauss quadrature."""
    node, weight = np.polynomial.legendre.leggauss(16)
    nodes = breaks(segment)
    half = np.diff(nodes)[:, None] / 2
    t = (nodes[:-1, None] + half * (node + 1)).ravel()
    w = (half * weight).ravel()
    x, y = at(segment, t).T
    dx, dy = _slope(segment, t).T
    return float(w @ (x * dy - y * dx)) / 2


def moved(segment: Segment, matrix: np.ndarray, shift: np.ndarray) -> Segment:
    """Return the curve after p -> matrix @ p + shift.

    Circular arcs stay circular under turning, mirroring and even scaling; under
    any other map they become arcs of an ellipse.
    """

    def go(p: Point2 | Sequence[float]) -> Point2:
        return _point(matrix @ np.asarray(p) + shift)

    scale = math.sqrt(abs(float(np.linalg.det(matrix))))
    even = np.allclose(matrix.T @ matrix, scale**2 * np.eye(2), rtol=0, atol=1e-9 * scale**2)
    match segment:
        case Line():
            return replace(segment, start=go(segment.start), end=go(segment.end))
        case Spline():
            return replace(segment, points=tuple(go(p) for p in segment.points))
        case BSpline():
            return replace(segment, poles=tuple(go(p) for p in segment.poles))
        case Circle() if even:
            return replace(segment, centre=go(segment.centre), radius=segment.radius * scale)
        case Arc() if even:
            return replace(
                segment,
                start=go(segment.start),
                through=go(segment.through),
                end=go(segment.end),
            )
        case Arc() | Circle() | EllipseArc():
            return _moved_ellipse(as_ellipse(segment), matrix, shift)


def as_ellipse(segment: Arc | Circle | EllipseArc) -> EllipseArc:
    """Return a circular arc or circle as an arc of an ellipse."""
    match segment:
        case EllipseArc():
            return segment
        case Arc():
            centre, radius, first, sweep = circle_of(segment)
        case Circle():
            centre, radius, first, sweep = segment.centre, segment.radius, 0.0, 2 * math.pi
    sense = math.copysign(1.0, sweep)
    return EllipseArc(
        centre=_point(centre),
        major=(radius, 0.0),
        ratio=sense,
        first=sense * first,
        last=sense * (first + sweep),
        face=segment.face,
    )


def _moved_ellipse(arc: EllipseArc, matrix: np.ndarray, shift: np.ndarray) -> EllipseArc:
    """Return the arc mapped: the new half axes are the singular vectors of the mapped old ones."""
    major = np.asarray(arc.major)
    minor = arc.ratio * np.array([-major[1], major[0]])
    u, size, vt = np.linalg.svd(matrix @ np.column_stack((major, minor)))
    if np.linalg.det(vt) < 0:
        vt[1], u[:, 1] = -vt[1], -u[:, 1]
    turn = math.atan2(vt[0, 1], vt[0, 0])
    return replace(
        arc,
        centre=_point(matrix @ np.asarray(arc.centre) + shift),
        major=_point(u[:, 0] * size[0]),
        ratio=float(size[1] / size[0] * math.copysign(1.0, np.linalg.det(u))),
        first=arc.first - turn,
        last=arc.last - turn,
    )


def as_bspline(arc: EllipseArc) -> BSpline:
    """Return an elliptic arc as an exact rational quadratic spline.

    Piegl and Tiller, *The NURBS Book*, 2nd ed., sec. 7.3: one span for every
    90 degrees, its middle pole where the end tangents meet, weighted by the
    cosine of half the span.
    """
    major = np.asarray(arc.major, float)
    minor = arc.ratio * np.array([-major[1], major[0]])
    sweep = arc.last - arc.first
    spans = max(1, math.ceil(abs(sweep) / (math.pi / 2) - 1e-9))
    half = sweep / spans / 2
    angles = arc.first + half * np.arange(2 * spans + 1)
    grow = np.where(np.arange(2 * spans + 1) % 2, 1 / math.cos(half), 1.0)
    poles = np.asarray(arc.centre) + (
        np.outer(grow * np.cos(angles), major) + np.outer(grow * np.sin(angles), minor)
    )
    inner = [float(k) for k in range(1, spans) for _ in range(2)]
    return BSpline(
        poles=tuple(_point(p) for p in poles),
        degree=2,
        knots=(0.0, 0.0, 0.0, *inner, *[float(spans)] * 3),
        weights=tuple(float(w) for w in 1 / grow),
        face=arc.face,
    )


def circle_of(arc: Arc) -> tuple[np.ndarray, float, float, float]:
    """Return centre, radius, first angle and signed sweep (radians) of an arc."""
    a, b, c = (np.asarray(p, float) for p in (arc.start, arc.through, arc.end))
    u, v = b - a, c - a
    cross = u[0] * v[1] - u[1] * v[0]
    w = ((u @ u) * np.array([v[1], -v[0]]) - (v @ v) * np.array([u[1], -u[0]])) / (2 * cross)
    centre, radius = a + w, float(np.linalg.norm(w))
    first, last = (math.atan2(*(p - centre)[::-1]) for p in (a, c))
    sweep = (last - first) % (2 * math.pi)
    return centre, radius, first, sweep if cross > 0 else sweep - 2 * math.pi


def _slope(segment: Segment, t: np.ndarray) -> np.ndarray:
    """Return d point / d t (n, 2)."""
    match segment:
        case Line():
            return np.tile(np.subtract(segment.end, segment.start), (len(t), 1))
        case Arc():
            centre, _, _, sweep = circle_of(segment)
            return sweep * _quarter(at(segment, t) - centre)
        case Circle():
            return 2 * math.pi * _quarter(at(segment, t) - segment.centre)
        case EllipseArc():
            major = np.asarray(segment.major)
            minor = segment.ratio * np.array([-major[1], major[0]])
            sweep = segment.last - segment.first
            p = segment.first + sweep * t
            return sweep * (np.outer(np.cos(p), minor) - np.outer(np.sin(p), major))
        case BSpline():
            low, high = segment.knots[segment.degree], segment.knots[-segment.degree - 1]
            curve = _function(segment)
            h, dh = (f(low + (high - low) * t) for f in (curve, curve.derivative()))
            return (dh[:, :2] * h[:, 2:] - h[:, :2] * dh[:, 2:]) / h[:, 2:] ** 2 * (high - low)
        case Spline():
            return _through(segment)(t, 1)


@lru_cache(maxsize=64)
def _function(curve: BSpline) -> interpolate.BSpline:
    weights = np.asarray(curve.weights or (1.0,) * len(curve.poles))
    homogeneous = np.column_stack((np.asarray(curve.poles) * weights[:, None], weights))
    return interpolate.BSpline(np.asarray(curve.knots), homogeneous, curve.degree)


@lru_cache(maxsize=64)
def _through(curve: Spline) -> interpolate.CubicSpline:
    points = np.asarray(curve.points)
    chord = np.append(0.0, np.cumsum(np.linalg.norm(np.diff(points, axis=0), axis=1)))
    return interpolate.CubicSpline(chord / chord[-1], points)


def _quarter(v: np.ndarray) -> np.ndarray:
    """Return vectors (n, 2) turned by +90 degrees."""
    return np.column_stack((-v[:, 1], v[:, 0]))


def _turns(sweep: float) -> np.ndarray:
    return np.linspace(0, 1, max(1, math.ceil(abs(sweep) / (math.pi / 2) - 1e-9)) + 1)


def _on_circle(centre: np.ndarray, radius: float, angles: np.ndarray) -> np.ndarray:
    return centre + radius * np.column_stack((np.cos(angles), np.sin(angles)))


def _point(p: np.ndarray | Point2) -> Point2:
    return (float(p[0]), float(p[1]))
