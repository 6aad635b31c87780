"""Mesh files in and out: hand-written samples, round trips, curved cells, broken meshes."""

from pathlib import Path

import meshio
import numpy as np
import pytest
import pyvista
from modewright.geometry.errors import InputError, ToolError
from modewright.geometry.exchange import WRITTEN, read_mesh, write_mesh, write_vtu
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.mesh import EDGES, FACET_EDGES, Mesh
from modewright.geometry.mesher import generate
from modewright.geometry.quality import facet_areas, volumes
from modewright.geometry.shape import make_shape
from modewright.geometry.tetrahedra import boundary, raised, split, turned_positive

DATA = Path(__file__).parent / "data"


@pytest.fixture(scope="module")
def ring() -> Mesh:
    """A curved body: a thick ring sector's worth of curved cells."""
    plate = {"diameter": 30.0, "thickness": 6.0, "holes": [{"x": 0, "y": 0, "diameter": 14.0}]}
    return generate(make_shape(FAMILIES["plate"], plate), size_mm=8.0)


def closed(mesh: Mesh) -> np.ndarray:
    """Return the sum of outward area vectors: zero around a closed body."""
    a, b, c = (mesh.points[mesh.facets[:, k]] for k in range(3))
    return np.cross(b - a, c - a).sum(axis=0)


def content(mesh: Mesh) -> float:
    """Return the volume by the divergence theorem on straight facets."""
    a, b, c = (mesh.points[mesh.facets[:, k]] for k in range(3))
    return float(np.einsum("ij,ij->i", a, np.cross(b, c)).sum() / 6)


def test_inch_tetrahedron_with_a_named_face() -> None:
    """3 x 2 x 1 inches along the axes: a cubic inch, 7.85 g/cm3 of it 128.6 g."""
    mesh = read_mesh(DATA / "tetra_in.msh", "in")
    np.testing.assert_allclose(np.ptp(mesh.points, axis=0), [0.0762, 0.0508, 0.0254], rtol=1e-12)
    assert mesh.volume * 7850 == pytest.approx(0.12864, rel=1e-4)
    assert len(mesh.points) == 10
    assert set(mesh.faces) == {"clamp", "face_1", "face_2", "face_3"}
    assert np.all(mesh.points[mesh.face_nodes("clamp"), 2] == 0)
    assert facet_areas(mesh.points, mesh.facet_nodes("clamp")).sum() == pytest.approx(3 * 0.0254**2)


def test_bricks_are_cut_into_matching_tetrahedra() -> None:
    mesh = read_mesh(DATA / "bricks.inp")
    assert mesh.volume == pytest.approx(2e-6, rel=1e-12)
    assert len(mesh.cells) == 12
    assert len(mesh.facets) == 20
    assert facet_areas(mesh.points, mesh.facet_nodes("ROOT")).sum() == pytest.approx(1e-4)
    # The set of all nodes names the whole surface, and the rest is still told apart.
    assert sorted(mesh.faces) == ["ALL", "ROOT", "face_1", "face_2", "face_3", "face_4", "face_5"]


def test_wedge_and_pyramid_in_metres() -> None:
    """A wedge of 20 x 20 / 2 x 30 mm (6 cm3) and a pyramid on its slanted side (2 cm3)."""
    mesh = read_mesh(DATA / "wedge_m.vtu", "m")
    side = np.hypot(0.02, 0.02) * 0.03
    height = 0.02 / np.sqrt(2)
    assert mesh.volume == pytest.approx(6e-6 + side * height / 3, rel=1e-9)
    np.testing.assert_allclose(closed(mesh), 0, atol=1e-15)


