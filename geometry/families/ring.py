"""A circular ring of rectangular or round section."""

from __future__ import annotations

import math
from pathlib import Path

from ..anatomy import Anatomy, Kind, RingSize
from ..dimension import Dimension
from ..errors import InputError
from ..section import torsion_of_rectangle
from ..shape import Dimensions, Family
from ..solid import Circle, Loop, Profile, Revolution, Solid
from .plane import polygon

_DIMENSIONS = (
    Dimension(name="mean_diameter", text="diameter at the middle of the section"),
    Dimension(name="width", text="radial size of a rectangular section", optional=True),
    Dimension(name="thickness", text="size along z of a rectangular section", optional=True),
    Dimension(
        name="section_diameter",
        text="diameter of a round section, in place of width and thickness",
        optional=True,
    ),
)


def _check(d: Dimensions) -> None:
    for name in ("width", "thickness"):
        if d["section_diameter"] is not None and d[name] is not None:
            raise InputError(
                "does not go with section_diameter",
                key=name,
                value=d[name],
                allowed="either width and thickness, or section_diameter",
            )
        if d["section_diameter"] is None and d[name] is None:
            raise InputError(
                "is missing",
                key=name,
                allowed="over 0 mm; or give section_diameter for a round section",
            )
    name = "width" if d["section_diameter"] is None else "section_diameter"
    if d[name] >= d["mean_diameter"]:
        raise InputError(
            "leaves no hole in the ring",
            key=name,
            value=d[name],
            allowed=f"under the mean_diameter of {d['mean_diameter']:g} mm",
        )


def _turned(outer: Loop) -> Revolution:
    return Revolution(profile=Profile(outer=outer, v=(0.0, 0.0, 1.0)))


def _solid(d: Dimensions, folder: Path) -> Solid:
    mean = d["mean_diameter"] / 2
    if d["section_diameter"] is not None:
        radius = d["section_diameter"] / 2
        return Solid(
            body=_turned((Circle(centre=(mean, 0.0), radius=radius, face="surface"),)),
            faces=("surface",),
            areas={"surface": 4 * math.pi**2 * mean * radius},
            volume=2 * math.pi**2 * mean * radius**2,
            thin=2 * radius,
        )
    width, t = d["width"], d["thickness"]
    a, b = mean - width / 2, mean + width / 2
    corners = ((a, -t / 2), (b, -t / 2), (b, t / 2), (a, t / 2))
    level = 2 * math.pi * mean * width
    return Solid(
        body=_turned(polygon(corners, ("bottom", "outer", "top", "inner"))),
        faces=("top", "bottom", "inner", "outer"),
        areas={
            "top": level,
            "bottom": level,
            "inner": 2 * math.pi * a * t,
            "outer": 2 * math.pi * b * t,
        },
        volume=level * t,
        thin=min(width, t),
    )


def _anatomy(d: Dimensions) -> Anatomy:
    if d["section_diameter"] is not None:
        radius = d["section_diameter"] / 2
        area, second = math.pi * radius**2, math.pi * radius**4 / 4
        axial, radial, torsion = second, second, 2 * second
    else:
        width, t = d["width"], d["thickness"]
        area, axial, radial = width * t, width**3 * t / 12, width * t**3 / 12
        torsion = float(torsion_of_rectangle(width, t))
    return Anatomy(
        kind=Kind.RING,
        round=True,
        ring=RingSize(
            radius=d["mean_diameter"] / 2,
            area=area,
            i_axial=axial,
            i_radial=radial,
            torsion=torsion,
        ),
    )


FAMILY = Family(
    name="ring",
    text="a circular ring of rectangular or round section",
    dimensions=_DIMENSIONS,
    faces=("top, bottom, inner, outer (rectangular section)", "surface (round section)"),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={"mean_diameter": 90.0, "width": 5.0, "thickness": 4.0},
)
