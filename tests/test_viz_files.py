"""Result files read back by independent readers: JSON, CSV, arrays, VTU, glTF."""

import csv
import io
import json
import math
import os
import signal
import struct
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import meshio
import numpy as np
import pytest
import pyvista
import scipy.sparse as sparse
from modewright.fem.modal.case import Case
from modewright.fem.modal.element import cell_gradients, cell_quadrature
from modewright.fem.modal.material import Material
from modewright.fem.modal.modes import SHARES, MeshFacts, Mode, Modes, SolveFacts
from modewright.geometry.anatomy import Anatomy, Kind
from modewright.geometry.mesh import EDGES, FACET_EDGES, Mesh
from modewright.geometry.shape import Family, Shape
from modewright.viz import results
from modewright.viz.contour import nodal_lines, zero_lines
from modewright.viz.document import document_text, modes_document
from modewright.viz.results import write_results
from modewright.viz.surface import Surface, outer_surface
from modewright.viz.table import modes_csv, modes_table, table_csv
from modewright.viz.view import choose_view, exaggeration, scale_bar_length

LENGTH, WIDTH, THICKNESS = 0.12, 0.014, 0.0025
RADIUS = 0.08  # of the curved body's middle line

#: Six tetrahedra around one diagonal of a cube (Kuhn); corner number = x + 2 y + 4 z.
KUHN = ((0, 1, 3, 7), (0, 3, 2, 7), (0, 2, 6, 7), (0, 6, 4, 7), (0, 4, 5, 7), (0, 5, 1, 7))


def box_mesh(nx: int = 16, ny: int = 3, nz: int = 1) -> Mesh:
    """A bar from x = 0, in metres, by second-order tetrahedra."""
    axes = [np.linspace(0, LENGTH, nx + 1), np.linspace(-WIDTH / 2, WIDTH / 2, ny + 1)]
    axes.append(np.linspace(-THICKNESS / 2, THICKNESS / 2, nz + 1))
    corners = np.stack(np.meshgrid(*axes, indexing="ij"), -1).reshape(-1, 3)
    i, j, k = (a.ravel() for a in np.meshgrid(*map(np.arange, (nx, ny, nz)), indexing="ij"))
    cube = np.stack(
        [
            ((i + (v & 1)) * (ny + 1) + j + (v >> 1 & 1)) * (nz + 1) + k + (v >> 2 & 1)
            for v in range(8)
        ],
        axis=1,
    )
    cells = np.vstack([cube[:, list(t)] for t in KUHN])
    a, b, c, d = (corners[cells[:, q]] for q in range(4))
    turned = np.einsum("ij,ij->i", np.cross(b - a, c - a), d - a) < 0
    cells[turned] = cells[turned][:, [0, 2, 1, 3]]
    pairs = np.sort(np.stack([cells[:, e] for e in EDGES], 1).reshape(-1, 2), axis=1)
    edges, inverse = np.unique(pairs, axis=0, return_inverse=True)
    middle = {tuple(e): len(corners) + q for q, e in enumerate(edges.tolist())}
    sides = np.vstack([cells[:, f] for f in ([0, 2, 1], [0, 1, 3], [1, 2, 3], [0, 3, 2])])
    _, first, count = np.unique(
        np.sort(sides, axis=1), axis=0, return_index=True, return_counts=True
    )
    outer = sides[first[count == 1]]
    mids = [[middle[tuple(sorted((t[p], t[q])))] for p, q in FACET_EDGES] for t in outer.tolist()]
    return Mesh(
        points=np.vstack([corners, corners[edges].mean(axis=1)]),
        cells=np.hstack([cells, len(corners) + inverse.reshape(-1, 6)]),
        facets=np.hstack([outer, mids]),
        faces={"surface": np.arange(len(outer))},
        size=1e-3,
        volume=LENGTH * WIDTH * THICKNESS,
    )


def curled(points: np.ndarray) -> np.ndarray:
    """The bar wound about the y axis: straight lines along x become arcs."""
    angle, r = points[:, 0] / RADIUS, RADIUS + points[:, 2]
    return np.column_stack([r * np.sin(angle), points[:, 1], r * np.cos(angle)])


