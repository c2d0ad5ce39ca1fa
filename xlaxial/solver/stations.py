"""Force, stress and movement at places along bars, for profiles and charts."""

from __future__ import annotations

from dataclasses import dataclass

from xlaxial.arrays import Floats, Ints
from xlaxial.model.network import Actions, LinearState, Network
from xlaxial.solver.flexibility import area_at, integrals, some_bars


@dataclass(frozen=True)
class Stations:
    """Results at places."""

    force: Floats  # (n,) N, tension positive
    stress: Floats  # (n,) Pa
    displacement: Floats  # (n,) m


def at_stations(
    network: Network, actions: Actions, state: LinearState, preload: Floats, bar: Ints, x: Floats, case: int = 0
) -> Stations:
    """Return results at places along bars.

    N(x) = N_start - q x and u(x) = u_start + int_0^x N/(E A) + (imposed + preload) x/L, the free lengthening of a bar
    being even along it.

    Parameters
    ----------
    network, actions, preload
        As for `xlaxial.solver.displacement.solve_linear`.
    state : LinearState
        Its solution.
    bar : Ints
        (n,) bar of each place.
    x : Floats
        (n,) m from the bar's start.
    case : int
        Load case.
    """
    some = some_bars(network.bars, bar)
    area = area_at(some, x)
    first, second = integrals(some, x, area)
    force, load = state.force_start[bar, case], actions.distributed[bar, case]
    strain = (actions.imposed[bar, case] + preload[bar, case]) / some.length
    u = state.displacement[some.start, case] + force * first - load * second + strain * x
    here = force - load * x
    return Stations(here, here / area, u)
