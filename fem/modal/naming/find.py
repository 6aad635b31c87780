"""From a name a person wrote to one mode."""

from __future__ import annotations

import re
from collections.abc import Sequence

from ....geometry.errors import InputError
from ....geometry.words import nearest


def find_mode(name: str, names: Sequence[str]) -> int:
    """Return the index of the one mode a name means.

    Case and spacing do not matter. The exact name comes first; else a shorter
    one is taken where only one mode fits: each of its parts (between commas)
    must stand, whole words in a row, in a mode's name, in the same order.

    Parameters
    ----------
    name : as the user wrote it
    names : of all modes

    Raises
    ------
    InputError
        If no mode fits (with the nearest name) or several do (with all of them).
    """
    known = [_words(other) for other in names]
    wanted = _words(name)
    exact = [i for i, words in enumerate(known) if words == wanted]
    if len(exact) == 1:
        return exact[0]
    parts = [part for part in _parts(name) if part]
    fitting = [i for i, words in enumerate(known) if parts and _fits(parts, words)]
    if len(fitting) == 1:
        return fitting[0]
    if fitting:
        raise InputError(
            "more than one mode has that name; write more of it",
            value=name,
            allowed=", or ".join(repr(names[i]) for i in fitting),
        )
    like = nearest(" ".join(wanted), [" ".join(words) for words in known])
    hint = ""
    if like is not None:
        hint = f"; the nearest is {names[[' '.join(w) for w in known].index(like)]!r}"
    raise InputError(
        f"no mode has that name{hint}",
        value=name,
        allowed=", or ".join(repr(other) for other in names) or "there are no modes",
    )


def _words(name: str) -> list[str]:
    """Return the words of a name; a comma between brackets belongs to its word."""
    return [word for part in _parts(name) for word in part]


def _parts(name: str) -> list[list[str]]:
    """Return the words of each part between the commas outside brackets."""
    tight = re.sub(r"\s*([(),])\s*(?=[^()]*\))", r"\1", name.lower())
    tight = re.sub(r"(?<=\S)\s+\)", ")", tight)
    tight = re.sub(r"\s*([+-])\s*\(", r"\1(", tight)
    tight = re.sub(r"(?<=[a-z])\(", " (", tight)
    return [part.split() for part in re.split(r",(?![^()]*\))", tight)]


def _fits(parts: list[list[str]], words: list[str]) -> bool:
    start = 0
    for part in parts:
        ends = range(start, len(words) - len(part) + 1)
        place = next((i for i in ends if words[i : i + len(part)] == part), None)
        if place is None:
            return False
        start = place + len(part)
    return True
