"""Preload is the force at lock-off: solving with the free lengthening that stands for it must give it back."""

from __future__ import annotations

import numpy as np
import pytest

from xlaxial.solver.displacement import solve_linear
from xlaxial.solver.lockoff import lock_off
from xlaxial.solver.runs import runs

EXACT = 1e-12


def locked_forces(network, actions, net, preload, given=None):
    preload = np.array(preload, dtype=float)
    preload = preload if preload.ndim == 2 else preload[:, None]
    given = (preload != 0.0).any(axis=1) if given is None else np.array(given)
    locked = lock_off(net, preload, given)
    nothing = actions(net, force=np.zeros((net.n_nodes, preload.shape[1])))
    return locked, solve_linear(net, nothing, locked.imposed)


def test_force_is_the_same_along_the_run_and_what_follows_is_statics(network, actions):
    net = network([(0, 1), (1, 2), (2, 3)], [(0, 3.0), (3, np.inf)], [1.0, 2.0, 3.0], 10.0, [1.0, 2.0, 0.5])
    locked, state = locked_forces(network, actions, net, [0.0, 5.0, 0.0])
    assert state.force_start[:, 0] == pytest.approx([5.0] * 3, rel=EXACT)
    assert np.count_nonzero(locked.imposed) == 1


def test_equal_preloads_of_one_run_count_once(network, actions):
    net = network([(0, 1), (1, 2)], [(0, np.inf), (2, np.inf)])
    locked, state = locked_forces(network, actions, net, [5.0, 5.0])
    assert state.force_start[:, 0] == pytest.approx([5.0, 5.0], rel=EXACT)
    assert not locked.unlike.size


def test_unlike_preloads_of_one_run_are_reported(network, actions):
    net = network([(0, 1), (1, 2), (3, 4)], [(0, np.inf), (2, np.inf), (3, 1.0), (4, 1.0)], member=[0, 0, 0, 1, 1])
    locked, state = locked_forces(network, actions, net, [5.0, 6.0, 7.0])
    np.testing.assert_array_equal(locked.unlike, [1])
    assert state.force_start[2, 0] == pytest.approx(7.0, rel=EXACT)


def test_a_support_inside_parts_the_runs(network, actions):
    net = network([(0, 1), (1, 2)], [(0, np.inf), (1, 8.0), (2, np.inf)])
    locked, state = locked_forces(network, actions, net, [5.0, -6.0])
    assert not locked.unlike.size
    assert state.force_start[:, 0] == pytest.approx([5.0, -6.0], rel=EXACT)
    assert state.reaction[1, 0] == pytest.approx(5.0 + 6.0, rel=EXACT)


def test_a_tie_in_its_tube_turns_the_sense(network, actions):
    # tube 0-1 and tie 2-1 meet with their ends at node 1: tension of the tie is compression of the tube
    net = network([(0, 1), (2, 1)], [(0, np.inf), (2, np.inf)], area=[5.0, 1.0])
    _, state = locked_forces(network, actions, net, [0.0, 9.0])
    assert state.force_start[:, 0] == pytest.approx([-9.0, 9.0], rel=EXACT)
    np.testing.assert_array_equal(runs(net).sense[0] * runs(net).sense[1], -1.0)
    assert not locked_forces(network, actions, net, [-9.0, 9.0])[0].unlike.size
    np.testing.assert_array_equal(locked_forces(network, actions, net, [9.0, 9.0])[0].unlike, [1])


def test_clamped_parts_share_by_stiffness(network, actions):
    # bolt and two parallel sleeves: the sleeves take the preload in the ratio of their stiffnesses, 2 to 3
    net = network([(0, 1), (0, 1), (0, 1)], [(0, np.inf)], area=[1.0, 2.0, 3.0])
    _, state = locked_forces(network, actions, net, [10.0, 0.0, 0.0])
    assert state.force_start[:, 0] == pytest.approx([10.0, -4.0, -6.0], rel=EXACT)
    assert state.reaction[0, 0] == pytest.approx(0.0, abs=1e-12)


def test_two_preloaded_bars_that_hold_each_other(network, actions):
    # without them node 1 hangs in the air, but their forces are in balance
    net = network([(0, 1), (0, 1), (0, 1)], [(0, 4.0)], area=[1.0, 7.0, 2.0])
    locked, state = locked_forces(network, actions, net, [6.0, -4.0, -2.0])
    assert not locked.unheld.size
    assert state.force_start[:, 0] == pytest.approx([6.0, -4.0, -2.0], rel=EXACT)


