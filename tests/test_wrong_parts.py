"""Parts that cannot be: impossible geometry, absurd numbers, places where nothing is.

Each goes through the command line and ends in exit code 2 with one sentence, soon.
"""

from __future__ import annotations

import math
import time
from pathlib import Path

import pytest
from modewright.cases.command import main

#: s; the machine of the tests may be busy.
SOON = 30.0

#: Head of every case.
HEAD = 'title = "Wreck"\n'
STEEL = '[material]\nname = "carbon steel"\n'
COARSE = "[solve]\nmodes = 2\nsize = 8\n"
BAR = '[shape]\nfamily = "bar"\nlength = 60\nwidth = 10\nthickness = 4\n'


def shape(family: str, **dimensions: object) -> str:
    rows = "".join(f"{key} = {value}\n" for key, value in dimensions.items())
    return f'[shape]\nfamily = "{family}"\n{rows}'


def outline(points: object, holes: object = (), thickness: float = 2.0) -> str:
    text = f"[shape]\noutline = {_lists(points)}\nthickness = {thickness!r}\n"
    return text + (f"holes = {_lists(holes)}\n" if holes else "")


def _lists(value: object) -> str:
    if isinstance(value, list | tuple):
        return "[" + ", ".join(_lists(item) for item in value) + "]"
    return repr(value)


SQUARE = [[0.0, 0.0], [40.0, 0.0], [40.0, 20.0], [0.0, 20.0]]


def box(x: float, y: float, a: float, b: float) -> list[list[float]]:
    return [[x, y], [x + a, y], [x + a, y + b], [x, y + b]]


def circle(count: int, radius: float) -> list[list[float]]:
    turns = [2 * math.pi * k / count for k in range(count)]
    return [[radius * math.cos(t), radius * math.sin(t)] for t in turns]


def holes(count: int) -> str:
    """Return a plate with so many small holes."""
    side = math.ceil(math.sqrt(count))
    rows = [
        f"{{ x = {(k % side - side / 2 + 0.5) * 300 / side}, "
        f"y = {(k // side - side / 2 + 0.5) * 300 / side}, diameter = {100 / side} }}"
        for k in range(count)
    ]
    return shape("plate", length=320, width=320, thickness=2, holes=f"[{', '.join(rows)}]")


TOUCHES = "crosses or touches itself"

