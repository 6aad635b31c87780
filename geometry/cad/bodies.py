"""Solid records to CAD volumes."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from ..errors import InputError
from ..solid import Body, Cut, Extrusion, Fuse, Imported, Line, Loft, Profile, Revolution
from .importing import load
from .profiles import draw, fill

Part = Extrusion | Revolution | Loft
"""Bodies that are made at once and whose faces are named by their records."""


@dataclass(eq=False, kw_only=True, slots=True)
class Made:
    """A part as it was made, before any joining or cutting.

    Attributes
    ----------
    volume : tag
    named : (name, face tag) of faces known by tag
    swept : (name, curve tag) of named profile curves; the face a curve sweeps is
        the one beside it that is not in `flat`
    flat : tags of the faces at the profile
    """

    volume: int
    named: list[tuple[str, int]] = field(default_factory=list)
    swept: list[tuple[str, int]] = field(default_factory=list)
    flat: set[int] = field(default_factory=set)


def build(cad: Any, body: Body) -> int:
    """Build a body in the current model; return the tag of its one volume.

    Raises
    ------
    InputError
        If the body is in several pieces or vanishes.
    """
    volumes = _volumes(cad, body)
    cad.model.occ.synchronize()
    if len(volumes) != 1:
        raise InputError(
            "the shape falls into separate pieces" if volumes else "nothing is left of the shape",
            value=f"{len(volumes)} pieces",
            allowed="one solid body",
        )
    return volumes[0]


def parts(body: Body) -> Iterator[Part]:
    """Yield every swept part of a body, in the order of its record."""
    match body:
        case Fuse():
            for part in body.parts:
                yield from parts(part)
        case Cut():
            for part in (body.base, *body.tools):
                yield from parts(part)
        case Imported():
            return
        case _:
            yield body


def profiles(part: Part) -> tuple[Profile, ...]:
    """Return the profiles of a swept part."""
    return (part.first, part.last) if isinstance(part, Loft) else (part.profile,)


def make(cad: Any, part: Part) -> list[Made]:
    """Make one part in the current model (two halves for a turned one)."""
    match part:
        case Extrusion():
            return [_extrusion(cad, part)]
        case Revolution():
            return _revolution(cad, part)
        case Loft():
            return [_loft(cad, part)]


def _volumes(cad: Any, body: Body) -> list[int]:
    match body:
        case Fuse():
            return _join(cad, [v for part in body.parts for v in _volumes(cad, part)])
        case Cut():
            base = _volumes(cad, body.base)
            tools = [(3, v) for tool in body.tools for v in _volumes(cad, tool)]
            if not tools:
                return base
            left, _ = cad.model.occ.cut([(3, v) for v in base], tools)
            return [tag for dim, tag in left if dim == 3]
        case Imported():
            return load(cad, body.path)
        case _:
            return _join(cad, [made.volume for made in make(cad, body)])


def _join(cad: Any, volumes: list[int]) -> list[int]:
    if len(volumes) < 2:
        return volumes
    first, *others = ((3, v) for v in volumes)
    left, _ = cad.model.occ.fuse([first], others)
    return [tag for dim, tag in left if dim == 3]


def _extrusion(cad: Any, part: Extrusion) -> Made:
    outline = draw(cad, part.profile)
    start = fill(cad, outline)
    swept = cad.model.occ.extrude([(2, start)], *part.vector)
    end = next(tag for dim, tag in swept if dim == 2)
    return Made(
        volume=next(tag for dim, tag in swept if dim == 3),
        named=[(n, t) for n, t in ((part.start, start), (part.end, end)) if n],
        swept=[(n, c) for loop in outline.curves for n, c in loop if n],
        flat={start, end},
    )


def _revolution(cad: Any, part: Revolution) -> list[Made]:
    # Two half turns, so that no face has a seam.
    halves = []
    for angle in (math.pi, -math.pi):
        outline = draw(cad, part.profile)
        start = fill(cad, outline)
        turned = cad.model.occ.revolve([(2, start)], 0, 0, 0, 0, 0, 1, angle)
        halves.append(
            Made(
                volume=next(tag for dim, tag in turned if dim == 3),
                swept=[(n, c) for loop in outline.curves for n, c in loop if n],
                flat={start, next(tag for dim, tag in turned if dim == 2)},
            )
        )
    return halves


def _loft(cad: Any, part: Loft) -> Made:
    counts = len(part.first.outer), len(part.last.outer)
    if counts[0] != counts[1] or part.first.holes or part.last.holes:
        raise InputError(
            "a loft joins two loops without holes and with equally many segments",
            value=f"{counts[0]} and {counts[1]} segments",
        )
    if (corners := _flat_sided(part)) is not None:
        return _polyhedron(cad, part, corners)
    first, last = draw(cad, part.first), draw(cad, part.last)
    made = cad.model.occ.addThruSections(
        [first.loops[0], last.loops[0]], makeSolid=True, makeRuled=True
    )
    cad.model.occ.remove([(0, t) for t in (*first.spare, *last.spare)])
    volume = next(tag for dim, tag in made if dim == 3)
    cad.model.occ.synchronize()
    beside = {tag: set(cad.model.getAdjacencies(2, tag)[1].tolist()) for tag in _faces(cad, volume)}
    caps = [
        next(t for t, curves in beside.items() if {c for _, c in loop} == curves)
        for loop in (first.curves[0], last.curves[0])
    ]
    return Made(
        volume=volume,
        named=[(n, t) for n, t in zip((part.start, part.end), caps, strict=True) if n],
        swept=[(n, c) for n, c in first.curves[0] if n],
        flat=set(caps),
    )


def _faces(cad: Any, volume: int) -> list[int]:
    return [tag for _, tag in cad.model.getBoundary([(3, volume)], oriented=False)]


def _flat_sided(part: Loft) -> np.ndarray | None:
    """Return corners (2, n, 3) if both loops are polygons and every side is flat."""
    rings = []
    for profile in (part.first, part.last):
        if not all(isinstance(s, Line) for s in profile.outer):
            return None
        rings.append([_place(profile, s.start) for s in profile.outer if isinstance(s, Line)])
    corners = np.array(rings)
    a, d = corners
    b, c = np.roll(a, -1, axis=0), np.roll(d, -1, axis=0)
    twist = np.einsum("ij,ij->i", np.cross(b - a, d - a), c - a)
    size = float(np.ptp(corners.reshape(-1, 3), axis=0).max())
    return corners if np.abs(twist).max() <= 1e-12 * size**3 else None


def _polyhedron(cad: Any, part: Loft, corners: np.ndarray) -> Made:
    """Build a loft from plane faces: a plane is what patches and cuts work best with."""
    occ, n = cad.model.occ, corners.shape[1]
    points = [[occ.addPoint(*p) for p in ring] for ring in corners.tolist()]
    rings = [[occ.addLine(ring[i], ring[(i + 1) % n]) for i in range(n)] for ring in points]
    rungs = [occ.addLine(points[0][i], points[1][i]) for i in range(n)]
    start, end = (occ.addPlaneSurface([occ.addCurveLoop(ring)]) for ring in rings)
    sides = [
        occ.addPlaneSurface(
            [occ.addCurveLoop([rings[0][i], rungs[(i + 1) % n], rings[1][i], rungs[i]])]
        )
        for i in range(n)
    ]
    volume = occ.addVolume([occ.addSurfaceLoop([start, end, *sides])])
    names = [part.start, part.end, *(s.face for s in part.first.outer)]
    tags = [start, end, *sides]
    return Made(volume=volume, named=[(n, t) for n, t in zip(names, tags, strict=True) if n])


def _place(profile: Profile, point: tuple[float, float]) -> np.ndarray:
    axes = np.asarray((profile.u, profile.v), float)
    return np.asarray(profile.origin, float) + np.asarray(point) @ axes
