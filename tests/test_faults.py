"""Killed runs, full disks, locked folders and dying children: whole results, clear sentences."""

from __future__ import annotations

import json
import os
import random
import shutil
import signal
import subprocess
import sys
import threading
import time
import warnings
from dataclasses import replace
from pathlib import Path

import psutil
import pytest
from modewright.cases.command import main
from modewright.cases.outlet import write_text
from modewright.fem.modal.modes import Modes
from modewright.geometry import mesher
from modewright.geometry.errors import InputError, ToolError
from modewright.geometry.scratch import is_scratch, refuse_busy, scratch
from modewright.viz import results
from modewright.viz.place import may_swap, swap
from modewright.viz.results import write_results

pytestmark = pytest.mark.skipif(os.name == "nt", reason="kills and locks of POSIX systems")

CASE = """
title = "Ebb rod"
[shape]
family = "bar"
length = 60
width = 8
thickness = 3
[material]
name = "brass C360"
[solve]
modes = 2
size = 6
"""

#: A run of the command line, with the numbers of the case given.
RUN = "import sys; from modewright.cases.command import main; sys.exit(main(sys.argv[1:]))"


@pytest.fixture(scope="module")
def modes(solve_as_case) -> Modes:
    return solve_as_case("bar", {"length": 60.0, "width": 8.0, "thickness": 3.0}, size=6.0, modes=3)


@pytest.fixture
def case(tmp_path: Path) -> Path:
    path = tmp_path / "case.toml"
    path.write_text(CASE)
    return path


def start(case: Path, out: Path, *options: str) -> subprocess.Popen[str]:
    return subprocess.Popen(
        [sys.executable, "-c", RUN, "modes", str(case), "--out", str(out), *options],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )


def content(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in folder.iterdir() if path.is_file()}


def told(capsys: pytest.CaptureFixture[str]) -> str:
    """Return what stands on stderr, which must be one sentence."""
    out, err = capsys.readouterr()
    assert out == ""
    assert err.count("\n") == 1
    assert "Traceback" not in err
    return err


def whole(folder: Path) -> int:
    """Return the number of modes of a result, all of whose files tell of one and the same."""
    document = json.loads((folder / "modes.json").read_text())
    count = len(document["modes"])
    rows = (folder / "modes.csv").read_text().strip().splitlines()
    assert len(rows) == count + 1
    assert (folder / "modes.glb").stat().st_size > 1000
    assert sorted(content(folder)) == [
        "modes.csv",
        "modes.glb",
        "modes.json",
        "modes.npz",
        "modes.vtu",
    ]
    return count


def kill_at_random(case: Path, out: Path, kills: int, seed: int) -> set[int]:
    """Kill runs that would replace a result; return the numbers of modes then found in it."""
    draw = random.Random(seed)
    begun = time.monotonic()
    run = start(case, out, "--no-pictures", "--modes", "2")
    run.communicate(timeout=120)
    assert run.returncode == 0
    took = time.monotonic() - begun
    found = set()
    count = whole(out)
    for _ in range(kills):
        run = start(case, out, "--no-pictures", "--modes", str(5 - count))
        time.sleep(draw.uniform(0.2, 1.1) * took)
        children = (
            [child for child in psutil.Process(run.pid).children(recursive=True)]
            if run.poll() is None
            else []
        )
        run.kill()
        run.communicate(timeout=60)
        count = whole(out)
        found.add(count)
        _, alive = psutil.wait_procs(children, timeout=10)
        assert not alive
    return found


def test_a_killed_run_leaves_a_whole_result(case, tmp_path):
    out = tmp_path / "result"
    assert kill_at_random(case, out, 2, seed=4) <= {2, 3}
    # The next run clears away what the killed ones left.
    assert main(["modes", str(case), "--out", str(out), "--no-pictures"]) == 0
    assert sorted(path.name for path in tmp_path.iterdir()) == ["case.toml", "result"]
    assert not any(is_scratch(path.name) for path in out.iterdir())


@pytest.mark.slow
@pytest.mark.timeout(1200)
def test_many_killed_runs(case, tmp_path):
    assert kill_at_random(case, tmp_path / "result", 60, seed=1) == {2, 3}