def cantilever(x: np.ndarray, root: float) -> tuple[np.ndarray, np.ndarray]:
    """Deflection and slope of a clamped-free beam at x = 0..1."""
    s = (math.cosh(root) + math.cos(root)) / (math.sinh(root) + math.sin(root))
    b = root * x
    return (
        np.cosh(b) - np.cos(b) - s * (np.sinh(b) - np.sin(b)),
        root * (np.sinh(b) + np.sin(b) - s * (np.cosh(b) - np.cos(b))),
    )


def three_shapes(p: np.ndarray) -> np.ndarray:
    x, y, z = p[:, 0] / LENGTH, p[:, 1], p[:, 2]
    flat = []
    for root in (1.87510, 4.69409):
        w, slope = cantilever(x, root)
        flat.append(np.column_stack([-z * slope / LENGTH, 0 * w, w]))
    turn = np.sin(np.pi / 2 * x)
    twist = np.column_stack([0 * turn, -z * turn, y * turn])
    return np.array([3.0 * flat[0], 3.0 * flat[1], 900.0 * twist])


def mode(index: int, name: str, hz: float, **changes) -> Mode:
    row = Mode(
        index=index,
        name=name,
        mixed=False,
        pair=None,
        frequency_hz=hz,
        raw_hz=hz,
        mesh_error_cents=None,
        note="G3",
        cents_from_note=-0.04,
        ratio=hz / 196.0,
        shares=dict(zip(SHARES, (0.9, 0.05, 0.03, 0.0, 0.02), strict=True)),
        prong_balance=None,
        root_share=None,
        tine_shares=None,
        nodal_points_mm=(),
        modal_mass_g=7.5,
        quality_factor=None,
        t60_s=None,
        decay_basis=None,
        theory_hz=None,
        theory=None,
        target_hz=None,
        cents_to_target=None,
        measured_hz=None,
        cents_to_measured=None,
        nearest_index=1 + index % 3,
        nearest_gap_cents=812.5,
        residual=1e-11,
    )
    return replace(row, **changes)


def make_modes(*, curved: bool = False) -> Modes:
    mesh = box_mesh()
    shapes = three_shapes(mesh.points)
    if curved:
        mesh = replace(mesh, points=curled(mesh.points))
    family = Family(
        name="sample",
        text="",
        dimensions=(),
        faces=(),
        check=lambda _: None,
        solid=lambda *_: None,
        anatomy=None,
    )
    case = Case(
        title="Ebb gauge",
        shape=Shape(family=family, dimensions={}, given={}, folder=Path()),
        material=Material(
            name="carbon steel", youngs_modulus=2e11, poisson_ratio=0.3, density=7850.0
        ),
        document={"title": "Ebb gauge", "shape": {"length": np.float64(120), "file": Path("a/b")}},
    )
    return Modes(
        case=case,
        mesh=mesh,
        anatomy=Anatomy(kind=Kind.BAR, length=LENGTH),
        modes=(
            mode(1, "flatwise bending 1", 196.0, target_hz=195.0, cents_to_target=8.86),
            mode(2, "flatwise bending 2", 1228.0, nodal_points_mm=(94.0,)),
            mode(3, "torsion 1", 1700.0, tine_shares=(0.25, 0.75), mixed=True),
        ),
        shapes=shapes,
        mesh_facts=MeshFacts(
            nodes=len(mesh.points),
            cells=len(mesh.cells),
            unknowns=3 * len(mesh.points),
            size_mm=1.0,
            mass_g=33.0,
            volume_mm3=4200.0,
        ),
        solve_facts=SolveFacts(
            direct_solver="splu",
            missing_modes=None,
            rigid_modes=0,
            seconds={"mesh": 0.1, "total": 0.2},
            peak_mb=100.0,
        ),
    )


@pytest.fixture(scope="module")
def modes() -> Modes:
    return make_modes()


