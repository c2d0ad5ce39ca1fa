"""Writing values into a workbook and nothing else: touched cells are patched in the XML, other bytes are copied."""

from __future__ import annotations

import copy
import os
import re
import shutil
import tempfile
import zipfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any
from xml.sax.saxutils import escape

from openpyxl.utils import column_index_from_string, get_column_letter

from xlaxial.cells import CellError
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.package import open_package, read_part, scan

Values = Mapping[tuple[int, int], Any]
"""New values by (row, column)."""

_CELL = re.compile(r"([A-Z]+)(\d+)")
_TYPE = re.compile(rb"""\s+t\s*=\s*("[^"]*"|'[^']*')""")
_REF = re.compile(rb"""\s+ref\s*=\s*("[^"]*"|'[^']*')""")
_ILLEGAL = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f]")


class _Sheet:
    """Byte offsets of the rows and cells of a sheet's XML that matter for a patch."""

    def __init__(self, data: bytes, touched: set[tuple[int, int]]) -> None:
        self.data = data
        self.touched = touched
        self.rows_touched = {row for row, _ in touched}
        self.cells: dict[tuple[int, int], tuple[int, int, tuple[int, int] | None]] = {}  # start, end, formula's span
        self.in_row: dict[int, list[tuple[int, int]]] = {}  # (column, offset) of the cells of touched rows
        self.rows: list[tuple[int, int, int]] = []  # number, start of its tag, offset of its end tag
        self.end = -1  # offset of the end tag of sheetData, of its only tag where it is empty
        self.empty = False  # sheetData has one tag
        self.prefix = b""
        self._row = self._column = 0
        self._start = self._formula = self._begun = 0
        self._span: tuple[int, int] | None = None
        self._depth_in_cell = 0
        scan(data, self._open, self._close)

    def _open(self, name: str, attributes: dict[str, str], at: int) -> None:
        if self._depth_in_cell:
            self._depth_in_cell += 1
            if name == "f" and self._depth_in_cell == 2:
                self._formula = at
        elif name == "c":
            found = _CELL.fullmatch(attributes.get("r", ""))
            self._column = column_index_from_string(found[1]) if found else self._column + 1
            self._start, self._span, self._depth_in_cell = at, None, 1
            if self._row in self.rows_touched:
                self.in_row.setdefault(self._row, []).append((self._column, at))
        elif name == "row":
            self._row = int(attributes["r"]) if attributes.get("r", "").isdecimal() else self._row + 1
            self._column, self._row_start = 0, at
        elif name == "sheetData":
            self._begun = at
            self.prefix = self.data[at + 1 : self.data.index(b"sheetData", at)]

    def _close(self, name: str, at: int) -> None:
        if self._depth_in_cell:
            self._depth_in_cell -= 1
            if name == "f" and self._depth_in_cell == 1:
                self._span = (self._formula, self._end_of(self._formula, at))
            if self._depth_in_cell == 0 and (self._row, self._column) in self.touched:
                self.cells[self._row, self._column] = (self._start, self._end_of(self._start, at), self._span)
        elif name == "row":
            self.rows.append((self._row, self._row_start, at))
        elif name == "sheetData":
            tag_end = _after_tag(self.data, self._begun)
            self.empty = self.data[tag_end - 2 : tag_end] == b"/>"
            self.end = self._begun if self.empty else at

    def _end_of(self, start: int, at: int) -> int:
        """Offset behind an element: the end of an empty one is reported behind its only tag."""
        tag_end = _after_tag(self.data, start)
        return tag_end if self.data[tag_end - 2 : tag_end] == b"/>" else _after_tag(self.data, at)


def _after_tag(data: bytes, at: int) -> int:
    """Offset behind the tag that begins at `at` (attribute values may hold a >)."""
    quote = 0
    for i in range(at, len(data)):
        byte = data[i]
        if quote:
            quote = 0 if byte == quote else quote
        elif byte in b"\"'":
            quote = byte
        elif byte == 62:
            return i + 1
    raise WorkbookError("the XML ends inside a tag")


