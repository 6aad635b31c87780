"""How a part is held, in the few words that formulas know."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal

from ....geometry.anatomy import Anatomy
from ....geometry.selector import ByName
from ..mount import AttachedMass, Hold, Mount

Held = Literal["free", "first end clamped", "last end clamped", "both ends clamped", "other"]
"""``other`` is everything that no formula here covers."""


def held_of(
    mounts: Sequence[Mount],
    anatomy: Anatomy,
    attached_masses: Sequence[AttachedMass] = (),
) -> Held:
    """Return how mounts hold a body, as far as formulas know.

    Only clamps that name exactly the faces `Anatomy.ends` are known; attached
    masses, springs, patches and part clamps are ``other``.
    """
    if attached_masses:
        return "other"
    if all(mount.hold is Hold.FREE for mount in mounts):
        return "free"
    if anatomy.ends is None:
        return "other"
    held: set[str] = set()
    for mount in mounts:
        if mount.hold is not Hold.CLAMPED:
            return "other"
        for face in mount.faces:
            if not isinstance(face, ByName) or face.name not in anatomy.ends:
                return "other"
            held.add(face.name)
    first, last = (end in held for end in anatomy.ends)
    if first and last:
        return "both ends clamped"
    if first:
        return "first end clamped"
    return "last end clamped" if last else "other"


def clamped_columns(held: Held, functions: int, fields: int = 1) -> list[int]:
    """Return which unknowns clamps hold, of fields of so many functions each.

    The first and the last function of a field are its values at the two ends.
    """
    ends = {
        "first end clamped": (0,),
        "last end clamped": (functions - 1,),
        "both ends clamped": (0, functions - 1),
    }.get(held, ())
    return [field * functions + end for field in range(fields) for end in ends]
