"""Loose segments joined end to end into closed loops."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
from scipy.spatial import KDTree

from .curve import area_under, as_bspline, ends, reversed_, sampled
from .errors import InputError
from .solid import BSpline, Circle, EllipseArc, Loop, Point2, Segment, Spline

#: Ends nearer than this are one point: mm, and share of the drawing's extent.
_JOIN_MM, _JOIN_SHARE = 1e-3, 1e-4


def chained(segments: Sequence[Segment]) -> list[Loop]:
    """Return closed loops of segments joined end to end, each anticlockwise.

    A segment drawn twice counts once; one shorter than the joining distance
    is left out.

    Raises
    ------
    InputError
        With the place of a gap or a branch.
    """
    if not segments:
        raise InputError("holds no outline")
    points = np.concatenate([sampled(s) for s in segments])
    extent = float(np.ptp(points, axis=0).max())
    join = min(_JOIN_MM, _JOIN_SHARE * extent)
    segments = _once([s for s in segments if _length(s) > join], join)
    loops: list[Loop] = [(s,) for s in segments if _closed(s, join)]
    loops += _chains([s for s in segments if not _closed(s, join)], join)
    return [loop if signed_area(loop) > 0 else _turned(loop) for loop in loops]


def signed_area(loop: Loop) -> float:
    """Return the area inside a loop, negative if it runs clockwise."""
    return sum(area_under(s) for s in loop)


def _turned(loop: Loop) -> Loop:
    """Return the loop run the other way round, from the same starting segment."""
    first, *others = loop
    return tuple(reversed_(s) for s in (first, *reversed(others)))


def _length(segment: Segment) -> float:
    return float(np.linalg.norm(np.diff(sampled(segment), axis=0), axis=1).sum())


def _closed(segment: Segment, join: float) -> bool:
    return isinstance(segment, Circle) or math.dist(*ends(segment)) <= join


def _once(segments: list[Segment], join: float) -> list[Segment]:
    """Return the segments without those drawn over an equal one."""
    kept: list[Segment] = []
    seen: dict[tuple[int, ...], list[np.ndarray]] = {}
    for segment in segments:
        line = sampled(segment)
        key = (len(line), type(segment).__name__ == "Line")
        same = seen.setdefault(key, [])
        if any(
            np.abs(line - old).max() <= join or np.abs(line[::-1] - old).max() <= join
            for old in same
        ):
            continue
        same.append(line)
        kept.append(segment)
    return kept


def _chains(segments: list[Segment], join: float) -> list[Loop]:
    if not segments:
        return []
    points = np.array([p for s in segments for p in ends(s)])
    node = _nodes(points, join)
    meeting: dict[int, list[int]] = {}
    for end, n in enumerate(node):
        meeting.setdefault(int(n), []).append(end)
    _refuse_open(points, meeting)
    loops: list[Loop] = []
    left = dict.fromkeys(range(len(segments)))
    while left:
        start = next(iter(left))
        loop: list[Segment] = []
        end = 2 * start  # the end by which the walk enters a segment
        while end // 2 in left:
            del left[end // 2]
            segment = segments[end // 2]
            loop.append(segment if end % 2 == 0 else reversed_(segment))
            out = end ^ 1
            end = next(e for e in meeting[int(node[out])] if e != out)
        loops.append(_joined(loop))
    return loops


def _nodes(points: np.ndarray, join: float) -> np.ndarray:
    """Return (n,) the number of the cluster each point belongs to."""
    node = np.arange(len(points))
    for a, b in sorted(KDTree(points).query_pairs(join)):
        low, high = sorted((node[a], node[b]))
        node[node == high] = low
    return node


def _refuse_open(points: np.ndarray, meeting: dict[int, list[int]]) -> None:
    loose = [ends_[0] for ends_ in meeting.values() if len(ends_) == 1]
    if loose:
        x, y = points[loose[0]]
        others = [i for i in loose if i != loose[0]]
        gap = min((math.dist(points[loose[0]], points[i]) for i in others), default=0.0)
        raise InputError(
            f"the outline is open at ({x:.6g}, {y:.6g}) mm"
            + (f", {gap:.3g} mm from the next loose end" if others else "")
            + "; close it, or hide the layer of lines that are no edge"
        )
    for ends_ in meeting.values():
        if len(ends_) > 2:
            x, y = points[ends_[0]]
            raise InputError(
                f"the outline branches at ({x:.6g}, {y:.6g}) mm, where {len(ends_)} lines meet"
            )


def _joined(loop: list[Segment]) -> Loop:
    """Return the loop with every segment starting exactly where the last one ends."""
    for i, segment in enumerate(loop):
        following = (i + 1) % len(loop)
        here, there = ends(segment)[1], ends(loop[following])[0]
        if here != there:
            loop[following] = _with_ends(loop[following], start=here)
    return tuple(loop)


def _with_ends(segment: Segment, start: Point2) -> Segment:
    match segment:
        case EllipseArc():
            return _with_ends(as_bspline(segment), start)
        case BSpline():
            return replace(segment, poles=(start, *segment.poles[1:]))
        case Spline():
            return replace(segment, points=(start, *segment.points[1:]))
        case Circle():
            return segment
        case _:
            return replace(segment, start=start)