#: name -> (the case without its title, words of the sentence)
WRONG = {
    # Shapes that touch themselves, or have no width somewhere.
    "two squares that touch in a corner": (
        outline([[0, 0], [10, 0], [10, 10], [20, 10], [20, 20], [10, 20], [10, 10], [0, 10]]),
        TOUCHES,
    ),
    "a slit without width": (
        outline([[0, 0], [40, 0], [40, 10], [20, 10], [40, 10], [40, 20], [0, 20]]),
        TOUCHES,
    ),
    "an edge drawn there and back": (
        outline([[0, 0], [40, 0], [40, 20], [60, 20], [40, 20], [0, 20]]),
        TOUCHES,
    ),
    "all points on one line": (outline([[0, 0], [10, 0], [20, 0]]), TOUCHES),
    "a hole that touches the outline": (
        outline(SQUARE, [box(0, 5, 5, 5)]),
        TOUCHES,
    ),
    "a hole with a corner on the outline": (
        outline(SQUARE, [[[0, 10], [5, 8], [5, 12]]]),
        TOUCHES,
    ),
    "a hole across the outline": (
        outline(SQUARE, [box(35, 5, 10, 5)]),
        TOUCHES,
    ),
    "a hole outside": (outline(SQUARE, [box(50, 5, 5, 5)]), "shape.holes"),
    "a hole in a hole": (outline(SQUARE, [box(5, 5, 10, 10), box(7, 7, 3, 3)]), "shape.holes"),
    "two holes that touch": (
        outline(SQUARE, [box(5, 5, 5, 5), box(10, 5, 5, 5)]),
        TOUCHES,
    ),
    "the same hole twice": (
        outline(SQUARE, [box(5, 5, 5, 5), box(5, 5, 5, 5)]),
        TOUCHES,
    ),
    "a hole as large as the part": (outline(SQUARE, [SQUARE]), TOUCHES),
    "a bow tie": (outline([[0, 0], [10, 10], [10, 0], [0, 10]]), TOUCHES),
    "an outline of nan": (
        "[shape]\noutline = [[0, 0], [nan, 0], [1, 1]]\nthickness = 1\n",
        "shape.outline",
    ),
    # Edges and walls too small to be meant.
    "a tiny edge": (
        outline([[0, 0], [40, 0], [40, 20], [20, 20], [20 - 1e-7, 20 + 1e-7], [0, 20]]),
        TOUCHES,
    ),
    "a wall of a nanometre": (outline(SQUARE, [box(1e-6, 5, 5, 5)]), TOUCHES),
    "a foil of a picometre": (shape("bar", length=60, width=8, thickness=1e-9), "shape.thickness"),
    "a thread": (shape("bar", length=1e6, diameter=1e-2), "shape.diameter"),
    "a slot of nothing": (
        shape("fork", length=60, width=8, thickness=2, slot_length=30, slot_width=1e-9),
        "shape.slot_width",
    ),
    "a pin hole": (
        shape(
            "plate", length=60, width=60, thickness=2, holes="[{ x = 0, y = 0, diameter = 1e-7 }]"
        ),
        "shape.",
    ),
    "a wall of nothing": (shape("tube", length=60, outer_diameter=20, wall=1e-8), "shape.wall"),
    # Absurd numbers.
    "longer than the universe": (shape("bar", length=1e300, width=8, thickness=2), "shape.length"),
    "everything huge": (shape("bar", length=1e200, width=1e200, thickness=1e200), "shape."),
    "everything tiny": (shape("bar", length=1e-200, width=1e-200, thickness=1e-200), "shape."),
    "smaller than a number": (shape("bar", length=5e-324, width=8, thickness=2), "shape.length"),
    "a ring of light years": (
        shape("ring", mean_diameter=1e19, width=1e18, thickness=1e18),
        "shape.",
    ),
    "an outline far out": (outline([[0, 0], [1e300, 0], [1e300, 1e300], [0, 1e300]]), "shape."),
    "an outline far away": (
        outline([[1e15, 0], [1e15 + 40, 0], [1e15 + 40, 20], [1e15, 20]]),
        "shape.outline",
    ),
    "a profile without end": (
        shape("revolved", profile="[[0.0, 1e300], [1e300, 0.0]]", wall=1.0),
        "shape.",
    ),
    "a comb of a thousand tines": (
        shape(
            "comb",
            base_length=20,
            base_width=3000,
            base_thickness=5,
            tines="["
            + ", ".join(["{ length = 30, width = 2, thickness = 1, gap = 0.9 }"] * 1000)
            + "]",
        ),
        "shape.tines",
    ),
    "five thousand steps": (
        shape(
            "stepped_bar",
            segments="[" + ", ".join(["{ length = 1, width = 9, thickness = 2 }"] * 5000) + "]",
        ),
        "shape.segments",
    ),
    "four thousand holes": (holes(4000), "shape.holes"),
    "an outline of twenty thousand points": (outline(circle(20000, 50.0)), "shape.outline"),
    "a thousand prongs": (
        shape("fork", length=60, width=8, thickness=2, slot_length=30, prongs=1000),
        "shape.prongs",
    ),
    "cells of a nanometre": (BAR + STEEL + "[solve]\nsize = 1e-6\n", "solve.size"),
    "cells smaller than a number": (BAR + STEEL + "[solve]\nsize = 1e-300\n", "solve.size"),
    "more modes than anyone can hear": (BAR + STEEL + "[solve]\nmodes = 100000\n", "solve.modes"),
    "a limit below every mode": (
        BAR + STEEL + "[solve]\nup_to_hz = 1e-3\nsize = 8\n",
        "solve.up_to_hz",
    ),
    "a limit above all hearing": (
        BAR + STEEL + "[solve]\nup_to_hz = 1e300\nsize = 8\n",
        "solve.up_to_hz",
    ),
    # Mounts and masses where nothing is.
    "a box that holds no face": (
        BAR
        + STEEL
        + COARSE
        + '[mount]\nkind = "clamped"\nfaces = [{ box = [[500,0,0],[600,1,1]] }]\n',
        "mount.1.faces",
    ),
    "a tie between two faces": (
        BAR + STEEL + COARSE + '[mount]\nkind = "clamped"\nfaces = [{ near = [30, 0, 0] }]\n',
        "faces",
    ),
    "a patch beside the part": (
        BAR
        + STEEL
        + COARSE
        + '[mount]\nkind = "clamped"\nfaces = [{ face = "top", from = [70,0], to = [80,2] }]\n',
        "patch does not lie wholly",
    ),
    "a patch over the edge": (
        BAR
        + STEEL
        + COARSE
        + '[mount]\nkind = "clamped"\nfaces = [{ face = "top", from = [50,0], to = [80,2] }]\n',
        "patch does not lie wholly",
    ),
    "a part held all over": (
        BAR + STEEL + "[solve]\nsize = 60\n"
        '[mount]\nkind = "clamped"\nfaces = ["root","tip","top","bottom","left","right"]\n'
        '[attached_mass]\ngrams = 1\nface = "tip"\n',
        "attached_mass",
    ),
    "a mass off the part": (
        BAR + STEEL + COARSE + "[[attached_mass]]\ngrams = 1\nat = [30, 0, 40]\n",
        "attached_mass.1",
    ),
    "a mass inside the part": (
        BAR + STEEL + COARSE + "[[attached_mass]]\ngrams = 1\nat = [30, 0, 0]\n",
        "attached_mass.1",
    ),
    "a mass at infinity": (
        BAR + STEEL + COARSE + "[[attached_mass]]\ngrams = 1\nat = [1e299, 0, 0]\n",
        "attached_mass.1",
    ),
    "a mass of stars": (
        BAR + STEEL + COARSE + '[[attached_mass]]\ngrams = 1e299\nface = "tip"\n',
        "attached_mass.1",
    ),
    "a mass on no face": (
        BAR + STEEL + COARSE + '[[attached_mass]]\ngrams = 1\nface = "tap"\n',
        "attached_mass.1.face: no such face",
    ),
    "a spring without bounds": (
        BAR
        + STEEL
        + COARSE
        + '[mount]\nkind = "springs"\nfaces = ["root"]\nnormal_n_per_mm3 = 1e299\n',
        "mount.normal_n_per_mm3",
    ),
    "a spring that is hardly there": (
        BAR
        + STEEL
        + COARSE
        + '[mount]\nkind = "springs"\nfaces = ["root"]\nnormal_n_per_mm3 = 1e-5\n',
        "free to within rounding",
    ),
    # Materials that no body can have.
    "an orthotropic plate with too large a ratio": (
        BAR
        + "[material]\nyoungs_modulus_gpa = [10, 1, 1]\nshear_modulus_gpa = [1, 1, 1]\n"
        + "poisson_ratio = [0.3, 0.3, 1.2]\ndensity = 600\n",
        "stable",
    ),
    "an orthotropic plate with all ratios near one half": (
        BAR
        + "[material]\nyoungs_modulus_gpa = [10, 10, 10]\nshear_modulus_gpa = [1, 1, 1]\n"
        + "poisson_ratio = [0.6, 0.6, 0.6]\ndensity = 600\n",
        "stable",
    ),
    "a shear modulus below zero": (
        BAR
        + "[material]\nyoungs_modulus_gpa = [10, 10, 10]\nshear_modulus_gpa = [1, -1, 1]\n"
        + "poisson_ratio = [0.3, 0.3, 0.3]\ndensity = 600\n",
        "material.shear_modulus_gpa",
    ),
    "a part so hot that it has no stiffness": (
        BAR
        + '[material]\nname = "carbon steel"\nmodulus_slope_ppm_per_k = -19000\n'
        + "[surroundings]\ntemperature_c = 500\n",
        "surroundings.temperature_c",
    ),
}


def complaint(folder: Path, text: str | bytes, capsys: pytest.CaptureFixture[str]) -> str:
    path = folder / "case.toml"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    began = time.monotonic()
    code = main(["modes", str(path)])
    took = time.monotonic() - began
    out, err = capsys.readouterr()
    assert code == 2, err
    assert out == ""
    assert err.count("\n") == 1
    assert len(err) < 900
    assert took < SOON
    return err


@pytest.mark.parametrize("name", WRONG)
def test_a_part_that_cannot_be_ends_in_one_sentence(name, tmp_path, capsys):
    text, words = WRONG[name]
    if "[material]" not in text:
        text += STEEL + COARSE
    err = complaint(tmp_path, HEAD + text, capsys)
    assert words in err
    assert "case.toml" in err
