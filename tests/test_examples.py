"""Every example case is read, solved, and held to the frequencies it says it must show."""

from __future__ import annotations

import functools
from pathlib import Path

import numpy as np
import pytest
from modewright.cases import compare, read_case
from modewright.fem import solve
from modewright.geometry.families.table import FAMILIES

FOLDER = Path(__file__).parents[1] / "cases" / "examples"
EXAMPLES = sorted(path.name for path in FOLDER.iterdir() if path.is_dir())

#: Solved in the default run; the others take longer.
QUICK = (
    "deck_plate",
    "float_ball",
    "fog_disc",
    "frost_fork",
    "gauge_rod",
    "hour_bar",
    "leaf_gong",
    "pier_spar",
    "rattle_board",
)


@functools.cache
def solved(name):
    return solve(read_case(FOLDER / name / "case.toml"))


def held_to(name):
    modes = solved(name)
    found = compare(modes)
    assert found
    assert not [str(comparison) for comparison in found if not comparison.met]
    assert modes.solve_facts.missing_modes in (0, None)
    assert max(mode.residual for mode in modes.modes) < 1e-2


@pytest.mark.parametrize("name", EXAMPLES)
def test_an_example_says_what_it_must_show(name):
    case = read_case(FOLDER / name / "case.toml")
    assert case.expected
    for expected in case.expected:
        assert len(expected.source) > 20 or expected.source.startswith("regression")
        assert 0 < expected.tolerance_cents <= 30
    text = (FOLDER / name / "case.toml").read_text(encoding="utf-8")
    assert "invented" in text.split("title")[0]


def test_examples_cover_every_family():
    cases = [read_case(FOLDER / name / "case.toml") for name in EXAMPLES]
    assert {case.shape.family.name for case in cases} == set(FAMILIES)
    outside = [
        case
        for case in cases
        if not any(expected.source.startswith("regression") for expected in case.expected)
    ]
    assert len(outside) >= 6


@pytest.mark.parametrize("name", QUICK)
def test_a_quick_example_shows_what_it_must(name):
    held_to(name)


@pytest.mark.slow
@pytest.mark.parametrize("name", sorted(set(EXAMPLES) - set(QUICK)))
def test_a_longer_example_shows_what_it_must(name):
    held_to(name)


def test_a_ball_rings_in_fives():
    modes = solved("float_ball")
    assert modes.solve_facts.rigid_modes == 6
    hz = modes.frequencies
    # Torsional and spheroidal n = 2 have five modes each, 98 cents apart (Lamb 1882).
    assert np.ptp(1200 * np.log2(hz[:5])) < 1.5
    assert np.ptp(1200 * np.log2(hz[5:10])) < 1.5
    assert 1200 * np.log2(hz[5:10].mean() / hz[:5].mean()) == pytest.approx(97.6, abs=1)


def test_a_disc_rings_in_pairs():
    modes = solved("fog_disc")
    for d in (2, 3):
        a, b = (modes.modes[modes.names.index(f"disc ({d},0) {end}")] for end in "ab")
        assert 1200 * abs(np.log2(a.frequency_hz / b.frequency_hz)) < 0.5
        # The same disc turned by a quarter of the wave: equal masses.
        assert a.modal_mass_g == pytest.approx(b.modal_mass_g, rel=0.02)


@pytest.mark.slow
def test_a_ring_rings_in_pairs():
    modes = solved("harbour_ring")
    for n in (2, 3, 4):
        for kind in ("in-plane", "out-of-plane"):
            a, b = (modes.modes[modes.names.index(f"ring {n} {kind} {end}")] for end in "ab")
            assert a.pair == b.name
            assert 1200 * abs(np.log2(a.raw_hz / b.raw_hz)) < 0.2
