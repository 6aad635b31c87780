import pytest
from hypothesis import given
from hypothesis import strategies as st
from modewright.fem.modal.pitch import cents, nearest_note, note_frequency
from modewright.geometry.errors import InputError


@pytest.mark.parametrize(
    ("note", "hz"),
    [
        ("A4", 440.0),  # ISO 16:1975
        ("C4", 261.6256),  # MIDI note 60
        ("C-1", 8.1758),  # MIDI note 0
        ("G9", 12543.854),  # MIDI note 127
    ],
)
def test_published_frequencies(note, hz):
    assert note_frequency(note) == pytest.approx(hz, rel=1e-6)


def test_accidentals_cross_the_octave():
    assert note_frequency("Cb4") == pytest.approx(note_frequency("B3"), rel=1e-14)
    assert note_frequency("B#3") == pytest.approx(note_frequency("C4"), rel=1e-14)
    assert note_frequency("Bb2") == pytest.approx(note_frequency("A#2"), rel=1e-14)


def test_cents_and_other_tuning():
    assert note_frequency("A4", a4=442.0, cents=5) == pytest.approx(442 * 2 ** (5 / 1200))
    assert cents(880.0, 440.0) == pytest.approx(1200.0)
    assert cents(1.001, 1.0) == pytest.approx(1.73, abs=0.01)
    assert nearest_note(445.0, a4=442.0)[1] == pytest.approx(cents(445, 442))


@given(st.floats(1.0, 2e5), st.floats(400.0, 480.0))
def test_a_note_and_its_cents_give_the_frequency_back(hz, a4):
    name, off = nearest_note(hz, a4)
    assert -50.0 <= off <= 50.0
    assert note_frequency(name, a4, off) == pytest.approx(hz, rel=1e-12)


@pytest.mark.parametrize("text", ["H4", "A", "", "A#", "Ab#4", "440", "A4.5", "c 4"])
def test_other_words_are_refused(text):
    with pytest.raises(InputError, match="is no note"):
        note_frequency(text)


@pytest.mark.parametrize("hz", [0.0, -3.0, float("nan"), float("inf")])
def test_frequencies_must_be_positive(hz):
    with pytest.raises(InputError, match="over 0 Hz"):
        nearest_note(hz)
