from __future__ import annotations

import re
from pathlib import Path

import pytest

from xlaxial.functions.registry import Argument, Function, load
from xlaxial.hosts.excel.vba import Names, module_text

HERE = Path(__file__).parent
GOLDEN = HERE / "golden" / "module.bas"
NAMES = Names("1.2.3", "0.0.1", "xlwings64-0.0.1.dll", "xlwings32-0.0.1.dll")

TABLE = Argument("table", "Table with its heading row.", "table")
LATER = Argument("later", 'May be "left out".', "cells", optional=True)
MARK = Argument("mark", "Mark of the member.", "value")
FUNCTIONS = (
    Function("AX_GRID", "A block of results.", (TABLE, LATER, MARK), "", "here:x", "=AX_GRID(A1:B2)"),
    Function("AX_CLOCK", "The time.", (), "", "here:x", "=AX_CLOCK()", shape="cell", volatile=True),
)

# Reserved identifiers of VBA: [MS-VBAL] 3.3.5.2, from memory; written apart from the package's own list.
_RESERVED_WORDS = """
    and as boolean byref byte byval call case close const currency date debug decimal declare dim do double each
    else elseif empty end endif enum eqv erase error event exit false for friend function get global gosub goto if
    imp implements in input integer is let like lock long longlong longptr loop lset me mod new next not nothing
    null object on open option optional or paramarray preserve print private public put raiseevent redim rem
    resume return rset seek select set shared single static step stop string sub tab then to true type typeof
    unlock until variant wend while with write xor
"""
RESERVED = set(_RESERVED_WORDS.split())


def wide() -> Function:
    arguments = tuple(Argument(f"argument_number_{n}", "x" * 255, "value", optional=n > 3) for n in range(59))
    return Function("AX_WIDE", "y" * 255, arguments, "", "here:x", "=AX_WIDE()")


def statements(text: str) -> list[str]:
    """Join continued lines; drop comments, directives and attributes."""
    joined = text.replace(" _\n", " ")
    return [line.strip() for line in joined.split("\n") if line.strip() and line.strip()[0] not in "'#"]


def declared(text: str) -> dict[str, list[str]]:
    """Return the arguments of every procedure."""
    found = {}
    for line in statements(text):
        match = re.match(r"(?:Public|Private) (?:Function|Sub) (\w+)\((.*)\)", line)
        if match:
            parts = [re.sub(r"Optional |ByVal |ByRef | As \w+.*|\(\)", "", p).strip() for p in match[2].split(",")]
            found[match[1]] = [part for part in parts if part]
    return found


def test_module_is_as_kept():
    # After a wanted change: python tests/hosts/excel/test_vba.py writes the file anew; look at what changed.
    assert GOLDEN.read_text(encoding="ascii") == module_text(FUNCTIONS, NAMES)


@pytest.mark.parametrize("functions", [FUNCTIONS, tuple(load().values()), (wide(),)], ids=["small", "product", "wide"])
def test_module_keeps_the_limits_of_vba(functions):
    text = module_text(functions, NAMES)
    assert text.isascii()
    assert "@" not in re.sub(r'"[^"]*"', "", text)
    lines = text.split("\n")
    assert max(map(len, lines)) <= 1023
    run = 0
    for line in lines:
        run = run + 1 if line.endswith(" _") else 0
        assert run <= 24
    assert not any(re.search(r"\s$", line) for line in lines)
    for line in statements(text):
        assert line.count('"') % 2 == 0, line
    for name, arguments in declared(text).items():
        lower = [name.lower(), *map(str.lower, arguments)]
        assert len(set(lower)) == len(lower), name
        assert len(arguments) <= 60
        for identifier in (name, *arguments):
            assert re.fullmatch(r"[A-Za-z]\w{0,254}", identifier), identifier
            assert identifier.lower() not in RESERVED, identifier


