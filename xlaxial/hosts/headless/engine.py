"""The formula engine behind a small interface of ours, so that it can be replaced.

Facts of the engine (formualizer 0.13) that are kept in here: a cell is never given None, which would mask a later
spill; an error is a dictionary; None from a function would become 0, and a NaN would pass as a number; dates come out
as datetimes, rounded, unless serial numbers are asked for; a value set by itself costs as much as a whole block; a new
workbook has a sheet Sheet1 already, and a second one that differs in case alone is not found by formulas.
"""

from __future__ import annotations

import datetime as dt
import functools
import math
import threading
from collections.abc import Callable, Iterator, Mapping, Sequence
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
_FIRST_SHEET = "Sheet1"


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
        settings.enable_parallel = False  # our functions are not called from two threads at once
        settings.date_system = "1904" if date_1904 else "1900"
        mode = formualizer.WorkbookMode.Ephemeral
        self._book = formualizer.Workbook(config=formualizer.WorkbookConfig(mode=mode, eval_config=settings))
        self._book.set_temporal_egress("serial")
        self._seconds = seconds
        self._names: dict[str, str] = {}  # where the engine's name of a sheet is another one

    def add_function(self, name: str, function: Callable[..., Any]) -> None:
        """Add a function; it gets and returns what the engine holds."""
        self._book.register_function(name, function, min_args=0, max_args=None)

    def add_sheet(self, name: str) -> None:
        """Add an empty sheet; the engine begins with one of its own, which takes the place of ours in any case."""
        if name.lower() == _FIRST_SHEET.lower():
            self._names[name] = _FIRST_SHEET
        else:
            self._book.add_sheet(name)

    def set_rows(self, sheet: str, rows: Mapping[int, Sequence[Any]]) -> None:
        """Put rows of values into a sheet, each from column 1 on, by row number; blanks are passed over."""
        open_blocks: dict[tuple[int, int], int] = {}  # (first, last) column of a run -> row at which its block starts
        before = 0
        for row in [*sorted(rows), 0]:
            runs = set(_runs(rows[row])) if row else set()
            if row != before + 1:
                self._close(sheet, rows, open_blocks, list(open_blocks), before)
            self._close(sheet, rows, open_blocks, [run for run in open_blocks if run not in runs], before)
            for run in runs:
                open_blocks.setdefault(run, row)
            before = row

    def _close(
        self,
        sheet: str,
        rows: Mapping[int, Sequence[Any]],
        open_blocks: dict[tuple[int, int], int],
        ended: Sequence[tuple[int, int]],
        last_row: int,
    ) -> None:
        """Hand over the blocks that end with a row."""
        for first, last in ended:
            start = open_blocks.pop((first, last))
            block = [[to_engine(v) for v in rows[row][first:last]] for row in range(start, last_row + 1)]
            self._book.set_values_batch(self._names.get(sheet, sheet), start, first + 1, block)

    def set_value(self, sheet: str, row: int, column: int, value: Any) -> None:
        """Put a value into a cell; a blank is passed over."""
        if value is not None:
            self._book.set_values_batch(self._names.get(sheet, sheet), row, column, [[to_engine(value)]])

    def set_formula(self, sheet: str, row: int, column: int, formula: str) -> None:
        """Put a formula into a cell; raises ValueError where the engine cannot read it."""
        try:
            self._book.set_formula(self._names.get(sheet, sheet), row, column, formula)
        except (RuntimeError, formualizer.ParserError) as wrong:
            raise ValueError("it reads its own cell" if "Self-reference" in str(wrong) else str(wrong)) from None

    def evaluate(self) -> None:
        """Evaluate every formula.

        Raises
        ------
        TimeoutError
            It takes longer than allowed.
        """
        limit = threading.Timer(self._seconds, self._book.cancel)  # the engine's own deadline lets long layers finish
        limit.daemon = True
        limit.start()
        try:
            self._book.evaluate_all()
        except (RuntimeError, formualizer.ExcelEvaluationError) as wrong:
            raise TimeoutError(str(wrong)) from None
        finally:
            limit.cancel()

    def value(self, sheet: str, row: int, column: int) -> Any:
        """Return a cell's value, or `Unevaluated`."""
        return from_engine(self._book.get_value(self._names.get(sheet, sheet), row, column))


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
