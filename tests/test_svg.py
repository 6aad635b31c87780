"""SVG drawings, hand-edited: sizes known by hand, units, transforms, wrong files."""

import math
from pathlib import Path

import numpy as np
import pytest
from modewright.geometry.curve import sampled
from modewright.geometry.errors import InputError
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.outline import outline_of_segments
from modewright.geometry.shape import make_shape
from modewright.geometry.solid import Arc, BSpline, Circle
from modewright.geometry.svg import read_svg

DATA = Path(__file__).parent / "data"
OPEN = '<svg xmlns="http://www.w3.org/2000/svg" width="100mm" height="100mm" viewBox="0 0 100 100">'


def box(segments) -> np.ndarray:
    points = np.concatenate([sampled(s) for s in segments])
    return np.array([points.min(axis=0), points.max(axis=0)])


def drawn(tmp_path: Path, body: str, head: str = OPEN) -> Path:
    (tmp_path / "a.svg").write_text(head + body + "</svg>")
    return tmp_path / "a.svg"


def test_millimetres_with_a_scaled_view_box() -> None:
    """80 x 20 mm with a half circle of 10 mm, a bore of 2 mm radius, a turned slot 10 x 5 mm."""
    segments = read_svg(DATA / "key_mm.svg")
    np.testing.assert_allclose(box(segments), [[10, 20], [100, 40]], atol=1e-9)
    outline = outline_of_segments(segments)
    assert sum(isinstance(s, Arc) for s in outline.outer) == 1
    assert any(isinstance(loop[0], Circle) for loop in outline.holes)
    area = 80 * 20 + math.pi * 50 - math.pi * 4 - 10 * 5
    assert outline.area == pytest.approx(area, rel=1e-12)


def test_inches_and_quadratic_curves() -> None:
    segments = read_svg(DATA / "lens_in.svg")
    assert all(isinstance(s, BSpline) and s.degree == 2 for s in segments)
    assert outline_of_segments(segments).area == pytest.approx(16 / 3 * 25.4**2, rel=1e-12)
    np.testing.assert_allclose(box(segments), [[0, 0], [4 * 25.4, 2 * 25.4]], atol=1e-9)


def test_pixels_are_a_96th_of_an_inch_unless_told() -> None:
    path = DATA / "square_px.svg"
    np.testing.assert_allclose(box(read_svg(path)), [[0, 12.7], [25.4, 25.4]], atol=1e-9)
    np.testing.assert_allclose(box(read_svg(path, "mm")), [[0, 48], [96, 96]], atol=1e-9)
    with pytest.raises(InputError, match="120mm"):
        read_svg(DATA / "key_mm.svg", "in")


def test_y_points_up(tmp_path: Path) -> None:
    segments = read_svg(drawn(tmp_path, '<polygon points="0,100 50,100 0,70"/>'))
    np.testing.assert_allclose(box(segments), [[0, 0], [50, 30]], atol=1e-9)


@pytest.mark.parametrize("flags", ["0 0", "0 1", "1 0", "1 1"])
def test_elliptic_arcs_end_where_they_should(tmp_path: Path, flags: str) -> None:
    body = f'<path d="M30 50 A 30 15 20 {flags} 60 60 Z"/>'
    outline = outline_of_segments(read_svg(drawn(tmp_path, body)))
    # Large and small arcs of one ellipse add up to it; the angle is that of its axes.
    other = " ".join(("1" if flags[0] == "0" else "0", flags[2]))
    both = (
        outline.area
        + outline_of_segments(
            read_svg(drawn(tmp_path, f'<path d="M30 50 A 30 15 20 {other} 60 60 Z"/>'))
        ).area
    )
    assert both == pytest.approx(math.pi * 30 * 15, rel=1e-9)


def test_skewed_circle_keeps_its_exact_area(tmp_path: Path) -> None:
    body = '<g transform="matrix(1 0.3 0.5 1.2 0 0)"><circle cx="30" cy="30" r="10"/></g>'
    area = outline_of_segments(read_svg(drawn(tmp_path, body))).area
    assert area == pytest.approx(math.pi * 100 * (1.2 - 0.15), rel=1e-12)


def test_rounded_rectangle_and_nested_transforms(tmp_path: Path) -> None:
    body = '<g transform="scale(2)"><rect x="1" y="2" width="20" height="10" rx="2"/></g>'
    area = outline_of_segments(read_svg(drawn(tmp_path, body))).area
    assert area == pytest.approx(4 * (200 - (4 - math.pi) * 4), rel=1e-9)


def test_symbols_clips_and_text_are_not_edges(tmp_path: Path) -> None:
    body = (
        '<symbol id="s"><circle cx="5" cy="5" r="2"/></symbol>'
        '<clipPath id="c"><rect width="3" height="3"/></clipPath>'
        '<rect width="50" height="50"/><use href="#s" x="10" y="10"/><text y="9">x</text>'
        '<g visibility="hidden"><rect x="60" width="9" height="9"/></g>'
    )
    outline = outline_of_segments(read_svg(drawn(tmp_path, body)))
    assert outline.area == pytest.approx(2500 - math.pi * 4, rel=1e-9)


@pytest.mark.parametrize(
    ("head", "body", "words"),
    [
        (OPEN, "", "draws no outline"),
        (OPEN, "<text>words</text>", "draws no outline"),
        (OPEN, '<path d="M0 0 L 10 0 L 10 10"/>', "open at"),
        (OPEN, '<path d="M0 0 L 10 10 L 10 0 L 0 10 Z"/>', "crosses"),
        (OPEN, '<rect width="9" height="9" transform="scale(0 1)"/>', "flattens"),
        (OPEN, '<symbol id="s" viewBox="0 0 1 1"><path/></symbol><use href="#s"/>', "viewBox"),
        ('<svg width="0mm" height="1mm">', '<rect width="1" height="1"/>', "not over 0"),
        ('<svg width="3furlong">', "", "unknown unit"),
        ('<svg viewBox="0 0 10">', "", "four numbers"),
        ('<svg viewBox="0 0 0 10">', "", "without a size"),
        ("<html><svg/>", "", "cannot be read"),
    ],
)
def test_wrong_drawings_end_in_one_sentence(tmp_path: Path, head: str, body: str, words) -> None:
    with pytest.raises(InputError) as error:
        outline_of_segments(read_svg(drawn(tmp_path, body, head)))
    assert words in str(error.value)
    assert "\n" not in str(error.value)


@pytest.mark.parametrize("content", [b"\x00\xff\x13junk" * 50, b"<svg", b"<dxf></dxf>", b"plain"])
def test_files_that_are_no_drawing(tmp_path: Path, content: bytes) -> None:
    (tmp_path / "a.svg").write_bytes(content)
    shape = make_shape(FAMILIES["outline"], {"outline": "a.svg", "thickness": 1.0}, folder=tmp_path)
    with pytest.raises(InputError, match="SVG drawing"):
        shape.solid()
