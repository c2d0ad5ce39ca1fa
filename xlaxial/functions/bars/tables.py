"""The tables of a call, read and checked row by row, before any mechanics."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from xlaxial.arrays import Flags, Ints
from xlaxial.functions.bars.members import Members, find_members, rows_of_members
from xlaxial.functions.bars.nodes import Nodes, Places, find_places, number_nodes
from xlaxial.functions.bars.sections import Sections, read_sections
from xlaxial.functions.memory import Memory, content_key
from xlaxial.problems import Problem
from xlaxial.tables.headings import TABLES
from xlaxial.tables.layout import Layout
from xlaxial.tables.read import TOTALS, Table, read_table
from xlaxial.tables.settings import Settings
from xlaxial.units import normal

_SHARED: Memory[Table] = Memory(32)
LATER = "is not solved by this version"


@dataclass(frozen=True)
class Placed:
    """Rows of a supports or loads table with the member and the place that each acts at."""

    table: Table
    rows: Ints  # (n,) row of the table; a row that holds for every member stands once for each
    member: Ints  # (n,)
    places: Places
    lost: bool = False  # a row that holds inputs could be told to belong to no member


@dataclass(frozen=True)
class Inputs:
    """A schedule as read."""

    settings: Settings
    segments: Table
    members: Members
    sections: Sections
    nodes: Nodes
    supports: Placed
    loads: Placed
    cases: tuple[str, ...]  # names of the load cases that stand in the loads table
    remarks: tuple[str, ...]  # what every Status is to say
    one_row: bool = False  # headings were handed over: the other tables may name marks that stand elsewhere

    def problems(self) -> list[Problem]:
        """All problems of the inputs, table by table."""
        found = [*self.settings.problems]
        for table in (self.segments, self.supports.table, self.loads.table):
            found += table.problems
        return found


def read_inputs(segments: Any, supports: Any, loads: Any, settings: Settings, headings: Any = None) -> Inputs:
    """Read the tables of a call.

    Parameters
    ----------
    segments, supports, loads : rows of cells
        The tables; loads may be None.
    settings : Settings
        The call's settings.
    headings : rows of cells, optional
        Headings of a segments table that comes without them; rows of other tables whose marks stand elsewhere are
        then passed over.

    Returns
    -------
    Inputs
        Members with a wrong row stand in `members.faults`; nothing is raised.
    """
    table = read_table(segments, "segments", settings, headings)
    members = find_members(table)
    if table.unusable:
        members.faults.clear()
    _refuse_laws(table, members)
    sections = read_sections(table, members)
    nodes = number_nodes(table, members, sections.length)
    one_row = headings is not None
    support_table = _optional(supports, "supports", settings, one_row)
    load_table = _optional(loads, "loads", settings, one_row)
    placed_supports = _place(support_table, members, nodes, sections, one_row)
    _check_supports(placed_supports, members)
    placed_loads = _place(load_table, members, nodes, sections, one_row)
    cases = tuple(dict.fromkeys(case for case in load_table.labels.get("Case", []) if case is not None))
    remarks = []
    astray = table.filled & (members.row_member < 0)
    if any(table.marks[i] is None or normal(table.marks[i]) not in TOTALS for i in np.flatnonzero(astray).tolist()):
        remarks.append("rows of the segments table name no member: see Problems")
    for placed in (placed_supports, placed_loads):
        other = placed.table
        held = "Mark" not in other.layout.headings and members.count > 1 and bool(other.filled.any())
        if held:
            remarks.append(f"the {other.kind} table has no Mark: held for every member")
        if placed.lost:
            remarks.append(f"rows of the {other.kind} table name no member: see Problems")
    return Inputs(
        settings, table, members, sections, nodes, placed_supports, placed_loads, cases, tuple(remarks), one_row
    )


def _optional(block: Any, kind: str, settings: Settings, one_row: bool) -> Table:
    """Read a table that may be left out; calls of one row each share what they read."""
    if block is None:
        return Table(kind, [], Layout(0, 0, {}), 0)
    if not one_row:
        return read_table(block, kind, settings)
    key = (kind, settings.headings, settings["Blank mark"], settings["Decimal mark"], content_key(block))
    table = _SHARED.get(key, lambda: read_table(block, kind, settings))
    return replace(table, wrong=dict(table.wrong), problems=list(table.problems))


def _place(table: Table, members: Members, nodes: Nodes, sections: Sections, one_row: bool) -> Placed:
    """Find the member and the place of each row of a supports or loads table."""
    if table.unusable:
        for each in range(members.count):
            members.fail(each, table.layout.problems[0])
    if table.unusable or not table.n_rows:
        none = np.zeros(0, dtype=np.int64)
        return Placed(table, none, none, Places(none, none, np.zeros(0)))
    member = rows_of_members(table, members, one_row)
    rows = np.flatnonzero(member != -1)
    own = member[rows]
    if bool((own == -2).any()):
        rows, own = np.repeat(rows, members.count), np.tile(np.arange(members.count), rows.size)
    _refuse_laws(table, members, rows, own)
    places = find_places(table, rows, own, nodes, members, sections.length)
    lost = table.filled & (member == -1)
    if one_row:  # marks that stand elsewhere are passed over
        lost &= np.array([mark is None for mark in table.marks], dtype=bool)
    return Placed(table, rows, own, places, bool(lost.any()))


def _refuse_laws(table: Table, members: Members, rows: Ints | None = None, own: Ints | None = None) -> None:
    """Refuse rows that ask for a law that is not linear: never pass a gap or a stage over in silence."""
    if rows is None or own is None:
        rows = np.flatnonzero(members.row_member >= 0)
        own = members.row_member[rows]

    if not table.layout.has("Gap", "Slack", "Slip force", "Works in", "Side", "Stage", "Remove"):
        return

    def refuse(mask: Flags, term: str, what: str) -> None:
        for k in np.flatnonzero(mask[rows]).tolist():
            problem = Problem(f"{what} {LATER}", f"clear {term}, or leave the member out")
            members.fail_row(table, int(rows[k]), problem, term, int(own[k]))

    for term, what in (("Gap", "a gap"), ("Slack", "slack"), ("Slip force", "a slipping support")):
        if table.layout.has(term):
            refuse(table.present(term) & (table.values(term) != 0.0), term, what)
    for term in ("Works in", "Side"):
        if table.layout.has(term):
            both = np.array([label is None or label.lower() == "both" for label in table.labels[term]], dtype=bool)
            refuse(~both, term, "a one-sided segment or support")
    for term, what in (("Stage", "a construction stage"), ("Remove", "removing a segment")):
        if table.layout.has(term):
            refuse(table.present(term), term, what)


def _check_supports(placed: Placed, members: Members) -> None:
    """Refuse rows without a place, and two rigid supports at one place."""
    table, places = placed.table, placed.places
    if not placed.rows.size:
        return
    nowhere = (places.node < 0) & (places.segment < 0)
    for k in np.flatnonzero(nowhere).tolist():
        problem = Problem("the support stands nowhere", "write its Node, or x")
        term = "Node" if table.layout.has("Node") else "x"
        members.fail_row_once(table, int(placed.rows[k]), problem, term, int(placed.member[k]))
    rigid = ~table.present("Stiffness")[placed.rows] & ~nowhere
    seen: dict[tuple[int, int, float], int] = {}
    node = places.node[rigid]
    if not bool((places.segment >= 0).any()) and np.unique(node).size == node.size:
        return
    for k in np.flatnonzero(rigid).tolist():
        inside = places.segment[k] >= 0
        key = (int(places.node[k]), int(places.segment[k]), round(float(places.x[k]), 9) if inside else 0.0)
        if key in seen:
            first = table.address(int(placed.rows[seen[key]]))
            problem = Problem(
                f"a rigid support stands at this place already ({first})", "keep one, or give one a Stiffness"
            )
            members.fail_row(table, int(placed.rows[k]), problem, "Stiffness", int(placed.member[k]))
        seen.setdefault(key, k)


def missing_columns(table: Table) -> Problem | None:
    """Return the problem of a segments table that lacks a column which every row needs."""
    layout = table.layout
    if not layout.has("Length"):
        what, remedy = (
            "there is no heading Length",
            'head a column "Length (mm)", or map it by the setting Heading: Length',
        )
    elif not layout.has("Area", "Diameter", "Outside diameter"):
        what, remedy = "no heading gives the section", 'head a column "Area (mm2)" or "Diameter (mm)"'
    elif not layout.has("E", "Material"):
        what, remedy = "no heading gives the modulus", 'head a column "E (GPa)" or "Material"'
    else:
        return None
    return replace(
        Problem(what, remedy, table=TABLES[table.kind].name), cell=table.address(layout.heading_row - layout.first_row)
    )
