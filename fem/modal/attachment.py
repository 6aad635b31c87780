"""A mass spread over the part of the surface near a point."""

from __future__ import annotations

import numpy as np

from ...geometry.errors import InputError
from ...geometry.mesh import Mesh
from .element import facet_values
from .mount import AttachedMass
from .surface import facet_geometry

#: How far a point may lie off the surface, m.
_OFF = 1e-4

#: Cosine of the angle (84 degrees) up to which surfaces face the same way.
_SAME_WAY = 0.1

#: Facets looked at closely for the nearest point.
_CANDIDATES = 24

#: Steps a side into which a facet is cut to measure it.
_FINE = 24


def patch_mass(mesh: Mesh, item: AttachedMass) -> tuple[np.ndarray, np.ndarray]:
    """Return facets (f, 6) and mass matrices (f, 6, 6), kg, of a mass near a point.

    The mass lies evenly on the surface within `radius` of the surface point
    nearest to `at`, as far as that surface faces the same way (so that none lands
    on the far side of a thin part). It sums to the given mass exactly.

    Raises
    ------
    InputError
        If the point lies more than 0.1 mm off the surface.
    """
    if item.at is None:
        raise InputError("needs a face or a point on the surface (at)")
    point = np.asarray(item.at, float) * 1e-3
    nearest, normal = _nearest(mesh, point)
    off = float(np.linalg.norm(nearest - point))
    if off > _OFF:
        raise InputError(
            f"lies {off * 1e3:.2f} mm off the surface",
            key="at",
            value=list(item.at),
            allowed="at most 0.1 mm off; the nearest point is "
            f"[{', '.join(f'{c * 1e3:.3f}' for c in nearest)}]",
        )
    radius = 0.5 * local_thickness(mesh, nearest, normal)
    if item.radius is not None:
        radius = item.radius * 1e-3

    nodes = mesh.points[mesh.facets]
    centres = nodes.mean(axis=1)
    reach = np.linalg.norm(nodes - centres[:, None], axis=-1).max(axis=1)
    near = np.linalg.norm(centres - nearest, axis=1) < radius + 1.1 * reach
    facets = mesh.facets[near]
    steps = int(np.clip(np.ceil(16 * reach[near].max() / radius), 16, 128))
    geometry = facet_geometry(mesh.points[facets], *_fine_rule(steps))
    inside = np.linalg.norm(geometry.points - nearest, axis=-1) <= radius
    inside &= geometry.normals @ normal > _SAME_WAY
    areas = geometry.areas * inside
    matrices = np.einsum("fq,qa,qb->fab", areas, geometry.values, geometry.values, optimize=True)
    return facets, matrices * (item.mass / areas.sum())


def local_thickness(mesh: Mesh, point: np.ndarray, normal: np.ndarray) -> float:
    """Return the length of the ray from a surface point (3,) inward to the far side, m."""
    corners = mesh.points[mesh.facets[:, :3]]
    a, e1, e2 = corners[:, 0], corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]
    ray = -normal
    cross = np.cross(ray, e2)
    det = np.einsum("fi,fi->f", e1, cross)
    # The ray leaves the body where it runs with the outward normal e1 x e2; flat
    # stand-ins of curved facets near its start face the other way.
    steep = -det > 1e-9 * np.linalg.norm(e1, axis=1) * np.linalg.norm(e2, axis=1)
    det = np.where(steep, det, 1.0)
    to = point - a
    u = np.einsum("fi,fi->f", to, cross) / det
    turned = np.cross(to, e1)
    v = turned @ ray / det
    distance = np.einsum("fi,fi->f", turned, e2) / det
    edge = 1e-9
    hit = steep & (u >= -edge) & (v >= -edge) & (u + v <= 1 + edge)
    size = float(np.ptp(mesh.points, axis=0).max())
    distance = distance[hit & (distance > 1e-4 * size)]
    return float(distance.min()) if len(distance) else size


def _nearest(mesh: Mesh, point: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return the surface point (3,) nearest to a point, and the outward normal there."""
    nodes = mesh.points[mesh.facets]
    centres = nodes.mean(axis=1)
    reach = np.linalg.norm(nodes - centres[:, None], axis=-1).max(axis=1)
    closest = np.argsort(np.linalg.norm(centres - point, axis=1) - reach, kind="stable")
    nodes = nodes[closest[:_CANDIDATES]]
    middle, span = np.full((len(nodes), 2), 1.0 / 3.0), 1.0
    grid, rows = _grid(_FINE), np.arange(len(nodes))
    # Sample each facet, then sample again around its best sample, and so on:
    # robust on strongly curved facets, where Newton's method is not.
    for _ in range(8):
        local = middle[:, None] + span * (grid - 1.0 / 3.0)
        local = np.clip(local, 0.0, 1.0)
        excess = np.maximum(local.sum(axis=-1, keepdims=True) - 1.0, 0.0)
        local = np.clip(local - 0.5 * excess, 0.0, 1.0)
        places = np.einsum("fqa,fai->fqi", _values(local), nodes)
        best = np.linalg.norm(places - point, axis=-1).argmin(axis=1)
        middle, span = local[rows, best], span * 0.25
    found = np.einsum("fa,fai->fi", facet_values(middle), nodes)
    winner = int(np.linalg.norm(found - point, axis=1).argmin())
    geometry = facet_geometry(nodes[winner : winner + 1], middle[winner][None], np.ones(1))
    return found[winner], geometry.normals[0, 0]


def _grid(steps: int) -> np.ndarray:
    i, j = np.meshgrid(np.arange(steps + 1), np.arange(steps + 1), indexing="ij")
    inside = i + j <= steps
    return np.column_stack([i[inside], j[inside]]) / steps


def _values(local: np.ndarray) -> np.ndarray:
    return facet_values(local.reshape(-1, 2)).reshape(*local.shape[:-1], 6)


def _fine_rule(steps: int) -> tuple[np.ndarray, np.ndarray]:
    """Return centroids (steps^2, 2) of the small triangles of a cut-up one, and weights."""
    i, j = np.meshgrid(np.arange(steps), np.arange(steps), indexing="ij")
    lower, upper = i + j < steps, i + j < steps - 1
    points = np.concatenate(
        [
            np.column_stack([i[lower] + 1 / 3, j[lower] + 1 / 3]),
            np.column_stack([i[upper] + 2 / 3, j[upper] + 2 / 3]),
        ]
    )
    return points / steps, np.full(len(points), 0.5 / steps**2)
