"""What a worksheet cell can hold, and a block of cells that knows where it stands."""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Iterable, Sequence
from typing import Any, TypeAlias

ERROR_CODES = (
    "#NULL!",
    "#DIV/0!",
    "#VALUE!",
    "#REF!",
    "#NAME?",
    "#NUM!",
    "#N/A",
    "#GETTING_DATA",
    "#SPILL!",
    "#CONNECT!",
    "#BLOCKED!",
    "#UNKNOWN!",
    "#FIELD!",
    "#CALC!",
)


class CellError:
    """An error value as a spreadsheet shows it; equal to another one of the same code.

    Parameters
    ----------
    code : str
        One of `ERROR_CODES`, such as ``"#N/A"``.

    Raises
    ------
    ValueError
        The code is not an error value that a spreadsheet knows.
    """

    __slots__ = ("code",)

    def __init__(self, code: str) -> None:
        if code not in ERROR_CODES:
            raise ValueError(f"{code!r} is no spreadsheet error value; use one of {', '.join(ERROR_CODES)}")
        self.code = code

    def __repr__(self) -> str:
        return f"CellError({self.code!r})"

    def __str__(self) -> str:
        return self.code

    def __eq__(self, other: object) -> bool:
        return isinstance(other, CellError) and other.code == self.code

    def __hash__(self) -> int:
        return hash((CellError, self.code))


Cell: TypeAlias = float | int | str | bool | dt.datetime | dt.date | dt.time | dt.timedelta | CellError | None
"""A cell's value: None is a blank cell."""

Rows: TypeAlias = Sequence[Sequence[Cell]]
"""A block of cells, row by row."""


def column_letters(column: int) -> str:
    """Letters of a column, counted from 1: 1 is A, 28 is AB."""
    letters = ""
    while column > 0:
        column, rest = divmod(column - 1, 26)
        letters = chr(65 + rest) + letters
    return letters


class CellRange(list[Sequence[Cell]]):
    """Rows of cells that know the sheet and the cell at which they start.

    Parameters
    ----------
    rows : iterable of sequences of cells
        The values, row by row.
    sheet : str, optional
        Name of the sheet; empty where the host does not tell.
    row, column : int
        Position of the first cell, both counted from 1.
    """

    __slots__ = ("column", "row", "sheet")

    def __init__(self, rows: Iterable[Sequence[Cell]] = (), sheet: str = "", row: int = 1, column: int = 1) -> None:
        super().__init__(rows)
        self.sheet = sheet
        self.row = row
        self.column = column


_PLAIN_SHEET = re.compile(r"[^\W\d]\w*\Z")


def cell_address(block: Any, row: int, column: int) -> str:
    """Where a cell stands, as a person reads it.

    Parameters
    ----------
    block : CellRange or sequence of rows
        The block; a `CellRange` knows its place in the workbook.
    row, column : int
        Position in the block, counted from 0.

    Returns
    -------
    str
        ``Sheet1!C5`` where the place is known, else ``row 5, column 3`` (of the range, counted from 1).
    """
    if isinstance(block, CellRange):
        here = f"{column_letters(block.column + column)}{block.row + row}"
        if not block.sheet:
            return here
        sheet = block.sheet if _PLAIN_SHEET.match(block.sheet) else "'" + block.sheet.replace("'", "''") + "'"
        return f"{sheet}!{here}"
    return f"row {row + 1}, column {column + 1}"
