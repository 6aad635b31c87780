"""The case file: what it makes of good input, and one sentence for every kind of bad input."""

from __future__ import annotations

import json
import math
from pathlib import Path

import pytest
from modewright.cases.command import main
from modewright.cases.reader import build_case, case_document, read_case
from modewright.fem.modal.mount import Hold
from modewright.geometry.errors import InputError
from modewright.geometry.selector import ByName, InBox, Near, OnPlane
from modewright.geometry.solid import Patch

GOOD = """
title = "Low-water tine"
version = 1

[shape]
family = "fork"
length = 120.0
width = 14.0
thickness = 2.5
slot_length = 70.0
slot_width = 2.0

[material]
name = "carbon steel"
youngs_modulus_gpa = 205.5

[mount]
kind = "clamped"
faces = ["root"]

[[attached_mass]]
at = [118.0, 4.0, 1.25]
radius = 1.5
grams = 0.4

[pitch]
a4_hz = 442.0

[solve]
modes = 6
size = 1.5

[[target]]
mode = "flatwise bending 1, prongs together"
note = "G3"
cents = 5

[[target]]
mode = "flatwise bending 2, prongs together"
ratio = 2.5
of = "flatwise bending 1, prongs together"

[[measured]]
mode = "torsion 1"
hz = 870.25

[[expect]]
mode = "flatwise bending 1, prongs together"
hz = 196.0
tolerance_cents = 5
source = "a formula"
"""


def write(folder: Path, text: str | bytes) -> Path:
    path = folder / "case.toml"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return path


def changed(old: str, new: str) -> str:
    assert GOOD.count(old) >= 1, old
    return GOOD.replace(old, new, 1)


def test_units_become_si(tmp_path):
    case = read_case(write(tmp_path, GOOD))
    assert case.title == "Low-water tine"
    assert case.material.youngs_modulus == pytest.approx(205.5e9, rel=1e-15)
    assert case.material.density == 7850.0  # the library's, not overridden
    assert case.attached_masses[0].mass == pytest.approx(0.4e-3)
    assert case.attached_masses[0].at == (118.0, 4.0, 1.25)
    assert case.shape.dimensions["slot_end"] == "round"  # the default
    assert case.settings.modes == 6
    assert case.settings.size == 1.5
    assert case.measured[0].frequency == 870.25
    assert case.expected[0].source == "a formula"


def test_a_note_is_told_against_a4(tmp_path):
    case = read_case(write(tmp_path, GOOD))
    # G3 lies 14 semitones below A4 in equal temperament.
    wanted = 442.0 * 2.0 ** (-14 / 12 + 5 / 1200)
    assert case.targets[0].frequency == pytest.approx(wanted, rel=1e-14)
    assert case.targets[1].frequency is None
    assert case.targets[1].ratio == 2.5


def test_the_resolved_document_reads_back_to_itself(tmp_path):
    case = read_case(write(tmp_path, GOOD))
    document = case_document(case)
    again = build_case(json.loads(json.dumps(document)))
    assert case_document(again) == document
    assert again.material == case.material
    assert again.mounts == case.mounts
    assert document["shape"]["slot_end"] == "round"
    assert document["material"]["poisson_ratio"] == case.material.poisson_ratio


def test_defaults():
    case = build_case(
        {
            "title": "t",
            "shape": {"family": "bar", "length": 60, "width": 8, "thickness": 1.2},
            "material": {"youngs_modulus_gpa": 205, "poisson_ratio": 0.29, "density": 7850},
        }
    )
    assert case.mounts == ()
    assert case.temperature == 20.0
    assert case.pitch.a4 == 440.0
    assert (case.settings.modes, case.settings.up_to, case.settings.size) == (12, None, None)


def test_a_highest_frequency_alone_lifts_the_limit_on_the_number():
    case = build_case(
        {
            "title": "t",
            "shape": {"family": "bar", "length": 60, "width": 8, "thickness": 1.2},
            "material": {"name": "carbon steel"},
            "solve": {"up_to_hz": 5000},
        }
    )
    assert (case.settings.modes, case.settings.up_to) == (None, 5000.0)


def test_every_selector(tmp_path):
    faces = (
        '["root", { plane = "x", at = "max" }, { box = [[9,1,1],[0,0,0]] }, { near = [1,2,3] }, '
        '{ face = "bottom", from = [5,2], to = [0,-2] }, '
        '{ face = "bottom", from = [0,-2], to = [5,2] }, '
        '{ face = "top", from = [0,-2], to = [5,2] }]'
    )
    case = read_case(write(tmp_path, changed('["root"]', faces)))
    name, plane, box, near, patch, same, other = case.mounts[0].faces
    assert name == ByName(name="root")
    assert plane == OnPlane(axis="x", at="max")
    assert box == InBox(low=(0.0, 0.0, 0.0), high=(9.0, 1.0, 1.0))
    assert near == Near(point=(1.0, 2.0, 3.0))
    assert patch == Patch(name="patch_1", face="bottom", low=(0.0, -2.0), high=(5.0, 2.0))
    assert same == patch
    assert other == Patch(name="patch_2", face="top", low=(0.0, -2.0), high=(5.0, 2.0))


