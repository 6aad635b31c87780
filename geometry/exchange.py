"""Mesh files of other tools, read and written: the home of meshio.

Mesh files carry no unit of length. What modewright writes is in millimetres,
as the shop and other analysis tools expect; what it reads is in the unit the
user names.
"""

from __future__ import annotations

import contextlib
import io
import warnings
from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import Any

import meshio
import numpy as np

from .errors import InputError, ToolError
from .intake import mesh_of
from .mesh import Mesh
from .scratch import scratch
from .shape import MM
from .unit import UNITS

#: Suffixes of formats that keep second-order tetrahedra in the right node order.
WRITTEN = (".msh", ".inp", ".vtu", ".vtk", ".bdf", ".nas", ".fem", ".mdpa", ".vol", ".exo", ".xdmf")

#: Suffixes whose files hold triangles beside the tetrahedra.
_FACES_AS_CELLS = {".msh", ".vtk", ".vtu", ".xdmf"}


def write_mesh(path: Path, mesh: Mesh) -> None:
    """Write a mesh in millimetres, in the format its file name asks for.

    Named faces become physical groups in .msh files, node sets where the
    format has them (.inp), and marked triangles (cell data ``face``, counted
    from 1 in the order of `mesh.faces`) in .vtk, .vtu and .xdmf files. The
    file is read back before it takes its place, so a format that cannot hold
    second-order tetrahedra is refused, not written wrongly.

    Parameters
    ----------
    path : Path
        Its suffix picks the format.
    mesh : Mesh

    Raises
    ------
    InputError
        If no format of that suffix can hold the mesh.
    ToolError
        If the format needs a package that is not installed, or the file read
        back is not the mesh.
    """
    suffix = path.suffix.lower()
    if suffix not in WRITTEN:
        raise InputError(
            "no format of this suffix holds second-order tetrahedra",
            value=path.name,
            allowed=", ".join(WRITTEN),
        )
    with _beside(path) as temporary:
        try:
            with _silence():
                _write_as(temporary, suffix, mesh)
                kept = meshio.read(temporary)
        except ModuleNotFoundError as error:
            raise ToolError(
                f"{path.name}: this format needs the Python package {error.name!r}, "
                "which is not installed; .msh, .vtu and .inp need nothing more"
            ) from None
        except OSError as error:
            raise ToolError(
                f"{path.name}: could not be written: {error.strerror or error}"
            ) from None
        except (Exception, SystemExit) as error:
            # Writers raise whatever a value they cannot print makes them stumble over.
            raise ToolError(
                f"{path.name}: could not be written ({type(error).__name__} in the format's "
                "writer); try .msh or .vtu"
            ) from None
        if not _holds(kept, mesh):
            raise ToolError(f"{path.name}: the file read back is not the mesh; try .msh or .vtu")


def write_vtu(path: Path, mesh: Mesh, point_data: Mapping[str, np.ndarray]) -> None:
    """Write the cells and fields at the nodes as one compressed VTU file.

    Parameters
    ----------
    path : Path
    mesh : Mesh
        Written in millimetres; the nodes of the quadratic tetrahedra are in
        VTK order already.
    point_data : name -> (n,) or (n, 3) float
        Written as 32-bit floats.
    """
    data: dict[str, Any] = {
        name: np.asarray(values, np.float32) for name, values in point_data.items()
    }
    record = meshio.Mesh(mesh.points / MM, [("tetra10", mesh.cells)], point_data=data)
    with _beside(path) as temporary, _silence():
        meshio.write(temporary, record, file_format="vtu", compression="zlib")


def read_mesh(path: Path, unit: str = "mm") -> Mesh:
    """Read a body from a mesh file that some other tool wrote.

    Straight tetrahedra are raised to second order; hexahedra, wedges and
    pyramids are cut into tetrahedra first. Named groups of triangles, and
    node sets, become named faces; the rest of the surface is parted by angle
    (`geometry.facing`).

    Parameters
    ----------
    path : Path
    unit : str
        Unit of the file's coordinates (`geometry.unit.UNITS`).

    Raises
    ------
    InputError
        If the file cannot be read, holds no cells that can be used, or is not
        one sound body (`geometry.soundness`).
    """
    return mesh_of(_read(path), UNITS[unit] * MM)


