"""From a case to its modes: mesh, eigen-solve, names, pitches, theory."""

from __future__ import annotations

from collections.abc import Callable
from time import perf_counter

from scipy.sparse import csr_array

from ...geometry.anatomy import Anatomy
from ...geometry.errors import InputError
from ...geometry.imported import imported_anatomy
from ...geometry.mesh import Mesh
from ...geometry.mesher import generate
from ...geometry.quality import facet_areas, volumes
from ...geometry.solid import Patch
from .adapt import Adapted, adapt, unmet
from .case import Case
from .memory import NoRoom, affordable_unknowns, peak_megabytes
from .modes import MeshFacts, Modes, SolveFacts
from .naming.beats import beat_warnings
from .naming.identify import identify
from .rows import mode_rows
from .spectrum import Spectrum, converged, counted, solve_spectrum
from .system import REFERENCE_TEMPERATURE, System, build_system
from .theory.predict import predict
from .theory.support import held_of

Progress = Callable[[str], None]

#: Flat parts need less memory than the estimate before meshing says; what it lets pass is
#: judged again by the symbolic analysis.
_HOPE = 2.5


def solve(
    case: Case,
    *,
    mesh: Mesh | None = None,
    progress: Progress | None = None,
    prove: bool = False,
) -> Modes:
    """Return the elastic modes of a case, named, by ascending frequency.

    Parameters
    ----------
    case : Case
    mesh : Mesh, optional
        A mesh of the case's shape at 20 degrees C; default a new one.
    progress : callable, optional
        Called with a few words at the start of each stage.
    prove : bool
        Whether to count the modes by a slower factorisation where the direct solver
        cannot count.

    Raises
    ------
    InputError
        If mounts, masses, targets or measured modes point at nothing, or the mesh is
        too fine for the memory that is free.
    MeshError, ToolError
        If the part could not be meshed.
    SolveError
        If the eigen-solve failed.
    """
    try:
        return _solve(case, mesh, progress or _silent, prove)
    except InputError as error:
        raise error.within(file=None if case.file is None else str(case.file)) from None


def case_mesh(case: Case, *, progress: Progress | None = None) -> Mesh:
    """Return the mesh of a case, with the patches its mounts and masses ask for.

    Raises
    ------
    InputError
        If the shape, the size or a patch is impossible.
    MeshError, ToolError
        If the part could not be meshed.
    """
    if case.settings.accuracy is not None:
        return _adapted(case, case.settings.accuracy, progress or _silent).mesh
    (progress or _silent)("meshing")
    return generate(
        case.shape,
        size_mm=case.settings.size,
        patches=case_patches(case),
        most_unknowns=_HOPE * affordable_unknowns(),
    )


def case_patches(case: Case) -> tuple[Patch, ...]:
    """Return the patches that mounts and masses of a case point at, each once."""
    selectors = [face for mount in case.mounts for face in mount.faces]
    selectors += [item.face for item in case.attached_masses if item.face is not None]
    return tuple(dict.fromkeys(face for face in selectors if isinstance(face, Patch)))


def _adapted(case: Case, accuracy: float, progress: Progress) -> Adapted:
    return adapt(case, accuracy, patches=case_patches(case), progress=progress)


def _solved(
    case: Case, mesh: Mesh | None, progress: Progress, prove: bool
) -> tuple[Mesh, System, Spectrum, dict[str, float]]:
    """Return mesh, system, spectrum and seconds by stage of a case with one mesh."""
    start = perf_counter()
    if mesh is None:
        mesh = case_mesh(case, progress=progress)
    meshed = perf_counter()
    progress(f"assembling {3 * len(mesh.points)} unknowns")
    system = build_system(case, mesh)
    assembled = perf_counter()
    progress(f"solving {system.unknowns} unknowns")
    settings = case.settings
    try:
        spectrum = solve_spectrum(
            system,
            modes=settings.modes,
            up_to_hz=settings.up_to,
            estimate=True,
            count=True,
            prove=prove,
        )
    except NoRoom as error:
        raise _too_fine(mesh, error) from None
    seconds = {"mesh": meshed - start, "assemble": assembled - meshed}
    return mesh, system, spectrum, seconds | spectrum.seconds


