"""All shape families, by the name that the case file uses."""

from __future__ import annotations

from ..shape import Family
from . import bar, fork

FAMILIES: dict[str, Family] = {
    "bar": bar.FAMILY,
    "fork": fork.FAMILY,
}
