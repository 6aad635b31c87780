"""The command line: small commands, exit codes, JSON, and every wrong use in one sentence."""

from __future__ import annotations

import io
import json
import re
import tomllib

import pytest
from modewright.cases import console
from modewright.cases.answer import Answer
from modewright.cases.command import main
from modewright.cases.reader import build_case
from modewright.fem.modal.material_table import MATERIALS
from modewright.geometry.families.table import FAMILIES
from modewright.viz.table import Table
from rich.console import Console

#: Families whose example is a file of the user's own.
NEED_A_FILE = {"solid", "mesh"}


def run(capsys, *tokens: str) -> tuple[int, str, str]:
    code = main(tokens)
    out, err = capsys.readouterr()
    return code, out, err


@pytest.mark.parametrize("family", sorted(set(FAMILIES) - NEED_A_FILE))
def test_a_new_case_reads_back(family, capsys):
    code, out, err = run(capsys, "new", family)
    assert (code, err) == (0, "")
    case = build_case(tomllib.loads(out))
    assert case.shape.family is FAMILIES[family]
    for dimension in FAMILIES[family].dimensions:
        assert f"{dimension.name} = " in out  # every dimension stands there, used or as a comment
    code, out, _ = run(capsys, "new", family, "--json")
    document = json.loads(out)
    assert code == 0
    assert document["format"] == "modewright-case"
    assert tomllib.loads(document["text"]) == document["case"]


@pytest.mark.parametrize("family", sorted(NEED_A_FILE))
def test_a_new_case_of_an_imported_body_says_what_it_needs(family, capsys):
    code, out, err = run(capsys, "new", family)
    assert code == 0
    assert tomllib.loads(out)["shape"]
    assert "needs a file beside it" in err


def test_new_writes_only_where_nothing_is(tmp_path, capsys):
    path = tmp_path / "case.toml"
    assert run(capsys, "new", "bar", "--out", str(path))[0] == 0
    text = path.read_text()
    build_case(tomllib.loads(text))
    code, out, err = run(capsys, "new", "ring", "--out", str(path))
    assert (code, out) == (2, "")
    assert "is there already" in err
    assert path.read_text() == text
    assert [entry.name for entry in tmp_path.iterdir()] == ["case.toml"]


def test_shapes(capsys):
    _, out, _ = run(capsys, "shapes")
    assert all(name in out for name in FAMILIES)
    _, out, _ = run(capsys, "shapes", "--json")
    document = json.loads(out)
    assert [f["family"] for f in document["families"]] == list(FAMILIES)


@pytest.mark.parametrize("family", FAMILIES)
def test_every_dimension_of_a_family(family, capsys):
    code, out, _ = run(capsys, "shapes", family)
    assert code == 0
    for dimension in FAMILIES[family].dimensions:
        assert dimension.name in out
        assert dimension.text in out
    document = json.loads(run(capsys, "shapes", family, "--json")[1])
    assert document["format"] == "modewright-shape"
    assert len(document["dimensions"]) == len(FAMILIES[family].dimensions)


def test_materials(capsys):
    _, out, _ = run(capsys, "materials")
    assert all(name in out for name in MATERIALS)
    document = json.loads(run(capsys, "materials", "--json")[1])
    assert len(document["materials"]) == len(MATERIALS)
    steel = next(m for m in document["materials"] if m["name"] == "carbon steel")
    assert steel["density"] == 7850


def test_one_material_with_sources(capsys):
    code, out, _ = run(capsys, "materials", "Carbon  Steel")
    assert code == 0
    assert "youngs_modulus_gpa" in out
    document = json.loads(run(capsys, "materials", "sugar maple", "--json")[1])
    assert len(document["youngs_modulus_gpa"]) == 3
    assert document["sources"]["youngs_modulus_gpa"]


