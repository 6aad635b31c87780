"""The part that the benchmarks solve, and running a contender in a process of its own."""

from __future__ import annotations

import json
import os
import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from typing import Any

import numpy as np
from modewright.fem.modal.case import Case
from modewright.fem.modal.material import Material
from modewright.fem.modal.mount import Hold, Mount
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.mesh import Mesh
from modewright.geometry.mesher import generate
from modewright.geometry.selector import ByName
from modewright.geometry.shape import make_shape

STEEL = Material(name="steel", youngs_modulus=205e9, poisson_ratio=0.29, density=7850.0)
MODES = 20

FORK = make_shape(
    FAMILIES["fork"],
    {
        "length": 100.0,
        "width": 12.0,
        "thickness": 3.0,
        "slot_length": 60.0,
        "slot_width": 2.0,
        "slot_end": "square",
    },
)

#: Unknowns (about) -> element size, mm.
SIZES = {
    10_000: 2.6,
    25_000: 1.75,
    50_000: 1.28,
    100_000: 0.99,
    150_000: 0.84,
    300_000: 0.645,
    600_000: 0.5,
}


def case() -> Case:
    """Return the fork, clamped at its root."""
    clamp = Mount(hold=Hold.CLAMPED, faces=(ByName(name="root"),))
    return Case(title="fork", shape=FORK, material=STEEL, mounts=(clamp,))


def write_mesh(size: float, path: Path) -> Mesh:
    """Mesh the fork and write it for the contenders."""
    mesh = generate(FORK, size_mm=size, time_limit=1800.0)
    np.savez(
        path,
        points=mesh.points,
        cells=mesh.cells,
        facets=mesh.facets,
        **{f"face_{name}": at for name, at in mesh.faces.items()},
    )
    return mesh


def read_mesh(path: str) -> Mesh:
    """Return a mesh that `write_mesh` wrote."""
    with np.load(path) as data:
        return Mesh(
            points=data["points"],
            cells=data["cells"],
            facets=data["facets"],
            faces={k[5:]: data[k] for k in data.files if k.startswith("face_")},
        )


def contend(
    script: str, name: str, mesh: Path, threads: int, time_limit: float
) -> dict[str, Any] | None:
    """Run one contender in a fresh process; None if it fails or takes too long."""
    environment = {**os.environ, "OMP_NUM_THREADS": str(threads), "NGS_NUM_THREADS": str(threads)}
    try:
        done = subprocess.run(
            [sys.executable, script, "--run", name, str(mesh), str(threads)],
            capture_output=True,
            text=True,
            timeout=time_limit,
            env=environment,
            check=False,
        )
    except subprocess.TimeoutExpired:
        return None
    if done.returncode:
        sys.stderr.write(done.stderr[-2000:])
        return None
    return json.loads(done.stdout.splitlines()[-1])


class Clock:
    """Wall and processor time of the stages of a run."""

    def __init__(self) -> None:
        self.seconds: dict[str, float] = {}
        self._began = self._lap = time.perf_counter()
        self._processor = time.process_time()

    def stage(self, name: str) -> None:
        """End a stage."""
        now = time.perf_counter()
        self.seconds[name] = now - self._lap
        self._lap = now

    def report(self, frequencies: np.ndarray, **more: Any) -> None:
        """End the run and print its result as one line."""
        line = {
            "total": time.perf_counter() - self._began,
            # All threads together: tells a busy machine from a slow method.
            "processor": time.process_time() - self._processor,
            "seconds": self.seconds,
            "frequencies": list(frequencies),
            "peak_mb": resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024,
            **more,
        }
        sys.stdout.write(json.dumps(line) + "\n")


def scratch() -> tempfile.TemporaryDirectory[str]:
    """Return a folder for meshes that goes away afterwards."""
    return tempfile.TemporaryDirectory(prefix="modewright-bench-")
