"""What an imported body is, told from its mesh: bar, plate or neither, and its axes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .anatomy import Anatomy, Frame, Kind
from .mesh import Mesh
from .quality import gradients, shape_values

#: A bar is at least this many times as long as its next extent.
_SLENDER = 3.0

#: A plate is at most this share of its next extent thick.
_FLAT = 0.2

#: Second moments closer than this are equal: it splits a bending pair by 0.09 cents,
#: and a curved mesh of a round section is not rounder than that.
_EQUAL = 1e-4

#: Third and fourth moments below this share of the body's size are zero by symmetry.
_SYMMETRIC = 1e-4


def imported_anatomy(mesh: Mesh) -> Anatomy:
    """Return kind, axes and length of a body known by its mesh alone.

    The axes are the principal axes of inertia. A body is a bar if its longest
    extent along them is at least 3 times the next, else a plate if its
    smallest is at most a fifth of the next, else of no kind. Where faces named
    ``top`` and ``bottom`` are parallel planes, their normal is the axis through
    the thickness (unless it is the long one); otherwise the shortest is.

    Axes point to where the body's third moment is positive, so that a turned
    body has its axes turned with it; a body that is symmetric about an axis
    takes the sign nearer to the global axes, where no name can tell. In
    sections (and plates) with two equal moments, the axes follow the fourth
    moment, which is least along the sides of a square.

    Parameters
    ----------
    mesh : Mesh

    Returns
    -------
    Anatomy
        With `frame`, `length` and, for bars, `square`; everything else empty.
    """
    cloud = _cloud(mesh)
    axes, variances = _principal(cloud)
    extents = np.ptp(mesh.points @ axes.T, axis=0)
    order = np.argsort(-np.round(extents / extents.max(), 5), kind="stable")
    axes, variances, extents = axes[order], variances[order], extents[order]
    kind = _kind(extents)

    up = _upward(mesh)
    if up is not None:
        aligned = [i for i in (1, 2) if abs(axes[i] @ up) > 1 - 1e-6]
        if aligned == [1]:
            axes, variances = axes[[0, 2, 1]], variances[[0, 2, 1]]
        if aligned:
            axes[2] = up
    along = axes[0] * _sign(cloud, axes[0])
    if up is not None and abs(axes[2] @ up) > 1 - 1e-6:
        across = np.cross(axes[2], along)
    else:
        across = axes[1] * _sign(cloud, axes[1])
    frame_axes = np.array([along, across, np.cross(along, across)])

    local = (mesh.points - cloud.centre) @ frame_axes.T
    origin = cloud.centre.copy()
    if kind is Kind.BAR:
        origin = origin + frame_axes[0] * local[:, 0].min()
    return Anatomy(
        kind=kind,
        frame=Frame(origin=_triple(origin), axes=tuple(_triple(axis) for axis in frame_axes)),
        length=0.0 if kind is Kind.NONE else float(np.ptp(local[:, 0])),
        square=kind is Kind.BAR and _equal(variances[1], variances[2]),
    )


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class _Cloud:
    """Points (n, 3) about the centre of mass, with weights (n,) that sum to 1."""

    centre: np.ndarray
    points: np.ndarray
    weights: np.ndarray

    def moment(self, direction: np.ndarray, power: int) -> float:
        return float(self.weights @ (self.points @ direction) ** power)


def _cloud(mesh: Mesh) -> _Cloud:
    """Return the body's volume as weighted points (27 a cell, exact to degree 5)."""
    at, weights = _rule()
    x = mesh.points[mesh.cells]
    points = np.einsum("qa,cai->cqi", shape_values(at), x, optimize=True)
    jacobians = np.einsum("qai,caj->cqij", gradients(at), x, optimize=True)
    mass = (np.linalg.det(jacobians) * weights).ravel()
    mass = mass / mass.sum()
    points = points.reshape(-1, 3)
    centre = mass @ points
    return _Cloud(centre=centre, points=points - centre, weights=mass)


