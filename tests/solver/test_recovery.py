"""Extremes inside bars against a scan of the exact integrals along them."""

from __future__ import annotations

import numpy as np
import pytest

from xlaxial.solver.displacement import solve_linear
from xlaxial.solver.recovery import recover
from xlaxial.solver.stations import at_stations

FINE = 4001  # places of the scan


def scanned(net, act, state, bar, case):
    x = np.linspace(0.0, net.bars.length[bar], FINE)
    x[-1] = net.bars.length[bar]
    return at_stations(net, act, state, np.zeros_like(act.imposed), np.full(FINE, bar), x, case)


@pytest.mark.parametrize("seed", range(12))
def test_extremes_are_those_of_a_scan(network, actions, seed):
    rng = np.random.default_rng(seed)
    n = 6
    area = rng.uniform(0.3, 3.0, n)
    net = network(
        [(i, i + 1) for i in range(n)],
        [(0, np.inf), (n, rng.uniform(0.1, 10.0))],
        rng.uniform(0.5, 2.0, n),
        7.0,
        area,
        np.where(rng.random(n) < 0.3, area, rng.uniform(0.3, 3.0, n)),
        rng.random(n) < 0.6,
    )
    act = actions(
        net,
        rng.normal(size=(n + 1, 2)),
        rng.normal(size=(n, 2)) * 4.0 * (rng.random((n, 2)) < 0.7),
        rng.normal(size=(n, 2)) * (rng.random((n, 2)) < 0.7),
        rng.normal(size=(2, 2)),
    )
    state = solve_linear(net, act)
    results = recover(net, act, state)
    for bar in range(n):
        for case in range(2):
            found = scanned(net, act, state, bar, case)
            for name, values in (("stress", found.stress), ("displacement", found.displacement)):
                size = np.ptp(values) + 1e-12
                most, least = (getattr(results, f"{name}_{which}")[bar, case] for which in ("max", "min"))
                assert values.max() - 1e-12 * size <= most <= values.max() + 1e-5 * size
                assert values.min() - 1e-5 * size <= least <= values.min() + 1e-12 * size
                for which, value in (("max", most), ("min", least)):
                    place = getattr(results, f"{name}_{which}_at")[bar, case]
                    there = at_stations(
                        net, act, state, np.zeros_like(act.imposed), np.array([bar]), np.array([place]), case
                    )
                    assert getattr(there, name)[0] == pytest.approx(value, rel=1e-11, abs=1e-11)
            assert found.force[-1] == pytest.approx(state.force_end[bar, case], rel=1e-12, abs=1e-12)
            moved = found.displacement[-1] - found.displacement[0]
            assert results.elongation[bar, case] == pytest.approx(moved, rel=1e-10, abs=1e-10)


def test_place_of_the_largest_stress_of_a_loaded_round_taper(network, actions):
    # x* = d1/s + 2 N_start/q, s = (d2 - d1)/L, from d(N - q x)/d(x)**2 = 0
    d1, d2, length, q = 0.06, 0.03, 1.6, 20e3
    net = network([(0, 1)], [(0, np.inf)], length, 1e11, np.pi / 4 * d1**2, np.pi / 4 * d2**2, True)
    act = actions(net, [0.0, 9054.84], [q])
    results = recover(net, act, solve_linear(net, act))
    n_start = 9054.84 + q * length
    assert results.stress_max_at[0, 0] == pytest.approx(d1 / ((d2 - d1) / length) + 2.0 * n_start / q, rel=1e-12)
    assert results.stress_max[0, 0] > max(results.stress_start[0, 0], results.stress_end[0, 0])


def test_uniform_bar_has_its_extremes_at_its_ends(network, actions):
    net = network([(0, 1), (1, 2)], [(0, np.inf)], [2.0, 1.0])
    act = actions(net, [0.0, 5.0, -3.0])
    results = recover(net, act, solve_linear(net, act))
    np.testing.assert_allclose(results.stress_max[:, 0], [2.0, -3.0], rtol=1e-14)
    np.testing.assert_allclose(results.stress_min, results.stress_max)
    np.testing.assert_allclose(results.displacement_max[:, 0], [4.0, 4.0], rtol=1e-14)
    np.testing.assert_allclose(results.displacement_max_at[:, 0], [2.0, 0.0])
    np.testing.assert_allclose(results.displacement_min_at[:, 0], [0.0, 1.0])


def test_preload_takes_part_in_movements(network, actions):
    net = network([(0, 1)], [(0, np.inf), (1, np.inf)], 2.0, 1.0, 1.0, 3.0)
    act, preload = actions(net, imposed=[0.0]), np.array([[-0.5]])
    results = recover(net, act, solve_linear(net, act, preload), preload)
    hot = actions(net, imposed=[-0.5])
    expected = recover(net, hot, solve_linear(net, hot))
    assert results.displacement_max[0, 0] == pytest.approx(expected.displacement_max[0, 0], rel=1e-13)
    assert abs(results.displacement_max[0, 0]) + abs(results.displacement_min[0, 0]) > 0.01


def test_nan_stays_nan(network, actions):
    net = network([(0, 1), (2, 3)], [(0, np.inf), (2, np.inf)], member=[0, 0, 1, 1])
    act = actions(net, [0.0, np.nan, 0.0, 2.0], [1.0, 1.0])
    results = recover(net, act, solve_linear(net, act))
    assert np.isnan(results.stress_max[0, 0])
    assert np.isnan(results.displacement_max[0, 0])
    assert results.stress_max[1, 0] == pytest.approx(3.0)
