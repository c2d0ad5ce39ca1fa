"""Recalculated values beside the stored ones."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import Any

from openpyxl.utils import get_column_letter

from xlaxial.hosts.headless.engine import Engine
from xlaxial.hosts.headless.workbook import Book, Sheet

SAME, DIFFERENT, NOT_STORED, FROZEN = "same", "different", "no stored value", "not recalculated"
RTOL = 1e-9
_LONG_NUMBER = re.compile(r"(?<![\d.])(?=[\d.]{17})\d{1,15}\.\d+(?![\d.])")
_TINY = 1e-12  # what is left of a difference that is 0
_NOISE = 1e-15  # numbers below this differ by rounding only


@dataclass(frozen=True)
class Result:
    """One cell recalculated."""

    sheet: str
    row: int
    column: int
    formula: str  # of the cell, or of the array that fills it
    stored: Any
    new: Any  # the stored value where the cell is not recalculated
    state: str  # one of SAME, DIFFERENT, NOT_STORED, FROZEN
    reason: str = ""  # why it is not recalculated

    @property
    def cell(self) -> str:
        """Address without the sheet."""
        return f"{get_column_letter(self.column)}{self.row}"


def compare(engine: Engine, book: Book, frozen: dict[tuple[str, int, int], str], rtol: float) -> list[Result]:
    """Return a result for every formula cell and every cell that an array formula fills or filled.

    Parameters
    ----------
    engine : Engine
        After its evaluation.
    book : Book
        The workbook.
    frozen : dict
        By (sheet, row, column), why a cell is not recalculated.
    rtol : float
        Relative difference up to which two numbers are the same.
    """
    out = []
    for sheet in book.sheets:
        text: dict[tuple[int, int], str] = {}  # formulas by the cells that they filled before
        spilled: dict[tuple[int, int], str] = {}  # the same of arrays of a new size, now
        left: set[tuple[int, int]] = set()  # cells that those filled before
        for formula in sheet.formulas:
            text.update(dict.fromkeys(formula.places(), formula.text))
            area = sheet.resized.get((formula.row, formula.column))
            if area:
                left.update(formula.places())
                spilled.update(dict.fromkeys(replace(formula, area=area).places(), formula.text))
        emptied = left - spilled.keys()
        scales = _scales(sheet, engine)
        for row, column in {**text, **spilled}:
            place, stored = (sheet.name, row, column), sheet.stored.get((row, column))
            source = text.get((row, column)) or spilled[row, column]
            if place in frozen:
                out.append(Result(*place, source, stored, stored, FROZEN, frozen[place]))
                continue
            new = fifteen_digits(engine.value(*place))
            if new is None and (row, column) not in emptied:
                new = 0.0
            state = SAME if equal(stored, new, rtol, scales.get((row, column), 0.0)) else DIFFERENT
            if stored is None and new not in ("", None) and (row, column) in text:
                state = NOT_STORED
            out.append(Result(*place, source, stored, new, state))
    return out


def _scales(sheet: Sheet, engine: Engine) -> dict[tuple[int, int], float]:
    """Return, for cells of our own arrays, the largest magnitude of their column of the array: what rounding goes by.

    The smaller of the largest stored and the largest new one, so that one wrong number hides no other.
    """
    out: dict[tuple[int, int], float] = {}
    for formula in sheet.formulas:
        if formula.area is None or "AX_" not in formula.text.upper():
            continue
        c1, r1, c2, r2 = formula.area
        if (c2 - c1 + 1) * (r2 - r1 + 1) > len(sheet.stored):  # an area that is mostly not there
            continue
        for column in range(c1, c2 + 1):
            rows = range(r1, r2 + 1)
            stored = _largest(sheet.stored.get((row, column)) for row in rows)
            scale = min(stored, _largest(engine.value(sheet.name, row, column) for row in rows)) if stored else 0.0
            if scale:
                out.update(dict.fromkeys(((row, column) for row in range(r1, r2 + 1)), scale))
    return out


def _largest(values: Iterable[Any]) -> float:
    return max((abs(v) for v in values if isinstance(v, (int, float)) and not isinstance(v, bool)), default=0.0)


def fifteen_digits(value: Any) -> Any:
    """Return a text with its numbers cut to 15 digits, as spreadsheets join them; anything else as it is."""
    if not isinstance(value, str) or len(value) < 17:
        return value
    return _LONG_NUMBER.sub(lambda found: f"{float(found[0]):.15g}", value)


def equal(stored: Any, new: Any, rtol: float, scale: float = 0.0) -> bool:
    """Whether a stored and a new value are the same.

    Numbers within `rtol` of each other; both below 1e-15; or one of them 0, as spreadsheets show what is left of a
    difference, and the other below 1e-12; or both of an array, and within 1e-12 of the largest number `scale` of its
    column. A blank and an empty text; texts, booleans and error values exactly.
    """
    if stored in (None, "") or new in (None, ""):
        return stored in (None, "") and new in (None, "")
    if isinstance(stored, bool) or isinstance(new, bool):
        return stored is new
    if isinstance(stored, (int, float)) and isinstance(new, (int, float)):
        tiny = _TINY if 0.0 in (stored, new) else _NOISE
        return math.isclose(stored, new, rel_tol=rtol, abs_tol=max(tiny, _TINY * scale))
    return bool(stored == new)
