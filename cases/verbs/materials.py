"""``modewright materials``: the library of materials, and every value of one with its source."""

from __future__ import annotations

import math
from typing import Any

from ...fem.modal.material_table import MATERIALS, MaterialRow
from ...fem.modal.materials import find_material
from ...viz.table import Table
from ..answer import Answer
from ..substance import UNITS, material_table

_WORDS = {
    "youngs_modulus_gpa": "Young's modulus, GPa (orthotropic: along x, y, z)",
    "shear_modulus_gpa": "shear modulus, GPa (xy, xz, yz)",
    "poisson_ratio": "Poisson's ratio (orthotropic: xy, xz, yz)",
    "density": "density, kg/m3",
    "loss_factor": "the material's own loss factor",
    "expansion_ppm_per_k": "linear expansion, millionths per K",
    "modulus_slope_ppm_per_k": "change of the modulus, millionths per K",
    "conductivity": "heat conductivity, W/(m K)",
    "specific_heat": "specific heat, J/(kg K)",
    "endurance_mpa": "stress amplitude for very long life, MPa, polished, no notch",
}


def answer_materials(name: str | None) -> Answer:
    """Return the library, or every value of one material with its source.

    Raises
    ------
    InputError
        If there is no such material.
    """
    if name is not None:
        return _one(find_material(name))
    rows = tuple(_row(row) for row in MATERIALS.values())
    headers = ("material", "E GPa", "Poisson", "kg/m3", "bar wave m/s", "cents / 10 K", "loss")
    return Answer(
        document={
            "format": "modewright-materials",
            "version": 1,
            "materials": [_document(row) for row in MATERIALS.values()],
        },
        tables=(Table(headers=headers, rows=rows, numeric=(False, *[True] * 6)),),
        lines=(
            "Woods are orthotropic; E is along x. `modewright materials NAME` has every value "
            "and its source.",
        ),
        spare=("loss", "Poisson"),
    )


def _row(row: MaterialRow) -> tuple[str, ...]:
    m = row.material
    poisson = m.poisson_ratio
    wave = math.sqrt(m.axial_modulus / m.density)
    return (
        m.name,
        f"{m.axial_modulus / 1e9:.4g}",
        f"{poisson[0] if isinstance(poisson, tuple) else poisson:.3g}",
        f"{m.density:.0f}",
        f"{wave:.0f}",
        _drift(row),
        "" if m.loss_factor is None else f"{m.loss_factor:.1g}",
    )


def _drift(row: MaterialRow) -> str:
    """Return the drift of a bar's pitch in cents per 10 K: f follows sqrt(E L), mass kept."""
    m = row.material
    if m.modulus_slope is None:
        return ""
    slope = (m.modulus_slope + (m.expansion or 0.0)) / 2.0
    return f"{slope * 10.0 * 1200.0 / math.log(2.0):+.1f}"


def _one(row: MaterialRow) -> Answer:
    table = material_table(row.material)
    rows = tuple(
        (
            key,
            _value(table[key]),
            _WORDS[key],
            row.sources.get(UNITS[key][0], ""),
        )
        for key in UNITS
        if key in table
    )
    other = f" (also: {', '.join(row.aliases)})" if row.aliases else ""
    lines = tuple(text for text in (row.note, row.caution and f"Mind: {row.caution}") if text)
    return Answer(
        document={"format": "modewright-material", "version": 1, **_document(row)},
        heading=row.material.name + other,
        tables=(Table(headers=("key in [material]", "value", "what it is", "source"), rows=rows),),
        lines=lines,
        spare=("what it is",),
    )


def _value(value: Any) -> str:
    if isinstance(value, list):
        return "[" + ", ".join(f"{item:g}" for item in value) + "]"
    return f"{value:g}"


def _document(row: MaterialRow) -> dict[str, Any]:
    table = material_table(row.material)
    return {
        **{"name": table["name"], "aliases": list(row.aliases)},
        **{key: table.get(key) for key in UNITS},
        "sources": {key: row.sources.get(field) for key, (field, _) in UNITS.items()},
        "note": row.note,
        "caution": row.caution,
    }
