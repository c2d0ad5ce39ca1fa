"""Ordinary formulas through the pre-pass and the engine.

Expected values are plain arithmetic; how a spreadsheet reads each formula is from memory.
"""

from __future__ import annotations

import datetime as dt
from pathlib import Path
from typing import Any

import pytest

from xlaxial import CellError
from xlaxial.hosts.headless.recalculate import recalculate

RTOL = 1e-12

CELLS: dict[str, Any] = {
    "Data!A1": "ID", "Data!B1": "Length", "Data!C1": "L", "Data!D1": "Mixed (mm)",
    "Data!A2": "s1", "Data!B2": 2.5, "Data!C2": 1,
    "Data!A3": "s2", "Data!B3": 3.5, "Data!C3": 2, "Data!D3": "",
    "Data!A4": "s3", "Data!B4": 4.0, "Data!C4": 3, "Data!D4": "txt",
    "Data!A5": "s4", "Data!C5": 4, "Data!D5": True,
    "Data!A6": "s5", "Data!B6": 6.0, "Data!C6": 5, "Data!D6": 7,
    "Data!G1": 10, "Data!G2": 20, "Data!G3": 30, "Data!G4": 40, "Data!G5": 50,
    "Data!H1": dt.datetime(2024, 3, 15), "Data!H2": "=H1+30",
    "Data!J1": "=1/0", "Data!J4": "=NA()",
    "Oth Er!A1": 42, "Oth Er!A2": "=Data!B2",
}  # fmt: skip
NAMES = {
    "lengths": "Data!$B$2:$B$6",
    "half": "0.5",
    "total": "SUM(Data!$G$1:$G$5)*2",
    "nested": "total+half",
    "Calc!local": "Data!$G$1",
    "Oth Er!local": "Data!$G$2",
    "gone": "#REF!",
}

CASES: list[tuple[str, Any]] = [
    # names and tables
    ("=SUM(lengths)", 16.0),
    ("=sum(LENGTHS)", 16.0),
    ("=local", 10.0),
    ("='Oth Er'!local", 20.0),
    ("=half*2", 1.0),
    ("=total", 300.0),
    ("=nested", 300.5),
    ("=IFERROR(gone,7)", 7.0),
    ("=SUM(Bars[Length])", 16.0),
    ("=SUM(Bars)", 38.0),
    ("=ROWS(Bars[#All])", 6.0),
    ("=Bars[[#Headers],[L]]", "L"),
    ("=SUM(Bars[[#Data],[Length]:[L]])", 31.0),
    ("=COUNTA(Bars[[#Headers],[ID]:[Mixed (mm)]])", 4.0),
    ('="d"&Bars[[#Headers],[Mixed (mm)]]', "dMixed (mm)"),
    ("='Oth Er'!A2", 2.5),
    # implicit intersection: the formula stands in row 3
    ("=Data!G1:G5", 30.0),
    ("=Data!G:G", 30.0),
    ("=Data!G1:G5*2", 60.0),
    ("=@Data!G1:G5", 30.0),
    ("=_xlfn.SINGLE(Data!G1:G5)", 30.0),
    ('=IF(Data!C2:C6>1,"y","n")', "y"),
    ("=ABS(Data!G1:G5)", 30.0),
    ("=Data!G4:G5", CellError("#VALUE!")),
    ("=SUM(IF(TRUE,Data!G1:G5,0))", 150.0),
    ("=VLOOKUP(Data!A2:A6,Data!A2:C6,3,FALSE)", 2.0),
    # one cell shows one value: nothing spills out of a plain formula
    ("=TRANSPOSE(Data!G1:G5)", 10.0),
    ("=INDEX(Data!G1:G5,0,1)", 10.0),
    # references
    ("=SUM(Data!G:G)", 150.0),
    ("=SUM( Data!G1 : G2 )", 30.0),
    ("=SUM(Data!G1:INDEX(Data!G1:G5,3))", 60.0),
    ("=SUM(OFFSET(Data!G1,1,0,3,1))", 90.0),
    ('=INDIRECT("Data!G2")', 20.0),
    ("=Data!B5", 0.0),
    ('="v"&Data!B5', "v"),
    # functions with a storage prefix
    ('=_xlfn.XLOOKUP("s3",Data!A2:A6,Data!B2:B6)', 4.0),
    ("=SUM(_xlfn._xlws.FILTER(Data!G1:G5,Data!C2:C6>2))", 120.0),
    ("=_xlfn.LET(_xlpm.x,5,_xlpm.x*2)", 10.0),
    # errors
    ("=1/0", CellError("#DIV/0!")),
    ("=Data!J4*2", CellError("#N/A")),
    ('=IF(ISERROR(Data!J1),"e","ok")', "e"),
    ("=IFERROR(NOSUCHNAME+1,5)", 5.0),
    ("=NOSUCHNAME", CellError("#NAME?")),
    ("=SQRT(-1)", CellError("#NUM!")),
    # dates are serial numbers
    ("=Data!H2", 45396.0),
    ("=YEAR(Data!H1)", 2024.0),
    ('=TEXT(Data!H1,"yyyy-mm-dd")', "2024-03-15"),
    # precedence and near zero
    ("=-3^2", 9.0),
    ("=2^3^2", 64.0),
    ("=50%*2", 1.0),
    ("=1E3+1.5E-1", 1000.15),
    # text made of numbers has 15 digits
    ('="x "&1/3', "x 0.333333333333333"),
    ('=TEXT(1234.567,"#,##0.00")', "1,234.57"),
    ('=TEXT(2.5,"0.0"" mm""")', "2.5 mm"),
    # matrices, which the engine lacks
    ("=SUM(MMULT(Data!G1:G2,{1,2}))", 90.0),
    ("=INDEX(MINVERSE({2,0;0,4}),2,2)", 0.25),
    ("=MDETERM({2,1;1,3})", 5.0),
    ("=SUM(MINVERSE({1,1;1,1}))", CellError("#NUM!")),
    ("=SUM(MMULT(Data!A2:A3,{1,2}))", CellError("#VALUE!")),
]


