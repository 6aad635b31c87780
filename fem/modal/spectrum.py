"""From a system to its frequencies and shapes."""

from __future__ import annotations

import time
from dataclasses import dataclass, replace

import numpy as np
import scipy.linalg as sla

from ...geometry.errors import SolveError
from .direct.factor import Factor, factorise
from .direct.inertia import negative_eigenvalues
from .direct.triangle import Upper
from .eigen import CLUSTER, lowest_modes
from .krylov import Apply
from .memory import NoRoom
from .mesh_error import Excess, excess
from .parallel import SplitMatrix
from .singular import saturation
from .surface import facet_areas
from .system import System
from .threads import threads

#: Seed of the start block: the same digits on every run.
_SEED = 20260101

#: Shift of parts that can move rigidly, as a share of the estimated lowest
#: eigenvalue. Rigid motions are projected out, so a small shift does no harm; it
#: must only stand clear of rounding in the factorisation.
_SHIFT, _GROW, _TRIES = 1e-3, 100.0, 4

#: Where to count modes: above the last one by this share of a cluster's width.
_ABOVE = 0.5

#: Block sizes of further searches where modes were missed.
_BLOCKS = (24, 48)


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Spectrum:
    """Elastic modes of a system, ascending.

    Attributes
    ----------
    frequencies : (m,) float, Hz
    shapes : (m, n, 3) float, 1/sqrt(kg)
        Mass-orthonormal displacement at every node.
    residuals : (m,) float
        ||K u - lambda M u|| / ||K u||.
    rigid_modes : number of rigid-body modes left out
    direct_solver : name of the factorisation
    seconds : s by stage, ``factor`` and ``eigen``
    solves : right sides solved for
    missing : modes below the last one that the iteration did not find, by the inertia
        of a shifted factorisation; None where it was not counted
    excess : estimated excess of each eigenvalue over the converged one, or None
    countable : the direct solver can count modes by inertia
    """

    frequencies: np.ndarray
    shapes: np.ndarray
    residuals: np.ndarray
    rigid_modes: int
    direct_solver: str
    seconds: dict[str, float]
    solves: int
    missing: int | None = None
    excess: Excess | None = None
    countable: bool = False

    def ordered(self, order: np.ndarray) -> Spectrum:
        """Return the same modes in another order."""
        surplus = self.excess
        return replace(
            self,
            frequencies=self.frequencies[order],
            shapes=self.shapes[order],
            residuals=self.residuals[order],
            excess=surplus
            and Excess(relative=surplus.relative[order], by_cell=surplus.by_cell[:, order]),
        )


def converged(spectrum: Spectrum) -> tuple[np.ndarray, np.ndarray]:
    """Return the best frequencies (m,), Hz, ascending, and the order (m,) of their modes.

    The estimated mesh error is taken off. Modes of one cluster share the mean
    of theirs: what tells them apart is the mesh, not the part.
    """
    raw = spectrum.frequencies
    if spectrum.excess is None:
        return raw, np.arange(len(raw))
    cluster = np.concatenate([[0], np.cumsum(np.diff(raw) > 0.5 * CLUSTER * raw[:-1])])
    surplus = np.minimum(spectrum.excess.relative, 0.5)
    shared = np.bincount(cluster, surplus) / np.bincount(cluster)
    best = raw * np.sqrt(1.0 - shared[cluster])
    order = np.argsort(best, kind="stable")
    return best[order], order