def strict_json(text: str) -> dict:
    def refuse(word: str):
        raise AssertionError(f"{word} is not JSON")

    return json.loads(text, parse_constant=refuse)


# --- JSON and tables ---


def test_json_has_the_documented_keys_in_order(modes):
    document = strict_json(document_text(modes_document(modes)))
    assert list(document) == ["format", "version", "case", "mesh", "solve", "modes"]
    assert (document["format"], document["version"]) == ("modewright-modes", 1)
    assert (
        list(document["mesh"])
        == "nodes cells unknowns size_mm mass_g volume_mm3 volume_error_ppm area_error_ppm".split()
    )
    assert list(document["solve"]) == (
        "direct_solver missing_modes rigid_modes seconds peak_mb meshes".split()
    )
    assert list(document["modes"][0]) == (
        "index name mixed pair frequency_hz raw_hz mesh_error_cents note cents_from_note ratio "
        "shares prong_balance root_share tine_shares nodal_points_mm modal_mass_g quality_factor "
        "t60_s decay_basis theory_hz theory target_hz cents_to_target measured_hz "
        "cents_to_measured nearest_index nearest_gap_cents residual"
    ).split(" ")
    assert document["case"]["shape"] == {"length": 120.0, "file": "a/b"}
    assert document["modes"][2]["tine_shares"] == [0.25, 0.75]
    assert document["modes"][0]["nodal_points_mm"] == []
    assert document["modes"][0]["prong_balance"] is None


@pytest.mark.parametrize("bad", [math.nan, math.inf, np.float64("nan")])
def test_what_is_not_a_number_becomes_null(modes, bad):
    rows = (replace(modes.modes[0], theory_hz=bad), *modes.modes[1:])
    text = document_text(modes_document(replace(modes, modes=rows)))
    assert strict_json(text)["modes"][0]["theory_hz"] is None


def test_csv_holds_every_number_of_the_json(modes):
    rows = list(csv.DictReader(io.StringIO(modes_csv(modes))))
    for row, wanted in zip(rows, modes_document(modes)["modes"], strict=True):
        shares = wanted.pop("shares")
        assert {k: float(row.pop(f"share {k} (0-1)")) for k in SHARES} == shares
        assert list(row) == list(wanted)
        for key, value in wanted.items():
            if value is None:
                assert row[key] == ""
            elif isinstance(value, list):
                assert [float(part) for part in row[key].split()] == value
            elif isinstance(value, float):
                assert float(row[key]) == value
            else:
                assert row[key] == str(value)


def test_table_leaves_out_empty_columns(modes):
    table = modes_table(modes)
    assert table.headers[:3] == ("#", "mode", "Hz")
    assert "cents to target" in table.headers
    assert not {"measured Hz", "theory Hz", "Q", "axial %"} & set(table.headers)
    assert all(len(row) == len(table.headers) == len(table.numeric) for row in table.rows)
    column = table.headers.index("cents to target")
    assert [row[column] for row in table.rows] == ["+8.9", "", ""]
    assert table.rows[0][table.headers.index("cents")] == "+0.0"
    assert table.rows[2][1] == "torsion 1 (mixed)"
    assert any("clamp" in note for note in table.notes)
    assert next(csv.reader(io.StringIO(table_csv(table)))) == list(table.headers)


def test_table_shows_theory_and_pairs(modes):
    rows = tuple(replace(m, theory_hz=m.frequency_hz / 2, pair="torsion 1") for m in modes.modes)
    table = modes_table(replace(modes, modes=rows))
    column = table.headers.index("cents to theory")
    assert {row[column] for row in table.rows} == {"+1200.0"}
    assert any("the real split comes from the part" in note for note in table.notes)


# --- the surface and lines on it ---


