"""Where nodes, bars and members lie in the arrays, and sums over them; slices where members are plain chains.

Inside the solver nodal and bar values stand one load case per row, (n_cases, n): LAPACK and slices want them so.
"""

from __future__ import annotations

import numpy as np

from xlaxial.arrays import Floats, Ints
from xlaxial.model.network import Network

_FEW = 24  # nodes of members of equal length up to which their values are folded place by place
CHUNK = 16384  # entries that are worked on at a time where much is done to each


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
        self.chain = network.in_chains
        self.single = self.chain and self.n_members == 1
        self.first = network.first_nodes if self.chain else np.zeros(0, dtype=np.int64)  # (n_members,)
        self._width = 0  # nodes of each member, where all are chains of as many nodes, and few
        if self.chain and self.n_members > 1:
            width, over = divmod(self.n_nodes, self.n_members)
            if not over and width <= _FEW and bool((self.first == np.arange(0, self.n_nodes, width)).all()):
                self._width = width
        self.n_links = self.n_nodes - 1 if self.chain else n_bars

    def to_links(self, values: Floats) -> Floats:
        """Spread bar values over links, (n_bars,) or (n_cases, n_bars)."""
        if not self.chain or self.single:
            return values
        out = np.zeros((*values.shape[:-1], self.n_links))
        if values.ndim == 1:
            out[self.start] = values
            return out
        for row, own in zip(out, values, strict=True):
            row[self.start] = own
        return out

    def to_bars(self, values: Floats) -> Floats:
        """Pick bar values from links, (..., n_links) to (..., n_bars)."""
        return values if not self.chain or self.single else values.take(self.start, axis=-1)

    def rise(self, u: Floats, low: Floats | None, scratch: Floats) -> Floats:
        """Differences of nodal values u + low along links, (n_cases, n_links).

        Puts the sum in the place of u, and for chains the result in that of `scratch`, (n_cases, n_nodes).
        """
        if not self.chain:
            left, right = self.ends(u)
            rises: Floats = right - left
            if low is not None:
                left, right = self.ends(low)
                rises += right - left
                u += low
            return rises
        out = scratch[:, :-1]
        if low is None:
            return np.subtract(u[:, 1:], u[:, :-1], out=out)
        for row, high, rest in zip(out, u, low, strict=True):
            for a in range(0, row.size, CHUNK):
                b = min(a + CHUNK, row.size)
                np.subtract(high[a + 1 : b + 1], high[a:b], out=row[a:b])
                row[a:b] += rest[a + 1 : b + 1] - rest[a:b]
                high[a:b] += rest[a:b]
            high[-1] += rest[-1]
        return out

    def ends(self, u: Floats) -> tuple[Floats, Floats]:
        """Nodal values at both ends of links, (n_cases, n_links) each."""
        if self.chain:
            return u[:, :-1], u[:, 1:]
        return u.take(self.start, axis=1), u.take(self.end, axis=1)

    def pull(self, force: Floats, at_start: Floats, at_end: Floats) -> None:
        """Add to nodal forces, in place, what bars of these tensions at their ends exert on the nodes."""
        for row, first, last in zip(force, at_start, at_end, strict=True):
            row += np.bincount(self.start, weights=first, minlength=self.n_nodes)
            row -= np.bincount(self.end, weights=last, minlength=self.n_nodes)

    def node_sums(self, nodal: Floats) -> Floats:
        """Sums of nodal values over members, (n_cases, n_members)."""
        return self._folded(np.add, nodal, self._width) if self._width else self._sums(nodal, self._node_member)

    def bar_sums(self, values: Floats) -> Floats:
        """Sums of bar values over members, (n_cases, n_members)."""
        return self._sums(values, self._bar_member)

    def bar_most(self, links: Floats) -> Floats:
        """Largest magnitude of link values over members, (n_cases, n_members)."""
        if self.n_members == 1:
            most: Floats = np.maximum(
                links.max(axis=1, keepdims=True, initial=0.0), -links.min(axis=1, keepdims=True, initial=0.0)
            )
            return most
        size = np.abs(links)
        if self._width:
            return self._folded(np.maximum, size, self._width - 1)
        own = self._node_member[:-1] if self.chain else self._bar_member
        return largest_at(np.zeros((links.shape[0], self.n_members)), own, size)

    def _folded(self, fold: np.ufunc, values: Floats, count: int) -> Floats:
        """Fold the first values of each member, at nodes or links, where all members have as many."""
        out = values[:, :: self._width].copy()
        for k in range(1, count):
            fold(out, values[:, k :: self._width], out=out)
        return out

    def _sums(self, values: Floats, at: Ints) -> Floats:
        if self.n_members == 1:
            total: Floats = values.sum(axis=1, keepdims=True)
            return total
        out = np.empty((values.shape[0], self.n_members))
        for row, own in zip(out, values, strict=True):
            row[:] = np.bincount(at, weights=own, minlength=self.n_members)
        return out


def largest_at(out: Floats, at: Ints, values: Floats) -> Floats:
    """Raise entries `at` of each row of `out` to the values, in place; entries may repeat."""
    for row, own in zip(out, values, strict=True):
        np.maximum.at(row, at, own)
    return out


def in_rows(values: Floats) -> Floats:
    """Turn values with a column per case into rows per case, contiguous."""
    return np.ascontiguousarray(values.T)
