"""How many unknowns a mesh refined where the error is saves against a uniform one.

For each part: refine to an accuracy; then mesh uniformly, finer and finer, until the worst
mode is as good; between the last two uniform meshes the unknowns are read off by a power law.
"""

from __future__ import annotations

import argparse
from dataclasses import dataclass, replace

import numpy as np
from modewright.cases.reader import build_case
from modewright.fem.modal.adapt import adapt, mesh_cents
from modewright.fem.modal.case import Case
from modewright.fem.modal.solve import case_mesh
from modewright.fem.modal.spectrum import solve_spectrum
from modewright.fem.modal.system import build_system

#: Part -> shape, mount, accuracy in cents, first uniform size in mm.
PARTS = {
    "clamped fork, round slot end": (
        {
            "family": "fork", "length": 60.0, "width": 12.0, "thickness": 3.0,
            "slot_length": 36.0, "slot_width": 3.0,
        },
        {"kind": "clamped", "faces": ["root"]}, 1.5, 2.0,
    ),
    "free bar with a hole": (
        {
            "family": "plate", "length": 60.0, "width": 20.0, "thickness": 4.0,
            "holes": [{"x": 5.0, "y": 0.0, "diameter": 8.0}],
        },
        {"kind": "free"}, 2.0, 2.4,
    ),
}  # fmt: skip


@dataclass(frozen=True, kw_only=True, slots=True)
class Row:
    """One part: unknowns for the same error of the worst mode, cents."""

    worst: float
    meshes: int
    adapted: int
    uniform: float


def part(name: str) -> Case:
    """Return the case of a part with six modes."""
    shape, mount, _, _ = PARTS[name]
    return build_case(
        {
            "title": name,
            "shape": shape,
            "material": {"name": "carbon steel"},
            "mount": mount,
            "solve": {"modes": 6},
        }
    )


def compare(name: str) -> Row:
    """Refine a part to its accuracy and find the uniform mesh that is as good."""
    case = part(name)
    _, _, accuracy, size = PARTS[name]
    found = adapt(case, accuracy)
    worst = float(mesh_cents(found.spectrum).max())
    tried: list[tuple[float, float]] = []
    while not tried or tried[-1][1] > worst or len(tried) < 2:
        sized = replace(case, settings=replace(case.settings, size=size))
        mesh = case_mesh(sized)
        spectrum = solve_spectrum(build_system(sized, mesh), modes=6, estimate=True)
        tried.append((3.0 * len(mesh.points), float(mesh_cents(spectrum).max())))
        size /= 1.35
    (few, high), (many, low) = tried[-2:]
    rate = np.log(many / few) / np.log(high / low)
    return Row(
        worst=worst,
        meshes=found.meshes,
        adapted=3 * len(found.mesh.points),
        uniform=float(few * (high / worst) ** rate),
    )


def main() -> None:
    """Print a row for each part."""
    argparse.ArgumentParser(description=__doc__).parse_args()
    print(f"{'part':<30} {'cents':>6} {'meshes':>6} {'adapted':>8} {'uniform':>8} {'share':>6}")
    for name in PARTS:
        row = compare(name)
        print(
            f"{name:<30} {row.worst:>6.2f} {row.meshes:>6} {row.adapted:>8} "
            f"{row.uniform:>8.0f} {row.adapted / row.uniform:>6.2f}",
            flush=True,
        )


if __name__ == "__main__":
    main()
