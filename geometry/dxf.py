"""DXF drawings to plane segments: the home of ezdxf."""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from pathlib import Path

import numpy as np
from ezdxf import recover
from ezdxf.document import Drawing
from ezdxf.entities.dxfgfx import DXFGraphic
from ezdxf.lldxf.const import DXFError

from .errors import InputError
from .solid import Arc, Circle, EllipseArc, Line, Point2, Segment
from .spline import smooth_pieces
from .unit import UNITS

#: Millimetres of each drawing unit, by the code of the header variable $INSUNITS
#: (Autodesk, DXF Reference, HEADER section; 0 is "unitless").
_INSUNITS = {
    1: 25.4,
    2: 304.8,
    4: 1.0,
    5: 10.0,
    6: 1000.0,
    8: 25.4e-6,
    9: 0.0254,
    10: 914.4,
    13: 1e-3,
    14: 100.0,
    21: 1200 / 3937 * 1000,
}

#: Entities that draw edges.
_DRAWN = ("LINE", "ARC", "CIRCLE", "ELLIPSE", "LWPOLYLINE", "POLYLINE", "SPLINE")

#: Entities that a flat outline cannot be made of; refused rather than passed over.
_REFUSED = ("REGION", "BODY", "3DSOLID", "SURFACE", "MESH", "3DFACE", "MLINE")

#: Heights that differ by less than this share of the drawing's extent are one plane.
_FLAT = 1e-6


def read_dxf(path: Path, unit: str | None = None) -> list[Segment]:
    """Return the edges drawn in a DXF file's model space, in mm.

    Arcs and splines stay what they are; polylines and blocks are taken apart.
    Text, dimensions, hatches and points are passed over, and so are layers that
    are off or frozen and what is marked invisible.

    Parameters
    ----------
    path : Path
    unit : str, optional
        Unit of a drawing that does not say its own (`geometry.unit.UNITS`).

    Raises
    ------
    InputError
        If the file is no drawing, has no unit or another than `unit`, or draws
        nothing flat.
    """
    drawing = _opened(path)
    scale = _scale(drawing, unit)
    hidden = {
        layer.dxf.name.lower()
        for layer in drawing.layers
        if layer.is_off() or layer.is_frozen() or layer.dxf.name.lower() == "defpoints"
    }
    others: set[str] = set()
    pen = _Pen()
    for entity in _entities(drawing.modelspace(), hidden, None):
        kind = entity.dxftype()
        if kind in _DRAWN:
            pen.draw(entity, scale)
        elif kind in _REFUSED:
            raise InputError(f"holds a {kind}, which is no outline", allowed=", ".join(_DRAWN))
        else:
            others.add(kind)
    if not pen.segments:
        raise InputError(
            "draws no outline on a visible layer"
            + (f" (only {', '.join(sorted(others))})" if others else ""),
            allowed=", ".join(_DRAWN),
        )
    pen.check_flat()
    return pen.segments


def _opened(path: Path) -> Drawing:
    try:
        drawing, audit = recover.readfile(str(path))
    except (OSError, DXFError, ValueError, KeyError, IndexError, TypeError) as error:
        reason = str(error).strip().splitlines()
        raise InputError(
            "cannot be read as a DXF drawing" + (f" ({reason[0]})" if reason else "")
        ) from None
    if audit.has_errors:
        raise InputError(f"is a damaged DXF drawing ({audit.errors[0].message})")
    return drawing


def _scale(drawing: Drawing, unit: str | None) -> float:
    """Return millimetres per drawing unit."""
    code = drawing.header.get("$INSUNITS", 0)
    if code == 0:
        if unit is None:
            raise InputError(
                'does not say its unit ($INSUNITS is 0 or absent): add, for example, unit = "mm"',
                allowed=", ".join(UNITS),
            )
        return UNITS[unit]
    if code not in _INSUNITS:
        raise InputError("is drawn in a unit that no part is made in", value=f"$INSUNITS {code}")
    scale = _INSUNITS[code]
    if unit is not None and not math.isclose(scale, UNITS[unit], rel_tol=1e-5):
        raise InputError(
            f"says that its unit is {scale:g} mm, which is not the unit given; drop the key unit",
            value=unit,
        )
    return scale


