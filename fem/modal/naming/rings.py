"""Names of rings: in-plane, out-of-plane, extensional and torsional, by order."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from ....geometry.anatomy import Anatomy
from .label import Draft
from .motion import Motion
from .orders import Orders, cylindrical, fourier, highest_order, make_orders

#: What moves, in the order of `RingReading.parts`.
_WORDS = ("in-plane", "out-of-plane", "extensional", "torsional")


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class RingReading:
    """Modes of a ring by the mean motion of its section.

    Attributes
    ----------
    orders : Orders
        Of one ring, the whole body.
    twist : (m, J + 1) complex
        Energy amplitudes of the section's rotation about its own centre line.
    """

    orders: Orders
    twist: np.ndarray
    symmetric: bool = True

    def criteria(self, members: np.ndarray) -> Sequence[np.ndarray]:
        """Return what tells equal modes apart: plane, order, the angle zero."""
        square = np.ix_(members, members)
        o = self.orders
        return [o.normal[square], -o.order_product()[square], o.even_product()[square]]

    def turned(self, turn: np.ndarray) -> RingReading:
        """Return the reading of the modes that `turn` makes of these."""
        return replace(self, orders=self.orders.turned(turn), twist=turn @ self.twist)

    def parts(self) -> np.ndarray:
        """Return (m, J + 1, 4): energy shares by order, in the order of `_WORDS`.

        In the plane of order n, radial a cos and tangential b sin: a ring bends
        without stretching where a + n b = 0, and stretches without bending where
        b = n a.
        """
        o, j = self.orders, self.orders.highest
        n = np.arange(j + 1)
        # conj: both then carry the phase of cos n (angle - phase).
        plus, minus = o.plane[:, 0, j:], o.plane[:, 0, j::-1].conj()
        a, b = plus + minus, plus - minus
        root = np.sqrt(1.0 + n**2) * np.sqrt(2.0 * o.weight[0])
        bends, stretches = (n * a - b) / root, (a + n * b) / root
        # Order 0: g_0 is counted once; its real part breathes, its imaginary part spins.
        g0 = o.plane[:, 0, j] / np.sqrt(o.weight[0])
        bends[:, 0], stretches[:, 0] = g0.imag, g0.real
        axial = np.sqrt(2.0) * o.axial[:, 0] / np.sqrt(o.weight[0])
        axial[:, 0] /= np.sqrt(2.0)
        return np.abs(np.stack([bends, axial, stretches, self.twist], axis=2)) ** 2

    def drafts(self) -> list[Draft]:
        """Return the drafts of all names."""
        drafts = []
        for mode, parts in enumerate(self.parts()):
            order, word = (int(i) for i in np.unravel_index(parts.argmax(), parts.shape))
            drafts.append(
                Draft(
                    base=f"ring {order} {_WORDS[word]}",
                    axis_share=self._even(mode, order, word) if order else None,
                    mixed=bool(parts[order, word] < 0.5),
                )
            )
        return drafts

    def _even(self, mode: int, order: int, word: int) -> float:
        if _WORDS[word] != "torsional":
            return self.orders.even_share(mode, order)
        twist = self.twist[mode, order]
        return float(twist.real**2 / np.abs(twist) ** 2)


def read_ring(motion: Motion, anatomy: Anatomy) -> RingReading:
    """Return the reading of a ring's modes."""
    count = highest_order(motion.count) + 2
    radius = np.hypot(motion.points[:, 0], motion.points[:, 1])
    weights, whole = motion.weights, np.zeros(len(radius), int)
    total = weights.sum()
    outward = radius - weights @ radius / total
    upward = motion.points[:, 2] - weights @ motion.points[:, 2] / total
    sums, energy, volume = fourier(motion, whole, count, weights)
    high, _, _ = fourier(motion, whole, count, weights * upward)
    wide, _, _ = fourier(motion, whole, count, weights * outward)
    # Turning about the tangent moves what is above outwards and what is outside down.
    _, plane = cylindrical(high)
    middle = plane.shape[-1] // 2
    radial = 0.5 * (plane[..., middle:] + plane[..., middle::-1].conj())
    axial, _ = cylindrical(wide)
    polar = weights @ (outward**2 + upward**2)
    twist = (radial - axial)[:, 0] * np.sqrt(2.0 / polar)
    twist[:, 0] /= np.sqrt(2.0)
    scale = np.sqrt(np.einsum("kii->i", energy))
    return RingReading(
        orders=make_orders(sums, energy, volume, motion),
        twist=twist / np.where(scale > 0.0, scale, 1.0)[:, None],
    )
