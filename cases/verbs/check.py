"""``modewright check``: published values, solved again and compared."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

from ..answer import Answer
from ..outlet import check_folder, write_text


def answer_check(
    *,
    full: bool = False,
    out: Path | None = None,
    progress: Callable[[str], None] | None = None,
) -> Answer:
    """Run the published checks and, with `out`, write ``check.json`` and ``check.md`` there.

    The answer's code is 1 if a value fails.

    Raises
    ------
    InputError
        If the folder cannot be written.
    """
    if out is not None:
        check_folder(out)
    # The tables and the solver are loaded only now: a wrong folder is told at once.
    from ..checks import report, table
    from ..checks.run import run_checks

    results = run_checks(table.chosen(full=full), progress=progress)
    document = report.check_document(results, full=full)
    lines = [*report.remarks(results), report.summary(results)]
    if out is not None:
        text = json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False)
        write_text(out / "check.json", text + "\n")
        write_text(out / "check.md", report.check_page(results))
        lines.append(f"Written to {out}: check.json, check.md")
    return Answer(
        document=document,
        heading="Published checks" + ("" if full else ", the short run (--full has all)"),
        tables=(report.check_table(results),),
        lines=tuple(lines),
        spare=report.SPARE,
        code=0 if report.passed(results) else 1,
    )
