"""The errors of modewright.

::

    ModewrightError
    ├── InputError      what the user wrote cannot be right (exit code 2); also a ValueError
    └── WorkError       right input, but it could not be done (exit code 1)
        ├── MeshError       the body could not be meshed well enough
        ├── SolveError      the eigen-solve failed; says what to try
        └── ToolError       something on this machine is missing or broke
"""

from __future__ import annotations

from typing import Any


class ModewrightError(Exception):
    """Root of all errors raised on purpose by modewright."""


class InputError(ModewrightError, ValueError):
    """A mistake in what the user wrote, told in one sentence.

    Parameters
    ----------
    problem : str
        What is wrong, a clause without a full stop: ``must be over 0 mm``.
    key : str, optional
        Key path in the case file, such as ``shape.thickness``.
    value : object, optional
        The offending value as the user wrote it.
    allowed : str, optional
        What would be accepted.
    file : str, optional
        The file that holds the mistake.
    """

    def __init__(
        self,
        problem: str,
        *,
        key: str | None = None,
        value: Any = None,
        allowed: str | None = None,
        file: str | None = None,
    ) -> None:
        self.problem, self.key, self.value = problem, key, value
        self.allowed, self.file = allowed, file
        super().__init__(self.sentence)

    @property
    def sentence(self) -> str:
        """The whole message: file, key, problem, value and what is allowed."""
        place = ": ".join(part for part in (self.file, self.key) if part)
        text = f"{place}: {self.problem}" if place else self.problem
        if self.value is not None:
            text += f", got {self.value!r}"
        if self.allowed:
            text += f" (allowed: {self.allowed})"
        return text

    def within(self, *, file: str | None = None, key: str | None = None) -> InputError:
        """Return the same mistake, placed in a file or under a parent key."""
        path = ".".join(part for part in (key, self.key) if part) or None
        return InputError(
            self.problem,
            key=path,
            value=self.value,
            allowed=self.allowed,
            file=self.file or file,
        )


class WorkError(ModewrightError, RuntimeError):
    """The input is right but the work could not be done."""


class MeshError(WorkError):
    """The body could not be turned into a valid mesh."""


class SolveError(WorkError):
    """The eigen-solve failed; the message says what to try."""


class ToolError(WorkError):
    """A library or a system tool is missing, broke, or ran out of time."""
