"""Recalculation of a workbook without a spreadsheet program."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from openpyxl.utils import get_column_letter, range_boundaries

from xlaxial.cells import CellError
from xlaxial.hosts.headless.calls import engine_function, fit
from xlaxial.hosts.headless.engine import Engine, Unevaluated
from xlaxial.hosts.headless.errors import CannotEvaluate
from xlaxial.hosts.headless.prepass.rewrite import FIT, Context, Rewritten, rewrite
from xlaxial.hosts.headless.workbook import Book, Formula, read_book

SAME, DIFFERENT, NOT_STORED, FROZEN = "same", "different", "no stored value", "not recalculated"
RTOL = 1e-9
_TINY = 1e-12  # numbers below this part of the sheet's largest are equal to zero
_AREA = re.compile(r"^(?:('(?:[^']|'')+'|[^'!]+)!)?\$?([A-Z]{1,3})\$?(\d+)(?::\$?([A-Z]{1,3})\$?(\d+))?$", re.IGNORECASE)


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


@dataclass
class Recalculation:
    """A workbook recalculated."""

    path: Path
    book: Book
    results: list[Result] = field(default_factory=list)

    def count(self, state: str) -> int:
        """How many cells are in a state."""
        return sum(result.state == state for result in self.results)


def worksheet_functions() -> dict[str, Callable[..., Any]]:
    """Return every worksheet function by its name."""
    from xlaxial.functions.call import caller
    from xlaxial.functions.registry import load

    return {name: caller(name) for name in load()}


def recalculate(
    path: Path | str, functions: Mapping[str, Callable[..., Any]] | None = None, rtol: float = RTOL
) -> Recalculation:
    """Recalculate a workbook and compare with its stored values.

    Parameters
    ----------
    path : path
        The workbook, .xlsx or .xlsm; it is only read.
    functions : mapping, optional
        Functions by name, in place of the registry's.
    rtol : float
        Relative difference up to which two numbers are the same.

    Returns
    -------
    Recalculation
        A result for every formula cell and every cell that an array formula fills.

    Raises
    ------
    WorkbookError
        The file cannot be taken up.
    """
    book = read_book(Path(path))
    known = worksheet_functions() if functions is None else dict(functions)
    context = Context(frozenset(name.upper() for name in known), book.tables, book.names)
    for sheet in book.sheets:
        context.extents[sheet.name.lower()] = (len(sheet.rows), max(map(len, sheet.rows), default=0))
    engine = Engine()
    dates = {sheet.name.lower(): sheet.dates for sheet in book.sheets}
    for name, function in known.items():
        engine.add_function(name.upper(), engine_function(function, dates))
    engine.add_function(FIT, fit)
    for sheet in book.sheets:
        engine.add_sheet(sheet.name)
    frozen: dict[tuple[str, int, int], str] = {}
    ready: list[tuple[Formula, Rewritten]] = []
    for sheet in book.sheets:
        for i, values in enumerate(sheet.rows):
            engine.set_row(sheet.name, i + 1, 1, values)
    for sheet in book.sheets:
        for formula in sheet.formulas:
            try:
                ready.append((formula, _enter(engine, formula, context)))
            except CannotEvaluate as why:
                _freeze(engine, book, formula, str(why), frozen)
    engine.evaluate()
    _freeze_unevaluated(engine, ready, frozen)
    _freeze_dependents(ready, frozen)
    return Recalculation(Path(path), book, _compare(engine, book, frozen, rtol))


def _enter(engine: Engine, formula: Formula, context: Context) -> Rewritten:
    """Rewrite a formula and put it into the engine."""
    if formula.data_table:
        raise CannotEvaluate("a what-if data table")
    array = formula.area is not None
    made = rewrite(formula.text, formula.sheet, formula.row, formula.column, context, array=array)
    text = made.text
    if formula.area is not None:
        c1, r1, c2, r2 = formula.area
        text = f"={FIT}({text[1:]},{r2 - r1 + 1},{c2 - c1 + 1})"
    elif made.calls_ours:
        text = f"={FIT}({text[1:]},1,1)"
    try:
        engine.set_formula(formula.sheet, formula.row, formula.column, text)
    except ValueError as wrong:
        raise CannotEvaluate(f"the engine cannot read the formula ({wrong})"[:200]) from None
    return made


def _places(formula: Formula) -> list[tuple[str, int, int]]:
    if formula.area is None:
        return [(formula.sheet, formula.row, formula.column)]
    c1, r1, c2, r2 = formula.area
    return [(formula.sheet, row, column) for row in range(r1, r2 + 1) for column in range(c1, c2 + 1)]


def _freeze(engine: Engine, book: Book, formula: Formula, why: str, frozen: dict[tuple[str, int, int], str]) -> None:
    """Keep a formula at its stored values."""
    stored = next(sheet.stored for sheet in book.sheets if sheet.name == formula.sheet)
    for place in _places(formula):
        frozen[place] = why
        engine.set_row(place[0], place[1], place[2], [stored.get(place[1:])])


def _freeze_unevaluated(
    engine: Engine, ready: list[tuple[Formula, Rewritten]], frozen: dict[tuple[str, int, int], str]
) -> None:
    for formula, _ in ready:
        for place in _places(formula):
            value = engine.value(*place)
            if isinstance(value, Unevaluated):
                frozen[place] = value.reason


def _freeze_dependents(ready: list[tuple[Formula, Rewritten]], frozen: dict[tuple[str, int, int], str]) -> None:
    """Mark every formula that reads a frozen cell, directly or by others."""
    if not frozen:
        return
    reads = []
    for formula, made in ready:
        areas = [area for reference in made.references if (area := _area(reference, formula.sheet)) is not None]
        reads.append((_places(formula), areas))
    grown = True
    while grown:
        grown = False
        by_sheet: dict[str, list[tuple[int, int]]] = {}
        for sheet, row, column in frozen:
            by_sheet.setdefault(sheet.lower(), []).append((row, column))
        for places, areas in reads:
            if places[0] in frozen:
                continue
            for sheet, c1, r1, c2, r2 in areas:
                if any(r1 <= row <= r2 and c1 <= column <= c2 for row, column in by_sheet.get(sheet, ())):
                    frozen.update(dict.fromkeys(places, "reads a cell that is not recalculated"))
                    grown = True
                    break


def _area(reference: str, sheet: str) -> tuple[str, int, int, int, int] | None:
    found = _AREA.match(reference)
    if found:
        name = found[1].strip("'").replace("''", "'") if found[1] else sheet
        c1, r1, c2, r2 = range_boundaries(f"{found[2]}{found[3]}:{found[4] or found[2]}{found[5] or found[3]}")
        return name.lower(), c1, r1, c2, r2
    whole = re.match(r"^(?:('(?:[^']|'')+'|[^'!]+)!)?\$?([A-Z]{1,3}):\$?([A-Z]{1,3})$", reference, re.IGNORECASE)
    if whole:
        name = whole[1].strip("'").replace("''", "'") if whole[1] else sheet
        c1, _, c2, _ = range_boundaries(f"{whole[2]}1:{whole[3]}1")
        return name.lower(), c1, 1, c2, 1 << 20
    return None


def _compare(engine: Engine, book: Book, frozen: dict[tuple[str, int, int], str], rtol: float) -> list[Result]:
    out = []
    for sheet in book.sheets:
        numbers = [abs(v) for v in sheet.stored.values() if isinstance(v, (int, float)) and not isinstance(v, bool)]
        scale = max(numbers, default=1.0)
        text = {place: formula.text for formula in sheet.formulas for place in _places(formula)}
        for (row, column), stored in sheet.stored.items():
            place = (sheet.name, row, column)
            if place in frozen:
                out.append(Result(*place, text[place], stored, stored, FROZEN, frozen[place]))
                continue
            new = engine.value(*place)
            new = 0.0 if new is None else new
            state = SAME if equal(stored, new, rtol, scale) else DIFFERENT
            if stored is None and new != "":
                state = NOT_STORED
            out.append(Result(*place, text[place], stored, new, state))
    return out


def equal(stored: Any, new: Any, rtol: float, scale: float) -> bool:
    """Whether a stored and a new value are the same; `scale` is the sheet's largest number."""
    if isinstance(stored, bool) or isinstance(new, bool):
        return stored is new
    if isinstance(stored, (int, float)) and isinstance(new, (int, float)):
        return math.isclose(stored, new, rel_tol=rtol, abs_tol=_TINY * min(scale, 1.0))
    if stored is None or new == "":
        return stored in (None, "") and new in ("", None)
    if isinstance(stored, CellError) or isinstance(new, CellError):
        return bool(stored == new)
    return bool(stored == new)