@pytest.mark.parametrize("seed", range(5))
def test_any_numbering_of_a_brick_lattice_splits_without_gaps(seed: int) -> None:
    n = 3
    grid = np.stack(np.meshgrid(*[np.arange(n + 1.0)] * 3, indexing="ij"), -1).reshape(-1, 3)
    at = np.arange((n + 1) ** 3).reshape((n + 1,) * 3)
    corner = [(0, 0, 0), (1, 0, 0), (1, 1, 0), (0, 1, 0)]
    corner += [(i, j, 1) for i, j, _ in corner]
    cells = np.column_stack([at[i : i + n, j : j + n, k : k + n].ravel() for i, j, k in corner])
    shuffled = np.random.default_rng(seed).permutation(len(grid))
    points = np.empty_like(grid)
    points[shuffled] = grid
    tets = turned_positive(points, split("hexahedron", shuffled[cells]))
    points, tets = raised(points, tets)
    assert volumes(points, tets).sum() == pytest.approx(n**3)
    assert len(boundary(tets)) == 6 * n * n * 2


def test_facets_point_outward_and_hold_their_middles(ring: Mesh, tmp_path: Path) -> None:
    write_mesh(tmp_path / "a.vtu", ring)
    mesh = read_mesh(tmp_path / "a.vtu")
    middles = {}
    for nodes, edges in ((mesh.facets, FACET_EDGES), (mesh.cells, EDGES)):
        for k, (a, b) in enumerate(edges, nodes.shape[1] - len(edges)):
            for *ends, middle in nodes[:, [a, b, k]].tolist():
                assert middles.setdefault(frozenset(ends), middle) == middle
    np.testing.assert_allclose(closed(mesh), 0, atol=1e-12)
    assert content(mesh) > 0


@pytest.mark.parametrize("suffix", [s for s in WRITTEN if s not in (".exo", ".xdmf")])
def test_round_trip_keeps_the_curved_body(ring: Mesh, tmp_path: Path, suffix: str) -> None:
    write_mesh(tmp_path / f"a{suffix}", ring)
    mesh = read_mesh(tmp_path / f"a{suffix}")
    assert len(mesh.cells) == len(ring.cells)
    assert len(mesh.points) == len(ring.points)
    assert mesh.volume == pytest.approx(volumes(ring.points, ring.cells).sum(), rel=1e-6)
    assert len(mesh.facets) == len(ring.facets)
    if suffix in (".msh", ".inp"):
        assert set(mesh.faces) == {"top", "bottom", "edge", "hole_1"}
        for name, facets in ring.faces.items():
            assert len(mesh.faces[name]) == len(facets)
    assert not list(tmp_path.glob(".*"))


@pytest.mark.parametrize("suffix", [".vtu", ".vtk"])
def test_an_independent_reader_sees_millimetres_and_curved_cells(
    ring: Mesh, tmp_path: Path, suffix: str
) -> None:
    write_mesh(tmp_path / f"a{suffix}", ring)
    grid = pyvista.read(tmp_path / f"a{suffix}")
    solid = grid.extract_cells(np.flatnonzero(grid.celltypes == pyvista.CellType.QUADRATIC_TETRA))
    assert np.ptp(solid.points, axis=0) == pytest.approx([30, 30, 6], rel=1e-3)
    # Straight cells on the corners alone would be 4 % short; the middles must be where they belong.
    exact = np.pi * (15**2 - 7**2) * 6
    linear = content(ring) * 1e9
    assert abs(linear / exact - 1) > 0.01
    fine = solid.tessellate(max_n_subdivide=2)
    assert fine.volume == pytest.approx(exact, rel=6e-3)


def test_shell_elements_of_a_part_are_plain_ones(ring: Mesh, tmp_path: Path) -> None:
    write_mesh(tmp_path / "a.inp", ring)
    types = [t for t in (tmp_path / "a.inp").read_text().splitlines() if t.startswith("*ELEMENT")]
    assert types == ["*ELEMENT, TYPE=C3D10"]


def test_patch_facets_are_in_both_groups(ring: Mesh, tmp_path: Path) -> None:
    patched = Mesh(
        points=ring.points,
        cells=ring.cells,
        facets=ring.facets,
        faces={**ring.faces, "patch": ring.faces["top"][:5]},
    )
    write_mesh(tmp_path / "a.msh", patched)
    mesh = read_mesh(tmp_path / "a.msh")
    assert len(mesh.faces["patch"]) == 5
    assert set(mesh.faces["patch"]) <= set(mesh.faces["top"])


