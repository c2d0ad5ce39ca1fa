"""Nodes of members as their users name them: counted along a series, or labelled by From and To; and places at x."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.functions.bars.members import Members
from xlaxial.problems import Problem
from xlaxial.tables.read import Table

AT_NODE = 1e-9  # a place nearer to a node than this part of its member's length is at the node


@dataclass(frozen=True)
class Nodes:
    """Where the segments of all members stand and how their nodes are numbered."""

    rows: Ints  # (n_segments,) row of the segments table of each segment, member by member, in order along it
    member: Ints  # (n_segments,) member of each segment
    start: Ints  # (n_segments,) node number
    end: Ints  # (n_segments,) node number
    n_nodes: int
    node_member: Ints  # (n_nodes,)
    labels: dict[tuple[int, Any], int] | None  # node by (member, label); None where all members are series
    first: Ints  # (n_members,) position in `rows` of a member's first segment
    count: Ints  # (n_members,) segments of a member
    chain: Flags  # (n_members,) unbranched, in order: x has a meaning
    from_start: Floats  # (n_segments,) m from the member's first node to the segment's start, chains only

    def find(self, member: Ints, labels: list[Any]) -> Ints:
        """Return node numbers by member and label, -1 where there is none.

        Parameters
        ----------
        member : Ints
            (n,) members; negative ones are not looked up.
        labels : list of str or None
            (n,) labels as the user wrote them.
        """
        if self.labels is not None:
            found = [self.labels.get(key, -1) for key in zip(member.tolist(), labels, strict=True)]
            return np.array(found, dtype=np.int64)
        numbers = {label: int(label) if label is not None and label.isdecimal() else -1 for label in set(labels)}
        number = np.fromiter(map(numbers.__getitem__, labels), dtype=np.int64, count=len(labels))
        known = (member >= 0) & (number >= 0)
        at = np.where(member >= 0, member, 0)
        known &= number <= self.count[at]
        return np.where(known, self.first[at] + at + number, -1)

    def label(self, node: int) -> str:
        """Return a node's name as its user would write it."""
        if self.labels is not None:
            return str(next(label for (_, label), number in self.labels.items() if number == node))
        member = int(self.node_member[node])
        return str(node - int(self.first[member]) - member)


def number_nodes(table: Table, members: Members, length: Floats) -> Nodes:
    """Put the segments of each member in order and number the nodes of all members.

    Rows whose ends or order cannot be told fail their members.
    """
    rows = np.flatnonzero(members.row_member >= 0)
    member = members.row_member[rows]
    if table.layout.has("Order"):
        order = table.values("Order", np.nan)[rows]
        for i in rows[np.isnan(order)].tolist():
            members.fail_row(
                table,
                i,
                Problem("Order is blank", "number every row of the member"),
                "Order",
                int(members.row_member[i]),
            )
        sort = np.lexsort((rows, order, member))
        rows, member, order = rows[sort], member[sort], order[sort]
        for i in rows[1:][(np.diff(order) == 0) & (np.diff(member) == 0)].tolist():
            problem = Problem("the same Order stands twice in the member", "number its rows 1, 2, 3 ...")
            members.fail_row(table, i, problem, "Order", int(members.row_member[i]))
    elif member.size and bool((np.diff(member) < 0).any()):
        sort = np.argsort(member, kind="stable")
        rows, member = rows[sort], member[sort]
    count = np.bincount(member, minlength=members.count)
    first = np.cumsum(count) - count
    if table.layout.has("From", "To"):
        start, end, labels, node_member = _labelled(table, members, rows, member)
        joined = (end[:-1] == start[1:]) | (np.diff(member) != 0)
        chain = np.ones(members.count, dtype=bool)
        chain[member[1:][~joined]] = False
        chain &= np.bincount(node_member, minlength=members.count) == count + 1
    else:
        start = np.arange(rows.size) + member
        end, labels = start + 1, None
        node_member = np.repeat(np.arange(members.count), count + 1)
        chain = np.ones(members.count, dtype=bool)
    lengths = np.where(np.isnan(length), 0.0, length)[rows].astype(
        np.longdouble
    )  # long sums of many members lose no digits of one
    ends = np.cumsum(lengths)
    from_start = ends - lengths
    if rows.size:
        from_start -= from_start[first[member]]
    return Nodes(
        rows,
        member,
        start,
        end,
        int(node_member.size),
        node_member,
        labels,
        first,
        count,
        chain,
        from_start.astype(np.float64),
    )


