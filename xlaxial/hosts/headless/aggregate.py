"""AGGREGATE, which the engine has only in part: summaries that pass error values over.

Function and option numbers are those of the spreadsheet function (OpenFormula 1.3 has none of it; from memory of its
documentation). Options that pass over hidden rows or nested subtotals cannot be known here and are not evaluated.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import numpy.typing as npt

Numbers = npt.NDArray[np.float64]
_VALUE = {"type": "Error", "kind": "Value"}
_NUM = {"type": "Error", "kind": "Num"}
_DIV = {"type": "Error", "kind": "Div"}
_UNKNOWN = {"type": "Error", "kind": "NImpl"}
_KEEP_ERRORS, _PASS_ERRORS = 4, 6

_PLAIN: dict[int, Callable[[Numbers], float]] = {
    1: lambda x: float(x.mean()),
    4: lambda x: float(x.max()),
    5: lambda x: float(x.min()),
    6: lambda x: float(x.prod()),
    7: lambda x: float(x.std(ddof=1)),
    8: lambda x: float(x.std()),
    9: lambda x: float(x.sum()),
    10: lambda x: float(x.var(ddof=1)),
    11: lambda x: float(x.var()),
    12: lambda x: float(np.median(x)),
}
_NEEDS = {1: 1, 7: 2, 8: 1, 10: 2, 11: 1}  # fewest numbers, below which the answer is #DIV/0!


def aggregate(function: Any, option: Any, *blocks: Any) -> Any:
    """Return a summary of the numbers in blocks of cells.

    Parameters
    ----------
    function : number
        1 to 19: AVERAGE, COUNT, COUNTA, MAX, MIN, PRODUCT, STDEV.S, STDEV.P, SUM, VAR.S, VAR.P, MEDIAN, MODE.SNGL,
        LARGE, SMALL, PERCENTILE.INC, QUARTILE.INC, PERCENTILE.EXC, QUARTILE.EXC (13 and 16 to 19 are not evaluated).
    option : number
        4 keeps error values, 6 passes them over; others are not evaluated.
    *blocks : blocks of cells
        The cells; for 14 and 15 one block and then k.

    Returns
    -------
    number or error value
        The first error value of the cells where the option keeps them.
    """
    if not isinstance(function, (int, float)) or not isinstance(option, (int, float)) or not blocks:
        return _VALUE
    number = int(function)
    if int(option) not in (_KEEP_ERRORS, _PASS_ERRORS) or not 1 <= number <= 15 or number == 13:
        return _UNKNOWN
    ranked = number in (14, 15)
    if ranked and len(blocks) != 2:
        return _VALUE
    cells = [cell for block in (blocks[:1] if ranked else blocks) for cell in _flat(block)]
    errors = [cell for cell in cells if isinstance(cell, dict)]
    if errors and int(option) == _KEEP_ERRORS:
        return errors[0]
    if number == 3:
        return float(sum(cell is not None and not isinstance(cell, dict) for cell in cells))
    values = np.array([c for c in cells if isinstance(c, (int, float)) and not isinstance(c, bool)], dtype=np.float64)
    if ranked:
        return _ranked(values, blocks[1], largest=number == 14)
    if number == 2:
        return float(values.size)
    if values.size < _NEEDS.get(number, 0):
        return _DIV
    if number == 12 and not values.size:
        return _NUM
    return _PLAIN[number](values) if values.size else 0.0


def _flat(block: Any) -> list[Any]:
    return [cell for row in block for cell in row] if isinstance(block, list) else [block]


def _ranked(values: Numbers, k: Any, *, largest: bool) -> Any:
    if not isinstance(k, (int, float)) or isinstance(k, bool):
        return _VALUE
    place = int(np.ceil(k))
    if not 1 <= place <= values.size:
        return _NUM
    ordered = np.sort(values)
    return float(ordered[-place] if largest else ordered[place - 1])