def _rule() -> tuple[np.ndarray, np.ndarray]:
    """Return points (27, 3) and weights (27,) on the unit tetrahedron.

    The conical product of Gauss rules (Stroud, *Approximate Calculation of
    Multiple Integrals*, 1971, sec. 2.5).
    """
    node, weight = np.polynomial.legendre.leggauss(3)
    t, w = (node + 1) / 2, weight / 2
    a, b, c = (g.ravel() for g in np.meshgrid(t, t, t, indexing="ij"))
    wa, wb, wc = (g.ravel() for g in np.meshgrid(w, w, w, indexing="ij"))
    points = np.column_stack((a, b * (1 - a), c * (1 - a) * (1 - b)))
    return points, wa * wb * wc * (1 - a) ** 2 * (1 - b)


def _principal(cloud: _Cloud) -> tuple[np.ndarray, np.ndarray]:
    """Return principal axes (3, 3), one a row, and the variances (3,) along them."""
    scatter = (cloud.points * cloud.weights[:, None]).T @ cloud.points
    values, vectors = np.linalg.eigh(scatter)
    values, axes = values[::-1], vectors.T[::-1].copy()
    first, last = _equal(values[0], values[1]), _equal(values[1], values[2])
    if first and last:
        axes = np.eye(3)
    elif first:
        axes[[0, 1]] = _squared_up(cloud, axes[2])
    elif last:
        axes[[1, 2]] = _squared_up(cloud, axes[0])
    return axes, np.array([cloud.moment(axis, 2) for axis in axes])


def _equal(a: float, b: float) -> bool:
    return bool(abs(a - b) <= _EQUAL * max(abs(a), abs(b)))


def _squared_up(cloud: _Cloud, normal: np.ndarray) -> np.ndarray:
    """Return two axes (2, 3) across `normal` where all directions have one second moment."""
    u = np.eye(3)[np.argmin(np.round(np.abs(normal), 6))]
    u = u - normal * (normal @ u)
    u /= np.linalg.norm(u)
    v = np.cross(normal, u)
    z = cloud.points @ u + 1j * (cloud.points @ v)
    # The fourth moment along an angle p holds Re(c4 exp(-4ip)) / 8 + ...: least where
    # c4 exp(-4ip) is real and negative.
    c4 = complex(cloud.weights @ z**4)
    size = float(cloud.weights @ np.abs(z) ** 4)
    if abs(c4) > _SYMMETRIC * size:
        angle = (np.angle(c4) + np.pi) / 4
        angle -= np.pi / 2 if angle > np.pi / 4 else 0.0
        u, v = np.cos(angle) * u + np.sin(angle) * v, np.cos(angle) * v - np.sin(angle) * u
    return np.array([u, v])


def _kind(extents: np.ndarray) -> Kind:
    """Return the kind of a body by its extents (3,), longest first."""
    if extents[0] >= _SLENDER * extents[1] * (1 - 1e-9):
        return Kind.BAR
    if extents[2] <= _FLAT * extents[1] * (1 + 1e-9):
        return Kind.PLATE
    return Kind.NONE


def _upward(mesh: Mesh) -> np.ndarray | None:
    """Return the unit normal (3,) from a flat face ``bottom`` to a parallel face ``top``."""
    normals = []
    for name in ("bottom", "top"):
        if name not in mesh.faces or not len(mesh.faces[name]):
            return None
        a, b, c = (mesh.points[mesh.facet_nodes(name)[:, k]] for k in range(3))
        areas = np.cross(b - a, c - a)
        total = areas.sum(axis=0)
        if np.linalg.norm(total) < (1 - 1e-6) * np.linalg.norm(areas, axis=1).sum():
            return None
        normals.append(total / np.linalg.norm(total))
    bottom, top = normals
    return None if bottom @ top > -1 + 1e-6 else top


def _sign(cloud: _Cloud, axis: np.ndarray) -> float:
    """Return 1 or -1: the sense of an axis that moves with the body."""
    third = cloud.moment(axis, 3)
    if abs(third) > _SYMMETRIC * cloud.moment(axis, 2) ** 1.5:
        return 1.0 if third > 0 else -1.0
    return 1.0 if axis[np.argmax(np.round(np.abs(axis), 6))] > 0 else -1.0


def _triple(v: np.ndarray) -> tuple[float, float, float]:
    return (float(v[0]) + 0.0, float(v[1]) + 0.0, float(v[2]) + 0.0)
