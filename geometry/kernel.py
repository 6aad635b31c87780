"""From a solid's records to a mesh, in this process (the home of the CAD library).

`geometry.mesher` runs this in a child process; nothing else should.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, replace

import gmsh
import numpy as np

from .cad import arrays, bodies, contours, imprint, meshing, naming
from .curving import relaxed
from .errors import InputError, MeshError
from .ligaments import Spot, thin_places
from .ligaments import spots as spots_over
from .mesh import Mesh
from .quality import evenness, facet_areas, straighten, volumes
from .size_field import SizeField
from .sizing import FEWEST, MOST, USUAL, Extent, default_size, size_for, unknowns
from .solid import Patch, Solid
from .words import nearest

#: How well the body must agree with the areas and the volume its records promise.
_EXACT = 1e-6

#: How well the curved mesh must agree with the body,
_CURVED = 1e-3
#: but faces need not be truer than this share of the whole surface (tiny fillets).
_TINY = 1e-4

#: Cells whose smallest det J is under this share of their largest are mended.
_EVEN = 0.05

#: Above this, inner mid-side nodes stay where the CAD library put them.
_GOOD = 0.5

#: So few bad cells are straightened at once where that leaves the surface true; if
#: it does not, the places are at fault. More, and the size on round faces is.
_FEW_BAD = 1e-3

#: Times a body is meshed; at the last, whatever cells are bad are straightened.
_ATTEMPTS = 4

#: More unknowns than any machine this is meant for would solve.
TOO_MANY = 6e6


@dataclass(frozen=True, kw_only=True, slots=True)
class Request:
    """What to mesh.

    Attributes
    ----------
    solid : Solid
    size : element size, mm; None: `sizing.default_size`
    patches : to imprint
    coarse : without a size, a coarse mesh to begin a refinement with
    local : sizes from place to place instead of one
    most : unknowns above which nothing is begun
    """

    solid: Solid
    size: float | None = None
    patches: tuple[Patch, ...] = ()
    coarse: bool = False
    local: SizeField | None = None
    most: float = TOO_MANY


@dataclass(frozen=True, eq=False, kw_only=True, slots=True)
class Part:
    """The finished body in the kernel, its faces named; mm.

    Attributes
    ----------
    volume : tag
    names : CAD face tag -> names
    areas : CAD face tag -> mm2
    extent : Extent
    """

    volume: int
    names: dict[int, list[str]]
    areas: dict[int, float]
    extent: Extent

    def area(self, name: str) -> float:
        """Return the area of a named face, mm2."""
        return sum(self.areas[tag] for tag, names in self.names.items() if name in names)


def mesh(request: Request) -> Mesh:
    """Build, name, check and mesh a solid.

    Raises
    ------
    InputError
        If the body or a patch is impossible.
    MeshError
        If no valid mesh is found.
    """
    with _session():
        part = _build(request.solid, request.patches)
        _check(part, request.solid)
        size = _largest_size(request, part.extent)
        about = unknowns(part.extent, size)
        if about > request.most:
            # The estimate is right to a quarter: the size told must do even so.
            enough = size_for(part.extent, 0.75 * request.most)
            raise InputError(
                f"this size would give about {about / 1e6:.2g} million unknowns, "
                "more than the memory of this machine takes",
                key="solve.size",
                value=size,
                allowed=f"about {enough:.2g} mm or more",
            )
        most = USUAL if request.coarse else 1.5 * MOST
        found = _meshed(part, size, np.inf if request.size else most, request.local)
        return _named(found, part, request, size)


@contextmanager
def _session() -> Iterator[None]:
    gmsh.initialize([], readConfigFiles=False, interruptible=False)
    try:
        gmsh.option.setNumber("General.Terminal", 0)
        # Faces of joined parts stay apart, so that each keeps its own name.
        gmsh.option.setNumber("Geometry.OCCUnionUnify", 0)
        yield
    finally:
        gmsh.finalize()


def _largest_size(request: Request, extent: Extent) -> float:
    if request.local is not None:
        return float(request.local.sizes.max())
    if request.size is not None:
        return request.size
    usual = FEWEST if request.coarse else USUAL
    return default_size(request.solid.thin, extent, usual)


def _build(solid: Solid, patches: tuple[Patch, ...]) -> Part:
    try:
        gmsh.model.add("part")
        for part in bodies.parts(solid.body):
            for profile in bodies.profiles(part):
                contours.check(gmsh, profile)
        volume = bodies.build(gmsh, solid.body)
        gmsh.model.add("sources")
        sources = naming.make_sources(gmsh, solid.body)
        part = _name(volume, sources)
        if patches:
            part = _imprint(part, sources, patches)
    except (InputError, MeshError):
        raise
    except Exception as error:
        # The kernel raises bare exceptions, for shapes it cannot make.
        reason = str(error).strip() or "the CAD library gives no reason"
        raise InputError(f"the shape cannot be built ({reason})") from None
    return part


def _name(volume: int, sources: list[naming.Source]) -> Part:
    gmsh.model.setCurrent("part")
    corners = naming.box(gmsh, 3, volume)
    diagonal = float(np.linalg.norm(corners[1] - corners[0]))
    tags = sorted(tag for _, tag in gmsh.model.getBoundary([(3, volume)], oriented=False))
    points = {tag: naming.samples(gmsh, tag) for tag in tags}
    centroids = {tag: np.asarray(gmsh.model.occ.getCenterOfMass(2, tag)) for tag in tags}
    areas = {tag: float(gmsh.model.occ.getMass(2, tag)) for tag in tags}
    content = float(gmsh.model.occ.getMass(3, volume))
    gmsh.model.setCurrent("sources")
    names = {tag: naming.match(gmsh, sources, points[tag], diagonal) for tag in tags}
    gmsh.model.setCurrent("part")
    naming.number(names, centroids, diagonal)
    extent = Extent(
        volume=content, area=sum(areas.values()), length=float((corners[1] - corners[0]).max())
    )
    return Part(volume=volume, names=names, areas=areas, extent=extent)


def _imprint(part: Part, sources: list[naming.Source], patches: tuple[Patch, ...]) -> Part:
    known = sorted({name for names in part.names.values() for name in names})
    rings = []
    for patch in patches:
        faces = [tag for tag, names in part.names.items() if patch.face in names]
        if not faces:
            hint = nearest(patch.face, known)
            raise InputError(
                "no such face" + (f" (did you mean {hint!r}?)" if hint else ""),
                value=patch.face,
                allowed=", ".join(known),
            )
        if patch.name in known:
            raise InputError("a face has that name already", value=patch.name)
        rings.append(imprint.corners(gmsh, patch, faces, _diagonal(part)))
    volume = imprint.imprint(gmsh, part.volume, rings)
    gmsh.model.setCurrent("sources")
    rectangles = [imprint.add_rectangle(gmsh, ring) for ring in rings]
    gmsh.model.occ.synchronize()
    added = [
        naming.Source(name=patch.name, tag=tag, box=naming.box(gmsh, 2, tag))
        for patch, tag in zip(patches, rectangles, strict=True)
    ]
    split = _name(volume, [*sources, *added])
    for patch, ring in zip(patches, rings, strict=True):
        whole = float(np.linalg.norm(np.cross(ring[1] - ring[0], ring[3] - ring[0])))
        if abs(split.area(patch.name) - whole) > _EXACT * whole:
            raise InputError(
                f"the patch does not lie wholly within the face {patch.face!r}",
                value=f"from {patch.low} to {patch.high}",
            )
    return split


def _diagonal(part: Part) -> float:
    corners = naming.box(gmsh, 3, part.volume)
    return float(np.linalg.norm(corners[1] - corners[0]))


def _check(part: Part, solid: Solid) -> None:
    """Hold the finished body against what its records promise."""
    known = {name for names in part.names.values() for name in names}
    if missing := [name for name in solid.faces if name not in known]:
        raise MeshError(
            f"the body was built without its face {missing[0]!r} "
            f"(found: {', '.join(sorted(known))})"
        )
    for name, promised in solid.areas.items():
        _agree(f"area of face {name!r}", part.area(name), promised, _EXACT, "mm2")
    if solid.volume is not None:
        _agree("volume", part.extent.volume, solid.volume, _EXACT, "mm3")


def _agree(what: str, got: float, wanted: float, tolerance: float, unit: str) -> None:
    if not abs(got - wanted) <= tolerance * wanted:
        raise MeshError(f"the {what} came out as {got:.9g} {unit} instead of {wanted:.9g}")


def _meshed(part: Part, size: float, most: float, local: SizeField | None) -> arrays.Arrays:
    """Mesh until the cells are even, thin places fine enough and the surface true.

    `most` is a number of unknowns above which round faces are meshed more coarsely.
    """
    spots: list[Spot] = []
    per_turn = meshing.PER_TURN
    for attempt in range(_ATTEMPTS):
        meshing.generate(gmsh, size, per_turn=per_turn, spots=spots, local=local)
        found = _curved(arrays.read(gmsh, part.volume, sorted(part.names)))
        if attempt == 0:
            if 3 * len(found.points) > most:
                per_turn = meshing.FEW_PER_TURN
                continue
            spots = thin_places(found.points, found.facets, size)
            if spots:
                continue
        bad = evenness(found.points, found.cells) <= _EVEN
        last = attempt == _ATTEMPTS - 1
        if bad.any() and (last or bad.sum() < _FEW_BAD * len(bad)):
            found = replace(found, points=straighten(found.points, found.cells, bad))
        if evenness(found.points, found.cells).min() > _EVEN and _faithful(found, part):
            return found
        if 0 < bad.sum() < _FEW_BAD * len(bad):
            spots = [*spots, *_around(found, bad, size)]
        else:
            per_turn += meshing.PER_TURN // 2
    raise MeshError(f"no valid mesh was found at {size:g} mm; try a smaller element size")


def _curved(found: arrays.Arrays) -> arrays.Arrays:
    """Let the inner mid-side nodes follow the surface where that evens out the cells."""
    before = evenness(found.points, found.cells).min()
    if before > _GOOD:
        return found
    points = relaxed(found.points, found.cells, found.facets)
    return replace(found, points=points) if evenness(points, found.cells).min() > before else found


def _around(found: arrays.Arrays, bad: np.ndarray, size: float) -> list[Spot]:
    """Return spots of half-size cells where cells are bad (c,)."""
    corners = found.points[found.cells[bad][:, :4]]
    longest = np.linalg.norm(corners - np.roll(corners, 1, axis=1), axis=2).max(axis=1)
    return spots_over(corners.mean(axis=1), longest / 2, size)


def _faithful(found: arrays.Arrays, part: Part) -> bool:
    """Tell whether the curved mesh has the body's volume and face areas."""
    content = volumes(found.points, found.cells).sum()
    if abs(content - part.extent.volume) > _CURVED * part.extent.volume:
        return False
    area = facet_areas(found.points, found.facets)
    got = np.array([area[found.face == tag].sum() for tag in part.areas])
    slack = _CURVED * got + _TINY * part.extent.area
    return bool(np.all(np.abs(got - list(part.areas.values())) <= slack))


def _named(found: arrays.Arrays, part: Part, request: Request, size: float) -> Mesh:
    order = dict.fromkeys(
        [
            *request.solid.faces,
            *(p.name for p in request.patches),
            *sorted({n for names in part.names.values() for n in names}, key=_natural),
        ]
    )
    faces = {
        name: np.flatnonzero(
            np.isin(found.face, [t for t, names in part.names.items() if name in names])
        )
        for name in order
    }
    return Mesh(
        points=found.points / 1e3,
        cells=found.cells,
        facets=found.facets,
        faces=faces,
        size=size / 1e3,
        volume=part.extent.volume / 1e9,
        area=part.extent.area / 1e6,
    )


def _natural(name: str) -> tuple[str, int]:
    stem, _, number = name.rpartition("_")
    return (stem, int(number)) if number.isdigit() else (name, 0)
