"""Arguments of our own functions: what was left out is marked, and a plain reference carries its address."""

from __future__ import annotations

import re

from openpyxl.utils import get_column_letter, range_boundaries

OMITTED = "-"  # address text of an argument that was left out
VALUE = ""  # address text of an argument that is no plain reference
_REFERENCE = re.compile(
    r"^((?:'(?:[^']|'')+'|[^'!()+*/,;&<>=\s-]+)!)?(\$?[A-Z]{1,3}\$?\d+(?::\$?[A-Z]{1,3}\$?\d+)?|\$?[A-Z]{1,3}:\$?[A-Z]{1,3}|\$?\d+:\$?\d+)$",
    re.IGNORECASE,
)


def tagged(argument: str, sheet: str, extents: dict[str, tuple[int, int]]) -> str:
    """Return an argument with its address text before it: two arguments in place of one.

    Parameters
    ----------
    argument : str
        Text of the argument; blank where it was left out.
    sheet : str
        The formula's sheet.
    extents : dict
        (rows, columns) in use by lower-case sheet: whole columns and rows are bounded by them.
    """
    text = argument.strip()
    if not text:
        return f'"{OMITTED}",""'
    found, inner = _REFERENCE.match(text), text
    while not found and inner.startswith("(") and inner.endswith(")"):  # a reference behind a name comes in brackets
        inner = inner[1:-1].strip()
        found = _REFERENCE.match(inner)
    if not found:
        return f'"{VALUE}",{argument}'
    name = found[1][:-1].strip("'").replace("''", "'") if found[1] else sheet
    rows, columns = extents.get(name.lower(), (1, 1))
    area = found[2].replace("$", "").upper()
    if re.fullmatch(r"[A-Z]+:[A-Z]+", area):
        left, right = area.split(":")
        area = f"{left}1:{right}{max(rows, 1)}"
    elif re.fullmatch(r"\d+:\d+", area):
        top, bottom = area.split(":")
        area = f"A{top}:{get_column_letter(max(columns, 1))}{bottom}"
    c1, r1, _, _ = range_boundaries(area)
    place = f"{r1}:{c1}:{name}".replace('"', '""')
    return f'"{place}",{found[1] or ""}{area}'


def place_of(tag: str) -> tuple[str, int, int] | None:
    """Return (sheet, row, column) of an address text, None where the argument was no plain reference."""
    if tag in (OMITTED, VALUE):
        return None
    row, column, sheet = tag.split(":", 2)
    return sheet, int(row), int(column)
