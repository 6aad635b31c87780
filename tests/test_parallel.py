"""Rows split among threads give what one thread gives."""

import numpy as np
import pytest
import scipy.sparse as sp
from modewright.fem.modal import parallel
from modewright.fem.modal.eigen import lowest_modes
from modewright.fem.modal.parallel import SplitMatrix, in_slices


@pytest.fixture(autouse=True)
def _split_small_things_too(monkeypatch):
    monkeypatch.setattr(parallel, "_FEWEST", 10)


@pytest.mark.parametrize("workers", [1, 2, 3, 7])
def test_slices_cover_all_rows_once_and_in_order(workers):
    rows = in_slices(lambda s: list(range(s.start, s.stop)), 101, workers)
    assert len(rows) == workers
    assert [i for part in rows for i in part] == list(range(101))


def test_a_failure_in_a_thread_is_raised():
    def work(rows: slice) -> None:
        if rows.start:
            raise ArithmeticError("here")

    with pytest.raises(ArithmeticError, match="here"):
        in_slices(work, 100, 3)


@pytest.mark.parametrize("workers", [1, 2, 3])
def test_split_products(workers):
    matrix = sp.csr_matrix(sp.random_array((57, 57), density=0.2, rng=np.random.default_rng(0)))
    vectors = np.random.default_rng(1).standard_normal((57, 4))
    np.testing.assert_allclose(SplitMatrix(matrix, workers) @ vectors, matrix @ vectors, atol=1e-14)


def test_the_eigen_solver_does_not_depend_on_the_number_of_threads():
    values = np.linspace(1, 40, 900) ** 1.5

    def solved(workers: int) -> np.ndarray:
        generator = np.random.default_rng(0)
        return lowest_modes(
            lambda b: b / values[:, None],
            lambda v: v.copy(),
            lambda k: generator.standard_normal((900, k)),
            count=12,
            workers=workers,
        ).values

    np.testing.assert_allclose(solved(1), values[:12], rtol=1e-10)
    np.testing.assert_allclose(solved(3), solved(1), rtol=1e-13)
