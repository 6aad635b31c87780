"""All published checks, and those of the short run."""

from __future__ import annotations

from .bars import BARS
from .blocks import BLOCKS
from .plates import PLATES
from .record import Check

CHECKS: tuple[Check, ...] = (*BLOCKS, *BARS, *PLATES)


def chosen(*, full: bool) -> tuple[Check, ...]:
    """Return all checks, or those of the short run."""
    return tuple(check for check in CHECKS if full or check.quick)
