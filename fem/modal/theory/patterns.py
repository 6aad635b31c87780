"""Which nodal lines a theoretical plate mode shows, to find it by its name."""

from __future__ import annotations

import re

import numpy as np

from ..naming.products import beam_functions
from .plate import PlateModes

#: Two patterns this near in size stand in one name, as in the names of modes.
_EQUAL = 0.8

_MOST = 16

_NAME = re.compile(r"plate \((\d+),(\d+)\)(?:([+-])\((\d+),(\d+)\))?")

#: The products of beam functions in a name, and whether two of them add or oppose.
Pattern = tuple[frozenset[tuple[int, int]], str]


def pattern_of(name: str) -> Pattern | None:
    """Return the pattern a mode's name tells, or None if it is no plate mode."""
    found = _NAME.fullmatch(name)
    if found is None:
        return None
    first = (int(found[1]), int(found[2]))
    if found[3] is None:
        return frozenset([first]), ""
    return frozenset([first, (int(found[4]), int(found[5]))]), found[3]


def patterns(modes: PlateModes, *, clamped: bool) -> dict[Pattern, int]:
    """Return which mode shows each pattern; patterns shown by several are left out.

    Deflections are developed in products of the same beam functions as the
    names of modes. Equal modes (of square plates) may be turned in their
    plane, so they answer to any combination of their two patterns.

    Parameters
    ----------
    modes : PlateModes
    clamped : bool
        Clamped at the first end of the length.
    """
    place = (modes.points + 1.0) / 2.0
    along = beam_functions(place, _MOST, first=clamped, last=False) * modes.weights
    across = beam_functions(place, _MOST, first=False, last=False) * modes.weights
    amounts = np.einsum("aq,mqr,br->mab", along, modes.deflections, across)
    shown: dict[Pattern, list[int]] = {}
    last = len(modes.parameters) - 1
    for mode in range(last):  # the twin of the last mode may be missing
        twins = [
            m
            for m in (mode - 1, mode, mode + 1)
            if 0 <= m <= last and abs(modes.parameters[m] / modes.parameters[mode] - 1.0) < 1e-6
        ]
        for pattern in _shown_by(amounts[twins], amounts[mode]):
            shown.setdefault(pattern, []).append(twins[0])
    return {pattern: found[0] for pattern, found in shown.items() if len(set(found)) == 1}


def _shown_by(twins: np.ndarray, alone: np.ndarray) -> list[Pattern]:
    """Return the patterns a mode may show, from its and its twins' amounts (k, n, n)."""
    size = np.sqrt(np.sum(twins**2, axis=0))
    order = np.argsort(size, axis=None)[::-1]
    one, two = _lines(order[0]), _lines(order[1])
    if size[two] < _EQUAL * size[one]:
        return [(frozenset([one]), "")]
    both = frozenset([one, two])
    if len(twins) == 1:
        return [(both, "+" if alone[one] * alone[two] > 0.0 else "-")]
    return [(frozenset([one]), ""), (frozenset([two]), ""), (both, "+"), (both, "-")]


def _lines(k: np.integer) -> tuple[int, int]:
    """Return the pattern of a flat index into the amounts."""
    along, across = divmod(int(k), _MOST)
    return along, across