def test_fields_are_32_bit_and_in_place(ring: Mesh, tmp_path: Path) -> None:
    field = np.column_stack((ring.points, ring.points[:, 0] ** 2))[:, [3, 1, 2]]
    write_vtu(tmp_path / "a.vtu", ring, {"mode 1": field, "height": ring.points[:, 2]})
    for points, data in (
        (lambda g: (g.points, g.point_data))(meshio.read(tmp_path / "a.vtu")),
        (lambda g: (np.asarray(g.points), g.point_data))(pyvista.read(tmp_path / "a.vtu")),
    ):
        assert np.asarray(data["mode 1"]).dtype == np.float32
        np.testing.assert_allclose(points, ring.points * 1e3, rtol=1e-12)
        np.testing.assert_allclose(data["mode 1"], field, rtol=1e-6)
        np.testing.assert_allclose(data["height"], ring.points[:, 2], rtol=1e-6)


def test_formats_that_cannot_hold_the_mesh_are_refused(ring: Mesh, tmp_path: Path) -> None:
    for name in ("a.stl", "a.foo", "a"):
        with pytest.raises(InputError, match="suffix"):
            write_mesh(tmp_path / name, ring)
    assert not list(tmp_path.iterdir())


# --- wrong meshes ---

CUBE = np.array([(x, y, z) for z in (0, 1) for y in (0, 1) for x in (0, 1)], float)
TETS = np.array(
    [(0, 1, 3, 7), (0, 3, 2, 7), (0, 2, 6, 7), (0, 6, 4, 7), (0, 4, 5, 7), (0, 5, 1, 7)]
)
FAR = CUBE + np.array([5.0, 0, 0])


def refused(tmp_path: Path, record: meshio.Mesh) -> str:
    meshio.write(tmp_path / "a.vtu", record)
    shape = make_shape(FAMILIES["mesh"], {"mesh": "a.vtu"}, folder=tmp_path)
    with pytest.raises(InputError) as error:
        generate(shape)
    assert error.value.key == "shape.mesh"
    assert "\n" not in str(error.value)
    return str(error.value)


def test_cube_of_six_is_accepted(tmp_path: Path) -> None:
    meshio.write(tmp_path / "a.vtu", meshio.Mesh(CUBE, [("tetra", TETS)]))
    mesh = generate(make_shape(FAMILIES["mesh"], {"mesh": "a.vtu"}, folder=tmp_path))
    assert mesh.volume == pytest.approx(1e-9)
    assert list(mesh.faces) == [f"face_{i}" for i in range(1, 7)]
    mirrored = meshio.Mesh(CUBE, [("tetra", TETS[:, [0, 2, 1, 3]])])
    meshio.write(tmp_path / "b.vtu", mirrored)
    assert read_mesh(tmp_path / "b.vtu").volume == pytest.approx(1e-9)


def second(cells: np.ndarray = TETS) -> tuple[np.ndarray, np.ndarray]:
    return raised(CUBE, cells)


def test_other_orders_of_middles_are_put_right(tmp_path: Path) -> None:
    points, cells = second()
    swapped = cells[:, [0, 1, 2, 3, 6, 5, 4, 7, 9, 8]]
    meshio.write(tmp_path / "a.vtu", meshio.Mesh(points, [("tetra10", swapped)]))
    mesh = read_mesh(tmp_path / "a.vtu")
    for k, (a, b) in enumerate(EDGES, 4):
        middle = (mesh.points[mesh.cells[:, a]] + mesh.points[mesh.cells[:, b]]) / 2
        np.testing.assert_allclose(mesh.points[mesh.cells[:, k]], middle, atol=1e-15)


