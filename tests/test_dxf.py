"""DXF drawings, hand-edited: sizes known by hand, units, layers, blocks, wrong files."""

import math
from pathlib import Path

import ezdxf
import numpy as np
import pytest
from modewright.geometry.curve import at, sampled
from modewright.geometry.dxf import read_dxf
from modewright.geometry.errors import InputError
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.mesher import generate
from modewright.geometry.outline import outline_of_segments
from modewright.geometry.shape import make_shape
from modewright.geometry.solid import Arc, BSpline, Circle, EllipseArc

DATA = Path(__file__).parent / "data"
INCH = 25.4


def box(segments) -> np.ndarray:
    points = np.concatenate([sampled(s) for s in segments])
    return np.array([points.min(axis=0), points.max(axis=0)])


def test_inches() -> None:
    """A plate 4 x 2 inches, a half circle of 1 inch at its end, a hole of 0.5 inch radius."""
    segments = read_dxf(DATA / "tag_in.dxf")
    np.testing.assert_allclose(box(segments), [[-INCH, 0], [4 * INCH, 2 * INCH]], atol=1e-9)
    area = (8 + math.pi / 2 - math.pi / 4) * INCH**2
    assert outline_of_segments(segments).area == pytest.approx(area, rel=1e-12)


def test_mass_of_the_inch_drawing() -> None:
    """0.1 inch thick and of 7850 kg/m3, the plate weighs 113.0 g."""
    shape = make_shape(
        FAMILIES["outline"], {"outline": "tag_in.dxf", "thickness": 2.54}, folder=DATA
    )
    mesh = generate(shape, size_mm=8.0)
    assert mesh.volume * 7850 == pytest.approx(0.11301, rel=1e-4)
    np.testing.assert_allclose(np.ptp(mesh.points, axis=0), [0.127, 0.0508, 0.00254], rtol=1e-5)


def test_metres_bulges_and_blocks() -> None:
    """A stadium 60 x 20 mm plus its round ends; holes by one block, round and stretched."""
    segments = read_dxf(DATA / "stadium_m.dxf")
    kinds = [type(s) for s in segments]
    assert kinds.count(Arc) == 2
    assert kinds.count(Circle) == kinds.count(EllipseArc) == 1
    np.testing.assert_allclose(box(segments), [[-10, 0], [70, 20]], atol=1e-9)
    area = 60 * 20 + math.pi * 10**2 - math.pi * 4**2 - math.pi * 6 * 3
    assert outline_of_segments(segments).area == pytest.approx(area, rel=1e-12)


def test_drawing_without_a_unit_needs_one() -> None:
    with pytest.raises(InputError, match=r"\$INSUNITS"):
        read_dxf(DATA / "square_r12.dxf")
    square = outline_of_segments(read_dxf(DATA / "square_r12.dxf", "cm"))
    assert square.area == pytest.approx(100 * 100)


def test_unit_against_the_drawing_is_refused() -> None:
    with pytest.raises(InputError, match=r"25\.4 mm"):
        read_dxf(DATA / "tag_in.dxf", "mm")
    assert len(read_dxf(DATA / "tag_in.dxf", "in")) == 5


@pytest.mark.parametrize(
    ("code", "millimetres"), [(1, 25.4), (2, 304.8), (4, 1.0), (5, 10.0), (6, 1000.0), (13, 1e-3)]
)
def test_every_unit_of_the_header(tmp_path: Path, code: int, millimetres: float) -> None:
    text = (
        (DATA / "tag_in.dxf").read_text().replace("$INSUNITS\n70\n1\n", f"$INSUNITS\n70\n{code}\n")
    )
    (tmp_path / "a.dxf").write_text(text)
    assert np.ptp(box(read_dxf(tmp_path / "a.dxf")), axis=0)[0] == pytest.approx(5 * millimetres)


def drawing(path: Path, draw) -> Path:
    document = ezdxf.new("R2010", units=4)
    draw(document.modelspace(), document)
    document.saveas(path)
    return path


def test_splines_stay_splines(tmp_path: Path) -> None:
    def draw(space, _) -> None:
        space.add_spline_control_frame([(0, 0), (10, 20), (20, 0), (30, 10)], degree=3)
        space.add_rational_spline([(0, 0), (0, -10), (30, -10), (30, 10)], [1, 2, 2, 1])

    segments = read_dxf(drawing(tmp_path / "a.dxf", draw))
    assert all(isinstance(s, BSpline) for s in segments)
    assert any(isinstance(s, BSpline) and s.weights for s in segments)
    source = ezdxf.readfile(tmp_path / "a.dxf").modelspace().query("SPLINE")
    for spline in source:
        curve = spline.construction_tool()
        wanted = np.array([p.vec2 for p in curve.points(np.linspace(0, curve.max_t, 60))])
        near = np.concatenate([at(s, np.linspace(0, 1, 4001)) for s in segments])
        apart = np.linalg.norm(wanted[:, None] - near[None], axis=2).min(axis=1)
        assert apart.max() < 0.02


def test_closed_spline_and_ellipse(tmp_path: Path) -> None:
    def draw(space, _) -> None:
        space.add_spline().set_closed([(30, 0, 0), (0, 30, 0), (-30, 0, 0), (0, -30, 0)])
        space.add_ellipse((0, 0), major_axis=(5, 0), ratio=0.5)

    outline = outline_of_segments(read_dxf(drawing(tmp_path / "a.dxf", draw)))
    assert len(outline.outer) == 2
    assert outline.holes[0][0] == EllipseArc(
        centre=(0.0, 0.0), major=(5.0, 0.0), ratio=0.5, first=0.0, last=2 * math.pi
    )


