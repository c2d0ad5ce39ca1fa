"""Results back to rows of cells: numbers in the units that the headings carry, error values where there are none."""

from __future__ import annotations

import gc
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from typing import Any

import numpy as np

from xlaxial.arrays import Floats
from xlaxial.cells import CellError
from xlaxial.problems import Problem
from xlaxial.tables.wanted import Column, Wanted
from xlaxial.tables.words import ResultWord

NOT_APPLICABLE = CellError("#N/A")

Values = Callable[[ResultWord], "Floats | list[Any]"]
"""Gives the results of a word for every row of the answer: SI numbers (nan where not applicable), or texts."""


def answer_rows(
    wanted: Wanted,
    n_rows: int,
    values: Values,
    failed: Mapping[int, Problem],
    blank: Iterable[int] = (),
) -> list[list[Any]]:
    """Lay results out as rows of cells.

    Parameters
    ----------
    wanted : Wanted
        The columns.
    n_rows : int
        Rows of the answer.
    values : callable
        Results of a word.
    failed : mapping of int to Problem
        Rows without a result: their error value, and the message in Status.
    blank : iterable of int
        Rows that stay blank.

    Returns
    -------
    list of rows
        With a heading row first where the call asked for the standard set.
    """
    blank = list(blank)
    codes = {code: CellError(code) for code in {problem.code for problem in failed.values()}}
    unread = "; ".join(problem.text() for problem in wanted.problems())
    columns = [_column(column, n_rows, values, failed, codes, blank, unread) for column in wanted.columns]
    with _uncollected():
        rows = list(map(list, zip(*columns, strict=True))) if columns else []
    if wanted.with_headings:
        rows.insert(0, [column.heading for column in wanted.columns])
    return rows or [[None] * max(len(wanted.columns), 1)]


@contextmanager
def _uncollected() -> Iterator[None]:
    """Hold the collector of cycles back while rows by the thousand are made, none of them in a cycle."""
    was = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was:
            gc.enable()


def _column(
    column: Column,
    n_rows: int,
    values: Values,
    failed: Mapping[int, Problem],
    codes: Mapping[str, CellError],
    blank: Sequence[int],
    unread: str,
) -> list[Any]:
    if column.problem is not None:
        out: list[Any] = [CellError(column.problem.code)] * n_rows
    elif column.word is None:
        return [None] * n_rows
    elif column.word.name == "Mark":
        out = list(values(column.word))
    else:
        out = _cells(column, values(column.word))
        if column.word.name == "Status":
            for row, problem in failed.items():
                out[row] = problem.text()
            if unread:
                out = [text if text is None else f"{text}; {unread}" for text in out]
        else:
            for row, problem in failed.items():
                out[row] = codes[problem.code]
    for row in blank:
        out[row] = None
    return out


def _cells(column: Column, values: Floats | list[Any]) -> list[Any]:
    if isinstance(values, list):
        return list(values)
    if column.unit is not None and column.unit.factor != 1.0:
        values = values / column.unit.factor
    cells: list[Any] = (values + 0.0).tolist()  # no negative zero reaches a cell
    for row in np.flatnonzero(~np.isfinite(values)).tolist():
        cells[row] = NOT_APPLICABLE
    return cells


def problem_rows(problems: Sequence[Problem]) -> list[list[Any]]:
    """Return the answer to "Problems": their number, then cell, what is wrong and how to mend it, a row each."""
    head: list[Any] = [len(problems), None, None]
    return [head, *([p.cell or f"{p.table} table", p.what, p.remedy] for p in problems)]
