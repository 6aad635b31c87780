"""What numbers make physical sense, and which slip of the unit a wrong one looks like."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from ..geometry.errors import InputError

Slips = tuple[tuple[float, str], ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class Sense:
    """The range in which a value can be right.

    Attributes
    ----------
    low, high : smallest and largest allowed value
    unit : as told to people
    over : the smallest value itself is not allowed
    under : the largest value itself is not allowed
    slips : (factor, words)
        Common slips: the value times the factor is what was meant.
    """

    low: float
    high: float
    unit: str = ""
    over: bool = False
    under: bool = False
    slips: Slips = ()

    def check(self, value: float, key: str) -> None:
        """Raise InputError if the value is out of range, with the likely slip."""
        if self._fits(value):
            return
        problem = "is out of range"
        for factor, words in self.slips:
            meant = value * factor
            if self._fits(meant):
                problem += f" (did you mean {meant:.6g}? {words})"
                break
        raise InputError(problem, key=key, value=_bare(value), allowed=self.allowed)

    def _fits(self, value: float) -> bool:
        above = value > self.low if self.over else value >= self.low
        return above and (value < self.high if self.under else value <= self.high)

    @property
    def allowed(self) -> str:
        """The range in words."""
        low = f"over {self.low:g}" if self.over else f"{self.low:g} or more"
        high = f"under {self.high:g}" if self.under else f"up to {self.high:g}"
        return f"{low}, {high} {self.unit}".rstrip()


def _bare(value: float) -> Any:
    return int(value) if value == int(value) and abs(value) < 1e15 else value


#: Key of ``[material]`` -> range. Wide enough for plastics, woods and hard metals.
MATERIAL: dict[str, Sense] = {
    "youngs_modulus_gpa": Sense(
        low=0.01,
        high=1300.0,
        unit="GPa",
        slips=((1e-9, "the key is in GPa, not Pa"), (1e-3, "the key is in GPa, not MPa")),
    ),
    "shear_modulus_gpa": Sense(
        low=0.001,
        high=600.0,
        unit="GPa",
        slips=((1e-9, "the key is in GPa, not Pa"), (1e-3, "the key is in GPa, not MPa")),
    ),
    "poisson_ratio": Sense(
        low=-1.0, high=0.5, over=True, under=True, slips=((0.01, "the ratio is no percentage"),)
    ),
    "density": Sense(
        low=30.0,
        high=25000.0,
        unit="kg/m3",
        slips=(
            (1e3, "the key is in kg/m3, not g/cm3"),
            (1e12, "the key is in kg/m3, not t/mm3"),
            (1e9, "the key is in kg/m3, not kg/mm3"),
        ),
    ),
    "loss_factor": Sense(low=0.0, high=1.0, under=True, slips=((0.01, "no percentage"),)),
    "expansion_ppm_per_k": Sense(
        low=-20.0, high=300.0, unit="ppm/K", slips=((1e-3, "the key is in millionths per K"),)
    ),
    "modulus_slope_ppm_per_k": Sense(low=-20000.0, high=5000.0, unit="ppm/K"),
    "conductivity": Sense(low=0.0, high=3000.0, over=True, unit="W/(m K)"),
    "specific_heat": Sense(
        low=50.0,
        high=10000.0,
        unit="J/(kg K)",
        slips=((1e3, "the key is in J/(kg K), not J/(g K)"),),
    ),
    "endurance_mpa": Sense(
        low=0.1,
        high=5000.0,
        unit="MPa",
        slips=((1e-6, "the key is in MPa, not Pa"), (1e3, "the key is in MPa, not GPa")),
    ),
}

#: An orthotropic ratio may pass one half; the stiffness matrix decides.
ORTHOTROPIC_POISSON = Sense(low=-2.0, high=2.0)

A4_HZ = Sense(low=300.0, high=600.0, unit="Hz")
TEMPERATURE_C = Sense(low=-200.0, high=600.0, unit="degrees C")
#: Finer than any maker could tell, and coarser than any mesh is.
ACCURACY_CENTS = Sense(low=0.01, high=100.0, unit="cents")
CENTS = Sense(low=-1200.0, high=1200.0, unit="cents")


def check_parts_per_million(value: float, key: str) -> None:
    """Raise InputError for a coefficient that can only be written per K, not in ppm per K."""
    if value != 0.0 and abs(value) < 0.005:
        raise InputError(
            f"is too small to be right (did you mean {value * 1e6:.6g}? "
            "the key is in millionths per K)",
            key=key,
            value=value,
        )
