"""The same case twice: two processes, one thread or two, the same numbers."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pytest

#: Relative difference of frequencies, and sine of the angle between shapes, allowed.
FREQUENCY, SHAPE = 1e-9, 1e-6

RUN = "import sys; from modewright.cases.command import main; sys.exit(main(sys.argv[1:]))"

#: A square rod, whose bending modes are pairs: their shapes may turn, their space may not.
ROD = """
title = "Gauge rod"
[shape]
family = "bar"
length = 50
width = 4
thickness = 4
[material]
name = "brass C360"
[solve]
modes = 6
size = 2
"""

#: A round plate with an off-centre hole, held at the edge.
DISC = """
title = "Sounding disc"
[shape]
family = "plate"
diameter = 60
thickness = 2.5
holes = [{ x = 12, y = 5, diameter = 8 }]
[material]
name = "carbon steel"
[mount]
kind = "clamped"
faces = ["edge"]
[[attached_mass]]
face = "hole_1"
grams = 0.5
[solve]
modes = 4
size = 6
"""


def run(text: str, folder: Path, counts: Sequence[int]) -> list[Path]:
    """Solve a case at once in processes of their own, each with so many threads."""
    case = folder / "case.toml"
    case.write_text(text)
    folders = [folder / f"run_{k}" for k in range(len(counts))]
    runs = [
        subprocess.Popen(
            [sys.executable, "-c", RUN, "modes", str(case), "--out", str(out), "--no-pictures"],
            env={**os.environ, "OMP_NUM_THREADS": str(count), "MKL_NUM_THREADS": str(count)},
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
        )
        for out, count in zip(folders, counts, strict=True)
    ]
    assert [process.wait(timeout=280) for process in runs] == [0] * len(runs)
    return folders


def timeless(folder: Path) -> dict[str, Any]:
    """Return modes.json without times and memory."""
    document = json.loads((folder / "modes.json").read_text())
    document["solve"].pop("seconds")
    document["solve"].pop("peak_mb")
    return document


def compare(a: Any, b: Any, place: str = "") -> None:
    """Hold two documents against each other: words alike, numbers to their tolerance."""
    if isinstance(a, dict):
        assert list(a) == list(b), place
        for key in a:
            compare(a[key], b[key], f"{place}.{key}")
    elif isinstance(a, list):
        assert len(a) == len(b), place
        for k, (x, y) in enumerate(zip(a, b, strict=True)):
            compare(x, y, f"{place}.{k}")
    elif isinstance(a, float) and isinstance(b, float):
        if place.endswith((".residual",)):
            # Rounding itself: it only has to be small.
            assert max(a, b) < 1e-3
        elif place.endswith(("_hz", ".ratio")):
            assert b == pytest.approx(a, rel=FREQUENCY), place
        else:
            assert b == pytest.approx(a, rel=1e-5, abs=1e-5), place
    else:
        assert a == b, place


def subspace_sines(one: Path, two: Path) -> list[float]:
    """Return the largest angle's sine between the shapes of each cluster of two results."""
    first, second = np.load(one / "modes.npz"), np.load(two / "modes.npz")
    np.testing.assert_array_equal(first["points"], second["points"])
    hertz = first["frequencies_hz"]
    cluster = np.concatenate([[0], np.cumsum(np.diff(hertz) > 3e-4 * hertz[:-1])])
    sines = []
    for number in np.unique(cluster):
        held = cluster == number
        u, v = (
            np.linalg.qr(shapes[held].reshape(held.sum(), -1).T)[0]
            for shapes in (first["shapes"], second["shapes"])
        )
        sines.append(float(np.linalg.norm(v - u @ (u.T @ v), 2)))
    return sines


@pytest.mark.parametrize(
    "text",
    [pytest.param(ROD, id="pairs"), pytest.param(DISC, id="clamped", marks=pytest.mark.slow)],
)
def test_two_processes_and_one_or_two_threads(text, tmp_path):
    folders = run(text, tmp_path, (1, 1, 2))
    first = timeless(folders[0])
    for folder in folders[1:]:
        compare(first, timeless(folder))
        sines = subspace_sines(folders[0], folder)
        assert max(sines) < SHAPE
    # With the same number of threads not even the last digit differs.
    assert timeless(folders[1]) == first


def test_a_difference_is_seen(tmp_path):
    """The comparison itself fails where a number moves."""
    document = {"modes": [{"raw_hz": 100.0, "name": "a", "residual": 1e-9}]}
    compare(document, {"modes": [{"raw_hz": 100.0 + 5e-8, "name": "a", "residual": 1e-12}]})
    with pytest.raises(AssertionError):
        compare(document, {"modes": [{"raw_hz": 100.0 + 5e-7, "name": "a", "residual": 1e-9}]})
    with pytest.raises(AssertionError):
        compare(document, {"modes": [{"raw_hz": 100.0, "name": "b", "residual": 1e-9}]})
