"""What acts on the members: the columns of the segments table and the rows of the loads table, by load case."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.functions.bars.tables import Inputs
from xlaxial.problems import Problem

_ON_SEGMENT = ("q", "dT", "Misfit", "Imposed strain", "Preload")
_VALUES = ("Force", "Settlement", *_ON_SEGMENT)


@dataclass(frozen=True)
class RowActions:
    """Actions by row of the user's tables, one column per load case."""

    force_rows: Ints  # (n_forces,) entries of Inputs.loads that are forces
    force: Floats  # (n_forces, n_cases) N
    distributed: Floats  # (n_segment_rows, n_cases) N/m
    imposed: Floats  # (n_segment_rows, n_cases) m
    preload: Floats  # (n_segment_rows, n_cases) N
    preloaded: Flags  # (n_segment_rows,) a preload stands there
    settlement: Floats  # (n_placed_supports, n_cases) m


def read_actions(inputs: Inputs) -> RowActions:
    """Gather the actions of all members; rows that cannot act fail their members.

    All load cases are summed into one column here; a later combination of cases gives each a column of its own.
    """
    table, members = inputs.segments, inputs.members
    n_rows, n_cases = table.n_rows, 1
    columns = {name: np.repeat(table.values(name), n_cases).reshape(n_rows, n_cases) for name in _ON_SEGMENT}
    preloaded = table.present("Preload").copy()
    settlement = inputs.supports.table.values("Settlement")[inputs.supports.rows].repeat(n_cases).reshape(-1, n_cases)
    slip = table.values("Lock-off slip")
    force_rows, force = _add_loads(inputs, columns, preloaded, settlement)
    slipping = bool(slip.any())
    for i in np.flatnonzero((slip != 0.0) & ~preloaded & (members.row_member >= 0)).tolist() if slipping else ():
        problem = Problem("Lock-off slip stands without Preload", "write the Preload, or clear the slip")
        members.fail_row(table, i, problem, "Lock-off slip", int(members.row_member[i]))
    alpha, length = inputs.sections.alpha, inputs.sections.length
    hot = (columns["dT"] != 0.0).any(axis=1)
    unknown = np.isnan(alpha)
    for i in np.flatnonzero(hot & unknown & (members.row_member >= 0)).tolist() if unknown.any() else ():
        problem = Problem("the segment has a dT but no Alpha", "fill in Alpha, or a Material that has one")
        members.fail_row(table, i, problem, "Alpha" if table.layout.has("Alpha") else "dT", int(members.row_member[i]))
    strain = np.where(unknown, 0.0, alpha)[:, None] * columns["dT"] + columns["Imposed strain"]
    imposed = strain * np.where(np.isnan(length), 0.0, length)[:, None] + columns["Misfit"]
    if slipping:
        imposed += np.sign(columns["Preload"]) * slip[:, None]
    return RowActions(force_rows, force, columns["q"], imposed, columns["Preload"], preloaded, settlement)


def _add_loads(inputs: Inputs, columns: dict[str, Floats], preloaded: Flags, settlement: Floats) -> tuple[Ints, Floats]:
    """Add the rows of the loads table to the segments' columns and to settlements; return the forces."""
    loads, members = inputs.loads, inputs.members
    table, rows, own, places = loads.table, loads.rows, loads.member, loads.places
    nothing = np.zeros(0, dtype=np.int64), np.zeros((0, settlement.shape[1]))
    if not rows.size:
        return nothing

    def fail(mask: Flags, term: str | None, what: str, remedy: str) -> None:
        for k in np.flatnonzero(mask).tolist():
            members.fail_row_once(table, int(rows[k]), Problem(what, remedy), term, int(own[k]))

    given = {name: table.present(name)[rows] for name in _VALUES if table.layout.has(name)}
    placed = (places.node >= 0) | (places.segment >= 0)
    acts = np.zeros(rows.size, dtype=bool)
    for there in given.values():
        acts |= there
    fail(~acts, None, "the row has no action", "fill in a Force or another action, or delete the row")
    for name in ("Force", "Settlement"):
        if name in given:
            fail(given[name] & ~placed, name, f"a {name} needs Node or x", "write the Node, or x")
    on_segment = np.zeros(rows.size, dtype=bool)
    for name in _ON_SEGMENT:
        if name in given:
            on_segment |= given[name]
    row_of = _segment_rows(inputs, on_segment, fail)
    for name in _ON_SEGMENT:
        if name in given:
            at = given[name] & (row_of >= 0)
            np.add.at(columns[name][:, 0], row_of[at], table.values(name)[rows[at]])
            if name == "Preload":
                preloaded[row_of[at]] = True
    if "Settlement" in given:
        _add_settlements(inputs, given["Settlement"], settlement, fail)
    if "Force" not in given:
        return nothing
    acting = np.flatnonzero(given["Force"] & placed)
    return acting, table.values("Force")[rows[acting]][:, None]


def _segment_rows(inputs: Inputs, needed: Flags, fail) -> Ints:  # type: ignore[no-untyped-def]  # a closure of the caller's
    """Row of the segments table that each load names by its number within its mark; -1 where none."""
    loads, nodes = inputs.loads, inputs.nodes
    out = np.full(loads.rows.size, -1, dtype=np.int64)
    if not needed.any():
        return out
    number = loads.table.values("Segment", np.nan)[loads.rows]
    fail(
        needed & np.isnan(number),
        "Segment",
        "an action on a segment needs Segment",
        "write the segment's number, from 1",
    )
    known = ~np.isnan(number)
    count = nodes.count[loads.member]
    outside = known & ((number < 1) | (number > count))
    fail(outside, "Segment", "the member has no segment of that number", "write 1 to the number of its rows")
    at = known & ~outside
    rows = np.flatnonzero(inputs.members.row_member >= 0)
    in_table_order = rows[np.argsort(inputs.members.row_member[rows], kind="stable")]
    out[at] = in_table_order[nodes.first[loads.member[at]] + number[at].astype(np.int64) - 1]
    return out


def _add_settlements(inputs: Inputs, given: Flags, settlement: Floats, fail) -> None:  # type: ignore[no-untyped-def]
    """Add settlements of the loads table to the supports at their places."""
    loads, supports = inputs.loads, inputs.supports
    values = loads.table.values("Settlement")[loads.rows]
    by_place: dict[tuple[int, int, float], list[int]] = {}
    for k, key in enumerate(_keys(supports.places.node, supports.places.segment, supports.places.x)):
        by_place.setdefault(key, []).append(k)
    lost = np.zeros(given.size, dtype=bool)
    keys = _keys(loads.places.node, loads.places.segment, loads.places.x)
    for k in np.flatnonzero(given).tolist():
        found = by_place.get(keys[k], [])
        lost[k] = not found
        settlement[found, 0] += values[k]
    fail(lost, "Settlement", "no support stands at the place that settles", "name a Node or x of the supports table")


def _keys(node: Ints, segment: Ints, x: Floats) -> list[tuple[int, int, float]]:
    inside = np.where(segment >= 0, np.round(x, 9), 0.0)
    return list(zip(node.tolist(), segment.tolist(), inside.tolist(), strict=True))
