"""What the rest of the program needs to know of a shape, and all it knows.

Names of modes, beam theory and trimming work from an `Anatomy`; they never ask
which family a shape belongs to.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from enum import Enum

import numpy as np

_IDENTITY = ((1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0))


class Kind(Enum):
    """How a body vibrates, and so how its modes are named."""

    BAR = "bar"
    PLATE = "plate"
    DISC = "disc"
    RING = "ring"
    REVOLVED = "revolved"
    NONE = "none"


class Role(Enum):
    """What a region of a bar-like body is."""

    PRONG = "prong"
    TINE = "tine"


@dataclass(frozen=True, kw_only=True, slots=True)
class Frame:
    """A right-handed coordinate frame.

    Attributes
    ----------
    origin : (3,) m
        For bars: the middle of the section at the root. For plates, discs,
        rings: the centre. For revolved bodies: on the axis.
    axes : three (3,) unit vectors
        Bars: along, across, through. Plates: length, width, thickness.
        Discs, rings, revolved bodies: the angle-zero direction, the direction
        of 90 degrees, the axis of revolution.
    """

    origin: tuple[float, float, float] = (0.0, 0.0, 0.0)
    axes: tuple[tuple[float, float, float], ...] = _IDENTITY

    def local(self, points: np.ndarray) -> np.ndarray:
        """Return coordinates (n, 3) of global points (n, 3) in this frame."""
        return (np.asarray(points) - np.asarray(self.origin)) @ np.asarray(self.axes).T

    def rotated(self, vectors: np.ndarray) -> np.ndarray:
        """Return components (..., 3) of global vectors (..., 3) in this frame."""
        return np.asarray(vectors) @ np.asarray(self.axes).T


@dataclass(frozen=True, kw_only=True, slots=True)
class Region:
    """A prong or a tine: the part of the body inside a box of the anatomy frame.

    Attributes
    ----------
    role : Role
    number : int
        From 1, by increasing coordinate across (for prongs beside each other
        through the thickness: by increasing coordinate through).
    low, high : (3,) m
        Corners of the box; infinite where unbounded.
    """

    role: Role
    number: int
    low: tuple[float, float, float]
    high: tuple[float, float, float]

    def contains(self, local: np.ndarray) -> np.ndarray:
        """Return (n,) bool: which points (n, 3) of the anatomy frame lie inside."""
        return np.all((local >= self.low) & (local <= self.high), axis=1)


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Sections:
    """Cross-section properties at stations along a bar.

    A step in the section is two stations at the same x. Between stations,
    values are meant to be interpolated linearly; smooth tapers carry enough
    stations (at least 65) for that to be exact to 1e-4 or better.

    Attributes
    ----------
    x : (s,) m, ascending, along the bar from the first end
    area : (s,) m2
    i_across : (s,) m4
        Second moment for flatwise bending (motion along through, I_y).
    i_through : (s,) m4
        Second moment for edgewise bending (motion along across, I_z).
    torsion : (s,) m4
        Saint-Venant torsion constant J.
    form : str
        ``rectangle``, ``circle`` or ``tube``: which shear coefficient applies.
    offset : (s,) m
        Height of the centroid along through; a strongly curved centre line
        couples bending with axial motion, so theory says where it applies.
    """

    x: np.ndarray
    area: np.ndarray
    i_across: np.ndarray
    i_through: np.ndarray
    torsion: np.ndarray
    form: str = "rectangle"
    offset: np.ndarray | None = None

    def scaled(self, factor: float) -> Sections:
        """Return the same sections in a unit of length `factor` times this one."""
        return replace(
            self,
            x=np.asarray(self.x, float) * factor,
            area=np.asarray(self.area, float) * factor**2,
            i_across=np.asarray(self.i_across, float) * factor**4,
            i_through=np.asarray(self.i_through, float) * factor**4,
            torsion=np.asarray(self.torsion, float) * factor**4,
            offset=None if self.offset is None else np.asarray(self.offset, float) * factor,
        )


@dataclass(frozen=True, kw_only=True, slots=True)
class PlateSize:
    """A flat rectangular plate of constant thickness, in m."""

    length: float
    width: float
    thickness: float


@dataclass(frozen=True, kw_only=True, slots=True)
class DiscSize:
    """A flat round plate of constant thickness, in m."""

    radius: float
    thickness: float


@dataclass(frozen=True, kw_only=True, slots=True)
class RingSize:
    """A circular ring of constant section, in m.

    Attributes
    ----------
    radius : mean radius, m
    area : m2
    i_axial : m4
        Second moment about an axis parallel to the ring's axis: in-plane bending.
    i_radial : m4
        Second moment about a radial axis: out-of-plane bending.
    torsion : m4
        Saint-Venant torsion constant J.
    """

    radius: float
    area: float
    i_axial: float
    i_radial: float
    torsion: float


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Anatomy:
    """What a body is, as far as names, theory and trimming go.

    Attributes
    ----------
    kind : Kind
    frame : Frame
    length : float
        Extent along the first axis (bars, plates), m; 0 where it has no meaning.
    ends : (str, str) or None
        Named faces that close a bar at its first and last station; of a plate,
        those at both ends of its length.
    regions : prongs or tines; empty when there are none
    sections : bars of one limb (no prongs, tines, cross holes) only; else None,
        and beam theory stays silent
    square, round : bool
        Both bending directions equal: modes come in pairs without a flat or
        edge side.
    plate, disc, ring : dimensions for plate and ring theory; None where the body
        has holes or another form
    """

    kind: Kind
    frame: Frame = field(default_factory=Frame)
    length: float = 0.0
    ends: tuple[str, str] | None = None
    regions: tuple[Region, ...] = ()
    sections: Sections | None = None
    square: bool = False
    round: bool = False
    plate: PlateSize | None = None
    disc: DiscSize | None = None
    ring: RingSize | None = None

    def scaled(self, factor: float) -> Anatomy:
        """Return the same anatomy with every length multiplied by `factor`."""

        def vector(v: tuple[float, float, float]) -> tuple[float, float, float]:
            return (v[0] * factor, v[1] * factor, v[2] * factor)

        plate, disc, ring = self.plate, self.disc, self.ring
        return replace(
            self,
            frame=replace(self.frame, origin=vector(self.frame.origin)),
            length=self.length * factor,
            regions=tuple(replace(r, low=vector(r.low), high=vector(r.high)) for r in self.regions),
            sections=self.sections and self.sections.scaled(factor),
            plate=plate
            and PlateSize(
                length=plate.length * factor,
                width=plate.width * factor,
                thickness=plate.thickness * factor,
            ),
            disc=disc and DiscSize(radius=disc.radius * factor, thickness=disc.thickness * factor),
            ring=ring
            and RingSize(
                radius=ring.radius * factor,
                area=ring.area * factor**2,
                i_axial=ring.i_axial * factor**4,
                i_radial=ring.i_radial * factor**4,
                torsion=ring.torsion * factor**4,
            ),
        )
