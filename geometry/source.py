"""The file an imported shape names, found and looked at before any library opens it."""

from __future__ import annotations

from pathlib import Path

from .errors import InputError


def source_file(folder: Path, name: str, *, key: str, suffixes: tuple[str, ...]) -> Path:
    """Return the path of a file that exists, is not empty and has a known suffix.

    Parameters
    ----------
    folder : Path
        Where a relative name is looked for.
    name : str
        As the case file has it.
    key : str
        Key path, for the message.
    suffixes : allowed suffixes, lower case

    Raises
    ------
    InputError
        If there is no such file, or it cannot be right.
    """
    path = folder / Path(name).expanduser()
    if path.suffix.lower() not in suffixes:
        raise InputError("has an unknown suffix", key=key, value=name, allowed=", ".join(suffixes))
    if path.is_dir():
        raise InputError("is a folder, not a file", key=key, value=name)
    try:
        with path.open("rb") as file:
            start = file.read(64)
    except FileNotFoundError:
        raise InputError("no such file", key=key, value=str(path)) from None
    except OSError as error:
        raise InputError(f"cannot be read ({error.strerror})", key=key, value=str(path)) from None
    if not start.strip():
        raise InputError("is an empty file", key=key, value=name)
    return path
