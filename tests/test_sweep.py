"""Modes followed by shape over a changed value, and the ``sweep`` command."""

from __future__ import annotations

import csv
import io
import json
from dataclasses import replace

import numpy as np
import pytest
from modewright.cases import build_case
from modewright.cases.command import main
from modewright.cases.vary import key_unit, varied
from modewright.cases.verbs.sweep import read_values, sweep_csv, sweep_table
from modewright.fem import Sweep, Track, follow, solve, sweep
from modewright.fem.study.follow import assurance
from modewright.geometry import InputError

DOCUMENT = {
    "title": "Quay rod",
    "shape": {"family": "bar", "length": 80.0, "width": 5.0, "thickness": 4.0},
    "material": {"youngs_modulus_gpa": 200, "poisson_ratio": 0.3, "density": 7850},
    "mount": {"kind": "clamped", "faces": ["root"]},
    "solve": {"modes": 4, "size": 4.0},
}


def with_width(width: float, **solve_table):
    shape = {**DOCUMENT["shape"], "width": width}
    return build_case(
        {**DOCUMENT, "shape": shape, "solve": {"modes": 4, "size": 4.0, **solve_table}}
    )


@pytest.fixture(scope="module")
def narrow():
    return solve(with_width(3.6))


@pytest.fixture(scope="module")
def broad():
    return solve(with_width(4.6))


def test_a_shape_is_most_like_itself(narrow):
    alike = assurance(narrow, narrow)
    assert np.diag(alike) == pytest.approx(1.0, abs=1e-9)
    assert alike.max() <= 1 + 1e-9
    # Modes are mass-orthogonal, here but for the rule of one point a cell.
    assert np.abs(alike - np.eye(len(narrow))).max() < 0.02


def test_a_shape_is_the_same_on_another_mesh(narrow):
    other = solve(with_width(3.6, size=2.7))
    alike = assurance(narrow, other)
    assert len(other.mesh.points) > 1.5 * len(narrow.mesh.points)
    assert np.diag(alike) == pytest.approx(1.0, abs=5e-3)
    assert follow(narrow, other) == [0, 1, 2, 3]


def test_modes_are_followed_through_a_crossing(narrow, broad):
    # Width passes thickness: across is below through at first, then above.
    assert narrow.names[:2] == ("edgewise bending 1", "flatwise bending 1")
    assert broad.names[:2] == ("flatwise bending 1", "edgewise bending 1")
    found = follow(narrow, broad)
    assert [broad.names[i] for i in found if i is not None] == list(narrow.names)


def test_a_mode_that_is_not_there_is_none(narrow, broad):
    without = replace(broad, modes=broad.modes[1:], shapes=broad.shapes[1:])
    assert follow(narrow, without)[1] is None


def test_tracks_cross_and_keep_their_law():
    widths = (3.6, 4.1, 4.6)
    result = sweep("width", widths, [with_width(w, modes=2) for w in widths], unit="mm")
    across, through = result.tracks
    assert (across.name, through.name) == ("edgewise bending 1", "flatwise bending 1")
    assert result.frequencies.shape == (2, 3)
    # A slender bar's edgewise frequency goes with its width, the flatwise one does not.
    assert across.frequencies[2] / across.frequencies[0] == pytest.approx(4.6 / 3.6, rel=0.01)
    assert through.frequencies[2] / through.frequencies[0] == pytest.approx(1.0, rel=0.003)
    assert across.frequencies[0] < through.frequencies[0]
    assert across.frequencies[2] > through.frequencies[2]


def test_a_material_changes_on_one_mesh(monkeypatch):
    import modewright.fem.study.sweep as module

    made = []
    original = module.case_mesh

    def counted(case, **named):
        made.append(case)
        return original(case, **named)

    monkeypatch.setattr(module, "case_mesh", counted)
    base = build_case(DOCUMENT)
    values = (100.0, 200.0, 400.0)
    cases = [
        build_case(varied(DOCUMENT, base, "material.youngs_modulus_gpa", value)) for value in values
    ]
    said: list[str] = []
    result = sweep("material.youngs_modulus_gpa", values, cases, progress=said.append)
    assert len(made) == 1
    scaled = result.frequencies / np.sqrt(values)
    assert scaled == pytest.approx(np.repeat(scaled[:, :1], 3, axis=1), rel=1e-9)
    assert any("(3 of 3)" in words for words in said)


def test_values_are_put_in_order():
    assert read_values("3, 1,2") == (1, 2, 3)
    assert read_values("-5,1e1,2.5") == (-5, 2.5, 10.0)
    assert read_values("root, tip") == ("root", "tip")


@pytest.mark.parametrize(
    "text", ["1", "", "1,,2", "1,x", "1,1.0", "nan,1", "1,inf", ",".join(map(str, range(201)))]
)
def test_values_that_are_none(text):
    with pytest.raises(InputError) as caught:
        read_values(text)
    assert caught.value.key == "--values"


