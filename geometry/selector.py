"""How a case file points at faces: by name, plane, box, nearness or patch."""

from __future__ import annotations

from dataclasses import dataclass

from .solid import Patch, Point3


@dataclass(frozen=True, kw_only=True, slots=True)
class ByName:
    """The face of that name."""

    name: str


@dataclass(frozen=True, kw_only=True, slots=True)
class OnPlane:
    """All faces wholly in the plane axis = min or max of the body.

    Attributes
    ----------
    axis : ``x``, ``y`` or ``z``
    at : ``min`` or ``max``
    """

    axis: str
    at: str


@dataclass(frozen=True, kw_only=True, slots=True)
class InBox:
    """All faces wholly inside the box, corners in mm."""

    low: Point3
    high: Point3


@dataclass(frozen=True, kw_only=True, slots=True)
class Near:
    """The one face closest to a point, mm."""

    point: Point3


Selector = ByName | OnPlane | InBox | Near | Patch