@pytest.fixture
def results(make_book: Any) -> Any:
    cells = CELLS | {f"Calc!{_letters(i)}3": formula for i, (formula, _) in enumerate(CASES)}
    path = make_book(cells, names=NAMES, tables={"Bars": "Data!A1:D6"})
    return {(r.sheet, r.cell): r for r in recalculate(path, {}).results}


def _letters(i: int) -> str:
    from openpyxl.utils import get_column_letter

    return str(get_column_letter(i + 1))


def test_formulas(results: Any) -> None:
    wrong = []
    for i, (formula, expected) in enumerate(CASES):
        result = results["Calc", f"{_letters(i)}3"]
        if isinstance(expected, float):
            good = type(result.new) is float and result.new == pytest.approx(expected, rel=RTOL)
        else:
            good = type(result.new) is type(expected) and result.new == expected
        if not good or result.state == "not recalculated":
            wrong.append((formula, expected, result.new, result.reason))
    assert wrong == []


def test_this_row_and_structured_references_inside_a_table(make_book: Any) -> None:
    cells = {
        "S!B2": "Length [mm]", "S!C2": "Sum", "S!D2": "Next",
        "S!B3": 5, "S!C3": "=T[[#This Row],[Length '[mm']]]*2", "S!D3": "=[@Sum]+1",
        "S!B4": 6, "S!C4": "=T[@[Length '[mm']]]*2", "S!D4": "=T[@Sum]+1",
        "S!F9": "=T[@Sum]",
    }  # fmt: skip
    path = make_book(cells, tables={"T": "S!B2:D4"})
    new = {r.cell: r.new for r in recalculate(path, {}).results}
    assert new == {"C3": 10.0, "D3": 11.0, "C4": 12.0, "D4": 13.0, "F9": CellError("#VALUE!")}


def test_dates_of_1904_stay_serial_numbers(tmp_path: Path) -> None:
    from openpyxl import Workbook
    from openpyxl.utils.datetime import CALENDAR_MAC_1904

    book = Workbook()
    book.epoch = CALENDAR_MAC_1904
    sheet = book.active
    sheet["A1"] = dt.datetime(2024, 3, 15)
    sheet["A2"], sheet["A3"] = "=YEAR(A1)", "=A1+1"
    book.save(tmp_path / "old.xlsx")
    new = {r.cell: r.new for r in recalculate(tmp_path / "old.xlsx", {}).results}
    # 45366 (2024-03-15 from 1900) less the 1462 days between the two beginnings
    assert new == {"A2": 2024.0, "A3": 43905.0}
