"""Notes and cents: equal temperament on an adjustable A4."""

from __future__ import annotations

import math
import re

from ...geometry.errors import InputError

_NAMES = ("C", "C#", "D", "D#", "E", "F", "F#", "G", "G#", "A", "A#", "B")
_LETTERS = {"C": 0, "D": 2, "E": 4, "F": 5, "G": 7, "A": 9, "B": 11}
_NOTE = re.compile(r"([A-Ga-g])([#b]?)(-?\d{1,2})")
_A4 = 9 + 12 * 4  # semitones of A4 above C0


def note_frequency(text: str, a4: float = 440.0, cents: float = 0.0) -> float:
    """Return the frequency of a note of twelve-tone equal temperament, Hz.

    f = a4 2^(n/12 + cents/1200), n semitones above A4. A4 = 440 Hz is the
    standard tuning frequency of ISO 16:1975; octaves count up at C and C4 is
    middle C (261.63 Hz).

    Parameters
    ----------
    text : str
        Letter, ``#`` or ``b`` or nothing, octave: ``G3``, ``F#5``, ``Bb2``.
    a4 : float, Hz
    cents : float
        Distance above the note.

    Raises
    ------
    InputError
        If `text` is no such note.
    """
    found = _NOTE.fullmatch(text.strip())
    if found is None:
        raise InputError(
            "is no note",
            value=text,
            allowed="a letter A to G, # or b, an octave, such as G3 or F#5; C4 is middle C",
        )
    letter, sign, octave = found.groups()
    semitone = _LETTERS[letter.upper()] + {"#": 1, "b": -1, "": 0}[sign] + 12 * int(octave)
    return a4 * 2.0 ** ((semitone - _A4) / 12.0 + cents / 1200.0)


def nearest_note(frequency: float, a4: float = 440.0) -> tuple[str, float]:
    """Return the nearest note of equal temperament and how far above it lies `frequency`.

    Parameters
    ----------
    frequency : float, Hz, over 0
    a4 : float, Hz

    Returns
    -------
    name : str
        With sharps: ``C#4``.
    cents : float
        From -50 to 50; positive is sharp.

    Raises
    ------
    InputError
        If a frequency is not over zero.
    """
    above = cents(frequency, a4) / 100.0
    semitone = math.floor(above + 0.5)
    octave, step = divmod(semitone + _A4, 12)
    return f"{_NAMES[step]}{octave}", 100.0 * (above - semitone)


def cents(frequency: float, reference: float) -> float:
    """Return the interval 1200 log2(frequency / reference); positive is sharp.

    Raises
    ------
    InputError
        If a frequency is not over zero.
    """
    for value in (frequency, reference):
        if not (value > 0.0 and math.isfinite(value)):
            raise InputError("frequencies must be over 0 Hz", value=value)
    return 1200.0 * math.log2(frequency / reference)
