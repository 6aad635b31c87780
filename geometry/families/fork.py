"""A flat tine slotted lengthwise from the tip into prongs."""

from __future__ import annotations

import math
from itertools import pairwise
from pathlib import Path

import numpy as np

from ..anatomy import Anatomy, Kind, Region, Role
from ..dimension import Dimension, Sort
from ..errors import InputError
from ..shape import Dimensions, Family
from ..solid import Arc, Body, Cut, Line, Loop, Point2, Segment, Solid
from .measure import measure
from .plane import flat, polygon, upright

_DIMENSIONS = (
    Dimension(name="length", text="length along x, from the root to the tip"),
    Dimension(name="width", text="width over all prongs, along y, at the root"),
    Dimension(name="thickness", text="thickness along z, at the root"),
    Dimension(name="slot_length", text="from the tip to the closed end of the slots"),
    Dimension(name="slot_width", text="width of each slot, along y", default=2.0),
    Dimension(
        name="slot_end",
        text="closed end of the slots: a half circle, or square",
        sort=Sort.CHOICE,
        choices=("round", "square"),
        default="round",
    ),
    Dimension(
        name="prongs",
        text="number of prongs; the slots run along x and leave equal prongs at the tip",
        sort=Sort.COUNT,
        default=2,
        low=2,
        strict=False,
        high=100,
    ),
    Dimension(
        name="prong_lengths",
        text="from the closed end of the slots to each tip, by increasing y; "
        "absent: all as slot_length",
        sort=Sort.LENGTHS,
        optional=True,
        fewest=2,
    ),
    Dimension(name="width_tip", text="width at the tip; absent: as at the root", optional=True),
    Dimension(
        name="thickness_tip",
        text="thickness at the tip, tapered evenly from both faces; absent: as at the root",
        optional=True,
    ),
)


def _tip(d: Dimensions, name: str) -> float:
    value = d[f"{name}_tip"]
    return d[name] if value is None else value


def _width(d: Dimensions, x: float) -> float:
    return d["width"] + (_tip(d, "width") - d["width"]) * x / d["length"]


def _thickness(d: Dimensions, x: float) -> float:
    return d["thickness"] + (_tip(d, "thickness") - d["thickness"]) * x / d["length"]


def _slot_bands(d: Dimensions) -> list[tuple[float, float]]:
    """Return the lower and upper edge of each slot, along y, by increasing y."""
    n, slot = d["prongs"], d["slot_width"]
    tip = _tip(d, "width")
    prong = (tip - (n - 1) * slot) / n
    lows = [-tip / 2 + k * prong + (k - 1) * slot for k in range(1, n)]
    return [(low, low + slot) for low in lows]


def _lengths(d: Dimensions) -> tuple[float, ...]:
    return d["prong_lengths"] or (d["slot_length"],) * d["prongs"]


def _bounds(d: Dimensions, prong: int, x: float) -> tuple[float, float]:
    """Return the edges along y of a prong (from 0) at x."""
    bands = _slot_bands(d)
    low = -_width(d, x) / 2 if prong == 0 else bands[prong - 1][1]
    high = _width(d, x) / 2 if prong == d["prongs"] - 1 else bands[prong][0]
    return low, high


def _check(d: Dimensions) -> None:
    n, slot, length = d["prongs"], d["slot_width"], d["length"]
    if d["slot_length"] >= length:
        raise InputError(
            "must leave an uncut root",
            key="slot_length",
            value=d["slot_length"],
            allowed=f"under the length of {length:g} mm",
        )
    end = slot / 2 if d["slot_end"] == "round" else 0.0
    if d["slot_length"] <= end:
        raise InputError(
            "is too short for its round end",
            key="slot_length",
            value=d["slot_length"],
            allowed=f"over {end:g} mm",
        )
    widest = _tip(d, "width")
    if (n - 1) * slot >= widest:
        raise InputError(
            "leaves no width for the prongs",
            key="slot_width",
            value=slot,
            allowed=f"under {widest / (n - 1):g} mm",
        )
    # A flared tip: the outer prongs are narrowest where the slots end.
    low, high = _bounds(d, 0, length - d["slot_length"])
    if high <= low:
        raise InputError(
            "leaves no width for the outer prongs at the end of the slots",
            key="width_tip",
            value=widest,
            allowed=f"closer to the width of {d['width']:g} mm",
        )
    if d["prong_lengths"] is None:
        return
    if len(d["prong_lengths"]) != n:
        raise InputError(
            "needs one length per prong",
            key="prong_lengths",
            value=f"{len(d['prong_lengths'])} items",
            allowed=f"{n} items",
        )
    for i, value in enumerate(d["prong_lengths"], 1):
        if not end < value <= d["slot_length"]:
            raise InputError(
                "is out of range",
                key=f"prong_lengths.{i}",
                value=value,
                allowed=f"over {end:g}, up to the slot_length of {d['slot_length']:g} mm",
            )


