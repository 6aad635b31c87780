"""Slender uniform beams: Euler-Bernoulli roots and frequencies."""

from __future__ import annotations

from collections.abc import Callable
from typing import Literal

import numpy as np
from scipy.optimize import root_scalar

Ends = Literal["clamped-free", "free-free", "clamped-clamped", "clamped-pinned", "pinned-pinned"]


def beam_roots(ends: Ends, count: int) -> np.ndarray:
    """Return the first roots beta L of uniform Euler-Bernoulli beams.

    cos x cosh x = -1 (clamped-free), = 1 (free-free, clamped-clamped; without
    the rigid motions), tan x = tanh x (clamped-pinned), sin x = 0
    (pinned-pinned).

    References
    ----------
    Timoshenko S. P., Young D. H., Weaver W., Vibration Problems in
    Engineering, 4th ed. 1974, section 5.3.
    """
    n = np.arange(1, count + 1)
    if ends == "pinned-pinned":
        return n * np.pi
    if ends == "clamped-pinned":
        return np.array([_root(lambda x: np.sin(x) - np.cos(x) * np.tanh(x), k + 0.25) for k in n])
    if ends == "clamped-free":
        return np.array([_root(lambda x: np.cos(x) + _sech(x), k - 0.5) for k in n])
    return np.array([_root(lambda x: np.cos(x) - _sech(x), k + 0.5) for k in n])


def _sech(x: float) -> float:
    decay = np.exp(-x)
    return 2.0 * decay / (1.0 + decay * decay)


def _root(function: Callable[[float], float], halves: float) -> float:
    """Return the root near so many times pi."""
    bracket = ((halves - 0.2) * np.pi, (halves + 0.2) * np.pi)
    return root_scalar(function, bracket=bracket, xtol=1e-13).root


def beam_frequencies(
    roots: np.ndarray, length: float, area: float, inertia: float, modulus: float, density: float
) -> np.ndarray:
    """Return Euler-Bernoulli frequencies (beta L)^2 / (2 pi L^2) sqrt(E I / (rho A)), Hz."""
    speed = np.sqrt(modulus * inertia / (density * area))
    return np.asarray(roots) ** 2 / (2.0 * np.pi * length**2) * speed
