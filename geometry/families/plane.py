"""Plane loops and the simple bodies that families are built of."""

from __future__ import annotations

from collections.abc import Sequence

from ..solid import Circle, Extrusion, Line, Loop, Point2, Point3, Profile


def polygon(points: Sequence[Point2], faces: Sequence[str | None]) -> Loop:
    """Return the closed loop of straight lines through points; face i starts at point i."""
    ends = [*points[1:], points[0]]
    return tuple(
        Line(start=a, end=b, face=face) for a, b, face in zip(points, ends, faces, strict=True)
    )


def flat(
    outer: Loop,
    low: float,
    high: float,
    *,
    holes: tuple[Loop, ...] = (),
    bottom: str | None = "bottom",
    top: str | None = "top",
) -> Extrusion:
    """Return a loop of the x-y plane swept from z = low to z = high."""
    return Extrusion(
        profile=Profile(outer=outer, holes=holes, origin=(0.0, 0.0, low)),
        vector=(0.0, 0.0, high - low),
        start=bottom,
        end=top,
    )


def upright(
    outer: Loop,
    low: float,
    high: float,
    *,
    holes: tuple[Loop, ...] = (),
    right: str | None = "right",
    left: str | None = "left",
) -> Extrusion:
    """Return a loop of the x-z plane swept from y = low to y = high."""
    return Extrusion(
        profile=Profile(outer=outer, holes=holes, origin=(0.0, low, 0.0), v=(0.0, 0.0, 1.0)),
        vector=(0.0, high - low, 0.0),
        start=right,
        end=left,
    )


def block(low: Point3, high: Point3, faces: Sequence[str | None]) -> Extrusion:
    """Return a box; faces are named in the order x low, x high, right, left, bottom, top."""
    (x0, y0, z0), (x1, y1, z1) = low, high
    back, front, right, left, bottom, top = faces
    corners = ((x0, y0), (x1, y0), (x1, y1), (x0, y1))
    return flat(polygon(corners, (right, front, left, back)), z0, z1, bottom=bottom, top=top)


def across(origin: Point3, diameter: float, reach: float, face: str) -> Extrusion:
    """Return a drill along y, centred on `origin`, `reach` long to either side."""
    x, y, z = origin
    circle = Circle(centre=(x, z), radius=diameter / 2, face=face)
    return upright((circle,), y - reach, y + reach, right=None, left=None)


def section_profile(x: float, outer: Loop, holes: tuple[Loop, ...] = ()) -> Profile:
    """Return a profile in the plane of constant x; its coordinates are y and z."""
    return Profile(
        outer=outer, holes=holes, origin=(x, 0.0, 0.0), u=(0.0, 1.0, 0.0), v=(0.0, 0.0, 1.0)
    )
