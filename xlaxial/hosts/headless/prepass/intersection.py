"""Implicit intersection: a range where one value is due, in a cell that holds no array formula."""

from __future__ import annotations

import re

from openpyxl.utils import column_index_from_string, get_column_letter, range_boundaries

_SHEET = r"^((?:'(?:[^']|'')+'|[^'!]+)!)?"
_AREA = re.compile(_SHEET + r"\$?([A-Z]{1,3})\$?(\d+):\$?([A-Z]{1,3})\$?(\d+)$", re.IGNORECASE)
_COLUMNS = re.compile(_SHEET + r"\$?([A-Z]{1,3}):\$?([A-Z]{1,3})$", re.IGNORECASE)
_ROWS = re.compile(_SHEET + r"\$?(\d+):\$?(\d+)$")

_ALL = frozenset(
    """
    ABS ACOS ACOSH ASIN ASINH ATAN ATAN2 ATANH CEILING CHAR CODE COMBIN CONCATENATE COS COSH DATE DAY DEGREES EVEN EXACT
    EXP FACT FIND FIXED FLOOR HOUR INT ISBLANK ISERR ISERROR ISLOGICAL ISNA ISNUMBER ISTEXT LEFT LEN LN LOG LOG10 LOWER
    MID
    MINUTE MOD MONTH ODD POWER PROPER RADIANS REPLACE REPT RIGHT ROUND ROUNDDOWN ROUNDUP SEARCH SECOND SIGN SIN
    SINH SQRT SUBSTITUTE TAN TANH TEXT TRIM TRUNC UPPER VALUE WEEKDAY YEAR
    """.split()  # noqa: SIM905 - a list of 70 quoted names reads worse
)
_SOME = {
    "IF": (0,),
    "VLOOKUP": (0, 2, 3),
    "HLOOKUP": (0, 2, 3),
    "MATCH": (0, 2),
    "LOOKUP": (0,),
    "INDEX": (1, 2),
    "SUMIF": (1,),
    "COUNTIF": (1,),
    "CHOOSE": (0,),
}
_PASSED_ON = {"IF": (1, 2), "CHOOSE": range(1, 255), "IFERROR": (0, 1)}


def takes_one_value(calls: list[tuple[str, int]]) -> bool:
    """Whether one value is due at a place in a formula.

    Parameters
    ----------
    calls : list of (str, int)
        Functions around the place, outermost first, with the number of the argument, from 0; "" is the cell itself.
    """
    for function, argument in reversed(calls):
        if argument in _PASSED_ON.get(function, ()):
            continue  # what stands there is handed to the function around
        return function == "" or function in _ALL or argument in _SOME.get(function, ())
    return True


def is_range(operand: str) -> bool:
    """Whether an operand is more than one cell."""
    return ":" in operand and any(pattern.match(operand) for pattern in (_AREA, _COLUMNS, _ROWS))


def intersect(operand: str, row: int, column: int) -> str:
    """Return the one cell of a range that stands in the formula's row or column, or an error value."""
    whole = _COLUMNS.match(operand)
    if whole:
        first, last = sorted(map(column_index_from_string, (whole[2].upper(), whole[3].upper())))
        return (
            _cell(whole[1], row, first if first == last else column)
            if first == last or first <= column <= last
            else "#VALUE!"
        )
    whole = _ROWS.match(operand)
    if whole:
        first, last = sorted((int(whole[2]), int(whole[3])))
        return (
            _cell(whole[1], first if first == last else row, column)
            if first == last or first <= row <= last
            else "#VALUE!"
        )
    area = _AREA.match(operand)
    if not area:
        return operand
    c1, r1, c2, r2 = range_boundaries(f"{area[2]}{area[3]}:{area[4]}{area[5]}".upper())
    if (c1, r1) == (c2, r2):
        return _cell(area[1], r1, c1)
    if c1 == c2 and r1 <= row <= r2:
        return _cell(area[1], row, c1)
    if r1 == r2 and c1 <= column <= c2:
        return _cell(area[1], r1, column)
    return "#VALUE!"


def _cell(sheet: str | None, row: int, column: int) -> str:
    return f"{sheet or ''}{get_column_letter(column)}{row}"
