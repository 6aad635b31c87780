"""Bodies, names, patches and meshes of the kernel against closed forms."""

import math
from pathlib import Path

import numpy as np
import pytest
from modewright.geometry import kernel
from modewright.geometry.errors import InputError, MeshError
from modewright.geometry.ligaments import thin_places
from modewright.geometry.mesh import EDGES, FACET_EDGES
from modewright.geometry.quality import evenness, facet_areas, volumes
from modewright.geometry.sizing import MOST, Extent, default_size, unknowns
from modewright.geometry.solid import (
    Arc,
    BSpline,
    Circle,
    Cut,
    EllipseArc,
    Extrusion,
    Fuse,
    Imported,
    Line,
    Loft,
    Patch,
    Profile,
    Revolution,
    Solid,
    Spline,
)

ALONG_X = {"u": (0.0, 1.0, 0.0), "v": (0.0, 0.0, 1.0)}
TURNED = {"u": (1.0, 0.0, 0.0), "v": (0.0, 0.0, 1.0)}


def polygon(*corners, names=None):
    names = names or [None] * len(corners)
    ends = [*corners[1:], corners[0]]
    return tuple(Line(start=a, end=b, face=n) for a, b, n in zip(corners, ends, names, strict=True))


def rectangle(width, height, names=None, *, centre=(0.0, 0.0)):
    a, b, w, h = *centre, width / 2, height / 2
    return polygon((a - w, b - h), (a + w, b - h), (a + w, b + h), (a - w, b + h), names=names)


def bar(length=60.0, width=8.0, thickness=1.2, *, x=0.0):
    names = ["bottom", "left", "top", "right"]
    profile = Profile(outer=rectangle(width, thickness, names), origin=(x, 0.0, 0.0), **ALONG_X)
    return Extrusion(profile=profile, vector=(length, 0.0, 0.0), start="root", end="tip")


def rod(radius, length, name="side"):
    profile = Profile(outer=(Circle(centre=(0, 0), radius=radius, face=name),), **ALONG_X)
    return Extrusion(profile=profile, vector=(length, 0, 0), start="root", end="tip")


def slot(length=101.0):
    outline = (
        Line(start=(length, 1), end=(41, 1), face="slot"),
        Arc(start=(41, 1), through=(40, 0), end=(41, -1), face="slot"),
        Line(start=(41, -1), end=(length, -1), face="slot"),
        Line(start=(length, -1), end=(length, 1)),
    )
    return Extrusion(profile=Profile(outer=outline, origin=(0, 0, -5)), vector=(0, 0, 10))


def made(body, *, size=None, thin=0.0, patches=(), **promised):
    solid = Solid(body=body, thin=thin, **promised)
    return kernel.mesh(kernel.Request(solid=solid, size=size, patches=patches))


def face_area(mesh, name):
    """mm2."""
    return facet_areas(mesh.points, mesh.facet_nodes(name)).sum() * 1e6


def flux_volume(mesh):
    """Volume (mm3) from the outward facets alone, by the divergence theorem."""
    points = np.array([[1 / 3, 1 / 3], [0.6, 0.2], [0.2, 0.6], [0.2, 0.2]])
    weights = np.array([-27 / 96, 25 / 96, 25 / 96, 25 / 96])
    lam = np.column_stack((1 - points.sum(axis=1), points))
    slope = np.array([[-1, -1], [1, 0], [0, 1]])
    value = np.column_stack(
        (lam * (2 * lam - 1), *(4 * lam[:, a] * lam[:, b] for a, b in FACET_EDGES))
    )
    gradient = np.concatenate(
        [
            (4 * lam - 1)[:, :, None] * slope,
            *(
                4 * (lam[:, [a]] * slope[b] + lam[:, [b]] * slope[a])[:, None, :]
                for a, b in FACET_EDGES
            ),
        ],
        axis=1,
    )
    x = mesh.points[mesh.facets]
    at = np.einsum("qa,fai->fqi", value, x)
    tangent = np.einsum("qaj,fai->fqji", gradient, x)
    normal = np.cross(tangent[:, :, 0], tangent[:, :, 1])
    return np.einsum("q,fqi,fqi->", weights, at, normal) / 3 * 1e9


