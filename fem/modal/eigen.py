"""Lowest modes of K u = lambda M u by a block Krylov method with shift and invert.

The operator A = (K - sigma M)^-1 M is symmetric in the inner product of M; its
largest eigenvalues theta = 1 / (lambda - sigma) are the lowest modes. A fixed
random block is multiplied by A again and again; every new block is made
M-orthogonal to all before it, so no ghost values arise (Grimes, Lewis & Simon,
"A shifted block Lanczos algorithm ...", SIAM J. Matrix Anal. 15 (1994) 228).

A Krylov space that starts from b random vectors holds every copy of an eigenvalue
of up to b copies, and b of more. Where as many as b of the wanted modes lie close
together, fresh random vectors made orthogonal to the space therefore probe what
it may have missed; what they find joins the space.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from ...geometry.errors import SolveError
from .krylov import Apply, Ritz, Space

#: Modes whose eigenvalues differ by less than this share belong together: 0.5 cent
#: of frequency.
CLUSTER = 2.0 ** (1.0 / 1200.0) - 1.0

#: Residual that the mode after the last wanted one must reach before its distance
#: is trusted.
_LOOSE = 1e-4

#: Modes this close (relative, in lambda) may be copies that the mesh has split.
_COPIES = 0.01

#: A probe whose theta comes this near to that of the last wanted mode has found
#: something.
_SUSPECT = 0.8


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Pairs:
    """Eigenvalues and vectors, ascending.

    Attributes
    ----------
    values : (m,) float
        lambda.
    vectors : (N, m) float
        M-orthonormal.
    residuals : (m,) float
        ||A u - theta u|| / theta in the norm of M.
    solves : int
        Right sides solved for.
    """

    values: np.ndarray
    vectors: np.ndarray
    residuals: np.ndarray
    solves: int


class NotConverged(SolveError):
    """The iteration stopped early; `pairs` holds the modes that had converged."""

    def __init__(self, message: str, pairs: Pairs) -> None:
        super().__init__(message)
        self.pairs = pairs


def lowest_modes(
    solve: Apply,
    apply_mass: Apply,
    draw: Callable[[int], np.ndarray],
    *,
    count: int | None = None,
    limit: float | None = None,
    sigma: float = 0.0,
    known: np.ndarray | None = None,
    block: int | None = None,
    tolerance: float = 1e-5,
    most_steps: int = 80,
    workers: int = 1,
) -> Pairs:
    """Return the lowest modes, clusters whole.

    Parameters
    ----------
    solve : (N, k) -> (N, k)
        (K - sigma M)^-1 b.
    apply_mass : (N, k) -> (N, k)
        M v.
    draw : k -> (N, k)
        Fresh random vectors in the space of motions; fixed seeds give the same
        digits on every run.
    count : int, optional
        Number of modes wanted; more are returned where the last belongs to a cluster.
    limit : float, optional
        No mode with lambda above this is wanted. One of `count` and `limit` is needed.
    sigma : float
        Shift, below the lowest eigenvalue wanted.
    known : (N, r) float, optional
        M-orthonormal eigenvectors to leave out, such as rigid motions.
    block : int, optional
        Vectors in a block.
    tolerance : float
        Relative residual of each mode before the last, free power of A (see
        `krylov.Space.answers`), which leaves vectors right to about a hundredth of it
        and eigenvalues to the square.
    most_steps : int
        Steps after which the iteration gives up.
    workers : int
        Threads for the dense work.

    Raises
    ------
    NotConverged
        With the modes that had converged.
    """
    if count is None and limit is None:
        raise ValueError("neither a number of modes nor a limit is given")
    space = Space(solve, apply_mass, draw, known, block or _block(count), workers)
    floor = 0.0 if limit is None else 1.0 / (limit - sigma)
    while True:
        space.step()
        ritz = space.ritz()
        wanted = _wanted(ritz, count, floor, sigma, tolerance, space.exhausted)
        if wanted is not None:
            values = sigma + 1.0 / ritz.theta[:wanted]
            if _most_copies(values) < space.block:
                return _pairs(space, ritz, wanted, sigma)
            if not space.widen(_SUSPECT * ritz.theta[wanted - 1]):
                return _pairs(space, ritz, wanted, sigma)
        elif space.exhausted or space.steps >= most_steps:
            good = _converged(ritz, tolerance)
            raise NotConverged(
                f"the eigen-solve stopped with {good} modes converged after {space.steps} "
                "steps; ask for fewer modes (solve.modes) or a lower limit (solve.up_to_hz)",
                _pairs(space, ritz, good, sigma),
            )


def _block(count: int | None) -> int:
    # Solving for 12 right sides takes two or three times as long as for one; larger
    # blocks save too few steps.
    return 12 if count is None else int(np.clip(0.6 * count, 8, 16))


def _most_copies(values: np.ndarray) -> int:
    """Return the largest number of values (ascending) that lie within a narrow band."""
    if len(values) == 0:
        return 0
    inside = np.searchsorted(values, values * (1.0 + _COPIES), side="right")
    return int((inside - np.arange(len(values))).max())


def _converged(ritz: Ritz, tolerance: float) -> int:
    """Return how many of the lowest modes have converged without a gap."""
    bad = np.flatnonzero(ritz.residuals > tolerance)
    return int(bad[0]) if len(bad) else len(ritz.theta)


def _wanted(
    ritz: Ritz, count: int | None, floor: float, sigma: float, tolerance: float, complete: bool
) -> int | None:
    """Return how many modes to keep, or None as long as that is not settled."""
    good = _converged(ritz, tolerance)
    inside = int((ritz.theta >= floor).sum())
    if complete:
        # The space holds everything there is.
        count = inside if count is None else min(count, inside)
        return count if count <= good else None
    wanted = inside if count is None else min(inside, count)
    if (count is None or inside < count) and not _settled(ritz, inside, floor):
        return None
    if wanted == 0 and count is not None and inside == 0 and floor == 0.0:
        return None
    if count is not None and floor == 0.0 and len(ritz.theta) < count:
        return None
    values = sigma + 1.0 / np.maximum(ritz.theta, 1e-300)
    while True:
        if wanted > good or wanted >= len(ritz.theta) or ritz.residuals[wanted] > _LOOSE:
            return None
        if wanted == 0 or values[wanted] > values[wanted - 1] * (1.0 + CLUSTER):
            return wanted
        wanted += 1


def _settled(ritz: Ritz, inside: int, floor: float) -> bool:
    """Whether no further mode can turn out to lie inside the limit."""
    if inside >= len(ritz.theta):
        return False
    return ritz.theta[inside] * (1.0 + ritz.residuals[inside]) < floor


def _pairs(space: Space, ritz: Ritz, count: int, sigma: float) -> Pairs:
    values, vectors = space.answers(ritz, count)
    return Pairs(
        values=sigma + values,
        vectors=vectors,
        residuals=ritz.residuals[:count],
        solves=space.solves,
    )
