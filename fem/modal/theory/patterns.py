"""Which nodal lines a theoretical plate mode shows, to find it by its name."""

from __future__ import annotations

import re

import numpy as np

from .beam import beam_roots
from .plate import PlateModes

#: Two patterns this near in size stand in one name.
_EQUAL = 0.8
_MOST_LINES = 12

_NAME = re.compile(r"plate \((\d+),(\d+)\)(?:([+-])\((\d+),(\d+)\))?( [ab])?")

#: The nodal lines in a name, and for (m,n) with (n,m) whether they add or oppose.
Pattern = tuple[frozenset[tuple[int, int]], str]


def pattern_of(name: str) -> Pattern | None:
    """Return the pattern a mode's name tells, or None if it is no plate mode."""
    found = _NAME.fullmatch(name)
    if found is None:
        return None
    first = (int(found[1]), int(found[2]))
    if found[3] is None:
        return frozenset([first]), ""
    second = (int(found[4]), int(found[5]))
    return frozenset([first, second]), found[3] if first == second[::-1] else ""


def patterns(modes: PlateModes) -> dict[Pattern, int]:
    """Return which mode shows each pattern; patterns shown by several are left out.

    Deflections are developed in products of free-free beam functions. Equal
    modes (of square plates) may be turned in their plane, so they answer to
    any combination of their two patterns.
    """
    basis = _beam_functions(modes.points)
    weighted = basis * modes.weights[:, None]
    amounts = np.einsum("qa,mqr,rb->mab", weighted, modes.deflections, weighted)
    shown: dict[Pattern, list[int]] = {}
    last = len(modes.parameters) - 1
    for mode in range(last):  # the twin of the last mode may be missing
        twins = [
            m
            for m in (mode - 1, mode, mode + 1)
            if 0 <= m <= last and abs(modes.parameters[m] / modes.parameters[mode] - 1.0) < 1e-6
        ]
        size = np.sqrt(np.sum(amounts[twins] ** 2, axis=0))
        order = np.argsort(size, axis=None)[::-1]
        one, two = _lines(order[0]), _lines(order[1])
        found: list[Pattern]
        if size[two] < _EQUAL * size[one]:
            found = [(frozenset([one]), "")]
        elif len(twins) > 1:
            signs = ("+", "-") if one == two[::-1] else ("",)
            found = [(frozenset([one]), ""), (frozenset([two]), "")]
            found += [(frozenset([one, two]), sign) for sign in signs]
        else:
            same = amounts[mode][one] * amounts[mode][two] > 0.0
            sign = ("+" if same else "-") if one == two[::-1] else ""
            found = [(frozenset([one, two]), sign)]
        for pattern in found:
            shown.setdefault(pattern, []).append(twins[0])
    return {pattern: found[0] for pattern, found in shown.items() if len(set(found)) == 1}


def _lines(k: np.integer) -> tuple[int, int]:
    """Return the pattern of a flat index into the amounts."""
    along, across = divmod(int(k), _MOST_LINES)
    return along, across


def _beam_functions(x: np.ndarray) -> np.ndarray:
    """Return free-free beam functions (q, k) of unit norm on -1..1, by nodal points."""
    columns = [np.full_like(x, np.sqrt(0.5)), np.sqrt(1.5) * x]
    for k, root in enumerate(beam_roots("free-free", _MOST_LINES - 2)):
        # Halves of the even and odd functions about the middle, decaying from the end.
        half = root / 2.0
        even = k % 2 == 0
        decay = np.exp(half * (np.abs(x) - 1.0))
        mirror = np.exp(-half * (np.abs(x) + 1.0))
        if even:
            wave = np.cos(half * x) / np.cos(half)
            bulge = (decay + mirror) / (1.0 + np.exp(-root))
        else:
            wave = np.sin(half * x) / np.sin(half)
            bulge = np.sign(x) * (decay - mirror) / (1.0 - np.exp(-root))
        columns.append((wave + bulge) / np.sqrt(2.0))
    return np.column_stack(columns)
