"""``modewright modes`` and ``modewright mesh`` on a coarse bar, and work that cannot be done."""

from __future__ import annotations

import json
import os
import subprocess
import sys

import meshio
import pytest
from modewright.cases.command import main
from modewright.cases.verbs.modes import SPARE
from modewright.geometry.errors import SolveError
from modewright.viz import table as viz_table

CASE = """
title = "Quay rod"
[shape]
family = "bar"
length = 60
width = 8
thickness = 3
[material]
name = "brass C360"
[mount]
kind = "clamped"
faces = ["root"]
[solve]
modes = 3
size = 5
[[target]]
mode = "torsion 1"
hz = 8000
"""


@pytest.fixture
def case(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    path = tmp_path / "case.toml"
    path.write_text(CASE)
    return path


def run(capsys, *tokens: object) -> tuple[int, str, str]:
    code = main([str(token) for token in tokens])
    out, err = capsys.readouterr()
    return code, out, err


def test_the_table_for_people_and_nothing_written(case, capsys):
    code, out, err = run(capsys, "modes", case, "--modes", 4)
    assert (code, err) == (0, "")
    lines = out.splitlines()
    assert lines[0].startswith("Quay rod: bar, brass C360, ")
    assert "flatwise bending 1" in out
    assert "target Hz" in lines[1]
    # The line on what the numbers do not contain stands under the table.
    assert "thickness" in lines[-1]
    assert "clamp" in lines[-1]
    assert [path.name for path in case.parent.iterdir()] == ["case.toml"]


def test_json_is_the_content_of_modes_json(case, capsys, tmp_path):
    out = tmp_path / "results" / "deep"
    code, text, _ = run(
        capsys, "modes", case, "--modes", 4, "--out", out, "--no-pictures", "--json"
    )
    document = json.loads(text)
    assert code == 0
    assert document["format"] == "modewright-modes"
    assert json.loads((out / "modes.json").read_text()) == document
    assert document["case"]["solve"] == {"modes": 4, "size": 5.0}
    assert len(document["modes"]) == 4
    wanted = {"modes.json", "modes.csv", "modes.npz", "modes.vtu", "modes.glb"}
    assert {path.name for path in out.iterdir()} == wanted


def test_settings_of_the_command_line_go_first(case, capsys):
    text = CASE.replace('[[target]]\nmode = "torsion 1"\nhz = 8000\n', "")
    case.write_text(text)
    code, out, _ = run(capsys, "modes", case, "--up-to-hz", 3000, "--size", 6, "--json")
    document = json.loads(out)
    assert code == 0
    assert document["case"]["solve"] == {"up_to_hz": 3000.0, "size": 6.0}
    assert document["mesh"]["size_mm"] == pytest.approx(6.0)
    assert all(mode["frequency_hz"] <= 3000 for mode in document["modes"])


@pytest.mark.parametrize(
    ("tokens", "part"),
    [
        (("--size", "-1"), "--size: is out of range"),
        (("--size", "nan"), "--size"),
        (("--modes", "0"), "--modes"),
        (("--up-to-hz", "0"), "--up-to-hz"),
        (("--out", "case.toml"), "is a file, not a folder"),
        (("--out", "case.toml/inner"), "is a file, not a folder"),
        (("--modes", "1"), "target.1.mode: no mode has that name"),
    ],
)
def test_wrong_settings(tokens, part, case, capsys):
    code, out, err = run(capsys, "modes", case, *tokens)
    assert (code, out) == (2, "")
    assert part in err
    assert err.count("\n") == 1


@pytest.mark.skipif(os.name == "nt" or os.geteuid() == 0, reason="root may write anywhere")
def test_a_folder_that_may_not_be_written(case, capsys, tmp_path):
    locked = tmp_path / "locked"
    locked.mkdir(mode=0o500)
    code, _, err = run(capsys, "modes", case, "--out", locked / "x")
    assert code == 2
    assert "permission denied" in err


@pytest.mark.parametrize(
    ("error", "part"),
    [
        (KeyboardInterrupt(), "stopped before it was done"),
        (MemoryError(), "not enough memory"),
        (SolveError("the eigen-solve failed; try a larger size"), "try a larger size"),
    ],
)
def test_work_that_could_not_be_done_ends_in_one_sentence(error, part, case, capsys, monkeypatch):
    def fail(*_args, **_named):
        raise error

    monkeypatch.setattr("modewright.fem.modal.solve.solve", fail)
    code, out, err = run(capsys, "modes", case)
    assert (code, out) == (1, "")
    assert part in err
    assert err.count("\n") == 1
    code, out, err = run(capsys, "modes", case, "--json")
    document = json.loads(out)
    assert (code, err) == (1, "")
    assert document["format"] == "modewright-error"
    assert part in document["message"]
    assert document["file"] is document["key"] is document["value"] is document["allowed"] is None


@pytest.mark.parametrize("tokens", [["materials"], ["materials", "--json"]])
def test_a_reader_that_has_gone_is_no_error(tokens):
    read, write = os.pipe()
    os.close(read)
    program = "from modewright.cases.command import main; raise SystemExit(main())"
    with os.fdopen(write, "w") as pipe:
        run = subprocess.run(
            [sys.executable, "-c", program, *tokens],
            stdout=pipe,
            stderr=subprocess.PIPE,
            text=True,
            check=False,
        )
    assert (run.returncode, run.stderr) == (0, "")


def test_columns_that_a_narrow_terminal_goes_without_are_columns():
    source = viz_table.__loader__.get_source(viz_table.__name__)
    assert all(f'"{header}"' in source for header in SPARE)


def test_mesh(case, capsys, tmp_path):
    path = tmp_path / "bar.msh"
    code, out, err = run(capsys, "mesh", case, "--out", path, "--json")
    document = json.loads(out)
    assert (code, err) == (0, "")
    assert document["format"] == "modewright-mesh"
    assert document["volume_mm3"] == pytest.approx(60 * 8 * 3)
    assert set(document["faces"]) == {"root", "tip", "top", "bottom", "left", "right"}
    kept = meshio.read(path)
    assert len(kept.points) == document["nodes"]
    assert len(kept.cells_dict["tetra10"]) == document["cells"]


@pytest.mark.parametrize(
    ("name", "part"),
    [
        ("bar.xyz", "--out"),
        ("nowhere/bar.msh", "its folder is not there"),
        (".", "is a folder"),
        ("case.toml/bar.msh", "its folder is not there"),
    ],
)
def test_wrong_mesh_files(name, part, case, capsys):
    code, out, err = run(capsys, "mesh", case, "--out", name)
    assert (code, out) == (2, "")
    assert part in err
    assert err.count("\n") == 1
    assert [path.name for path in case.parent.iterdir()] == ["case.toml"]