def assert_sound(mesh):
    assert evenness(mesh.points, mesh.cells).min() > 0.05
    # Every facet has a name; every node belongs to a cell; the boundary is closed.
    named = np.unique(np.concatenate(list(mesh.faces.values())))
    assert len(named) == len(mesh.facets)
    assert len(np.unique(mesh.cells)) == len(mesh.points)
    inside = volumes(mesh.points, mesh.cells).sum() * 1e9
    assert flux_volume(mesh) == pytest.approx(inside, rel=1e-4)
    assert inside == pytest.approx(mesh.volume * 1e9, rel=1e-3)


def test_bar_has_exact_planes_areas_and_volume():
    mesh = made(bar(), size=1.5)
    assert_sound(mesh)
    assert mesh.volume == pytest.approx(60 * 8 * 1.2e-9, rel=1e-12)
    assert mesh.size == 1.5e-3
    for name, area in {"root": 9.6, "tip": 9.6, "top": 480, "bottom": 480, "left": 72}.items():
        assert face_area(mesh, name) == pytest.approx(area, rel=1e-12)
    for name, axis, value in (
        ("root", 0, 0.0),
        ("tip", 0, 0.06),
        ("left", 1, 0.004),
        ("right", 1, -0.004),
        ("top", 2, 0.0006),
    ):
        assert np.all(mesh.points[mesh.face_nodes(name), axis] == value), name
    assert not np.any(np.signbit(mesh.points) & (mesh.points == 0))


def test_mid_side_nodes_lie_on_their_edges():
    mesh = made(bar(20, 5, 5), size=3)
    for column, (a, b) in enumerate(EDGES, 4):
        middle = (mesh.points[mesh.cells[:, a]] + mesh.points[mesh.cells[:, b]]) / 2
        np.testing.assert_allclose(mesh.points[mesh.cells[:, column]], middle, atol=1e-12)
    for column, (a, b) in enumerate(FACET_EDGES, 3):
        middle = (mesh.points[mesh.facets[:, a]] + mesh.points[mesh.facets[:, b]]) / 2
        np.testing.assert_allclose(mesh.points[mesh.facets[:, column]], middle, atol=1e-12)


def test_outward_normals_of_every_face():
    mesh = made(bar(20, 5, 5), size=4)
    out = {
        "root": (-1, 0, 0),
        "tip": (1, 0, 0),
        "left": (0, 1, 0),
        "right": (0, -1, 0),
        "top": (0, 0, 1),
        "bottom": (0, 0, -1),
    }
    for name, normal in out.items():
        a, b, c = (mesh.points[mesh.facet_nodes(name)[:, k]] for k in range(3))
        cross = np.cross(b - a, c - a)
        cross /= np.linalg.norm(cross, axis=1)[:, None]
        np.testing.assert_allclose(cross, np.broadcast_to(normal, cross.shape), atol=1e-12)


def test_round_rod_keeps_its_circle():
    mesh = made(rod(3, 30), size=3, volume=math.pi * 9 * 30, areas={"side": math.pi * 6 * 30})
    assert_sound(mesh)
    side = mesh.points[mesh.face_nodes("side")]
    np.testing.assert_allclose(np.hypot(side[:, 1], side[:, 2]), 3e-3, rtol=1e-9)
    assert face_area(mesh, "side") == pytest.approx(math.pi * 6 * 30, rel=1e-4)


def test_turned_torus_and_ball():
    torus = Revolution(
        profile=Profile(outer=(Circle(centre=(20, 0), radius=4, face="surface"),), **TURNED)
    )
    mesh = made(
        torus,
        size=5,
        volume=2 * math.pi**2 * 20 * 16,
        areas={"surface": 4 * math.pi**2 * 20 * 4},
    )
    assert_sound(mesh)
    assert list(mesh.faces) == ["surface"]
    half = (
        Arc(start=(0, -5), through=(5, 0), end=(0, 5), face="surface"),
        Line(start=(0, 5), end=(0, -5), face="axis"),
    )
    ball = made(
        Revolution(profile=Profile(outer=half, **TURNED)), size=3, volume=4 / 3 * math.pi * 125
    )
    assert_sound(ball)
    # The line on the axis sweeps nothing.
    assert list(ball.faces) == ["surface"]
    radius = np.linalg.norm(ball.points[ball.face_nodes("surface")], axis=1)
    np.testing.assert_allclose(radius, 5e-3, rtol=1e-9)


