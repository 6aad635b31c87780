"""Names made unique: letters for equal directions, numbers by frequency."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Sequence

import numpy as np

from .label import Draft, Label

#: The two axis shares of a pair add up to 1, to within this.
_PAIRED = 0.4


def labelled(drafts: Sequence[Draft], clusters: Sequence[np.ndarray]) -> tuple[Label, ...]:
    """Return labels with unique names, in order.

    Parameters
    ----------
    drafts : of all modes, by frequency
    clusters : runs of indices of equal modes
    """
    letters = _letters(drafts)
    taken: Counter[str] = Counter()
    names: list[str] = []
    for draft, letter in zip(drafts, letters, strict=True):
        tail = f" {letter}" if letter else ""
        whole = draft.key + tail
        taken[whole] += 1
        if draft.numbered:
            name = f"{draft.base} {taken[whole]}{draft.suffix}{tail}"
        else:
            name = whole if taken[whole] == 1 else f"{whole} #{taken[whole]}"
        names.append(name)
    partners = _partners(drafts, clusters)
    return tuple(
        Label(
            name=name,
            mixed=draft.mixed,
            pair=None if partner is None else names[partner],
            shares=draft.shares,
            prong_balance=draft.prong_balance,
            root_share=draft.root_share,
            tine_shares=draft.tine_shares,
            nodal_points_mm=draft.nodal_points_mm,
        )
        for draft, name, partner in zip(drafts, names, partners, strict=True)
    )


def _letters(drafts: Sequence[Draft]) -> list[str | None]:
    """Return the letter of each mode: of two neighbours, `a` lies nearer to the axis."""
    letters: list[str | None] = [None] * len(drafts)
    same: dict[str, list[int]] = defaultdict(list)
    for i, draft in enumerate(drafts):
        if draft.axis_share is not None:
            same[draft.key].append(i)
    for members in same.values():
        while members:
            i, *rest = members
            mine = drafts[i].axis_share or 0.0
            other = (drafts[rest[0]].axis_share or 0.0) if rest else None
            if other is not None and abs(mine + other - 1.0) < _PAIRED:
                letters[i], letters[rest[0]] = ("a", "b") if mine >= other else ("b", "a")
                members = rest[1:]
            else:
                letters[i] = "a" if mine >= 0.5 else "b"
                members = rest
    return letters


def _partners(drafts: Sequence[Draft], clusters: Sequence[np.ndarray]) -> list[int | None]:
    """Return the partner of each mode in its cluster: of the same base first, then the nearest."""
    partners: list[int | None] = [None] * len(drafts)
    for cluster in clusters:
        members = [int(i) for i in cluster]
        for i in members:
            others = [j for j in members if j != i]
            if others:
                partners[i] = min(
                    others, key=lambda j: (drafts[j].base != drafts[i].base, abs(j - i), j)
                )
    return partners
