"""The shipped workbooks: every stored value holds, they are as their script builds them, and they say what they must."""

from __future__ import annotations

import zipfile
from pathlib import Path

import pytest
from openpyxl import load_workbook
from openpyxl.worksheet.formula import ArrayFormula

from xlaxial.caution import CAUTION
from xlaxial.demos.quay import build
from xlaxial.hosts.headless.recalculate import SAME, recalculate

FOLDER = Path(__file__).parents[1] / "workbooks"
QUAY = FOLDER / "quay-ties.xlsx"


@pytest.mark.parametrize("book", sorted(FOLDER.glob("*.xlsx")), ids=lambda path: path.name)
def test_every_stored_value_holds(book: Path) -> None:
    results = recalculate(book).results
    assert len(results) > 100
    assert [f"{r.sheet}!{r.cell}" for r in results if r.state != SAME] == []


def formulas(book: object) -> dict[str, object]:
    out = {}
    for sheet in book.worksheets:  # type: ignore[attr-defined]
        for row in sheet.iter_rows():
            for cell in row:
                value = cell.value
                if isinstance(value, ArrayFormula):
                    out[f"{sheet.title}!{cell.coordinate}"] = (value.ref, "=" + value.text.lstrip("="))
                elif value is not None and cell.data_type == "f":
                    out[f"{sheet.title}!{cell.coordinate}"] = value
    return out


def test_the_quay_schedule_is_as_its_script_builds_it() -> None:
    shipped, built = load_workbook(QUAY), build()
    assert formulas(shipped) == formulas(built)
    parts = {
        cell: (ref, text) for cell, (ref, text) in ((c, v) for c, v in formulas(built).items() if isinstance(v, tuple))
    }
    covered = {
        f"{cell.split('!')[0]}!{c.coordinate}"
        for cell, (ref, _) in parts.items()
        for row in shipped[cell.split("!")[0]][ref]
        for c in row
    }
    for sheet in built.worksheets:
        for row in sheet.iter_rows():
            for cell in row:
                place = f"{sheet.title}!{cell.coordinate}"
                if cell.data_type != "f" and not isinstance(cell.value, ArrayFormula) and place not in covered:
                    assert shipped[sheet.title][cell.coordinate].value == cell.value, place


def test_the_quay_schedule_is_large_and_mixed_enough() -> None:
    values = load_workbook(QUAY, data_only=True)
    rows = [row for row in values["Ties"].iter_rows(min_row=9, max_col=9, values_only=True) if row[0]]
    assert len({row[0] for row in rows}) >= 25 and len(rows) >= 80
    assert any(isinstance(row[2], str) and row[2].endswith("in") for row in rows)
    assert {row[1] for row in values["Loads"].iter_rows(min_row=9, max_col=2, values_only=True) if row[1]} == {
        "D",
        "L",
        "T",
    }
    assert {"1.4462", "S355", "S460N"} <= {row[7] for row in rows}


@pytest.mark.parametrize("book", sorted(FOLDER.glob("*.xlsx")), ids=lambda path: path.name)
def test_parts_and_caution(book: Path) -> None:
    with zipfile.ZipFile(book) as package:
        names = package.namelist()
        assert any("/charts/" in name for name in names)
        assert not any("externalLink" in name or "vbaProject" in name for name in names)
        assert b"fullCalcOnLoad" not in package.read("xl/workbook.xml").replace(b'fullCalcOnLoad="0"', b"")
    shipped = load_workbook(book)
    texts = {cell.value for sheet in shipped.worksheets for row in sheet.iter_rows() for cell in row}
    assert CAUTION in texts
    for sheet in shipped.worksheets:
        assert CAUTION in (sheet.oddFooter.center.text or "")
        assert sheet.print_area
    tables = {name: table for sheet in shipped.worksheets for name, table in sheet.tables.items()}
    assert tables and all(
        cell.value == column.name
        for sheet in shipped.worksheets
        for table in sheet.tables.values()
        for cell, column in zip(sheet[table.ref][0], table.tableColumns, strict=True)
    )