def solve_spectrum(
    system: System,
    *,
    modes: int | None = 12,
    up_to_hz: float | None = None,
    library: str | None = None,
    thread_count: int | None = None,
    estimate: bool = False,
    count: bool = False,
    prove: bool = False,
) -> Spectrum:
    """Return the lowest elastic modes of a system; clusters are whole.

    Parameters
    ----------
    system : System
    modes : int, optional
        Number wanted. More are returned where the last belongs to a cluster.
    up_to_hz : float, optional
        None above this is wanted. With `modes` too, both bounds hold.
    library : str, optional
        Direct solver; see `direct.factor.factorise`.
    thread_count : int, optional
        See `threads.threads`.
    estimate : bool
        Whether to estimate the mesh error of each mode.
    count : bool
        Whether to count the modes by inertia, where the library can.
    prove : bool
        Whether to count them by a slower factorisation where it cannot.

    Raises
    ------
    SolveError
        If the factorisation fails or the iteration does not converge.
    """
    with threads(thread_count, library) as workers:
        began = time.perf_counter()
        sigma, factor = _factor(system, library)
        count = (count and factor.counts) or prove
        factored = time.perf_counter()
        try:
            found = _search(system, factor, sigma, modes, up_to_hz, None, workers)
            missing = _missing(system, found.values, library, factor.counts) if count else None
            for block in _BLOCKS if missing else ():
                # The count says that modes were missed: search again in larger blocks.
                found = _search(system, factor, sigma, modes, up_to_hz, block, workers)
                missing = _missing(system, found.values, library, factor.counts)
                if not missing:
                    break
            solved = time.perf_counter()
            wanted = estimate and len(found.values) > 0
            surplus = _excess(system, factor, sigma, found) if wanted else None
            name, countable = factor.name, factor.counts
        finally:
            factor.close()
        estimated = time.perf_counter()
    values = found.values
    if len(values) and values[0] <= 0.0:
        raise SolveError(
            "a mode without stiffness is left beside the rigid motions; "
            "the mesh may consist of several bodies that do not touch"
        )
    if missing:
        raise SolveError(
            f"{missing} modes below {np.sqrt(values[-1]) / (2 * np.pi):.6g} Hz were not found, "
            "though the inertia of the stiffness matrix proves that they exist; "
            "ask for more modes (solve.modes) or another mesh (solve.size)"
        )
    return Spectrum(
        frequencies=np.sqrt(values) / (2.0 * np.pi),
        shapes=found.shapes,
        residuals=found.residuals,
        rigid_modes=system.rigid.shape[1],
        direct_solver=name,
        seconds={
            "factor": factored - began,
            "eigen": solved - factored,
            "mesh_error": estimated - solved,
        },
        solves=found.solves,
        missing=missing,
        excess=surplus,
        countable=countable,
    )


def counted(
    system: System,
    spectrum: Spectrum,
    *,
    modes: int | None = 12,
    up_to_hz: float | None = None,
    prove: bool = False,
) -> Spectrum:
    """Return a spectrum whose modes were counted after the solve; solved anew if some are missing.

    Parameters
    ----------
    system : System
    spectrum : Spectrum
        Of `solve_spectrum` with the same `modes` and `up_to_hz`.
    prove : bool
        As in `solve_spectrum`.

    Raises
    ------
    SolveError
        If modes are missing and are not found in larger blocks.
    """
    if not (spectrum.countable or prove):
        return spectrum
    began = time.perf_counter()
    values = (2.0 * np.pi * spectrum.frequencies) ** 2
    with threads(None):
        missing = _missing(system, values, None, spectrum.countable)
    if missing:
        return solve_spectrum(
            system, modes=modes, up_to_hz=up_to_hz, estimate=True, count=True, prove=prove
        )
    seconds = dict(spectrum.seconds)
    seconds["eigen"] += time.perf_counter() - began
    return replace(spectrum, missing=missing, seconds=seconds)


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class _Found:
    """Eigenvalues (m,), shapes (m, n, 3), residuals (m,), and the right sides solved for."""

    values: np.ndarray
    shapes: np.ndarray
    residuals: np.ndarray
    solves: int


def _search(
    system: System,
    factor: Factor,
    sigma: float,
    modes: int | None,
    up_to_hz: float | None,
    block: int | None,
    workers: int,
) -> _Found:
    constraint = system.constraint
    mass, nodes = SplitMatrix(system.mass, workers), len(constraint.free)

    def solve(b: np.ndarray) -> np.ndarray:
        return constraint.to_vectors(factor.solve(constraint.to_unknowns(b)))

    def apply_mass(v: np.ndarray) -> np.ndarray:
        return (mass @ np.ascontiguousarray(v).reshape(nodes, -1)).reshape(v.shape)

    pairs = lowest_modes(
        solve,
        apply_mass,
        _draw(system),
        count=modes,
        limit=None if up_to_hz is None else (2.0 * np.pi * up_to_hz) ** 2,
        sigma=sigma,
        known=system.rigid,
        block=block,
        workers=workers,
    )
    values, vectors, residuals = _refined(system, pairs.vectors, apply_mass)
    shapes = np.ascontiguousarray(vectors.T).reshape(len(values), nodes, 3)
    return _Found(values=values, shapes=shapes, residuals=residuals, solves=pairs.solves)