def test_a_kill_between_any_two_steps_of_the_exchange(modes, tmp_path):
    """Kill at each system call that moves something: no order of steps shows a mix."""
    out = tmp_path / "result"
    write_results(modes, out, pictures=False)
    (out / "notes.txt").write_text("of the maker")
    fewer = replace(modes, modes=modes.modes[:2], shapes=modes.shapes[:2])
    seen = set()
    for step in range(1, 60):
        child = fork()
        if child == 0:
            _die_at_step(step)
            write_results(fewer, out, pictures=False)
            os._exit(0)
        _, status = os.waitpid(child, 0)
        assert (out / "notes.txt").read_text() == "of the maker"
        (out / "notes.txt").unlink()
        seen.add(whole(out))
        (out / "notes.txt").write_text("of the maker")
        if os.WIFEXITED(status):
            break
        write_results(modes, out, pictures=False)
    else:
        pytest.fail("the run never came to its end")
    assert step > 2
    assert seen == {2, 3}


def fork() -> int:
    with warnings.catch_warnings():
        # The child calls nothing that needs the threads it has not got.
        warnings.simplefilter("ignore", DeprecationWarning)
        return os.fork()


def _die_at_step(step: int) -> None:
    """Let this process be killed at the given step of those that change the folder."""
    import ctypes

    left = [step]

    def dying(function):
        def call(*arguments, **options):
            left[0] -= 1
            if left[0] == 0:
                os.kill(os.getpid(), signal.SIGKILL)
            return function(*arguments, **options)

        return call

    for name in ("rename", "replace", "unlink", "link", "rmdir"):
        setattr(os, name, dying(getattr(os, name)))
    ctypes.CDLL = dying(ctypes.CDLL)


def test_files_of_others_stay(modes, tmp_path):
    out = tmp_path / "result"
    out.mkdir(mode=0o750)
    (out / "notes.txt").write_text("of the maker")
    (out / "latest").symlink_to("notes.txt")
    write_results(modes, out, pictures=False)
    write_results(modes, out, pictures=False)
    assert (out / "notes.txt").read_text() == "of the maker"
    assert (out / "latest").readlink() == Path("notes.txt")
    assert (out / "notes.txt").stat().st_nlink == 1
    assert out.stat().st_mode & 0o777 == 0o750
    assert [path.name for path in tmp_path.iterdir()] == ["result"]


def test_folders_that_cannot_be_exchanged_are_filled_file_by_file(modes, tmp_path, monkeypatch):
    deep, here, linked = tmp_path / "deep", tmp_path / "here", tmp_path / "linked"
    (deep / "recordings").mkdir(parents=True)
    (deep / "mode_07.webp").write_text("of an earlier run")
    here.mkdir()
    linked.symlink_to(here)
    monkeypatch.chdir(here)
    for out in (deep, here, linked, Path()):
        assert not may_swap(out)
        write_results(modes, out, pictures=False)
        assert whole(out) == 3
    assert (deep / "recordings").is_dir()
    assert not list(tmp_path.rglob(".*"))


def test_without_an_exchange_files_move_one_by_one(modes, tmp_path, monkeypatch):
    monkeypatch.setattr("modewright.viz.place._exchanged", lambda *_: False)
    write_results(modes, tmp_path / "r", pictures=False)
    (tmp_path / "r" / "mode_07.webp").write_text("of an earlier run")
    write_results(modes, tmp_path / "r", pictures=False)
    assert whole(tmp_path / "r") == 3


def test_an_exchange_that_fails_changes_nothing(tmp_path):
    old, new = tmp_path / "old", tmp_path / "new"
    old.mkdir()
    (old / "a").write_text("old")
    assert not swap(new, old, lambda _: True)
    assert content(old) == {"a": b"old"}


# --- two runs into one folder ---


def test_a_second_run_into_the_folder_is_told_at_once(case, tmp_path, capsys):
    out = tmp_path / "result"
    with scratch(out):
        assert main(["modes", str(case), "--out", str(out)]) == 1
        assert "another run is writing to" in told(capsys)
        # Other folders are free.
        refuse_busy(tmp_path / "other")
    assert not out.exists()
    refuse_busy(out)


