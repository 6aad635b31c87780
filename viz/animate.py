"""One looping animation for each mode."""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import Future, ThreadPoolExecutor
from pathlib import Path

import numpy as np

from .gallery import Caption, Gallery
from .palette import GREY
from .raster import FINER, Canvas, save_webp, shortened
from .scene import Scene
from .sheet import draw_scale_bar

#: Frames of one swing; a multiple of 4, so that both ends and both middles are among them.
FRAMES = 24
FRAME_MS = 60

_ROOM = (608, 460)
_MARGIN = 36
_HEAD, _FOOT = 104, 62


def phases() -> np.ndarray:
    """Return the part of the full motion shown by each of the first half's frames.

    The swing starts at its end (the still that a viewer may show instead), and
    the second half is the first one backwards: the loop has no jump.
    """
    return np.cos(2 * np.pi * np.arange(FRAMES // 2 + 1) / FRAMES)


def animation_name(number: int, count: int) -> str:
    """Return the file name of a mode's animation, ``mode_01.webp``."""
    return f"mode_{number:0{max(2, len(str(count)))}}.webp"


def draw_animations(
    gallery: Gallery, folder: Path, *, progress: Callable[[str], None] | None = None
) -> list[Path]:
    """Draw one animated WebP file for each mode and return their paths.

    Parameters
    ----------
    gallery : Gallery
    folder : Path
    progress : callable, optional
        Called with what is being drawn.
    """
    count = len(gallery.captions)
    width, height = _picture_size(gallery)
    written: list[Future[Path]] = []
    with (
        Scene(
            gallery.surface,
            gallery.view,
            width=width * FINER,
            height=height * FINER,
            line=1.3 * FINER,
        ) as scene,
        # Files are packed on one core while the next mode is drawn on the other.
        ThreadPoolExecutor(max_workers=1) as packer,
    ):
        for k, (caption, motion) in enumerate(zip(gallery.captions, gallery.motions, strict=True)):
            if progress:
                progress(f"animation {k + 1} of {count}")
            scene.set_mode(motion)
            ground = Canvas(width + 2 * _MARGIN, height + _HEAD + _FOOT)
            _label(ground, gallery, caption, scene.pixels_per_metre / FINER)
            half = []
            for phase in phases():
                frame = ground.copy()
                frame.paste(scene.picture(phase), _MARGIN, _HEAD, width, height)
                half.append(frame)
            frames = [*half, *half[-2:0:-1]]
            path = folder / animation_name(caption.number, count)
            written.append(packer.submit(save_webp, path, frames, FRAME_MS))
        return [future.result() for future in written]


def _picture_size(gallery: Gallery) -> tuple[int, int]:
    wide, tall = gallery.view.size
    scale = min(_ROOM[0] / wide, _ROOM[1] / tall)
    # A narrow body still needs room for its name.
    return max(420, round(scale * wide)), round(scale * tall)


def _label(canvas: Canvas, gallery: Gallery, caption: Caption, pixels_per_metre: float) -> None:
    room = canvas.width - 2 * _MARGIN
    name = shortened(f"{caption.number}   {caption.name}", 22, room, bold=True)
    canvas.text(_MARGIN, 48, name, 22, bold=True)
    end = canvas.text(_MARGIN, 80, caption.pitch, 21)
    detail = shortened(caption.detail, 17, room - end - 20)
    canvas.text(_MARGIN + end + 20, 80, detail, 17, colour=GREY)
    length, text = gallery.scale_bar(pixels_per_metre, 0.3 * room)
    y = canvas.height - 30
    draw_scale_bar(canvas, _MARGIN, y, length)
    canvas.text(_MARGIN + length + 12, y + 6, text, 17)
    title = shortened(gallery.title, 17, room - length - 150)
    canvas.text(canvas.width - _MARGIN, y + 6, title, 17, colour=GREY, anchor="rs")
