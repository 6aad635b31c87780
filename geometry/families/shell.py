"""Sections of turned bodies: a curve with a wall laid inward, or a closed profile."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from itertools import pairwise

import numpy as np
from numpy.polynomial import Chebyshev
from scipy.interpolate import BSpline as Piecewise
from scipy.interpolate import CubicSpline, PchipInterpolator, make_interp_spline

from ..solid import BSpline, Line, Loop, Point2, Segment
from .plane import polygon

_FINE = 8
"""Samples per span of a curve."""

_DEGREE = 9
"""Degree of the inner curve's spans: follows the true parallel to about 1e-5 of the wall."""


def on_axis(point: Point2) -> bool:
    """Return whether a point [r, z] lies on the axis."""
    return point[0] == 0.0


def inward(points: Sequence[Point2]) -> float:
    """Return +1 if the space between a curve and the axis lies to its left, -1 if right.

    Returns 0 if the curve and the axis enclose nothing.
    """
    ring = np.array([*points, (0.0, points[-1][1]), (0.0, points[0][1])])
    after = np.roll(ring, -1, axis=0)
    area = float(np.sum(ring[:, 0] * after[:, 1] - after[:, 0] * ring[:, 1]) / 2)
    return math.copysign(1.0, area) if abs(area) > 1e-9 * np.ptp(ring, axis=0).max() ** 2 else 0.0


def walled(points: Sequence[Point2], walls: Sequence[float], *, straight: bool) -> Loop:
    """Return the section of a shell.

    Parameters
    ----------
    points : [r, z] along the outside from the crown to the lip, mm
    walls : thickness at each point, laid inward, square to the curve, mm
    straight : straight segments with mitred corners; else a smooth curve, level
        where it meets the axis
    """
    outer, inner = (_straight if straight else _smooth)(points, walls)
    if on_axis(points[0]):
        outer[0] = _renamed(outer[0], "crown")
    if on_axis(points[-1]):
        outer[-1] = _renamed(outer[-1], "lip")
    (first, last), (start, end) = _ends(outer), _ends(inner)
    lip = Line(start=last, end=start, face=None if on_axis(points[-1]) else "lip")
    crown = Line(start=end, end=first, face=None if on_axis(points[0]) else "crown")
    return (*outer, lip, *inner, crown)


def closed(points: Sequence[Point2], *, straight: bool) -> Loop:
    """Return a closed section through distinct points [r, z], in order, mm.

    Faces are named by where they look: away from the axis `outer`, towards it
    `inner`, level and up `crown`, level and down `lip`; lines along the axis make none.
    """
    ring = np.array(points)
    after = np.roll(ring, -1, axis=0)
    turn = np.sign(np.sum(ring[:, 0] * after[:, 1] - after[:, 0] * ring[:, 1]))
    names = [_looks(turn * (b - a)) for a, b in zip(ring, after, strict=True)]
    names = [
        None if a[0] == b[0] == 0.0 else name for name, a, b in zip(names, ring, after, strict=True)
    ]
    if straight:
        return polygon([(float(r), float(z)) for r, z in ring], names)
    if None not in names:
        curve = _interpolated([*points, points[0]], periodic=True)
        return tuple(_pieces(curve, names))
    # From where the section leaves the axis round to where it meets it again.
    k = names.index(None) + 1
    order = [(k + i) % len(points) for i in range(len(points))]
    curve = _interpolated([points[i] for i in order])
    pieces = _pieces(curve, [names[i] for i in order[:-1]])
    axis = Line(start=_ends(pieces)[1], end=_ends(pieces)[0])
    return (*pieces, axis)


def sampled(loop: Loop) -> np.ndarray:
    """Return points (n, 2) along a loop of lines and B-splines, each once."""
    found = []
    for segment in loop:
        if isinstance(segment, BSpline):
            curve = Piecewise(np.array(segment.knots), np.array(segment.poles), segment.degree)
            breaks = np.unique(segment.knots)
            s = np.linspace(breaks[:-1], breaks[1:], _FINE, endpoint=False)
            found.append(curve(np.sort(s.ravel())))
        else:
            found.append(np.array([_ends([segment])[0]]))
    return np.concatenate(found)


