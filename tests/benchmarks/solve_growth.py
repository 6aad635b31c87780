"""Time and peak memory of a solve as the mesh grows, 10k to 600k unknowns.

    python tests/benchmarks/solve_growth.py [UNKNOWNS ...]

Each size runs in a process of its own, so that peak memory is its own.
"""

from __future__ import annotations

import sys
from pathlib import Path

import _fork
from modewright.fem.modal.threads import default_count


def solve(path: str, threads: int) -> None:
    """Solve one mesh and report."""
    from modewright.fem.modal.spectrum import solve_spectrum
    from modewright.fem.modal.system import build_system

    mesh = _fork.read_mesh(path)
    clock = _fork.Clock()
    system = build_system(_fork.case(), mesh)
    clock.stage("assemble")
    found = solve_spectrum(system, modes=_fork.MODES, thread_count=threads)
    clock.seconds.update(found.seconds)
    clock.report(found.frequencies, unknowns=system.unknowns, solver=found.direct_solver)


def main(wanted: list[int]) -> None:
    """Solve every size and print a table."""
    threads = default_count()
    say = sys.stdout.write
    say(f"fork, {_fork.MODES} modes, {threads} threads\n")
    heads = ("assemble", "factor", "eigen", "total s", "peak MB")
    say(f"{'unknowns':>9}" + "".join(f" {head:>8}" for head in heads) + "\n")
    for unknowns in wanted:
        with _fork.scratch() as folder:
            path = Path(folder) / "fork.npz"
            _fork.write_mesh(_fork.SIZES[unknowns], path)
            got = _fork.contend(__file__, "solve", path, threads, 3600.0)
        if got is None:
            say(f"{unknowns:9} failed\n")
            continue
        s = got["seconds"]
        say(
            f"{got['unknowns']:9} {s['assemble']:8.2f} {s['factor']:8.2f} {s['eigen']:8.2f} "
            f"{got['total']:8.2f} {got['peak_mb']:8.0f}\n"
        )


if __name__ == "__main__":
    if sys.argv[1:2] == ["--run"]:
        solve(sys.argv[3], int(sys.argv[4]))
    else:
        main([int(a) for a in sys.argv[1:]] or sorted(_fork.SIZES))
