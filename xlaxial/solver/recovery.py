"""What is read off a solved state, bar by bar: stresses, elongations and movements with their exact extremes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.model.network import Actions, Bars, LinearState, Network
from xlaxial.solver.flexibility import area_at, integrals, some_bars


@dataclass(frozen=True)
class BarResults:
    """Results of every bar, one column per load case; places are counted from the bar's start."""

    stress_start: Floats  # (n_bars, n_cases) Pa, tension positive
    stress_end: Floats  # (n_bars, n_cases) Pa
    stress_max: Floats  # (n_bars, n_cases) Pa, algebraically largest, inside the bar too
    stress_min: Floats  # (n_bars, n_cases) Pa
    stress_max_at: Floats  # (n_bars, n_cases) m, place of stress_max; the start where it is the same everywhere
    stress_min_at: Floats  # (n_bars, n_cases) m
    elongation: Floats  # (n_bars, n_cases) m, free lengthening included
    displacement_max: Floats  # (n_bars, n_cases) m, algebraically largest, inside the bar too
    displacement_min: Floats  # (n_bars, n_cases) m
    displacement_max_at: Floats  # (n_bars, n_cases) m, place of displacement_max
    displacement_min_at: Floats  # (n_bars, n_cases) m


class _Range:
    """Largest and least of values along bars, and where they are."""

    def __init__(self, at_start: Floats, at_end: Floats, length: Floats) -> None:
        self.most, self.least = np.maximum(at_start, at_end), np.minimum(at_start, at_end)
        if at_start is at_end:
            self.most_at, self.least_at = np.zeros_like(self.most), np.zeros_like(self.most)
            return
        self.most_at = np.where(at_end > at_start, length[:, None], 0.0)
        self.least_at = np.where(at_end < at_start, length[:, None], 0.0)

    def widen(self, bars: Ints, case: int, inside: Flags, x: Floats, values: Floats) -> None:
        """Take in values at places x of some bars, where they are inside."""
        rows, x, values = bars[inside], x[inside], values[inside]
        more, less = values > self.most[rows, case], values < self.least[rows, case]
        self.most[rows[more], case], self.most_at[rows[more], case] = values[more], x[more]
        self.least[rows[less], case], self.least_at[rows[less], case] = values[less], x[less]


def recover(network: Network, actions: Actions, state: LinearState, preload: Floats | None = None) -> BarResults:
    """Read the results of every bar off a state.

    Parameters
    ----------
    network, actions, preload
        As for `xlaxial.solver.displacement.solve_linear`.
    state : LinearState
        Its solution.

    Returns
    -------
    BarResults
        nan where the state is.
    """
    bars = network.bars
    tapered = bars.area_start != bars.area_end
    stress_start = state.force_start / bars.area_start[:, None]
    loaded = actions.distributed != 0.0
    any_loaded, any_tapered = bool(loaded.any()), bool(tapered.any())
    stress_end = state.force_end / bars.area_end[:, None] if any_loaded or any_tapered else stress_start
    stress = _Range(stress_start, stress_end, bars.length)
    moved = _Range(state.displacement.take(bars.start, axis=0), state.displacement.take(bars.end, axis=0), bars.length)
    if any_loaded or any_tapered:
        imposed = actions.imposed if preload is None else actions.imposed + preload
        for case in range(loaded.shape[1]):
            at = np.flatnonzero(loaded[:, case] & bars.round_taper & tapered)
            if at.size:
                some = some_bars(bars, at)
                _inner_stress(stress, some, state.force_start[at, case], actions.distributed[at, case], at, case)
            at = np.flatnonzero(loaded[:, case] | (tapered & (imposed[:, case] != 0.0)))
            if at.size:
                some = some_bars(bars, at)
                strain = imposed[at, case] / some.length
                u = state.displacement[some.start, case]
                force, q = state.force_start[at, case], actions.distributed[at, case]
                _inner_movement(moved, some, force, q, strain, u, at, case)
    return BarResults(
        stress_start,
        stress_end,
        stress.most,
        stress.least,
        stress.most_at,
        stress.least_at,
        state.elongation,
        moved.most,
        moved.least,
        moved.most_at,
        moved.least_at,
    )


def _inner_stress(stress: _Range, bars: Bars, force: Floats, q: Floats, at: Ints, case: int) -> None:
    """Take in stresses where their slope along a round taper is zero: x = d1/s + 2 N_start/q, s = (d2 - d1)/L.

    From d(N_start - q x)/(d1 + s x)**2 = 0, elementary calculus. Along an area that varies linearly the slope never
    changes its sign.
    """
    root_start, root_end = np.sqrt(bars.area_start), np.sqrt(bars.area_end)
    with np.errstate(over="ignore", invalid="ignore"):  # a taper or load too slight to matter puts x far outside
        x = root_start / ((root_end - root_start) / bars.length) + 2.0 * force / q
        inside = (x > 0.0) & (x < bars.length)
    x = np.where(inside, x, 0.0)
    stress.widen(at, case, inside, x, (force - q * x) / area_at(bars, x))


def _inner_movement(
    moved: _Range, bars: Bars, force: Floats, q: Floats, strain: Floats, u: Floats, at: Ints, case: int
) -> None:
    """Take in movements where the total strain (N_start - q x)/(E A) + imposed/L is zero.

    Times E A it reads c0 + c1 x + c2 x**2 = 0, with A linear in x or the square of a root that is.
    """
    stress = strain * bars.modulus  # that would undo the free strain
    root = np.sqrt(bars.area_start)
    slope = (np.sqrt(bars.area_end) - root) / bars.length
    linear = (bars.area_end - bars.area_start) / bars.length
    c0 = force + stress * bars.area_start
    c1 = stress * np.where(bars.round_taper, 2.0 * root * slope, linear) - q
    c2 = np.where(bars.round_taper, stress * slope**2, 0.0)
    with np.errstate(all="ignore"):  # no root, or one far outside, is not inside
        spread = np.sqrt(c1 * c1 - 4.0 * c2 * c0)
        stable = -0.5 * (c1 + np.where(c1 < 0.0, -spread, spread))
        places = (c0 / stable, stable / c2)
    for x in places:
        inside = (x > 0.0) & (x < bars.length)
        if inside.any():
            here = np.where(inside, x, 0.0)
            first, second = integrals(bars, here, area_at(bars, here))
            moved.widen(at, case, inside, here, u + force * first - q * second + strain * here)
