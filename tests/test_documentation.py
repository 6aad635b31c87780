"""Doctests run as the user imports the modules, and the README's blocks run as written."""

import doctest
import importlib
import re
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
MODULES = sorted(
    "modewright." + path.relative_to(ROOT).with_suffix("").as_posix().replace("/", ".")
    for package in ("geometry", "fem", "viz", "cases")
    for path in (ROOT / package).rglob("*.py")
    if ">>>" in path.read_text(encoding="utf-8")
)


@pytest.mark.parametrize("name", MODULES)
def test_doctests(name):
    result = doctest.testmod(importlib.import_module(name), optionflags=doctest.ELLIPSIS)
    assert result.attempted > 0
    assert result.failed == 0


def blocks(language: str) -> list[str]:
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    return re.findall(rf"^```{language}\n(.*?)^```", text, flags=re.MULTILINE | re.DOTALL)


SETUP = ("sh cases/demo", "sh tests/run")


@pytest.mark.parametrize("block", blocks("sh"))
def test_readme_commands_run(block, tmp_path):
    """All but the two set-up commands, one block after another's files, in a folder of its own."""
    lines = [line for line in block.splitlines() if not line.startswith(SETUP)]
    script = "\n".join(lines).replace(
        ".venv/bin/modewright", f"{sys.executable} -m modewright.cases"
    )
    (tmp_path / "cases").symlink_to(ROOT / "cases")
    answer = subprocess.run(
        ["sh", "-e", "-c", script], cwd=tmp_path, capture_output=True, text=True, timeout=280
    )
    assert answer.returncode == 0, answer.stderr


@pytest.mark.parametrize("block", blocks("python"))
def test_readme_python_runs(block, tmp_path):
    (tmp_path / "cases").symlink_to(ROOT / "cases")
    answer = subprocess.run(
        [sys.executable, "-c", block], cwd=tmp_path, capture_output=True, text=True, timeout=280
    )
    assert answer.returncode == 0, answer.stderr
