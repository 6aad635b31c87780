"""A body as plain records: profiles swept into solids, joined and cut.

Families describe their bodies with these records; only the kernel (the home of
gmsh) turns them into geometry. The records are in millimetres, hold no
library objects and can be pickled to the child process that meshes them.

Every face gets its name where it is made: a segment of a profile names the
lateral face it sweeps, an extrusion names its two ends. The kernel carries the
names through cuts and joins by where the faces lie.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

Point2 = tuple[float, float]
Point3 = tuple[float, float, float]


# --- segments of a closed plane profile, end to start, in profile coordinates ---


@dataclass(frozen=True, kw_only=True, slots=True)
class Line:
    """A straight segment."""

    start: Point2
    end: Point2
    face: str | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class Arc:
    """A circular arc from start to end through a third point on it."""

    start: Point2
    through: Point2
    end: Point2
    face: str | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class EllipseArc:
    """An arc of an ellipse, anticlockwise in its parameter from `first` to `last` (radians).

    The point at parameter t is centre + major * cos t + minor * sin t, where
    minor is major turned by +90 degrees and scaled by `ratio` (negative: the
    arc runs clockwise in the plane).
    """

    centre: Point2
    major: Point2
    ratio: float
    first: float
    last: float
    face: str | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class Spline:
    """A smooth (C2) curve through all the points, first to last."""

    points: tuple[Point2, ...]
    face: str | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class BSpline:
    """A B-spline by poles, degree, full knot vector and optional weights."""

    poles: tuple[Point2, ...]
    degree: int
    knots: tuple[float, ...]
    weights: tuple[float, ...] = ()
    face: str | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class Circle:
    """A whole circle; a loop of its own."""

    centre: Point2
    radius: float
    face: str | None = None


Segment = Line | Arc | EllipseArc | Spline | BSpline | Circle
Loop = tuple[Segment, ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class Profile:
    """A plane region: one closed outer loop and closed holes, placed in space.

    The point (a, b) of the profile lies at origin + a * u + b * v.
    """

    outer: Loop
    holes: tuple[Loop, ...] = ()
    origin: Point3 = (0.0, 0.0, 0.0)
    u: Point3 = (1.0, 0.0, 0.0)
    v: Point3 = (0.0, 1.0, 0.0)


# --- solids ---


@dataclass(frozen=True, kw_only=True, slots=True)
class Extrusion:
    """A profile swept along a vector.

    `start` names the face at the profile, `end` the one at its far copy.
    """

    profile: Profile
    vector: Point3
    start: str | None = None
    end: str | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class Revolution:
    """A profile turned fully about the global z axis; the profile lies in x >= 0, y = 0."""

    profile: Profile


@dataclass(frozen=True, kw_only=True, slots=True)
class Loft:
    """A straight (ruled) transition between two loops with equally many segments.

    The segments of the first profile name the side faces.
    """

    first: Profile
    last: Profile
    start: str | None = None
    end: str | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class Fuse:
    """Bodies joined into one; touching or overlapping."""

    parts: tuple[Body, ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class Cut:
    """A body less its tools. Faces of the tools keep their names on the body."""

    base: Body
    tools: tuple[Body, ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class Imported:
    """A STEP or BREP file. Faces are named face_1, face_2, ... in a stable order."""

    path: Path


Body = Extrusion | Revolution | Loft | Fuse | Cut | Imported


@dataclass(frozen=True, kw_only=True, slots=True)
class Patch:
    """A rectangle on a named flat face, imprinted so that its edge is a mesh edge.

    Attributes
    ----------
    name : name of the new face
    face : name of the face it lies on (which keeps the rest and the patch)
    low, high : (2,) mm
        Corners in the two global coordinates that span the face, in the order
        x, y, z with the one most normal to the face left out (top: x, y; end
        faces: y, z).
    """

    name: str
    face: str
    low: Point2
    high: Point2


@dataclass(frozen=True, kw_only=True, slots=True)
class Solid:
    """What the kernel builds.

    Attributes
    ----------
    body : Body
    faces : names that must exist on the finished body, in the order shown to people
    areas : mm2 of some named faces, known without the kernel; it checks them
    volume : mm3, known without the kernel, or None; it checks it
    thin : mm
        Smallest wall, web or thickness; sizes the default mesh.
    """

    body: Body
    faces: tuple[str, ...] = ()
    areas: Mapping[str, float] = field(default_factory=dict)
    volume: float | None = None
    thin: float = 0.0
