"""The formula engine behind a small interface of ours, so that it can be replaced.

Facts of the engine (formualizer 0.13) that are kept in here: a cell is never given None, which would mask a later
spill; an error is a dictionary; None from a function would become 0, and a NaN would pass as a number.
"""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Callable, Sequence
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
    """A workbook in the engine."""

    def __init__(self) -> None:
        self._book = formualizer.Workbook(mode=formualizer.WorkbookMode.Ephemeral)

    def add_function(self, name: str, function: Callable[..., Any]) -> None:
        """Add a function; it gets and returns what the engine holds."""
        self._book.register_function(name, function, min_args=0, max_args=None)

    def add_sheet(self, name: str) -> None:
        """Add an empty sheet."""
        self._book.add_sheet(name)

    def set_row(self, sheet: str, row: int, column: int, values: Sequence[Any]) -> None:
        """Put values side by side from a cell on; blanks are passed over."""
        first = 0
        while first < len(values):
            if values[first] is None:
                first += 1
                continue
            last = first
            while last < len(values) and values[last] is not None:
                last += 1
            batch = [to_engine(value) for value in values[first:last]]
            self._book.set_values_batch(sheet, row, column + first, [batch])
            first = last

    def set_formula(self, sheet: str, row: int, column: int, formula: str) -> None:
        """Put a formula into a cell; raises ValueError where the engine cannot read it."""
        try:
            formualizer.parse(formula)
            self._book.set_formula(sheet, row, column, formula)
        except (RuntimeError, formualizer.ParserError) as wrong:
            raise ValueError(str(wrong)) from None

    def evaluate(self) -> None:
        """Evaluate every formula."""
        self._book.evaluate_all()

    def value(self, sheet: str, row: int, column: int) -> Any:
        """Return a cell's value, or `Unevaluated`."""
        return from_engine(self._book.get_value(sheet, row, column))
