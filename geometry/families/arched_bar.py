"""A bar with metal removed from below at mid-length, as struck bars are tuned."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
from scipy.interpolate import make_interp_spline

from ..anatomy import Anatomy, Kind
from ..dimension import Dimension, Sort
from ..errors import InputError
from ..section import of_rectangle
from ..shape import Dimensions, Family
from ..solid import Arc, BSpline, Circle, Line, Loop, Segment, Solid
from .measure import measure, swept_length
from .plane import upright

STATIONS = 513
"""Stations along the arch: linear interpolation of I and J is good to 1e-4 down to a quarter
of the thickness."""

_DIMENSIONS = (
    Dimension(name="length", text="length along x, from end_a to end_b"),
    Dimension(name="width", text="width along y"),
    Dimension(name="thickness", text="thickness along z, at the ends"),
    Dimension(name="arch_length", text="length of the arch below, centred at mid-length"),
    Dimension(name="arch_depth", text="depth of the arch at mid-length"),
    Dimension(
        name="arch_profile",
        text="form of the arch; cosine leaves the lower face without a corner",
        sort=Sort.CHOICE,
        choices=("parabola", "circle", "cosine"),
        default="parabola",
    ),
    Dimension(
        name="cord_distance",
        text="from each end to the middle of its cord hole; the holes run across the width, "
        "along y, at half the local thickness",
        optional=True,
    ),
    Dimension(name="cord_diameter", text="diameter of the cord holes", optional=True),
)


def _floor(d: Dimensions, x: np.ndarray) -> np.ndarray:
    """Return the height z of the lower face at x."""
    half, depth = d["arch_length"] / 2, d["arch_depth"]
    u = np.clip((x - d["length"] / 2) / half, -1.0, 1.0)
    if d["arch_profile"] == "parabola":
        rise = depth * (1 - u**2)
    elif d["arch_profile"] == "cosine":
        rise = depth * (1 + np.cos(np.pi * u)) / 2
    else:
        radius = (half**2 + depth**2) / (2 * depth)
        rise = np.sqrt(np.maximum(radius**2 - (half * u) ** 2, 0.0)) - (radius - depth)
    return rise - d["thickness"] / 2


def _hole_height(d: Dimensions) -> float:
    return float(d["thickness"] / 2 + _floor(d, np.array(d["cord_distance"]))) / 2


def _clearance(d: Dimensions) -> float:
    """Return the metal left between a cord hole and the nearest surface above or below."""
    x = np.linspace(0.0, d["length"], 4001)
    z = _hole_height(d)
    below = np.hypot(x - d["cord_distance"], _floor(d, x) - z).min()
    return float(min(below, d["thickness"] / 2 - z)) - d["cord_diameter"] / 2


def _check(d: Dimensions) -> None:
    if d["arch_length"] >= d["length"]:
        raise InputError(
            "must leave both ends whole",
            key="arch_length",
            value=d["arch_length"],
            allowed=f"under the length of {d['length']:g} mm",
        )
    if d["arch_depth"] >= d["thickness"]:
        raise InputError(
            "cuts through the bar",
            key="arch_depth",
            value=d["arch_depth"],
            allowed=f"under the thickness of {d['thickness']:g} mm",
        )
    if d["arch_profile"] == "circle" and d["arch_depth"] > d["arch_length"] / 2:
        raise InputError(
            "is deeper than a half circle",
            key="arch_depth",
            value=d["arch_depth"],
            allowed=f"up to half the arch_length, {d['arch_length'] / 2:g} mm",
        )
    distance, diameter = d["cord_distance"], d["cord_diameter"]
    if (distance is None) != (diameter is None):
        missing = "cord_distance" if distance is None else "cord_diameter"
        raise InputError(
            "is missing", key=missing, allowed="cord_distance and cord_diameter go together"
        )
    if distance is None:
        return
    low, high = diameter / 2, (d["length"] - diameter) / 2
    if not low < distance < high:
        raise InputError(
            "puts the cord holes over an end or over each other",
            key="cord_distance",
            value=distance,
            allowed=f"over {low:g}, under {high:g} mm",
        )
    spare = _clearance(d)
    if spare <= 0:
        raise InputError(
            "breaks through the upper or lower face",
            key="cord_diameter",
            value=diameter,
            allowed=f"under {diameter + 2 * spare:.4g} mm at this distance",
        )


def _arch(d: Dimensions) -> Segment:
    half, depth, middle = d["arch_length"] / 2, d["arch_depth"], d["length"] / 2
    z = -d["thickness"] / 2
    a, b = (middle - half, z), (middle + half, z)
    if d["arch_profile"] == "circle":
        return Arc(start=a, through=(middle, z + depth), end=b, face="arch")
    if d["arch_profile"] == "parabola":
        return BSpline(
            poles=(a, (middle, z + 2 * depth), b),
            degree=2,
            knots=(0.0, 0.0, 0.0, 1.0, 1.0, 1.0),
            face="arch",
        )
    # One span of degree 15 through Chebyshev points follows the cosine to 1e-9 of the depth.
    u = -np.cos(np.pi * np.arange(16) / 15)
    x = middle + half * u
    curve = make_interp_spline(u, np.stack([x, _floor(d, x)], axis=1), k=15)
    return BSpline(
        poles=tuple((float(p), float(q)) for p, q in curve.c),
        degree=15,
        knots=tuple(float(k) for k in curve.t),
        face="arch",
    )


def _solid(d: Dimensions, folder: Path) -> Solid:
    length, width, t = d["length"], d["width"], d["thickness"]
    a = (length - d["arch_length"]) / 2
    arch = _arch(d)
    outline = (
        Line(start=(0.0, -t / 2), end=(a, -t / 2), face="bottom_a"),
        arch,
        Line(start=(length - a, -t / 2), end=(length, -t / 2), face="bottom_b"),
        Line(start=(length, -t / 2), end=(length, t / 2), face="end_b"),
        Line(start=(length, t / 2), end=(0.0, t / 2), face="top"),
        Line(start=(0.0, t / 2), end=(0.0, -t / 2), face="end_a"),
    )
    faces = ("end_a", "end_b", "top", "arch", "bottom_a", "bottom_b", "left", "right")
    side = measure(outline).area
    thin = min(width, t - d["arch_depth"])
    areas = {
        "end_a": width * t,
        "end_b": width * t,
        "top": width * length,
        "arch": width * swept_length(arch)[0],
        "bottom_a": width * a,
        "bottom_b": width * a,
    }
    holes: tuple[Loop, ...] = ()
    if d["cord_diameter"] is not None:
        radius, z = d["cord_diameter"] / 2, _hole_height(d)
        x = d["cord_distance"]
        holes = (
            (Circle(centre=(x, z), radius=radius, face="cord_a"),),
            (Circle(centre=(length - x, z), radius=radius, face="cord_b"),),
        )
        faces = (*faces, "cord_a", "cord_b")
        side -= 2 * math.pi * radius**2
        areas["cord_a"] = areas["cord_b"] = 2 * math.pi * radius * width
        thin = min(thin, _clearance(d), x - radius, length - 2 * (x + radius))
    areas["left"] = areas["right"] = side
    return Solid(
        body=upright(outline, -width / 2, width / 2, holes=holes),
        faces=faces,
        areas=areas,
        volume=side * width,
        thin=thin,
    )


def _anatomy(d: Dimensions) -> Anatomy:
    sections = None
    if d["cord_diameter"] is None:
        # Stations crowd towards the ends of the arch, where a circle may be steep.
        u = -np.cos(np.linspace(0.0, np.pi, STATIONS))
        x = np.concatenate([[0.0], d["length"] / 2 + u * d["arch_length"] / 2, [d["length"]]])
        floor, top = _floor(d, x), d["thickness"] / 2
        sections = of_rectangle(x, d["width"], top - floor, (top + floor) / 2)
    return Anatomy(kind=Kind.BAR, length=d["length"], ends=("end_a", "end_b"), sections=sections)


FAMILY = Family(
    name="arched_bar",
    text="a bar arched from below at mid-length, with or without cord holes",
    dimensions=_DIMENSIONS,
    faces=(
        "end_a",
        "end_b",
        "top",
        "arch",
        "bottom_a",
        "bottom_b",
        "left",
        "right",
        "cord_a, cord_b (with cord holes)",
    ),
    check=_check,
    solid=_solid,
    anatomy=_anatomy,
    example={
        "length": 240.0,
        "width": 40.0,
        "thickness": 12.0,
        "arch_length": 130.0,
        "arch_depth": 6.0,
    },
)
