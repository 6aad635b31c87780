"""The default element size: fine through the thickness, within a budget of unknowns."""

from __future__ import annotations

from dataclasses import dataclass

#: Unknowns that usual parts stay within, and the most a default ever asks for.
USUAL, MOST = 45_000, 150_000

#: Fewest unknowns worth having: small blocky parts are meshed at least this finely.
FEWEST = 9_000


@dataclass(frozen=True, kw_only=True, slots=True)
class Extent:
    """What sizing needs to know of a body: volume mm3, area mm2, longest side mm."""

    volume: float
    area: float
    length: float


def unknowns(extent: Extent, size: float) -> float:
    """Return about how many unknowns a mesh of that element size (mm) has.

    Counted on 31 meshes of bars, blocks and plates, 0.1 to 4 sizes thick, to
    about 25 %: nodes by volume, by area and along four long edges; three unknowns each.
    """
    nodes = 2.6 * extent.volume / size**3 + 4.3 * extent.area / size**2
    return 3.0 * (nodes + 35.0 * extent.length / size)


def default_size(thin: float, extent: Extent, usual: float = USUAL) -> float:
    """Return the element size, mm.

    About two elements through the thinnest section where that stays within
    `usual` unknowns; down to two thirds of an element where it does not; coarser
    still only where `MOST` unknowns would be passed.

    Parameters
    ----------
    thin : float
        Smallest wall, web or thickness, mm; 0 where it is not known.
    extent : Extent
    usual : unknowns to stay within, `FEWEST` or more
    """
    if thin <= 0:
        thin = 2.0 * extent.volume / extent.area
    fine, coarse = 0.45 * thin, 1.5 * thin
    size = min(max(fine, size_for(extent, usual)), coarse)
    size = max(size, size_for(extent, MOST))
    return float(f"{min(size, size_for(extent, FEWEST)):.3g}")


def size_for(extent: Extent, wanted: float) -> float:
    """Return the size, mm, that gives about that many unknowns."""
    low, high = 1e-6 * extent.length, extent.length
    for _ in range(60):
        middle = (low * high) ** 0.5
        low, high = (middle, high) if unknowns(extent, middle) > wanted else (low, middle)
    return high
