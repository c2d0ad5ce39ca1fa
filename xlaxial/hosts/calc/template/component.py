"""The component that LibreOffice loads: names and help for the function wizard, and the way to each function.

It is copied into the extension as it stands, with `config.json` beside it. It must load under any Python and without
the package: what keeps the package from loading is then told in the cells (see `_instead`).
"""

import importlib
import json
import os
import site
import struct
import sys
import traceback

import uno  # type: ignore[import-not-found,unused-ignore]  # reason: only the office's own Python has it
import unohelper  # type: ignore[import-not-found,unused-ignore]  # reason: as above
from com.sun.star.lang import (  # type: ignore[import-not-found]  # reason: a UNO type, no Python module
    Locale,
    XServiceInfo,
    XServiceName,
)
from com.sun.star.sheet import (  # type: ignore[import-not-found]  # reason: a UNO type, no Python module
    LocalizedName,
    XAddIn,
    XCompatibilityNames,
)

_HERE = os.path.dirname(os.path.abspath(__file__))
with open(os.path.join(_HERE, "config.json"), encoding="utf-8") as _file:
    CONFIG = json.load(_file)

FUNCTIONS = CONFIG["functions"]
_NAME_ERROR = struct.unpack("<d", struct.pack("<Q", 0x7FF8000000000000 | 525))[0]  # Calc shows it as #NAME?
_ENGLISH = Locale("en", "US", "")
_ADD_IN = "com.sun.star.sheet.AddIn"


def _find_packages():  # type: ignore[no-untyped-def]  # reason: plain Python of any version
    """Put the folders that hold the package and its libraries before the system's own."""
    before = list(sys.path)
    for folder in CONFIG["folders"]:
        if folder not in sys.path:
            site.addsitedir(folder)
    sys.path[:] = [folder for folder in sys.path if folder not in before] + before


def _load():  # type: ignore[no-untyped-def]  # reason: plain Python of any version
    """Return the callable behind all functions and "", or None and what keeps it from loading."""
    here, made_for = sys.version_info[:2], tuple(CONFIG["python"])
    if here < tuple(CONFIG["python_least"]):
        return None, "LibreOffice runs Python %d.%d; %s needs Python %d.%d or newer: use a newer LibreOffice" % (
            here + (CONFIG["package"],) + tuple(CONFIG["python_least"])
        )
    try:
        _find_packages()
        for module in CONFIG["requires"]:
            importlib.import_module(module)
        return importlib.import_module(CONFIG["dispatch"]).dispatcher(CONFIG), ""
    except Exception as fault:  # noqa: BLE001 - whatever it is, it is told instead of a bare error value
        traceback.print_exc()
        if here != made_for:
            return None, (
                "LibreOffice runs Python %d.%d but the packages were installed for Python %d.%d: "
                'install them with Python %d.%d, run "%s" from there, restart LibreOffice'
                % (here + made_for + here + (CONFIG["remedy"],))
            )
        what = " ".join(str(fault).split())[:200]
        return None, 'A Python package cannot be loaded (%s): mend the installation, run "%s", restart LibreOffice' % (
            what,
            CONFIG["remedy"],
        )


class _Way:
    """The way to the functions, found at the first call."""

    run = None
    missing = ""

    @classmethod
    def find(cls):  # type: ignore[no-untyped-def]  # reason: plain Python of any version
        if cls.run is None and not cls.missing:
            cls.run, cls.missing = _load()
        return cls.run


def _headings(wanted):  # type: ignore[no-untyped-def]  # reason: plain Python of any version
    """Return the wanted headings as texts; a single one may be given as text."""
    rows = wanted if isinstance(wanted, tuple) else ((wanted,),)
    return ["".join(str(cell).split()).lower() for cell in rows[0]]


def _instead(function, message, arguments):  # type: ignore[no-untyped-def]  # reason: plain Python of any version
    """Return what a call gives where the package does not load.

    The message stands only where text is due: in Status, in the answer to "Problems", in the heading row of a standard
    set, and in a function of no arguments. Every other cell is #NAME?, because MAX and SUM would pass over a text.
    """
    names = [argument["name"] for argument in function["arguments"]]
    if function["shape"] == "cell":
        return _NAME_ERROR if names else message
    wanted = arguments[names.index("wanted")] if "wanted" in names[: len(arguments)] else None
    if wanted is None or wanted == 0.0:
        return ((message,), (_NAME_ERROR,))
    headings = _headings(wanted)
    if headings == ["problems"]:
        return ((1.0, "", ""), (CONFIG["package"], message, CONFIG["remedy"]))
    return (tuple(message if heading == "status" else _NAME_ERROR for heading in headings),)


