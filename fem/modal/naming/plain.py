"""Bodies of no particular kind: modes are numbered."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from ....geometry.anatomy import Anatomy
from .label import Draft
from .motion import Motion


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class PlainReading:
    """Modes of a body without a kind.

    Attributes
    ----------
    directions : (3, m, m) float
        Products of the motion along through, across and along.
    """

    directions: np.ndarray
    symmetric: bool = False

    def criteria(self, members: np.ndarray) -> Sequence[np.ndarray]:
        """Return the energies along the three axes of the frame."""
        return [product[np.ix_(members, members)] for product in self.directions]

    def turned(self, turn: np.ndarray) -> PlainReading:
        """Return the reading of the modes that `turn` makes of these."""
        return replace(self, directions=turn @ self.directions @ turn.T)

    def drafts(self) -> list[Draft]:
        """Return the drafts of all names."""
        return [Draft(base="mode", numbered=True)] * self.directions.shape[1]


def read_plain(motion: Motion, anatomy: Anatomy) -> PlainReading:
    """Return the reading of a body that is neither long, flat nor round."""
    energies = motion.sums()[1].sum(axis=0)
    total = np.sqrt(np.einsum("kii->i", energies))
    return PlainReading(directions=energies[::-1] / np.outer(total, total))
