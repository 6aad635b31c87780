"""Modes lost on purpose, counts by another factorisation, and parts too fine for the memory."""

from __future__ import annotations

import json
from dataclasses import replace

import numpy as np
import pytest
import scipy.sparse as sp
from modewright.cases import build_case
from modewright.cases.command import main
from modewright.fem.modal import memory, spectrum
from modewright.fem.modal.direct import factor
from modewright.fem.modal.direct.inertia import negative_eigenvalues
from modewright.fem.modal.eigen import Pairs, lowest_modes
from modewright.fem.modal.solve import solve
from modewright.fem.modal.spectrum import solve_spectrum
from modewright.fem.modal.system import System, build_system
from modewright.geometry.errors import InputError, SolveError

CASE = {
    "title": "Slack-water rod",
    "shape": {"family": "bar", "length": 40.0, "width": 5.0, "thickness": 2.0},
    "material": {"name": "brass C360"},
    "solve": {"modes": 4},
}

needs_mkl = pytest.mark.skipif("mkl" not in factor.available(), reason="no MKL here")


@pytest.fixture(scope="module")
def mesh(block):
    return block((40.0, 5.0, 2.0), (10, 2, 1))


@pytest.fixture(scope="module")
def system(mesh) -> System:
    return build_system(build_case(CASE), mesh)


def lossy(times: int, place: int):
    """Return an eigen-solver that loses one mode on its first so many calls, and its blocks."""
    blocks = []

    def call(*arguments, **options) -> Pairs:
        pairs = lowest_modes(*arguments, **options)
        blocks.append(options["block"])
        if len(blocks) > times:
            return pairs
        kept = np.delete(np.arange(len(pairs.values)), place)
        return replace(
            pairs,
            values=pairs.values[kept],
            vectors=pairs.vectors[:, kept],
            residuals=pairs.residuals[kept],
        )

    return call, blocks


@needs_mkl
@pytest.mark.parametrize("place", [0, 2])
def test_a_lost_mode_is_noticed_and_searched_for_again(place, system, monkeypatch):
    wanted = solve_spectrum(system, modes=4, count=True)
    assert wanted.missing == 0
    call, blocks = lossy(1, place)
    monkeypatch.setattr(spectrum, "lowest_modes", call)
    found = solve_spectrum(system, modes=4, count=True)
    assert found.missing == 0
    assert len(blocks) == 2
    assert blocks[0] is None
    assert blocks[1] > 16
    np.testing.assert_allclose(found.frequencies, wanted.frequencies, rtol=1e-9)


@needs_mkl
def test_a_mode_that_stays_lost_is_an_error(system, monkeypatch):
    call, blocks = lossy(9, 1)
    monkeypatch.setattr(spectrum, "lowest_modes", call)
    with pytest.raises(SolveError, match=r"1 modes below .* were not found"):
        solve_spectrum(system, modes=4, count=True)
    assert blocks[0] is None
    assert blocks[1] < blocks[2]


def test_the_last_mode_is_no_lost_one(system, monkeypatch):
    """Modes above the last one found are not missing."""
    call, _ = lossy(9, -1)
    monkeypatch.setattr(spectrum, "lowest_modes", call)
    assert len(solve_spectrum(system, modes=4, count=True, prove=True).frequencies) == 3


@pytest.mark.parametrize("library", ["cholmod", "superlu"])
def test_a_lost_mode_is_proved_without_the_mkl(library, system, monkeypatch):
    if library not in factor.available():
        pytest.skip("not here")
    call, _ = lossy(1, 1)
    monkeypatch.setattr(spectrum, "lowest_modes", call)
    quick = solve_spectrum(system, modes=4, count=True, library=library)
    assert quick.missing is None
    assert len(quick.frequencies) == 3
    call, blocks = lossy(1, 1)
    monkeypatch.setattr(spectrum, "lowest_modes", call)
    proved = solve_spectrum(system, modes=4, count=True, prove=True, library=library)
    assert (proved.missing, len(blocks), len(proved.frequencies)) == (0, 2, 4)


