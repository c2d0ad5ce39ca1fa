"""A workbook as the pre-pass needs it: formulas, values, stored results, tables and names, read by openpyxl."""

from __future__ import annotations

import datetime as dt
import warnings
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from openpyxl import load_workbook
from openpyxl.utils import range_boundaries
from openpyxl.worksheet.formula import ArrayFormula, DataTableFormula

from xlaxial.cells import ERROR_CODES, CellError
from xlaxial.hosts.headless.engine import serial
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.package import SheetPart, open_package, refuse_entities, sheet_parts
from xlaxial.hosts.headless.prepass.names import Names
from xlaxial.hosts.headless.prepass.structured import TableArea


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


@dataclass
class Sheet:
    """One worksheet."""

    name: str
    part: str
    rows: list[list[Any]] = field(default_factory=list)  # values, None where blank or a formula stands
    formulas: list[Formula] = field(default_factory=list)
    stored: dict[tuple[int, int], Any] = field(default_factory=dict)  # stored results of formulas and array cells
    dates: dict[tuple[int, int], dt.datetime | dt.date | dt.time | dt.timedelta] = field(default_factory=dict)


@dataclass
class Book:
    """A workbook."""

    path: Path
    sheets: list[Sheet]
    tables: dict[str, TableArea]
    names: Names


def read_book(path: Path) -> Book:
    """Read a workbook.

    Raises
    ------
    WorkbookError
        One line for a person, where the file cannot be taken up.
    """
    with open_package(path) as package:
        try:
            refuse_entities(package)
            parts = sheet_parts(package)
        except WorkbookError as wrong:
            raise WorkbookError(f"{path.name}: {wrong}") from None
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            source = load_workbook(path, keep_links=False)
            stored = load_workbook(path, keep_links=False, data_only=True)
    except Exception as wrong:  # noqa: BLE001 - openpyxl raises many kinds on damaged files
        raise WorkbookError(f"{path.name}: cannot be read as a workbook ({type(wrong).__name__}: {wrong})"[:300]) from None
    sheets = [_read_sheet(part, source, stored) for part in parts if part.name in source.sheetnames]
    if len(sheets) != len(parts) or any(not hasattr(source[sheet.name], "iter_rows") for sheet in sheets):
        raise WorkbookError(f"{path.name}: its sheets cannot be told apart")
    names, tables = Names(), {}
    for name, defined in source.defined_names.items():
        names.workbook[name.lower()] = defined.attr_text or ""
    for worksheet in source.worksheets:
        for name, defined in worksheet.defined_names.items():
            names.sheets[worksheet.title.lower(), name.lower()] = defined.attr_text or ""
        for table in worksheet.tables.values():
            c1, r1, _, r2 = range_boundaries(table.ref)
            headings = 1 if table.headerRowCount is None else table.headerRowCount
            columns = tuple(column.name for column in table.tableColumns)
            area = TableArea(
                table.displayName, worksheet.title, r1, r2, c1, columns, bool(headings), bool(table.totalsRowCount)
            )
            tables[table.displayName.lower()] = area
    return Book(path, sheets, tables, names)


def _read_sheet(part: SheetPart, source: Any, stored: Any) -> Sheet:
    worksheet, results = source[part.name], stored[part.name]
    sheet = Sheet(part.name, part.part)
    covered: set[tuple[int, int]] = set()
    for cells in worksheet.iter_rows():
        values: list[Any] = []
        for cell in cells:
            value = cell.value
            if value is None:
                values.append(None)
                continue
            if cell.data_type == "f" or isinstance(value, (ArrayFormula, DataTableFormula)):
                sheet.formulas.append(_formula(part, cell, value))
                values.append(None)
                continue
            if cell.data_type == "e" or (isinstance(value, str) and value in ERROR_CODES and cell.data_type == "e"):
                values.append(CellError(value) if value in ERROR_CODES else CellError("#VALUE!"))
                continue
            if isinstance(value, (dt.datetime, dt.date, dt.time, dt.timedelta)):
                sheet.dates[cell.row, cell.column] = value
            values.append(serial(value))
        sheet.rows.append(values)
    for formula in sheet.formulas:
        places = [(formula.row, formula.column)]
        if formula.area:
            c1, r1, c2, r2 = formula.area
            places = [(r, c) for r in range(r1, r2 + 1) for c in range(c1, c2 + 1)]
            covered.update(places)
        for row, column in places:
            cell = results._cells.get((row, column))  # noqa: SLF001 - `cell()` would create it
            sheet.stored[row, column] = _stored(cell)
    for row, column in covered:  # what an array formula fills is not an input
        if row <= len(sheet.rows) and column <= len(sheet.rows[row - 1]):
            sheet.rows[row - 1][column - 1] = None
    return sheet


def _formula(part: SheetPart, cell: Any, value: Any) -> Formula:
    if isinstance(value, DataTableFormula):
        return Formula(part.name, cell.row, cell.column, "=TABLE()", data_table=True)
    if isinstance(value, ArrayFormula):
        text = value.text or ""
        area = range_boundaries(value.ref)
        dynamic = cell.coordinate in part.dynamic
        return Formula(part.name, cell.row, cell.column, "=" + text.lstrip("="), area, dynamic)
    return Formula(part.name, cell.row, cell.column, str(value))


def _stored(cell: Any) -> Any:
    if cell is None or cell.value is None:
        return None
    if cell.data_type == "e":
        return CellError(cell.value) if cell.value in ERROR_CODES else CellError("#VALUE!")
    return serial(cell.value)
