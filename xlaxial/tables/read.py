"""A block of cells to a table: typed columns in SI, row by row as the user keeps them, with what is wrong and where."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from operator import itemgetter
from typing import Any

import numpy as np

from xlaxial.arrays import Flags, Floats
from xlaxial.cells import CellRange, cell_address
from xlaxial.problems import Problem
from xlaxial.tables.columns import Numbers, read_counts, read_labels, read_numbers
from xlaxial.tables.headings import TABLES
from xlaxial.tables.layout import Layout, find_layout, headings_alone
from xlaxial.tables.settings import Settings
from xlaxial.units import normal

TOTALS = frozenset(
    normal(word) for word in ("Total", "Totals", "Sum", "Σ", "∑", "Subtotal", "Sub-total", "Grand total")
)


@dataclass
class Table:
    """One table of a call, aligned with the user's rows below the headings."""

    kind: str
    block: Any  # the cells as they came
    layout: Layout
    n_rows: int  # data rows, trailing blank rows cut off
    numbers: dict[str, Numbers] = field(default_factory=dict)  # SI, by term
    labels: dict[str, list[Any]] = field(default_factory=dict)  # text columns other than Mark, by term
    marks: list[Any] = field(default_factory=list)  # (n_rows,) label of the member or None
    filled: Flags = field(
        default_factory=lambda: np.zeros(0, dtype=bool)
    )  # any input beside the mark stands in the row
    wrong: dict[int, Problem] = field(default_factory=dict)  # first problem of a row
    problems: list[Problem] = field(default_factory=list)  # all of them, in the order found

    @property
    def unusable(self) -> bool:
        """Whether nothing of the table can be read."""
        return bool(self.layout.problems)

    def address(self, row: int, term: str | None = None) -> str:
        """Where the cell of a data row (from 0) and a term stands."""
        heading = self.layout.headings.get(term) if term else None
        column = heading.column if heading else min((h.column for h in self.layout.headings.values()), default=0)
        return cell_address(self.block, self.layout.first_row + row, column)

    def report(self, row: int, problem: Problem, term: str | None = None) -> None:
        """Note what is wrong in a data row; the first problem of a row is the one that its results show."""
        heading = self.layout.headings.get(term) if term else None
        problem = replace(
            problem,
            cell=problem.cell or self.address(row, term),
            heading=problem.heading or (heading.text if heading else ""),
            table=self.kind,
        )
        self.wrong.setdefault(row, problem)
        self.problems.append(problem)

    def reporter(self, term: str) -> Callable[[int, Problem], None]:
        """Return `report` for one column."""
        return lambda row, problem: self.report(row, problem, term)

    def values(self, term: str, blank: float = 0.0) -> Floats:
        """Return a column in SI with `blank` where nothing (or something wrong) stands."""
        column = self.numbers.get(term)
        if column is None:
            return np.full(self.n_rows, blank)
        return np.where(np.isnan(column.values), blank, column.values) if not np.isnan(blank) else column.values

    def present(self, term: str) -> Flags:
        """Where something stands in a column."""
        if term in self.numbers:
            return self.numbers[term].present
        if term in self.labels:
            labels = self.labels[term]
            if labels.count(None) == 0:
                return np.ones(self.n_rows, dtype=bool)
            return np.array([label is not None for label in labels], dtype=bool)
        return np.zeros(self.n_rows, dtype=bool)

    def filled_marks(self) -> set[Any]:
        """Return the marks of the rows that hold inputs."""
        return set(np.array(self.marks, dtype=object)[self.filled].tolist())


def _is_blank(row: Any) -> bool:
    return all(cell is None or cell == "" for cell in row)


def trimmed(block: Any) -> int:
    """Return the number of rows up to the last one that is not blank."""
    n = len(block)
    while n and (block[n - 1].count(None) == len(block[n - 1]) or _is_blank(block[n - 1])):
        n -= 1
    return n


def read_table(block: Any, kind: str, settings: Settings, headings: Any = None) -> Table:
    """Read a block of cells as a table.

    Parameters
    ----------
    block : rows of cells
        With its headings, or data rows alone where `headings` are handed over.
    kind : str
        A key of `xlaxial.tables.headings.TABLES`.
    settings : Settings
        Blank mark, Decimal mark and the user's own headings.
    headings : rows of cells, optional
        The heading row (and units row) of a block that has none.

    Returns
    -------
    Table
        Rows that cannot be read are in `wrong`; nothing is raised.
    """
    n_block = trimmed(block)
    if headings is not None:
        layout = replace(headings_alone(headings, kind, settings), first_row=0)
    else:
        layout = find_layout(block, TABLES[kind], settings)
    first = layout.first_row
    n = max(n_block - first, 0)
    table = Table(kind, block, layout, n, filled=np.zeros(n, dtype=bool), marks=[None] * n)
    table.problems.extend(layout.problems)
    if table.unusable:
        return table
    rows = (
        block[first : first + n]
        if not isinstance(block, CellRange)
        else list.__getitem__(block, slice(first, first + n))
    )
    width = max(heading.column for heading in layout.headings.values()) + 1
    if n and min(map(len, rows)) < width:
        rows = [[*row, *([None] * (width - len(row)))] for row in rows]
    for name, heading in layout.headings.items():
        cells = list(map(itemgetter(heading.column), rows))
        if heading.term.dimension == "text":
            labels = read_labels(cells, heading, table.reporter(name))
            if name == "Mark":
                table.marks = labels
                continue
            table.labels[name] = labels
        elif heading.term.dimension == "count":
            table.numbers[name] = read_counts(cells, heading, table.reporter(name))
        else:
            table.numbers[name] = read_numbers(cells, heading, settings["Decimal mark"], table.reporter(name))
        table.filled |= table.present(name)
    if table.wrong:
        table.filled[list(table.wrong)] = True
    _settle_marks(table, settings)
    return table


def _settle_marks(table: Table, settings: Settings) -> None:
    """Fill blank marks where the settings say so; refuse totals rows and rows without a mark."""
    if "Mark" not in table.layout.headings:
        table.marks = [""] * table.n_rows
        return
    marks = table.marks
    if settings["Blank mark"] == "as above":
        above, filled = None, table.filled.tolist()
        for i, mark in enumerate(marks):
            if mark is not None and filled[i]:
                above = mark
            elif mark is None and filled[i] and i not in table.wrong:
                marks[i] = above
    unique = set(marks)
    totals = {mark for mark in unique if mark is not None and normal(mark) in TOTALS}
    if totals:
        for i, mark in enumerate(marks):
            if mark in totals:
                what = f"{mark!r} stands in the column of marks"
                table.report(i, Problem(what, "end the range above the totals row", mark=mark), "Mark")
                table.filled[i] = True
    if None in unique:
        for i in np.flatnonzero(table.filled).tolist():
            if marks[i] is None and i not in table.wrong:
                remedy = "write its mark, or set Blank mark to as above"
                table.report(i, Problem("the row has no mark", remedy), "Mark")
