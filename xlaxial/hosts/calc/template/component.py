"""The component that LibreOffice loads: names and help for the function wizard, and the way to each function.

It is copied into the extension as it stands, with `config.json` beside it. It must load under any Python and without
the package: what keeps the package from loading is then told in the cells (see `_instead`).
"""
# ruff: noqa: D102, N802, N816 - the names are those of the office's own interfaces, which document them
# UNO has its modules, without types, only inside the office.
# mypy: disable-error-code="import-not-found, misc, no-any-return"

from __future__ import annotations

import importlib
import json
import os
import site
import struct
import sys
import traceback
from typing import Any

import uno
import unohelper
from com.sun.star.lang import Locale, XServiceInfo, XServiceName
from com.sun.star.sheet import LocalizedName, XAddIn, XCompatibilityNames

with open(os.path.join(os.path.dirname(os.path.abspath(__file__)), "config.json"), encoding="utf-8") as _file:
    CONFIG = json.load(_file)

FUNCTIONS = CONFIG["functions"]
_SERVICES = (CONFIG["implementation"], "com.sun.star.sheet.AddIn")
_ENGLISH = Locale("en", "US", "")
_NAME_ERROR = struct.unpack("<d", struct.pack("<Q", 0x7FF8000000000000 | 525))[0]  # Calc shows it as #NAME?


def _find_packages() -> None:
    """Put the folders that hold the package and its libraries before the system's own."""
    before = list(sys.path)
    for folder in CONFIG["folders"]:
        if folder not in sys.path:
            site.addsitedir(folder)
    sys.path[:] = [folder for folder in sys.path if folder not in before] + before


def _load() -> tuple[Any, str]:
    """Return the callable behind all functions and "", or None and what keeps it from loading."""
    here = ".".join(map(str, sys.version_info[:2]))
    made_for = ".".join(map(str, CONFIG["python"]))
    package, remedy = CONFIG["package"], CONFIG["remedy"]
    if sys.version_info[:2] < tuple(CONFIG["python_least"]):
        least = ".".join(map(str, CONFIG["python_least"]))
        return None, f"LibreOffice runs Python {here}; {package} needs {least} or newer: use a newer LibreOffice"
    try:
        _find_packages()
        for module in CONFIG["requires"]:
            importlib.import_module(module)
        return importlib.import_module(CONFIG["dispatch"]).dispatcher(CONFIG), ""
    except Exception as fault:  # noqa: BLE001 - whatever it is, it is told instead of a bare error value
        traceback.print_exc()
        if here != made_for:
            return None, (
                f"LibreOffice runs Python {here}, but {package} was installed with Python {made_for}: "
                f'install it with Python {here}, run "{remedy}" from there and restart LibreOffice'
            )
        what = " ".join(str(fault).split())[:200]
        return None, (
            f"a Python package does not load ({what}): "
            f'mend the installation of {package}, run "{remedy}" and restart LibreOffice'
        )


class _Way:
    """The way to the functions, found at the first call."""

    run: Any = None
    missing = ""

    @classmethod
    def find(cls) -> Any:
        if cls.run is None and not cls.missing:
            cls.run, cls.missing = _load()
        return cls.run


def _instead(function: dict[str, Any], arguments: tuple[Any, ...]) -> Any:
    """Return what a call gives where the package does not load.

    The message stands only where text is due: in Status, in the answer to "Problems", in the heading row of a standard
    set, and in a function of no arguments. Every other cell is #NAME?, because MAX and SUM would pass over a text.
    """
    names = [argument["name"] for argument in function["arguments"]]
    if function["shape"] == "cell":
        return _NAME_ERROR if names else _Way.missing
    wanted = arguments[names.index("wanted")] if "wanted" in names else None
    if wanted is None or wanted == 0.0:
        return ((_Way.missing,), (_NAME_ERROR,))
    row = wanted[0] if isinstance(wanted, tuple) else (wanted,)
    headings = [str(cell).strip().lower() for cell in row]
    if headings == ["problems"]:
        return ((1.0, "", ""), (CONFIG["package"], _Way.missing, CONFIG["remedy"]))
    return (tuple([_Way.missing if heading == "status" else _NAME_ERROR for heading in headings]),)


def _method(programmatic: str) -> Any:
    function = FUNCTIONS[programmatic]
    name, cell = function["name"], function["shape"] == "cell"
    kinds = tuple([argument["kind"] for argument in function["arguments"]])

    def call(self: Any, document: Any, *arguments: Any) -> Any:
        run = _Way.run or _Way.find()
        if run is None:
            return _instead(function, arguments)
        return run(name, kinds, cell, document, arguments)

    return call


class AddIn(unohelper.Base, uno.getClass(CONFIG["interface"]), XAddIn, XCompatibilityNames, XServiceName, XServiceInfo):
    """The add-in as Calc sees it; one method's misspelt name is the interface's own."""

    def __init__(self, context: Any, *arguments: Any) -> None:
        self._locale = _ENGLISH

    def getServiceName(self) -> str:
        return _SERVICES[0]

    def getImplementationName(self) -> str:
        return _SERVICES[0]

    def supportsService(self, name: str) -> bool:
        return name in _SERVICES

    def getSupportedServiceNames(self) -> tuple[str, ...]:
        return _SERVICES

    def setLocale(self, locale: Any) -> None:
        self._locale = locale

    def getLocale(self) -> Any:
        return self._locale

    def getProgrammaticFuntionName(self, display: str) -> str:
        return next((key for key, entry in FUNCTIONS.items() if entry["name"] == display.upper()), "")

    def getDisplayFunctionName(self, programmatic: str) -> str:
        return FUNCTIONS[programmatic]["name"] if programmatic in FUNCTIONS else ""

    def getFunctionDescription(self, programmatic: str) -> str:
        return FUNCTIONS[programmatic]["help"] if programmatic in FUNCTIONS else ""

    def getDisplayArgumentName(self, programmatic: str, number: int) -> str:
        return self._argument(programmatic, number, "name")

    def getArgumentDescription(self, programmatic: str, number: int) -> str:
        return self._argument(programmatic, number, "help")

    def getProgrammaticCategoryName(self, programmatic: str) -> str:
        return "Add-In"

    def getDisplayCategoryName(self, programmatic: str) -> str:
        return "Add-In"

    def getCompatibilityNames(self, programmatic: str) -> tuple[Any, ...]:
        name = self.getDisplayFunctionName(programmatic)
        return (LocalizedName(_ENGLISH, name),) if name else ()

    @staticmethod
    def _argument(programmatic: str, number: int, field: str) -> str:
        arguments = FUNCTIONS[programmatic]["arguments"] if programmatic in FUNCTIONS else []
        number -= 1  # the workbook, which no user sees, is the first
        return arguments[number][field] if 0 <= number < len(arguments) else ""


for _programmatic in FUNCTIONS:
    setattr(AddIn, _programmatic, _method(_programmatic))

g_ImplementationHelper = unohelper.ImplementationHelper()
g_ImplementationHelper.addImplementation(AddIn, _SERVICES[0], _SERVICES)