def test_blocks_are_closed():
    opened: list[str] = []
    for line in statements(module_text(tuple(load().values()), NAMES)):
        first = re.sub(r"^(Public|Private) ", "", line)
        if re.match(r"(Function|Sub) ", first):
            opened.append(first.split()[0])
        elif re.match(r"For ", first):
            opened.append("For")
        elif re.match(r"If .* Then$", first):
            opened.append("If")
        elif re.match(r"End (Function|Sub|If)$", first):
            assert opened.pop() == first.split()[1], line
        elif first.startswith("Next"):
            assert opened.pop() == "For", line
        else:
            assert not first.startswith(("Else", "ElseIf")) or opened[-1] == "If", line
    assert opened == []


def test_every_name_is_declared():
    """Option Explicit: a name that is declared nowhere would stop the module from compiling."""
    text = module_text(FUNCTIONS, NAMES)
    known = set(re.findall(r"\b(?:Function|Sub|Const) (\w+)", text)) | {"axKept", "axRefused", "axRefusedAt"}
    body: list[str] = []
    local: set[str] = set()
    unknown: set[str] = set()
    kept_words = """
        Dim As Long Variant String Boolean Object Range Worksheet On Error GoTo Resume Next Exit Function Sub End
        If Then Else ElseIf For To Step Not And Or Is Nothing Set Err Raise Description CVErr xlErrValue UBound
        LBound ReDim IsObject TypeOf IsArray IsMissing VarType vbCurrency vbLong vbLf CStr Chr Left
        Len Abs Timer StrPtr ThisWorkbook Application Array True False Now Public Private Optional ByVal ByRef
        Single Attribute
    """
    words = set(kept_words.split())
    for line in statements(text):
        if re.match(r"(Public|Private) (Function|Sub) ", line):
            local = set(re.findall(r"(\w+)(?:\(\))?(?: As \w+)?(?:,|\)|$)", line.split("(", 1)[1]))
            body = []
        body.append(line)
        local |= {
            name for part in re.findall(r"^Dim (.*)", line) for name in re.findall(r"(\w+)(?:\([^)]*\))? As", part)
        }
        local |= set(re.findall(r"^(\w+):$", line)) | set(re.findall(r"(?:GoTo|Resume) ([a-z]\w*)", line))
        if line.startswith(("Attribute", "Option", "Private Const", "Private Declare", "Private axKept")):
            continue
        plain = re.sub(r'"[^"]*"', "", line)
        plain = re.sub(r"\w+:=", "", plain)  # names of arguments
        plain = re.sub(r"\.\w+", "", plain)  # members
        unknown |= set(re.findall(r"(?<!&)\b[A-Za-z]\w*", plain)) - known - local - words
    assert unknown == set()


def test_arguments_after_an_optional_one_are_optional():
    assert "Public Function AX_GRID(table, Optional later, Optional mark)" in module_text(FUNCTIONS, NAMES)


def test_no_worksheet_can_call_a_helper():
    text = module_text(tuple(load().values()), NAMES)
    public = re.findall(r"^Public Function (\w+)", text, re.MULTILINE)
    assert public == list(load())
    assert not re.search(r"^(Function|Sub|Const|Declare)", text, re.MULTILINE)


@pytest.mark.parametrize(
    "wrong",
    [
        Function("AX_GRID", "x", (Argument("loop", "x"),), "", "", ""),
        Function("AX_GRID", "x", (Argument("a b", "x"),), "", "", ""),
        Function("AX_GRID", "x", (Argument("größe", "x"),), "", "", ""),
        Function("AX_GRID", "x", (Argument("a", "x"), Argument("A", "x")), "", "", ""),
        Function("AX1", "x", (), "", "", ""),
        Function("AX_GRID", "x" * 256, (), "", "", ""),
        Function("AX_GRID", "σ", (), "", "", ""),
        Function("AX_GRID", "two\nlines", (), "", "", ""),
        Function("AX_GRID", "x", tuple(Argument(f"a{n}", "x") for n in range(60)), "", "", ""),
    ],
)
def test_what_vba_does_not_take_is_refused(wrong):
    with pytest.raises(ValueError, match="AX"):
        module_text((wrong,), NAMES)


if __name__ == "__main__":
    GOLDEN.parent.mkdir(exist_ok=True)
    GOLDEN.write_text(module_text(FUNCTIONS, NAMES), encoding="ascii")
