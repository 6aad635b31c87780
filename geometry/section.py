"""Properties of plane cross-sections: area, second moments, torsion constant.

All functions take floats or arrays in one unit of length and answer in powers
of the same unit.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from .anatomy import Sections

_ODD = np.arange(1, 60, 2)


def torsion_of_rectangle(width: ArrayLike, thickness: ArrayLike) -> np.ndarray:
    """Return the Saint-Venant torsion constant J of a rectangle, length^4.

    Parameters
    ----------
    width, thickness : broadcastable arrays, length
        The two sides in either order.

    Returns
    -------
    np.ndarray
        J = b t^3 / 3 (1 - 192 t / (pi^5 b) sum over odd n of
        tanh(n pi b / 2 t) / n^5) with b >= t.

    References
    ----------
    Timoshenko and Goodier, *Theory of Elasticity*, art. 109.
    """
    b = np.maximum(width, thickness)
    t = np.minimum(width, thickness)
    # 30 odd terms: the rest of the sum is below 1e-9 of J even for a square.
    ratio = (b / t)[..., None]
    series = np.sum(np.tanh(_ODD * np.pi * ratio / 2) / _ODD**5, axis=-1)
    return b * t**3 / 3 * (1 - 192 * t / (np.pi**5 * b) * series)


def of_rectangle(
    x: ArrayLike, width: ArrayLike, thickness: ArrayLike, offset: ArrayLike | None = None
) -> Sections:
    """Return sections of a bar of rectangular section.

    Parameters
    ----------
    x : (s,) length
        Stations, ascending.
    width, thickness : float or (s,), length
        Size across and through.
    offset : float or (s,), length, optional
        Height of the centroid along through.
    """
    x = np.asarray(x, float)
    b = np.broadcast_to(np.asarray(width, float), x.shape)
    t = np.broadcast_to(np.asarray(thickness, float), x.shape)
    return Sections(
        x=x,
        area=b * t,
        i_across=b * t**3 / 12,
        i_through=b**3 * t / 12,
        torsion=torsion_of_rectangle(b, t),
        form="rectangle",
        offset=None if offset is None else np.array(np.broadcast_to(offset, x.shape), float),
    )


def of_tube(x: ArrayLike, outer_diameter: ArrayLike, inner_diameter: ArrayLike = 0.0) -> Sections:
    """Return sections of a round bar or tube.

    Parameters
    ----------
    x : (s,) length
        Stations, ascending.
    outer_diameter, inner_diameter : float or (s,), length
        An inner diameter of 0 everywhere is a solid round bar.
    """
    x = np.asarray(x, float)
    outer = np.broadcast_to(np.asarray(outer_diameter, float), x.shape)
    inner = np.broadcast_to(np.asarray(inner_diameter, float), x.shape)
    second = np.pi / 64 * (outer**4 - inner**4)
    return Sections(
        x=x,
        area=np.pi / 4 * (outer**2 - inner**2),
        i_across=second,
        i_through=second.copy(),
        torsion=2 * second,
        form="tube" if np.any(inner > 0) else "circle",
    )
