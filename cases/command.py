"""The command line. Home of cyclopts; heavy imports wait inside the commands."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Sequence
from importlib.metadata import version
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

from cyclopts import App, CycloptsError, Parameter, Token

from ..geometry.errors import InputError, ModewrightError, WorkError

if TYPE_CHECKING:
    from .answer import Answer

app = App(
    name="modewright",
    help="From a case file to the named, animated modes of a sounding metal part.",
    version=lambda: version("modewright"),
    help_format="plaintext",
    version_flags=["--version"],
    help_flags=["--help", "-h"],
    suppress_keyboard_interrupt=False,
)


def _whole(_hint: object, tokens: Sequence[Token]) -> int:
    """Return a whole number; the parser alone would cut the decimals off."""
    try:
        return int(tokens[0].value)
    except ValueError:
        raise ValueError(f"must be a whole number, got {tokens[0].value!r}") from None


Count = Annotated[int | None, Parameter(help="How many elastic modes.", converter=_whole)]
Json = Annotated[
    bool, Parameter(name="--json", negative="", help="Print the result as one JSON object.")
]
CaseFile = Annotated[Path, Parameter(help="The case file (TOML).")]


@app.command
def new(
    family: str,
    /,
    *,
    out: Annotated[Path | None, Parameter(help="Write it to this file.")] = None,
    json: Json = False,
) -> int:
    """Print a commented case that runs as it is.

    Parameters
    ----------
    family
        A shape family, see `modewright shapes`.
    """
    from .verbs.new import answer_new

    return _give(lambda _: answer_new(family, out), json)


@app.command
def shapes(family: str | None = None, /, *, json: Json = False) -> int:
    """List the shape families, or every dimension and face of one.

    Parameters
    ----------
    family
        A shape family.
    """
    from .verbs.shapes import answer_shapes

    return _give(lambda _: answer_shapes(family), json)


@app.command
def materials(name: str | None = None, /, *, json: Json = False) -> int:
    """List the materials, or every value of one and where it comes from.

    Parameters
    ----------
    name
        A material; quote names with blanks.
    """
    from .verbs.materials import answer_materials

    return _give(lambda _: answer_materials(name), json)


@app.command
def modes(
    case: CaseFile,
    /,
    *,
    out: Annotated[Path | None, Parameter(help="Write all results into this folder.")] = None,
    size: Annotated[float | None, Parameter(help="Size of the mesh's cells, mm.")] = None,
    accuracy_cents: Annotated[
        float | None,
        Parameter(help="Refine the mesh until no mode's mesh error is over this, cents."),
    ] = None,
    modes: Count = None,
    up_to_hz: Annotated[float | None, Parameter(help="All modes up to this, Hz.")] = None,
    pictures: Annotated[bool, Parameter(help="Draw the sheet and the animations.")] = True,
    prove: Annotated[
        bool,
        Parameter(negative="", help="Count the modes even where the direct solver cannot; slow."),
    ] = False,
    json: Json = False,
) -> int:
    """Find the natural frequencies and modes of a part, by name."""
    from .verbs.modes import answer_modes

    return _give(
        lambda progress: answer_modes(
            case,
            out=out,
            size=size,
            accuracy_cents=accuracy_cents,
            modes=modes,
            up_to_hz=up_to_hz,
            pictures=pictures,
            prove=prove,
            progress=progress,
        ),
        json,
    )


@app.command
def mesh(
    case: CaseFile,
    /,
    *,
    out: Annotated[Path, Parameter(help="The mesh file; its suffix picks the format.")],
    size: Annotated[float | None, Parameter(help="Size of the mesh's cells, mm.")] = None,
    json: Json = False,
) -> int:
    """Write the second-order mesh of a part, in any format that meshio writes."""
    from .verbs.mesh import answer_mesh

    return _give(lambda progress: answer_mesh(case, out=out, size=size, progress=progress), json)


@app.command
def sweep(
    case: CaseFile,
    /,
    *,
    vary: Annotated[
        str,
        Parameter(
            help="A dimension (thickness, tines.4.length) or a key of the case "
            "(material.youngs_modulus_gpa)."
        ),
    ],
    values: Annotated[str, Parameter(help="Two or more values: 1,2,3.", allow_leading_hyphen=True)],
    out: Annotated[Path | None, Parameter(help="Write the results into this folder.")] = None,
    size: Annotated[float | None, Parameter(help="Size of the mesh's cells, mm.")] = None,
    modes: Count = None,
    up_to_hz: Annotated[float | None, Parameter(help="All modes up to this, Hz.")] = None,
    json: Json = False,
) -> int:
    """Follow the modes of a part while one dimension changes."""
    from .verbs.sweep import answer_sweep

    return _give(
        lambda progress: answer_sweep(
            case,
            vary=vary,
            values=values,
            out=out,
            size=size,
            modes=modes,
            up_to_hz=up_to_hz,
            progress=progress,
        ),
        json,
    )


@app.command
def check(
    *,
    full: Annotated[
        bool, Parameter(negative="", help="All checks, not only those of the short run.")
    ] = False,
    out: Annotated[
        Path | None, Parameter(help="Write check.json and check.md into this folder.")
    ] = None,
    json: Json = False,
) -> int:
    """Solve parts whose frequencies are published and compare; ends 1 if one fails."""
    from .verbs.check import answer_check

    return _give(lambda progress: answer_check(full=full, out=out, progress=progress), json)


def main(tokens: Sequence[str] | None = None) -> int:
    """Run the command line and return its exit code.

    Parameters
    ----------
    tokens : sequence of str, optional
        Default: the arguments of the process.

    Returns
    -------
    int
        0 done, 2 the input is wrong, 1 it could not be done, or a check fails.
    """
    tokens = list(sys.argv[1:] if tokens is None else tokens)
    as_json = "--json" in tokens
    try:
        code = app(tokens, exit_on_error=False, print_error=False, result_action="return_value")
    except CycloptsError as error:
        return _complain(InputError(_sentence(error)), as_json)
    except ModewrightError as error:
        return _complain(error, as_json)
    except KeyboardInterrupt:
        return _complain(WorkError("stopped before it was done"), as_json)
    except MemoryError:
        return _complain(WorkError("not enough memory: try a larger size, or fewer modes"), as_json)
    except BrokenPipeError:
        # The reader of our output (head, less) has gone; nothing is wrong. What is left
        # in the buffer must not fail again when the interpreter flushes it at the end.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    return code if isinstance(code, int) else 0


def _give(work: Callable[[Callable[[str], None]], Answer], as_json: bool) -> int:
    from .console import give, watching

    with watching() as progress:
        answer = work(progress)
    give(answer, as_json=as_json)
    return answer.code


def _complain(error: ModewrightError, as_json: bool) -> int:
    from .console import complain

    complain(error, as_json=as_json)
    return 2 if isinstance(error, InputError) else 1


def _sentence(error: CycloptsError) -> str:
    """Return the parser's message as one sentence without its full stop."""
    error.verbose = False
    text = " ".join(str(error).split())
    return text[:1].lower() + text[1:].rstrip(".")
