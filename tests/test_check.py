"""Published checks: the short run agrees, and wrong numbers are found out."""

from __future__ import annotations

import copy
import json
import re
from dataclasses import replace

import pytest
from modewright.cases.checks import run, table
from modewright.cases.checks.record import Basis, Check, Expected, isotropic
from modewright.cases.checks.report import check_document, check_page, check_table, passed
from modewright.cases.checks.run import Verdict, run_checks
from modewright.cases.command import main
from modewright.cases.reader import build_case
from modewright.geometry.errors import MeshError

SHORT = [check.title for check in table.chosen(full=False)]
LONG = [check for check in table.CHECKS if not check.quick]

#: A rod whose axial mode is exact, sqrt(E/rho) / 2L but for lateral inertia, on a coarse mesh.
ROD = Check(
    title="Free rod, axial",
    source="f = (1/2L) sqrt(E/rho)",
    basis=Basis.BEAM_THEORY,
    tolerance=0.5,
    document={
        "title": "Free rod, axial",
        "shape": {"family": "bar", "length": 100.0, "width": 10.0, "thickness": 8.0},
        "material": isotropic(200.0, 0.3, 8000.0),
        "solve": {"modes": 10, "size": 10.0},
    },
    expected=(Expected(mode="axial 1", value=25000.0, printed=25100.0),),
)


@pytest.fixture(scope="module")
def short_run(tmp_path_factory):
    """The short run through the command: its code, check.json and check.md."""
    folder = tmp_path_factory.mktemp("check") / "results"
    code = main(["check", "--out", str(folder)])
    document = json.loads((folder / "check.json").read_text(encoding="utf-8"))
    return code, document, (folder / "check.md").read_text(encoding="utf-8")


@pytest.mark.parametrize("title", SHORT)
def test_published_values_of_the_short_run(short_run, title):
    _, document, _ = short_run
    (check,) = [check for check in document["checks"] if check["title"] == title]
    assert not check["trouble"]
    assert [v for v in check["values"] if v["verdict"] == "fails"] == []
    assert check["passed"]


@pytest.mark.slow
@pytest.mark.parametrize("check", LONG, ids=lambda check: check.title)
def test_published_values_of_the_long_run(check):
    (result,) = run_checks([check])
    assert not result.failed, str(check_table([result]))


def test_the_short_run_as_files(short_run):
    code, document, page = short_run
    assert code == 0
    assert (document["format"], document["version"]) == ("modewright-check", 1)
    assert document["passed"]
    assert not document["full"]
    assert [check["title"] for check in document["checks"]] == SHORT
    for check in document["checks"]:
        assert check["source"]
        assert check["source"] in page
        assert f"## {check['title']}\n" in page
        assert check["note"] in page
        assert build_case(check["case"]).title
        assert check["unknowns"] > 1000
        for value in check["values"]:
            got, expected = value["got_hz"], value["expected_hz"]
            assert expected == pytest.approx(value["expected"] * check["hz_per_measure"])
            assert value["deviation_percent"] == pytest.approx(100 * (got / expected - 1))
            # 0.0578 % is one cent.
            assert value["deviation_cents"] == pytest.approx(
                value["deviation_percent"] / 0.0577790, abs=0.02, rel=0.01
            )
            if value["printed"] is not None:
                assert value["deviation_from_printed_percent"] is not None
    rows = [line for line in page.splitlines() if line.startswith("|")]
    values = sum(len(check["values"]) for check in document["checks"])
    assert len(rows) == values + 2 * len(document["checks"])
    assert {row.count("|") for row in rows} == {8}


def test_every_check_says_what_it_is():
    titles = [check.title for check in table.CHECKS]
    assert len(set(titles)) == len(titles)
    for check in table.CHECKS:
        assert re.search(r"\b(18|19|20)\d\d\b|recomputed", check.source), check.title
        assert check.unit > 0
        for expected in check.expected:
            assert expected.mode or 1 <= expected.first <= expected.last
        build_case(check.document)


