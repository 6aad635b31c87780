"""All pictures of a result, drawn in a child process: a crash there loses nothing here.

The child is this module, run with the gallery's file, the folder to draw in and the
process id of its parent, with which it ends.
"""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
from collections.abc import Callable
from pathlib import Path

from ..geometry.errors import ToolError
from ..geometry.orphan import end_with
from .gallery import Gallery, load_gallery, save_gallery
from .probe import ending, rendering_environment

SHEET = "sheet.png"

#: Lines of the child that begin so tell what it draws.
_MARK = "drawing "


def draw_pictures(
    gallery: Gallery, folder: Path, *, progress: Callable[[str], None] | None = None
) -> None:
    """Draw the sheet and one animation a mode into `folder`.

    Parameters
    ----------
    gallery : Gallery
    folder : Path
        Also holds the child's input for a while.
    progress : callable, optional
        Called with what is being drawn.

    Raises
    ------
    ToolError
        If the child process failed; what it finished stays in the folder.
    """
    with tempfile.TemporaryDirectory(dir=folder, prefix=".") as scratch:
        job = Path(scratch) / "gallery.npz"
        save_gallery(job, gallery)
        with (Path(scratch) / "errors.txt").open("w+", encoding="utf-8", errors="replace") as log:
            with subprocess.Popen(
                [sys.executable, "-P", "-m", __name__, str(job), str(folder), str(os.getpid())],
                env=rendering_environment(),
                stdin=subprocess.DEVNULL,
                stdout=subprocess.PIPE,
                stderr=log,
                encoding="utf-8",
            ) as child:
                try:
                    for line in child.stdout or ():
                        if progress and line.startswith(_MARK):
                            progress(line[len(_MARK) :].rstrip())
                except BaseException:
                    child.kill()
                    raise
            code = child.returncode
            log.seek(0)
            if code:
                raise ToolError(f"the pictures could not be drawn: {ending(code, log.read())}")


def _draw(job: Path, folder: Path) -> None:
    from .animate import draw_animations
    from .sheet import draw_sheet

    def tell(what: str) -> None:
        sys.stdout.write(f"{_MARK}{what}\n")
        sys.stdout.flush()

    gallery = load_gallery(job)
    draw_sheet(gallery, folder / SHEET, progress=tell)
    draw_animations(gallery, folder, progress=tell)


if __name__ == "__main__":
    sys.stdout.reconfigure(encoding="utf-8")  # type: ignore[union-attr]
    end_with(int(sys.argv[3]))
    _draw(Path(sys.argv[1]), Path(sys.argv[2]))
