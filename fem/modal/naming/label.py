"""What a mode is called, and the numbers that go with the name."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np


@dataclass(frozen=True, kw_only=True, slots=True)
class Label:
    """The name of a mode. What does not apply is None; numbers are plain Python floats.

    Attributes
    ----------
    name : unique within a result
    mixed : no share reaches one half
    pair : name of the mode of equal frequency (within 0.5 cent), or None
    shares : share name -> 0..1, sums to 1; bar-like bodies only
    prong_balance : +1 two prongs move together ... -1 opposed
    root_share : share of kinetic energy outside prongs and tines
    tine_shares : share of kinetic energy of each prong or tine, by number
    nodal_points_mm : where the centre line of a bending mode stands still, from
        the first end; the held end itself is left out
    """

    name: str
    mixed: bool = False
    pair: str | None = None
    shares: dict[str, float] | None = None
    prong_balance: float | None = None
    root_share: float | None = None
    tine_shares: tuple[float, ...] | None = None
    nodal_points_mm: tuple[float, ...] = ()


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Identity:
    """Named modes.

    Attributes
    ----------
    shapes : (m, n, 3) float, 1/sqrt(kg)
        The modes given, with clusters of equal modes rotated to a fixed basis
        and signs fixed; still mass-normalised.
    labels : the m labels, in order
    """

    shapes: np.ndarray
    labels: tuple[Label, ...]

    @property
    def names(self) -> tuple[str, ...]:
        """The names, in order."""
        return tuple(label.name for label in self.labels)


@dataclass(frozen=True, kw_only=True, slots=True)
class Draft:
    """A name before it is made unique.

    Attributes
    ----------
    base : what moves and how: ``flatwise bending``, ``plate (2,0)``
    suffix : what stands after the number: ``, prong 2``
    numbered : whether a number by frequency follows the base; otherwise a
        second mode of the same name ends `` #2``
    axis_share : where symmetry gives every such mode an equal one in another
        direction: the part of its energy along the declared axis, of the part
        along both; None elsewhere. It decides the letter ``a`` or ``b``.
    mixed, shares, prong_balance, root_share, tine_shares, nodal_points_mm : as in `Label`
    """

    base: str
    suffix: str = ""
    numbered: bool = False
    axis_share: float | None = None
    mixed: bool = False
    shares: dict[str, float] | None = None
    prong_balance: float | None = None
    root_share: float | None = None
    tine_shares: tuple[float, ...] | None = None
    nodal_points_mm: tuple[float, ...] = ()

    @property
    def key(self) -> str:
        """The name without number and letter."""
        return self.base + self.suffix


class Reading(Protocol):
    """What a kind of body makes of its modes' motion.

    Attributes
    ----------
    symmetric : bool
        Equal modes are equal because the body is: the vectors of a cluster are
        ordered by direction, not by frequency.
    """

    @property
    def symmetric(self) -> bool:
        """Whether the order within a cluster is one of direction."""
        ...

    def criteria(self, members: np.ndarray) -> Sequence[np.ndarray]:
        """Return energy products (k, k) that tell the members of a cluster apart."""
        ...

    def turned(self, turn: np.ndarray) -> Reading:
        """Return the reading of the modes that `turn` (m, m) makes of these."""
        ...

    def drafts(self) -> list[Draft]:
        """Return a draft of each mode's name, in order."""
        ...
