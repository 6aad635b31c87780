"""What is printed: answers on stdout, progress, warnings and errors on stderr.

The home of rich.
"""

from __future__ import annotations

import json
import sys
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from typing import Any

from rich import box
from rich.console import Console
from rich.status import Status
from rich.table import Table as Grid
from rich.text import Text

from ..geometry.errors import ModewrightError
from ..viz.table import Table
from .answer import Answer, error_document

#: Blanks between columns.
_GAP = 2


def give(answer: Answer, *, as_json: bool) -> None:
    """Print an answer: one JSON object, or tables and lines for people."""
    warn(answer.warnings)
    if as_json:
        _print_json(answer.document)
        return
    console = _stdout()
    if answer.text:
        sys.stdout.write(answer.text)
    if answer.heading:
        console.print(Text(answer.heading, style="bold"), soft_wrap=not console.is_terminal)
    for table in answer.tables:
        _print_table(console, table, answer.spare)
    for line in answer.lines:
        console.print(Text(line), soft_wrap=not console.is_terminal)
    sys.stdout.flush()


def complain(error: ModewrightError, *, as_json: bool) -> None:
    """Print an error: one sentence on stderr, or one JSON object on stdout."""
    if as_json:
        _print_json(error_document(error))
        return
    console = _stderr()
    console.print(
        Text.assemble(("error: ", "bold red"), str(error)), soft_wrap=not console.is_terminal
    )


def warn(sentences: Sequence[str]) -> None:
    """Print warnings on stderr, one a line."""
    console = _stderr()
    for sentence in sentences:
        console.print(
            Text.assemble(("note: ", "yellow"), sentence), soft_wrap=not console.is_terminal
        )


def _say(label: str, style: str, sentence: str) -> None:
    console = _stderr()
    # Only a terminal has a width to wrap at: in a log, one message is one line.
    console.print(Text.assemble((label, style), sentence), soft_wrap=not console.is_terminal)


class Watch:
    """Shows what is being done, on a terminal only; called with a few words."""

    def __init__(self, status: Status | None) -> None:
        self._status = status

    def __call__(self, doing: str) -> None:
        """Say what is being done now."""
        if self._status is not None:
            self._status.update(Text(doing))


@contextmanager
def watching() -> Iterator[Watch]:
    """Show progress on stderr while the block runs, if stderr is a terminal."""
    console = _stderr()
    if not console.is_terminal:
        yield Watch(None)
        return
    with console.status(Text("starting"), spinner="dots") as status:
        yield Watch(status)


def _stdout() -> Console:
    return Console(file=sys.stdout, highlight=False, markup=False, emoji=False)


def _stderr() -> Console:
    return Console(file=sys.stderr, highlight=False, markup=False, emoji=False)


def _print_json(document: Mapping[str, Any]) -> None:
    text = json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False)
    # Written as bytes: a terminal or pipe of another encoding must not break the JSON.
    buffer = getattr(sys.stdout, "buffer", None)
    if buffer is None:
        sys.stdout.write(text + "\n")
        return
    sys.stdout.flush()
    buffer.write(text.encode() + b"\n")
    buffer.flush()


def _print_table(console: Console, table: Table, spare: Sequence[str]) -> None:
    if not console.is_terminal:
        # A file or a pipe has no width: nothing is wrapped or left out.
        sys.stdout.write(f"{table}\n")
        return
    headers, dropped = _fitting(table, spare, console.width)
    numeric = dict(zip(table.headers, table.numeric, strict=False))
    grid = Grid(box=box.SIMPLE_HEAD, padding=(0, _GAP, 0, 0), pad_edge=False, show_edge=False)
    for header in headers:
        grid.add_column(
            Text(header),
            justify="right" if numeric.get(header) else "left",
            no_wrap=bool(numeric.get(header)) and header not in ("mode", "text"),
            overflow="fold",
        )
    places = [table.headers.index(header) for header in headers]
    for row in table.rows:
        grid.add_row(*(Text(row[place]) for place in places))
    console.print(grid)
    for note in table.notes:
        console.print(Text(note, style="dim"))
    if dropped:
        console.print(
            Text(
                f"No room here for: {', '.join(dropped)}. A wider terminal, --json or --out "
                "has them.",
                style="dim",
            )
        )


def _fitting(
    table: Table, spare: Sequence[str], width: int
) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Return the headers that fit the width, and those that had to go."""
    needs = {
        header: max([_header_width(header), *(len(row[i]) for row in table.rows)])
        for i, header in enumerate(table.headers)
    }
    kept = list(table.headers)
    dropped = []
    for header in spare:
        if sum(needs[h] + _GAP for h in kept) - _GAP <= width:
            break
        if header in kept:
            kept.remove(header)
            dropped.append(header)
    return tuple(kept), tuple(h for h in table.headers if h in dropped)


def _header_width(header: str) -> int:
    """Return the width a header needs: it may break between words."""
    return max(map(len, header.split()), default=0)
