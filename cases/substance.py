"""From the ``[material]`` table to a `Material`, and back."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from ..fem.modal.material import Material
from ..fem.modal.materials import find_material
from ..geometry.errors import InputError
from .schema import MaterialTable
from .sense import MATERIAL, ORTHOTROPIC_POISSON, check_parts_per_million

#: Key of the case file -> (field of `Material`, value of the field in SI per unit of the key).
UNITS: dict[str, tuple[str, float]] = {
    "youngs_modulus_gpa": ("youngs_modulus", 1e9),
    "shear_modulus_gpa": ("shear_modulus", 1e9),
    "poisson_ratio": ("poisson_ratio", 1.0),
    "density": ("density", 1.0),
    "loss_factor": ("loss_factor", 1.0),
    "expansion_ppm_per_k": ("expansion", 1e-6),
    "modulus_slope_ppm_per_k": ("modulus_slope", 1e-6),
    "conductivity": ("conductivity", 1.0),
    "specific_heat": ("specific_heat", 1.0),
    "endurance_mpa": ("endurance", 1e6),
}
_ELASTIC = ("youngs_modulus_gpa", "poisson_ratio", "density")


def read_material(table: MaterialTable) -> Material:
    """Return the library's material with the case's own values in place.

    Raises
    ------
    InputError
        For an unknown name, a value out of range (with the likely slip of the
        unit), and constants that do not go together.
    """
    own = {key: value for key in UNITS if (value := getattr(table, key)) is not None}
    for key, value in own.items():
        _check(key, value)
    own_si = {UNITS[key][0]: _scaled(value, UNITS[key][1]) for key, value in own.items()}
    complete = all(key in own for key in _ELASTIC)
    if table.name is None:
        if not complete:
            missing = next(key for key in _ELASTIC if key not in own)
            raise InputError(
                "is missing: a material needs a name from `modewright materials`, or at least "
                + ", ".join(_ELASTIC),
                key=f"material.{missing}" if own else "material.name",
            )
        material = Material(name="own values", **own_si)
    else:
        try:
            library = find_material(table.name).material
        except InputError:
            if not complete:
                raise
            library = Material(name=table.name, **own_si)
        if library.orthotropic and _single(own, "youngs_modulus_gpa", "poisson_ratio"):
            own_si.setdefault("shear_modulus", None)
        material = replace(library, **own_si)
    _check_together(material)
    material.stiffness()
    return material


def material_table(material: Material) -> dict[str, Any]:
    """Return a material as the ``[material]`` table would hold it, unknown values left out."""
    table: dict[str, Any] = {"name": material.name}
    for key, (field, unit) in UNITS.items():
        value = getattr(material, field)
        if value is not None:
            table[key] = _scaled(value, 1.0 / unit, digits=12)
    return table


def _check(key: str, value: Any) -> None:
    path = f"material.{key}"
    sense = MATERIAL[key]
    if isinstance(value, tuple):
        if key not in ("youngs_modulus_gpa", "shear_modulus_gpa", "poisson_ratio"):
            raise InputError("must be one number", key=path, value=list(value))
        for i, item in enumerate(value, 1):
            (ORTHOTROPIC_POISSON if key == "poisson_ratio" else sense).check(item, f"{path}.{i}")
        return
    sense.check(value, path)
    if key.endswith("ppm_per_k"):
        check_parts_per_million(value, path)


def _check_together(material: Material) -> None:
    """Raise InputError unless all elastic constants are single, or all are triple."""
    three = {
        "youngs_modulus_gpa": isinstance(material.youngs_modulus, tuple),
        "shear_modulus_gpa": isinstance(material.shear_modulus, tuple),
        "poisson_ratio": isinstance(material.poisson_ratio, tuple),
    }
    if material.shear_modulus is not None and not any(three.values()):
        raise InputError(
            "is for orthotropic materials only: the shear modulus of an isotropic one follows "
            "from youngs_modulus_gpa and poisson_ratio",
            key="material.shear_modulus_gpa",
        )
    if any(three.values()) and not all(three.values()):
        key = next(key for key, triple in three.items() if not triple)
        raise InputError(
            "needs three values: in an orthotropic material youngs_modulus_gpa = [x, y, z], "
            "shear_modulus_gpa and poisson_ratio = [xy, xz, yz]",
            key=f"material.{key}",
        )


def _single(own: dict[str, Any], *keys: str) -> bool:
    return all(isinstance(own.get(key), float) for key in keys)


def _scaled(value: Any, factor: float, digits: int | None = None) -> Any:
    if isinstance(value, tuple):
        scaled = tuple(_scaled(item, factor, digits) for item in value)
        return list(scaled) if digits else scaled
    # Rounded on the way out, so that 205e9 Pa reads 205 GPa and not 205.00000000000003.
    return float(f"{value * factor:.{digits}g}") if digits else value * factor
