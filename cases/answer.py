"""What a command has to say: to programs as one document, to people as tables and lines."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from ..geometry.errors import InputError, ModewrightError
from ..viz.table import Table


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Answer:
    """The result of a command.

    Attributes
    ----------
    document : what ``--json`` prints
    heading : a line above the tables
    tables : shown to people
    text : shown to people as it is (a case file)
    lines : sentences below
    warnings : sentences for stderr
    spare : headers of columns that a narrow terminal goes without, the first to go first
    code : exit code, 0 unless the answer itself says that something fails
    """

    document: Mapping[str, Any]
    heading: str = ""
    tables: tuple[Table, ...] = ()
    text: str = ""
    lines: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()
    spare: tuple[str, ...] = ()
    code: int = 0


def error_document(error: ModewrightError) -> dict[str, Any]:
    """Return an error as programs read it."""
    place: dict[str, Any] = dict.fromkeys(("file", "key", "value", "allowed"))
    if isinstance(error, InputError):
        place = {
            "file": error.file,
            "key": error.key,
            "value": None if error.value is None else str(error.value),
            "allowed": error.allowed,
        }
    return {"format": "modewright-error", "version": 1, **place, "message": str(error)}