def test_a_lock_taken_while_the_run_works_is_told(modes, tmp_path):
    out = tmp_path / "result"
    write_results(modes, out, pictures=False)
    before = content(out)
    with scratch(out), pytest.raises(ToolError, match="another run is writing"):
        write_results(modes, out, pictures=False)
    assert content(out) == before


def test_runs_at_once_into_one_folder_leave_one_whole_result(modes, tmp_path):
    out = tmp_path / "result"
    fewer = replace(modes, modes=modes.modes[:2], shapes=modes.shapes[:2])
    refused = []

    def write(what: Modes) -> None:
        for _ in range(4):
            try:
                write_results(what, out, pictures=False)
            except ToolError as error:
                refused.append(str(error))

    runs = [threading.Thread(target=write, args=(what,)) for what in (modes, fewer)]
    for run in runs:
        run.start()
    for run in runs:
        run.join()
    assert whole(out) in (2, 3)
    assert all("another run is writing" in text for text in refused)
    assert [path.name for path in tmp_path.iterdir()] == ["result"]


def test_what_a_dead_run_left_is_taken_over(tmp_path):
    with scratch(tmp_path / "a.json") as hidden:
        name = hidden.name
    (tmp_path / name / "new").mkdir(parents=True)
    (tmp_path / name / "new" / "half.json").write_text("{")
    with scratch(tmp_path / "a.json") as hidden:
        assert hidden.name == name
        assert not list(hidden.iterdir())
    assert not list(tmp_path.iterdir())


# --- disks and folders ---


def test_a_full_disk_ends_in_one_sentence(modes, tmp_path):
    """On a real file system of 64 kB where one can be mounted, else by a write that fails."""
    disk = tmp_path / "disk"
    disk.mkdir()
    mounted = subprocess.run(
        ["mount", "-t", "tmpfs", "-o", "size=64k", "tmpfs", str(disk)],
        check=False,
        capture_output=True,
    )
    if mounted.returncode:
        pytest.skip("no file system can be mounted here")
    try:
        out = disk / "result"
        out.mkdir()
        (out / "modes.json").write_text("old")
        with pytest.raises(ToolError, match=r"(?i)no space left on device"):
            write_results(modes, out, pictures=False)
        assert content(out) == {"modes.json": b"old"}
        assert [path.name for path in disk.iterdir()] == ["result"]
        with pytest.raises(InputError, match="no space left on device"):
            write_text(disk / "sweep.json", "x" * 100_000)
        assert [path.name for path in disk.iterdir()] == ["result"]
    finally:
        subprocess.run(["umount", str(disk)], check=True)


@pytest.mark.parametrize("name", ["write_npz", "write_modes_vtu", "write_modes_glb"])
def test_a_disk_that_fills_up_at_any_file(name, modes, tmp_path, monkeypatch):
    out = tmp_path / "result"
    write_results(modes, out, pictures=False)
    before = content(out)

    def full(path: Path, *_: object) -> None:
        path.write_bytes(b"half")
        raise OSError(28, "No space left on device", str(path))

    monkeypatch.setattr(results, name, full)
    with pytest.raises(ToolError, match="No space left on device"):
        write_results(modes, out, pictures=False)
    assert content(out) == before
    assert [path.name for path in tmp_path.iterdir()] == ["result"]


def test_a_disk_that_fills_up_while_pictures_are_drawn(modes, tmp_path, monkeypatch):
    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(results, "rendering_problem", lambda: None)
    monkeypatch.setattr("modewright.viz.pictures.save_gallery", full)
    with pytest.raises(ToolError, match="No space left on device"):
        write_results(modes, tmp_path / "result")
    assert not list(tmp_path.iterdir())


def test_a_read_only_folder_is_told_before_the_work(case, tmp_path, capsys, monkeypatch):
    monkeypatch.setattr(os, "access", lambda *_: False)
    monkeypatch.setattr("modewright.fem.modal.solve.solve", lambda *_, **__: pytest.fail("solved"))
    assert main(["modes", str(case), "--out", str(tmp_path / "result")]) == 2
    assert "permission denied" in told(capsys)


