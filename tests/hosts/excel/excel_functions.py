"""Functions of the tests' own, which tell what reached them."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable
from typing import Any

from xlaxial.cells import ERROR_CODES, CellError, CellRange
from xlaxial.functions.registry import Argument, Function

TABLE = Argument("table", "Table with its heading row: Length (mm), Area (mm2).", "table")
SECOND = Argument("second", "A second table, which may be left out.", "table", optional=True)
WANTED = Argument("wanted", 'Headings of the answer, one heading as text, or "Problems".', "cells", optional=True)
MARK = Argument("mark", "Mark of the member.", "value")


def _declared(name: str, arguments: tuple[Argument, ...], shape: str = "grid", **more: Any) -> Function:
    return Function(
        name,
        f"Summary of {name}.",
        arguments,
        "What comes back.",
        f"here:{name}",
        f"={name}(A1:B2)",
        shape=shape,
        **more,
    )


FUNCTIONS = (
    _declared("AX_ECHO", (TABLE, SECOND, WANTED, MARK), "cell"),
    _declared("AX_GIVE", (MARK,)),
    _declared("AX_SINGLE", (MARK,), "cell"),
    _declared("AX_FAULT", (TABLE,)),
    _declared("AX_CLOCK", (), "cell", volatile=True),
)

GIVEN: dict[str, Any] = {
    "mixed": [[1.5, None, "text", True], [2, CellError("#N/A"), "", False]],
    "jagged": [[1.0, 2.0], [3.0]],
    "none": [],
    "empty row": [[]],
    "one": [[7.0]],
    "row": [[1.0, 2.0, 3.0]],
    "column": [[1.0], [2.0]],
    "not finite": [[float("nan"), float("inf"), -float("inf"), 0.0]],
    "errors": [[CellError(code) for code in ERROR_CODES]],
    "long": [["x" * 255, "x" * 256, "𝛼" * 200]],
    "dates": [[dt.datetime(2026, 1, 2, 3, 4), dt.date(2026, 1, 2), dt.time(6, 30)]],
    "codes as numbers": [[2015.0, 2042, -2146826246, "#N/A", "#VALUE!"]],
    "not rows": 3,
    "huge": [[10**400]],
}


def _told(argument: Any) -> str:
    place = f"{argument.sheet}!r{argument.row}c{argument.column} " if isinstance(argument, CellRange) else ""
    return place + repr(list(argument) if isinstance(argument, list) else argument)


def _echo(*arguments: Any) -> str:
    return " | ".join(map(_told, arguments))


def _single(mark: Any) -> Any:
    return GIVEN[mark][0][0]


def _fault(*arguments: Any) -> Any:
    raise RuntimeError("a fault on purpose")


_CODE: dict[str, Callable[..., Any]] = {
    "AX_ECHO": _echo,
    "AX_GIVE": lambda mark: GIVEN[mark],
    "AX_SINGLE": _single,
    "AX_FAULT": _fault,
    "AX_CLOCK": lambda: 12.0,
}


def caller(name: str) -> Callable[..., Any]:
    """Return the callable of a function."""
    return _CODE[name]
