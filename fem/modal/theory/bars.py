"""Theory of bars and tubes: bending, torsion and lengthwise motion by name."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from functools import cached_property

import numpy as np

from ....geometry.anatomy import Sections
from ..material import Material
from .axial import axial_frequencies
from .support import Held
from .timoshenko import Motion, bending_frequencies
from .torsion import torsion_frequencies

Prediction = tuple[float, str]

_NAME = re.compile(r"(flatwise bending|edgewise bending|bending|torsion|axial) (\d+)( [ab])?")

#: Half waves are at least this many times as long as the section is deep or
#: wide; beyond it sections bend like plates and beam theory is off by over 1 %.
_SHORTEST = 5.0 / 3.0

#: A clamped bar shorter than this many times its depth is no beam.
_STUBBY = 5.0


class BarTheory:
    """Frequencies of a bar by the names of its modes, each family solved once.

    Parameters
    ----------
    sections : Sections, in m
    material : Material
    held : Held, not ``other``
    highest : int
        The highest number of a mode that will be asked for.
    """

    def __init__(self, sections: Sections, material: Material, held: Held, highest: int) -> None:
        self._sections, self._material = sections, material
        self._held: Held = held
        self._highest = highest
        self._known: dict[str, np.ndarray] = {}

    def predict(self, name: str) -> Prediction | None:
        """Return frequency (Hz) and source of a mode, or None where theory is silent."""
        found = _NAME.fullmatch(name)
        if found is None:
            return None
        family, n = found[1], int(found[2])
        if family == "torsion":
            return self._torsion(n)
        if family == "axial":
            return self._axial(n)
        return self._bending("edgewise" if family == "edgewise bending" else "flatwise", n)

    def _bending(self, motion: Motion, n: int) -> Prediction | None:
        depth = self._depth_across if motion == "edgewise" else self._depth_through
        last = self._last(self._reach / _SHORTEST)
        if n > last or self._length < _STUBBY * depth:
            return None

        def solve(slender: bool) -> Callable[[], np.ndarray]:
            return lambda: bending_frequencies(
                self._sections, self._material, motion, self._held, last, slender=slender
            )

        frequency = self._once(motion, solve(False))[n - 1]
        limit = self._once(f"{motion} slender", solve(True))[n - 1]
        kappa = "5/6" if self._material.orthotropic else "after Cowper 1966"
        if self._material.orthotropic and self._sections.form != "rectangle":
            kappa = "after Cowper 1966 at nu = 0"
        form = self._form
        if self._bent and motion == "flatwise":
            form = ", varying section, bent axis"
        return float(frequency), (
            f"Timoshenko beam (1921), kappa {kappa}{form}; Euler-Bernoulli: {limit:.6g} Hz"
        )

    def _torsion(self, n: int) -> Prediction | None:
        sections, material = self._sections, self._material
        last = self._last(self._reach / 2.0 if sections.form == "rectangle" else 2.0 * self._reach)
        if material.orthotropic or n > last:
            return None
        shear = material.axial_modulus / (2.0 * (1.0 + float(material.poisson_ratio)))  # type: ignore[arg-type]
        known = self._once(
            "torsion",
            lambda: torsion_frequencies(sections, shear, material.density, self._held, last),
        )
        warping = ""
        if sections.form == "rectangle":
            warping = ", warping free" + (
                "" if self._held == "free" else " (a clamp stiffens wide strips)"
            )
        return float(known[n - 1]), f"Saint-Venant torsion (1855){warping}{self._form}"

    def _axial(self, n: int) -> Prediction | None:
        last = self._last(self._reach / _SHORTEST)
        if n > last:
            return None
        known = self._once(
            "axial",
            lambda: axial_frequencies(self._sections, self._material, self._held, last),
        )
        return float(known[n - 1]), f"rod with lateral inertia (Rayleigh 1894){self._form}"

    def _last(self, covered: float) -> int:
        """Return the highest mode number worth solving for."""
        return min(int(covered + 1e-9), self._highest)

    def _once(self, key: str, solve: Callable[[], np.ndarray]) -> np.ndarray:
        if key not in self._known:
            self._known[key] = solve()
        return self._known[key]

    @cached_property
    def _length(self) -> float:
        return float(self._sections.x[-1] - self._sections.x[0])

    @cached_property
    def _depth_through(self) -> float:
        return _depth(self._sections.i_across, self._sections.area)

    @cached_property
    def _depth_across(self) -> float:
        return _depth(self._sections.i_through, self._sections.area)

    @property
    def _reach(self) -> float:
        """Length over the larger side of the section."""
        return self._length / max(self._depth_across, self._depth_through)

    @cached_property
    def _bent(self) -> bool:
        """Whether the centre line leaves a straight line along x."""
        offset = self._sections.offset
        return offset is not None and bool(np.ptp(offset) > 1e-6 * self._length)

    @cached_property
    def _form(self) -> str:
        """What to say of a bar that is not uniform, its axis taken straight."""
        s = self._sections
        if self._bent:
            return ", varying section, straight axis"
        uniform = all(
            np.ptp(values) <= 1e-9 * np.max(values)
            for values in (s.area, s.i_across, s.i_through, s.torsion)
        )
        return "" if uniform else ", varying section"


def highest_number(names: Sequence[str]) -> int:
    """Return the highest number in names of modes of bars, 0 if there is none."""
    return max((int(found[2]) for name in names if (found := _NAME.fullmatch(name))), default=0)


def _depth(inertia: Sequence[float] | np.ndarray, area: Sequence[float] | np.ndarray) -> float:
    """Return the largest depth of the rectangle of the same radius of gyration, m."""
    return float(np.sqrt(12.0 * np.max(np.asarray(inertia) / np.asarray(area))))