def _entities(
    entities: Iterable[DXFGraphic], hidden: set[str], within: str | None
) -> Iterator[DXFGraphic]:
    """Yield visible entities, those of blocks in place; layer 0 in a block is the block's."""
    for entity in entities:
        layer = str(entity.dxf.get("layer", "0")).lower()
        if layer == "0" and within is not None:
            layer = within
        if layer in hidden or entity.dxf.get("invisible", 0):
            continue
        if entity.dxftype() != "INSERT":
            yield entity
            continue
        copies = entity.multi_insert() if entity.mcount > 1 else (entity,)  # pyright: ignore
        for copy in copies:
            yield from _entities(copy.virtual_entities(), hidden, layer)  # pyright: ignore


class _Pen:
    """Collects segments in mm, and the points seen."""

    def __init__(self) -> None:
        self.segments: list[Segment] = []
        self.seen: list[tuple[float, float, float]] = []

    def draw(self, entity: DXFGraphic, scale: float) -> None:
        match entity.dxftype():
            case "LINE":
                start, end = self.points((entity.dxf.start, entity.dxf.end), scale)
                self.segments.append(Line(start=start, end=end))
            case "ARC":
                self.arc(entity, scale)
            case "CIRCLE":
                self.circle(entity, scale)
            case "ELLIPSE":
                self.ellipse(entity, scale)
            case "SPLINE":
                self.spline(entity, scale)
            case _:
                for part in entity.virtual_entities():  # pyright: ignore[reportAttributeAccessIssue]
                    if part.dxftype() not in _DRAWN:
                        raise InputError("holds a polyline mesh, which is no outline")
                    self.draw(part, scale)

    def points(self, points: Iterable[Iterable[float]], scale: float) -> list[Point2]:
        found: list[Point2] = []
        for x, y, z in points:
            if not (math.isfinite(x) and math.isfinite(y) and math.isfinite(z)):
                raise InputError("holds a coordinate that is no number")
            found.append((float(x) * scale, float(y) * scale))
            self.seen.append((x * scale, y * scale, z * scale))
        return found

    def arc(self, entity: DXFGraphic, scale: float) -> None:
        first, last = entity.dxf.start_angle, entity.dxf.end_angle
        sweep = (last - first) % 360.0 or 360.0
        angles = (first, first + sweep / 2, first + sweep)
        if math.isclose(sweep, 360.0, abs_tol=1e-9):
            self.circle(entity, scale)
            return
        start, through, end = self.points(entity.vertices(angles), scale)  # pyright: ignore
        self.segments.append(Arc(start=start, through=through, end=end))

    def circle(self, entity: DXFGraphic, scale: float) -> None:
        if not entity.dxf.radius > 0:
            raise InputError("holds a circle without a radius")
        centre = entity.ocs().to_wcs(entity.dxf.center)
        on = list(entity.vertices((0.0, 90.0)))  # pyright: ignore[reportAttributeAccessIssue]
        middle, *_ = self.points((centre, *on), scale)
        self.segments.append(Circle(centre=middle, radius=abs(entity.dxf.radius) * scale))

    def ellipse(self, entity: DXFGraphic, scale: float) -> None:
        first, last = entity.dxf.start_param, entity.dxf.end_param
        sweep = (last - first) % (2 * math.pi) or 2 * math.pi
        centre, major, minor = (
            np.array(v)
            for v in (entity.dxf.center, entity.dxf.major_axis, entity.minor_axis)  # pyright: ignore
        )
        self.points((centre, centre + major, centre + minor), scale)
        side = major[0] * minor[1] - major[1] * minor[0]
        ratio = math.copysign(float(np.linalg.norm(minor) / np.linalg.norm(major)), side)
        self.segments.append(
            EllipseArc(
                centre=(float(centre[0]) * scale, float(centre[1]) * scale),
                major=(float(major[0]) * scale, float(major[1]) * scale),
                ratio=ratio,
                first=first,
                last=first + sweep,
            )
        )

    def spline(self, entity: DXFGraphic, scale: float) -> None:
        try:
            curve = entity.construction_tool()  # pyright: ignore[reportAttributeAccessIssue]
        except (ValueError, DXFError) as error:
            raise InputError(f"holds a spline that makes no curve ({error})") from None
        poles = np.array(self.points(curve.control_points, scale))
        self.segments += smooth_pieces(poles, curve.degree, curve.knots(), curve.weights())

    def check_flat(self) -> None:
        x, y, z = np.ptp(np.array(self.seen), axis=0)
        if z > _FLAT * max(x, y):
            heights = [p[2] for p in self.seen]
            raise InputError(
                "is not flat: an outline lies in one plane z = constant",
                value=f"z from {min(heights):g} to {max(heights):g} mm",
            )
