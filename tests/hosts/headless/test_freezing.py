"""What cannot be evaluated keeps its stored value, and so does all that reads it; neither is compared."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import pytest

from xlaxial.hosts.headless.freezing import Readers, area_of
from xlaxial.hosts.headless.recalculate import FROZEN, recalculate


@pytest.mark.parametrize(
    ("formula", "reason"),
    [
        ("=[1]Other!A1", "refers to another workbook"),
        ("='[1]Other one'!A1*2", "refers to another workbook"),
        ("=SUM([2]Prices!$A$1:$A$9)", "refers to another workbook"),
        ("='[other book.xlsx]Sheet one'!A1", "refers to another workbook"),
        ("=SUM('C:\\jobs\\[other.xlsx]S'!A1:B2)", "refers to another workbook"),
        ('=_xlfn.XLOOKUP(7,A1:A2,A1:A2,"none",1,2)+1', "XLOOKUP finds less here"),
        ("=SUM(S:T!A1)", "refers to several sheets as a stack"),
        ("=[0]!MyMacro(A1)", "the function MYMACRO is not available here"),
        ("=GETPIVOTDATA(A1,B1)", "the function GETPIVOTDATA is not available here"),
        ("=RAND()", "changes at every calculation"),
        ("=YEAR(TODAY())", "changes at every calculation"),
        ('=TEXT(A1,"0.00E+00")', "the format of TEXT is not evaluated here"),
        ("=TEXT(A1,B1)", "the format of TEXT is not evaluated here"),
        ('=CONVERT(1,"kip","N")', "CONVERT knows fewer units here"),
        ("=D1", "it reads its own cell"),
        ("=SUM((A1:A2,B1))", "not implemented by the engine"),
        ("=SUM(A1", "cannot be read|brackets do not match"),
        ("=elsewhere", "refers to another workbook"),
        ("=moving*2", "the name moving moves with the cell that uses it"),
    ],
)
def test_reason_and_dependents(make_book: Any, formula: str, reason: str) -> None:
    cells = {
        "S!A1": 1, "S!A2": 2, "S!B1": "0.0", "S!D1": formula,
        "S!E1": "=D1+1", "S!E2": "=E1+1", "S!E3": "=SUM(C1:E1)", "S!E4": "=named", "S!E5": '=INDIRECT("D"&1)', "S!F1": "=A1+A2",
        "S!E6": "=SUM(D:D)", "S!E7": "=SUM(1:1)", "T!A1": "=S!D1", "T!A2": "=IFERROR(S!D1,0)",
    }  # fmt: skip
    path = make_book(cells, names={"named": "S!$E$2", "elsewhere": "[1]Other!$A$1", "moving": "S!A$1+1"})
    results = {f"{r.sheet}!{r.cell}": r for r in recalculate(path, {}).results}
    assert re.search(reason, results["S!D1"].reason), results["S!D1"]
    frozen = {place for place, result in results.items() if result.state == FROZEN}
    assert frozen == set(results) - {"S!F1"}
    assert results["S!F1"].new == 3.0
    passed_on = "not implemented by the engine"  # the engine hands this state on to what reads the cell
    assert results["S!E2"].reason in ("reads a cell that is not recalculated", passed_on)


def test_circular_references_end_and_are_named(make_book: Any) -> None:
    path = make_book({"S!A1": "=B1+1", "S!B1": "=A1", "S!C1": "=IFERROR(A1,5)", "S!D1": "=1+1"})
    results = {r.cell: r for r in recalculate(path, {}).results}
    assert results["A1"].reason == results["B1"].reason == "circular reference"
    assert results["C1"].state == FROZEN
    assert results["D1"].new == 2.0


def test_volatile_cells_are_evaluated_where_asked(make_book: Any) -> None:
    path = make_book({"S!A1": "=TODAY()", "S!A2": "=A1*0+3"})
    results = {r.cell: r for r in recalculate(path, {}, volatile=True).results}
    assert results["A1"].new > 45000
    assert results["A2"].new == 3.0


def test_subtotals_over_hidden_rows_are_not_recalculated(make_book: Any) -> None:
    from openpyxl import load_workbook

    path: Path = make_book(
        {"S!A1": 1, "S!A2": 2, "S!A3": "=SUBTOTAL(109,A1:A2)", "T!A1": 4, "T!A2": "=SUBTOTAL(9,A1:A1)"}
    )
    book = load_workbook(path)
    book["S"].row_dimensions[2].hidden = True
    book.save(path)
    results = {f"{r.sheet}!{r.cell}": r for r in recalculate(path, {}).results}
    assert results["S!A3"].reason == "depends on which rows are hidden"
    assert results["T!A2"].new == 4.0


def test_an_evaluation_that_takes_too_long_ends(make_book: Any) -> None:
    from xlaxial.hosts.headless.errors import WorkbookError

    cells: dict[str, Any] = {f"S!A{i}": i for i in range(1, 4001)}
    cells |= {f"S!B{i}": f"=SUMPRODUCT((A$1:A$4000>{i})*(A$1:A$4000<{i + 7})*A$1:A$4000)" for i in range(1, 3001)}
    path = make_book(cells)
    with pytest.raises(WorkbookError, match=r"book\.xlsx: its evaluation takes longer than 0\.05 s"):
        recalculate(path, {}, seconds=0.05)


@pytest.mark.parametrize(
    ("reference", "area"),
    [
        ("B3", ("s", 2, 3, 2, 3)),
        ("$B$3:D$4", ("s", 2, 3, 4, 4)),
        ("D4:B3", ("s", 2, 3, 4, 4)),
        ("'Oth ''r'!B3", ("oth 'r", 2, 3, 2, 3)),
        ("T!A:C", ("t", 1, 1, 3, 1 << 20)),
        ("3:4", ("s", 1, 3, 1 << 14, 4)),
        ("SUM", None),
        ("#REF!", None),
    ],
)
def test_area_of(reference: str, area: Any) -> None:
    assert area_of(reference, "S") == area


def test_long_chains_are_followed() -> None:
    readers = Readers()
    for row in range(2, 5001):
        readers.add([("s", row, 1)], [("s", 1, row - 1, 1, row - 1)], reaching=False)
    readers.add([("s", 1, 9)], [("s", 1, 4000, 3, 6000)], reaching=False)
    readers.add([("s", 2, 9)], [("s", 2, 1, 3, 6000)], reaching=False)
    found = readers.downstream([("s", 1, 1)])
    assert len(found) == 5000
    assert ("s", 2, 9) not in found
    assert readers.downstream([]) == set()
