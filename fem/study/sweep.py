"""Frequencies against one changed value, each mode followed by its shape."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from ...geometry.mesh import Mesh
from ..modal.case import Case
from ..modal.modes import Modes
from ..modal.solve import case_mesh, case_patches, solve
from .follow import follow

#: Modes solved for beyond those wanted, so that one that climbs is not lost.
_SPARE = 4


@dataclass(frozen=True, kw_only=True, slots=True)
class Track:
    """One mode followed over all values.

    Attributes
    ----------
    name : its name where it was first met
    names : its name at each value; None where it was not found
    frequencies : Hz at each value; None where it was not found
    """

    name: str
    names: tuple[str | None, ...]
    frequencies: tuple[float | None, ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class Sweep:
    """Modes followed while one value changes.

    Attributes
    ----------
    key : key path of what was changed
    values : as given, in the order in which the modes were followed
    tracks : by frequency at the first value
    unit : of the values, where they have one that the key does not tell
    """

    key: str
    values: tuple[float | str, ...]
    tracks: tuple[Track, ...]
    unit: str | None = None

    @property
    def frequencies(self) -> np.ndarray:
        """Frequencies (tracks, values), Hz; nan where a mode was not found."""
        return np.array(
            [[np.nan if f is None else f for f in track.frequencies] for track in self.tracks]
        )


def sweep(
    key: str,
    values: Sequence[float | str],
    cases: Sequence[Case],
    *,
    unit: str | None = None,
    progress: Callable[[str], None] | None = None,
) -> Sweep:
    """Solve a case for each value and follow the modes by shape.

    Parameters
    ----------
    key : str
        What changes, for the record.
    values : sequence
        One for each case.
    cases : sequence of Case
        In an order in which neighbours differ little.
    unit : str, optional
        Of the values, for the record.
    progress : callable, optional
        Called with a few words at each stage.

    Raises
    ------
    WorkError
        If a part could not be meshed or solved.
    """
    tracks: list[_Growing] = []
    before: Modes | None = None
    mesh: Mesh | None = None
    wanted = 0
    for i, (value, case) in enumerate(zip(values, cases, strict=True), 1):
        say = _prefixed(progress, f"{key} = {value} ({i} of {len(cases)}): ")
        if mesh is None or not _same_body(case, cases[i - 2]):
            mesh = case_mesh(case, progress=say)
        now = solve(_with_spare(case), mesh=mesh, progress=say)
        wanted = max(wanted, _wanted(case, now))
        _extend(tracks, before, now, step=i - 1)
        before = now
    kept = [track for track in tracks if track.lowest < wanted]
    return Sweep(
        key=key,
        values=tuple(values),
        unit=unit,
        tracks=tuple(
            Track(
                name=next(name for name in track.names if name is not None),
                names=tuple(track.names),
                frequencies=tuple(track.frequencies),
            )
            for track in kept
        ),
    )


class _Growing:
    """A track while it is being followed: `place` is its position in the latest result."""

    def __init__(self, step: int) -> None:
        self.names: list[str | None] = [None] * step
        self.frequencies: list[float | None] = [None] * step
        self.place: int | None = None
        self.lowest = 10**9

    def add(self, modes: Modes, place: int | None) -> None:
        self.place = place
        mode = None if place is None else modes.modes[place]
        self.names.append(mode and mode.name)
        self.frequencies.append(mode and mode.frequency_hz)
        if place is not None:
            self.lowest = min(self.lowest, place)


def _extend(tracks: list[_Growing], before: Modes | None, now: Modes, step: int) -> None:
    found = [] if before is None else follow(before, now)
    for track in tracks:
        track.add(now, None if track.place is None else found[track.place])
    taken = {track.place for track in tracks}
    for place in range(len(now)):
        if place not in taken:
            track = _Growing(step)
            track.add(now, place)
            tracks.append(track)


def _same_body(case: Case, other: Case) -> bool:
    """Return whether a mesh of one case serves the other."""
    return (
        case.shape.family is other.shape.family
        and case.shape.dimensions == other.shape.dimensions
        and case.shape.folder == other.shape.folder
        and case.settings.size == other.settings.size
        and case.settings.accuracy == other.settings.accuracy
        and case_patches(case) == case_patches(other)
    )


def _with_spare(case: Case) -> Case:
    settings = case.settings
    if settings.modes is None:
        return case
    return replace(case, settings=replace(settings, modes=settings.modes + _SPARE))


def _wanted(case: Case, modes: Modes) -> int:
    return len(modes) if case.settings.modes is None else min(case.settings.modes, len(modes))


def _prefixed(progress: Callable[[str], None] | None, prefix: str) -> Callable[[str], None] | None:
    if progress is None:
        return None
    return lambda words: progress(prefix + words)
