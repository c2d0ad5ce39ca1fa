"""Implicit intersection: a range where one value is due, in a cell that holds no array formula."""

from __future__ import annotations

import re

from openpyxl.utils import get_column_letter, range_boundaries

_AREA = re.compile(r"^((?:'(?:[^']|'')+'|[^'!]+)!)?\$?([A-Z]{1,3})\$?(\d+):\$?([A-Z]{1,3})\$?(\d+)$", re.IGNORECASE)

ONE_VALUE = frozenset(
    "IF ROUND ROUNDUP ROUNDDOWN ABS SQRT INT MOD SIN COS TAN EXP LN LOG LOG10 POWER LEFT MID RIGHT LEN TEXT VALUE".split()
)
"""Functions whose arguments are single values."""


def intersect(operand: str, row: int, column: int) -> str:
    """Return the one cell of a range that stands in the formula's row or column, or an error value."""
    area = _AREA.match(operand)
    if not area:
        return operand
    c1, r1, c2, r2 = range_boundaries(f"{area[2]}{area[3]}:{area[4]}{area[5]}")
    sheet = area[1] or ""
    if c1 == c2 and r1 <= row <= r2:
        return f"{sheet}{get_column_letter(c1)}{row}"
    if r1 == r2 and c1 <= column <= c2:
        return f"{sheet}{get_column_letter(column)}{r1}"
    return operand if (c1, r1) == (c2, r2) else "#VALUE!"