def _missing(system: System, values: np.ndarray, library: str | None, counts: bool) -> int | None:
    """Return how many eigenvalues up to the last of `values` are not among them.

    By Sylvester's law of inertia the negative pivots of K - s M are the modes
    below s; s is a fraction of a cluster's width above the last value. None
    where there is nothing to count, or no room for a second factorisation.
    """
    if len(values) == 0:
        return None
    upper = system.shifted(values[-1] * (1.0 + _ABOVE * CLUSTER))
    try:
        below = _negative_pivots(upper, library) if counts else negative_eigenvalues(upper)
    except NoRoom:
        return None
    return None if below is None else below - len(values) - system.rigid.shape[1]


def _negative_pivots(upper: Upper, library: str | None) -> int | None:
    factor = factorise(upper, positive=False, library=library)
    try:
        return factor.negative_pivots
    finally:
        factor.close()


def _excess(system: System, factor: Factor, sigma: float, found: _Found) -> Excess:
    constraint = system.constraint
    allowed = None if constraint.free.all() else constraint.projectors()

    def back_solve(forces: np.ndarray) -> np.ndarray:
        flat = forces.reshape(-1, forces.shape[2])
        return constraint.to_vectors(factor.solve(constraint.to_unknowns(flat))).reshape(
            forces.shape
        )

    return excess(
        system.mesh,
        system.material.stiffness(),
        system.material.density,
        found.values,
        found.shapes,
        back_solve,
        shift=sigma,
        allowed=allowed,
        saturation=saturation(system.mesh, allowed),
        beds=system.beds,
    )


def _factor(system: System, library: str | None) -> tuple[float, Factor]:
    # On soft springs a part is nearly free, and K alone nearly singular.
    if system.rigid.shape[1] == 0 and not system.beds:
        return 0.0, factorise(system.stiffness, library=library)
    sigma = -_SHIFT * _lowest_estimate(system)
    for attempt in range(_TRIES):
        try:
            return sigma, factorise(system.shifted(sigma), library=library)
        except SolveError:
            if attempt + 1 == _TRIES:
                raise
        sigma *= _GROW
    raise AssertionError


def _lowest_estimate(system: System) -> float:
    """Return the order of magnitude of the lowest elastic eigenvalue of a free part, 1/s2.

    That of a free bar of the part's mean thickness 2 V / S and its diagonal:
    omega = 22.4 c t / (sqrt(12) L^2). Balls come out 4 times low in frequency, thin
    rings 2 times; parts with one slender limb on a stout body too high.
    """
    mesh = system.mesh
    corners = mesh.points[mesh.cells[:, :4]]
    volume = np.abs(np.linalg.det(corners[:, 1:] - corners[:, :1])).sum() / 6.0
    thickness = 2.0 * volume / facet_areas(mesh.points, mesh.facets).sum()
    diagonal = np.linalg.norm(np.ptp(mesh.points, axis=0))
    omega = 22.4 / np.sqrt(12.0) * system.wave_speed * thickness / diagonal**2
    return float(omega**2)


def _draw(system: System):
    generator = np.random.default_rng(_SEED)
    constraint = system.constraint
    width = 3 * len(constraint.moving)

    def draw(count: int) -> np.ndarray:
        return constraint.to_vectors(generator.standard_normal((width, count)))

    return draw


def _refined(
    system: System, vectors: np.ndarray, apply_mass: Apply
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return values, vectors and residuals from the quotients u^T K u.

    Those are free of the rounding of the factorisation, which at 1e-9 of a
    frequency differs from library to library.
    """
    if vectors.shape[1] == 0:
        return np.zeros(0), vectors, np.zeros(0)
    elastic = system.apply_stiffness(vectors)
    reduced = system.constraint.to_unknowns(vectors)
    inertia = system.constraint.to_unknowns(apply_mass(vectors))
    values, turn = sla.eigh(_even(reduced.T @ elastic), _even(reduced.T @ inertia))
    elastic, inertia = elastic @ turn, inertia @ turn
    size = np.linalg.norm(elastic, axis=0)
    return values, vectors @ turn, np.linalg.norm(elastic - inertia * values, axis=0) / size


def _even(matrix: np.ndarray) -> np.ndarray:
    return 0.5 * (matrix + matrix.T)
