"""Tines side by side on one base."""

from __future__ import annotations

from itertools import pairwise
from pathlib import Path

import numpy as np

from ..anatomy import Anatomy, Kind, Region, Role
from ..dimension import Dimension, Sort
from ..errors import InputError
from ..shape import Dimensions, Family
from ..solid import Fuse, Solid
from .plane import block

_DIMENSIONS = (
    Dimension(name="base_length", text="length of the base along x, from base_back to the tines"),
    Dimension(name="base_width", text="width of the base along y, over all tines"),
    Dimension(name="base_thickness", text="thickness of the base along z"),
    Dimension(
        name="tines",
        text="by increasing y; the row is centred on the base, each tine at half its thickness",
        sort=Sort.ROWS,
        columns=(
            Dimension(name="length", text="free length along x, from the base to the tip"),
            Dimension(name="width", text="width along y"),
            Dimension(name="thickness", text="thickness along z"),
            Dimension(
                name="gap",
                text="free space to the next tine; of no account on the last",
                default=1.0,
            ),
        ),
    ),
)


def _bounds(d: Dimensions) -> list[tuple[float, float]]:
    """Return the edges along y of each tine."""
    tines = d["tines"]
    y = -(sum(t["width"] for t in tines) + sum(t["gap"] for t in tines[:-1])) / 2
    bounds = []
    for tine in tines:
        bounds.append((y, y + tine["width"]))
        y += tine["width"] + tine["gap"]
    return bounds


def _check(d: Dimensions) -> None:
    for i, tine in enumerate(d["tines"], 1):
        if tine["thickness"] > d["base_thickness"]:
            raise InputError(
                "is thicker than the base",
                key=f"tines.{i}.thickness",
                value=tine["thickness"],
                allowed=f"up to the base_thickness of {d['base_thickness']:g} mm",
            )
    bounds = _bounds(d)
    row = bounds[-1][1] - bounds[0][0]
    # Rounding in a sum of many widths and gaps is no mistake of the user's.
    if row > d["base_width"] * (1 + 1e-9):
        raise InputError(
            "is narrower than the row of tines",
            key="base_width",
            value=d["base_width"],
            allowed=f"{row:g} mm or more",
        )


def _solid(d: Dimensions, folder: Path) -> Solid:
    depth, width, t = d["base_length"], d["base_width"], d["base_thickness"]
    base = block(
        (0.0, -width / 2, -t / 2),
        (depth, width / 2, t / 2),
        ("base_back", "base_front", "base_right", "base_left", "base_bottom", "base_top"),
    )
    parts = [base]
    faces = ["base_back", "base_top", "base_bottom", "base_left", "base_right"]
    areas = {
        "base_back": width * t,
        "base_top": depth * width,
        "base_bottom": depth * width,
        "base_left": depth * t,
        "base_right": depth * t,
    }
    volume, thin = depth * width * t, min(depth, t)
    front = width * t
    for i, (tine, (a, b)) in enumerate(zip(d["tines"], _bounds(d), strict=True), 1):
        half = tine["thickness"] / 2
        names = [f"{side}_{i}" for side in ("tip", "right", "left", "bottom", "top")]
        parts.append(block((depth, a, -half), (depth + tine["length"], b, half), (None, *names)))
        faces += names
        section = tine["width"] * tine["thickness"]
        areas[names[0]] = section
        areas[names[1]] = areas[names[2]] = tine["length"] * tine["thickness"]
        areas[names[3]] = areas[names[4]] = tine["length"] * tine["width"]
        volume += section * tine["length"]
        front -= section
        thin = min(thin, tine["width"], tine["thickness"])
    if front > 1e-9 * width * t:
        faces.append("base_front")
        areas["base_front"] = front
    return Solid(
        body=Fuse(parts=tuple(parts)),
        faces=tuple(faces),
        areas=areas,
        volume=volume,
        thin=thin,
    )


def _anatomy(d: Dimensions) -> Anatomy:
    depth = d["base_length"]
    middles = [(a[1] + b[0]) / 2 for a, b in pairwise(_bounds(d))]
    cuts = [-np.inf, *middles, np.inf]
    return Anatomy(
        kind=Kind.BAR,
        length=depth + max(t["length"] for t in d["tines"]),
        regions=tuple(
            Region(role=Role.TINE, number=i, low=(depth, a, -np.inf), high=(np.inf, b, np.inf))
            for i, (a, b) in enumerate(pairwise(cuts), 1)
        ),
    )


FAMILY = Family(
    name="comb",
    text="tines side by side on one base",
    dimensions=_DIMENSIONS,
    faces=(
        "base_back",
        "base_top",
        "base_bottom",
        "base_left",
        "base_right",
        "base_front",
        "tip_1 ...",
        "top_1 ...",
        "bottom_1 ...",
        "left_1 ...",
        "right_1 ...",
    ),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={
        "base_length": 12.0,
        "base_width": 20.0,
        "base_thickness": 3.0,
        "tines": [
            {"length": 34.0, "width": 3.0, "thickness": 1.0},
            {"length": 31.0, "width": 3.0, "thickness": 1.0},
            {"length": 28.0, "width": 3.0, "thickness": 1.0},
            {"length": 25.0, "width": 3.0, "thickness": 1.0},
        ],
    },
)
