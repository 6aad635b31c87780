"""A case: what to solve, as frozen records in SI (shapes in mm)."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from ...geometry.shape import Shape
from .material import Material
from .mount import AttachedMass, Mount


@dataclass(frozen=True, kw_only=True, slots=True)
class Pitch:
    """What notes and ratios are told against.

    Attributes
    ----------
    a4 : Hz
    reference_mode : name of the mode that ratios are told against; None: the lowest
    """

    a4: float = 440.0
    reference_mode: str | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class Target:
    """A wanted pitch of one mode: a frequency, or a ratio to another mode.

    Attributes
    ----------
    mode : name, as in the results or shorter where only one mode fits
    frequency : Hz, or None
    ratio, of : ratio to the mode named `of`, or None
    note : the note as the user wrote it, or None
    tolerance_cents, weight : used by tuning, shown by modes
    """

    mode: str
    frequency: float | None = None
    ratio: float | None = None
    of: str | None = None
    note: str | None = None
    tolerance_cents: float = 1.0
    weight: float = 1.0


@dataclass(frozen=True, kw_only=True, slots=True)
class Measured:
    """A measured frequency of one mode, Hz."""

    mode: str
    frequency: float


@dataclass(frozen=True, kw_only=True, slots=True)
class Expected:
    """A frequency an example case must show, and where it comes from."""

    mode: str
    frequency: float
    tolerance_cents: float
    source: str


@dataclass(frozen=True, kw_only=True, slots=True)
class SolveSettings:
    """How finely and how far to solve.

    Attributes
    ----------
    modes : number of elastic modes wanted; None: all up to `up_to`
    up_to : Hz, or None
    size : element size, mm; None: from the thinnest section and the length
    accuracy : cents that no mode's mesh error may exceed, instead of a size; or None
    """

    modes: int | None = 12
    up_to: float | None = None
    size: float | None = None
    accuracy: float | None = None


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Case:
    """Everything a solve needs.

    Attributes
    ----------
    title : str
    shape : Shape
    material : Material
    mounts : empty or one FREE mount for a free part
    attached_masses, pitch, targets, measured, expected, settings : see their records
    temperature : degrees C; the material's values hold at 20
    document : the case as resolved (defaults filled in), in case-file keys and units
    file : the case file, or None
    """

    title: str
    shape: Shape
    material: Material
    mounts: tuple[Mount, ...] = ()
    attached_masses: tuple[AttachedMass, ...] = ()
    pitch: Pitch = field(default_factory=Pitch)
    temperature: float = 20.0
    targets: tuple[Target, ...] = ()
    measured: tuple[Measured, ...] = ()
    expected: tuple[Expected, ...] = ()
    settings: SolveSettings = field(default_factory=SolveSettings)
    document: Mapping[str, Any] = field(default_factory=dict)
    file: Path | None = None
