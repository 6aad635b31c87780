"""A straight round tube, with or without cross holes."""

from __future__ import annotations

import math
from itertools import combinations
from pathlib import Path

from ..anatomy import Anatomy, Frame, Kind
from ..dimension import Dimension, Sort
from ..errors import InputError
from ..section import of_tube
from ..shape import Dimensions, Family
from ..solid import Body, Circle, Cut, Extrusion, Solid
from .plane import across, section_profile

_DIMENSIONS = (
    Dimension(name="length", text="length along x, from end_a to end_b"),
    Dimension(name="outer_diameter", text="outer diameter"),
    Dimension(name="wall", text="thickness of the wall"),
    Dimension(
        name="holes",
        text="cross holes, drilled along y through both walls",
        sort=Sort.ROWS,
        optional=True,
        columns=(
            Dimension(name="distance", text="from end_a to the middle of the hole"),
            Dimension(name="diameter", text="diameter of the hole"),
        ),
    ),
)


def _inner(d: Dimensions) -> float:
    return d["outer_diameter"] - 2 * d["wall"]


def _check(d: Dimensions) -> None:
    if _inner(d) <= 0:
        raise InputError(
            "leaves no bore",
            key="wall",
            value=d["wall"],
            allowed=f"under half the outer_diameter, {d['outer_diameter'] / 2:g} mm",
        )
    holes = d["holes"] or ()
    for i, hole in enumerate(holes, 1):
        if hole["diameter"] >= _inner(d):
            raise InputError(
                "is as wide as the bore",
                key=f"holes.{i}.diameter",
                value=hole["diameter"],
                allowed=f"under the inner diameter of {_inner(d):g} mm",
            )
        low, high = hole["diameter"] / 2, d["length"] - hole["diameter"] / 2
        if not low < hole["distance"] < high:
            raise InputError(
                "puts the hole over an end",
                key=f"holes.{i}.distance",
                value=hole["distance"],
                allowed=f"over {low:g}, under {high:g} mm",
            )
    for (i, a), (j, b) in combinations(enumerate(holes, 1), 2):
        apart = (a["diameter"] + b["diameter"]) / 2
        if abs(a["distance"] - b["distance"]) <= apart:
            raise InputError(
                f"meets hole {i}",
                key=f"holes.{j}.distance",
                value=b["distance"],
                allowed=f"over {apart:g} mm from {a['distance']:g} mm",
            )


def _solid(d: Dimensions, folder: Path) -> Solid:
    length, outer, inner = d["length"], d["outer_diameter"] / 2, _inner(d) / 2
    body: Body = Extrusion(
        profile=section_profile(
            0.0,
            (Circle(centre=(0.0, 0.0), radius=outer, face="outer"),),
            ((Circle(centre=(0.0, 0.0), radius=inner, face="inner"),),),
        ),
        vector=(length, 0.0, 0.0),
        start="end_a",
        end="end_b",
    )
    end = math.pi * (outer**2 - inner**2)
    areas = {"end_a": end, "end_b": end}
    thin = d["wall"]
    holes = d["holes"] or ()
    if holes:
        drills = (
            across((h["distance"], 0.0, 0.0), h["diameter"], 1.5 * outer, f"hole_{i}")
            for i, h in enumerate(holes, 1)
        )
        body = Cut(base=body, tools=tuple(drills))
        edges = sorted(
            (h["distance"] - h["diameter"] / 2, h["distance"] + h["diameter"] / 2) for h in holes
        )
        starts, stops = [0.0, *(b for _, b in edges)], [*(a for a, _ in edges), length]
        thin = min(thin, *(b - a for a, b in zip(starts, stops, strict=True)))
    else:
        areas["outer"] = 2 * math.pi * outer * length
        areas["inner"] = 2 * math.pi * inner * length
    return Solid(
        body=body,
        faces=("end_a", "end_b", "inner", "outer", *(f"hole_{i + 1}" for i in range(len(holes)))),
        areas=areas,
        volume=None if holes else end * length,
        thin=thin,
    )


def _anatomy(d: Dimensions) -> Anatomy:
    whole, length = not d["holes"], d["length"]
    return Anatomy(
        kind=Kind.REVOLVED,
        # The axis of revolution comes last: angles count from y towards z.
        frame=Frame(axes=((0.0, 1.0, 0.0), (0.0, 0.0, 1.0), (1.0, 0.0, 0.0))),
        length=length,
        ends=("end_a", "end_b"),
        sections=of_tube([0.0, length], d["outer_diameter"], _inner(d)) if whole else None,
        round=whole,
    )


FAMILY = Family(
    name="tube",
    text="a straight round tube, with or without cross holes for a cord",
    dimensions=_DIMENSIONS,
    faces=("end_a", "end_b", "inner", "outer", "hole_1 ..."),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={"length": 300.0, "outer_diameter": 25.0, "wall": 2.0},
)
