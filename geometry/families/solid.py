"""A solid from a CAD file."""

from __future__ import annotations

from pathlib import Path

from ..dimension import Dimension, Sort
from ..errors import InputError
from ..shape import Dimensions, Family
from ..solid import Imported, Solid
from ..source import source_file

_STEP, _BREP = (".step", ".stp"), (".brep", ".brp")

#: First words of a STEP file (ISO 10303-21, sec. 5.1) and of the two kinds of BREP file.
_STARTS = {".step": (b"ISO-10303-21",), ".brep": (b"DBRep_DrawableShape", b"CASCADE Topology")}

_DIMENSIONS = (
    Dimension(
        name="solid",
        text="a STEP file (in the unit it says) or a BREP file (taken as mm)",
        sort=Sort.FILE,
    ),
)


def _solid(d: Dimensions, folder: Path) -> Solid:
    path = source_file(folder, d["solid"], key="shape.solid", suffixes=(*_STEP, *_BREP))
    kind = ".step" if path.suffix.lower() in _STEP else ".brep"
    with path.open("rb") as file:
        start = file.read(4096)
    if not any(word in start for word in _STARTS[kind]):
        raise InputError(
            f"is no {kind[1:].upper()} file: it does not begin like one",
            key="shape.solid",
            value=d["solid"],
        )
    return Solid(body=Imported(path=path.resolve()))


def _check(d: Dimensions) -> None:
    """Accept: one file name is all there is, and only its folder can tell more."""


FAMILY = Family(
    name="solid",
    text="a solid from a STEP or BREP file, in its own coordinates",
    dimensions=_DIMENSIONS,
    faces=("face_1 ... (by increasing x, y, z of their middles)",),
    check=_check,
    solid=_solid,
    anatomy=None,
    example={"solid": "part.step"},
)
