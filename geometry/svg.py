"""SVG drawings to plane segments: the home of svgelements."""

from __future__ import annotations

import io
import math
import re
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import numpy as np
import svgelements

from .curve import at, moved
from .errors import InputError
from .solid import Arc, Circle, EllipseArc, Line, Segment
from .spline import bezier
from .unit import UNITS

#: The library's types say too little of what its objects hold.
svg: Any = svgelements

#: Millimetres of each unit a drawing's width may be in (CSS Values and Units, sec. 6.2).
_PHYSICAL = {"mm": 1.0, "cm": 10.0, "q": 0.25, "in": 25.4, "pt": 25.4 / 72, "pc": 25.4 / 6}

#: Millimetres in a CSS pixel: 1/96 inch.
_PX = 25.4 / 96

#: Elements that are never painted where they stand; the library would draw them.
_UNPAINTED = ("clipPath", "mask", "marker", "pattern", "linearGradient", "text", "image")


def read_svg(path: Path, unit: str | None = None) -> list[Segment]:
    """Return the edges drawn in an SVG file, in mm, with y upward.

    The drawing's width and viewBox give the scale; a width in pixels, or none,
    means 1/96 inch for each, as CSS has it, unless `unit` says what one user
    unit is. x = y = 0 is the lower left corner of the viewBox (of the page
    where there is none). Cubic and quadratic Bezier curves and elliptic arcs
    are exact; fills, strokes and their widths are not looked at; text, images,
    and what is hidden or only defined are passed over.

    Parameters
    ----------
    path : Path
    unit : str, optional
        Length of one user unit, where the drawing gives no physical width.

    Raises
    ------
    InputError
        If the file is no SVG drawing, contradicts `unit`, or draws nothing.
    """
    root = _root(path)
    scale, low, high = _page(root, unit)
    _strip(root, {v for e in root.iter() for k, v in e.attrib.items() if k.endswith("href")})
    # The library is left no page to fit: its coordinates are then user units.
    for key in ("width", "height", "viewBox", "x", "y", "preserveAspectRatio"):
        root.attrib.pop(key, None)
    try:
        text = ElementTree.tostring(root, encoding="unicode")
        drawing = svg.SVG.parse(io.StringIO(text), reify=False, ppi=96)
        segments = [s for shape in _shapes(drawing) for s in _segments(shape)]
    except (ValueError, TypeError, KeyError, IndexError, AttributeError, ZeroDivisionError) as e:
        raise InputError(f"cannot be read as an SVG drawing ({str(e).strip() or 'damaged'})") from e
    if not segments:
        raise InputError("draws no outline", allowed="path, rect, circle, ellipse, polygon, ...")
    flip = np.diag((scale, -scale))
    shift = np.array([-low * scale, high * scale])
    return [moved(s, flip, shift) for s in segments]


def _root(path: Path) -> ElementTree.Element:
    try:
        root = ElementTree.fromstring(path.read_bytes())
    except (ElementTree.ParseError, OSError, ValueError, LookupError) as error:
        raise InputError(f"cannot be read as an SVG drawing ({error})") from None
    if _tag(root) != "svg":
        raise InputError(f"is no SVG drawing: its outermost element is {_tag(root)!r}")
    return root


def _tag(element: ElementTree.Element) -> str:
    return element.tag.rpartition("}")[2] if isinstance(element.tag, str) else ""


def _strip(element: ElementTree.Element, used: set[str]) -> None:
    """Remove what is never painted, and what is hidden; `used` are the places referred to."""
    for child in list(element):
        style = child.get("style", "").replace(" ", "")
        hidden = (
            child.get("display") == "none"
            or child.get("visibility") in ("hidden", "collapse")
            or "display:none" in style
            or "visibility:hidden" in style
        )
        if hidden or _tag(child) in _UNPAINTED:
            element.remove(child)
            continue
        if _tag(child) == "symbol":
            _define(element, child, used)
        _strip(child, used)


def _define(parent: ElementTree.Element, symbol: ElementTree.Element, used: set[str]) -> None:
    """Turn a symbol into a defined group: the library would paint it where it stands."""
    if symbol.get("viewBox") and f"#{symbol.get('id')}" in used:
        raise InputError(
            "holds a symbol with a viewBox of its own; draw it as a plain group",
            value=symbol.get("id"),
        )
    space = symbol.tag.rpartition("symbol")[0]
    place = list(parent).index(symbol)
    parent.remove(symbol)
    symbol.tag = space + "g"
    shelf = ElementTree.Element(space + "defs")
    shelf.append(symbol)
    parent.insert(place, shelf)


