"""The displacement method on all members and load cases at once, refined until the forces can be trusted."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.model.network import Actions, LinearState, Network
from xlaxial.solver.assembly import Assembly
from xlaxial.solver.balance import Balance, Equations
from xlaxial.solver.dominant import MOST_NODES, Dominant
from xlaxial.solver.flexibility import load_lever, stiffness
from xlaxial.solver.holds import Holds
from xlaxial.solver.layout import CHUNK, in_rows

TRUSTED = 1e-11  # bound of the error of any force, relative to its member's largest, up to which no more is done
_TOLERATED = 1e-10  # bound up to which factors free of subtractions are not called in
_REFUSED = 1e-6  # a member with a larger bound gets nan for every result
_ROUNDS = 8  # refinements at most; each gains the digits that the factors hold


def solve_linear(
    network: Network, actions: Actions, preload: Floats | None = None, assembly: Assembly | None = None
) -> LinearState:
    """Solve a network whose bars and supports are linear.

    The stiffness is assembled and factorised once for all cases. Forces are formed bar by bar from the displacements
    and put into equilibrium. Where what is out of balance could falsify any force of a member by more than `TRUSTED`
    of its largest, it is solved for again, with displacements kept as sums of two doubles and differences free of
    rounding (iterative refinement; Higham, Accuracy and Stability of Numerical Algorithms, chapter 12), so that
    bars 1e12 times stiffer than their neighbours keep their digits. Members that do not settle are factorised anew
    without subtractions, which holds at any stiffness ratio.

    Parameters
    ----------
    network : Network
        Every connected piece must be held (see `xlaxial.solver.connectivity.diagnose`); at most one rigid support
        stands at a node.
    actions : Actions
        One column per load case.
    preload : Floats, optional
        (n_bars, n_cases) m, further free lengthening that stands for preload (see `xlaxial.solver.lockoff.lock_off`).
    assembly : Assembly, optional
        Of the same network, to be used again.

    Returns
    -------
    LinearState
        All nan in members with numbers that are not finite, stiffness below zero, or forces that cannot be told.
    """
    equations = _equations(network, actions, preload)
    with np.errstate(all="ignore"):  # what is not finite is found by its bound, and given as nan
        found = solve_equations(equations, assembly) if network.n_nodes else Found.empty(equations)
    return LinearState(
        found.displacement.T,
        found.start.T,
        found.end.T,
        found.reaction.T,
        found.residual.T,
        found.imbalance.T,
        found.elongation.T,
    )


class _Solver(Protocol):
    def solve_rows(self, rows: Floats) -> None:
        """Solve in place, (n_cases, n_nodes) N to m."""


@dataclass
class Found:
    """Results, a case per row."""

    displacement: Floats  # (n_cases, n_nodes) m
    start: Floats  # (n_cases, n_bars) N
    end: Floats  # (n_cases, n_bars) N
    elongation: Floats  # (n_cases, n_bars) m
    reaction: Floats  # (n_cases, n_supports) N
    residual: Floats  # (n_cases, n_members)
    imbalance: Floats  # (n_cases, n_members)

    @classmethod
    def empty(cls, equations: Equations) -> Found:
        """All nan."""
        network, cases = equations.network, equations.force.shape[0]
        bars, members = network.bars.start.size, network.n_members
        sizes = (network.n_nodes, bars, bars, bars, network.supports.node.size, members, members)
        return cls(*(np.full((cases, size), np.nan) for size in sizes))

    def put(self, other: Found, nodes: Ints, bars: Ints, supports: Ints, members: Ints) -> None:
        """Take over the results of some members."""
        self.displacement[:, nodes] = other.displacement
        self.start[:, bars], self.end[:, bars] = other.start, other.end
        self.elongation[:, bars] = other.elongation
        self.reaction[:, supports] = other.reaction
        self.residual[:, members], self.imbalance[:, members] = other.residual, other.imbalance


def _equations(network: Network, actions: Actions, preload: Floats | None) -> Equations:
    """Put actions in rows, loads along bars turned into their free lengthening and end loads."""
    bars = network.bars
    free: Floats | None = in_rows(actions.imposed) if actions.imposed.any() else None
    if preload is not None and preload.any():
        free = in_rows(preload) if free is None else free + preload.T
    span = None
    if actions.distributed.any():
        q = in_rows(actions.distributed)
        free = (0.0 if free is None else free) - q * load_lever(bars)
        span = q * bars.length
    return Equations(
        network,
        stiffness(bars),
        free,
        span,
        in_rows(actions.force),
        in_rows(actions.settlement) if actions.settlement.any() else None,
    )


def solve_equations(equations: Equations, assembly: Assembly | None = None) -> Found:
    """Solve all members; those that need more are solved again by themselves."""
    network = equations.network
    if assembly is None:
        assembly = Assembly(network)
    positive = equations.bar.min(initial=0.0) >= 0.0 and network.supports.stiffness.min(initial=0.0) >= 0.0
    finite = None if positive and assembly.layout.chain else equations.finite()
    if finite is not None:
        return _put_together(equations, Found.empty(equations), finite)
    failed = assembly.factor(equations.bar, network.supports.stiffness)
    if failed.any():
        finite = equations.finite()
        if finite is not None:
            return _put_together(equations, Found.empty(equations), finite)
        return _alone(equations, _put_together(equations, Found.empty(equations), ~failed), failed)
    balance = Balance(equations, assembly.layout, assembly.links, assembly.holds)
    u, out = _first(equations, balance, assembly)
    bound = balance.measure(out, TRUSTED)
    poor = _poor(bound, TRUSTED)
    if not poor.any():
        return _found(balance, u, None, bound, out)
    if not np.isfinite(bound).all():
        finite = equations.finite()
        if finite is not None:
            return _put_together(equations, Found.empty(equations), finite)
    if 2 * np.count_nonzero(poor) < poor.size:
        return _put_together(equations, _found(balance, u, None, bound, out), poor)
    low, bound, out = _refine(balance, assembly, u, out)
    found = _found(balance, u, low, bound, out)
    poor = _poor(bound, _TOLERATED)
    return _alone(equations, found, poor) if poor.any() else found


def _poor(bound: Floats, enough: float) -> Flags:
    """Members that are not good enough in every case, (n_members,)."""
    return np.logical_not((bound <= enough).all(axis=0))


def _first(equations: Equations, balance: Balance, solver: _Solver) -> tuple[Floats, Floats]:
    """Displacements as the factors give them, and what is then out of balance."""
    holds = balance.holds
    if equations.settlement is None and equations.free is None and equations.span is None:
        u = equations.force.copy()
        u[:, holds.rigid_node] = 0.0
        solver.solve_rows(u)
        return u, balance.check(u)
    u = np.zeros_like(equations.force)
    if equations.settlement is not None:
        u[:, holds.rigid_node] = equations.settlement[:, holds.rigid]
    more = balance.check(u)
    solver.solve_rows(more)
    u += more
    return u, balance.check(u)


def _refine(balance: Balance, solver: _Solver, u: Floats, out: Floats) -> tuple[Floats | None, Floats, Floats]:
    """Refine u in place; return what it lacks to a sum of two doubles, the bound of any force's error, and scratch."""
    low: Floats | None = None
    before = np.full((u.shape[0], balance.layout.n_members), np.inf)
    for _ in range(_ROUNDS):
        solver.solve_rows(out)
        low = _add(u, low, out)
        out = balance.check(u, low)
        bound = balance.measure(out, TRUSTED, u)
        if not ((bound > TRUSTED) & (bound < 0.25 * before)).any():  # none that needs more still gains
            break
        before = bound
    return low, bound, out


