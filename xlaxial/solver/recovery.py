"""What is read off a solved state, bar by bar: stresses, elongations and movements with their exact extremes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from xlaxial.arrays import Floats, Ints
from xlaxial.model.network import Actions, Bars, LinearState, Network
from xlaxial.solver.flexibility import area_at, integrals


@dataclass(frozen=True)
class BarResults:
    """Results of every bar, one column per load case."""

    stress_start: Floats  # (n_bars, n_cases) Pa, tension positive
    stress_end: Floats  # (n_bars, n_cases) Pa
    stress_max: Floats  # (n_bars, n_cases) Pa, algebraically largest, inside the bar too
    stress_min: Floats  # (n_bars, n_cases) Pa
    elongation: Floats  # (n_bars, n_cases) m
    displacement_max: Floats  # (n_bars, n_cases) m, algebraically largest, inside the bar too
    displacement_min: Floats  # (n_bars, n_cases) m


def recover(network: Network, actions: Actions, state: LinearState, preload: Floats | None = None) -> BarResults:
    """Read the results of every bar off a state.

    Parameters
    ----------
    network, actions, preload
        As for `xlaxial.solver.displacement.solve_linear`.
    state : LinearState
        Its solution.
    """
    bars = network.bars
    stress_start = state.force_start / bars.area_start[:, None]
    stress_end = state.force_end / bars.area_end[:, None]
    u_start, u_end = state.displacement[bars.start], state.displacement[bars.end]
    stress = [np.maximum(stress_start, stress_end), np.minimum(stress_start, stress_end)]
    moved = [np.maximum(u_start, u_end), np.minimum(u_start, u_end)]
    imposed = actions.imposed if preload is None else actions.imposed + preload
    tapered = bars.area_start != bars.area_end
    loaded = actions.distributed != 0.0
    if loaded.any() or tapered.any():
        for case in range(loaded.shape[1]):
            at = np.flatnonzero(loaded[:, case] & bars.round_taper & tapered)
            if at.size:
                _widen(stress, at, case, *_inner_stress(_some(bars, at), state, actions.distributed, at, case))
            at = np.flatnonzero(loaded[:, case] | (tapered & (imposed[:, case] != 0.0)))
            if at.size:
                _inner_movements(moved, bars, state, actions.distributed, imposed, u_start, at, case)
    return BarResults(stress_start, stress_end, stress[0], stress[1], u_end - u_start, moved[0], moved[1])


def _some(bars: Bars, at: Ints) -> Bars:
    return Bars(**{name: getattr(bars, name)[at] for name in Bars.__dataclass_fields__})


def _widen(limits: list[Floats], at: Ints, case: int, inside: np.ndarray, values: Floats) -> None:
    """Widen the largest and least values of bars by values inside them."""
    rows = at[inside]
    limits[0][rows, case] = np.maximum(limits[0][rows, case], values[inside])
    limits[1][rows, case] = np.minimum(limits[1][rows, case], values[inside])


def _inner_stress(bars: Bars, state: LinearState, q: Floats, at: Ints, case: int) -> tuple[np.ndarray, Floats]:
    """Stress where its slope is zero: x = d1/s + 2 N/q with s the growth of the diameter per length.

    From d(N - q x)/(d1 + s x)**2 = 0, elementary calculus.
    """
    start, end = np.sqrt(bars.area_start), np.sqrt(bars.area_end)
    slope = (end - start) / bars.length
    force, load = state.force_start[at, case], q[at, case]
    x = start / slope + 2.0 * force / load
    inside = (x > 0.0) & (x < bars.length)
    x = np.where(inside, x, 0.0)
    return inside, (force - load * x) / area_at(bars, x)


def _inner_movements(
    moved: list[Floats], bars: Bars, state: LinearState, q: Floats, imposed: Floats, u_start: Floats, at: Ints, case: int
) -> None:
    """Widen movements by those inside, where the total strain (N - q x)/(E A) + imposed/L is zero."""
    some = _some(bars, at)
    force, load, strain = state.force_start[at, case], q[at, case], imposed[at, case] / some.length
    pull = strain * some.modulus  # stress that the free strain would take to undo
    round_ = some.round_taper & (some.area_start != some.area_end)
    root = np.sqrt(some.area_start)
    slope = np.where(
        round_, (np.sqrt(some.area_end) - root) / some.length, (some.area_end - some.area_start) / some.length
    )
    # N - q x + pull A(x) = 0, with A linear or the square of a linear root
    c0 = force + pull * some.area_start
    c1 = -load + pull * np.where(round_, 2.0 * root * slope, slope)
    c2 = np.where(round_, pull * slope**2, 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        spread = np.sqrt(c1 * c1 - 4.0 * c2 * c0)
        stable = -0.5 * (c1 + np.where(c1 < 0.0, -spread, spread))
        places = (c0 / stable, stable / c2)
    for x in places:
        inside = (x > 0.0) & (x < some.length)
        if inside.any():
            here = np.where(inside, x, 0.0)
            first, second = integrals(some, here, area_at(some, here))
            u = u_start[at, case] + force * first - load * second + strain * here
            _widen(moved, at, case, inside, u)
