"""Where nodes, bars and members lie in the arrays, and sums over them; slices where members are plain chains.

Inside the solver nodal and bar values stand one load case per row, (n_cases, n): LAPACK and slices want them so.
"""

from __future__ import annotations

import numpy as np

from xlaxial.arrays import Floats, Ints
from xlaxial.model.network import Network


class Layout:
    """Differences along links and sums at nodes and over members.

    A link is a bar, or, where every member is a chain numbered along it (`chain`), the place between two nodes that
    follow each other, (n_nodes - 1): then places between members are links without stiffness, and all is slices.

    Parameters
    ----------
    network : Network
        Bars join nodes of their own member.
    """

    def __init__(self, network: Network) -> None:
        bars = network.bars
        self.start, self.end = bars.start, bars.end
        self.n_nodes, self.n_members = network.n_nodes, network.n_members
        self._node_member, self._bar_member = network.node_member, bars.member
        n_bars = bars.start.size
        self.chain = bool(
            n_bars
            and n_bars == self.n_nodes - self.n_members
            and (bars.end - bars.start == 1).all()
            and (bars.start[1:] > bars.start[:-1]).all()
        )
        self.single = self.chain and n_bars == self.n_nodes - 1
        self.first = np.zeros(1, dtype=np.int64)  # first node of each member, where members stand in order
        self._ordered = self.n_members == 1
        if self.n_members != 1 and self.n_nodes:
            steps = network.node_member[1:] - network.node_member[:-1]
            self._ordered = bool(
                network.node_member[0] == 0
                and ((steps == 0) | (steps == 1)).all()
                and steps.sum() == self.n_members - 1
            )
            self.first = np.append(0, np.flatnonzero(steps) + 1) if self._ordered else self.first
            self.chain &= self._ordered and int(self.first[-1]) < self.n_nodes - 1
        self.n_links = self.n_nodes - 1 if self.chain else n_bars

    def to_links(self, values: Floats) -> Floats:
        """Spread bar values over links, (..., n_bars) to (..., n_links)."""
        if not self.chain or self.single:
            return values
        out = np.zeros((*values.shape[:-1], self.n_links))
        out[..., self.start] = values
        return out

    def to_bars(self, values: Floats) -> Floats:
        """Pick bar values from links, (..., n_links) to (..., n_bars)."""
        return values if not self.chain or self.single else values.take(self.start, axis=-1)

    def rise(self, u: Floats) -> Floats:
        """Differences of nodal values along links, (n_cases, n_links)."""
        left, right = self.ends(u)
        out: Floats = right - left
        return out

    def ends(self, u: Floats) -> tuple[Floats, Floats]:
        """Nodal values at both ends of links, (n_cases, n_links) each."""
        if self.chain:
            return u[:, :-1], u[:, 1:]
        return u.take(self.start, axis=1), u.take(self.end, axis=1)

    def pull(self, force: Floats, at_start: Floats, at_end: Floats) -> None:
        """Add to nodal forces, in place, what links of these tensions at their ends exert on the nodes."""
        if self.chain:
            force[:, :-1] += at_start
            force[:, 1:] -= at_end
            return
        for row, first, last in zip(force, at_start, at_end, strict=True):
            row += np.bincount(self.start, weights=first, minlength=self.n_nodes)
            row -= np.bincount(self.end, weights=last, minlength=self.n_nodes)

    def member_sums(self, nodal: Floats) -> Floats:
        """Sums of nodal values over members, (n_cases, n_members)."""
        if self.n_members == 1:
            out: Floats = nodal.sum(axis=1, keepdims=True)
            return out
        if self._ordered:
            sums: Floats = np.add.reduceat(nodal, self.first, axis=1)
            return sums
        return _sums(nodal, self._node_member, self.n_members)

    def member_most(self, links: Floats) -> Floats:
        """Largest of link values (none below zero) over members, (n_cases, n_members)."""
        if self.n_members == 1:
            out: Floats = links.max(axis=1, keepdims=True, initial=0.0)
            return out
        if self.chain:
            most: Floats = np.maximum.reduceat(links, self.first, axis=1)
            return most
        return largest_at(np.zeros((links.shape[0], self.n_members)), self._bar_member, links)

    def bar_sums(self, links: Floats) -> Floats:
        """Sums of link values over members, (n_cases, n_members)."""
        if self.n_members == 1:
            out: Floats = links.sum(axis=1, keepdims=True)
            return out
        if self.chain:
            sums: Floats = np.add.reduceat(links, self.first, axis=1)
            return sums
        return _sums(links, self._bar_member, self.n_members)


def _sums(values: Floats, at: Ints, size: int) -> Floats:
    out = np.zeros((values.shape[0], size))
    for row, own in zip(out, values, strict=True):
        row += np.bincount(at, weights=own, minlength=size)
    return out


def largest_at(out: Floats, at: Ints, values: Floats) -> Floats:
    """Raise entries `at` of each row of `out` to the values, in place; entries may repeat."""
    for row, own in zip(out, values, strict=True):
        np.maximum.at(row, at, own)
    return out


def in_rows(values: Floats) -> Floats:
    """Turn values with a column per case into rows per case, contiguous."""
    return np.ascontiguousarray(values.T)
