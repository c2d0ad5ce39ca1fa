"""Which members can stand: every piece of a member needs a support, and a member is to be in one piece."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from xlaxial.arrays import Ints
from xlaxial.model.network import Network


@dataclass(frozen=True)
class Loose:
    """A member that cannot be solved, and why."""

    member: int
    kind: str  # "no support", "mechanism" (a piece without support) or "pieces" (all held, but apart)
    nodes: tuple[int, ...]  # nodes of the piece that is loose (or of the smaller piece)


def pieces_of(network: Network) -> tuple[int, Ints]:
    """Return the number of connected pieces and the piece of each node, (n_nodes,)."""
    start, end = network.bars.start, network.bars.end
    if start.size + network.n_members == network.n_nodes and bool((end - start == 1).all()):
        own = network.node_member[start]
        if bool((own == network.node_member[end]).all()) and bool((np.diff(start) > 0).all()):
            return network.n_members, network.node_member  # every member is one chain, numbered along it
    graph = coo_array((np.ones(start.size), (start, end)), shape=(network.n_nodes, network.n_nodes))
    count, piece = connected_components(graph, directed=False)
    return int(count), piece.astype(np.int64)


def diagnose(network: Network) -> list[Loose]:
    """Find the members that cannot be solved.

    In one dimension a connected piece is held by any one support; without one it moves freely.
    """
    count, piece = pieces_of(network)
    held = np.zeros(count, dtype=bool)
    held[piece[network.supports.node]] = True
    if count == network.n_members and bool(held.all()):
        return []
    owner = np.zeros(count, dtype=np.int64)
    owner[piece] = network.node_member
    any_held = np.zeros(network.n_members, dtype=bool)
    any_held[owner[held]] = True
    out = []
    for member in np.flatnonzero(~any_held).tolist():
        out.append(Loose(member, "no support", tuple(np.flatnonzero(network.node_member == member).tolist())))
    for k in np.flatnonzero(~held).tolist():
        if any_held[owner[k]]:
            out.append(Loose(int(owner[k]), "mechanism", tuple(np.flatnonzero(piece == k).tolist())))
    named = {loose.member for loose in out}
    parts = np.bincount(owner, minlength=network.n_members)
    for member in np.flatnonzero(parts > 1).tolist():
        if member not in named:
            own = np.flatnonzero(owner == member)
            sizes = [np.count_nonzero(piece == k) for k in own]
            smallest = own[int(np.argmin(sizes))]
            out.append(Loose(member, "pieces", tuple(np.flatnonzero(piece == smallest).tolist())))
    return out
