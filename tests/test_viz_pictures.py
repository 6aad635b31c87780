"""Pictures of a real part: the sheet, the animations, the chart, and a missing renderer."""

import os
import signal
import stat
import sys
from pathlib import Path

import matplotlib as mpl
import numpy as np
import pytest
from modewright.cases.reader import read_case
from modewright.fem.modal.modes import Modes
from modewright.fem.modal.solve import solve
from modewright.fem.study.sweep import Sweep, Track
from modewright.geometry.errors import ToolError
from modewright.viz import pictures, probe
from modewright.viz.animate import FRAMES
from modewright.viz.chart import _apart, sweep_chart
from modewright.viz.gallery import load_gallery, make_gallery, save_gallery
from modewright.viz.palette import ACCENT, motion_colours, rgb
from modewright.viz.raster import shortened, text_width, wrapped
from modewright.viz.results import write_results
from PIL import Image

CASE = """
title = "Bollard peg"
[shape]
family = "bar"
length = 60.0
diameter = 8.0
[material]
name = "carbon steel"
[mount]
kind = "clamped"
faces = ["root"]
[solve]
modes = 4
size = 6.0
"""


@pytest.fixture(scope="module")
def modes(tmp_path_factory) -> Modes:
    file = tmp_path_factory.mktemp("case") / "case.toml"
    file.write_text(CASE)
    return solve(read_case(file))


@pytest.fixture(scope="module")
def folder(modes, tmp_path_factory) -> Path:
    if probe.rendering_problem():
        pytest.skip(probe.rendering_problem())
    out = tmp_path_factory.mktemp("pictures")
    told: list[str] = []
    written = write_results(modes, out, progress=told.append)
    assert written.skipped == ()
    assert [path.name for path in written.files[5:]] == [
        "sheet.png",
        "mode_01.webp",
        "mode_02.webp",
        "mode_03.webp",
        "mode_04.webp",
    ]
    assert {path.name for path in out.iterdir()} == {path.name for path in written.files}
    assert "sheet, mode 4 of 4" in told
    assert told[-1] == "animation 4 of 4"
    return out


def near(pixels: np.ndarray, colour: tuple[int, int, int], within: int = 30) -> np.ndarray:
    return np.abs(pixels.astype(int) - colour).max(axis=-1) <= within


def test_sheet_is_wide_and_shows_the_parts(folder):
    with Image.open(folder / "sheet.png") as image:
        pixels = np.asarray(image.convert("RGB"))
    assert pixels.shape[1] >= 1600
    ground = np.all(pixels == 255, axis=-1)
    assert 0.4 < ground.mean() < 0.95
    # Bodies: light and dark of the one hue; a nodal line in the second bending mode.
    ramp = motion_colours()
    assert near(pixels, ramp[200]).sum() > 500
    assert near(pixels, rgb(ACCENT)).sum() > 50
    hue = pixels.astype(int)
    warm = (hue[..., 0] > hue[..., 2] + 20) & ~ground
    assert warm.mean() < 0.01


