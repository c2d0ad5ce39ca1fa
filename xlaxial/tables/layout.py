"""Where the headings of a block stand, and which term and unit each column carries."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache
from typing import Any

from xlaxial.cells import CellError, CellRange, cell_address
from xlaxial.problems import Problem, UnitError
from xlaxial.tables.headings import TABLES, TableKind, Term
from xlaxial.tables.settings import DEFAULTS, Settings
from xlaxial.units import Unit, heading_forms, is_unit, normal, strip_brackets, unit

_SEARCHED_ROWS = 40  # title rows above the headings are passed over so far down


@dataclass(frozen=True)
class Heading:
    """One column that a table understands."""

    term: Term
    column: int  # position in the block, from 0
    text: str  # the heading as the user wrote it
    unit: Unit | None  # None where the term has no dimension, or where no unit stands


@dataclass(frozen=True)
class Layout:
    """How a block is laid out; positions in the block, from 0."""

    heading_row: int
    first_row: int  # first row below the headings and their units row
    headings: dict[str, Heading]  # by the term's name
    problems: tuple[Problem, ...] = ()  # of the table as a whole: nothing of it can be used

    def has(self, *names: str) -> bool:
        """Whether any of the named columns stands in the table."""
        return any(name in self.headings for name in names)


@lru_cache(maxsize=4096)
def match(kind: str, text: str) -> tuple[Term, str | None] | None:
    """Return the term that a heading names, and its unit's text; None where it names none."""
    names = _names(kind)
    for term_text, unit_text in heading_forms(text):
        term = names.get(normal(term_text))
        if term is not None:
            return term, unit_text
    return None


@lru_cache(maxsize=16)
def _names(kind: str) -> dict[str, Term]:
    names: dict[str, Term] = {}
    for term in TABLES[kind].terms:
        for spelling in (term.name, *term.aliases):
            names.setdefault(normal(spelling), term)
    return names


def _matches(kind: str, cell: Any, mapped: dict[str, Term]) -> tuple[Term, str | None] | None:
    """As `match`, the user's own headings first."""
    if not isinstance(cell, str) or not cell.strip():
        return None
    if mapped:
        for term_text, unit_text in heading_forms(cell):
            if normal(term_text) in mapped:
                return mapped[normal(term_text)], unit_text
        found = match(kind, cell)
        return None if found is None or found[0] in mapped.values() else found
    return match(kind, cell)


def _mapped(kind: TableKind, settings: Settings) -> dict[str, Term]:
    """The user's headings (normal form) by rows of the settings."""
    out = {}
    for ours, theirs in settings.headings:
        term = _names(kind.name).get(normal(ours))
        if term is not None:
            for term_text, _ in heading_forms(theirs):
                out[normal(term_text)] = term
    return out


@lru_cache(maxsize=256)
def _remembered(
    kind: str, mapped: tuple[tuple[str, str], ...], place: Any, rows: tuple[tuple[Any, ...], ...]
) -> Layout:
    block = CellRange(rows, *place) if place else list(rows)
    return find_layout(block, TABLES[kind], replace(DEFAULTS, headings=mapped))


def headings_alone(rows: Any, kind: str, settings: Settings) -> Layout:
    """Return the layout of headings that are handed over without their rows; remembered, for calls of one row each."""
    place = (rows.sheet, rows.row, rows.column) if isinstance(rows, CellRange) else None
    return _remembered(kind, settings.headings, place, tuple(map(tuple, rows)))


