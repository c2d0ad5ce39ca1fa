"""The worksheet functions on schedules of bars, from cells to cells."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from xlaxial.cells import CellRange
from xlaxial.functions.bars.profile import profile_rows
from xlaxial.functions.bars.results import MemberResults, SegmentResults
from xlaxial.functions.bars.solution import Solution, solve
from xlaxial.functions.bars.supports import ReactionResults
from xlaxial.functions.memory import Memory, content_key
from xlaxial.functions.registry import load
from xlaxial.problems import Problem
from xlaxial.tables.answer import answer_rows, problem_rows
from xlaxial.tables.settings import Settings, read_settings
from xlaxial.tables.wanted import Wanted, read_wanted

SOLVED: Memory[tuple[Solution, SegmentResults]] = Memory(16)
_READ: Memory[Settings] = Memory(16)
_ASKED: Memory[Wanted] = Memory(64)

_METRIC = {"force": "kN", "stress": "MPa", "length": "mm", "strain": "µε", "line load": "kN/m"}
_CUSTOMARY = {"force": "kip", "stress": "ksi", "length": "in", "strain": "µε", "line load": "kip/ft"}
_INCHES = (0.0254, 0.3048)

_STANDARD_SEGMENTS = (
    "Force max",
    "Force min",
    "Stress max",
    "Stress min",
    "Elongation",
    "Displacement start",
    "Displacement end",
)
_STANDARD_MEMBERS = (
    "Mark",
    "Force max",
    "Force min",
    "Stress max",
    "Stress min",
    "Displacement max",
    "Displacement min",
)
_GOVERNING = ("Utilisation", "Pass", "Status")


def as_rows(argument: Any) -> Any:
    """Return a table argument as rows of cells: a single cell is a block of one, None stays None."""
    if argument is None or isinstance(argument, list):
        return argument
    if isinstance(argument, tuple):
        return list(argument)
    return [[argument]]


def _settings(argument: Any) -> Settings:
    rows = as_rows(argument)
    return _READ.get(content_key(rows), lambda: read_settings(rows))


def _solved(
    segments: Any, supports: Any, loads: Any, combinations: Any, settings: Any, headings: Any
) -> tuple[Solution, SegmentResults]:
    """Solve the tables of a call, or take them from memory."""
    tables = [as_rows(argument) for argument in (segments, supports, loads, combinations, settings, headings)]
    tables[0] = tables[0] if tables[0] is not None else []
    tables[1] = tables[1] if tables[1] is not None else []

    def make() -> tuple[Solution, SegmentResults]:
        known = _settings(tables[4])
        if _filled(tables[3]):
            what = "combinations are not solved by this version"
            problem = Problem(what, "leave the argument out: all load cases are summed", table="combinations")
            known = replace(known, problems=(*known.problems, problem))
        solution = solve(tables[0], tables[1], tables[2], known, tables[5])
        if known.problems:  # a setting that is not understood could change every result
            for member in range(solution.inputs.members.count):
                solution.inputs.members.faults[member] = known.problems[0]
        return solution, SegmentResults(solution)

    return SOLVED.get(tuple(map(content_key, tables)), make)


def _filled(rows: Any) -> bool:
    return rows is not None and any(cell is not None and cell != "" for row in rows for cell in row)


def _standard(solution: Solution, names: Sequence[str], dimensions: dict[str, str]) -> list[str]:
    """Headings of a standard set, in the units of the trade that the segments table uses."""
    length = solution.inputs.segments.layout.headings.get("Length")
    inches = length is not None and length.unit is not None and length.unit.factor in _INCHES
    units = _CUSTOMARY if inches else _METRIC
    return [f"{name} ({units[dimensions[name]]})" if dimensions[name] in units else name for name in names]


def _wanted(function: str, wanted: Any, solution: Solution, standard: Sequence[str]) -> Wanted:
    words = load()[function].words
    known = solution.inputs.settings
    if isinstance(wanted, str) and wanted.strip():
        return _ASKED.get((function, wanted, known.headings), lambda: read_wanted(wanted, words, (), known))
    headings = _standard(solution, standard, {word.name: word.dimension for word in words})
    return read_wanted(wanted, words, headings, known)


def _by_segment(function: str, standard: Sequence[str], arguments: tuple[Any, ...]) -> list[list[Any]]:
    segments, supports, loads, wanted, combinations, settings, headings = arguments
    solution, results = _solved(segments, supports, loads, combinations, settings, headings)
    asked = _wanted(function, wanted, solution, standard)
    if asked.problems_only:
        return problem_rows(solution.problems)
    return _segment_answer(solution, results, asked)


def _segment_answer(solution: Solution, results: SegmentResults, asked: Wanted) -> list[list[Any]]:
    table = solution.inputs.segments
    failed = solution.failed_rows()
    if table.unusable:
        first = table.layout.problems[0]
        n_rows = max(len(table.block) - 1, 1)
        return answer_rows(asked, n_rows, lambda word: [None] * n_rows, dict.fromkeys(range(n_rows), first))
    if not table.n_rows:
        empty = Problem(
            "the segments table has no rows", "include the rows below the headings in the range", table="segments"
        )
        return answer_rows(asked, 1, lambda word: [None], {0: empty})
    blank = np.flatnonzero((solution.inputs.members.row_member < 0) & ~table.filled).tolist()
    return answer_rows(asked, table.n_rows, results, failed, [row for row in blank if row not in failed])


def segments(
    segments: Any,
    supports: Any,
    loads: Any = None,
    wanted: Any = None,
    combinations: Any = None,
    settings: Any = None,
    headings: Any = None,
) -> list[list[Any]]:
    """AX_SEGMENTS: any wanted headings, one row per row of the segments table."""
    arguments = (segments, supports, loads, wanted, combinations, settings, headings)
    return _by_segment("AX_SEGMENTS", (*_STANDARD_SEGMENTS, *_GOVERNING), arguments)


def forces(segments: Any, supports: Any, loads: Any = None, *others: Any) -> list[list[Any]]:
    """AX_FORCES: axial force of every segment."""
    return _by_segment("AX_FORCES", ("Force",), _seven(segments, supports, loads, *others))


def stresses(segments: Any, supports: Any, loads: Any = None, *others: Any) -> list[list[Any]]:
    """AX_STRESSES: axial stress of every segment."""
    return _by_segment("AX_STRESSES", ("Stress",), _seven(segments, supports, loads, *others))


def elongations(segments: Any, supports: Any, loads: Any = None, *others: Any) -> list[list[Any]]:
    """AX_ELONGATIONS: change of length of every segment."""
    return _by_segment("AX_ELONGATIONS", ("Elongation",), _seven(segments, supports, loads, *others))


def displacements(segments: Any, supports: Any, loads: Any = None, *others: Any) -> list[list[Any]]:
    """AX_DISPLACEMENTS: movements of both ends of every segment."""
    standard = ("Displacement start", "Displacement end")
    return _by_segment("AX_DISPLACEMENTS", standard, _seven(segments, supports, loads, *others))


def _seven(*arguments: Any) -> tuple[Any, ...]:
    if len(arguments) > 7:
        raise TypeError("at most seven arguments are taken")
    return (*arguments, *([None] * (7 - len(arguments))))


def members(
    segments: Any,
    supports: Any,
    loads: Any = None,
    wanted: Any = None,
    combinations: Any = None,
    settings: Any = None,
    headings: Any = None,
) -> list[list[Any]]:
    """AX_MEMBERS: governing values, one row per mark."""
    solution, results = _solved(segments, supports, loads, combinations, settings, headings)
    standard = (*_STANDARD_MEMBERS, "Utilisation", "Segment", "Redundants", "Residual", "Pass", "Status")
    asked = _wanted("AX_MEMBERS", wanted, solution, standard)
    if asked.problems_only:
        return problem_rows(solution.problems)
    inputs = solution.inputs
    if inputs.segments.unusable or not inputs.members.count:
        return _segment_answer(solution, results, asked)
    return answer_rows(asked, inputs.members.count, MemberResults(solution, results), inputs.members.faults)


def reactions(
    segments: Any,
    supports: Any,
    loads: Any = None,
    wanted: Any = None,
    combinations: Any = None,
    settings: Any = None,
    headings: Any = None,
) -> list[list[Any]]:
    """AX_REACTIONS: reactions, one row per row of the supports table."""
    solution, _ = _solved(segments, supports, loads, combinations, settings, headings)
    asked = _wanted("AX_REACTIONS", wanted, solution, ("Reaction", "State", "Status"))
    if asked.problems_only:
        return problem_rows(solution.problems)
    results = ReactionResults(solution)
    return answer_rows(asked, results.n_rows, results, results.failed(), results.blank())


def profile(
    segments: Any,
    supports: Any,
    loads: Any = None,
    mark: Any = None,
    wanted: Any = None,
    combinations: Any = None,
    settings: Any = None,
    points: Any = None,
) -> list[list[Any]]:
    """AX_PROFILE: stations along one member."""
    solution, _ = _solved(segments, supports, loads, combinations, settings, None)
    asked = _wanted("AX_PROFILE", wanted, solution, ("x", "Segment", "Force", "Stress", "Displacement"))
    if asked.problems_only:
        return problem_rows(solution.problems)
    return profile_rows(solution, asked, _one_cell(mark), _one_cell(points))


def _one_cell(argument: Any) -> Any:
    """Return the value of a single cell, given alone or as a block of one."""
    if isinstance(argument, (CellRange, list, tuple)):
        return argument[0][0] if len(argument) and len(argument[0]) else None
    return argument
