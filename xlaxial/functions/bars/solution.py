"""One schedule solved: from the tables of a call to the state of every member that can be solved."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from xlaxial.arrays import Floats, Ints
from xlaxial.functions.bars.actions import RowActions, read_actions
from xlaxial.functions.bars.build import Pieces, cut_pieces
from xlaxial.functions.bars.tables import Inputs, missing_columns, read_inputs
from xlaxial.model.network import Actions, LinearState, Network, Supports
from xlaxial.problems import Problem
from xlaxial.solver.connectivity import Loose, diagnose
from xlaxial.solver.displacement import solve_linear
from xlaxial.solver.lockoff import LockOff, lock_off
from xlaxial.solver.recovery import BarResults, recover
from xlaxial.tables.settings import Settings

_ROUNDING = 1e-13  # of a member's largest force: what is below is rounding
_BROKEN = 1e-6  # a member whose forces are so far out of balance is not shown


@dataclass
class Solution:
    """A solved schedule."""

    inputs: Inputs
    problem: Problem | None  # of the call as a whole: nothing could be solved
    pieces: Pieces
    network: Network
    actions: Actions
    preload: Floats  # (n_bars, n_cases) m, free lengthening that stands for preload
    state: LinearState
    results: BarResults
    support_entries: Ints  # (n_network_supports,) entry of inputs.supports of each support of the network
    problems: list[Problem]
    _notes: dict[int, list[str]] | None = None

    def member_notes(self) -> dict[int, list[str]]:
        """What the Status of each solved member says about what its results rest on."""
        if self._notes is None:
            self._notes = _member_notes(self)
        return self._notes

    def redundants(self) -> Floats:
        """Unknown forces less the conditions of equilibrium of each solved member, (n_kept,)."""
        n = self.pieces.kept.size
        bars = np.bincount(self.network.bars.member, minlength=n)
        nodes = np.bincount(self.network.node_member, minlength=n)
        supports = np.bincount(self.network.node_member[self.network.supports.node], minlength=n)
        return (bars + supports - nodes).astype(np.float64)

    def failed_rows(self) -> dict[int, Problem]:
        """Rows of the segments table that have no result, and why."""
        return _failed(self.inputs.segments.wrong, self.inputs.members.row_member, self.inputs)


def _failed(wrong: dict[int, Problem], row_member: Ints, inputs: Inputs) -> dict[int, Problem]:
    out = dict(wrong)
    faults = inputs.members.faults
    if faults:
        bad = np.zeros(inputs.members.count + 1, dtype=bool)
        bad[list(faults)] = True
        for row in np.flatnonzero(bad[row_member] & (row_member >= 0)).tolist():
            out.setdefault(row, faults[int(row_member[row])])
    return out


def solve(segments: Any, supports: Any, loads: Any, settings: Settings, headings: Any = None) -> Solution:
    """Read the tables of a call and solve every member that can be solved.

    Parameters
    ----------
    segments, supports, loads, settings, headings
        See `xlaxial.functions.bars.tables.read_inputs`.

    Returns
    -------
    Solution
        Members that cannot be solved stand in `inputs.members.faults`.
    """
    inputs = read_inputs(segments, supports, loads, settings, headings)
    table = inputs.segments
    whole = table.layout.problems[0] if table.unusable else missing_columns(table)
    if whole is not None and not table.unusable:
        table.problems.insert(0, whole)
    if whole is not None:
        for member in range(inputs.members.count):
            inputs.members.faults[member] = whole
    rows = read_actions(inputs)
    while True:
        solution = _solve_good(inputs, rows, whole)
        if solution is not None:
            return solution


def _solve_good(inputs: Inputs, rows: RowActions, whole: Problem | None) -> Solution | None:
    """Solve the members without a fault; None where that found new faults, so that it is to be done again."""
    members, nodes = inputs.members, inputs.nodes
    before = len(members.faults)
    good = members.good()
    supports, loads = inputs.supports, inputs.loads
    cuts = [places.segment >= 0 for places in (supports.places, loads.places)]
    cut_segment = np.concatenate([supports.places.segment[cuts[0]], loads.places.segment[cuts[1]]])
    cut_x = np.concatenate([supports.places.x[cuts[0]], loads.places.x[cuts[1]]])
    pieces = cut_pieces(nodes, inputs.sections, good, cut_segment, cut_x)
    stands = np.flatnonzero(good[supports.member]) if supports.member.size else np.zeros(0, dtype=np.int64)
    stiffness = supports.table.values("Stiffness", np.nan)[supports.rows[stands]]
    network = Network(
        pieces.kept.size,
        pieces.node_member,
        pieces.bars,
        Supports(_network_nodes(pieces, supports.places, stands), np.where(np.isnan(stiffness), np.inf, stiffness)),
    )
    for loose in diagnose(network):
        member = int(pieces.kept[loose.member])
        _report(inputs, member, _loose_problem(inputs, pieces, loose))
    if len(members.faults) > before:
        return None
    acting = rows.force_rows
    acting_good = np.flatnonzero(good[loads.member[acting]]) if acting.size else np.zeros(0, dtype=np.int64)
    n_cases = rows.distributed.shape[1]
    force = np.zeros((network.n_nodes, n_cases))
    if acting_good.size:
        np.add.at(force, _network_nodes(pieces, loads.places, acting[acting_good]), rows.force[acting_good])
    row = nodes.rows[pieces.segment]
    imposed = rows.imposed[row]
    if pieces.cut_segment.size:
        imposed = imposed * pieces.share[:, None]
    actions = Actions(force, rows.distributed[row], imposed, rows.settlement[stands])
    locked = lock_off(network, rows.preload[row], rows.preloaded[row])
    _report_preloads(inputs, pieces, locked)
    if len(members.faults) > before:
        return None
    preload = locked.imposed
    state = solve_linear(network, actions, preload)
    sound = np.maximum(state.residual, state.imbalance).max(axis=1, initial=0.0) < _BROKEN
    for k in np.flatnonzero(~sound).tolist():
        what = "stiffnesses differ so much that the forces cannot be told"
        _report(inputs, int(pieces.kept[k]), Problem(what, "make very stiff segments less stiff", code="#NUM!"))
    if len(members.faults) > before:
        return None
    state = _without_rounding(network, state)
    results = recover(network, actions, state, preload)
    problems = (
        [whole] if inputs.segments.unusable and whole is not None and not inputs.problems() else []
    ) + inputs.problems()
    return Solution(inputs, whole, pieces, network, actions, preload, state, results, stands, problems)


def _without_rounding(network: Network, state: LinearState) -> LinearState:
    """Return the state with forces that are rounding alone, against their member's largest, put to zero.

    So a reaction that comes out zero is zero, on every machine.
    """
    forces = (state.force_start, state.force_end, state.reaction)
    members = (network.bars.member, network.bars.member, network.node_member[network.supports.node])
    peak = max((float(np.abs(force).max(initial=0.0)) for force in forces), default=0.0)
    if not any(bool(((force != 0.0) & (np.abs(force) < _ROUNDING * peak)).any()) for force in forces):
        return state
    largest = np.zeros((network.n_members, state.force_start.shape[1]))
    for force, member in zip(forces, members, strict=True):
        np.maximum.at(largest, member, np.abs(force))
    start, end, reaction = (
        np.where(np.abs(force) < _ROUNDING * largest[member], 0.0, force)
        for force, member in zip(forces, members, strict=True)
    )
    return replace(state, force_start=start, force_end=end, reaction=reaction)


def _network_nodes(pieces: Pieces, places: Any, entries: Ints) -> Ints:
    """Nodes of the network at which entries of a supports or loads table act."""
    node, segment = places.node[entries], places.segment[entries]
    out = np.where(node >= 0, pieces.node_of[node], -1)
    inside = np.flatnonzero(segment >= 0)
    if inside.size:
        out[inside] = pieces.node_at(segment[inside], places.x[entries][inside])
    return out


def _report(inputs: Inputs, member: int, problem: Problem) -> None:
    """Report a problem of a member as a whole, at its first row."""
    row = int(np.flatnonzero(inputs.members.row_member == member)[0])
    table = inputs.segments
    problem = replace(
        problem, mark=inputs.members.marks[member], cell=problem.cell or table.address(row), table=table.kind
    )
    table.problems.append(problem)
    inputs.members.fail(member, problem)


def _name(inputs: Inputs, member: int) -> str:
    mark = inputs.members.marks[member]
    return f"member {mark}" if mark else "the member"


def _loose_problem(inputs: Inputs, pieces: Pieces, loose: Loose) -> Problem:
    name = _name(inputs, int(pieces.kept[loose.member]))
    if loose.kind == "no support":
        return Problem(
            f"{name} has no support",
            "add one to the supports table; an assembly that holds itself needs one node held, its reaction comes out zero",
            code="#NUM!",
        )
    of_node = {int(new): old for old, new in enumerate(pieces.node_of.tolist()) if new >= 0}
    labels = [inputs.nodes.label(of_node[node]) for node in loose.nodes if node in of_node]
    nodes = ("node " if len(labels) == 1 else "nodes ") + ", ".join(labels[:8]) + (" ..." if len(labels) > 8 else "")
    if loose.kind == "mechanism":
        return Problem(
            f"{name} is a mechanism: {nodes} can move freely, no support holds them",
            "join them to the rest by From and To, or support one of them",
            code="#NUM!",
        )
    return Problem(
        f"{name} is in pieces: {nodes} are not joined to the rest",
        "mend the labels in From and To, or give the piece a mark of its own",
    )


def _report_preloads(inputs: Inputs, pieces: Pieces, locked: LockOff) -> None:
    nodes, members = inputs.nodes, inputs.members
    for bars, what, remedy in (
        (
            locked.unlike,
            "preloads in one unbranched run differ",
            "give the run one preload: the same in its rows, or in one row alone",
        ),
        (locked.unheld, "nothing can hold this preload", "support the segment at both sides, or clear the preload"),
    ):
        for bar in bars.tolist():
            row = int(nodes.rows[pieces.segment[bar]])
            member = int(members.row_member[row])
            if member not in members.faults:
                members.fail_row(inputs.segments, row, Problem(what, remedy), "Preload", member)


def _member_notes(solution: Solution) -> dict[int, list[str]]:
    inputs, pieces, network = solution.inputs, solution.pieces, solution.network
    common = list(inputs.remarks)
    if len(inputs.cases) > 1:
        common.append("cases " + ", ".join(inputs.cases[:6]) + (" ..." if len(inputs.cases) > 6 else "") + " summed")
    notes: dict[int, list[str]] = {int(member): [] for member in pieces.kept}
    blank = np.flatnonzero(np.isinf(network.supports.stiffness))
    rigid: dict[int, list[str]] = {}
    supports = inputs.supports
    for k in blank.tolist():
        entry = int(solution.support_entries[k])
        node = int(supports.places.node[entry])
        member = int(supports.member[entry])
        x = f"x = {supports.table.values('x')[int(supports.rows[entry])]:g} m"
        rigid.setdefault(member, []).append(inputs.nodes.label(node) if node >= 0 else x)
    by_rows = inputs.nodes.labels is None and not inputs.segments.layout.has("Order")
    for member, said in notes.items():
        if member in rigid:
            said.append("rigid at " + ", ".join(rigid[member]))
        if by_rows and inputs.nodes.count[member] > 1:
            said.append("in series by the rows' order (sorting changes the member)")
        said += common
    return notes
