"""A named dimension of a shape family, and the check of a value against it."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from enum import Enum
from typing import Any

from .errors import InputError
from .words import nearest

#: Lengths and coordinates that a part can have, mm: a hundredth of a micrometre to a kilometre.
SHORTEST, FARTHEST = 1e-5, 1e6

#: The shortest length of a part is at least this share of its longest: what is thinner
#: cannot be told from nothing when the body is built.
_THINNEST = 1e-6


class Sort(Enum):
    """What kind of value a dimension takes."""

    LENGTH = "mm"
    LENGTHS = "list of mm"
    LENGTH_OR_LENGTHS = "mm, or a list of mm"
    COUNT = "whole number"
    CHOICE = "one of"
    POINTS = "list of [mm, mm]"
    LOOPS = "list of lists of [mm, mm]"
    ROWS = "list of tables"
    FILE = "file name"
    FILE_OR_POINTS = "file name, or a list of [mm, mm]"
    FLAG = "true or false"


#: Most items of a list: more are no part that can be meshed in minutes.
_MOST = {Sort.ROWS: 200, Sort.LOOPS: 500, Sort.POINTS: 5000, Sort.FILE_OR_POINTS: 5000}


@dataclass(frozen=True, kw_only=True, slots=True)
class Dimension:
    """One dimension of a shape family, as the case file knows it.

    Attributes
    ----------
    name : key in the case file
    text : what it measures, a phrase
    sort : Sort
    default : value used when the key is absent; None: see `optional`
    optional : absent means "not there" (None reaches the family)
    low : smallest allowed number; `strict` excludes it
    high : largest allowed number, or None
    choices : allowed words of a CHOICE
    columns : dimensions of each table of ROWS
    fewest : smallest number of list items
    """

    name: str
    text: str
    sort: Sort = Sort.LENGTH
    default: Any = None
    optional: bool = False
    low: float = 0.0
    strict: bool = True
    high: float | None = None
    choices: tuple[str, ...] = ()
    columns: tuple[Dimension, ...] = ()
    fewest: int = 1

    @property
    def unit(self) -> str:
        """Unit or kind, for tables that people read."""
        if self.sort is Sort.CHOICE:
            return " | ".join(self.choices)
        return self.sort.value

    def read(self, value: Any, key: str) -> Any:
        """Return the checked value (tuples for lists, dicts for tables).

        Parameters
        ----------
        value : object
            What the case file holds.
        key : str
            Full key path, for the message.

        Raises
        ------
        InputError
            If the value is of the wrong kind or out of range.
        """
        match self.sort:
            case Sort.LENGTH:
                return self._number(value, key)
            case Sort.COUNT:
                if isinstance(value, bool) or not isinstance(value, int):
                    raise InputError("must be a whole number", key=key, value=value)
                return int(self._number(value, key))
            case Sort.CHOICE:
                return self._choice(value, key)
            case Sort.FLAG:
                if not isinstance(value, bool):
                    raise InputError("must be true or false", key=key, value=value)
                return value
            case Sort.LENGTHS:
                return tuple(self._items(value, key, self._number))
            case Sort.LENGTH_OR_LENGTHS:
                if isinstance(value, Sequence) and not isinstance(value, str):
                    return tuple(self._items(value, key, self._number))
                return self._number(value, key)
            case Sort.POINTS:
                return tuple(self._items(value, key, read_point))
            case Sort.LOOPS:
                return tuple(
                    self._items(
                        value, key, lambda loop, k: tuple(self._items(loop, k, read_point, 3))
                    )
                )
            case Sort.ROWS:
                return tuple(
                    self._items(value, key, lambda row, k: read_dimensions(self.columns, row, k))
                )
            case Sort.FILE:
                return self._file(value, key)
            case Sort.FILE_OR_POINTS:
                if isinstance(value, str):
                    return self._file(value, key)
                return tuple(self._items(value, key, read_point))

    def _items(self, value: Any, key: str, read: Any, fewest: int | None = None) -> list[Any]:
        fewest = self.fewest if fewest is None else fewest
        if isinstance(value, str) or not isinstance(value, Sequence):
            raise InputError(f"must be a {self.unit}", key=key, value=value)
        if len(value) < fewest:
            raise InputError(f"needs at least {fewest} items", key=key, value=f"{len(value)} items")
        most = _MOST.get(self.sort, math.inf)
        if len(value) > most:
            raise InputError(
                "has too many items", key=key, value=f"{len(value)} items", allowed=f"up to {most}"
            )
        return [read(item, f"{key}.{i}") for i, item in enumerate(value, 1)]

    def _number(self, value: Any, key: str) -> float:
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise InputError(f"must be a number ({self.unit})", key=key, value=value)
        if not math.isfinite(value):
            raise InputError("must be a finite number", key=key, value=value)
        allowed = f"over {self.low:g}" if self.strict else f"{self.low:g} or more"
        if self.high is not None:
            allowed += f", up to {self.high:g}"
        too_low = value <= self.low if self.strict else value < self.low
        if too_low or (self.high is not None and value > self.high):
            raise InputError("is out of range", key=key, value=value, allowed=allowed)
        if self.sort is Sort.COUNT:
            return value
        if abs(value) > FARTHEST or (0 < abs(value) < SHORTEST and self.low >= 0):
            raise InputError(
                "is no length that a part can have",
                key=key,
                value=value,
                allowed=f"{SHORTEST:g} to {FARTHEST:g} mm",
            )
        return float(value)

    def _choice(self, value: Any, key: str) -> str:
        if not isinstance(value, str) or value not in self.choices:
            raise InputError(
                "is not one of the choices", key=key, value=value, allowed=", ".join(self.choices)
            )
        return value

    def _file(self, value: Any, key: str) -> str:
        if not isinstance(value, str) or not value:
            raise InputError("must be a file name", key=key, value=value)
        return value


def read_point(value: Any, key: str) -> tuple[float, float]:
    """Return a checked point (2,) mm of any sign."""
    good = (
        isinstance(value, Sequence)
        and not isinstance(value, str)
        and len(value) == 2
        and all(isinstance(c, int | float) and not isinstance(c, bool) for c in value)
        and all(math.isfinite(c) for c in value)
    )
    if not good:
        raise InputError("must be a point [mm, mm]", key=key, value=value)
    if max(map(abs, value)) > FARTHEST:
        raise InputError(
            "is too far away", key=key, value=value, allowed=f"coordinates up to {FARTHEST:g} mm"
        )
    return (float(value[0]), float(value[1]))


def read_dimensions(dimensions: tuple[Dimension, ...], values: Any, key: str) -> dict[str, Any]:
    """Return all dimensions by name: checked values, defaults, None where optional and absent.

    Raises
    ------
    InputError
        For unknown keys (with the nearest known one), missing keys, and values
        of the wrong kind or out of range.
    """
    if not isinstance(values, Mapping):
        raise InputError("must be a table", key=key, value=values)
    known = {d.name: d for d in dimensions}
    for name in values:
        if name not in known:
            hint = nearest(name, known)
            raise InputError(
                "unknown key" + (f" (did you mean {hint!r}?)" if hint else ""),
                key=f"{key}.{name}",
                allowed=", ".join(known),
            )
    checked: dict[str, Any] = {}
    for d in dimensions:
        if values.get(d.name) is not None:
            checked[d.name] = d.read(values[d.name], f"{key}.{d.name}")
        elif d.default is not None or d.optional:
            checked[d.name] = d.default
        else:
            raise InputError(f"is missing: {d.text}", key=f"{key}.{d.name}", allowed=d.unit)
    return checked


def refuse_uneven(dimensions: tuple[Dimension, ...], values: Mapping[str, Any], key: str) -> None:
    """Raise InputError if a length is next to nothing beside the longest of the part."""
    lengths = list(_lengths(dimensions, values, key))
    longest = max((length for _, length in lengths), default=0.0)
    for place, length in lengths:
        if 0 < length < _THINNEST * longest:
            raise InputError(
                f"is next to nothing beside the longest dimension of {longest:g} mm",
                key=place,
                value=length,
                allowed=f"{_THINNEST * longest:g} mm or more",
            )


def _lengths(
    dimensions: tuple[Dimension, ...], values: Mapping[str, Any], key: str
) -> Iterator[tuple[str, float]]:
    for d in dimensions:
        value, place = values.get(d.name), f"{key}.{d.name}"
        if value is None or d.low < 0:
            continue
        if d.sort is Sort.ROWS:
            for i, row in enumerate(value, 1):
                yield from _lengths(d.columns, row, f"{place}.{i}")
        elif d.sort in (Sort.LENGTH, Sort.LENGTHS, Sort.LENGTH_OR_LENGTHS):
            if isinstance(value, tuple):
                yield from ((f"{place}.{i}", item) for i, item in enumerate(value, 1))
            else:
                yield place, value