def test_several_mounts(tmp_path):
    text = changed('[mount]\nkind = "clamped"', '[[mount]]\nkind = "clamped"') + (
        '[[mount]]\nkind = "held"\nfaces = ["tip_1"]\naxes = ["z", "x", "z"]\n'
        '[[mount]]\nkind = "springs"\nfaces = ["tip_2"]\nnormal_n_per_mm3 = 2.0\n'
    )
    clamped, held, springs = read_case(write(tmp_path, text)).mounts
    assert clamped.hold is Hold.CLAMPED
    assert held.axes == ("x", "z")
    assert springs.normal_stiffness == 2e9  # N/mm3 in N/m3
    assert springs.tangential_stiffness == 0.0


def test_orthotropic_material(tmp_path):
    own = (
        "youngs_modulus_gpa = [12.0, 1.6, 0.8]\nshear_modulus_gpa = [1.3, 1.2, 0.3]\n"
        "poisson_ratio = [0.47, 0.42, 0.38]\ndensity = 650"
    )
    text = changed('name = "carbon steel"\nyoungs_modulus_gpa = 205.5', own)
    material = read_case(write(tmp_path, text)).material
    assert material.orthotropic
    assert material.youngs_modulus == (12.0e9, 1.6e9, 0.8e9)
    assert case_document(read_case(write(tmp_path, text)))["material"]["youngs_modulus_gpa"] == [
        12.0,
        1.6,
        0.8,
    ]


def test_two_single_values_make_a_wood_isotropic(tmp_path):
    text = changed(
        'name = "carbon steel"\nyoungs_modulus_gpa = 205.5',
        'name = "sugar maple"\nyoungs_modulus_gpa = 12\npoisson_ratio = 0.3',
    )
    assert not read_case(write(tmp_path, text)).material.orthotropic


def test_a_byte_order_mark_is_no_mistake(tmp_path):
    assert read_case(write(tmp_path, b"\xef\xbb\xbf" + GOOD.encode())).title


