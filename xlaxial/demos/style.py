"""How issued sheets look: title, headings, results, print set-up."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from openpyxl.formatting.rule import CellIsRule, FormulaRule
from openpyxl.styles import Alignment, Border, Font, PatternFill, Side
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.formula import ArrayFormula

FONT = "Liberation Sans"
_LINE = Side(style="thin", color="9AA5AD")
_HEAVY = Side(style="medium", color="33424D")
_HEADING = PatternFill("solid", fgColor="DDE3E7")
_RESULT = PatternFill("solid", fgColor="F3F5F6")
_WARN = PatternFill("solid", bgColor="F6D5C5")
_NEAR = PatternFill("solid", bgColor="FBF0D2")
_NAVY = "1F3A5F"


def title(sheet: Any, text: str, below: str) -> None:
    """Write the title block of a sheet in rows 1 and 2."""
    sheet["A1"] = text
    sheet["A1"].font = Font(FONT, size=14, bold=True)
    sheet["A2"] = below
    sheet["A2"].font = Font(FONT, size=9, italic=True, color="55626B")
    sheet.row_dimensions[1].height = 22


def headings(sheet: Any, row: int, column: int, texts: Sequence[str | None], *, result: bool = False) -> None:
    """Write a heading row."""
    for j, text in enumerate(texts):
        if text is None:
            continue
        cell = sheet.cell(row, column + j, text)
        cell.font = Font(FONT, size=9, bold=True, italic=result)
        cell.fill = _HEADING
        cell.border = Border(top=_HEAVY, bottom=_HEAVY, left=_LINE, right=_LINE)
        cell.alignment = Alignment(wrap_text=True, horizontal="center", vertical="center")
    sheet.row_dimensions[row].height = 40


def grid(
    sheet: Any, row: int, column: int, rows: Sequence[Sequence[Any]], formats: Sequence[str], *, result: bool = False
) -> None:
    """Write cells with a thin grid; inputs are blue, results black on a light ground."""
    for i, values in enumerate(rows):
        for j, value in enumerate(values):
            cell = sheet.cell(row + i, column + j)
            if value is not None:
                cell.value = value
            typed = not result and not (isinstance(value, str) and value.startswith("="))
            cell.font = Font(FONT, size=9, color=_NAVY if typed else "000000")
            cell.border = Border(top=_LINE, bottom=_LINE, left=_LINE, right=_LINE)
            cell.number_format = formats[j]
            left = formats[j] == "@"
            cell.alignment = Alignment(
                horizontal="left" if left else "right", vertical="center", indent=1 if left else 0
            )
            if result:
                cell.fill = _RESULT


def block(sheet: Any, row: int, column: int, n_rows: int, formats: Sequence[str], formula: str) -> str:
    """Write an array formula over a block of cells; return the block's address."""
    grid(sheet, row, column, [[None] * len(formats)] * n_rows, formats, result=True)
    area = f"{get_column_letter(column)}{row}:{get_column_letter(column + len(formats) - 1)}{row + n_rows - 1}"
    sheet.cell(row, column).value = ArrayFormula(area, formula)
    return area


def line(
    sheet: Any, row: int, column: int, label: str, value: Any, number_format: str = "General", *, away: int = 1
) -> None:
    """Write a label, and a value so many columns away from it."""
    cell = sheet.cell(row, column, label)
    cell.font = Font(FONT, size=9)
    cell = sheet.cell(row, column + away, value)
    cell.font = Font(FONT, size=9, bold=True)
    cell.number_format = number_format
    cell.alignment = Alignment(horizontal="left")


def text(sheet: Any, row: int, value: str, *, bold: bool = False, last: str = "H", height: float | None = None) -> None:
    """Write a line of text across the columns from A."""
    sheet.merge_cells(f"A{row}:{last}{row}")
    cell = sheet.cell(row, 1, value)
    cell.font = Font(FONT, size=10, bold=bold)
    cell.alignment = Alignment(wrap_text=True, vertical="top")
    if height:
        sheet.row_dimensions[row].height = height


def mark_utilisation(sheet: Any, area: str) -> None:
    """Shade a utilisation above 1, an error value, and one above 0.95."""
    first = area.split(":")[0]
    sheet.conditional_formatting.add(area, FormulaRule(formula=[f"ISERROR({first})"], fill=_WARN, font=Font(bold=True)))
    sheet.conditional_formatting.add(
        area, CellIsRule(operator="greaterThan", formula=["1"], fill=_WARN, font=Font(bold=True))
    )
    sheet.conditional_formatting.add(area, CellIsRule(operator="greaterThan", formula=["0.95"], fill=_NEAR))


def widths(sheet: Any, sizes: Sequence[float]) -> None:
    """Set the widths of the columns from A."""
    for j, size in enumerate(sizes):
        sheet.column_dimensions[get_column_letter(j + 1)].width = size


def printing(sheet: Any, area: str, caution: str, *, rows: str | None = None, portrait: bool = False) -> None:
    """Set the page: A3 landscape (or A4 portrait), one page wide, headings repeated, the caution at the foot."""
    sheet.print_area = area
    sheet.page_setup.orientation = "portrait" if portrait else "landscape"
    sheet.page_setup.paperSize = 9 if portrait else 8
    sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight = 1, 0
    sheet.sheet_properties.pageSetUpPr.fitToPage = True
    sheet.page_margins.left = sheet.page_margins.right = 0.4
    sheet.page_margins.top, sheet.page_margins.bottom = 0.85, 0.85
    sheet.page_margins.header = sheet.page_margins.footer = 0.35
    sheet.oddHeader.left.text, sheet.oddHeader.right.text = "&F, &A", "&P / &N"
    sheet.oddHeader.left.size = sheet.oddHeader.right.size = 8
    sheet.oddFooter.center.text = caution
    sheet.oddFooter.center.size = 7
    if rows:
        sheet.print_title_rows = rows