@pytest.mark.skipif(not Path("/proc/version").exists(), reason="no read-only file system known")
def test_a_file_system_that_takes_no_folders(case, capsys):
    assert main(["modes", str(case), "--out", "/proc/result", "--no-pictures"]) in (1, 2)
    err = told(capsys)
    assert "/proc/result" in err


# --- children ---


@pytest.mark.parametrize(
    ("script", "words"),
    [
        ("import os; os.kill(os.getpid(), 11)", "crashed (SIGSEGV)"),
        ("import sys; sys.stderr.write('out of luck\\n'); sys.exit(3)", "exit code 3: out of luck"),
        ("pass", "cannot be read"),
    ],
)
def test_a_crash_of_the_mesher_ends_in_one_sentence(script, words, case, capsys, monkeypatch):
    monkeypatch.setattr(mesher, "_COMMAND", (sys.executable, "-c", script))
    assert main(["modes", str(case)]) == 1
    assert words in told(capsys)


def test_a_time_limit_ends_in_one_sentence(case, capsys, monkeypatch):
    monkeypatch.setattr(mesher, "_COMMAND", (sys.executable, "-c", "import time; time.sleep(60)"))
    defaults = {**mesher.generate.__kwdefaults__, "time_limit": 0.5}
    monkeypatch.setattr(mesher.generate, "__kwdefaults__", defaults)
    assert main(["modes", str(case)]) == 1
    assert "took longer than 0.5 s" in told(capsys)


ORPHAN = """
import subprocess, sys, time, os
child = subprocess.Popen([sys.executable, "-c", "import sys, time; "
    "from modewright.geometry.orphan import end_with; end_with(int(sys.argv[1])); "
    "print(1, flush=True); time.sleep(60)", str(os.getpid())], stdout=subprocess.PIPE)
child.stdout.readline()
print(child.pid, flush=True)
time.sleep(60)
"""


def test_a_child_ends_with_its_killed_parent():
    parent = subprocess.Popen([sys.executable, "-c", ORPHAN], stdout=subprocess.PIPE, text=True)
    child = psutil.Process(int(parent.stdout.readline()))
    assert child.is_running()
    parent.kill()
    parent.communicate()
    _, alive = psutil.wait_procs([child], timeout=10)
    assert not alive


def test_a_child_whose_parent_died_first_ends_at_once():
    code = "from modewright.geometry.orphan import end_with; end_with(1); print('lives')"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout) == (1, "")


# --- what a case may do ---


def test_nothing_in_a_case_is_run_and_no_file_it_names_is_written(tmp_path, capsys, monkeypatch):
    monkeypatch.chdir(tmp_path)
    marker = tmp_path / "marker"
    folder = tmp_path / "cases"
    folder.mkdir()
    for value in (
        f"$(touch {marker})",
        f"`touch {marker}`",
        f"| touch {marker}.step",
        "__import__('os').system('touch marker')",
        "{marker.touch()}",
    ):
        text = json.dumps(value)
        path = folder / "case.toml"
        path.write_text(
            f'title = {text}\n[shape]\nsolid = {text}\n[material]\nname = "carbon steel"\n'
        )
        assert main(["modes", str(path)]) == 2
        told(capsys)
    assert not marker.exists()
    # A drawing is found beside the case or at an absolute path, not in the working folder,
    (tmp_path / "leaf.step").write_bytes(b"no step")
    path.write_text(
        'title = "a"\n[shape]\nsolid = "leaf.step"\n[material]\nname = "carbon steel"\n'
    )
    assert main(["modes", str(path)]) == 2
    assert "no such file" in told(capsys)
    # and read only.
    shutil.move(tmp_path / "leaf.step", folder / "leaf.step")
    (folder / "leaf.step").chmod(0o444)
    assert main(["modes", str(path)]) == 2
    assert "is no STEP file" in told(capsys)
    assert (folder / "leaf.step").read_bytes() == b"no step"
    assert sorted(p.name for p in folder.iterdir()) == ["case.toml", "leaf.step"]
