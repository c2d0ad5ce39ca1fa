"""Routes, cases, and members that cannot be solved."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from xlaxial.solver.assembly import Assembly
from xlaxial.solver.displacement import solve_linear

CLOSE = 1e-11


def random_chain(network, rng, n):
    return network(
        [(i, i + 1) for i in range(n)],
        [(0, np.inf), (n // 2, 2.0), (n, 5.0)],
        rng.uniform(0.5, 2.0, n),
        3.0,
        rng.uniform(0.5, 2.0, n),
    )


def renumbered(net, act, order):
    """The same network with other node numbers."""
    place = np.argsort(order)
    bars = replace(net.bars, start=place[net.bars.start], end=place[net.bars.end])
    supports = replace(net.supports, node=place[net.supports.node])
    return replace(net, node_member=net.node_member[order], bars=bars, supports=supports), replace(
        act, force=act.force[order]
    )


@pytest.mark.parametrize("n_cases", [1, 3])
@pytest.mark.parametrize("n", [1, 2, 50])
def test_numbering_does_not_matter(network, actions, n, n_cases):
    rng = np.random.default_rng(n)
    net = random_chain(network, rng, n)
    act = actions(net, *(rng.normal(size=(size, n_cases)) for size in (n + 1, n, n, 3)))
    expected = solve_linear(net, act)
    assert net.in_chains
    other, other_act = renumbered(net, act, rng.permutation(n + 1))
    state = solve_linear(other, other_act)
    for name in ("force_start", "force_end", "reaction", "elongation"):
        np.testing.assert_allclose(getattr(state, name), getattr(expected, name), rtol=CLOSE, atol=CLOSE)


def dense(net, act):
    """Dense solution with numpy.linalg.solve for springs and uniform bars."""
    n, b = net.n_nodes, net.bars
    k = b.modulus * b.area_start / b.length
    matrix, right = np.zeros((n, n)), act.force.copy()
    for i, j, stiff, free in zip(b.start, b.end, k, act.imposed, strict=True):
        matrix[[i, j, i, j], [i, j, j, i]] += np.array([stiff, stiff, -stiff, -stiff])
        right[i] -= stiff * free
        right[j] += stiff * free
    for node, c in zip(net.supports.node, net.supports.stiffness, strict=True):
        matrix[node, node] += c
    u = np.linalg.solve(matrix, right)
    return u, k[:, None] * (u[b.end] - u[b.start] - act.imposed)


@pytest.mark.parametrize("n_bars_more", [10, 60, 3000])
def test_networks_narrow_and_wide(network, actions, n_bars_more):
    # 3000 bars at random over 120 nodes reach far in any numbering: the sparse route; few bars: the banded one
    rng = np.random.default_rng(n_bars_more)
    n = 120
    ends = [(i, i + 1) for i in range(n - 1)]
    more = rng.integers(0, n, (n_bars_more, 2))
    ends += [(i, j) for i, j in more.tolist() if i != j]
    net = network(ends, [(3, 2.0), (90, 1.0)], area=rng.uniform(0.5, 2.0, len(ends)))
    act = actions(net, rng.normal(size=(n, 2)), None, rng.normal(size=(len(ends), 2)))
    state = solve_linear(net, act)
    u, force = dense(net, act)
    np.testing.assert_allclose(state.displacement, u, rtol=1e-9, atol=1e-9)
    np.testing.assert_allclose(state.force_start, force, rtol=1e-9, atol=1e-9)


def test_members_of_all_kinds_side_by_side(network, actions):
    rng = np.random.default_rng(5)
    chain = [(0, 1), (1, 2)]
    doubled = [(3, 4), (3, 4), (5, 4)]
    ring = [(6, 8), (8, 7), (7, 6), (9, 7)]
    wide = [(10 + i, 10 + j) for i in range(60) for j in range(i)]
    member = [0] * 3 + [1] * 3 + [2] * 4 + [3] * 60
    ends = chain + doubled + ring + wide
    supports = [(0, 1.0), (2, 3.0), (5, 1.0), (9, 2.0), (12, 1.0), (44, 3.0)]
    net = network(ends, supports, area=rng.uniform(0.5, 2.0, len(ends)), member=member)
    act = actions(net, rng.normal(size=net.n_nodes), None, rng.normal(size=len(ends)))
    state = solve_linear(net, act)
    u, force = dense(net, act)
    np.testing.assert_allclose(state.displacement, u, rtol=1e-10, atol=1e-10)
    np.testing.assert_allclose(state.force_start, force, rtol=1e-10, atol=1e-10)
    assert state.residual.shape == (4, 1)
    assert state.imbalance.max() <= 1e-11


def test_an_assembly_can_be_factorised_again(network):
    net = network([(0, 1), (1, 2), (0, 2)], [(0, np.inf), (2, 2.0)])
    assembly = Assembly(net)
    force = np.array([[0.0], [1.0], [0.0]])
    assert not assembly.factor(np.array([1.0, 1.0, 1.0]), np.array([np.inf, 2.0])).any()
    first = assembly.solve(force)
    assert not assembly.factor(np.array([1.0, 1.0, 0.0]), np.array([np.inf, 0.0])).any()
    assert assembly.solve(force)[:, 0] == pytest.approx([0.0, 1.0, 1.0])
    assert not assembly.factor(np.array([1.0, 1.0, 1.0]), np.array([np.inf, 2.0])).any()
    np.testing.assert_array_equal(assembly.solve(force), first)
    np.testing.assert_array_equal(force, [[0.0], [1.0], [0.0]])


def test_a_singular_tangent_is_told_and_leaves_others_alone(network):
    net = network([(0, 1), (2, 3)], [(0, np.inf), (2, 2.0)], member=[0, 0, 1, 1])
    assembly = Assembly(net)
    failed = assembly.factor(np.array([0.0, 1.0]), net.supports.stiffness)
    np.testing.assert_array_equal(failed, [True, False])
    assert assembly.solve(np.array([[0.0], [1.0], [0.0], [1.0]]))[2:, 0] == pytest.approx([0.5, 1.5])


@pytest.mark.parametrize("bad", [np.nan, np.inf, -np.inf])
@pytest.mark.parametrize("where", ["force", "distributed", "imposed", "settlement", "area"])
@pytest.mark.parametrize("ends", [[(0, 1), (2, 3)], [(1, 0), (3, 2)]])
def test_numbers_that_are_not_finite_fail_their_member_alone(network, actions, ends, where, bad):
    supports = [(0, 2.0), (2, 2.0), (3, np.inf)]
    net = network(ends, supports, member=[0, 0, 1, 1])
    act = actions(net, [0.0, 1.0, 2.0, 0.0], [1.0, 1.0], [1.0, 1.0], [1.0, 1.0, 1.0])
    expected = solve_linear(net, act)
    if where == "area":
        area = np.array([bad, 1.0])
        net = replace(net, bars=replace(net.bars, area_start=area, area_end=area))
    else:
        values = getattr(act, where).copy()
        values[0, 0] = bad
        act = replace(act, **{where: values})
    state = solve_linear(net, act)
    assert np.isnan(state.force_start[0, 0])
    assert np.isnan(state.residual[0, 0])
    assert np.isnan(state.displacement[0, 0])
    assert state.force_start[1, 0] == pytest.approx(expected.force_start[1, 0], rel=1e-14)
    assert state.residual[1, 0] < 1e-14


def test_negative_stiffness_fails_its_member_alone(network, actions):
    net = network([(0, 1), (2, 3)], [(0, 2.0), (2, -2.0)], member=[0, 0, 1, 1])
    state = solve_linear(net, actions(net, [0.0, 1.0, 2.0, 0.0]))
    assert state.force_start[0, 0] == pytest.approx(1.0)
    assert np.isnan(state.force_start[1, 0])


def test_mechanism_that_slips_through_is_not_answered(network, actions):
    for ends in ([(0, 1), (1, 2), (3, 4)], [(1, 0), (2, 1), (4, 3)]):
        net = network(ends, [(0, 2.0)], member=[0, 0, 0, 1, 1])
        state = solve_linear(net, actions(net, [0.0, 0.0, 1.0, 2.0, 0.0]))
        assert abs(state.reaction[0, 0]) == pytest.approx(1.0)
        assert np.isnan(state.force_start[2, 0])


def test_two_rigid_supports_at_a_node_show_in_the_residual(network, actions):
    # which of them carries what cannot be told; callers refuse them, and the sum of forces would tell on them
    net = network([(0, 1)], [(0, np.inf), (0, np.inf)])
    assert solve_linear(net, actions(net, [0.0, 5.0])).residual[0, 0] == pytest.approx(1.0)


def test_nothing_acts(network, actions):
    net = network([(0, 1), (1, 2)], [(0, np.inf), (2, 1.0)])
    state = solve_linear(net, actions(net))
    for values in (state.displacement, state.force_start, state.reaction, state.residual, state.imbalance):
        np.testing.assert_array_equal(values, np.zeros_like(values))


def test_free_heating_gives_no_force(network, actions):
    # each bar lengthens freely; sums of its displacements are rounded, forces are not to grow out of that
    n = 40
    net = network([(i, i + 1) for i in range(n)], [(0, np.inf)], 1.0, 2e11, 1e-3)
    state = solve_linear(net, actions(net, None, None, np.full(n, 1.1e-4)))
    assert np.abs(state.force_start).max() < 1e-12
    assert state.displacement[-1, 0] == pytest.approx(n * 1.1e-4, rel=1e-14)
    assert state.imbalance.max() <= 1e-11


def test_many_members_with_some_that_need_refinement(network, actions):
    rng = np.random.default_rng(11)
    m = 200
    ends = [(4 * i + j, 4 * i + j + 1) for i in range(m) for j in range(3)]
    stiff = np.ones((m, 3))
    stiff[::17, 1] = 1e12
    member = np.repeat(np.arange(m), 4)
    supports = [(4 * i + j, np.inf) for i in range(m) for j in (0, 3)]
    net = network(ends, supports, area=stiff.ravel(), member=member)
    force = rng.normal(size=(m, 4))
    state = solve_linear(net, actions(net, force.ravel()))
    a, b = force[:, 1], force[:, 2]
    s = 1.0 / stiff
    # flexibility by hand: redundant at the last support of three bars in series
    last = -(a * s[:, 0] + b * (s[:, 0] + s[:, 1])) / s.sum(axis=1)
    expected = np.stack([a + b + last, b + last, last], axis=1)
    np.testing.assert_allclose(state.force_start[:, 0].reshape(m, 3), expected, rtol=0.0, atol=1e-10)
    assert state.imbalance.max() <= 1e-11


def test_no_members(network, actions):
    net = network([(0, 1)], [(0, 1.0)])
    nothing = replace(
        net,
        n_members=0,
        node_member=net.node_member[:0],
        bars=type(net.bars)(*(getattr(net.bars, name)[:0] for name in type(net.bars).__dataclass_fields__)),
        supports=replace(net.supports, node=net.supports.node[:0], stiffness=net.supports.stiffness[:0]),
    )
    state = solve_linear(nothing, actions(nothing))
    assert state.force_start.shape == (0, 1)
    assert state.residual.shape == (0, 1)
