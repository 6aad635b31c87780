"""A flat part cut from sheet: a closed outline with holes, from a drawing or points."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from ..dimension import Dimension, Sort
from ..errors import InputError
from ..outline import Outline, outline_of_points, outline_of_segments
from ..shape import Dimensions, Family
from ..solid import BSpline, Extrusion, Solid
from ..source import source_file
from ..unit import UNITS

_DIMENSIONS = (
    Dimension(
        name="outline",
        text="a .dxf or .svg drawing, or the corner points of the outline",
        sort=Sort.FILE_OR_POINTS,
        fewest=3,
    ),
    Dimension(
        name="holes",
        text="corner points of each hole, beside an outline of points",
        sort=Sort.LOOPS,
        optional=True,
    ),
    Dimension(name="thickness", text="thickness along z, from z = 0 down and up by half"),
    Dimension(
        name="unit",
        text="unit of a drawing that does not say its own",
        sort=Sort.CHOICE,
        choices=tuple(UNITS),
        optional=True,
    ),
)


def _check(d: Dimensions) -> None:
    drawn = isinstance(d["outline"], str)
    if drawn and d["holes"] is not None:
        raise InputError(
            "goes with an outline of points only: holes of a drawing are drawn in it", key="holes"
        )
    if not drawn and d["unit"] is not None:
        raise InputError("goes with a drawing only: points are in mm", key="unit", value=d["unit"])
    if not drawn:
        outline_of_points(d["outline"], d["holes"] or ())


def _solid(d: Dimensions, folder: Path) -> Solid:
    outline, t = _outline(d, folder), d["thickness"]
    # The kernel's integrals along weighted splines are not sharp enough to be held to.
    plain = not any(
        isinstance(s, BSpline) and s.weights
        for loop in (outline.outer, *outline.holes)
        for s in loop
    )
    return Solid(
        body=Extrusion(
            profile=outline.profile(-t / 2), vector=(0.0, 0.0, t), start="bottom", end="top"
        ),
        faces=("top", "bottom", *outline.edges),
        areas={"top": outline.area, "bottom": outline.area} if plain else {},
        volume=outline.area * t if plain else None,
        thin=min(t, outline.thin),
    )


def _outline(d: Dimensions, folder: Path) -> Outline:
    name: Any = d["outline"]
    if not isinstance(name, str):
        return outline_of_points(name, d["holes"] or ())
    path = source_file(folder, name, key="shape.outline", suffixes=(".dxf", ".svg"))
    try:
        return outline_of_segments(_segments(path, d["unit"]))
    except InputError as error:
        raise error.within(key="shape.outline", file=str(path)) from None


def _segments(path: Path, unit: str | None) -> Any:
    # Drawing libraries are slow to load; only a drawing needs them.
    if path.suffix.lower() == ".svg":
        from ..svg import read_svg

        return read_svg(path, unit)
    from ..dxf import read_dxf

    return read_dxf(path, unit)


FAMILY = Family(
    name="outline",
    text="a flat part of any outline with holes, from a DXF or SVG drawing or from points",
    dimensions=_DIMENSIONS,
    faces=("top", "bottom", "edge_1 ... (outer loop anticlockwise, then the holes)"),
    check=_check,
    solid=_solid,
    anatomy=None,
    example={
        "outline": [[0.0, -10.0], [70.0, -6.0], [90.0, 0.0], [70.0, 6.0], [0.0, 10.0]],
        "holes": [[[10.0, -3.0], [16.0, -3.0], [16.0, 3.0], [10.0, 3.0]]],
        "thickness": 2.0,
    },
)
