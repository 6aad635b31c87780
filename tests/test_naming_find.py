"""Names that people write, and modes that beat."""

from __future__ import annotations

import pytest
from modewright.fem.modal.naming.beats import beat_warnings
from modewright.fem.modal.naming.find import find_mode
from modewright.geometry.errors import InputError

NAMES = (
    "flatwise bending 1, prongs together",
    "flatwise bending 1, prongs opposed",
    "flatwise bending 2, prongs together",
    "torsion 1, prongs together",
    "bending 1 a",
    "bending 1 b",
    "plate (2,0)",
    "plate (2,0)+(0,2)",
    "shell (2,1) a",
    "shell (2,1) a #2",
    "flatwise bending 1, prongs + - +",
    "flatwise bending 1, tine 4",
    "flatwise bending 1, tine 12",
    "ring 2 in-plane a",
)


@pytest.mark.parametrize("index", range(len(NAMES)))
def test_every_name_finds_its_own_mode(index):
    assert find_mode(NAMES[index], NAMES) == index
    assert find_mode(f"  {NAMES[index].upper()} ", NAMES) == index


@pytest.mark.parametrize(
    ("short", "name"),
    [
        ("torsion 1", "torsion 1, prongs together"),
        ("torsion", "torsion 1, prongs together"),
        ("bending 2", "flatwise bending 2, prongs together"),
        ("flatwise bending, opposed", "flatwise bending 1, prongs opposed"),
        ("tine 4", "flatwise bending 1, tine 4"),
        ("in-plane", "ring 2 in-plane a"),
        ("plate (2, 0)", "plate (2,0)"),
        ("plate(2,0) + (0,2)", "plate (2,0)+(0,2)"),
        ("bending 1,b", "bending 1 b"),
    ],
)
def test_a_shorter_name_is_taken_where_one_mode_fits(short, name):
    assert NAMES[find_mode(short, NAMES)] == name


def test_a_name_that_fits_several_modes_is_refused_with_all_of_them():
    with pytest.raises(InputError) as caught:
        find_mode("flatwise bending 1", NAMES)
    message = caught.value.sentence
    assert "more than one" in message
    for name in NAMES[:2]:
        assert name in message
    assert "flatwise bending 2" not in message


def test_an_unknown_name_is_refused_with_the_nearest():
    with pytest.raises(InputError, match="the nearest is 'torsion 1, prongs together'"):
        find_mode("torsion 1, prongs togehter", NAMES)
    with pytest.raises(InputError, match="no mode has that name"):
        find_mode("", NAMES)
    with pytest.raises(InputError, match="there are no modes"):
        find_mode("torsion 1", ())


def test_a_number_is_never_part_of_another():
    with pytest.raises(InputError):
        find_mode("tine 1", NAMES)


# One maker's rule for tuned bars: 6 Hz below 1 kHz, 15 Hz below
# 2 kHz, 30 Hz above.
@pytest.mark.parametrize(
    ("low", "high", "warned"),
    [
        (500, 505.9, True),
        (500, 506.1, False),
        (1500, 1514, True),
        (1500, 1516, False),
        (5000, 5029, True),
        (5000, 5031, False),
    ],
)
def test_neighbours_are_told_when_they_beat(low, high, warned):
    names = ("flatwise bending 2", "torsion 1")
    found = beat_warnings([low, high], names)
    assert len(found) == warned
    for sentence in found:
        assert all(f"'{name}'" in sentence for name in names)
        assert f"{high - low:.1f} Hz" in sentence
        assert "width" in sentence


def test_pairs_do_not_beat_but_their_neighbours_do():
    names = ("disc (2,0) a", "disc (2,0) b", "disc (0,1)", "disc (3,0) a", "disc (3,0) b")
    found = beat_warnings([500.0, 500.1, 503.0, 2000.0, 2002.0], names)
    assert len(found) == 1
    assert "'disc (2,0) b'" in found[0]
    assert "'disc (0,1)'" in found[0]
    # A real split of one mode's two directions is a warble, and told.
    assert beat_warnings([500.0, 503.0], names[:2])
