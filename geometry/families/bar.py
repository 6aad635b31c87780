"""A straight bar of rectangular or round section, uniform or tapered."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np

from ..anatomy import Anatomy, Kind
from ..dimension import Dimension, Sort
from ..errors import InputError
from ..section import of_rectangle, of_tube
from ..shape import Dimensions, Family
from ..solid import Circle, Extrusion, Loft, Loop, Solid
from .plane import block, flat, polygon, section_profile

STATIONS = 513
"""Stations along a taper: linear interpolation of I and J is good to 1e-4 down to a quarter
of the thickness."""

_DIMENSIONS = (
    Dimension(name="length", text="length along x"),
    Dimension(name="width", text="width across, along y, at the root", optional=True),
    Dimension(name="thickness", text="thickness along z, at the root", optional=True),
    Dimension(name="width_tip", text="width at the tip; absent: as at the root", optional=True),
    Dimension(
        name="thickness_tip", text="thickness at the tip; absent: as at the root", optional=True
    ),
    Dimension(
        name="flush",
        text="bottom keeps the lower face flat where the thickness tapers",
        sort=Sort.CHOICE,
        choices=("centred", "bottom"),
        default="centred",
    ),
    Dimension(
        name="diameter",
        text="diameter of a round bar at the root, in place of width and thickness",
        optional=True,
    ),
    Dimension(
        name="diameter_tip",
        text="diameter of a round bar at the tip; absent: as at the root",
        optional=True,
    ),
)


def _check(d: Dimensions) -> None:
    if d["diameter"] is not None:
        for name in ("width", "thickness", "width_tip", "thickness_tip"):
            if d[name] is not None:
                raise InputError(
                    "does not go with diameter",
                    key=name,
                    value=d[name],
                    allowed="either width and thickness, or diameter",
                )
        if d["flush"] != "centred":
            raise InputError(
                "is for flat bars", key="flush", value=d["flush"], allowed="centred for round bars"
            )
        return
    if d["diameter_tip"] is not None:
        raise InputError(
            "needs diameter beside it",
            key="diameter_tip",
            value=d["diameter_tip"],
            allowed="with diameter only",
        )
    for name in ("width", "thickness"):
        if d[name] is None:
            raise InputError(
                "is missing", key=name, allowed="over 0 mm; or give diameter for a round bar"
            )


def _sizes(d: Dimensions, root: str, tip: str) -> tuple[float, float]:
    return d[root], d[root] if d[tip] is None else d[tip]


def _round(d: Dimensions) -> Solid:
    length = d["length"]
    a, b = (s / 2 for s in _sizes(d, "diameter", "diameter_tip"))

    def loop(radius: float) -> Loop:
        return (Circle(centre=(0.0, 0.0), radius=radius, face="side"),)

    root = section_profile(0.0, loop(a))
    if a == b:
        body = Extrusion(profile=root, vector=(length, 0.0, 0.0), start="root", end="tip")
    else:
        body = Loft(first=root, last=section_profile(length, loop(b)), start="root", end="tip")
    return Solid(
        body=body,
        faces=("root", "tip", "side"),
        areas={
            "root": math.pi * a**2,
            "tip": math.pi * b**2,
            "side": math.pi * (a + b) * math.hypot(length, b - a),
        },
        volume=math.pi * length * (a**2 + a * b + b**2) / 3,
        thin=2 * min(a, b),
    )


def _solid(d: Dimensions, folder: Path) -> Solid:
    if d["diameter"] is not None:
        return _round(d)
    length = d["length"]
    w0, w1 = _sizes(d, "width", "width_tip")
    t0, t1 = _sizes(d, "thickness", "thickness_tip")
    low0 = -t0 / 2
    low1 = low0 if d["flush"] == "bottom" else -t1 / 2
    if t0 == t1 and w0 == w1:
        body = block(
            (0.0, -w0 / 2, low0),
            (length, w0 / 2, -low0),
            ("root", "tip", "right", "left", "bottom", "top"),
        )
    elif t0 == t1:
        outline = ((0.0, -w0 / 2), (length, -w1 / 2), (length, w1 / 2), (0.0, w0 / 2))
        body = flat(polygon(outline, ("right", "tip", "left", "root")), low0, -low0)
    else:

        def rectangle(w: float, low: float, t: float) -> Loop:
            corners = ((-w / 2, low), (w / 2, low), (w / 2, low + t), (-w / 2, low + t))
            return polygon(corners, ("bottom", "left", "top", "right"))

        body = Loft(
            first=section_profile(0.0, rectangle(w0, low0, t0)),
            last=section_profile(length, rectangle(w1, low1, t1)),
            start="root",
            end="tip",
        )
    side = math.hypot(length, (w1 - w0) / 2) * (t0 + t1) / 2
    mean = (w0 + w1) / 2
    return Solid(
        body=body,
        faces=("root", "tip", "top", "bottom", "left", "right"),
        areas={
            "root": w0 * t0,
            "tip": w1 * t1,
            "top": math.hypot(length, low1 + t1 - low0 - t0) * mean,
            "bottom": math.hypot(length, low1 - low0) * mean,
            "left": side,
            "right": side,
        },
        volume=length * (2 * w0 * t0 + w0 * t1 + w1 * t0 + 2 * w1 * t1) / 6,
        thin=min(w0, w1, t0, t1),
    )


def _anatomy(d: Dimensions) -> Anatomy:
    length = d["length"]
    if d["diameter"] is not None:
        d0, d1 = _sizes(d, "diameter", "diameter_tip")
        s = np.linspace(0.0, 1.0, 2 if d0 == d1 else STATIONS)
        sections = of_tube(s * length, d0 + s * (d1 - d0))
        square, is_round = False, True
    else:
        w0, w1 = _sizes(d, "width", "width_tip")
        t0, t1 = _sizes(d, "thickness", "thickness_tip")
        s = np.linspace(0.0, 1.0, 2 if (w0, t0) == (w1, t1) else STATIONS)
        t = t0 + s * (t1 - t0)
        lifted = d["flush"] == "bottom" and t0 != t1
        offset = (t - t0) / 2 if lifted else None
        sections = of_rectangle(s * length, w0 + s * (w1 - w0), t, offset)
        square, is_round = (w0, w1) == (t0, t1) and not lifted, False
    return Anatomy(
        kind=Kind.BAR,
        length=length,
        ends=("root", "tip"),
        sections=sections,
        square=square,
        round=is_round,
    )


FAMILY = Family(
    name="bar",
    text="a straight bar, flat or round, uniform or tapered from root to tip",
    dimensions=_DIMENSIONS,
    faces=("root", "tip", "top", "bottom", "left", "right", "side (round bars)"),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={"length": 60.0, "width": 8.0, "thickness": 1.2},
)
