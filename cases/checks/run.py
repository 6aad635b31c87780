"""Solving the parts of published checks and comparing."""

from __future__ import annotations

import json
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from enum import Enum
from time import perf_counter

from ...fem.modal.modes import Mode, Modes
from ...fem.modal.naming.find import find_mode
from ...fem.modal.pitch import cents
from ...fem.modal.solve import solve
from ...geometry.errors import InputError, WorkError
from ..reader import build_case
from .record import Check, Expected

Progress = Callable[[str], None]


class Verdict(Enum):
    """What became of one expected value."""

    AGREES = "agrees"
    FAILS = "fails"
    SHOWN = "shown only"


@dataclass(frozen=True, kw_only=True, slots=True)
class Outcome:
    """One expected value beside what was solved.

    Attributes
    ----------
    expected : Expected
    expected_hz, printed_hz : Hz; printed is None where the source prints the expected value
    got_hz : Hz, of the mode farthest off; None if there is no such mode
    mesh_error_cents : what the mesh's own error of that mode was taken to be, already
        taken off; None where none is known
    percent, cents : got against expected; positive is sharp
    printed_percent : got against printed
    verdict : Verdict
    """

    expected: Expected
    expected_hz: float
    printed_hz: float | None
    got_hz: float | None
    mesh_error_cents: float | None
    percent: float | None
    cents: float | None
    printed_percent: float | None
    verdict: Verdict


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Result:
    """One check and its outcomes.

    Attributes
    ----------
    check : Check
    outcomes : one for each expected value
    seconds : to solve the part, next to 0 if another check had solved it already
    unknowns, size_mm : of the mesh; None if the part was not solved
    trouble : why the part could not be solved, or ""
    """

    check: Check
    outcomes: tuple[Outcome, ...]
    seconds: float
    unknowns: int | None = None
    size_mm: float | None = None
    trouble: str = ""

    @property
    def failed(self) -> bool:
        """Whether any value fails."""
        return any(outcome.verdict is Verdict.FAILS for outcome in self.outcomes)


def run_checks(checks: Sequence[Check], *, progress: Progress | None = None) -> tuple[Result, ...]:
    """Return the results of all checks, in order; a part that several share is solved once.

    Raises
    ------
    InputError
        If a check's case is wrong.
    """
    tell = progress or _silent
    solved: dict[str, Modes | WorkError] = {}
    results = []
    for number, check in enumerate(checks, 1):
        key = json.dumps(check.document, sort_keys=True)
        start = perf_counter()
        if key not in solved:
            case = build_case(check.document)
            head = f"{number} of {len(checks)}, {check.title.lower()}"
            try:
                solved[key] = solve(
                    case, progress=lambda words, head=head: tell(f"{head}: {words}")
                )
            except WorkError as error:
                solved[key] = error
        results.append(_result(check, solved[key], perf_counter() - start))
    return tuple(results)


def _result(check: Check, modes: Modes | WorkError, seconds: float) -> Result:
    if isinstance(modes, WorkError):
        outcomes = tuple(_outcome(check, expected, ()) for expected in check.expected)
        return Result(check=check, outcomes=outcomes, seconds=seconds, trouble=str(modes))
    return Result(
        check=check,
        outcomes=tuple(
            _outcome(check, expected, _found(expected, modes)) for expected in check.expected
        ),
        unknowns=modes.mesh_facts.unknowns,
        size_mm=modes.mesh_facts.size_mm,
        seconds=seconds,
    )


def _found(expected: Expected, modes: Modes) -> Sequence[Mode]:
    """Return the modes an expected value speaks of; none if one of them is not there."""
    if expected.mode is None:
        chosen = modes.modes[expected.first - 1 : expected.last]
        return chosen if len(modes) >= expected.last else ()
    try:
        return (modes.modes[find_mode(expected.mode, modes.names)],)
    except InputError:
        return ()


def _outcome(check: Check, expected: Expected, found: Sequence[Mode]) -> Outcome:
    wanted = expected.value * check.unit
    printed = None if expected.printed is None else expected.printed * check.unit
    worst = max(found, key=lambda mode: abs(mode.frequency_hz / wanted - 1.0), default=None)
    got = None if worst is None else worst.frequency_hz
    percent = None if got is None else 100.0 * (got / wanted - 1.0)
    return Outcome(
        expected=expected,
        expected_hz=wanted,
        printed_hz=printed,
        got_hz=got,
        mesh_error_cents=None if worst is None else worst.mesh_error_cents,
        percent=percent,
        cents=None if got is None else cents(got, wanted),
        printed_percent=None if got is None or not printed else 100.0 * (got / printed - 1.0),
        verdict=_verdict(check, percent),
    )


def _verdict(check: Check, percent: float | None) -> Verdict:
    if not check.decides:
        return Verdict.SHOWN
    # Written so that a frequency that is no number fails.
    agrees = percent is not None and abs(percent) <= check.tolerance
    return Verdict.AGREES if agrees else Verdict.FAILS


def _silent(words: str) -> None:
    """Say nothing."""
