"""The formula engine behind a small interface of ours, so that it can be replaced.

Facts of the engine (formualizer 0.13) that are kept in here: a cell is never given None, which would mask a later
spill; an error is a dictionary; None from a function would become 0, and a NaN would pass as a number; dates come out
as datetimes, rounded, unless serial numbers are asked for; a value set by itself costs as much as a whole block.
"""

from __future__ import annotations

import datetime as dt
import functools
import math
from collections.abc import Callable, Iterator, Sequence
from typing import Any

import formualizer
from openpyxl.utils.datetime import to_excel

from xlaxial.cells import CellError

_KINDS = {
    "Null": "#NULL!",
    "Div": "#DIV/0!",
    "Value": "#VALUE!",
    "Ref": "#REF!",
    "Name": "#NAME?",
    "Num": "#NUM!",
    "Na": "#N/A",
    "Spill": "#SPILL!",
    "Calc": "#CALC!",
}
_BACK = {code: kind for kind, code in _KINDS.items()}
CIRCULAR = "Circ"
UNSUPPORTED = "NImpl"


class Unevaluated:
    """What the engine gives for a cell that it cannot evaluate, and why."""

    def __init__(self, reason: str) -> None:
        self.reason = reason


def from_engine(value: Any) -> Any:
    """Turn what the engine holds into a cell."""
    if isinstance(value, dict) and value.get("type") == "Error":
        kind = value.get("kind")
        if kind == CIRCULAR:
            return Unevaluated("circular reference")
        if kind not in _KINDS:
            return Unevaluated("not implemented by the engine")
        return CellError(_KINDS[kind])
    return serial(value)


def serial(value: Any) -> Any:
    """Return a date as its serial number, anything else as it is."""
    if isinstance(value, (dt.datetime, dt.date, dt.time, dt.timedelta)):
        return float(to_excel(value))
    return value


def to_engine(value: Any) -> Any:
    """Turn a cell into what the engine takes; None becomes an empty text."""
    if value is None:
        return ""
    if isinstance(value, CellError):
        return {"type": "Error", "kind": _BACK.get(value.code, "Value")}
    if isinstance(value, float) and not math.isfinite(value):
        return {"type": "Error", "kind": "Num"}
    return serial(value)


class Engine:
    """A workbook in the engine.

    Parameters
    ----------
    date_1904 : bool
        Day 0 of the workbook's dates is 1904-01-01.
    seconds : float
        Longest time that one evaluation may take, s.
    """

    def __init__(self, *, date_1904: bool = False, seconds: float = 120.0) -> None:
        settings = formualizer.EvaluationConfig()
        settings.date_system = "1904" if date_1904 else "1900"
        settings.max_eval_time_ms = int(seconds * 1000)
        mode = formualizer.WorkbookMode.Ephemeral
        self._book = formualizer.Workbook(config=formualizer.WorkbookConfig(mode=mode, eval_config=settings))
        self._book.set_temporal_egress("serial")

    def add_function(self, name: str, function: Callable[..., Any]) -> None:
        """Add a function; it gets and returns what the engine holds."""
        self._book.register_function(name, function, min_args=0, max_args=None)

    def add_sheet(self, name: str) -> None:
        """Add an empty sheet."""
        self._book.add_sheet(name)

    def set_rows(self, sheet: str, row: int, column: int, rows: Sequence[Sequence[Any]]) -> None:
        """Put rows of values below each other from a cell on; blanks are passed over."""
        open_blocks: dict[tuple[int, int], int] = {}  # (first, last) column of a run -> row at which its block starts
        for i in range(len(rows) + 1):
            runs = set(_runs(rows[i])) if i < len(rows) else set()
            for run in [run for run in open_blocks if run not in runs]:
                start, (first, last) = open_blocks.pop(run), run
                block = [[to_engine(value) for value in values[first:last]] for values in rows[start:i]]
                self._book.set_values_batch(sheet, row + start, column + first, block)
            for run in runs:
                open_blocks.setdefault(run, i)

    def set_formula(self, sheet: str, row: int, column: int, formula: str) -> None:
        """Put a formula into a cell; raises ValueError where the engine cannot read it."""
        try:
            self._book.set_formula(sheet, row, column, formula)
        except (RuntimeError, formualizer.ParserError) as wrong:
            raise ValueError("it reads its own cell" if "Self-reference" in str(wrong) else str(wrong)) from None

    def evaluate(self) -> None:
        """Evaluate every formula.

        Raises
        ------
        TimeoutError
            It takes longer than allowed.
        """
        try:
            self._book.evaluate_all()
        except RuntimeError as wrong:
            raise TimeoutError(str(wrong)) from None

    def value(self, sheet: str, row: int, column: int) -> Any:
        """Return a cell's value, or `Unevaluated`."""
        return from_engine(self._book.get_value(sheet, row, column))


def _runs(values: Sequence[Any]) -> Iterator[tuple[int, int]]:
    """(first, one past the last) of each run of cells that are not blank."""
    first = None
    for i, value in enumerate(values):
        if value is None:
            if first is not None:
                yield first, i
                first = None
        elif first is None:
            first = i
    if first is not None:
        yield first, len(values)


@functools.cache
def knows(function: str) -> bool:
    """Whether the engine has a function: called without arguments, one that it lacks gives #NAME?."""
    book = formualizer.Workbook(mode=formualizer.WorkbookMode.Ephemeral)
    book.add_sheet("S")
    try:
        book.set_formula("S", 1, 1, f"={function}()")
        book.evaluate_all()
    except RuntimeError:
        return False
    value = book.get_value("S", 1, 1)
    return not (isinstance(value, dict) and value.get("kind") in ("Name", "NImpl"))