def test_help_and_version(capsys):
    for tokens in ((), ("--help",), ("modes", "--help"), ("sweep", "-h")):
        code, out, err = run(capsys, *tokens)
        assert (code, err) == (0, "")
        assert "Usage: modewright" in out
    assert run(capsys, "--version")[1].strip()[0].isdigit()


WRONG = {
    "unknown command": (("mode",), 'Did you mean "modes"'),
    "unknown option": (("modes", "x.toml", "--sizze", "3"), "--size"),
    "no case": (("modes",), "CASE"),
    "two cases": (("modes", "a.toml", "b.toml"), "b.toml"),
    "size no number": (("modes", "a.toml", "--size", "fine"), "--size"),
    "modes no whole number": (("modes", "a.toml", "--modes", "3.5"), "--modes"),
    "option without value": (("modes", "a.toml", "--size"), "--size"),
    "no family": (("new",), "FAMILY"),
    "unknown family": (("new", "frok"), "did you mean 'fork'"),
    "unknown family of shapes": (("shapes", "tubee"), "did you mean 'tube'"),
    "unknown material": (("materials", "carbon steal"), "carbon steel"),
    "mesh without file": (("mesh", "a.toml"), "--out"),
    "sweep without key": (("sweep", "a.toml", "--values", "1,2"), "--vary"),
    "no such file": (("modes", "nowhere.toml"), "no such file"),
    "out in no folder": (("new", "bar", "--out", "nowhere/at/all.toml"), "--out"),
    "empty family": (("new", ""), "no such shape family"),
}


@pytest.mark.parametrize("name", WRONG)
def test_wrong_use_ends_in_one_sentence(name, capsys, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    tokens, part = WRONG[name]
    code, out, err = run(capsys, *tokens)
    assert (code, out) == (2, "")
    assert err.startswith("error: ")
    assert err.count("\n") == 1
    assert part in err
    code, out, err = run(capsys, *tokens, "--json")
    document = json.loads(out)
    assert (code, err) == (2, "")
    assert document["format"] == "modewright-error"
    assert part in document["message"]
    assert not list(tmp_path.iterdir())


def wide(table: Table, spare: tuple[str, ...], width: int) -> str:
    file = io.StringIO()
    terminal = Console(file=file, width=width, force_terminal=True, no_color=True, highlight=False)
    console._print_table(terminal, table, spare)
    return file.getvalue()


TABLE = Table(
    headers=("#", "mode", "Hz", "mass g", "cents to target"),
    rows=(("1", "flatwise bending 1, prongs together", "152.97", "6.97", "+3.1"),),
    notes=("a note",),
    numeric=(True, False, True, True, True),
)


def test_a_wide_terminal_shows_every_column():
    text = wide(TABLE, ("mass g",), 120)
    assert "6.97" in text
    assert "No room" not in text
    assert "a note" in text


def test_a_narrow_terminal_goes_without_the_least_columns():
    text = wide(TABLE, ("mass g",), 58)
    assert "6.97" not in text
    assert "+3.1" in text
    assert "flatwise bending 1, prongs together" in text
    assert "No room here for: mass g." in text


def test_a_table_without_spare_columns_is_broken_into_blocks():
    table = Table(
        headers=("mode", *map(str, range(20))),
        rows=(("torsion 1", *(f"{1000 + i}.5" for i in range(20))),),
        numeric=(False, *[True] * 20),
    )
    text = wide(table, (), 60)
    assert all(f"{1000 + i}.5" in text for i in range(20))
    plain = re.sub(r"\x1b\[[0-9;]*m", "", text)
    assert max(map(len, plain.splitlines())) <= 60
    assert text.count("torsion 1") > 2


def test_markup_in_names_is_left_alone(capsys):
    table = Table(headers=("mode",), rows=(("[bold]x[/bold]",),))
    console.give(Answer(document={}, heading="[red]title[/red]", tables=(table,)), as_json=False)
    out = capsys.readouterr().out
    assert "[red]title[/red]" in out
    assert "[bold]x[/bold]" in out
