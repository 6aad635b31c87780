"""Modes so close that they are heard to beat or to blend."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from .pairs import CENTS

#: Up to this frequency (Hz), modes nearer than this (Hz) are told. A maker's rule for
#: tuned bars: 6 Hz below 1 kHz, 15 Hz below 2 kHz, 30 Hz above.
_NEAR = ((1000.0, 6.0), (2000.0, 15.0), (np.inf, 30.0))

#: The two directions of one mode (letters a and b) nearer than this, in cents, may
#: well be parted by the mesh alone.
_TWINS = 2.0


def beat_warnings(
    frequencies: Sequence[float] | np.ndarray, names: Sequence[str]
) -> tuple[str, ...]:
    """Return one sentence for every two neighbours in frequency that beat or blend.

    Pairs are left out (modes within 0.5 cent of each other, and the two directions
    of one mode within 2): their real split comes from the part, not from the model.

    Parameters
    ----------
    frequencies : (m,) Hz, ascending
    names : of the modes
    """
    warnings = []
    for i in range(len(names) - 1):
        low, high = float(frequencies[i]), float(frequencies[i + 1])
        gap = high - low
        limit = next(near for top, near in _NEAR if 0.5 * (low + high) < top)
        if low <= 0.0 or gap > limit:
            continue
        twins = names[i][-2:] in (" a", " b") and names[i][:-1] == names[i + 1][:-1]
        if 1200.0 * np.log2(high / low) <= (_TWINS if twins else CENTS):
            continue
        warnings.append(
            f"{names[i]!r} at {low:.1f} Hz and {names[i + 1]!r} at {high:.1f} Hz are only "
            f"{gap:.1f} Hz apart: they beat or blend; {_advice(names[i], names[i + 1])}"
        )
    return tuple(warnings)


def _advice(first: str, second: str) -> str:
    """Return what parts two modes, told from what they are."""
    kinds = {_kind(first), _kind(second)}
    if "tine" in first or "tine" in second:
        return "change the length or the tip mass of one of the tines, or strike where one is still"
    if kinds == {"flatwise", "edgewise"}:
        return "change the width: it moves the edgewise mode and leaves the flatwise one"
    if "torsion" in kinds and len(kinds) == 2:
        return "change the width: it moves torsion and leaves flatwise bending"
    if "prong" in first and "prong" in second:
        return "make the slot longer or shorter: the root ties the prongs together"
    return "change a dimension that moves one and not the other, or strike where one is still"


def _kind(name: str) -> str:
    return name.split()[0]
