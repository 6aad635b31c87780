"""Meshing a volume: options, local sizes, second-order cells."""

from __future__ import annotations

from typing import Any

from ..errors import MeshError

#: Cells per full turn of a curved face.
PER_TURN = 12

#: A curve shorter than this share of the element size refines the mesh around it.
_SHORT = 0.7

#: The smallest local size, as a share of the element size asked for.
_SMALLEST = 1 / 12

_OPTIONS = {
    "General.NumThreads": 1,
    "Mesh.MaxNumThreads1D": 1,
    "Mesh.MaxNumThreads2D": 1,
    "Mesh.MaxNumThreads3D": 1,
    "Mesh.Algorithm": 6,  # frontal Delaunay on faces
    "Mesh.Algorithm3D": 1,  # Delaunay
    "Mesh.RandomSeed": 1,
    "Mesh.ElementOrder": 1,
    "Mesh.SecondOrderLinear": 0,
    "Mesh.HighOrderOptimize": 0,
    "Mesh.Optimize": 1,
    "Mesh.OptimizeNetgen": 0,
    "Mesh.MeshSizeExtendFromBoundary": 1,
    "Mesh.MeshSizeFromPoints": 0,
}


def generate(cad: Any, size: float, *, per_turn: int = PER_TURN) -> None:
    """Mesh the current model's volume with curved second-order tetrahedra.

    Parameters
    ----------
    cad : kernel handle
    size : element size, mm
    per_turn : cells per full turn of curved faces

    Raises
    ------
    MeshError
        If the kernel gives up.
    """
    for name, value in _OPTIONS.items():
        cad.option.setNumber(name, value)
    cad.option.setNumber("Mesh.MeshSizeMax", size)
    cad.option.setNumber("Mesh.MeshSizeMin", size * _SMALLEST)
    cad.option.setNumber("Mesh.MeshSizeFromCurvature", per_turn)
    cad.model.mesh.clear()
    _refine_short_curves(cad, size)
    try:
        cad.model.mesh.generate(3)
        cad.model.mesh.setOrder(2)
    except Exception as error:
        raise MeshError(
            f"the body could not be meshed at {size:g} mm ({str(error).strip()}); "
            "try another element size"
        ) from None


def untangle(cad: Any) -> None:
    """Let the kernel move the mid-side nodes of badly curved cells."""
    cad.model.mesh.optimize("HighOrder")


def _refine_short_curves(cad: Any, size: float) -> None:
    """Grade the size from the length of each short curve back to the global size."""
    field = cad.model.mesh.field
    for tag in list(field.list()):
        field.remove(tag)
    short: dict[float, list[int]] = {}
    for _, tag in cad.model.getEntities(1):
        length = cad.model.occ.getMass(1, tag)
        if length < _SHORT * size:
            short.setdefault(float(f"{max(length, size * _SMALLEST):.2g}"), []).append(tag)
    grades = []
    for length, curves in sorted(short.items()):
        distance, grade = field.add("Distance"), field.add("Threshold")
        field.setNumbers(distance, "CurvesList", curves)
        field.setNumber(distance, "Sampling", 5)
        for option, value in (
            ("InField", distance),
            ("SizeMin", length),
            ("SizeMax", size),
            ("DistMin", length),
            ("DistMax", length + 3 * (size - length)),
        ):
            field.setNumber(grade, option, value)
        grades.append(grade)
    if grades:
        finest = field.add("Min")
        field.setNumbers(finest, "FieldsList", grades)
        field.setAsBackgroundMesh(finest)