def _read(path: Path) -> meshio.Mesh:
    form = _form(path)
    try:
        with _silence():
            return meshio.read(path, file_format=form)
    except ModuleNotFoundError as error:
        raise ToolError(
            f"{path.name}: this format needs the Python package {error.name!r}, "
            "which is not installed; save the mesh as .msh, .vtu or .inp"
        ) from None
    except (Exception, SystemExit) as error:
        # Readers raise whatever a damaged file makes them stumble over, or exit.
        reason = str(error).strip().splitlines()
        told = f" ({reason[0]})" if reason and not isinstance(error, SystemExit) else ""
        raise InputError(f"cannot be read as a {path.suffix} mesh{told}") from None


def _form(path: Path) -> str | None:
    """Return the format of a .msh file, which two tools use; None: by its suffix."""
    if path.suffix.lower() != ".msh":
        return None
    with path.open("rb") as file:
        start = file.read(4096).lstrip()
    if start.startswith(b"$"):
        return "gmsh"
    if start.startswith(b"("):
        return "ansys"
    raise InputError("is no .msh mesh: it does not begin like one")


def _write_as(path: Path, suffix: str, mesh: Mesh) -> None:
    """Write `mesh` to `path` with the faces as the format can hold them."""
    points, cells = mesh.points / MM, np.asarray(mesh.cells, np.int64)
    node_sets: dict[str, Any] = {name: mesh.face_nodes(name) for name in mesh.faces}
    if suffix == ".inp":
        # meshio would choose the hybrid C3D10MH; the plain element is meant.
        record = meshio.Mesh(points, [("tetra10", cells)], point_sets=node_sets)
        meshio.write(path, record)
        text = path.read_text(encoding="utf-8")
        path.write_text(text.replace("TYPE=C3D10MH", "TYPE=C3D10", 1), encoding="utf-8")
        return
    if suffix not in _FACES_AS_CELLS or not mesh.faces:
        # Round-off below a picometre overflows the fixed columns of some formats.
        meshio.write(path, meshio.Mesh(np.round(points, 9) + 0.0, [("tetra10", cells)]))
        return
    # One copy of a triangle for each face it belongs to: a patch's triangles
    # are also its face's, and a cell carries only one tag.
    triangles = np.concatenate([mesh.facet_nodes(name) for name in mesh.faces])
    numbers = np.repeat(
        np.arange(1, len(mesh.faces) + 1), [len(mesh.faces[name]) for name in mesh.faces]
    )
    blocks = [("triangle6", triangles), ("tetra10", cells)]
    tags = [numbers, np.zeros(len(cells), int)]
    if suffix == ".msh":
        body = len(mesh.faces) + 1
        tags = [t.astype(np.int32) for t in (numbers, np.full(len(cells), body))]
        names = {name: np.array([i, 2]) for i, name in enumerate(mesh.faces, 1)}
        marks: dict[str, Any] = {"gmsh:physical": tags, "gmsh:geometrical": list(tags)}
        groups: dict[str, Any] = {**names, "body": np.array([body, 3])}
        record = meshio.Mesh(points, blocks, cell_data=marks, field_data=groups)
        meshio.write(path, record, file_format="gmsh22", binary=False)
        return
    faces: dict[str, Any] = {"face": tags}
    record = meshio.Mesh(points, blocks, cell_data=faces)
    meshio.write(path, record)


def _holds(kept: meshio.Mesh, mesh: Mesh) -> bool:
    """Tell whether a file read back holds all nodes and second-order cells."""
    cells = [block.data for block in kept.cells if block.type == "tetra10"]
    if not cells or len(kept.points) != len(mesh.points):
        return False
    found, wanted = np.concatenate(cells), mesh.points / MM
    if found.shape != mesh.cells.shape:
        return False
    size = np.ptp(wanted, axis=0).max()
    # Each node of each cell must be where it was: that also proves the node order.
    return bool(np.abs(kept.points[found] - wanted[mesh.cells]).max() <= 1e-6 * size)


@contextlib.contextmanager
def _beside(path: Path) -> Iterator[Path]:
    """Give a temporary name on the same file system; rename to `path` at the end."""
    with scratch(path) as hidden:
        yield hidden / path.name
        (hidden / path.name).replace(path)


@contextlib.contextmanager
def _silence() -> Iterator[None]:
    """Keep meshio's own prints off the terminal: errors are raised, not printed."""
    with (
        warnings.catch_warnings(action="ignore"),
        contextlib.redirect_stdout(io.StringIO()),
        contextlib.redirect_stderr(io.StringIO()),
    ):
        yield
