"""Names of flat discs by nodal diameters and nodal circles."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from ....geometry.anatomy import Anatomy
from .label import Draft
from .motion import Motion
from .nodes import crossings
from .orders import Orders, highest_order, in_phase, orders

#: A stretch of the profile below this part of its largest value has no sign.
_DUST = 0.02

#: Rings from the centre to the edge.
_RINGS = 28


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class DiscReading:
    """Modes of a flat disc, its rings ordered from the centre outwards."""

    orders: Orders
    symmetric: bool = True

    def criteria(self, members: np.ndarray) -> Sequence[np.ndarray]:
        """Return what tells equal modes apart: flexure, order, the angle zero."""
        square = np.ix_(members, members)
        o = self.orders
        return [o.normal[square], -o.order_product()[square], o.even_product()[square]]

    def turned(self, turn: np.ndarray) -> DiscReading:
        """Return the reading of the modes that `turn` makes of these."""
        return replace(self, orders=self.orders.turned(turn))

    def drafts(self) -> list[Draft]:
        """Return the drafts of all names."""
        normal = np.diag(self.orders.normal)
        energies = self.orders.axial_energies()
        return [
            self._flexural(i, energies[i]) if normal[i] >= 0.5 else _in_plane()
            for i in range(len(normal))
        ]

    def _flexural(self, mode: int, energies: np.ndarray) -> Draft:
        diameters = int(energies.argmax())
        profile = in_phase(self.orders.axial[mode, :, diameters]) / self.orders.weight
        return Draft(
            base=f"disc ({diameters},{len(crossings(profile, _DUST))})",
            axis_share=self.orders.even_share(mode, diameters) if diameters else None,
            mixed=bool(energies[diameters] < 0.5 * energies.sum()),
        )


def _in_plane() -> Draft:
    return Draft(base="disc in-plane", numbered=True)


def read_disc(motion: Motion, anatomy: Anatomy) -> DiscReading:
    """Return the reading of a flat disc's modes."""
    radius = np.hypot(motion.points[:, 0], motion.points[:, 1])
    step = max(np.ptp(radius) / _RINGS, 0.6 * motion.cell_size)
    rings = ((radius - radius.min()) / step).astype(int)
    rings = np.unique(rings, return_inverse=True)[1]
    return DiscReading(orders=orders(motion, rings, highest_order(motion.count)))
