"""The worksheet functions as xlwings calls them; the add-in names this module.

xlwings is asked for raw values only (its converters would turn error values into blanks and numbers), and sees no type
hints, which it would take as converters.
"""

from __future__ import annotations

import inspect
import logging
from collections.abc import Callable, Iterable
from typing import Any

import xlwings

from xlaxial.functions.call import caller
from xlaxial.functions.registry import Function, load
from xlaxial.hosts.excel import CATEGORY, MOST_ARGUMENTS
from xlaxial.hosts.excel.convert import ERROR_NUMBERS, argument_in, cell_out, grid_out

PLACES = "places"
"""Name of the last argument, which the add-in's wrapper adds: where each range stands, one line per argument."""

_LOG = logging.getLogger("xlaxial")
_UNPLACED = "this formula goes to a wrapper that is not xlaxial's own; run 'xlaxial excel install'"

Caller = Callable[[str], Callable[..., Any]]
"""Gives the callable of a function, by its name."""


def registered(functions: Iterable[Function], find: Caller = caller) -> dict[str, Callable[..., Any]]:
    """Return worksheet functions, by name, as a module of xlwings functions holds them.

    Parameters
    ----------
    functions : iterable of Function
        Entries of the registry.
    find : callable, optional
        Gives the callable behind a name.

    Raises
    ------
    ValueError
        A function has too many arguments.
    """
    return {function.name: _registered(function, find) for function in functions}


def _registered(function: Function, find: Caller) -> Callable[..., Any]:
    names = [argument.name for argument in function.arguments]
    if len(names) > MOST_ARGUMENTS:
        raise ValueError(f"{function.name} has {len(names)} arguments, Excel takes {MOST_ARGUMENTS}")

    def call(*given: Any) -> list[list[Any]]:
        try:
            if len(given) <= len(names) or not isinstance(given[len(names)], str):
                _LOG.error("%s: %s", function.name, _UNPLACED)
                return [[ERROR_NUMBERS["#VALUE!"]]]  # a text would pass MAX and SUM
            places = given[len(names)].split("\n")
            if len(places) != len(names) + 1:
                places = [""] * len(names)
            arguments = list(map(argument_in, given[: len(names)], places))
            while arguments and arguments[-1] is None:
                arguments.pop()
            result = find(function.name)(*arguments)
            return [[cell_out(result)]] if function.shape == "cell" else grid_out(result)
        except Exception:  # noqa: BLE001 - a fault must reach the cell as an error value, never as text or a traceback
            _LOG.exception("%s failed on its arguments", function.name)
            return [[ERROR_NUMBERS["#VALUE!"]]]

    kind = inspect.Parameter.POSITIONAL_OR_KEYWORD
    parameters = [inspect.Parameter(name, kind, default=None) for name in (*names, PLACES)]
    call.__name__ = call.__qualname__ = function.name
    call.__doc__ = function.summary
    call.__annotations__ = {}
    call.__signature__ = inspect.Signature(parameters)  # type: ignore[attr-defined]  # read by inspect.signature
    made: Any = call
    for argument in function.arguments:
        made = xlwings.arg(argument.name, "raw", doc=argument.help)(made)
    made = xlwings.arg(PLACES, "raw", doc="")(made)
    made = xlwings.ret("raw")(made)
    decorated: Callable[..., Any] = xlwings.func(category=CATEGORY, volatile=function.volatile)(made)
    return decorated


globals().update(registered(load().values()))
