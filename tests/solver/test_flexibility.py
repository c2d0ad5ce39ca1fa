from __future__ import annotations

import mpmath
import numpy as np
import pytest

from xlaxial.solver.flexibility import area_at, flexibility, integrals, load_lever, stiffness

LAST_DIGITS = 1e-15
L, E, A = 1.7, 2.05e11, 7.3e-4

_NEAR = np.array([1e-12, 1e-9, 1e-6, 1e-3, 0.01, 0.1, 0.3])
RATIOS = np.concatenate([10.0 ** np.linspace(-6.0, 6.0, 49), 1.0 + _NEAR, 1.0 - _NEAR, np.linspace(0.08, 11.0, 150)])
RATIOS = RATIOS[RATIOS != 1.0]


def precise(area_end, round_, x=None):
    """Elementary integrals at 120 digits (terms cancel where tapers are slight), from the start to x (the end of the bar where left out)."""
    with mpmath.workdps(120):
        a1, a2, length, modulus = (mpmath.mpf(float(v)) for v in (A, area_end, L, E))
        x = length if x is None else mpmath.mpf(float(x))
        if round_:
            d1, d2 = mpmath.sqrt(a1), mpmath.sqrt(a2)
            s = (d2 - d1) / length
            f = x / (d1 * (d1 + s * x)) / modulus
            g = (mpmath.log(1 + s * x / d1) - s * x / (d1 + s * x)) / s**2 / modulus
        else:
            s = (a2 - a1) / length
            f = mpmath.log(1 + s * x / a1) / s / modulus
            g = (x / s - a1 / s**2 * mpmath.log(1 + s * x / a1)) / modulus
        return f, g


def off(actual, expected):
    with mpmath.workdps(120):
        return float(abs(mpmath.mpf(float(actual)) / expected - 1))


@pytest.mark.parametrize("round_", [False, True])
def test_tapers_keep_their_digits(network, round_):
    n = RATIOS.size
    bars = network([(i, i + 1) for i in range(n)], [], L, E, A, A * RATIOS, round_).bars
    f, g, k = flexibility(bars), load_lever(bars), stiffness(bars)
    for i in range(n):
        expected_f, expected_g = precise(bars.area_end[i], round_)
        assert off(f[i], expected_f) < LAST_DIGITS, RATIOS[i]
        assert off(g[i], expected_g) < LAST_DIGITS, RATIOS[i]
        assert off(k[i], 1 / expected_f) < LAST_DIGITS, RATIOS[i]


@pytest.mark.parametrize("round_", [False, True])
@pytest.mark.parametrize("part", [1e-9, 0.1, 0.5, 0.93])
def test_integrals_up_to_a_place(network, round_, part):
    ratios = RATIOS[::5]
    n = ratios.size
    bars = network([(i, i + 1) for i in range(n)], [], L, E, A, A * ratios, round_).bars
    x = np.full(n, part * L)
    f, g = integrals(bars, x, area_at(bars, x))
    for i in range(n):
        expected_f, expected_g = precise(bars.area_end[i], round_, x[i])
        assert off(f[i], expected_f) < 2.0 * LAST_DIGITS
        assert off(g[i], expected_g) < 2.0 * LAST_DIGITS  # the area at x is itself rounded


def test_uniform_bar_is_exact(network):
    bars = network([(0, 1)], [], 2.0, 4.0, 0.5).bars
    assert flexibility(bars)[0] == 1.0
    assert load_lever(bars)[0] == 1.0
    assert stiffness(bars)[0] == 1.0


def test_area_is_exact_at_both_ends(network):
    bars = network([(0, 1), (1, 2)], [], 3.0, 1.0, [0.1, 0.7], [0.3, 0.2], [True, False]).bars
    np.testing.assert_array_equal(area_at(bars, np.zeros(2)), bars.area_start)
    np.testing.assert_array_equal(area_at(bars, bars.length), bars.area_end)
    middle = area_at(bars, 0.5 * bars.length)
    assert middle[0] == pytest.approx((0.5 * (np.sqrt(0.1) + np.sqrt(0.3))) ** 2, rel=1e-15)
    assert middle[1] == pytest.approx(0.45, rel=1e-15)
