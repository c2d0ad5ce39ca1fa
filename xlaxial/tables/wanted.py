"""The headings above the answer: which results are wanted, and in which units."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import Any

from xlaxial.cells import CellError, cell_address
from xlaxial.problems import AxialError, Problem, UnitError
from xlaxial.tables.settings import Settings
from xlaxial.tables.words import ResultWord
from xlaxial.units import Unit, heading_forms, is_unit, normal, strip_brackets, unit

PLAIN = frozenset({"text", "count", "flag", "ratio"})
"""Dimensions of results that need no unit in their heading."""


@dataclass(frozen=True)
class Column:
    """One wanted column."""

    heading: str  # as it is to stand above the answer; empty for a blank column
    word: ResultWord | None = None  # None for a blank column, or for one that is not understood
    unit: Unit | None = None
    problem: Problem | None = None  # why it is not understood


@dataclass(frozen=True)
class Wanted:
    """What a call asks for."""

    columns: tuple[Column, ...]
    with_headings: bool = False  # the answer begins with its own heading row
    problems_only: bool = False  # the count of problems and the problems are asked for

    def problems(self) -> list[Problem]:
        """Problems of the wanted headings themselves."""
        return [column.problem for column in self.columns if column.problem is not None]


def read_wanted(wanted: Any, words: Sequence[ResultWord], standard: Sequence[str], settings: Settings) -> Wanted:
    """Read the wanted headings of a call.

    Parameters
    ----------
    wanted : rows of cells, str or None
        One row of headings (a second row may hold their units), one heading as text, a bare unit (the main quantity
        in that unit), "Problems", or None for the standard set.
    words : sequence of ResultWord
        What the function answers, main quantity first.
    standard : sequence of str
        Headings of the standard set.
    settings : Settings
        Its rows "Heading: word" name the user's own words.

    Returns
    -------
    Wanted
        A heading that is not understood carries its problem, code #NAME?.
    """
    rows = [[wanted]] if isinstance(wanted, (str, CellError)) else wanted
    if rows is None or all(cell is None or cell == "" for row in rows for cell in row):
        return Wanted(tuple(_column(heading, None, tuple(words), ()) for heading in standard), with_headings=True)
    single = len(rows) == 1 and len(rows[0]) == 1
    if single and isinstance(rows[0][0], str) and normal(rows[0][0]) == "problems":
        return Wanted((), problems_only=True)
    if len(rows) > 2:
        what = f"the wanted headings stand in {len(rows)} rows"
        raise AxialError(Problem(what, "give one row of headings, or two with their units below", code="#NAME?"))
    columns: list[Column] = []
    for j, cell in enumerate(rows[0]):
        below = rows[1][j] if len(rows) == 2 else None
        if isinstance(cell, CellError) or (cell is not None and not isinstance(cell, str)):
            problem = Problem(f"the wanted heading is {cell}", "write a heading as text", code="#NAME?")
            column = Column(str(cell), problem=problem)
        else:
            below = below.strip() if isinstance(below, str) and below.strip() else None
            column = _column((cell or "").strip(), below, tuple(words), settings.headings)
        if column.problem is not None:
            place = cell_address(rows, 0, j) if not isinstance(wanted, str) else ""
            column = replace(
                column, problem=replace(column.problem, cell=place, table="wanted", heading=column.heading)
            )
        columns.append(column)
    return Wanted(tuple(columns))


@lru_cache(maxsize=1024)
def _column(
    heading: str, below: str | None, words: tuple[ResultWord, ...], mapped: tuple[tuple[str, str], ...]
) -> Column:
    if not heading:
        return Column("")
    names = _names(words)
    own = {normal(theirs): names.get(normal(ours)) for ours, theirs in mapped}
    for term_text, unit_text in heading_forms(heading):
        word = own.get(normal(term_text)) or names.get(normal(term_text))
        if (
            word is not None
            and unit_text is None
            and below is None
            and word.dimension not in PLAIN
            and is_unit(heading)
        ):
            break  # "N" is a symbol without its unit, or the bare unit: only the latter can be answered
        if word is not None:
            return _with_unit(heading, word, unit_text, below)
    if is_unit(heading):
        return _with_unit(heading, words[0], heading, None)
    known = ", ".join(word.name for word in words)
    what = f"the wanted heading {heading!r} is not understood"
    return Column(heading, problem=Problem(what, f"write one of {known}"[:400], code="#NAME?"))


def _with_unit(heading: str, word: ResultWord, unit_text: str | None, below: str | None) -> Column:
    if below is not None:
        if unit_text is not None and strip_brackets(below) != strip_brackets(unit_text):
            what = f"the heading {heading!r} and the unit {below!r} below it disagree"
            return Column(heading, problem=Problem(what, "keep one unit", code="#NAME?"))
        unit_text = strip_brackets(below)
    if word.dimension in ("text", "count", "flag"):
        return Column(heading, word)
    if unit_text is None and word.dimension == "ratio":
        return Column(heading, word, Unit("", 1.0))
    if unit_text is None:
        from xlaxial.units import DIMENSIONS

        example = DIMENSIONS[word.dimension].examples[0]
        what = f"the wanted heading {heading!r} has no unit"
        return Column(heading, problem=Problem(what, f'write it as "{word.name} ({example})"', code="#NAME?"))
    try:
        return Column(heading, word, unit(unit_text, word.dimension))
    except UnitError as wrong:
        return Column(heading, problem=replace(wrong.problem, code="#NAME?"))


@lru_cache(maxsize=64)
def _names(words: tuple[ResultWord, ...]) -> dict[str, ResultWord]:
    names: dict[str, ResultWord] = {}
    for word in words:
        for spelling in (word.name, *word.aliases):
            names.setdefault(normal(spelling), word)
    return names
