"""Preload: the force in a bar at lock-off, with nothing else acting, turned into the free lengthening that gives it."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.model.network import Network, Supports
from xlaxial.solver.balance import Equations
from xlaxial.solver.connectivity import pieces_of
from xlaxial.solver.displacement import solve_equations
from xlaxial.solver.flexibility import flexibility, stiffness
from xlaxial.solver.runs import runs

_SAME = 1e-9  # preloads that differ by less, relatively, are equal


@dataclass(frozen=True)
class LockOff:
    """Free lengthening that stands for preload, or why there is none."""

    imposed: Floats  # (n_bars, n_cases) m
    unlike: Ints  # bars whose preload does not go with that of the first preloaded bar of the same unbranched run
    unheld: Ints  # preloaded bars whose force nothing can hold


def lock_off(network: Network, preload: Floats, preloaded: Flags) -> LockOff:
    """Find the free lengthening of preloaded bars that gives each its force when nothing else acts.

    The first preloaded bar of an unbranched run carries the run's preload. All carriers are taken out and replaced by
    the pairs of forces at their ends, the rest is solved, and a carrier's free lengthening is what then fits:
    e0 = (u_end - u_start) - f P. A piece that hangs on carriers alone must be in balance under their forces; it may
    then stand anywhere, and any place of it gives the same forces.

    Parameters
    ----------
    network : Network
        Every connected piece is held.
    preload : Floats
        (n_bars, n_cases) N, tension positive.
    preloaded : Flags
        (n_bars,) where a preload is given. A given preload of zero is one: the bar is locked off without force,
        whatever others do. A case, or a member, without any preload that is not zero has none.

    Returns
    -------
    LockOff
        No lengthening where there is no preload, and where it cannot be had.
    """
    n_bars, n_cases = preload.shape
    bars, none = network.bars, np.zeros(0, dtype=np.int64)
    imposed = np.zeros((n_bars, n_cases))
    acts = np.zeros(network.n_members, dtype=bool)
    acts[bars.member[preloaded & (preload != 0.0).any(axis=1)]] = True
    given = np.flatnonzero(preloaded & acts[bars.member])
    if not given.size:
        return LockOff(imposed, none, none)
    found = runs(network)
    _, first, back = np.unique(found.run[given], return_index=True, return_inverse=True)
    carrier = given[first]
    meant = preload[carrier][back] * (found.sense[given] * found.sense[carrier][back])[:, None]
    unlike = given[np.logical_not(np.abs(preload[given] - meant) <= _SAME * np.abs(meant)).any(axis=1)]
    held, unheld = _held_apart(network, carrier, preload)
    flexible = flexibility(bars)
    left = stiffness(bars)
    left[carrier] = 0.0
    force = np.zeros((n_cases, network.n_nodes))
    for row, pull in zip(force, preload[carrier].T, strict=True):
        np.add.at(row, bars.start[carrier], pull)
        np.subtract.at(row, bars.end[carrier], pull)
    with np.errstate(all="ignore"):  # what is not finite comes out as nan
        solved = solve_equations(Equations(held, left, None, None, force, None))
    imposed[carrier] = solved.elongation.T[carrier] - flexible[carrier, None] * preload[carrier]
    imposed[unheld] = 0.0
    return LockOff(imposed, unlike, unheld)


def _held_apart(network: Network, carrier: Ints, preload: Floats) -> tuple[Network, Ints]:
    """Hold one node of each piece that loses its hold without the carriers; find carriers that such a piece lets go.

    Returns
    -------
    tuple
        The network with supports added, and (n,) carriers whose forces leave a piece without support out of balance.
    """
    start, end, supports = network.bars.start, network.bars.end, network.supports
    stays = np.ones(start.size, dtype=bool)
    stays[carrier] = False
    count, piece = pieces_of(network, stays)
    loose = np.ones(count, dtype=bool)
    loose[piece[supports.node]] = False
    if not loose.any():
        return network, carrier[:0]
    left = np.zeros((count, preload.shape[1]))
    size = np.zeros_like(left)
    for ends, sign in ((start, 1.0), (end, -1.0)):
        np.add.at(left, piece[ends[carrier]], sign * preload[carrier])
        np.add.at(size, piece[ends[carrier]], np.abs(preload[carrier]))
    lets_go = loose & np.logical_not(np.abs(left) <= _SAME * size).any(axis=1)
    _, node = np.unique(piece, return_index=True)
    node = node[loose]
    more = Supports(np.append(supports.node, node), np.append(supports.stiffness, np.full(node.size, np.inf)))
    return replace(network, supports=more), carrier[lets_go[piece[start[carrier]]] | lets_go[piece[end[carrier]]]]
