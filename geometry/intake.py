"""From a mesh record as another tool wrote it to a `Mesh` of second-order tetrahedra."""

from __future__ import annotations

from typing import Any

import numpy as np

from .errors import InputError
from .facing import faces_of
from .mesh import Mesh
from .quality import volumes
from .soundness import refuse_unsound
from .tetrahedra import (
    boundary,
    in_order,
    raised,
    signed_volumes,
    split,
    turned,
    turned_positive,
)

#: First letters of the types of cells that are no solid.
_FLAT = ("vertex", "line", "triangle", "quad", "polygon")

#: Cell data that number groups of triangles, in the dialects of several formats.
_MARKS = ("gmsh:physical", "medit:ref", "nastran:ref", "su2:tag", "cell_tags", "face")


def mesh_of(record: Any, scale: float) -> Mesh:
    """Return the body in a mesh record, checked, its surface named.

    Parameters
    ----------
    record : meshio.Mesh
    scale : float
        Metres in the record's unit of length.

    Raises
    ------
    InputError
        If there are no cells that can be used, or they are no sound body.
    """
    if record.points.ndim != 2 or record.points.shape[1] != 3:
        raise InputError("is a flat mesh: its points have no third coordinate")
    if not np.all(np.isfinite(record.points)):
        raise InputError("holds a coordinate that is no number")
    points = np.asarray(record.points, float) * scale
    cells = _solid_cells(record, points)
    if cells.shape[1] == 4:
        points, cells = raised(points, cells)
    used, at = np.unique(cells, return_inverse=True)
    where = np.full(len(points), -1)
    where[used] = np.arange(len(used))
    points, cells = points[used], at.reshape(cells.shape)
    refuse_unsound(points, cells)
    facets = boundary(cells)
    triangles = {name: _kept(where[t]) for name, t in _named_triangles(record).items()}
    nodes = {
        str(name): where[np.asarray(n, int)][where[np.asarray(n, int)] >= 0]
        for name, n in record.point_sets.items()
    }
    edges = points[cells[:, 0]] - points[cells[:, 1]]
    return Mesh(
        points=points,
        cells=cells,
        facets=facets,
        faces=faces_of(points, facets, triangles, nodes),
        size=float(np.median(np.linalg.norm(edges, axis=1))),
        volume=float(volumes(points, cells).sum()),
    )


def _solid_cells(record: Any, points: np.ndarray) -> np.ndarray:
    """Return the tetrahedra, (c, 4) or (c, 10), positive and in VTK order."""
    linear: list[np.ndarray] = []
    curved: list[np.ndarray] = []
    for block in record.cells:
        data = np.asarray(block.data)
        if not len(data) or block.type.startswith(_FLAT):
            continue
        if block.type == "tetra":
            linear.append(data)
        elif block.type == "tetra10":
            curved.append(data)
        elif block.type in ("pyramid", "wedge", "hexahedron"):
            linear.append(turned_positive(points, split(block.type, data)))
        else:
            raise InputError(
                f"has cells of type {block.type}, which cannot be used",
                allowed="tetra, tetra10, and straight pyramid, wedge, hexahedron",
            )
    if linear and curved:
        raise InputError("mixes straight and second-order cells; save it with one order")
    if not linear and not curved:
        kinds = ", ".join(dict.fromkeys(block.type for block in record.cells)) or "none"
        raise InputError("holds no solid cells", value=f"cells: {kinds}")
    cells = np.concatenate(linear or curved).astype(np.int64)
    if cells.min() < 0 or cells.max() >= len(points):
        raise InputError("has cells that refer to nodes which are not there")
    if curved:
        ordered = in_order(points, cells)
        if ordered is None:
            raise InputError("has second-order cells whose mid-side nodes lie near no edges")
        cells = ordered
    # Some formats number all cells the other way round; single ones are inverted.
    if np.all(signed_volumes(points, cells) < 0):
        cells = turned(cells) if curved else cells[:, [0, 2, 1, 3]]
    return cells


def _named_triangles(record: Any) -> dict[str, np.ndarray]:
    """Return corner nodes (k, 3) of the triangles of each named or numbered group."""
    groups: dict[str, list[np.ndarray]] = {}
    named = {int(v[0]): str(k) for k, v in record.field_data.items() if int(v[1]) == 2}
    sets = {k: v for k, v in record.cell_sets.items() if not str(k).startswith("gmsh:")}
    marks = [k for k in _MARKS if k in record.cell_data]
    for i, block in enumerate(record.cells):
        if not block.type.startswith(("triangle", "quad")):
            continue
        for name, members in sets.items():
            if i < len(members) and members[i] is not None and len(members[i]):
                groups.setdefault(str(name), []).append(_corners(block, np.asarray(members[i])))
        if sets or not marks:
            continue
        tags = np.asarray(record.cell_data[marks[0]][i])
        for tag in np.unique(tags[tags != 0]).tolist():
            name = named.get(int(tag), f"group_{int(tag)}")
            groups.setdefault(name, []).append(_corners(block, np.flatnonzero(tags == tag)))
    return {name: np.concatenate(parts) for name, parts in groups.items()}


def _corners(block: Any, members: np.ndarray) -> np.ndarray:
    """Return the corners of triangles; of quadrilaterals, all four triangles in each."""
    data = np.asarray(block.data)[members.astype(int)]
    if block.type.startswith("triangle"):
        return data[:, :3]
    return data[:, [[0, 1, 2], [0, 2, 3], [0, 1, 3], [1, 2, 3]]].reshape(-1, 3)


def _kept(triangles: np.ndarray) -> np.ndarray:
    """Return the triangles all of whose nodes belong to the body."""
    return triangles[(triangles >= 0).all(axis=1)]
