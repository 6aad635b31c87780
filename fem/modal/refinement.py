"""Sizes for the next mesh from where the error of the present one lies.

The part of a mode's error that comes from a cell of size h goes as h^q, with q = 4 in
smooth places (second-order cells) and q = 2 a at an edge where displacement behaves
as r^a. The fewest cells for a given error then have sizes that share it out equally
(Zienkiewicz and Zhu, Int. J. Numer. Meth. Eng. 24 (1987) 337); with several modes,
equally by a weighted sum, whose weights make the worst modes just good enough.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import scipy.sparse as sp

from ...geometry.mesh import EDGES, Mesh
from ...geometry.size_field import SizeField

#: By how much a cell's size may change at a step.
_FINER, _COARSER = 1.0 / 3.0, 1.5

#: Median edge of a cell, and cells in a cube, of an element size of 1. Counted on
#: six meshes of a plate with a hole: 1.0 to 1.26, 3.3 to 7.5.
_EDGE, _CELLS = 1.15, 6.0

#: Rounds of averaging over neighbours; a plate with a hole and a slotted strip need 12 %
#: fewer unknowns with two than with none.
_SMOOTHINGS = 2

#: How fast the size may grow with distance.
_GROWTH = 0.4

#: Sizes are taken from a ladder with this ratio, so that rounding in the last digits
#: of an estimate does not lead to another mesh.
_LADDER = 2.0**0.25


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Plan:
    """Sizes for the next mesh.

    Attributes
    ----------
    sizes : SizeField
    unknowns : about how many it will have
    worst : error to expect of the worst mode, cents
    """

    sizes: SizeField
    unknowns: float
    worst: float

    def coarser(self, factor: float) -> Plan:
        """Return the plan with all sizes larger by a factor."""
        return Plan(
            sizes=replace(self.sizes, sizes=self.sizes.sizes * factor),
            unknowns=self.unknowns / factor**3,
            worst=self.worst * factor**4,
        )


def plan(mesh: Mesh, by_cell: np.ndarray, exponent: np.ndarray, aim: float) -> Plan:
    """Return sizes that should bring the error of every mode to `aim` cents.

    Parameters
    ----------
    mesh : Mesh
    by_cell : (c, m) float
        Part of each eigenvalue's relative excess that comes from each cell.
    exponent : (c,) float
        Of the edges that each cell touches, see `singular.exponents`.
    aim : float
        Cents.
    """
    powers = np.where(exponent < 1.0, 2.0 * exponent, 4.0)
    # Cents c of a frequency are a share 1 - 2^(-c / 600) of its eigenvalue.
    allowed = 1.0 - 2.0 ** (-aim / 600.0)
    corners, where = np.unique(mesh.cells[:, :4], return_inverse=True)
    cells = where.reshape(-1, 4)
    points = 1e3 * mesh.points[corners]
    corner = points[cells]
    volume = np.abs(np.linalg.det(corner[:, 1:] - corner[:, :1])) / 6.0
    ends = np.sort(cells[:, EDGES], axis=2)
    lengths = np.linalg.norm(points[ends[..., 0]] - points[ends[..., 1]], axis=2)
    sizes = np.median(lengths, axis=1) / _EDGE
    load = smoothed(by_cell / allowed, cells, volume)
    factors = size_factors(load, powers)
    # Nodes take the mean density of the cells round them.
    density = np.repeat((sizes * factors) ** -3.0, 4)
    around = np.bincount(cells.ravel(), density) / np.bincount(cells.ravel())
    wanted = graded(points, np.unique(ends.reshape(-1, 2), axis=0), around ** (-1.0 / 3.0))
    ladder = _LADDER ** np.round(np.log(wanted) / np.log(_LADDER))
    count = _CELLS * float(volume @ (ladder[cells] ** -3.0).mean(axis=1))
    return Plan(
        sizes=SizeField(points=points, cells=cells, sizes=ladder),
        unknowns=3.0 * len(mesh.points) / len(mesh.cells) * count,
        worst=aim * float((factors**powers @ load).max()),
    )


def smoothed(load: np.ndarray, cells: np.ndarray, volume: np.ndarray) -> np.ndarray:
    """Return the load (c, m) of cells (c, 4) averaged over neighbours, its sums kept.

    From cell to cell the error follows the cells' shapes, which the next mesh will
    not have. What is averaged is the load of a cell of one size: it goes as h^7.
    """
    own = (volume / volume.mean())[:, None] ** (7.0 / 3.0)
    share = np.bincount(cells.ravel(), np.repeat(volume, 4))
    adder = sp.csr_matrix((np.repeat(volume, 4), (cells.ravel(), np.arange(cells.size) // 4)))
    total = load.sum(axis=0)
    density = load / own
    for _ in range(_SMOOTHINGS):
        density = ((adder @ density) / share[:, None])[cells].mean(axis=1)
    load = density * own
    return load * (total / np.maximum(load.sum(axis=0), 1e-300))


def size_factors(load: np.ndarray, powers: np.ndarray) -> np.ndarray:
    """Return by what factor (c,) to change the size of each cell.

    Fewest cells, sum of f^-3, for which sum over cells of load f^q is at most 1 in
    every mode.

    Parameters
    ----------
    load : (c, m) float
        Error of each mode that comes from each cell, over the error allowed.
    powers : (c,) float
        The power q of its size with which a cell's error goes.
    """
    weights = np.ones(load.shape[1])
    factors = np.ones(len(load))
    for _ in range(60):
        need = np.maximum(load @ weights, 1e-30)
        factors = np.clip((3.0 / (powers * need)) ** (1.0 / (powers + 3.0)), _FINER, _COARSER)
        errors = (factors**powers) @ load
        # A single mode in smooth places would be met at the power 7/4 in one step.
        weights = np.clip(weights * np.clip(errors, 0.1, 10.0), 1e-12, 1e12)
    return factors


def graded(points: np.ndarray, edges: np.ndarray, sizes: np.ndarray) -> np.ndarray:
    """Return sizes (n,) that grow no faster than `_GROWTH` along edges (e, 2)."""
    first, second = edges.T
    step = _GROWTH * np.linalg.norm(points[first] - points[second], axis=1)
    sizes = sizes.copy()
    for _ in range(100):
        before = sizes.copy()
        np.minimum.at(sizes, first, before[second] + step)
        np.minimum.at(sizes, second, before[first] + step)
        if np.array_equal(sizes, before):
            break
    return sizes
