"""A finished set of files takes the place of an older one, at once."""

from __future__ import annotations

import contextlib
import ctypes
import os
import shutil
import sys
from collections.abc import Callable
from pathlib import Path

from ..geometry.scratch import is_scratch

#: rename flags "exchange" of Linux and "swap" of macOS, and "relative to the working folder".
_EXCHANGE = 2
_HERE = -100


def may_swap(folder: Path) -> bool:
    """Tell whether a folder can be exchanged whole for another beside it.

    Not where someone stands in it (the working folder), where it is a mount or a
    link, where its parent may not be written, and where it holds folders, which
    cannot be in two places at once.
    """
    parent = folder.absolute().parent
    if folder.is_symlink() or not os.access(parent, os.W_OK | os.X_OK):
        return False
    if not folder.exists():
        return True
    if os.path.ismount(folder) or Path.cwd().is_relative_to(folder.resolve()):
        return False
    return not any(entry.is_dir() and not is_scratch(entry.name) for entry in folder.iterdir())


def swap(new: Path, folder: Path, is_ours: Callable[[str], bool]) -> bool:
    """Put the folder `new` in the place of `folder` in one step; False if it cannot be done.

    What lies in `folder` and is not ours stays there: the same files, under a second
    name in `new` beforehand. What was ours ends in `new`.
    """
    try:
        if not folder.exists():
            new.rename(folder)
            return True
        shutil.copymode(folder, new)
        for entry in folder.iterdir():
            if not is_ours(entry.name) and not is_scratch(entry.name):
                os.link(entry, new / entry.name, follow_symlinks=False)
        return _exchanged(new, folder)
    except (OSError, NotImplementedError):
        return False


def replace_each(new: Path, folder: Path, is_ours: Callable[[str], bool], last: str) -> None:
    """Move the files of `new` into `folder` one by one; clear what else was ours.

    The file named `last` goes first and comes last: where it is, the set is whole.
    """
    folder.mkdir(exist_ok=True)
    (folder / last).unlink(missing_ok=True)
    names = {path.name for path in new.iterdir() if is_ours(path.name)}
    for name in sorted(names, key=lambda name: (name == last, name)):
        (new / name).replace(folder / name)
    for path in list(folder.iterdir()):
        if is_ours(path.name) and path.name not in names:
            path.unlink()


def _exchanged(a: Path, b: Path) -> bool:
    """Exchange two folders in one step, where the system can."""
    with contextlib.suppress(OSError, AttributeError):
        library = ctypes.CDLL(None, use_errno=True)
        names = (os.fsencode(a), os.fsencode(b))
        if sys.platform == "linux":
            code = library.renameat2(_HERE, names[0], _HERE, names[1], _EXCHANGE)
        elif sys.platform == "darwin":
            code = library.renamex_np(*names, _EXCHANGE)
        else:
            return False
        return code == 0
    return False
