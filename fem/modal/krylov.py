"""An M-orthonormal block Krylov space of a shifted and inverted operator."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
import scipy.linalg as sla

from .parallel import in_slices

Apply = Callable[[np.ndarray], np.ndarray]

#: Vectors V (N, k) and their products M V.
Pair = tuple[np.ndarray, np.ndarray]

#: A new direction smaller than this share of the block it came from is rounding.
_ROUNDING = 1e-12

#: Directions below this share of their block are made orthogonal once more.
_WEAK = 1e-4

#: Directions of a block down to this share of its strongest are normalised together.
_TRUSTED = 1e-6

#: Blocks whose norms differ by less are orthonormal to rounding after one pass.
_EVEN = 1e-2

#: Ritz vectors with a larger residual say nothing yet.
_USEFUL = 0.5

#: Fresh vectors that probe for what the space has missed, and how often they are
#: multiplied by the operator.
_PROBES, _PROBE_STEPS = 4, 3


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Ritz:
    """What the space says of the largest eigenvalues of A, descending.

    Attributes
    ----------
    theta : (m,) float
    mixes : (m, m) float
        Columns mix the basis to Ritz vectors.
    residuals : (m,) float
        ||A x - theta x|| / theta in the norm of M.
    """

    theta: np.ndarray
    mixes: np.ndarray
    residuals: np.ndarray


class Space:
    """The space, grown block by block.

    The basis Q of all vectors multiplied so far satisfies A Q = Q T + V C, where V
    is the block to be multiplied next and C is not zero for the last block only.
    Products with M are kept beside the vectors: they are needed at every step.

    Parameters
    ----------
    solve : (N, k) -> (N, k)
        (K - sigma M)^-1 b.
    apply_mass : (N, k) -> (N, k)
    draw : k -> (N, k)
        Fresh random vectors in the space of motions.
    known : (N, r) float or None
        M-orthonormal eigenvectors of A to stay orthogonal to.
    block : int
        Vectors in a block.
    workers : int
        Threads for the dense work.
    """

    def __init__(
        self,
        solve: Apply,
        apply_mass: Apply,
        draw: Callable[[int], np.ndarray],
        known: np.ndarray | None,
        block: int,
        workers: int = 1,
    ) -> None:
        self.block = block
        self._solve, self._apply_mass, self._draw = solve, apply_mass, draw
        self._workers = workers
        self._known: list[Pair] = []
        if known is not None and known.shape[1]:
            self._known = [(known, apply_mass(known))]
        self._blocks: list[Pair] = []
        self._projected = np.zeros((0, 0))
        self._coupling = np.zeros((0, 0))
        self.steps = self.solves = 0
        self._next, _ = self._orthonormal(draw(block), self._known)

    @property
    def exhausted(self) -> bool:
        """Whether there is no further direction."""
        return self._next[0].shape[1] == 0

    def step(self) -> None:
        """Multiply the next block by A and take it into the basis."""
        block, mass = self._next
        old, width = len(self._projected), block.shape[1]
        image = self._multiply(mass)
        own = mass.T @ image
        column = np.zeros((old + width, width))
        column[old:] = 0.5 * (own + own.T)
        image -= block @ column[old:]
        if self._blocks:
            # What the last step left in this block, by symmetry.
            previous = self._blocks[-1][0]
            before = self._coupling[:, -previous.shape[1] :].T
            column[old - len(before) : old] = before
            image -= previous @ before
        self._blocks.append(self._next)
        # So far the recurrence; what rounding leaves of the basis goes out next.
        self._next, root = self._orthonormal(image, [*self._known, *self._blocks])
        projected = np.zeros((old + width,) * 2)
        projected[:old, :old] = self._projected
        projected[:, old:] = column
        projected[old:] = column.T
        self._projected = projected
        self._coupling = np.hstack([np.zeros((len(root), old)), root])
        self.steps += 1

    def ritz(self) -> Ritz:
        """Return the Ritz values, mixes and residuals."""
        theta, mixes = sla.eigh(self._projected)
        theta, mixes = theta[::-1], mixes[:, ::-1]
        left = np.linalg.norm(self._coupling @ mixes, axis=0)
        return Ritz(theta=theta, mixes=mixes, residuals=left / np.maximum(np.abs(theta), 1e-300))

    def answers(self, ritz: Ritz, count: int) -> tuple[np.ndarray, np.ndarray]:
        """Return the `count` lowest values 1 / theta and their vectors (N, count).

        They are the best that A Q holds, one power of A beyond the basis: A Q = Q T + V C
        is at hand without another solve, and what it leaves of rough parts is smaller by
        a factor theta. With Ritz vectors x and w = A x / theta, w^T (K - sigma M) w is
        1 / theta and w^T M w is I + (C s / theta)^T (C s / theta).
        """
        good = (ritz.theta > 0.0) & (ritz.residuals < _USEFUL)
        good[:count] = True
        theta, mixes = ritz.theta[good], ritz.mixes[:, good]
        beyond = self._coupling @ mixes / theta
        values, turn = sla.eigh(np.diag(1.0 / theta), np.eye(len(theta)) + beyond.T @ beyond)
        turn = turn[:, :count]
        shares = np.split(mixes @ turn, np.cumsum([v.shape[1] for v, _ in self._blocks])[:-1])
        vectors = self._next[0] @ (beyond @ turn)
        for (block, _), share in zip(self._blocks, shares, strict=True):
            vectors += block @ share
        return values[:count], vectors

    def widen(self, above: float) -> bool:
        """Look outside the space for eigenvalues theta over `above`; take in what is found.

        Fresh vectors orthogonal to the space are multiplied by A a few times, inside
        its complement. Returns whether anything was found.
        """
        if self.exhausted:
            return False
        space = [*self._known, *self._blocks, self._next]
        fresh = self._multiply(self._apply_mass(self._draw(_PROBES)))
        current, _ = self._orthonormal(fresh, space)
        kept: list[Pair] = []
        projected = np.zeros((0, 0))
        for _ in range(_PROBE_STEPS):
            if current[0].shape[1] == 0:
                break
            kept.append(current)
            image = self._multiply(current[1])
            rows = np.vstack([mass.T @ image for _, mass in kept])
            old = len(projected)
            grown = np.zeros((len(rows),) * 2)
            grown[:old, :old] = projected
            grown[:, old:] = rows
            grown[old:] = rows.T
            projected = grown
            current, _ = self._orthonormal(image, [*space, *kept])
        if not kept:
            return False
        theta, mixes = sla.eigh(projected)
        found = mixes[:, theta > above]
        if found.shape[1] == 0:
            return False
        extra = (np.hstack([v for v, _ in kept]) @ found, np.hstack([m for _, m in kept]) @ found)
        self._next = (np.hstack([self._next[0], extra[0]]), np.hstack([self._next[1], extra[1]]))
        empty = np.zeros((found.shape[1], self._coupling.shape[1]))
        self._coupling = np.vstack([self._coupling, empty])
        return True

    def _multiply(self, mass_vectors: np.ndarray) -> np.ndarray:
        self.solves += mass_vectors.shape[1]
        return self._solve(mass_vectors)

    def _orthonormal(self, vectors: np.ndarray, others: Sequence[Pair]) -> tuple[Pair, np.ndarray]:
        """Return vectors made M-orthonormal and orthogonal to others; overwrites them.

        Returns
        -------
        V, M V : (N, k) float
        root : (k, b) float
            vectors = V root, up to what lies in the others.
        """
        parts = self._without(vectors, others)
        mass = self._apply_mass(vectors)
        square = np.einsum("ij,ij->j", parts, parts) + np.einsum("ij,ij->j", vectors, mass)
        start = np.sqrt(square.max(initial=0.0))
        pair, root = _normalised(vectors, mass, _ROUNDING * start)
        if len(root) and np.linalg.norm(root, axis=1).min() < _WEAK * start:
            # Little was left: what rounding left of the others weighs more now. A
            # second time is enough, unless nothing new was there at all.
            vectors = pair[0]
            self._without(vectors, others)
            pair, again = _normalised(vectors, self._apply_mass(vectors), 0.5)
            root = again @ root
        return pair, root

    def _without(self, vectors: np.ndarray, others: Sequence[Pair]) -> np.ndarray:
        """Take the parts along others out of vectors, in place; return those parts."""
        if not others:
            return np.zeros((0, vectors.shape[1]))
        rows = len(vectors)

        def measure(s: slice) -> np.ndarray:
            return np.vstack([mass[s].T @ vectors[s] for _, mass in others])

        parts = np.sum(in_slices(measure, rows, self._workers), axis=0)
        shares = np.split(parts, np.cumsum([v.shape[1] for v, _ in others])[:-1])

        def subtract(s: slice) -> None:
            for (other, _), share in zip(others, shares, strict=True):
                vectors[s] -= other[s] @ share

        in_slices(subtract, rows, self._workers)
        return parts


def _normalised(vectors: np.ndarray, mass: np.ndarray, floor: float) -> tuple[Pair, np.ndarray]:
    """Return V, M V, root with V M-orthonormal and vectors = V root; drop what is below floor."""
    rest, rest_mass = vectors, mass
    found: list[Pair] = []
    again = False
    while rest.shape[1]:
        square, turn = sla.eigh(rest.T @ rest_mass)
        norms = np.sqrt(np.maximum(square, 0.0))
        keep = norms > max(floor, _TRUSTED * norms.max())
        if not keep.any():
            break
        part, weak = turn[:, keep] / norms[keep], turn[:, ~keep]
        new, new_mass = rest @ part, rest_mass @ part
        found.append((new, new_mass))
        again |= bool(norms[keep].min() < _EVEN * norms.max())
        if weak.shape[1] == 0:
            break
        # Products of vectors tell directions this much weaker from rounding only
        # when the strong ones are gone.
        again = True
        rest, rest_mass = rest @ weak, rest_mass @ weak
        along = new.T @ rest_mass
        rest, rest_mass = rest - new @ along, rest_mass - new_mass @ along
    if not found:
        return (vectors[:, :0], mass[:, :0]), np.zeros((0, vectors.shape[1]))
    new, new_mass = found[0] if len(found) == 1 else map(np.hstack, zip(*found, strict=True))
    if again:
        inverse = sla.inv(sla.cholesky(new.T @ new_mass))
        new, new_mass = new @ inverse, new_mass @ inverse
    return (new, new_mass), new.T @ mass
