"""``modewright modes``: from a case file to named modes, tables, pictures and files."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from ...fem.modal.case import Case
from ...fem.modal.modes import Modes
from ...geometry.errors import InputError
from ...viz.document import modes_document
from ...viz.table import modes_table
from ..answer import Answer
from ..outlet import check_folder
from ..reader import read_case, solve_table
from ..sense import ACCURACY_CENTS

#: Columns that a narrow terminal goes without, the first to go first.
SPARE = (
    "axial %",
    "other %",
    "root %",
    "mass g",
    "theory Hz",
    "edge %",
    "twist %",
    "flat %",
    "target Hz",
    "measured Hz",
    "mesh cents",
    "cents to theory",
    "nearest, cents",
)


def answer_modes(
    path: Path,
    *,
    out: Path | None = None,
    size: float | None = None,
    accuracy_cents: float | None = None,
    modes: int | None = None,
    up_to_hz: float | None = None,
    pictures: bool = True,
    prove: bool = False,
    progress: Callable[[str], None] | None = None,
) -> Answer:
    """Solve a case and, with `out`, write all results into that folder.

    With `prove` the modes are counted even where the direct solver cannot.

    Raises
    ------
    InputError
        For a mistake in the case or the options.
    WorkError
        If the part could not be meshed or solved.
    """
    if out is not None:
        check_folder(out)
    case = with_settings(
        read_case(path), size=size, accuracy_cents=accuracy_cents, modes=modes, up_to_hz=up_to_hz
    )
    # Loaded only now, so that a mistake in the case is told at once.
    from ...fem.modal.solve import solve

    result = solve(case, progress=progress, prove=prove)
    lines, skipped = _written(result, out, pictures, progress) if out is not None else ((), ())
    return Answer(
        document=modes_document(result),
        heading=heading(result),
        tables=(modes_table(result),),
        lines=lines,
        warnings=(*result.warnings, *skipped),
        spare=SPARE,
    )


def with_settings(
    case: Case,
    *,
    size: float | None = None,
    accuracy_cents: float | None = None,
    modes: int | None = None,
    up_to_hz: float | None = None,
) -> Case:
    """Return the case with the settings given on the command line in place of its own.

    Raises
    ------
    InputError
        If a number cannot be.
    """
    for key, value in (("--size", size), ("--up-to-hz", up_to_hz)):
        if value is not None and not 0.0 < value < 1e300:
            raise InputError("is out of range", key=key, value=value, allowed="over 0")
    if modes is not None and not 1 <= modes <= 500:
        raise InputError("is out of range", key="--modes", value=modes, allowed="1 to 500")
    settings = case.settings
    if size is not None:
        settings = replace(settings, size=size, accuracy=None)
    if accuracy_cents is not None:
        ACCURACY_CENTS.check(accuracy_cents, "--accuracy-cents")
        if size is not None:
            raise InputError("does not go with --size", key="--accuracy-cents")
        settings = replace(settings, size=None, accuracy=accuracy_cents)
    if modes is not None or up_to_hz is not None:
        # Either option alone replaces both of the case's limits.
        settings = replace(settings, modes=modes, up_to=up_to_hz)
    document = dict(case.document)
    document["solve"] = solve_table(settings)
    return replace(case, settings=settings, document=document)


def heading(result: Modes) -> str:
    """Return the line above the table: the part, its material and mass, the mesh."""
    case, facts = result.case, result.mesh_facts
    held = ", ".join(dict.fromkeys(mount.hold.value for mount in case.mounts)) or "free"
    return (
        f"{case.title}: {case.shape.family.name}, {case.material.name}, {facts.mass_g:.4g} g, "
        f"{held}; {facts.unknowns} unknowns, "
        f"cells {'of' if result.solve_facts.meshes == 1 else 'up to'} {facts.size_mm:.3g} mm, "
        f"{result.solve_facts.seconds['total']:.1f} s"
    )


def _written(
    result: Modes, out: Path, pictures: bool, progress: Callable[[str], None] | None
) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Write all files; return a line that names them, and sentences on what was left out."""
    from ...viz.results import write_results

    written = write_results(result, out, pictures=pictures, progress=progress)
    names = ", ".join(_runs([file.name for file in written.files]))
    return (f"Written to {out}: {names}",), written.skipped


def _runs(names: list[str]) -> list[str]:
    """Return file names with numbered ones told as first ... last."""
    numbered = [name for name in names if name.startswith("mode_")]
    if len(numbered) < 3:
        return names
    others = [name for name in names if name not in numbered]
    return [*others, f"{numbered[0]} ... {numbered[-1]}"]
