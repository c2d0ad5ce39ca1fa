"""Which rows belong to which member, and what is wrong with a member."""

from __future__ import annotations

import difflib
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np

from xlaxial.arrays import Flags, Ints
from xlaxial.problems import Problem
from xlaxial.tables.read import Table


@dataclass
class Members:
    """The members of a schedule: the marks of its segments, in order of first appearance."""

    marks: list[str]  # (n_members,)
    code_of: dict[str, int]  # member by mark
    row_member: Ints  # (n_rows,) member of each row of the segments table, -1 where the row is none's
    faults: dict[int, Problem] = field(default_factory=dict)  # what keeps a member from being solved

    @property
    def count(self) -> int:
        """Number of members."""
        return len(self.marks)

    def fail(self, member: int, problem: Problem) -> None:
        """Note that a member cannot be solved; the first reason stands."""
        if member >= 0:
            self.faults.setdefault(member, problem if problem.mark else replace(problem, mark=self.marks[member]))

    def fail_row(self, table: Table, row: int, problem: Problem, term: str | None, member: int) -> None:
        """Report a row of a table and fail its member."""
        mark = self.marks[member] if member >= 0 else ""
        table.report(row, replace(problem, mark=problem.mark or mark), term)
        self.fail(member, table.wrong[row])

    def fail_row_once(self, table: Table, row: int, problem: Problem, term: str | None, member: int) -> None:
        """Fail a member by a row, reporting the row only where nothing is wrong with it yet.

        A row that holds for several members fails each of them by what is wrong with it.
        """
        if row in table.wrong:
            self.fail(member, table.wrong[row])
        else:
            self.fail_row(table, row, problem, term, member)

    def good(self) -> Flags:
        """Members without a fault."""
        flags = np.ones(self.count, dtype=bool)
        flags[list(self.faults)] = False
        return flags


def find_members(table: Table) -> Members:
    """Group the rows of a segments table by mark.

    A row with nothing but a mark is a note, unless other rows give that mark inputs: then its inputs are missing.
    """
    ids: dict[Any, int] = {}
    filled = table.filled
    if bool(filled.all()) and not table.wrong:
        ids = {mark: member for member, mark in enumerate(dict.fromkeys(table.marks))}
        row_member = np.fromiter(map(ids.__getitem__, table.marks), dtype=np.int64, count=table.n_rows)
    else:
        row_member = np.full(table.n_rows, -1, dtype=np.int64)
        for i, (mark, holds) in enumerate(zip(table.marks, filled.tolist(), strict=True)):
            if holds and mark is not None and not _of_marks(table, i):
                row_member[i] = ids.setdefault(mark, len(ids))
    members = Members([str(mark) for mark in ids], ids, row_member)
    if not bool(filled.all()):
        for i in np.flatnonzero(~filled).tolist():
            member = ids.get(table.marks[i], -1) if table.marks[i] else -1
            if member >= 0:
                row_member[i] = member
                problem = Problem("the row has a mark but no inputs", "fill it in, or delete its mark")
                members.fail_row(table, i, problem, "Mark", member)
    for row, problem in table.wrong.items():
        members.fail(int(row_member[row]), problem)
    return members


def _of_marks(table: Table, row: int) -> bool:
    """Whether a row fails by its mark alone (a totals row, an error value), so that it belongs to no member."""
    problem = table.wrong.get(row)
    mark_heading = table.layout.headings.get("Mark")
    return problem is not None and mark_heading is not None and problem.heading == mark_heading.text


def rows_of_members(table: Table, members: Members, one_row_call: bool) -> Ints:
    """Return the member of each row of a supports or loads table.

    Parameters
    ----------
    table : Table
        Supports or loads, usable.
    members : Members
        Of the segments table; members whose rows cannot be read are failed.
    one_row_call : bool
        Headings were handed over, so that the table may name marks that stand elsewhere.

    Returns
    -------
    Ints
        (n_rows,) member; -1 where the row is blank, a note or names no member (which is a problem of that row);
        -2 where the table has no Mark column and the row holds for every member.
    """
    if "Mark" not in table.layout.headings:
        alone = 0 if members.count == 1 else -2
        out = np.where(table.filled, alone, -1)
        for problem in table.wrong.values():
            for member in range(members.count):
                members.fail(member, problem)
        return out
    codes = {mark: members.code_of.get(mark, -1) for mark in set(table.marks)}
    out = np.fromiter(map(codes.__getitem__, table.marks), dtype=np.int64, count=table.n_rows)
    if bool((out >= 0).all()) and bool(table.filled.all()) and not table.wrong:
        return out
    for i in np.flatnonzero((out < 0) | ~table.filled).tolist():
        mark = table.marks[i]
        if table.filled[i]:
            if mark is not None and i not in table.wrong and not one_row_call:
                near = difflib.get_close_matches(mark, members.marks, 1, 0.6)
                remedy = f"did you mean {near[0]}?" if near else "write a mark of the segments table"
                table.report(i, Problem(f"no segment has the mark {mark!r}", remedy, mark=mark), "Mark")
        elif out[i] >= 0:
            problem = Problem("the row has a mark but no inputs", "fill it in, or delete its mark")
            members.fail_row(table, i, problem, "Mark", int(out[i]))
        else:
            out[i] = -1
    for row, problem in table.wrong.items():
        members.fail(int(out[row]), problem)
    return out
