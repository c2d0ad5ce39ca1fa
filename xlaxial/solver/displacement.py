"""The displacement method on all members and load cases at once, refined until the forces can be trusted."""

from __future__ import annotations

import numpy as np

from xlaxial.arrays import Floats, Ints
from xlaxial.model.network import Actions, LinearState, Network
from xlaxial.solver.assembly import Incidence, Stiffness, sums
from xlaxial.solver.flexibility import flexibility, load_lever

TRUSTED = 1e-11  # forces out of balance, relative to the member's largest, up to which a state is taken
_ROUNDS = 12  # refinements at most; each gains the digits that the factorisation holds
_DEAD = 1e-300  # below any force that means something


def solve_linear(network: Network, actions: Actions, preload: Floats | None = None) -> LinearState:
    """Solve a network whose bars and supports are linear.

    The stiffness is assembled and factorised once for all cases. Forces are then formed bar by bar from the
    displacements and put into equilibrium; what is out of balance is solved for again, with displacements kept as
    sums of two doubles and differences free of rounding, until it is small against the member's largest force. The
    stiffness matrix is a diagonally dominant M-matrix, so that no bar force is wrong by more than the sum of the
    forces out of balance: bars 1e12 times stiffer than their neighbours keep their digits.

    Parameters
    ----------
    network : Network
        Every connected piece must be held (see `xlaxial.solver.connectivity.diagnose`).
    actions : Actions
        One column per load case.
    preload : Floats, optional
        (n_bars, n_cases) m, further free lengthening that stands for preload.

    Returns
    -------
    LinearState
        Its residual is not below `TRUSTED` where refinement could not reach it.
    """
    bars, supports = network.bars, network.supports
    flex = flexibility(bars)
    imposed = actions.imposed if preload is None else actions.imposed + preload
    loaded = bool(actions.distributed.any())
    lever = load_lever(bars) if loaded else None
    free = imposed if lever is None else imposed - actions.distributed * lever[:, None]
    span = actions.distributed * bars.length[:, None]
    stiffness = Stiffness(network)
    bar = 1.0 / flex
    spring = np.where(stiffness.rigid, 0.0, supports.stiffness)
    stiffness.factor(bar, spring)
    balance = _Balance(network, stiffness, bar, spring, free, span, actions)
    u = np.zeros((network.n_nodes, actions.force.shape[1]))
    u[supports.node[stiffness.rigid]] = actions.settlement[stiffness.rigid]
    low = np.zeros_like(u)
    out_of_balance = balance.check(u, None)
    worst = np.inf
    for round_ in range(_ROUNDS):
        u, low = _add(u, low, stiffness.solve(out_of_balance)) if round_ else (u + stiffness.solve(out_of_balance), low)
        out_of_balance = balance.check(u, low if round_ else None)
        error = balance.error(out_of_balance)
        if not error > TRUSTED or (round_ > 2 and error > 0.5 * worst):
            break
        worst = error
        if not round_:
            out_of_balance = balance.check(u, low)
    return balance.state(u + low)


class _Balance:
    """Forces of a displacement state, and what is out of balance at its nodes."""

    def __init__(
        self,
        network: Network,
        stiffness: Stiffness,
        bar: Floats,
        spring: Floats,
        free: Floats,
        span: Floats,
        actions: Actions,
    ) -> None:
        self._network, self._stiffness = network, stiffness
        self._bar, self._spring = bar[:, None], spring[:, None]
        self._free, self._span, self._actions = free, span, actions
        self._loaded = bool(span.any())
        self._fixed = np.flatnonzero(stiffness.fixed)
        self._node, self._rigid = network.supports.node, np.flatnonzero(stiffness.rigid)
        self.start = self.end = self.reaction = self.pull = np.zeros((0, 0))

    def check(self, u: Floats, low: Floats | None) -> Floats:
        """Form all forces of the state u (+ low, then without rounding) and return what is out of balance."""
        incidence: Incidence = self._stiffness.incidence
        left, right = incidence.ends(u)
        if low is None:
            stretch = right - left
            stretch -= self._free
        else:
            low_left, low_right = incidence.ends(low)
            stretch, lost = _difference(right, left)
            stretch, lost_too = _difference(stretch, self._free)
            stretch += lost + lost_too + (low_right - low_left)
        stretch *= self._bar
        self.start = stretch
        self.end = stretch - self._span if self._loaded else stretch
        pull = incidence.pull(self.start, self.end)
        pull += self._actions.force
        moved = u[self._node] - self._actions.settlement
        if low is not None:
            moved += low[self._node]
        self.reaction = -self._spring * moved
        pull += incidence.gather(self._node, self.reaction)
        self.reaction[self._rigid] = -pull[self._node[self._rigid]]
        pull[self._fixed] = 0.0
        return pull

    def largest(self) -> Floats:
        """Largest |force| of each member and case, (n_members, n_cases)."""
        network = self._network
        out = np.full((network.n_members, self.start.shape[1]), _DEAD)
        _raise_to(out, network.bars.member, np.maximum(np.abs(self.start), np.abs(self.end)))
        _raise_to(out, network.node_member[self._node], np.abs(self.reaction))
        return out

    def error(self, out_of_balance: Floats) -> float:
        """Bound of the relative error of any force, the worst of all members and cases."""
        network = self._network
        chain = self._stiffness.incidence.single
        if chain:  # along one chain the corrections are the partial sums of what is out of balance
            partial = np.cumsum(out_of_balance, axis=0)
            bound = (np.maximum(partial.max(axis=0), 0.0) - np.minimum(partial.min(axis=0), 0.0))[None, :]
        else:
            bound = sums(network.node_member, np.abs(out_of_balance), network.n_members)
        return float(np.max(bound / self.largest(), initial=0.0))

    def state(self, u: Floats) -> LinearState:
        """Return the state with its residual: nodal forces out of balance and the sum of all forces on the member."""
        network = self._network
        largest = self.largest()
        own = network.node_member[self._node]
        total = sums(own, self.reaction, network.n_members) + sums(
            network.node_member, self._actions.force, network.n_members
        )
        if self._loaded:
            total += sums(network.bars.member, self._span, network.n_members)
        scale = largest
        if self._loaded or self._actions.force.any():
            scale = largest + sums(network.node_member, np.abs(self._actions.force), network.n_members)
        return LinearState(u, self.start, self.end, self.reaction, np.abs(total) / scale)


def _raise_to(out: Floats, at: Ints, values: Floats) -> None:
    """Raise the rows of `out` to the largest of the values at them; `at` may be in order (then it is quick)."""
    if not at.size:
        return
    if out.shape[0] == 1:
        np.maximum(out[0], values.max(axis=0), out=out[0])
        return
    steps = np.flatnonzero(np.diff(at))
    if steps.size + 1 <= out.shape[0] and bool((np.diff(at[np.append(0, steps + 1)]) > 0).all()):
        first = np.append(0, steps + 1)
        rows = at[first]
        out[rows] = np.maximum(out[rows], np.maximum.reduceat(values, first, axis=0))
        return
    np.maximum.at(out, at, values)


def _difference(a: Floats, b: Floats) -> tuple[Floats, Floats]:
    """Return a - b rounded, and exactly what rounding lost (error-free transformation, Knuth, TAOCP vol. 2, 4.2.2)."""
    s = a - b
    bb = a - s
    return s, (a - (s + bb)) + (bb - b)


def _add(high: Floats, low: Floats, more: Floats) -> tuple[Floats, Floats]:
    """Add to a sum of two doubles."""
    s = high + more
    bb = s - high
    lost = (high - (s - bb)) + (more - bb)
    return s, low + lost