def _content(value: Any) -> tuple[bytes, str]:
    """Return the type attribute's value and the text of a cell's value."""
    if value is None:
        return b"", ""
    if isinstance(value, bool):
        return b"b", "1" if value else "0"
    if isinstance(value, CellError):
        return b"e", value.code
    if isinstance(value, (int, float)):
        number = float(value)
        return b"", repr(int(number)) if number.is_integer() and abs(number) < 1e15 else repr(number)
    text = _ILLEGAL.sub(lambda found: f"_x{ord(found[0]):04X}_", str(value))
    return b"str", escape(text)


def patched(data: bytes, values: Values, areas: Mapping[tuple[int, int], str] | None = None) -> bytes:
    """Return a sheet's XML with new values in some cells; every other byte stays.

    Parameters
    ----------
    data : bytes
        The sheet's XML.
    values : mapping
        New values by (row, column), None for a blank; a cell that is missing is made, in its place.
    areas : mapping, optional
        New range, as A1:B3, of array formulas that stand at a (row, column) among the values.

    Raises
    ------
    WorkbookError
        The XML has no sheetData, or is not well formed.
    """
    sheet = _Sheet(data, set(values))
    if sheet.end < 0:
        raise WorkbookError("the sheet has no cells to patch")
    edits: list[tuple[int, int, bytes]] = []
    p = sheet.prefix
    missing: dict[int, list[int]] = {}
    for row, column in sorted(values):
        kind, text = _content(values[row, column])
        encoded = text.encode("utf-8")
        if (row, column) not in sheet.cells:
            if values[row, column] is not None:
                missing.setdefault(row, []).append(column)
            continue
        start, end, formula = sheet.cells[row, column]
        tag_end = _after_tag(data, start)
        opening = data[start:tag_end].rstrip(b">").rstrip(b"/").rstrip()
        opening = _TYPE.sub(b"", opening) + (b' t="' + kind + b'"' if kind else b"") + b">"
        kept = data[formula[0] : formula[1]] if formula else b""
        if areas and (row, column) in areas:
            kept = _REF.sub(b' ref="' + areas[row, column].encode() + b'"', kept, count=1)
        space = b' xml:space="preserve"' if kind == b"str" and text != text.strip() else b""
        body = b"" if values[row, column] is None else b"<" + p + b"v" + space + b">" + encoded + b"</" + p + b"v>"
        edits.append((start, end, opening + kept + body + b"</" + p + b"c>"))
    known = {number: (start, end) for number, start, end in sheet.rows}
    new_rows: dict[int, bytes] = {}
    for row, columns in missing.items():
        made = {column: _new_cell(p, row, column, values[row, column]) for column in columns}
        if row not in known:
            cells = b"".join(made[column] for column in sorted(made))
            new_rows[row] = b"<" + p + b'row r="' + str(row).encode() + b'">' + cells + b"</" + p + b"row>"
            continue
        start, end = known[row]
        tag_end = _after_tag(data, start)
        if data[tag_end - 2 : tag_end] == b"/>":
            cells = b"".join(made[column] for column in sorted(made))
            edits.append((start, tag_end, data[start : tag_end - 2].rstrip() + b">" + cells + b"</" + p + b"row>"))
            continue
        for column, cell in sorted(made.items()):
            after = next((at for other, at in sheet.in_row.get(row, []) if other > column), end)
            edits.append((after, after, cell))
    if sheet.empty and new_rows:
        tag_end = _after_tag(data, sheet.end)
        opening, rows = (
            data[sheet.end : tag_end - 2].rstrip() + b">",
            b"".join(new for _, new in sorted(new_rows.items())),
        )
        edits.append((sheet.end, tag_end, opening + rows + b"</" + p + b"sheetData>"))
        new_rows.clear()
    for row, made_row in sorted(new_rows.items()):
        after = next((start for number, start, _ in sheet.rows if number > row), sheet.end)
        edits.append((after, after, made_row))
    out, at = [], 0
    for start, end, new in sorted(edits, key=lambda edit: (edit[0], edit[1])):
        out += [data[at:start], new]
        at = end
    out.append(data[at:])
    return b"".join(out)


