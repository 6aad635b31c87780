"""A straight bar of several uniform segments, each with its own section."""

from __future__ import annotations

from itertools import pairwise
from pathlib import Path

import numpy as np

from ..anatomy import Anatomy, Kind
from ..dimension import Dimension, Sort
from ..section import of_rectangle
from ..shape import Dimensions, Family
from ..solid import Body, Fuse, Point2, Solid
from .plane import block, polygon, upright

_DIMENSIONS = (
    Dimension(
        name="segments",
        text="from the root to the tip, each of uniform section",
        sort=Sort.ROWS,
        columns=(
            Dimension(name="length", text="length along x"),
            Dimension(name="width", text="width along y"),
            Dimension(name="thickness", text="thickness along z"),
        ),
    ),
    Dimension(
        name="flush",
        text="bottom keeps the lower faces of all segments in one plane",
        sort=Sort.CHOICE,
        choices=("centred", "bottom"),
        default="centred",
    ),
)


def _check(d: Dimensions) -> None:
    """Accept all: any row of boxes is a bar."""


def _spans(d: Dimensions) -> list[tuple[float, float, float, float, float]]:
    """Return x from, x to, width, z from, z to of each segment."""
    spans = []
    x = 0.0
    floor = -d["segments"][0]["thickness"] / 2
    for segment in d["segments"]:
        t = segment["thickness"]
        low = floor if d["flush"] == "bottom" else -t / 2
        spans.append((x, x + segment["length"], segment["width"], low, low + t))
        x += segment["length"]
    return spans


def _body(d: Dimensions) -> Body:
    spans = _spans(d)
    last = len(spans)
    if len({width for _, _, width, _, _ in spans}) == 1:
        lower: list[Point2] = []
        upper: list[Point2] = []
        low_names: list[str] = []
        high_names: list[str] = []
        for i, (a, b, _, low, high) in enumerate(spans, 1):
            end = "tip" if i == last else f"step_{i}"
            for corners, names, z, name in (
                (lower, low_names, low, f"bottom_{i}"),
                (upper, high_names, high, f"top_{i}"),
            ):
                if corners and corners[-1][1] == z:  # no step on this side
                    corners[-1:], names[-1:] = [], []
                corners += [(a, z), (b, z)]
                names += [name, end]
        # Along the bottom, up the tip, back along the top, down the root.
        back = [name for name in reversed(high_names[:-1])]
        half = spans[0][2] / 2
        return upright(
            polygon([*lower, *reversed(upper)], [*low_names, *back, "root"]), -half, half
        )
    names = ["root", *(f"step_{i}" for i in range(1, last)), "tip"]
    return Fuse(
        parts=tuple(
            block(
                (a, -width / 2, low),
                (b, width / 2, high),
                (names[i], names[i + 1], "right", "left", f"bottom_{i + 1}", f"top_{i + 1}"),
            )
            for i, (a, b, width, low, high) in enumerate(spans)
        )
    )


def _solid(d: Dimensions, folder: Path) -> Solid:
    segments = d["segments"]
    sides = sum(s["length"] * s["thickness"] for s in segments)
    ends = [s["width"] * s["thickness"] for s in segments]
    areas = {"root": ends[0], "tip": ends[-1], "left": sides, "right": sides}
    faces = ["root", "tip", "left", "right"]
    for i, s in enumerate(segments, 1):
        faces += [f"top_{i}", f"bottom_{i}"]
        areas[f"top_{i}"] = areas[f"bottom_{i}"] = s["length"] * s["width"]
    for i, (a, b) in enumerate(pairwise(segments), 1):
        shared = min(a["width"], b["width"]) * min(a["thickness"], b["thickness"])
        step = ends[i - 1] + ends[i] - 2 * shared
        if step > 0:
            faces.append(f"step_{i}")
            areas[f"step_{i}"] = step
    return Solid(
        body=_body(d),
        faces=tuple(faces),
        areas=areas,
        volume=sum(s["length"] * s["width"] * s["thickness"] for s in segments),
        thin=min(min(s["width"], s["thickness"]) for s in segments),
    )


def _anatomy(d: Dimensions) -> Anatomy:
    spans = _spans(d)
    columns = np.repeat(np.array(spans), 2, axis=0)
    width, low, high = columns[:, 2], columns[:, 3], columns[:, 4]
    x = np.array([edge for a, b, *_ in spans for edge in (a, b)])
    middle = (low + high) / 2
    return Anatomy(
        kind=Kind.BAR,
        length=float(x[-1]),
        ends=("root", "tip"),
        sections=of_rectangle(x, width, high - low, middle if np.any(middle) else None),
        square=bool(np.all(width == high - low) and not np.any(middle)),
    )


FAMILY = Family(
    name="stepped_bar",
    text="a straight bar of uniform segments, each with its own width and thickness",
    dimensions=_DIMENSIONS,
    faces=("root", "tip", "top_1 ...", "bottom_1 ...", "step_1 ...", "left", "right"),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={
        "segments": [
            {"length": 15.0, "width": 8.0, "thickness": 2.0},
            {"length": 40.0, "width": 8.0, "thickness": 1.0},
            {"length": 5.0, "width": 8.0, "thickness": 1.6},
        ]
    },
)
