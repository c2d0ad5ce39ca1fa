"""The solver against linear elements of a general finite-element library (scikit-fem) on random chains and networks.

Linear elements give exact nodal values in one dimension for uniform bars and loads that are integrated exactly.
"""

from __future__ import annotations

import numpy as np
import pytest
from skfem import Basis, BilinearForm, ElementLineP1, LinearForm, MeshLine, condense, solve
from skfem.helpers import dot, grad

from xlaxial.model.network import Actions, Bars, Network, Supports
from xlaxial.solver.displacement import solve_linear

ROUNDING = 1e-9  # of the largest force; both are direct solutions in double precision


@BilinearForm
def strain_energy(u, v, w):
    return w.rigidity * dot(grad(u), grad(v))


@LinearForm
def line_load(v, w):
    return w.load * v


@LinearForm
def free_strain(v, w):
    return w.rigidity * w.strain * grad(v)[0]


def by_elements(x, ends, rigidity, load, strain, force, supports, settlement):
    """Assemble with the library element by element; several elements may join the same two nodes."""
    mesh = MeshLine(x[None, :], np.array(ends).T)
    basis = Basis(mesh, ElementLineP1())
    np.testing.assert_array_equal(mesh.t.T, ends)  # one element for each bar, in its order

    def field(values):
        return np.repeat(np.array(values)[:, None], basis.X.shape[-1], axis=1)

    stiff = strain_energy.assemble(basis, rigidity=field(rigidity))
    right = line_load.assemble(basis, load=field(load))
    right += free_strain.assemble(basis, rigidity=field(rigidity), strain=field(strain))
    right += force
    stiff = stiff.tolil()
    held, prescribed = [], np.zeros(x.size)
    for (node, k), moved in zip(supports, settlement, strict=True):
        if k == np.inf:
            held.append(node)
            prescribed[node] = moved
        else:
            stiff[node, node] += k
            right[node] += k * moved
    stiff = stiff.tocsr()
    return solve(*condense(stiff, right, x=prescribed, D=np.array(held, dtype=int))) if held else solve(stiff, right)


def random_case(seed, branched):
    rng = np.random.default_rng(seed)
    n = int(rng.integers(3, 30))
    x = np.cumsum(rng.uniform(0.2, 2.0, n))
    ends = [(i, i + 1) for i in range(n - 1)]
    if branched:
        for _ in range(n):
            i, j = sorted(rng.choice(n, 2, replace=False).tolist())
            ends.append((i, j))
    start, end = np.array(ends).T
    m = len(ends)
    rigidity, load, strain = rng.uniform(0.5, 5.0, m), rng.normal(size=m), 0.1 * rng.normal(size=m)
    supports = [(0, np.inf if seed % 2 else 2.0), (n - 1, 3.0), (n // 2, np.inf if seed % 3 else 0.7)]
    force, settlement = rng.normal(size=n), 0.1 * rng.normal(size=3)
    return x, ends, start, end, rigidity, load, strain, force, supports, settlement


@pytest.mark.parametrize("branched", [False, True])
@pytest.mark.parametrize("seed", range(10))
def test_random_members(seed, branched):
    x, ends, start, end, rigidity, load, strain, force, supports, settlement = random_case(seed, branched)
    expected = by_elements(x, ends, rigidity, load, strain, force, supports, settlement)
    length = x[end] - x[start]
    m, n = len(ends), x.size
    area = rigidity / 2.0
    bars = Bars(np.zeros(m, dtype=np.int64), start, end, length, np.full(m, 2.0), area, area, np.zeros(m, dtype=bool))
    node, k = (np.array(column) for column in zip(*supports, strict=True))
    network = Network(1, np.zeros(n, dtype=np.int64), bars, Supports(node, k))
    actions = Actions(force[:, None], load[:, None], (strain * length)[:, None], settlement[:, None])
    state = solve_linear(network, actions)
    size = np.abs(expected).max()
    np.testing.assert_allclose(state.displacement[:, 0], expected, rtol=0.0, atol=ROUNDING * size)
    # mean force of an element from the library's displacements; ours in the middle of the bar
    mean = rigidity * ((expected[end] - expected[start]) / length - strain)
    middle = 0.5 * (state.force_start[:, 0] + state.force_end[:, 0])
    np.testing.assert_allclose(middle, mean, rtol=0.0, atol=ROUNDING * np.abs(mean).max())


@pytest.mark.parametrize("round_taper", [False, True])
def test_tapered_bar_under_load_converges(round_taper):
    # a bar cut into ever shorter uniform elements approaches the closed integrals, with the square of their length
    area_1, area_2, length, q = 1.0, 0.3, 2.0, 1.7
    zero = np.zeros(1, dtype=np.int64)
    bars = Bars(
        zero,
        zero,
        zero + 1,
        np.array([length]),
        np.array([1.0]),
        np.array([area_1]),
        np.array([area_2]),
        np.array([round_taper]),
    )
    network = Network(1, np.zeros(2, dtype=np.int64), bars, Supports(np.array([0, 1]), np.array([np.inf, np.inf])))
    actions = Actions(np.zeros((2, 1)), np.array([[q]]), np.array([[0.05]]), np.zeros((2, 1)))
    reaction = solve_linear(network, actions).reaction[:, 0]
    errors = []
    for n in (50, 100, 200):
        x = np.linspace(0.0, length, n + 1)
        middle = 0.5 * (x[1:] + x[:-1]) / length
        if round_taper:
            area = (np.sqrt(area_1) * (1.0 - middle) + np.sqrt(area_2) * middle) ** 2
        else:
            area = area_1 * (1.0 - middle) + area_2 * middle
        ends = [(i, i + 1) for i in range(n)]
        u = by_elements(
            x,
            ends,
            area,
            np.full(n, q),
            np.full(n, 0.05 / length),
            np.zeros(n + 1),
            [(0, np.inf), (n, np.inf)],
            [0.0, 0.0],
        )
        step = x[1] - x[0]
        first = area[0] * (u[1] / step - 0.05 / length) + q * step / 2.0
        errors.append(abs(-first - reaction[0]))
    assert errors[2] < 1e-4 * abs(reaction[0])
    assert errors[0] / errors[1] == pytest.approx(4.0, rel=0.05)
    assert errors[1] / errors[2] == pytest.approx(4.0, rel=0.05)
