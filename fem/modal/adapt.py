"""A mesh as fine as an accuracy asks for: solve, see where the error lies, refine there.

The part of a mode's error that comes from a cell of size h goes as h^q, with q = 4 in
smooth places (second-order cells) and q = 2 a at an edge where displacement behaves
as r^a. The fewest cells for a given error then have sizes that share it out equally
(Zienkiewicz and Zhu, Int. J. Numer. Meth. Eng. 24 (1987) 337); with several modes,
equally by a weighted sum, whose weights make the worst modes just good enough.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import scipy.sparse as sp

from ...geometry.errors import MeshError
from ...geometry.mesh import EDGES, Mesh
from ...geometry.mesher import generate
from ...geometry.size_field import SizeField
from ...geometry.solid import Patch
from .case import Case
from .memory import affordable_unknowns
from .singular import exponents
from .spectrum import Spectrum, converged, solve_spectrum
from .system import System, build_system

#: Unknowns that no refinement goes beyond, however much memory there is.
MOST_UNKNOWNS = 400_000

#: Meshes tried at most.
MOST_MESHES = 7

#: The share of the accuracy that a new mesh aims at: it never turns out as planned.
_AIM = 0.75

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

#: A step that leaves more than this share of the error has brought nothing.
_LITTLE = 0.85

#: A mesh this near the limit of unknowns is at it.
_AT_LIMIT = 0.7


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Adapted:
    """The mesh that an accuracy led to, with its modes.

    Attributes
    ----------
    mesh : Mesh
        At 20 degrees C.
    system : System
    spectrum : Spectrum
        With the estimate, not counted.
    meshes : number of meshes that were solved
    warnings : why the accuracy was not reached, if so
    """

    mesh: Mesh
    system: System
    spectrum: Spectrum
    meshes: int = 1
    warnings: tuple[str, ...] = ()


def mesh_cents(spectrum: Spectrum) -> np.ndarray:
    """Return how sharp the frequency of each mode (m,) is for its mesh, cents, in best order."""
    best, order = converged(spectrum)
    return 1200.0 * np.log2(spectrum.frequencies[order] / best)


def adapt(
    case: Case,
    accuracy: float,
    *,
    patches: tuple[Patch, ...] = (),
    progress: Callable[[str], None] | None = None,
) -> Adapted:
    """Mesh and solve a case until no mode's estimated mesh error is over the accuracy.

    Parameters
    ----------
    case : Case
        Its shape, mounts, masses, temperature and number of modes.
    accuracy : float
        Cents.
    patches : tuple of Patch
        Imprinted on the shape.
    progress : callable, optional
        Called with a few words at each stage.

    Raises
    ------
    InputError
        If the shape, a mount or a mass is impossible.
    MeshError, SolveError, ToolError
        If not even the first mesh could be made and solved.
    """
    say = progress or _silent
    say("meshing coarsely")
    found = _solved(case, generate(case.shape, patches=patches, coarse=True), 1, say)
    best, worst, idle = found, _worst(found), 0
    while True:
        if _worst(found) <= accuracy:
            return found
        plan, unknowns = _plan(found, accuracy)
        limit = min(MOST_UNKNOWNS, affordable_unknowns())
        reason = None
        if case.shape.family.mesh is not None:
            reason = "the part is a mesh already and is taken as it is"
        elif unknowns > limit and _unknowns(found.mesh) > _AT_LIMIT * limit:
            reason = (
                f"it would take about {_about(unknowns)} unknowns, "
                f"and {_about(limit)} are the limit here"
            )
        elif found.meshes == MOST_MESHES or idle > 1:
            reason = _where(found)
        if reason is None:
            if unknowns > limit:
                plan = _coarser(plan, (unknowns / limit) ** (1.0 / 3.0))
            say(f"meshing anew: error up to {_worst(found):.2g} cents")
            try:
                mesh = generate(case.shape, patches=patches, size_field=plan)
            except MeshError as error:
                reason = f"the mesh could not be made finer ({error})"
            else:
                if _unknowns(mesh) > limit / _AT_LIMIT:
                    reason = f"it takes over {_about(limit)} unknowns, which is the limit here"
        if reason is not None:
            return _given_up(best, accuracy, found.meshes, reason)
        found = _solved(case, mesh, found.meshes + 1, say)
        idle = idle + 1 if _worst(found) > _LITTLE * worst else 0
        if _worst(found) < worst:
            best, worst = found, _worst(found)


def unmet(spectrum: Spectrum, accuracy: float | None, reason: str) -> tuple[str, ...]:
    """Return one sentence where the mesh error is over the accuracy, else none."""
    worst = float(np.abs(mesh_cents(spectrum)).max(initial=0.0))
    if accuracy is None or worst <= accuracy:
        return ()
    return (
        f"accuracy_cents = {accuracy:g} was not reached, the mesh error is up to "
        f"{worst:.2g} cents: {reason}",
    )


def _given_up(best: Adapted, accuracy: float, meshes: int, reason: str) -> Adapted:
    return Adapted(
        mesh=best.mesh,
        system=best.system,
        spectrum=best.spectrum,
        meshes=meshes,
        warnings=unmet(best.spectrum, accuracy, reason),
    )


def _solved(case: Case, mesh: Mesh, meshes: int, say: Callable[[str], None]) -> Adapted:
    say(f"solving mesh {meshes}: {_unknowns(mesh)} unknowns")
    system = build_system(case, mesh)
    settings = case.settings
    spectrum = solve_spectrum(system, modes=settings.modes, up_to_hz=settings.up_to, estimate=True)
    return Adapted(mesh=mesh, system=system, spectrum=spectrum, meshes=meshes)


def _worst(found: Adapted) -> float:
    return float(np.abs(mesh_cents(found.spectrum)).max(initial=0.0))


def _unknowns(mesh: Mesh) -> int:
    return 3 * len(mesh.points)


def _plan(found: Adapted, accuracy: float) -> tuple[SizeField, float]:
    """Return the sizes that should bring every mode inside, and about how many unknowns then."""
    mesh, surplus = found.mesh, found.spectrum.excess
    assert surplus is not None
    powers = 2.0 * _exponents(found)
    powers = np.where(powers < 2.0, powers, 4.0)
    # Cents c of a frequency are a share 1 - 2^(-c / 600) of its eigenvalue.
    allowed = 1.0 - 2.0 ** (-_AIM * accuracy / 600.0)
    corners, where = np.unique(mesh.cells[:, :4], return_inverse=True)
    cells = where.reshape(-1, 4)
    points = 1e3 * mesh.points[corners]
    corner = points[cells]
    volume = np.abs(np.linalg.det(corner[:, 1:] - corner[:, :1])) / 6.0
    ends = np.sort(cells[:, EDGES], axis=2)
    lengths = np.linalg.norm(points[ends[..., 0]] - points[ends[..., 1]], axis=2)
    sizes = np.median(lengths, axis=1) / _EDGE
    factors = size_factors(smoothed(surplus.by_cell / allowed, cells, volume), powers)
    # Nodes take the mean density of the cells round them.
    density = np.repeat((sizes * factors) ** -3.0, 4)
    around = np.bincount(cells.ravel(), density) / np.bincount(cells.ravel())
    wanted = graded(points, np.unique(ends.reshape(-1, 2), axis=0), around ** (-1.0 / 3.0))
    ladder = _LADDER ** np.round(np.log(wanted) / np.log(_LADDER))
    count = _CELLS * float(volume @ (ladder[cells] ** -3.0).mean(axis=1))
    unknowns = _unknowns(mesh) / len(mesh.cells) * count
    return SizeField(points=points, cells=cells, sizes=ladder), unknowns


def _exponents(found: Adapted) -> np.ndarray:
    constraint = found.system.constraint
    return exponents(found.mesh, None if constraint.free.all() else constraint.projectors())


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


def _coarser(plan: SizeField, factor: float) -> SizeField:
    return SizeField(points=plan.points, cells=plan.cells, sizes=plan.sizes * factor)


def _where(found: Adapted) -> str:
    """Return a sentence on where the error of the worst mode lies."""
    mesh, surplus = found.mesh, found.spectrum.excess
    assert surplus is not None
    share = surplus.by_cell[:, int(np.argmax(surplus.relative))]
    share = share / share.sum()
    sharp = _exponents(found) < 1.0
    meshes = f"{found.meshes} meshes did not bring it lower"
    if share[sharp].sum() < 0.5:
        return f"{meshes}; try a smaller size"
    at_node = np.zeros(len(mesh.points))
    worst = np.flatnonzero(sharp)[np.argsort(-share[sharp], kind="stable")[:20]]
    np.add.at(at_node, mesh.cells[worst, :4], share[worst, None])
    weights = {
        name: float(at_node[mesh.facets[facets][:, :3]].sum()) / max(len(facets), 1) ** 0.5
        for name, facets in mesh.faces.items()
    }
    names = sorted(weights, key=lambda name: -weights[name])[:2]
    edge = " and ".join(repr(name) for name in names)
    return (
        f"{meshes}; {100.0 * share[sharp].sum():.0f} % of the error is at sharp edges, "
        f"most at the edge of {edge}: a fillet there, or a clamp that gives a little, "
        "has less of it"
    )


def _about(number: float) -> str:
    return f"{float(f'{number:.2g}'):,.0f}".replace(",", " ")


def _silent(words: str) -> None:
    """Say nothing."""
