"""Values as a sheet's XML holds them: exact where openpyxl rounds dates, one quick pass in place of a second load."""

from __future__ import annotations

import re
import xml.parsers.expat
from collections.abc import Callable, Sequence
from typing import Any

from openpyxl.utils.datetime import from_ISO8601, to_excel

from xlaxial.cells import ERROR_CODES, CellError
from xlaxial.hosts.headless.errors import WorkbookError

_ESCAPED = re.compile(r"_x([0-9A-Fa-f]{4})_")
_PLACE = re.compile(r"([A-Za-z]{1,3})(\d{1,7})")


class StoredValues:
    """The stored values of one sheet, decoded when asked for.

    Parameters
    ----------
    data : bytes
        The sheet's XML.
    shared : callable
        Returns the workbook's shared strings; called only where a cell asked for holds one.

    Raises
    ------
    WorkbookError
        The XML is not well formed, or declares entities.
    """

    def __init__(self, data: bytes, shared: Callable[[], Sequence[str]]) -> None:
        self._shared = shared
        self._raw: dict[tuple[int, int], tuple[str, str]] = {}  # (row, column) -> type, text
        self.dynamic: set[tuple[int, int]] = set()  # cells whose array formula spills by itself (cm in the XML)
        self._read(data)

    def __getitem__(self, place: tuple[int, int]) -> Any:
        """Value of the cell at (row, column), None where blank; dates are serial numbers."""
        found = self._raw.get(place)
        if found is None:
            return None
        kind, text = found
        if kind == "s":
            strings = self._shared()
            index = int(text) if text.strip().isdecimal() else -1
            return strings[index] if 0 <= index < len(strings) else CellError("#VALUE!")
        return _decoded(kind, text)

    def _read(self, data: bytes) -> None:
        parser = xml.parsers.expat.ParserCreate()
        parser.buffer_text = True
        raw, dynamic, pieces = self._raw, self.dynamic, list[str]()
        row = column = 0
        kind, text, dynamic_mark, beside = "n", "", "", False
        columns: dict[str, int] = {}
        plain: dict[str, str] = {}  # names without their prefix

        def start(name: str, attributes: dict[str, str]) -> None:
            nonlocal row, column, kind, text, dynamic_mark, beside
            name = plain.get(name) or plain.setdefault(name, name.rpartition(":")[2])
            if name == "c":
                place = _PLACE.fullmatch(attributes.get("r", ""))
                if place:
                    letters = place[1]
                    column = columns.get(letters) or columns.setdefault(letters, _column(letters))
                    row = int(place[2])
                else:
                    column += 1
                kind, text, dynamic_mark = attributes.get("t", "n"), "", attributes.get("cm", "0")
            elif name in ("v", "t"):
                parser.CharacterDataHandler = None if beside else pieces.append
            elif name == "row":
                number = attributes.get("r", "")
                row, column = int(number) if number.isdecimal() else row + 1, 0
            elif name == "rPh":  # a reading aid beside the text, no part of it
                beside = True

        def end(name: str) -> None:
            nonlocal text, beside
            name = plain[name]
            if name in ("v", "t"):
                parser.CharacterDataHandler = None
                text += "".join(pieces)
                pieces.clear()
            elif name == "c":
                if text or kind == "str":
                    raw[row, column] = kind, text
                if dynamic_mark != "0":
                    dynamic.add((row, column))
            elif name == "rPh":
                beside = False

        def refuse(*_: object) -> None:
            raise WorkbookError("the XML declares entities, which are refused")

        parser.StartElementHandler, parser.EndElementHandler, parser.EntityDeclHandler = start, end, refuse
        try:
            parser.Parse(data, True)
        except xml.parsers.expat.ExpatError as wrong:
            raise WorkbookError(f"the XML is not well formed ({wrong})") from None


def _column(letters: str) -> int:
    number = 0
    for letter in letters.upper():
        number = number * 26 + ord(letter) - 64
    return number


def _decoded(kind: str, text: str) -> Any:
    """Return a value from its type and text; what cannot be one is an error value."""
    try:
        if kind == "n":
            return float(text)
        if kind == "b":
            return text.strip() in ("1", "true")
        if kind == "d":
            return float(to_excel(from_ISO8601(text)))
    except ValueError:
        return CellError("#VALUE!")
    if kind == "e":
        return CellError(text) if text in ERROR_CODES else CellError("#VALUE!")
    return _ESCAPED.sub(lambda code: chr(int(code[1], 16)), text)
