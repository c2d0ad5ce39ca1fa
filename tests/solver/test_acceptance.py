"""The agreed examples of the first release, on SI arrays, to the digits shown there."""

from __future__ import annotations

import numpy as np
import pytest

from xlaxial.model.network import Actions, Bars, Network, Supports
from xlaxial.solver.displacement import solve_linear
from xlaxial.solver.lockoff import lock_off
from xlaxial.solver.recovery import recover

INCH, KIP = 0.0254, 4448.2216152605
SQUARE_INCH, KSI = INCH**2, KIP / INCH**2


def one_member(ends, length, modulus, area_start, area_end=None, supports=(), round_taper=False):
    n_bars = len(ends)
    start, end = (np.array(side, dtype=np.int64) for side in zip(*ends, strict=True))
    area_start = np.array(area_start, dtype=float)
    area_end = area_start if area_end is None else np.array(area_end, dtype=float)
    modulus = np.broadcast_to(np.array(modulus, dtype=float), (n_bars,))
    bars = Bars(
        np.zeros(n_bars, dtype=np.int64),
        start,
        end,
        np.array(length, dtype=float),
        modulus,
        area_start,
        area_end,
        np.full(n_bars, round_taper),
    )
    n_nodes = int(max(start.max(), end.max())) + 1
    return Network(
        1,
        np.zeros(n_nodes, dtype=np.int64),
        bars,
        Supports(np.array([s[0] for s in supports], dtype=np.int64), np.array([s[1] for s in supports], dtype=float)),
    )


def acting(network, force=None, q=None, imposed=None, settlement=None):
    def column(values, size):
        return np.zeros((size, 1)) if values is None else np.array(values, dtype=float).reshape(-1, 1)

    n_bars = network.bars.start.size
    return Actions(
        column(force, network.n_nodes),
        column(q, n_bars),
        column(imposed, n_bars),
        column(settlement, network.supports.node.size),
    )


def test_taper_with_distributed_load_spring_and_settlement():
    # example 1a; segment 2 is cut at the load at x = 2.05 m, so it stands here as two bars
    def area(d):
        return np.pi / 4.0 * d**2

    network = one_member(
        [(0, 1), (1, 2), (2, 3)],
        [1.6, 0.45, 0.45],
        105e9,
        [area(0.06), area(0.03), area(0.03)],
        [area(0.03), area(0.03), area(0.03)],
        [(0, np.inf), (3, 45e6)],
        round_taper=True,
    )
    hot = 17e-6 * -6.0
    actions = acting(
        network, [0.0, -9e3, 14e3, 0.0], [20e3, 0.0, 0.0], [hot * 1.6, hot * 0.45, hot * 0.45], [-0.2e-3, 0.0]
    )
    state = solve_linear(network, actions)
    results = recover(network, actions, state)
    assert state.reaction[:, 0] / 1e3 == pytest.approx([-41.05484, 4.05484], abs=6e-6)
    assert state.force_start[:, 0] / 1e3 == pytest.approx([41.05484, 18.05484, 4.05484], abs=6e-6)
    assert state.force_end[:, 0] / 1e3 == pytest.approx([9.05484, 18.05484, 4.05484], abs=6e-6)
    assert results.stress_start[0, 0] / 1e6 == pytest.approx(14.52018, abs=6e-6)
    assert results.stress_end[0, 0] / 1e6 == pytest.approx(12.80998, abs=6e-6)
    assert results.stress_max[0, 0] / 1e6 == pytest.approx(15.78398, abs=6e-6)
    assert results.stress_max_at[0, 0] == pytest.approx(0.905484, abs=6e-7)
    assert results.elongation[0, 0] * 1e3 == pytest.approx(0.0676405, abs=6e-8)
    assert results.elongation[1:, 0].sum() * 1e3 == pytest.approx(0.0422520, abs=6e-8)
    assert state.displacement[[1, 3], 0] * 1e3 == pytest.approx([-0.1323596, -0.0901076], abs=6e-8)
    assert state.residual.max() < 1e-14


def test_network_in_us_units():
    # example 1b: nodes A, B, C are 0, 1, 2
    network = one_member(
        [(0, 1), (0, 1), (1, 2), (0, 2)],
        np.array([22.0, 22.0, 13.0, 35.0]) * INCH,
        np.array([29000.0, 15500.0, 10100.0, 29000.0]) * KSI,
        np.array([1.10, 2.40, 1.75, 0.60]) * SQUARE_INCH,
        supports=[(0, np.inf), (2, 650.0 * KIP / INCH)],
    )
    strain = np.array([6.5, 10.2, 12.9, 6.5]) * 1e-6 * np.array([55.0, 55.0, 90.0, -20.0])
    imposed = (strain * np.array([22.0, 22.0, 13.0, 35.0]) + np.array([0.0, 0.006, 0.0, 0.0])) * INCH
    actions = acting(network, [0.0, -18.0 * KIP, 0.0], None, imposed, [0.010 * INCH, 0.0])
    state = solve_linear(network, actions)
    results = recover(network, actions, state)
    expected = [-7.444730, -26.397284, -15.842014, 5.330300]
    assert state.force_start[:, 0] / KIP == pytest.approx(expected, abs=6e-7)
    assert results.stress_start[:, 0] / KSI == pytest.approx([-6.767937, -10.998868, -9.052580, 8.883833], abs=6e-7)
    assert state.reaction[:, 0] / KIP == pytest.approx([28.511714, -10.511714], abs=6e-7)
    assert state.displacement[1:, 0] / INCH == pytest.approx([0.01273070, 0.01617187], abs=6e-9)


def test_preload_is_the_force_at_lock_off():
    # example 1c
    network = one_member([(0, 1), (1, 2)], [2.4, 1.1], 205e9, [804e-6, 1256e-6], supports=[(0, 38e6), (2, 62e6)])
    locked = lock_off(network, np.array([[90e3], [0.0]]), np.array([True, False]))
    assert not locked.unlike.size
    assert not locked.unheld.size
    nothing = acting(network)
    state = solve_linear(network, nothing, locked.imposed)
    assert state.force_start[:, 0] == pytest.approx([90e3, 90e3], rel=1e-12)
    hot = 12e-6 * 24.0 * np.array([2.4, 1.1])
    state = solve_linear(network, acting(network, None, None, hot), locked.imposed)
    assert state.force_start[:, 0] / 1e3 == pytest.approx([73.550468, 73.550468], abs=6e-7)
    state = solve_linear(network, acting(network, [0.0, 35e3, 0.0], None, hot), locked.imposed)
    assert state.force_start[:, 0] / 1e3 == pytest.approx([85.202910, 50.202910], abs=6e-7)
    assert state.reaction[:, 0] / 1e3 == pytest.approx([-85.202910, 50.202910], abs=6e-7)
    assert state.displacement[[0, 2], 0] * 1e3 == pytest.approx([2.242182, -0.809724], abs=6e-7)


def test_stiff_bar_between_soft_springs():
    # example 1d
    network = one_member([(0, 1)], [1.0], 1e17, [1.0], supports=[(0, 0.1e6), (1, 0.3e6)])
    state = solve_linear(network, acting(network, [7e3, -3e3]))
    assert state.reaction[:, 0] / 1e3 == pytest.approx([-1.0000000000045, -2.9999999999955], rel=0, abs=6e-14)
    assert state.force_start[0, 0] / 1e3 == pytest.approx(-5.9999999999955, rel=0, abs=6e-14)
    assert state.imbalance.max() < 1e-11
