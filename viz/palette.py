"""The colours of all pictures: white ground, one blue from light to dark, one accent."""

from __future__ import annotations

import numpy as np

WHITE = "#ffffff"
INK = "#17212b"
GREY = "#66727e"
HAIR = "#d5dbe1"
REST = "#a3adb8"
ACCENT = "#e2571e"
STEEL = "#8fa3b8"

#: Light to dark in one hue, even steps in lightness: still to moving most.
_RAMP = ("#e6eef7", "#bcd3ea", "#8ab2da", "#5289c0", "#23609f", "#0e417c", "#06295a")

#: For lines that must be told apart; each also carries its name.
LINES = ("#23609f", "#e2571e", "#3c8d5a", "#8a5aa8", "#b08412", "#17212b", "#2b8ca3", "#b23a5c")


def rgb(colour: str) -> tuple[int, int, int]:
    """Return red, green and blue, 0 to 255, of a colour such as ``#23609f``."""
    return (int(colour[1:3], 16), int(colour[3:5], 16), int(colour[5:7], 16))


def motion_colours(count: int = 256) -> np.ndarray:
    """Return (count, 3) uint8: the colours from still to moving most."""
    stops = np.array([rgb(colour) for colour in _RAMP], dtype=float)
    at = np.linspace(0, len(stops) - 1, count)
    channels = [np.interp(at, np.arange(len(stops)), stops[:, k]) for k in range(3)]
    return np.rint(np.column_stack(channels)).astype(np.uint8)
