"""The mode table: strings for people, and every number as CSV for programs."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, fields

from ..fem.modal.modes import SHARES, Mode, Modes
from .document import mode_document

#: Shares below this in every mode of a result get no column.
_SHARE_WORTH_A_COLUMN = 0.05

_PAIR_NOTE = "pair: the two frequencies are equal here; the real split comes from the part"
_MIXED_NOTE = "mixed: no one kind of motion has half of the kinetic energy"
_TRUST_NOTE = (
    "Not in these numbers: what the real part and its mount add. In bending, 1 % of thickness "
    "is 17 cents, 1 % of length 34, 1 % of modulus 9; a clamp that gives flattens all of them."
)
_NO_ESTIMATE_NOTE = (
    "The frequencies are those of the mesh, a little sharp; no mesh error is estimated."
)
_ESTIMATE_NOTE = "mesh cents: how sharp the mesh is, by estimate; it is taken off the Hz."
_COUNTED_NOTE = "No mode is missing up to the last one: they were counted by inertia."


@dataclass(frozen=True, kw_only=True, slots=True)
class Table:
    """A table ready to be shown: every cell is a string.

    Attributes
    ----------
    headers : (c,) column titles, units in them
    rows : rows of (c,) strings; what does not apply is empty
    notes : sentences that stand under the table
    numeric : (c,) bool
        Whether a column holds numbers, to be set flush right.
    """

    headers: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    notes: tuple[str, ...] = ()
    numeric: tuple[bool, ...] = ()

    def __str__(self) -> str:
        """Return the table as text of fixed width, notes below."""
        numeric = self.numeric or (False,) * len(self.headers)
        widths = [max(map(len, column)) for column in zip(self.headers, *self.rows, strict=True)]

        def line(cells: Sequence[str]) -> str:
            parts = [
                cell.rjust(width) if right else cell.ljust(width)
                for cell, width, right in zip(cells, widths, numeric, strict=True)
            ]
            return "  ".join(parts).rstrip()

        return "\n".join([line(self.headers), *map(line, self.rows), *self.notes])


@dataclass(frozen=True, kw_only=True, slots=True)
class _Column:
    """A title and how to write one mode's cell; "" is an empty cell."""

    header: str
    cell: Callable[[Mode], str]
    numeric: bool = True


def modes_table(modes: Modes) -> Table:
    """Return the table of a result, the columns a practitioner reads first.

    Columns that would be empty are left out. The warnings of the result are not
    in the notes.
    """
    columns = [c for c in _columns(modes) if any(c.cell(mode) for mode in modes.modes)]
    notes = []
    if any(mode.pair for mode in modes.modes):
        notes.append(_PAIR_NOTE)
    if any(mode.mixed for mode in modes.modes):
        notes.append(_MIXED_NOTE)
    estimated = any(mode.mesh_error_cents is not None for mode in modes.modes)
    notes.append(_ESTIMATE_NOTE if estimated else _NO_ESTIMATE_NOTE)
    if modes.solve_facts.missing_modes == 0:
        notes.append(_COUNTED_NOTE)
    notes.append(_TRUST_NOTE)
    return Table(
        headers=tuple(column.header for column in columns),
        rows=tuple(tuple(column.cell(mode) for column in columns) for mode in modes.modes),
        notes=tuple(notes),
        numeric=tuple(column.numeric for column in columns),
    )


def table_csv(table: Table) -> str:
    """Return the cells of a table as CSV text, without its notes."""
    return _csv([table.headers, *table.rows])


def modes_csv(modes: Modes) -> str:
    """Return every number of ``modes.json`` as CSV, one row a mode.

    The columns are the keys of a mode in ``modes.json``, which end in their
    unit; ``shares`` becomes one column for each kind of motion (0 to 1). Lists
    are numbers parted by blanks; what does not apply is empty.
    """
    names = [field.name for field in fields(Mode)]
    headers: list[str] = []
    for name in names:
        headers += [f"share {kind} (0-1)" for kind in SHARES] if name == "shares" else [name]
    rows = []
    for mode in modes.modes:
        document = mode_document(mode)
        row: list[object] = []
        for name in names:
            value = document[name]
            if name == "shares":
                row += ["" if value is None else value.get(kind, "") for kind in SHARES]
            elif isinstance(value, list):
                row.append(" ".join(map(repr, value)))
            else:
                row.append("" if value is None else value)
        rows.append(row)
    return _csv([headers, *rows])