def test_animations_loop_without_a_jump(folder):
    for number in range(1, 5):
        with Image.open(folder / f"mode_0{number}.webp") as image:
            assert image.n_frames == FRAMES
            assert image.info["loop"] == 0
            frames = []
            for k in range(FRAMES):
                image.seek(k)
                frames.append(np.asarray(image.convert("RGB")).astype(int))
        # The second half is the first one backwards ...
        for k in range(1, FRAMES // 2):
            np.testing.assert_array_equal(frames[k], frames[FRAMES - k])
        # ... so the last frame is as near to the first as its neighbour in the middle of a run.
        steps = [np.abs(frames[k] - frames[k - 1]).mean() for k in range(FRAMES)]
        assert steps[0] == pytest.approx(steps[1])
        assert steps[0] < max(steps)
        assert max(steps) > 0.2
        assert np.all(frames[0][:8] == 255)
        assert (folder / f"mode_0{number}.webp").stat().st_size < 250_000


def test_gallery_survives_its_file(modes, tmp_path):
    gallery = make_gallery(modes)
    save_gallery(tmp_path / "gallery.npz", gallery)
    again = load_gallery(tmp_path / "gallery.npz")
    assert (again.title, again.subtitle) == ("Bollard peg", gallery.subtitle)
    assert "clamped" in gallery.subtitle
    assert again.captions == gallery.captions
    np.testing.assert_allclose(again.motions, gallery.motions, rtol=1e-6, atol=1e-9)
    np.testing.assert_array_equal(again.surface.triangles, gallery.surface.triangles)
    pixels, text = again.scale_bar(1e4, 150)
    assert text == "10 mm"
    assert pixels == pytest.approx(0.01 * 1e4 * np.linalg.norm(gallery.view.flat([1, 0, 0])))


def test_text_fits():
    name = "flatwise bending 12, prongs + - + -, and some more to be told"
    assert text_width(shortened(name, 20, 200), 20) <= 200
    lines = wrapped(name, 20, 200)
    assert " ".join(lines) == name
    assert all(text_width(line, 20) <= 200 for line in lines)


def test_text_is_found_without_importing_matplotlib():
    import subprocess

    code = (
        "import sys; from modewright.viz.raster import font; print(font(20).getname()[0]); "
        "assert 'matplotlib' not in sys.modules"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, timeout=60
    )
    assert done.stdout.strip() == "DejaVu Sans"


# --- a missing or a crashing renderer ---


@pytest.fixture
def crashing_python(tmp_path, monkeypatch) -> None:
    """A python for child processes that dies as the renderer does where OpenGL is missing."""
    script = tmp_path / "python"
    script.write_text("#!/bin/sh\nkill -SEGV $$\n")
    script.chmod(script.stat().st_mode | stat.S_IXUSR)
    monkeypatch.setattr(sys, "executable", str(script))


@pytest.mark.skipif(sys.platform == "win32", reason="a POSIX shell")
def test_a_renderer_that_crashes_is_one_sentence(crashing_python):
    problem, way = probe._probe.__wrapped__()
    assert f"signal {int(signal.SIGSEGV)}" in problem
    assert probe.PACKAGES in problem
    assert way == {}


@pytest.mark.skipif(sys.platform == "win32", reason="a POSIX shell")
def test_a_crash_while_drawing_loses_no_numbers(modes, tmp_path, monkeypatch, crashing_python):
    monkeypatch.setattr("modewright.viz.results.rendering_problem", lambda: None)
    monkeypatch.setattr(pictures, "rendering_environment", lambda: dict(os.environ))
    out = tmp_path / "out"
    written = write_results(modes, out)
    (sentence,) = written.skipped
    assert "crashed" in sentence
    assert len(written.files) == len(list(out.iterdir())) == 5


def test_a_folder_that_cannot_be_made_is_said(modes, tmp_path):
    (tmp_path / "file").write_text("")
    with pytest.raises(ToolError, match="cannot write"):
        write_results(modes, tmp_path / "file" / "out", pictures=False)


# --- the chart of a sweep ---


def track(name: str, *frequencies: float | None) -> Track:
    return Track(
        name=name,
        names=tuple(None if f is None else name for f in frequencies),
        frequencies=frequencies,
    )


@pytest.mark.parametrize("values", [(40.0, 50.0, 60.0), ("round", "square", "none")])
def test_chart_draws_every_track_and_leaves_no_settings(values, tmp_path):
    before = dict(mpl.rcParams)
    tracks = (
        track("flatwise bending 1", 196.0, 195.0, 194.0),
        track("torsion 1", 1700.0, 1500.0, None),
        track("never met", None, None, None),
    )
    sweep_chart(Sweep(key="slot_length", values=values, tracks=tracks), tmp_path / "sweep.png")
    assert dict(mpl.rcParams) == before
    with Image.open(tmp_path / "sweep.png") as image:
        pixels = np.asarray(image.convert("RGB"))
    assert pixels.shape[1] >= 1600
    assert near(pixels, rgb("#23609f"), 4).sum() > 1000
    assert near(pixels, rgb("#e2571e"), 4).sum() > 1000
    assert near(pixels, rgb("#3c8d5a"), 4).sum() == 0


def test_names_are_moved_apart_no_further_than_they_must():
    assert _apart([0.0, 100.0], 14) == [0.0, 100.0]
    assert _apart([10.0, 12.0], 14) == [4.0, 18.0]
    assert _apart([10.0, 10.0, 10.0, 60.0], 14) == [-4.0, 10.0, 24.0, 60.0]
    places = _apart([0.0, 9.0, 20.0, 21.0, 50.0], 14)
    assert np.all(np.diff(places) >= 14 - 1e-9)