def test_tolerances_are_those_agreed():
    allowed = {
        Basis.EXACT: {0.05},
        Basis.RECOMPUTED: {0.05, 0.1},
        Basis.PLANE_STRESS: {0.1},
        Basis.BEAM_THEORY: {0.5},
        Basis.PLATE_THEORY: {0.5},
        Basis.PUBLISHED_PLATE: {1.0},
    }
    for check in table.CHECKS:
        if check.decides:
            assert check.tolerance in allowed[check.basis]
        if check.tolerance == 0.1:
            assert re.search("plate|ring|membrane", check.title)


def test_values_that_share_an_index_do_not_overlap():
    for check in table.CHECKS:
        places = [
            place
            for expected in check.expected
            if expected.mode is None
            for place in range(expected.first, expected.last + 1)
        ]
        assert places == list(range(1, len(places) + 1))
        assert len(places) <= check.document["solve"]["modes"]


def test_a_right_value_agrees_and_a_wrong_one_fails():
    wrong = replace(ROD, expected=(Expected(mode="axial 1", value=25200.0),))
    missing = replace(ROD, expected=(Expected(mode="torsion 7", value=25000.0),))
    beyond = replace(ROD, expected=(Expected(first=10, last=11, value=25000.0),))
    memory = replace(wrong, basis=Basis.MEMORY)
    results = run_checks([ROD, wrong, missing, beyond, memory])
    verdicts = [result.outcomes[0].verdict for result in results]
    assert verdicts == [
        Verdict.AGREES,
        Verdict.FAILS,
        Verdict.FAILS,
        Verdict.FAILS,
        Verdict.SHOWN,
    ]
    assert [result.failed for result in results] == [False, True, True, True, False]
    right = results[0].outcomes[0]
    # Lateral inertia, Rayleigh: 1 - (nu pi)^2 (b^2 + h^2) / (24 L^2).
    assert right.percent == pytest.approx(-0.06, abs=0.03)
    assert right.printed_percent == pytest.approx(-0.45, abs=0.05)
    assert results[2].outcomes[0].got_hz is None
    assert "no such mode" in str(check_table(results))
    assert not passed(results)
    assert results[1].seconds < results[0].seconds  # the same part is solved once
    assert check_document(results, full=True)["checks"][2]["values"][0]["got_hz"] is None


def test_one_of_several_modes_that_is_off_fails():
    pair = (Expected(first=1, last=2, value=1.0),)
    (result,) = run_checks([replace(ROD, expected=pair)])
    low, high = sorted([result.outcomes[0].got_hz, 1.0])
    (near,) = run_checks([replace(ROD, expected=(replace(pair[0], value=high),))])
    assert low == 1.0
    # 10 mm against 8 mm: the two bending modes lie a fifth apart, one of them must fail.
    assert near.failed


def test_a_wrong_modulus_is_found_out(monkeypatch, capsys):
    document = copy.deepcopy(ROD.document)
    document["material"]["youngs_modulus_gpa"] = 206.0
    monkeypatch.setattr(table, "CHECKS", (replace(ROD, document=document),))
    assert main(["check"]) == 1
    out, err = capsys.readouterr()
    assert "fails" in out
    assert "Failing: free rod, axial." in out
    assert "Free rod, axial: f = (1/2L) sqrt(E/rho) [beam theory" in out
    assert re.search(r"axial 1 +25100.0 +25000.0 +253\d\d.\d +\+1.4", out)
    assert err == ""
    assert main(["check", "--json"]) == 1
    answer = json.loads(capsys.readouterr().out)
    assert not answer["passed"]
    assert answer["checks"][0]["values"][0]["verdict"] == "fails"
    # f goes with sqrt(E).
    assert answer["checks"][0]["values"][0]["deviation_percent"] == pytest.approx(1.42, abs=0.05)


def test_a_part_that_cannot_be_meshed_fails(monkeypatch):
    def refuse(case, progress=None):
        raise MeshError("the mesh does not fit in memory; try a larger element size")

    monkeypatch.setattr(run, "solve", refuse)
    results = run_checks([ROD, replace(ROD, title="Again")])
    assert all(result.failed for result in results)
    page = check_page(results)
    assert "Could not be solved: the mesh does not fit in memory" in page
    assert "no such mode" in page


def test_a_folder_that_is_a_file_is_told_before_the_work(tmp_path, capsys):
    path = tmp_path / "taken"
    path.write_text("x")
    assert main(["check", "--out", str(path)]) == 2
    assert "is a file, not a folder" in capsys.readouterr().err
