"""The worksheet functions as Python callables: ``from xlaxial.functions import AX_SEGMENTS``.

Each takes rows of cells as a spreadsheet gives them (None for a blank, `xlaxial.CellError` for an error cell) and
returns rows of cells: exactly what a cell that calls it would show.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from xlaxial.functions.call import caller
from xlaxial.functions.registry import load


def __getattr__(name: str) -> Callable[..., Any]:
    if name.startswith("AX_") and name in load():
        return caller(name)
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return [*globals(), *load()]
