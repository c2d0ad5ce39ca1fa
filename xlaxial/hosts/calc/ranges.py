"""A range of a Calc sheet, read in bulk, with what its values alone do not tell: place, error cells, dates, truths."""

from __future__ import annotations

import datetime as dt
from typing import Any

from xlaxial.cells import Cell, CellRange
from xlaxial.hosts.calc.values import error_cell

# Constants of UNO: com.sun.star.sheet.CellFlags and com.sun.star.util.NumberFormat.
_DATE_CELLS = 2
_DATE, _TIME, _LOGICAL = 2, 4, 1024

_LAST_ROW = 1_048_575
_LAST_COLUMN = 16_383
_LARGE = 1000  # rows or columns from which only the sheet's used area is read

_YEARS = (10_959.0, 73_050.0)  # serial numbers of the years 1930 to 2099: what two typed numbers can turn into
_TRUTH_CHECKS = 256  # cells of value 0 or 1 in a range that are asked whether they show TRUE or FALSE


def read_range(cells: Any, document: Any) -> CellRange:
    """Return the cells of a range.

    Parameters
    ----------
    cells : com.sun.star.table.XCellRange
        The range of a table argument.
    document : com.sun.star.beans.XPropertySet
        The workbook.

    Returns
    -------
    xlaxial.CellRange
        Blanks (also texts of no length) are None, error cells `xlaxial.CellError`, dates and times by the number
        format `datetime` objects, TRUE and FALSE bool, else float or str. Of a range that reaches the sheet's last row
        or column only the part down to the last filled cell comes back.
    """
    place = cells.getRangeAddress()
    height, width = place.EndRow - place.StartRow + 1, place.EndColumn - place.StartColumn + 1
    if height > _LARGE or width > _LARGE:
        rows = _read_large(cells, document, place, height, width)
    else:
        rows = _read(cells, document, place)
    return CellRange(rows, _sheet_name(cells.AbsoluteName), place.StartRow + 1, place.StartColumn + 1)


def _sheet_name(absolute: str) -> str:
    """Return the sheet's name from an address such as ``$'Odd cells'.$A$1:$B$9``, the quickest to be had."""
    name = absolute.rpartition(".")[0].removeprefix("$")
    return name[1:-1].replace("''", "'") if name.startswith("'") else name


def _read_large(cells: Any, document: Any, place: Any, height: int, width: int) -> list[list[Cell]]:
    """Read what lies in the sheet's used area; the rest is blank, or nothing where the range has no end of its own."""
    cursor = cells.getSpreadsheet().createCursor()
    cursor.gotoEndOfUsedArea(False)
    end = cursor.getRangeAddress()
    used_height = max(min(height, end.EndRow - place.StartRow + 1), 1)
    used_width = max(min(width, end.EndColumn - place.StartColumn + 1), 1)
    part = cells.getCellRangeByPosition(0, 0, used_width - 1, used_height - 1)
    rows = _read(part, document, place)
    if place.EndColumn < _LAST_COLUMN:
        blanks: list[Cell] = [None] * (width - used_width)
        rows = [row + blanks for row in rows] if blanks else rows
    else:
        filled = max((n + 1 for row in rows for n, cell in enumerate(row) if cell is not None), default=1)
        rows = [row[:filled] for row in rows]
    if place.EndRow < _LAST_ROW:
        rows += [[None] * len(rows[0]) for _ in range(height - used_height)]
    else:
        while len(rows) > 1 and not any(cell is not None for cell in rows[-1]):
            rows.pop()
    return rows


def _read(cells: Any, document: Any, place: Any) -> list[list[Cell]]:
    data = cells.getDataArray()
    rows: list[list[Cell]] = [[None if cell == "" else cell for cell in row] for row in data]
    number = False
    truths: list[tuple[int, int]] = []  # row, column of numbers that could show as TRUE or FALSE
    dates: dict[int, list[int]] = {}  # by column: the rows whose number could show as a date
    for n, row in enumerate(data):
        for m, cell in enumerate(row):
            if cell is None:
                rows[n][m] = error_cell(cells.getCellByPosition(m, n).getError())
            elif type(cell) is float:
                number = True
                if cell == 0.0 or cell == 1.0:
                    truths.append((n, m))
                elif _YEARS[0] <= cell < _YEARS[1]:
                    dates.setdefault(m, []).append(n)
    if number:
        _mark_typed_dates(rows, cells, document, place)
    if truths or dates:
        kinds = _Kinds(document)
        for n, m in truths[:_TRUTH_CHECKS]:
            if kinds.of(cells, n, m) & _LOGICAL:
                rows[n][m] = bool(rows[n][m])
        _mark_found_dates(rows, cells, document, dates, kinds)
    return rows


def _mark_typed_dates(rows: list[list[Cell]], cells: Any, document: Any, place: Any) -> None:
    """Turn typed dates and times into datetime objects."""
    origin = None
    for part in cells.queryContentCells(_DATE_CELLS).getRangeAddresses():
        origin = origin or _origin(document)
        for row in range(part.StartRow - place.StartRow, part.EndRow - place.StartRow + 1):
            for column in range(part.StartColumn - place.StartColumn, part.EndColumn - place.StartColumn + 1):
                rows[row][column] = _moment(rows[row][column], origin)


def _mark_found_dates(
    rows: list[list[Cell]], cells: Any, document: Any, likely: dict[int, list[int]], kinds: _Kinds
) -> None:
    """Turn results of formulas that show as dates into datetime objects."""
    for column, found in likely.items():
        formulas = cells.getCellRangeByPosition(column, found[0], column, found[-1]).getFormulaArray()
        for row in found:
            if formulas[row - found[0]][0].startswith(("=", "{")) and kinds.of(cells, row, column) & (_DATE | _TIME):
                rows[row][column] = _moment(rows[row][column], _origin(document))


class _Kinds:
    """Kinds of number formats, each asked for once."""

    def __init__(self, document: Any) -> None:
        self._document = document
        self._known: dict[int, int] = {}

    def of(self, cells: Any, row: int, column: int) -> int:
        """Return the kind of the format in which a cell shows its number, also where its formula chose it."""
        key: int = cells.getCellByPosition(column, row).NumberFormat
        if key not in self._known:
            self._known[key] = self._document.getNumberFormats().getByKey(key).Type
        return self._known[key]


def _origin(document: Any) -> dt.datetime:
    date = document.getPropertyValue("NullDate")
    return dt.datetime(date.Year, date.Month, date.Day)


def _moment(value: Cell, origin: dt.datetime) -> Cell:
    """Return a serial number as a moment, or as a time of the day where it is less than a day."""
    if type(value) is not float:
        return value
    try:
        moment = origin + dt.timedelta(days=value)
    except OverflowError:
        return value
    return moment.time() if 0.0 <= value < 1.0 else moment
