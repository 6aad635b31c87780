"""From the selectors of a case to facets of a mesh."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from .errors import InputError
from .mesh import Mesh
from .selector import ByName, InBox, Near, OnPlane, Selector
from .solid import Patch
from .words import nearest

#: Distances closer than this share of the body's diagonal are equal.
_EQUAL = 1e-6

#: The four flat triangles that stand for a curved facet, by its six nodes.
_QUARTERS = np.array([[0, 3, 5], [3, 1, 4], [5, 4, 2], [3, 4, 5]])


def face_names(mesh: Mesh) -> tuple[str, ...]:
    """Return the names of all faces of a mesh, in the order shown to people."""
    return tuple(mesh.faces)


def select(mesh: Mesh, selectors: Sequence[Selector]) -> np.ndarray:
    """Return the facets that selectors point at.

    Parameters
    ----------
    mesh : Mesh
    selectors : sequence of Selector
        Their facets are taken together.

    Returns
    -------
    (k,) int
        Indices into ``mesh.facets``, ascending, each once.

    Raises
    ------
    InputError
        If a selector matches no face, or `Near` matches several.
    """
    found = [mesh.faces[name] for s in selectors for name in matches(mesh, s)]
    if not found:
        return np.empty(0, dtype=np.int64)
    return np.unique(np.concatenate(found)).astype(np.int64)


def matches(mesh: Mesh, selector: Selector) -> tuple[str, ...]:
    """Return the names of the faces that one selector points at.

    Raises
    ------
    InputError
        If there is none, or `Near` matches several.
    """
    match selector:
        case ByName() | Patch():
            return (_known(mesh, selector.name),)
        case OnPlane():
            return _on_plane(mesh, selector)
        case InBox():
            return _in_box(mesh, selector)
        case Near():
            return (_nearest(mesh, selector),)


def _known(mesh: Mesh, name: str) -> str:
    if name in mesh.faces:
        return name
    hint = nearest(name, mesh.faces)
    raise InputError(
        "no such face" + (f" (did you mean {hint!r}?)" if hint else ""),
        value=name,
        allowed=", ".join(mesh.faces),
    )


def _diagonal(mesh: Mesh) -> float:
    return float(np.linalg.norm(np.ptp(mesh.points, axis=0)))


def _on_plane(mesh: Mesh, selector: OnPlane) -> tuple[str, ...]:
    if selector.axis not in ("x", "y", "z") or selector.at not in ("min", "max"):
        raise InputError(
            "is not a plane of the body",
            value=f"{selector.axis} = {selector.at}",
            allowed="plane x, y or z, at min or max",
        )
    along = mesh.points[:, "xyz".index(selector.axis)]
    plane = along.min() if selector.at == "min" else along.max()
    near = np.abs(along - plane) <= _EQUAL * _diagonal(mesh)
    return _wholly(mesh, near, f"no face lies wholly in the plane {selector.axis} = {selector.at}")


def _in_box(mesh: Mesh, selector: InBox) -> tuple[str, ...]:
    slack = _EQUAL * _diagonal(mesh)
    low, high = np.asarray(selector.low) / 1e3 - slack, np.asarray(selector.high) / 1e3 + slack
    inside = np.all((mesh.points >= low) & (mesh.points <= high), axis=1)
    return _wholly(
        mesh, inside, f"no face lies wholly in the box {selector.low} to {selector.high}"
    )


def _wholly(mesh: Mesh, chosen: np.ndarray, problem: str) -> tuple[str, ...]:
    """Return the faces all of whose nodes are chosen (n,)."""
    names = tuple(n for n, at in mesh.faces.items() if len(at) and chosen[mesh.facets[at]].all())
    if not names:
        raise InputError(problem, allowed=f"the faces are {', '.join(mesh.faces)}")
    return names


def _nearest(mesh: Mesh, selector: Near) -> str:
    point = np.asarray(selector.point, float) / 1e3
    distance = _facet_distances(mesh, point)
    by_face = {n: float(distance[at].min()) for n, at in _whole_faces(mesh).items()}
    best = min(by_face.values())
    names = [n for n, d in by_face.items() if d <= best + _EQUAL * _diagonal(mesh)]
    if len(names) > 1:
        raise InputError(
            f"is equally near to the faces {', '.join(names)}",
            value=list(selector.point),
            allowed=f"a point nearest to one face of {', '.join(mesh.faces)}",
        )
    return names[0]


def _whole_faces(mesh: Mesh) -> dict[str, np.ndarray]:
    """Return the faces without patches: those that lie within no larger face."""
    sets = {name: set(at.tolist()) for name, at in mesh.faces.items() if len(at)}
    return {
        name: mesh.faces[name]
        for name, own in sets.items()
        if not any(own < other for key, other in sets.items() if key != name)
    }


def _facet_distances(mesh: Mesh, point: np.ndarray) -> np.ndarray:
    """Return the distance (f,) of a point from each facet, its curve followed by four triangles."""
    corners = mesh.points[mesh.facets][:, _QUARTERS].reshape(-1, 3, 3)
    return triangle_distances(corners, point).reshape(-1, 4).min(axis=1)


def triangle_distances(corners: np.ndarray, point: np.ndarray) -> np.ndarray:
    """Return the distance (t,) of a point (3,) from triangles (t, 3, 3)."""
    a = corners[:, 0]
    u, v, w = corners[:, 1] - a, corners[:, 2] - a, point - a
    uu, uv, vv = _dot(u, u), _dot(u, v), _dot(v, v)
    wu, wv = _dot(w, u), _dot(w, v)
    det = np.maximum(uu * vv - uv * uv, np.finfo(float).tiny)
    s, t = (vv * wu - uv * wv) / det, (uu * wv - uv * wu) / det
    flat = np.linalg.norm(w - s[:, None] * u - t[:, None] * v, axis=1)
    inside = (s >= 0) & (t >= 0) & (s + t <= 1)
    edges = [_segment_distance(corners[:, i], corners[:, (i + 1) % 3], point) for i in range(3)]
    return np.where(inside, flat, np.minimum.reduce(edges))


def _segment_distance(a: np.ndarray, b: np.ndarray, point: np.ndarray) -> np.ndarray:
    along = b - a
    length = np.maximum(_dot(along, along), np.finfo(float).tiny)
    t = np.clip(_dot(point - a, along) / length, 0, 1)
    return np.linalg.norm(a + t[:, None] * along - point, axis=1)


def _dot(a: np.ndarray, b: np.ndarray) -> np.ndarray:
    return np.einsum("ij,ij->i", a, b)
