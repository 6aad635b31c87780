"""STEP and BREP files to CAD volumes."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from ..errors import InputError

_SUFFIXES = (".step", ".stp", ".brep", ".brp")

#: Edges shorter than this share of the body's diagonal are drawing flaws, and are healed.
_FLAW = 1e-5


def load(cad: Any, path: Path) -> list[int]:
    """Read a file's solids into the current model, in mm; return their volume tags.

    Solids that touch are joined.

    Raises
    ------
    InputError
        If the file cannot be read or holds no solid, or several that do not touch.
    """
    if not path.is_file():
        raise InputError("no such file", value=str(path))
    if path.suffix.lower() not in _SUFFIXES:
        raise InputError(
            "unknown kind of solid file", value=path.name, allowed=", ".join(_SUFFIXES)
        )
    occ = cad.model.occ
    # STEP files say their unit; BREP has none, and is taken as mm.
    cad.option.setString("Geometry.OCCTargetUnit", "MM")
    try:
        found = occ.importShapes(str(path))
    except Exception as error:
        raise InputError(
            f"cannot be read as a solid ({str(error).strip() or 'unknown reason'})", value=path.name
        ) from None
    solids = [tag for dim, tag in found if dim == 3]
    if not solids:
        raise InputError("holds no solid, only surfaces, curves or nothing", value=path.name)
    loose = [(dim, tag) for dim, tag in found if dim != 3]
    if loose:
        occ.remove(loose, recursive=True)
    solids = _healed(cad, solids)
    if len(solids) == 1:
        return solids
    first, *others = ((3, tag) for tag in solids)
    joined = [tag for dim, tag in occ.fuse([first], others)[0] if dim == 3]
    if len(joined) != 1:
        raise InputError(
            f"holds {len(solids)} solids that make {len(joined)} separate bodies",
            value=path.name,
            allowed="one solid, or solids that touch (they are joined)",
        )
    return joined


def _healed(cad: Any, solids: list[int]) -> list[int]:
    """Repair edges and faces too small to be meant; sound bodies stay untouched."""
    occ = cad.model.occ
    occ.synchronize()
    x0, y0, z0, x1, y1, z1 = cad.model.getBoundingBox(-1, -1)
    flaw = _FLAW * ((x1 - x0) ** 2 + (y1 - y0) ** 2 + (z1 - z0) ** 2) ** 0.5
    if all(occ.getMass(1, tag) > flaw for _, tag in cad.model.getEntities(1)):
        return solids
    healed = occ.healShapes([(3, tag) for tag in solids], tolerance=flaw)
    return [tag for dim, tag in healed if dim == 3]
