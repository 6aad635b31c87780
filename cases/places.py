"""From the selectors of a case file to records, checked against the shape's faces."""

from __future__ import annotations

from ..geometry.errors import InputError
from ..geometry.selector import ByName, InBox, Near, OnPlane, Selector
from ..geometry.solid import Patch
from ..geometry.words import nearest
from .mistake import POINT_OR_LINE
from .schema import BoxSelector, NearSelector, PatchSelector, PlaneSelector


class Places:
    """Reads selectors and numbers the patches of one case.

    Parameters
    ----------
    faces : names of the shape's faces; empty where only the mesh can tell
    """

    def __init__(self, faces: tuple[str, ...]) -> None:
        self.faces = faces
        self._patches: dict[tuple[object, ...], Patch] = {}

    def selector(self, given: object, key: str) -> Selector:
        """Return the record of one selector.

        Raises
        ------
        InputError
            If it names a face that is not there, or covers nothing.
        """
        match given:
            case str(name):
                return ByName(name=self._face(name, key))
            case PlaneSelector():
                return OnPlane(axis=given.plane, at=given.at)
            case BoxSelector():
                (x0, y0, z0), (x1, y1, z1) = given.box
                return InBox(
                    low=(min(x0, x1), min(y0, y1), min(z0, z1)),
                    high=(max(x0, x1), max(y0, y1), max(z0, z1)),
                )
            case NearSelector():
                return Near(point=given.near)
            case PatchSelector():
                return self._patch(given, key)
        raise TypeError(f"no such selector: {given!r}")

    def _face(self, name: str, key: str) -> str:
        if self.faces and name not in self.faces:
            close = nearest(name, self.faces)
            hint = f" (did you mean {close!r}?)" if close else ""
            raise InputError(
                f"no such face{hint}", key=key, value=name, allowed=", ".join(self.faces)
            )
        return name

    def _patch(self, given: PatchSelector, key: str) -> Patch:
        face = self._face(given.face, f"{key}.face")
        low = (min(given.low[0], given.high[0]), min(given.low[1], given.high[1]))
        high = (max(given.low[0], given.high[0]), max(given.low[1], given.high[1]))
        if low[0] == high[0] or low[1] == high[1]:
            raise InputError(
                f"covers no area: {POINT_OR_LINE}",
                key=key,
                value={"from": list(given.low), "to": list(given.high)},
            )
        # The same rectangle asked for twice is one patch.
        same = (face, low, high)
        if same not in self._patches:
            number = len(self._patches) + 1
            while f"patch_{number}" in self.faces:
                number += 1
            self._patches[same] = Patch(name=f"patch_{number}", face=face, low=low, high=high)
        return self._patches[same]
