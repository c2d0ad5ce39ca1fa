"""The solver against closed forms of handbooks.

Books are named from memory: Timoshenko, Strength of Materials, part I (statically indeterminate tension and
compression); Gere and Goodno, Mechanics of Materials, chapter 2 (axially loaded members); Roark's Formulas for Stress
and Strain (bars of varying section).
"""

from __future__ import annotations

import numpy as np
import pytest

from xlaxial.model.network import Actions, Bars, Network, Supports
from xlaxial.solver.displacement import solve_linear
from xlaxial.solver.lockoff import lock_off
from xlaxial.solver.recovery import recover

CLOSED_FORM = 1e-12
E = 205e9


def bars_on(ends, supports, length, area, area_end=None, round_taper=False, modulus=E):
    n = len(ends)
    start, end = np.array(ends).T

    def spread(values):
        return np.array(np.broadcast_to(np.array(values, dtype=float), (n,)))

    area = spread(area)
    made = Bars(
        np.zeros(n, dtype=np.int64),
        start,
        end,
        spread(length),
        spread(modulus),
        area,
        area if area_end is None else spread(area_end),
        np.full(n, round_taper),
    )
    node, stiffness = (np.array(column) for column in zip(*supports, strict=True))
    return Network(1, np.zeros(int(max(end.max(), start.max())) + 1, dtype=np.int64), made, Supports(node, stiffness))


def solved(network, force=None, q=None, imposed=None, settlement=None):
    n_bars = network.bars.start.size
    sizes = (network.n_nodes, n_bars, n_bars, network.supports.node.size)
    given = (force, q, imposed, settlement)
    actions = Actions(
        *(
            np.zeros((n, 1)) if v is None else np.array(np.broadcast_to(np.array(v, dtype=float), (n,)))[:, None]
            for v, n in zip(given, sizes, strict=True)
        )
    )
    return actions, solve_linear(network, actions)


def test_bar_between_rigid_walls_with_a_load_inside():
    # R_A = P b/L, R_B = P a/L (Timoshenko, part I; Gere and Goodno, example of a bar fixed at both ends)
    a, b, p = 0.7, 1.9, 83e3
    network = bars_on([(0, 1), (1, 2)], [(0, np.inf), (2, np.inf)], [a, b], 6e-4)
    _, state = solved(network, [0.0, p, 0.0])
    assert state.reaction[:, 0] == pytest.approx([-p * b / (a + b), -p * a / (a + b)], rel=CLOSED_FORM)
    assert state.displacement[1, 0] == pytest.approx(p * a * b / (a + b) / (E * 6e-4), rel=CLOSED_FORM)


def test_stepped_bar_between_rigid_walls():
    # the load is shared as the stiffnesses EA/L of the two parts (Gere and Goodno, chapter 2)
    a, b, p, area_1, area_2 = 0.7, 1.9, 83e3, 6e-4, 11e-4
    network = bars_on([(0, 1), (1, 2)], [(0, np.inf), (2, np.inf)], [a, b], [area_1, area_2])
    _, state = solved(network, [0.0, p, 0.0])
    k_1, k_2 = area_1 / a, area_2 / b
    assert state.force_start[:, 0] == pytest.approx([p * k_1 / (k_1 + k_2), -p * k_2 / (k_1 + k_2)], rel=CLOSED_FORM)


def test_heated_bar_between_rigid_walls():
    # sigma = -E alpha dT: 200 GPa, 12e-6/K, 50 K give 120 MPa (Timoshenko, part I, initial and thermal stresses)
    network = bars_on([(0, 1)], [(0, np.inf), (1, np.inf)], 3.0, 5e-4, modulus=200e9)
    actions, state = solved(network, imposed=12e-6 * 50.0 * 3.0)
    results = recover(network, actions, state)
    assert results.stress_start[0, 0] == pytest.approx(-120e6, rel=CLOSED_FORM)
    assert results.elongation[0, 0] == 0.0


