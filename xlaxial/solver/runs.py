"""Unbranched runs of bars: the same force passes through all bars of a run when nothing acts inside it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from xlaxial.arrays import Floats, Ints
from xlaxial.model.network import Network


@dataclass(frozen=True)
class Runs:
    """Bars in series through nodes that join two bars and have no support."""

    run: Ints  # (n_bars,) number of the run that the bar belongs to
    sense: Floats  # (n_bars,) 1 or -1: tension in bars of like sense goes together, in bars of unlike sense it turns


def runs(network: Network) -> Runs:
    """Find the unbranched runs.

    Bars that follow each other (the end of one is the start of the next) have the same force. Where two bars meet
    with both their ends, or both their starts, one lies back over the other, as a tie in the tube that it clamps: the
    tension of one is the compression of the other.

    Parameters
    ----------
    network : Network
        Bars, nodes and supports.
    """
    bars, n_bars = network.bars, network.bars.start.size
    supported = np.zeros(network.n_nodes, dtype=bool)
    supported[network.supports.node] = True
    if network.in_chains:
        begins = supported[bars.start]
        begins[0] = True
        begins[1:] |= bars.start[1:] != bars.end[:-1]
        return Runs(np.cumsum(begins) - 1, np.ones(n_bars))
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    through = np.bincount(bars.start, minlength=network.n_nodes) + np.bincount(bars.end, minlength=network.n_nodes) == 2
    through &= ~supported
    touching = np.concatenate([bars.start, bars.end])
    bar = np.tile(np.arange(n_bars), 2)
    at_end = np.repeat([False, True], n_bars)
    ends = np.flatnonzero(through[touching])
    at = ends[np.argsort(touching[ends], kind="stable")].reshape(-1, 2)
    a, b = bar[at[:, 0]], bar[at[:, 1]]
    turns = (at_end[at[:, 0]] == at_end[at[:, 1]]) * n_bars
    # every bar stands twice in the graph, once for each sense; bars are joined with like or unlike senses
    i, j = np.concatenate([a, a + n_bars]), np.concatenate([b + turns, b + n_bars - turns])
    graph = coo_array((np.ones(i.size, dtype=np.int8), (i, j)), shape=(2 * n_bars, 2 * n_bars))
    _, label = connected_components(graph, directed=False)
    forward, backward = label[:n_bars], label[n_bars:]
    _, run = np.unique(np.minimum(forward, backward), return_inverse=True)
    return Runs(run.astype(np.int64), np.where(forward <= backward, 1.0, -1.0))
