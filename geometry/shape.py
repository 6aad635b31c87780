"""A shape: a family with its dimensions, or an imported body."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from .anatomy import Anatomy
from .dimension import Dimension, read_dimensions, refuse_uneven
from .errors import InputError
from .mesh import Mesh
from .solid import Solid

MM = 1e-3
"""Metres in a millimetre: shapes are in mm, meshes and anatomies in m."""

Dimensions = Mapping[str, Any]


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Family:
    """A family of parametric shapes.

    Attributes
    ----------
    name : key of the case file
    text : one phrase saying what it is
    dimensions : all dimensions, in the order shown to people
    faces : what its faces are called, for people (``tip_1 ...`` for numbered ones)
    check : raises InputError where dimensions contradict each other
    solid : the body, mm; called with checked dimensions and the folder in which
        relative file names are looked for
    anatomy : what the body is, mm; None for families whose body must be meshed
        first (imported ones: see `geometry.imported`)
    mesh : for bodies that are meshes already: the mesh itself, which the mesher
        returns as it is; then `solid` is never called
    example : dimensions of a part that runs as it is (`new FAMILY`)
    """

    name: str
    text: str
    dimensions: tuple[Dimension, ...]
    faces: tuple[str, ...]
    check: Callable[[Dimensions], None]
    solid: Callable[[Dimensions, Path], Solid]
    anatomy: Callable[[Dimensions], Anatomy] | None
    mesh: Callable[[Dimensions, Path], Mesh] | None = None
    example: Mapping[str, Any] = field(default_factory=dict)


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Shape:
    """A body given by a family and its dimensions.

    Attributes
    ----------
    family : Family
    dimensions : all dimensions, checked, mm
    given : the dimensions as the user gave them, without defaults
    folder : Path
        Where relative file names are looked for.
    """

    family: Family
    dimensions: Dimensions
    given: Dimensions
    folder: Path

    def solid(self) -> Solid:
        """Return the description of the body, in mm."""
        return self.family.solid(self.dimensions, self.folder)

    def anatomy(self) -> Anatomy | None:
        """Return what the body is, in m, or None where only the mesh can tell."""
        anatomy = self.family.anatomy
        return None if anatomy is None else anatomy(self.dimensions).scaled(MM)

    def with_dimension(self, path: str, value: Any) -> Shape:
        """Return the shape with one dimension changed.

        Parameters
        ----------
        path : str
            ``thickness``, or a path into lists counted from 1: ``tines.4.length``.
        value : object
            New value, as a case file would hold it.

        Raises
        ------
        InputError
            If there is no such dimension or the new value is not allowed.
        """
        given = _replaced(self.given or {}, self.dimensions, path.split("."), value, path)
        return make_shape(self.family, given, folder=self.folder)


def make_shape(family: Family, values: Mapping[str, Any], *, folder: Path | None = None) -> Shape:
    """Return a checked shape of a family.

    Parameters
    ----------
    family : Family
    values : mapping
        Dimensions as in the ``[shape]`` table, without the ``family`` key.
    folder : Path, optional
        Where relative file names are looked for; default the working directory.

    Raises
    ------
    InputError
        With the key path ``shape.…`` and what is allowed.
    """
    dimensions = read_dimensions(family.dimensions, values, "shape")
    refuse_uneven(family.dimensions, dimensions, "shape")
    try:
        family.check(dimensions)
    except InputError as error:
        raise error.within(key="shape") from None
    return Shape(
        family=family, dimensions=dimensions, given=dict(values), folder=folder or Path.cwd()
    )


def _replaced(given: Any, full: Any, path: list[str], value: Any, whole: str) -> Any:
    """Return a copy of nested `given` with the item at `path` replaced."""
    head, *rest = path
    source = given if given is not None else full
    if isinstance(source, Mapping):
        if head not in full:
            raise InputError("no such dimension", key=f"shape.{whole}", allowed=", ".join(full))
        inner = source.get(head, full[head])
        new = value if not rest else _replaced(inner, full[head], rest, value, whole)
        return {**source, head: new}
    if isinstance(source, list | tuple):
        if not head.isdigit() or not 1 <= int(head) <= len(source):
            raise InputError(
                "no such list item", key=f"shape.{whole}", allowed=f"1 to {len(source)}"
            )
        i = int(head) - 1
        new = value if not rest else _replaced(source[i], full[i], rest, value, whole)
        return [*source[:i], new, *source[i + 1 :]]
    raise InputError("no such dimension", key=f"shape.{whole}")
