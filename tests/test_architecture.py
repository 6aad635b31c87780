"""The house rules that code can check: who imports whom, and where libraries live."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
ORDER = ("geometry", "fem", "viz", "cases")
HOMES = {
    "gmsh": {"geometry/kernel.py"},
    "meshio": {"geometry/exchange.py"},
    "ezdxf": {"geometry/dxf.py"},
    "svgelements": {"geometry/svg.py"},
    "skfem": {"fem/modal/element.py"},
    "cvxopt": {"fem/modal/direct/cholmod.py"},
    "threadpoolctl": {"fem/modal/threads.py"},
    "pyvista": {"viz/scene.py"},
    "vtk": {"viz/scene.py"},
    "vtkmodules": {"viz/scene.py"},
    "matplotlib": {"viz/chart.py"},
    "pydantic": {"cases/schema.py"},
    "cyclopts": {"cases/command.py"},
    "rich": {"cases/console.py"},
}
MODULES = sorted(
    path.relative_to(ROOT).as_posix()
    for package in ORDER
    for path in (ROOT / package).rglob("*.py")
)


def imports(module: str) -> list[str]:
    """Dotted names a module imports, made absolute."""
    package = ["modewright", *Path(module).with_suffix("").parts[:-1]]
    names = []
    for node in ast.walk(ast.parse((ROOT / module).read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names += [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            base = package[: len(package) + 1 - node.level] if node.level else []
            stem = [*base, *(node.module.split(".") if node.module else [])]
            names.append(".".join(stem))
            names += [".".join([*stem, alias.name]) for alias in node.names]
    return names


@pytest.mark.parametrize("module", MODULES)
def test_imports_go_one_way(module):
    own = module.split("/")[0]
    for name in imports(module):
        parts = name.split(".")
        assert parts[0] not in ORDER, f"{module} imports {name} by its folder"
        if parts[0] == "modewright" and len(parts) > 1:
            assert ORDER.index(parts[1]) <= ORDER.index(own), f"{module} imports {name}"
        if module.startswith("fem/modal/"):
            assert not name.startswith(("modewright.fem.study", "modewright.fem.signal"))


@pytest.mark.parametrize("module", MODULES)
def test_heavy_libraries_live_in_one_module(module):
    for name in imports(module):
        library = name.split(".")[0]
        assert module in HOMES.get(library, {module}), f"{module} imports {library}"


@pytest.mark.parametrize("module", [m for m in MODULES if m.startswith(("fem/", "viz/"))])
def test_fem_and_viz_never_name_a_family(module):
    from modewright.geometry.anatomy import Kind
    from modewright.geometry.families.table import FAMILIES

    # Kinds of anatomy, and words that mean something else here (a tube is a section form).
    words = set(FAMILIES) - {kind.value for kind in Kind} - {"mesh", "solid", "outline", "tube"}
    tree = ast.parse((ROOT / module).read_text(encoding="utf-8"))
    docs = {
        id(node.body[0].value)
        for node in ast.walk(tree)
        if isinstance(node, ast.Module | ast.FunctionDef | ast.ClassDef)
        and node.body
        and isinstance(node.body[0], ast.Expr)
    }
    for node in ast.walk(tree):
        if isinstance(node, ast.Constant) and id(node) not in docs:
            assert str(node.value) not in words, f"{module}:{node.lineno} names {node.value!r}"
        if isinstance(node, ast.Name | ast.Attribute):
            name = node.id if isinstance(node, ast.Name) else node.attr
            assert name not in words, f"{module}:{node.lineno} names {name!r}"


@pytest.mark.parametrize("module", MODULES)
def test_no_printing_or_exiting_outside_the_command_line(module):
    if module.startswith("cases/"):
        return
    for node in ast.walk(ast.parse((ROOT / module).read_text(encoding="utf-8"))):
        if isinstance(node, ast.Call):
            text = ast.unparse(node.func)
            assert text not in {"print", "sys.exit", "exit", "warnings.filterwarnings"}, (
                f"{module}:{node.lineno} calls {text}"
            )


def test_solving_needs_no_geometry_kernel_and_no_pictures():
    code = (
        "import sys, modewright.fem;"
        "print([m for m in ('gmsh', 'pyvista', 'vtkmodules', 'matplotlib', 'flask', 'rich',"
        " 'pydantic') if m in sys.modules])"
    )
    answer = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd="/"
    )
    assert answer.stdout.strip() == "[]"


def test_the_top_level_holds_what_was_agreed():
    listed = subprocess.run(
        ["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=True
    ).stdout.split("\n")
    visible = {name.split("/")[0] for name in listed if name and not name.startswith(".")}
    assert visible == {
        *ORDER,
        "pyproject.toml",
        "README.md",
        "DEVELOPERS.md",
        "LICENSE",
        "tests",
    }
