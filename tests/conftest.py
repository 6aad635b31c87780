"""Fixtures that several test modules share."""

import itertools
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from modewright.cases import build_case
from modewright.fem import solve
from modewright.fem.modal.modes import Modes
from modewright.fem.modal.threads import threads
from modewright.geometry.mesh import EDGES, Mesh

#: Faces of a bar on the faces of a box from the origin.
BAR_FACES = {
    "x_min": "root",
    "x_max": "tip",
    "y_min": "right",
    "y_max": "left",
    "z_min": "bottom",
    "z_max": "top",
}

#: The steel of the published benchmarks (NAFEMS, 1987 and 1990).
STEEL = {
    "name": "carbon steel",
    "youngs_modulus_gpa": 200.0,
    "poisson_ratio": 0.3,
    "density": 8000.0,
}

#: Local corners of the four sides of a tetrahedron, outward.
SIDES = ((0, 2, 1), (0, 1, 3), (1, 2, 3), (0, 3, 2))


def make_brick(
    lengths: Sequence[float],
    counts: Sequence[int],
    keep: Callable[[np.ndarray], np.ndarray] | None = None,
    warp: Callable[[np.ndarray], np.ndarray] | None = None,
) -> Mesh:
    """Return a box from the origin, cut into counts[0] x counts[1] x counts[2] x 6 cells.

    `keep` picks bricks by their centre (k, 3) as a share of the box; `warp` moves
    all nodes, mid-side ones too. The faces x_min ... z_max are those of the box
    before that, `rest` what other surface there is.
    """
    counts = np.asarray(counts)
    corners = np.stack(np.meshgrid(*map(np.arange, counts), indexing="ij"), -1).reshape(-1, 3)
    if keep is not None:
        corners = corners[keep((corners + 0.5) / counts)]
    size = 2 * counts + 1
    cells = []
    for order in itertools.permutations(range(3)):
        path = np.vstack([np.zeros(3, int), np.cumsum(2 * np.eye(3, dtype=int)[list(order)], 0)])
        if np.linalg.det(path[1:] - path[0]) < 0:
            path = path[[0, 2, 1, 3]]
        local = np.vstack([path, *((path[i] + path[j])[None] // 2 for i, j in EDGES)])
        at = 2 * corners[:, None] + local
        cells.append((at[..., 0] * size[1] + at[..., 1]) * size[2] + at[..., 2])
    grid = np.stack(np.meshgrid(*map(np.arange, size), indexing="ij"), -1).reshape(-1, 3)
    used, renumbered = np.unique(np.concatenate(cells), return_inverse=True)
    cells = renumbered.reshape(-1, 10)
    share = grid[used] / (2 * counts)
    facets = boundary(cells)
    faces = {}
    taken = np.zeros(len(facets), bool)
    for axis, name in enumerate("xyz"):
        for end, value in (("min", 0.0), ("max", 1.0)):
            on = (share[facets, axis] == value).all(axis=1)
            faces[f"{name}_{end}"], taken = np.flatnonzero(on), taken | on
    if not taken.all():
        faces["rest"] = np.flatnonzero(~taken)
    points = share * np.asarray(lengths, float)
    if warp is not None:
        points = warp(points)
    volume = float(np.prod(lengths)) * len(corners) / counts.prod()
    return Mesh(points=points, cells=cells, facets=facets, faces=faces, volume=volume)


def boundary(cells: np.ndarray) -> np.ndarray:
    """Return the facets (f, 6) that belong to one cell only."""
    edge = {frozenset(pair): 4 + k for k, pair in enumerate(EDGES)}
    local = [
        [a, b, c, *(edge[frozenset(p)] for p in ((a, b), (b, c), (c, a)))] for a, b, c in SIDES
    ]
    facets = cells[:, local].reshape(-1, 6)
    _, first, count = np.unique(
        np.sort(facets[:, :3], axis=1), axis=0, return_index=True, return_counts=True
    )
    return facets[np.sort(first[count == 1])]


@pytest.fixture(scope="session", autouse=True)
def _one_pool_of_threads() -> Iterator[None]:
    """Keep numpy's threads from fighting with those of the direct solver."""
    with threads():
        yield


@pytest.fixture
def brick() -> Callable[..., Mesh]:
    """Return `make_brick`: a box of tetrahedra in a known order."""
    return make_brick


def make_block(
    lengths: Sequence[float],
    counts: Sequence[int],
    *,
    keep: Callable[[np.ndarray], np.ndarray] | None = None,
    warp: Callable[[np.ndarray], np.ndarray] | None = None,
    middle: bool = False,
) -> Mesh:
    """Return a box in mm where the family `bar` has it (`middle`: a plate), its faces too.

    Three-dimensional Ritz values are reached with fewer unknowns on such a mesh than
    on a free one. `warp` moves points in mm.
    """
    low = np.array([lengths[0] / 2 if middle else 0.0, lengths[1] / 2, lengths[2] / 2])

    def place(points: np.ndarray) -> np.ndarray:
        placed = points - low
        return (warp(placed) if warp else placed) * 1e-3

    found = make_brick(lengths, counts, keep=keep, warp=place)
    names = {} if middle else BAR_FACES
    return replace(
        found,
        faces={names.get(name, name): facets for name, facets in found.faces.items()},
        size=1e-3 * max(lengths) / max(counts),
        volume=1e-9 * found.volume,
    )


def solve_part(
    family: str,
    dimensions: Mapping[str, Any],
    *,
    mesh: Mesh | None = None,
    size: float | None = None,
    modes: int = 6,
    material: Mapping[str, Any] = STEEL,
    held: Sequence[str] = (),
    **tables: Any,
) -> Modes:
    """Return the modes of a part as a case file would ask for them.

    `held` names clamped faces; `tables` are further tables of the case file.
    """
    settings = {"modes": modes} if size is None else {"modes": modes, "size": size}
    document = {
        "title": "Part",
        "shape": {"family": family, **dimensions},
        "material": dict(material),
        "solve": settings,
        **({"mount": {"kind": "clamped", "faces": list(held)}} if held else {}),
        **tables,
    }
    return solve(build_case(document), mesh=mesh)


@pytest.fixture(scope="session")
def block() -> Callable[..., Mesh]:
    """Return `make_block`: a bar or plate of tetrahedra in a known order, in mm."""
    return make_block


@pytest.fixture(scope="session")
def solve_as_case() -> Callable[..., Modes]:
    """Return `solve_part`: from the words of a case file to modes."""
    return solve_part
