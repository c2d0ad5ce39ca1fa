"""What a function gives, as Calc shows it, counts it and saves it."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from openpyxl.worksheet.formula import ArrayFormula

from xlaxial.hosts.calc.office import Office, convert

pytestmark = pytest.mark.office

Calculate = Callable[[Path], Path]
Save = Callable[[openpyxl.Workbook, str], Path]


def _values(sheet: Any, area: str) -> list[list[Any]]:
    return [[cell.value for cell in row] for row in sheet[area]]


@pytest.fixture(scope="module")
def saved(calculate: Calculate, save: Save) -> Path:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.title = "Ties"
    for row in (["Mark", "Length (mm)"], ["T1", 1200], ["T2", "TBC"], ["T3", "=NA()"], ["T4", 800], ["T5", "=B2/2"]):
        sheet.append(row)
    sheet["D1"] = ArrayFormula("D1:K3", "=AX_GRID(Ties!A1:B2)")
    sheet["M1"] = ArrayFormula("M1:M5", "=AX_ROWS(A1:B6)")
    sheet["N1"] = "=MAX(M1:M5)"
    sheet["N2"] = "=_xlfn.AGGREGATE(14,6,M1:M5,1)"
    sheet["N3"] = "=ISBLANK(E1)"
    sheet["N4"] = '=AX_FAULT("T1")'
    sheet["N5"] = "=AX_HELLO()"
    sheet["N6"] = '=AX_DATUM("twelve")+1'
    sheet["N7"] = '=IFERROR(AX_DATUM("eleven"),-1)'
    sheet["O1"] = ArrayFormula("O1:O2", "=AX_FAULTS(A1:B2)")
    sheet["P1"] = "=SUM(AX_ROWS(A1:B2))"
    sheet["P2"] = "=AX_ROWS(A4:B5)"
    sheet["P3"] = "=AX_ROWS(M1:M2)"  # a table that is itself an answer
    sheet["P4"] = '=F1&""'
    sheet["P5"] = '=ax_datum("twelve")'
    sheet["Q1"] = "=ROWS(AX_ROWS(A1:B5000))"
    sheet["Q2"] = "=ROWS(AX_ROWS(A:B))"
    sheet["Q3"] = "=COLUMNS(AX_ROWS(A1:B5000))"
    return calculate(save(book, "results.xlsx"))


@pytest.fixture(scope="module")
def sheet(saved: Path) -> Any:
    return openpyxl.load_workbook(saved, data_only=True)["Ties"]


def test_a_grid_keeps_numbers_texts_blanks_truths_and_errors(sheet: Any) -> None:
    first, errors, odd = _values(sheet, "D1:K3")
    assert [first[0], *first[2:6]] == [1.5, "text", 1, 0, 3]
    assert first[1] in (None, "")
    assert errors == ["#NULL!", "#DIV/0!", "#VALUE!", "#REF!", "#NAME?", "#NUM!", "#N/A", "#VALUE!"]
    assert odd[:4] == ["#NUM!", "#NUM!", 0, -1e300]
    assert odd[5] == "é√"
    assert {"e"} == {cell.data_type for cell in sheet["D2:K2"][0]}


def test_a_wrong_row_fails_alone_and_no_summary_passes_over_it(sheet: Any) -> None:
    assert _values(sheet, "M1:M5") == [[1200], ["#VALUE!"], ["#N/A"], [800], [600]]
    assert sheet["N1"].value == "#VALUE!"
    assert sheet["N2"].value == 1200


def test_a_fault_is_an_error_value_without_a_trace(sheet: Any) -> None:
    assert sheet["N4"].value == "#VALUE!"
    assert {"#VALUE!"} == {cell.value for row in sheet["O1:O2"] for cell in row}


def test_single_cells_work_inside_other_formulas(sheet: Any) -> None:
    assert [sheet[cell].value for cell in ("N5", "N6", "N7")] == ["hello", 13, -1]
    assert [sheet[cell].value for cell in ("P1", "P2", "P4", "P5")] == [1200, 800, "text", 12]


def test_a_range_with_an_end_keeps_its_height_and_whole_columns_end_with_the_last_filled_cell(sheet: Any) -> None:
    assert [sheet[cell].value for cell in ("Q1", "Q2", "Q3")] == [4999, 5, 1]


def test_a_table_may_hold_the_answer_of_another_call(sheet: Any) -> None:
    assert sheet["P3"].value == "#VALUE!"


def test_names_stay_as_written_in_an_xlsx_file(saved: Path) -> None:
    formulas = openpyxl.load_workbook(saved)["Ties"]
    assert formulas["N5"].value == "=AX_HELLO()"
    assert formulas["N6"].value == '=AX_DATUM("twelve")+1'
    assert formulas["P5"].value == '=AX_DATUM("twelve")'
    assert (formulas["D1"].value.ref, formulas["D1"].value.text) == ("D1:K3", "=AX_GRID(Ties!A1:B2)")


def test_a_second_opening_recalculates_from_the_saved_formulas(saved: Path, calculate: Calculate, save: Save) -> None:
    """What Calc has saved, with an input edited outside and the stored values left old, is recalculated wholly."""
    book = openpyxl.load_workbook(saved)
    book["Ties"]["B2"] = 1500
    again = openpyxl.load_workbook(calculate(save(book, "again.xlsx")), data_only=True)["Ties"]
    assert _values(again, "M1:M5") == [[1500], ["#VALUE!"], ["#N/A"], [800], [750]]
    assert again["P5"].value == 12


def test_names_survive_the_program_s_own_file_type(
    saved: Path, office: Office, extensions: Path, calculate: Calculate, tmp_path: Path
) -> None:
    (tmp_path / "ods").mkdir()
    own = convert(saved, tmp_path / "ods", tmp_path / "profile", extensions, office=office, to="ods")
    back = calculate(own)
    assert openpyxl.load_workbook(back)["Ties"]["N6"].value == '=AX_DATUM("twelve")+1'
    assert openpyxl.load_workbook(back, data_only=True)["Ties"]["N6"].value == 13
