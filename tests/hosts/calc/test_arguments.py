"""Every shape of argument, in the real program: what reaches the function is what stands in the cells."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from pathlib import Path

import openpyxl
import pytest
from openpyxl.utils.datetime import CALENDAR_MAC_1904
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.table import Table

pytestmark = pytest.mark.office

_TABLE = "Ties!r1c1 [['Mark', 'Length (mm)'], ['T1', 1200.0], ['T2', 'TBC']]"

CALLS = {  # formula: what the function is told
    "=AX_ECHO(Ties!A1:B3,)": f"{_TABLE} | None | None | None",
    "=AX_ECHO(Schedule,)": f"{_TABLE} | None | None | None",  # a named range
    "=AX_ECHO(TieTable[[#Headers],[#Data]],)": f"{_TABLE} | None | None | None",  # a spreadsheet table
    "=AX_ECHO(TieTable[[#Headers],[#Data],[Length (mm)]],)": (
        "Ties!r1c2 [['Length (mm)'], [1200.0], ['TBC']] | None | None | None"
    ),
    '=AX_ECHO(Ties!B2,,,"T1")': "Ties!r2c2 [[1200.0]] | None | None | 'T1'",  # one cell; arguments left out before one
    '=AX_ECHO(Ties!B2,,"Problems")': "Ties!r2c2 [[1200.0]] | None | 'Problems' | None",
    "=AX_ECHO(Ties!B2,Ties!A1:B2)": (
        "Ties!r2c2 [[1200.0]] | Ties!r1c1 [['Mark', 'Length (mm)'], ['T1', 1200.0]] | None | None"
    ),
    '=AX_ECHO(Ties!B2,,{"Force (kN)","Pass";"a",2})': (
        "Ties!r2c2 [[1200.0]] | None | [['Force (kN)', 'Pass'], ['a', 2.0]] | None"
    ),
    '=AX_ECHO(Ties!B2,,,AX_DATUM("twelve"))': "Ties!r2c2 [[1200.0]] | None | None | 12.0",
    "=AX_ECHO(Ties!B2,,AX_ROWS(Ties!A1:B2))": "Ties!r2c2 [[1200.0]] | None | [[1200.0]] | None",
    "=AX_ECHO(Ties!D1:E2,)": "Ties!r1c4 [[None, None], [None, None]] | None | None | None",  # blanks
    "=AX_ECHO(Ties!B2,Ties!D1:E2,Ties!D1)": "Ties!r2c2 [[1200.0]] | Ties!r1c4 [[None, None], [None, None]] | None | None",
    "=AX_ECHO('Odd cells'!A1:A9,)": (
        "Odd cells!r1c1 [[CellError('#N/A')], [CellError('#DIV/0!')], [CellError('#VALUE!')], [CellError('#REF!')], "
        "[CellError('#NAME?')], [CellError('#VALUE!')], [CellError('#NULL!')], [CellError('#N/A')], "
        "[CellError('#DIV/0!')]] | None | None | None"
    ),
    "=AX_ECHO('Odd cells'!B1:B9,)": (
        "Odd cells!r1c2 [[True], [False], [True], [datetime.datetime(2024, 3, 4, 0, 0)], "
        "[datetime.datetime(2024, 3, 4, 0, 0)], [45355.0], [datetime.time(3, 4)], [0.5], [None]] | None | None | None"
    ),
    "=AX_ECHO(Ties!A:B,)": f"{_TABLE} | None | None | None",  # whole columns
    "=AX_ECHO(Ties!B2:B1048576,)": "Ties!r2c2 [[1200.0], ['TBC']] | None | None | None",
    "=AX_ECHO(Ties!1:1,)": "Ties!r1c1 [['Mark', 'Length (mm)']] | None | None | None",
    "=AX_ECHO(Ties!Z:Z,)": "Ties!r1c26 [[None]] | None | None | None",  # a whole column without a value
    "=AX_ECHO(Ties!B2,Ties!A:B)": (
        "Ties!r2c2 [[1200.0]] | Ties!r1c1 [['Mark', 'Length (mm)'], ['T1', 1200.0], ['T2', 'TBC']] | None | None"
    ),
    "=AX_ECHO(Ties!B2,,Ties!1:1)": "Ties!r2c2 [[1200.0]] | None | [['Mark', 'Length (mm)']] | None",
    "=ax_echo(Ties!B2,)": "Ties!r2c2 [[1200.0]] | None | None | None",
    "=AX_ECHO(OFFSET(Ties!A1,1,1,1,1),)": "Ties!r2c2 [[1200.0]] | None | None | None",
    "=AX_ECHO(Ties!B2,'Odd cells'!A1:A2)": (
        "Ties!r2c2 [[1200.0]] | Odd cells!r1c1 [[CellError('#N/A')], [CellError('#DIV/0!')]] | None | None"
    ),
    "=AX_ECHO(Ties!B2,,Ties!A:B)": (
        "Ties!r2c2 [[1200.0]] | None | [['Mark', 'Length (mm)'], ['T1', 1200.0], ['T2', 'TBC']] | None"
    ),
    # refused by the program before the function is called: an error value, never a wrong number
    "=AX_ECHO({1,2;3,4},)": "#VALUE!",
    "=AX_ECHO(Ties!B2,,'Odd cells'!A1:A2)": "#VALUE!",  # an error cell in an argument that comes by its value
    "=AX_ECHO(Ties!B2)": "#VALUE!",  # a table at the end may be empty, but its separator must stand
    "=AX_ECHO()": "#VALUE!",
}


@pytest.fixture(scope="module")
def answers(calculate: Callable[[Path], Path], save: Callable[[openpyxl.Workbook, str], Path]) -> dict[str, object]:
    book = openpyxl.Workbook()
    ties = book.active
    assert ties is not None
    ties.title = "Ties"
    for row in (["Mark", "Length (mm)"], ["T1", 1200], ["T2", "TBC"]):
        ties.append(row)
    ties.add_table(Table(displayName="TieTable", ref="A1:B3"))
    book.defined_names["Schedule"] = DefinedName("Schedule", attr_text="Ties!$A$1:$B$3")
    odd = book.create_sheet("Odd cells")
    for row, formula in enumerate(
        ("#N/A", "=1/0", '="a"+1', "=#REF!", "=NOSUCH()", "=SQRT(-1)", "#NULL!", "=NA()", "=A2"), 1
    ):
        odd.cell(row, 1, formula)
    moment = dt.datetime(2024, 3, 4)
    for row, value in enumerate((True, "=1>2", "=TRUE()", moment, "=DATE(2024,3,4)", 45355, dt.time(3, 4), 0.5), 1):
        odd.cell(row, 2, value)
    odd["B8"].number_format = "0%"
    calls = book.create_sheet("Calls")
    for row, formula in enumerate(CALLS, 1):
        calls.cell(row, 1, formula)
    saved = openpyxl.load_workbook(calculate(save(book, "arguments.xlsx")), data_only=True)["Calls"]
    return {formula: saved.cell(row, 1).value for row, formula in enumerate(CALLS, 1)}


@pytest.mark.parametrize("formula", CALLS)
def test_what_reaches_the_function(answers: dict[str, object], formula: str) -> None:
    assert answers[formula] == CALLS[formula]


def test_dates_follow_the_workbook_s_own_calendar(
    calculate: Callable[[Path], Path], save: Callable[[openpyxl.Workbook, str], Path]
) -> None:
    book = openpyxl.Workbook()
    book.epoch = CALENDAR_MAC_1904
    sheet = book.active
    assert sheet is not None
    sheet["A1"] = dt.datetime(2024, 3, 4)
    sheet["B1"] = "=AX_ECHO(A1,)"
    saved = openpyxl.load_workbook(calculate(save(book, "calendar.xlsx")), data_only=True)
    told = saved["Sheet"]["B1"].value
    assert told == "Sheet!r1c1 [[datetime.datetime(2024, 3, 4, 0, 0)]] | None | None | None"
