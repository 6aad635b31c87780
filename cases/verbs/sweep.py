"""``modewright sweep``: frequencies against one value, each mode followed by its shape."""

from __future__ import annotations

import csv
import io
import json
import math
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from ...fem.modal.case import Case
from ...geometry.errors import InputError
from ...viz.table import Table
from ..answer import Answer
from ..outlet import beside, check_folder, write_text
from ..reader import build_case
from ..source import read_toml
from ..vary import key_unit, varied
from .modes import with_settings

if TYPE_CHECKING:
    from ...fem.study.sweep import Sweep, Track

Value = float | str

#: More solves than anyone waits for.
_MOST = 200


def answer_sweep(
    path: Path,
    *,
    vary: str,
    values: str,
    out: Path | None = None,
    size: float | None = None,
    modes: int | None = None,
    up_to_hz: float | None = None,
    progress: Callable[[str], None] | None = None,
) -> Answer:
    """Solve a case for each value and follow its modes; with `out`, write table and picture.

    Raises
    ------
    InputError
        For a mistake in the case, the key or a value.
    WorkError
        If a part could not be meshed or solved.
    """
    if out is not None:
        check_folder(out)
    wanted = read_values(values)
    # Every case is built before the first is solved: a wrong value is told at once.
    base, varied_cases = sweep_cases(path, vary, wanted)
    settings = {"size": size, "modes": modes, "up_to_hz": up_to_hz}
    base = with_settings(base, **settings)
    cases = [with_settings(case, **settings) for case in varied_cases]
    from ...fem.study.sweep import sweep

    unit = key_unit(base, vary)
    result = sweep(vary, wanted, cases, unit=unit, progress=progress)
    document = sweep_document(result, base)
    lines = () if out is None else (_write(result, document, out),)
    return Answer(
        document=document,
        heading=f"{base.title}: {_title(result)}, frequencies in Hz",
        tables=(sweep_table(result),),
        lines=lines,
    )


def read_values(text: str) -> tuple[Value, ...]:
    """Return the values of a list parted by commas: numbers ascending, words as they stand.

    Raises
    ------
    InputError
        If there are fewer than two, one stands there twice, or words stand among numbers.
    """
    items = [item.strip() for item in text.split(",")]
    if any(not item for item in items):
        raise InputError(
            "has an empty place between commas", key="--values", value=text, allowed="1,2,3"
        )
    numbers = [_number(item) for item in items]
    if all(number is None for number in numbers):
        found: list[Value] = list(items)
    else:
        found = []
        for item, number in zip(items, numbers, strict=True):
            if number is None:
                raise InputError(
                    "is not a number", key="--values", value=item, allowed="numbers, as 1,2,3"
                )
            found.append(number)
        # Neighbours in value are neighbours in shape, whatever the order asked for.
        found.sort(key=float)
    for i, value in enumerate(found):
        if value in found[:i]:
            raise InputError("the same value stands there twice", key="--values", value=value)
    if not 2 <= len(found) <= _MOST:
        raise InputError(
            "has the wrong number of values",
            key="--values",
            value=text,
            allowed=f"2 to {_MOST} values, as 1,2,3",
        )
    return tuple(found)


def sweep_cases(path: Path, key: str, values: tuple[Value, ...]) -> tuple[Case, list[Case]]:
    """Return the case of a file, and the same with each value in turn in place of its own.

    Raises
    ------
    InputError
        For a mistake in the file, the key or a value.
    """
    document = read_toml(path)
    base = build_case(document, file=path)
    cases = []
    for value in values:
        try:
            case = build_case(varied(document, base, key, value), folder=path.absolute().parent)
        except InputError as error:
            if error.key == "--vary":
                raise
            raise InputError(
                f"{key} = {value} cannot be: {error.sentence}", key="--values", value=None
            ) from None
        # Targets name modes of the part as it is, which need not be there at every value.
        cases.append(replace(case, targets=(), measured=(), pitch=_no_reference(case)))
    return base, cases


def sweep_document(result: Sweep, base: Case) -> dict[str, Any]:
    """Return a sweep as programs read it; `base` is the case as its file has it."""
    return {
        "format": "modewright-sweep",
        "version": 1,
        "case": dict(base.document),
        "vary": result.key,
        "unit": result.unit,
        "values": list(result.values),
        "modes": [
            {
                "name": track.name,
                "names": list(track.names),
                "frequencies_hz": list(track.frequencies),
                "cents_first_to_last": _rise(track),
            }
            for track in result.tracks
        ],
    }


def sweep_table(result: Sweep) -> Table:
    """Return the table of a sweep: one row a mode, one column a value."""
    rows = tuple(
        (
            str(i),
            track.name,
            *("" if hz is None else _hertz(hz) for hz in track.frequencies),
            "" if (rise := _rise(track)) is None else f"{rise:+.1f}",
        )
        for i, track in enumerate(result.tracks, 1)
    )
    headers = ("#", "mode", *(_text(value) for value in result.values), "cents, first to last")
    notes = tuple(note for track in result.tracks if (note := _renamed(result, track)))
    return Table(
        headers=headers,
        rows=rows,
        notes=notes,
        numeric=(True, False, *[True] * (len(headers) - 2)),
    )


def sweep_csv(result: Sweep) -> str:
    """Return a sweep as CSV: one row a value, one column a mode, Hz."""
    buffer = io.StringIO()
    writer = csv.writer(buffer, lineterminator="\n")
    key = f"{result.key} ({result.unit})" if result.unit else result.key
    writer.writerow([key, *(f"{track.name} (Hz)" for track in result.tracks)])
    for i, value in enumerate(result.values):
        row = [track.frequencies[i] for track in result.tracks]
        writer.writerow([value, *("" if hz is None else repr(hz) for hz in row)])
    return buffer.getvalue()


def _write(result: Sweep, document: dict[str, Any], out: Path) -> str:
    from ...viz.chart import sweep_chart

    text = json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False) + "\n"
    write_text(out / "sweep.csv", sweep_csv(result))
    write_text(out / "sweep.json", text)
    with beside(out / "sweep.png") as temporary:
        sweep_chart(result, temporary)
    return f"Written to {out}: sweep.csv, sweep.json, sweep.png"


def _no_reference(case: Case):
    return replace(case.pitch, reference_mode=None)


def _number(text: str) -> float | None:
    try:
        number = float(text)
    except ValueError:
        return None
    if not math.isfinite(number):
        raise InputError("must be a finite number", key="--values", value=text)
    return int(number) if text.lstrip("+-").isdigit() else number


def _rise(track: Track) -> float | None:
    """Return the cents from the first to the last value; None where either is missing."""
    first, last = track.frequencies[0], track.frequencies[-1]
    return None if first is None or last is None else 1200.0 * math.log2(last / first)


def _renamed(result: Sweep, track: Track) -> str:
    """Return a sentence on where a mode's name changes, or an empty text."""
    others = [
        f"{name!r} at {_text(value)}"
        for value, name, before in zip(
            result.values[1:], track.names[1:], track.names[:-1], strict=True
        )
        if name is not None and before is not None and name != before
    ]
    return f"{track.name!r} is called {', '.join(others)}." if others else ""


def _title(result: Sweep) -> str:
    unit = f" {result.unit}" if result.unit else ""
    return f"{result.key} from {_text(result.values[0])} to {_text(result.values[-1])}{unit}"


def _hertz(hz: float) -> str:
    return f"{hz:.2f}" if hz < 1000.0 else f"{hz:.1f}"


def _text(value: Value) -> str:
    return value if isinstance(value, str) else f"{value:g}"