def test_straight_loft_is_a_prismatoid_with_plane_sides():
    names = ["bottom", "left", "top", "right"]
    loft = Loft(
        first=Profile(outer=rectangle(14, 2.5, names), **ALONG_X),
        last=Profile(outer=rectangle(8, 1.2), origin=(60, 0, 0), **ALONG_X),
        start="root",
        end="tip",
    )
    # Prismatoid rule: L / 6 (A1 + 4 Am + A2).
    volume = 60 / 6 * (14 * 2.5 + 4 * 11 * 1.85 + 8 * 1.2)
    patch = Patch(name="pad", face="top", low=(10, -2), high=(14, 3))
    mesh = made(loft, size=3, patches=(patch,), volume=volume, areas={"tip": 9.6, "root": 35.0})
    assert_sound(mesh)
    # The pad is given by its shadow on z = 0; the slope of the top face stretches it.
    assert face_area(mesh, "pad") == pytest.approx(20 * math.hypot(60, 0.65) / 60, rel=1e-9)


def test_round_loft_is_a_cone():
    first, last = (
        Profile(outer=(Circle(centre=(0, 0), radius=r, face="side"),), origin=(x, 0, 0), **ALONG_X)
        for r, x in ((3, 0), (1.5, 20))
    )
    mesh = made(
        Loft(first=first, last=last, start="root", end="tip"),
        size=2,
        volume=math.pi * 20 / 3 * (9 + 4.5 + 2.25),
        areas={"side": math.pi * 4.5 * math.hypot(20, 1.5), "tip": math.pi * 2.25},
    )
    assert_sound(mesh)


def test_names_go_through_a_cut_and_the_ends_split():
    area = 12 * 100 - (2 * 59 + math.pi / 2)
    mesh = made(
        Cut(base=bar(100, 12, 3), tools=(slot(),)),
        size=4,
        faces=("root", "tip", "slot"),
        volume=area * 3,
        areas={"root": 36.0, "tip": 30.0, "top": area, "slot": (2 * 59 + math.pi) * 3},
    )
    assert_sound(mesh)
    assert list(mesh.faces)[:3] == ["root", "tip", "slot"]
    assert set(mesh.faces) == {"root", "tip", "slot", "top", "bottom", "left", "right"}
    assert face_area(mesh, "slot") == pytest.approx((2 * 59 + math.pi) * 3, rel=1e-4)


def test_joined_parts_keep_their_own_names_on_one_plane():
    # The tops of the two parts lie in one plane, and stay two faces.
    first, second = bar(10, 8, 2), bar(20, 4, 2, x=10.0)
    names = ["b2", "l2", "t2", "r2"]
    second = Extrusion(
        profile=Profile(outer=rectangle(4, 2, names), origin=(10, 0, 0), **ALONG_X),
        vector=(20, 0, 0),
        start="hidden",
        end="nose",
    )
    mesh = made(
        Fuse(parts=(first, second)),
        size=3,
        volume=10 * 8 * 2 + 20 * 4 * 2,
        areas={"top": 80.0, "t2": 80.0, "nose": 8.0, "tip": 8.0},
    )
    assert_sound(mesh)
    assert "hidden" not in mesh.faces


def test_unnamed_faces_are_numbered_by_where_they_lie():
    plain = Extrusion(profile=Profile(outer=rectangle(10, 4)), vector=(0, 0, 2), end="top")
    mesh = made(plain, size=3)
    assert list(mesh.faces) == ["face_1", "face_2", "face_3", "face_4", "face_5", "top"]
    middle = {n: mesh.points[mesh.face_nodes(n)].mean(axis=0) for n in mesh.faces}
    assert np.ptp(mesh.points[mesh.face_nodes("face_1"), 0]) == 0
    assert middle["face_1"][0] == pytest.approx(-0.005)
    assert middle["face_5"][0] == pytest.approx(0.005)


