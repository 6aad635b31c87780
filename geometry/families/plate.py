"""A flat plate, rectangular or round, with or without holes."""

from __future__ import annotations

import math
from itertools import combinations
from pathlib import Path

from ..anatomy import Anatomy, DiscSize, Kind, PlateSize
from ..dimension import Dimension, Sort
from ..errors import InputError
from ..shape import Dimensions, Family
from ..solid import Circle, Loop, Solid
from .plane import flat, polygon

_ANY = -math.inf

_DIMENSIONS = (
    Dimension(name="length", text="length along x of a rectangular plate", optional=True),
    Dimension(name="width", text="width along y of a rectangular plate", optional=True),
    Dimension(
        name="diameter",
        text="diameter of a round plate, in place of length and width",
        optional=True,
    ),
    Dimension(name="thickness", text="thickness along z"),
    Dimension(
        name="holes",
        text="round holes through the plate, placed from its centre",
        sort=Sort.ROWS,
        optional=True,
        columns=(
            Dimension(name="x", text="middle of the hole along x", low=_ANY),
            Dimension(name="y", text="middle of the hole along y", low=_ANY),
            Dimension(name="diameter", text="diameter of the hole"),
        ),
    ),
)


def _holes(d: Dimensions) -> list[tuple[float, float, float]]:
    """Return x, y and radius of each hole."""
    return [(h["x"], h["y"], h["diameter"] / 2) for h in d["holes"] or ()]


def _margin(d: Dimensions, x: float, y: float) -> float:
    """Return the distance from a point inside to the plate's edge."""
    if d["diameter"] is not None:
        return d["diameter"] / 2 - math.hypot(x, y)
    return min(d["length"] / 2 - abs(x), d["width"] / 2 - abs(y))


def _check(d: Dimensions) -> None:
    for name in ("length", "width"):
        if d["diameter"] is not None and d[name] is not None:
            raise InputError(
                "does not go with diameter",
                key=name,
                value=d[name],
                allowed="either length and width, or diameter",
            )
        if d["diameter"] is None and d[name] is None:
            raise InputError(
                "is missing", key=name, allowed="over 0 mm; or give diameter for a round plate"
            )
    holes = _holes(d)
    for i, (x, y, radius) in enumerate(holes, 1):
        if _margin(d, x, y) <= radius:
            inside = 2 * _margin(d, x, y)
            raise InputError(
                "is not wholly inside the plate",
                key=f"holes.{i}",
                value=d["holes"][i - 1],
                allowed=f"a diameter under {inside:g} mm there"
                if inside > 0
                else "a middle inside the outline",
            )
    for (i, a), (j, b) in combinations(enumerate(holes, 1), 2):
        if math.hypot(a[0] - b[0], a[1] - b[1]) <= a[2] + b[2]:
            raise InputError(
                f"meets hole {i}",
                key=f"holes.{j}",
                value=d["holes"][j - 1],
                allowed=f"middles over {a[2] + b[2]:g} mm apart",
            )


def _solid(d: Dimensions, folder: Path) -> Solid:
    t = d["thickness"]
    loops: list[Loop] = []
    areas: dict[str, float] = {}
    if d["diameter"] is not None:
        radius = d["diameter"] / 2
        outline: Loop = (Circle(centre=(0.0, 0.0), radius=radius, face="edge"),)
        faces = ("top", "bottom", "edge")
        areas["edge"] = 2 * math.pi * radius * t
        area, smallest = math.pi * radius**2, 2 * radius
    else:
        x, y = d["length"] / 2, d["width"] / 2
        outline = polygon(
            ((-x, -y), (x, -y), (x, y), (-x, y)), ("y_min", "x_max", "y_max", "x_min")
        )
        faces = ("x_min", "x_max", "y_min", "y_max", "top", "bottom")
        areas["x_min"] = areas["x_max"] = 2 * y * t
        areas["y_min"] = areas["y_max"] = 2 * x * t
        area, smallest = 4 * x * y, 2 * min(x, y)
    thin = min(t, smallest)
    holes = _holes(d)
    for i, (x, y, radius) in enumerate(holes, 1):
        loops.append((Circle(centre=(x, y), radius=radius, face=f"hole_{i}"),))
        areas[f"hole_{i}"] = 2 * math.pi * radius * t
        area -= math.pi * radius**2
        thin = min(thin, _margin(d, x, y) - radius)
    for a, b in combinations(holes, 2):
        thin = min(thin, math.hypot(a[0] - b[0], a[1] - b[1]) - a[2] - b[2])
    areas["top"] = areas["bottom"] = area
    return Solid(
        body=flat(outline, -t / 2, t / 2, holes=tuple(loops)),
        faces=(*faces, *(f"hole_{i}" for i in range(1, len(holes) + 1))),
        areas=areas,
        volume=area * t,
        thin=thin,
    )


def _anatomy(d: Dimensions) -> Anatomy:
    whole, t = not d["holes"], d["thickness"]
    if d["diameter"] is not None:
        size = DiscSize(radius=d["diameter"] / 2, thickness=t) if whole else None
        return Anatomy(kind=Kind.DISC, round=whole, disc=size)
    length, width = d["length"], d["width"]
    plate = PlateSize(length=length, width=width, thickness=t) if whole else None
    return Anatomy(kind=Kind.PLATE, length=length, ends=("x_min", "x_max"), plate=plate)


FAMILY = Family(
    name="plate",
    text="a flat plate, rectangular or round, with or without round holes",
    dimensions=_DIMENSIONS,
    faces=(
        "top",
        "bottom",
        "x_min, x_max, y_min, y_max (rectangular)",
        "edge (round)",
        "hole_1 ...",
    ),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={"diameter": 120.0, "thickness": 2.0},
)
