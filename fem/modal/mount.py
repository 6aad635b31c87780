"""How a part is held, and what is attached to it."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

from ...geometry.selector import Selector
from ...geometry.solid import Point3


class Hold(Enum):
    """Kinds of mount."""

    CLAMPED = "clamped"
    HELD = "held"
    SLIDING = "sliding"
    SPRINGS = "springs"
    FREE = "free"


@dataclass(frozen=True, kw_only=True, slots=True)
class Mount:
    """One mount on some faces.

    Attributes
    ----------
    hold : Hold
    faces : selectors; empty for a free part
    axes : displacement components that are zero (HELD), of ``x``, ``y``, ``z``
    normal_stiffness, tangential_stiffness : N/m per m2 of face (SPRINGS)
    """

    hold: Hold
    faces: tuple[Selector, ...] = ()
    axes: tuple[str, ...] = ()
    normal_stiffness: float = 0.0
    tangential_stiffness: float = 0.0


@dataclass(frozen=True, kw_only=True, slots=True)
class AttachedMass:
    """A mass glued to the surface, without stiffness of its own.

    Either spread evenly over a face, or over the surface within `radius` of
    the surface point nearest to `at`.

    Attributes
    ----------
    mass : kg
    face : Selector or None
    at : (3,) mm, or None
    radius : mm, or None for half the local thickness
    """

    mass: float
    face: Selector | None = None
    at: Point3 | None = None
    radius: float | None = None