def _add(high: Floats, low: Floats | None, more: Floats) -> Floats:
    """Add to a sum of two doubles in place, and return its lesser part, in the place of `more` where there was none.

    Error-free sum: Knuth, TAOCP vol. 2, 4.2.2, theorem B.
    """
    for case in range(high.shape[0]):
        for a in range(0, high.shape[1], CHUNK):
            own, add = high[case, a : a + CHUNK], more[case, a : a + CHUNK]
            total = own + add
            back = total - own
            add -= back
            own -= total - back
            add += own
            own[:] = total
    if low is None:
        return more
    low += more
    return low


def _put_together(equations: Equations, found: Found, members: Flags) -> Found:
    """Solve some members by themselves and put their results among the others."""
    if members.any():
        part, nodes, bars, supports = equations.part(members)
        found.put(solve_equations(part), nodes, bars, supports, np.flatnonzero(members))
    return found


def _alone(equations: Equations, found: Found, members: Flags) -> Found:
    """Solve members one by one without subtractions; nan where even so the forces cannot be told."""
    for member in np.flatnonzero(members).tolist():
        part, nodes, bars, supports = equations.part(np.arange(members.size) == member)
        own = part.network
        result = Found.empty(part)
        if own.n_nodes <= MOST_NODES:
            solver = Dominant(own, part.bar, own.supports.stiffness)
            assembly = Assembly(own)
            balance = Balance(
                part, assembly.layout, assembly.layout.to_links(part.bar), Holds(own, own.supports.stiffness)
            )
            u, out = _first(part, balance, solver)
            low, bound, out = _refine(balance, solver, u, out)
            if (bound <= _REFUSED).all():
                result = _found(balance, u, low, bound, out)
        found.put(result, nodes, bars, supports, np.array([member]))
    return found


def _found(balance: Balance, u: Floats, low: Floats | None, bound: Floats, scratch: Floats) -> Found:
    """Results of a state that has been checked last."""
    layout = balance.layout
    rise = layout.rise(u, low, scratch)
    start = layout.to_bars(balance.start)
    end = start if balance.end is balance.start else layout.to_bars(balance.end)
    return Found(u, start, end, layout.to_bars(rise), balance.reaction, balance.overall(), bound)
