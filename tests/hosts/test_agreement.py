"""All hosts agree, cell by cell: every shipped workbook, and a generated one with every function and every error.

A function that joins the registry is picked up by its example: its named ranges and its cells of headings are made here.
"""

from __future__ import annotations

import json
import math
import os
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from openpyxl import Workbook, load_workbook
from openpyxl.utils import range_boundaries
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.formula import ArrayFormula

import xlaxial
from xlaxial import CellError
from xlaxial.functions.registry import Function, load
from xlaxial.hosts.calc.extension import OFFICE_LEAST, Source, package_folders, write_extension
from xlaxial.hosts.calc.office import convert, find_office
from xlaxial.hosts.headless.recalculate import FROZEN, Recalculation, recalculate
from xlaxial.units import DIMENSIONS

pytestmark = pytest.mark.office

SHIPPED = sorted((Path(__file__).parents[2] / "workbooks").glob("*.xlsx"))
RELATIVE, ABSOLUTE = 1e-12, 1e-9  # numbers of kN, MPa and mm below the latter are rounding

TABLES: dict[str, dict[str, list[list[Any]]]] = {
    "good": {
        "Segments": [
            ["Mark", "Length (mm)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)", "Yield (MPa)"],
            ["T1", 1200, 600, 205, 12, 15, 355],
            ["T1", 800, 450, 205, 12, 15, 235],
            ["T2", 900, 500, 70, 23, -8, None],
        ],
        "Supports": [["Mark", "Node", "Stiffness (kN/mm)"], ["T1", 0, None], ["T1", 2, 40], ["T2", 0, None], ["T2", 1, 25]],
        "Loads": [["Mark", "Node", "x (m)", "Force (kN)"], ["T1", 1, None, 12], ["T1", None, 0.5, -4], ["T2", 1, None, 3]],
    },
    "bad": {  # a text, an error cell, a member without support, a support of no member, a load outside
        "Segments": [
            ["Mark", "Length (mm)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)", "Yield (MPa)"],
            ["T1", 1200, 600, 205, 12, 15, 355],
            ["B1", "TBC", 450, 205, 12, 15, 235],
            ["B2", 900, "#N/A", 70, 23, -8, None],
            ["B3", 900, 500, 70, 23, -8, None],
            ["B4", 900, 500, 70, 23, -8, None],
            [None, None, None, None, None, None, None],
            ["T1", 800, 450, 205, 12, 15, 235],
        ],
        "Supports": [["Mark", "Node", "Stiffness (kN/mm)"], ["T1", 0, None], ["T1", 2, 40], ["B1", 0, 5], ["B2", 0, 5], ["B4", 0, None], ["X", 0, 1]],
        "Loads": [["Mark", "Node", "x (m)", "Force (kN)"], ["B4", None, 7, 12], ["T1", 1, None, 12]],
    },
    "unusable": {"Segments": [["Reach", "Area (mm2)"], [5, 6]], "Supports": [["Node"], [0]], "Loads": [["Node", "Force"], [0, 5]]},
}  # fmt: skip


def headings(function: Function, width: int) -> list[str]:
    """As many of a function's words as there is room for, each with a unit; one that is not understood comes last."""
    names = []
    for word in function.words[: width - 1]:
        unit = (
            f" ({DIMENSIONS[word.dimension].examples[0]})"
            if word.dimension in DIMENSIONS and word.dimension != "ratio"
            else ""
        )
        names.append(word.name + unit)
    return [*names, "Colour"]


def generated(path: Path) -> None:
    """Write a workbook with every function of the registry on good, bad and unusable tables, and every wanted word."""
    book = Workbook()
    book.remove(book.active)
    for kind, tables in TABLES.items():
        for name, function in load().items():
            sheet = book.create_sheet(f"{name[3:]} {kind}")
            column = 20
            for table, rows in tables.items():
                for i, row in enumerate(rows):
                    for j, value in enumerate(row):
                        cell = sheet.cell(1 + i, column + j, value)
                        if value == "#N/A":
                            cell.data_type = "e"
                area = (
                    f"{sheet.cell(1, column).coordinate}:{sheet.cell(len(rows), column + len(rows[0]) - 1).coordinate}"
                )
                fixed = re.sub(r"([A-Z]+)(\d+)", r"$\1$\2", area)
                sheet.defined_names[table] = DefinedName(table, attr_text=f"'{sheet.title}'!{fixed}")
                column += 10
            for area in re.findall(r"\b[A-Z]+\d+:[A-Z]+\d+\b", function.example):
                c1, r1, c2, _ = range_boundaries(area)
                for j, heading in enumerate(headings(function, c2 - c1 + 1)):
                    sheet.cell(r1, c1 + j, heading)
            columns = 2 if function.shape == "cell" else 9
            block = f"A10:{sheet.cell(18 if columns == 9 else 10, columns).coordinate}"
            sheet["A10"] = ArrayFormula(block, function.example)
            sheet["A20"] = (
                function.example.replace("=", "=IFERROR(INDEX(", 1) + ',2,1),"none")'
                if columns == 9
                else function.example
            )
            for k in range(len(function.words)):  # each word alone, and the problems
                heading = headings(function, k + 2)[k]
                call = re.sub(r'(Loads)(, "[^"]*"|, [A-Z]+\d+:[A-Z]+\d+)?\)$', rf'\1, "{heading}")', function.example)
                if call.endswith(f'"{heading}")') and name != "AX_PROFILE":
                    sheet.cell(22, 1 + k).value = ArrayFormula(
                        f"{sheet.cell(22, 1 + k).coordinate}:{sheet.cell(30, 1 + k).coordinate}", call
                    )
            if "Loads" in function.example and name != "AX_PROFILE":
                call = re.sub(r"Loads.*\)$", 'Loads, "Problems")', function.example)
                sheet["A33"] = ArrayFormula("A33:C42", call)
            sheet["A45"] = "=MAX(A22:A30)"
            sheet["B45"] = (
                '=IFERROR(_xlfn.AGGREGATE(14,6,A22:A30,1),"none")'  # without a number the hosts differ in the error
            )
    book.save(path)