BAD = {
    "not toml": ("title = \n" + GOOD, "line 1"),
    "unclosed table": (GOOD + "\n[solve\n", "not valid TOML"),
    "key twice": (GOOD.replace("width = 14.0", "width = 14.0\nwidth = 15.0"), "not valid TOML"),
    "no title": (changed('title = "Low-water tine"', ""), "title: is missing"),
    "empty title": (changed('"Low-water tine"', '""'), "title: must not be empty"),
    "title a number": (changed('"Low-water tine"', "7"), "title: must be text"),
    "version of the future": (changed("version = 1", "version = 2"), "version: is not known"),
    "unknown table": (GOOD + "\n[mounts]\n", "did you mean 'mount'"),
    "table of a later issue": (GOOD + "\n[vary]\nlength = [1, 2]\n", "vary: unknown key"),
    "unknown key": (changed("grams", "gramms"), "did you mean 'grams'"),
    "unknown key in solve": (changed("modes = 6", "mode = 6"), "did you mean 'modes'"),
    "accuracy beside a size": (
        changed("size = 1.5", "size = 1.5\naccuracy_cents = 2"),
        "both size",
    ),
    "no shape": (GOOD[: GOOD.index("[shape]")] + '[material]\nname = "brass C260"', "shape"),
    "no family": (changed('family = "fork"', ""), "family"),
    "unknown family": (changed('"fork"', '"frok"'), "did you mean 'fork'"),
    "family no text": (changed('"fork"', "3"), "shape.family: must be text"),
    "misspelt dimension": (changed("thickness =", "thicknes ="), "did you mean 'thickness'"),
    "missing dimension": (changed("thickness = 2.5", ""), "shape.thickness: is missing"),
    "negative dimension": (changed("thickness = 2.5", "thickness = -2.5"), "shape.thickness"),
    "zero dimension": (changed("length = 120.0", "length = 0"), "shape.length"),
    "dimension as text": (changed("120.0", '"120 mm"'), "shape.length: must be a number"),
    "dimension nan": (changed("120.0", "nan"), "shape.length: must be a finite number"),
    "dimension infinite": (changed("120.0", "inf"), "shape.length"),
    "dimension true": (changed("120.0", "true"), "shape.length: must be a number"),
    "dimension a list": (changed("120.0", "[120.0]"), "shape.length"),
    "slot outside": (changed("slot_length = 70.0", "slot_length = 170.0"), "shape.slot_length"),
    "slot too wide": (changed("slot_width = 2.0", "slot_width = 20.0"), "shape.slot_width"),
    "family beside solid": (changed("length", 'solid = "a.step"\nlength'), "shape.family"),
    "no material": (
        changed('[material]\nname = "carbon steel"\nyoungs_modulus_gpa = 205.5', ""),
        "material: is missing",
    ),
    "unknown material": (changed("carbon steel", "carbon steal"), "did you mean 'carbon steel'"),
    "material without values": (changed('name = "carbon steel"\n', ""), "material.poisson_ratio"),
    "modulus in Pa": (changed("205.5", "205e9"), "did you mean 205? the key is in GPa, not Pa"),
    "modulus in MPa": (changed("205.5", "205000"), "did you mean 205? the key is in GPa, not MPa"),
    "negative modulus": (changed("205.5", "-205"), "material.youngs_modulus_gpa"),
    "density in g/cm3": (
        changed("youngs_modulus_gpa = 205.5", "density = 7.85"),
        "did you mean 7850? the key is in kg/m3, not g/cm3",
    ),
    "density in t/mm3": (
        changed("youngs_modulus_gpa = 205.5", "density = 7.85e-9"),
        "did you mean 7850?",
    ),
    "poisson of one half": (
        changed("youngs_modulus_gpa = 205.5", "poisson_ratio = 0.5"),
        "material.poisson_ratio: is out of range",
    ),
    "poisson in percent": (
        changed("youngs_modulus_gpa = 205.5", "poisson_ratio = 29"),
        "did you mean 0.29?",
    ),
    "expansion per K": (
        changed("youngs_modulus_gpa = 205.5", "expansion_ppm_per_k = 1.2e-5"),
        "did you mean 12?",
    ),
    "one modulus of three": (changed("205.5", "[205, 205, 205]"), "needs three values"),
    "two moduli": (changed("205.5", "[205, 205]"), "a number, or three numbers"),
    "shear of an isotropic material": (
        changed("youngs_modulus_gpa = 205.5", "shear_modulus_gpa = 79"),
        "material.shear_modulus_gpa",
    ),
    "unstable material": (
        changed(
            'name = "carbon steel"\nyoungs_modulus_gpa = 205.5',
            "youngs_modulus_gpa = [10, 1, 1]\nshear_modulus_gpa = [1, 1, 1]\n"
            "poisson_ratio = [1.9, 1.9, 0.9]\ndensity = 600",
        ),
        "not those of a stable material",
    ),
    "unknown mount": (changed('"clamped"', '"pinned"'), "allowed: clamped, held, sliding"),
    "mount without faces": (changed('faces = ["root"]', ""), "mount.faces: is missing"),
    "no face in the list": (changed('["root"]', "[]"), "mount.faces"),
    "face without brackets": (changed('["root"]', '"root"'), 'allowed: ["root"]'),
    "unknown face": (changed('"root"', '"rot"'), "did you mean 'root'"),
    "face a number": (changed('["root"]', "[3]"), "mount.faces.1: is not a face"),
    "point held": (changed('["root"]', "[{ point = [0,0,0] }]"), "use a narrow patch"),
    "line held": (
        changed('["root"]', '[{ face = "bottom", from = [5,-2], to = [5,2] }]'),
        "use a narrow patch",
    ),
    "plane of no axis": (
        changed('["root"]', '[{ plane = "w", at = "min" }]'),
        "mount.faces.1.plane",
    ),
    "plane without end": (changed('["root"]', '[{ plane = "x" }]'), "mount.faces.1.at: is missing"),
    "box of one corner": (changed('["root"]', "[{ box = [[0,0,0]] }]"), "mount.faces.1.box"),
    "patch on no face": (
        changed('["root"]', '[{ face = "botom", from = [0,0], to = [5,2] }]'),
        "did you mean 'bottom'",
    ),
    "near a plane point": (changed('["root"]', "[{ near = [0,0] }]"), "mount.faces.1.near"),
    "held without axes": (changed('"clamped"', '"held"'), "mount.axes: is missing"),
    "held along no axis": (
        changed('kind = "clamped"', 'kind = "held"\naxes = ["q"]'),
        "mount.axes.1",
    ),
    "axes of a clamp": (changed('"clamped"', '"clamped"\naxes = ["x"]'), "does not go with"),
    "springs without stiffness": (changed('"clamped"', '"springs"'), "springs need a stiffness"),
    "soft negative spring": (
        changed('"clamped"', '"springs"\nnormal_n_per_mm3 = -1'),
        "mount.normal_n_per_mm3",
    ),
    "free with faces": (changed('"clamped"', '"free"'), "mount.faces: does not go with"),
    "free beside another": (
        changed("[mount]", "[[mount]]") + '[[mount]]\nkind = "free"\n',
        "mount.2.kind",
    ),
    "mass without place": (
        changed("at = [118.0, 4.0, 1.25]\nradius = 1.5\n", ""),
        "attached_mass.1",
    ),
    "mass in two places": (changed("grams", 'face = "tip_1"\ngrams'), "attached_mass.1"),
    "no mass": (changed("grams = 0.4", "grams = 0"), "attached_mass.1.grams"),
    "radius of a face": (
        changed("at = [118.0, 4.0, 1.25]", 'face = "tip_1"'),
        "attached_mass.1.radius",
    ),
    "one table for a list": (changed("[[attached_mass]]", "[attached_mass]"), "[[attached_mass]]"),
    "a4 out of range": (changed("442.0", "44.2"), "pitch.a4_hz"),
    "colder than possible": (GOOD + "\n[surroundings]\ntemperature_c = -300\n", "temperature_c"),
    "no modes": (changed("modes = 6", "modes = 0"), "solve.modes"),
    "part of a mode": (changed("modes = 6", "modes = 6.5"), "solve.modes: must be a whole number"),
    "size zero": (changed("size = 1.5", "size = 0.0"), "solve.size"),
    "size text": (changed("size = 1.5", 'size = "fine"'), "solve.size: must be a finite number"),
    "size beyond floats": (changed("size = 1.5", "size = 1" + "0" * 400), "solve.size"),
    "no note": (changed('"G3"', '"H3"'), "target.1.note: is no note"),
    "note and hz": (changed('note = "G3"', 'note = "G3"\nhz = 196'), "target.1: has both"),
    "no pitch": (changed('note = "G3"\ncents = 5', ""), "target.1: has no pitch"),
    "ratio of nothing": (
        changed('of = "flatwise bending 1, prongs together"', ""),
        "ratio and of go together",
    ),
    "cents without note": (changed('note = "G3"', "hz = 196.0"), "target.1.cents"),
    "target twice": (
        GOOD + '\n[[target]]\nmode = "flatwise bending 1, prongs together"\nhz = 200\n',
        "target.3.mode",
    ),
    "measured below zero": (changed("870.25", "-1"), "measured.1.hz"),
    "expectation without source": (changed('source = "a formula"', ""), "expect.1.source"),
    "material a list": (GOOD.replace("[material]", "[[material]]"), "material: must be a table"),
    "no text": (GOOD.encode() + b"\xff\xfe", "not UTF-8 text (line"),
    "sixteen bits": (GOOD.encode("utf-16"), "not UTF-8 text (line 1)"),
    "zero bytes": (b"\x00" * 40, "not valid TOML"),
    "empty": (b"", "title: is missing"),
    "too large": (b"#" * (5 * 1024 * 1024), "too large"),
    "too deep": ("title = " + "[" * 20000, "not valid TOML"),
}


