"""Where results go: folders and files checked before the work, written beside and renamed."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from ..geometry.errors import InputError


def check_folder(path: Path) -> None:
    """Raise InputError unless results can be written into the folder, made or yet to be made."""
    try:
        if path.exists() and not path.is_dir():
            raise InputError("is a file, not a folder", key="--out", value=str(path))
        _check_writable(path)
    except OSError as error:
        raise _unwritable(path, error) from None


def check_file(path: Path) -> None:
    """Raise InputError unless the file can be written; its folder must be there."""
    try:
        if path.is_dir():
            raise InputError("is a folder, not a file", key="--out", value=str(path))
        if not path.parent.is_dir():
            raise InputError(
                "its folder is not there", key="--out", value=str(path), allowed="a known folder"
            )
        _check_writable(path.parent)
    except OSError as error:
        raise _unwritable(path, error) from None


def write_text(path: Path, text: str) -> None:
    """Write a file as UTF-8 beside its place and rename it, making its folder if need be.

    Raises
    ------
    InputError
        If it cannot be written.
    """
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        handle, name = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")
        try:
            with os.fdopen(handle, "w", encoding="utf-8", newline="\n") as file:
                file.write(text)
            # mkstemp makes files private; results are as readable as any other file.
            Path(name).chmod(0o666 & ~_umask())
            Path(name).replace(path)
        except BaseException:
            Path(name).unlink(missing_ok=True)
            raise
    except OSError as error:
        raise _unwritable(path, error) from None


def _check_writable(folder: Path) -> None:
    there = folder.absolute()
    while not there.exists():
        there = there.parent
    if not there.is_dir():
        raise InputError(f"{str(there)!r} is a file, not a folder", key="--out", value=str(folder))
    if not os.access(there, os.W_OK | os.X_OK):
        raise InputError("cannot be written: permission denied", key="--out", value=str(folder))


def _unwritable(path: Path, error: OSError) -> InputError:
    reason = (error.strerror or str(error)).lower()
    return InputError(f"cannot be written: {reason}", key="--out", value=str(path))


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
