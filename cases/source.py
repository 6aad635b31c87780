"""From a file on disk to plain TOML tables."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

from ..geometry.errors import InputError
from ..geometry.words import nearest

#: Bytes; an outline of ten thousand points is a tenth of it.
LARGEST = 4 * 1024 * 1024


def read_toml(path: Path) -> dict[str, Any]:
    """Return the tables of a TOML file.

    Raises
    ------
    InputError
        If the file is missing, a folder, unreadable, too large, not UTF-8 text
        or not TOML (with the line).
    """
    name = str(path)
    raw = _bytes(path, name)
    try:
        # Some editors put a byte-order mark in front, which TOML does not know.
        text = raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        raise InputError(f"is not UTF-8 text (line {line})", file=name) from None
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        problem = str(error)
        raise InputError(
            f"is not valid TOML: {problem[:1].lower()}{problem[1:]}", file=name
        ) from None
    except (RecursionError, ValueError):
        raise InputError("is not valid TOML: too deep or too long a value", file=name) from None


def _bytes(path: Path, name: str) -> bytes:
    try:
        with path.open("rb") as file:
            raw = file.read(LARGEST + 1)
    except FileNotFoundError:
        raise InputError("there is no such file" + _hint(path), file=name) from None
    except IsADirectoryError:
        raise InputError("is a folder, not a case file", file=name, allowed="a TOML file") from None
    except NotADirectoryError:
        raise InputError("there is no such file", file=name) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(f"cannot be read: {reason.lower()}", file=name) from None
    if len(raw) > LARGEST:
        raise InputError(
            "is too large for a case file", file=name, allowed=f"up to {LARGEST // 1024**2} MB"
        )
    return raw


def _hint(path: Path) -> str:
    try:
        beside = [entry.name for entry in path.parent.iterdir() if entry.suffix == ".toml"]
    except OSError:
        return ""
    close = nearest(path.name, beside)
    return f" (did you mean {close!r}?)" if close else ""