def test_patches_are_exact_and_belong_to_the_face_under_them():
    patches = (
        Patch(name="pad", face="bottom", low=(10, -2), high=(12, 2)),
        Patch(name="edge", face="bottom", low=(11, -4), high=(20, 4)),
        Patch(name="spot", face="tip", low=(-1, -0.2), high=(1, 0.6)),
    )
    mesh = made(bar(), size=3, patches=patches)
    assert_sound(mesh)
    for name, area in {"pad": 8.0, "edge": 72.0, "spot": 1.6, "bottom": 480.0, "tip": 9.6}.items():
        assert face_area(mesh, name) == pytest.approx(area, rel=1e-12)
    assert set(mesh.faces["pad"]) < set(mesh.faces["bottom"])
    corner = mesh.points[mesh.face_nodes("pad")][:, :2]
    assert (corner.min(axis=0).tolist(), corner.max(axis=0).tolist()) == (
        [0.01, -0.002],
        [0.012, 0.002],
    )


@pytest.mark.parametrize(
    ("patch", "says"),
    [
        (Patch(name="p", face="bottom", low=(10, -2), high=(12, 5)), "wholly within"),
        (Patch(name="p", face="botom", low=(10, -2), high=(12, 2)), "did you mean 'bottom'"),
        (Patch(name="p", face="bottom", low=(10, 2), high=(12, 2)), "lower to its higher"),
        (Patch(name="top", face="bottom", low=(10, -2), high=(12, 2)), "name already"),
    ],
)
def test_impossible_patches_are_refused(patch, says):
    with pytest.raises(InputError, match=says):
        made(bar(), size=3, patches=(patch,))


def test_patch_on_a_round_face_is_refused():
    with pytest.raises(InputError, match="flat face, got 'side'"):
        made(rod(3, 20), size=3, patches=(Patch(name="p", face="side", low=(1, 0), high=(2, 1)),))


def extruded(*outer, holes=()):
    return Extrusion(profile=Profile(outer=outer, holes=holes), vector=(0, 0, 1))


@pytest.mark.parametrize(
    ("body", "says"),
    [
        (Fuse(parts=(bar(1, 1, 1), bar(1, 1, 1, x=5.0))), "2 pieces"),
        (Cut(base=bar(1, 1, 1), tools=(bar(3, 3, 3, x=-1.0),)), "nothing is left"),
        (extruded(*polygon((0, 0), (4, 4), (4, 0), (0, 4))), r"crosses itself.*\(2, 2\)"),
        (extruded(*rectangle(2, 2), holes=(rectangle(1, 1, centre=(5, 5)),)), "hole lies outside"),
        (extruded(*rectangle(2, 2), holes=(rectangle(1, 1, centre=(1, 0)),)), "crosses"),
        (
            extruded(*rectangle(9, 9), holes=(rectangle(4, 4), rectangle(1, 1))),
            "hole lies in another",
        ),
        (
            extruded(
                Line(start=(0, 0), end=(1, 0)),
                Line(start=(1, 0), end=(1, 1)),
                Line(start=(1, 1.1), end=(0, 0)),
            ),
            "not closed",
        ),
    ],
)
def test_impossible_bodies_are_refused(body, says):
    with pytest.raises(InputError, match=says):
        made(body, size=1)


def test_broken_promises_are_errors():
    with pytest.raises(MeshError, match=r"volume came out as 576 mm3 instead of 577"):
        made(bar(), size=3, volume=577.0)
    with pytest.raises(MeshError, match="area of face 'root'"):
        made(bar(), size=3, areas={"root": 9.61})
    with pytest.raises(MeshError, match="without its face 'nose'"):
        made(bar(), size=3, faces=("root", "nose"))


