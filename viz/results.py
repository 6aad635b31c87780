"""All files of a result in one folder."""

from __future__ import annotations

import re
import shutil
import tempfile
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

from ..fem.modal.modes import Modes
from ..geometry.errors import ToolError
from .document import document_text, modes_document
from .exchange import write_modes_vtu, write_npz
from .gallery import make_gallery
from .glb import write_modes_glb
from .pictures import SHEET, draw_pictures
from .probe import rendering_problem
from .table import modes_csv

_DATA = ("modes.json", "modes.csv", "modes.npz", "modes.vtu", "modes.glb")
_ANIMATION = re.compile(r"mode_\d{2,}\.webp")
_STAGING = ".modewright-"

#: Staging folders older than this were left by a killed run, s.
_ABANDONED = 24 * 3600.0


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

    The whole set is made in a hidden folder beside its place and moved there at
    the end, file by file; files of an earlier result that are not part of this
    one go. Until then the earlier set stays as it was.

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
        folder.mkdir(parents=True, exist_ok=True)
        _clear_abandoned(folder)
        staging = Path(tempfile.mkdtemp(prefix=_STAGING, dir=folder))
    except OSError as error:
        raise ToolError(f"cannot write in {folder}: {error.strerror}") from None
    try:
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
                    _publish(staging, folder)
                    raise
        return Written(files=_publish(staging, folder), skipped=skipped)
    except OSError as error:
        raise ToolError(f"cannot write in {folder}: {error.strerror}") from error
    finally:
        shutil.rmtree(staging, ignore_errors=True)


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


def _publish(staging: Path, folder: Path) -> tuple[Path, ...]:
    """Move the finished set to its place; return the paths, numbers first."""
    order = {name: k for k, name in enumerate((*_DATA, SHEET))}
    names = sorted(
        (path.name for path in staging.iterdir()), key=lambda n: (order.get(n, len(order)), n)
    )
    for name in names:
        (staging / name).replace(folder / name)
    for path in list(folder.iterdir()):
        ours = path.name in order or _ANIMATION.fullmatch(path.name)
        if ours and path.name not in names:
            path.unlink()
    return tuple(folder / name for name in names)


def _clear_abandoned(folder: Path) -> None:
    for path in folder.glob(f"{_STAGING}*"):
        if path.is_dir() and time.time() - path.stat().st_mtime > _ABANDONED:
            shutil.rmtree(path, ignore_errors=True)
