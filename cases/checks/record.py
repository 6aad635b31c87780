"""What a published check is made of."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import Enum
from typing import Any


class Basis(Enum):
    """What an expected value rests on, in words for the table."""

    EXACT = "exact solution of three-dimensional elasticity"
    RECOMPUTED = "three-dimensional value, recomputed by a converged Ritz series"
    BEAM_THEORY = "beam theory, where the part is slender"
    PLATE_THEORY = "thin-plate theory, where the part is thin"
    PLANE_STRESS = "plane stress, recomputed by a converged Ritz series"
    PUBLISHED_PLATE = "published plate value"
    MEMORY = "from memory of the source: shown, never decides"


@dataclass(frozen=True, kw_only=True, slots=True)
class Expected:
    """One expected frequency, or one that several modes share.

    Attributes
    ----------
    value : in the source's own measure; times `Check.unit` it is in Hz
    mode : name of the mode, where the part's modes have telling names
    first, last : else the places in the spectrum that have this value, from 1
    printed : what the publication prints where that is not `value`, same measure
    """

    value: float
    mode: str | None = None
    first: int = 0
    last: int = 0
    printed: float | None = None

    @property
    def label(self) -> str:
        """The mode's name, or its place or places in the spectrum."""
        if self.mode is not None:
            return self.mode
        if self.first == self.last:
            return f"mode {self.first}"
        return f"modes {self.first}-{self.last}"


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Check:
    """A part, what it is expected to sound at, and who says so.

    Attributes
    ----------
    title : what the check is about, by its physics
    source : author, work, year, table
    basis : what the expected values rest on
    tolerance : %, of the frequency
    unit : Hz, what one of the source's measure is worth
    measure : name of the source's measure
    document : the case, as a case file holds it
    expected : at least one
    quick : part of the short run
    note : what a reader must know, such as where the publication is off
    """

    title: str
    source: str
    basis: Basis
    tolerance: float
    document: Mapping[str, Any]
    expected: tuple[Expected, ...]
    unit: float = 1.0
    measure: str = "Hz"
    quick: bool = True
    note: str = ""

    @property
    def decides(self) -> bool:
        """Whether a deviation counts as a failure."""
        return self.basis is not Basis.MEMORY


def spectrum(
    *values: tuple[float, int], printed: tuple[float | None, ...] | None = None
) -> tuple[Expected, ...]:
    """Return the lowest elastic modes, each value with the number of modes that share it."""
    found, place = [], 1
    for (value, count), other in zip(values, printed or (None,) * len(values), strict=True):
        found.append(Expected(value=value, first=place, last=place + count - 1, printed=other))
        place += count
    return tuple(found)


def named(
    values: Mapping[str, float], printed: tuple[float | None, ...] | None = None
) -> tuple[Expected, ...]:
    """Return modes by their names."""
    others = printed or (None,) * len(values)
    return tuple(
        Expected(value=value, mode=mode, printed=other)
        for (mode, value), other in zip(values.items(), others, strict=True)
    )


def document(
    title: str,
    shape: Mapping[str, Any],
    material: Mapping[str, Any],
    *,
    modes: int,
    size: float,
    **tables: Any,
) -> dict[str, Any]:
    """Return a case as a case file holds it."""
    return {
        "title": title,
        "shape": dict(shape),
        "material": dict(material),
        **tables,
        "solve": {"modes": modes, "size": size},
    }


def isotropic(modulus_gpa: float, poisson_ratio: float, density: float) -> dict[str, float]:
    """Return the material table of a source that gives plain numbers."""
    return {
        "youngs_modulus_gpa": modulus_gpa,
        "poisson_ratio": poisson_ratio,
        "density": density,
    }
