"""One-dimensional Ritz solutions along a bar, accurate however slender it is.

Energies are kept as square-root factors: with strain energy |S q|^2 / 2 and
kinetic energy |C q'|^2 / 2, the angular frequencies are the singular values of
S R^-1, where R^T R = C^T C. Working with S instead of S^T S keeps the relative
error at machine precision times omega_max / omega rather than its square, so
that shear-flexible beams neither lock nor lose their digits.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.polynomial import legendre
from scipy.linalg import cholesky, solve_triangular

_DEGREE = 5
_POINTS = _DEGREE + 1
_MOST_ELEMENTS = 24


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Grid:
    """Piecewise polynomials along a bar and the points where energies are summed.

    Attributes
    ----------
    points : (q,) m, quadrature points
    weights : (q,) m
    values : (q, d), functions at the points; the first and last function are
        the displacements of the two ends
    slopes : (q, d), 1/m, their derivatives
    stations, shares : (q,) int and float
        Station before each point, and how far (0..1) it lies towards the next.
    """

    points: np.ndarray
    weights: np.ndarray
    values: np.ndarray
    slopes: np.ndarray
    stations: np.ndarray
    shares: np.ndarray

    @property
    def functions(self) -> int:
        """Number of functions d."""
        return self.values.shape[1]

    def at_points(self, values: np.ndarray) -> np.ndarray:
        """Return station values (s,) interpolated linearly to the points (q,)."""
        v = np.asarray(values, float)
        return v[self.stations] + self.shares * (v[self.stations + 1] - v[self.stations])


def make_grid(x: np.ndarray, waves: int) -> Grid:
    """Return a grid over stations `x` fine enough for so many half waves.

    Parameters
    ----------
    x : (s,) m, ascending; a step in the section is two equal stations
    waves : int
    """
    x = np.asarray(x, float)
    cuts = _element_edges(x, waves)
    nodes = -np.cos(np.pi * np.arange(_DEGREE + 1) / _DEGREE)
    to_nodal = np.linalg.inv(legendre.legvander(nodes, _DEGREE))
    derive = np.array([legendre.legval(nodes, legendre.legder(row)) for row in np.eye(_DEGREE + 1)])

    # Energies are summed piece by piece, between all stations and element edges;
    # six points are exact for products of two functions and a linear section.
    edges = np.unique(np.concatenate([x, cuts]))
    gauss, weight = legendre.leggauss(_POINTS)
    half = np.diff(edges) / 2.0
    middle = edges[:-1] + half
    points = (middle[:, None] + half[:, None] * gauss).ravel()
    weights = (half[:, None] * weight).ravel()
    owner = np.repeat(np.searchsorted(cuts, middle) - 1, _POINTS)
    start, length = cuts[owner], np.diff(cuts)[owner]
    local = legendre.legvander(2.0 * (points - start) / length - 1.0, _DEGREE) @ to_nodal

    rows = np.arange(len(points))[:, None]
    columns = owner[:, None] * _DEGREE + np.arange(_DEGREE + 1)
    values = np.zeros((len(points), (len(cuts) - 1) * _DEGREE + 1))
    slopes = np.zeros_like(values)
    values[rows, columns] = local
    slopes[rows, columns] = local @ (to_nodal.T @ derive).T * (2.0 / length)[:, None]

    stations = np.searchsorted(x, np.repeat(middle, _POINTS), side="right") - 1
    shares = (points - x[stations]) / (x[stations + 1] - x[stations])
    return Grid(
        points=points,
        weights=weights,
        values=values,
        slopes=slopes,
        stations=stations,
        shares=shares,
    )


def _element_edges(x: np.ndarray, waves: int) -> np.ndarray:
    """Return edges: steps, ends of long spans, a spread of stations, cuts of what is too long."""
    distinct, gaps = np.unique(x), np.diff(x)
    stride = -(-(len(distinct) - 1) // _MOST_ELEMENTS)
    long = np.flatnonzero(gaps > (x[-1] - x[0]) / _MOST_ELEMENTS)
    steps = x[:-1][gaps == 0.0]
    kept = np.unique(
        np.concatenate([distinct[::stride], distinct[-1:], steps, x[long], x[long + 1]])
    )
    longest = (kept[-1] - kept[0]) / max(8, waves)
    pieces = [
        np.linspace(a, b, 1 + int(np.ceil((b - a) / longest - 1e-9)))[:-1]
        for a, b in pairwise(kept)
    ]
    return np.concatenate([*pieces, kept[-1:]])


def spectrum(
    stiff: Sequence[np.ndarray],
    mass: Sequence[np.ndarray],
    fixed: Sequence[int],
    rigid: int,
    count: int,
) -> tuple[np.ndarray, np.ndarray]:
    """Return the lowest elastic natural frequencies and how their kinetic energy is shared.

    Parameters
    ----------
    stiff, mass : blocks of rows (r, d)
        Square-root factors: energies are half the sum of squares of rows @ q.
    fixed : columns held at zero
    rigid : number of rigid motions left, dropped from the low end
    count : how many; fewer come back if the functions are fewer

    Returns
    -------
    frequencies : (m,) Hz, ascending
    shares : (m, len(mass)), share of each block of `mass`, summing to 1
    """
    held = list(fixed)
    s = np.linalg.qr(np.delete(np.vstack(stiff), held, axis=1), mode="r")
    blocks = [np.delete(block, held, axis=1) for block in mass]
    gram = sum(block.T @ block for block in blocks)
    scale = 1.0 / np.sqrt(np.diag(gram))
    factor = cholesky(gram * scale * scale[:, None])
    reduced = solve_triangular(factor.T, (s * scale).T, lower=True).T
    _, omega, right = np.linalg.svd(reduced, full_matrices=False)
    omega, right = omega[::-1][rigid : rigid + count], right[::-1][rigid : rigid + count]
    shapes = scale[:, None] * solve_triangular(factor, right.T)
    shares = np.stack([np.sum((block @ shapes) ** 2, axis=0) for block in blocks], axis=1)
    return omega / (2.0 * np.pi), shares / shares.sum(axis=1, keepdims=True)
