"""The three direct solvers: the same answers, and plain words when they fail."""

import gc

import numpy as np
import pytest
import scipy.sparse as sp
from modewright.fem.modal.direct import factor
from modewright.fem.modal.direct.factor import available, factorise
from modewright.geometry.errors import InputError, SolveError

ALL = pytest.mark.parametrize("library", ["mkl", "cholmod", "superlu"])


def laplacian(n: int) -> sp.csr_matrix:
    """Return the five-point matrix of an n x n square, positive definite."""
    line = sp.diags_array([-np.ones(n - 1), 2 * np.ones(n), -np.ones(n - 1)], offsets=[-1, 0, 1])
    eye = sp.eye_array(n)
    return (sp.kron(line, eye) + sp.kron(eye, line)).tocsr()


def laplacian_values(n: int) -> np.ndarray:
    """Return its exact eigenvalues."""
    one = 2 - 2 * np.cos(np.pi * np.arange(1, n + 1) / (n + 1))
    return np.sort((one[:, None] + one).ravel())


def upper(matrix: sp.csr_matrix) -> sp.csr_matrix:
    out = sp.csr_matrix(sp.triu(matrix, format="csr"))
    out.sort_indices()
    return out


@ALL
def test_solves_one_and_several_right_sides(library):
    a = laplacian(17)
    x = np.random.default_rng(1).standard_normal((a.shape[0], 5))
    f = factorise(upper(a), library=library)
    np.testing.assert_allclose(f.solve(a @ x), x, rtol=1e-11, atol=1e-12)
    np.testing.assert_allclose(f.solve(a @ x[:, 0]), x[:, 0], rtol=1e-11, atol=1e-12)
    # Rows in either order of memory.
    np.testing.assert_allclose(f.solve(np.asfortranarray(a @ x)), x, rtol=1e-11, atol=1e-12)
    assert f.negative_pivots is None


@ALL
def test_takes_new_values_of_the_same_pattern(library):
    a = upper(laplacian(12))
    f = factorise(a, library=library)
    stiffer = a.copy()
    stiffer.data = stiffer.data * 3.0
    stiffer.setdiag(stiffer.diagonal() + 1.0)
    f.numeric(stiffer.data)
    whole = stiffer + sp.triu(stiffer, 1).T
    x = np.arange(a.shape[0], dtype=float)
    np.testing.assert_allclose(f.solve(whole @ x), x, rtol=1e-10, atol=1e-9)


@ALL
def test_the_input_is_left_as_it_was(library):
    a = upper(laplacian(9))
    before = a.copy()
    b = np.ones((a.shape[0], 2))
    factorise(a, library=library).solve(b)
    assert (a != before).nnz == 0
    np.testing.assert_array_equal(b, 1.0)


@pytest.mark.parametrize("count", [0, 1, 10, 77])
def test_negative_pivots_count_the_eigenvalues_below(count):
    a = laplacian(11)
    values = laplacian_values(11)
    # Between two eigenvalues with room around.
    count = next(i for i in range(count, len(values)) if values[i] - values[i - 1] > 1e-3 or i == 0)
    sigma = values[0] - 0.1 if count == 0 else 0.5 * (values[count - 1] + values[count])
    f = factorise(upper(a - sigma * sp.eye_array(a.shape[0])), positive=False, library="mkl")
    assert f.negative_pivots == count
    x = np.sin(np.arange(a.shape[0]))
    shifted = a - sigma * sp.eye_array(a.shape[0])
    np.testing.assert_allclose(f.solve(shifted @ x), x, atol=1e-8)


def blocks(matrix: sp.csr_matrix) -> sp.bsr_matrix:
    """Return the upper triangle of a symmetric matrix by 3 x 3 blocks."""
    whole = sp.bsr_matrix(matrix, blocksize=(3, 3))
    whole.sort_indices()
    rows = np.repeat(np.arange(len(whole.indptr) - 1), np.diff(whole.indptr))
    keep = whole.indices >= rows
    indptr = np.concatenate([[0], np.cumsum(np.bincount(rows[keep]))])
    return sp.bsr_matrix((whole.data[keep], whole.indices[keep], indptr), shape=matrix.shape)


@ALL
@pytest.mark.parametrize("positive", [True, False])
def test_takes_matrices_by_blocks(library, positive):
    a = laplacian(12) - (0.0 if positive else 1.0) * sp.eye_array(144)
    f = factorise(blocks(a), positive=positive, library=library)
    x = np.random.default_rng(0).standard_normal((144, 4))
    np.testing.assert_allclose(f.solve(a @ x), x, atol=1e-9)
    if not positive and library == "mkl":
        assert f.negative_pivots == (laplacian_values(12) < 1.0).sum()
    f.numeric(3.0 * blocks(a).data)
    np.testing.assert_allclose(f.solve(a @ x), x / 3.0, atol=1e-9)


