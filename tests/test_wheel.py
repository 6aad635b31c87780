"""The wheel holds every package and the examples, and nothing generic at its top."""

import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]


@pytest.fixture(scope="module")
def wheel(tmp_path_factory):
    folder = tmp_path_factory.mktemp("wheel")
    # A copy, so that the build leaves nothing in the tree.
    copy = folder / "tree"
    copy.mkdir()
    listed = subprocess.run(
        ["git", "ls-files", "-co", "--exclude-standard"],
        cwd=ROOT,
        capture_output=True,
        text=True,
        check=True,
    ).stdout.splitlines()
    for name in listed:
        if (ROOT / name).is_file():
            (copy / name).parent.mkdir(parents=True, exist_ok=True)
            (copy / name).write_bytes((ROOT / name).read_bytes())
    options = "-q --no-deps --no-build-isolation --disable-pip-version-check".split()
    subprocess.run(
        [sys.executable, "-m", "pip", "wheel", *options, "-w", str(folder), str(copy)],
        check=True,
        capture_output=True,
    )
    (built,) = folder.glob("*.whl")
    return built


def test_wheel_has_all_modules_under_one_name(wheel):
    names = zipfile.ZipFile(wheel).namelist()
    tops = {name.split("/")[0] for name in names if ".dist-info/" not in name}
    assert tops == {"modewright"}
    for package in ("geometry", "fem", "viz", "cases"):
        for path in (ROOT / package).rglob("*.py"):
            assert f"modewright/{path.relative_to(ROOT).as_posix()}" in names
        assert f"modewright/{package}/py.typed" in names
    for example in (ROOT / "cases/examples").rglob("case.toml"):
        assert f"modewright/{example.relative_to(ROOT).as_posix()}" in names


def test_an_example_runs_from_the_wheel(wheel, tmp_path):
    with zipfile.ZipFile(wheel) as archive:
        archive.extractall(tmp_path / "site")
    case = tmp_path / "site/modewright/cases/examples/low_water_tine/case.toml"
    code = (
        f"import sys; sys.path.insert(0, {str(tmp_path / 'site')!r});"
        # The editable install's finder would answer first.
        "sys.meta_path[:] = [f for f in sys.meta_path if 'ditable' not in repr(f)];"
        "import modewright.cases.command as command;"
        f"assert {str(tmp_path)!r} in command.__file__, command.__file__;"
        f"sys.argv[1:] = ['modes', {str(case)!r}, '--size', '4', '--modes', '3', '--json'];"
        "command.main()"
    )
    answer = subprocess.run(
        [sys.executable, "-I", "-c", code], capture_output=True, text=True, cwd=tmp_path
    )
    assert answer.returncode == 0, answer.stderr
    assert '"modewright-modes"' in answer.stdout
