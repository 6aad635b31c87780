"""Clusters of equal modes, and the basis of each that its name stands for.

Modes of equal frequency can be mixed freely, and a solver mixes them at whim.
A fixed basis is found by diagonalising one energy after another within the
cluster: those that one cannot tell apart go on to the next.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np

#: Modes nearer than this, in cents, are one cluster.
CENTS = 0.5

#: Energies (shares of 1) nearer than this do not tell two vectors apart.
_ALIKE = 0.05

#: Given the members of a cluster, its energy products (k, k) in order of use; the
#: vector with the larger energy comes first.
Criteria = Callable[[np.ndarray], Sequence[np.ndarray]]


def clusters(frequencies: np.ndarray) -> tuple[np.ndarray, ...]:
    """Return runs of indices of modes within `CENTS` of the next; ascending frequencies."""
    cents = 1200.0 * np.log2(frequencies[1:] / frequencies[:-1])
    cuts = np.flatnonzero(cents > CENTS) + 1
    return tuple(np.split(np.arange(len(frequencies)), cuts))


def rotation(frequencies: np.ndarray, criteria: Criteria, *, keep_order: bool) -> np.ndarray:
    """Return the orthogonal (m, m) that turns every cluster into its fixed basis.

    Parameters
    ----------
    frequencies : (m,) Hz, ascending
    criteria : see `Criteria`
    keep_order : bool
        Order the vectors of a cluster by the criteria (bodies whose symmetry
        makes the modes equal); otherwise by their own frequency.
    """
    turn = np.eye(len(frequencies))
    for members in clusters(frequencies):
        if len(members) < 2:
            continue
        basis = refine(criteria(members), len(members))
        if not keep_order:
            squares = basis**2 @ frequencies[members] ** 2
            basis = basis[np.argsort(squares, kind="stable")]
        turn[np.ix_(members, members)] = basis
    return turn


def refine(products: Sequence[np.ndarray], size: int) -> np.ndarray:
    """Return an orthogonal (size, size) whose rows diagonalise `products` one after another."""
    groups = [np.eye(size)]
    for product in products:
        split: list[np.ndarray] = []
        for basis in groups:
            values, vectors = np.linalg.eigh(basis @ product @ basis.T)
            order = np.argsort(-values, kind="stable")
            cuts = np.flatnonzero(-np.diff(values[order]) > _ALIKE) + 1
            split += np.split(vectors.T[order] @ basis, cuts)
        groups = split
    return np.concatenate(groups)