@pytest.fixture(scope="module")
def extensions(tmp_path_factory: pytest.TempPathFactory) -> Path:
    office = find_office()
    if office is None or not office.at_least(OFFICE_LEAST):
        reason = "LibreOffice 25.2 or newer is not installed"
        if os.environ.get("CI"):
            pytest.fail(reason)
        pytest.skip(reason)
    folder = tmp_path_factory.mktemp("agreement") / "extensions"
    write_extension(folder / "xlaxial", list(load().values()), Source(folders=package_folders()))
    return folder


def in_calc(book: Path, extensions: Path) -> dict[tuple[str, str], Any]:
    """Every cell of a workbook after a full recalculation in LibreOffice Calc."""
    out = extensions.parent / "out"
    out.mkdir(exist_ok=True)
    saved = load_workbook(convert(book, out, extensions.parent / "profile", extensions), data_only=True)
    return {
        (sheet.title, cell.coordinate): CellError(cell.value) if cell.data_type == "e" else cell.value
        for sheet in saved.worksheets
        for row in sheet.iter_rows()
        for cell in row
    }


def over_stubs(book: Path) -> dict[tuple[str, str], Any]:
    """Every recalculated cell with our functions called through xlwings as Excel calls them, over stubs."""
    script = Path(__file__).parent / "excel" / "through_excel.py"
    paths = [str(Path(xlaxial.__file__).parents[1]), *filter(None, [os.environ.get("PYTHONPATH")])]
    done = subprocess.run(
        [sys.executable, str(script), str(book)],
        capture_output=True,
        text=True,
        check=False,
        timeout=300,
        env=os.environ | {"PYTHONPATH": os.pathsep.join(paths)},
    )
    assert done.returncode == 0, done.stderr
    cells = json.loads(done.stdout)
    return {(sheet, cell): CellError(new["error"]) if isinstance(new, dict) else new for sheet, cell, new in cells}


def same(ours: Any, theirs: Any) -> bool:
    if isinstance(ours, (int, float)) and isinstance(theirs, (int, float)):
        return (
            math.isclose(ours, theirs, rel_tol=RELATIVE, abs_tol=ABSOLUTE * RELATIVE)
            or max(abs(ours), abs(theirs)) < ABSOLUTE
        )
    if isinstance(ours, str) and isinstance(theirs, str) and theirs.endswith("…"):  # Excel takes 255 characters
        return len(theirs) == 255 and ours.startswith(theirs[:-1])
    return (ours or "") == (theirs or "")


def differences(done: Recalculation, other: dict[tuple[str, str], Any]) -> list[str]:
    return [
        f"{r.sheet}!{r.cell}: headless {r.new!r}, there {other.get((r.sheet, r.cell))!r}: {r.formula[:90]}"
        for r in done.results
        if r.state == FROZEN or not same(r.new, other.get((r.sheet, r.cell)))
    ]


@pytest.mark.parametrize("book", SHIPPED, ids=lambda path: path.name)
def test_shipped_workbooks(book: Path, extensions: Path) -> None:
    done = recalculate(book)
    assert len(done.results) > 100
    assert differences(done, in_calc(book, extensions)) == []
    assert differences(done, over_stubs(book)) == []


def test_every_function_and_every_error(tmp_path: Path, extensions: Path) -> None:
    book = tmp_path / "every.xlsx"
    generated(book)
    done = recalculate(book)
    assert {name for name in load() if any(name in r.formula for r in done.results)} == set(load())
    values = {str(r.new) for r in done.results}
    assert {"#VALUE!", "#NUM!", "#N/A", "#NAME?"} <= values
    assert differences(done, in_calc(book, extensions)) == []
    assert differences(done, over_stubs(book)) == []


def test_the_comparison_can_fail() -> None:
    assert not same(1.0, 1.0 + 1e-9)
    assert not same(CellError("#N/A"), CellError("#VALUE!"))
    assert not same("ok", "")
    assert same(None, "")


