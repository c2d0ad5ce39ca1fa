"""The commands recalc and verify."""

from __future__ import annotations

import sys
from pathlib import Path

from openpyxl.utils import get_column_letter

from xlaxial.caution import CAUTION
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.patch import write_values
from xlaxial.hosts.headless.recalculate import DIFFERENT, FROZEN, NOT_STORED, Recalculation, recalculate
from xlaxial.hosts.headless.report import lines, write_report

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


def recalc(book: Path, output: Path | None, in_place: bool, keep_backup: bool = True) -> int:
    """Recalculate a workbook and write it back; return the exit code."""
    target = book if in_place else output or book.with_name(f"{book.stem}.recalculated{book.suffix}")
    try:
        done = recalculate(book, rtol=0.0, volatile=True)
        values = changed_values(done)
        backup = book.with_name(f"{book.stem}.backup{book.suffix}") if in_place and keep_backup and values else None
        if values or target != book:
            write_values(book, values, target, backup, changed_areas(done))
    except WorkbookError as wrong:
        print(wrong, file=sys.stderr)
        return FAILED
    n_changed, n_frozen = sum(map(len, values.values())), done.count(FROZEN)
    print(f"{book.name}: {len(done.results)} cells recalculated, {n_changed} changed, written to {target.name}")
    for result in [r for r in done.results if r.state == FROZEN][:50]:
        print(f"  {result.sheet}!{result.cell}: not recalculated, {result.reason}")
    print(CAUTION)
    return UNSURE if n_frozen else HOLDS


def verify(books: list[Path], rtol: float, report: Path | None) -> int:
    """Recompute workbooks and compare with their stored values; return the exit code."""
    done: list[Recalculation] = []
    failed: dict[str, str] = {}
    for number, book in enumerate(books, 1):
        if sys.stderr.isatty() and len(books) > 1:
            print(f"\r{number}/{len(books)} {book.name}", end="", file=sys.stderr)
        try:
            found = recalculate(book, rtol=rtol)
        except WorkbookError as wrong:
            failed[book.name] = str(wrong)
            print(wrong, file=sys.stderr)
            continue
        done.append(found)
        print(f"{book.name}")
        print("\n".join(lines(found)))
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