@pytest.mark.parametrize("library", ["cholmod", "superlu"])
def test_libraries_without_inertia_say_nothing(library):
    a = laplacian(7) - 0.5 * sp.eye_array(49)
    f = factorise(upper(a), positive=False, library=library)
    assert f.negative_pivots is None
    x = np.cos(np.arange(49))
    np.testing.assert_allclose(f.solve(a @ x), x, atol=1e-9)


@pytest.mark.parametrize("library", ["mkl", "cholmod"])
def test_a_matrix_that_is_not_positive_is_refused(library):
    with pytest.raises(SolveError, match="not positive definite"):
        factorise(upper(laplacian(7) - 0.5 * sp.eye_array(49)), library=library)


def test_superlu_refuses_a_singular_matrix():
    singular = upper(laplacian(3)).tolil()
    singular[4, :] = 0
    singular[:, 4] = 0
    matrix = sp.csr_matrix(singular)
    with pytest.raises(SolveError, match="could not be factorised"):
        factorise(matrix + sp.csr_matrix(([0.0], ([4], [4])), matrix.shape), library="superlu")


@ALL
def test_closed_factors_do_not_solve(library):
    f = factorise(upper(laplacian(5)), library=library)
    f.close()
    f.close()
    with pytest.raises(ValueError, match="closed"):
        f.solve(np.ones(25))


def test_memory_is_given_back(monkeypatch):
    import psutil

    a = upper(laplacian(200))
    factorise(a, library="mkl")
    before = psutil.Process().memory_info().rss
    for _ in range(20):
        factorise(a, library="mkl")
    gc.collect()
    # One factor takes about 15 MB.
    assert psutil.Process().memory_info().rss - before < 60e6


def test_the_wide_interface_agrees():
    from modewright.fem.modal.direct.mkl import Pardiso

    a = laplacian(13)
    x = np.arange(169.0)
    f = Pardiso(upper(a), positive=True, wide=True)
    np.testing.assert_allclose(f.solve(a @ x), x, atol=1e-9)
    f = Pardiso(upper(a - 2 * sp.eye_array(169)), positive=False, wide=True)
    assert f.negative_pivots == (laplacian_values(13) < 2).sum()


def test_the_environment_names_the_library(monkeypatch):
    monkeypatch.setenv("MODEWRIGHT_DIRECT", "superlu")
    assert factorise(upper(laplacian(3))).name == "SuperLU"
    monkeypatch.setenv("MODEWRIGHT_DIRECT", "quick")
    with pytest.raises(InputError, match="mkl, cholmod, superlu"):
        factorise(upper(laplacian(3)))


def test_the_next_library_steps_in(monkeypatch):
    monkeypatch.delenv("MODEWRIGHT_DIRECT", raising=False)
    monkeypatch.setitem(factor.LIBRARIES, "mkl", ".no_such_module")
    assert "mkl" not in available()
    assert factorise(upper(laplacian(3))).name == "CHOLMOD"
    monkeypatch.setitem(factor.LIBRARIES, "cholmod", ".no_such_module")
    assert factorise(upper(laplacian(3))).name == "SuperLU"


def test_running_out_of_memory_is_told(monkeypatch):
    from modewright.fem.modal.direct import mkl, superlu

    monkeypatch.setattr(mkl, "_run", lambda *a: -2)
    with pytest.raises(SolveError, match=r"memory.*coarser"):
        factorise(upper(laplacian(3)), library="mkl")

    def full(*a, **k):
        raise MemoryError

    monkeypatch.setattr(superlu, "splu", full)
    with pytest.raises(SolveError, match=r"memory.*coarser"):
        factorise(upper(laplacian(3)), library="superlu")


def test_integer_overflow_falls_back_to_the_wide_interface(monkeypatch):
    from modewright.fem.modal.direct import mkl

    true = mkl._run

    def narrow(call, handle, kind, phase, n, matrix, count, parameters, right, out):
        if parameters.dtype == np.int32 and phase == 22:
            return -8
        return true(call, handle, kind, phase, n, matrix, count, parameters, right, out)

    monkeypatch.setattr(mkl, "_run", narrow)
    a = laplacian(6)
    f = factorise(upper(a), library="mkl")
    np.testing.assert_allclose(f.solve(a @ np.arange(36.0)), np.arange(36.0), atol=1e-10)


def test_one_place_sets_threads(monkeypatch):
    from modewright.fem.modal.direct import mkl
    from modewright.fem.modal.threads import cores, threads
    from threadpoolctl import threadpool_info

    before = mkl.set_threads(3)
    try:
        with threads(2) as count:
            assert count == 2
            assert mkl.set_threads(2) == 2
            # numpy's, scipy's and cvxopt's own libraries have one thread each.
            blas = [x for x in threadpool_info() if x["internal_api"] == "openblas"]
            assert blas
            assert {x["num_threads"] for x in blas} == {1}
        assert mkl.set_threads(3) == 3
    finally:
        mkl.set_threads(before)
    monkeypatch.setenv("OMP_NUM_THREADS", "5")
    with threads() as count:
        assert count == 5
    monkeypatch.delenv("OMP_NUM_THREADS")
    with threads() as count:
        assert count == max(1, cores() - 1)
