"""Plane profiles to CAD faces."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from ..errors import InputError
from ..solid import (
    Arc,
    BSpline,
    Circle,
    EllipseArc,
    Line,
    Loop,
    Point2,
    Profile,
    Segment,
    Spline,
)

#: Ends of neighbouring segments closer than this share of the profile's extent are one point.
_JOIN = 1e-6


@dataclass(eq=False, kw_only=True, slots=True)
class Outline:
    """The CAD curves of a profile.

    Attributes
    ----------
    loops : tags of the curve loops, the outer one first
    curves : per loop, (face name or None, curve tag) in order
    spare : tags of points that only helped to make curves
    """

    loops: list[int] = field(default_factory=list)
    curves: list[list[tuple[str | None, int]]] = field(default_factory=list)
    spare: list[int] = field(default_factory=list)


def draw(cad: Any, profile: Profile) -> Outline:
    """Draw a profile's loops as CAD curves.

    Raises
    ------
    InputError
        If a loop is not closed or a segment cannot be drawn.
    """
    pen = _Pen(cad, profile)
    for loop in (profile.outer, *profile.holes):
        pen.loop(loop)
    return pen.outline


def fill(cad: Any, outline: Outline) -> int:
    """Return the tag of the plane face inside the first loop and outside the others."""
    tag = cad.model.occ.addPlaneSurface(outline.loops)
    cad.model.occ.remove([(0, t) for t in outline.spare])
    return tag


def ends(segment: Segment) -> tuple[Point2, Point2]:
    """Return the first and last point of a segment."""
    match segment:
        case Line() | Arc():
            return segment.start, segment.end
        case EllipseArc():
            return ellipse_point(segment, segment.first), ellipse_point(segment, segment.last)
        case Spline():
            return segment.points[0], segment.points[-1]
        case BSpline():
            return segment.poles[0], segment.poles[-1]
        case Circle():
            x, y = segment.centre
            return (x + segment.radius, y), (x + segment.radius, y)


def ellipse_point(arc: EllipseArc, t: float) -> Point2:
    """Return the point of an elliptic arc at parameter t."""
    (cx, cy), (ax, ay) = arc.centre, arc.major
    bx, by = -ay * arc.ratio, ax * arc.ratio
    c, s = math.cos(t), math.sin(t)
    return (cx + ax * c + bx * s, cy + ay * c + by * s)


class _Pen:
    """Draws loops; keeps the points they share."""

    def __init__(self, cad: Any, profile: Profile) -> None:
        self.occ = cad.model.occ
        self.origin = np.asarray(profile.origin, float)
        self.axes = np.asarray((profile.u, profile.v), float)
        self.outline = Outline()
        corners = np.array([p for loop in (profile.outer,) for s in loop for p in _extent(s)])
        self.join = _JOIN * float(np.ptp(corners, axis=0).max())
        self.known: list[tuple[Point2, int]] = []

    def place(self, point: Point2) -> list[float]:
        return (self.origin + np.asarray(point) @ self.axes).tolist()

    def spare(self, point: Point2) -> int:
        tag = self.occ.addPoint(*self.place(point))
        self.outline.spare.append(tag)
        return tag

    def corner(self, point: Point2) -> int:
        for (x, y), tag in self.known:
            if math.hypot(point[0] - x, point[1] - y) <= self.join:
                return tag
        tag = self.occ.addPoint(*self.place(point))
        self.known.append((point, tag))
        return tag

    def loop(self, loop: Loop) -> None:
        self.known = []
        named: list[tuple[str | None, int]] = []
        for segment, following in zip(loop, (*loop[1:], loop[0]), strict=True):
            end, start = ends(segment)[1], ends(following)[0]
            if math.hypot(end[0] - start[0], end[1] - start[1]) > self.join:
                raise InputError(
                    "the outline is not closed",
                    value=f"a gap between ({end[0]:g}, {end[1]:g}) and ({start[0]:g}, {start[1]:g})"
                    " mm",
                )
            named += [(segment.face, tag) for tag in self.segment(segment)]
        self.outline.curves.append(named)
        self.outline.loops.append(self.occ.addCurveLoop([tag for _, tag in named]))

    def segment(self, segment: Segment) -> list[int]:
        match segment:
            case Line():
                return [self.occ.addLine(self.corner(segment.start), self.corner(segment.end))]
            case Arc():
                return [self.arc(segment.start, segment.through, segment.end)]
            case EllipseArc():
                return self.ellipse(segment)
            case Spline():
                return self.spline(segment)
            case BSpline():
                return [self.bspline(segment)]
            case Circle():
                return self.circle(segment)

    def arc(self, start: Point2, through: Point2, end: Point2) -> int:
        tags = self.corner(start), self.spare(through), self.corner(end)
        return self.occ.addCircleArc(*tags, center=False)

    def circle(self, circle: Circle) -> list[int]:
        # Quarter arcs, so that the swept face has no seam.
        (x, y), r = circle.centre, circle.radius
        at = [
            (x + r * math.cos(k * math.pi / 4), y + r * math.sin(k * math.pi / 4)) for k in range(8)
        ]
        return [self.arc(at[k], at[k + 1], at[(k + 2) % 8]) for k in range(0, 8, 2)]

    def ellipse(self, arc: EllipseArc) -> list[int]:
        # Pieces of at most 90 degrees: circular arcs, or rational quadratics, both exact.
        pieces = max(1, math.ceil(abs(arc.last - arc.first) / (math.pi / 2) - 1e-9))
        turn = (arc.last - arc.first) / pieces
        tags = []
        for k in range(pieces):
            first, middle = arc.first + k * turn, arc.first + (k + 0.5) * turn
            start, end = ellipse_point(arc, first), ellipse_point(arc, first + turn)
            through = ellipse_point(arc, middle)
            if abs(abs(arc.ratio) - 1.0) < 1e-12:
                tags.append(self.arc(start, through, end))
                continue
            c = math.cos(turn / 2)
            pole = tuple(
                m + (p - m) / c for m, p in zip(arc.centre, through, strict=True)
            )  # where the tangents of the two ends meet
            points = [self.corner(start), self.spare((pole[0], pole[1])), self.corner(end)]
            tags.append(
                self.occ.addBSpline(
                    points, degree=2, weights=[1, c, 1], knots=[0, 1], multiplicities=[3, 3]
                )
            )
        return tags

    def spline(self, spline: Spline) -> list[int]:
        first, *inner, last = spline.points
        if len(inner) == 0:
            return [self.occ.addLine(self.corner(first), self.corner(last))]
        points = [self.corner(first), *(self.spare(p) for p in inner), self.corner(last)]
        return [self.occ.addSpline(points)]

    def bspline(self, curve: BSpline) -> int:
        first, *inner, last = curve.poles
        points = [self.corner(first), *(self.spare(p) for p in inner), self.corner(last)]
        knots, counts = np.unique(np.asarray(curve.knots, float), return_counts=True)
        return self.occ.addBSpline(
            points,
            degree=curve.degree,
            weights=list(curve.weights) or [1.0] * len(points),
            knots=knots.tolist(),
            multiplicities=counts.tolist(),
        )


def _extent(segment: Segment) -> list[Point2]:
    match segment:
        case Circle():
            (x, y), r = segment.centre, segment.radius
            return [(x - r, y - r), (x + r, y + r)]
        case Spline():
            return list(segment.points)
        case BSpline():
            return list(segment.poles)
        case EllipseArc():
            span = np.linspace(segment.first, segment.last, 5)
            return [ellipse_point(segment, float(t)) for t in span]
        case Arc():
            return [segment.start, segment.through, segment.end]
        case Line():
            return [segment.start, segment.end]