def flipped(k: int) -> np.ndarray:
    cells = TETS.copy()
    cells[k] = cells[k][[0, 2, 1, 3]]
    return cells


def folded() -> meshio.Mesh:
    points, cells = second()
    points = points.copy()
    points[cells[0, 4]] = points[cells[0, 0]] + 3 * (points[cells[0, 7]] - points[cells[0, 0]])
    return meshio.Mesh(points, [("tetra10", cells)])


def own_middles() -> meshio.Mesh:
    points, cells = second()
    points = np.concatenate((points, points[cells[0, 4:]]))
    cells = cells.copy()
    cells[0, 4:] = np.arange(len(points) - 6, len(points))
    return meshio.Mesh(points, [("tetra10", cells)])


@pytest.mark.parametrize(
    ("record", "words"),
    [
        (lambda: meshio.Mesh(CUBE, [("triangle", TETS[:, :3])]), "no solid cells"),
        (lambda: meshio.Mesh(CUBE, [("tetra", flipped(2))]), "1 of 6 cells inverted"),
        (lambda: meshio.Mesh(CUBE * [1, 1, 0], [("tetra", TETS)]), "without volume"),
        (lambda: meshio.Mesh(CUBE, [("tetra", TETS[[0, 0, 1, 2]])]), "more than once"),
        (
            lambda: meshio.Mesh(
                np.concatenate((CUBE, FAR)), [("tetra", np.concatenate((TETS, TETS + 8)))]
            ),
            "2 bodies that share no nodes",
        ),
        (lambda: meshio.Mesh(CUBE, [("tetra", TETS[[0, 2]])]), "by an edge or a point only"),
        (
            lambda: meshio.Mesh(
                np.concatenate((CUBE, [[0.9, 0.5, 0.6]])),
                [("tetra", np.concatenate((TETS[:1], [[0, 1, 3, 8]])))],
            ),
            "over a neighbour",
        ),
        (lambda: meshio.Mesh(CUBE, [("tetra", TETS), ("tetra10", second()[1] % 8)]), "mixes"),
        (folded, "inverted or folded"),
        (own_middles, "do not share"),
        (lambda: meshio.Mesh(CUBE, [("tetra", TETS + 3)]), "not there"),
        (lambda: meshio.Mesh(CUBE * np.nan, [("tetra", TETS)]), "no number"),
        (
            lambda: meshio.Mesh(np.random.default_rng(1).random((20, 3)), [
                ("hexahedron20", np.arange(20)[None])
            ]),
            "hexahedron20",
        ),
    ],
)  # fmt: skip
def test_broken_meshes_end_in_one_sentence(tmp_path: Path, record, words: str) -> None:
    assert words in refused(tmp_path, record())


@pytest.mark.parametrize("suffix", [".msh", ".vtu", ".vtk", ".inp", ".bdf", ".mesh", ".vol"])
@pytest.mark.parametrize("content", [b"", b"junk that is no mesh\n" * 9, bytes(range(256)) * 9])
def test_files_that_are_no_mesh(tmp_path: Path, suffix: str, content: bytes) -> None:
    (tmp_path / f"a{suffix}").write_bytes(content)
    shape = make_shape(FAMILIES["mesh"], {"mesh": f"a{suffix}"}, folder=tmp_path)
    with pytest.raises((InputError, ToolError)) as error:
        generate(shape)
    assert isinstance(error.value, InputError)
    assert "\n" not in str(error.value)


@pytest.mark.parametrize(
    ("values", "words"),
    [
        ({"mesh": "none.msh"}, "no such file"),
        ({"mesh": "a.step"}, "suffix"),
        ({"mesh": "a.msh", "unit": "mile"}, "choices"),
        ({"mesh": ""}, "file name"),
        ({"mesh": "a.msh", "thickness": 2.0}, "unknown key"),
    ],
)
def test_wrong_values(tmp_path: Path, values, words: str) -> None:
    with pytest.raises(InputError, match=words):
        generate(make_shape(FAMILIES["mesh"], values, folder=tmp_path))
