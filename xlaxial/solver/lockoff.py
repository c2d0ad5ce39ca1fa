"""Preload: the force in a bar at lock-off, with nothing else acting, turned into the free lengthening that gives it."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.model.network import Actions, Bars, Network
from xlaxial.solver.connectivity import diagnose, pieces_of
from xlaxial.solver.displacement import solve_linear
from xlaxial.solver.flexibility import flexibility

_SAME = 1e-9  # preloads that differ by less, relatively, are equal


@dataclass(frozen=True)
class LockOff:
    """Free lengthening that stands for preload, or why there is none."""

    imposed: Floats  # (n_bars, n_cases) m
    unlike: Ints  # bars whose preload differs from another's in the same unbranched run
    unheld: Ints  # preloaded bars whose force nothing can hold


def runs(network: Network) -> Ints:
    """Return the unbranched run of each bar, (n_bars,): bars in series through nodes with no support."""
    bars = network.bars
    degree = np.bincount(bars.start, minlength=network.n_nodes) + np.bincount(bars.end, minlength=network.n_nodes)
    through = degree == 2
    through[network.supports.node] = False
    touching = np.concatenate([bars.start, bars.end])
    bar = np.concatenate([np.arange(bars.start.size)] * 2)
    at = through[touching]
    order = np.argsort(touching[at], kind="stable")
    pairs = bar[at][order].reshape(-1, 2)
    graph = coo_array((np.ones(len(pairs)), (pairs[:, 0], pairs[:, 1])), shape=(bars.start.size,) * 2)
    return connected_components(graph, directed=False)[1].astype(np.int64)


def lock_off(network: Network, preload: Floats, preloaded: Flags) -> LockOff:
    """Find the free lengthening of preloaded bars that gives each its force when nothing else acts.

    The first preloaded bar of a run carries the run's preload; it is replaced by the pair of forces at its ends, the
    rest is solved, and its free lengthening is what then fits: e0 = (u_end - u_start) - f P.

    Parameters
    ----------
    network : Network
        Held throughout.
    preload : Floats
        (n_bars, n_cases) N, tension positive.
    preloaded : Flags
        (n_bars,) where a preload is given (it may be zero in a case).

    Returns
    -------
    LockOff
        Zero where there is no preload, and where it cannot be had (see `unlike` and `unheld`).
    """
    n_bars, n_cases = preload.shape
    none = np.zeros(0, dtype=np.int64)
    imposed = np.zeros((n_bars, n_cases))
    given = np.flatnonzero(preloaded)
    if not given.size or not preload.any():
        return LockOff(imposed, none, none)
    run = runs(network)
    _, first, back = np.unique(run[given], return_index=True, return_inverse=True)
    carrier = given[first]
    apart = np.abs(preload[given] - preload[carrier][back]) > _SAME * np.abs(preload[carrier][back])
    unlike = given[apart.any(axis=1)]
    carrier = carrier[preload[carrier].any(axis=1)]
    remaining = _without(network, carrier)
    loose_nodes = [node for loose in diagnose(remaining) if loose.kind != "pieces" for node in loose.nodes]
    unheld = none
    if loose_nodes:
        _, piece = pieces_of(remaining)
        loose = np.isin(piece, np.unique(piece[np.array(loose_nodes, dtype=np.int64)]))
        touched = loose[network.bars.start[carrier]] | loose[network.bars.end[carrier]]
        unheld = carrier[touched]
        carrier = carrier[~touched]
        remaining = _without(network, carrier)
        if any(loose.kind != "pieces" for loose in diagnose(remaining)):
            unheld, carrier = np.concatenate([unheld, carrier]), none
    if carrier.size:
        force = np.zeros((network.n_nodes, n_cases))
        np.add.at(force, network.bars.start[carrier], preload[carrier])
        np.subtract.at(force, network.bars.end[carrier], preload[carrier])
        n_left = remaining.bars.start.size
        nothing = np.zeros((n_left, n_cases))
        state = solve_linear(
            remaining, Actions(force, nothing, nothing, np.zeros((network.supports.node.size, n_cases)))
        )
        moved = state.displacement[network.bars.end[carrier]] - state.displacement[network.bars.start[carrier]]
        imposed[carrier] = moved - flexibility(network.bars)[carrier, None] * preload[carrier]
    return LockOff(imposed, unlike, unheld)


def _without(network: Network, bars: Ints) -> Network:
    """Return the network without some bars."""
    keep = np.ones(network.bars.start.size, dtype=bool)
    keep[bars] = False
    fields = {name: getattr(network.bars, name)[keep] for name in Bars.__dataclass_fields__}
    return replace(network, bars=Bars(**fields))
