"""What an example case says it must show, held against what was solved."""

from __future__ import annotations

from dataclasses import dataclass

from ..fem.modal.case import Expected
from ..fem.modal.modes import Modes
from ..fem.modal.naming.find import find_mode
from ..fem.modal.pitch import cents
from ..geometry.errors import InputError


@dataclass(frozen=True, kw_only=True, slots=True)
class Comparison:
    """One expectation and what became of it.

    Attributes
    ----------
    expected : Expected
    name : the mode it means
    frequency : Hz, as solved
    cents : solved against expected; positive is sharp
    """

    expected: Expected
    name: str
    frequency: float
    cents: float

    @property
    def met(self) -> bool:
        """Whether the solved frequency lies within the tolerance."""
        return abs(self.cents) <= self.expected.tolerance_cents

    def __str__(self) -> str:
        """Return the comparison as one line."""
        e = self.expected
        return (
            f"{self.name}: {self.frequency:.2f} Hz, expected {e.frequency:.2f} Hz "
            f"({self.cents:+.1f} cents, allowed {e.tolerance_cents:g}; {e.source})"
        )


def compare(modes: Modes) -> tuple[Comparison, ...]:
    """Return each expectation of the modes' case beside what was solved.

    Raises
    ------
    InputError
        If an expectation names no mode, or several.
    """
    found = []
    for number, expected in enumerate(modes.case.expected, 1):
        try:
            mode = modes.modes[find_mode(expected.mode, modes.names)]
        except InputError as error:
            raise error.within(key=f"expect.{number}.mode") from None
        found.append(
            Comparison(
                expected=expected,
                name=mode.name,
                frequency=mode.frequency_hz,
                cents=cents(mode.frequency_hz, expected.frequency),
            )
        )
    return tuple(found)
