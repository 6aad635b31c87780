"""The mesh record: second-order tetrahedra with named faces, in metres."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from .errors import InputError

#: Corner pairs of the six mid-side nodes (columns 4..9 of `Mesh.cells`), VTK order.
EDGES = ((0, 1), (1, 2), (0, 2), (0, 3), (1, 3), (2, 3))

#: Corner pairs of the three mid-side nodes (columns 3..5 of `Mesh.facets`), VTK order.
FACET_EDGES = ((0, 1), (1, 2), (2, 0))


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Mesh:
    """A body cut into curved second-order tetrahedra.

    Attributes
    ----------
    points : (n, 3) float, m
        All nodes, corners and mid-sides; every one belongs to a cell.
    cells : (c, 10) int
        Nodes of each cell in VTK order (`EDGES`); positive orientation.
    facets : (f, 6) int
        Nodes of every boundary triangle in VTK order (`FACET_EDGES`), the
        normal by the right-hand rule pointing out of the body.
    faces : name -> (k,) int
        Indices into `facets` of each named face. Every facet has a name; a
        patch's facets belong to the patch and to the face under it.
    size : float, m
        The element size asked for; the largest where it differs from place to place.
    volume : float, m3
        Volume of the exact geometry (the CAD body), or of the mesh where there is none.
    area : float, m2
        Surface of the exact geometry, 0 where there is none.
    """

    points: np.ndarray
    cells: np.ndarray
    facets: np.ndarray
    faces: Mapping[str, np.ndarray] = field(default_factory=dict)
    size: float = 0.0
    volume: float = 0.0
    area: float = 0.0

    def facet_nodes(self, face: str) -> np.ndarray:
        """Return (k, 6) int: the nodes of the facets of a named face."""
        return self.facets[self._indices(face)]

    def face_nodes(self, face: str) -> np.ndarray:
        """Return (k,) int: the distinct nodes of a named face, ascending."""
        return np.unique(self.facet_nodes(face))

    def _indices(self, face: str) -> np.ndarray:
        try:
            return self.faces[face]
        except KeyError:
            raise InputError("no such face", value=face, allowed=", ".join(self.faces)) from None

    def __repr__(self) -> str:
        """Return counts and names, not arrays."""
        return (
            f"Mesh({len(self.points)} nodes, {len(self.cells)} cells, "
            f"faces: {', '.join(self.faces)})"
        )