def _new_cell(prefix: bytes, row: int, column: int, value: Any) -> bytes:
    kind, text = _content(value)
    place = f"{get_column_letter(column)}{row}".encode()
    mark = b' t="' + kind + b'"' if kind else b""
    value_tag = b"<" + prefix + b"v>" + text.encode() + b"</" + prefix + b"v>"
    return b"<" + prefix + b'c r="' + place + b'"' + mark + b">" + value_tag + b"</" + prefix + b"c>"


def write_values(
    path: Path,
    values: Mapping[str, Values],
    output: Path,
    backup: Path | None = None,
    areas: Mapping[str, Mapping[tuple[int, int], str]] | None = None,
) -> None:
    """Write a workbook with new values in some cells.

    Written to a temporary file in the output's folder, flushed, read back, then renamed: a kill at any instant leaves
    the old or the new file whole.

    Parameters
    ----------
    path : Path
        The workbook; parts that are not touched are copied byte for byte.
    values : mapping
        By name of the sheet's part in the zip.
    output : Path
        Where to write; may be `path`.
    backup : Path, optional
        Where to copy the workbook first.
    areas : mapping, optional
        New ranges of array formulas, by name of the sheet's part; see `patched`.

    Raises
    ------
    WorkbookError
        It cannot be read or written; the output is as it was.
    """
    lock = output.with_name("~$" + output.name)
    if lock.exists():
        raise WorkbookError(f"{output.name}: is open in a spreadsheet program; close it first")
    if output.exists() and not os.access(output, os.W_OK):
        raise WorkbookError(f"{output.name}: is read-only; write to another file with --output")
    with open_package(path) as package:
        new = {
            part: patched(read_part(package, part), cells, (areas or {}).get(part))
            for part, cells in values.items()
            if cells
        }
        try:
            handle, name = tempfile.mkstemp(prefix=".xlaxial-", suffix=".tmp", dir=output.parent)
        except OSError as wrong:
            raise WorkbookError(f"{output}: cannot be written ({wrong.strerror})") from None
        temporary = Path(name)
        try:
            with os.fdopen(handle, "w+b") as file:
                _copy(package, path, file, new)
                file.flush()
                os.fsync(file.fileno())
            with zipfile.ZipFile(temporary) as check:
                if check.testzip() is not None or any(check.read(part) != data for part, data in new.items()):
                    raise WorkbookError(f"{output.name}: what was written does not read back")
            if path.exists():
                shutil.copymode(path, temporary)
            if backup is not None:
                shutil.copy2(path, backup)
            temporary.replace(output)
        except OSError as wrong:
            raise WorkbookError(f"{output}: cannot be written ({wrong.strerror})") from None
        finally:
            temporary.unlink(missing_ok=True)


def _copy(package: zipfile.ZipFile, path: Path, file: Any, new: Mapping[str, bytes]) -> None:
    """Copy a zip's parts in their order, raw, but for those that are new."""
    ordered = sorted(package.infolist(), key=lambda info: info.header_offset)
    ends = [info.header_offset for info in ordered[1:]] + [package.start_dir]
    with path.open("rb") as source, zipfile.ZipFile(file, "w") as out:
        for info, end in zip(ordered, ends, strict=True):
            if info.filename in new:
                fresh = zipfile.ZipInfo(info.filename, info.date_time)
                fresh.compress_type, fresh.external_attr = zipfile.ZIP_DEFLATED, info.external_attr
                out.writestr(fresh, new[info.filename])
                continue
            source.seek(info.header_offset)
            raw = source.read(end - info.header_offset)
            same = copy.copy(info)
            file.seek(out.start_dir)
            same.header_offset = file.tell()
            file.write(raw)
            out.start_dir = file.tell()
            out.filelist.append(same)
            out.NameToInfo[same.filename] = same
        out._didModify = True  # type: ignore[attr-defined]  # the directory is to be written
        out.comment = package.comment
