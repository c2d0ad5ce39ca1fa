"""Stations along one unbranched member."""

from __future__ import annotations

from typing import Any

import numpy as np

from xlaxial.functions.bars.solution import Solution
from xlaxial.problems import AxialError, Problem
from xlaxial.solver.stations import at_stations
from xlaxial.tables.answer import answer_rows
from xlaxial.tables.columns import label_of
from xlaxial.tables.wanted import Wanted

_POINTS = 11
_MOST_POINTS = 1001


def profile_rows(solution: Solution, asked: Wanted, mark: Any, points: Any) -> list[list[Any]]:
    """Return the stations of one member as rows of cells.

    Parameters
    ----------
    solution : Solution
        The solved schedule.
    asked : Wanted
        The columns.
    mark : cell
        The member; may be blank where there is one member.
    points : cell
        Stations on each piece, both its ends among them; blank is 11.

    Raises
    ------
    AxialError
        There is no such member, or `points` is not a whole number from 2 to 1001.
    """
    inputs = solution.inputs
    number = _POINTS if points is None or points == "" else points
    if (
        isinstance(number, bool)
        or not isinstance(number, (int, float))
        or not 2 <= number <= _MOST_POINTS
        or number % 1
    ):
        raise AxialError(Problem(f"points is {points!r}", f"write a whole number from 2 to {_MOST_POINTS}"))
    wanted = label_of(mark)
    if wanted is None and inputs.members.count == 1:
        wanted = inputs.members.marks[0]
    member = inputs.members.code_of.get(wanted, -1) if wanted is not None else -1
    problem = None
    if member < 0:
        problem = Problem(f"no segment has the mark {wanted!r}", "write a mark of the segments table", table="segments")
    elif member in inputs.members.faults:
        problem = inputs.members.faults[member]
    elif not inputs.nodes.chain[member]:
        problem = Problem(
            "a branched member has no profile", "name an unbranched member", mark=str(wanted), code="#N/A"
        )
    if problem is not None:
        return answer_rows(asked, 1, lambda word: [None], {0: problem})
    kept = int(np.flatnonzero(solution.pieces.kept == member)[0])
    bars = np.flatnonzero(solution.network.bars.member == kept)
    count = int(number)
    part = np.tile(np.linspace(0.0, 1.0, count), bars.size)
    bar = np.repeat(bars, count)
    length = solution.network.bars.length
    starts = np.cumsum(length[bars]) - length[bars]
    x = part * length[bar]
    found = at_stations(solution.network, solution.actions, solution.state, solution.preload, bar, x)
    segment = solution.pieces.segment[bar] - inputs.nodes.first[member] + 1
    values = {
        "x": np.repeat(starts, count) + x,
        "Segment": segment.astype(np.float64),
        "Force": found.force,
        "Stress": found.stress,
        "Displacement": found.displacement,
    }
    return answer_rows(asked, bar.size, lambda word: values[word.name], {})
