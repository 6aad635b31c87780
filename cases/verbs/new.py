"""``modewright new``: a commented case of a family that runs as it is."""

from __future__ import annotations

import json
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from ...geometry.dimension import Dimension, Sort
from ...geometry.errors import InputError
from ...geometry.shape import Family
from ..answer import Answer
from ..body import IMPORTS
from ..outlet import check_file, write_text
from .shapes import allowed_words, default_words, find_family

#: Faces that parts are commonly clamped at; a family with none of them hangs free.
_CLAMPED = ("root", "stem_end", "base_back")


def answer_new(family: str, out: Path | None) -> Answer:
    """Return (and with `out` write) a commented case of a family.

    Raises
    ------
    InputError
        If there is no such family, or the file is already there or cannot be written.
    """
    text = new_case(find_family(family))
    document = {
        "format": "modewright-case",
        "version": 1,
        "family": family,
        "case": tomllib.loads(text),
        "text": text,
        "file": None if out is None else str(out),
    }
    warnings = tuple(
        f"the case needs a file beside it: put yours in place of {name!r}"
        for name in _files(find_family(family))
    )
    if out is None:
        return Answer(document=document, text=text, warnings=warnings)
    check_file(out)
    if out.exists():
        raise InputError("is there already and is left as it is", key="--out", value=str(out))
    write_text(out, text)
    return Answer(
        document=document,
        lines=(f"Written: {out}. Run: modewright modes {out}",),
        warnings=warnings,
    )


def _files(family: Family) -> list[str]:
    """Return the file names of a family's example: imported bodies need one."""
    sorts = (Sort.FILE, Sort.FILE_OR_POINTS)
    names = [d.name for d in family.dimensions if d.sort in sorts]
    return [v for k, v in family.example.items() if k in names and isinstance(v, str)]


def new_case(family: Family) -> str:
    """Return the text of a case file for a family: its example, every other key as a comment."""
    clamped = next((face for face in _CLAMPED if face in family.faces), None)
    return "".join((_head(family), _shape(family), _MATERIAL, _mount(clamped), _REST))


def _head(family: Family) -> str:
    return (
        f'title = "{family.name.replace("_", " ").capitalize()}"\n'
        "version = 1\n"
        "\n"
        "# Lengths in mm, masses in g, angles in degrees. Lines that start with # are not read.\n"
        f"\n[shape]                      # {family.text}\n"
    )


def _shape(family: Family) -> str:
    lines = [] if family.name in IMPORTS else [f'family = "{family.name}"']
    for dimension in family.dimensions:
        if dimension.name in family.example:
            line = f"{dimension.name} = {toml_value(family.example[dimension.name])}"
        else:
            line = f"# {dimension.name} = {_placeholder(dimension)}"
        lines.append(f"{line:<28} # {_words(dimension)}")
    lines.append(f"# faces: {', '.join(family.faces)}")
    return "\n".join(lines) + "\n"


def _placeholder(dimension: Dimension) -> str:
    return "…" if dimension.default is None else toml_value(dimension.default)


def _words(dimension: Dimension) -> str:
    parts = [dimension.text, dimension.unit if not dimension.choices else ""]
    parts.append(allowed_words(dimension))
    if dimension.default is not None:
        parts.append(f"default {default_words(dimension)}")
    elif dimension.optional:
        parts.append("optional")
    return "; ".join(part for part in parts if part)


_MATERIAL = """
[material]
name = "carbon steel"        # one of `modewright materials`
# youngs_modulus_gpa = 205   # any value here goes before the library's;
# density = 7850             # `modewright materials NAME` lists all keys
"""

_REST = """
# [[attached_mass]]          # solder, lead, a magnet: mass without stiffness
# at = [10.0, 0.0, 0.5]      # on the surface; or face = "tip" to spread it over a face
# radius = 1.5               # mm round that point
# grams = 0.4

[pitch]
a4_hz = 440.0                # notes are told against this
# reference_mode = "…"       # ratios are told against this mode; default the lowest

[surroundings]
temperature_c = 20.0

[solve]
modes = 12                   # and, or instead: up_to_hz = 5000
# size = 1.2                 # mm, size of the mesh's cells; default from the thinnest part
# accuracy_cents = 2.0       # or this: refine until no mode's mesh error is over it

# [[target]]                 # a wanted pitch: shown as cents off
# mode = "flatwise bending 1"
# note = "G3"                # with cents = 5 beside it; or hz = 196.0; or ratio = 2.5 with of = "…"

# [[measured]]               # a measured pitch: shown as cents off
# mode = "flatwise bending 1"
# hz = 195.4
"""


def _mount(clamped: str | None) -> str:
    if clamped is None:
        return """
# [mount]                    # absent: the part hangs free
# kind = "clamped"           # clamped | held with axes = ["z"] | sliding | springs | free
# faces = ["…"]              # names; or { plane = "x", at = "min" }, { near = [x, y, z] }, …
"""
    return f"""
[mount]                      # leave the table out for a part that hangs free
kind = "clamped"             # clamped | held with axes = ["z"] | sliding | springs | free
faces = ["{clamped}"]{"":<{max(1, 17 - len(clamped))}}# names; or {{ plane = "x", at = "min" }}, …
"""


def toml_value(value: Any) -> str:
    """Return a value as TOML holds it, on one line."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return json.dumps(value, ensure_ascii=False)
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f"{k} = {toml_value(v)}" for k, v in value.items()) + " }"
    if isinstance(value, list | tuple):
        return "[" + ", ".join(map(toml_value, value)) + "]"
    return repr(value)