@pytest.mark.parametrize("levels", [1, 2])
def test_surface_closes_round_the_body_and_parts_at_its_edges(modes, levels):
    surface = outer_surface(modes.mesh, levels=levels)
    a, b, c = (surface.points[surface.triangles[:, k]] for k in range(3))
    volume = np.einsum("ij,ij->", np.cross(a, b), c) / 6
    assert volume == pytest.approx(modes.mesh.volume, rel=1e-12)
    assert len(surface.triangles) == len(modes.mesh.facets) * 4**levels
    assert surface.patches.max() + 1 == 6
    ends = surface.points[surface.edges]
    length = np.linalg.norm(ends[:, 1] - ends[:, 0], axis=1).sum()
    assert length == pytest.approx(4 * (LENGTH + WIDTH + THICKNESS), rel=1e-12)
    moved = surface.values(modes.mesh.points**2)
    np.testing.assert_allclose(moved, surface.points**2, atol=1e-12)


def test_surface_of_a_curved_body_follows_its_arcs():
    mesh = make_modes(curved=True).mesh
    surface = outer_surface(mesh, levels=3)
    radii = np.hypot(surface.points[:, 0], surface.points[:, 2])
    sides = [radii[surface.patches == k] for k in range(6)]
    (radius,) = (side for side in sides if side.min() > RADIUS)
    np.testing.assert_allclose(radius, RADIUS + THICKNESS / 2, rtol=2e-6)


def test_zero_lines_of_a_linear_field_are_exact(modes):
    surface = outer_surface(modes.mesh)
    lines = zero_lines(surface.triangles, surface.points[:, 0] - 0.0501)
    ends = lines.places(surface.points)
    np.testing.assert_allclose(ends[:, 0], 0.0501, rtol=1e-12)
    length = np.linalg.norm(ends[1::2] - ends[::2], axis=1).sum()
    assert length == pytest.approx(2 * (WIDTH + THICKNESS), rel=1e-9)


def test_nodal_line_of_the_second_cantilever_mode(modes):
    # Node of the second clamped-free mode at 0.7834 of the length
    # (Blevins, Formulas for Natural Frequency and Mode Shape, 1979, table 8-1).
    surface = outer_surface(modes.mesh, levels=2)
    lines = nodal_lines(surface, surface.values(modes.shapes[1]))
    ends = lines.places(surface.points)
    np.testing.assert_allclose(ends[:, 0], 0.7834 * LENGTH, rtol=1e-3)
    assert np.linalg.norm(ends[1::2] - ends[::2], axis=1).sum() == pytest.approx(2 * WIDTH)
    first = nodal_lines(surface, surface.values(modes.shapes[0]))
    assert len(first.triangles) == 0


def test_a_bending_round_bar_has_nodal_lines_round_it_only():
    """Its flanks, where the normal lies across the motion, move as much as the rest."""
    turns, length, radius = 24, 1.0, 0.05
    x = np.linspace(0.0, length, 84)
    angle = 2 * np.pi * (np.arange(turns) + 0.3) / turns
    ring = np.column_stack([np.zeros(turns), radius * np.cos(angle), radius * np.sin(angle)])
    points = (ring + x[:, None, None] * [1.0, 0.0, 0.0]).reshape(-1, 3)
    a = np.arange(83)[:, None] * turns + np.arange(turns)
    b = np.arange(83)[:, None] * turns + (np.arange(turns) + 1) % turns
    quads = np.stack([a, b, b + turns, a + turns], axis=-1).reshape(-1, 4)
    triangles = np.vstack([quads[:, [0, 2, 1]], quads[:, [0, 3, 2]]])
    none = np.zeros((0, 2), int)
    surface = Surface(
        points=points,
        triangles=triangles,
        weights=sparse.eye_array(len(points), format="csr"),
        edges=none,
        edge_triangles=none,
        patches=np.zeros(len(points), int),
    )
    motion = np.zeros_like(points)
    motion[:, 2] = np.cos(2 * np.pi * points[:, 0])
    ends = nodal_lines(surface, motion).places(points)
    assert len(ends) > 40
    assert np.abs(np.abs(ends[:, 0] - 0.5) - 0.25).max() < 0.02