def test_heated_bar_between_yielding_supports():
    # restraint factor 1/(1 + (EA/L)(1/kA + 1/kB)) (springs in series; Gere and Goodno, problems of chapter 2)
    length, area, k_a, k_b, free = 4.2, 9e-4, 31e6, 77e6, 12e-6 * 35.0 * 4.2
    network = bars_on([(0, 1)], [(0, k_a), (1, k_b)], length, area)
    _, state = solved(network, imposed=free)
    k = E * area / length
    expected = -k * free / (1.0 + k * (1.0 / k_a + 1.0 / k_b))
    assert state.force_start[0, 0] == pytest.approx(expected, rel=CLOSED_FORM)
    assert state.displacement[:, 0] == pytest.approx([expected / k_a, -expected / k_b], rel=CLOSED_FORM)


def test_bar_on_spring_ends_with_a_load_inside():
    # flexibilities in series: R_A = P (b/EA + 1/kB)/(L/EA + 1/kA + 1/kB)
    a, b, p, area, k_a, k_b = 0.7, 1.9, 83e3, 6e-4, 2e7, 5e7
    network = bars_on([(0, 1), (1, 2)], [(0, k_a), (2, k_b)], [a, b], area)
    _, state = solved(network, [0.0, p, 0.0])
    whole = (a + b) / (E * area) + 1.0 / k_a + 1.0 / k_b
    expected = [-p * (b / (E * area) + 1.0 / k_b) / whole, -p * (a / (E * area) + 1.0 / k_a) / whole]
    assert state.reaction[:, 0] == pytest.approx(expected, rel=CLOSED_FORM)


def test_composite_bar_of_two_materials():
    # sleeve and core under a load: P_i = P E_i A_i/sum; heated: P = (a2 - a1) dT/(1/(E1 A1) + 1/(E2 A2)) per length
    # (Timoshenko, part I; Gere and Goodno, sleeve and bolt)
    length, p, hot = 0.5, 60e3, 80.0
    e_1, e_2, a_1, a_2, alpha_1, alpha_2 = 205e9, 105e9, 4e-4, 7e-4, 12e-6, 19e-6
    network = bars_on([(0, 1), (0, 1)], [(0, np.inf)], length, [a_1, a_2], modulus=[e_1, e_2])
    _, state = solved(network, [0.0, p])
    whole = e_1 * a_1 + e_2 * a_2
    assert state.force_start[:, 0] == pytest.approx([p * e_1 * a_1 / whole, p * e_2 * a_2 / whole], rel=CLOSED_FORM)
    _, state = solved(network, imposed=[alpha_1 * hot * length, alpha_2 * hot * length])
    pull = (alpha_2 - alpha_1) * hot / (1.0 / (e_1 * a_1) + 1.0 / (e_2 * a_2))
    assert state.force_start[:, 0] == pytest.approx([pull, -pull], rel=CLOSED_FORM)
    assert state.reaction[0, 0] == pytest.approx(0.0, abs=1e-9)


def test_nut_turned_on_a_bolt_in_a_sleeve():
    # P = n p/(L/(Eb Ab) + L/(Es As)) for a misfit n p (Timoshenko, part I, bolt and tube)
    length, misfit, a_b, a_s = 0.75, 0.25 * 3e-3, 6.45e-4, 12.9e-4
    network = bars_on([(0, 1), (0, 1)], [(0, np.inf)], length, [a_b, a_s], modulus=[205e9, 105e9])
    _, state = solved(network, imposed=[-misfit, 0.0])
    p = misfit / (length / (205e9 * a_b) + length / (105e9 * a_s))
    assert state.force_start[:, 0] == pytest.approx([p, -p], rel=CLOSED_FORM)