def test_where_nothing_counts_one_warning_says_so(mesh, monkeypatch):
    monkeypatch.setenv(factor.VARIABLE, "superlu")
    modes = solve(build_case(CASE), mesh=mesh)
    assert modes.solve_facts.missing_modes is None
    assert sum("--prove" in warning for warning in modes.warnings) == 1
    modes = solve(build_case(CASE), mesh=mesh, prove=True)
    assert modes.solve_facts.missing_modes == 0
    assert not any("--prove" in warning for warning in modes.warnings)


@pytest.mark.parametrize("seed", range(4))
def test_negative_pivots_are_negative_eigenvalues(seed):
    generator = np.random.default_rng(seed)
    dense = generator.standard_normal((60, 60)) * (generator.random((60, 60)) < 0.1)
    dense = dense + dense.T + np.diag(generator.standard_normal(60))
    wanted = int((np.linalg.eigvalsh(dense) < 0).sum())
    assert 10 < wanted < 50
    assert negative_eigenvalues(sp.csr_matrix(np.triu(dense))) == wanted


def test_a_count_that_needs_exchanges_is_refused():
    """The matrix [[0, 1], [1, 0]] has no L D L^T without exchanges."""
    upper = sp.csr_matrix(np.array([[0.0, 1.0], [0.0, 0.0]]))
    upper = sp.csr_matrix((np.array([0.0, 1.0, 0.0]), [0, 1, 1], [0, 2, 3]), shape=(2, 2))
    with pytest.raises(SolveError, match="could not be counted"):
        negative_eigenvalues(upper)


# --- memory ---


@needs_mkl
def test_the_symbolic_analysis_foretells_the_factor(system):
    from modewright.fem.modal.direct.mkl import Pardiso

    made = Pardiso(system.shifted(-1.0), True)
    # At least the lower triangle of a band of a node's neighbours, at most a full matrix.
    assert 8 * system.stiffness.nnz < made.needed_bytes < 8 * system.unknowns**2
    made.close()


@needs_mkl
def test_a_factor_that_will_not_fit_is_refused_with_the_size_that_would(mesh, monkeypatch):
    monkeypatch.setattr(memory, "free_bytes", lambda: 1e6)
    with pytest.raises(InputError, match=r"solve.size: .* GB to factorise") as caught:
        solve(build_case(CASE), mesh=mesh)
    assert caught.value.value == pytest.approx(1e3 * mesh.size, rel=1e-3)
    enough = float(caught.value.allowed.split()[1])
    assert 1e3 * mesh.size < enough < 10e3 * mesh.size


def test_a_part_beyond_the_memory_is_refused_before_it_is_meshed(tmp_path, capsys):
    path = tmp_path / "case.toml"
    path.write_text(
        'title = "Sea wall"\n[shape]\nfamily = "plate"\nlength = 500\nwidth = 500\n'
        'thickness = 60\n[material]\nname = "carbon steel"\n[solve]\nsize = 0.8\n'
    )
    assert main(["modes", str(path), "--json"]) == 2
    document = json.loads(capsys.readouterr().out)
    assert document["key"] == "solve.size"
    assert "million unknowns" in document["message"]
    enough = float(document["allowed"].split()[1])
    assert 2.0 < enough < 20.0


def test_the_size_told_is_one_that_is_begun(monkeypatch):
    """The advice of a refusal is followed and leads on."""
    monkeypatch.setattr("modewright.fem.modal.solve.affordable_unknowns", lambda: 3000.0)
    document = {**CASE, "solve": {"modes": 1, "size": 0.4}}
    with pytest.raises(InputError) as caught:
        solve(build_case(document))
    enough = float(caught.value.allowed.split()[1])
    document["solve"] = {"modes": 1, "size": enough}
    assert solve(build_case(document)).mesh_facts.unknowns < 2.5 * 3000 * 1.3


def test_a_container_limits_what_is_free(tmp_path, monkeypatch):
    limit, use = tmp_path / "max", tmp_path / "current"
    monkeypatch.setattr(memory, "_LIMITS", ((str(limit), str(use)),))
    whole = memory.free_bytes()
    limit.write_text("1000000\n")
    use.write_text("400000\n")
    assert memory.free_bytes() == 600000
    limit.write_text("max\n")
    assert memory.free_bytes() == pytest.approx(whole, rel=0.5)
