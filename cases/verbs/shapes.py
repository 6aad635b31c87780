"""``modewright shapes``: the shape families, and every dimension of one."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from ...geometry.dimension import Dimension, Sort
from ...geometry.errors import InputError
from ...geometry.families.table import FAMILIES
from ...geometry.shape import Family
from ...geometry.words import nearest
from ...viz.table import Table
from ..answer import Answer

COORDINATES = (
    "Coordinates, in mm: long parts run along x from the root (or end_a) at x = 0 to the tip; "
    "y runs across, z through the thickness, both zero in the middle of the section at x = 0; "
    "left is +y. Round plates, rings and bodies of revolution have their axis along z and their "
    "centre (bodies of revolution: their lowest point) at the origin, rectangular plates their "
    "centre. Imported bodies keep their own."
)


def answer_shapes(family: str | None) -> Answer:
    """Return all families, or the dimensions and faces of one.

    Raises
    ------
    InputError
        If there is no such family.
    """
    if family is not None:
        return _one(find_family(family))
    rows = tuple((f.name, f.text, ", ".join(f.faces)) for f in FAMILIES.values())
    return Answer(
        document={
            "format": "modewright-shapes",
            "version": 1,
            "families": [_family_document(f) for f in FAMILIES.values()],
        },
        tables=(Table(headers=("family", "what it is", "faces"), rows=rows),),
        lines=("`modewright shapes FAMILY` lists the dimensions; `modewright new FAMILY` a case.",),
        spare=("faces",),
    )


def find_family(name: str) -> Family:
    """Return the family of that name.

    Raises
    ------
    InputError
        With the nearest known name, if there is none.
    """
    if name in FAMILIES:
        return FAMILIES[name]
    close = nearest(name, FAMILIES)
    raise InputError(
        "no such shape family" + (f" (did you mean {close!r}?)" if close else ""),
        value=name,
        allowed=", ".join(FAMILIES),
    )


def allowed_words(dimension: Dimension) -> str:
    """Return the allowed range or choices of a dimension in a few words."""
    if dimension.sort is Sort.CHOICE:
        return ", ".join(dimension.choices)
    if dimension.sort in (Sort.POINTS, Sort.LOOPS, Sort.FILE, Sort.FLAG, Sort.FILE_OR_POINTS):
        return ""
    if dimension.sort is Sort.ROWS:
        return f"{dimension.fewest} or more tables"
    low = f"over {dimension.low:g}" if dimension.strict else f"{dimension.low:g} or more"
    return low if dimension.high is None else f"{low}, up to {dimension.high:g}"


def default_words(dimension: Dimension) -> str:
    """Return the default of a dimension as shown to people."""
    if dimension.default is not None:
        default = dimension.default
        return f"{default:g}" if isinstance(default, float) else str(default)
    return "optional" if dimension.optional else "needed"


def _one(family: Family) -> Answer:
    rows = tuple(
        (name, _unit(d), default_words(d), allowed_words(d), d.text)
        for name, d in _with_columns(family.dimensions)
    )
    headers = ("dimension", "unit", "default", "allowed", "text")
    return Answer(
        document={
            "format": "modewright-shape",
            "version": 1,
            **_family_document(family),
            "coordinates": COORDINATES,
        },
        heading=f"{family.name}: {family.text}",
        tables=(Table(headers=headers, rows=rows),),
        lines=(f"Faces: {', '.join(family.faces)}.", COORDINATES),
        spare=("allowed", "unit"),
    )


def _unit(dimension: Dimension) -> str:
    return "word" if dimension.sort is Sort.CHOICE else dimension.unit


def _with_columns(dimensions: tuple[Dimension, ...]) -> Iterator[tuple[str, Dimension]]:
    for dimension in dimensions:
        yield dimension.name, dimension
        for column in dimension.columns:
            yield f"{dimension.name}.N.{column.name}", column


def _family_document(family: Family) -> dict[str, Any]:
    return {
        "family": family.name,
        "text": family.text,
        "dimensions": [_dimension_document(d) for d in family.dimensions],
        "faces": list(family.faces),
        "example": _plain(family.example),
    }


def _dimension_document(dimension: Dimension) -> dict[str, Any]:
    return {
        "name": dimension.name,
        "text": dimension.text,
        "unit": dimension.unit,
        "default": _plain(dimension.default),
        "optional": dimension.optional or dimension.default is not None,
        "allowed": allowed_words(dimension),
        "columns": [_dimension_document(column) for column in dimension.columns],
    }


def _plain(value: Any) -> Any:
    if isinstance(value, tuple | list):
        return [_plain(item) for item in value]
    if hasattr(value, "items"):
        return {key: _plain(item) for key, item in value.items()}
    return value