HEATED = [
    ["Mark", "Length (mm)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)"],
    ["S1", 540, 1100, 70, 23, 30],
    ["S1", 820, 640, 205, 12, 30],
    ["S1", 370, 900, 110, 18, 30],
]
CHAIN_ENDS = [["Mark", "Node", "Stiffness (kN/mm)"], ["S1", 0, 70], ["S1", 3, 150]]


def heated_chain(path: Path, rows: list[list[Any]], ends: list[list[Any]], force: str = "Force (kN)") -> Path:
    """The agreed example of a heated chain between springs, in a workbook."""
    book = Workbook()
    sheet = book.active
    for first, table in ((1, rows), (8, ends)):
        for i, row in enumerate(table):
            for j, value in enumerate(row):
                cell = sheet.cell(1 + i, first + j, value)
                if value == "#N/A":
                    cell.data_type = "e"
    n = len(rows)
    tables = f"A1:F{n},H1:J{len(ends)},"
    for j, heading in enumerate((force, "Stress (MPa)", "Displacement start (mm)", "Displacement end (mm)", "Status")):
        sheet.cell(1, 12 + j, heading)
    sheet["L2"] = ArrayFormula(f"L2:P{n}", f"=AX_SEGMENTS({tables},L1:P1)")
    sheet["R2"] = ArrayFormula(f"R2:R{len(ends)}", f'=AX_REACTIONS({tables},"kN")')
    sheet["T1"] = f"=MAX(L2:L{n})"
    sheet["T2"] = f"=_xlfn.AGGREGATE(14,6,L2:L{n},1)"
    sheet["T3"] = f"=MIN(L2:L{n})"
    book.save(path)
    return path


@pytest.fixture(params=["headless", "Excel over stubs", "Calc"])
def host(request: pytest.FixtureRequest, extensions: Path) -> Any:
    """Each host, as a function from a workbook to its cells."""
    if request.param == "headless":
        return lambda book: {(r.sheet, r.cell): r.new for r in recalculate(book).results}
    return over_stubs if request.param == "Excel over stubs" else lambda book: in_calc(book, extensions)


def cells(values: dict[tuple[str, str], Any], *names: str) -> list[Any]:
    return [values["Sheet", name] for name in names]


def digits(*values: float) -> list[Any]:
    return [pytest.approx(value, abs=0.51e-6) for value in values]


@pytest.mark.parametrize("unit", ["K", "°F"])
def test_a_heated_chain_between_springs(host: Any, tmp_path: Path, unit: str) -> None:
    """Example 2a, in kelvins and in degrees Fahrenheit."""
    rows = [[*HEATED[0][:5], f"dT ({unit})"], *([*row[:5], 30 if unit == "K" else 54] for row in HEATED[1:])]
    found = host(heated_chain(tmp_path / "chain.xlsx", rows, CHAIN_ENDS))
    assert cells(found, "L2", "L3", "L4") == digits(-22.860009, -22.860009, -22.860009)
    assert cells(found, "M2", "M3", "M4") == digits(-20.781826, -35.718763, -25.400010)
    assert cells(found, "N2", "O4") == digits(-0.326572, 0.152400)
    assert cells(found, "R2", "R3") == digits(22.860009, -22.860009)


def test_edits_are_seen(host: Any, tmp_path: Path) -> None:
    """Example 2b: another temperature, another unit in the result's heading, rigid ends."""
    hotter = [HEATED[0], *([*row[:5], 31] for row in HEATED[1:])]
    assert cells(host(heated_chain(tmp_path / "a.xlsx", hotter, CHAIN_ENDS)), "L2") == digits(-23.622009)
    assert cells(host(heated_chain(tmp_path / "b.xlsx", HEATED, CHAIN_ENDS, "Force (lbf)")), "L2") == digits(
        -5139.134362
    )
    rigid = [CHAIN_ENDS[0], *([*row[:2], None] for row in CHAIN_ENDS[1:])]
    found = host(heated_chain(tmp_path / "c.xlsx", HEATED, rigid))
    assert cells(found, "L2") == digits(-51.034211)
    assert "rigid" in found["Sheet", "P2"]


@pytest.mark.parametrize("wrong", ["TBC", "#N/A"])
def test_a_wrong_member_fails_alone_and_no_summary_passes_over_it(host: Any, tmp_path: Path, wrong: str) -> None:
    """Example 2c."""
    rows = [*HEATED, ["S2", 540, 1100, 70, 23, 30], ["S2", wrong, 640, 205, 12, 30]]
    found = host(heated_chain(tmp_path / "chain.xlsx", rows, [*CHAIN_ENDS, ["S2", 0, 70], ["S2", 2, 150]]))
    assert cells(found, "L2", "L3", "L4") == digits(-22.860009, -22.860009, -22.860009)
    assert cells(found, "L5", "L6", "R4", "R5") == [CellError("#VALUE!")] * 4
    assert isinstance(found["Sheet", "T1"], CellError)
    assert isinstance(found["Sheet", "T3"], CellError)
    assert cells(found, "T2") == digits(-22.860009)
    assert "B6" in found["Sheet", "P5"] and "B6" in found["Sheet", "P6"]
