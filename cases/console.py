"""What is printed: answers on stdout, progress, warnings and errors on stderr.

The home of rich.
"""

from __future__ import annotations

import json
import sys
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from textwrap import wrap
from typing import Any

from rich import box
from rich.console import Console
from rich.status import Status
from rich.table import Table as Grid
from rich.text import Text

from ..geometry.errors import ModewrightError
from ..viz.table import Table
from .answer import Answer, error_document

#: Blanks between columns; the box style sets one of them.
_GAP = 2


def give(answer: Answer, *, as_json: bool) -> None:
    """Print an answer: one JSON object, or tables and lines for people."""
    if as_json:
        _print_json(answer.document)
        warn(answer.warnings)
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
    warn(answer.warnings)


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

    def __init__(self, console: Console) -> None:
        self._console = console
        self._status: Status | None = None

    def __call__(self, doing: str) -> None:
        """Say what is being done now."""
        if not self._console.is_terminal:
            return
        if self._status is None:
            self._status = self._console.status(Text(doing))
            self._status.start()
        self._status.update(Text(doing))

    def stop(self) -> None:
        """Clear the line."""
        if self._status is not None:
            self._status.stop()


@contextmanager
def watching() -> Iterator[Watch]:
    """Show progress on stderr while the block runs, if stderr is a terminal."""
    watch = Watch(_stderr())
    try:
        yield watch
    finally:
        watch.stop()


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
    kept, dropped = _fitting(table, spare, console.width)
    blocks = [kept] if spare else _blocks(table, kept, console.width)
    for columns in blocks:
        console.print(_grid(table, columns))
    for note in table.notes:
        console.print(Text(note, style="dim"))
    if dropped:
        names = ", ".join(table.headers[i] for i in dropped)
        console.print(
            Text(f"No room here for: {names}. A wider terminal or --json has them.", style="dim")
        )


def _grid(table: Table, columns: Sequence[int]) -> Grid:
    grid = Grid(box=box.SIMPLE_HEAD, padding=(0, _GAP - 1, 0, 0), pad_edge=False, show_edge=False)
    needs = _needs(table)
    for i in columns:
        right = bool(table.numeric) and table.numeric[i]
        header = "\n".join(wrap(table.headers[i], needs[i])) if right else table.headers[i]
        grid.add_column(
            Text(header),
            justify="right" if right else "left",
            no_wrap=right,
            overflow="fold",
        )
    for row in table.rows:
        grid.add_row(*(Text(row[i]) for i in columns))
    return grid


def _needs(table: Table) -> list[int]:
    """Return the width each column needs; a header may break between words."""
    return [
        max([max(map(len, header.split()), default=0), *(len(row[i]) for row in table.rows)])
        for i, header in enumerate(table.headers)
    ]


def _fitting(table: Table, spare: Sequence[str], width: int) -> tuple[list[int], list[int]]:
    """Return the columns that fit the width, and those that had to go."""
    needs = _needs(table)
    kept, dropped = list(range(len(table.headers))), []
    for header in spare:
        if sum(needs[i] + _GAP for i in kept) - _GAP <= width:
            break
        for i in [i for i in kept if table.headers[i] == header]:
            kept.remove(i)
            dropped.append(i)
    return kept, sorted(dropped)


def _blocks(table: Table, columns: Sequence[int], width: int) -> list[list[int]]:
    """Return the columns in blocks that fit the width; each starts with those that name a row."""
    needs = _needs(table)
    right = [bool(table.numeric) and table.numeric[i] for i in columns]
    # The names of a row end with the last column of text.
    lead = max((k + 1 for k, flag in enumerate(right) if not flag), default=0)
    head, rest = list(columns[:lead]), list(columns[lead:])
    blocks: list[list[int]] = [list(head)]
    for i in rest:
        fits = sum(needs[k] + _GAP for k in (*blocks[-1], i)) - _GAP <= width
        if not fits and len(blocks[-1]) > len(head):
            blocks.append(list(head))
        blocks[-1].append(i)
    return blocks
