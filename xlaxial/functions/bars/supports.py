"""Reactions by row of the supports table."""

from __future__ import annotations

from typing import Any

import numpy as np

from xlaxial.arrays import Floats
from xlaxial.functions.bars.results import ALL_CASES
from xlaxial.functions.bars.solution import Solution
from xlaxial.problems import Problem
from xlaxial.tables.words import ResultWord


class ReactionResults:
    """Results per row of the supports table, SI, nan where there is none."""

    def __init__(self, solution: Solution) -> None:
        self._solution = solution
        self._placed = solution.inputs.supports
        table = self._placed.table
        self.n_rows = max(len(table.block) - 1, 1) if table.unusable else max(table.n_rows, 1)

    def __call__(self, word: ResultWord) -> Floats | list[Any]:
        """Return the results of a word for every row of the supports table."""
        solution, placed = self._solution, self._placed
        if word.dimension == "force":
            out = np.full(self.n_rows, np.nan)
            out[placed.rows[solution.support_entries]] = solution.state.reaction[:, 0]
            return out
        texts: list[Any] = [None] * self.n_rows
        if word.name == "State":
            for entry, k in zip(
                solution.support_entries.tolist(), solution.network.supports.stiffness.tolist(), strict=True
            ):
                texts[int(placed.rows[entry])] = "rigid" if np.isinf(k) else "elastic"
        elif word.name == "Status":
            notes = solution.member_notes()
            for entry in solution.support_entries.tolist():
                said = notes[int(placed.member[entry])]
                texts[int(placed.rows[entry])] = "; ".join(["ok", *said])
        else:
            texts = [ALL_CASES] * self.n_rows
        return texts

    def failed(self) -> dict[int, Problem]:
        """Rows without a reaction, and why."""
        table, inputs = self._placed.table, self._solution.inputs
        if table.unusable or not table.n_rows:
            first = table.layout.problems[0] if table.unusable else _NO_SUPPORTS
            return dict.fromkeys(range(self.n_rows), first)
        out = dict(table.wrong)
        faults = inputs.members.faults
        several: dict[int, int] = {}
        for row, member in zip(self._placed.rows.tolist(), self._placed.member.tolist(), strict=True):
            several[row] = several.get(row, 0) + 1
            if member in faults:
                out.setdefault(row, faults[member])
        if inputs.one_row:
            for row in np.flatnonzero(table.filled).tolist():
                if row not in several:
                    out.setdefault(
                        row,
                        Problem(
                            "the row belongs to no member of this call",
                            "read it in the call of its own member",
                            table.address(row),
                            code="#N/A",
                        ),
                    )
        for row, count in several.items():
            if count > 1:
                what = "the row holds for several members"
                remedy = "give the supports table a Mark column to read its reactions"
                out.setdefault(row, Problem(what, remedy, table.address(row), table="supports", code="#N/A"))
        return out

    def blank(self) -> list[int]:
        """Rows that stay blank: blank and note rows."""
        table = self._placed.table
        held = np.zeros(self.n_rows, dtype=bool)
        held[self._placed.rows] = True
        held[list(self.failed())] = True
        return [] if table.unusable else np.flatnonzero(~held).tolist()


_NO_SUPPORTS = Problem(
    "the supports table has no rows", "include the rows below the headings in the range", table="supports"
)
