"""Recalculates a workbook with every worksheet function called as Excel calls it, over stubs; prints the results.

`python through_excel.py BOOK`: a process of its own, because the stubs replace modules for good (see com_stubs.py).
"""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import Any

sys.path.insert(0, str(Path(__file__).parent))
import com_stubs
from com_stubs import OMITTED, ComTime, Error, SheetRange, excel_call

com_stubs.install()

from xlaxial import CellError, CellRange  # noqa: E402 - after the stubs
from xlaxial.functions.registry import load  # noqa: E402
from xlaxial.hosts.excel.convert import ERROR_NUMBERS  # noqa: E402
from xlaxial.hosts.headless.recalculate import recalculate  # noqa: E402

CODES = {number: code for code, number in ERROR_NUMBERS.items()}


def to_excel(cell: Any) -> Any:
    if isinstance(cell, CellError):
        return Error(ERROR_NUMBERS[cell.code])
    if hasattr(cell, "year"):
        return ComTime(cell.year, cell.month, cell.day)
    return cell


def argument(value: Any) -> Any:
    if value is None:
        return OMITTED
    if isinstance(value, CellRange):
        return SheetRange([list(map(to_excel, row)) for row in value], value.row, value.column, value.sheet)
    if isinstance(value, list):
        return [list(map(to_excel, row)) for row in value]
    return to_excel(value)


def from_excel(cell: Any) -> Any:
    return CellError(CODES[cell.number]) if isinstance(cell, Error) else cell


def as_excel_calls(name: str) -> Any:
    function = load()[name]

    def call(*given: Any) -> Any:
        arguments = [*map(argument, given), *([OMITTED] * (len(function.arguments) - len(given)))]
        rows = [list(map(from_excel, row)) for row in excel_call("xlaxial.hosts.excel.udfs", name, *arguments)]
        return rows[0][0] if function.shape == "cell" else rows

    return call


if __name__ == "__main__":
    done = recalculate(Path(sys.argv[1]), {name: as_excel_calls(name) for name in load()})
    plain = [[r.sheet, r.cell, {"error": r.new.code} if isinstance(r.new, CellError) else r.new] for r in done.results]
    print(json.dumps(plain))
