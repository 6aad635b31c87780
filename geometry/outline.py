"""An outline with holes: outer loop and holes told apart, checked, measured."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from scipy.spatial import KDTree

from .chain import chained, signed_area
from .crossing import refuse_crossing
from .curve import sampled
from .errors import InputError
from .solid import BSpline, Line, Loop, Point2, Profile, Segment
from .spline import bezier_pieces


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Outline:
    """One outer loop and the holes in it, mm.

    Attributes
    ----------
    outer : Loop, anticlockwise
    holes : loops, each anticlockwise
    area : mm2, outer less holes, exact
    thin : mm
        The smallest of: twice the area over the length of all edges (the width
        of a long strip), and the walls between loops.
    """

    outer: Loop
    holes: tuple[Loop, ...]
    area: float
    thin: float

    def profile(self, height: float) -> Profile:
        """Return the outline at z = `height`, with the segments named edge_1, edge_2 and so on."""
        count = 0
        named: list[Loop] = []
        for loop in (self.outer, *self.holes):
            edges = [replace(s, face=f"edge_{count + i}") for i, s in enumerate(loop, 1)]
            # One span a curve: the kernel's areas are off by 1e-4 inside longer splines.
            named.append(tuple(piece for edge in edges for piece in _spans(edge)))
            count += len(loop)
        return Profile(outer=named[0], holes=tuple(named[1:]), origin=(0.0, 0.0, height))

    @property
    def edges(self) -> tuple[str, ...]:
        """Names of the edges: the outer loop's first, then each hole's."""
        count = sum(len(loop) for loop in (self.outer, *self.holes))
        return tuple(f"edge_{i}" for i in range(1, count + 1))


def outline_of_segments(segments: Sequence[Segment]) -> Outline:
    """Return the outline that loose segments draw, in any order and direction.

    Raises
    ------
    InputError
        If loops are open, branch, cross or touch, or make several bodies.
    """
    return _outline(chained(segments))


def outline_of_points(outer: Sequence[Point2], holes: Sequence[Sequence[Point2]]) -> Outline:
    """Return the outline of polygons; edge i runs from point i to the next.

    Raises
    ------
    InputError
        With key ``outline`` or ``holes.…``, if a polygon has under three
        points, repeats a point, crosses or touches itself or another, or a
        hole does not lie inside.
    """
    loops = [_polygon(outer, "outline")]
    loops += [_polygon(hole, f"holes.{i}") for i, hole in enumerate(holes, 1)]
    return _outline(loops, given=True)


def _spans(segment: Segment) -> list[Segment]:
    return [*bezier_pieces(segment)] if isinstance(segment, BSpline) else [segment]


def _polygon(points: Sequence[Point2], key: str) -> Loop:
    if len(points) > 1 and points[0] == points[-1]:
        points = points[:-1]
    if len(points) < 3:
        raise InputError("needs at least 3 points", key=key, value=f"{len(points)} points")
    following = [*points[1:], points[0]]
    for i, (a, b) in enumerate(zip(points, following, strict=True), 1):
        if a == b:
            raise InputError("repeats the point before it", key=f"{key}.{i + 1}", value=list(b))
    return tuple(Line(start=a, end=b) for a, b in zip(points, following, strict=True))


def _outline(loops: list[Loop], *, given: bool = False) -> Outline:
    """Return the outline of closed loops; `given`: the first is the outer one."""
    lines = [np.concatenate([sampled(s)[:-1] for s in loop]) for loop in loops]
    refuse_crossing(lines)
    areas = np.array([abs(signed_area(loop)) for loop in loops])
    outer = 0 if given else int(np.argmax(areas))
    holes = [i for i in range(len(loops)) if i != outer]
    for i in holes:
        x, y = lines[i][0]
        key = f"holes.{i}" if given else None
        if not _inside(lines[i][0], lines[outer]):
            raise InputError(
                f"the loop at ({x:.6g}, {y:.6g}) mm lies outside the outline; "
                "a part is one outline with holes",
                key=key,
            )
        for j in holes:
            if j != i and _inside(lines[i][0], lines[j]):
                raise InputError(f"the loop at ({x:.6g}, {y:.6g}) mm lies inside a hole", key=key)
    area = float(areas[outer] - areas[holes].sum())
    edge = sum(
        float(np.linalg.norm(line - np.roll(line, 1, axis=0), axis=1).sum()) for line in lines
    )
    return Outline(
        outer=loops[outer],
        holes=tuple(loops[i] for i in holes),
        area=area,
        thin=min([2 * area / edge, *_walls(lines)]),
    )


def _walls(lines: list[np.ndarray]) -> list[float]:
    """Return the distance between each two loops, by their sampled points."""
    trees = [KDTree(_dense(line)) for line in lines]
    return [
        float(trees[j].query(trees[i].data)[0].min())
        for i in range(len(trees))
        for j in range(i + 1, len(trees))
    ]


def _dense(line: np.ndarray) -> np.ndarray:
    """Return the points of a closed polyline and points between them."""
    following = np.roll(line, -1, axis=0)
    t = np.linspace(0, 1, 20, endpoint=False)[:, None, None]
    return (line + t * (following - line)).reshape(-1, 2)


def _inside(point: np.ndarray, line: np.ndarray) -> bool:
    """Tell whether a point lies inside a closed polyline (even-odd rule)."""
    a, b = line, np.roll(line, -1, axis=0)
    spans = (a[:, 1] > point[1]) != (b[:, 1] > point[1])
    a, b = a[spans], b[spans]
    x = a[:, 0] + (point[1] - a[:, 1]) * (b[:, 0] - a[:, 0]) / (b[:, 1] - a[:, 1])
    return bool(np.count_nonzero(x > point[0]) % 2)
