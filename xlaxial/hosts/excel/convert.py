"""Cells as they come from Excel through COM, and go back; no part of Excel or xlwings is needed here.

Over COM every number is a float, and a whole number is an error value; that holds in both directions, so that no text a
user could type can stand for an error, and no number is touched on its way.
"""

from __future__ import annotations

import datetime as dt
import decimal
import math
from collections.abc import Callable, Sequence
from typing import Any

from xlaxial.cells import Cell, CellError, CellRange

# Numbers of the error values. Source: Excel VBA reference, XlCVError enumeration.
ERROR_NUMBERS = {
    "#NULL!": 2000,
    "#DIV/0!": 2007,
    "#VALUE!": 2015,
    "#REF!": 2023,
    "#NAME?": 2029,
    "#NUM!": 2036,
    "#N/A": 2042,
    "#GETTING_DATA": 2043,
    "#SPILL!": 2045,
    "#CONNECT!": 2046,
    "#BLOCKED!": 2047,
    "#UNKNOWN!": 2048,
    "#FIELD!": 2049,
    "#CALC!": 2050,
}
LONGEST = 255
"""Characters that a text inside an array may have: one longer text turns the whole array into #VALUE!."""

_CODES = {number: code for code, number in ERROR_NUMBERS.items()}
_SCODE = -2146828288  # 0x800A0000 as a signed number: an error value's number is added to it
_ERRORS = range(_SCODE + 2000, _SCODE + 2100)
_INF = math.inf
_DAY_ZERO = dt.date(1899, 12, 30)  # serial number 0: a time of the day without a date

DOWN, RIGHT = 1, 2
"""Marks of a place: the range reached the sheet's last row, its last column."""

OMITTED = "-"
"""The place of an argument that was left out."""


def _of_int(value: int) -> Cell:
    if value in _ERRORS:
        return CellError(_CODES.get(value - _SCODE, "#VALUE!"))
    return float(value)  # from a formula in VBA, not from a cell


def _of_date(value: dt.datetime) -> Cell:
    plain = dt.datetime(value.year, value.month, value.day, value.hour, value.minute, value.second, value.microsecond)
    return plain.time() if plain.date() == _DAY_ZERO else plain


def cell_in(value: Any) -> Cell:
    """Return a cell from what COM brought: a text of no length is a blank."""
    if type(value) is float or value is None or isinstance(value, bool):
        return value
    if isinstance(value, str):
        return value or None
    if isinstance(value, int):
        return _of_int(value)
    if isinstance(value, (float, decimal.Decimal)):
        return float(value)
    if isinstance(value, dt.datetime):  # a subclass with a time zone, which no cell has
        return _of_date(value)
    return CellError("#VALUE!")


def _row_in(row: Sequence[Any]) -> list[Cell]:
    return [cell if type(cell) is float else cell_in(cell) for cell in row]


def argument_in(value: Any, place: str = "") -> Any:
    """Return an argument as `xlaxial.functions` takes it.

    Parameters
    ----------
    value : object
        A value, or a tuple of rows (of one dimension: one row) from a range or an inline array.
    place : str, optional
        Of a range: ``row,column,open,sheet``, row and column from 1, `open` the sum of `DOWN` and `RIGHT` for a range
        that reaches the sheet's end and was cut off at the last used cell. Empty for what is no range, `OMITTED` for
        an argument left out.

    Returns
    -------
    None, cell, list of lists or xlaxial.CellRange
        Blank rows and columns at an open end are cut off.
    """
    if place == OMITTED:
        return None
    rows = [_row_in(row) for row in _two_dimensional(value)] if isinstance(value, tuple) else [[cell_in(value)]]
    if not place:
        return rows if isinstance(value, tuple) else rows[0][0]
    first_row, first_column, ends, sheet = place.split(",", 3)
    if int(ends) & DOWN:
        while len(rows) > 1 and not any(cell is not None for cell in rows[-1]):
            rows.pop()
    if int(ends) & RIGHT:
        width = max(max((n + 1 for n, cell in enumerate(row) if cell is not None), default=1) for row in rows)
        rows = [row[:width] for row in rows]
    return CellRange(rows, sheet, int(first_row), int(first_column))


def _two_dimensional(value: tuple[Any, ...]) -> Sequence[Sequence[Any]]:
    return value if value and isinstance(value[0], tuple) else (value,)


def _text(value: str) -> str:
    if len(value) <= LONGEST // 2:
        return value
    units = value.encode("utf-16-le", "surrogatepass")
    if len(units) <= 2 * LONGEST:
        return value
    return units[: 2 * (LONGEST - 1)].decode("utf-16-le", "ignore") + "…"


def _of_float(value: float) -> float | int:
    return value if math.isfinite(value) else ERROR_NUMBERS["#NUM!"]


_OUT: dict[type, Callable[[Any], Any]] = {
    float: _of_float,
    int: lambda value: _of_float(float(value)),
    bool: bool,
    str: _text,
    CellError: lambda value: ERROR_NUMBERS[value.code],
    type(None): lambda value: "",  # nothing at all would show as 0
    dt.datetime: dt.datetime.isoformat,
    dt.date: dt.date.isoformat,
    dt.time: dt.time.isoformat,
}


def cell_out(value: Any) -> Any:
    """Return a cell as the wrapper takes it: float, text, bool, or a whole number that it makes an error value."""
    convert = _OUT.get(type(value))
    if convert is not None:
        return convert(value)
    if type(value).__name__ in ("bool", "bool_"):  # numpy's truth values
        return bool(value)
    try:
        return _of_float(float(value))  # numpy's numbers
    except (TypeError, ValueError, OverflowError):
        return _text(str(value))


def grid_out(rows: Any) -> list[list[Any]]:
    """Return rows of cells as the wrapper takes them, made rectangular with blanks; nothing at all is #VALUE!."""
    out = [[cell if type(cell) is float and -_INF < cell < _INF else cell_out(cell) for cell in row] for row in rows]
    width = max(map(len, out), default=0)
    if not width:
        return [[ERROR_NUMBERS["#VALUE!"]]]
    return [row if len(row) == width else row + [""] * (width - len(row)) for row in out]