def _page(root: ElementTree.Element, unit: str | None) -> tuple[float, float, float]:
    """Return mm per user unit, and the user x and y of the page's lower left corner."""
    width, physical = _length(root.get("width"))
    height, _ = _length(root.get("height"))
    box = root.get("viewBox")
    low, high, scale = 0.0, height or 0.0, 1.0
    if box is not None:
        try:
            x, y, w, h = (float(v) for v in re.split(r"[\s,]+", box.strip()))
        except ValueError:
            raise InputError("has a viewBox that is not four numbers", value=box) from None
        if not (w > 0 and h > 0):
            raise InputError("has a viewBox without a size", value=box)
        low, high = x, y + h
        ratios = [size / side for size, side in ((width, w), (height, h)) if size]
        if len(ratios) == 2 and not math.isclose(*ratios, rel_tol=2e-3):
            if root.get("preserveAspectRatio", "").strip().startswith("none"):
                raise InputError("is stretched: width and height do not fit its viewBox")
            ratios = [min(ratios)]
        scale = ratios[0] if ratios else 1.0
    if unit is None:
        return scale * _PX, low, high
    if physical:
        raise InputError(
            f"says that its width is {root.get('width')}; drop the key unit", value=unit
        )
    return UNITS[unit], low, high


def _length(text: str | None) -> tuple[float | None, bool]:
    """Return a length in pixels (None where there is none), and whether it has a unit."""
    found = re.fullmatch(r"\s*([+-]?[\d.]+(?:[eE][+-]?\d+)?)\s*([a-zA-Z]*|%)\s*", text or "")
    if found is None or found[2] == "%":
        return None, False
    unit = found[2].lower()
    if unit not in ("", "px", *_PHYSICAL):
        raise InputError("has a width in an unknown unit", value=text)
    value = float(found[1]) * _PHYSICAL.get(unit, _PX) / _PX
    if not value > 0:
        raise InputError("has a width or height that is not over 0", value=text)
    return value, unit in _PHYSICAL


def _shapes(drawing: Any) -> Iterator[Any]:
    for element in drawing.elements():
        if isinstance(element, svg.Shape):
            yield element


def _segments(shape: Any) -> Iterator[Segment]:
    """Yield a shape's segments in user units, its transform applied."""
    t = shape.transform
    matrix, shift = np.array([[t.a, t.c], [t.b, t.d]]), np.array([t.e, t.f])
    if abs(np.linalg.det(matrix)) < 1e-12:
        raise InputError("holds a shape that its transform flattens")
    if isinstance(shape, (svg.Circle, svg.Ellipse)) and math.isclose(shape.rx, shape.ry):
        centre = (float(shape.cx), float(shape.cy))
        yield moved(Circle(centre=centre, radius=float(shape.rx)), matrix, shift)
        return
    for piece in shape.segments(transformed=False):
        segment = _segment(piece)
        if segment is not None:
            yield moved(segment, matrix, shift)


def _segment(piece: Any) -> Segment | None:
    """Return one piece of a path, or None where it has no length."""
    if isinstance(piece, svg.Move) or piece.start is None or piece.end is None:
        return None
    if isinstance(piece, svg.Arc):
        return _arc(piece)
    if isinstance(piece, svg.CubicBezier):
        return bezier(_array(piece.start, piece.control1, piece.control2, piece.end))
    if isinstance(piece, svg.QuadraticBezier):
        return bezier(_array(piece.start, piece.control, piece.end))
    (x0, y0), (x1, y1) = _array(piece.start, piece.end).tolist()
    return None if (x0, y0) == (x1, y1) else Line(start=(x0, y0), end=(x1, y1))


def _arc(piece: Any) -> Segment | None:
    centre, first, second = _array(piece.center, piece.prx, piece.pry)
    major, minor = first - centre, second - centre
    length = float(np.linalg.norm(major))
    if length == 0 or not np.any(minor):
        return None
    side = math.copysign(1.0, major[0] * minor[1] - major[1] * minor[0])
    ratio = side * float(np.linalg.norm(minor)) / length
    start = _array(piece.start)[0] - centre
    # The parameter of the start: its components along the two half axes.
    angle = math.atan2(
        float(start @ minor) / float(minor @ minor), float(start @ major) / length**2
    )
    sweep = float(piece.sweep) * side
    arc = EllipseArc(
        centre=(float(centre[0]), float(centre[1])),
        major=(float(major[0]), float(major[1])),
        ratio=ratio,
        first=angle,
        last=angle + abs(sweep),
    )
    if sweep < 0:
        arc = replace(arc, ratio=-ratio, first=-angle, last=-angle - sweep)
    if math.isclose(abs(ratio), 1.0, rel_tol=1e-9) and abs(sweep) < 2 * math.pi - 1e-9:
        start, through, end = ((float(x), float(y)) for x, y in at(arc, np.array([0, 0.5, 1])))
        return Arc(start=start, through=through, end=end)
    return arc


def _array(*points: Any) -> np.ndarray:
    return np.array([(float(p.x), float(p.y)) for p in points])
