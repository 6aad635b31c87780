"""From a system to its frequencies and shapes."""

from __future__ import annotations

import time
from dataclasses import dataclass

import numpy as np

from ...geometry.errors import SolveError
from .direct.factor import Factor, factorise
from .eigen import lowest_modes
from .surface import facet_areas
from .system import System
from .threads import threads

#: Seed of the start block: the same digits on every run.
_SEED = 20260101

#: Shift of parts that can move rigidly, as a share of the estimated lowest
#: eigenvalue. Rigid motions are projected out, so a small shift does no harm; it
#: must only stand clear of rounding in the factorisation.
_SHIFT, _GROW, _TRIES = 1e-3, 100.0, 4


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
    """

    frequencies: np.ndarray
    shapes: np.ndarray
    residuals: np.ndarray
    rigid_modes: int
    direct_solver: str
    seconds: dict[str, float]
    solves: int


def solve_spectrum(
    system: System,
    *,
    modes: int | None = 12,
    up_to_hz: float | None = None,
    library: str | None = None,
    thread_count: int | None = None,
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

    Raises
    ------
    SolveError
        If the factorisation fails or the iteration does not converge.
    """
    with threads(thread_count):
        began = time.perf_counter()
        sigma, factor = _factor(system, library)
        factored = time.perf_counter()
        try:
            pairs = lowest_modes(
                lambda b: system.constraint.to_vectors(
                    factor.solve(system.constraint.to_unknowns(b))
                ),
                system.apply_mass,
                _draw(system),
                count=modes,
                limit=None if up_to_hz is None else (2.0 * np.pi * up_to_hz) ** 2,
                sigma=sigma,
                known=system.rigid,
            )
            name = factor.name
        finally:
            factor.close()
        values, vectors, residuals = _refined(system, pairs.vectors)
        solved = time.perf_counter()
    if len(values) and values[0] <= 0.0:
        raise SolveError(
            "a mode without stiffness is left beside the rigid motions; "
            "the mesh may consist of several bodies that do not touch"
        )
    return Spectrum(
        frequencies=np.sqrt(values) / (2.0 * np.pi),
        shapes=np.ascontiguousarray(vectors.T).reshape(len(values), len(system.mesh.points), 3),
        residuals=residuals,
        rigid_modes=system.rigid.shape[1],
        direct_solver=name,
        seconds={"factor": factored - began, "eigen": solved - factored},
        solves=pairs.solves,
    )


def _factor(system: System, library: str | None) -> tuple[float, Factor]:
    if system.rigid.shape[1] == 0:
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

    def draw(count: int) -> np.ndarray:
        return constraint.to_vectors(generator.standard_normal((constraint.unknowns, count)))

    return draw


def _refined(system: System, vectors: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return values, vectors and residuals from the quotients u^T K u.

    Those are free of the rounding of the factorisation, which at 1e-9 of a
    frequency differs from library to library.
    """
    if vectors.shape[1] == 0:
        return np.zeros(0), vectors, np.zeros(0)
    elastic = system.apply_stiffness(vectors)
    energy = system.constraint.to_unknowns(vectors).T @ elastic
    values, turn = np.linalg.eigh(0.5 * (energy + energy.T))
    vectors, elastic = vectors @ turn, elastic @ turn
    inertia = system.constraint.to_unknowns(system.apply_mass(vectors))
    size = np.linalg.norm(elastic, axis=0)
    return values, vectors, np.linalg.norm(elastic - inertia * values, axis=0) / size
