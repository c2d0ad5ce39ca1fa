from __future__ import annotations

import numpy as np
import pytest

from xlaxial.solver.dominant import Dominant


@pytest.mark.parametrize("seed", range(5))
def test_solves_like_a_dense_matrix(network, seed):
    rng = np.random.default_rng(seed)
    n = 15
    ends = [(i, i + 1) for i in range(n - 1)] + [tuple(rng.choice(n, 2, replace=False).tolist()) for _ in range(12)]
    net = network(ends, [(2, 3.0), (9, np.inf), (9, 1.0)])
    bar = rng.uniform(0.1, 10.0, len(ends))
    rows = rng.normal(size=(2, n))
    matrix = np.zeros((n, n))
    for (i, j), k in zip(ends, bar, strict=True):
        matrix[[i, j, i, j], [i, j, j, i]] += np.array([k, k, -k, -k])
    matrix[2, 2] += 3.0
    free = np.arange(n) != 9
    expected = np.zeros((2, n))
    expected[:, free] = np.linalg.solve(matrix[np.ix_(free, free)], rows[:, free].T).T
    Dominant(net, bar, net.supports.stiffness).solve_rows(rows)
    np.testing.assert_allclose(rows, expected, rtol=1e-12, atol=1e-12)


def test_springs_in_series_keep_all_digits_at_any_ratio(network):
    net = network([(0, 1), (1, 2)], [(0, np.inf)])
    rows = np.array([[0.0, 0.0, 1.0]])
    Dominant(net, np.array([1e-30, 1e30]), net.supports.stiffness).solve_rows(rows)
    assert rows[0, 1:] == pytest.approx([1e30, 1e30], rel=1e-15)


def test_a_mechanism_has_no_displacements(network):
    net = network([(0, 1)], [])
    rows = np.array([[1.0, -1.0]])
    Dominant(net, np.array([2.0]), net.supports.stiffness).solve_rows(rows)
    assert np.isfinite(rows).all()
