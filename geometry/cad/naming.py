"""Names of faces, carried through cuts and joins by where the faces lie.

The parts a body is made of are made once more, uncut, in a model of their own.
A face of the finished body takes the name of every named face of the uncut
parts (and of every patch) that holds points from inside it. No tag is trusted
across a cut.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..solid import Body
from .bodies import make, parts

#: Distance below which a point lies on a face, as a share of the body's diagonal.
_ON = 1e-6

#: Slack of the boxes that sift the sources, as a share of the body's diagonal: the
#: kernel's box of a turned spline may fall short of its crest.
_ABOUT = 1e-2

#: Share of a face's sample points that must lie on a source; all but round-off.
_SHARE = 0.75


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Source:
    """A named face of the sources' model: its tag and bounding box (2, 3)."""

    name: str
    tag: int
    box: np.ndarray


def samples(cad: Any, face: int) -> np.ndarray:
    """Return points (k, 3) strictly inside a face of the current model."""
    low, high = cad.model.getParametrizationBounds(2, face)
    best = np.empty((0, 2))
    for n in (5, 11, 37):
        # Off the regular grid, so that samples miss the lines of symmetry.
        t = (np.arange(n) + 0.5 + 0.13 * np.sin(np.arange(n) + 1.0)) / n
        u, v = np.meshgrid(low[0] + t * (high[0] - low[0]), low[1] + t * (high[1] - low[1]))
        uv = np.column_stack((u.ravel(), v.ravel()))
        inside = [bool(cad.model.isInside(2, face, p, parametric=True)) for p in uv]
        best = uv[np.asarray(inside)]
        if len(best) >= 5:
            break
    pick = np.unique(np.linspace(0, len(best) - 1, min(len(best), 9)).astype(int))
    if not len(pick):
        return np.empty((0, 3))
    return np.asarray(cad.model.getValue(2, face, best[pick].ravel())).reshape(-1, 3)


def box(cad: Any, dim: int, tag: int) -> np.ndarray:
    """Return the bounding box (2, 3) of an entity of the current model."""
    return np.asarray(cad.model.getBoundingBox(dim, tag)).reshape(2, 3)


def make_sources(cad: Any, body: Body) -> list[Source]:
    """Make the uncut parts of a body in the current model; return their named faces."""
    made = [m for part in parts(body) for m in make(cad, part)]
    cad.model.occ.synchronize()
    found: list[tuple[str, int]] = []
    for m in made:
        own = {tag for _, tag in cad.model.getBoundary([(3, m.volume)], oriented=False)}
        found += m.named
        for name, curve in m.swept:
            beside = cad.model.getAdjacencies(1, curve)[0].tolist()
            # A curve on the axis of a turned part sweeps no face.
            found += [(name, tag) for tag in beside if tag in own and tag not in m.flat]
    return [Source(name=n, tag=t, box=box(cad, 2, t)) for n, t in dict.fromkeys(found)]


def match(cad: Any, sources: list[Source], points: np.ndarray, size: float) -> list[str]:
    """Return the names of all sources that hold the points (k, 3) of one face.

    The sources' model must be current; `size` is the body's diagonal.
    """
    names = []
    for source in sources:
        if source.name in names or not len(points):
            continue
        slack = _ABOUT * size
        if np.any(points < source.box[0] - slack) or np.any(points > source.box[1] + slack):
            continue
        nearest, uv = cad.model.getClosestPoint(2, source.tag, points.ravel())
        off = np.linalg.norm(np.asarray(nearest).reshape(-1, 3) - points, axis=1)
        on = [
            bool(d <= _ON * size and cad.model.isInside(2, source.tag, p, parametric=True))
            for d, p in zip(off, np.asarray(uv).reshape(-1, 2), strict=True)
        ]
        if np.mean(on) >= _SHARE:
            names.append(source.name)
    return names


def number(named: dict[int, list[str]], centroids: dict[int, np.ndarray], size: float) -> None:
    """Name every face that has no name ``face_1``, ``face_2`` … by increasing centroid."""
    taken = {name for names in named.values() for name in names}
    grid = 1e-6 * size
    unnamed = sorted(
        (tag for tag, names in named.items() if not names),
        key=lambda tag: tuple(np.round(centroids[tag] / grid).tolist()),
    )
    count = 0
    for tag in unnamed:
        count += 1
        while f"face_{count}" in taken:
            count += 1
        named[tag] = [f"face_{count}"]
