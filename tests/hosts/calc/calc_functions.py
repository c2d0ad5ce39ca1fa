"""Functions of the tests' own, which tell what reached them; the office loads this module through its config file."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from xlaxial.cells import CellError, CellRange
from xlaxial.functions.registry import Argument, Function

_TABLE = Argument("table", "Table with its heading row: Length (mm), Area (mm2).", "table")
_SECOND = Argument("second", "A second table, which may be empty.", "table", optional=True)
_WANTED = Argument("wanted", 'Headings of the answer, one heading as text, or "Problems".', "cells", optional=True)
_MARK = Argument("mark", "Mark of the member.", "value", optional=True)


def _declared(name: str, arguments: tuple[Argument, ...], shape: str = "grid") -> Function:
    return Function(
        name, f"Summary of {name}.", arguments, "What comes back.", f"here:{name}", f"={name}(A1:B2)", shape=shape
    )


FUNCTIONS = (
    _declared("AX_ECHO", (_TABLE, _SECOND, _WANTED, _MARK), "cell"),
    _declared("AX_GRID", (_TABLE, _WANTED)),
    _declared("AX_ROWS", (_TABLE, _WANTED)),
    _declared("AX_FAULT", (_MARK,), "cell"),
    _declared("AX_FAULTS", (_TABLE,)),
    _declared("AX_HELLO", (), "cell"),
    _declared("AX_DATUM", (Argument("name", "A name.", "value"), _MARK), "cell"),
)


def _echo(*arguments: Any) -> str:
    return " | ".join(map(_told, arguments))


def _told(argument: Any) -> str:
    place = f"{argument.sheet}!r{argument.row}c{argument.column} " if isinstance(argument, CellRange) else ""
    return place + repr(list(argument) if isinstance(argument, list) else argument)


def _grid(table: Any, wanted: Any) -> list[list[Any]]:
    codes = ("#NULL!", "#DIV/0!", "#VALUE!", "#REF!", "#NAME?", "#NUM!", "#N/A", "#CALC!")
    return [
        [1.5, None, "text", True, False, 3],
        [CellError(code) for code in codes],
        [float("nan"), float("inf"), 0.0, -1e300, "", "é√"],
    ]


def _rows(table: Any, wanted: Any) -> list[list[Any]]:
    """One row per row below the heading: the sum of its numbers, or the row's first error, or #VALUE! for a text."""
    out: list[list[Any]] = []
    for row in table[1:]:
        wrong = [cell for cell in row if isinstance(cell, CellError)]
        texts = [cell for cell in row[1:] if isinstance(cell, str)]
        numbers = [cell for cell in row if isinstance(cell, float)]
        out.append([wrong[0] if wrong else CellError("#VALUE!") if texts else sum(numbers)])
    return out


def _fault(*arguments: Any) -> Any:
    raise RuntimeError("a fault on purpose")


_CODE: dict[str, Callable[..., Any]] = {
    "AX_ECHO": _echo,
    "AX_GRID": _grid,
    "AX_ROWS": _rows,
    "AX_FAULT": _fault,
    "AX_FAULTS": _fault,
    "AX_HELLO": lambda: "hello",
    "AX_DATUM": lambda name, mark: 12.0 if name == "twelve" else CellError("#NAME?"),
}


def caller(name: str) -> Callable[..., Any]:
    """Return the callable of a function."""
    return _CODE[name]
