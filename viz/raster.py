"""Pixels: text and lines on rendered pictures, PNG and WebP files (the home of Pillow)."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache
from importlib.util import find_spec
from pathlib import Path

import numpy as np
from PIL import Image, ImageDraw, ImageFont

from .palette import ACCENT, GREY, INK, REST, WHITE, motion_colours, rgb

#: Pictures are drawn this many times larger and then made small: smooth edges.
FINER = 2

#: Colours of an animation.
_COLOURS = 120
_CLOSE = 12


@cache
def font(size: int, *, bold: bool = False) -> ImageFont.FreeTypeFont | ImageFont.ImageFont:
    """Return the type that all pictures use, `size` pixels high.

    DejaVu Sans (it has the letters of most languages) lies with matplotlib;
    it is found without importing that.
    """
    spec = find_spec("matplotlib")
    for place in spec.submodule_search_locations or [] if spec else []:
        name = "DejaVuSans-Bold.ttf" if bold else "DejaVuSans.ttf"
        path = Path(place) / "mpl-data" / "fonts" / "ttf" / name
        if path.is_file():
            return ImageFont.truetype(str(path), size)
    return ImageFont.load_default(size)


class Canvas:
    """A picture being drawn on, white at first.

    Parameters
    ----------
    width, height : int, pixels
    """

    def __init__(self, width: int, height: int) -> None:
        self.image = Image.new("RGB", (width, height), WHITE)
        self._draw = ImageDraw.Draw(self.image)

    def copy(self) -> Canvas:
        """Return a picture of its own that looks the same."""
        other = Canvas(1, 1)
        other.image = self.image.copy()
        other._draw = ImageDraw.Draw(other.image)
        return other

    @property
    def width(self) -> int:
        """Width in pixels."""
        return self.image.width

    @property
    def height(self) -> int:
        """Height in pixels."""
        return self.image.height

    def paste(self, pixels: np.ndarray, x: int, y: int, width: int, height: int) -> None:
        """Lay a picture (h, w, 3) uint8 on, resized to `width` by `height`."""
        picture = Image.fromarray(pixels)
        if picture.size != (width, height):
            picture = picture.resize((width, height), Image.Resampling.BOX)
        self.image.paste(picture, (x, y))

    def text(
        self,
        x: float,
        y: float,
        text: str,
        size: int,
        *,
        colour: str = INK,
        bold: bool = False,
        anchor: str = "ls",
    ) -> float:
        """Write one line; (x, y) is its start on the base line (or see Pillow's anchors).

        Returns
        -------
        float
            Its width in pixels.
        """
        face = font(size, bold=bold)
        self._draw.text((x, y), text, fill=colour, font=face, anchor=anchor)
        return face.getlength(text)

    def line(
        self, points: Sequence[tuple[float, float]], *, colour: str = INK, width: float = 2
    ) -> None:
        """Draw a line with smooth edges through points in pixels."""
        at = np.asarray(points, dtype=float)
        margin = int(np.ceil(width)) + 1
        left, top = (int(v) for v in np.floor(at.min(axis=0)) - margin)
        right, bottom = (int(v) for v in np.ceil(at.max(axis=0)) + margin)
        finer = 4
        mask = Image.new("L", ((right - left) * finer, (bottom - top) * finer), 0)
        scaled = [tuple((p - (left, top)) * finer) for p in at]
        ImageDraw.Draw(mask).line(scaled, fill=255, width=round(width * finer), joint="curve")
        mask = mask.resize((right - left, bottom - top), Image.Resampling.BOX)
        self.image.paste(colour, (left, top), mask)

    def ramp(self, x: int, y: int, width: int, height: int) -> None:
        """Draw the colours from still to moving most, left to right."""
        strip = np.broadcast_to(motion_colours(width)[None], (height, width, 3))
        self.image.paste(Image.fromarray(np.ascontiguousarray(strip)), (x, y))

    def save_png(self, path: Path) -> None:
        """Write the picture as PNG."""
        self.image.save(path, format="PNG", compress_level=6)


def text_width(text: str, size: int, *, bold: bool = False) -> float:
    """Return the width of a line of text, pixels."""
    return font(size, bold=bold).getlength(text)


def shortened(text: str, size: int, width: float, *, bold: bool = False) -> str:
    """Return the text, cut with an ellipsis where it is wider than `width` pixels."""
    if text_width(text, size, bold=bold) <= width:
        return text
    while text and text_width(text + "…", size, bold=bold) > width:
        text = text[:-1]
    return text.rstrip(" ,") + "…"


def wrapped(text: str, size: int, width: float, *, bold: bool = False) -> list[str]:
    """Return the text in lines no wider than `width` pixels, broken at blanks."""
    lines: list[str] = []
    for word in text.split():
        joined = f"{lines[-1]} {word}" if lines else word
        if lines and text_width(joined, size, bold=bold) <= width:
            lines[-1] = joined
        else:
            lines.append(word)
    return [shortened(line, size, width, bold=bold) for line in lines]


def save_webp(path: Path, frames: Sequence[Canvas], milliseconds: int) -> Path:
    """Write frames as an animation that runs for ever, each shown for so long; return `path`.

    One palette for all frames and no loss after it: thin coloured lines stay whole,
    and the file is smaller than a lossy one.
    """
    palette = _palette(frames[0].image)
    first, *others = (
        frame.image.quantize(palette=palette, dither=Image.Dither.NONE).convert("RGB")
        for frame in frames
    )
    first.save(
        path,
        format="WEBP",
        save_all=True,
        append_images=others,
        duration=milliseconds,
        loop=0,
        lossless=True,
        quality=30,
        method=2,
    )
    return path


def _palette(image: Image.Image) -> Image.Image:
    """Return a palette for pictures like this one, the colours of ground and lines exact."""
    exact = np.array([rgb(colour) for colour in (WHITE, INK, ACCENT, REST, GREY)])
    found = image.quantize(_COLOURS, dither=Image.Dither.NONE).getpalette() or []
    common = np.array(found, dtype=int).reshape(-1, 3)[:_COLOURS]
    # Close neighbours of the exact colours go: the search for the nearest is coarse.
    near = np.abs(common[:, None] - exact[None]).max(axis=2).min(axis=1) < _CLOSE
    palette = Image.new("P", (1, 1))
    palette.putpalette(np.vstack([exact, common[~near]]).astype(np.uint8).tobytes())
    return palette
