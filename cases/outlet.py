"""Where results go: folders and files checked before the work, written beside and renamed."""

from __future__ import annotations

import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from ..geometry.errors import InputError
from ..geometry.scratch import refuse_busy, scratch


def check_folder(path: Path) -> None:
    """Raise InputError unless results can be written into the folder, made or yet to be made.

    Raises ToolError if another run is writing there now.
    """
    try:
        if path.exists() and not path.is_dir():
            raise InputError("is a file, not a folder", key="--out", value=str(path))
        _check_writable(path)
        refuse_busy(path)
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
    with beside(path) as temporary:
        temporary.write_text(text, encoding="utf-8", newline="\n")


@contextmanager
def beside(path: Path) -> Iterator[Path]:
    """Give a path in the same folder (made if need be), and rename it to `path` at the end.

    Raises
    ------
    InputError
        If it cannot be written.
    """
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        with scratch(path) as hidden:
            yield hidden / path.name
            (hidden / path.name).replace(path)
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
