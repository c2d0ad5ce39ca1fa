"""The commands recalc and verify."""

from __future__ import annotations

import logging
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from openpyxl.utils import get_column_letter

from xlaxial.caution import CAUTION
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.patch import write_values
from xlaxial.hosts.headless.recalculate import DIFFERENT, FROZEN, NOT_STORED, Recalculation, recalculate
from xlaxial.hosts.headless.report import lines, write_report

LAST_DIGITS = 1e-14
"""Relative difference below which recalc keeps a stored number: spreadsheets store 15 to 17 digits."""
_FAULT = "{}: a fault of xlaxial, please report it: {}"
LISTED = 50
"""Cells of a kind that are listed on a terminal; a report lists all."""
HOLDS, DIFFERS, FAILED, UNSURE = 0, 1, 2, 3
"""Exit codes: all hold, some differ, could not run, what was recomputed holds but some cells could not be."""


def changed_values(done: Recalculation) -> dict[str, dict[tuple[int, int], object]]:
    """Return the new values that are not yet stored, by part of the zip."""
    parts = {sheet.name: sheet.part for sheet in done.book.sheets}
    out: dict[str, dict[tuple[int, int], object]] = {}
    for result in done.results:
        if result.state in (DIFFERENT, NOT_STORED):
            out.setdefault(parts[result.sheet], {})[result.row, result.column] = result.new
    for sheet in done.book.sheets:
        for anchor in sheet.resized:  # its range is written anew, whether or not its own value changes
            out.setdefault(sheet.part, {}).setdefault(
                anchor, next(r.new for r in done.results if r.sheet == sheet.name and (r.row, r.column) == anchor)
            )
    return out


def changed_areas(done: Recalculation) -> dict[str, dict[tuple[int, int], str]]:
    """Return the new ranges of arrays that spill over other cells than before, by part of the zip."""
    return {
        sheet.part: {
            anchor: f"{get_column_letter(c1)}{r1}:{get_column_letter(c2)}{r2}"
            for anchor, (c1, r1, c2, r2) in sheet.resized.items()
        }
        for sheet in done.book.sheets
    }


@contextmanager
def _working(on: str) -> Iterator[None]:
    """Show on a terminal what is at work, and take it away again; nothing in a pipe."""
    if not sys.stderr.isatty():
        yield
        return
    print(f"{on} ...", end="", file=sys.stderr, flush=True)
    try:
        yield
    finally:
        print("\r\x1b[K", end="", file=sys.stderr, flush=True)


class _Faults(logging.Handler):
    """Collects the faults of our own functions, which show as #VALUE! in their cells: one line for each kind."""

    def __init__(self) -> None:
        super().__init__()
        self.lines: list[str] = []

    def emit(self, record: logging.LogRecord) -> None:
        """Take one fault."""
        kind = record.exc_info[0] if record.exc_info else None
        line = record.getMessage() + (f" ({kind.__name__}: {record.exc_info[1]})" if kind and record.exc_info else "")
        if line not in self.lines:
            self.lines.append(line)


def _recalculated(book: Path, shown: str, rtol: float, *, volatile: bool = False) -> Recalculation:
    """Recalculate a workbook; a fault of the program is no result, so it is raised as a WorkbookError."""
    log, faults = logging.getLogger("xlaxial"), _Faults()
    propagate, log.propagate = log.propagate, False
    log.addHandler(faults)
    try:
        with _working(shown):
            done = recalculate(book, rtol=rtol, volatile=volatile)
    except WorkbookError:
        raise
    except Exception as fault:  # one line and exit code 2, not a traceback and the code of a difference
        raise WorkbookError(_FAULT.format(book.name, f"{type(fault).__name__}: {fault}")[:500]) from fault
    finally:
        log.removeHandler(faults)
        log.propagate = propagate
    if faults.lines:
        raise WorkbookError(_FAULT.format(book.name, "; ".join(faults.lines))[:500])
    return done


def recalc(book: Path, output: Path | None, in_place: bool, keep_backup: bool = True) -> int:
    """Recalculate a workbook and write it back; return the exit code.

    Without `output` and not `in_place` it is written beside the workbook, as NAME.recalculated.xlsx.
    """
    target = book if in_place else output or book.with_name(f"{book.stem}.recalculated{book.suffix}")
    if not in_place and target.exists() and book.exists() and target.samefile(book):
        print(f"{target.name}: is the workbook itself; use --in-place", file=sys.stderr)
        return FAILED
    try:
        done = _recalculated(book, book.name, LAST_DIGITS, volatile=True)
        values = changed_values(done)
        backup = _free_name(book) if in_place and keep_backup else None
        if values or not in_place:
            write_values(book, values, target, backup, changed_areas(done))
    except WorkbookError as wrong:
        print(wrong, file=sys.stderr)
        return FAILED
    n_changed, frozen = sum(map(len, values.values())), [r for r in done.results if r.state == FROZEN]
    where = f"written to {target.name}" if values or not in_place else "nothing to write"
    print(f"{book.name}: {len(done.results) - len(frozen)} cells recalculated, {n_changed} changed, {where}")
    for result in frozen[:LISTED]:
        print(f"  {result.sheet}!{result.cell}: not recalculated, {result.reason}")
    if len(frozen) > LISTED:
        print(f"  and {len(frozen) - LISTED} more not recalculated")
    if frozen:
        print("  These keep their stored values: recalculate them in a spreadsheet program.")
    print(CAUTION)
    return UNSURE if frozen else HOLDS


def _free_name(book: Path) -> Path:
    """Name for a backup that overwrites no earlier one."""
    names = (book.with_name(f"{book.stem}.backup{n}{book.suffix}") for n in ("", *(f"-{i}" for i in range(2, 1000))))
    return next(name for name in names if not name.exists())


def verify(books: list[Path], rtol: float, report: Path | None) -> int:
    """Recompute workbooks and compare with their stored values; return the exit code."""
    done: list[Recalculation] = []
    failed: dict[str, str] = {}
    for number, book in enumerate(books, 1):
        try:
            found = _recalculated(book, f"{number}/{len(books)} {book.name}", rtol)
        except WorkbookError as wrong:
            failed[book.name] = str(wrong)
            print(wrong, file=sys.stderr)
            continue
        done.append(found)
        print(f"{book.name}")
        print("\n".join(lines(found, LISTED)))
    if report is not None:
        try:
            write_report(report, done, failed)
        except WorkbookError as wrong:
            print(wrong, file=sys.stderr)
            return FAILED
    differing = sum(found.count(DIFFERENT) + found.count(NOT_STORED) for found in done)
    frozen = sum(found.count(FROZEN) for found in done)
    print(_verdict(differing, frozen, len(failed)))
    print(CAUTION)
    if failed:
        return FAILED
    return DIFFERS if differing else UNSURE if frozen else HOLDS


def _verdict(differing: int, frozen: int, failed: int) -> str:
    if failed:
        return f"{failed} of the workbooks could not be run."
    if differing:
        return f"{differing} stored values do not hold."
    if frozen:
        return f"What was recomputed holds; {frozen} cells could not be recomputed."
    return "Every stored value holds."
