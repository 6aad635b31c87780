"""Looking up a material of the library by name."""

from __future__ import annotations

from ...geometry.errors import InputError
from ...geometry.words import nearest
from .material_table import MATERIALS, MaterialRow


def find_material(name: str) -> MaterialRow:
    """Return the row of a material, by its name or an alias, whatever the case.

    Raises
    ------
    InputError
        If there is none, with the nearest known name.
    """
    names = {row.material.name.casefold(): row for row in MATERIALS.values()}
    for row in MATERIALS.values():
        names.update({alias.casefold(): row for alias in row.aliases})
    wanted = " ".join(name.split()).casefold()
    if wanted in names:
        return names[wanted]
    near = nearest(wanted, names)
    hint = f"; did you mean {names[near].material.name!r}?" if near else ""
    raise InputError(
        f"no such material{hint}",
        key="material.name",
        value=name,
        allowed=", ".join(MATERIALS),
    )