def find_layout(block: Any, kind: TableKind, settings: Settings) -> Layout:
    """Find the heading row of a block and read it.

    Parameters
    ----------
    block : rows of cells
        Title rows may stand above the headings; a row of units may stand below them.
    kind : TableKind
        The headings that are looked for; other columns are passed over.
    settings : Settings
        Its rows "Heading: term" name the user's own headings.

    Returns
    -------
    Layout
        With problems where no heading row is found, a heading occurs twice, or a unit is not understood.
    """
    mapped = _mapped(kind, settings)
    if mapped:  # a mapped heading that this table does not have leaves the usual spellings in force
        present = {
            normal(form[0])
            for row in block[:_SEARCHED_ROWS]
            for cell in row
            if isinstance(cell, str)
            for form in heading_forms(cell)
        }
        mapped = {text: term for text, term in mapped.items() if text in present}
    best, most = -1, 0
    for i, row in enumerate(block[:_SEARCHED_ROWS]):
        terms = {found[0].name for cell in row if (found := _matches(kind.name, cell, mapped))}
        if len(terms) > most:
            best, most = i, len(terms)
        if len(terms) > 1 and not terms.isdisjoint(kind.tells):
            break
    if best < 0:
        return Layout(0, 1, {}, (_no_headings(block, kind),))
    units_row = _units_row(block, best, kind, mapped)
    headings: dict[str, Heading] = {}
    problems: list[Problem] = []
    for j, cell in enumerate(block[best]):
        found = _matches(kind.name, cell, mapped)
        if found is None:
            if isinstance(cell, CellError):
                problems.append(_wrong(block, best, j, kind, f"the heading is {cell}", "mend it or leave it out"))
            continue
        term, unit_text = found
        if term.name in headings:
            other = cell_address(block, best, headings[term.name].column)
            what = f"the headings {headings[term.name].text!r} ({other}) and {cell!r} both mean {term.name}"
            problems.append(
                _wrong(block, best, j, kind, what, f"keep one, or name it in the settings as Heading: {term.name}")
            )
            continue
        below = block[units_row][j] if units_row >= 0 and j < len(block[units_row]) else None
        if isinstance(below, str) and below.strip():
            if unit_text is not None and strip_brackets(unit_text) != strip_brackets(below):
                what = f"the heading {cell!r} and the unit {below!r} below it disagree"
                problems.append(_wrong(block, best, j, kind, what, "keep one unit"))
                continue
            unit_text = strip_brackets(below)
        read = None
        if term.dimension not in ("text", "count") and unit_text is not None:
            try:
                read = _unit(unit_text, term)
            except UnitError as wrong:
                problems.append(
                    replace(
                        wrong.problem,
                        cell=cell_address(block, best, j),
                        heading=str(cell),
                        table=kind.name,
                    )
                )
                continue
        elif term.dimension == "ratio":
            read = Unit("", 1.0)
        headings[term.name] = Heading(term, j, str(cell), read)
    return Layout(best, (units_row if units_row >= 0 else best) + 1, headings, tuple(problems))


def _unit(text: str, term: Term) -> Unit:
    """Read a heading's unit, of its dimension or of the other one that it may have."""
    if term.also:
        try:
            return unit(text, term.also)
        except UnitError:
            pass
    return unit(text, term.dimension)


def _units_row(block: Any, heading_row: int, kind: TableKind, mapped: dict[str, Term]) -> int:
    """Position of the row of units under the headings, -1 where there is none."""
    if heading_row + 1 >= len(block):
        return -1
    row, units = block[heading_row + 1], 0
    for j, cell in enumerate(row):
        if cell is None or cell == "":
            continue
        heading = block[heading_row][j] if j < len(block[heading_row]) else None
        found = _matches(kind.name, heading, mapped)
        if found is None:
            continue
        if not isinstance(cell, str) or not is_unit(cell):
            return -1
        units += found[0].dimension not in ("text", "count")
    return heading_row + 1 if units else -1


def _wrong(block: Any, row: int, column: int, kind: TableKind, what: str, remedy: str) -> Problem:
    return Problem(what, remedy, cell_address(block, row, column), heading=str(block[row][column]), table=kind.name)


def _no_headings(block: Any, kind: TableKind) -> Problem:
    wanted = ", ".join(term.name for term in kind.terms if term.name not in ("Stage", "Order"))[:150]
    if not len(block) or all(cell is None or cell == "" for row in block[:_SEARCHED_ROWS] for cell in row):
        return Problem(
            f"the {kind.name} table is empty", "point the argument at a range with a heading row", table=kind.name
        )
    return Problem(
        f"no heading row of a {kind.name} table is found in {cell_address(block, 0, 0)}",
        f"include the row with the headings in the range; understood are {wanted} ...",
        table=kind.name,
    )