def test_motion_is_drawn_large_but_not_torn_and_fits_the_view(modes):
    surface = outer_surface(modes.mesh)
    diagonal = math.hypot(LENGTH, WIDTH, THICKNESS)
    motions = []
    for shape in modes.shapes:
        motion = surface.values(shape)
        motions.append(motion * exaggeration(surface.points, surface.triangles, motion))
        assert np.linalg.norm(motions[-1], axis=1).max() <= 0.0851 * diagonal
    assert np.linalg.norm(motions[0], axis=1).max() == pytest.approx(0.085 * diagonal)
    turned = np.linalg.norm(motions[2], axis=1).max() / (WIDTH / 2)
    assert 0.4 < turned < 0.7
    view = choose_view(modes.anatomy, surface.points, motions)
    for motion in motions:
        flat = view.flat(surface.points - motion)
        assert np.all(flat >= view.low - 1e-12)
        assert np.all(flat <= view.high + 1e-12)
    assert view.eye @ view.right == pytest.approx(0, abs=1e-12)


@pytest.mark.parametrize(("longest", "length"), [(0.7, 0.5), (1.0, 1.0), (49, 20), (1999, 1000)])
def test_scale_bars_have_round_lengths(longest, length):
    assert scale_bar_length(longest) == pytest.approx(length)


# --- files ---


@pytest.fixture(scope="module")
def curved_folder(tmp_path_factory) -> Path:
    folder = tmp_path_factory.mktemp("curved")
    write_results(make_modes(curved=True), folder, pictures=False)
    return folder


def test_npz(curved_folder):
    modes = make_modes(curved=True)
    with np.load(curved_folder / "modes.npz") as data:
        assert sorted(data) == ["cells", "frequencies_hz", "names", "points", "shapes"]
        np.testing.assert_array_equal(data["points"], modes.mesh.points)
        np.testing.assert_array_equal(data["cells"], modes.mesh.cells)
        np.testing.assert_array_equal(data["shapes"], modes.shapes)
        np.testing.assert_array_equal(data["frequencies_hz"], [196.0, 1228.0, 1700.0])
        assert tuple(data["names"]) == modes.names


def test_vtu_by_meshio(curved_folder):
    modes = make_modes(curved=True)
    record = meshio.read(curved_folder / "modes.vtu")
    assert list(record.point_data) == [
        "mode_01 flatwise bending 1 (196.00 Hz)",
        "mode_02 flatwise bending 2 (1228.00 Hz)",
        "mode_03 torsion 1 (1700.00 Hz)",
    ]
    cells = record.cells_dict["tetra10"]
    np.testing.assert_array_equal(cells, modes.mesh.cells)
    for field, shape in zip(record.point_data.values(), modes.shapes, strict=True):
        assert field.dtype == np.float32
        np.testing.assert_allclose(field, shape, rtol=1e-6, atol=1e-6)


def test_vtu_by_pyvista_has_the_node_order_of_vtk(curved_folder):
    mesh = make_modes(curved=True).mesh
    grid = pyvista.read(curved_folder / "modes.vtu")
    assert grid.n_cells == len(mesh.cells)
    assert set(grid.celltypes) == {pyvista.CellType.QUADRATIC_TETRA}
    # Each edge as VTK sees it: its middle lies on the arc between its ends.
    flat = box_mesh().points
    for k in range(0, grid.n_cells, 29):
        cell = grid.GetCell(k)
        for e in range(6):
            ids = cell.GetEdge(e).GetPointIds()
            first, last, middle = (ids.GetId(q) for q in range(3))
            wanted = curled((flat[[first]] + flat[[last]]) / 2)[0]
            np.testing.assert_allclose(grid.points[middle] / 1e3, wanted, atol=1e-9)
    x, weights = cell_quadrature(4)
    jacobian = np.einsum("qai,caj->cqij", cell_gradients(x), mesh.points[mesh.cells])
    volume = float(np.linalg.det(jacobian).sum(axis=0) @ weights)
    # Of the bar wound about an axis: middle line times section (Pappus).
    assert volume == pytest.approx(mesh.volume, rel=1e-5)
    sizes = grid.compute_cell_sizes(length=False, area=False).cell_data["Volume"]
    assert sizes.sum() * 1e-9 == pytest.approx(volume, rel=2e-3)


