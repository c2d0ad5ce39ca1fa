"""Stiffness of a network, factorised: tridiagonal where members are chains, banded where narrow, sparse elsewhere.

The pattern, the numbering and the split into routes are found once; `Assembly.factor` then takes any stiffnesses, so
that tangents of other laws (zero among them) can use it again and again.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.model.network import Network
from xlaxial.solver.banded import Banded
from xlaxial.solver.holds import Holds
from xlaxial.solver.layout import CHUNK, Layout
from xlaxial.solver.sparse import Sparse
from xlaxial.solver.tridiagonal import Tridiagonal

_WIDE = 1e10  # ratio of stiffnesses from which members are left out together with one of less that failed
_NARROW = 40  # half bandwidth up to which banded factors are taken


class Factors(Protocol):
    """Factors of one matrix."""

    def factor(self, diagonal: Floats, coupling: Floats) -> int:
        """Factorise; 0, or the number from 1 of a row whose pivot is not positive."""

    def solve(self, rows: Floats) -> None:
        """Solve in place, (n_cases, n) N to m."""


@dataclass(frozen=True)
class _Block:
    """Nodes and bars that are factorised together."""

    nodes: Ints  # (n,) nodes of the network in the order of the matrix
    bars: Ints  # (m,) bars of the network
    factors: Factors


class Assembly:
    """The assembled stiffness of a network.

    Parameters
    ----------
    network : Network
        Its members are not joined with each other.
    """

    def __init__(self, network: Network) -> None:
        self.network = network
        self.layout = Layout(network)
        self.links: Floats = np.zeros(0)  # (n_links,) N/m, stiffness of the layout's links
        self._whole = Tridiagonal()
        self._blocks = [] if self.layout.chain else _blocks(network)

    def factor(self, bar: Floats, support: Floats) -> Flags:
        """Factorise.

        Parameters
        ----------
        bar : Floats
            (n_bars,) N/m, none below zero.
        support : Floats
            (n_supports,) N/m, inf where rigid: the displacement of its node is then prescribed.

        Returns
        -------
        Flags
            (n_members,) members that could not be factorised (a mechanism, or stiffnesses too far apart); they stand
            in the factors as if every node of theirs were held.
        """
        network = self.network
        failed: Flags = np.zeros(network.n_members, dtype=bool)
        node = self._factor(bar, support, failed)
        if node < 0:
            return failed
        spread = _spread(network, bar, support)
        while node >= 0:
            member = network.node_member[node]
            failed |= spread >= max(spread[member], _WIDE)
            failed[member] = True
            node = self._factor(bar, support, failed)
        return failed

    def _factor(self, bar: Floats, support: Floats, left_out: Flags) -> int:
        """Factorise all but some members; -1, or a node of a member that fails."""
        network, layout, n = self.network, self.layout, self.network.n_nodes
        self.holds = holds = Holds(network, support)  # by the stiffnesses that were factorised last
        self.links = layout.to_links(bar)
        diagonal, coupling = np.empty(n), np.empty(layout.n_links)
        if layout.chain:
            diagonal[0] = 0.0
            for a in range(0, n - 1, CHUNK):
                own = self.links[a : a + CHUNK]
                diagonal[a + 1 : a + 1 + CHUNK] = own
                diagonal[a : a + own.size] += own
                np.negative(own, out=coupling[a : a + CHUNK])
        else:
            diagonal[:] = np.bincount(network.bars.start, weights=bar, minlength=n)
            diagonal += np.bincount(network.bars.end, weights=bar, minlength=n)
        if holds.n_springs:
            holds.add_springs(diagonal[None, :], holds.stiffness[None, :])
        held = holds.rigid_node
        if left_out.any():
            held = np.union1d(held, np.flatnonzero(left_out[network.node_member]))
        diagonal[held] = 1.0
        if layout.chain:
            if held.size:
                coupling[held[held < n - 1]] = 0.0
                coupling[held[held > 0] - 1] = 0.0
            return self._whole.factor(diagonal, coupling) - 1
        fixed = np.zeros(n, dtype=bool)
        fixed[held] = True
        apart = fixed[network.bars.start] | fixed[network.bars.end]
        coupling = np.where(apart, 0.0, -bar)
        for block in self._blocks:
            row = block.factors.factor(diagonal[block.nodes], coupling[block.bars])
            if row:
                return int(block.nodes[row - 1])
        return -1

    def solve(self, force: Floats) -> Floats:
        """Return displacements (n_nodes, n_cases) m under forces (n_nodes, n_cases) N; held nodes return the force."""
        rows = force.T.copy()
        self.solve_rows(rows)
        return rows.T

    def solve_rows(self, rows: Floats) -> None:
        """Solve in place with a case per row, contiguous, (n_cases, n_nodes)."""
        if self.layout.chain:
            self._whole.solve(rows)
            return
        for block in self._blocks:
            part = rows.take(block.nodes, axis=1)
            block.factors.solve(part)
            rows[:, block.nodes] = part


def _spread(network: Network, bar: Floats, support: Floats) -> Floats:
    """Ratio of the largest to the least stiffness of each member, (n_members,)."""
    most, least = np.zeros(network.n_members), np.full(network.n_members, np.inf)
    for at, values in ((network.bars.member, bar), (network.node_member[network.supports.node], support)):
        there = np.isfinite(values) & (values > 0.0)
        np.maximum.at(most, at[there], values[there])
        np.minimum.at(least, at[there], values[there])
    ratio: Floats = most / least
    return ratio


def _blocks(network: Network) -> list[_Block]:
    """Split a network into what is tridiagonal as numbered, what is so or narrow once renumbered, and the rest."""
    start, end, member = network.bars.start, network.bars.end, network.bars.member
    far = np.zeros(network.n_members, dtype=bool)
    far[member[np.abs(end - start) != 1]] = True
    blocks = []
    place = np.zeros(network.n_nodes, dtype=np.int64)
    if not far.all():
        nodes = np.flatnonzero(~far[network.node_member])
        blocks.append(_block(network, nodes, np.flatnonzero(~far[member]), place))
    if not far.any():
        return blocks
    order = _renumbered(network, far)
    place[order] = np.arange(order.size)
    reach = np.zeros(network.n_members, dtype=np.int64)
    np.maximum.at(reach, member, np.where(far[member], np.abs(place[end] - place[start]), 0))
    for low, high in ((1, 1), (2, _NARROW), (_NARROW + 1, network.n_nodes)):
        chosen = far & (reach >= low) & (reach <= high)
        if chosen.any():
            nodes = order[chosen[network.node_member[order]]]
            blocks.append(_block(network, nodes, np.flatnonzero(chosen[member]), place))
    return blocks


def _renumbered(network: Network, chosen: Flags) -> Ints:
    """Nodes of some members, piece by piece, in reverse Cuthill-McKee order, which brings neighbours together."""
    from scipy.sparse import csr_array
    from scipy.sparse.csgraph import reverse_cuthill_mckee

    nodes = np.flatnonzero(chosen[network.node_member])
    local = np.zeros(network.n_nodes, dtype=np.int64)
    local[nodes] = np.arange(nodes.size)
    bars = chosen[network.bars.member]
    i, j = local[network.bars.start[bars]], local[network.bars.end[bars]]
    ones = np.ones(2 * i.size, dtype=np.int8)
    graph = csr_array((ones, (np.append(i, j), np.append(j, i))), shape=(nodes.size, nodes.size))
    order: Ints = nodes[reverse_cuthill_mckee(graph, symmetric_mode=True)]
    return order


def _block(network: Network, nodes: Ints, bars: Ints, place: Ints) -> _Block:
    """Choose the factors by how far the bars reach in the order of the nodes; `place` is scratch."""
    place[nodes] = np.arange(nodes.size)
    i, j = place[network.bars.start[bars]], place[network.bars.end[bars]]
    reach = int(np.abs(i - j).max(initial=1))
    factors: Factors
    if reach == 1:
        factors = _Beside(np.minimum(i, j))
    elif reach <= _NARROW:
        factors = Banded(i, j, reach)
    else:
        factors = Sparse(i, j, nodes.size)
    return _Block(nodes, bars, factors)


class _Beside(Tridiagonal):
    """Tridiagonal factors from bars in any order, several between neighbours among them."""

    def __init__(self, at: Ints) -> None:
        super().__init__()
        self._at = at

    def factor(self, diagonal: Floats, coupling: Floats) -> int:
        """Factorise, (n,) N/m and (n_bars,) N/m."""
        size = max(diagonal.size - 1, 0)
        return super().factor(diagonal, np.bincount(self._at, weights=coupling, minlength=size) + np.zeros(size))
