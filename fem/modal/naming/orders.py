"""Circumferential orders of the motion of a round body, in rings of its meridian.

The body is sorted into rings (points of about equal radius and height). In each,
the displacement is summed against exp(-i n angle): z_n of the axial component,
and g_n of radial + i tangential, for which n and -n both belong to order n.
Motion symmetric about the angle zero has real z_n and g_n.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from scipy.sparse import csc_array

from .motion import Motion


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Orders:
    """Fourier sums of m modes over b rings, scaled to a kinetic energy of 1 a mode.

    Attributes
    ----------
    weight : (b,) float, m3
        Volume of each ring.
    axial : (m, b, J + 1) complex
        z_n, n from 0.
    plane : (m, b, 2 J + 1) complex
        g_n, n from -J.
    normal : (m, m) float
        Energy products of the axial motion, shares of 1.
    """

    weight: np.ndarray
    axial: np.ndarray
    plane: np.ndarray
    normal: np.ndarray

    @property
    def highest(self) -> int:
        """Highest order J."""
        return self.axial.shape[2] - 1

    def turned(self, turn: np.ndarray) -> Orders:
        """Return the orders of the modes that `turn` (m, m) makes of these."""
        return replace(
            self,
            axial=np.tensordot(turn, self.axial, 1),
            plane=np.tensordot(turn, self.plane, 1),
            normal=turn @ self.normal @ turn.T,
        )

    def amplitudes(self, order: int) -> np.ndarray:
        """Return (m, 3 b) complex: energy amplitudes of one order (axial, plane of +n and -n)."""
        root = np.sqrt(self.weight)
        j = self.highest
        if order == 0:
            parts = [self.axial[:, :, 0], self.plane[:, :, j]]
        else:
            parts = [
                np.sqrt(2.0) * self.axial[:, :, order],
                self.plane[:, :, j + order],
                self.plane[:, :, j - order],
            ]
        return np.concatenate([part / root for part in parts], axis=1)

    def energies(self) -> np.ndarray:
        """Return (m, J + 1): kinetic energy of the mean motion of the rings, by order."""
        return np.stack(
            [(np.abs(self.amplitudes(n)) ** 2).sum(axis=1) for n in range(self.highest + 1)],
            axis=1,
        )

    def axial_energies(self) -> np.ndarray:
        """Return (m, J + 1): the part of `energies` in axial motion."""
        parts = (np.abs(self.axial) ** 2 / self.weight[:, None]).sum(axis=1)
        parts[:, 1:] *= 2.0
        return parts

    def order_product(self) -> np.ndarray:
        """Return (m, m): sum over the orders of n times the energy products of order n."""
        total = np.zeros_like(self.normal)
        for n in range(1, self.highest + 1):
            a = self.amplitudes(n)
            total += n * np.real(a @ a.conj().T)
        return total

    def even_product(self) -> np.ndarray:
        """Return (m, m): energy products of the motion symmetric about the angle zero."""
        total = np.zeros_like(self.normal)
        for n in range(self.highest + 1):
            a = np.real(self.amplitudes(n))
            total += a @ a.T
        return total

    def even_share(self, mode: int, order: int) -> float:
        """Return the part of one order's energy that is symmetric about the angle zero."""
        a = self.amplitudes(order)[mode]
        whole = float((np.abs(a) ** 2).sum())
        return float((np.real(a) ** 2).sum()) / whole if whole > 0.0 else 0.5

    def radial(self, mode: int, order: int) -> np.ndarray:
        """Return (b,) complex: the order's coefficient of the radial component."""
        j = self.highest
        return 0.5 * (self.plane[mode, :, j + order] + self.plane[mode, :, j - order].conj())


def orders(motion: Motion, rings: np.ndarray, highest: int) -> Orders:
    """Return the orders of a motion about the frame's third axis.

    Parameters
    ----------
    motion : Motion
    rings : (points,) int
        Ring of each quadrature point, from 0, none empty.
    highest : highest order J
    """
    sums, energy, weight = fourier(motion, rings, highest + 2, motion.weights)
    return make_orders(sums, energy, weight, motion)


def make_orders(sums: np.ndarray, energy: np.ndarray, weight: np.ndarray, motion: Motion) -> Orders:
    """Return the orders from Fourier sums of the three components, J + 2 of them."""
    scale = np.sqrt(np.einsum("kii->i", energy))
    scale = np.where(scale > 0.0, scale, 1.0)
    sums = sums / scale[:, None, None, None]
    axial, plane = cylindrical(sums)
    return Orders(
        weight=weight, axial=axial, plane=plane, normal=energy[2] / np.outer(scale, scale)
    )


def cylindrical(sums: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return axial (..., J + 1) and plane (..., 2 J + 1) from sums (..., J + 2, 3)."""
    x, y = sums[..., 0], sums[..., 1]
    # x + i y turned back by the angle is radial + i tangential: orders shift by one.
    positive = x + 1j * y
    negative = x.conj() + 1j * y.conj()
    plane = np.concatenate([negative[..., -3:0:-1], positive], axis=-1)
    return sums[..., :-1, 2], plane


def fourier(
    motion: Motion, rings: np.ndarray, count: int, weights: np.ndarray
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return sums of w exp(-i n angle) u over each ring, energies, and ring volumes.

    Returns
    -------
    sums : (m, b, count, 3) complex, n from 0
    energies : (3, m, m), of the body, by direction
    volumes : (b,), the sums of the motion's own weights
    """
    size = int(rings.max()) + 1
    angle = np.arctan2(motion.points[:, 1], motion.points[:, 0])
    steps = np.arange(count)

    def functionals(low: int, high: int) -> csc_array:
        turns = np.exp(-1j * np.outer(angle[low:high], steps)) * weights[low:high, None]
        data = np.stack([np.real(turns), np.imag(turns)], axis=2).reshape(high - low, -1)
        rows = 2 * count * rings[low:high, None] + np.arange(2 * count)
        ends = 2 * count * np.arange(high - low + 1)
        return csc_array((data.ravel(), rows.ravel(), ends), shape=(2 * count * size, high - low))

    linear, energies = motion.sums(functionals)
    pairs = linear.reshape(motion.count, size, count, 2, 3)
    volumes = np.bincount(rings, motion.weights, minlength=size)
    return pairs[:, :, :, 0] + 1j * pairs[:, :, :, 1], energies[0], volumes


def summed(groups: np.ndarray, values: np.ndarray) -> np.ndarray:
    """Return the sums of complex values over groups numbered from 0."""
    return np.bincount(groups, np.real(values)) + 1j * np.bincount(groups, np.imag(values))


def in_phase(values: np.ndarray) -> np.ndarray:
    """Return complex values (b,) as real ones, along their common phase."""
    phase = np.angle((values**2).sum()) / 2.0
    return np.real(values * np.exp(-1j * phase))


def highest_order(count: int) -> int:
    """Return the highest order worth looking for among `count` modes (most come in twos)."""
    return min(32, count // 2 + 8)