def read_glb(path: Path) -> tuple[dict, bytes]:
    content = path.read_bytes()
    magic, version, length = struct.unpack_from("<4sII", content)
    assert (magic, version, length) == (b"glTF", 2, len(content))
    size, kind = struct.unpack_from("<I4s", content, 12)
    assert (kind, size % 4) == (b"JSON", 0)
    document = strict_json(content[20 : 20 + size].decode())
    binary_size, kind = struct.unpack_from("<I4s", content, 20 + size)
    assert kind == b"BIN\0"
    binary = content[28 + size :]
    assert len(binary) == binary_size == document["buffers"][0]["byteLength"]
    return document, binary


def accessor(document: dict, binary: bytes, number: int) -> np.ndarray:
    entry = document["accessors"][number]
    view = document["bufferViews"][entry["bufferView"]]
    code = {5120: "b", 5122: "h", 5123: "H", 5125: "I", 5126: "f"}[entry["componentType"]]
    width = {"SCALAR": 1, "VEC3": 3}[entry["type"]]
    size = struct.calcsize(code) * width
    stride = view.get("byteStride", size)
    assert stride % 4 == 0 or width == 1
    assert (entry["count"] - 1) * stride + size <= view["byteLength"]
    rows = np.array(
        [
            struct.unpack_from(f"<{width}{code}", binary, view["byteOffset"] + k * stride)
            for k in range(entry["count"])
        ]
    )
    if "min" in entry:
        assert rows.min(axis=0).tolist() == entry["min"]
        assert rows.max(axis=0).tolist() == entry["max"]
    return rows


def test_glb_moves_the_surface_and_loops(curved_folder):
    modes = make_modes(curved=True)
    document, binary = read_glb(curved_folder / "modes.glb")
    (node,), (mesh,) = document["nodes"], document["meshes"]
    (primitive,) = mesh["primitives"]
    surface = outer_surface(modes.mesh)
    step = node["scale"][0]
    assert step < 3e-6
    x, y, z, w = node["rotation"]
    assert (y, z, x * x + w * w) == (0, 0, pytest.approx(1))
    assert 2 * x * w == pytest.approx(-1)  # minus a quarter turn about x: (x, y, z) to (x, z, -y)

    def upright(vectors: np.ndarray) -> np.ndarray:
        return np.column_stack([vectors[:, 0], vectors[:, 2], -vectors[:, 1]])

    place = upright(accessor(document, binary, primitive["attributes"]["POSITION"]) * step)
    error = np.abs(place + node["translation"] - upright(surface.points)).max()
    assert error <= 0.501 * step
    triangles = accessor(document, binary, primitive["indices"]).reshape(-1, 3)
    np.testing.assert_array_equal(triangles, surface.triangles)
    normal = accessor(document, binary, primitive["attributes"]["NORMAL"]) / 32767
    np.testing.assert_allclose(np.linalg.norm(normal, axis=1), 1, atol=1e-4)
    assert np.einsum("ij,ij->i", normal[triangles[:, 0]], _normals(surface)).min() > 0.85

    assert len(primitive["targets"]) == len(mesh["weights"]) == len(document["animations"]) == 3
    for k, (target, clip) in enumerate(
        zip(primitive["targets"], document["animations"], strict=True)
    ):
        shift = accessor(document, binary, target["POSITION"]) * step
        shape = surface.values(modes.shapes[k])
        factor = (shift * shape).sum() / (shape * shape).sum()
        assert np.abs(shift - factor * shape).max() <= 0.6 * step
        assert clip["name"] == f"{modes.names[k]}, {modes.frequencies[k]:.2f} Hz"
        (sampler,) = clip["samplers"]
        times = accessor(document, binary, sampler["input"])[:, 0]
        weights = accessor(document, binary, sampler["output"]).reshape(len(times), -1)
        assert (times[0], weights.shape[1]) == (0, 3)
        assert np.all(np.diff(times) > 0)
        np.testing.assert_array_equal(weights[0], weights[-1])
        np.testing.assert_allclose(weights[:, k], np.sin(2 * np.pi * times / times[-1]), atol=1e-6)
        assert np.all(np.delete(weights, k, axis=1) == 0)