def hertz(frequency: float) -> str:
    """Return a frequency with the digits a maker can use."""
    return f"{frequency:.3f}" if frequency < 10 else f"{frequency:.2f}"


def cents(value: float | None) -> str:
    """Return signed cents to a tenth, or "" for None; never "-0.0"."""
    if value is None or not math.isfinite(value):
        return ""
    return f"{round(value, 1) + 0.0:+.1f}"


def _columns(modes: Modes) -> Iterable[_Column]:
    yield _Column(header="#", cell=lambda m: str(m.index))
    yield _Column(header="mode", cell=_name, numeric=False)
    yield _Column(header="Hz", cell=lambda m: hertz(m.frequency_hz))
    yield _Column(header="mesh cents", cell=lambda m: cents(m.mesh_error_cents))
    yield _Column(header="note", cell=lambda m: m.note, numeric=False)
    yield _Column(header="cents", cell=lambda m: cents(m.cents_from_note))
    yield _Column(header="ratio", cell=lambda m: f"{m.ratio:.3f}")
    yield _Column(header="target Hz", cell=lambda m: _optional(m.target_hz, hertz))
    yield _Column(header="cents to target", cell=lambda m: cents(m.cents_to_target))
    yield _Column(header="measured Hz", cell=lambda m: _optional(m.measured_hz, hertz))
    yield _Column(header="cents to measured", cell=lambda m: cents(m.cents_to_measured))
    short = ("flat %", "edge %", "twist %", "axial %", "other %")
    for kind, header in zip(SHARES, short, strict=True):
        largest = max((m.shares.get(kind, 0.0) for m in modes.modes if m.shares), default=0.0)
        if largest >= _SHARE_WORTH_A_COLUMN:
            yield _Column(header=header, cell=lambda m, kind=kind: _share(m, kind))
    yield _Column(header="root %", cell=lambda m: _percent(m.root_share))
    yield _Column(header="mass g", cell=lambda m: f"{m.modal_mass_g:.3g}")
    yield _Column(header="Q", cell=lambda m: _optional(m.quality_factor, "{:.0f}".format))
    yield _Column(header="T60 s", cell=lambda m: _optional(m.t60_s, "{:.2f}".format))
    yield _Column(header="nearest, cents", cell=_nearest)
    yield _Column(header="theory Hz", cell=lambda m: _optional(m.theory_hz, hertz))
    yield _Column(header="cents to theory", cell=_theory_cents)


def _name(mode: Mode) -> str:
    marks = [mark for mark, holds in (("pair", mode.pair), ("mixed", mode.mixed)) if holds]
    return f"{mode.name} ({', '.join(marks)})" if marks else mode.name


def _share(mode: Mode, kind: str) -> str:
    return _percent(mode.shares.get(kind) if mode.shares else None)


def _percent(share: float | None) -> str:
    return "" if share is None else f"{100 * share:.0f}"


def _nearest(mode: Mode) -> str:
    """Return the distance to the nearest mode in cents, and which it is."""
    if mode.nearest_index is None or mode.nearest_gap_cents is None:
        return ""
    return f"{abs(mode.nearest_gap_cents):.0f} (#{mode.nearest_index})"


def _theory_cents(mode: Mode) -> str:
    if not mode.theory_hz:
        return ""
    return cents(1200 * math.log2(mode.frequency_hz / mode.theory_hz))


def _optional(value: float | None, text: Callable[[float], str]) -> str:
    return "" if value is None else text(value)


def _csv(rows: Iterable[Sequence[object]]) -> str:
    buffer = io.StringIO()
    csv.writer(buffer, lineterminator="\n").writerows(rows)
    return buffer.getvalue()