def _labelled(
    table: Table, members: Members, rows: Ints, member: Ints
) -> tuple[Ints, Ints, dict[tuple[int, Any], int], Ints]:
    """Number the nodes that From and To name."""
    for name, other in (("From", "To"), ("To", "From")):
        column = table.labels.get(name, [None] * table.n_rows)
        for i in rows.tolist():
            if column[i] is None and i not in table.wrong:
                what = f"{name} is blank" if name in table.labels else f"the column {name} is missing"
                remedy = f"name the node, or leave out both {other} and {name} where segments stand in series"
                members.fail_row(table, i, Problem(what, remedy), name, int(members.row_member[i]))
    ids: dict[tuple[int, Any], int] = {}
    blank = [None] * table.n_rows
    starts, ends = table.labels.get("From", blank), table.labels.get("To", blank)
    pairs = [
        (ids.setdefault((m, starts[i]), len(ids)), ids.setdefault((m, ends[i]), len(ids)))
        for i, m in zip(rows.tolist(), member.tolist(), strict=True)
    ]
    ends_of = np.array(pairs, dtype=np.int64).reshape(-1, 2)
    for i in rows[ends_of[:, 0] == ends_of[:, 1]].tolist():
        if i not in table.wrong:
            problem = Problem("From and To name the same node", "name the node at the other end")
            members.fail_row(table, i, problem, "To", int(members.row_member[i]))
    node_member = np.fromiter((m for m, _ in ids), dtype=np.int64, count=len(ids))
    return ends_of[:, 0], ends_of[:, 1], ids, node_member


@dataclass(frozen=True)
class Places:
    """Where the rows of a supports or loads table act."""

    node: Ints  # (n,) node number, -1 where none
    segment: Ints  # (n,) position in Nodes.rows where a place at x is inside a segment, -1 elsewhere
    x: Floats  # (n,) m from that segment's start


def find_places(table: Table, rows: Ints, member: Ints, nodes: Nodes, members: Members, length: Floats) -> Places:
    """Find the places that Node or x name in rows of a supports or loads table.

    Parameters
    ----------
    table : Table
        Supports or loads.
    rows, member : Ints
        (n,) rows to be looked at and the member of each (a row that holds for every member comes once for each).
    nodes : Nodes
        The members' nodes.
    members : Members
        A row whose place does not exist fails its member.
    length : Floats
        (n_segment_rows,) m, lengths of the segments' rows.
    """
    labels = table.labels.get("Node")
    node = np.full(rows.size, -1, dtype=np.int64)
    named = np.zeros(rows.size, dtype=bool)
    if labels is not None:
        wanted = (
            labels
            if rows.size == len(labels) and bool((np.diff(rows) == 1).all())
            else [labels[i] for i in rows.tolist()]
        )
        node = nodes.find(member, wanted)
        named = table.present("Node")[rows]
        for k in np.flatnonzero(named & (node < 0)).tolist():
            problem = Problem(f"the member has no node {wanted[k]!r}", _node_remedy(nodes, int(member[k])))
            members.fail_row(table, int(rows[k]), problem, "Node", int(member[k]))
    segment, local = np.full(rows.size, -1, dtype=np.int64), np.zeros(rows.size)
    if not table.layout.has("x"):
        return Places(node, segment, local)
    x = table.values("x", np.nan)[rows]
    for k in np.flatnonzero(named & ~np.isnan(x)).tolist():
        problem = Problem("Node and x are both given", "clear one of them")
        members.fail_row(table, int(rows[k]), problem, "x", int(member[k]))
    branched = ~np.isnan(x) & ~nodes.chain[member]
    for k in np.flatnonzero(branched).tolist():
        problem = Problem("x has no meaning on a branched member", "make a node there and name it")
        members.fail_row(table, int(rows[k]), problem, "x", int(member[k]))
    at = np.flatnonzero(~np.isnan(x) & ~named & ~branched)
    if not at.size:
        return Places(node, segment, local)
    own = member[at]
    last = nodes.first[own] + nodes.count[own] - 1
    total = nodes.from_start[last] + length[nodes.rows[last]]
    near = AT_NODE * total
    outside = (x[at] < -near) | (x[at] > total + near)
    for k in at[outside].tolist():
        problem = Problem("x lies outside the member", f"write a value from 0 to its length, {total[at == k][0]:.6g} m")
        members.fail_row(table, int(rows[k]), problem, "x", int(member[k]))
    at, own, near = at[~outside], own[~outside], near[~outside]
    if at.size:
        # one search for all members: each member's starts are shifted past those of the member before
        span = float(np.max(nodes.from_start)) + float(np.nanmax(length)) + 1.0
        keys = nodes.from_start / span + nodes.member
        found = np.searchsorted(keys, np.maximum(x[at], 0.0) / span + own, side="right") - 1
        found = np.clip(found, nodes.first[own], nodes.first[own] + nodes.count[own] - 1)
        inside = x[at] - nodes.from_start[found]
        back = (inside < 0.0) & (found > nodes.first[own])  # the division above may round across a node
        found = found - back
        inside = x[at] - nodes.from_start[found]
        left, right = inside <= near, length[nodes.rows[found]] - inside <= near
        node[at] = np.where(left, nodes.start[found], np.where(right, nodes.end[found], -1))
        segment[at] = np.where(left | right, -1, found)
        local[at] = inside
    return Places(node, segment, local)


def _node_remedy(nodes: Nodes, member: int) -> str:
    if nodes.labels is None:
        return f"write 0 to {int(nodes.count[member])}"
    known = [str(label) for (owner, label) in nodes.labels if owner == member and label is not None]
    return "write " + ", ".join(known[:12]) + (" ..." if len(known) > 12 else "")