def test_every_kind_of_segment():
    ellipse = EllipseArc(
        centre=(0, 0), major=(6, 0), ratio=0.5, first=0, last=2 * math.pi, face="rim"
    )
    mesh = made(extruded(ellipse), size=2, volume=math.pi * 18)
    assert_sound(mesh)
    rim = mesh.points[mesh.face_nodes("rim")] * 1e3
    np.testing.assert_allclose((rim[:, 0] / 6) ** 2 + (rim[:, 1] / 3) ** 2, 1, rtol=1e-6)

    # A parabola y = 4 x (1 - x) h as a quadratic spline curve: area 2/3 h.
    arch = BSpline(poles=((10, 0), (5, 8), (0, 0)), degree=2, knots=(0, 0, 0, 1, 1, 1), face="arch")
    made(extruded(Line(start=(0, 0), end=(10, 0)), arch), size=2, volume=10 * 4 * 2 / 3)

    # An interpolated parabola is close to the same; a clockwise ellipse cuts a bite.
    through = tuple((10 - t, 4 - 4 * (t / 5 - 1) ** 2) for t in range(11))
    mesh = made(
        extruded(Line(start=(0, 0), end=(10, 0)), Spline(points=through, face="arch")), size=2
    )
    assert mesh.volume * 1e9 == pytest.approx(80 / 3, rel=2e-3)
    bitten = made(
        extruded(
            *polygon((3, 4), (0, 4), (0, 0), (10, 0), (10, 4), (7, 4))[:-1],
            EllipseArc(centre=(5, 4), major=(2, 0), ratio=-0.5, first=0, last=math.pi, face="bite"),
        ),
        size=2,
        volume=40 - math.pi,
    )
    assert "bite" in bitten.faces


def test_same_mesh_twice():
    first, second = (made(Cut(base=bar(100, 12, 3), tools=(slot(),)), size=3) for _ in range(2))
    np.testing.assert_array_equal(first.points, second.points)
    np.testing.assert_array_equal(first.cells, second.cells)
    np.testing.assert_array_equal(first.facets, second.facets)
    assert list(first.faces) == list(second.faces)


def test_small_radius_is_fine_and_the_rest_coarse():
    r = 0.5
    corner = (
        *polygon((5, 30), (0, 30), (0, 0), (40, 0), (40, 5), (5 + r, 5))[:-1],
        Arc(
            start=(5 + r, 5),
            through=(5 + r * (1 - 0.5**0.5), 5 + r * (1 - 0.5**0.5)),
            end=(5, 5 + r),
            face="fillet",
        ),
        Line(start=(5, 5 + r), end=(5, 30)),
    )
    mesh = made(Extrusion(profile=Profile(outer=corner), vector=(0, 0, 8)), size=4)
    assert_sound(mesh)
    length = (
        np.linalg.norm(mesh.points[mesh.facets[:, 0]] - mesh.points[mesh.facets[:, 1]], axis=1)
        * 1e3
    )
    assert length[mesh.faces["fillet"]].max() < 1.0
    assert length.max() > 3.0


def test_thin_wall_round_a_coarse_bend_is_never_inverted():
    # One cell spans 20 degrees of a wall a twelfth of the radius thick: without inner
    # edges that follow the bend, the worst cells are near zero.
    ring = Extrusion(
        profile=Profile(
            outer=(Circle(centre=(0, 0), radius=12.5, face="outer"),),
            holes=((Circle(centre=(0, 0), radius=11.5, face="inner"),),),
        ),
        vector=(0, 0, 60),
    )
    mesh = made(ring, size=4.28, volume=math.pi * 24 * 60)
    assert_sound(mesh)
    assert evenness(mesh.points, mesh.cells).min() > 0.3


def test_ligament_is_found_and_refined():
    # Two notches leave a neck of 0.8 mm in a 6 mm block meshed at 4 mm.
    notches = tuple(
        Extrusion(
            profile=Profile(outer=rectangle(6, 9.6, centre=(30, s * 5.2)), origin=(0, 0, -5)),
            vector=(0, 0, 10),
        )
        for s in (1, -1)
    )
    mesh = made(Cut(base=bar(60, 20, 6), tools=notches), size=4)
    assert_sound(mesh)
    middle = mesh.points[mesh.cells[:, :4]].mean(axis=1) * 1e3
    neck = (np.abs(middle[:, 0] - 30) < 3) & (np.abs(middle[:, 1]) < 0.4)
    assert neck.sum() > 100
    assert not thin_places(mesh.points * 1e3, mesh.facets, 4.0)


def test_plate_thin_all_over_is_left_as_it_was_asked_for():
    mesh = made(bar(30, 30, 0.5), size=4)
    assert 3 * len(mesh.points) < 10_000


