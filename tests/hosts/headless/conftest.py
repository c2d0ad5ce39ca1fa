"""Workbooks made for one test each."""

from __future__ import annotations

import zipfile
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

import pytest
from openpyxl import Workbook
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.formula import ArrayFormula
from openpyxl.worksheet.table import Table

MakeBook = Callable[..., Path]
ChangePart = Callable[[Path, str, Callable[[bytes], bytes]], Path]


@pytest.fixture
def make_book(tmp_path: Path) -> MakeBook:
    """Return a maker of workbooks: cells as {"Sheet!A1": value}, array formulas as {"Sheet!A1:B2": formula}."""

    def make(
        cells: Mapping[str, Any],
        arrays: Mapping[str, str] | None = None,
        names: Mapping[str, str] | None = None,
        tables: Mapping[str, str] | None = None,
        file: str = "book.xlsx",
    ) -> Path:
        book = Workbook()
        del book["Sheet"]

        def sheet(address: str) -> tuple[Any, str]:
            name, _, place = address.rpartition("!")
            return (book[name] if name in book.sheetnames else book.create_sheet(name)), place

        for address, value in cells.items():
            worksheet, place = sheet(address)
            worksheet[place] = value
        for address, formula in (arrays or {}).items():
            worksheet, place = sheet(address)
            worksheet[place.split(":")[0]] = ArrayFormula(place, formula)
        for name, text in (names or {}).items():
            scope, _, plain = name.rpartition("!")
            (book[scope] if scope else book).defined_names[plain] = DefinedName(plain, attr_text=text)
        for name, address in (tables or {}).items():
            worksheet, place = sheet(address)
            worksheet.add_table(Table(displayName=name, ref=place))
        path = tmp_path / file
        book.save(path)
        return path

    return make


@pytest.fixture
def change_part(tmp_path: Path) -> ChangePart:
    """Return what changes one part of a workbook by a function of its bytes, into a new file."""

    def change(path: Path, part: str, by: Callable[[bytes], bytes]) -> Path:
        out = tmp_path / f"changed-{path.name}"
        with zipfile.ZipFile(path) as source, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as target:
            for info in source.infolist():
                data = source.read(info)
                target.writestr(info, by(data) if info.filename == part else data)
        return out

    return change
