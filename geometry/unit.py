"""Units of length that files of other tools may be in."""

from __future__ import annotations

#: Millimetres in each unit, by the name used in case files.
UNITS: dict[str, float] = {
    "mm": 1.0,
    "cm": 10.0,
    "m": 1000.0,
    "in": 25.4,
    "ft": 304.8,
    "um": 1e-3,
}
