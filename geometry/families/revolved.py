"""A body of revolution: a bell, a bowl, a gong, or any turned part."""

from __future__ import annotations

import math
from itertools import pairwise
from pathlib import Path

import numpy as np

from ..anatomy import Anatomy, Kind
from ..crossing import refuse_crossing
from ..dimension import Dimension, Sort
from ..errors import InputError
from ..shape import Dimensions, Family
from ..solid import Loop, Point2, Profile, Revolution, Solid
from . import shell
from .measure import measure, swept_length

_DIMENSIONS = (
    Dimension(
        name="profile",
        text="points [r, z] along the outside from the crown to the lip, or a closed section "
        "(last point = first); the lowest point of the body comes to z = 0",
        sort=Sort.POINTS,
        fewest=2,
    ),
    Dimension(
        name="curve",
        text="what joins the points; a spline is level where it meets the axis",
        sort=Sort.CHOICE,
        choices=("spline", "straight"),
        default="spline",
    ),
    Dimension(
        name="wall",
        text="thickness, one or one per point, laid towards the space between profile and axis; "
        "absent for a closed section",
        sort=Sort.LENGTH_OR_LENGTHS,
        optional=True,
    ),
)


def _is_closed(d: Dimensions) -> bool:
    return d["profile"][0] == d["profile"][-1]


def _straight(d: Dimensions) -> bool:
    return d["curve"] == "straight"


def _walls(d: Dimensions) -> tuple[float, ...]:
    wall = d["wall"]
    return wall if isinstance(wall, tuple) else (wall,) * len(d["profile"])


def _loop(d: Dimensions) -> Loop:
    if _is_closed(d):
        return shell.closed(d["profile"][:-1], straight=_straight(d))
    return shell.walled(d["profile"], _walls(d), straight=_straight(d))


def _check(d: Dimensions) -> None:
    points: tuple[Point2, ...] = d["profile"]
    for i, (r, z) in enumerate(points, 1):
        if r < 0:
            raise InputError(
                "lies beyond the axis", key=f"profile.{i}", value=[r, z], allowed="r of 0 or more"
            )
    for i, (a, b) in enumerate(pairwise(points), 2):
        if a == b:
            raise InputError(
                "repeats the point before it",
                key=f"profile.{i}",
                value=list(b),
                allowed="distinct points",
            )
    if _is_closed(d):
        _check_closed(d, points[:-1])
    else:
        _check_walled(d, points)


def _check_closed(d: Dimensions, points: tuple[Point2, ...]) -> None:
    if d["wall"] is not None:
        raise InputError(
            "does not go with a closed profile",
            key="wall",
            value=d["wall"],
            allowed="a wall with an open profile only",
        )
    if len(points) < 3:
        raise InputError(
            "is too short for a closed section",
            key="profile",
            value=f"{len(points)} distinct points",
            allowed="3 or more",
        )
    touching = [shell.on_axis(p) for p in points]
    along = [a and b for a, b in zip(touching, touching[1:] + touching[:1], strict=True)]
    if any(touching) and (along.count(True) != 1 or touching.count(True) != 2):
        raise InputError(
            "must meet the axis along one line or not at all",
            key="profile",
            value=f"{touching.count(True)} points on the axis",
            allowed="two neighbouring points with r = 0, or none",
        )
    ring = shell.sampled(_loop(d))
    if _tangled(ring) or ring[:, 0].min() < -1e-9 * np.ptp(ring):
        raise InputError(
            "crosses itself or the axis",
            key="profile",
            value=f"{len(points)} points",
            allowed="a section that does not; curve = straight follows the points",
        )


def _tangled(ring: np.ndarray) -> bool:
    """Return whether the closed line through points (n, 2) crosses or touches itself."""
    try:
        refuse_crossing([ring])
    except InputError:
        return True
    return False


def _check_walled(d: Dimensions, points: tuple[Point2, ...]) -> None:
    wall = d["wall"]
    if wall is None:
        raise InputError(
            "is missing", key="wall", allowed="over 0 mm; or close the profile (last point = first)"
        )
    if isinstance(wall, tuple) and len(wall) != len(points):
        raise InputError(
            "needs one thickness per point",
            key="wall",
            value=f"{len(wall)} items",
            allowed=f"{len(points)} items, or one number",
        )
    for i, point in enumerate(points[1:-1], 2):
        if shell.on_axis(point):
            raise InputError(
                "meets the axis between its ends",
                key=f"profile.{i}",
                value=list(point),
                allowed="r over 0",
            )
    if not shell.inward(points):
        raise InputError(
            "encloses no space with the axis, so no side is inward",
            key="profile",
            value=f"{len(points)} points",
            allowed="a curved or turned profile, or a closed section",
        )
    outer = shell.outer_samples(points, straight=_straight(d))
    if shell.crosses(outer) or outer[:, 0].min() < 0:
        raise InputError(
            "crosses itself or the axis",
            key="profile",
            value=f"{len(points)} points",
            allowed="a profile that does not; curve = straight follows the points",
        )
    inner = shell.inner_samples(points, _walls(d), straight=_straight(d))
    along = np.einsum("ij,ij->i", np.diff(outer, axis=0), np.diff(inner, axis=0))
    folded = bool((along <= 0).any() or inner[:, 0].min() < 0)
    if folded or _tangled(np.vstack([outer, inner[::-1]])):
        raise InputError(
            "is too thick: the inner surface crosses itself, the outer one or the axis",
            key="wall",
            value=list(wall) if isinstance(wall, tuple) else wall,
            allowed="under the smallest inner radius of curvature and the room to the axis",
        )


def _solid(d: Dimensions, folder: Path) -> Solid:
    loop = _loop(d)
    low, _ = shell.heights(loop)
    section = measure(loop)
    areas: dict[str, float] = {}
    round_about = 0.0
    for segment in loop:
        length, moment = swept_length(segment)
        round_about += length
        if segment.face is not None:
            areas[segment.face] = areas.get(segment.face, 0.0) + 2 * math.pi * moment
    thin = 2 * section.area / round_about if _is_closed(d) else min(_walls(d))
    return Solid(
        body=Revolution(profile=Profile(outer=loop, origin=(0.0, 0.0, -low), v=(0.0, 0.0, 1.0))),
        faces=tuple(name for name in ("crown", "lip", "inner", "outer") if name in areas),
        areas=areas,
        volume=2 * math.pi * section.moment_x,
        thin=thin,
    )


def _anatomy(d: Dimensions) -> Anatomy:
    low, high = shell.heights(_loop(d))
    return Anatomy(kind=Kind.REVOLVED, length=high - low, round=True)


FAMILY = Family(
    name="revolved",
    text="a body of revolution about z: a bell, a bowl, a gong",
    dimensions=_DIMENSIONS,
    faces=(
        "crown (the edge at the first point; if that is on the axis, the outside up to the second)",
        "lip (the edge at the last point)",
        "inner",
        "outer",
    ),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={
        "profile": [[0, 80], [22, 78], [32, 62], [36, 40], [42, 20], [56, 0]],
        "wall": [5.0, 4.0, 3.5, 3.5, 4.5, 3.0],
    },
)
