"""Forces of a state of displacements, formed bar by bar, and what is out of balance at the nodes."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.model.network import Bars, Network, Supports
from xlaxial.solver.holds import Holds
from xlaxial.solver.layout import CHUNK, Layout, largest_at

_STRETCH = 256  # nodes of a long chain between which partial sums are not looked at one by one; divides CHUNK
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
        supports = self.network.supports
        given = [v for v in (self.free, self.span, self.force, self.settlement) if v is not None]
        with np.errstate(all="ignore"):  # what is not finite is sought
            total = sum(float(v.sum()) for v in (self.bar, *given))
            if np.isfinite(total) and self.bar.min(initial=0.0) >= 0.0 and supports.stiffness.min(initial=0.0) >= 0.0:
                return None
        network = self.network
        good = np.ones(network.n_members, dtype=bool)
        good[network.bars.member[~(np.isfinite(self.bar) & (self.bar >= 0.0))]] = False
        good[network.node_member[supports.node[~(supports.stiffness >= 0.0)]]] = False
        own_support = network.node_member[supports.node]
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
    holds : Holds
        Supports of the network.
    """

    def __init__(self, equations: Equations, layout: Layout, links: Floats, holds: Holds) -> None:
        self.layout, self._links, self.holds = layout, links, holds
        self._equations = equations
        self._free = None if equations.free is None else layout.to_links(equations.free)
        self._span = None if equations.span is None else layout.to_links(equations.span)
        supports = equations.network.supports
        self._own = np.zeros(1, dtype=np.int64)
        if layout.n_members > 1:
            self._own = equations.network.node_member.take(supports.node)
        moved = equations.settlement
        self._settled = None if moved is None or not holds.n_springs else holds.of_springs(moved)
        cases = equations.force.shape[0]
        self.start = np.empty((cases, layout.n_links))  # (n_cases, n_links) N, force at the start of each link
        self.end = self.start if self._span is None else np.empty_like(self.start)
        self.reaction = np.empty((cases, holds.size))  # (n_cases, n_supports) N
        self._most = np.zeros((cases, 1))  # (n_cases, 1) N, largest |force| at starts where there is one chain
        self.scale = np.zeros((cases, layout.n_members))  # (n_cases, n_members) N, largest |force|

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
        if self.layout.chain:
            out = np.empty_like(u)
            for case in range(u.shape[0]):
                self._along(out, u, low, case)
        else:
            out = self._equations.force.copy()
            (left, right), lows = self.layout.ends(u), None if low is None else self.layout.ends(low)
            _stretch(left, right, self._free, lows, self.start)
            self.start *= self._links
            if self._span is not None:
                np.subtract(self.start, self._span, out=self.end)
            self.layout.pull(out, self.start, self.end)
        if self.holds.n_springs:
            self._add_springs(out, u, low)
        if self.holds.rigid.size:
            self.reaction[:, self.holds.rigid] = -out[:, self.holds.rigid_node]
            out[:, self.holds.rigid_node] = 0.0
        return out

    def _along(self, out: Floats, u: Floats, low: Floats | None, case: int) -> None:
        """Bar forces of a case and what they and the loads leave out of balance, along chains, part by part."""
        n, force, start, end = self.layout.n_links, self._equations.force[case], self.start[case], self.end[case]
        row, moved, left, before = out[case], u[case], None if low is None else low[case], 0.0
        most, single = 0.0, self.layout.single
        for a in range(0, n, CHUNK):
            b = min(a + CHUNK, n)
            pull, push = start[a:b], end[a:b]
            free = None if self._free is None else self._free[case, a:b]
            lows = None if left is None else (left[a:b], left[a + 1 : b + 1])
            _stretch(moved[a:b], moved[a + 1 : b + 1], free, lows, pull)
            pull *= self._links[a:b]
            if self._span is not None:
                np.subtract(pull, self._span[case, a:b], out=push)
            np.add(force[a:b], pull, out=row[a:b])
            row[a] -= before
            row[a + 1 : b] -= push[:-1]
            before = push[-1]
            if single:
                most = max(most, float(pull.max()), -float(pull.min()))
        row[n] = force[n] - before
        self._most[case] = most

    def _add_springs(self, out: Floats, u: Floats, low: Floats | None) -> None:
        """Add reactions of springs to nodal forces."""
        moved = self.holds.at_springs(u)
        if self._settled is not None:
            moved -= self._settled
        if low is not None:
            moved += self.holds.at_springs(low)
        moved *= self.holds.stiffness
        np.negative(moved, out=moved)
        if self.holds.spring is None:
            self.reaction = moved
        else:
            self.reaction[:, self.holds.spring] = moved
        self.holds.add_springs(out, moved)

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
        most = self._most.copy() if layout.single else layout.bar_most(self.start)
        if self._span is not None:
            np.maximum(most, layout.bar_most(self.end), out=most)
        if self.holds.size:
            if layout.n_members == 1:
                np.maximum(most, np.abs(self.reaction).max(axis=1, keepdims=True), out=most)
            else:
                largest_at(most, self._own, np.abs(self.reaction))
        self.scale = np.maximum(most, _LEAST, out=most)
        left = self._left(out, trusted)
        if u is None or bool((left <= trusted * self.scale).all()):
            return left / self.scale
        ends = layout.ends(np.abs(u))
        np.maximum(most, _FAINT * layout.bar_most(self._links * np.maximum(*ends)), out=most)
        if self._settled is not None:
            faint = _FAINT * np.abs(self.holds.stiffness * self._settled)
            own = self._own if layout.n_members > 1 else np.zeros(self.holds.size, dtype=np.int64)
            largest_at(most, own if self.holds.spring is None else own[self.holds.spring], faint)
        return left / self.scale

    def _left(self, out: Floats, trusted: float) -> Floats:
        """Bound of the error of any force, (n_cases, n_members) N."""
        layout = self.layout
        if layout.single and layout.n_nodes > _LONG:
            return np.array([[_spread_of_sums(row)] for row in out])
        left = layout.node_sums(np.abs(out))
        if layout.chain and layout.n_nodes > _LONG:
            last = np.append(layout.first[1:], layout.n_nodes)
            poor = (left > trusted * self.scale).any(axis=0) & (last - layout.first > _LONG)
            for member in np.flatnonzero(poor).tolist():
                for case, row in enumerate(out):
                    left[case, member] = _spread_of_sums(row[layout.first[member] : last[member]])
        return left

    def overall(self) -> Floats:
        """Sum of all reactions and loads of each member relative to its largest |force|, (n_cases, n_members)."""
        layout, equations = self.layout, self._equations
        total = layout.node_sums(equations.force)
        if equations.span is not None:
            total += layout.bar_sums(equations.span)
        if layout.n_members == 1:
            total += self.reaction.sum(axis=1, keepdims=True)
        else:
            for row, reaction in zip(total, self.reaction, strict=True):
                row += np.bincount(self._own, weights=reaction, minlength=layout.n_members)
        return np.abs(total) / self.scale


