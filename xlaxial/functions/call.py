"""The one way in which a host or a script calls a worksheet function: nothing but cells comes out of it."""

from __future__ import annotations

import functools
import logging
from collections.abc import Callable
from typing import Any

from xlaxial.cells import CellError
from xlaxial.functions.registry import load
from xlaxial.problems import AxialError

_LOG = logging.getLogger("xlaxial")


@functools.cache
def caller(name: str) -> Callable[..., Any]:
    """Return the callable of a worksheet function.

    Parameters
    ----------
    name : str
        Name of the function, in any case.

    Returns
    -------
    callable
        Takes cells and rows of cells, with None for an argument left out; returns rows of cells (shape "grid") or one
        cell (shape "cell"). It never raises: an input that cannot be used is an error value, and so is a fault of the
        program, whose traceback goes to the log "xlaxial".

    Raises
    ------
    KeyError
        There is no function of that name.
    """
    function = load()[name.upper()]

    def call(*arguments: Any) -> Any:
        error = CellError("#VALUE!")
        try:
            return function.implementation()(*arguments)
        except AxialError as wrong:
            error = CellError(wrong.problem.code)
        except Exception:  # noqa: BLE001 - a fault must reach the cell as an error value, never as text or a crash
            _LOG.exception("%s failed on its arguments", function.name)
        return error if function.shape == "cell" else [[error]]

    call.__name__ = call.__qualname__ = function.name
    call.__doc__ = function.summary
    return call
