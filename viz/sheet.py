"""The sheet: every mode of a part on one picture."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path

from .gallery import Caption, Gallery
from .palette import ACCENT, GREY, HAIR, REST
from .raster import FINER, Canvas, shortened, text_width, wrapped
from .scene import Scene

_WIDTH = 1920
_MARGIN = 64
_GUTTER = 48
_NAME, _PITCH, _SMALL = 23, 23, 19
_TALLEST = 460

#: The most that is drawn in one row, by the shape (width over height) of a picture.
_COLUMNS = ((2.0, 3), (1.1, 4), (0.6, 5), (0.0, 6))


def draw_sheet(
    gallery: Gallery, path: Path, *, progress: Callable[[str], None] | None = None
) -> None:
    """Draw every mode, moved, with its name, pitch, nodal lines and outline at rest.

    Parameters
    ----------
    gallery : Gallery
    path : Path
        A PNG file, 1920 pixels wide.
    progress : callable, optional
        Called with what is being drawn.
    """
    count = len(gallery.captions)
    wide, tall = gallery.view.size
    columns = next(most for shape, most in _COLUMNS if wide / tall >= shape)
    columns = max(2, min(columns, count))
    width = (_WIDTH - 2 * _MARGIN - (columns - 1) * _GUTTER) // columns
    height = min(_TALLEST, round(width * tall / wide))
    rows = math.ceil(count / columns)
    names = [_name_lines(caption, width) for caption in gallery.captions]
    head, foot, label = 158, 112, 26
    tops, y = [], head
    for row in range(rows):
        lines = max(len(name) for name in names[row * columns : (row + 1) * columns])
        tops.append((y, y + label + 30 * lines + 44))
        y = tops[-1][1] + height + 34
    canvas = Canvas(_WIDTH, y + foot)
    _head(canvas, gallery)
    with Scene(
        gallery.surface, gallery.view, width=width * FINER, height=height * FINER, line=1.3 * FINER
    ) as scene:
        for k, (caption, motion) in enumerate(zip(gallery.captions, gallery.motions, strict=True)):
            if progress:
                progress(f"sheet, mode {k + 1} of {count}")
            x = _MARGIN + (k % columns) * (width + _GUTTER)
            top, picture = tops[k // columns]
            scene.set_mode(motion)
            canvas.paste(scene.picture(1.0), x, picture, width, height)
            canvas.line([(x, top), (x + width, top)], colour=HAIR, width=1.5)
            _label(canvas, caption, names[k], x, top + label + 8, width)
        _foot(canvas, gallery, scene.pixels_per_metre / FINER, y + 54)
    canvas.save_png(path)


def _head(canvas: Canvas, gallery: Gallery) -> None:
    canvas.text(_MARGIN, 76, gallery.title, 40, bold=True)
    canvas.text(_MARGIN, 116, gallery.subtitle, 21, colour=GREY)


def _name_lines(caption: Caption, width: float) -> list[str]:
    return wrapped(caption.name, _NAME, width - _indent(), bold=True)


def _indent() -> float:
    """Return the room that a mode's number takes, pixels."""
    return text_width("00", _NAME) + 18


def _label(
    canvas: Canvas, caption: Caption, name: list[str], x: int, y: float, width: float
) -> None:
    canvas.text(x, y, str(caption.number), _NAME, colour=GREY)
    left = x + _indent()
    for line in name:
        canvas.text(left, y, line, _NAME, bold=True)
        y += 30
    y += 2
    start = left + canvas.text(left, y, caption.pitch, _PITCH) + 22
    detail, room = caption.detail, x + width - start
    if text_width(detail, _SMALL) > room:
        detail = detail.replace(" cents", " ct")
    canvas.text(start, y, shortened(detail, _SMALL, room), _SMALL, colour=GREY)


def _foot(canvas: Canvas, gallery: Gallery, pixels_per_metre: float, y: float) -> None:
    """Draw the keys: scale, colours, lines."""
    x = float(_MARGIN)
    canvas.line([(x, y - 54), (_WIDTH - _MARGIN, y - 54)], colour=HAIR, width=1.5)
    length, text = gallery.scale_bar(pixels_per_metre, 230)
    draw_scale_bar(canvas, x, y, length)
    x += length + 14
    x += canvas.text(x, y + 7, text, _SMALL) + 70
    x += canvas.text(x, y + 7, "still", _SMALL) + 14
    canvas.ramp(round(x), round(y) - 8, 190, 17)
    x += 190 + 14
    x += canvas.text(x, y + 7, "moves most", _SMALL) + 70
    for colour, width, meaning in ((ACCENT, 3.2, "nodal line"), (REST, 1.6, "at rest")):
        canvas.line([(x, y), (x + 44, y)], colour=colour, width=width)
        x += 44 + 14
        x += canvas.text(x, y + 7, meaning, _SMALL) + 70
    canvas.text(_WIDTH - _MARGIN, y + 7, "motion enlarged", _SMALL, colour=GREY, anchor="rs")


def draw_scale_bar(canvas: Canvas, x: float, y: float, length: float) -> None:
    """Draw a plain bar with end ticks, its left end at (x, y)."""
    canvas.line([(x, y), (x + length, y)], width=2)
    for end in (x, x + length):
        canvas.line([(end, y - 6), (end, y + 6)], width=2)
