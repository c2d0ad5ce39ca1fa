"""The solver against exact rationals (SymPy) and 50-digit arithmetic (mpmath), at stiffness ratios to 1e12 and beyond."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest
import sympy

from xlaxial.model.network import Actions, Bars, Network, Supports
from xlaxial.solver.displacement import solve_linear

OF_LARGEST = 1e-9  # error of any force, of the largest force of its member, that is allowed


def springs(n_nodes, bars, supports, member=None):
    """Bars (start, end, stiffness) of 1 m and 1 Pa, so that the area is the stiffness; supports (node, stiffness)."""
    start, end, k = (np.array(column) for column in zip(*bars, strict=True))
    member = np.zeros(n_nodes, dtype=np.int64) if member is None else np.array(member)
    one = np.ones(len(bars))
    k = k.astype(float)
    made = Bars(member[start], start, end, one, one, k, k, np.zeros(len(bars), dtype=bool))
    node, stiffness = (np.array(column) for column in zip(*supports, strict=True))
    return Network(int(member.max()) + 1, member, made, Supports(node, stiffness.astype(float)))


def actions_on(network, force, imposed=None, settlement=None, q=None):
    def column(values, size):
        return np.zeros((size, 1)) if values is None else np.array(values, dtype=float).reshape(-1, 1)

    n_bars = network.bars.start.size
    return Actions(
        column(force, network.n_nodes),
        column(q, n_bars),
        column(imposed, n_bars),
        column(settlement, network.supports.node.size),
    )


def exact(network, actions, case=0):
    """Bar forces and reactions in mpmath at the precision in force, by the dense stiffness matrix (uniform bars)."""
    n, bars, supports = network.n_nodes, network.bars, network.supports
    of = mpmath.mpf
    matrix, right = mpmath.zeros(n, n), mpmath.zeros(n, 1)
    k = [of(float(v)) for v in bars.modulus * bars.area_start]
    free = [of(float(v)) for v in actions.imposed[:, case]]
    q = [of(float(v)) for v in actions.distributed[:, case]]
    length = [of(float(v)) for v in bars.length]
    for b in range(bars.start.size):
        k[b] = of(float(bars.modulus[b])) * of(float(bars.area_start[b])) / length[b]
        free[b] -= q[b] * length[b] / (2 * k[b])  # q L**2/(2 E A)
    for node in range(n):
        right[node] = of(float(actions.force[node, case]))
    for b, (i, j) in enumerate(zip(bars.start.tolist(), bars.end.tolist(), strict=True)):
        for row, column, sign in ((i, i, 1), (j, j, 1), (i, j, -1), (j, i, -1)):
            matrix[row, column] += sign * k[b]
        right[i] -= k[b] * free[b]
        right[j] += k[b] * free[b] + q[b] * length[b]
    fixed = {}
    for s, (node, c) in enumerate(zip(supports.node.tolist(), supports.stiffness.tolist(), strict=True)):
        moved = of(float(actions.settlement[s, case]))
        if c == np.inf:
            fixed[node] = moved
        else:
            matrix[node, node] += of(c)
            right[node] += of(c) * moved
    plain, load = matrix.copy(), right.copy()
    for node, moved in fixed.items():
        for other in range(n):
            right[other] -= matrix[other, node] * moved
            matrix[other, node] = matrix[node, other] = 0
        matrix[node, node], right[node] = 1, moved
    for node, moved in fixed.items():
        right[node] = moved
    u = mpmath.lu_solve(matrix, right)
    force = [
        k[b] * (u[j] - u[i] - free[b])
        for b, (i, j) in enumerate(zip(bars.start.tolist(), bars.end.tolist(), strict=True))
    ]
    reaction = []
    for s, (node, c) in enumerate(zip(supports.node.tolist(), supports.stiffness.tolist(), strict=True)):
        if c == np.inf:
            reaction.append(sum(plain[node, other] * u[other] for other in range(n)) - load[node])
        else:
            reaction.append(-of(c) * (u[node] - of(float(actions.settlement[s, case]))))
    return force, reaction


def worst(network, actions, state, case=0):
    """Largest error of a bar force or reaction, relative to the largest of them."""
    with mpmath.workdps(50):
        force, reaction = exact(network, actions, case)
        largest = max(abs(v) for v in force + reaction)
        errors = [abs(mpmath.mpf(float(a)) - b) for a, b in zip(state.force_start[:, case], force, strict=True)]
        errors += [abs(mpmath.mpf(float(a)) - b) for a, b in zip(state.reaction[:, case], reaction, strict=True)]
        return float(max(errors) / largest)


HARD = {
    "soft stiff soft": ([(0, 1, 1e3), (1, 2, 1e15), (2, 3, 1e3)], [(0, np.inf), (3, np.inf)], [0, 7e3, -3e3, 0], None),
    "stiff soft stiff": ([(0, 1, 1e15), (1, 2, 1e3), (2, 3, 1e15)], [(0, np.inf), (3, 1e3)], [0, 5e3, 0, -2e3], None),
    "stiff between springs": ([(0, 1, 1e17)], [(0, 1e5), (1, 3e5)], [7e3, -3e3], None),
    "two stiff in parallel": (
        [(0, 1, 1e3), (1, 2, 1e15), (1, 2, 2.7e15), (2, 3, 1.3e3)],
        [(0, np.inf), (3, np.inf)],
        [0, 7e3, -3e3, 0],
        [0, 1e-12, -1e-12, 0],
    ),
    "stiff and hot in soft": (
        [(0, 1, 1e3), (1, 2, 1e15), (2, 3, 1.7e3)],
        [(0, np.inf), (3, np.inf)],
        [0, 0, 0, 0],
        [0, 0.37, 0],
    ),
    "stiff, hot and pulled at one end": (
        [(0, 1, 1e15), (1, 2, 1e3), (2, 3, 3e14), (3, 4, 1e9)],
        [(0, 1e3), (4, 2e3)],
        [1e2, 0, -3e3, 0, 10],
        [0.11, -0.21, 0.33, 0],
    ),
    "beyond the usual factors": ([(0, 1, 1e20)], [(0, 1.0), (1, 3.0)], [7e3, -3e3], [1e-3]),
    "beyond the usual factors, branched": (
        [(0, 1, 1e20), (0, 2, 3e20), (2, 1, 1e19), (1, 3, 1e2)],
        [(0, 1.0), (3, 3.0)],
        [7e3, -3e3, 0, 0],
        None,
    ),
    "springs as stiff as rigid": ([(0, 1, 2e8), (1, 2, 3e8)], [(0, 1e22), (2, 1e25)], [0, 5e3, 0], [1e-3, 0]),
    "mesh": (
        [(0, 3, 1e15), (3, 1, 1e3), (1, 4, 1e12), (4, 2, 1e4), (0, 4, 2e6), (3, 2, 1e15), (2, 0, 1e5)],
        [(0, 1e3), (4, np.inf)],
        [3e3, -1e3, 2e3, 0, 5],
        [0.1, 0, 0.2, 0, 0, -0.1, 0],
    ),
}


@pytest.mark.parametrize("name", HARD)
def test_stiffness_ratios_to_1e12(name):
    bars, supports, force, imposed = HARD[name]
    network = springs(len(force), bars, supports)
    actions = actions_on(network, force, imposed)
    state = solve_linear(network, actions)
    assert worst(network, actions, state) < OF_LARGEST
    assert state.imbalance.max() < 1e-10
    assert state.residual.max() < 1e-10


@pytest.mark.parametrize("ratio", [1e12, 1e14, 1e16, 1e20])
@pytest.mark.parametrize("seed", range(6))
def test_random_ratios(seed, ratio):
    rng = np.random.default_rng(seed)
    n = 12
    chain = [(i, i + 1) for i in range(n - 1)]
    more = [tuple(sorted(rng.choice(n, 2, replace=False).tolist())) for _ in range(6 * (seed % 2))]
    bars = [(i, j, 10.0 ** rng.uniform(0.0, np.log10(ratio))) for i, j in chain + more]
    supports = [(0, 1.0), (n - 1, np.inf if seed % 3 == 0 else 10.0)]
    network = springs(n, bars, supports)
    actions = actions_on(
        network, rng.normal(size=n), rng.normal(size=len(bars)) * (seed > 2), rng.normal(size=2) * (seed % 2)
    )
    state = solve_linear(network, actions)
    if np.isnan(state.force_start).any():  # refused, and said so
        assert ratio > 1e16
        assert np.isnan(state.imbalance).all()
        return
    error = worst(network, actions, state)
    assert error < (OF_LARGEST if ratio <= 1e16 else 1e-6)
    assert error <= 10.0 * state.imbalance.max() + 1e-12


@pytest.mark.parametrize("sizes", [[20_000], [3000, 5, 4000]])
def test_long_chains_between_rigid_supports(sizes):
    # redundant of bars in series, by flexibilities: R_last = -sum F_i (f_1 + ... + f_i)/sum f, at 50 digits
    rng = np.random.default_rng(sum(sizes))
    ends, supports, member, first = [], [], [], 0
    for m, n in enumerate(sizes):
        ends += [(first + i, first + i + 1, 10.0 ** rng.uniform(-3.0, 3.0)) for i in range(n)]
        supports += [(first, np.inf), (first + n, np.inf)]
        member += [m] * (n + 1)
        first += n + 1
    network = springs(first, ends, supports, member)
    force = rng.normal(size=first)
    state = solve_linear(network, actions_on(network, force))
    a = 0
    for m, n in enumerate(sizes):
        with mpmath.workdps(50):
            k = [mpmath.mpf(float(v)) for v in network.bars.area_start[a : a + n]]
            loads = [mpmath.mpf(float(v)) for v in force[a + m : a + m + n + 1]]
            reach = moment = mpmath.mpf(0)
            for i in range(1, n):
                reach += 1 / k[i - 1]
                moment += loads[i] * reach
            pull = -moment / (reach + 1 / k[n - 1])
            errors, largest = [], mpmath.mpf(0)
            for i in range(n - 1, -1, -1):
                errors.append(abs(mpmath.mpf(float(state.force_start[a + i, 0])) - pull))
                largest = max(largest, abs(pull))
                pull += loads[i]
            assert float(max(errors) / largest) < 1e-11
        a += n
    assert state.imbalance.max() <= 1e-11
    assert state.residual.max() < 1e-11


def test_one_ill_member_among_good_ones_leaves_them_alone():
    good = [(0, 1, 5.0), (1, 2, 7.0), (3, 4, 1.0), (4, 5, 2.0)]
    bad = [(6, 7, 1e3), (7, 8, 1e19), (8, 9, 1e3)]
    member = [0, 0, 0, 1, 1, 1, 2, 2, 2, 2]
    supports = [(0, np.inf), (2, 3.0), (3, np.inf), (5, np.inf), (6, np.inf), (9, np.inf)]
    network = springs(10, good + bad, supports, member)
    actions = actions_on(network, [0, 1, 2, 0, 4, 0, 0, 7e3, -3e3, 0])
    state = solve_linear(network, actions)
    assert worst(network, actions, state) < OF_LARGEST
    alone = springs(6, good, supports[:4], member[:6])
    expected = solve_linear(alone, actions_on(alone, [0, 1, 2, 0, 4, 0]))
    np.testing.assert_array_equal(expected.force_start, state.force_start[:4])


RATIONAL = [
    # bars (start, end, stiffness), supports (node, stiffness or None for rigid), forces, free lengthenings, settlements
    ([(0, 1, 3)], [(0, None)], [0, 5], [2], [1]),
    ([(0, 1, 3)], [(0, None), (1, None)], [0, 5], [2], [1, -1]),
    ([(0, 1, 3), (1, 2, 7)], [(0, None), (2, None)], [0, 5, 0], [0, 0], [0, 0]),
    ([(0, 1, 3), (1, 2, 7)], [(0, 2), (2, 5)], [1, 5, -3], [1, -2], [0, 0]),
    ([(0, 1, 3), (1, 2, 7), (2, 3, 1)], [(0, None), (2, 4), (3, None)], [0, 5, -1, 0], [0, 1, 0], [1, 2, 3]),
    ([(0, 1, 3), (0, 1, 8)], [(0, None)], [0, 11], [0, 1], [0]),
    ([(0, 1, 3), (0, 1, 8), (1, 2, 2)], [(0, None), (2, None)], [0, 11, 0], [1, 2, 3], [0, 1]),
    ([(0, 1, 3), (0, 1, 8), (1, 2, 2), (0, 2, 5)], [(0, None), (2, 9)], [0, -18, 0], [3, 1, 4, -2], [1, 0]),
    ([(0, 3, 3), (3, 1, 8), (1, 2, 2), (2, 0, 5), (1, 0, 6)], [(3, 1)], [2, -18, 7, 1], [3, 1, 4, -2, 0], [5]),
    ([(0, 1, 3), (2, 1, 8)], [(0, None), (2, None)], [0, 6, 0], [1, 0], [0, 1]),
    ([(1, 0, 3), (2, 1, 8), (3, 2, 4)], [(3, None), (0, 7)], [1, 6, 0, 0], [1, 0, 2], [0, 1]),
    ([(0, 1, 3), (1, 2, 5)], [(0, 2), (0, 4), (2, None), (2, 6)], [1, 2, 3], [1, 1], [1, 2, 3, 4]),
]


@pytest.mark.parametrize("number", range(len(RATIONAL)))
def test_against_exact_rationals(number):
    bars, supports, force, free, settlement = RATIONAL[number]
    u = sympy.symbols(f"u0:{len(force)}")
    held = sympy.symbols(f"r0:{len(supports)}")
    n = [k * (u[j] - u[i] - e) for (i, j, k), e in zip(bars, free, strict=True)]
    balance = [sympy.Integer(f) for f in force]
    for (i, j, _), pull in zip(bars, n, strict=True):
        balance[i] += pull
        balance[j] -= pull
    laws = []
    for (node, k), r, moved in zip(supports, held, settlement, strict=True):
        balance[node] += r
        laws.append(u[node] - moved if k is None else r + k * (u[node] - moved))
    found = sympy.solve(balance + laws, [*u, *held], dict=True)[0]
    network = springs(len(force), bars, [(node, np.inf if k is None else k) for node, k in supports])
    state = solve_linear(network, actions_on(network, force, free, settlement))
    assert state.displacement[:, 0] == pytest.approx([float(found[v]) for v in u], rel=1e-13, abs=1e-14)
    assert state.reaction[:, 0] == pytest.approx([float(found[v]) for v in held], rel=1e-13, abs=1e-13)
    assert state.force_start[:, 0] == pytest.approx([float(v.subs(found)) for v in n], rel=1e-13, abs=1e-13)
    assert state.elongation[:, 0] == pytest.approx(
        [float(found[u[j]] - found[u[i]]) for i, j, _ in bars], rel=1e-13, abs=1e-14
    )
