"""What a mistake against the schema is called when told to people."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from ..geometry.errors import InputError
from ..geometry.words import nearest


@dataclass(frozen=True, kw_only=True, slots=True)
class SchemaMistake:
    """One mistake as the schema reports it.

    Attributes
    ----------
    sort : the schema library's name for it, or ours
    place : keys and list positions from the top of the document
    text : its own message
    value : the offending value
    context : bounds and the like
    """

    sort: str
    place: tuple[str | int, ...]
    text: str
    value: Any
    context: Mapping[str, Any] = field(default_factory=dict)


_KINDS = {
    "string_type": "must be text in quotes",
    "int_type": "must be a whole number",
    "int_from_float": "must be a whole number",
    "bool_type": "must be true or false",
    "list_type": "must be a list in square brackets",
    "dict_type": "must be a table",
    "model_type": "must be a table",
    "string_too_short": "must not be empty",
}

_PATCH = '{ face = "bottom", from = [x0,y0], to = [x1,y1] }'
_SELECTORS = (
    'a name, { plane = "x", at = "min" }, { box = [[x0,y0,z0],[x1,y1,z1]] }, '
    "{ near = [x,y,z] } or " + _PATCH
)

#: Told where something without area is to be held.
POINT_OR_LINE = (
    "points and lines cannot be held (in a solid the frequency would follow the mesh): "
    "use a narrow patch"
)

#: Keys that people may try for such places.
_LOOSE = {"point", "points", "line", "lines", "edge", "edges", "node", "nodes", "corner", "at"}


def told(mistake: SchemaMistake, document: Mapping[str, Any]) -> InputError:
    """Return the mistake as one sentence with key path, value and what is allowed."""
    key = key_path(mistake.place, document)
    context, value = mistake.context, shown(mistake.value)
    match mistake.sort:
        case "missing":
            last = str(mistake.place[-1])
            return InputError("is missing", key=f"{key}.{last}" if key else last)
        case "unknown_key":
            return unknown_key(context["key"], context["known"], under=key)
        case "literal_error":
            allowed = str(context["expected"]).replace("'", "").replace(" or ", ", ")
            return InputError("is not one of the choices", key=key, value=value, allowed=allowed)
        case "greater_than" | "greater_than_equal" | "less_than" | "less_than_equal":
            return InputError("is out of range", key=key, value=value, allowed=_bound(context))
        case "too_short" | "too_long":
            low, high = context.get("min_length"), context.get("max_length")
            allowed = f"{low} or more" if high is None else f"up to {high}"
            return InputError(
                "has the wrong number of items", key=key, value=value, allowed=f"{allowed} items"
            )
        case "selector":
            if isinstance(value, Mapping) and _LOOSE.intersection(value):
                return InputError(POINT_OR_LINE, key=key, value=value, allowed=_PATCH)
            return InputError("is not a face", key=key, value=value, allowed=_SELECTORS)
        case "rows":
            return InputError(mistake.text, key=key, allowed=f"[[{key}]]")
        case "list_of_faces":
            allowed = f"[{value!r}]".replace("'", '"') if isinstance(value, str) else _SELECTORS
            return InputError(mistake.text, key=key, value=value, allowed=allowed)
        case sort:
            return InputError(_KINDS.get(sort, mistake.text), key=key, value=value)


def unknown_key(key: str, known: Sequence[str], *, under: str = "") -> InputError:
    """Return the mistake of a key that is not known, with the nearest known one."""
    close = nearest(key, known)
    return InputError(
        "unknown key" + (f" (did you mean {close!r}?)" if close else ""),
        key=f"{under}.{key}" if under else key,
        allowed=", ".join(known),
    )


def key_path(place: Sequence[str | int], document: Mapping[str, Any]) -> str:
    """Return the path as people write it: list items from 1, nothing that is not in the file."""
    parts: list[str] = []
    here: Any = document
    for step in place:
        if isinstance(step, int) and isinstance(here, list) and step < len(here):
            parts.append(str(step + 1))
            here = here[step]
        elif isinstance(step, str) and isinstance(here, Mapping) and step in here:
            parts.append(step)
            here = here[step]
        # Other steps are the schema's own: the branch of a union, or the position
        # of a table that the file holds without a list.
    return ".".join(parts)


def shown(value: Any) -> Any:
    """Return a value short enough to stand in a sentence."""
    if isinstance(value, Mapping):
        value = dict(value)
    text = repr(value)
    if len(text) <= 60:
        return value
    return _Abridged(text[:57] + "...")


class _Abridged(str):
    """Text that shows itself without quotes."""

    def __repr__(self) -> str:
        return str(self)


def _bound(context: Mapping[str, Any]) -> str:
    words = {"gt": "over {}", "ge": "{} or more", "lt": "under {}", "le": "up to {}"}
    return " and ".join(words[k].format(f"{v:g}") for k, v in context.items() if k in words)
