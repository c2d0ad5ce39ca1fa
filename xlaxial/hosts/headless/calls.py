"""Our functions as the engine calls them: cells in, cells out, with the place of each range."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from typing import Any

from xlaxial.cells import CellRange
from xlaxial.hosts.headless.engine import from_engine, to_engine
from xlaxial.hosts.headless.prepass.arguments import OMITTED, place_of

Dates = dict[str, dict[tuple[int, int], dt.datetime | dt.date | dt.time | dt.timedelta]]


def engine_function(function: Callable[..., Any], dates: Dates) -> Callable[..., Any]:
    """Return a function for the engine that calls one of ours.

    Parameters
    ----------
    function : callable
        Takes cells and blocks of cells.
    dates : dict
        By sheet, the cells that are dates: the engine carries their serial numbers, our functions are to see dates.
    """

    def call(*tagged: Any) -> Any:
        arguments = [_argument(tag, value, dates) for tag, value in zip(tagged[::2], tagged[1::2], strict=True)]
        while arguments and arguments[-1] is None:
            arguments.pop()
        answer = function(*arguments)
        if isinstance(answer, list):
            return [[to_engine(cell) for cell in row] for row in answer]
        return to_engine(answer)

    return call


def _argument(tag: str, value: Any, dates: Dates) -> Any:
    if tag == OMITTED:
        return None
    place = place_of(tag)
    if not isinstance(value, list):
        cell = from_engine(value) if isinstance(value, dict) else value
        if place is None:
            return cell
        value = [[cell]]
    elif any(type(cell) is dict for row in value for cell in row):
        value = [[from_engine(cell) if type(cell) is dict else cell for cell in row] for row in value]
    if place is None:
        return value
    sheet, first_row, first_column = place
    here = dates.get(sheet.lower())
    if here and len(here) < len(value) * len(value[0]):
        for (row, column), date in here.items():
            i, j = row - first_row, column - first_column
            if 0 <= i < len(value) and 0 <= j < len(value[i]):
                value[i][j] = date
    elif here:
        value = [
            [here.get((first_row + i, first_column + j), cell) for j, cell in enumerate(cells)]
            for i, cells in enumerate(value)
        ]
    return CellRange(value, sheet, first_row, first_column)


def fit(answer: Any, rows: float, columns: float) -> Any:
    """Fit an array to a block of cells: one row or column is repeated, what is missing is #N/A, a blank is 0."""
    n_rows, n_columns = int(rows), int(columns)
    block = answer if isinstance(answer, list) else [[answer]]
    height, width = len(block), max(map(len, block))
    missing = {"type": "Error", "kind": "Na"}

    def cell(i: int, j: int) -> Any:
        i, j = (0 if height == 1 else i), (0 if width == 1 else j)
        if i >= height or j >= len(block[i]):
            return missing
        return 0.0 if block[i][j] is None else block[i][j]

    return [[cell(i, j) for j in range(n_columns)] for i in range(n_rows)]


class Spills:
    """Notes how large each array is that spills by itself."""

    def __init__(self) -> None:
        self.sizes: dict[int, tuple[int, int]] = {}  # rows and columns by the number of the formula

    def note(self, answer: Any, number: float) -> Any:
        """Return an array as it is, its blanks as 0, and note its size."""
        block = answer if isinstance(answer, list) else [[answer]]
        self.sizes[int(number)] = len(block), max(map(len, block))
        return [[0.0 if cell is None else cell for cell in row] for row in block]


def anchored(cell: Any, spilled: Any) -> Any:
    """Return the array that spills from a cell: the cell itself where the engine sees no array, for it is one cell."""
    return cell if isinstance(spilled, dict) else spilled
