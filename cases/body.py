"""From the ``[shape]`` table to a `Shape`."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from ..geometry.errors import InputError
from ..geometry.families.table import FAMILIES
from ..geometry.shape import Shape, make_shape
from ..geometry.words import nearest

#: Keys that stand in place of `family` and name the imported family themselves.
IMPORTS = ("outline", "solid", "mesh")


def read_shape(table: Mapping[str, Any], folder: Path) -> Shape:
    """Return the checked shape of a ``[shape]`` table.

    Raises
    ------
    InputError
        For an unknown family (with the nearest known one), unknown or missing
        dimensions, and values that cannot be.
    """
    values = dict(table)
    family = values.pop("family", None)
    imports = [key for key in IMPORTS if key in values]
    if family is None:
        if len(imports) != 1:
            problem = "is missing" if not imports else f"has both {' and '.join(imports)}"
            raise InputError(
                problem, key="shape", allowed='family = "…", or one of outline, solid, mesh'
            )
        family = imports[0]
    elif imports and family != imports[0]:
        raise InputError(
            f"stands beside {imports[0]}, which needs no family", key="shape.family", value=family
        )
    if not isinstance(family, str):
        raise InputError("must be text in quotes", key="shape.family", value=family)
    if family not in FAMILIES:
        close = nearest(family, FAMILIES)
        raise InputError(
            "no such family" + (f" (did you mean {close!r}?)" if close else ""),
            key="shape.family",
            value=family,
            allowed=", ".join(FAMILIES),
        )
    return make_shape(FAMILIES[family], values, folder=folder)


def shape_table(shape: Shape) -> dict[str, Any]:
    """Return a shape as the ``[shape]`` table would hold it, defaults filled in."""
    name = shape.family.name
    head = {} if name in IMPORTS else {"family": name}
    return head | _lists({k: v for k, v in shape.dimensions.items() if v is not None})


def _lists(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {key: _lists(item) for key, item in value.items() if item is not None}
    if isinstance(value, list | tuple):
        return [_lists(item) for item in value]
    return value