def heights(loop: Loop) -> tuple[float, float]:
    """Return the lowest and the highest z of a loop of lines and one-span B-splines."""
    found: list[float] = []
    for segment in loop:
        found += [p[1] for p in _ends([segment])]
        if isinstance(segment, BSpline):
            curve = Piecewise(
                np.array(segment.knots), np.array(segment.poles)[:, 1], segment.degree
            )
            span = [segment.knots[0], segment.knots[-1]]
            height = Chebyshev.interpolate(curve, segment.degree, domain=span)
            turns = height.deriv().roots()
            level = turns[np.abs(turns.imag) < 1e-9 * span[1]].real
            found += [float(z) for z in curve(level[(level > span[0]) & (level < span[1])])]
    return min(found), max(found)


def crosses(line: np.ndarray) -> bool:
    """Return whether the open polyline through points (n, 2) crosses itself."""
    a, b = line[:-1], line[1:]

    def side(p: np.ndarray, q: np.ndarray, r: np.ndarray) -> np.ndarray:
        return np.sign((q - p)[..., 0] * (r - p)[..., 1] - (q - p)[..., 1] * (r - p)[..., 0])

    p, q, r, s = a[:, None], b[:, None], a[None], b[None]
    meet = (side(p, q, r) * side(p, q, s) < 0) & (side(r, s, p) * side(r, s, q) < 0)
    return bool(meet.any())


def outer_samples(points: Sequence[Point2], *, straight: bool) -> np.ndarray:
    """Return points (n, 2) along the outside, in order."""
    if straight:
        return np.array(points)
    curve = _interpolated(points)
    return curve(_stations(curve))


def inner_samples(
    points: Sequence[Point2], walls: Sequence[float], *, straight: bool
) -> np.ndarray:
    """Return the points (n, 2) of the inside opposite to `outer_samples`."""
    return (
        _mitred(points, walls)
        if straight
        else _offset(points, walls, _stations(_interpolated(points)))
    )


def _looks(step: np.ndarray) -> str:
    """Return the name of a face whose section runs along `step`, anticlockwise."""
    dr, dz = step
    if abs(dz) > 1e-9 * abs(dr):
        return "outer" if dz > 0 else "inner"
    return "crown" if dr < 0 else "lip"


def _ends(segments: Sequence[Segment]) -> tuple[Point2, Point2]:
    first, last = segments[0], segments[-1]
    start = first.poles[0] if isinstance(first, BSpline) else first.start  # type: ignore[union-attr]
    end = last.poles[-1] if isinstance(last, BSpline) else last.end  # type: ignore[union-attr]
    return start, end


def _renamed(segment: Segment, face: str) -> Segment:
    return replace(segment, face=face)


def _straight(
    points: Sequence[Point2], walls: Sequence[float]
) -> tuple[list[Segment], list[Segment]]:
    laid = [(float(r), float(z)) for r, z in _mitred(points, walls)]
    outer: list[Segment] = [Line(start=a, end=b, face="outer") for a, b in pairwise(points)]
    inner: list[Segment] = [Line(start=a, end=b, face="inner") for a, b in pairwise(laid[::-1])]
    return outer, inner


def _mitred(points: Sequence[Point2], walls: Sequence[float]) -> np.ndarray:
    """Return the inner points (n, 2): parallels of the segments, met at the corners."""
    steps = np.diff(np.array(points), axis=0)
    steps /= np.linalg.norm(steps, axis=1)[:, None]
    normals = inward(points) * np.stack([-steps[:, 1], steps[:, 0]], axis=1)
    before = np.vstack([normals[:1], normals])
    after = np.vstack([normals, normals[-1:]])
    # Across the axis lies the mirror image of the first or the last segment.
    mirror = np.array([-1.0, 1.0])
    if on_axis(points[0]):
        before[0] = mirror * normals[0]
    if on_axis(points[-1]):
        after[-1] = mirror * normals[-1]
    spread = 1 + np.einsum("ij,ij->i", before, after)
    spread = np.maximum(spread, 1e-9)
    return np.array(points) + (before + after) * (np.asarray(walls) / spread)[:, None]


