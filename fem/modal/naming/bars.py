"""Names of bar-like bodies: bending, torsion, axial, and what prongs do."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from ....geometry.anatomy import Anatomy, Region, Role
from ..modes import SHARES
from .label import Draft
from .motion import Motion
from .nodes import still_points
from .prongs import mean_motion, party
from .slices import Slices, cut

#: What a mode is called by its largest share, in the order of `SHARES`.
_BASES = ("flatwise bending", "edgewise bending", "torsion", "axial", "crosswise bending")


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class BarReading:
    """Modes of a bar-like body by the rigid motions of its slices.

    Attributes
    ----------
    slices : Slices
    regions : prongs or tines, by number
    symmetric : bool
        Both bending directions are equal.
    start : m, coordinate of the first end along the bar
    """

    slices: Slices
    regions: tuple[Region, ...]
    symmetric: bool
    start: float

    def criteria(self, members: np.ndarray) -> Sequence[np.ndarray]:
        """Return what tells equal modes apart: the shares, then prongs or tines.

        Two prongs part into together and opposed; more of them, and tines,
        each into a mode of its own.
        """
        square = np.ix_(members, members)
        products = [self.slices.product(k)[square] for k in range(4)]
        if len(self.regions) == 2 and self.regions[0].role is Role.PRONG:
            both = mean_motion(self.slices, 1) + mean_motion(self.slices, 2)
            both = both[members, :3]
            size = np.einsum("ij,ij->", both, both)
            products.append(both @ both.T / size if size > 0.0 else both @ both.T)
        elif self.regions:
            numbers = np.arange(1, len(self.regions) + 1)
            products.append(-np.einsum("g,gij->ij", numbers, self.slices.energy[1:])[square])
        return products

    def turned(self, turn: np.ndarray) -> BarReading:
        """Return the reading of the modes that `turn` makes of these."""
        return replace(self, slices=self.slices.turned(turn))

    def drafts(self) -> list[Draft]:
        """Return the drafts of all names."""
        return [self._draft(i, shares) for i, shares in enumerate(self.slices.shares())]

    def _draft(self, mode: int, shares: np.ndarray) -> Draft:
        bending = shares[0] + shares[1]
        equal = self.symmetric and bending >= shares[2:].max()
        largest = int(shares[:2].argmax()) if equal else int(shares.argmax())
        draft = Draft(
            base="bending" if equal else _BASES[largest],
            numbered=True,
            axis_share=float(shares[0] / bending) if equal else None,
            mixed=bool((bending if equal else shares.max()) < 0.5),
            shares={name: float(s) for name, s in zip(SHARES, shares, strict=True)},
            nodal_points_mm=self._nodes(mode, largest, equal) if largest < 2 else (),
        )
        if not self.regions:
            return draft
        limbs = party(self.slices, self.regions, mode, largest)
        return replace(
            draft,
            suffix=limbs.suffix,
            prong_balance=limbs.balance,
            root_share=limbs.root_share,
            tine_shares=limbs.shares,
        )

    def _nodes(self, mode: int, share: int, equal: bool) -> tuple[float, ...]:
        """Return nodal points along the centre line of the liveliest limb."""
        slices = self.slices
        at = slices.limb == 0
        if self.regions:
            limb = 1 + int(slices.energy[1:, mode, mode].argmax())
            lively = slices.limb == limb
            first = slices.centre[lively, 0].min()
            # Tines stand side by side on a base of their own kind of motion.
            before = at & (slices.centre[:, 0] < first) & (self.regions[0].role is Role.PRONG)
            at = before | lively
        sideways = slices.shift[mode, at, 1:]
        if equal:
            weighted = sideways * slices.mass[at, None]
            direction = np.linalg.eigh(weighted.T @ sideways)[1][:, -1]
        else:
            direction = np.array([0.0, 1.0]) if share == 0 else np.array([1.0, 0.0])
        return still_points(slices.centre[at, 0], sideways @ direction, self.start)


def read_bar(motion: Motion, anatomy: Anatomy) -> BarReading:
    """Return the reading of a bar-like body's modes."""
    regions = tuple(sorted(anatomy.regions, key=lambda region: region.number))
    return BarReading(
        slices=cut(motion, regions),
        regions=regions,
        symmetric=(anatomy.square or anatomy.round) and not regions,
        start=float(motion.low[0]),
    )
