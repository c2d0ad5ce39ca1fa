"""The one list of worksheet functions; every host, the help and the documents are made from it.

A function joins by adding a `Function` to the `FUNCTIONS` of its family's file in this folder; nothing else names it.
The families' declarations import nothing heavy: the code behind a function loads with its first call.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from importlib import import_module
from typing import Any

from xlaxial.tables.words import ResultWord

__all__ = ["Argument", "Function", "ResultWord", "load"]


@dataclass(frozen=True)
class Argument:
    """One argument of a worksheet function."""

    name: str  # a plain identifier, safe in VBA and in Python
    help: str  # one sentence for the function wizard, ASCII, at most 255 characters
    kind: str = "value"  # "table" (a range with error cells), "cells" (a range or text, optional), "value" (one cell)
    optional: bool = False  # may be left out


@dataclass(frozen=True)
class Function:
    """One worksheet function."""

    name: str  # AX_..., upper case
    summary: str  # one sentence, ASCII, at most 255 characters
    arguments: tuple[Argument, ...]
    returns: str  # what comes back: shape and alignment
    code: str  # "package.module:callable", imported at the first call
    example: str  # a formula as typed
    source: str = ""  # the published source of its data or method
    words: tuple[ResultWord, ...] = ()  # headings that it answers, main quantity first
    tables: tuple[str, ...] = ()  # keys of xlaxial.tables.headings.TABLES that it reads
    shape: str = "grid"  # "grid": rows of cells; "cell": one value
    volatile: bool = False

    def implementation(self) -> Callable[..., Any]:
        """Import and return the callable; it takes cells and returns rows of cells (or one cell)."""
        module, _, attribute = self.code.partition(":")
        found: Callable[..., Any] = getattr(import_module(module), attribute)
        return found


_FAMILIES = ("xlaxial.functions.bars_help", "xlaxial.functions.tabulated_help")


def load() -> dict[str, Function]:
    """Return every worksheet function by its name, in the order in which documents list them."""
    if not _REGISTRY:
        for family in _FAMILIES:
            for function in import_module(family).FUNCTIONS:
                _REGISTRY[function.name] = function
    return _REGISTRY


_REGISTRY: dict[str, Function] = {}