def _smooth(
    points: Sequence[Point2], walls: Sequence[float]
) -> tuple[list[Segment], list[Segment]]:
    # One segment per span: CAD kernels integrate areas and volumes face by face,
    # and lose digits where a face has inner knots.
    curve = _interpolated(points)
    knots = curve.x
    outer = _pieces(curve, ["outer"] * (len(knots) - 1))
    inner: list[Segment] = []
    for first, last in pairwise(knots[::-1]):
        angle = np.pi * np.arange(_DEGREE + 1) / _DEGREE
        s = (first + last) / 2 + (first - last) / 2 * np.cos(angle)
        laid = _offset(points, walls, s)
        part = make_interp_spline(first - s, laid, k=_DEGREE)
        inner.append(_record(part, "inner"))
    return outer, inner


def _interpolated(points: Sequence[Point2], *, periodic: bool = False) -> CubicSpline:
    """Return the cubic spline through points by chord length.

    Its ends are level on the axis, so that the turned surface has no point
    there; elsewhere the last two spans are one cubic (not-a-knot), which keeps
    the end's slope, and with it the tilt of the lip, accurate.
    """
    at = np.array(points)
    s = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(at, axis=0), axis=1))])
    if periodic:
        at[-1] = at[0]
        return CubicSpline(s, at, bc_type="periodic")
    ends = [
        (1, np.array([sign, 0.0])) if on_axis(p) else "not-a-knot"
        for p, sign in ((points[0], 1.0), (points[-1], -1.0))
    ]
    return CubicSpline(s, at, bc_type=(ends[0], ends[1]))  # pyright: ignore[reportArgumentType]


def _stations(curve: CubicSpline) -> np.ndarray:
    knots = curve.x
    steps = np.linspace(knots[:-1], knots[1:], _FINE, endpoint=False).T.ravel()
    return np.append(steps, knots[-1])


def _offset(points: Sequence[Point2], walls: Sequence[float], s: np.ndarray) -> np.ndarray:
    """Return points (n, 2) of the inner curve at parameters s (n,) of the outer one."""
    curve = _interpolated(points)
    wall = PchipInterpolator(curve.x, np.asarray(walls))(s)
    d = curve.derivative()(s)
    d /= np.linalg.norm(d, axis=1)[:, None]
    normals = inward(points) * np.stack([-d[:, 1], d[:, 0]], axis=1)
    laid = curve(s) + wall[:, None] * normals
    for at, point in ((curve.x[0], points[0]), (curve.x[-1], points[-1])):
        if on_axis(point):
            laid[s == at, 0] = 0.0
    return laid


def _pieces(curve: CubicSpline, names: Sequence[str | None]) -> list[Segment]:
    """Return each span of a spline as a segment of its own, by its four poles."""
    at, slope = curve(curve.x), curve(curve.x, 1)
    found: list[Segment] = []
    for i, (name, h) in enumerate(zip(names, np.diff(curve.x), strict=True)):
        poles = (at[i], at[i] + h / 3 * slope[i], at[i + 1] - h / 3 * slope[i + 1], at[i + 1])
        knots = np.repeat([0.0, h], 4)
        found.append(_record(Piecewise(knots, np.array(poles), 3), name))
    return found


def _record(curve: Piecewise, face: str | None) -> BSpline:
    return BSpline(
        poles=tuple((float(r), float(z)) for r, z in curve.c),
        degree=curve.k,
        knots=tuple(float(k) for k in curve.t),
        face=face,
    )
