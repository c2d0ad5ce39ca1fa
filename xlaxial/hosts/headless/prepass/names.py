"""Defined names of the workbook and of its sheets, put in as text."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from xlaxial.hosts.headless.errors import CannotEvaluate

_NAME = re.compile(r"^[^\W\d](?:[\w.\\?]*)$|^\\[\w.\\?]*$")
_QUALIFIED = re.compile(r"^('(?:[^']|'')+'|[^'!]+)!([^\W\d][\w.\\?]*)$")
_SHEET = r"(?:(?:'(?:[^']|'')+'|[^'!()+*/,;\s-]+)!)?"
_RANGE = re.compile(
    rf"^{_SHEET}(?:\$?[A-Z]{{1,3}}\$?\d+(?::\$?[A-Z]{{1,3}}\$?\d+)?|\$?[A-Z]{{1,3}}:\$?[A-Z]{{1,3}}|\$?\d+:\$?\d+)$",
    re.IGNORECASE,
)
_ASIDE = re.compile(r"\"[^\"]*\"|'[^']*'|\[[^\]]*\]")  # texts, quoted sheets, columns of tables
_RELATIVE = re.compile(r"(?<![\w$.])(?:[A-Z]{1,3}\$?\d{1,7}|\$[A-Z]{1,3}\d{1,7})(?![\w(.!])")
_COLUMN_OR_ROW = re.compile(r"^(?:TRUE|FALSE|R|C|R\d+C\d+)$", re.IGNORECASE)
_CELL = re.compile(r"^\$?[A-Z]{1,3}\$?\d{1,7}$", re.IGNORECASE)


@dataclass
class Names:
    """Defined names; those of a sheet win over the workbook's."""

    workbook: dict[str, str] = field(default_factory=dict)  # lower-case name -> text behind it
    sheets: dict[tuple[str, str], str] = field(default_factory=dict)  # (lower-case sheet, name) -> text

    def resolve(self, operand: str, sheet: str) -> str | None:
        """Return the text to put in for an operand: a range as it is, a formula in brackets; None where no name.

        Raises
        ------
        CannotEvaluate
            The name has a relative reference, which means another cell in every cell that uses it.
        """
        name, scope = operand, sheet.lower()
        qualified = _QUALIFIED.match(operand)
        if qualified:
            scope, name = qualified[1].strip("'").replace("''", "'").lower(), qualified[2]
        elif not _NAME.match(operand) or _CELL.match(operand):
            return None
        text = self.sheets.get((scope, name.lower()), self.workbook.get(name.lower()))
        if text is None:
            return None
        text = text.lstrip("=")
        if _RELATIVE.search(_ASIDE.sub("", text)):
            raise CannotEvaluate(f"the name {name} moves with the cell that uses it")
        return text if _RANGE.match(text) else f"({text})"


def is_name(operand: str) -> bool:
    """Whether an operand can be nothing but a defined name."""
    return bool(_NAME.match(operand)) and not _CELL.match(operand) and not _COLUMN_OR_ROW.match(operand)
