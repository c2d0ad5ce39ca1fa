"""What holds for any network: equilibrium, fit, superposition, mirror, splitting a bar, order of bars."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from xlaxial.model.network import Actions, Bars, Network, Supports
from xlaxial.solver.displacement import solve_linear
from xlaxial.solver.flexibility import area_at, flexibility, load_lever
from xlaxial.solver.recovery import recover

FAINT = 1e-12  # actions are of the order of 1; forces where none act are rounding
PART = 1e-9  # of the largest force, or of the largest term of what is compared


@dataclass
class Drawn:
    network: Network
    actions: Actions


@st.composite
def drawn(draw, n_cases=1):
    """A member of 1 to 8 bars in series, some doubled or bridged, any taper; stiffnesses over six decades."""
    seed = draw(st.integers(0, 2**32 - 1))
    rng = np.random.default_rng(seed)
    n = draw(st.integers(1, 8))
    ends = [(i, i + 1) for i in range(n)]
    for _ in range(draw(st.integers(0, 3))):
        i = int(rng.integers(0, n))
        ends.append((i, int(rng.integers(i + 1, n + 1))))
    m = len(ends)
    area = 10.0 ** rng.uniform(-3.0, 3.0, m)
    taper = rng.choice([1.0, 1.0 + 1e-10, 0.7, 0.05, 9.0], m)
    start, end = np.array(ends).T
    bars = Bars(
        np.zeros(m, dtype=np.int64),
        start,
        end,
        rng.uniform(0.3, 3.0, m),
        rng.uniform(0.5, 2.0, m),
        area,
        area * taper,
        rng.random(m) < 0.5,
    )
    n_supports = draw(st.integers(1, min(3, n + 1)))
    node = np.sort(rng.choice(n + 1, n_supports, replace=False))
    stiffness = np.where(rng.random(n_supports) < 0.4, np.inf, 10.0 ** rng.uniform(-2.0, 2.0, n_supports))
    network = Network(1, np.zeros(n + 1, dtype=np.int64), bars, Supports(node, stiffness))
    on = draw(st.tuples(st.booleans(), st.booleans(), st.booleans(), st.booleans()))
    sizes = (n + 1, m, m, n_supports)
    return Drawn(
        network, Actions(*(rng.normal(size=(size, n_cases)) * acts for size, acts in zip(sizes, on, strict=True)))
    )


def largest(state):
    values = [np.abs(v).max(initial=0.0) for v in (state.force_start, state.force_end, state.reaction)]
    return max(values) + FAINT


@settings(deadline=None)  # a busy machine is no failure
@given(drawn())
def test_every_node_is_in_equilibrium(case):
    network, state = case.network, solve_linear(case.network, case.actions)
    left = case.actions.force[:, 0].copy()
    np.add.at(left, network.bars.start, state.force_start[:, 0])
    np.subtract.at(left, network.bars.end, state.force_end[:, 0])
    np.add.at(left, network.supports.node, state.reaction[:, 0])
    assert np.abs(left).max() <= PART * largest(state)
    carried = case.actions.distributed[:, 0] * network.bars.length
    np.testing.assert_allclose(
        state.force_start[:, 0] - state.force_end[:, 0], carried, rtol=0, atol=PART * largest(state)
    )
    assert state.residual.max() <= PART
    assert state.imbalance.max() <= 1e-10


@settings(deadline=None)  # a busy machine is no failure
@given(drawn())
def test_every_bar_fits_between_its_nodes(case):
    network, actions = case.network, case.actions
    state = solve_linear(network, actions)
    bars = network.bars
    f, g = flexibility(bars), load_lever(bars)
    terms = [f * state.force_start[:, 0], -actions.distributed[:, 0] * g, actions.imposed[:, 0]]
    u = state.displacement[:, 0]
    size = sum(np.abs(t) for t in terms) + np.abs(u[bars.start]) + np.abs(u[bars.end]) + f * largest(state)
    assert (np.abs(u[bars.end] - u[bars.start] - sum(terms)) <= PART * size).all()
    assert (np.abs(state.elongation[:, 0] - sum(terms)) <= PART * size).all()
    node, k, settled = network.supports.node, network.supports.stiffness, actions.settlement[:, 0]
    rigid = np.isinf(k)
    np.testing.assert_array_equal(u[node[rigid]], settled[rigid])
    expected = -k[~rigid] * (u[node] - settled)[~rigid]
    size = np.abs(k[~rigid]) * (np.abs(u[node]) + np.abs(settled))[~rigid] + largest(state)
    assert (np.abs(state.reaction[~rigid, 0] - expected) <= PART * size).all()


@settings(deadline=None)  # a busy machine is no failure
@given(drawn(n_cases=2), st.floats(-3.0, 3.0), st.floats(-3.0, 3.0))
def test_superposition(case, first, second):
    actions = case.actions
    both = solve_linear(case.network, actions)
    factors = np.array([[first], [second]])
    summed = Actions(*(v @ factors for v in (actions.force, actions.distributed, actions.imposed, actions.settlement)))
    state = solve_linear(case.network, summed)
    np.testing.assert_allclose(state.force_start, both.force_start @ factors, rtol=0, atol=10 * PART * largest(both))
    np.testing.assert_allclose(state.reaction, both.reaction @ factors, rtol=0, atol=10 * PART * largest(both))


@settings(deadline=None)  # a busy machine is no failure
@given(drawn())
def test_mirror(case):
    network, actions = case.network, case.actions
    bars, n = network.bars, network.n_nodes
    turned = Bars(
        bars.member,
        n - 1 - bars.end,
        n - 1 - bars.start,
        bars.length,
        bars.modulus,
        bars.area_end,
        bars.area_start,
        bars.round_taper,
    )
    mirror = replace(network, bars=turned, supports=replace(network.supports, node=n - 1 - network.supports.node))
    reversed_ = Actions(-actions.force[::-1], -actions.distributed, actions.imposed, -actions.settlement)
    state, other = solve_linear(network, actions), solve_linear(mirror, reversed_)
    size = PART * largest(state)
    np.testing.assert_allclose(other.force_start, state.force_end, rtol=0, atol=size)
    np.testing.assert_allclose(other.reaction, -state.reaction, rtol=0, atol=size)


@settings(deadline=None)  # a busy machine is no failure
@given(drawn(), st.integers(0, 100), st.floats(0.05, 0.95))
def test_splitting_a_bar_changes_nothing(case, which, part):
    network, actions = case.network, case.actions
    bars = network.bars
    which %= bars.start.size
    x = part * bars.length
    area = area_at(bars, x)[which]
    values = {name: np.append(getattr(bars, name), getattr(bars, name)[which]) for name in Bars.__dataclass_fields__}
    new = network.n_nodes
    values["end"][which], values["start"][-1] = new, new
    values["length"][which], values["length"][-1] = x[which], bars.length[which] - x[which]
    values["area_end"][which], values["area_start"][-1] = area, area
    split = replace(network, node_member=np.zeros(new + 1, dtype=np.int64), bars=Bars(**values))
    imposed = np.append(actions.imposed, actions.imposed[[which]] * (1.0 - part), axis=0)
    imposed[which] *= part
    same = Actions(
        np.append(actions.force, [[0.0]], axis=0),
        np.append(actions.distributed, actions.distributed[[which]], axis=0),
        imposed,
        actions.settlement,
    )
    state, other = solve_linear(network, actions), solve_linear(split, same)
    size = PART * largest(state)
    np.testing.assert_allclose(other.force_start[:-1], state.force_start, rtol=0, atol=size)
    np.testing.assert_allclose(other.force_end[-1], state.force_end[which], rtol=0, atol=size)
    np.testing.assert_allclose(other.reaction, state.reaction, rtol=0, atol=size)
    whole, halves = recover(network, actions, state), recover(split, same, other)
    most = np.maximum(halves.stress_max[which, 0], halves.stress_max[-1, 0])
    size = np.abs([whole.stress_max[which, 0], whole.stress_min[which, 0]]).max() + largest(state) / area
    assert whole.stress_max[which, 0] == pytest.approx(most, abs=1e-7 * size)


@settings(deadline=None)  # a busy machine is no failure
@given(drawn(), st.integers(0, 2**32 - 1))
def test_order_of_bars_and_supports_changes_nothing(case, seed):
    network, actions = case.network, case.actions
    rng = np.random.default_rng(seed)
    bars, supports = rng.permutation(network.bars.start.size), rng.permutation(network.supports.node.size)
    shuffled = replace(
        network,
        bars=Bars(*(getattr(network.bars, name)[bars] for name in Bars.__dataclass_fields__)),
        supports=Supports(network.supports.node[supports], network.supports.stiffness[supports]),
    )
    same = Actions(actions.force, actions.distributed[bars], actions.imposed[bars], actions.settlement[supports])
    state, other = solve_linear(network, actions), solve_linear(shuffled, same)
    size = PART * largest(state)
    np.testing.assert_allclose(other.force_start, state.force_start[bars], rtol=0, atol=size)
    np.testing.assert_allclose(other.reaction, state.reaction[supports], rtol=0, atol=size)


@settings(max_examples=30, deadline=None)
@given(st.lists(drawn(), min_size=2, max_size=5))
def test_members_do_not_see_each_other(cases):
    nodes = bars = 0
    parts = []
    for member, case in enumerate(cases):
        b, s = case.network.bars, case.network.supports
        parts.append(
            (
                np.full(case.network.n_nodes, member),
                replace(b, member=b.member + member, start=b.start + nodes, end=b.end + nodes),
                replace(s, node=s.node + nodes),
            )
        )
        nodes += case.network.n_nodes
    joined = Network(
        len(cases),
        np.concatenate([p[0] for p in parts]),
        Bars(*(np.concatenate([getattr(p[1], name) for p in parts]) for name in Bars.__dataclass_fields__)),
        Supports(*(np.concatenate([getattr(p[2], name) for p in parts]) for name in Supports.__dataclass_fields__)),
    )
    actions = Actions(
        *(np.concatenate([getattr(c.actions, name) for c in cases]) for name in Actions.__dataclass_fields__)
    )
    state = solve_linear(joined, actions)
    for case in cases:
        alone = solve_linear(case.network, case.actions)
        m = case.network.bars.start.size
        np.testing.assert_allclose(
            state.force_start[bars : bars + m], alone.force_start, rtol=0, atol=PART * largest(alone)
        )
        bars += m
