"""One column of cells to SI numbers or to labels: fast where every cell is a plain number, exact where it is not."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from xlaxial.arrays import Flags, Floats
from xlaxial.cells import CellError
from xlaxial.problems import AxialError, Problem, UnitError
from xlaxial.tables.layout import Heading
from xlaxial.tables.numbers import parse_number
from xlaxial.units import unit

_PLAIN = frozenset({float, int})
_PLAIN_OR_BLANK = frozenset({float, int, type(None)})
_HASHED = frozenset({float, int, str, type(None)})
_AS_DATE = "the spreadsheet has turned this cell into a date"

Report = Callable[[int, Problem], None]
"""Takes a row of the data (from 0) and what is wrong in it."""


@dataclass(frozen=True)
class Numbers:
    """A column of numbers in SI."""

    values: Floats  # (n,) SI, nan where blank or wrong
    present: Flags  # (n,) True where something stands in the cell, right or wrong


def read_numbers(cells: list[Any], heading: Heading, decimal_mark: str, report: Report) -> Numbers:
    """Read a column of numbers.

    Parameters
    ----------
    cells : list of cells
        The column's data.
    heading : Heading
        Its term and unit; a cell that carries its own unit ("12 in") wins over the heading's.
    decimal_mark : str
        Decimal mark of numbers typed as text.
    report : callable
        Is told each row that cannot be read; the value is nan there.

    Returns
    -------
    Numbers
        SI values.
    """
    kinds = set(map(type, cells))
    if kinds <= _PLAIN_OR_BLANK and heading.unit is not None:
        values = np.array(cells, dtype=np.float64)
        present = np.ones(len(cells), dtype=bool) if kinds <= _PLAIN else ~np.isnan(values)
        if np.isfinite(values[present]).all():
            values *= heading.unit.factor
            _check_sign(values, heading, cells, report)
            return Numbers(values, present)
    values = np.full(len(cells), np.nan)
    present = np.zeros(len(cells), dtype=bool)
    for i, cell in enumerate(cells):
        if cell is None or (isinstance(cell, str) and not cell.strip()):
            continue
        present[i] = True
        try:
            values[i] = _number(cell, heading, decimal_mark)
        except AxialError as wrong:
            report(i, replace(wrong.problem, heading=heading.text))
    _check_sign(values, heading, cells, report)
    return Numbers(values, present)


def _check_sign(values: Floats, heading: Heading, cells: list[Any], report: Report) -> None:
    if heading.term.positive:
        wrong = values <= 0.0
        if wrong.any():
            for i in np.flatnonzero(wrong).tolist():
                state = "zero" if values[i] == 0.0 else "negative"
                what = f"{heading.term.name} is {state} ({cells[i]})"
                report(i, Problem(what, _positive_remedy(heading), heading=heading.text))
                values[i] = np.nan


def _positive_remedy(heading: Heading) -> str:
    if heading.term.name == "Stiffness":
        return "write a value above zero, or leave the cell blank for a rigid support"
    return "write a value above zero"


def _number(cell: Any, heading: Heading, decimal_mark: str) -> float:
    if isinstance(cell, bool):
        raise AxialError(Problem(f"{str(cell).upper()} stands where a number is due", "write a number"))
    own = None
    if isinstance(cell, (int, float)):
        number = float(cell)
    elif isinstance(cell, str):
        number, own = parse_number(cell, decimal_mark)
    elif isinstance(cell, CellError):
        raise AxialError(Problem(f"the cell is {cell}", "mend the formula or the value in it"))
    elif isinstance(cell, (dt.date, dt.time, dt.timedelta)):
        raise AxialError(Problem(_AS_DATE, "format it as text or number and type the value again"))
    else:
        raise AxialError(Problem(f"{cell!r} is not a number", "write a number"))
    if not np.isfinite(number):
        raise AxialError(Problem(f"{number} is not a finite number", "write a finite number"))
    if own is not None:
        try:
            return number * unit(own, heading.term.dimension).factor
        except UnitError as wrong:
            raise AxialError(wrong.problem) from None
    if heading.unit is None:
        example = unit_example(heading.term.dimension)
        remedy = f'write the unit in the heading, such as "{heading.term.name} ({example})", or in the cell'
        raise AxialError(Problem(f"{heading.text!r} has no unit", remedy))
    return number * heading.unit.factor


def unit_example(dimension: str) -> str:
    """Return a unit of the dimension as the trade writes it."""
    from xlaxial.units import DIMENSIONS

    return DIMENSIONS[dimension].examples[0]


def read_counts(cells: list[Any], heading: Heading, report: Report) -> Numbers:
    """Read a column of whole numbers (Order, Segment); arguments as `read_numbers`."""
    plain = replace(heading, unit=unit("1", "ratio"), term=replace(heading.term, dimension="ratio"))
    numbers = read_numbers(cells, plain, ".", report)
    wrong = numbers.values != np.floor(numbers.values)
    for i in np.flatnonzero(wrong & ~np.isnan(numbers.values)).tolist():
        report(
            i,
            Problem(
                f"{heading.term.name} is {cells[i]}, not a whole number", "write 1, 2, 3 ...", heading=heading.text
            ),
        )
        numbers.values[i] = np.nan
    return numbers


def read_labels(cells: list[Any], heading: Heading, report: Report) -> list[Any]:
    """Read a column of labels.

    Parameters
    ----------
    cells, heading, report
        As for `read_numbers`.

    Returns
    -------
    list of str or None
        Labels without surrounding blanks; the number 2 and 2.0 are "2"; None where blank or wrong.
    """
    kinds = set(map(type, cells))
    if kinds <= _HASHED:  # 2 and 2.0 are one key, and no TRUE is among them
        labels: dict[Any, Any] = {}
        wrong = False
        for cell in set(cells):
            try:
                labels[cell] = label_of(cell)
            except AxialError:
                wrong = True
        if not wrong:
            if all(cell == label for cell, label in labels.items()):
                return cells
            return list(map(labels.__getitem__, cells))
    out: list[Any] = []
    for i, cell in enumerate(cells):
        try:
            out.append(label_of(cell))
        except AxialError as wrong_label:
            report(i, replace(wrong_label.problem, heading=heading.text))
            out.append(None)
    return out


def label_of(cell: Any) -> str | None:
    """Return a cell's label: text without surrounding blanks, a whole number as its digits, None for a blank."""
    if cell is None:
        return None
    if isinstance(cell, str):
        return cell.strip() or None
    if isinstance(cell, CellError):
        raise AxialError(Problem(f"the cell is {cell}", "mend the formula or the value in it"))
    if isinstance(cell, (dt.date, dt.time, dt.timedelta)):
        raise AxialError(Problem(_AS_DATE, "format it as text and type the label again"))
    if isinstance(cell, bool):
        raise AxialError(Problem(f"{str(cell).upper()} is no label", "format it as text and type the label again"))
    if isinstance(cell, float) and not cell.is_integer():
        what = f"the label has become the number {cell:g}"
        raise AxialError(Problem(what, "format the cell as text and type the label again"))
    return str(int(cell))
