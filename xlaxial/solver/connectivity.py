"""Which members can stand: every piece of a member needs a support, and a member is to be in one piece."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from xlaxial.arrays import Flags, Ints
from xlaxial.model.network import Network


@dataclass(frozen=True)
class Loose:
    """A member that cannot be solved, and why."""

    member: int
    kind: str  # "no support", "mechanism" (a piece without support) or "pieces" (all held, but apart)
    nodes: tuple[int, ...]  # nodes of the piece that is loose (or of the smallest piece)


def pieces_of(network: Network, stays: Flags | None = None) -> tuple[int, Ints]:
    """Return the number of connected pieces and the piece of each node, (n_nodes,).

    Parameters
    ----------
    network : Network
        Bars and nodes.
    stays : Flags, optional
        (n_bars,) bars that count; all of them where left out.
    """
    chain = network.in_chains
    if chain and stays is None:
        return network.n_members, network.node_member
    start, end = network.bars.start, network.bars.end
    if stays is not None:
        start, end = start[stays], end[stays]
    if chain:  # pieces are stretches of nodes
        begins = np.ones(network.n_nodes, dtype=bool)
        begins[end] = False
        piece = np.cumsum(begins) - 1
        return int(piece[-1]) + 1, piece
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    graph = coo_array((np.ones(start.size, dtype=np.int8), (start, end)), shape=(network.n_nodes, network.n_nodes))
    count, label = connected_components(graph, directed=False)
    return int(count), label.astype(np.int64)


def diagnose(network: Network) -> list[Loose]:
    """Find the members that cannot be solved.

    In one dimension a connected piece is held by any one support; without one it moves freely.

    Parameters
    ----------
    network : Network
        Bars, nodes and supports of all members.

    Returns
    -------
    list of Loose
        By member; a member without any support once, a mechanism once for each piece that is loose, a member in
        pieces that are all held once.
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
    by_member = _Groups(network.node_member, network.n_members)
    by_piece = _Groups(piece, count)
    out = [Loose(member, "no support", by_member.nodes(member)) for member in np.flatnonzero(~any_held).tolist()]
    loose = np.flatnonzero(~held & any_held[owner])
    out += [Loose(int(owner[k]), "mechanism", by_piece.nodes(k)) for k in loose.tolist()]
    apart = np.bincount(owner, minlength=network.n_members) > 1
    apart &= any_held
    apart[owner[loose]] = False
    smallest: dict[int, int] = {}
    for k in np.flatnonzero(apart[owner])[::-1].tolist():
        member = int(owner[k])
        if member not in smallest or by_piece.size[k] <= by_piece.size[smallest[member]]:
            smallest[member] = k
    out += [Loose(member, "pieces", by_piece.nodes(k)) for member, k in smallest.items()]
    return sorted(out, key=lambda one: one.member)


class _Groups:
    """Nodes by a label of theirs, sorted once."""

    def __init__(self, label: Ints, count: int) -> None:
        self._order = np.argsort(label, kind="stable")
        self.size = np.bincount(label, minlength=count)
        self._first = np.cumsum(self.size) - self.size

    def nodes(self, group: int) -> tuple[int, ...]:
        """Return the nodes of a group, ascending."""
        first = int(self._first[group])
        return tuple(self._order[first : first + int(self.size[group])].tolist())
