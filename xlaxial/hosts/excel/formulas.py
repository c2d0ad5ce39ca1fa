"""Formulas as they stand in a workbook's XML: where they are, and which links to other files they name.

Everything works on the raw bytes, so that what is not changed stays as it was.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterator
from dataclasses import dataclass

from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.package import scan

_FORMULAS = frozenset(
    ("f", "formula", "formula1", "formula2", "definedName", "calculatedColumnFormula", "totalsRowFormula")
)
"""Elements that hold a formula: in cells, rules, names, table columns and charts."""

_Q = rb'(?:"|&quot;|&#34;)'
_A = rb"(?:'|&apos;|&#39;)"
_QUOTED = _A + rb"(?:(?!" + _A + rb")[^<]|" + _A + _A + rb")*" + _A
_PREFIX = (
    rb"(?:\[\d+\]!|" + _QUOTED + rb"!|[^\s!'\"&;,()\[\]=<>+*/^-]+\.xla[mx]?!|_xll\.|_xldudf_|_xludf\.|_xlfn\.|_xlws\.)"
)
_TOKEN = re.compile(
    rb"(?P<text>" + _Q + rb"(?:(?!" + _Q + rb")[^<]|" + _Q + _Q + rb")*" + _Q + rb")"
    rb"|(?<![\w.\]])(?P<prefix>" + _PREFIX + rb"+)(?P<name>[A-Za-z]\w*)(?=\s*\()"
    rb"|(?P<quoted>" + _QUOTED + rb")"
    rb"|(?P<table>[\w.]\[(?:[^\[\]]|\[[^\[\]]*\])*\])"
    rb"|\[(?P<book>\d+)\]",
    re.IGNORECASE,
)
_QUOTED_BOOK = re.compile(_A + rb"\[(\d+)\]")
_BOOK = re.compile(rb"\[(\d+)\]!")


@dataclass(frozen=True)
class Call:
    """A call of one of our functions with something before its name."""

    start: int  # offset of the prefix
    end: int  # offset of the name
    prefix: str
    links: tuple[int, ...]  # numbers of the links that the prefix names


@dataclass(frozen=True)
class Reference:
    """A link that a formula names otherwise."""

    start: int  # offset of the number
    end: int
    link: int


def after_tag(data: bytes, at: int) -> int:
    """Return the offset behind the tag that begins at `at` (attribute values may hold a >)."""
    quote = 0
    for offset in range(at, len(data)):
        byte = data[offset]
        if quote:
            quote = 0 if byte == quote else quote
        elif byte in b"\"'":
            quote = byte
        elif byte == ord(">"):
            return offset + 1
    raise WorkbookError("the XML ends inside a tag")


def elements(data: bytes, names: Collection[str]) -> list[tuple[int, int, int, int, dict[str, str]]]:
    """Return the elements of some names: offsets of start, text, end of the text, end, and the attributes.

    Raises
    ------
    WorkbookError
        The XML is not well formed, not in an 8-bit encoding, or declares entities.
    """
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        raise WorkbookError("a part is written in UTF-16, which is not supported here")
    found: list[tuple[int, int, int, int, dict[str, str]]] = []
    opened: list[tuple[int, dict[str, str]]] = []

    def start(name: str, attributes: dict[str, str], at: int) -> None:
        if name in names:
            opened.append((at, attributes))

    def end(name: str, at: int) -> None:
        if name not in names:
            return
        begin, attributes = opened.pop()
        text = after_tag(data, begin)
        if data[text - 2 : text] == b"/>":
            found.append((begin, text, text, text, attributes))
        else:
            found.append((begin, text, at, after_tag(data, at), attributes))

    scan(data, start, end)
    return sorted(found)


def formulas(data: bytes) -> Iterator[tuple[int, int]]:
    """Yield where the text of each formula of a part begins and ends."""
    for _, start, end, _, _ in elements(data, _FORMULAS):
        if end > start:
            yield start, end


def named_links(data: bytes, ours: Collection[str]) -> tuple[list[Call], list[Reference]]:
    """Find the calls of our functions that have a prefix, and every other naming of a link.

    Parameters
    ----------
    data : bytes
        A part's XML.
    ours : collection of str
        Names of our functions, in upper case.
    """
    calls: list[Call] = []
    references: list[Reference] = []
    if b"[" not in data and not re.search(rb"_xl|\.xla", data, re.IGNORECASE):
        return calls, references
    for begin, end in formulas(data):
        for token in _TOKEN.finditer(data, begin, end):
            name, start = token["name"], token.start()
            if name is not None and name.decode("ascii", "replace").upper() in ours:
                prefix = token["prefix"]
                links = tuple(int(number) for number in _BOOK.findall(prefix))
                calls.append(Call(start, start + len(prefix), prefix.decode("utf-8", "replace"), links))
            elif name is not None or token["book"] is not None:
                for found in re.finditer(rb"\[(\d+)\]", token[0]):
                    references.append(Reference(start + found.start(1), start + found.end(1), int(found[1])))
            elif token["quoted"] is not None:
                inside = _QUOTED_BOOK.match(token[0])
                if inside:
                    references.append(Reference(start + inside.start(1), start + inside.end(1), int(inside[1])))
    return calls, references