@pytest.mark.parametrize("name", BAD)
def test_bad_input_ends_in_one_sentence(name, tmp_path, capsys):
    text, part = BAD[name]
    path = write(tmp_path, text)
    assert main(["modes", str(path)]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.count("\n") == 1
    assert part in err
    assert str(path) in err
    assert len(err) < 900


@pytest.mark.parametrize("name", BAD)
def test_bad_input_as_json(name, tmp_path, capsys):
    text, part = BAD[name]
    path = write(tmp_path, text)
    assert main(["modes", str(path), "--json"]) == 2
    out, err = capsys.readouterr()
    document = json.loads(out)
    assert err == ""
    assert document["format"] == "modewright-error"
    assert document["version"] == 1
    assert set(document) == {"format", "version", "file", "key", "value", "allowed", "message"}
    assert document["file"] == str(path)
    assert part in document["message"]


@pytest.mark.parametrize(
    ("make", "part"),
    [
        (lambda folder: folder / "case.tml", "did you mean 'case.toml'"),
        (lambda folder: folder, "is a folder"),
        (lambda folder: folder / "case.toml" / "x.toml", "no such file"),
        (lambda folder: folder / ("x" * 300), "cannot be read"),
    ],
)
def test_no_such_file(make, part, tmp_path, capsys):
    write(tmp_path, GOOD)
    assert main(["modes", str(make(tmp_path))]) == 2
    err = capsys.readouterr().err
    assert part in err
    assert err.count("\n") == 1


def test_an_error_is_a_value_error_with_its_parts(tmp_path):
    path = write(tmp_path, changed("slot_width = 2.0", "slot_width = -1"))
    with pytest.raises(ValueError, match="slot_width") as caught:
        read_case(path)
    error = caught.value
    assert isinstance(error, InputError)
    assert (error.file, error.key, error.value) == (str(path), "shape.slot_width", -1)
    assert error.allowed == "over 0"


def test_files_are_looked_for_beside_the_case(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path.parent)
    case = read_case(write(tmp_path, GOOD))
    assert case.shape.folder == tmp_path
    assert math.isfinite(case.shape.dimensions["length"])
