"""The child process: a good answer, its errors, its crashes and its end."""

import os
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest
from modewright.geometry import mesher
from modewright.geometry.errors import InputError, MeshError, ToolError
from modewright.geometry.mesh import Mesh
from modewright.geometry.shape import Family, make_shape
from modewright.geometry.solid import Extrusion, Line, Patch, Profile, Solid


def block(dimensions, folder):
    corners = [(0, 0), (10, 0), (10, 4), (0, 4)]
    outer = tuple(
        Line(start=a, end=b) for a, b in zip(corners, [*corners[1:], corners[0]], strict=True)
    )
    body = Extrusion(profile=Profile(outer=outer), vector=(0, 0, 3), start="bottom", end="top")
    return Solid(body=body, faces=("top", "bottom"), volume=120.0, thin=3.0)


def shape(solid=block, mesh=None):
    family = Family(
        name="block",
        text="a block",
        dimensions=(),
        faces=("top", "bottom"),
        check=lambda dimensions: None,
        solid=solid,
        anatomy=None,
        mesh=mesh,
    )
    return make_shape(family, {})


def stand_in(monkeypatch, code):
    """Let a few lines of Python take the place of the meshing process."""
    monkeypatch.setattr(mesher, "_COMMAND", (sys.executable, "-c", code))


def test_mesh_arrives_from_the_child_in_metres():
    mesh = mesher.generate(shape(), size_mm=2.0)
    assert isinstance(mesh, Mesh)
    np.testing.assert_array_equal(mesh.points.max(axis=0), [0.01, 0.004, 0.003])
    assert mesh.volume == pytest.approx(120e-9)
    assert mesh.size == 2e-3
    assert list(mesh.faces)[:2] == ["top", "bottom"]


def test_input_errors_of_the_child_arrive_whole():
    patch = Patch(name="pad", face="topp", low=(1, 1), high=(2, 2))
    with pytest.raises(InputError, match="did you mean 'top'") as caught:
        mesher.generate(shape(), size_mm=2.0, patches=(patch,))
    assert caught.value.value == "topp"
    assert "bottom" in caught.value.allowed


def test_mesh_errors_of_the_child_arrive():
    def wrong(dimensions, folder):
        solid = block(dimensions, folder)
        return Solid(body=solid.body, volume=121.0)

    with pytest.raises(MeshError, match="instead of 121"):
        mesher.generate(shape(wrong), size_mm=2.0)


@pytest.mark.parametrize("size", [0.0, -1.0, float("nan"), float("inf")])
def test_size_must_be_a_length(size):
    with pytest.raises(InputError, match=r"solve\.size"):
        mesher.generate(shape(), size_mm=size)


def test_family_of_meshes_is_not_sent_to_the_kernel(monkeypatch):
    stand_in(monkeypatch, "raise SystemExit(9)")
    empty = np.empty((0, 3))
    own = Mesh(points=empty, cells=empty, facets=empty)
    assert mesher.generate(shape(mesh=lambda dimensions, folder: own)) is own
    patch = Patch(name="pad", face="top", low=(1, 1), high=(2, 2))
    with pytest.raises(InputError, match="mesh already"):
        mesher.generate(shape(mesh=lambda dimensions, folder: own), patches=(patch,))


def test_crash_is_one_clear_error(monkeypatch):
    stand_in(monkeypatch, "import os; os.kill(os.getpid(), 11)")
    with pytest.raises(ToolError, match=r"crashed \(SIGSEGV\); try another element size"):
        mesher.generate(shape())
    stand_in(monkeypatch, "raise ValueError('lost a face')")
    with pytest.raises(ToolError, match=r"exit code 1: ValueError: lost a face"):
        mesher.generate(shape())


def test_garbage_is_one_clear_error(monkeypatch):
    stand_in(monkeypatch, "print('hello')")
    with pytest.raises(ToolError, match="cannot be read"):
        mesher.generate(shape())
    stand_in(monkeypatch, "")
    with pytest.raises(ToolError, match="cannot be read"):
        mesher.generate(shape())
    stand_in(monkeypatch, "import pickle, sys; sys.stdout.buffer.write(pickle.dumps([1, 2]))")
    with pytest.raises(ToolError, match="makes no sense"):
        mesher.generate(shape())


def running(pid):
    status = Path(f"/proc/{pid}/stat")
    return status.exists() and status.read_text().rsplit(")", 1)[1].split()[0] != "Z"


@pytest.mark.skipif(not Path("/proc/self/stat").exists(), reason="looks into /proc")
def test_hang_ends_at_the_time_limit_with_all_it_started(monkeypatch, tmp_path):
    note = tmp_path / "pids"
    stand_in(
        monkeypatch,
        "import os, subprocess, sys, time\n"
        "inner = subprocess.Popen([sys.executable, '-c', 'import time; time.sleep(60)'])\n"
        f"open({str(note)!r}, 'w').write(f'{{os.getpid()}} {{inner.pid}}')\n"
        "time.sleep(60)\n",
    )
    start = time.monotonic()
    with pytest.raises(ToolError, match=r"longer than 2 s .* larger element size"):
        mesher.generate(shape(), time_limit=2.0)
    assert time.monotonic() - start < 20
    child, inner = map(int, note.read_text().split())
    for _ in range(50):
        if not running(child) and not running(inner):
            break
        time.sleep(0.1)
    assert not running(child)
    assert not running(inner)


@pytest.mark.parametrize(
    ("library", "package"),
    [
        ("libGLU.so.1", "libglu1-mesa"),
        ("libGL.so.1", "libgl1"),
        ("libXcursor.so.1", "libxcursor1"),
        ("libXft.so.2", "libxft2"),
        ("libXinerama.so.1", "libxinerama1"),
        ("libgomp.so.1", "libgomp1"),
    ],
)
def test_missing_library_is_named_with_its_package(monkeypatch, library, package):
    reason = f"{library}: cannot open shared object file: No such file or directory"
    stand_in(
        monkeypatch,
        f"import pickle, sys; sys.stdout.buffer.write(pickle.dumps(('unloadable', {reason!r})))",
    )
    with pytest.raises(ToolError, match=rf"{library}.*apt-get install {package}$"):
        mesher.generate(shape())


def test_child_tells_of_a_library_that_cannot_be_loaded(monkeypatch, tmp_path):
    # A stand-in for the CAD library that fails as a missing system library makes it fail.
    (tmp_path / "gmsh.py").write_text(
        "raise OSError('libGLU.so.1: cannot open shared object file: No such file or directory')"
    )
    monkeypatch.setenv("PYTHONPATH", str(tmp_path))
    with pytest.raises(ToolError, match="install libglu1-mesa"):
        mesher.generate(shape())
    (tmp_path / "gmsh.py").write_text("raise ImportError('no such module')")
    with pytest.raises(ToolError, match=r"cannot be loaded \(no such module\)"):
        mesher.generate(shape())


def test_no_guard_is_needed_in_a_user_script_and_nothing_is_left(tmp_path):
    script = tmp_path / "mine.py"
    script.write_text(
        "import sys\n"
        f"sys.path.insert(0, {str(Path(__file__).parent)!r})\n"
        "from test_mesher import shape, mesher\n"
        "print(len(mesher.generate(shape(), size_mm=3.0).cells))\n"
    )
    left = tmp_path / "tmp"
    left.mkdir()
    run = subprocess.run(
        [sys.executable, script],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "TMPDIR": str(left)},
        cwd=tmp_path,
    )
    assert run.returncode == 0, run.stderr
    assert run.stderr == ""
    assert int(run.stdout) > 10
    assert list(left.iterdir()) == []