@pytest.mark.parametrize("share", [1.0, 1.0 + 1e-9, 0.5, 0.05])
def test_round_taper(share):
    # delta = 4 P L/(pi E d1 d2) (Timoshenko, part I; Gere and Goodno, tapered bar of circular section)
    d_1, p, length = 0.06, 40e3, 1.6
    d_2 = share * d_1
    network = bars_on([(0, 1)], [(0, np.inf)], length, np.pi / 4 * d_1**2, np.pi / 4 * d_2**2, True)
    actions, state = solved(network, [0.0, p])
    elongation = recover(network, actions, state).elongation[0, 0]
    assert elongation == pytest.approx(4.0 * p * length / (np.pi * E * d_1 * d_2), rel=CLOSED_FORM)


def test_plate_of_constant_thickness_and_linear_width():
    # delta = P L ln(b2/b1)/(E t (b2 - b1)) (Gere and Goodno, tapered flat bar)
    b_1, b_2, t, p, length = 0.1, 0.16, 0.01, 40e3, 1.6
    network = bars_on([(0, 1)], [(0, np.inf)], length, b_1 * t, b_2 * t)
    actions, state = solved(network, [0.0, p])
    expected = p * length * np.log(b_2 / b_1) / (E * t * (b_2 - b_1))
    assert recover(network, actions, state).elongation[0, 0] == pytest.approx(expected, rel=CLOSED_FORM)


def test_hanging_bar_under_its_own_weight():
    # delta = gamma L**2/(2 E) (Timoshenko, part I); x runs downwards
    gamma, length, area = 77e3, 12.0, 8e-4
    network = bars_on([(0, 1)], [(0, np.inf)], length, area)
    actions, state = solved(network, q=gamma * area)
    results = recover(network, actions, state)
    assert results.elongation[0, 0] == pytest.approx(gamma * length**2 / (2.0 * E), rel=CLOSED_FORM)
    assert results.stress_max[0, 0] == pytest.approx(gamma * length, rel=CLOSED_FORM)
    assert state.reaction[0, 0] == pytest.approx(-gamma * area * length, rel=CLOSED_FORM)


def test_bar_held_at_both_ends_under_its_own_weight():
    # halves: reactions gamma A L/2 each, greatest movement gamma L**2/(8 E) in the middle (superposition, elementary)
    gamma, length, area = 77e3, 12.0, 8e-4
    network = bars_on([(0, 1)], [(0, np.inf), (1, np.inf)], length, area)
    actions, state = solved(network, q=gamma * area)
    results = recover(network, actions, state)
    assert state.reaction[:, 0] == pytest.approx([-gamma * area * length / 2.0] * 2, rel=CLOSED_FORM)
    assert results.displacement_max[0, 0] == pytest.approx(gamma * length**2 / (8.0 * E), rel=CLOSED_FORM)
    assert results.displacement_max_at[0, 0] == pytest.approx(length / 2.0, rel=CLOSED_FORM)


def test_rigid_support_that_settles():
    # N = E A s/L for a bar stretched by s (Hooke)
    network = bars_on([(0, 1)], [(0, np.inf), (1, np.inf)], 2.0, 5e-4)
    _, state = solved(network, settlement=[-1e-3, 2e-3])
    assert state.force_start[0, 0] == pytest.approx(E * 5e-4 * 3e-3 / 2.0, rel=CLOSED_FORM)


def test_clamped_joint_under_an_external_load():
    # bolt force F + P kb/(kb + kj), clamp left F - P kj/(kb + kj) (Shigley's Mechanical Engineering Design, chapter 8,
    # from memory)
    preload, p, a_b, a_j, length = 40e3, 25e3, 1.5e-4, 6e-4, 0.06
    network = bars_on([(0, 1), (0, 1)], [(0, np.inf)], length, [a_b, a_j])
    locked = lock_off(network, np.array([[preload], [0.0]]), np.array([True, False]))
    nothing = np.zeros((2, 1))
    state = solve_linear(network, Actions(np.array([[0.0], [p]]), nothing, nothing, np.zeros((1, 1))), locked.imposed)
    share = a_b / (a_b + a_j)
    assert state.force_start[:, 0] == pytest.approx([preload + p * share, -preload + p * (1.0 - share)], rel=1e-11)
