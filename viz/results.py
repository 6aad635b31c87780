"""All files of a result in one folder."""

from __future__ import annotations

import re
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

from ..fem.modal.modes import Modes
from ..geometry.errors import ToolError
from ..geometry.scratch import scratch
from .document import document_text, modes_document
from .exchange import write_modes_vtu, write_npz
from .gallery import make_gallery
from .glb import write_modes_glb
from .pictures import SHEET, draw_pictures
from .place import may_swap, replace_each, swap
from .probe import rendering_problem
from .table import modes_csv

_DATA = ("modes.json", "modes.csv", "modes.npz", "modes.vtu", "modes.glb")
_ANIMATION = re.compile(r"mode_\d{2,}\.webp")


@dataclass(frozen=True, kw_only=True, slots=True)
class Written:
    """What was written, and what was not.

    Attributes
    ----------
    files : paths in the folder, the numbers first
    skipped : one sentence for each thing left out, and why
    """

    files: tuple[Path, ...]
    skipped: tuple[str, ...] = ()


def write_results(
    modes: Modes,
    folder: Path,
    *,
    pictures: bool = True,
    progress: Callable[[str], None] | None = None,
) -> Written:
    """Write every file of a result.

    The whole set is made in a hidden folder beside its place, which the two then
    exchange in one step: a run that is killed leaves the earlier set or the new
    one. Files in the folder that are not ours stay; those of an earlier result that
    are not part of this one go. Where folders cannot be exchanged (`place.may_swap`)
    the files move one by one, modes.json first out and last in.

    Parameters
    ----------
    modes : Modes
    folder : Path
        Made where it is missing.
    pictures : bool
        Whether to draw ``sheet.png`` and the animations.
    progress : callable, optional
        Called with what is being written.

    Returns
    -------
    Written
        Where pictures cannot be drawn, everything else is written and
        `Written.skipped` says why.

    Raises
    ------
    ToolError
        If the folder cannot be written.
    """
    tell = progress or (lambda _what: None)
    try:
        folder.absolute().parent.mkdir(parents=True, exist_ok=True)
        whole = may_swap(folder)
        if not whole:
            folder.mkdir(exist_ok=True)
        with scratch(folder, inside=not whole) as hidden:
            staging = hidden / "new"
            staging.mkdir()
            skipped: tuple[str, ...] = ()
            with ThreadPoolExecutor(max_workers=1) as beside:
                # Trying the renderer takes a second; the numbers are written meanwhile.
                problem = beside.submit(rendering_problem) if pictures else None
                _write_data(modes, staging, tell)
                if problem is not None:
                    tell("trying the renderer")
                    try:
                        skipped = _draw(modes, staging, problem.result(), tell)
                    except KeyboardInterrupt:
                        # The numbers may have taken long; they are kept.
                        _publish(staging, folder, whole)
                        raise
            return Written(files=_publish(staging, folder, whole), skipped=skipped)
    except OSError as error:
        raise ToolError(
            f"cannot write in {folder}: {error.strerror or error}; what was there is unchanged"
        ) from error


def _write_data(modes: Modes, staging: Path, tell: Callable[[str], None]) -> None:
    """Write all files that need no renderer."""
    tell("modes.json")
    _write_text(staging / "modes.json", document_text(modes_document(modes)))
    _write_text(staging / "modes.csv", modes_csv(modes))
    tell("modes.npz")
    write_npz(staging / "modes.npz", modes)
    tell("modes.vtu")
    write_modes_vtu(staging / "modes.vtu", modes)
    tell("modes.glb")
    write_modes_glb(staging / "modes.glb", modes)


def _write_text(path: Path, text: str) -> None:
    path.write_text(text, encoding="utf-8", newline="\n")


def _draw(
    modes: Modes, staging: Path, problem: str | None, tell: Callable[[str], None]
) -> tuple[str, ...]:
    """Draw the pictures; return sentences about those left out."""
    if problem:
        return (f"Pictures were left out: {problem}. All other files are complete.",)
    try:
        draw_pictures(make_gallery(modes), staging, progress=tell)
    except ToolError as error:
        for path in staging.iterdir():
            if path.name not in _DATA:
                path.unlink()
        return (f"Pictures were left out: {error}. All other files are complete.",)
    return ()


def _publish(staging: Path, folder: Path, whole: bool) -> tuple[Path, ...]:
    """Move the finished set to its place; return the paths, numbers first."""
    order = {name: k for k, name in enumerate((*_DATA, SHEET))}

    def is_ours(name: str) -> bool:
        return name in order or _ANIMATION.fullmatch(name) is not None

    names = sorted(
        (path.name for path in staging.iterdir() if is_ours(path.name)),
        key=lambda n: (order.get(n, len(order)), n),
    )
    if not (whole and swap(staging, folder, is_ours)):
        replace_each(staging, folder, is_ours, last="modes.json")
    return tuple(folder / name for name in names)