def _outline(d: Dimensions) -> Loop:
    """Return the outline in the x-y plane, anticlockwise from the root's right corner."""
    n, slot = d["prongs"], d["slot_width"]
    closed = d["length"] - d["slot_length"]
    tips = [closed + length for length in _lengths(d)]
    path: list[Segment] = []
    at: Point2 = (0.0, -d["width"] / 2)

    def go(x: float, y: float, face: str) -> None:
        nonlocal at
        path.append(Line(start=at, end=(x, y), face=face))
        at = (x, y)

    for i, x in enumerate(tips):
        low, high = _bounds(d, i, x)
        go(x, low, "right" if i == 0 else "slot")
        go(x, high, f"tip_{i + 1}")
        if i == n - 1:
            break
        foot = closed + (slot / 2 if d["slot_end"] == "round" else 0.0)
        go(foot, high, "slot")
        if d["slot_end"] == "round":
            end = (foot, high + slot)
            path.append(Arc(start=at, through=(closed, high + slot / 2), end=end, face="slot"))
            at = end
        else:
            go(closed, high + slot, "slot")
    go(0.0, d["width"] / 2, "left")
    go(0.0, -d["width"] / 2, "root")
    return tuple(path)


def _tapered(d: Dimensions, outline: Loop) -> Body:
    """Return the outline cut to its thickness by two planes."""
    length = d["length"]
    past = 0.1 * length
    half = [_thickness(d, x) / 2 for x in (-past, length + past)]
    tall = 2 * max(*half, d["thickness"])
    reach = max(d["width"], _tip(d, "width"))
    tools = []
    for sign, face in ((1, "top"), (-1, "bottom")):
        corners = (
            (-past, sign * half[0]),
            (length + past, sign * half[1]),
            (length + past, sign * 2 * tall),
            (-past, sign * 2 * tall),
        )
        names = (face, None, None, None)
        tools.append(upright(polygon(corners, names), -reach, reach, right=None, left=None))
    return Cut(base=flat(outline, -tall, tall, bottom=None, top=None), tools=tuple(tools))


def _solid(d: Dimensions, folder: Path) -> Solid:
    n, t0, t1 = d["prongs"], d["thickness"], _tip(d, "thickness")
    outline = _outline(d)
    plane = measure(outline)
    closed = d["length"] - d["slot_length"]
    slope = (t1 - t0) / d["length"]
    slant = math.hypot(1.0, slope / 2)
    body = flat(outline, -t0 / 2, t0 / 2) if t0 == t1 else _tapered(d, outline)
    areas = {
        "root": d["width"] * t0,
        "top": plane.area * slant,
        "bottom": plane.area * slant,
    }
    widths = []
    for i, length in enumerate(_lengths(d)):
        x = closed + length
        spans = [high - low for low, high in (_bounds(d, i, x), _bounds(d, i, closed))]
        areas[f"tip_{i + 1}"] = spans[0] * _thickness(d, x)
        widths += spans
    return Solid(
        body=body,
        faces=(
            "root",
            *(f"tip_{i + 1}" for i in range(n)),
            "top",
            "bottom",
            "slot",
            "left",
            "right",
        ),
        areas=areas,
        volume=t0 * plane.area + slope * plane.moment_x,
        thin=min(t0, t1, *widths),
    )


def _anatomy(d: Dimensions) -> Anatomy:
    closed = d["length"] - d["slot_length"]
    middles = [(low + high) / 2 for low, high in _slot_bands(d)]
    cuts = [-np.inf, *middles, np.inf]
    regions = tuple(
        Region(role=Role.PRONG, number=i, low=(closed, a, -np.inf), high=(np.inf, b, np.inf))
        for i, (a, b) in enumerate(pairwise(cuts), 1)
    )
    return Anatomy(kind=Kind.BAR, length=max(closed + s for s in _lengths(d)), regions=regions)


FAMILY = Family(
    name="fork",
    text="a flat tine slotted lengthwise from the tip into prongs",
    dimensions=_DIMENSIONS,
    faces=("root", "tip_1 ...", "top", "bottom", "slot", "left", "right"),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={
        "length": 120.0,
        "width": 14.0,
        "thickness": 2.5,
        "slot_length": 70.0,
        "slot_width": 2.0,
    },
)
