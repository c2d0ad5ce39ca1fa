"""Writing changes the touched cells and nothing else, and leaves the old or the new file whole."""

from __future__ import annotations

import os
import re
import signal
import struct
import subprocess
import sys
import time
import zipfile
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from openpyxl import load_workbook

from xlaxial import CellError
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.patch import patched, write_values
from xlaxial.hosts.headless.stored import StoredValues

HEAD = b'<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\r\n<worksheet xmlns="urn:x"><sheetData>'
TAIL = b"</sheetData><mergeCells/></worksheet>"
ROW1 = (
    b'<row r="1" spans="1:4" ht="20"><c r="A1" s="3" t="s"><v>0</v></c>'
    b'<c r="B1" s="4"><f t="shared" ref="B1:B2" si="0">A1&gt;1</f><v>7.50</v></c>\n<c r="D1" s="5"/></row>'
)
ROW3 = b'<row r="3"><c r="B3" t="str" cm="1" vm="2"><f t="array" ref="B3:B4">X("a&gt;b")</f><v>old &amp; text</v></c></row>'
SHEET = HEAD + ROW1 + b'<row r="2"/>' + ROW3 + TAIL


@pytest.mark.parametrize(
    ("place", "value", "before", "after"),
    [
        ((1, 2), 2.5, b"<v>7.50</v>", b"<v>2.5</v>"),
        ((1, 2), 1e300, b"<v>7.50</v>", b"<v>1e+300</v>"),
        ((1, 2), 12.0, b"<v>7.50</v>", b"<v>12</v>"),
        ((1, 2), 0.1 + 0.2, b"<v>7.50</v>", b"<v>0.30000000000000004</v>"),
        ((1, 2), None, b"<v>7.50</v>", b""),
        ((3, 2), 4.0, b' t="str" cm="1" vm="2"><f', b' cm="1" vm="2"><f'),
        ((3, 2), True, b' t="str" cm="1" vm="2"><f', b' cm="1" vm="2" t="b"><f'),
        ((3, 2), CellError("#N/A"), b"<v>old &amp; text</v>", b"<v>#N/A</v>"),
        ((3, 2), "a < b & c", b"<v>old &amp; text</v>", b"<v>a &lt; b &amp; c</v>"),
        ((3, 2), " spaced", b"<v>old &amp; text</v>", b'<v xml:space="preserve"> spaced</v>'),
        ((1, 4), 3.0, b'<c r="D1" s="5"/>', b'<c r="D1" s="5"><v>3</v></c>'),
        ((1, 4), "x", b'<c r="D1" s="5"/>', b'<c r="D1" s="5" t="str"><v>x</v></c>'),
        ((1, 3), 3.0, b'\n<c r="D1"', b'\n<c r="C1"><v>3</v></c><c r="D1"'),
        ((1, 5), 3.0, b'<c r="D1" s="5"/>', b'<c r="D1" s="5"/><c r="E1"><v>3</v></c>'),
        ((2, 1), 3.0, b'<row r="2"/>', b'<row r="2"><c r="A2"><v>3</v></c></row>'),
        ((3, 1), 3.0, b'<c r="B3"', b'<c r="A3"><v>3</v></c><c r="B3"'),
        ((4, 2), 3.0, b"</sheetData>", b'<row r="4"><c r="B4"><v>3</v></c></row></sheetData>'),
        ((9, 27), "x", b"</sheetData>", b'<row r="9"><c r="AA9" t="str"><v>x</v></c></row></sheetData>'),
    ],
)
def test_one_value_changes_one_place(place: tuple[int, int], value: Any, before: bytes, after: bytes) -> None:
    out = patched(SHEET, {place: value})
    if value is CellError("#N/A") or after in (b"<v>#N/A</v>", b"<v>a &lt; b &amp; c</v>") or b"preserve" in after:
        kind = b'"e"' if isinstance(value, CellError) else b'"str"'
        out = out.replace(b' cm="1" vm="2" t=' + kind, b' t="str" cm="1" vm="2"')
    if value in (4.0, True) and place == (3, 2):
        out = out.replace(b"<v>4</v>", b"<v>old &amp; text</v>").replace(b"<v>1</v>", b"<v>old &amp; text</v>")
    assert out == SHEET.replace(before, after)


