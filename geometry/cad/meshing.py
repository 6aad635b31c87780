"""Meshing a volume: options, local sizes, second-order cells."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from ..errors import MeshError
from ..ligaments import Spot
from ..size_field import SizeField

#: Cells per full turn of a curved face.
PER_TURN = 12

#: Cells per full turn where the former would make too many.
FEW_PER_TURN = 8

#: A curve shorter than this share of the element size refines the mesh around it.
_SHORT = 0.7

#: The smallest local size, as a share of the element size asked for.
_SMALLEST = 1 / 30

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
    "Mesh.MeshSizeFromPoints": 0,
}


def generate(
    cad: Any,
    size: float,
    *,
    per_turn: int = PER_TURN,
    spots: Sequence[Spot] = (),
    local: SizeField | None = None,
) -> None:
    """Mesh the current model's volume with curved second-order tetrahedra.

    Parameters
    ----------
    cad : kernel handle
    size : largest element size, mm
    per_turn : cells per full turn of curved faces
    spots : balls with cells of their own size
    local : sizes from place to place

    Raises
    ------
    MeshError
        If the kernel gives up.
    """
    for name, value in _OPTIONS.items():
        cad.option.setNumber(name, value)
    cad.option.setNumber("Mesh.MeshSizeMax", size)
    smallest = size if local is None else min(size, float(local.sizes.min()))
    cad.option.setNumber("Mesh.MeshSizeMin", smallest * _SMALLEST)
    cad.option.setNumber("Mesh.MeshSizeFromCurvature", per_turn)
    # Where sizes are known inside, what the surface has is not carried inward: that
    # would make half as many cells again.
    cad.option.setNumber("Mesh.MeshSizeExtendFromBoundary", int(local is None))
    cad.model.mesh.clear()
    _refine(cad, size, spots, local)
    try:
        cad.model.mesh.generate(3)
        cad.model.mesh.setOrder(2)
    except Exception as error:
        raise MeshError(
            f"the body could not be meshed at {size:g} mm ({str(error).strip()}); "
            "try another element size"
        ) from None


def _refine(cad: Any, size: float, spots: Sequence[Spot], local: SizeField | None) -> None:
    """Set local sizes: the finest of what short curves, spots and the size field ask for."""
    field = cad.model.mesh.field
    for tag in field.list().tolist():
        field.remove(tag)
    grades = [*_short_curves(cad, size), *(_ball(cad, spot, size) for spot in spots)]
    if local is not None:
        grades.append(_interpolated(cad, local))
    if grades:
        finest = field.add("Min")
        field.setNumbers(finest, "FieldsList", grades)
        field.setAsBackgroundMesh(finest)


def _ball(cad: Any, spot: Spot, size: float) -> int:
    x, y, z = spot.centre
    return _field(
        cad,
        "Ball",
        XCenter=x,
        YCenter=y,
        ZCenter=z,
        Radius=spot.radius,
        Thickness=3 * max(size - spot.size, 0.0),
        VIn=spot.size,
        VOut=size,
    )


def _interpolated(cad: Any, local: SizeField) -> int:
    """Return a field that is linear in each tetrahedron of a size field."""
    for tag in cad.view.getTags():
        cad.view.remove(int(tag))
    corners = local.points[local.cells].transpose(0, 2, 1).reshape(-1, 12)
    rows = np.hstack([corners, local.sizes[local.cells]])
    view = cad.view.add("sizes")
    cad.view.addListData(view, "SS", len(rows), rows.ravel())
    return _field(cad, "PostView", ViewTag=view, UseClosest=1)


def _short_curves(cad: Any, size: float) -> list[int]:
    """Return fields that grade from the length of each short curve to the global size."""
    short: dict[float, list[int]] = {}
    for _, tag in cad.model.getEntities(1):
        length = cad.model.occ.getMass(1, tag)
        if length < _SHORT * size:
            short.setdefault(float(f"{max(length, size * _SMALLEST):.2g}"), []).append(tag)
    grades = []
    for length, curves in sorted(short.items()):
        distance = _field(cad, "Distance", Sampling=5)
        cad.model.mesh.field.setNumbers(distance, "CurvesList", curves)
        grades.append(
            _field(
                cad,
                "Threshold",
                InField=distance,
                SizeMin=length,
                SizeMax=size,
                DistMin=length,
                DistMax=length + 3 * (size - length),
            )
        )
    return grades


def _field(cad: Any, kind: str, **numbers: float) -> int:
    tag = cad.model.mesh.field.add(kind)
    for option, value in numbers.items():
        cad.model.mesh.field.setNumber(tag, option, value)
    return tag
