"""Where closed polylines cross, touch or fold back."""

from __future__ import annotations

import numpy as np

from .errors import InputError

#: Pieces of an outline nearer than this share of its size touch.
_TOUCHING = 1e-7


def refuse_crossing(lines: list[np.ndarray]) -> None:
    """Refuse loops that cross or touch themselves or each other, or fold back."""
    a = np.concatenate(lines)
    b = np.concatenate([np.roll(line, -1, axis=0) for line in lines])
    start = np.cumsum([0, *(len(line) for line in lines)])
    following = np.arange(1, len(a) + 1)
    following[start[1:] - 1] = start[:-1]
    slack = _TOUCHING * float(np.ptp(a, axis=0).max())
    place = _folds(a, b, following, slack)
    if place is None:
        place = _crossing(a, b, following, slack)
    if place is not None:
        raise InputError(
            f"the outline crosses or touches itself at ({place[0]:.6g}, {place[1]:.6g}) mm"
        )


def _folds(a: np.ndarray, b: np.ndarray, following: np.ndarray, slack: float) -> np.ndarray | None:
    u, v = b - a, b[following] - a[following]
    cross = u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0]
    size = np.minimum(np.linalg.norm(u, axis=1), np.linalg.norm(v, axis=1))
    length = np.maximum(np.linalg.norm(u, axis=1), np.linalg.norm(v, axis=1))
    back = (np.sum(u * v, axis=1) < 0) & (np.abs(cross) <= slack * length) & (size > 2 * slack)
    return b[np.flatnonzero(back)[0]] if back.any() else None


def _crossing(
    a: np.ndarray, b: np.ndarray, following: np.ndarray, slack: float
) -> np.ndarray | None:
    """Return where two pieces that are not neighbours meet, or None (a sweep along x)."""
    low, high = np.minimum(a, b) - slack, np.maximum(a, b) + slack
    order = np.argsort(low[:, 0], kind="stable")
    reach = np.searchsorted(low[order, 0], high[order, 0], side="right")
    for k, stop in enumerate(reach):
        others = order[k + 1 : stop]
        i = order[k]
        near = (
            (low[others, 1] <= high[i, 1])
            & (high[others, 1] >= low[i, 1])
            & (following[others] != i)
            & (others != following[i])
        )
        others = others[near]
        if not len(others):
            continue
        meets = _meet(a[i], b[i], a[others], b[others], slack)
        if meets.any():
            j = others[np.flatnonzero(meets)[0]]
            return _meeting_point(a[i], b[i], a[j], b[j])
    return None


def _meet(p: np.ndarray, q: np.ndarray, a: np.ndarray, b: np.ndarray, slack: float) -> np.ndarray:
    """Tell which pieces a-b (n, 2) come within `slack` of the piece p-q."""
    crossed = (_side(p, q, a) * _side(p, q, b) < 0) & (_side(a, b, p) * _side(a, b, q) < 0)
    near = np.minimum(
        np.minimum(_distance(a, p, q), _distance(b, p, q)),
        np.minimum(_distance(p, a, b), _distance(q, a, b)),
    )
    return crossed | (near <= slack)


def _side(p: np.ndarray, q: np.ndarray, x: np.ndarray) -> np.ndarray:
    u, v = q - p, x - p
    return u[..., 0] * v[..., 1] - u[..., 1] * v[..., 0]


def _distance(x: np.ndarray, p: np.ndarray, q: np.ndarray) -> np.ndarray:
    """Return the distance of points x from pieces p-q; all broadcastable (n, 2)."""
    u, v = q - p, x - p
    squared = np.maximum(np.sum(u * u, axis=-1), 1e-300)
    t = np.clip(np.sum(u * v, axis=-1) / squared, 0.0, 1.0)
    return np.linalg.norm(v - t[..., None] * u, axis=-1)


def _meeting_point(p: np.ndarray, q: np.ndarray, a: np.ndarray, b: np.ndarray) -> np.ndarray:
    s, e = float(_side(a, b, p)), float(_side(a, b, q))
    if s * e < 0:
        return p + s / (s - e) * (q - p)
    return min((p, q), key=lambda x: float(_distance(x, a, b)))
