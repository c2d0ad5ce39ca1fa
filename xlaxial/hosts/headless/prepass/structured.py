"""Structured references, Ties[@[Mark]:[dT (K)]] and the like, as plain ranges."""

from __future__ import annotations

import re
from dataclasses import dataclass

from openpyxl.utils import get_column_letter

from xlaxial.hosts.headless.errors import CannotEvaluate

_WHOLE = re.compile(r"^((?:[^\W\d]|\\)[\w.\\]*)?\[(.*)\]$", re.DOTALL)
_COLUMN = re.compile(r"\[((?:[^\[\]']|'.)*)\]")
_ITEM = re.compile(r"\[?(#(?:All|Data|Headers|Totals|This Row))\]?\s*,?\s*", re.IGNORECASE)


@dataclass(frozen=True)
class TableArea:
    """A spreadsheet table's place."""

    name: str
    sheet: str
    first_row: int  # with its heading row
    last_row: int  # with its totals row
    first_column: int
    columns: tuple[str, ...]
    has_headings: bool
    has_totals: bool

    def holds(self, sheet: str, row: int, column: int) -> bool:
        """Whether a cell is in the table."""
        inside = self.first_row <= row <= self.last_row
        return sheet == self.sheet and inside and 0 <= column - self.first_column < len(self.columns)


def expand(reference: str, tables: dict[str, TableArea], sheet: str, row: int, column: int) -> str | None:
    """Return the plain range of a structured reference in the cell at (sheet, row, column); None where it is none.

    Raises
    ------
    CannotEvaluate
        The table or a column does not exist.
    """
    found = _WHOLE.match(reference)
    if not found:
        return None
    if found[1]:
        table = tables.get(found[1].lower())
    else:
        table = next((t for t in tables.values() if t.holds(sheet, row, column)), None)
    if table is None:
        raise CannotEvaluate(f"no table for {reference}")
    body = found[2].strip()
    items = {item.lower() for item in _ITEM.findall(body)}
    body = _ITEM.sub("", body).strip().strip(",").strip()
    if body.startswith("@"):
        items.add("#this row")
        body = body[1:]
    names = [re.sub(r"'(.)", r"\1", name) for name in (_COLUMN.findall(body) or ([body] if body else []))]
    known = [heading.lower() for heading in table.columns]
    try:
        places = [table.first_column + known.index(name.strip().lower()) for name in names]
    except ValueError:
        raise CannotEvaluate(f"no column for {reference}") from None
    first = places[0] if places else table.first_column
    last = places[-1] if places else table.first_column + len(table.columns) - 1
    top, bottom = table.first_row + table.has_headings, table.last_row - table.has_totals
    if "#all" in items:
        top, bottom = table.first_row, table.last_row
    elif "#headers" in items:
        top, bottom = table.first_row, (bottom if "#data" in items else table.first_row)
    elif "#totals" in items:
        top, bottom = (top if "#data" in items else table.last_row), table.last_row
    elif "#this row" in items:
        if not (table.holds(sheet, row, table.first_column) and top <= row <= bottom):
            return "#VALUE!"
        top = bottom = row
    start, end = f"${get_column_letter(first)}${top}", f"${get_column_letter(last)}${bottom}"
    quoted = "'" + table.sheet.replace("'", "''") + "'!"
    return quoted + (start if start == end else f"{start}:{end}")
