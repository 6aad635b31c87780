"""Names of flat plates by their nodal lines along and across."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from ....geometry.anatomy import Anatomy
from .label import Draft
from .motion import Motion
from .products import beam_functions

#: Nodal lines looked for each way.
_LINES = 16

#: A second product at least this large beside the first stands in the name too.
_EQUAL = 0.8

#: An edge whose mean square deflection is below this part of the plate's is held.
_HELD = 1e-3


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class PlateReading:
    """Modes of a flat plate.

    Attributes
    ----------
    flexure : (m, m) float
        Energy products of the motion normal to the plate, shares of 1.
    products : (m, k, k) float
        Coefficients of the mean surface's deflection in products of beam
        functions, by nodal lines across the length and across the width.
    """

    flexure: np.ndarray
    products: np.ndarray
    symmetric: bool = False

    def criteria(self, members: np.ndarray) -> Sequence[np.ndarray]:
        """Return what tells equal modes apart: flexure, then more lines across the length."""
        across = np.tril(self.products[members], -1).reshape(len(members), -1)
        along = np.triu(self.products[members], 1).reshape(len(members), -1)
        return [
            self.flexure[np.ix_(members, members)],
            across @ across.T,
            -along @ along.T,
        ]

    def turned(self, turn: np.ndarray) -> PlateReading:
        """Return the reading of the modes that `turn` makes of these."""
        return replace(
            self,
            flexure=turn @ self.flexure @ turn.T,
            products=np.tensordot(turn, self.products, 1),
        )

    def drafts(self) -> list[Draft]:
        """Return the drafts of all names."""
        normal = np.diag(self.flexure)
        return [
            Draft(base=_lines(products)) if share >= 0.5 else _in_plane()
            for share, products in zip(normal, self.products, strict=True)
        ]


def _in_plane() -> Draft:
    return Draft(base="plate in-plane", numbered=True)


def _lines(products: np.ndarray) -> str:
    """Return ``plate (m,n)``, or both of two products that are about equal."""
    size = np.abs(products)
    first, second = (
        tuple(int(i) for i in np.unravel_index(place, size.shape))
        for place in np.argsort(-size, axis=None, kind="stable")[:2]
    )
    if size[second] < _EQUAL * size[first]:
        return f"plate ({first[0]},{first[1]})"
    (m, n), (p, q) = sorted((first, second), reverse=True)
    mark = "+" if products[m, n] * products[p, q] > 0.0 else "-"
    return f"plate ({m},{n}){mark}({p},{q})"


def read_plate(motion: Motion, anatomy: Anatomy) -> PlateReading:
    """Return the reading of a flat plate's modes."""
    extent = motion.high[:2] - motion.low[:2]
    place = (motion.points[:, :2] - motion.low[:2]) / extent
    held = _held_edges(motion)
    along, across = (
        beam_functions(place[:, k], _LINES, first=held[k][0], last=held[k][1]) for k in range(2)
    )
    # On anything but a full rectangle the products have norms of their own.
    norms = np.sqrt(np.maximum((along**2 * motion.weights) @ (across**2).T, 1e-300))

    def functionals(low: int, high: int) -> np.ndarray:
        weighted = along[:, low:high] * motion.weights[low:high]
        return (weighted[:, None] * across[None, :, low:high]).reshape(-1, high - low)

    linear, energies = motion.sums(functionals)
    scale = np.sqrt(np.einsum("kii->i", energies[0]))
    scale = np.where(scale > 0.0, scale, 1.0)
    products = linear[:, :, 2].reshape(-1, _LINES, _LINES) / norms / scale[:, None, None]
    return PlateReading(flexure=energies[0, 2] / np.outer(scale, scale), products=products)


def _held_edges(motion: Motion) -> list[tuple[bool, bool]]:
    """Return, for length and width, whether the first and the last edge stand still."""
    nodes = motion.nodes
    normal = np.einsum("nm,nm->n", motion.nodal[:, 2], motion.nodal[:, 2])
    held = []
    for axis in range(2):
        low, high = motion.low[axis], motion.high[axis]
        near = 1e-4 * (high - low)
        edges = (nodes[:, axis] < low + near, nodes[:, axis] > high - near)
        held.append(tuple(bool(normal[e].mean() < _HELD * normal.mean()) for e in edges))
    return held