def write_step(path: Path, unit: str, *bodies) -> Path:
    """Write boxes as a STEP file by the CAD library, then put another unit in its text."""
    gmsh = kernel.gmsh
    gmsh.initialize([], readConfigFiles=False, interruptible=False)
    gmsh.option.setNumber("General.Terminal", 0)
    try:
        gmsh.model.add("w")
        for corner, sides in bodies:
            gmsh.model.occ.addBox(*corner, *sides)
        gmsh.model.occ.synchronize()
        gmsh.write(str(path))
    finally:
        gmsh.finalize()
    text = path.read_text()
    millimetre = "SI_UNIT(.MILLI.,.METRE.)"
    assert millimetre in text
    path.write_text(text.replace(millimetre, unit))
    return path


@pytest.mark.parametrize(
    ("unit", "scale"),
    [("SI_UNIT(.MILLI.,.METRE.)", 1.0), ("SI_UNIT(.CENTI.,.METRE.)", 10.0)],
)
def test_imported_solid_keeps_its_unit(tmp_path, unit, scale):
    path = write_step(tmp_path / "part.step", unit, ((1, 2, 3), (10, 4, 2)))
    mesh = made(Imported(path=path), size=2 * scale)
    assert_sound(mesh)
    low, high = mesh.points.min(axis=0) * 1e3, mesh.points.max(axis=0) * 1e3
    np.testing.assert_allclose(low, [1 * scale, 2 * scale, 3 * scale], rtol=1e-9)
    np.testing.assert_allclose(high, [11 * scale, 6 * scale, 5 * scale], rtol=1e-9)
    assert list(mesh.faces) == [f"face_{k}" for k in range(1, 7)]


def test_touching_imported_solids_are_joined_and_loose_ones_refused(tmp_path):
    unit = "SI_UNIT(.MILLI.,.METRE.)"
    touching = write_step(
        tmp_path / "a.step", unit, ((0, 0, 0), (10, 4, 2)), ((10, 0, 0), (5, 4, 4))
    )
    assert made(Imported(path=touching), size=3).volume * 1e9 == pytest.approx(160)
    loose = write_step(tmp_path / "b.step", unit, ((0, 0, 0), (1, 1, 1)), ((3, 0, 0), (1, 1, 1)))
    with pytest.raises(InputError, match="2 solids that make 2 separate bodies"):
        made(Imported(path=loose), size=1)


def test_unreadable_files_are_refused(tmp_path):
    bad = tmp_path / "bad.step"
    bad.write_text("ISO-10303-21;\nnothing\n")
    for path, says in (
        (bad, "bad.step"),
        (tmp_path / "none.step", "no such file"),
        (Path(__file__), "unknown kind"),
    ):
        with pytest.raises(InputError, match=says):
            made(Imported(path=path), size=1)


def test_default_sizes_follow_the_thinnest_section_and_the_budget():
    def extent(length, width, thickness):
        area = 2 * (length * width + length * thickness + width * thickness)
        return Extent(volume=length * width * thickness, area=area, length=length)

    fork = default_size(3.0, extent(100, 12, 3))
    assert fork == pytest.approx(1.35, rel=0.05)
    for thin, sides in ((1.2, (60, 8, 1.2)), (0.5, (400, 30, 0.5)), (10, (10, 10, 10))):
        about = unknowns(extent(*sides), default_size(thin, extent(*sides)))
        assert 8_000 < about < 1.05 * MOST
    # Twice the part, twice the size: the rule has no length of its own.
    assert default_size(6.0, extent(200, 24, 6)) == pytest.approx(2 * fork, rel=0.01)
    # Without a known thickness the body's own volume and area tell it.
    assert 0.3 < default_size(0.0, extent(60, 8, 1.2)) < 1.8


def test_default_mesh_is_within_its_budget():
    mesh = made(bar(60, 8, 1.2), thin=1.2)
    assert 20_000 < 3 * len(mesh.points) < 70_000


def test_too_small_a_size_is_refused_before_meshing():
    with pytest.raises(InputError, match=r"solve.size: .* million unknowns"):
        made(bar(), size=0.01)
