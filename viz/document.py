"""The result of a modal solve as one JSON object: the content of ``modes.json``."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import fields
from pathlib import PurePath
from typing import Any

import numpy as np

from ..fem.modal.modes import Mode, Modes


def modes_document(modes: Modes) -> dict[str, Any]:
    """Return the whole result as plain JSON values, keys in a fixed order.

    Parameters
    ----------
    modes : Modes

    Returns
    -------
    dict
        ``format``, ``version``, ``case``, ``mesh``, ``solve``, ``modes``. What does
        not apply, and what is not a finite number, is None.
    """
    return {
        "format": "modewright-modes",
        "version": 1,
        "case": plain(modes.case.document),
        "mesh": _record(modes.mesh_facts),
        "solve": _record(modes.solve_facts),
        "modes": [mode_document(mode) for mode in modes.modes],
    }


def mode_document(mode: Mode) -> dict[str, Any]:
    """Return one mode as plain JSON values; the keys are the fields of `Mode`, in order."""
    return _record(mode)


def document_text(document: Mapping[str, Any]) -> str:
    """Return a document as UTF-8 JSON text that any strict parser reads (no NaN)."""
    return json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def plain(value: Any) -> Any:
    """Return `value` built of dict, list, str, int, float, bool and None only."""
    match value:
        case None | bool() | str():
            return value
        case np.bool_():
            return bool(value)
        case int() | np.integer():
            return int(value)
        case float() | np.floating():
            return float(value) if math.isfinite(value) else None
        case Mapping():
            return {str(key): plain(item) for key, item in value.items()}
        case np.ndarray():
            return plain(value.tolist())
        case list() | tuple():
            return [plain(item) for item in value]
        case PurePath():
            return value.as_posix()
    return str(value)


def _record(record: Any) -> dict[str, Any]:
    return {field.name: plain(getattr(record, field.name)) for field in fields(record)}