def _normals(surface) -> np.ndarray:
    a, b, c = (surface.points[surface.triangles[:, k]] for k in range(3))
    n = np.cross(b - a, c - a)
    return n / np.linalg.norm(n, axis=1, keepdims=True)


@pytest.mark.skipif(
    "GLTF_VALIDATOR" not in os.environ, reason="GLTF_VALIDATOR names no folder with the npm package"
)
def test_glb_by_the_khronos_validator(curved_folder):
    script = (
        "const v=require(process.argv[1]+'/node_modules/gltf-validator');"
        "v.validateBytes(new Uint8Array(require('fs').readFileSync(process.argv[2])))"
        ".then(r=>console.log(JSON.stringify(r.issues)))"
    )
    command = ["node", "-e", script, os.environ["GLTF_VALIDATOR"], curved_folder / "modes.glb"]
    done = subprocess.run(command, capture_output=True, text=True, check=True, timeout=60)
    issues = json.loads(done.stdout)
    assert issues["messages"] == []


# --- the set of files as a whole ---


def content(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in folder.iterdir()}


def test_a_smaller_result_leaves_nothing_of_the_larger(modes, tmp_path):
    for name in ("sheet.png", "mode_01.webp", "mode_13.webp", "notes.txt", "mode_1.webp"):
        (tmp_path / name).write_text("of an earlier run")
    written = write_results(modes, tmp_path, pictures=False)
    names = [path.name for path in written.files]
    assert names == ["modes.json", "modes.csv", "modes.npz", "modes.vtu", "modes.glb"]
    assert sorted(content(tmp_path)) == sorted([*names, "notes.txt", "mode_1.webp"])
    assert written.skipped == ()


def test_a_failure_half_way_leaves_the_old_files(modes, tmp_path, monkeypatch):
    write_results(modes, tmp_path, pictures=False)
    before = content(tmp_path)

    def fail(*_):
        raise RuntimeError("half way")

    monkeypatch.setattr(results, "write_modes_glb", fail)
    with pytest.raises(RuntimeError, match="half way"):
        write_results(
            replace(modes, modes=modes.modes[:2], shapes=modes.shapes[:2]), tmp_path, pictures=False
        )
    assert content(tmp_path) == before


@pytest.mark.skipif(sys.platform == "win32", reason="no SIGKILL")
def test_a_kill_half_way_leaves_the_old_files(modes, tmp_path):
    write_results(modes, tmp_path, pictures=False)
    before = content(tmp_path)
    done = subprocess.run([sys.executable, __file__, tmp_path], check=False, timeout=120)
    assert done.returncode == -signal.SIGKILL
    after = {path.name: path.read_bytes() for path in tmp_path.iterdir() if path.is_file()}
    assert after == before


def test_without_a_renderer_all_other_files_are_written(modes, tmp_path, monkeypatch):
    (tmp_path / "sheet.png").write_text("of an earlier run")
    monkeypatch.setattr(results, "rendering_problem", lambda: "no OpenGL, install libegl1")
    written = write_results(modes, tmp_path)
    (sentence,) = written.skipped
    assert "libegl1" in sentence
    assert sorted(content(tmp_path)) == sorted(path.name for path in written.files)
    assert len(written.files) == 5


def test_an_interrupt_while_drawing_keeps_the_numbers(modes, tmp_path, monkeypatch):
    def interrupt(*_, **__):
        raise KeyboardInterrupt

    monkeypatch.setattr(results, "rendering_problem", lambda: None)
    monkeypatch.setattr(results, "draw_pictures", interrupt)
    with pytest.raises(KeyboardInterrupt):
        write_results(modes, tmp_path)
    assert len(content(tmp_path)) == 5


if __name__ == "__main__":
    results.write_modes_glb = lambda *_: os.kill(os.getpid(), signal.SIGKILL)
    write_results(make_modes(), Path(sys.argv[1]), pictures=False)
