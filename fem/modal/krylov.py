"""An M-orthonormal block Krylov space of a shifted and inverted operator."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import scipy.linalg as sla

from .parallel import in_slices

Apply = Callable[[np.ndarray], np.ndarray]

#: Columns in one piece of storage of the basis.
_PIECE = 64

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
        self._basis = _Columns(block, workers)
        self._projected = np.zeros((0, 0))
        self._coupling = np.zeros((0, 0))
        self._previous: np.ndarray | None = None
        self._known = known if known is not None and known.shape[1] else None
        self.steps = self.solves = 0
        self._next, self._next_mass, _ = self._orthonormal(draw(block))

    @property
    def exhausted(self) -> bool:
        """Whether there is no further direction."""
        return self._next.shape[1] == 0

    @property
    def size(self) -> int:
        """Number of vectors in the basis."""
        return len(self._projected)

    def step(self) -> None:
        """Multiply the next block by A and take it into the basis."""
        block, mass = self._next, self._next_mass
        old, width = self.size, block.shape[1]
        image = self._multiply(mass)
        own = mass.T @ image
        column = np.zeros((old + width, width))
        column[old:] = 0.5 * (own + own.T)
        image -= block @ column[old:]
        if self._previous is not None:
            # What the last step left in this block, by symmetry.
            before = self._coupling[:, -self._previous.shape[1] :].T
            column[old - len(before) : old, : before.shape[1]] = before
            image -= self._previous @ column[old - len(before) : old]
        self._basis.append(block)
        # The part so far is exact; what rounding leaves is taken out by the whole
        # basis in the next line.
        following, following_mass, root = self._orthonormal(image)
        projected = np.zeros((old + width,) * 2)
        projected[:old, :old] = self._projected
        projected[:, old:] = column
        projected[old:] = column.T
        self._projected = projected
        self._coupling = np.hstack([np.zeros((len(root), old)), root])
        self._previous = block
        self._next, self._next_mass = following, following_mass
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
        return values[:count], self._basis.mix(mixes @ turn) + self._next @ (beyond @ turn)

    def widen(self, above: float) -> bool:
        """Look outside the space for eigenvalues theta over `above`; take in what is found.

        Fresh vectors orthogonal to the space are multiplied by A a few times, inside
        its complement. Returns whether anything was found.
        """
        if self.exhausted:
            return False
        kept: list[np.ndarray] = []
        aside = [self._next]
        vectors, mass, _ = self._orthonormal(
            self._multiply(self._apply_mass(self._draw(_PROBES))), aside
        )
        projected = np.zeros((0, 0))
        for _ in range(_PROBE_STEPS):
            if vectors.shape[1] == 0:
                break
            kept.append(vectors)
            image = self._multiply(mass)
            rows = np.vstack([self._apply_mass(v).T @ image for v in kept])
            old = len(projected)
            grown = np.zeros((len(rows),) * 2)
            grown[:old, :old] = projected
            grown[:, old:] = rows
            grown[old:] = rows.T
            projected = grown
            vectors, mass, _ = self._orthonormal(image, aside + kept)
        if not kept:
            return False
        theta, mixes = sla.eigh(projected)
        found = theta > above
        if not found.any():
            return False
        extra = np.hstack(kept) @ mixes[:, found]
        self._next = np.hstack([self._next, extra])
        self._next_mass = np.hstack([self._next_mass, self._apply_mass(extra)])
        self._coupling = np.vstack(
            [self._coupling, np.zeros((extra.shape[1], self._coupling.shape[1]))]
        )
        return True

    def _multiply(self, mass_vectors: np.ndarray) -> np.ndarray:
        self.solves += mass_vectors.shape[1]
        return self._solve(mass_vectors)

    def _orthonormal(
        self, vectors: np.ndarray, aside: list[np.ndarray] | None = None
    ) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """Return vectors made M-orthonormal and orthogonal to everything else.

        Returns
        -------
        V, M V : (N, k) float
        root : (k, b) float
            vectors = V root, up to what lies in the space already.
        """
        mass = self._apply_mass(vectors)
        start = np.sqrt(np.einsum("ij,ij->j", vectors, mass).max(initial=0.0))
        others = [self._known, self._basis, *(aside or [])]
        vectors = _without(vectors, mass, others)
        vectors, mass, root = _normalised(vectors, self._apply_mass(vectors), _ROUNDING * start)
        if len(root) and np.linalg.norm(root, axis=1).min() < _WEAK * start:
            # Little was left: what rounding left of the others weighs more now. A
            # second time is enough, unless nothing new was there at all.
            vectors = _without(vectors, mass, others)
            vectors, mass, again = _normalised(vectors, self._apply_mass(vectors), 0.5)
            root = again @ root
        return vectors, mass, root


def _normalised(
    vectors: np.ndarray, mass: np.ndarray, floor: float
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return V, M V, root with V M-orthonormal and vectors = V root; drop what is below floor."""
    rest, rest_mass = vectors, mass
    found: list[tuple[np.ndarray, np.ndarray]] = []
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
        return vectors[:, :0], mass[:, :0], np.zeros((0, vectors.shape[1]))
    new, new_mass = found[0] if len(found) == 1 else map(np.hstack, zip(*found, strict=True))
    if again:
        inverse = sla.inv(sla.cholesky(new.T @ new_mass))
        new, new_mass = new @ inverse, new_mass @ inverse
    return new, new_mass, new.T @ mass


def _without(
    vectors: np.ndarray, mass: np.ndarray, others: list[np.ndarray | _Columns | None]
) -> np.ndarray:
    """Return vectors less their parts along other M-orthonormal ones."""
    for other in others:
        if isinstance(other, _Columns):
            vectors = other.remove(vectors, mass)
        elif other is not None:
            vectors = vectors - other @ (other.T @ mass)
    return vectors


class _Columns:
    """Columns appended block by block, in pieces, so that nothing is copied."""

    def __init__(self, block: int, workers: int) -> None:
        self._workers = workers
        self._width = max(_PIECE, block)
        self._pieces: list[np.ndarray] = []
        self._used = 0

    def append(self, block: np.ndarray) -> None:
        done = 0
        while done < block.shape[1]:
            if not self._pieces or self._used == self._width:
                self._pieces.append(np.empty((len(block), self._width), order="F"))
                self._used = 0
            take = min(self._width - self._used, block.shape[1] - done)
            self._pieces[-1][:, self._used : self._used + take] = block[:, done : done + take]
            self._used += take
            done += take

    def _parts(self) -> list[np.ndarray]:
        return [
            piece if k + 1 < len(self._pieces) else piece[:, : self._used]
            for k, piece in enumerate(self._pieces)
        ]

    def remove(self, vectors: np.ndarray, mass: np.ndarray) -> np.ndarray:
        """Return vectors less their parts along these columns."""
        rows = len(vectors)
        for part in self._parts():
            shares = in_slices(lambda s, q=part: q[s].T @ mass[s], rows, self._workers)
            along = np.sum(shares, axis=0)

            def subtract(s: slice, q: np.ndarray = part, c: np.ndarray = along) -> None:
                vectors[s] -= q[s] @ c

            in_slices(subtract, rows, self._workers)
        return vectors

    def mix(self, mixes: np.ndarray) -> np.ndarray:
        first, total = 0, None
        for part in self._parts():
            product = part @ mixes[first : first + part.shape[1]]
            total = product if total is None else total + product
            first += part.shape[1]
        assert total is not None
        return total
