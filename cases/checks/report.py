"""Results of published checks as a table, one document and a page."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from ...viz.table import Table
from .run import Outcome, Result, Verdict

HEADERS = ("check", "source", "mode", "expected Hz", "got Hz", "%", "cents", "allowed %", "verdict")
_NUMERIC = (False, False, False, True, True, True, True, True, False)

#: Columns that a narrow terminal goes without, the first to go first.
SPARE = ("source", "allowed %", "cents", "got Hz")


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
    """Return one row for each value; title and source stand once."""
    rows = []
    for result in results:
        for i, outcome in enumerate(result.outcomes):
            head = ("", "") if i else (result.check.title, result.check.source)
            rows.append((*head, *_cells(result, outcome)))
    return Table(headers=HEADERS, rows=tuple(rows), numeric=_NUMERIC)


def remarks(results: Sequence[Result]) -> tuple[str, ...]:
    """Return what must be known beside the numbers, a sentence or two for each check."""
    lines = []
    for result in results:
        words = " ".join(part for part in (_trouble(result), result.check.note) if part)
        if words:
            lines.append(f"{result.check.title}: {words}")
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
        printed = any(outcome.printed_hz is not None for outcome in result.outcomes)
        headers = ["mode", "expected Hz", "got Hz", "%", "cents", "verdict"]
        if printed:
            headers[2:2] = ["printed Hz"]
        parts += [_line(headers), _line(["---"] + ["---:"] * (len(headers) - 2) + ["---"])]
        for outcome in result.outcomes:
            mode, expected, *rest = _cells(result, outcome)
            del rest[3]
            if printed:
                rest.insert(0, _hz(outcome.printed_hz))
            parts.append(_line([mode, expected, *rest]))
        parts.append("")
    return "\n".join(parts)


def _line(cells: Sequence[str]) -> str:
    return "| " + " | ".join(cells) + " |"


def _trouble(result: Result) -> str:
    return f"Could not be solved: {result.trouble}." if result.trouble else ""


def _cells(result: Result, outcome: Outcome) -> tuple[str, ...]:
    """Return mode, expected, got, %, cents, allowed, verdict."""
    return (
        outcome.expected.label,
        _hz(outcome.expected_hz),
        _hz(outcome.got_hz) or "no such mode",
        _signed(outcome.percent, 3),
        _signed(outcome.cents, 2),
        f"{result.check.tolerance:g}" if result.check.decides else "",
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
