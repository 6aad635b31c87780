"""The eigen-solver on problems whose spectrum is known, without any mesh."""

import numpy as np
import pytest
import scipy.sparse as sp
from modewright.fem.modal.direct.factor import factorise
from modewright.fem.modal.eigen import CLUSTER, NotConverged, lowest_modes


def problem(values, mass=None, sigma=0.0, seed=0):
    """Return arguments of `lowest_modes` for a diagonal K of these values."""
    values = np.asarray(values, float)
    mass = np.ones_like(values) if mass is None else mass
    generator = np.random.default_rng(seed)
    inverse = 1.0 / ((values - sigma) * mass)
    return (
        lambda b: inverse[:, None] * b,
        lambda v: mass[:, None] * v,
        lambda k: generator.standard_normal((len(values), k)),
    )


def spread(lowest, n=3000, seed=3):
    """Return a spectrum that grows like that of a body, after its lowest values."""
    lowest = np.asarray(lowest, float)
    return np.concatenate([lowest, lowest.max() * (1.02 + np.arange(1, n) / 10) ** (4 / 3)])


def test_chain_of_masses_and_springs():
    # J. Mikota, "Frequency tuning of chain structure multibody oscillators", ZAMM 81
    # (2001): masses 1/i, springs n, n - 1, ..., 1 give frequencies 1, 2, ..., n.
    n = 400
    springs = np.arange(n, 0, -1.0)
    k = sp.diags_array([springs + np.append(springs[1:], 0), -springs[1:]], offsets=[0, 1])
    m = sp.diags_array(1.0 / np.arange(1, n + 1)).tocsr()
    f = factorise(sp.csr_matrix(k))
    generator = np.random.default_rng(0)
    got = lowest_modes(
        f.solve, lambda v: m @ v, lambda k: generator.standard_normal((n, k)), count=15
    )
    np.testing.assert_allclose(np.sqrt(got.values), np.arange(1, 16), rtol=1e-9)
    gram = got.vectors.T @ (m @ got.vectors)
    np.testing.assert_allclose(gram, np.eye(15), atol=1e-12)


@pytest.mark.parametrize("copies", [2, 5, 12, 20, 31])
def test_every_copy_of_a_multiple_eigenvalue_is_found(copies):
    # More copies than a block has vectors: a plain block method finds as many as
    # the block holds and never knows.
    values = spread([*[1.0] * copies, *np.linspace(2, 6, 9)])
    got = lowest_modes(*problem(values), count=copies + 3, block=8)
    np.testing.assert_allclose(got.values, values[: copies + 3], rtol=1e-12)


def test_nearly_multiple_eigenvalues_are_told_apart():
    values = spread([*(1.0 + 1e-6 * np.arange(12)), *np.linspace(2, 6, 9)])
    got = lowest_modes(*problem(values), count=12)
    np.testing.assert_allclose(got.values, values[:12], rtol=1e-12)


@pytest.mark.parametrize("count", [1, 3, 5])
def test_the_last_cluster_is_whole(count):
    values = spread([1.0, 2.0, 2.0 * (1 + 0.9 * CLUSTER), 3.0, 3.0, 3.0, 4.0, 5.0])
    wanted = {1: 1, 3: 3, 5: 6}[count]
    assert len(lowest_modes(*problem(values), count=count).values) == wanted
    # Two ask for half a pair and get it whole.
    assert len(lowest_modes(*problem(values), count=2).values) == 3


def test_modes_up_to_a_limit():
    values = spread(np.linspace(1, 10, 30))
    got = lowest_modes(*problem(values), limit=5.0)
    np.testing.assert_allclose(got.values, values[values <= 5.0], rtol=1e-12)
    both = lowest_modes(*problem(values), limit=5.0, count=4)
    assert len(both.values) == 4
    few = lowest_modes(*problem(values), limit=1.5, count=14)
    assert len(few.values) == (values <= 1.5).sum()
    assert len(lowest_modes(*problem(values), limit=0.5).values) == 0
    assert len(lowest_modes(*problem(values), limit=0.5, count=3).values) == 0


def test_many_modes():
    values = spread(np.linspace(1, 40, 150))
    got = lowest_modes(*problem(values), count=140)
    np.testing.assert_allclose(got.values, values[:140], rtol=1e-11)


def test_known_modes_are_left_out():
    values = np.concatenate([np.zeros(6), spread(np.linspace(1, 10, 20))])
    known = np.eye(len(values))[:, :6]
    got = lowest_modes(*problem(values, sigma=-1e-3), count=10, sigma=-1e-3, known=known)
    np.testing.assert_allclose(got.values, values[6:16], rtol=1e-11)
    assert np.abs(known.T @ got.vectors).max() < 1e-12


@pytest.mark.parametrize("n", [3, 9, 20])
def test_asking_for_all_there_is(n):
    values = np.arange(1.0, n + 1)
    np.testing.assert_allclose(lowest_modes(*problem(values), count=n).values, values, rtol=1e-12)
    more = lowest_modes(*problem(values), count=n + 7)
    np.testing.assert_allclose(more.values, values, rtol=1e-12)


def test_masses_matter():
    mass = np.linspace(1, 3, 500)
    values = np.linspace(1, 50, 500) ** 2
    got = lowest_modes(*problem(values, mass=mass), count=6)
    np.testing.assert_allclose(got.values, values[:6], rtol=1e-12)
    np.testing.assert_allclose((mass[:, None] * got.vectors**2).sum(axis=0), 1.0, rtol=1e-12)


def test_the_same_digits_on_every_run():
    values = spread([1.0, 1.0, 2.0, 3.5])
    first, second = (lowest_modes(*problem(values), count=8) for _ in range(2))
    np.testing.assert_array_equal(first.values, second.values)
    np.testing.assert_array_equal(first.vectors, second.vectors)


def test_giving_up_hands_over_what_has_converged():
    values = spread([1.0, 3.0, 9.0, 27.0, *(100 + 1e-3 * np.arange(40))])
    with pytest.raises(NotConverged, match="ask for fewer modes") as caught:
        lowest_modes(*problem(values), count=20, block=2, most_steps=8)
    got = caught.value.pairs.values
    assert 1 <= len(got) < 20
    np.testing.assert_allclose(got, values[: len(got)], rtol=1e-10)
