"""Solids from STEP files whose unit lines were edited by hand; sizes known by hand."""

import math
from pathlib import Path

import numpy as np
import pytest
from modewright.geometry.errors import InputError
from modewright.geometry.families.table import FAMILIES
from modewright.geometry.imported import imported_anatomy
from modewright.geometry.mesh import Mesh
from modewright.geometry.mesher import generate
from modewright.geometry.quality import facet_areas
from modewright.geometry.shape import make_shape

DATA = Path(__file__).parent / "data"


def solid(name: str | Path, size: float, folder: Path = DATA) -> Mesh:
    return generate(
        make_shape(FAMILIES["solid"], {"solid": str(name)}, folder=folder), size_mm=size
    )


@pytest.mark.parametrize(
    ("name", "sides", "size"),
    [
        ("slab_mm.step", (0.06, 0.02, 0.005), 10.0),
        ("slab_m.step", (0.06, 0.02, 0.005), 10.0),
        ("slab_in.step", (6 * 0.0254, 2 * 0.0254, 0.5 * 0.0254), 25.0),
    ],
)
def test_box_and_mass(name: str, sides: tuple[float, float, float], size: float) -> None:
    """60 x 20 x 5 mm of steel weighs 47.1 g; 6 x 2 x 0.5 inches 771.8 g."""
    mesh = solid(name, size)
    np.testing.assert_allclose(np.ptp(mesh.points, axis=0), sides, rtol=1e-9)
    assert mesh.volume == pytest.approx(math.prod(sides), rel=1e-9)
    grams = 771.83 if "_in" in name else 47.1
    assert mesh.volume * 7850 * 1000 == pytest.approx(grams, rel=1e-5)
    assert imported_anatomy(mesh).length == pytest.approx(sides[0])


def test_faces_are_numbered_by_where_they_lie() -> None:
    mesh = solid("slab_mm.step", 10.0)
    assert list(mesh.faces) == [f"face_{i}" for i in range(1, 7)]
    areas = [facet_areas(mesh.points, mesh.facet_nodes(f)).sum() * 1e6 for f in mesh.faces]
    # By x of the middle: the end at x = 0, the four sides, the end at x = 60.
    assert areas == pytest.approx([100, 300, 1200, 1200, 300, 100], rel=1e-9)


def test_suffix_stp_and_upper_case(tmp_path: Path) -> None:
    (tmp_path / "SLAB.STP").write_text((DATA / "slab_mm.step").read_text())
    assert solid("SLAB.STP", 20.0, tmp_path).volume == pytest.approx(6e-6)


def cut(text: str, start: str) -> str:
    """Return STEP text without the entity that begins with `start`."""
    kept = [line for line in text.splitlines() if f"={start}" not in line]
    return "\n".join(kept)


SLAB = (DATA / "slab_mm.step").read_text()


@pytest.mark.parametrize(
    ("name", "content", "words"),
    [
        ("a.step", b"", "empty"),
        ("a.step", b"solid cube\n facet normal 0 0 1\n", "no STEP file"),
        ("a.step", bytes(range(256)) * 30, "no STEP file"),
        ("a.brep", b"ISO-10303-21;", "no BREP file"),
        ("a.step", b"ISO-10303-21;\nHEADER;\nENDSEC;\n", "a.step"),
        ("a.step", SLAB[: len(SLAB) // 2].encode(), "a.step"),
        ("a.step", cut(SLAB, "MANIFOLD_SOLID_BREP").encode(), "a.step"),
        ("a.step", cut(SLAB, "CLOSED_SHELL").encode(), "a.step"),
        ("a.brep", b"DBRep_DrawableShape\n\nCASCADE Topology V1, (c) Matra\njunk", "a.brep"),
        ("a.iges", b"S      1", "suffix"),
    ],
)
def test_files_that_are_no_solid(tmp_path: Path, name: str, content: bytes, words: str) -> None:
    (tmp_path / name).write_bytes(content)
    with pytest.raises(InputError, match=words) as error:
        solid(name, 10.0, tmp_path)
    assert "\n" not in str(error.value)


@pytest.mark.parametrize(("name", "words"), [("none.step", "no such file"), ("d.step", "folder")])
def test_missing_files(tmp_path: Path, name: str, words: str) -> None:
    (tmp_path / "d.step").mkdir()
    with pytest.raises(InputError, match=words):
        solid(name, 10.0, tmp_path)
