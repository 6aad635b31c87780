"""One value of a case changed, by its key path."""

from __future__ import annotations

import copy
from collections.abc import Mapping
from typing import Any

from ..fem.modal.case import Case
from ..geometry.dimension import Sort
from ..geometry.errors import InputError
from ..geometry.words import nearest

#: Tables, besides the shape's dimensions, whose values can be changed.
TABLES = ("material", "mount", "attached_mass", "surroundings")


def varied(document: Mapping[str, Any], case: Case, key: str, value: Any) -> dict[str, Any]:
    """Return a copy of a case document with one value changed.

    Parameters
    ----------
    document : mapping
        As the case file holds it.
    case : Case
        What the document says, for the names and defaults of dimensions.
    key : str
        A dimension (``thickness``, or ``shape.thickness``), a path into lists
        counted from 1 (``tines.4.length``), or a key of another table
        (``material.youngs_modulus_gpa``, ``mount.normal_n_per_mm3``).
    value : object

    Raises
    ------
    InputError
        If there is no such key, or the value is not allowed there.
    """
    changed = copy.deepcopy(dict(document))
    head, *rest = key.split(".")
    if head in TABLES and rest:
        changed[head] = _put(changed.get(head, {}), rest, value, key)
        return changed
    path = rest if head == "shape" else [head, *rest]
    dimensions = case.shape.dimensions
    if not path or path[0] not in dimensions:
        known = [*dimensions, *(f"{table}.…" for table in TABLES)]
        close = nearest(path[0] if path else head, dimensions)
        hint = f" (did you mean {close!r}?)" if close else ""
        raise InputError(
            f"no such dimension or key{hint}", key="--vary", value=key, allowed=", ".join(known)
        )
    given = dict(case.shape.with_dimension(".".join(path), value).given)
    family = {"family": case.shape.family.name} if "family" in changed["shape"] else {}
    changed["shape"] = {**family, **given}
    return changed


def key_unit(case: Case, key: str) -> str | None:
    """Return the unit of a dimension of the shape; other keys carry theirs in their name."""
    path = key.removeprefix("shape.").split(".")
    if key.split(".")[0] in TABLES and "." in key:
        return None
    known = {dimension.name: dimension for dimension in case.shape.family.dimensions}
    found = known.get(path[0])
    for part in path[1:]:
        found = next((c for c in found.columns if c.name == part), found) if found else None
    if found is None or found.sort in (Sort.COUNT, Sort.CHOICE, Sort.FILE, Sort.FLAG):
        return None
    return "mm"


def _put(table: Any, path: list[str], value: Any, key: str) -> Any:
    """Return `table` with the value at `path` set; the schema checks it afterwards."""
    head, *rest = path
    if isinstance(table, Mapping):
        if not rest:
            return {**table, head: value}
        return {**table, head: _put(table.get(head, {}), rest, value, key)}
    if isinstance(table, list):
        if not head.isdigit() or not 1 <= int(head) <= len(table):
            raise InputError(
                "no such list item", key="--vary", value=key, allowed=f"1 to {len(table)}"
            )
        i = int(head) - 1
        new = _put(table[i], rest, value, key) if rest else value
        return [*table[:i], new, *table[i + 1 :]]
    raise InputError("no such key", key="--vary", value=key)
