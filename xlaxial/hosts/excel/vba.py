"""The add-in's one VBA module, made from the registry."""

from __future__ import annotations

import re
import textwrap
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from xlaxial.functions.registry import Function
from xlaxial.hosts.excel import CATEGORY, MOST_ARGUMENTS

LONGEST_LINE, MOST_CONTINUATIONS, LONGEST_HELP = 1023, 24, 255
"""Limits of VBA: characters of a line, continuations of a statement; of Excel: characters of a help text."""

_TEMPLATE = Path(__file__).with_name("template") / "module.bas"
_IDENTIFIER = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,254}")
_CELL = re.compile(r"[A-Z]{1,3}\d{1,7}|R\d*(C\d*)?|C\d*", re.IGNORECASE)
_WIDTH = 100
_JOINED = "\x01"  # a space at which no line is broken

# Reserved identifiers (MS-VBAL 3.3.5.2, from memory), and names that the wrappers use themselves.
_RESERVED_WORDS = """
    abs addressof and any array as boolean byref byte byval call case cbool cbyte ccur cdate cdbl cdec cdecl cint
    clng clnglng clngptr close const csng cstr currency cvar cverr date debug decimal declare defbool defbyte
    defcur defdate defdbl defdec defint deflng deflnglng deflngptr defobj defsng defstr defvar dim do doevents
    double each else elseif empty end endif enum eqv erase error event exit false fix for friend function get
    global gosub goto if imp implements in input inputb int integer is lbound len lenb let lib like line linput
    local lock long longlong longptr loop lset me mid midb mod new next not nothing null object on open option
    optional or paramarray preserve print private property pset ptrsafe public put raiseevent redim rem resume
    return rset scale seek select set sgn shared single spc static step stop string sub tab then time to true type
    typeof ubound unlock until variant wend while with withevents write xor application range axcall
"""
RESERVED = frozenset(_RESERVED_WORDS.split())


@dataclass(frozen=True)
class Names:
    """What the module is made for."""

    version: str  # of xlaxial
    xlwings: str  # version of xlwings
    library64: str  # file name of xlwings' library for 64-bit Excel
    library32: str  # file name of xlwings' library for 32-bit Excel
    module: str = "xlaxial.hosts.excel.udfs"  # module of the functions
    spokesman: str = "AX_ABOUT"  # function that tells in words why nothing runs


def module_text(functions: Iterable[Function], names: Names) -> str:
    """Return the module's source text, its lines ending with a line feed.

    Parameters
    ----------
    functions : iterable of Function
        Entries of the registry.
    names : Names
        Versions and file names.

    Raises
    ------
    ValueError
        A function or argument has a name that VBA or Excel does not take, or a help text is too long or not ASCII.
    """
    functions = list(functions)
    for function in functions:
        _check(function)
    fill = {
        "VERSION": names.version,
        "XLWINGS": names.xlwings,
        "DLL64": names.library64,
        "DLL32": names.library32,
        "MODULE": names.module,
        "SPOKESMAN": names.spokesman,
        "CATEGORY": CATEGORY,
        "FUNCTIONS": "\n".join(map(_wrapper, functions)),
        "DESCRIBE": "\n".join(f"    axHelp{n}" for n in range(1, len(functions) + 1)),
        "HELP": "\n".join(_help(n, function) for n, function in enumerate(functions, 1)),
    }
    text = re.sub(r"@([A-Z0-9]+)@", lambda found: fill[found[1]], _TEMPLATE.read_text(encoding="ascii"))
    return text.rstrip("\n") + "\n"


def _check(function: Function) -> None:
    names = [function.name, *(argument.name for argument in function.arguments)]
    for name in names:
        if not _IDENTIFIER.fullmatch(name) or name.lower() in RESERVED:
            raise ValueError(f"{function.name}: VBA does not take the name {name}")
    if len({name.lower() for name in names}) < len(names):
        raise ValueError(f"{function.name}: a name stands twice")
    if _CELL.fullmatch(function.name):
        raise ValueError(f"{function.name} reads as a cell's address")
    if len(function.arguments) > MOST_ARGUMENTS:
        raise ValueError(f"{function.name}: more than {MOST_ARGUMENTS} arguments")
    for text in (function.summary, *(argument.help for argument in function.arguments)):
        if not text.isascii() or not text.isprintable() or len(text) > LONGEST_HELP:
            raise ValueError(f"{function.name}: a help text is not plain ASCII of at most {LONGEST_HELP} characters")


def _quoted(text: str) -> str:
    return '"' + text.replace('"', '""') + '"'


def _wrapped(statement: str, indent: str) -> str:
    """Break a statement at spaces between its arguments."""
    lines = textwrap.wrap(statement, _WIDTH, subsequent_indent=indent, break_long_words=False, break_on_hyphens=False)
    return " _\n".join(lines).replace(_JOINED, " ")


def _wrapper(function: Function) -> str:
    declared, optional = [], False
    for argument in function.arguments:
        optional = optional or argument.optional  # VBA wants all after an optional one to be optional
        declared.append(f"Optional{_JOINED}{argument.name}" if optional else argument.name)
    given = ", ".join(argument.name for argument in function.arguments)
    name = function.name
    lines = [
        _wrapped(f"Public Function {name}({', '.join(declared)})", "    "),
        f"Attribute {name}.VB_Description = {_quoted(function.summary)}",
        f'Attribute {name}.VB_ProcData.VB_Invoke_Func = " \\n14"',
        *(["    Application.Volatile"] if function.volatile else []),
        "    " + _wrapped(f'{name} = axCall("{name}", Array({given}))', "        "),
        "End Function",
        "",
    ]
    return "\n".join(lines)


def _help(number: int, function: Function) -> str:
    lines = [f"Private Sub axHelp{number}()"]
    count = len(function.arguments)
    if count:
        lines.append(f"    Dim texts(0 To {count - 1}) As Variant")
    for n, argument in enumerate(function.arguments):
        lines.append(f"    texts({n}) = {_quoted(argument.help)}")
    lines.append(f"    axHelp {_quoted(function.name)}, {_quoted(function.summary)}{', texts' if count else ''}")
    lines += ["End Sub", ""]
    return "\n".join(lines)
