"""Two prongs joined by a yoke on a stem."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np

from ..anatomy import Anatomy, Frame, Kind, Region, Role
from ..dimension import Dimension
from ..errors import InputError
from ..shape import Dimensions, Family
from ..solid import Arc, Circle, Extrusion, Fuse, Line, Loop, Point2, Segment, Solid
from .measure import measure
from .plane import section_profile, upright

_DIMENSIONS = (
    Dimension(
        name="prong_length",
        text="from x = 0, where the round bottom of the gap begins, to the tips",
    ),
    Dimension(name="prong_thickness", text="thickness of each prong across the gap, along z"),
    Dimension(name="prong_width", text="width of the prongs and the yoke, along y"),
    Dimension(
        name="gap", text="free space between the prongs, along z; its bottom is a half circle"
    ),
    Dimension(
        name="base_radius",
        text="from x = 0 back to the end of the yoke, whose corners are rounded with this radius "
        "as far as its height allows; absent: half the gap and one and a half prong_thickness",
        optional=True,
    ),
    Dimension(name="stem_length", text="from the back of the yoke to stem_end", default=30.0),
    Dimension(
        name="stem_diameter",
        text="diameter of the stem; absent: three quarters of prong_width",
        optional=True,
    ),
)


def _base_radius(d: Dimensions) -> float:
    given = d["base_radius"]
    return d["gap"] / 2 + 1.5 * d["prong_thickness"] if given is None else given


def _stem_radius(d: Dimensions) -> float:
    return 0.375 * d["prong_width"] if d["stem_diameter"] is None else d["stem_diameter"] / 2


def _half_height(d: Dimensions) -> float:
    return d["gap"] / 2 + d["prong_thickness"]


def _corner(d: Dimensions) -> tuple[float, Point2]:
    """Return the radius of the yoke's upper corner and its centre (x, z)."""
    base, height = _base_radius(d), _half_height(d)
    radius = min(base, height)
    return radius, (radius - base, height - radius)


def _depth(d: Dimensions, z: np.ndarray) -> np.ndarray:
    """Return how far the yoke reaches behind x = 0 at height z >= 0."""
    radius, (x, middle) = _corner(d)
    return np.sqrt(np.maximum(radius**2 - np.maximum(z - middle, 0.0) ** 2, 0.0)) - x


def _check(d: Dimensions) -> None:
    half = d["gap"] / 2
    if _base_radius(d) <= half:
        raise InputError(
            "leaves no yoke behind the gap",
            key="base_radius",
            value=d["base_radius"],
            allowed=f"over half the gap, {half:g} mm",
        )
    radius = _stem_radius(d)
    if 2 * radius >= d["prong_width"]:
        raise InputError(
            "must be thinner than the yoke is wide",
            key="stem_diameter",
            value=d["stem_diameter"],
            allowed=f"under the prong_width of {d['prong_width']:g} mm",
        )
    # The stem meets the rounded back; where that is still behind the gap it has a seat.
    if radius >= _half_height(d) or float(_depth(d, np.array(radius))) <= half:
        heights = np.linspace(0.0, _half_height(d), 2001)
        seat = 2 * float(heights[_depth(d, heights) > half].max())
        raise InputError(
            "is too thick for the rounded back of the yoke",
            key="stem_diameter",
            value=2 * radius,
            allowed=f"under {seat:.4g} mm, or a larger base_radius",
        )


def _outline(d: Dimensions) -> Loop:
    """Return the U in the x-z plane, anticlockwise from its lower back corner."""
    tip, half, height = d["prong_length"], d["gap"] / 2, _half_height(d)
    radius, (x, middle) = _corner(d)
    base = _base_radius(d)
    loop: list[Segment] = []
    for start, end, face in (
        ((x, -height), (tip, -height), "outer_1"),
        ((tip, -height), (tip, -half), "tip_1"),
        ((tip, -half), (0.0, -half), "gap"),
        ((0.0, half), (tip, half), "gap"),
        ((tip, half), (tip, height), "tip_2"),
        ((tip, height), (x, height), "outer_2"),
    ):
        if start == (0.0, half):
            loop.append(Arc(start=(0.0, -half), through=(-half, 0.0), end=start, face="gap"))
        loop.append(Line(start=start, end=end, face=face))
    if middle == 0.0:
        back = Arc(start=(x, height), through=(-base, 0.0), end=(x, -height), face="yoke")
        return (*loop, back)
    diagonal = radius * math.sqrt(0.5)
    for sign in (1, -1):
        outer, inner = (x, sign * height), (-base, sign * middle)
        through = (x - diagonal, sign * (middle + diagonal))
        if sign == 1:
            loop.append(Arc(start=outer, through=through, end=inner, face="yoke"))
            loop.append(Line(start=inner, end=(-base, -middle), face="yoke"))
        else:
            loop.append(Arc(start=inner, through=through, end=outer, face="yoke"))
    return tuple(loop)


def _solid(d: Dimensions, folder: Path) -> Solid:
    width, radius, base = d["prong_width"], _stem_radius(d), _base_radius(d)
    outline = _outline(d)
    area = measure(outline).area
    end = -base - d["stem_length"]
    # The stem starts inside the yoke, between the bottom of the gap and its back.
    start = -(d["gap"] / 2 + float(_depth(d, np.array(radius)))) / 2
    stem = Extrusion(
        profile=section_profile(end, (Circle(centre=(0.0, 0.0), radius=radius, face="stem"),)),
        vector=(start - end, 0.0, 0.0),
        start="stem_end",
    )
    tip = width * d["prong_thickness"]
    return Solid(
        body=Fuse(parts=(upright(outline, -width / 2, width / 2), stem)),
        faces=(
            "stem_end",
            "tip_1",
            "tip_2",
            "outer_1",
            "outer_2",
            "gap",
            "yoke",
            "stem",
            "left",
            "right",
        ),
        areas={
            "stem_end": math.pi * radius**2,
            "tip_1": tip,
            "tip_2": tip,
            "gap": width * (2 * d["prong_length"] + math.pi * d["gap"] / 2),
            "left": area,
            "right": area,
        },
        thin=min(d["prong_thickness"], width, base - d["gap"] / 2, 2 * radius),
    )


def _anatomy(d: Dimensions) -> Anatomy:
    behind = _base_radius(d) + d["stem_length"]
    inf = np.inf
    return Anatomy(
        kind=Kind.BAR,
        frame=Frame(origin=(-behind, 0.0, 0.0)),
        length=behind + d["prong_length"],
        regions=(
            Region(role=Role.PRONG, number=1, low=(behind, -inf, -inf), high=(inf, inf, 0.0)),
            Region(role=Role.PRONG, number=2, low=(behind, -inf, 0.0), high=(inf, inf, inf)),
        ),
    )


FAMILY = Family(
    name="tuning_fork",
    text="a U of two prongs (numbered by increasing z) on a stem along -x",
    dimensions=_DIMENSIONS,
    faces=(
        "stem_end",
        "tip_1",
        "tip_2",
        "outer_1",
        "outer_2",
        "gap",
        "yoke",
        "stem",
        "left",
        "right",
    ),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={
        "prong_length": 80.0,
        "prong_thickness": 4.0,
        "prong_width": 6.0,
        "gap": 8.0,
        "stem_length": 30.0,
    },
)
