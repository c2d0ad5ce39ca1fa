"""Cells as Calc hands them over and takes them back; no part of the office is needed here."""

from __future__ import annotations

import datetime as dt
import math
import struct
from collections.abc import Callable, Sequence
from typing import Any

from xlaxial.cells import Cell, CellError

# Numbers of the error values: LibreOffice Help, "Error Codes in LibreOffice Calc".
ERROR_NUMBERS = {
    "#NULL!": 521,
    "#DIV/0!": 532,
    "#VALUE!": 519,
    "#REF!": 524,
    "#NAME?": 525,
    "#NUM!": 503,
    "#N/A": 32767,
}

# Further numbers that Calc shows as "Err:..." or by another name, by the error value that an .xlsx file holds for them.
_READ = {number: code for code, number in ERROR_NUMBERS.items()} | {
    513: "#NUM!",  # text overflow is none of ours; 513 and 523 are failures of a calculation
    523: "#NUM!",
    522: "#REF!",  # a reference that returns to its own cell
    526: "#NAME?",
}


def error_value(code: str) -> float:
    """Return the number that Calc shows as an error value: a NaN with the error's number in its payload."""
    bits = 0x7FF8000000000000 | ERROR_NUMBERS.get(code, ERROR_NUMBERS["#VALUE!"])
    value: float = struct.unpack("<d", struct.pack("<Q", bits))[0]
    return value


def error_cell(number: int) -> CellError:
    """Return the error cell of an error number of Calc; an unknown one is #VALUE!, as an .xlsx file would hold it."""
    return CellError(_READ.get(number, "#VALUE!"))


_NUM = error_value("#NUM!")
_ERRORS: dict[str, float] = {}


def _of_float(value: float) -> float:
    return value if math.isfinite(value) else _NUM


def _of_error(value: CellError) -> float:
    found = _ERRORS.get(value.code)
    if found is None:
        found = _ERRORS[value.code] = error_value(value.code)
    return found


_OUT: dict[type, Callable[[Any], Any]] = {
    float: _of_float,
    int: float,
    bool: float,  # a bare True would arrive as 0
    str: str,
    CellError: _of_error,
    type(None): lambda value: "",  # nothing at all would be saved as 0
    dt.datetime: dt.datetime.isoformat,
    dt.date: dt.date.isoformat,
}


def cell_out(value: Any) -> Any:
    """Return a cell as Calc takes it: a float (an error value among them) or text."""
    convert = _OUT.get(type(value))
    if convert is not None:
        return convert(value)
    try:
        return _of_float(float(value))  # numpy's scalars
    except (TypeError, ValueError):
        return str(value)


def grid_out(rows: Any) -> tuple[tuple[Any, ...], ...]:
    """Return rows of cells as Calc takes them, made rectangular with blanks."""
    out = [tuple([cell_out(cell) for cell in row]) for row in rows]
    width = max(map(len, out), default=0)
    if not width:
        return ((error_value("#VALUE!"),),)
    return tuple([row if len(row) == width else row + ("",) * (width - len(row)) for row in out])


_TALL = 1000  # rows or columns from which blanks at the end of an argument are cut off


def cells_in(argument: Any) -> Any:
    """Return an argument that came by its value, as `xlaxial.functions` takes it.

    Parameters
    ----------
    argument : None, float, str or tuple of tuples
        An argument left out; a value (a single blank cell arrives as 0.0); a range or an inline array.

    Returns
    -------
    None, float, str or list of lists
        Blanks are None. Blank rows and columns at the end are cut off where the range is tall or wide: a whole column
        arrives at its full height.
    """
    if not isinstance(argument, tuple):
        return argument
    rows: Sequence[Any] = argument
    if len(rows) > _TALL:
        last = len(rows)
        while last > 1 and not any(cell is not None and cell != "" for cell in rows[last - 1]):
            last -= 1
        rows = rows[:last]
    if rows and len(rows[0]) > _TALL:
        width = max([_filled(row) for row in rows])
        rows = [row[: max(width, 1)] for row in rows]
    return [[None if cell == "" else cell for cell in row] for row in rows]


def _filled(row: Sequence[Cell]) -> int:
    return max((n + 1 for n, cell in enumerate(row) if cell is not None and cell != ""), default=0)