def test_an_empty_sheet_gets_its_first_cells() -> None:
    data = b"<worksheet><sheetData /><x/></worksheet>"
    out = patched(data, {(2, 1): 1.0, (1, 2): "x"})
    rows = b'<row r="1"><c r="B1" t="str"><v>x</v></c></row><row r="2"><c r="A2"><v>1</v></c></row>'
    assert out == b"<worksheet><sheetData>" + rows + b"</sheetData><x/></worksheet>"


def test_a_copy_of_a_shared_formula_keeps_its_empty_tag() -> None:
    data = HEAD + b'<row r="1"><c r="A1"><f t="shared" si="0"/><v>1</v></c><c r="B1"><v>5</v></c></row>' + TAIL
    assert patched(data, {(1, 1): 2.0}) == data.replace(b"<v>1</v>", b"<v>2</v>")


def test_no_values_no_change() -> None:
    assert patched(SHEET, {}) == SHEET


def test_prefixes_and_cells_without_addresses() -> None:
    data = b'<x:worksheet xmlns:x="urn:x"><x:sheetData><x:row><x:c><x:v>1</x:v></x:c><x:c><x:f>1+1</x:f></x:c></x:row></x:sheetData></x:worksheet>'
    out = patched(data, {(1, 2): 2.0, (1, 3): 3.0})
    assert out == data.replace(b"</x:f></x:c>", b'</x:f><x:v>2</x:v></x:c><x:c r="C1"><x:v>3</x:v></x:c>')


def test_not_well_formed_is_refused() -> None:
    with pytest.raises(WorkbookError, match="not well formed"):
        patched(b"<worksheet><sheetData>", {(1, 1): 1.0})


VALUES = st.one_of(
    st.floats(allow_nan=False, allow_infinity=False),
    st.booleans(),
    st.text(st.characters(codec="utf-8", exclude_characters="\r"), max_size=12).filter(bool),
    st.sampled_from([CellError("#N/A"), CellError("#DIV/0!")]),
)


@given(st.dictionaries(st.tuples(st.integers(1, 6), st.integers(1, 6)), VALUES, max_size=12))
@settings(max_examples=150, deadline=None)
def test_what_is_written_reads_back(values: dict[tuple[int, int], Any]) -> None:
    out = patched(SHEET, values)
    stored = StoredValues(out, lambda: ["shared"])
    for place, value in values.items():
        assert type(stored[place]) is type(value)
        assert stored[place] == value
    untouched = {(1, 1): "shared", (1, 2): 7.5, (3, 2): "old & text"}
    for place, value in untouched.items():
        if place not in values:
            assert stored[place] == value
    places = re.findall(rb'<c r="([A-Z]+)(\d+)"', out)
    in_order = sorted(places, key=lambda place: (int(place[1]), len(place[0]), place[0]))
    assert places == in_order


@pytest.fixture
def odd_zip(make_book: Any, tmp_path: Path) -> Path:
    """A workbook whose zip has unusual parts: stored uncompressed, with a comment, extra fields, odd dates and order."""
    plain = make_book({"S!A1": 2, "S!A2": "=A1*3", "T!A1": "=1+1"})
    path = tmp_path / "odd.xlsx"
    with zipfile.ZipFile(plain) as source, zipfile.ZipFile(path, "w") as out:
        for number, info in enumerate(reversed(source.infolist())):
            fresh = zipfile.ZipInfo(info.filename, (1999, 1 + number % 12, 5, 6, 8, 10))
            fresh.compress_type = zipfile.ZIP_STORED if number % 2 else zipfile.ZIP_DEFLATED
            fresh.extra, fresh.comment = struct.pack("<HHI", 0x9999, 4, number), b"part"
            out.writestr(fresh, source.read(info))
        out.writestr("custom/blob.bin", os.urandom(5000))
        out.comment = b"a comment"
    return path


def entries(path: Path) -> list[Any]:
    with zipfile.ZipFile(path) as package:
        raw = path.read_bytes()
        out = []
        for info in package.infolist():
            start = info.header_offset
            name, extra = struct.unpack("<HH", raw[start + 26 : start + 30])
            begin = start + 30 + name + extra
            compressed = raw[begin : begin + info.compress_size]
            out.append(
                (
                    info.filename,
                    info.date_time,
                    info.flag_bits,
                    info.compress_type,
                    info.extra,
                    info.comment,
                    compressed,
                )
            )
        return out


