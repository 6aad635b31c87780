"""A mesh as fine as an accuracy asks for: solve, see where the error lies, refine there."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from time import perf_counter

import numpy as np

from ...geometry.errors import MeshError
from ...geometry.mesh import Mesh
from ...geometry.mesher import generate
from ...geometry.solid import Patch
from .case import Case
from .memory import NoRoom, affordable_unknowns
from .refinement import Plan, plan
from .singular import exponents
from .spectrum import Spectrum, converged, solve_spectrum
from .system import System, build_system

#: Unknowns that no refinement goes beyond, however much memory there is.
MOST_UNKNOWNS = 400_000

#: Meshes tried at most.
MOST_MESHES = 7

#: The share of the accuracy that a new mesh aims at: it never turns out as planned.
_AIM = 0.75

#: By how much a mesh's error over what was planned makes the next plan stricter at most.
_BIAS = 1.4

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
    seconds : s by stage, ``mesh`` and ``assemble`` of this mesh, ``adapt`` before it
    warnings : why the accuracy was not reached, if so
    """

    mesh: Mesh
    system: System
    spectrum: Spectrum
    meshes: int = 1
    seconds: dict[str, float] = field(default_factory=dict)
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
    began = perf_counter()
    say("meshing coarsely")
    mesh = generate(case.shape, patches=patches, coarse=True)
    found = _solved(case, mesh, 1, say, perf_counter() - began)
    best, bias, idle = found, 1.0, 0
    while _worst(found) > accuracy:
        step = _plan(found, _AIM * accuracy / bias)
        limit = min(MOST_UNKNOWNS, affordable_unknowns())
        reason = None
        if case.shape.family.mesh is not None:
            reason = "the part is a mesh already and is taken as it is"
        elif step.unknowns > limit and _unknowns(found.mesh) > _AT_LIMIT * limit:
            reason = (
                f"it would take about {_about(step.unknowns)} unknowns, and {_about(limit)} "
                f"are the limit here{_sharp_edges(found)}"
            )
        elif found.meshes == MOST_MESHES or idle > 1:
            reason = f"{found.meshes} meshes did not bring it lower{_sharp_edges(found)}"
        else:
            if step.unknowns > limit:
                # As far as it goes: the result is then better, though not good enough.
                step = step.coarser((step.unknowns / limit) ** (1.0 / 3.0))
            say(f"error up to {_worst(found):.2g} cents; meshing where it is")
            start = perf_counter()
            try:
                mesh = generate(case.shape, patches=patches, size_field=step.sizes)
                found = _solved(case, mesh, found.meshes + 1, say, perf_counter() - start)
            except MeshError as error:
                reason = f"the mesh could not be made finer ({error})"
            except NoRoom as error:
                reason = f"{error}{_sharp_edges(found)}"
        if reason is not None:
            warnings = unmet(best.spectrum, accuracy, reason)
            return _timed(replace(best, meshes=found.meshes, warnings=warnings), began)
        bias = float(np.clip(_worst(found) / step.worst, 1.0, _BIAS))
        idle = idle + 1 if _worst(found) > _LITTLE * _worst(best) else 0
        if _worst(found) < _worst(best):
            best = found
    return _timed(found, began)


def unmet(spectrum: Spectrum, accuracy: float | None, reason: str) -> tuple[str, ...]:
    """Return one sentence where the mesh error is over the accuracy, else none."""
    worst = float(np.abs(mesh_cents(spectrum)).max(initial=0.0))
    if accuracy is None or worst <= accuracy:
        return ()
    return (
        f"accuracy_cents = {accuracy:g} was not reached, the mesh error is up to "
        f"{worst:.2g} cents: {reason}",
    )


def _solved(
    case: Case, mesh: Mesh, meshes: int, say: Callable[[str], None], meshing: float
) -> Adapted:
    say(f"solving mesh {meshes}: {_unknowns(mesh)} unknowns")
    start = perf_counter()
    system = build_system(case, mesh)
    seconds = {"mesh": meshing, "assemble": perf_counter() - start}
    settings = case.settings
    spectrum = solve_spectrum(system, modes=settings.modes, up_to_hz=settings.up_to, estimate=True)
    return Adapted(mesh=mesh, system=system, spectrum=spectrum, meshes=meshes, seconds=seconds)


def _timed(found: Adapted, began: float) -> Adapted:
    """Return the result with the time since `began` that its own stages do not tell."""
    own = sum(found.seconds.values()) + sum(found.spectrum.seconds.values())
    return replace(found, seconds={"adapt": perf_counter() - began - own} | found.seconds)


def _worst(found: Adapted) -> float:
    return float(np.abs(mesh_cents(found.spectrum)).max(initial=0.0))


def _unknowns(mesh: Mesh) -> int:
    return 3 * len(mesh.points)


def _plan(found: Adapted, aim: float) -> Plan:
    surplus = found.spectrum.excess
    assert surplus is not None
    return plan(found.mesh, surplus.by_cell, _exponents(found), aim)


def _exponents(found: Adapted) -> np.ndarray:
    constraint = found.system.constraint
    return exponents(found.mesh, None if constraint.free.all() else constraint.projectors())


def _sharp_edges(found: Adapted) -> str:
    """Return words on the sharp edge that holds most of the worst mode's error, if one does."""
    mesh, surplus = found.mesh, found.spectrum.excess
    assert surplus is not None
    share = surplus.by_cell[:, int(np.argmax(surplus.relative))]
    share = share / share.sum()
    sharp = _exponents(found) < 1.0
    if share[sharp].sum() < 0.5:
        return ""
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
        f"; {100.0 * share[sharp].sum():.0f} % of the error is at sharp edges, most at that "
        f"of {edge}: a fillet, or a mount that gives a little, would have less of it"
    )


def _about(number: float) -> str:
    return f"{float(f'{number:.2g}'):,.0f}".replace(",", " ")


def _silent(words: str) -> None:
    """Say nothing."""