def test_mirrored_arcs_and_ellipses(tmp_path: Path) -> None:
    """Seen from below (extrusion -z), an arc bulges to the other side of the drawing."""

    def draw(space, _) -> None:
        under = {"extrusion": (0, 0, -1)}
        space.add_arc((-10, 0), 5, 90, 270, dxfattribs=under)
        space.add_line((10, 5), (10, -5))

    segments = read_dxf(drawing(tmp_path / "a.dxf", draw))
    np.testing.assert_allclose(box(segments), [[10, -5], [15, 5]], atol=1e-9)


def test_arc_through_the_angle_zero(tmp_path: Path) -> None:
    def draw(space, _) -> None:
        space.add_arc((0, 0), 5, 315, 45)

    np.testing.assert_allclose(
        box(read_dxf(drawing(tmp_path / "a.dxf", draw))),
        [[5 / 2**0.5, -5 / 2**0.5], [5, 5 / 2**0.5]],
        atol=1e-9,
    )


def test_hidden_layers_and_annotation_are_passed_over(tmp_path: Path) -> None:
    def draw(space, document) -> None:
        document.layers.add("GHOST").freeze()
        document.layers.add("OFF").off()
        space.add_lwpolyline([(0, 0), (50, 0), (50, 20), (0, 20)], close=True)
        space.add_line((0, 30), (10, 30), dxfattribs={"layer": "GHOST"})
        space.add_line((0, 30), (10, 30), dxfattribs={"layer": "OFF"})
        space.add_line((0, 30), (10, 30), dxfattribs={"invisible": 1})
        space.add_text("LOW WATER")
        space.add_mtext("high water")
        space.add_point((100, 100))
        space.add_linear_dim(base=(0, -5), p1=(0, 0), p2=(50, 0)).render()
        block = document.blocks.new("B")
        block.add_line((0, 0), (5, 5))
        space.add_blockref("B", (0, 0), dxfattribs={"layer": "GHOST"})

    assert outline_of_segments(read_dxf(drawing(tmp_path / "a.dxf", draw))).area == 1000


def test_leaf_example_is_one_part() -> None:
    leaf = Path(__file__).parents[1] / "cases/examples/leaf_gong/leaf.dxf"
    outline = outline_of_segments(read_dxf(leaf))
    assert len(outline.outer) == 4
    assert len(outline.holes) == 1
    values = {"outline": str(leaf), "thickness": 5.0}
    mesh = generate(make_shape(FAMILIES["outline"], values), size_mm=15.0)
    # The kernel itself refuses a body whose volume is not the drawing's to 1e-6.
    assert mesh.volume == pytest.approx(outline.area * 5e-9, rel=1e-9)


def flat_error(tmp_path: Path, draw) -> InputError:
    with pytest.raises(InputError) as error:
        outline_of_segments(read_dxf(drawing(tmp_path / "a.dxf", draw)))
    assert "\n" not in str(error.value)
    return error.value


@pytest.mark.parametrize(
    ("draw", "words"),
    [
        (lambda s, d: None, "draws no outline"),
        (lambda s, d: s.add_text("only words"), "only TEXT"),
        (lambda s, d: s.add_line((0, 0, 0), (10, 0, 5)), "not flat"),
        (lambda s, d: s.add_3dface([(0, 0), (1, 0), (1, 1), (0, 1)]), "3DFACE"),
        (lambda s, d: s.add_lwpolyline([(0, 0), (50, 0), (50, 20), (0, 20)]), "open at"),
        (lambda s, d: s.add_polyface().append_face([(0, 0), (1, 0), (1, 1)]), "polyline mesh"),
        (lambda s, d: [s.add_circle((x, 0), 4) for x in (0, 20)], "outside the outline"),
    ],
)
def test_wrong_drawings_end_in_one_sentence(tmp_path: Path, draw, words: str) -> None:
    assert words in str(flat_error(tmp_path, draw))


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"", "empty"),
        (b"  \n \n", "empty"),
        (bytes(range(256)) * 20, "cannot be read"),
        (b"dear shop, please cut the leaf\n", "cannot be read"),
        (b"0\nSECTION\n2\nHEADER\n9\n$INSUNITS\n70\n4\n0\nENDSEC\n0\nEOF\n", "draws no outline"),
    ],
)
def test_files_that_are_no_drawing(tmp_path: Path, content: bytes, words: str) -> None:
    (tmp_path / "a.dxf").write_bytes(content)
    shape = make_shape(FAMILIES["outline"], {"outline": "a.dxf", "thickness": 1.0}, folder=tmp_path)
    with pytest.raises(InputError, match=words) as error:
        shape.solid()
    assert "\n" not in str(error.value)


@pytest.mark.parametrize(("name", "words"), [("b.dxf", "no such file"), ("b.png", "suffix")])
def test_missing_file_or_unknown_suffix(tmp_path: Path, name: str, words: str) -> None:
    shape = make_shape(FAMILIES["outline"], {"outline": name, "thickness": 1.0}, folder=tmp_path)
    with pytest.raises(InputError, match=words):
        shape.solid()
