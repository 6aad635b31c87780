"""A body that is a mesh already."""

from __future__ import annotations

from pathlib import Path

from ..dimension import Dimension, Sort
from ..errors import InputError
from ..mesh import Mesh
from ..shape import Dimensions, Family
from ..solid import Solid
from ..source import source_file
from ..unit import UNITS

#: Suffixes of the mesh formats that can hold 3-D cells.
_SUFFIXES = (
    *(".msh", ".inp", ".vtu", ".vtk", ".bdf", ".nas", ".fem", ".mesh", ".meshb", ".vol", ".mdpa"),
    *(".avs", ".su2", ".ugrid", ".f3grid", ".exo", ".e", ".med", ".xdmf", ".cgns", ".h5m"),
)

_DIMENSIONS = (
    Dimension(name="mesh", text="a mesh file with solid cells", sort=Sort.FILE),
    Dimension(
        name="unit",
        text="unit of the mesh's coordinates",
        sort=Sort.CHOICE,
        choices=tuple(UNITS),
        default="mm",
    ),
)


def _mesh(d: Dimensions, folder: Path) -> Mesh:
    path = source_file(folder, d["mesh"], key="shape.mesh", suffixes=_SUFFIXES)
    # The mesh library is slow to load; only a mesh needs it.
    from ..exchange import read_mesh

    try:
        return read_mesh(path, d["unit"])
    except InputError as error:
        raise error.within(key="shape.mesh", file=str(path)) from None


def _solid(d: Dimensions, folder: Path) -> Solid:
    raise InputError("is a mesh already, and has no solid behind it", key="shape.mesh")


def _check(d: Dimensions) -> None:
    """Accept: any file name goes with any unit."""


FAMILY = Family(
    name="mesh",
    text="a body that is a mesh already, in any format with solid cells",
    dimensions=_DIMENSIONS,
    faces=("its own named groups", "face_1 ... (the rest, parted at edges over 40 degrees)"),
    check=_check,
    solid=_solid,
    anatomy=None,
    mesh=_mesh,
    example={"mesh": "part.msh", "unit": "mm"},
)
