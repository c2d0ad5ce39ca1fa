"""From a call of Calc to a worksheet function and back; it runs inside the office."""

from __future__ import annotations

import logging
from collections.abc import Callable, Mapping
from importlib import import_module
from typing import Any

from xlaxial.hosts.calc.ranges import read_range
from xlaxial.hosts.calc.values import cell_out, cells_in, error_value, grid_out

_LOG = logging.getLogger("xlaxial")

Run = Callable[[str, tuple[str, ...], bool, Any, tuple[Any, ...]], Any]
"""Takes a function's name, the kinds of its arguments, whether it gives one cell, the workbook and the arguments."""


def dispatcher(config: Mapping[str, Any]) -> Run:
    """Return what runs every call of an extension.

    Parameters
    ----------
    config : mapping
        The extension's `config.json`; ``caller`` names, as ``module:attribute``, what gives a function's callable.

    Returns
    -------
    callable
        It never raises; a fault is #VALUE!, its traceback goes to the log "xlaxial".
    """
    module, _, attribute = config["caller"].partition(":")
    caller: Callable[[str], Callable[..., Any]] = getattr(import_module(module), attribute)

    def run(name: str, kinds: tuple[str, ...], cell: bool, document: Any, arguments: tuple[Any, ...]) -> Any:
        try:
            given = [_argument(kind, value, document) for kind, value in zip(kinds, arguments, strict=False)]
            result = caller(name)(*given)
            return cell_out(result) if cell else grid_out(result)
        except Exception:  # noqa: BLE001 - a fault must reach the cell as an error value, never as text or a crash
            _LOG.exception("%s failed on its arguments", name)
            return error_value("#VALUE!") if cell else ((error_value("#VALUE!"),),)

    return run


def _argument(kind: str, value: Any, document: Any) -> Any:
    if kind == "range":
        return None if value is None else read_range(value, document)
    if kind != "value" and type(value) is float and value == 0.0:
        return None  # a single blank cell arrives as 0, which is no heading and no table
    return cells_in(value)