def _solve(case: Case, mesh: Mesh | None, progress: Progress, prove: bool) -> Modes:
    start = perf_counter()
    settings = case.settings
    if mesh is None and settings.accuracy is not None:
        found = _adapted(case, settings.accuracy, progress)
        mesh, system, meshes, shortfall = found.mesh, found.system, found.meshes, found.warnings
        progress("counting the modes")
        spectrum = counted(
            system, found.spectrum, modes=settings.modes, up_to_hz=settings.up_to, prove=prove
        )
        seconds = found.seconds | spectrum.seconds
    else:
        mesh, system, spectrum, seconds = _solved(case, mesh, progress, prove)
        meshes = 1
        shortfall = unmet(spectrum, settings.accuracy, "the mesh was given")
    if len(spectrum.frequencies) == 0:
        raise InputError(
            "no mode lies that low", key="solve.up_to_hz", value=settings.up_to, allowed="more"
        )
    best, order = converged(spectrum)
    spectrum = spectrum.ordered(order)

    progress(f"naming {len(spectrum.frequencies)} modes")
    naming = perf_counter()
    rise = case.temperature - REFERENCE_TEMPERATURE
    # The mesh of the system is as warm as the case, and so must its anatomy be.
    anatomy = _anatomy(case, mesh).scaled(1.0 + (case.material.expansion or 0.0) * rise)
    identity = identify(system.mesh, anatomy, best, spectrum.shapes, csr_array(system.mass))
    held = held_of(case.mounts, anatomy, case.attached_masses)
    theory = predict(anatomy, case.material.at(rise), held, identity.names)
    rows = mode_rows(case, best, spectrum.frequencies, identity, theory, spectrum.residuals)
    seconds["names"] = perf_counter() - naming
    seconds["total"] = perf_counter() - start
    return Modes(
        case=case,
        mesh=system.mesh,
        anatomy=anatomy,
        modes=rows,
        shapes=identity.shapes,
        mesh_facts=MeshFacts(
            nodes=len(mesh.points),
            cells=len(mesh.cells),
            unknowns=system.unknowns,
            size_mm=mesh.size * 1e3,
            mass_g=system.body_mass * 1e3,
            volume_mm3=mesh.volume * 1e9,
            **_geometry_errors(mesh),
        ),
        solve_facts=SolveFacts(
            direct_solver=spectrum.direct_solver,
            missing_modes=spectrum.missing,
            rigid_modes=spectrum.rigid_modes,
            seconds=seconds,
            peak_mb=peak_megabytes(),
            meshes=meshes,
        ),
        warnings=(
            *shortfall,
            *_material_warnings(case),
            *_count_warnings(spectrum.missing),
            *beat_warnings([row.frequency_hz for row in rows], identity.names),
        ),
    )


def _geometry_errors(mesh: Mesh) -> dict[str, float | None]:
    """Return how far volume and surface of the curved cells are off, in millionths."""
    if mesh.area == 0.0:
        return {"volume_error_ppm": None, "area_error_ppm": None}
    volume = float(volumes(mesh.points, mesh.cells).sum())
    area = float(facet_areas(mesh.points, mesh.facets).sum())
    return {
        "volume_error_ppm": 1e6 * (volume / mesh.volume - 1.0),
        "area_error_ppm": 1e6 * (area / mesh.area - 1.0),
    }


def _too_fine(mesh: Mesh, error: NoRoom) -> InputError:
    """Return the mistake of a mesh whose factor will not fit, with the size that would."""
    # Solid bodies need memory as the fourth power of 1 / size, flat ones as the square.
    enough = 1e3 * mesh.size * (1.1 * error.needed / max(error.free, 1.0)) ** (1.0 / 3.0)
    return InputError(
        f"{3 * len(mesh.points)} unknowns would take {error.needed / 2**30:.1f} GB to factorise, "
        f"and {error.free / 2**30:.1f} GB of memory are free",
        key="solve.size",
        value=float(f"{1e3 * mesh.size:.4g}"),
        allowed=f"about {enough:.3g} mm or more",
    )


def _anatomy(case: Case, mesh: Mesh) -> Anatomy:
    """Return what the shape says it is; only the mesh can tell of an imported body."""
    anatomy = case.shape.anatomy()
    return imported_anatomy(mesh) if anatomy is None else anatomy


def _material_warnings(case: Case) -> tuple[str, ...]:
    if case.temperature == REFERENCE_TEMPERATURE or case.material.modulus_slope is not None:
        return ()
    return (
        f"{case.material.name} has no modulus_slope_ppm_per_k: at {case.temperature:g} degrees C "
        "only its expansion is counted",
    )


def _count_warnings(missing: int | None) -> tuple[str, ...]:
    if missing is not None:
        return ()
    return (
        "the modes were not counted (this direct solver cannot, or memory did not suffice), so "
        "one may be missing; --prove counts them by a slower way",
    )


def _silent(words: str) -> None:
    """Say nothing."""
