"""Results of published checks as a table, one document and a page."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from ...viz.table import Table
from .run import Outcome, Result, Verdict

#: Headers and whether the column holds numbers.
_COLUMNS = {
    "check": False,
    "mode": False,
    "printed Hz": True,
    "expected Hz": True,
    "got Hz": True,
    "%": True,
    "cents": True,
    "allowed %": True,
    "verdict": False,
}

#: Columns that a narrow terminal goes without, the first to go first.
SPARE = ("printed Hz", "allowed %", "cents")


def passed(results: Sequence[Result]) -> bool:
    """Return whether no value fails."""
    return not any(result.failed for result in results)


def summary(results: Sequence[Result]) -> str:
    """Return one sentence on how many values agree."""
    outcomes = [outcome for result in results for outcome in result.outcomes]
    count = {v: sum(outcome.verdict is v for outcome in outcomes) for v in Verdict}
    deciding = len(outcomes) - count[Verdict.SHOWN]
    text = f"{count[Verdict.AGREES]} of {deciding} values in {len(results)} checks agree"
    if count[Verdict.SHOWN]:
        text += f"; {count[Verdict.SHOWN]} more, from memory of their source, decide nothing"
    failing = [result.check.title.lower() for result in results if result.failed]
    return text + (f". Failing: {'; '.join(failing)}." if failing else ".")


def check_table(results: Sequence[Result]) -> Table:
    """Return one row for each value; the title stands once.

    ``printed Hz`` is filled where the publication is off or rounds harder than
    the value that decides.
    """
    rows = []
    for result in results:
        for i, outcome in enumerate(result.outcomes):
            mode, *numbers, verdict = _cells(outcome)
            allowed = f"{result.check.tolerance:g}" if result.check.decides else ""
            title = "" if i else result.check.title
            rows.append((title, mode, *numbers, allowed, verdict))
    return Table(headers=tuple(_COLUMNS), rows=tuple(rows), numeric=tuple(_COLUMNS.values()))


def remarks(results: Sequence[Result]) -> tuple[str, ...]:
    """Return source, basis and what must be known beside the numbers, one line a check."""
    lines = []
    for result in results:
        check = result.check
        rest = " ".join(part for part in (_trouble(result), check.note) if part)
        line = f"{check.title}: {check.source} [{check.basis.value}]."
        lines.append(f"{line} {rest}" if rest else line)
    return tuple(lines)


def check_document(results: Sequence[Result], *, full: bool) -> dict[str, Any]:
    """Return the results as programs read them."""
    return {
        "format": "modewright-check",
        "version": 1,
        "full": full,
        "passed": passed(results),
        "summary": summary(results),
        "checks": [_document(result) for result in results],
    }


def check_page(results: Sequence[Result]) -> str:
    """Return the results as a page of Markdown."""
    parts = ["# Published checks", "", summary(results), ""]
    for result in results:
        check = result.check
        parts += [f"## {check.title}", "", f"Source: {check.source}.", ""]
        parts += [f"Rests on: {check.basis.value}; allowed {check.tolerance:g} %.", ""]
        if result.unknowns is not None:
            parts += [f"Mesh: {result.unknowns} unknowns, cells of {result.size_mm:.3g} mm.", ""]
        parts += [part + "\n" for part in (_trouble(result), check.note) if part]
        headers = ["mode", "printed Hz", "expected Hz", "got Hz", "%", "cents", "verdict"]
        parts += [_line(headers), _line(["---", *["---:"] * 5, "---"])]
        parts += [_line(_cells(outcome)) for outcome in result.outcomes]
        parts.append("")
    return "\n".join(parts)


def _line(cells: Sequence[str]) -> str:
    return "| " + " | ".join(cells) + " |"


def _trouble(result: Result) -> str:
    return f"Could not be solved: {result.trouble}." if result.trouble else ""


def _cells(outcome: Outcome) -> tuple[str, ...]:
    """Return mode, printed, expected, got, %, cents, verdict."""
    return (
        outcome.expected.label,
        _hz(outcome.printed_hz),
        _hz(outcome.expected_hz),
        _hz(outcome.got_hz) or "no such mode",
        _signed(outcome.percent, 3),
        _signed(outcome.cents, 2),
        outcome.verdict.value,
    )


def _hz(value: float | None) -> str:
    """Return six digits, enough to see the tightest tolerance."""
    return "" if value is None else f"{value:#.6g}".rstrip(".")


def _signed(value: float | None, digits: int) -> str:
    return "" if value is None else f"{round(value, digits) + 0.0:+.{digits}f}"


def _document(result: Result) -> dict[str, Any]:
    check = result.check
    return {
        "title": check.title,
        "source": check.source,
        "basis": check.basis.value,
        "decides": check.decides,
        "tolerance_percent": check.tolerance,
        "measure": check.measure,
        "hz_per_measure": check.unit,
        "note": check.note,
        "case": dict(check.document),
        "unknowns": result.unknowns,
        "size_mm": result.size_mm,
        "seconds": result.seconds,
        "trouble": result.trouble,
        "passed": not result.failed,
        "values": [
            {
                "mode": outcome.expected.label,
                "expected": outcome.expected.value,
                "printed": outcome.expected.printed,
                "expected_hz": outcome.expected_hz,
                "printed_hz": outcome.printed_hz,
                "got_hz": outcome.got_hz,
                "mesh_error_cents": outcome.mesh_error_cents,
                "deviation_percent": outcome.percent,
                "deviation_cents": outcome.cents,
                "deviation_from_printed_percent": outcome.printed_percent,
                "verdict": outcome.verdict.value,
            }
            for outcome in result.outcomes
        ],
    }
