"""Stand-ins for what only Windows has, so that xlwings' own code for worksheet functions runs here.

They replace modules for good: import this only in a process of its own (see test_call_path.py).
"""

from __future__ import annotations

import ctypes
import datetime as dt
import sys
import types
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any
from unittest import mock

OMITTED = object()
SCODE = -2146828288  # 0x800A0000: an error value of a cell arrives as this plus its number


class ComTime(dt.datetime):
    """As pywintypes has it: a datetime with a time zone."""


class ComError(Exception):
    pass


def _module(name: str, **content: Any) -> types.ModuleType:
    made = types.ModuleType(name)
    made.__file__ = "<stub>"
    made.__dict__.update(content)
    sys.modules[name] = made
    parent, _, leaf = name.rpartition(".")
    if parent:
        setattr(sys.modules[parent], leaf, made)
    return made


def _no_wrapped_object(_: Any) -> Any:
    raise ComError("not wrapped")


def install() -> types.ModuleType:
    """Return xlwings as it is on Windows, with its real code for worksheet functions."""
    _module("pywintypes", TimeType=ComTime, com_error=ComError, IID=str)
    _module(
        "pythoncom",
        CoInitialize=lambda: None,
        IID_IDispatch="dispatch",
        IID_IEnumVARIANT="enumeration",
        ole_error=ComError,
        TypeIIDs={"dispatch": type("PyIDispatch", (), {})},
    )
    for name in ("win32api", "win32con", "win32gui", "win32event", "win32process"):
        _module(name)
    _module("win32timezone", TimeZoneInfo=types.SimpleNamespace(utc=lambda: dt.timezone.utc))
    _module("win32com")
    classes = {name: type(name, (), {}) for name in ("CDispatch", "CoClassBaseClass", "DispatchBaseClass")}
    _module("win32com.client", Dispatch=lambda x, **_: x, DispatchEx=None, gencache=None, **classes)
    _module("win32com.server")
    _module("win32com.server.util", unwrap=_no_wrapped_object, wrap=lambda x, **_: x)
    _module("win32com.server.dispatcher")
    _module("win32com.server.policy", DefaultPolicy=object)
    import xlwings

    with (
        mock.patch.object(ctypes, "windll", mock.MagicMock(), create=True),
        mock.patch.object(ctypes, "oledll", mock.MagicMock(), create=True),
        mock.patch.object(ctypes, "PyDLL", mock.MagicMock(), create=True),
    ):
        import xlwings._xlwindows as windows
    import xlwings.com_server
    import xlwings.udfs as udfs

    xlwings._xlwindows = windows
    xlwings.engines.add(xlwings.Engine(impl=windows.engine))
    xlwings.engines.active = xlwings.engines["excel"]
    xlwings.func, xlwings.arg, xlwings.ret = udfs.xlfunc, udfs.xlarg, udfs.xlret
    return xlwings


@dataclass
class Error:
    """An error value of a cell: its number in Excel."""

    number: int


@dataclass
class SheetRange:
    """A range as the add-in's wrapper reads it."""

    values: Sequence[Sequence[Any]]
    row: int = 1
    column: int = 1
    sheet: str = "Sheet1"
    ends: int = 0  # 1: reaches the last row, 2: the last column


def _sent(value: Any) -> Any:
    """Return what pywin32 makes of a value of Excel."""
    if isinstance(value, Error):
        return SCODE + value.number
    if isinstance(value, bool) or value is None or isinstance(value, str):
        return value
    if isinstance(value, int):
        return float(value)
    return value


def _take(argument: Any) -> tuple[str, Any]:
    """Do as axTake of the add-in's module does."""
    if isinstance(argument, SheetRange):
        rows = tuple(tuple(map(_sent, row)) for row in argument.values)
        value = rows[0][0] if len(rows) == len(rows[0]) == 1 else rows
        return f"{argument.row},{argument.column},{argument.ends},{argument.sheet}", value
    if isinstance(argument, list):  # an inline array
        if not isinstance(argument[0], list):
            return "", tuple(map(_sent, argument))
        return "", tuple(tuple(map(_sent, row)) for row in argument)
    return ("-", None) if argument is OMITTED else ("", _sent(argument))


def _received(cell: Any) -> Any:
    """Do as axAnswer does, after checking that COM takes the cell."""
    assert type(cell) in (float, str, bool, int), f"{cell!r} is nothing that may go out"
    if type(cell) is int:
        assert 2000 <= cell <= 2099, f"{cell} is no error value"
        return Error(cell)
    if type(cell) is str:
        assert len(cell.encode("utf-16-le", "surrogatepass")) <= 510, "a text is too long for an array"
    return cell


def excel_call(module: str, name: str, *arguments: Any) -> list[list[Any]]:
    """Call a function as a cell does: through the wrapper, COM and xlwings; return the rows that the cell gets."""
    from xlwings.com_server import XLPython

    taken = list(map(_take, arguments))
    places = "".join(place + "\n" for place, _ in taken)
    answer = XLPython().CallUDF(module, name, (*(value for _, value in taken), places))
    if not isinstance(answer, list):
        return [[_received(answer)]]
    if not isinstance(answer[0], list):
        return [[_received(cell) for cell in answer]]
    assert len({len(row) for row in answer}) == 1, "the answer is not rectangular"
    return [[_received(cell) for cell in row] for row in answer]


def test_module(name: str, functions: Sequence[Any], find: Callable[[str], Callable[..., Any]]) -> None:
    """Make a module of worksheet functions under a name."""
    from xlaxial.hosts.excel.udfs import registered

    _module(name, **registered(functions, find))