def _method(programmatic):  # type: ignore[no-untyped-def]  # reason: plain Python of any version
    function = FUNCTIONS[programmatic]
    name = function["name"]
    kinds = tuple(argument["kind"] for argument in function["arguments"])
    cell = function["shape"] == "cell"

    def call(self, document, *arguments):  # type: ignore[no-untyped-def]  # reason: UNO calls it
        run = _Way.run or _Way.find()
        if run is None:
            return _instead(function, _Way.missing, arguments)
        return run(name, kinds, cell, document, arguments)

    return call


class AddIn(  # type: ignore[misc]  # reason: UNO's bases have no types
    unohelper.Base, uno.getClass(CONFIG["interface"]), XAddIn, XCompatibilityNames, XServiceName, XServiceInfo
):
    """The add-in as Calc sees it; the methods' names, one misspelt, are the interfaces' own."""

    def __init__(self, context, *arguments):  # type: ignore[no-untyped-def]  # reason: UNO calls it
        self._locale = _ENGLISH

    def getServiceName(self):  # type: ignore[no-untyped-def]  # noqa: N802
        return CONFIG["implementation"]

    def getImplementationName(self):  # type: ignore[no-untyped-def]  # noqa: N802
        return CONFIG["implementation"]

    def supportsService(self, name):  # type: ignore[no-untyped-def]  # noqa: N802
        return name in self.getSupportedServiceNames()

    def getSupportedServiceNames(self):  # type: ignore[no-untyped-def]  # noqa: N802
        return (CONFIG["implementation"], _ADD_IN)

    def setLocale(self, locale):  # type: ignore[no-untyped-def]  # noqa: N802
        self._locale = locale

    def getLocale(self):  # type: ignore[no-untyped-def]  # noqa: N802
        return self._locale

    def getProgrammaticFuntionName(self, display):  # type: ignore[no-untyped-def]  # noqa: N802
        return next((key for key, entry in FUNCTIONS.items() if entry["name"] == display.upper()), "")

    def getDisplayFunctionName(self, programmatic):  # type: ignore[no-untyped-def]  # noqa: N802
        return FUNCTIONS[programmatic]["name"] if programmatic in FUNCTIONS else ""

    def getFunctionDescription(self, programmatic):  # type: ignore[no-untyped-def]  # noqa: N802
        if programmatic not in FUNCTIONS:
            return ""
        text = FUNCTIONS[programmatic]["help"]
        return "%s - %s" % (_Way.missing, text) if _Way.missing else text

    def getDisplayArgumentName(self, programmatic, number):  # type: ignore[no-untyped-def]  # noqa: N802
        return self._argument(programmatic, number, "name")

    def getArgumentDescription(self, programmatic, number):  # type: ignore[no-untyped-def]  # noqa: N802
        return self._argument(programmatic, number, "help")

    def getProgrammaticCategoryName(self, programmatic):  # type: ignore[no-untyped-def]  # noqa: N802
        return "Add-In"

    def getDisplayCategoryName(self, programmatic):  # type: ignore[no-untyped-def]  # noqa: N802
        return "Add-In"

    def getCompatibilityNames(self, programmatic):  # type: ignore[no-untyped-def]  # noqa: N802
        return (LocalizedName(_ENGLISH, self.getDisplayFunctionName(programmatic)),) if programmatic in FUNCTIONS else ()

    @staticmethod
    def _argument(programmatic, number, field):  # type: ignore[no-untyped-def]  # reason: plain Python of any version
        arguments = [{"name": "", "help": ""}, *FUNCTIONS.get(programmatic, {"arguments": []})["arguments"]]
        return arguments[number][field] if 0 <= number < len(arguments) else ""


for _programmatic in FUNCTIONS:
    setattr(AddIn, _programmatic, _method(_programmatic))

g_ImplementationHelper = unohelper.ImplementationHelper()
g_ImplementationHelper.addImplementation(AddIn, CONFIG["implementation"], (CONFIG["implementation"], _ADD_IN))
