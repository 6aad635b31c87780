"""Line charts (the home of matplotlib)."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.ticker import FixedLocator, FuncFormatter, NullLocator

from .palette import GREY, HAIR, INK, LINES

if TYPE_CHECKING:
    from ..fem.study.sweep import Sweep

_DPI = 160
_WIDTH = 10.4
_SMALL, _TEXT, _TITLE = 9.5, 10.5, 15

#: Room between two names at the ends of lines, points.
_NAME_HEIGHT = 14.0


def sweep_chart(sweep: Sweep, path: Path, *, label: str | None = None) -> None:
    """Draw the frequencies of followed modes against what changes, as a PNG file.

    Frequency is on a logarithmic scale, so that equal steps are equal intervals;
    the rules are octaves of A. Each line carries its name at its end.

    Parameters
    ----------
    sweep : Sweep
    path : Path
    label : str, optional
        What changes, with its unit; default the key in words.
    """
    x, labels = _abscissa(sweep)
    what = label or _axis_name(sweep)
    tracks = sorted(
        (track for track in sweep.tracks if any(f is not None for f in track.frequencies)),
        key=lambda track: _last(track.frequencies),
    )
    height = max(5.2, 1.9 + 0.27 * len(tracks))
    figure = Figure(figsize=(_WIDTH, height), dpi=_DPI, facecolor="white")
    canvas = FigureCanvasAgg(figure)
    axes = figure.add_axes((0.085, 0.95 / height, 0.56, 1.0 - 1.85 / height))
    ends = []
    for k, track in enumerate(tracks):
        y = np.array([np.nan if f is None else f for f in track.frequencies], dtype=float)
        colour = LINES[k % len(LINES)]
        axes.plot(x, y, color=colour, linewidth=2.0, solid_capstyle="round", clip_on=False)
        axes.plot(x, y, color=colour, marker="o", markersize=4.2, linestyle="none", clip_on=False)
        known = np.flatnonzero(np.isfinite(y))[-1]
        ends.append((float(x[known]), float(y[known]), track.name, colour))
    _style(axes, x, labels)
    axes.set_xlabel(what, color=INK, fontsize=_TEXT, labelpad=8)
    canvas.draw()
    _names(axes, ends)
    figure.text(
        0.085,
        1 - 0.34 / height,
        f"Frequencies against {what}",
        color=INK,
        fontsize=_TITLE,
        fontweight="bold",
        va="center",
    )
    figure.text(
        0.085,
        1 - 0.66 / height,
        "Hz on a logarithmic scale: equal heights are equal intervals",
        color=GREY,
        fontsize=_SMALL,
        va="center",
    )
    canvas.print_png(path)


def _abscissa(sweep: Sweep) -> tuple[np.ndarray, list[str]]:
    """Return positions along the axis and their texts; words stand at equal steps."""
    values = sweep.values
    texts = [value if isinstance(value, str) else f"{value:g}" for value in values]
    if any(isinstance(value, str) for value in values):
        return np.arange(len(values), dtype=float), texts
    return np.array(values, dtype=float), texts


def _last(frequencies: tuple[float | None, ...]) -> float:
    return [f for f in frequencies if f is not None][-1]


def _axis_name(sweep: Sweep) -> str:
    """Return the key path as words, with its unit: ``slot_length`` becomes ``slot length, mm``."""
    words = sweep.key.removeprefix("shape.").replace("_", " ").replace(".", " ")
    return f"{words}, {sweep.unit}" if sweep.unit else words


def _style(axes: Axes, x: np.ndarray, labels: list[str]) -> None:
    axes.set_yscale("log")
    axes.set_xlim(float(x.min()), float(x.max()))
    low, high = axes.get_ylim()
    axes.set_ylim(low / 1.06, high * 1.06)
    for side in ("top", "right", "left"):
        axes.spines[side].set_visible(False)
    axes.spines["bottom"].set_color(GREY)
    axes.spines["bottom"].set_position(("outward", 8))
    axes.tick_params(axis="both", colors=INK, labelsize=_SMALL, length=0, pad=6)
    axes.tick_params(axis="x", length=4, color=GREY)
    shown = slice(None, None, max(1, len(x) // 9))
    axes.xaxis.set_major_locator(FixedLocator(list(x[shown])))
    texts = dict(zip(x.tolist(), labels, strict=True))
    axes.xaxis.set_major_formatter(FuncFormatter(lambda v, _: texts.get(v, f"{v:g}")))
    ticks = _ticks(*axes.get_ylim())
    axes.yaxis.set_major_locator(FixedLocator([hz for hz, _ in ticks]))
    axes.yaxis.set_minor_locator(NullLocator())
    names = dict(ticks)
    axes.yaxis.set_major_formatter(FuncFormatter(lambda v, _: names.get(v, "")))
    axes.grid(axis="y", color=HAIR, linewidth=0.7)
    axes.set_axisbelow(True)


def _ticks(low: float, high: float) -> list[tuple[float, str]]:
    """Return frequencies to rule and their texts: octaves of A, or round ones in a short range."""
    first, last = int(np.ceil(np.log2(low / 440))), int(np.floor(np.log2(high / 440)))
    octaves = [(440 * 2.0**k, f"A{4 + k}   {440 * 2.0**k:g}") for k in range(first, last + 1)]
    if len(octaves) > 2:
        return octaves
    count = 5
    step = (high - low) / count
    power = 10.0 ** np.floor(np.log10(step))
    step = next(s * power for s in (1, 2, 5, 10) if s * power >= step)
    ticks = np.arange(np.ceil(low / step), np.floor(high / step) + 1) * step
    return [(float(hz), f"{hz:g}") for hz in ticks]


def _names(axes: Axes, ends: list[tuple[float, float, str, str]]) -> None:
    """Write each line's name beside its end, moved apart where they would touch."""
    scale = 72.0 / _DPI
    right = axes.transData.transform((axes.get_xlim()[1], 1.0))[0] * scale
    at = [axes.transData.transform((x, y)) * scale for x, y, _, _ in ends]
    wanted = [place[1] for place in at]
    heights = _apart(wanted, _NAME_HEIGHT)
    for (x, y, name, colour), place, height in zip(ends, at, heights, strict=True):
        axes.annotate(
            f"{name}   {y:.1f}",
            (x, y),
            xytext=(right - place[0] + 26, height - place[1]),
            textcoords="offset points",
            color=colour,
            fontsize=_SMALL,
            va="center",
            annotation_clip=False,
            arrowprops={
                "arrowstyle": "-",
                "color": colour,
                "linewidth": 0.7,
                "alpha": 0.6,
                "shrinkA": 2,
                "shrinkB": 5,
            },
        )


def _apart(wanted: list[float], gap: float) -> list[float]:
    """Return ascending places at least `gap` apart, as near as can be to those wanted.

    Groups that would touch are merged and centred on their mean.
    """
    groups: list[tuple[float, int]] = []
    for place in wanted:
        centre, count = place, 1
        while groups:
            before, size = groups[-1]
            if centre - gap * (count - 1) / 2 - (before + gap * (size - 1) / 2) >= gap:
                break
            groups.pop()
            centre = (centre * count + before * size) / (count + size)
            count += size
        groups.append((centre, count))
    return [centre + gap * (k - (count - 1) / 2) for centre, count in groups for k in range(count)]
