"""Blocks: array formulas of a fixed range, and arrays that spill by themselves."""

from __future__ import annotations

import re
import zipfile
from pathlib import Path
from typing import Any

import pytest
from openpyxl import load_workbook

from xlaxial import CellError
from xlaxial.hosts.headless.commands import recalc
from xlaxial.hosts.headless.recalculate import recalculate

NA = CellError("#N/A")


def block(rows: int, columns: int) -> Any:
    return lambda *_: [[10.0 * i + j for j in range(columns)] for i in range(rows)]


@pytest.mark.parametrize(
    ("size", "expected"),
    [
        ((3, 2), [[0, 1], [10, 11], [20, 21]]),
        ((4, 3), [[0, 1], [10, 11], [20, 21]]),
        ((2, 2), [[0, 1], [10, 11], [NA, NA]]),
        ((3, 1), [[0, 0], [10, 10], [20, 20]]),
        ((1, 2), [[0, 1], [0, 1], [0, 1]]),
        ((2, 1), [[0, 0], [10, 10], [NA, NA]]),
        ((1, 1), [[0, 0], [0, 0], [0, 0]]),
    ],
)
def test_an_array_formula_is_fitted_to_its_range(make_book: Any, size: tuple[int, int], expected: Any) -> None:
    path = make_book({"S!D1": "=B3"}, arrays={"S!A1:B3": "=AX_B()"})
    new = {(r.row, r.column): r.new for r in recalculate(path, {"AX_B": block(*size)}).results}
    assert [[new[i, j] for j in (1, 2)] for i in (1, 2, 3)] == expected
    assert new[1, 4] == expected[2][1]


def test_ordinary_array_formulas(make_book: Any) -> None:
    cells = {"S!A1": 1, "S!A2": 2, "S!A3": 3}
    arrays = {
        "S!C1:C1": "=SUM(IF(A1:A3>1,A1:A3))",
        "S!D1:F1": "=TRANSPOSE(A1:A3)",
        "S!G1:G3": "=A1:A3*2",
        "S!H1:H2": "=B1:B2",
    }
    new = {r.cell: r.new for r in recalculate(make_book(cells, arrays), {}).results}
    assert new == {"C1": 5, "D1": 1, "E1": 2, "F1": 3, "G1": 2, "G2": 4, "G3": 6, "H1": 0, "H2": 0}


@pytest.fixture
def spilling(make_book: Any, change_part: Any) -> Path:
    """A workbook whose A1 spills by itself over A1:A3 as stored (cm in the XML), with cells that read it."""
    path = make_book(
        {"S!A2": 10.0, "S!A3": 20.0, "S!D1": "=SUM(_xlfn.ANCHORARRAY(A1))", "S!D2": "=SUM(A1:A5)", "S!A9": "kept"},
        arrays={"S!A1:A3": "=AX_B()"},
    )

    def mark(data: bytes) -> bytes:
        out, count = re.subn(rb'<c r="A1"', b'<c r="A1" cm="1"', data)
        assert count == 1
        return out

    changed: Path = change_part(path, "xl/worksheets/sheet1.xml", mark)
    return changed


@pytest.mark.parametrize("rows", [1, 2, 3, 4])
def test_a_dynamic_array_takes_the_size_that_it_has_now(
    spilling: Path, rows: int, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    functions = {"AX_B": block(rows, 1)}
    new = {r.cell: r.new for r in recalculate(spilling, functions).results}
    expected = {f"A{i + 1}": (10.0 * i if i < rows else None) for i in range(max(rows, 3))}
    total = sum(10.0 * i for i in range(rows))
    assert new == expected | {"D1": total, "D2": total}

    monkeypatch.setattr("xlaxial.hosts.headless.recalculate.worksheet_functions", lambda: functions)
    out = tmp_path / "out.xlsx"
    assert recalc(spilling, out, in_place=False) == 0
    text = zipfile.ZipFile(out).read("xl/worksheets/sheet1.xml").decode()
    reference = "A1:A1" if rows == 1 else f"A1:A{rows}"
    assert f'ref="{reference}"' in text
    assert '<c r="A1" cm="1"' in text
    values = load_workbook(out, data_only=True)["S"]
    assert [values.cell(i + 1, 1).value for i in range(4)] == [10 * i if i < rows else None for i in range(4)]
    assert values["A9"].value == "kept"
    again = recalculate(out, functions)
    assert {r.state for r in again.results} == {"same"}


def test_a_dynamic_array_that_is_blocked_says_so(spilling: Path) -> None:
    new = {r.cell: r.new for r in recalculate(spilling, {"AX_B": block(9, 1)}).results}
    assert new["A1"] == CellError("#SPILL!")


def test_a_huge_array_is_left_alone(make_book: Any) -> None:
    path = make_book({"S!C1": "=1+1"}, arrays={"S!D1:XFD1048576": "=A1"})
    results = {r.cell: r for r in recalculate(path, {}).results}
    assert "more than 1000000 cells" in results["D1"].reason
    assert results["C1"].new == 2.0