def _stretch(left: Floats, right: Floats, free: Floats | None, lows: tuple[Floats, Floats] | None, out: Floats) -> None:
    """Elongation less free lengthening from displacements at both ends, into `out`; without rounding given `lows`."""
    np.subtract(right, left, out=out)  # rounded in its own last digit: never worse than a bar longer by as much
    if lows is None:
        if free is not None:
            out -= free
        return
    if free is not None:  # both subtractions without loss: Knuth, TAOCP vol. 2, 4.2.2, theorem B
        less = out - free
        lost = _lost(right, left, out) + _lost(out, free, less)
        np.add(less, lost, out=out)
    out += lows[1] - lows[0]


def _lost(a: Floats, b: Floats, difference: Floats) -> Floats:
    """What rounding lost in difference = a - b, exactly."""
    back = a - difference
    out: Floats = (a - (difference + back)) + (back - b)
    return out


def _spread_of_sums(values: Floats) -> float:
    """Bound of the largest less the least partial sum, that of nothing included.

    From sums at the ends of stretches, and the most that they can change inside one.
    """
    total = most = least = inside = 0.0
    for a in range(0, values.size, CHUNK):
        own = values[a : a + CHUNK]
        parts = (own.reshape(-1, _STRETCH), own[:0]) if own.size == CHUNK else (own[:0].reshape(0, 1), own)
        for part in (parts[0], parts[1].reshape(1, -1)):
            if part.size:
                sums = np.cumsum(part.sum(axis=1))
                most, least = max(most, total + float(sums.max())), min(least, total + float(sums.min()))
                total += float(sums[-1])
                inside = max(inside, float(np.abs(part).sum(axis=1).max()))
    return most - least + 2.0 * inside
