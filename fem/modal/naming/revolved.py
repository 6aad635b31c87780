"""Names of bodies of revolution: bar names, then shells by order and circles."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from ....geometry.anatomy import Anatomy
from .label import Draft
from .meridian import Meridian, meridian
from .motion import Motion
from .nodes import crossings, still_points
from .orders import Orders, highest_order, in_phase, orders, summed

#: A stretch of the meridian below this part of the largest motion has no sign.
_DUST = 0.02

#: Bodies this many times longer than wide have a centre line with nodes worth telling.
_LONG = 2.0


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class RevolvedReading:
    """Modes of a body of revolution.

    Attributes
    ----------
    orders : Orders
    meridian : Meridian
    start : m, height of the first end
    long : bool
        Whether bending modes have nodal points.
    """

    orders: Orders
    meridian: Meridian
    start: float
    long: bool
    symmetric: bool = True

    def criteria(self, members: np.ndarray) -> Sequence[np.ndarray]:
        """Return what tells equal modes apart: order, then the angle zero."""
        square = np.ix_(members, members)
        return [-self.orders.order_product()[square], self.orders.even_product()[square]]

    def turned(self, turn: np.ndarray) -> RevolvedReading:
        """Return the reading of the modes that `turn` makes of these."""
        return replace(self, orders=self.orders.turned(turn))

    def drafts(self) -> list[Draft]:
        """Return the drafts of all names."""
        return [self._draft(i, energies) for i, energies in enumerate(self.orders.energies())]

    def _draft(self, mode: int, energies: np.ndarray) -> Draft:
        order = int(energies.argmax())
        mixed = bool(energies[order] < 0.5)
        if order == 0:
            o = self.orders
            spin = (np.imag(o.plane[mode, :, o.highest]) ** 2 / o.weight).sum()
            base = "torsion" if spin > 0.5 * energies[0] else "axial"
            return Draft(base=base, numbered=True, mixed=mixed)
        share = self.orders.even_share(mode, order)
        if order == 1:
            return Draft(
                base="bending",
                numbered=True,
                axis_share=share,
                mixed=mixed,
                nodal_points_mm=self._nodes(mode) if self.long else (),
            )
        return Draft(base=f"shell ({order},{self._circles(mode, order)})", axis_share=share)

    def _circles(self, mode: int, order: int) -> int:
        """Return how often the motion normal to the wall changes sign along the meridian."""
        station, normal = self.meridian.station, self.meridian.normal[self.meridian.station]
        o = self.orders
        moved = normal[:, 0] * o.radial(mode, order) + normal[:, 1] * o.axial[mode, :, order]
        sums = summed(station, moved)
        profile = in_phase(sums) / np.bincount(station, o.weight)
        return len(crossings(profile, _DUST))

    def _nodes(self, mode: int) -> tuple[float, ...]:
        """Return where the centre line stands still, by mean sideways motion at each height."""
        o, rows = self.orders, self.meridian.row
        # exp(-i angle) of order -1 is the sideways motion itself.
        mean = summed(rows, o.plane[mode, :, o.highest - 1])
        weight = np.bincount(rows, o.weight)
        line = np.bincount(rows, o.weight * self.meridian.height) / weight
        return still_points(line, in_phase(mean) / weight, self.start)


def read_revolved(motion: Motion, anatomy: Anatomy) -> RevolvedReading:
    """Return the reading of a body of revolution's modes."""
    lines = meridian(motion)
    extent = motion.high - motion.low
    return RevolvedReading(
        orders=orders(motion, lines.ring, highest_order(motion.count)),
        meridian=lines,
        start=float(motion.low[2]),
        long=bool(extent[2] >= _LONG * extent[:2].max()),
    )
