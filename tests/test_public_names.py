"""The public names of each package, and what importing them loads."""

from __future__ import annotations

import importlib
import subprocess
import sys
import time

import pytest

PUBLIC = {
    "modewright.geometry": {
        "FAMILIES",
        "Anatomy",
        "Family",
        "InputError",
        "Kind",
        "Mesh",
        "MeshError",
        "ModewrightError",
        "Shape",
        "SolveError",
        "ToolError",
        "WorkError",
        "generate",
        "make_shape",
        "write_mesh",
    },
    "modewright.fem": {
        "AttachedMass",
        "Case",
        "Expected",
        "Hold",
        "Material",
        "Measured",
        "Mode",
        "Modes",
        "Mount",
        "Pitch",
        "SolveSettings",
        "Sweep",
        "Target",
        "Track",
        "find_material",
        "follow",
        "solve",
        "sweep",
    },
    "modewright.viz": {
        "Table",
        "Written",
        "modes_csv",
        "modes_document",
        "modes_table",
        "sweep_chart",
        "write_results",
    },
    "modewright.cases": {"Comparison", "build_case", "case_document", "compare", "read_case"},
}
HEAVY = ("gmsh", "pyvista", "vtk", "vtkmodules", "matplotlib", "flask", "fastapi", "tornado")


def loaded_after(code: str) -> set[str]:
    """Return the top-level modules loaded in a fresh interpreter after `code`."""
    program = f"{code}\nimport sys\nprint(' '.join({{m.split('.')[0] for m in sys.modules}}))"
    run = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True
    )
    return set(run.stdout.splitlines()[-1].split())


@pytest.mark.parametrize("package", PUBLIC)
def test_public_names_are_these(package):
    module = importlib.import_module(package)
    assert set(module.__all__) == PUBLIC[package]
    assert dir(module) == sorted(module.__all__)
    for name in module.__all__:
        value = getattr(module, name)
        assert getattr(value, "__name__", name) == name


@pytest.mark.parametrize("package", PUBLIC)
def test_other_names_are_not_there(package):
    module = importlib.import_module(package)
    with pytest.raises(AttributeError, match="no attribute 'nothing'"):
        _ = module.nothing


def test_solving_loads_no_kernel_and_no_pictures():
    everything = "\n".join(
        f"from {package} import {', '.join(sorted(names))}"
        for package, names in PUBLIC.items()
        if package != "modewright.viz"
    )
    assert not loaded_after(everything) & set(HEAVY)


def test_the_command_line_loads_no_numerics():
    code = (
        "from modewright.cases.command import main\n"
        "import io, contextlib\n"
        "with contextlib.redirect_stdout(io.StringIO()):\n"
        "    main(['--help'])"
    )
    assert not loaded_after(code) & {*HEAVY, "numpy", "scipy", "skfem", "pydantic", "meshio"}


@pytest.mark.slow
def test_help_answers_at_once():
    best = min(_help_seconds() for _ in range(5))
    assert best < 0.8  # 0.4 s on a quiet machine


def _help_seconds() -> float:
    began = time.perf_counter()
    subprocess.run(
        [sys.executable, "-c", "from modewright.cases.command import main; main(['--help'])"],
        capture_output=True,
        check=True,
    )
    return time.perf_counter() - began