def test_preload_that_nothing_holds_is_reported(network, actions):
    net = network([(0, 1), (1, 2), (3, 4)], [(0, np.inf), (3, 1.0), (4, 1.0)], member=[0, 0, 0, 1, 1])
    locked, state = locked_forces(network, actions, net, [0.0, 5.0, 7.0])
    np.testing.assert_array_equal(locked.unheld, [1])
    assert state.force_start[2, 0] == pytest.approx(7.0, rel=EXACT)
    three = network([(0, 1), (0, 1), (0, 1)], [(0, np.inf)])
    np.testing.assert_array_equal(locked_forces(network, actions, three, [6.0, -5.0, -2.0])[0].unheld, [0, 1, 2])


def test_a_given_preload_of_zero_is_one(network, actions):
    net = network([(0, 1), (0, 1), (0, 1)], [(0, np.inf)])
    _, state = locked_forces(network, actions, net, [10.0, 0.0, 0.0], [True, True, False])
    assert state.force_start[:, 0] == pytest.approx([10.0, 0.0, -10.0], rel=EXACT, abs=1e-12)
    locked, _ = locked_forces(network, actions, net, [0.0, 0.0, 0.0], [True, True, False])
    assert not locked.imposed.any()


def test_cases_stand_apart(network, actions):
    net = network([(0, 1), (0, 1), (1, 2)], [(0, 2.0), (2, 5.0)], area=[1.0, 2.0, 3.0])
    _, state = locked_forces(network, actions, net, [[10.0, 0.0, 1.0], [0.0, 4.0, 2.0], [0.0, 0.0, 0.0]])
    np.testing.assert_allclose(state.force_start[:2], [[10.0, 0.0, 1.0], [0.0, 4.0, 2.0]], rtol=EXACT, atol=1e-12)


def test_runs_of_a_network_in_any_order(network):
    #  0 -> 3 -> 1 (run), 1 => 2 twice (own runs), 2 -> 4 with a support at 4, 4 -> 5
    net = network([(3, 1), (1, 2), (0, 3), (1, 2), (2, 4), (4, 5)], [(4, 1.0), (0, 1.0)])
    run = runs(net).run
    assert run[0] == run[2]
    assert len(set(run.tolist())) == 5
    np.testing.assert_array_equal(runs(net).sense, np.ones(6))


def test_runs_of_chains_and_of_the_same_as_a_network_agree(network):
    chain = network([(0, 1), (1, 2), (2, 3), (4, 5), (5, 6)], [(1, 1.0), (4, 1.0)], member=[0, 0, 0, 0, 1, 1, 1])
    assert chain.in_chains
    turned = network([(2, 3), (1, 2), (0, 1), (5, 6), (4, 5)], [(1, 1.0), (4, 1.0)], member=[0, 0, 0, 0, 1, 1, 1])
    assert not turned.in_chains
    np.testing.assert_array_equal(runs(chain).run, [0, 1, 1, 2, 2])
    a = runs(turned).run
    assert a[0] == a[1] != a[2]
    assert a[3] == a[4] != a[0]


@pytest.mark.parametrize("seed", range(8))
def test_random_networks_give_their_preloads_back(network, actions, seed):
    rng = np.random.default_rng(seed)
    n = 9
    ends = [(i, i + 1) for i in range(n - 1)] + [tuple(rng.choice(n, 2, replace=False).tolist()) for _ in range(5)]
    supports = [(0, np.inf), (n - 1, 3.0), (int(rng.integers(1, n - 1)), 1.0)]
    net = network(ends, supports, area=10.0 ** rng.uniform(-2.0, 2.0, len(ends)))
    found = runs(net)
    given = np.zeros(len(ends), dtype=bool)
    given[rng.choice(len(ends), 2, replace=False)] = True
    if found.run[given][0] == found.run[given][1]:
        given[np.flatnonzero(given)[1]] = False
    preload = np.where(given, rng.normal(size=len(ends)), 0.0)
    locked, state = locked_forces(network, actions, net, preload, given)
    assert not locked.unlike.size
    if not locked.unheld.size:
        assert state.force_start[given, 0] == pytest.approx(preload[given], rel=1e-10)
