"""Drawn dimensions of every family: a part is solved with sane results, or refused."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Mapping
from typing import Any

import numpy as np
import pytest
from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st
from modewright.cases import build_case
from modewright.fem import solve
from modewright.fem.modal.modes import Modes
from modewright.geometry.errors import InputError
from modewright.geometry.families.table import FAMILIES

#: Shares, drawn evenly by ratio: the slenderest part is 50 times as long as it is thick.
SLENDER = 1 / 50

#: So many draws of each family, and most that may be refused.
DRAWS, REFUSED = 40, 0.3


def share(low: float, high: float) -> st.SearchStrategy[float]:
    """Return numbers between two, drawn evenly by ratio, to four digits."""
    between = st.floats(math.log(low), math.log(high), allow_nan=False)
    return between.map(lambda x: float(f"{math.exp(x):.4g}"))


LENGTH = share(8.0, 300.0)


@st.composite
def bars(draw: Any) -> dict[str, Any]:
    length = draw(LENGTH)
    if draw(st.booleans()):
        thick = length * draw(share(SLENDER, 1.0))
        d = {"length": length, "diameter": thick}
        return d | ({"diameter_tip": thick * draw(share(0.3, 2.0))} if draw(st.booleans()) else {})
    width = length * draw(share(SLENDER, 1.2))
    d = {"length": length, "width": width, "thickness": width * draw(share(SLENDER, 1.0))}
    if draw(st.booleans()):
        d["width_tip"] = width * draw(share(0.2, 3.0))
    if draw(st.booleans()):
        d["thickness_tip"] = d["thickness"] * draw(share(0.2, 3.0))
        d["flush"] = draw(st.sampled_from(("centred", "bottom")))
    return d


@st.composite
def stepped_bars(draw: Any) -> dict[str, Any]:
    length = draw(LENGTH)
    count = draw(st.integers(2, 5))
    thickness = length * draw(share(SLENDER, 0.3))
    rows = [
        {
            "length": length * draw(share(0.1, 1.0)),
            "width": length * draw(share(0.05, 0.4)),
            "thickness": thickness * draw(share(0.4, 2.5)),
        }
        for _ in range(count)
    ]
    return {"segments": rows, "flush": draw(st.sampled_from(("centred", "bottom")))}


@st.composite
def arched_bars(draw: Any) -> dict[str, Any]:
    length = draw(LENGTH)
    thickness = length * draw(share(SLENDER, 0.2))
    arch = length * draw(share(0.2, 0.95))
    d = {
        "length": length,
        "width": length * draw(share(0.05, 0.5)),
        "thickness": thickness,
        "arch_length": arch,
        "arch_depth": min(thickness * draw(share(0.05, 0.9)), 0.5 * arch),
        "arch_profile": draw(st.sampled_from(("parabola", "circle", "cosine"))),
    }
    if draw(st.booleans()):
        d["cord_diameter"] = thickness * draw(share(0.1, 0.4))
        d["cord_distance"] = (length - arch) / 2 * draw(share(0.3, 0.9))
    return d


@st.composite
def forks(draw: Any) -> dict[str, Any]:
    length = draw(LENGTH)
    width = length * draw(share(0.04, 0.5))
    prongs = draw(st.integers(2, 4))
    slot = length * draw(share(0.1, 0.9))
    d = {
        "length": length,
        "width": width,
        "thickness": width * draw(share(SLENDER, 1.0)),
        "slot_length": slot,
        "slot_width": width / (prongs - 1) * draw(share(0.03, 0.6)),
        "slot_end": draw(st.sampled_from(("round", "square"))),
        "prongs": prongs,
    }
    if draw(st.booleans()):
        d["prong_lengths"] = [slot * draw(share(0.5, 1.0)) for _ in range(prongs)]
    if draw(st.booleans()):
        d["width_tip"] = width * draw(share(0.7, 1.5))
    if draw(st.booleans()):
        d["thickness_tip"] = d["thickness"] * draw(share(0.3, 2.0))
    return d


@st.composite
def tuning_forks(draw: Any) -> dict[str, Any]:
    length = draw(LENGTH)
    thickness = length * draw(share(SLENDER, 0.2))
    width = length * draw(share(0.02, 0.3))
    gap = length * draw(share(0.02, 0.3))
    d = {"prong_length": length, "prong_thickness": thickness, "prong_width": width, "gap": gap}
    if draw(st.booleans()):
        d["base_radius"] = gap / 2 + thickness * draw(share(0.3, 4.0))
    d["stem_length"] = length * draw(share(0.1, 1.0))
    d["stem_diameter"] = min(width, gap / 2 + thickness) * draw(share(0.3, 0.8))
    return d


@st.composite
def plates(draw: Any) -> dict[str, Any]:
    length = draw(LENGTH)
    thickness = length * draw(share(SLENDER, 0.5))
    if draw(st.booleans()):
        d = {"diameter": length, "thickness": thickness}
        across = along = length / 2 / math.sqrt(2)
    else:
        width = length * draw(share(0.1, 1.0))
        d = {"length": length, "width": width, "thickness": min(thickness, width)}
        along, across = length / 2, width / 2
    count = draw(st.integers(0, 3))
    if count:
        # One hole in each of `count` strips of the plate, so that they keep apart.
        strip = 2 * along / count
        d["holes"] = [
            {
                "x": -along + (i + draw(share(0.3, 0.7))) * strip,
                "y": across * draw(st.floats(-0.5, 0.5)),
                "diameter": min(strip, across) * draw(share(0.05, 0.5)),
            }
            for i in range(count)
        ]
    return d


@st.composite
def rings(draw: Any) -> dict[str, Any]:
    diameter = draw(LENGTH)
    if draw(st.booleans()):
        return {
            "mean_diameter": diameter,
            "section_diameter": diameter * draw(share(SLENDER, 0.8)),
        }
    return {
        "mean_diameter": diameter,
        "width": diameter * draw(share(SLENDER, 0.9)),
        "thickness": diameter * draw(share(SLENDER, 1.0)),
    }


@st.composite
def tubes(draw: Any) -> dict[str, Any]:
    length = draw(LENGTH)
    outer = length * draw(share(SLENDER, 1.0))
    wall = outer * draw(share(SLENDER, 0.45))
    d = {"length": length, "outer_diameter": outer, "wall": wall}
    if draw(st.booleans()):
        hole = (outer - 2 * wall) * draw(share(0.1, 0.8))
        d["holes"] = [{"distance": length * draw(share(0.1, 0.9)), "diameter": hole}]
    return d


@st.composite
def revolved(draw: Any) -> dict[str, Any]:
    radius = draw(LENGTH) / 2
    if draw(st.booleans()):
        # A closed section: a slanted four-cornered ring.
        inner = radius * draw(share(0.1, 0.9))
        width, height = radius * draw(share(0.05, 0.5)), radius * draw(share(0.05, 2.0))
        lean = width * draw(st.floats(-0.5, 0.5))
        profile = [[inner, 0.0], [inner + width, 0.0], [inner + width + lean, height]]
        profile += [[inner + max(lean, 0.0), height], [inner, 0.0]]
        return {"profile": profile, "curve": "straight"}
    # A bell: from the crown on the axis out and down to the lip.
    height = radius * draw(share(0.3, 2.0))
    shoulder, waist = draw(share(0.4, 0.7)), draw(share(0.7, 0.9))
    profile = [
        [0.0, height],
        [radius * shoulder, height * draw(share(0.75, 0.95))],
        [radius * waist, height * draw(share(0.3, 0.5))],
        [radius, 0.0],
    ]
    wall = radius * draw(share(SLENDER, 0.15))
    walls = [wall, wall, wall, wall * draw(share(0.7, 2.0))]
    return {
        "profile": profile,
        "curve": draw(st.sampled_from(("spline", "straight"))),
        "wall": walls if draw(st.booleans()) else wall,
    }


@st.composite
def combs(draw: Any) -> dict[str, Any]:
    length = draw(LENGTH)
    base = length * draw(share(SLENDER, 0.3))
    count = draw(st.integers(2, 4))
    rows = [
        {
            "length": length * draw(share(0.2, 1.0)),
            "width": length * draw(share(0.02, 0.2)),
            "thickness": base * draw(share(0.05, 1.0)),
            "gap": length * draw(share(0.01, 0.1)),
        }
        for _ in range(count)
    ]
    row = sum(r["width"] for r in rows) + sum(r["gap"] for r in rows[1:])
    return {
        "base_length": length * draw(share(0.1, 1.0)),
        "base_width": 1.0001 * row * draw(share(1.0, 1.5)) + 1e-3,
        "base_thickness": base,
        "tines": rows,
    }


@st.composite
def outlines(draw: Any) -> dict[str, Any]:
    """A star-shaped polygon, with or without a square hole."""
    size = draw(LENGTH)
    count = draw(st.integers(3, 12))
    turns = [(k + draw(st.floats(0.0, 0.6))) * 2 * math.pi / count for k in range(count)]
    radii = [size / 2 * draw(share(0.4, 1.0)) for _ in range(count)]
    corners = [[r * math.cos(t), r * math.sin(t)] for r, t in zip(radii, turns, strict=True)]
    d: dict[str, Any] = {"outline": corners, "thickness": size * draw(share(SLENDER, 0.5))}
    if draw(st.booleans()):
        a = size * draw(share(0.005, 0.03))
        d["holes"] = [[[-a, -a], [a, -a], [a, a], [-a, a]]]
    return d


DRAWN = {
    "bar": bars(),
    "stepped_bar": stepped_bars(),
    "arched_bar": arched_bars(),
    "fork": forks(),
    "tuning_fork": tuning_forks(),
    "plate": plates(),
    "ring": rings(),
    "tube": tubes(),
    "revolved": revolved(),
    "comb": combs(),
    "outline": outlines(),
}


def drawn(examples: int) -> Any:
    """Return settings under which hypothesis draws the same examples on every run."""
    return settings(
        max_examples=examples,
        derandomize=True,
        database=None,
        deadline=None,
        phases=[Phase.generate],
        suppress_health_check=list(HealthCheck),
    )


def case_of(family: str, dimensions: Mapping[str, Any], size: float | None = None) -> Any:
    return build_case(
        {
            "title": "Drawn part",
            "shape": dict(dimensions) if family == "outline" else {"family": family, **dimensions},
            "material": {"name": "carbon steel"},
            "solve": {"modes": 3} | ({} if size is None else {"size": size}),
        }
    )


def coarse(case: Any) -> float:
    """Return an element size that is quick: as thick as the thinnest wall, 12 to the length."""
    points = [
        value for value in _lengths(case.shape.dimensions) if isinstance(value, float) and value > 0
    ]
    return float(f"{max(case.shape.solid().thin, max(points) / 12):.3g}")


def _lengths(value: Any) -> Any:
    if isinstance(value, Mapping):
        value = list(value.values())
    if isinstance(value, list | tuple):
        for item in value:
            yield from _lengths(item)
    else:
        yield value


def check_sane(modes: Modes) -> None:
    case = modes.case
    solid = case.shape.solid()
    facts = modes.mesh_facts
    if solid.volume is not None:
        assert facts.volume_mm3 == pytest.approx(solid.volume, rel=1e-6)
    wanted = case.material.density * facts.volume_mm3 * 1e-6
    assert facts.mass_g == pytest.approx(wanted, rel=2e-3)
    assert modes.solve_facts.rigid_modes == 6
    assert modes.solve_facts.missing_modes in (0, None)
    raw = np.array([mode.raw_hz for mode in modes.modes])
    best = np.array([mode.frequency_hz for mode in modes.modes])
    assert len(raw) >= 3
    assert np.isfinite(raw).all()
    assert (best > 0).all()
    assert (np.diff(best) >= 0).all()
    errors = np.array([mode.mesh_error_cents for mode in modes.modes], float)
    assert np.isfinite(errors).all()
    assert (errors >= 0).all()
    names = [mode.name for mode in modes.modes]
    assert len(set(names)) == len(names)


def solve_drawn(family: str, examples: int, *, default_size: bool) -> Counter[str]:
    """Solve drawn parts; return how many were refused."""
    count: Counter[str] = Counter()
    sentences: list[str] = []

    @drawn(examples)
    @given(dimensions=DRAWN[family])
    def run(dimensions: dict[str, Any]) -> None:
        count["drawn"] += 1
        try:
            case = case_of(family, dimensions)
            if not default_size:
                case = case_of(family, dimensions, coarse(case))
            modes = solve(case)
        except InputError as error:
            count["refused"] += 1
            sentences.append(str(error))
            return
        check_sane(modes)

    run()
    assert not any("\n" in sentence for sentence in sentences)
    return count


def test_every_parametric_family_is_drawn():
    assert set(DRAWN) == set(FAMILIES) - {"solid", "mesh"}


@pytest.mark.parametrize("family", DRAWN)
def test_few_drawn_dimensions_are_refused(family):
    count: Counter[str] = Counter()

    @drawn(DRAWS)
    @given(dimensions=DRAWN[family])
    def run(dimensions: dict[str, Any]) -> None:
        count["drawn"] += 1
        try:
            solid = case_of(family, dimensions).shape.solid()
        except InputError:
            count["refused"] += 1
            return
        assert solid.volume is None or solid.volume > 0

    run()
    assert count["drawn"] >= DRAWS // 2
    assert count["refused"] <= REFUSED * count["drawn"]


@pytest.mark.parametrize("family", DRAWN)
def test_a_drawn_part_is_solved_or_refused(family):
    count = solve_drawn(family, 1, default_size=False)
    assert count["drawn"] == 1


@pytest.mark.slow
@pytest.mark.timeout(3600)
@pytest.mark.parametrize("family", DRAWN)
def test_many_drawn_parts_are_solved_or_refused(family):
    count = solve_drawn(family, 40, default_size=False)
    assert count["refused"] <= REFUSED * count["drawn"]


@pytest.mark.slow
@pytest.mark.timeout(3600)
@pytest.mark.parametrize("family", DRAWN)
def test_drawn_parts_on_meshes_of_the_default_size(family):
    count = solve_drawn(family, 12, default_size=True)
    assert count["refused"] <= REFUSED * count["drawn"]
