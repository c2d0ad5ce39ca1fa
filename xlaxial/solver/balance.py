"""Forces of a state of displacements, formed bar by bar, and what is out of balance at the nodes."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.model.network import Bars, Network, Supports
from xlaxial.solver.layout import Layout, largest_at

_LONG = 1000  # nodes of a chain from which what is out of balance is added up with its signs
_FAINT = 1e-20  # forces below this part of stiffness times displacement are rounding, even of two doubles
_LEAST = 1e-300  # keeps a member without any force from dividing by zero


@dataclass(frozen=True)
class Equations:
    """What is to be solved, a case per row: bar force at its start = bar (u_end - u_start - free)."""

    network: Network
    bar: Floats  # (n_bars,) N/m
    free: Floats | None  # (n_cases, n_bars) m, lengthening of the bars without force at their starts
    span: Floats | None  # (n_cases, n_bars) N, load along each bar: force at start less force at end
    force: Floats  # (n_cases, n_nodes) N
    settlement: Floats | None  # (n_cases, n_supports) m

    def part(self, members: Flags) -> tuple[Equations, Ints, Ints, Ints]:
        """Return the equations of some members, and their nodes, bars and supports."""
        network = self.network
        nodes, supports = network.node_member, network.supports
        keep = np.flatnonzero(members[nodes])
        bars = np.flatnonzero(members[network.bars.member])
        stands = np.flatnonzero(members[nodes[supports.node]])
        place = np.zeros(network.n_nodes, dtype=np.int64)
        place[keep] = np.arange(keep.size)
        number = np.cumsum(members) - 1
        fields = {name: getattr(network.bars, name)[bars] for name in Bars.__dataclass_fields__}
        fields["member"] = number[fields["member"]]
        fields["start"], fields["end"] = place[fields["start"]], place[fields["end"]]
        small = Network(
            int(members.sum()),
            number[nodes[keep]],
            Bars(**fields),
            Supports(place[supports.node[stands]], supports.stiffness[stands]),
        )

        def some(values: Floats | None, at: Ints) -> Floats | None:
            return None if values is None else values.take(at, axis=1)

        part = replace(
            self,
            network=small,
            bar=self.bar[bars],
            free=some(self.free, bars),
            span=some(self.span, bars),
            force=self.force.take(keep, axis=1),
            settlement=some(self.settlement, stands),
        )
        return part, keep, bars, stands

    def finite(self) -> Flags | None:
        """Members whose numbers are finite and no stiffness below zero, (n_members,); None where all are so."""
        springs = np.where(self.network.supports.stiffness == np.inf, 0.0, self.network.supports.stiffness)
        given = [v for v in (self.free, self.span, self.force, self.settlement) if v is not None]
        with np.errstate(all="ignore"):  # what is not finite is sought
            total = sum(float(v.sum()) for v in (self.bar, springs, *given))
            if np.isfinite(total) and bool((self.bar >= 0.0).all()) and bool((springs >= 0.0).all()):
                return None
        network = self.network
        good = np.ones(network.n_members, dtype=bool)
        good[network.bars.member[~(np.isfinite(self.bar) & (self.bar >= 0.0))]] = False
        good[network.node_member[network.supports.node[~(springs >= 0.0)]]] = False
        own_support = network.node_member[network.supports.node]
        for values, own in (
            (self.free, network.bars.member),
            (self.span, network.bars.member),
            (self.force, network.node_member),
            (self.settlement, own_support),
        ):
            if values is not None:
                good[own[~np.isfinite(values).all(axis=0)]] = False
        return None if good.all() else good


class Balance:
    """Forces of a state, and how far it is from balance.

    Parameters
    ----------
    equations : Equations
        What is to be in balance.
    layout : Layout
        That of its network.
    links : Floats
        (n_links,) N/m, stiffness of the layout's links.
    """

    def __init__(self, equations: Equations, layout: Layout, links: Floats) -> None:
        self.layout, self.links = layout, links
        self._force = equations.force
        self.free = None if equations.free is None else layout.to_links(equations.free)
        self._span = None if equations.span is None else layout.to_links(equations.span)
        supports = equations.network.supports
        rigid = supports.stiffness == np.inf
        self._rigid, self._spring = np.flatnonzero(rigid), np.flatnonzero(~rigid)
        self._rigid_node, self._spring_node = supports.node[self._rigid], supports.node[self._spring]
        self._repeated = bool((self._spring_node[1:] <= self._spring_node[:-1]).any())
        self._stiffness = supports.stiffness[self._spring]
        self._own = equations.network.node_member[supports.node]
        moved = equations.settlement
        self._settled = None if moved is None or not self._spring.size else moved.take(self._spring, axis=1)
        self.start = self.end = self.scale = np.zeros((0, 0))
        self.reaction = np.zeros((equations.force.shape[0], self._own.size))

    def check(self, u: Floats, low: Floats | None = None) -> Floats:
        """Form all forces of the state u + low and return what is out of balance at the nodes.

        Parameters
        ----------
        u, low : Floats
            (n_cases, n_nodes) m. With `low`, differences are formed without rounding.

        Returns
        -------
        Floats
            (n_cases, n_nodes) N, zero at rigid supports: their reactions are what balance asks.
        """
        stretch = self._stretch(u, low)
        stretch *= self.links
        self.start = stretch
        self.end = stretch if self._span is None else stretch - self._span
        out = self._force.copy()
        self.layout.pull(out, self.start, self.end)
        if self._rigid.size + self._spring.size:
            self.reaction = np.empty((u.shape[0], self._own.size))
        if self._spring.size:
            self._add_springs(out, u, low)
        if self._rigid.size:
            self.reaction[:, self._rigid] = -out[:, self._rigid_node]
            out[:, self._rigid_node] = 0.0
        return out

    def _stretch(self, u: Floats, low: Floats | None) -> Floats:
        """Elongation of the links less their free lengthening."""
        left, right = self.layout.ends(u)
        out: Floats = right - left  # rounded in its own last digit: never worse than a bar longer by as much
        if low is None:
            if self.free is not None:
                out -= self.free
            return out
        if self.free is not None:  # both subtractions without loss: Knuth, TAOCP vol. 2, 4.2.2, theorem B
            lost = _lost(right, left, out)
            less = out - self.free
            lost += _lost(out, self.free, less)
            out = less
            out += lost
        out += self.layout.rise(low)
        return out

    def _add_springs(self, out: Floats, u: Floats, low: Floats | None) -> None:
        """Add reactions of springs to nodal forces."""
        moved = u.take(self._spring_node, axis=1)
        if self._settled is not None:
            moved -= self._settled
        if low is not None:
            moved += low.take(self._spring_node, axis=1)
        moved *= -self._stiffness
        if not self._rigid.size:
            self.reaction = moved
        else:
            self.reaction[:, self._spring] = moved
        if not self._repeated:
            out[:, self._spring_node] += moved
            return
        for row, own in zip(out, moved, strict=True):
            np.add.at(row, self._spring_node, own)

    def measure(self, out: Floats, trusted: float, u: Floats | None = None) -> Floats:
        """Bound of the error of any force relative to the largest |force| of its member, (n_cases, n_members).

        The stiffness matrix is a diagonally dominant M-matrix: a force out of balance at one node changes no bar
        force and no reaction by more than itself. So the sum of what is out of balance bounds every error. Along a
        chain a force is moved by what is out of balance at nodes with weights that rise, jump once by at most one and
        rise again, so that the spread of its partial sums bounds every error too (Abel's summation by parts).

        Parameters
        ----------
        out : Floats
            (n_cases, n_nodes) N, of the last `check`.
        trusted : float
            Bound that is good enough; only where it is not met are partial sums formed.
        u : Floats, optional
            (n_cases, n_nodes) m; given, forces that are rounding of stiffness times displacement count as none.
        """
        layout = self.layout
        most = layout.member_most(np.abs(self.start))
        if self._span is not None:
            np.maximum(most, layout.member_most(np.abs(self.end)), out=most)
        if self._own.size:
            size = np.abs(self.reaction)
            if layout.n_members == 1:
                np.maximum(most, size.max(axis=1, keepdims=True), out=most)
            else:
                largest_at(most, self._own, size)
        if u is not None:
            left, right = layout.ends(np.abs(u))
            np.maximum(most, _FAINT * layout.member_most(self.links * np.maximum(left, right)), out=most)
            if self._settled is not None:
                faint = largest_at(
                    np.zeros_like(most), self._own[self._spring], self._stiffness * np.abs(self._settled)
                )
                np.maximum(most, _FAINT * faint, out=most)
        self.scale = np.maximum(most, _LEAST, out=most)
        bound = layout.member_sums(np.abs(out)) / self.scale
        if layout.chain and layout.n_nodes > _LONG:
            for member in np.flatnonzero((bound > trusted).any(axis=0)).tolist():
                a = int(layout.first[member])
                b = int(layout.first[member + 1]) if member + 1 < layout.first.size else layout.n_nodes
                if b - a > _LONG:
                    sums = np.cumsum(out[:, a:b], axis=1)
                    spread = np.maximum(sums.max(axis=1), 0.0) - np.minimum(sums.min(axis=1), 0.0)
                    bound[:, member] = spread / self.scale[:, member]
        return bound

    def overall(self) -> Floats:
        """Sum of all reactions and loads of each member relative to its largest |force|, (n_cases, n_members)."""
        layout = self.layout
        total = layout.member_sums(self._force)
        if self._span is not None:
            total += layout.bar_sums(self._span)
        for row, reaction in zip(total, self.reaction, strict=True):
            row += np.bincount(self._own, weights=reaction, minlength=layout.n_members)
        return np.abs(total) / self.scale


def _lost(a: Floats, b: Floats, difference: Floats) -> Floats:
    """What rounding lost in difference = a - b, exactly."""
    back = a - difference
    out: Floats = (a - (difference + back)) + (back - b)
    return out
