"""Edges at which stress is singular, and how much of the error they hide.

Near an edge where displacement behaves as r^a the energy error of elements of
order p on a fixed mesh falls as p^(-4 a) (Babuska and Suri, SIAM J. Numer. Anal.
24 (1987) 750: twice the rate of the h-version). An estimate that compares order
two with order three therefore sees only 1 - (2/3)^(4 a) of the error there.
"""

from __future__ import annotations

import numpy as np

from ...geometry.mesh import FACET_EDGES, Mesh
from .element import facet_gradients

#: Interior angle in degrees -> exponent a of the displacement, both faces free
#: (Williams, J. Appl. Mech. 19 (1952) 526, symmetric root).
_FREE = (
    (200.0, 1.0),
    (210.0, 0.752),
    (225.0, 0.674),
    (240.0, 0.616),
    (270.0, 0.5445),
    (360.0, 0.5),
)

#: The same, one face clamped and one free, nu = 0.3 in plane strain (90 and 180
#: degrees: Williams; the value beyond 180 is from memory and matters little).
_CLAMPED_FREE = ((55.0, 1.0), (90.0, 0.711), (120.0, 0.62), (180.0, 0.5), (270.0, 0.4))

#: The same, both faces clamped, nu = 0.3 (Williams; from memory).
_CLAMPED = ((200.0, 1.0), (270.0, 0.595), (360.0, 0.5))

#: Parameters of the mid-side nodes of a facet.
_MIDDLES = np.array([[0.5, 0.0], [0.5, 0.5], [0.0, 0.5]])


def saturation(mesh: Mesh, allowed: np.ndarray | None) -> np.ndarray:
    """Return (c,) factors from the third-order estimate to the whole error of each cell.

    Parameters
    ----------
    mesh, allowed : see `exponents`
    """
    exponent = exponents(mesh, allowed)
    return np.where(exponent < 1.0, 1.0 / (1.0 - (2.0 / 3.0) ** (4.0 * exponent)), 1.0)


def exponents(mesh: Mesh, allowed: np.ndarray | None) -> np.ndarray:
    """Return (c,) the smallest exponent of the edges that each cell touches; 1: none is singular.

    Parameters
    ----------
    mesh : Mesh
    allowed : (n, 3, 3), optional
        Projector on the motions that the mount leaves each node; None: all.
    """
    edge_nodes, angle, first, second = _boundary_edges(mesh)
    blocked = np.zeros(len(mesh.facets))
    if allowed is not None:
        # Directions held on a whole facet: those held at its mid-side nodes.
        free = allowed[mesh.facets[:, 3:]].mean(axis=1)
        blocked = (np.linalg.eigvalsh(free) < 1e-6).sum(axis=1)
    low = np.minimum(blocked[first], blocked[second])
    high = np.maximum(blocked[first], blocked[second])
    exponent = np.ones(len(angle))
    rows = (
        (high == 0, _FREE, 1.0),
        # Held along its normal only, a face mirrors the body: twice the angle.
        ((low == 0) & (high == 1), _FREE, 2.0),
        ((low == 0) & (high > 1), _CLAMPED_FREE, 1.0),
        (low > 0, _CLAMPED, 1.0),
    )
    for where, table, times in rows:
        degrees, exponents = np.array(table).T
        exponent[where] = np.interp(times * angle[where], degrees, exponents)
    at_node = np.ones(len(mesh.points))
    np.minimum.at(at_node, edge_nodes.ravel(), np.repeat(exponent, 2))
    return at_node[mesh.cells[:, :4]].min(axis=1)


def _boundary_edges(mesh: Mesh) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Return edges (e, 2), interior angles (e,) in degrees, and the two facets of each.

    The angle is that of the curved facets in the middle of the edge: a round face has
    no edges, however coarsely it is meshed.
    """
    mids = mesh.facets[:, 3:].ravel()
    order = np.argsort(mids, kind="stable")
    facet, side = np.divmod(order, 3)
    # Every edge of a closed surface lies between two facets.
    one, two = facet[::2], facet[1::2]
    pairs = np.array(FACET_EDGES)
    ends = np.take_along_axis(mesh.facets[one], pairs[side[::2]], axis=1)
    opposite = mesh.facets[two, (side[1::2] + 2) % 3]
    slopes = facet_gradients(_MIDDLES)
    tangents = np.einsum("qad,fai->fqid", slopes, mesh.points[mesh.facets])
    normals = np.cross(tangents[..., 0], tangents[..., 1])
    normals /= np.linalg.norm(normals, axis=2)[..., None]
    normal = normals[one, side[::2]]
    cosine = np.einsum("ei,ei->e", normal, normals[two, side[1::2]])
    bend = np.degrees(np.arccos(np.clip(cosine, -1.0, 1.0)))
    height = np.einsum("ei,ei->e", mesh.points[opposite] - mesh.points[ends[:, 0]], normal)
    return ends, np.where(height > 0.0, 180.0 + bend, 180.0 - bend), one, two
