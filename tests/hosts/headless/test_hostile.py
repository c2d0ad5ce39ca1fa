"""Files that are no workbook, damaged or hostile each get one clear line."""

from __future__ import annotations

import zipfile
from pathlib import Path
from typing import Any

import pytest

from xlaxial.hosts.headless import package
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.recalculate import recalculate

SHEET = "xl/worksheets/sheet1.xml"


def line(path: Path) -> str:
    with pytest.raises(WorkbookError) as caught:
        recalculate(path, {})
    text = str(caught.value)
    assert text.startswith(path.name)
    assert "\n" not in text
    assert len(text) <= 300
    return text


@pytest.mark.parametrize(
    ("data", "said"),
    [
        (b"", "is not a workbook, or is damaged"),
        (b"Mark,Length\na,5\n", "is not a workbook, or is damaged"),
        (b"%PDF-1.7", "is not a workbook, or is damaged"),
        (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(600), "is encrypted or an old .xls; save it as .xlsx"),
    ],
)
def test_wrong_kinds(tmp_path: Path, data: bytes, said: str) -> None:
    path = tmp_path / "book.xlsx"
    path.write_bytes(data)
    assert said in line(path)


def test_missing_file_and_folder(tmp_path: Path) -> None:
    assert "cannot be read (No such file or directory)" in line(tmp_path / "none.xlsx")
    assert "cannot be read" in line(tmp_path)


def test_every_truncation_is_refused_or_read(make_book: Any) -> None:
    path: Path = make_book({"S!A1": 2, "S!A2": "=A1*3"})
    whole = path.read_bytes()
    for length in range(0, len(whole) - 1, 97):
        path.write_bytes(whole[:length])
        assert "damaged" in line(path)


def test_a_flipped_byte_never_gives_a_traceback(make_book: Any) -> None:
    path: Path = make_book({"S!A1": 2, "S!A2": "=A1*3"})
    whole = path.read_bytes()
    outcomes = set()
    for at in range(0, len(whole), 41):
        path.write_bytes(whole[:at] + bytes([whole[at] ^ 0x5A]) + whole[at + 1 :])
        try:
            outcomes.add(recalculate(path, {}).results[-1].state)
        except WorkbookError:
            outcomes.add("refused")
        except IndexError:
            outcomes.add("no formula left")
    assert "refused" in outcomes


def test_entities_are_refused(make_book: Any, change_part: Any) -> None:
    bomb = b'<!DOCTYPE x [<!ENTITY a "aaaa"><!ENTITY b "&a;&a;">]>'
    path = make_book({"S!A1": "text", "S!A2": "=A1"})
    for part in (SHEET, "xl/styles.xml", "xl/workbook.xml"):
        changed = change_part(
            path,
            part,
            lambda data: (
                data.replace(b"<", bomb + b"<", 1) if b"<?xml" not in data else data.replace(b"?>", b"?>" + bomb, 1)
            ),
        )
        assert f"{part} declares entities, which are refused" in line(changed)


def test_strict_files_are_named(make_book: Any, change_part: Any) -> None:
    path = make_book({"S!A1": 1})
    main = b"http://schemas.openxmlformats.org/spreadsheetml/2006/main"
    changed = change_part(
        path, "xl/workbook.xml", lambda data: data.replace(main, b"http://purl.oclc.org/ooxml/spreadsheetml/main")
    )
    assert "is in the strict variant of the format; save it as an ordinary .xlsx" in line(changed)


def test_a_part_that_unpacks_without_end_is_refused(make_book: Any, tmp_path: Path) -> None:
    path = tmp_path / "bomb.xlsx"
    with zipfile.ZipFile(make_book({"S!A1": 1})) as source, zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as out:
        for info in source.infolist():
            out.writestr(info, source.read(info))
        out.writestr("xl/media/image1.png", bytes(8 << 20))
    assert "unpacks to more than 400 times its size" in line(path)


def test_too_many_parts_are_refused(make_book: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(package, "_MOST_PARTS", 5)
    assert "limits of 5 parts" in line(make_book({"S!A1": 1}))


def test_text_repeated_without_end_is_refused(make_book: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("xlaxial.hosts.headless.workbook._MOST_TEXT", 100)
    cells = {f"S!A{i}": "x" * 30 for i in range(1, 6)}
    assert "the sheet S holds more than 100 characters of text" in line(make_book(cells))


def test_a_zip_that_is_no_workbook(tmp_path: Path) -> None:
    path = tmp_path / "letters.zip"
    with zipfile.ZipFile(path, "w") as out:
        out.writestr("a.txt", "a")
    assert "is no workbook (no content types)" in line(path)


def test_a_cell_far_away_is_quick(make_book: Any) -> None:
    path = make_book({"S!A1": 1, "S!XFD1048576": 5, "S!A2": "=XFD1048576+SUM(A1:XFD1)"})
    results = {r.cell: r.new for r in recalculate(path, {}, seconds=20).results}
    assert results == {"A2": 6.0}


def test_names_that_go_round_in_a_circle_end(make_book: Any) -> None:
    path = make_book({"S!A1": "=one+1", "S!A2": "=1+1"}, names={"one": "two+1", "two": "one+1"})
    results = {r.cell: r for r in recalculate(path, {}).results}
    assert results["A1"].reason == "its names go round in a circle"
    assert results["A2"].new == 2.0


def test_a_long_and_a_deep_formula_are_left_alone(make_book: Any) -> None:
    path = make_book(
        {"S!A1": "=" + "+".join(["1"] * 5000), "S!A2": "=" + "(" * 3000 + "1" + ")" * 3000, "S!A3": "=1+1"}
    )
    results = {r.cell: r for r in recalculate(path, {}).results}
    assert results["A1"].reason == "the formula is too long"
    assert results["A2"].reason
    assert results["A3"].new == 2.0
