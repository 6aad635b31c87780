"""How prongs and tines share a mode, and which way each goes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ....geometry.anatomy import Region, Role
from .slices import Slices

#: One limb with more than this part of the limbs' energy has the mode to itself.
_ALONE = 0.8

#: Tines with less than this part of the liveliest one's energy do not join in.
_JOINED = 0.1

#: A limb with less than this part of the limbs' energy hardly moves; limbs with
#: less than this part of the body's energy leave the mode to the root.
_STILL = 0.02

#: A mean smaller than this part of the limb's root mean square tells no direction.
_FAINT = 0.1


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Party:
    """How the prongs or tines of one mode go together.

    Attributes
    ----------
    suffix : ends the name
    root_share : part of the energy outside them
    shares : part of the energy of each, by number
    balance : +1 together ... -1 opposed; of two prongs only
    """

    suffix: str
    root_share: float
    shares: tuple[float, ...]
    balance: float | None


def party(slices: Slices, regions: Sequence[Region], mode: int, share: int) -> Party:
    """Return how the regions of a body share one mode.

    Parameters
    ----------
    slices : of the body, cut by `regions`
    regions : by number, all of one role
    mode : index
    share : the rigid share that names the mode (place in `SHARES`)
    """
    energy = slices.energy[:, mode, mode]
    whole, limbs = float(energy.sum()) or 1.0, energy[1:]
    active = float(limbs.sum())
    parts = limbs / (active or 1.0)
    numbers = [region.number for region in regions]
    balance = None
    if regions[0].role is Role.TINE:
        suffix = ", base" if active < _STILL * whole else ", " + _run(parts, numbers)
    else:
        going = _going(slices, mode, share, len(regions))
        if len(regions) == 2:
            size = float(going @ going)
            balance = float(2.0 * going[0] * going[1] / size) if size > 0.0 else 0.0
        if active < _STILL * whole:
            suffix = ", root"
        elif parts.max() > _ALONE:
            suffix = f", prong {numbers[int(parts.argmax())]}"
        elif len(regions) == 2:
            suffix = ", prongs together" if (balance or 0.0) > 0.0 else ", prongs opposed"
        else:
            suffix = ", prongs " + _marks(going, parts)
    return Party(
        suffix=suffix,
        root_share=float(energy[0] / whole),
        shares=tuple(float(e / whole) for e in limbs),
        balance=balance,
    )


def mean_motion(slices: Slices, limb: int) -> np.ndarray:
    """Return (m, 6): mean shift and turn of a limb, by mass."""
    at = slices.limb == limb
    weight = slices.mass[at] / slices.mass[at].sum()
    return np.concatenate(
        [weight @ slices.shift[:, at], weight @ slices.turn[:, at]],
        axis=1,
    )


def _run(parts: np.ndarray, numbers: Sequence[int]) -> str:
    """Name the liveliest, or the run of neighbours from the first to the last that join in."""
    liveliest = int(parts.argmax())
    joined = np.flatnonzero(parts >= _JOINED * parts[liveliest])
    if parts[liveliest] > _ALONE or len(joined) == 1:
        return f"tine {numbers[liveliest]}"
    return f"tines {numbers[joined[0]]}-{numbers[joined[-1]]}"


def _marks(going: np.ndarray, parts: np.ndarray) -> str:
    """Return one mark a prong, the first that moves being +; 0 for one that hardly does."""
    moving = (parts >= _STILL) & (np.abs(going) >= _FAINT * np.abs(going).max())
    lead = going[int(np.flatnonzero(moving)[0])]
    signs = np.where(going * lead > 0.0, "+", "-")
    return " ".join("0" if not m else str(s) for m, s in zip(moving, signs, strict=True))


def _going(slices: Slices, mode: int, share: int, count: int) -> np.ndarray:
    """Return (count,): how far each prong goes, by its mean motion, signed.

    Where the mean of a moving prong all but vanishes, the signs are those of the
    motion along it compared with the liveliest prong's, at the same fraction of length.
    """
    own = _leading(slices, mode, share, count)
    values = slices.turn[mode, :, 0] if own == 2 else slices.shift[mode, :, {0: 2, 1: 1, 3: 0}[own]]
    lines, means, sizes = [], np.zeros(count), np.zeros(count)
    for limb in range(count):
        at = slices.limb == limb + 1
        weight = slices.mass[at] / slices.mass[at].sum()
        means[limb] = weight @ values[at]
        sizes[limb] = np.sqrt(weight @ values[at] ** 2)
        fraction = (np.arange(at.sum()) + 0.5) / at.sum()
        lines.append(np.interp((np.arange(64) + 0.5) / 64, fraction, values[at]))
    moving = sizes > np.sqrt(_STILL) * sizes.max()
    if (np.abs(means) >= _FAINT * sizes)[moving].all():
        return means
    first = lines[int(sizes.argmax())]
    return np.array([line @ first for line in lines]) / (np.sqrt(first @ first) or 1.0)


def _leading(slices: Slices, mode: int, share: int, count: int) -> int:
    """Return the rigid share whose motion tells the prongs apart.

    The one that names the mode, unless the prongs themselves hardly take part in it.
    """
    amounts = np.zeros(4)
    total = 0.0
    for limb in range(1, count + 1):
        part = slices.shares(limb)[mode] * slices.energy[limb, mode, mode]
        amounts += part[:4]
        total += part.sum()
    if share < 4 and amounts[share] >= _STILL * total:
        return share
    return int(amounts.argmax())
