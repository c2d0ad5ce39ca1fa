"""Recalculation of a workbook without a spreadsheet program."""

from __future__ import annotations

import gc
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from xlaxial.cells import CellError
from xlaxial.hosts.headless.calls import Spills, anchored, engine_function, fit
from xlaxial.hosts.headless.compare import DIFFERENT, FROZEN, NOT_STORED, RTOL, SAME, Result, compare
from xlaxial.hosts.headless.engine import Engine, Unevaluated, knows
from xlaxial.hosts.headless.errors import CannotEvaluate, WorkbookError
from xlaxial.hosts.headless.freezing import Readers, area_of
from xlaxial.hosts.headless.prepass.copies import Copies, references
from xlaxial.hosts.headless.prepass.rewrite import ANCHOR, FIT, SPILL, Context, Rewritten
from xlaxial.hosts.headless.supplied import SUPPLIED
from xlaxial.hosts.headless.workbook import LARGEST_ARRAY, Book, Formula, read_book

__all__ = ["DIFFERENT", "FROZEN", "NOT_STORED", "RTOL", "SAME", "Recalculation", "Result", "recalculate"]


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
    path: Path | str,
    functions: Mapping[str, Callable[..., Any]] | None = None,
    rtol: float = RTOL,
    *,
    volatile: bool = False,
    seconds: float = 120.0,
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
    volatile : bool
        Recalculate the clock and random numbers too; else they keep their stored values, for they never hold.
    seconds : float
        Longest time that the evaluation may take, s.

    Returns
    -------
    Recalculation
        A result for every formula cell and every cell that an array formula fills.

    Raises
    ------
    WorkbookError
        The file cannot be taken up, or its evaluation takes too long.
    """
    with _no_collector():
        return _recalculated(Path(path), functions, rtol, volatile, seconds)


@contextmanager
def _no_collector() -> Iterator[None]:
    """Keep the garbage collector from walking again and again through cells that are all in use."""
    enabled = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if enabled:
            gc.enable()


def _recalculated(
    path: Path, functions: Mapping[str, Callable[..., Any]] | None, rtol: float, volatile: bool, seconds: float
) -> Recalculation:
    book = read_book(path)
    known = worksheet_functions() if functions is None else dict(functions)
    run = _Run(book, known, volatile, seconds)
    try:
        if any(sheet.formulas for sheet in book.sheets):
            run.enter()
            run.engine.evaluate()
    except TimeoutError:
        raise WorkbookError(f"{path.name}: its evaluation takes longer than {seconds:g} s") from None
    run.freeze_unevaluated()
    run.resize()
    run.freeze_downstream()
    return Recalculation(path, book, compare(run.engine, book, run.frozen, rtol))


class _Run:
    """A workbook on its way through the engine."""

    def __init__(self, book: Book, known: Mapping[str, Callable[..., Any]], volatile: bool, seconds: float) -> None:
        self.book = book
        self.volatile = volatile
        self.engine = Engine(date_1904=book.date_1904, seconds=seconds)
        extents = {sheet.name.lower(): sheet.extent for sheet in book.sheets}
        ours = frozenset(name.upper() for name in known)
        self.copies = Copies(Context(ours, book.tables, book.names, extents, lambda f: f in SUPPLIED or knows(f)))
        self.hiding = {sheet.name.lower() for sheet in book.sheets if sheet.hides_rows}
        self.frozen: dict[tuple[str, int, int], str] = {}  # (sheet, row, column) -> why
        self.ready: list[tuple[Formula, Rewritten]] = []
        dates = {sheet.name.lower(): sheet.dates for sheet in book.sheets}
        for name, function in known.items():
            self.engine.add_function(name.upper(), engine_function(function, dates))
        for name, function in SUPPLIED.items():
            if not knows(name):
                self.engine.add_function(name, function)
        self.engine.add_function(FIT, fit)
        self.engine.add_function(ANCHOR, anchored)
        self.spills = Spills()
        self.engine.add_function(SPILL, self.spills.note)

    def enter(self) -> None:
        """Put every value and formula into the engine."""
        for sheet in self.book.sheets:
            self.engine.add_sheet(sheet.name)
        for sheet in self.book.sheets:
            self.engine.set_rows(sheet.name, sheet.rows)
        for sheet in self.book.sheets:
            for formula in sheet.formulas:
                try:
                    self.ready.append((formula, self._entered(formula)))
                except CannotEvaluate as why:
                    for row, column in formula.places():
                        self.frozen[sheet.name, row, column] = str(why)
                        self.engine.set_value(sheet.name, row, column, sheet.stored[row, column])

    def _entered(self, formula: Formula) -> Rewritten:
        """Rewrite a formula and put it into the engine."""
        if formula.data_table:
            raise CannotEvaluate("is filled by a what-if data table")
        made = self.copies.rewrite(
            formula.text, formula.sheet, formula.row, formula.column, array=formula.area is not None
        )
        if made.volatile and not self.volatile:
            raise CannotEvaluate("changes at every calculation")
        if made.counts_hidden and any(
            area and area[0] in self.hiding for area in (area_of(text, formula.sheet) for text in references(made))
        ):
            raise CannotEvaluate("depends on which rows are hidden")
        text = made.text
        if formula.dynamic:
            text = f"={SPILL}({text[1:]},{len(self.ready)})"
        elif formula.area is not None:
            c1, r1, c2, r2 = formula.area
            if len(formula.places()) != (r2 - r1 + 1) * (c2 - c1 + 1):
                raise CannotEvaluate(f"is an array formula of more than {LARGEST_ARRAY} cells")
            text = f"={FIT}({text[1:]},{r2 - r1 + 1},{c2 - c1 + 1})"
        elif made.calls_ours or made.may_spill:
            text = f"={FIT}({text[1:]},1,1)"
        try:
            self.engine.set_formula(formula.sheet, formula.row, formula.column, text)
        except ValueError as wrong:
            raise CannotEvaluate(f"the engine cannot read the formula ({wrong})"[:200]) from None
        return made

    def freeze_unevaluated(self) -> None:
        """Note the cells for which the engine has no value."""
        for formula, made in self.ready:
            for row, column in formula.places():
                value = self.engine.value(formula.sheet, row, column)
                if isinstance(value, Unevaluated):
                    self.frozen[formula.sheet, row, column] = value.reason
                elif made.doubtful and isinstance(value, CellError):
                    self.frozen[formula.sheet, row, column] = made.doubtful

    def resize(self) -> None:
        """Note the arrays that spill over other cells than they are stored with."""
        for number, (rows, columns) in self.spills.sizes.items():
            formula = self.ready[number][0]
            if formula.area is None or isinstance(
                self.engine.value(formula.sheet, formula.row, formula.column), CellError
            ):
                continue
            c1, r1, c2, r2 = formula.area
            if (rows, columns) != (r2 - r1 + 1, c2 - c1 + 1):
                sheet = next(sheet for sheet in self.book.sheets if sheet.name == formula.sheet)
                sheet.resized[r1, c1] = (c1, r1, c1 + columns - 1, r1 + rows - 1)

    def freeze_downstream(self) -> None:
        """Note every cell that reads a frozen one, directly or by others."""
        if not self.frozen:
            return
        readers = Readers()
        sheets = {sheet.name.lower(): sheet.name for sheet in self.book.sheets}
        for formula, made in self.ready:
            key = formula.sheet.lower()
            reads = (area_of(reference, formula.sheet) for reference in references(made))
            readers.add(
                [(key, row, column) for row, column in formula.places()],
                [area for area in reads if area is not None],
                reaching=made.reaching,
            )
        for name, row, column in readers.downstream((sheet.lower(), r, c) for sheet, r, c in self.frozen):
            self.frozen[sheets[name], row, column] = "reads a cell that is not recalculated"