def test_untouched_parts_are_copied_raw_in_their_order(odd_zip: Path, tmp_path: Path) -> None:
    out = tmp_path / "out.xlsx"
    part = "xl/worksheets/sheet1.xml"
    write_values(odd_zip, {part: {(2, 1): 6.0}}, out)
    before, after = entries(odd_zip), entries(out)
    assert [entry[0] for entry in before] == [entry[0] for entry in after]
    assert [e for e in before if e[0] != part] == [e for e in after if e[0] != part]
    with zipfile.ZipFile(out) as package:
        assert package.comment == b"a comment"
        assert package.testzip() is None
    assert load_workbook(out, data_only=True)["S"]["A2"].value == 6


def test_nothing_but_the_output_is_left_behind(odd_zip: Path, tmp_path: Path) -> None:
    before = set(tmp_path.iterdir())
    original = odd_zip.read_bytes()
    out = tmp_path / "out.xlsx"
    write_values(odd_zip, {"xl/worksheets/sheet1.xml": {(2, 1): 6.0}}, out)
    assert set(tmp_path.iterdir()) == before | {out}
    assert odd_zip.read_bytes() == original


def test_in_place_keeps_a_backup_and_the_mode(odd_zip: Path, tmp_path: Path) -> None:
    odd_zip.chmod(0o640)
    original = odd_zip.read_bytes()
    backup = tmp_path / "odd.backup.xlsx"
    write_values(odd_zip, {"xl/worksheets/sheet1.xml": {(2, 1): 6.0}}, odd_zip, backup)
    assert backup.read_bytes() == original
    assert odd_zip.stat().st_mode & 0o777 == 0o640
    assert load_workbook(odd_zip, data_only=True)["S"]["A2"].value == 6


def test_a_lock_file_is_respected(odd_zip: Path) -> None:
    original = odd_zip.read_bytes()
    odd_zip.with_name("~$odd.xlsx").touch()
    with pytest.raises(WorkbookError, match=r"odd\.xlsx: is open in a spreadsheet program; close it first"):
        write_values(odd_zip, {"xl/worksheets/sheet1.xml": {(2, 1): 6.0}}, odd_zip)
    assert odd_zip.read_bytes() == original


def test_a_read_only_file_is_kept(odd_zip: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    original = odd_zip.read_bytes()
    monkeypatch.setattr(os, "access", lambda path, mode: mode != os.W_OK)  # whoever may do anything is never refused
    with pytest.raises(WorkbookError, match=r"odd\.xlsx: is read-only; write to another file with --output"):
        write_values(odd_zip, {"xl/worksheets/sheet1.xml": {(2, 1): 6.0}}, odd_zip)
    assert odd_zip.read_bytes() == original


def test_a_missing_folder_is_named(odd_zip: Path, tmp_path: Path) -> None:
    with pytest.raises(WorkbookError, match="cannot be written"):
        write_values(odd_zip, {"xl/worksheets/sheet1.xml": {(2, 1): 6.0}}, tmp_path / "none" / "out.xlsx")


KILLED = """
import sys
from pathlib import Path
from xlaxial.hosts.headless.patch import write_values
path = Path(sys.argv[1])
print("ready", flush=True)
n = 0
while True:
    n += 1
    write_values(path, {"xl/worksheets/sheet1.xml": {(2, 1): float(n)}}, path)
"""


@pytest.mark.skipif(os.name == "nt", reason="kills by a POSIX signal")
def test_a_kill_at_any_instant_leaves_a_whole_file(odd_zip: Path) -> None:
    for wait in (0.0, 0.003, 0.011, 0.017, 0.05):
        with subprocess.Popen([sys.executable, "-c", KILLED, str(odd_zip)], stdout=subprocess.PIPE) as process:
            assert process.stdout is not None
            assert process.stdout.readline() == b"ready\n"
            time.sleep(wait)
            process.send_signal(signal.SIGKILL)
        with zipfile.ZipFile(odd_zip) as package:
            assert package.testzip() is None
            assert StoredValues(package.read("xl/worksheets/sheet1.xml"), list)[1, 1] == 2.0
