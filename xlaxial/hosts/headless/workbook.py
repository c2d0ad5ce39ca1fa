"""A workbook as the pre-pass needs it: formulas, values, stored results, tables and names, read by openpyxl."""

from __future__ import annotations

import datetime as dt
import functools
import io
import warnings
import zipfile
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from openpyxl import load_workbook
from openpyxl.reader.strings import read_string_table
from openpyxl.utils import range_boundaries
from openpyxl.utils.datetime import CALENDAR_MAC_1904
from openpyxl.utils.escape import unescape
from openpyxl.worksheet.formula import ArrayFormula, DataTableFormula

from xlaxial.cells import ERROR_CODES, CellError
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.package import SheetPart, open_package, read_part, refuse_entities, sheet_parts
from xlaxial.hosts.headless.prepass.names import Names
from xlaxial.hosts.headless.prepass.structured import TableArea
from xlaxial.hosts.headless.stored import StoredValues

LARGEST_ARRAY = 1_000_000
"""Cells of an array formula beyond which it is not evaluated."""
_MOST_TEXT = 200_000_000  # characters of all cells of a sheet together; shared strings can be repeated without end


@dataclass(frozen=True)
class Formula:
    """A formula cell."""

    sheet: str
    row: int
    column: int
    text: str  # as stored, with its equals sign
    area: tuple[int, int, int, int] | None = None  # first column, first row, last column, last row of an array
    dynamic: bool = False  # the array spills by itself
    data_table: bool = False

    def places(self) -> list[tuple[int, int]]:
        """(row, column) of every cell that it fills."""
        if self.area is None:
            return [(self.row, self.column)]
        c1, r1, c2, r2 = self.area
        if (c2 - c1 + 1) * (r2 - r1 + 1) > LARGEST_ARRAY:
            return [(self.row, self.column)]
        return [(row, column) for row in range(r1, r2 + 1) for column in range(c1, c2 + 1)]


@dataclass
class Sheet:
    """One worksheet."""

    name: str
    part: str
    rows: dict[int, list[Any]] = field(default_factory=dict)  # values by row number, None where blank or a formula
    formulas: list[Formula] = field(default_factory=list)
    stored: dict[tuple[int, int], Any] = field(default_factory=dict)  # stored results of formulas and array cells
    dates: dict[tuple[int, int], dt.datetime | dt.date | dt.time | dt.timedelta] = field(default_factory=dict)
    extent: tuple[int, int] = (1, 1)  # last row and column in use
    resized: dict[tuple[int, int], tuple[int, int, int, int]] = field(default_factory=dict)  # new areas of arrays
    hides_rows: bool = False  # by hand or by a filter

    def extend_to(self, row: int, column: int) -> None:
        """Take a cell into the extent."""
        self.extent = max(row, self.extent[0]), max(column, self.extent[1])


@dataclass
class Book:
    """A workbook."""

    path: Path
    sheets: list[Sheet]
    tables: dict[str, TableArea]
    names: Names
    date_1904: bool = False  # day 0 of its dates is 1904-01-01


def read_book(path: Path) -> Book:
    """Read a workbook.

    Raises
    ------
    WorkbookError
        One line for a person, where the file cannot be taken up.
    """
    try:
        with open_package(path) as package:
            refuse_entities(package)
            parts = sheet_parts(package)
            shared = functools.cache(lambda: _shared_strings(package))
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")
                source = load_workbook(path, keep_links=False)
            found = [part for part in parts if part.name in source.sheetnames]
            if len(found) != len(parts) or any(not hasattr(source[part.name], "iter_rows") for part in found):
                raise WorkbookError("its sheets cannot be told apart")
            sheets = [
                _read_sheet(part, source[part.name], StoredValues(read_part(package, part.part), shared))
                for part in parts
            ]
    except WorkbookError as wrong:
        text = str(wrong)
        raise WorkbookError(text if text.startswith(path.name) else f"{path.name}: {text}") from None
    except Exception as wrong:  # noqa: BLE001 - openpyxl raises many kinds on damaged files
        raise WorkbookError(
            f"{path.name}: cannot be read as a workbook ({type(wrong).__name__}: {wrong})"[:300]
        ) from None
    names, tables = Names(), {}
    for name, defined in source.defined_names.items():
        names.workbook[name.lower()] = defined.attr_text or ""
    for worksheet in source.worksheets:
        for name, defined in worksheet.defined_names.items():
            names.sheets[worksheet.title.lower(), name.lower()] = defined.attr_text or ""
        for table in worksheet.tables.values():
            c1, r1, _, r2 = range_boundaries(table.ref)
            headings = 1 if table.headerRowCount is None else table.headerRowCount
            columns = tuple(unescape(column.name) for column in table.tableColumns)
            area = TableArea(
                table.displayName, worksheet.title, r1, r2, c1, columns, bool(headings), bool(table.totalsRowCount)
            )
            tables[table.displayName.lower()] = area
    return Book(path, sheets, tables, names, source.epoch == CALENDAR_MAC_1904)


def _shared_strings(package: zipfile.ZipFile) -> list[str]:
    name = next((name for name in package.namelist() if name.lower().endswith("sharedstrings.xml")), None)
    return [] if name is None else list(read_string_table(io.BytesIO(read_part(package, name))))


def _read_sheet(part: SheetPart, worksheet: Any, stored: StoredValues) -> Sheet:
    sheet = Sheet(part.name, part.part)
    sheet.hides_rows = any(row.hidden for row in worksheet.row_dimensions.values())
    n_characters = 0
    for (row, column), cell in worksheet._cells.items():  # `iter_rows` would walk through all blanks
        value, kind = cell.value, cell.data_type
        if value is None:
            continue
        if kind == "f":
            sheet.formulas.append(_formula(part, cell, value, stored))
            sheet.extend_to(row, column)
            continue
        if kind == "e":
            value = CellError(value) if value in ERROR_CODES else CellError("#VALUE!")
        elif kind == "d":
            sheet.dates[row, column] = value
            value = stored[row, column]
        elif kind == "s":
            n_characters += len(value)
            if n_characters > _MOST_TEXT:
                raise WorkbookError(f"the sheet {part.name} holds more than {_MOST_TEXT} characters of text")
        values = sheet.rows.setdefault(row, [])
        if column > len(values):
            values.extend([None] * (column - len(values)))
            sheet.extend_to(row, column)
        values[column - 1] = value
    for formula in sheet.formulas:
        for row, column in formula.places():
            sheet.stored[row, column] = stored[row, column]
            if formula.area:
                sheet.extend_to(row, column)
                if column <= len(sheet.rows.get(row, ())):
                    sheet.rows[row][column - 1] = None  # what an array formula fills is no input
    return sheet


def _formula(part: SheetPart, cell: Any, value: Any, stored: StoredValues) -> Formula:
    if isinstance(value, DataTableFormula):
        return Formula(part.name, cell.row, cell.column, "=TABLE()", range_boundaries(value.ref), data_table=True)
    if isinstance(value, ArrayFormula):
        text = "=" + (value.text or "").lstrip("=")
        dynamic = (cell.row, cell.column) in stored.dynamic
        return Formula(part.name, cell.row, cell.column, text, range_boundaries(value.ref), dynamic)
    return Formula(part.name, cell.row, cell.column, str(value))