def test_one_value_of_a_case_is_changed():
    base = build_case(DOCUMENT)
    assert varied(DOCUMENT, base, "width", 6)["shape"]["width"] == 6
    assert varied(DOCUMENT, base, "shape.width", 6)["shape"]["width"] == 6
    assert varied(DOCUMENT, base, "mount.kind", "free")["mount"]["kind"] == "free"
    assert varied(DOCUMENT, base, "mount.faces.1", "tip")["mount"]["faces"] == ["tip"]
    assert varied(DOCUMENT, base, "surroundings.temperature_c", 5)["surroundings"] == {
        "temperature_c": 5
    }
    assert DOCUMENT["shape"]["width"] == 5.0
    assert key_unit(base, "width") == key_unit(base, "shape.width") == "mm"
    assert key_unit(base, "material.density") is None
    assert key_unit(base, "flush") is None


def test_a_row_of_a_list_is_changed():
    rows = [{"length": 20.0, "width": 5.0, "thickness": 2.0}] * 2
    document = {**DOCUMENT, "shape": {"family": "stepped_bar", "segments": rows}}
    base = build_case(document)
    changed = varied(document, base, "segments.2.length", 30.0)
    assert changed["shape"]["segments"][1]["length"] == 30.0
    assert changed["shape"]["segments"][0]["length"] == 20.0
    assert key_unit(base, "segments.2.length") == "mm"
    assert build_case(changed).shape.dimensions["segments"][1]["length"] == 30.0


@pytest.mark.parametrize(
    ("key", "values", "part"),
    [
        ("widht", "1,2", "did you mean 'width'"),
        ("shape", "1,2", "no such dimension or key"),
        ("width.1", "1,2", "no such dimension"),
        ("mount.2.kind", "free,clamped", "unknown key"),
        ("mount.faces.2", "root,tip", "no such list item"),
        ("material.densty", "1,2", "did you mean 'density'"),
        ("material.density", "7.85,8", "did you mean 7850?"),
        ("width", "1,-2", "shape.width: is out of range"),
        ("width", "a,b", "shape.width: must be a number"),
        ("title", "a,b", "no such dimension or key"),
    ],
)
def test_wrong_sweeps_end_in_one_sentence(key, values, part, tmp_path, capsys):
    path = tmp_path / "case.toml"
    path.write_text(TEXT)
    assert main(["sweep", str(path), "--vary", key, "--values", values]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert part in err
    assert err.count("\n") == 1


TEXT = """
title = "Quay rod"
[shape]
family = "bar"
length = 80
width = 5
thickness = 4
[material]
name = "carbon steel"
[mount]
kind = "clamped"
faces = ["root"]
[solve]
modes = 2
size = 5
[[target]]
mode = "edgewise bending 1"
hz = 700
"""


def test_the_command_writes_table_and_picture(tmp_path, capsys):
    path = tmp_path / "case.toml"
    path.write_text(TEXT)
    out = tmp_path / "sweep"
    tokens = ["sweep", str(path), "--vary", "width", "--values", "5.5,5", "--out", str(out)]
    assert main([*tokens, "--json"]) == 0
    text, err = capsys.readouterr()
    document = json.loads(text)
    assert err == ""
    assert document["format"] == "modewright-sweep"
    assert (document["vary"], document["unit"], document["values"]) == ("width", "mm", [5, 5.5])
    assert json.loads((out / "sweep.json").read_text()) == document
    assert (out / "sweep.png").read_bytes().startswith(b"\x89PNG")
    assert sorted(p.name for p in out.iterdir()) == ["sweep.csv", "sweep.json", "sweep.png"]
    rows = list(csv.reader(io.StringIO((out / "sweep.csv").read_text())))
    assert rows[0][0] == "width (mm)"
    assert [row[0] for row in rows[1:]] == ["5", "5.5"]
    first = document["modes"][0]
    assert float(rows[1][1]) == first["frequencies_hz"][0]
    assert first["cents_first_to_last"] == pytest.approx(
        1200 * np.log2(first["frequencies_hz"][1] / first["frequencies_hz"][0])
    )


def test_table_and_csv_of_a_mode_that_gets_lost():
    result = Sweep(
        key="material.name",
        values=("steel", "brass"),
        tracks=(
            Track(name="torsion 1", names=("torsion 1", None), frequencies=(500.0, None)),
            Track(name="axial 1", names=("axial 1", "torsion 1"), frequencies=(900.0, 1800.0)),
        ),
    )
    table = sweep_table(result)
    assert table.headers == ("#", "mode", "steel", "brass", "cents, first to last")
    assert table.rows[0] == ("1", "torsion 1", "500.00", "", "")
    assert table.rows[1][-1] == "+1200.0"
    assert table.notes == ("'axial 1' is called 'torsion 1' at brass.",)
    assert np.isnan(result.frequencies[0, 1])
    rows = list(csv.reader(io.StringIO(sweep_csv(result))))
    assert rows[2] == ["brass", "", "1800.0"]
