"""Where the package does not load inside the office: a message where text is due, error values where numbers are."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import calc_functions
import openpyxl
import pytest
from openpyxl.worksheet.formula import ArrayFormula

from xlaxial.hosts.calc.extension import Source, write_extension
from xlaxial.hosts.calc.office import Office, convert

pytestmark = pytest.mark.office

Answers = Callable[[Source], Any]


@pytest.fixture(scope="module")
def answers(office: Office, tmp_path_factory: pytest.TempPathFactory) -> Answers:
    folder = tmp_path_factory.mktemp("missing")
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    for row in (["Mark", "Length (mm)"], ["T1", 1200], ["T2", 800]):
        sheet.append(row)
    sheet["D1"], sheet["E1"] = "Utilisation", "Status"
    sheet["D2"] = ArrayFormula("D2:E3", "=AX_ROWS(A1:B3,D1:E1)")
    sheet["F2"] = "=MAX(D2:D3)"
    sheet["G1"] = ArrayFormula("G1:H3", "=AX_ROWS(A1:B3)")
    sheet["I1"] = "=MAX(G2:H3)"
    sheet["J1"] = ArrayFormula("J1:L2", '=AX_ROWS(A1:B3,"Problems")')
    sheet["M1"] = "=AX_HELLO()"
    sheet["N1"] = '=AX_DATUM("twelve")'
    sheet["O1"] = '=AX_ROWS(A1:B2,"kN")'
    book.save(folder / "book.xlsx")

    def of(source: Source) -> Any:
        write_extension(folder / "extensions" / "xlaxial", calc_functions.FUNCTIONS, source)
        saved = convert(folder / "book.xlsx", folder / "out", folder / "profile", folder / "extensions", office=office)
        return openpyxl.load_workbook(saved, data_only=True).active

    (folder / "out").mkdir()
    return of


def test_a_missing_package_is_named_and_no_number_appears(answers: Answers) -> None:
    sheet = answers(Source("calc_functions:caller", (), ("no_such_package",)))
    message = sheet["M1"].value
    assert "no_such_package" in message
    assert 'run "xlaxial calc install"' in message
    assert [[cell.value for cell in row] for row in sheet["D2:E3"]] == [["#NAME?", message]] * 2
    assert sheet["F2"].value == "#NAME?"
    block = [[cell.value for cell in row] for row in sheet["G1:H3"]]
    assert block[0] == [message, message]
    assert {cell for row in block[1:] for cell in row} <= {"#NAME?", "#N/A"}
    assert sheet["I1"].value in ("#NAME?", "#N/A")
    assert sheet["J1"].value == 1
    assert [cell.value for cell in sheet["J2:L2"][0]] == ["xlaxial", message, "xlaxial calc install"]
    assert sheet["N1"].value == sheet["O1"].value == "#NAME?"


def test_packages_of_another_python_are_named_with_both_versions(answers: Answers) -> None:
    message = answers(Source("calc_functions:caller", (), ("no_such_package",), (3, 99)))["M1"].value
    assert "installed with Python 3.99" in message
    assert "LibreOffice runs Python 3." in message
