"""Hidden folders in which files are made before they are moved to their place.

One to each place: the folder is locked while its run lives, so a second run knows that
it is not alone, and what a killed run left is cleared away by the next.
"""

from __future__ import annotations

import contextlib
import hashlib
import os
import shutil
import time
from collections.abc import Iterator
from pathlib import Path

from .errors import ToolError

try:
    import fcntl
except ImportError:  # Windows
    fcntl = None

_PREFIX = ".modewright-"

#: Where folders cannot be locked, older ones were left by a killed run, s.
_ABANDONED = 24 * 3600.0

#: Runs that start at once may take a folder from under each other a few times.
_TRIES = 20


@contextlib.contextmanager
def scratch(place: Path, *, inside: bool = False) -> Iterator[Path]:
    """Give an empty hidden folder on the file system of `place`; it goes at the end.

    Parameters
    ----------
    place : Path
        The file or folder that will be written.
    inside : bool
        Whether to make it in `place`, a folder, and not beside it.

    Raises
    ------
    ToolError
        If another run is writing to the same place.
    OSError
        If the folder cannot be made.
    """
    hidden = _hidden(place, inside)
    lock = _taken(hidden, place)
    try:
        yield hidden
    finally:
        shutil.rmtree(hidden, ignore_errors=True)
        if lock is not None:
            os.close(lock)


def refuse_busy(place: Path) -> None:
    """Raise ToolError if another run is writing to that place now."""
    for inside in (False, True):
        hidden = _hidden(place, inside)
        with contextlib.suppress(OSError):
            lock = _locked(hidden)
            if lock is not None:
                os.close(lock)
            elif _lives(hidden):
                raise _busy(place)


def is_scratch(name: str) -> bool:
    """Tell whether a file name is that of a hidden folder of ours."""
    return name.startswith(_PREFIX)


def _hidden(place: Path, inside: bool) -> Path:
    whole = place.absolute()
    tag = hashlib.sha256(os.fsencode(whole.name)).hexdigest()[:12]
    return (whole if inside else whole.parent) / f"{_PREFIX}{tag}"


def _taken(hidden: Path, place: Path) -> int | None:
    """Make the folder, or take over that of a dead run; return its lock."""
    for _ in range(_TRIES):
        with contextlib.suppress(FileExistsError):
            hidden.mkdir()
            if fcntl is None:
                return None
        try:
            lock = _locked(hidden)
        except FileNotFoundError:
            # The run before us has just ended and cleared it away.
            continue
        if lock is None:
            if _lives(hidden):
                raise _busy(place)
            shutil.rmtree(hidden, ignore_errors=True)
            continue
        for left in hidden.iterdir():
            if left.is_dir() and not left.is_symlink():
                shutil.rmtree(left, ignore_errors=True)
            else:
                left.unlink(missing_ok=True)
        return lock
    raise _busy(place)


def _locked(hidden: Path) -> int | None:
    """Return a lock on a folder that is there, or None if another run may hold it."""
    if fcntl is None:
        hidden.stat()
        return None
    lock = os.open(hidden, os.O_RDONLY)
    try:
        fcntl.flock(lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
        if os.fstat(lock).st_ino == hidden.stat().st_ino:
            return lock
    except OSError as error:
        os.close(lock)
        if isinstance(error, FileNotFoundError):
            raise
        return None
    os.close(lock)
    raise FileNotFoundError(hidden)


def _lives(hidden: Path) -> bool:
    """Tell whether a folder that cannot be locked belongs to a run that may still live."""
    if _can_lock(hidden.parent):
        return hidden.exists()
    return hidden.exists() and time.time() - hidden.stat().st_mtime < _ABANDONED


def _can_lock(folder: Path) -> bool:
    """Tell whether the file system of a folder knows locks."""
    if fcntl is None:
        return False
    lock = os.open(folder, os.O_RDONLY)
    try:
        fcntl.flock(lock, fcntl.LOCK_SH | fcntl.LOCK_NB)
    except BlockingIOError:
        return True
    except OSError:
        return False
    finally:
        os.close(lock)
    return True


def _busy(place: Path) -> ToolError:
    return ToolError(
        f"another run is writing to {place}; wait until it has ended, or choose another --out"
    )
